// Every construct of the whole segmental notation: random rules that use it, on forms with any sharing, judged with all their
// sharing and, where rules are optional, with all outcomes and their probabilities.
#include <catch2/catch.hpp>

#include <algorithm>
#include <iostream>

#include "compile/cascade_data.h"
#include "graph/interpreter.h"
#include "letters/letter.h"
#include "run/run.h"
#include "support/agree.h"
#include "support/generate.h"
#include "support/small_grammar.h"

using namespace tiersmith;
using namespace tiersmith::testing;

namespace {

void CompareConstruct(Construct construct, std::uint64_t seed, int rules, int forms_each, Tally* tally) {
  Rng rng(seed + 1000 * static_cast<std::uint64_t>(construct));
  Grammar grammar = SmallGrammar();
  grammar.tags = {"stem", "prefix", "suffix", "clitic", "loan", "verb"};
  if (construct == Construct::kComplete) OmitSome(&grammar);
  const std::vector<NamedTest> tests = NamedTests(grammar);
  const std::vector<FeatureTree> letters = LettersOf(grammar);
  for (int i = 0; i < rules; ++i) {
    std::vector<FeatureTree> few;
    for (int k = 0; k < 4; ++k) few.push_back(letters[Below(rng, static_cast<int>(letters.size()))]);
    const Rule rule = RandomRuleWith(rng, grammar, tests, few, construct);
    FormOptions options;
    options.max_items = 6;
    options.again = 0.45;
    options.sharing = SharingFor(rng, grammar.tree, rule);
    if (construct == Construct::kDomain || construct == Construct::kStem || construct == Construct::kTags ||
        construct == Construct::kSameMorpheme || construct == Construct::kBoundary ||
        construct == Construct::kBoundaryAtEnd) {
      options.boundary = 0.3;
    }
    if (construct == Construct::kLengthen || construct == Construct::kShorten) options.empty = 0.1;
    std::vector<Form> forms;
    for (int k = 0; k < forms_each; ++k) {
      const Form form = RandomForm(rng, grammar, few, options);
      forms.push_back(Canonical(AsksForTags(rule) ? WithTags(rng, form) : form));
    }
    grammar.rules = {rule};
    const std::optional<std::string> failure = CompareRule(grammar, forms, 5, tally);
    if (!failure.has_value()) continue;
    FAIL_CHECK(NameOf(construct) << ", rule " << i << " of seed " << seed << ": " << *failure);
    return;
  }
}

// Grammars compiled as users compile them, some of whose tiers are fused when forms are read.
void CompareFusing(std::uint64_t seed, std::uint64_t wanted, std::size_t forms_each, Tally* tally) {
  Rng rng(seed);
  int refused = 0;
  while (tally->rules < wanted) {
    Grammar grammar = RandomGrammar(rng, 3);
    for (const char* node : {"Place", "Laryngeal", "voice", "Coronal"}) {
      if (Chance(rng, 0.4)) grammar.fusions.push_back({NodeOf(grammar, node), std::nullopt, {}});
    }
    if (Chance(rng, 0.2)) grammar.fusions.push_back({kRootNode, std::nullopt, {}});
    const std::vector<Form> forms = TypedForms(rng, grammar, forms_each);
    DataRow row;
    row.underlying = PrintForm(grammar, forms[0]);
    row.surfaces = {row.underlying};
    grammar.data = {row};
    bool compiled = false;
    const std::optional<std::string> failure = CompareGrammar(grammar, forms, tally, &compiled);
    if (failure.has_value()) FAIL("grammar " << tally->rules << " of seed " << seed << ": " << *failure);
    REQUIRE((refused += !compiled) < 400);
  }
}

}  // namespace

