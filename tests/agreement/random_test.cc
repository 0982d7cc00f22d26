// Random grammars of one to six rules, compiled as users compile them, and random rules on forms with any sharing, judged with all
// their sharing. Seeds are fixed and printed; TIERSMITH_SEED gives another.
#include <catch2/catch.hpp>

#include <algorithm>
#include <iostream>

#include "support/agree.h"
#include "support/generate.h"
#include "support/small_grammar.h"

using namespace tiersmith;
using namespace tiersmith::testing;

namespace {

void CompareGrammars(std::uint64_t seed, std::uint64_t wanted, std::size_t forms_each, Tally* tally) {
  std::cout << "random grammars: seed " << seed << "\n";
  Rng rng(seed);
  std::uint64_t refused = 0;
  while (tally->rules < wanted) {
    Grammar grammar = RandomGrammar(rng, 6);
    const std::vector<Form> forms = TypedForms(rng, grammar, forms_each);
    // With data, a tree without a symbol that no datum reaches is a warning.
    DataRow row;
    row.underlying = PrintForm(grammar, forms[0]);
    row.surfaces = {row.underlying};
    grammar.data = {row};
    bool compiled = false;
    const std::optional<std::string> failure = CompareGrammar(grammar, forms, tally, &compiled);
    if (failure.has_value()) FAIL("grammar " << tally->rules << " of seed " << seed << ": " << *failure);
    refused += !compiled;
    REQUIRE(refused < 3 * wanted + 10);
  }
  std::cout << "random grammars: " << refused
            << " refused (ambiguous, reaching another root, or no symbol for the datum); " << tally->Report();
}

void CompareRandomRules(std::uint64_t seed, int rules, int forms_each, bool sharing, Tally* tally) {
  std::cout << "random rules: seed " << seed << "\n";
  Rng rng(seed);
  Grammar grammar = SmallGrammar();
  const std::vector<NamedTest> tests = NamedTests(grammar);
  const std::vector<FeatureTree> letters = LettersOf(grammar);
  for (int i = 0; i < rules; ++i) {
    std::vector<FeatureTree> few;
    for (int k = 0; k < 5; ++k) few.push_back(letters[Below(rng, static_cast<int>(letters.size()))]);
    const Rule rule = RandomRule(rng, grammar, tests, few);
    FormOptions options;
    options.max_items = 6;
    if (sharing) {
      options.sharing = SharingFor(rng, grammar.tree, rule);
    } else {
      options.geminate = options.share = 0;
    }
    std::vector<Form> forms;
    for (int k = 0; k < forms_each; ++k) forms.push_back(Canonical(RandomForm(rng, grammar, few, options)));
    grammar.rules = {rule};
    const std::optional<std::string> failure = CompareRule(grammar, forms, 10, tally);
    if (failure.has_value()) FAIL("rule " << i << " of seed " << seed << ": " << *failure);
  }
  std::cout << "random rules: " << tally->Report();
  CHECK(tally->over_budget * 50 <= tally->rules);
}

}  // namespace

TEST_CASE("random grammars of one to six rules", "[agreement]") {
  Tally tally;
  CompareGrammars(SeedOr(20261202), 500, 1'000, &tally);
  CHECK(tally.pairs >= 500'000);
  CHECK(tally.ChangedShare() >= 0.5);
  for (const char* op : {"spread", "delink", "set", "fill", "insert", "delete"}) {
    for (const char* mode : {"at once", "rightward", "leftward"}) {
      INFO(op << " " << mode);
      CHECK(tally.Applied(op, mode) >= 1'000);
    }
  }
}

TEST_CASE("random rules, nothing shared", "[agreement]") {
  Tally tally;
  CompareRandomRules(SeedOr(20261203), 4'000, 200, /*sharing=*/false, &tally);
}

TEST_CASE("random rules on forms that share", "[agreement]") {
  Tally tally;
  CompareRandomRules(SeedOr(20261204), 800, 200, /*sharing=*/true, &tally);
}

TEST_CASE("the long run: random grammars on more forms, more random rules", "[.long][agreement]") {
  Tally grammars;
  CompareGrammars(SeedOr(20261205), 500, 3'000, &grammars);
  CHECK(grammars.pairs >= 1'500'000);
  CHECK(grammars.ChangedShare() >= 0.5);
  Tally plain, sharing;
  CompareRandomRules(SeedOr(20261206), 12'000, 200, /*sharing=*/false, &plain);
  CompareRandomRules(SeedOr(20261207), 2'000, 200, /*sharing=*/true, &sharing);
}
