// tiersmith words: the words of the lexicon and its paradigms, in order or at random. Columns: underlying, surface, gloss.
// Tested by tests/cli/words.sh.
#include "analyse/words.h"

#include <fmt/format.h>

#include <nlohmann/json.hpp>

#include "cli/lettering.h"
#include "cli/outputs.h"

namespace tiersmith::cli {
namespace {

using nlohmann::ordered_json;
constexpr std::size_t kLimit = 1000;

struct WordsOptions : CommonOptions {
  std::size_t limit = kLimit;
  std::size_t sample = 0;
  std::uint64_t seed = 1;
};

struct Shown {
  std::string underlying, gloss;
  Outputs outputs;
};

std::vector<Shown> Derived(const Grammar& grammar, const FormReader& reader, const Lettering& lettering,
                           const std::vector<Word>& words) {
  std::vector<Shown> shown;
  for (const Word& word : words) {
    Shown one{lettering.Write(word.form.text, Reader::Side::kUnderlying), word.gloss,
              OutputsOf(grammar, reader.FormOf(word.form))};
    for (Runner::Output& output : one.outputs.all)
      output.surface = lettering.Write(output.surface, Reader::Side::kSurface);
    if (!one.outputs.problem.empty()) PrintNote(word.form.text + ": " + one.outputs.problem);
    shown.push_back(std::move(one));
  }
  return shown;
}

std::string AsText(const std::vector<Shown>& words) {
  std::vector<std::vector<std::string>> rows;
  for (const Shown& word : words) rows.push_back({word.underlying, Listed(word.outputs.all, " ~ "), word.gloss});
  return rows.empty() ? "" : Table(rows, {false, false, false});
}

std::string AsTsv(const std::vector<Shown>& words) {
  std::string out = "underlying\tsurface\tprobability\tgloss\n";
  for (const Shown& word : words) {
    if (word.outputs.all.empty()) out += Field(word.underlying) + "\t" + kNoOutput + "\t\t" + Field(word.gloss) + "\n";
    for (const Runner::Output& output : word.outputs.all) {
      out += fmt::format("{}\t{}\t{:.4g}\t{}\n", Field(word.underlying), Field(output.surface), output.probability,
                         Field(word.gloss));
    }
  }
  return out;
}

std::string AsJson(const std::vector<Shown>& words) {
  ordered_json json = ordered_json::array();
  for (const Shown& word : words) {
    ordered_json one = {{"underlying", word.underlying}, {"surfaces", Json(word.outputs.all)}, {"gloss", word.gloss}};
    if (!word.outputs.problem.empty()) one["problem"] = word.outputs.problem;
    json.push_back(std::move(one));
  }
  return json.dump(2, ' ', false, ordered_json::error_handler_t::replace) + "\n";
}

int RunWords(const WordsOptions& options) {
  const Loaded loaded = LoadOnly(options);
  if (loaded.code != kFine) return loaded.code;
  const Grammar& grammar = *loaded.grammar;
  if (SpellsNothing(options, grammar)) return kUsage;
  if (!grammar.lexicon.has_stems()) {
    PrintError("the lexicon has no stems, so there are no words to list");
    PrintHelp("list some, as in: lexicon { stem /tilun/ 'rope' noun }, or lexicon from \"lex.tsv\"");
    return kUsage;
  }
  const Lettering lettering(grammar, options.spelled);
  const FormReader reader(grammar);
  const WordList list(reader, grammar);
  Diagnostics diagnostics;
  std::vector<Word> words;
  bool whole = true;
  if (options.sample > 0) {
    words = list.Sample(options.sample, options.seed, diagnostics);
  } else {
    whole = list.First(options.limit, &words, diagnostics);
  }
  PrintDiagnostics(diagnostics, *loaded.sources, options.json());
  const std::vector<Shown> shown = Derived(grammar, reader, lettering, words);
  Output output(options.output);
  if (!output.good()) return kFiles;
  output.Write(options.json() ? AsJson(shown) : options.format == "tsv" ? AsTsv(shown) : AsText(shown));
  if (!whole)
    PrintNote(fmt::format("there are more words; the first {} are shown (--limit N, 0 for all)", words.size()));
  const int code = output.Finish();
  const bool missing =
      std::any_of(shown.begin(), shown.end(), [](const Shown& word) { return word.outputs.all.empty(); });
  return code != kFine ? code : missing || diagnostics.HasErrors() ? kDisagree : kFine;
}

}  // namespace

void AddWords(CLI::App& app, int& code) {
  auto options = std::make_shared<WordsOptions>();
  CLI::App* verb = app.add_subcommand("words", "the words of the lexicon and its paradigms");
  AddCommonOptions(*verb, *options);
  AddSpelledOption(*verb, *options);
  verb->add_option("--limit", options->limit, "how many words at most (1000); 0: all")->type_name("N");
  verb->add_option("--sample", options->sample, "so many words at random, by the weights of their stems")
      ->type_name("N");
  verb->add_option("--seed", options->seed, "of the sample (1): the same seed gives the same words")->type_name("S");
  verb->footer(
      "\nColumns: underlying, surface, gloss.\n\nExample:\n  tiersmith words velmari.tier --sample 20 --seed 7");
  verb->callback([options, &code] { code = RunWords(*options); });
}

}  // namespace tiersmith::cli
