// How fast the machines derive, as a ratio to the graph interpreter in the same run, and how long a ruleset takes to compile.
//
// /pul-lAr-In/ -> [pullɑrɯn], by both, from text to text on one core. The forms are the data of each ruleset, over and over. The interpreter
// is the judge and is not written for speed, so the ratio says what compiling buys and nothing about other programs.
// Build: `cmake --build build --target bench`; run: `build/bench [GRAMMAR..]`. Not a test: times vary, only sizes are tested.
#include <fmt/format.h>

#include <chrono>
#include <cstdio>
#include <filesystem>
#include <functional>
#include <string>
#include <vector>

#include "base/render_diagnostics.h"
#include "compile/cascade.h"
#include "graph/interpreter.h"
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

int Run(const std::vector<std::string>& paths) {
  fmt::print("{:<26}{:>6}{:>12}{:>16}{:>16}{:>8}\n", "grammar", "rules", "compile s", "machine forms/s",
             "interp. forms/s", "ratio");
  bool fine = true;
  for (const std::string& path : paths) fine = Measure(path) && fine;
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
