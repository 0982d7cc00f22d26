// tiersmith compile: compiles a grammar and says how large the machine is. Writing the machine file comes with a
// later release. Tested by tests/cli/compile.sh.
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
  if (!options.output.empty()) {
    PrintError("writing the machine file comes with a later release");
    PrintHelp("--stats shows how large the machine is; the other verbs compile the .tier file themselves");
    return kUsage;
  }
  const Loaded loaded = LoadAndCompile(options);
  if (loaded.code != kFine) return loaded.code;
  const std::vector<SegmentStats> stats = loaded.cascade->Stats();
  Output output("");
  if (options.json()) {
    output.Write(Json(stats));
  } else if (options.format == "tsv") {
    output.Write(Tsv(StatsRows(stats)));
  } else if (options.stats) {
    output.Write(Table(StatsRows(stats), std::vector<bool>(8, true)));
  } else {
    output.Write(fmt::format("{}: compiles; {} rules\n", options.grammar, loaded.grammar->rules.size()));
  }
  return output.Finish();
}

}  // namespace

void AddCompile(CLI::App& app, int& code) {
  auto options = std::make_shared<CompileOptions>();
  CLI::App* verb = app.add_subcommand("compile", "compile a grammar and show statistics");
  AddCommonOptions(*verb, *options);
  verb->get_option("--output")->group("");  // refused with a reason, and so not offered
  verb->add_flag("--stats", options->stats, "segments, rules, states, arcs, classes, letters, bytes, seconds");
  verb->footer(
      "\nWriting the machine to a file comes with a later release.\n\nExample:\n  tiersmith compile velmari.tier "
      "--stats");
  verb->callback([options, &code] { code = RunCompile(*options); });
}

}  // namespace tiersmith::cli
