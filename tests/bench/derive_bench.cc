// How fast the machines derive, as a ratio to the graph interpreter in the same run, and how long a ruleset takes to compile.
//
// /pul-lAr-In/ -> [pullɑrɯn], by both, from text to text on one core. The forms are the data of each ruleset, over and over. The interpreter
// is the judge and is not written for speed, so the ratio says what compiling buys and nothing about other programs. Then the same forms
// with a spelling and with tags that a rule asks for, as a ratio to those of the plain grammar.
// Build: `cmake --build build --target bench`; run: `build/bench [GRAMMAR..]`. Not a test: times vary, only sizes are tested.
#include <fmt/format.h>

#include <chrono>
#include <cstdio>
#include <filesystem>
#include <fstream>
#include <functional>
#include <iterator>
#include <string>
#include <vector>

#include "base/render_diagnostics.h"
#include "compile/cascade.h"
#include "graph/interpreter.h"
#include "model/readings.h"
#include "model/speller.h"
#include "run/run.h"

namespace tiersmith {
namespace {

using Clock = std::chrono::steady_clock;

double SecondsSince(Clock::time_point start) { return std::chrono::duration<double>(Clock::now() - start).count(); }

// Forms a second: whole rounds over the forms, until `least` seconds have gone by.
double Rate(const std::vector<std::string>& forms, double least,
            const std::function<bool(const std::string&)>& derive) {
  for (const std::string& form : forms) {  // nothing is measured cold
    if (!derive(form)) return 0;
  }
  std::size_t done = 0;
  const Clock::time_point start = Clock::now();
  double seconds = 0;
  while (seconds < least) {
    for (const std::string& form : forms) derive(form);
    done += forms.size();
    seconds = SecondsSince(start);
  }
  return static_cast<double>(done) / seconds;
}

bool Measure(const std::string& path) {
  const auto sources = std::make_shared<SourceMap>();
  Diagnostics diagnostics;
  const std::unique_ptr<Grammar> grammar = LoadGrammar(path, sources, diagnostics);
  const Clock::time_point start = Clock::now();
  const std::unique_ptr<Cascade> cascade = grammar == nullptr ? nullptr : Compile(*grammar, Limits{}, diagnostics);
  const double compiled = SecondsSince(start);
  if (cascade == nullptr || grammar->data.empty()) {
    fmt::print(stderr, "{}{}: no machine, or no data to derive\n", RenderDiagnostics(diagnostics, *sources, false),
               path);
    return false;
  }
  std::vector<std::string> forms;
  for (const DataRow& row : grammar->data) forms.push_back(row.underlying);

  Runner runner(*grammar, *cascade);
  const Reader reader(*grammar);
  std::string by_machine, by_interpreter;
  std::vector<Token> tokens;
  TextError error;
  FeatureTree unspelled;
  const auto machine = [&](const std::string& form) { return runner.Derive(form, &by_machine, &error); };
  const auto interpreter = [&](const std::string& form) {
    if (!reader.Read(form, Reader::Side::kUnderlying, &tokens, &error)) return false;
    const Derivation derivation = Derive(*grammar, reader.FormOf(tokens, Reader::Side::kUnderlying));
    by_interpreter.clear();
    return derivation.problem.empty() && WriteForm(*grammar, derivation.surface, &by_interpreter, &unspelled);
  };
  for (const std::string& form : forms) {
    if (!machine(form) || !interpreter(form) || by_machine != by_interpreter) {
      fmt::print(stderr, "{}: /{}/: machine [{}], interpreter [{}]\n", path, form, by_machine, by_interpreter);
      return false;
    }
  }
  const double fast = Rate(forms, 0.5, machine), slow = Rate(forms, 0.5, interpreter);
  fmt::print("{:<26}{:>6}{:>12.3f}{:>16.0f}{:>16.0f}{:>8.1f}\n", std::filesystem::path(path).stem().string(),
             grammar->rules.size(), compiled, fast, slow, fast / slow);
  return true;
}

// The Turkish ruleset with this added. No form of its data has the tag, so they come out the same.
constexpr const char* kSpellingAndTags = R"(
spelling { a = ɑ  ı = ɯ  ö = ø  ü = y  c = d͡ʒ  ç = t͡ʃ  ş = ʃ  j = ʒ  g = ɡ  y = j }
rule "loan" { where X:C #   only X in loan   delete X }
lexicon { stem /pul/ 'stamp' noun  stem /køj/ noun  stem /kep/ loan  suffix /-lAr/ plural  suffix /-In/ }
)";

bool MeasureTyped() {
  const std::string path = fmt::format("{0}/{1}/{1}.tier", TIERSMITH_TEST_RULESETS, "turkish-vowel-harmony");
  std::ifstream file(path);
  const std::string text(std::istreambuf_iterator<char>(file), {});
  Diagnostics diagnostics;
  const auto sources = std::make_shared<SourceMap>();
  const std::unique_ptr<Grammar> plain = LoadGrammarText(path, text, sources, diagnostics);
  const std::unique_ptr<Grammar> typed = LoadGrammarText(path, text + kSpellingAndTags, sources, diagnostics);
  const auto plain_cascade = plain == nullptr ? nullptr : Compile(*plain, Limits{}, diagnostics);
  const auto typed_cascade = typed == nullptr ? nullptr : Compile(*typed, Limits{}, diagnostics);
  if (plain_cascade == nullptr || typed_cascade == nullptr) {
    fmt::print(stderr, "{}", RenderDiagnostics(diagnostics, *sources, false));
    return false;
  }
  Runner plain_runner(*plain, *plain_cascade), typed_runner(*typed, *typed_cascade);
  const Speller speller(*typed);
  const FormReader reader(*typed);
  std::string surface, spelled;
  std::vector<std::string> texts;
  std::vector<Reading> readings;
  std::vector<Runner::Output> outputs;
  TextError error;
  bool more = false;
  const auto derive_plain = [&](const std::string& form) { return plain_runner.Derive(form, &surface, &error); };
  const auto derive_typed = [&](const std::string& form) {
    if (!speller.Read(form, Reader::Side::kUnderlying, &texts, &error) ||
        !reader.Read(texts.front(), {}, &readings, &error) ||
        !typed_runner.DeriveAll(readings.front(), 1, &outputs, &more, &error))
      return false;
    spelled = speller.Write(outputs.front().surface, Reader::Side::kSurface);
    return true;
  };
  std::vector<std::string> forms, letters;
  for (const DataRow& row : plain->data) {
    forms.push_back(row.underlying);
    letters.push_back(speller.Write(row.underlying, Reader::Side::kUnderlying));
    const bool same = derive_plain(forms.back()) && derive_typed(letters.back()) &&
                      spelled == speller.Write(surface, Reader::Side::kSurface);
    if (same) continue;
    fmt::print(stderr, "{}: [{}] plain, ⟨{}⟩ spelled and tagged {}\n", forms.back(), surface, spelled, error.message);
    return false;
  }
  const double fast = Rate(forms, 0.5, derive_plain), slow = Rate(letters, 0.5, derive_typed);
  fmt::print("\n{:<26}{:>16}{:>16}{:>8}\n{:<26}{:>16.0f}{:>16.0f}{:>8.1f}\n", "spelled and tagged", "plain forms/s",
             "typed forms/s", "ratio", "turkish-vowel-harmony", fast, slow, fast / slow);
  return true;
}

int Run(const std::vector<std::string>& paths) {
  fmt::print("{:<26}{:>6}{:>12}{:>16}{:>16}{:>8}\n", "grammar", "rules", "compile s", "machine forms/s",
             "interp. forms/s", "ratio");
  bool fine = true;
  for (const std::string& path : paths) fine = Measure(path) && fine;
  fine = MeasureTyped() && fine;
  return fine ? 0 : 1;
}

}  // namespace
}  // namespace tiersmith

int main(int argc, char** argv) {
  std::vector<std::string> paths(argv + 1, argv + argc);
  if (paths.empty()) {
    for (const char* name :
         {"english-plural", "finnish-vowel-harmony", "sanskrit-nati", "spanish-nasal-place", "turkish-vowel-harmony"}) {
      paths.push_back(fmt::format("{0}/{1}/{1}.tier", TIERSMITH_TEST_RULESETS, name));
    }
  }
  return tiersmith::Run(paths);
}
