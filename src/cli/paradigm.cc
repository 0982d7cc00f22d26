// tiersmith paradigm: the cells of a paradigm for its stems. For tilun under `number : SG // PL /-lAn/` it prints SG tilun,
// PL tilullan. Tested by tests/cli/paradigm.sh.
//
// One stem is a table: of one slot a line a value, of two the first slot's values down and the second's across. Anything
// else is one line a stem and cell.
#include "analyse/paradigm.h"

#include <fmt/format.h>

#include <algorithm>
#include <iostream>
#include <nlohmann/json.hpp>

#include "cli/lettering.h"
#include "cli/outputs.h"
#include "model/names.h"

namespace tiersmith::cli {
namespace {

using nlohmann::ordered_json;

struct ParadigmOptions : CommonOptions {
  std::string name;
  std::vector<std::string> stems;
};

struct Row {
  const LexiconEntry* stem = nullptr;
  ParadigmCell cell;
  Outputs outputs;
};

using Rows = std::vector<std::vector<std::string>>;

std::string MarkdownTable(const Rows& rows) {
  std::string out;
  for (std::size_t i = 0; i < rows.size(); ++i) {
    for (const std::string& cell : rows[i]) {
      out += "| ";
      for (const char c : cell) out += c == '|' ? "\\|" : std::string(1, c);
      out += " ";
    }
    out += "|\n";
    if (i > 0) continue;
    for (std::size_t k = 0; k < rows[i].size(); ++k) out += "|---";
    out += "|\n";
  }
  return out;
}

class Writer {
 public:
  Writer(const ParadigmOptions& options, const Lettering& lettering) : options_(options), lettering_(lettering) {}

  std::string Tables(const Paradigm& paradigm, const std::vector<Row>& rows, bool named) const {
    const bool one_stem =
        std::all_of(rows.begin(), rows.end(), [&](const Row& row) { return row.stem == rows.front().stem; });
    std::string out = named ? "paradigm " + paradigm.name + "\n" : "";
    if (one_stem) {
      const LexiconEntry& stem = *rows.front().stem;
      out += Stem(stem) + (stem.gloss.empty() ? "" : " '" + stem.gloss + "'") + "\n";
    }
    if (options_.format == "md" && !out.empty()) out = "**" + out.substr(0, out.size() - 1) + "**\n\n";
    return out + Table_(one_stem && paradigm.slots.size() == 2 ? Grid(paradigm, rows) : Lines(rows, one_stem));
  }

  std::string Tsv(const Paradigm& paradigm, const Row& row) const {
    std::string out;
    const auto line = [&](const std::string& surface, const std::string& probability) {
      out += fmt::format("{}\t{}\t{}\t{}\t{}\t{}\t{}\n", Field(paradigm.name), Field(Stem(*row.stem)),
                         Field(row.stem->gloss), Field(row.cell.name), Underlying(row), Field(surface), probability);
    };
    if (row.outputs.all.empty()) line(kNoOutput, "");
    for (const Runner::Output& output : Shown(row)) line(output.surface, fmt::format("{:.4g}", output.probability));
    return out;
  }

  ordered_json Json(const Paradigm& paradigm, const Row& row) const {
    ordered_json json = {{"paradigm", paradigm.name}, {"stem", Stem(*row.stem)}, {"gloss", row.stem->gloss},
                         {"cell", row.cell.values},   {"underlying", nullptr},   {"surfaces", cli::Json(Shown(row))}};
    if (row.cell.form) {
      json["underlying"] = Underlying(row);
      json["morphemes"] = Described(*row.cell.form);
    }
    if (!row.outputs.problem.empty()) json["problem"] = row.outputs.problem;
    return json;
  }

 private:
  std::string Table_(const Rows& rows) const {
    if (options_.format == "md") return MarkdownTable(rows);
    return Table(rows, std::vector<bool>(rows.front().size(), false));
  }

