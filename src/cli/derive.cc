// tiersmith derive: underlying forms to surface forms, one line out a line in; or derivations rule by rule.
// /in-posible/ gives imposible. Tested by tests/cli/derive.sh.
#include <fmt/format.h>

#include <nlohmann/json.hpp>

#include "cli/command.h"
#include "graph/interpreter.h"
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
  explicit Tracer(const Grammar& grammar) : grammar_(grammar), reader_(grammar) {}

  bool Trace(const std::string& form, Derivation* derivation, TextError* error) const {
    std::vector<Token> tokens;
    if (!reader_.Read(form, Reader::Side::kUnderlying, &tokens, error)) return false;
    *derivation = Derive(grammar_, reader_.FormOf(tokens, Reader::Side::kUnderlying), true);
    return true;
  }

  // The surface, or why there is none.
  bool Surface(const Derivation& derivation, std::string* surface, std::string* why) const {
    if (!derivation.problem.empty()) {
      *why = derivation.problem;
      return false;
    }
    FeatureTree no_symbol;
    if (WriteForm(grammar_, derivation.surface, surface, &no_symbol)) return true;
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
  Reader reader_;
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
  const Tracer tracer(*loaded.grammar);
  Output output(options.output);
  if (!output.good()) return kFiles;
  if (options.format == "tsv") {
    PrintError("--trace writes text or json, not tsv");
    return kUsage;
  }
  ResultWriter writer(options, output);
  bool all_have_results = true;
  const int code = ForEachForm(options, output, writer, [&](const std::string& form, TextError* error) {
    Derivation derivation;
    if (!tracer.Trace(form, &derivation, error)) return false;
    std::string surface, why;
    all_have_results = tracer.Surface(derivation, &surface, &why) && all_have_results;
    if (options.json()) {
      writer.Json(tracer.Json(form, derivation).dump(2, ' ', false, ordered_json::error_handler_t::replace));
    } else {
      writer.Text(tracer.Text(derivation));
    }
    return true;
  });
  return code == kFine && !all_have_results ? kDisagree : code;
}

int RunDerive(const DeriveOptions& options) {
  if (BothFromStdin(options, options.forms)) return kUsage;
  if (options.trace) return RunTrace(options);
  const Loaded loaded = LoadAndCompile(options);
  if (loaded.code != kFine) return loaded.code;
  Runner runner(*loaded.grammar, *loaded.cascade);
  Output output(options.output);
  if (!output.good()) return kFiles;
  ResultWriter writer(options, output);
  std::string surface;
  return ForEachForm(options, output, writer, [&](const std::string& form, TextError* error) {
    surface.clear();
    if (!runner.Derive(form, &surface, error)) return false;
    writer.Surface(form, &surface);
    return true;
  });
}

}  // namespace

void AddDerive(CLI::App& app, int& code) {
  auto options = std::make_shared<DeriveOptions>();
  CLI::App* verb = app.add_subcommand("derive", "underlying forms to surface forms");
  AddCommonOptions(*verb, *options);
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
