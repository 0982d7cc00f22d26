// tiersmith derive: underlying forms to surface forms, one line out a line in; or derivations rule by rule.
// /in-posible/ gives imposible. A form that can be read in several ways (tags, spelling) is derived in each; where rules are
// optional all outputs are printed with their probabilities. Tested by tests/cli/derive.sh, optional.sh.
#include <fmt/format.h>

#include <algorithm>
#include <nlohmann/json.hpp>

#include "analyse/paradigm.h"
#include "cli/lettering.h"
#include "cli/outputs.h"
#include "graph/interpreter.h"
#include "model/readings.h"
#include "run/run.h"

namespace tiersmith::cli {
namespace {

using nlohmann::ordered_json;

constexpr std::size_t kMostOutputs = 20;  // of one form, if --best does not say

struct DeriveOptions : CommonOptions {
  std::vector<std::string> forms;
  std::optional<std::size_t> best;
  bool trace = false;
  bool pairs = false;
  bool keep_going = false;

  std::size_t most() const { return best.value_or(kMostOutputs); }
};

bool HasOptionalRules(const Grammar& grammar) {
  return std::any_of(grammar.rules.begin(), grammar.rules.end(), [](const Rule& rule) { return rule.probability < 1; });
}

// Writes one form's result in the format asked for. JSON is an array, written element by element.
class ResultWriter {
 public:
  ResultWriter(const DeriveOptions& options, bool weighted, Output& output)
      : options_(options), weighted_(weighted), output_(output) {
    if (options_.format == "tsv")
      output_.Write(weighted_ ? "underlying\tsurface\tprobability\treading\n" : "underlying\tsurface\n");
    if (options_.json()) output_.Write("[");
  }

  // What a form, read so, comes out as.
  struct Read {
    std::string reading;
    std::vector<Runner::Output> outputs;  // none: no result
    bool more = false;                    // the list was cut
  };

  // A form that can be read in one way.
  void Result(const std::string& underlying, const Read& read) {
    if (options_.json()) return Json("{\"underlying\": " + JsonString(underlying) + ResultJson(read) + "}");
    if (weighted_ && options_.format == "tsv") return Rows(underlying, read);
    Line(underlying, Listed(read.outputs, "\t"));
  }

  // A form that was read in several ways, or with tags: its surfaces once, with its reading where they differ.
  void Readings(const std::string& underlying, const std::vector<Read>& readings) {
    if (options_.json()) {
      std::string list;
      for (const Read& read : readings) {
        list +=
            (list.empty() ? "{\"reading\": " : ", {\"reading\": ") + JsonString(read.reading) + ResultJson(read) + "}";
      }
      return Json("{\"underlying\": " + JsonString(underlying) + ResultJson(readings.front()) + ", \"readings\": [" +
                  list + "]}");
    }
    if (weighted_ && options_.format == "tsv") {
      for (const Read& read : readings) Rows(underlying, read);
      return;
    }
    const std::string first = Listed(readings.front().outputs, "\t");
    const bool differ = std::any_of(readings.begin(), readings.end(),
                                    [&](const Read& read) { return Listed(read.outputs, "\t") != first; });
    if (!differ) return Line(underlying, first);
    std::string line;
    for (const Read& read : readings) {
      line +=
          (line.empty() ? "" : "\t") + Listed(read.outputs, " (" + read.reading + ")\t") + " (" + read.reading + ")";
    }
    Line(underlying, line);
  }

  void Json(const std::string& element) {
    output_.Write(first_ ? "\n" : ",\n");
    output_.Write(element);
    first_ = false;
  }

  void Text(const std::string& text) {
    if (!first_) output_.Write("\n");
    output_.Write(text);
    first_ = false;
  }

  int Finish() {
    if (options_.json()) output_.Write(first_ ? "]\n" : "\n]\n");
    return output_.Finish();
  }

 private:
  // , "surface": the likeliest; where rules are optional, all of them.
  std::string ResultJson(const Read& read) const {
    std::string json = ", \"surface\": " + (read.outputs.empty() ? "null" : JsonString(read.outputs[0].surface));
    if (!weighted_) return json;
    json += ", \"outputs\": " + cli::Json(read.outputs).dump(-1, ' ', false, ordered_json::error_handler_t::replace);
    return read.more ? json + ", \"more\": true" : json;
  }

