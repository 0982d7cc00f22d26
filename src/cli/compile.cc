// tiersmith compile: compiles a grammar, writes the machine file, says how large the machine is. Tested by
// tests/cli/compile.sh and tests/cli/machine.sh.
#include <fmt/format.h>

#include <nlohmann/json.hpp>

#include "cli/command.h"

namespace tiersmith::cli {
namespace {

using nlohmann::ordered_json;

struct CompileOptions : CommonOptions {
  bool stats = false;
};

using Rows = std::vector<std::vector<std::string>>;

Rows StatsRows(const std::vector<SegmentStats>& stats) {
  Rows rows = {{"segment", "rules", "states", "arcs", "classes", "letters", "bytes", "seconds"}};
  for (std::size_t i = 0; i < stats.size(); ++i) {
    const SegmentStats& s = stats[i];
    rows.push_back({std::to_string(i + 1), std::to_string(s.rules.size()), std::to_string(s.states),
                    std::to_string(s.arcs), std::to_string(s.classes), std::to_string(s.letters),
                    std::to_string(s.bytes), fmt::format("{:.3f}", s.seconds)});
  }
  return rows;
}

std::string Tsv(const Rows& rows) {
  std::string out;
  for (const auto& row : rows) {
    for (std::size_t i = 0; i < row.size(); ++i) out += (i == 0 ? "" : "\t") + row[i];
    out += "\n";
  }
  return out;
}

std::string Json(const std::vector<SegmentStats>& stats) {
  ordered_json json = ordered_json::array();
  for (const SegmentStats& s : stats) {
    json.push_back({{"rules", s.rules},
                    {"states", s.states},
                    {"arcs", s.arcs},
                    {"classes", s.classes},
                    {"letters", s.letters},
                    {"bytes", s.bytes},
                    {"seconds", s.seconds}});
  }
  return json.dump(2) + "\n";
}

int RunCompile(const CompileOptions& options) {
  const bool told = options.stats || options.format != "text";
  if (told && options.output == "-") {
    PrintError("the machine file and the statistics cannot both be written to standard output");
    PrintHelp("name a file: -o FILE");
    return kUsage;
  }
  const Loaded loaded = LoadAndCompile(options);
  if (loaded.code != kFine) return loaded.code;
  const std::vector<SegmentStats> stats = loaded.cascade->Stats();
  if (!options.output.empty()) {
    Output machine(options.output);
    if (!machine.good()) return kFiles;
    machine.Write(WriteMachine(loaded));
    const int code = machine.Finish();
    if (code != kFine || !told) return code;
  }
  Output output("");
  if (options.json()) {
    output.Write(Json(stats));
  } else if (options.format == "tsv") {
    output.Write(Tsv(StatsRows(stats)));
  } else if (told) {
    output.Write(Table(StatsRows(stats), std::vector<bool>(8, true)));
  } else {
    output.Write(fmt::format("{}: compiles; {} rules\n", options.grammar, loaded.grammar->rules.size()));
  }
  return output.Finish();
}

}  // namespace

void AddCompile(CLI::App& app, int& code) {
  auto options = std::make_shared<CompileOptions>();
  CLI::App* verb = app.add_subcommand("compile", "compile a grammar into a machine file, or show statistics");
  AddCommonOptions(*verb, *options);
  verb->get_option("--output")->description("write the machine file: every verb takes it in place of the grammar");
  verb->add_flag("--stats", options->stats, "segments, rules, states, arcs, classes, letters, bytes, seconds");
  verb->footer(
      "\nA machine file holds the text of all it was made from, and needs no other file.\n"
      "\nExample:\n  tiersmith compile velmari.tier -o velmari.machine\n  tiersmith derive velmari.machine in-kat");
  verb->callback([options, &code] { code = RunCompile(*options); });
}

}  // namespace tiersmith::cli
