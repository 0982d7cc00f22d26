// Starred forms, variants, readings and length in rows of data. What passes is worked out by hand.
#include <catch2/catch.hpp>

#include "analyse/check.h"
#include "support/model_case.h"

namespace tiersmith::testing {
namespace {

const std::string kHead = std::string(kSmallTree) +
                          "segments from \"ipa\" { t d k n ŋ s i u a }\n"
                          "rule \"devoicing\" { where X:[-son] # set X [-voice] }\n";

// "pass" or why not, row by row.
std::string Verdicts(const std::string& text) {
  const Loaded loaded = LoadOrFail(kHead + text);
  const CheckResult result = Check(*loaded.grammar, loaded.grammar->data, nullptr);
  std::string all;
  for (const CheckedRow& row : result.rows) {
    all += (all.empty() ? "" : "; ") + (row.passed ? "pass" : Describe(row.explanation, *loaded.grammar)) +
           (row.reading.empty() ? "" : " (" + row.reading + ")");
  }
  return all;
}

TEST_CASE("check: starred forms must not come out", "[check]") {
  CHECK(Verdicts("data { /tad/ * [tad] }") == "pass");
  CHECK(Verdicts("data { /tad/ [tat] ~ [tad] * [tak] }") == "pass");
  CHECK(Verdicts("data { /tad/ * [tat] }") ==
        "first went wrong at rule 'devoicing': with this rule alone left out the expected form comes out");
  CHECK(Verdicts("data { /tat/ * [tat] }") == "[tat] must not come out; leaving out no single rule keeps it away");
  CHECK(Verdicts("data { /tad/ [tat] * [tat] }") ==
        "[tat] must not come out; leaving out no single rule keeps it away");
}

TEST_CASE("check: a starred form must not come out as a less likely one either", "[check]") {
  // One draw for each vowel: tata .64, tita and tati .16 each, titi .04.
  const std::string rule = "rule \"raising\" { where X:/a/  set X /i/  optional 0.2 }\n";
  CHECK(Verdicts(rule + "data { /tata/ [tata] * [tutu] }") == "pass");
  CHECK(Verdicts(rule + "data { /tata/ [tata] * [tita] }") ==
        "[tita] must not come out, and does with probability 0.16");
  CHECK(Verdicts(rule + "data { /tata/ * [tata] }") == "[tata] must not come out, and does with probability 0.64");
}

TEST_CASE("check: length is compared where the block says so", "[check]") {
  CHECK(Verdicts("data { /taː/ [taa] }") == "pass");
  CHECK(Verdicts("data comparing length { /taː/ [taː] }") == "pass");
  CHECK(Verdicts("data comparing length { /taː/ [taa] }").find("went wrong") == std::string::npos);
  CHECK(Verdicts("data comparing length { /taː/ [taa] }") != "pass");
  CHECK(Verdicts("length doubled\ndata comparing length { /taː/ [taa]  /taa/ [taː] }") == "pass; pass");
}

TEST_CASE("check: a spelled row passes by one of its readings", "[check]") {
  CHECK(Verdicts("spelling { n = ŋ before /k/ }\ndata { /taŋka/ [taŋka]  ⟨tanka⟩ [tanka] }") == "pass; pass (tanka)");
  CHECK(Verdicts("spelling { ng = ŋ; c = k }\ndata { ⟨tangad⟩ [tangat]  ⟨cac⟩ [cac] }") == "pass; pass");
}

}  // namespace
}  // namespace tiersmith::testing
