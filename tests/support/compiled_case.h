// What the tests of compiling and running share: a small grammar from text, compiled, and what comes out of it.
#pragma once

#include <cstdlib>
#include <memory>
#include <string>
#include <vector>

#include "base/render_diagnostics.h"
#include "compile/cascade.h"
#include "graph/interpreter.h"
#include "model/readings.h"
#include "run/run.h"
#include "support/model_case.h"

namespace tiersmith::testing {

// Ten segments and four tiers: enough for place, voicing and a little harmony.
inline const char* const kSmallInventory = R"(
tree {
  root   > ±cons ±son ±syll ±nasal ±cont
  root   > Laryngeal > ±voice sg
  root   > Place > •Labial •Coronal •Dorsal
  Dorsal > ±high ±low
}
segments from "ipa" { p t k b d m n h a i }
)";

struct Compiled {
  Loaded loaded;
  Diagnostics diagnostics;
  std::unique_ptr<Cascade> cascade;
  std::unique_ptr<Runner> runner;

  const Grammar& grammar() const { return *loaded.grammar; }
  std::string Messages() const { return RenderDiagnostics(diagnostics, *loaded.sources, false); }

  std::string Derive(const std::string& underlying, TextError* error) {
    std::string surface;
    return runner->Derive(underlying, &surface, error) ? surface : "error";
  }
  std::string Derive(const std::string& underlying) {
    TextError error;
    const std::string surface = Derive(underlying, &error);
    return surface == "error" ? "error: " + error.message : surface;
  }
  bool IsCandidate(const std::string& underlying, const std::string& surface) const {
    bool answer = false;
    TextError error;
    INFO(underlying << " " << surface);
    REQUIRE(runner->IsCandidate(underlying, surface, &answer, &error));
    return answer;
  }
  Runner::Candidates Recover(const std::string& surface, std::size_t best) const {
    Runner::Candidates candidates;
    TextError error;
    INFO(surface);
    REQUIRE(runner->Recover(surface, best, &candidates, &error));
    return candidates;
  }
};

// `cascade` is null where compiling fails: the messages are in `diagnostics`.
inline Compiled CompileLoaded(Loaded loaded, const Limits& limits) {
  Compiled compiled;
  compiled.loaded = std::move(loaded);
  INFO(compiled.loaded.Messages());
  REQUIRE(compiled.loaded.grammar != nullptr);
  compiled.cascade = Compile(*compiled.loaded.grammar, limits, compiled.diagnostics);
  if (compiled.cascade != nullptr)
    compiled.runner = std::make_unique<Runner>(*compiled.loaded.grammar, *compiled.cascade);
  return compiled;
}

inline Compiled CompileText(const std::string& text, const Limits& limits = {}) {
  setenv("TIERSMITH_RULESETS", TIERSMITH_TEST_RULESETS, 1);
  return CompileLoaded(Load(text), limits);
}

inline Compiled CompileRuleset(const std::string& name, const Limits& limits = {}) {
  setenv("TIERSMITH_RULESETS", TIERSMITH_TEST_RULESETS, 1);
  Loaded loaded;
  const std::string path = std::string(TIERSMITH_TEST_RULESETS) + "/" + name + "/" + name + ".tier";
  loaded.grammar = LoadGrammar(path, loaded.sources, loaded.diagnostics);
  return CompileLoaded(std::move(loaded), limits);
}

// What the interpreter makes of a form: the other engine.
inline Derivation Trace(const Grammar& grammar, const std::string& underlying) {
  const FormReader reader(grammar);
  std::vector<Reading> readings;
  TextError error;
  INFO(underlying);
  REQUIRE(reader.Read(underlying, {}, &readings, &error));
  REQUIRE(readings.size() == 1);
  return Derive(grammar, reader.FormOf(readings.front()));
}

inline std::string ByInterpreter(const Grammar& grammar, const std::string& underlying) {
  const Derivation derivation = Trace(grammar, underlying);
  CHECK(derivation.problem == "");
  std::string surface;
  FeatureTree no_symbol;
  REQUIRE(WriteForm(grammar, derivation.surface, &surface, &no_symbol));
  return surface;
}

struct DerivedRow {
  const char* underlying;
  const char* surface;
};

// Both engines derive every row.
inline Compiled CheckByBoth(const std::string& grammar_text, const std::vector<DerivedRow>& rows) {
  Compiled compiled = CompileText(grammar_text);
  INFO(grammar_text << compiled.Messages());
  REQUIRE(compiled.cascade != nullptr);
  for (const DerivedRow& row : rows) {
    CAPTURE(row.underlying);
    CHECK(compiled.Derive(row.underlying) == row.surface);
    CHECK(ByInterpreter(compiled.grammar(), row.underlying) == row.surface);
  }
  return compiled;
}

// The underlying form of every row is a candidate of its surface form.
inline void CheckRecovered(const Compiled& compiled, const std::vector<DerivedRow>& rows) {
  for (const DerivedRow& row : rows) {
    CAPTURE(row.underlying);
    CHECK(compiled.IsCandidate(row.underlying, row.surface));
  }
}

}  // namespace tiersmith::testing