  Rows Grid(const Paradigm& paradigm, const std::vector<Row>& rows) const {
    const std::vector<SlotValue>& down = paradigm.slots[0].values;
    const std::vector<SlotValue>& across = paradigm.slots[1].values;
    Rows grid = {{""}};
    for (const SlotValue& value : across) grid[0].push_back(value.name);
    for (std::size_t i = 0; i < down.size(); ++i) {
      grid.push_back({down[i].name});
      for (std::size_t k = 0; k < across.size(); ++k)
        grid.back().push_back(Listed(Shown(rows[i * across.size() + k]), " ~ "));
    }
    return grid;
  }

  Rows Lines(const std::vector<Row>& rows, bool one_stem) const {
    Rows lines;
    if (options_.format == "md") {
      lines.push_back({"cell", "underlying", "surface"});
      if (!one_stem) lines.back().insert(lines.back().begin(), {"stem", "gloss"});
    }
    for (const Row& row : rows) {
      lines.push_back({row.cell.name, Underlying(row), Listed(Shown(row), " ~ ")});
      if (!one_stem) lines.back().insert(lines.back().begin(), {Stem(*row.stem), row.stem->gloss});
    }
    return lines;
  }

  std::string Stem(const LexiconEntry& stem) const {
    return lettering_.Write(stem.form.text, Reader::Side::kUnderlying);
  }
  std::string Underlying(const Row& row) const {
    if (!row.cell.form) return kNoOutput;
    return lettering_.Write(row.cell.form->text, Reader::Side::kUnderlying);
  }
  std::vector<Runner::Output> Shown(const Row& row) const {
    std::vector<Runner::Output> shown = row.outputs.all;
    for (Runner::Output& output : shown) output.surface = lettering_.Write(output.surface, Reader::Side::kSurface);
    return shown;
  }