TEST_CASE("random grammars that fuse", "[agreement]") {
  Tally tally;
  CompareFusing(SeedOr(20261209), 60, 200, &tally);
  std::cout << "fuse: " << tally.rules << " grammars, " << tally.pairs << " pairs, " << tally.changed << " changed\n";
  CHECK(tally.changed >= 1'000);
}

namespace {

// A pattern of any shape, without labels.
Pattern RandomPattern(Rng& rng, const Grammar& grammar, const std::vector<NamedTest>& tests,
                      const std::vector<FeatureTree>& letters) {
  Pattern pattern = RandomRule(rng, grammar, tests, letters).where;
  const auto take_labels = [](const auto& self, Pattern* from) -> void {
    for (PatternItem& item : from->items) {
      item.label = -1;
      for (Pattern& alternative : item.alternatives) self(self, &alternative);
    }
  };
  take_labels(take_labels, &pattern);
  NoteEmpty(&pattern);
  return pattern;
}

// One fusion in a pattern and nothing else, judged with all sharing.
void CompareFusionInPattern(Rng& rng, Grammar grammar, int forms_each, Tally* tally) {
  const std::vector<FeatureTree> letters = LettersOf(grammar);
  std::vector<FeatureTree> few;
  for (int i = 0; i < 4; ++i) few.push_back(letters[Below(rng, static_cast<int>(letters.size()))]);
  const auto node =
      static_cast<NodeId>(kRootNode + Below(rng, static_cast<int>(grammar.tree.nodes.size()) - kRootNode));
  grammar.fusions = {{node, RandomPattern(rng, grammar, NamedTests(grammar), few), {}}};
  FormOptions options;
  options.max_items = 7;
  options.again = 0.45;
  options.boundary = 0.2;
  options.sharing = {kRootNode};  // as forms are typed
  std::vector<Form> forms;
  std::vector<Letter> encoded;
  for (int i = 0; i < forms_each; ++i) {
    forms.push_back(Canonical(RandomForm(rng, grammar, few, options)));
    for (Letter& letter : Encode(forms.back(), grammar.tree)) encoded.push_back(std::move(letter));
  }
  Diagnostics diagnostics;
  const std::unique_ptr<Cascade> cascade = CompileForTesting(grammar, encoded, Limits(), diagnostics);
  REQUIRE(cascade != nullptr);
  Runner runner(grammar, *cascade);
  ++tally->rules;
  for (const Form& form : forms) {
    const Form fused = Fused(grammar, form);
    const Runner::Answer answer = runner.Apply(form);
    INFO("fuse " << grammar.tree[node].name << ", grammar " << tally->rules << "\n" << Dump(form, grammar.tree));
    REQUIRE(answer.form.has_value());
    REQUIRE(Dump(*answer.form, grammar.tree) == Dump(fused, grammar.tree));
    ++tally->pairs;
    tally->changed += !(fused == form);
  }
}

}  // namespace

TEST_CASE("random fusions in patterns", "[agreement]") {
  Tally tally;
  Rng rng(SeedOr(20261211));
  for (int i = 0; i < 150; ++i) CompareFusionInPattern(rng, SmallGrammar(), 120, &tally);
  std::cout << "fuse in: " << tally.rules << " fusions, " << tally.pairs << " pairs, " << tally.changed << " changed\n";
  CHECK(tally.changed >= 1'000);
}

namespace {

void CompareAll(std::uint64_t seed, int rules, int forms_each, std::uint64_t least) {
  std::cout << "constructs: seed " << seed << "\n";
  const char* only = std::getenv("TIERSMITH_CONSTRUCT");
  std::uint64_t pairs = 0;
  for (Construct construct : AllConstructs()) {
    if (only != nullptr && std::string(NameOf(construct)).find(only) == std::string::npos) continue;
    Tally tally;
    CompareConstruct(construct, seed, rules, forms_each, &tally);
    pairs += tally.pairs;
    std::cout << NameOf(construct) << ": " << tally.rules << " rules, " << tally.pairs << " pairs, " << tally.changed
              << " changed, " << tally.ambiguous + tally.reaching << " refused by both, " << tally.over_budget
              << " over budget, " << tally.too_many << " with too many outcomes, " << tally.unsure
              << " not compilable, sums within " << tally.worst_sum;
    for (const auto& [reason, count] : tally.blocked) std::cout << ", " << count << " failed for " << reason;
    std::cout << std::endl;
    CHECK(tally.changed >= least);
    if (construct == Construct::kPrefer) CHECK(tally.blocked["prefer"] >= 100);
    if (construct == Construct::kPreserving) CHECK(tally.blocked["preserving"] >= 100);
    if (construct == Construct::kSharingBlocked) CHECK(tally.blocked["sharing"] >= 100);
    CHECK(tally.worst_sum < 1e-6);
  }
  std::cout << "constructs: " << pairs << " pairs\n";
}

}  // namespace

TEST_CASE("random rules with each construct of the notation", "[agreement]") {
  CompareAll(SeedOr(20261208), 120, 120, 250);
}

TEST_CASE("the long run: each construct of the notation", "[.long][agreement]") {
  CompareAll(SeedOr(20261210), 800, 300, 2'000);
}
