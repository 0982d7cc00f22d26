// The `tiersmith` command: tiersmith VERB GRAMMAR [ARGS]. One file a verb; this one only gathers them.
// Tested by tests/cli/.
#include <cstdio>
#include <iostream>

#include "cli/command.h"

namespace {

constexpr const char* kFooter = R"(
Examples:
  tiersmith derive velmari.tier in-kat           underlying to surface
  tiersmith recover velmari.tier iŋkat           surface to underlying candidates
  tiersmith check velmari.tier survey.tsv        data against the grammar

Exit codes: 0 fine; 1 the data disagree, or a form has no candidate or no result; 2 usage, or an error in the
grammar or in a form; 3 reading or writing failed. NO_COLOR=1 turns colours off.)";

int Run(int argc, char** argv) {
  using namespace tiersmith::cli;
  std::ios::sync_with_stdio(false);
  int code = kFine;
  CLI::App app("Compiles autosegmental analyses into finite-state transducers and runs them.", "tiersmith");
  app.set_version_flag("--version", "tiersmith " TIERSMITH_VERSION);
  app.footer(kFooter);
  app.require_subcommand(1);
  AddDerive(app, code);
  AddRecover(app, code);
  AddCheck(app, code);
  AddCompile(app, code);
  AddNew(app, code);
  AddParadigm(app, code);
  AddWords(app, code);
  AddLaterVerbs(app, code);
  try {
    app.parse(argc, argv);
  } catch (const CLI::ParseError& error) {
    if (error.get_exit_code() == static_cast<int>(CLI::ExitCodes::Success)) return app.exit(error);
    const bool no_verb = argc < 2 || app.get_subcommands().empty();
    PrintError(no_verb && argc >= 2 && argv[1][0] != '-' ? "no verb '" + std::string(argv[1]) + "'" : error.what());
    PrintHelp(no_verb ? "the verbs are derive, recover, check, compile, new, paradigm, words; see tiersmith --help"
                      : "see tiersmith " + app.get_subcommands().front()->get_name() + " --help");
    return kUsage;
  }
  return code;
}

}  // namespace

int main(int argc, char** argv) {
  try {
    return Run(argc, argv);
  } catch (const std::exception& error) {
    tiersmith::cli::PrintError(std::string("this should not have happened: ") + error.what());
    return tiersmith::cli::kFiles;
  }
}
