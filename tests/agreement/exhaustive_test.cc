// All rules of small shapes on all short forms: each change x at once, rightward, leftward x adjacent, gap, with items from six
// named bundles; forms up to five items over a small inventory, without and with sharing. Smallest first. A disagreement
// is printed as a .tier file to replay.
#include <catch2/catch.hpp>

#include <iostream>

#include "support/agree.h"
#include "support/generate.h"
#include "support/small_grammar.h"

using namespace tiersmith;
using namespace tiersmith::testing;

namespace {

std::vector<FeatureTree> Contents(const Grammar& grammar, const std::vector<std::string>& symbols) {
  std::vector<FeatureTree> contents;
  for (const std::string& symbol : symbols) contents.push_back(ContentOfSymbol(grammar, symbol));
  return contents;
}

std::vector<Form> AllForms(const Grammar& grammar, const std::vector<std::string>& symbols,
                           const AllFormsOptions& options) {
  std::vector<Form> forms;
  ForEachForm(grammar, Contents(grammar, symbols), options, [&](const Form& form) {
    forms.push_back(form);
    return true;
  });
  return forms;
}

// Every `step`-th rule with this many items.
void CompareRules(const std::vector<Form>& forms, int min_items, int max_items, int step, Tally* tally) {
  Grammar grammar = SmallGrammar();
  AllRulesOptions options = SmallRules(grammar);
  options.min_items = min_items;
  options.max_items = max_items;
  int number = 0;
  std::optional<std::string> failure;
  ForEachRule(grammar, options, [&](const Rule& rule) {
    if (number++ % step != 0) return true;
    Grammar with_rule = grammar;
    with_rule.rules = {rule};
    failure = CompareRule(with_rule, forms, 20, tally);
    return !failure.has_value();
  });
  if (failure.has_value()) FAIL("rule " << number - 1 << ": " << *failure);
}

std::vector<Form> PlainForms() {
  AllFormsOptions options;
  options.max_items = 5;
  options.boundaries = {Boundary::kMorpheme};
  return AllForms(SmallGrammar(), {"n", "d", "T", "E"}, options);
}

std::vector<Form> SharingForms(int max_items) {
  const Grammar grammar = SmallGrammar();
  AllFormsOptions options;
  options.max_items = max_items;
  options.sharing = {kRootNode, NodeOf(grammar, "Place"), NodeOf(grammar, "voice")};
  std::vector<Form> forms = AllForms(grammar, {"n", "d", "T"}, options);
  // The longest ones over fewer letters.
  options.max_items = 5;
  options.sharing = {NodeOf(grammar, "Place"), NodeOf(grammar, "voice")};
  for (Form& form : AllForms(grammar, {"n", "d"}, options)) {
    if (form.items.size() == 5) forms.push_back(std::move(form));
  }
  return forms;
}

void CheckTally(const std::string& name, const Tally& tally) {
  std::cout << name << ": " << tally.Report();
  CHECK(tally.ChangedShare() >= 0.5);
}

}  // namespace

TEST_CASE("all rules of up to two items, nothing shared", "[agreement]") {
  Tally tally;
  CompareRules(PlainForms(), 1, 2, 1, &tally);
  CheckTally("exhaustive, plain, two items", tally);
  CHECK(tally.pairs >= 3'000'000);
  CHECK(tally.over_budget == 0);
  for (const char* op : {"spread", "delink", "set", "fill", "insert", "delete"}) {
    for (const char* mode : {"at once", "rightward", "leftward"}) {
      INFO(op << " " << mode);
      CHECK(tally.Applied(op, mode) >= 1'000);
    }
  }
}

TEST_CASE("every 61st rule of three items, nothing shared", "[agreement]") {
  Tally tally;
  CompareRules(PlainForms(), 3, 3, 61, &tally);
  CheckTally("exhaustive, plain, three items", tally);
}

TEST_CASE("every ninth rule of up to two items, with all ways of sharing", "[agreement]") {
  Tally tally;
  CompareRules(SharingForms(3), 1, 2, 9, &tally);
  CheckTally("exhaustive, sharing, two items", tally);
}

TEST_CASE("the long run: more rules of three items, more sharing", "[.long][agreement]") {
  Tally tally;
  CompareRules(PlainForms(), 3, 3, 23, &tally);
  CompareRules(SharingForms(3), 1, 2, 5, &tally);
  CompareRules(SharingForms(3), 3, 3, 801, &tally);
  CheckTally("exhaustive, long", tally);
  CHECK(tally.pairs >= 2'700'000);  // with the random long run, 5,000,000
}
