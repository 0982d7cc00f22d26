// What the tests of compiling and running share: a small grammar from text, compiled, and what comes out of it.
#pragma once

#include <cstdlib>
#include <memory>
#include <string>
#include <vector>

#include "base/render_diagnostics.h"
#include "compile/cascade.h"
#include "graph/interpreter.h"
#include "run/run.h"
#include "unit/model/model_case.h"

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
  bool IsCandidate(const std::string& underlying, const std::string& surface) {
    bool answer = false;
    TextError error;
    INFO(underlying << " " << surface);
    REQUIRE(runner->IsCandidate(underlying, surface, &answer, &error));
    return answer;
  }
  Runner::Candidates Recover(const std::string& surface, std::size_t best) {
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
  const Reader reader(grammar);
  std::vector<Token> tokens;
  TextError error;
  INFO(underlying);
  REQUIRE(reader.Read(underlying, Reader::Side::kUnderlying, &tokens, &error));
  return Derive(grammar, reader.FormOf(tokens, Reader::Side::kUnderlying));
}

}  // namespace tiersmith::testing
