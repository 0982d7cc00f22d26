// tiersmith recover: surface forms to the underlying forms they may stand for, fewest restorations first.
// [imposible] gives in-posible among others. Candidates are words where the lexicon has stems, else anything that segments
// spell. Tested by tests/cli/recover.sh, lexicon.sh, optional.sh.
#include <fmt/format.h>
#include <fmt/ranges.h>

#include <algorithm>
#include <cmath>
#include <iostream>
#include <nlohmann/json.hpp>
#include <tuple>

#include "analyse/word_graph.h"
#include "cli/lettering.h"
#include "cli/stream.h"
#include "run/run.h"

namespace tiersmith::cli {
namespace {

using nlohmann::ordered_json;

constexpr std::size_t kBlock = 16;  // forms at a time: one may take long

struct RecoverOptions : FormOptions {
  std::size_t best = 10;
  std::string from;  // "lexicon", "segments"; "": the lexicon where it has stems
};

std::string Weight(double weight) { return fmt::format("{:.4g}", weight); }

// Ties in an order of their own, so that the same list always reads the same.
void Sort(Runner::Candidates& candidates) {
  std::sort(candidates.best.begin(), candidates.best.end(), [](const auto& a, const auto& b) {
    return std::tie(a.restorations, a.weight, a.form) < std::tie(b.restorations, b.weight, b.form);
  });
}

// "infinitely many: ...; the 10 with the fewest restorations are shown", or "" if the list is whole.
std::string Bound(const Runner::Candidates& candidates) {
  const std::string shown = fmt::format("the {} with the fewest restorations are shown", candidates.best.size());
  if (candidates.infinite) return "infinitely many: " + candidates.infinite_why + "; " + shown;
  return candidates.more ? "there are more; " + shown + " (--best N)" : "";
}

std::string AsText(const std::string& form, const Runner::Candidates& candidates, bool named) {
  std::vector<std::vector<std::string>> rows;
  for (const Runner::Candidate& candidate : candidates.best) {
    rows.push_back({candidate.form, std::to_string(candidate.restorations), Weight(candidate.weight), candidate.gloss});
  }
  std::string out = named ? "[" + form + "]\n" : "";
  out += rows.empty() ? "∅\n" : Table(rows, {false, true, true, false});
  const std::string bound = Bound(candidates);
  if (!bound.empty()) out += "-- " + bound + "\n";
  return out;
}

std::string AsTsv(const std::string& form, const Runner::Candidates& candidates) {
  std::string out;
  if (candidates.best.empty()) out += Field(form) + "\t∅\t\t\t\n";
  for (const Runner::Candidate& candidate : candidates.best) {
    out += fmt::format("{}\t{}\t{}\t{}\t{}\n", Field(form), candidate.form, candidate.restorations,
                       Weight(candidate.weight), Field(candidate.gloss));
  }
  return out;
}

ordered_json AsJson(const std::string& form, const Runner::Candidates& candidates) {
  ordered_json json = {{"surface", form},
                       {"infinite", candidates.infinite},
                       {"infinite_why", candidates.infinite_why},
                       {"more", candidates.more},
                       {"candidates", ordered_json::array()}};
  for (const Runner::Candidate& candidate : candidates.best) {
    json["candidates"].push_back(
        {{"form", candidate.form},
         {"restorations", candidate.restorations},
         {"weight", candidate.weight},
         {"gloss", candidate.gloss.empty() ? ordered_json(nullptr) : ordered_json(candidate.gloss)}});
  }
  return json;
}

// Those of several readings of one form: each once, with the probability of all of them.
void Sum(Runner::Candidates* candidates) {
  std::vector<Runner::Candidate> each;
  for (Runner::Candidate& candidate : candidates->best) {
    const auto same =
        std::find_if(each.begin(), each.end(), [&](const auto& one) { return one.form == candidate.form; });
    if (same == each.end()) {
      each.push_back(std::move(candidate));
      continue;
    }
    same->restorations = std::min(same->restorations, candidate.restorations);
    same->weight = std::max(0.0, -std::log(std::exp(-same->weight) + std::exp(-candidate.weight)));
  }
  candidates->best = std::move(each);
}

// The candidates of each reading of the form, in letters if they are asked for.
bool Recover(Runner& runner, const Lettering& lettering, const std::string& form, std::size_t best,
             Runner::Candidates* candidates, TextError* error) {
  std::vector<std::string> readings;
  if (!lettering.Read(form, Reader::Side::kSurface, &readings, error)) return false;
  for (const std::string& reading : readings) {
    Runner::Candidates some;
    if (!runner.Recover(reading, best, &some, error)) return false;
    candidates->best.insert(candidates->best.end(), some.best.begin(), some.best.end());
    if (some.infinite) candidates->infinite_why = some.infinite_why;
    candidates->infinite = candidates->infinite || some.infinite;
    candidates->more = candidates->more || some.more;
  }
  for (Runner::Candidate& candidate : candidates->best)
    candidate.form = lettering.Write(candidate.form, Reader::Side::kUnderlying);
  if (readings.size() > 1) Sum(candidates);
  Sort(*candidates);
  if (candidates->best.size() <= best) return true;
  candidates->best.resize(best);
  candidates->more = true;
  return true;
}

// Only words from here on, if they are asked for. False, after saying so, if there are none.
bool ChooseWords(const RecoverOptions& options, const Loaded& loaded, Runner* runner, bool* words) {
  const Grammar& grammar = *loaded.grammar;
  *words = options.from.empty() ? grammar.lexicon.has_stems() : options.from == "lexicon";
  if (!*words) return true;
  if (!grammar.lexicon.has_stems()) {
    PrintError("the lexicon has no stems, so there are no words to recover");
    PrintHelp("list some, as in: lexicon { stem /tilun/ 'rope' noun }, or give --from segments");
    return false;
  }
  const FormReader reader(grammar);
  Diagnostics diagnostics;
  std::vector<std::string> left_out;
  runner->AllowOnly(WordsAllowed(reader, grammar, diagnostics), &left_out);
  PrintDiagnostics(diagnostics, *loaded.sources, options.json());
  if (!left_out.empty()) {
    PrintNote(fmt::format("left out, for they have letters or tags this grammar was not compiled for: {}",
                          fmt::join(left_out, ", ")));
  }
  return true;
}

int RunRecover(const RecoverOptions& options) {
  if (!GoodFormOptions(options)) return kUsage;
  if (options.best == 0 || options.best > Limits{}.candidates) {
    PrintError(fmt::format("--best {}: give a number from 1 to {}", options.best, Limits{}.candidates));
    return kUsage;
  }
  if (!options.from.empty() && options.from != "lexicon" && options.from != "segments") {
    PrintError(fmt::format("--from {}: candidates come from lexicon or segments", options.from));
    return kUsage;
  }
  const Loaded loaded = LoadAndCompile(options);
  if (loaded.code != kFine) return loaded.code;
  if (SpellsNothing(options, *loaded.grammar)) return kUsage;
  const Lettering lettering(*loaded.grammar, options.spelled);
  Runner runner(*loaded.grammar, *loaded.cascade);
  bool words = false;
  if (!ChooseWords(options, loaded, &runner, &words)) return kUsage;
  Output output(options.output);
  if (!output.good()) return kFiles;
  const bool named = options.forms.size() != 1 || options.forms[0] == "-";
  const auto write = [&](const std::string& form, const Runner::Candidates& candidates, std::string* out) {
    if (options.json()) {
      *out += AsJson(form, candidates).dump(2, ' ', false, ordered_json::error_handler_t::replace);
    } else if (options.format == "tsv") {
      *out += AsTsv(form, candidates);
      const std::string bound = Bound(candidates);
      if (!bound.empty()) std::cerr << form << ": " << bound << '\n';
    } else {
      *out += AsText(form, candidates, named);
    }
  };
  FormVerb verb;
  verb.block = kBlock;
  if (options.json()) verb.frame = Frame::Json();
  if (options.format == "tsv") verb.frame.open = "surface\tform\trestorations\tweight\tgloss\n";
  if (options.format == "text") verb.frame.between = "\n";
  verb.answer = [&](const std::string& form, std::string* out, TextError* error) {
    Runner::Candidates candidates;
    if (!Recover(runner, lettering, form, options.best, &candidates, error)) return Answered::kUnread;
    if (words && candidates.best.empty())
      PrintNote(fmt::format("no word of the lexicon comes out as [{}]; --from segments looks beyond it", form));
    write(form, candidates, out);
    return candidates.best.empty() ? Answered::kNoResult : Answered::kResult;
  };
  verb.unread = [&](const std::string& form, std::string* out) { write(form, {}, out); };
  return AnswerForms(options, verb, output);
}

}  // namespace

void AddRecover(CLI::App& app, int& code) {
  auto options = std::make_shared<RecoverOptions>();
  CLI::App* verb = app.add_subcommand("recover", "surface forms to candidate underlying forms");
  AddCommonOptions(*verb, *options);
  AddSpelledOption(*verb, *options);
  AddFormOptions(*verb, *options, "surface");
  verb->add_option("--best", options->best, "how many candidates (10)")->type_name("N");
  verb->add_option("--from", options->from,
                   "lexicon: words of the lexicon and its paradigms (where it has stems, this is what is done);\n"
                   "segments: anything the segments spell")
      ->type_name("SOURCE");
  verb->footer(
      "\nColumns: form, restorations (slots and boundaries put back), weight (-ln of the probability that the form "
      "comes\n"
      "out so; 0 where no rule is optional), gloss (of words). Fewest restorations first, then likeliest.\n"
      "\nExample:\n  tiersmith recover velmari.tier --best 5 --from segments iŋkat\n  tiersmith recover velmari.tier "
      "--jobs 4 "
      "--format tsv < text.txt");
  verb->callback([options, &code] { code = RunRecover(*options); });
}

}  // namespace tiersmith::cli
