// tiersmith derive: underlying forms to surface forms, one line out a line in; or derivations rule by rule.
// /in-posible/ gives imposible. A form that can be read in several ways (tags, spelling) is derived in each; where rules are
// optional all outputs are printed with their probabilities. Tested by tests/cli/derive.sh, optional.sh.
#include <fmt/format.h>

#include <algorithm>
#include <nlohmann/json.hpp>

#include "analyse/paradigm.h"
#include "cli/lettering.h"
#include "cli/outputs.h"
#include "cli/stream.h"
#include "graph/interpreter.h"
#include "model/readings.h"
#include "run/run.h"

namespace tiersmith::cli {
namespace {

using nlohmann::ordered_json;

constexpr std::size_t kMostOutputs = 20;  // of one form, if --best does not say

struct DeriveOptions : FormOptions {
  std::optional<std::size_t> best;
  bool trace = false;
  bool pairs = false;

  std::size_t most() const { return best.value_or(kMostOutputs); }
};

bool HasOptionalRules(const Grammar& grammar) {
  return std::any_of(grammar.rules.begin(), grammar.rules.end(), [](const Rule& rule) { return rule.probability < 1; });
}

// One form's result in the format asked for.
class ResultWriter {
 public:
  ResultWriter(const DeriveOptions& options, bool weighted) : options_(options), weighted_(weighted) {}

  Frame FrameOf() const {
    if (options_.json()) return Frame::Json();
    Frame frame;
    if (options_.trace) {
      frame.between = "\n";
    } else if (options_.format == "tsv") {
      frame.open = weighted_ ? "underlying\tsurface\tprobability\treading\n" : "underlying\tsurface\n";
    }
    return frame;
  }

  // What a form, read so, comes out as.
  struct Read {
    std::string reading;
    std::vector<Runner::Output> outputs;  // none: no result
    bool more = false;                    // the list was cut
  };

  // A form that can be read in one way.
  void Result(const std::string& underlying, const Read& read, std::string* out) const {
    if (options_.json()) {
      *out += "{\"underlying\": " + JsonString(underlying) + ResultJson(read) + "}";
    } else if (weighted_ && options_.format == "tsv") {
      Rows(underlying, read, out);
    } else {
      Line(underlying, Listed(read.outputs, "\t"), out);
    }
  }

  // A form that was read in several ways, or with tags: its surfaces once, with its reading where they differ.
  void Readings(const std::string& underlying, const std::vector<Read>& readings, std::string* out) const {
    if (options_.json()) {
      std::string list;
      for (const Read& read : readings) {
        list +=
            (list.empty() ? "{\"reading\": " : ", {\"reading\": ") + JsonString(read.reading) + ResultJson(read) + "}";
      }
      *out += "{\"underlying\": " + JsonString(underlying) + ResultJson(readings.front()) + ", \"readings\": [" + list +
              "]}";
      return;
    }
    if (weighted_ && options_.format == "tsv") {
      for (const Read& read : readings) Rows(underlying, read, out);
      return;
    }
    const std::string first = Listed(readings.front().outputs, "\t");
    const bool differ = std::any_of(readings.begin() + 1, readings.end(),
                                    [&](const Read& read) { return Listed(read.outputs, "\t") != first; });
    if (!differ) return Line(underlying, first, out);
    std::string line;
    for (const Read& read : readings) {
      line +=
          (line.empty() ? "" : "\t") + Listed(read.outputs, " (" + read.reading + ")\t") + " (" + read.reading + ")";
    }
    Line(underlying, line, out);
  }

 private:
  // , "surface": the likeliest; where rules are optional, all of them.
  std::string ResultJson(const Read& read) const {
    std::string json = ", \"surface\": " + (read.outputs.empty() ? "null" : JsonString(read.outputs[0].surface));
    if (!weighted_) return json;
    json += ", \"outputs\": " + cli::Json(read.outputs).dump(-1, ' ', false, ordered_json::error_handler_t::replace);
    return read.more ? json + ", \"more\": true" : json;
  }

  static void Rows(const std::string& underlying, const Read& read, std::string* out) {
    const auto row = [&](const std::string& surface, const std::string& probability) {
      *out += fmt::format("{}\t{}\t{}\t{}\n", Field(underlying), surface, probability, Field(read.reading));
    };
    if (read.outputs.empty()) row(kNoOutput, "");
    for (const Runner::Output& output : read.outputs) row(output.surface, fmt::format("{:.4g}", output.probability));
  }

