// tiersmith check: the data of the grammar, or of a TSV, against the grammar. For /an-pa/ [anpa] under nasal place it
// says: derived [ampa], first went wrong at rule 'nasal place'. Tested by tests/cli/check.sh.
#include "analyse/check.h"

#include <fmt/format.h>

#include <algorithm>
#include <nlohmann/json.hpp>

#include "cli/lettering.h"
#include "run/run.h"

namespace tiersmith::cli {
namespace {

using nlohmann::ordered_json;

struct CheckOptions : CommonOptions {
  std::string data;
};

// One run of the verb, as the writers of the formats see it.
struct Report {
  const Grammar& grammar;
  const SourceMap& sources;
  const std::vector<DataRow>& rows;
  const CheckResult& result;
};

std::string PlaceOf(const Report& report, Span span) {
  const SourceMap::Place place = report.sources.Find(span);
  return place.path.empty() ? "" : fmt::format("{}:{}", place.path, place.line);
}

std::string Joined(const std::vector<std::string>& parts, const char* between) {
  std::string out;
  for (const std::string& part : parts) out += (out.empty() ? "" : between) + part;
  return out;
}

std::string Expected(const DataRow& row) {
  std::string out;
  for (const std::string& surface : row.surfaces) out += (out.empty() ? "[" : " ~ [") + surface + "]";
  for (const std::string& surface : row.starred) out += (out.empty() ? "* [" : " * [") + surface + "]";
  return out;
}

// As a cell of a table lists them: a ~ b * c.
std::string Listed(const DataRow& row) {
  std::string out = Joined(row.surfaces, " ~ ");
  for (const std::string& starred : row.starred) out += (out.empty() ? "*" : " *") + starred;
  return out;
}

const char* CaseName(Explanation::Case which) {
  switch (which) {
    case Explanation::Case::kNoResult:
      return "no-result";
    case Explanation::Case::kOneRule:
      return "one-rule";
    case Explanation::Case::kLastChange:
      return "last-change";
    case Explanation::Case::kNoRule:
      return "no-rule";
  }
  return "";
}

std::string RuleName(const Report& report, const CheckedRow& row) {
  return row.explanation.rule < 0 ? "" : report.grammar.rules[static_cast<std::size_t>(row.explanation.rule)].name;
}

std::string Why(const Report& report, const CheckedRow& row) {
  if (row.unreadable) return "the underlying form cannot be read: " + row.unreadable->message;
  if (!row.engines_differ.empty()) {
    return "the machine and the graph interpreter differ (machine: " + row.engines_differ +
           "): a defect of the program, please report it";
  }
  return Describe(row.explanation, report.grammar);
}

// ---- text -----------------------------------------------------------------------------------------------
std::string FailureText(const Report& report, std::size_t index) {
  const DataRow& row = report.rows[index];
  const CheckedRow& checked = report.result.rows[index];
  std::string out = fmt::format("{}: /{}/{}\n", PlaceOf(report, row.span), row.underlying,
                                row.gloss.empty() ? "" : " '" + row.gloss + "'");
  if (!checked.reading.empty()) out += "  read as   " + checked.reading + "\n";
  out += "  expected  " + Expected(row) + "\n";
  if (!checked.unreadable) out += "  derived   " + (checked.derived ? "[" + *checked.derived + "]" : "∅") + "\n";
  out += "  " + Why(report, checked) + "\n";
  if (!checked.engines_differ.empty()) return out;  // an explanation of a row that may be right would mislead
  if (!checked.explanation.expected_note.empty()) out += "  note: " + checked.explanation.expected_note + "\n";
  for (const std::string& change : checked.explanation.changes) out += "    " + change + "\n";
  for (const std::string& blocked : checked.explanation.blocked) out += "    " + blocked + "\n";
  return out;
}

std::string BlockedText(const Report& report) {
  std::string out;
  for (const auto& [rule, reasons] : report.result.blocked) {
    std::vector<std::string> parts;
    for (const auto& [reason, count] : reasons) parts.push_back(fmt::format("{} {}", reason, count));
    out += fmt::format("matches blocked: '{}': {}\n", report.grammar.rules[static_cast<std::size_t>(rule)].name,
                       Joined(parts, ", "));
  }
  return out;
}

// Rows that pass, but not by the likeliest surface.
std::string LessLikelyText(const Report& report) {
  std::string out;
  for (std::size_t i = 0; i < report.rows.size(); ++i) {
    const CheckedRow& checked = report.result.rows[i];
    if (!checked.less_likely) continue;
    out += fmt::format("passes as the less likely output ({:.3g}): /{}/ {}, likeliest [{}]\n", *checked.less_likely,
                       report.rows[i].underlying, Expected(report.rows[i]), *checked.derived);
  }
  return out;
}

std::string AsText(const Report& report) {
  std::string out;
  for (std::size_t i = 0; i < report.rows.size(); ++i) {
    if (!report.result.rows[i].passed) out += FailureText(report, i) + "\n";
  }
  const std::size_t all = report.rows.size();
  out += fmt::format("{} of {} rows derived, {} failed\n", all - static_cast<std::size_t>(report.result.failed), all,
                     report.result.failed);
  return out + LessLikelyText(report) + BlockedText(report);
}

// ---- tsv and json -----------------------------------------------------------------------------------------
std::string AsTsv(const Report& report) {
  std::string out = "underlying\texpected\tderived\tverdict\tcase\trule\twhy\tgloss\tplace\n";
  for (std::size_t i = 0; i < report.rows.size(); ++i) {
    const DataRow& row = report.rows[i];
    const CheckedRow& checked = report.result.rows[i];
    const bool explained = !checked.passed && !checked.unreadable;
    out += fmt::format("{}\t{}\t{}\t{}\t{}\t{}\t{}\t{}\t{}\n", Field(row.underlying), Field(Listed(row)),
                       checked.derived ? Field(*checked.derived) : "∅", checked.passed ? "pass" : "fail",
                       explained ? CaseName(checked.explanation.which) : "", RuleName(report, checked),
                       checked.passed ? "" : Field(Why(report, checked)), Field(row.gloss), PlaceOf(report, row.span));
  }
  return out;
}

ordered_json RowJson(const Report& report, std::size_t index) {
  const DataRow& row = report.rows[index];
  const CheckedRow& checked = report.result.rows[index];
  ordered_json json = {{"underlying", row.underlying}, {"expected", row.surfaces},
                       {"derived", nullptr},           {"passed", checked.passed},
                       {"gloss", row.gloss},           {"place", PlaceOf(report, row.span)}};
  if (!row.starred.empty()) json["starred"] = row.starred;
  if (!row.id.empty()) json["id"] = row.id;
  if (checked.derived) json["derived"] = *checked.derived;
  if (checked.less_likely) json["less_likely"] = *checked.less_likely;
  if (!checked.reading.empty()) json["reading"] = checked.reading;
  if (checked.passed) return json;
  json["why"] = Why(report, checked);
  if (checked.unreadable) return json;
  const Explanation& explanation = checked.explanation;
  json["case"] = CaseName(explanation.which);
  json["rule"] = explanation.rule < 0 ? ordered_json(nullptr) : ordered_json(RuleName(report, checked));
  json["difference"] = explanation.difference;
  json["changes"] = explanation.changes;
  json["blocked"] = explanation.blocked;
  json["note"] = explanation.expected_note;
  return json;
}

std::string AsJson(const Report& report) {
  ordered_json json = {{"rows", report.rows.size()},
                       {"failed", report.result.failed},
                       {"results", ordered_json::array()},
                       {"blocked", ordered_json::array()}};
  for (std::size_t i = 0; i < report.rows.size(); ++i) json["results"].push_back(RowJson(report, i));
  for (const auto& [rule, reasons] : report.result.blocked) {
    for (const auto& [reason, count] : reasons) {
      json["blocked"].push_back({{"rule", report.grammar.rules[static_cast<std::size_t>(rule)].name},
                                 {"reason", reason},
                                 {"matches", count}});
    }
  }
  return json.dump(2, ' ', false, ordered_json::error_handler_t::replace) + "\n";
}

// ---- the verb -----------------------------------------------------------------------------------------------
// Rows of the TSV named, else of the grammar. False, with the exit code, after saying what is wrong.
bool ReadRows(const CheckOptions& options, const Loaded& loaded, std::vector<DataRow>* rows, int* code) {
  if (options.data == "-" && options.grammar == "-") {
    PrintError("the grammar and the data cannot both be read from standard input");
    *code = kUsage;
    return false;
  }
  if (options.data.empty()) {
    *rows = loaded.grammar->data;
  } else {
    Diagnostics diagnostics;
    *rows = LoadData(options.data, *loaded.sources, Span{kNoFile, 0, 0}, diagnostics);
    for (DataRow& row : *rows) row.underlying_spelled = row.surface_spelled = options.spelled;
    if (options.spelled) ReadSpelled(Speller(*loaded.grammar), rows, diagnostics);
    PrintDiagnostics(diagnostics, *loaded.sources, options.json());
    if (diagnostics.HasErrors()) {
      *code = CodeFor(diagnostics);
      return false;
    }
  }
  if (!rows->empty()) return true;
  PrintError(options.data.empty() ? "the grammar has no data" : fmt::format("'{}' has no rows", options.data));
  PrintHelp("give a TSV with the columns underlying and surface, or write data { /../ [..] } in the grammar");
  *code = kUsage;
  return false;
}

// The bytes of the row that the error means; the whole form where the file writes it otherwise than it is read.
Span PlaceOfError(const Report& report, const DataRow& row, const TextError& error) {
  if (row.span.file >= report.sources.size()) return row.span;
  const std::string_view text = report.sources.text(row.span.file);
  if (text.substr(std::min<std::size_t>(row.span.begin, text.size()), row.underlying.size()) != row.underlying)
    return row.span;
  const auto begin = row.span.begin + static_cast<std::uint32_t>(error.offset);
  return {row.span.file, begin, begin + static_cast<std::uint32_t>(error.length)};
}

void PrintUnreadable(const Report& report, bool json) {
  Diagnostics diagnostics;
  for (std::size_t i = 0; i < report.rows.size(); ++i) {
    const std::optional<TextError>& error = report.result.rows[i].unreadable;
    if (!error) continue;
    diagnostics.Error(error->kind, PlaceOfError(report, report.rows[i], *error), error->message, error->remedy);
  }
  PrintDiagnostics(diagnostics, report.sources, json);
}

// The rows and what came out of them in letters, if they are asked for.
CheckResult Spelled(const Lettering& lettering, CheckResult result, std::vector<DataRow>* rows) {
  if (!lettering.spelled()) return result;
  for (std::size_t i = 0; i < rows->size(); ++i) {
    DataRow& row = (*rows)[i];
    if (result.rows[i].unreadable) continue;  // the error points into the form as it stands
    row.underlying = lettering.Write(row.underlying, Reader::Side::kUnderlying);
    for (std::string& surface : row.surfaces) surface = lettering.Write(surface, Reader::Side::kSurface);
    for (std::string& surface : row.starred) surface = lettering.Write(surface, Reader::Side::kSurface);
    std::optional<std::string>& derived = result.rows[i].derived;
    if (derived) derived = lettering.Write(*derived, Reader::Side::kSurface);
  }
  return result;
}

int RunCheck(const CheckOptions& options) {
  const Loaded loaded = LoadAndCompile(options);
  if (loaded.code != kFine) return loaded.code;
  if (SpellsNothing(options, *loaded.grammar)) return kUsage;
  std::vector<DataRow> rows;
  int code = kFine;
  if (!ReadRows(options, loaded, &rows, &code)) return code;
  Runner runner(*loaded.grammar, *loaded.cascade);
  const CheckResult result = Check(*loaded.grammar, rows, &runner);
  const CheckResult shown = Spelled(Lettering(*loaded.grammar, options.spelled), result, &rows);
  const Report report{*loaded.grammar, *loaded.sources, rows, shown};
  Output output(options.output);
  if (!output.good()) return kFiles;
  PrintUnreadable(report, options.json());
  output.Write(options.json() ? AsJson(report) : options.format == "tsv" ? AsTsv(report) : AsText(report));
  code = output.Finish();
  return code != kFine ? code : result.failed > 0 ? kDisagree : kFine;
}

}  // namespace

void AddCheck(CLI::App& app, int& code) {
  auto options = std::make_shared<CheckOptions>();
  CLI::App* verb = app.add_subcommand("check", "data against the grammar");
  AddCommonOptions(*verb, *options);
  AddSpelledOption(*verb, *options);
  verb->add_option(
      "DATA", options->data,
      "a TSV with a heading (underlying, surface, id, gloss, tags, source, comment); none: the grammar's data");
  verb->footer(
      "\nA failing row is explained by the first rule where it went wrong: the first whose leaving out gives the\n"
      "expected form; failing that, the last that changed the first segment that differs; failing that, none did.\n"
      "\nExample:\n  tiersmith check velmari.tier survey.tsv");
  verb->callback([options, &code] { code = RunCheck(*options); });
}

}  // namespace tiersmith::cli
