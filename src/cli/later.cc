// Verbs of the plan that this release does not run: each says so and exits with 2. Tested by tests/cli/later.sh.
#include "cli/command.h"

namespace tiersmith::cli {

void AddLaterVerbs(CLI::App& app, int& code) {
  struct Verb {
    const char* name;
    const char* does;
  };
  static constexpr Verb kVerbs[] = {
      {"audit", "what the analysis leaves unused or undecided"},
      {"order", "which rule orders the data allow"},
      {"compare", "where two grammars differ"},
      {"weigh", "probabilities of optional rules from data"},
      {"report", "the analysis written up"},
      {"draw", "figures of trees, forms and rules"},
      {"emit", "machines for other programs"},
  };
  for (const Verb& verb : kVerbs) {
    CLI::App* sub = app.add_subcommand(verb.name, verb.does)->group("Verbs of later releases");
    sub->allow_extras();
    sub->set_help_flag();
    const std::string name = verb.name;
    sub->callback([name, &code] {
      PrintError("'" + name + "' is not supported yet");
      PrintHelp("this release has derive, recover, check, compile, new, paradigm and words");
      code = kUsage;
    });
  }
}

}  // namespace tiersmith::cli