  void Line(const std::string& underlying, const std::string& line, std::string* out) const {
    if (options_.pairs || options_.format == "tsv") {
      *out += Field(underlying);
      *out += '\t';
    }
    *out += line;
    *out += '\n';
  }

  const DeriveOptions& options_;
  const bool weighted_;
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
  const ResultWriter writer(options, false);
  FormVerb verb;
  verb.frame = writer.FrameOf();
  verb.answer = [&](const std::string& form, std::string* out, TextError* error) {
    std::vector<Reading> readings;
    if (!forms.Read(form, &readings, error)) return Answered::kUnread;
    const bool named = readings.size() > 1 || loaded.grammar->tagged;
    Answered answered = Answered::kResult;
    for (const Reading& reading : readings) {
      const Derivation derivation = Derive(*loaded.grammar, forms.FormOf(reading), true);
      std::string surface, why;
      if (!tracer.Surface(derivation, &surface, &why)) answered = Answered::kNoResult;
      if (&reading != &readings.front()) *out += verb.frame.between;
      if (options.json()) {
        ordered_json json = tracer.Json(form, derivation);
        if (named) json["reading"] = forms.NameOf(reading);
        *out += json.dump(2, ' ', false, ordered_json::error_handler_t::replace);
      } else {
        *out += (named ? "reading " + forms.NameOf(reading) + "\n" : "") + tracer.Text(derivation);
      }
    }
    return answered;
  };
  verb.unread = [&](const std::string& form, std::string* out) { writer.Result(form, {}, out); };
  return AnswerForms(options, verb, output);
}

// Says that the list was cut, unless so many were asked for.
void SayMore(const DeriveOptions& options, const std::string& form, const ResultWriter::Read& read) {
  if (!read.more || options.best) return;
  PrintNote(fmt::format("/{}/ has more outputs; the {} likeliest are shown (--best N)", form, read.outputs.size()));
}

int RunDerive(const DeriveOptions& options) {
  if (!GoodFormOptions(options)) return kUsage;
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
  const ResultWriter writer(options, runner.weighted());
  FormVerb verb;
  verb.frame = writer.FrameOf();
  verb.answer = [&](const std::string& form, std::string* out, TextError* error) {
    if (forms.Plain(form)) {
      ResultWriter::Read read;
      if (!runner.DeriveAll(form, options.most(), &read.outputs, &read.more, error)) return Answered::kUnread;
      writer.Result(form, read, out);
      SayMore(options, form, read);
      return Answered::kResult;
    }
    std::vector<Reading> readings;
    if (!forms.Read(form, &readings, error)) return Answered::kUnread;
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
    if (!any) return Answered::kUnread;
    writer.Readings(form, results, out);
    return Answered::kResult;
  };
  verb.unread = [&](const std::string& form, std::string* out) { writer.Result(form, {}, out); };
  return AnswerForms(options, verb, output);
}

}  // namespace

void AddDerive(CLI::App& app, int& code) {
  auto options = std::make_shared<DeriveOptions>();
  CLI::App* verb = app.add_subcommand("derive", "underlying forms to surface forms");
  AddCommonOptions(*verb, *options);
  AddSpelledOption(*verb, *options);
  AddFormOptions(*verb, *options, "underlying");
  verb->add_flag("--trace", options->trace, "the derivation, rule by rule");
  verb->add_option("--best", options->best, "where rules are optional: how many outputs at most, likeliest first (20)")
      ->type_name("N");
  verb->add_flag("--pairs", options->pairs, "underlying and surface form, tab-separated");
  verb->footer(
      "\nWhere rules are optional, a line holds all outputs with their probabilities, tab-separated, likeliest first;\n"
      "tsv has a line for each. --trace then tells the likeliest way and names the other outputs.\n"
      "\nExample:\n  tiersmith derive velmari.tier --trace in-kat\n  tiersmith derive velmari.tier --pairs < "
      "words.txt\n  tiersmith derive velmari.tier --keep-going --jobs 4 < words.txt\n  tiersmith derive velmari.tier "
      "--best 3 --format json in-kat");
  verb->callback([options, &code] { code = RunDerive(*options); });
}

}  // namespace tiersmith::cli