  void Rows(const std::string& underlying, const Read& read) {
    const auto row = [&](const std::string& surface, const std::string& probability) {
      output_.Write(fmt::format("{}\t{}\t{}\t{}\n", Field(underlying), surface, probability, Field(read.reading)));
    };
    if (read.outputs.empty()) row(kNoOutput, "");
    for (const Runner::Output& output : read.outputs) row(output.surface, fmt::format("{:.4g}", output.probability));
  }

  void Line(const std::string& underlying, const std::string& line) {
    if (options_.pairs || options_.format == "tsv") {
      output_.Write(Field(underlying));
      output_.Write("\t");
    }
    output_.Write(line);
    output_.Write("\n");
  }

  const DeriveOptions& options_;
  const bool weighted_;
  Output& output_;
  bool first_ = true;
};

// What a derivation is shown as: rows of name and form, with what happened under each.
class Tracer {
 public:
  Tracer(const Grammar& grammar, const Lettering& lettering, std::size_t most)
      : grammar_(grammar), weighted_(HasOptionalRules(grammar)), lettering_(lettering), most_(most) {}

  // The surface, or why there is none.
  bool Surface(const Derivation& derivation, std::string* surface, std::string* why) const {
    if (!derivation.problem.empty()) {
      *why = derivation.problem;
      return false;
    }
    FeatureTree no_symbol;
    if (WriteForm(grammar_, derivation.surface, surface, &no_symbol)) {
      *surface = lettering_.Write(*surface, Reader::Side::kSurface);
      return true;
    }
    *why = "no symbol spells " + grammar_.inventory.Describe(no_symbol, grammar_.tree);
    return false;
  }

  std::string Text(const Derivation& derivation) const {
    std::vector<std::vector<std::string>> rows;
    rows.push_back({"underlying", DescribeForm(grammar_, derivation.underlying)});
    std::vector<std::vector<std::string>> notes(1);
    for (const Step& step : derivation.steps) {
      const Rule& rule = grammar_.rules[static_cast<std::size_t>(step.rule)];
      rows.push_back({rule.name, step.applied ? DescribeForm(grammar_, step.after) : "·"});
      notes.push_back(NotesOf(step));
    }
    std::string surface, why;
    const bool result = Surface(derivation, &surface, &why);
    rows.push_back({"surface", result ? surface : std::string(kNoOutput)});
    notes.push_back(result ? std::vector<std::string>{} : std::vector<std::string>{"no result: " + why});
    if (weighted_ && derivation.problem.empty()) AddWays(derivation, surface, &notes.back());
    return Interleaved(Table(rows, {false, false}), notes);
  }

  ordered_json Json(const std::string& form, const Derivation& derivation) const {
    ordered_json json = {{"underlying", form}, {"steps", ordered_json::array()}};
    for (const Step& step : derivation.steps) {
      json["steps"].push_back({{"rule", grammar_.rules[static_cast<std::size_t>(step.rule)].name},
                               {"applied", step.applied},
                               {"form", DescribeForm(grammar_, step.after)},
                               {"changes", step.notes.changes},
                               {"blocked", step.notes.blocked}});
    }
    std::string surface, why;
    if (Surface(derivation, &surface, &why)) {
      json["surface"] = surface;
    } else {
      json["surface"] = nullptr;
      json["problem"] = why;
    }
    if (weighted_ && derivation.problem.empty()) {
      json["outputs"] = cli::Json(Ways(derivation).all);
      json["probability"] = derivation.outcomes.front().probability;  // of the form that the steps lead to
    }
    return json;
  }

 private:
  Outputs Ways(const Derivation& derivation) const {
    Outputs outputs = OutputsOf(grammar_, derivation);
    for (Runner::Output& output : outputs.all)
      output.surface = lettering_.Write(output.surface, Reader::Side::kSurface);
    return outputs;
  }

  // That these steps are one way of several, and what the others come to.
  void AddWays(const Derivation& derivation, const std::string& surface, std::vector<std::string>* notes) const {
    Outputs outputs = Ways(derivation);
    if (outputs.all.size() == 1 && outputs.problem.empty()) return;
    const auto own = std::find_if(outputs.all.begin(), outputs.all.end(),
                                  [&](const Runner::Output& output) { return output.surface == surface; });
    const double probability = own != outputs.all.end() ? own->probability : derivation.outcomes.front().probability;
    notes->push_back(fmt::format("probability {:.3g}; the steps are those of the likeliest way", probability));
    if (own != outputs.all.end()) outputs.all.erase(own);
    const std::size_t others = outputs.all.size();
    outputs.all.resize(std::min(others, most_));
    if (others > 0) {
      notes->push_back("other outputs: " + Listed(outputs.all, ", ") +
                       (others > most_ ? fmt::format(" and {} more", others - most_) : ""));
    }
    if (!outputs.problem.empty()) notes->push_back("some ways have no result: " + outputs.problem);
  }

