// Recovery where rules are optional: candidates and their probabilities by hand, and against the interpreter on all short forms.
#include <algorithm>
#include <cmath>
#include <map>

#include "support/compiled_case.h"

namespace tiersmith::testing {
namespace {

const std::string kThereAndBack = std::string(kSmallInventory) + R"(
rule "voicing"   { where [+syll] X:[-son Labial] [+syll]   set X [+voice]   optional 0.25 }
rule "devoicing" { where [+syll] X:[-son Labial] [+syll]   set X [-voice]   optional 0.5 }
)";

std::map<std::string, double> Weights(const Runner::Candidates& candidates) {
  std::map<std::string, double> weights;
  for (const Runner::Candidate& candidate : candidates.best)
    CHECK(weights.emplace(candidate.form, candidate.weight).second);
  return weights;
}

std::vector<std::string> First(Compiled& grammar, const std::string& surface, std::size_t best) {
  std::vector<std::string> forms;
  for (const Runner::Candidate& candidate : grammar.Recover(surface, best).best) forms.push_back(candidate.form);
  return forms;
}

// Xː as XX: a surface form may be read either way.
std::string Twice(std::string surface) {
  for (std::size_t at = surface.find("ː"); at != std::string::npos; at = surface.find("ː"))
    surface.replace(at, std::string("ː").size(), 1, surface[at - 1]);
  return surface;
}

TEST_CASE("recover, optional rules: each candidate once, the likelier first", "[unit]") {
  Compiled grammar = CompileText(kThereAndBack);
  // p is voiced by .25, and what is b then is devoiced by .5.
  const std::map<std::string, double> aba = Weights(grammar.Recover("aba", 1000));
  CHECK(aba.at("aba") == Approx(-std::log(.5)).margin(1e-6));
  CHECK(aba.at("apa") == Approx(-std::log(.25 * .5)).margin(1e-6));
  const std::map<std::string, double> apa = Weights(grammar.Recover("apa", 1000));
  CHECK(apa.at("aba") == Approx(-std::log(.5)).margin(1e-6));
  CHECK(apa.at("apa") == Approx(-std::log(.75 + .25 * .5)).margin(1e-6));
  CHECK(First(grammar, "aba", 2) == std::vector<std::string>{"aba", "apa"});
  CHECK(First(grammar, "apa", 2) == std::vector<std::string>{"apa", "aba"});
  CHECK(First(grammar, "apa", 1) == std::vector<std::string>{"apa"});
  CHECK(First(grammar, "aba", 1) == std::vector<std::string>{"aba"});
  CHECK(Weights(grammar.Recover("pab", 100)).at("pab") == 0);
}

TEST_CASE("recover, optional rules: no candidate is lost and none is too many", "[unit]") {
  Compiled grammar = CompileText(kThereAndBack + R"(rule "loss" { where X:/h/ [-syll]   delete X   optional 0.5 }
rule "copy" { where X:/t/ Y:[+cons Labial]   delink X.root   spread Y.root to X   optional 0.4 }
)");
  std::vector<std::string> forms{""}, all;
  for (std::size_t i = 0; i < 4; ++i) {
    std::vector<std::string> longer;
    for (const std::string& form : forms) {
      for (const char* symbol : {"p", "b", "t", "h", "a"}) longer.push_back(form + symbol);
    }
    all.insert(all.end(), longer.begin(), longer.end());
    forms = std::move(longer);
  }
  std::map<std::string, std::map<std::string, double>> expected;  // surface -> underlying -> probability
  for (const std::string& form : all) {
    const Derivation derivation = Trace(grammar.grammar(), form);
    REQUIRE(derivation.problem == "");
    for (const Outcome& outcome : derivation.outcomes) {
      std::string surface;
      FeatureTree no_symbol;
      REQUIRE(WriteForm(grammar.grammar(), outcome.form, &surface, &no_symbol));
      expected[Twice(surface)][form] += outcome.probability;
    }
  }
  int compared = 0;
  for (const char* surface : {"aba", "apa", "pa", "ba", "haba", "pba", "appa", "apːa", "aab", "taba", "pːa", "bba"}) {
    CAPTURE(surface);
    std::map<std::string, double> found = Weights(grammar.Recover(surface, 1000));
    for (const auto& [form, probability] : expected[Twice(surface)]) {
      CAPTURE(form);
      REQUIRE(found.count(form) == 1);
      CHECK(std::exp(-found[form]) == Approx(probability).margin(1e-5));
      ++compared;
    }
    for (const auto& [form, weight] : found) {
      const bool short_one = form.size() <= 4 && form.find_first_not_of("pbtha") == std::string::npos;
      CAPTURE(form);
      if (short_one && form.find("ː") == std::string::npos) CHECK(expected[Twice(surface)].count(form) == 1);
    }
  }
  CHECK(compared > 30);
}

TEST_CASE("recover, optional rules: sets without an end, and what is cut", "[unit]") {
  Compiled grammar =
      CompileText(std::string(kSmallInventory) + "rule \"loss\" { where X:/h/ [-syll]   delete X   optional 0.5 }\n");
  const Runner::Candidates candidates = grammar.Recover("pa", 40);
  CHECK(candidates.infinite);
  CHECK(candidates.infinite_why.find("any number of h") != std::string::npos);
  for (std::size_t i = 1; i < candidates.best.size(); ++i) {
    const Runner::Candidate &a = candidates.best[i - 1], &b = candidates.best[i];
    CHECK((a.restorations < b.restorations || (a.restorations == b.restorations && a.weight <= b.weight)));
  }
  const std::map<std::string, double> weights = Weights(candidates);
  CHECK(weights.at("hpa") == Approx(std::log(2)).margin(1e-6));
  CHECK(weights.at("p-a") == 0);
  // The one with a boundary is sure, the one with an h is not: it comes last among those with one restoration.
  const std::vector<std::string> seven = First(grammar, "pa", 7);
  CHECK(std::find(seven.begin(), seven.end(), "hpa") == seven.end());
  CHECK(First(grammar, "pa", 8).back() == "hpa");
  CHECK(grammar.Recover("pa", 1000).best.size() == 1000);
}

}  // namespace
}  // namespace tiersmith::testing