  const ParadigmOptions& options_;
  const Lettering& lettering_;
};

// The paradigms asked for; none after saying why.
std::vector<const Paradigm*> ParadigmsOf(const ParadigmOptions& options, const Grammar& grammar) {
  std::vector<const Paradigm*> chosen;
  std::vector<std::string> names;
  for (const Paradigm& paradigm : grammar.paradigms) {
    names.push_back(paradigm.name);
    if (options.name.empty() || paradigm.name == options.name) chosen.push_back(&paradigm);
  }
  if (!chosen.empty()) return chosen;
  if (names.empty()) {
    PrintError("the grammar has no paradigm");
    PrintHelp("write one, as in: paradigm noun { stem noun; number : SG // PL /-lAn/ }");
  } else {
    PrintError(fmt::format("the grammar has no paradigm '{}'", options.name));
    PrintHelp(DidYouMean(options.name, names) + fmt::format("it has {}", fmt::join(names, ", ")));
  }
  return chosen;
}

// The stems named by --stem. False after saying what is wrong with one.
bool NamedStems(const ParadigmOptions& options, const FormReader& reader, const Grammar& grammar,
                const Lettering& lettering, std::vector<LexiconEntry>* stems) {
  for (std::size_t i = 0; i < options.stems.size(); ++i) {
    std::vector<std::string> readings;
    TextError error;
    bool good = lettering.Read(options.stems[i], Reader::Side::kUnderlying, &readings, &error);
    for (std::size_t k = 0; good && k < readings.size(); ++k)
      good = StemsNamed(reader, grammar, readings[k], stems, &error);
    if (good) continue;
    PrintTextError(FormSource(options.stems), options.stems[i], static_cast<int>(i) + 1, error, options.json());
    return false;
  }
  return true;
}

// The stems of one paradigm: of those named the ones it takes, and the ones no paradigm takes; else all it takes.
std::vector<const LexiconEntry*> StemsFor(const Paradigm& paradigm, const Grammar& grammar,
                                          const std::vector<LexiconEntry>& named, bool all) {
  std::vector<const LexiconEntry*> stems;
  for (const LexiconEntry& stem : all ? grammar.lexicon.entries : named) {
    const bool taken = std::any_of(grammar.paradigms.begin(), grammar.paradigms.end(),
                                   [&](const Paradigm& other) { return Takes(other, stem); });
    if (Takes(paradigm, stem) || (!all && !taken)) stems.push_back(&stem);
  }
  return stems;
}

int RunParadigm(const ParadigmOptions& options) {
  const Loaded loaded = LoadOnly(options);
  if (loaded.code != kFine) return loaded.code;
  const Grammar& grammar = *loaded.grammar;
  if (SpellsNothing(options, grammar)) return kUsage;
  const std::vector<const Paradigm*> paradigms = ParadigmsOf(options, grammar);
  if (paradigms.empty()) return kUsage;
  const Lettering lettering(grammar, options.spelled);
  const FormReader reader(grammar);
  std::vector<LexiconEntry> named;
  if (!NamedStems(options, reader, grammar, lettering, &named)) return kUsage;
  Output output(options.output);
  if (!output.good()) return kFiles;
  const Writer writer(options, lettering);
  Diagnostics diagnostics;
  ordered_json json = ordered_json::array();
  std::string out = options.format == "tsv" ? "paradigm\tstem\tgloss\tcell\tunderlying\tsurface\tprobability\n" : "";
  bool any = false, missing = false;
  for (const Paradigm* paradigm : paradigms) {
    std::vector<Row> rows;
    for (const LexiconEntry* stem : StemsFor(*paradigm, grammar, named, options.stems.empty())) {
      for (ParadigmCell& cell : CellsOf(reader, grammar, *paradigm, *stem, diagnostics)) {
        rows.push_back({stem, std::move(cell), {}});
        Row& row = rows.back();
        if (row.cell.form) row.outputs = OutputsOf(grammar, reader.FormOf(*row.cell.form));
        missing = missing || row.outputs.all.empty() || !row.outputs.problem.empty();
        if (!row.outputs.problem.empty()) PrintNote(row.cell.form->text + ": " + row.outputs.problem);
      }
    }
    if (rows.empty()) continue;
    if (options.json()) {
      for (const Row& row : rows) json.push_back(writer.Json(*paradigm, row));
    } else if (options.format == "tsv") {
      for (const Row& row : rows) out += writer.Tsv(*paradigm, row);
    } else {
      out += (any ? "\n" : "") + writer.Tables(*paradigm, rows, paradigms.size() > 1);
    }
    any = true;
  }
  PrintDiagnostics(diagnostics, *loaded.sources, options.json());
  if (!any) {
    PrintError(options.stems.empty() ? "the lexicon has no stem for this paradigm"
                                     : "the paradigm takes none of these stems");
    PrintHelp("list stems with its tag in `lexicon`, or name one: --stem tilun");
    return kUsage;
  }
  output.Write(options.json() ? json.dump(2, ' ', false, ordered_json::error_handler_t::replace) + "\n" : out);
  const int code = output.Finish();
  return code != kFine ? code : missing ? kDisagree : kFine;
}

}  // namespace

void AddParadigm(CLI::App& app, int& code) {
  auto options = std::make_shared<ParadigmOptions>();
  options->formats.push_back("md");
  CLI::App* verb = app.add_subcommand("paradigm", "all cells of a paradigm");
  AddCommonOptions(*verb, *options);
  AddSpelledOption(*verb, *options);
  verb->add_option("NAME", options->name, "the paradigm; none: each");
  verb->add_option("--stem", options->stems,
                   "a stem by form or id, listed or not (may be given several times); none: all")
      ->type_name("STEM")
      ->allow_extra_args(false);
  verb->footer(
      "\nA cell without a form or without a result is ∅, and the exit code 1.\n"
      "\nExample:\n  tiersmith paradigm velmari.tier noun --stem tilun");
  verb->callback([options, &code] { code = RunParadigm(*options); });
}

}  // namespace tiersmith::cli