  static std::vector<std::string> NotesOf(const Step& step) {
    std::vector<std::string> notes = step.notes.changes;
    notes.insert(notes.end(), step.notes.blocked.begin(), step.notes.blocked.end());
    return notes;
  }

  static std::string Interleaved(const std::string& table, const std::vector<std::vector<std::string>>& notes) {
    std::string out;
    std::size_t begin = 0;
    for (const auto& under : notes) {
      const std::size_t end = table.find('\n', begin);
      out += table.substr(begin, end - begin) + "\n";
      for (const std::string& note : under) out += "    " + note + "\n";
      begin = end + 1;
    }
    return out;
  }

  const Grammar& grammar_;
  const bool weighted_;
  const Lettering& lettering_;
  const std::size_t most_;
};

// The readings of a typed form, said if there are several.
class TypedForms {
 public:
  TypedForms(const Grammar& grammar, const Lettering& lettering) : grammar_(grammar), lettering_(lettering) {}

  // Is there more to read in the form than its symbols?
  bool Plain(const std::string& form) const {
    return !lettering_.spelled() && !grammar_.tagged && form.find('@') == std::string::npos &&
           form.find("√") == std::string::npos;
  }

  bool Read(const std::string& form, std::vector<Reading>* readings, TextError* error) {
    if (reader_ == nullptr) reader_ = std::make_unique<FormReader>(grammar_);
    readings->clear();
    std::vector<std::string> texts;
    if (!lettering_.Read(form, Reader::Side::kUnderlying, &texts, error)) return false;
    for (const std::string& text : texts) {
      std::vector<Reading> some;
      if (!reader_->Read(text, {}, &some, error)) return false;
      if (some.size() > 1) {
        std::string list;
        for (const Reading& reading : some) list += (list.empty() ? "" : ", ") + Described(reading);
        PrintNote(fmt::format("/{}/ has {} readings: {}", text, some.size(), list));
      }
      for (Reading& reading : some) readings->push_back(std::move(reading));
    }
    return true;
  }
  Form FormOf(const Reading& reading) const { return reader_->FormOf(reading); }
  std::string NameOf(const Reading& reading) const { return grammar_.tagged ? Described(reading) : reading.text; }

