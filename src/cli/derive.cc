// tiersmith derive: underlying forms to surface forms, one line out a line in; or derivations rule by rule.
// /in-posible/ gives imposible. A form that can be read in several ways (tags, spelling) is derived in each. Tested by tests/cli/derive.sh.
#include <fmt/format.h>

#include <algorithm>
#include <nlohmann/json.hpp>

#include "cli/lettering.h"
#include "graph/interpreter.h"
#include "model/readings.h"
#include "run/run.h"

namespace tiersmith::cli {
namespace {

using nlohmann::ordered_json;

constexpr const char* kNoOutput = "∅";

struct DeriveOptions : CommonOptions {
  std::vector<std::string> forms;
  bool trace = false;
  bool pairs = false;
  bool keep_going = false;
};

// Writes one form's result in the format asked for. JSON is an array, written element by element.
class ResultWriter {
 public:
  ResultWriter(const DeriveOptions& options, Output& output) : options_(options), output_(output) {
    if (options_.format == "tsv") output_.Write("underlying\tsurface\n");
    if (options_.json()) output_.Write("[");
  }

  void Surface(const std::string& underlying, const std::string* surface) {
    if (options_.json()) {
      Json("{\"underlying\": " + JsonString(underlying) +
           ", \"surface\": " + (surface != nullptr ? JsonString(*surface) : "null") + "}");
      return;
    }
    if (options_.pairs || options_.format == "tsv") {
      output_.Write(Field(underlying));
      output_.Write("\t");
    }
    output_.Write(surface != nullptr ? *surface : kNoOutput);
    output_.Write("\n");
  }

  // The results of a form that was read in several ways, or with tags: each surface once, with its reading where they differ.
  struct Read {
    std::string reading;
    std::optional<std::string> surface;  // none: no result
  };
  void Readings(const std::string& underlying, const std::vector<Read>& readings) {
    if (options_.json()) {
      const auto value = [](const Read& read) { return read.surface ? JsonString(*read.surface) : "null"; };
      std::string list;
      for (const Read& read : readings) {
        list += (list.empty() ? "{\"reading\": " : ", {\"reading\": ") + JsonString(read.reading) +
                ", \"surface\": " + value(read) + "}";
      }
      return Json("{\"underlying\": " + JsonString(underlying) + ", \"surface\": " + value(readings.front()) +
                  ", \"readings\": [" + list + "]}");
    }
    const bool differ = std::any_of(readings.begin(), readings.end(),
                                    [&](const Read& read) { return read.surface != readings.front().surface; });
    std::string surfaces;
    for (const Read& read : readings) {
      surfaces += (surfaces.empty() ? "" : "\t") + read.surface.value_or(kNoOutput);
      if (!differ) break;
      surfaces += " (" + read.reading + ")";
    }
    Surface(underlying, &surfaces);
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
  const DeriveOptions& options_;
  Output& output_;
  bool first_ = true;
};

// What a derivation is shown as: rows of name and form, with what happened under each.
class Tracer {
 public:
  Tracer(const Grammar& grammar, const Lettering& lettering) : grammar_(grammar), lettering_(lettering) {}

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
    return json;
  }

 private:
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
  const Lettering& lettering_;
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
        for (const Reading& reading : some) list += (list.empty() ? "" : ", ") + reading.described;
        PrintNote(fmt::format("/{}/ has {} readings: {}", text, some.size(), list));
      }
      for (Reading& reading : some) readings->push_back(std::move(reading));
    }
    return true;
  }
  std::string NameOf(const Reading& reading) const { return grammar_.tagged ? reading.described : reading.text; }

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
    writer.Surface(form, nullptr);
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
  const Tracer tracer(*loaded.grammar, lettering);
  Output output(options.output);
  if (!output.good()) return kFiles;
  if (options.format == "tsv") {
    PrintError("--trace writes text or json, not tsv");
    return kUsage;
  }
  ResultWriter writer(options, output);
  bool all_have_results = true;
  const int code = ForEachForm(options, output, writer, [&](const std::string& form, TextError* error) {
    std::vector<Reading> readings;
    if (!forms.Read(form, &readings, error)) return false;
    for (const Reading& reading : readings) {
      const Derivation derivation = Derive(*loaded.grammar, reading.form, true);
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

// What the machine makes of one reading.
bool DeriveReading(const Grammar& grammar, Runner& runner, const Reading& reading, std::string* surface,
                   TextError* error) {
  if (!grammar.tagged) return runner.Derive(reading.text, surface, error);
  const Runner::Answer answer = runner.Apply(reading.form);
  if (answer.form && WriteForm(grammar, *answer.form, surface, nullptr)) return true;
  *error = {Kind::kBadForm, 0, reading.text.size(), fmt::format("the grammar has no result for {}", reading.described),
            "see `derive --trace` for what happens to it"};
  return false;
}

int RunDerive(const DeriveOptions& options) {
  if (BothFromStdin(options, options.forms)) return kUsage;
  if (options.trace) return RunTrace(options);
  const Loaded loaded = LoadAndCompile(options);
  if (loaded.code != kFine) return loaded.code;
  if (SpellsNothing(options, *loaded.grammar)) return kUsage;
  const Lettering lettering(*loaded.grammar, options.spelled);
  TypedForms forms(*loaded.grammar, lettering);
  Runner runner(*loaded.grammar, *loaded.cascade);
  Output output(options.output);
  if (!output.good()) return kFiles;
  ResultWriter writer(options, output);
  std::string surface;
  return ForEachForm(options, output, writer, [&](const std::string& form, TextError* error) {
    surface.clear();
    if (forms.Plain(form)) {
      if (!runner.Derive(form, &surface, error)) return false;
      writer.Surface(form, &surface);
      return true;
    }
    std::vector<Reading> readings;
    if (!forms.Read(form, &readings, error)) return false;
    std::vector<ResultWriter::Read> results;
    bool any = false;
    for (const Reading& reading : readings) {
      results.push_back({forms.NameOf(reading), std::nullopt});
      if (!DeriveReading(*loaded.grammar, runner, reading, &surface, error)) continue;
      results.back().surface = lettering.Write(surface, Reader::Side::kSurface);
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
  verb->add_flag("--pairs", options->pairs, "underlying and surface form, tab-separated");
  verb->add_flag("--keep-going", options->keep_going, "after a bad form print ∅ and go on (exit code 1 at the end)");
  verb->footer(
      "\nExample:\n  tiersmith derive velmari.tier --trace in-kat\n  tiersmith derive velmari.tier --pairs < "
      "words.txt");
  verb->callback([options, &code] { code = RunDerive(*options); });
}

}  // namespace tiersmith::cli