 private:
  const Grammar& grammar_;
  std::unique_ptr<FormReader> reader_;  // when the first form comes that is not plain
  const Lettering& lettering_;
};

// Goes through the forms; `one(form, &error)` writes a form's result or says why it has none.
template <class One>
int ForEachForm(const DeriveOptions& options, Output& output, ResultWriter& writer, One one) {
  FormSource source(options.forms);
  std::string form;
  int number = 0, bad = 0;
  for (;;) {
    if (source.WouldWait()) output.Flush();
    if (!source.Next(&form, &number)) break;
    TextError error;
    if (one(form, &error)) continue;
    ++bad;
    PrintTextError(source, form, number, error, options.json());
    if (!options.keep_going) {
      if (source.from_stdin()) PrintHelp("--keep-going goes on after bad lines and prints ∅ for them");
      if (options.output.empty()) writer.Finish();
      return kUsage;
    }
    writer.Result(form, {});
  }
  if (source.failed()) {
    PrintError("reading standard input failed");
    return kFiles;
  }
  const int code = writer.Finish();
  return code != kFine ? code : bad > 0 ? kDisagree : kFine;
}

int RunTrace(const DeriveOptions& options) {
  const Loaded loaded = LoadOnly(options);
  if (loaded.code != kFine) return loaded.code;
  if (SpellsNothing(options, *loaded.grammar)) return kUsage;
  const Lettering lettering(*loaded.grammar, options.spelled);
  TypedForms forms(*loaded.grammar, lettering);
  const Tracer tracer(*loaded.grammar, lettering, options.most());
  Output output(options.output);
  if (!output.good()) return kFiles;
  if (options.format == "tsv") {
    PrintError("--trace writes text or json, not tsv");
    return kUsage;
  }
  ResultWriter writer(options, false, output);
  bool all_have_results = true;
  const int code = ForEachForm(options, output, writer, [&](const std::string& form, TextError* error) {
    std::vector<Reading> readings;
    if (!forms.Read(form, &readings, error)) return false;
    for (const Reading& reading : readings) {
      const Derivation derivation = Derive(*loaded.grammar, forms.FormOf(reading), true);
      std::string surface, why;
      all_have_results = tracer.Surface(derivation, &surface, &why) && all_have_results;
      const bool named = readings.size() > 1 || loaded.grammar->tagged;
      if (options.json()) {
        ordered_json json = tracer.Json(form, derivation);
        if (named) json["reading"] = forms.NameOf(reading);
        writer.Json(json.dump(2, ' ', false, ordered_json::error_handler_t::replace));
      } else {
        writer.Text((named ? "reading " + forms.NameOf(reading) + "\n" : "") + tracer.Text(derivation));
      }
    }
    return true;
  });
  return code == kFine && !all_have_results ? kDisagree : code;
}

// Says that the list was cut, unless so many were asked for.
void SayMore(const DeriveOptions& options, const std::string& form, const ResultWriter::Read& read) {
  if (!read.more || options.best) return;
  PrintNote(fmt::format("/{}/ has more outputs; the {} likeliest are shown (--best N)", form, read.outputs.size()));
}

int RunDerive(const DeriveOptions& options) {
  if (BothFromStdin(options, options.forms)) return kUsage;
  if (options.most() == 0 || options.most() > Limits{}.outcomes) {
    PrintError(fmt::format("--best {}: give a number from 1 to {}", options.most(), Limits{}.outcomes));
    return kUsage;
  }
  if (options.trace) return RunTrace(options);
  const Loaded loaded = LoadAndCompile(options);
  if (loaded.code != kFine) return loaded.code;
  if (SpellsNothing(options, *loaded.grammar)) return kUsage;
  const Lettering lettering(*loaded.grammar, options.spelled);
  TypedForms forms(*loaded.grammar, lettering);
  Runner runner(*loaded.grammar, *loaded.cascade);
  Output output(options.output);
  if (!output.good()) return kFiles;
  ResultWriter writer(options, runner.weighted(), output);
  return ForEachForm(options, output, writer, [&](const std::string& form, TextError* error) {
    if (forms.Plain(form)) {
      ResultWriter::Read read;
      if (!runner.DeriveAll(form, options.most(), &read.outputs, &read.more, error)) return false;
      writer.Result(form, read);
      SayMore(options, form, read);
      return true;
    }
    std::vector<Reading> readings;
    if (!forms.Read(form, &readings, error)) return false;
    std::vector<ResultWriter::Read> results;
    bool any = false;
    for (const Reading& reading : readings) {
      results.push_back({forms.NameOf(reading), {}, false});
      ResultWriter::Read& read = results.back();
      if (!runner.DeriveAll(reading, options.most(), &read.outputs, &read.more, error)) {
        read.outputs.clear();
        continue;
      }
      for (Runner::Output& each : read.outputs) each.surface = lettering.Write(each.surface, Reader::Side::kSurface);
      SayMore(options, read.reading, read);
      any = true;
    }
    if (any) writer.Readings(form, results);
    return any;
  });
}

}  // namespace

void AddDerive(CLI::App& app, int& code) {
  auto options = std::make_shared<DeriveOptions>();
  CLI::App* verb = app.add_subcommand("derive", "underlying forms to surface forms");
  AddCommonOptions(*verb, *options);
  AddSpelledOption(*verb, *options);
  verb->add_option("FORMS", options->forms, "underlying forms; none, or -: one a line on standard input");
  verb->add_flag("--trace", options->trace, "the derivation, rule by rule");
  verb->add_option("--best", options->best, "where rules are optional: how many outputs at most, likeliest first (20)")
      ->type_name("N");
  verb->add_flag("--pairs", options->pairs, "underlying and surface form, tab-separated");
  verb->add_flag("--keep-going", options->keep_going, "after a bad form print ∅ and go on (exit code 1 at the end)");
  verb->footer(
      "\nWhere rules are optional, a line holds all outputs with their probabilities, tab-separated, likeliest first;\n"
      "tsv has a line for each. --trace then tells the likeliest way and names the other outputs.\n"
      "\nExample:\n  tiersmith derive velmari.tier --trace in-kat\n  tiersmith derive velmari.tier --pairs < "
      "words.txt\n  tiersmith derive velmari.tier --best 3 --format json in-kat");
  verb->callback([options, &code] { code = RunDerive(*options); });
}

}  // namespace tiersmith::cli
