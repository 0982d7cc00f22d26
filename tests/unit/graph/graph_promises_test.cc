// What holds of every rule on every form: the graph that comes out keeps its promises, opposites are opposites, the
// outcomes of an optional rule sum to one and have the result of the obligatory rule among them.
#include <algorithm>
#include <cmath>

#include "support/generate.h"
#include "unit/graph/graph_case.h"

namespace tiersmith::testing {
namespace {

std::vector<Form> Forms(const Grammar& grammar, int count, double empty) {
  Rng rng(20261201);
  FormOptions options;
  options.max_items = 7;
  options.empty = empty;
  std::vector<Form> forms;
  for (int i = 0; i < count; ++i) forms.push_back(RandomForm(rng, grammar, LettersOf(grammar), options));
  return forms;
}

std::vector<Rule> Rules(const Grammar& g) {
  const auto rule = [&](const char* where) { return RuleBuilder(g, where); };
  const char* two = "A:[-syll] B:[-syll]";
  const char* gap = "A:[+syll] ... B:[+syll]";
  return {
      rule(two).SetAs("A.Place", "B.Place"),
      rule(two).SetAs("B.cont", "A.cont"),
      rule(two).FillAs("A.voice", "B.voice"),
      rule(two).SetAs("A.root", "B.root"),
      rule(gap).SetAs("B.back", "A.back"),
      rule("A:[-syll]").SetLiteral("A", "n"),
      rule("A:[-syll] [+syll]").SetLiteral("A", "pː"),
      rule("A:[half1]").SetLiteral("A", "iː"),
      rule("A:[+syll]").Lengthen("A"),
      rule("A:[long]").Shorten("A"),
      rule("A:[] N:[+nasal]").Lengthen("A").Delete("N"),
      rule(two).Merge("A.Place", "B.Place"),
      rule(two).Merge("B.cont", "A.cont"),
      rule("A:[] B:[]").Merge("A.root", "B.root"),
      rule(gap).Merge("A.Dorsal", "B.Dorsal"),
      rule("A:[-syll αvoice] B:[-syll -αvoice]").Set("B", "αvoice"),
      rule("A:[+syll αPlace] ( [-syll] )0- B:[+syll]").Set("B", "αPlace"),
      rule(two).Insert("E", true, "B", "N").Spread("A.Place", "N"),
      rule(two).Insert("T", true, "B", "N").SetAs("N.voice", "B.voice").Spread("N.Place", "B").Delink("B.Place"),
      rule("A:[+syll] B:[-syll]").Insert("iː", false, "A", "N").Set("N", "+nasal"),
      rule("A:[-son]").Delink("A.-cont"),
      rule("B:[+syll] A:[-son]").Spread("B.cont", "A").Delink("A.cont/first"),
      rule("A:[] B:- C:[]").Delete("B"),
      rule("A:[+syll] B:# C:[]").Delete("B").Delete("A").Within(Domain::kPhrase),
      rule("A:[shared> Place]").Delink("A.Place").Otherwise("A:[unshared Place]").Set("A", "-ant"),
      rule("A:[-son]").Set("A", "+voice").SharingBlocked(),
      rule("A:[-syll] B:[-syll]").Spread("B.Place", "A").Delink("A.Place").Preserving(),
      rule("( [] )0-1 A:[back] B:[+syll] ( [] )0-1").SetAs("B.back", "A.back").Prefer(Rule::Prefer::kLeft),
  };
}

TEST_CASE("graph: whatever a rule does, the form keeps its promises", "[unit]") {
  const Grammar g = SmallGrammar();
  const std::vector<Form> forms = Forms(g, 400, 0);  // a root may be held across an empty slot, until that is erased
  for (Rule rule : Rules(g)) {
    int changed = 0;
    for (const Rule::Mode mode : {Rule::Mode::kAtOnce, Rule::Mode::kRightward, Rule::Mode::kLeftward}) {
      if (mode != Rule::Mode::kAtOnce && rule.changes.front().target != rule.changes.back().target) continue;
      rule.mode = mode;
      for (const Form& form : forms) {
        const Application result = ApplyRule(g, rule, form, true);
        if (!result.ambiguous.empty() || !result.reaches.empty()) continue;
        changed += result.form == Canonical(form) ? 0 : 1;
        const std::string defects = Defects(result.form, g.tree);
        if (defects.empty()) continue;
        CAPTURE(rule.name, static_cast<int>(mode), Dump(form, g.tree), Dump(result.form, g.tree));
        CHECK(defects == "");
      }
    }
    CAPTURE(rule.name);
    CHECK(changed > 0);
  }
}

TEST_CASE("graph: an optional rule applies wholly, in part or not", "[unit]") {
  const Grammar g = SmallGrammar();
  const std::vector<Form> forms = Forms(g, 150, 0.05);
  for (Rule rule : Rules(g)) {
    for (const bool by_word : {false, true}) {
      for (const Form& form : forms) {
        rule.probability = 1;
        const Application whole = ApplyRule(g, rule, form);
        rule.probability = 0.3;
        rule.by_word = by_word;
        const Application optional = ApplyRule(g, rule, form);
        if (!whole.ambiguous.empty()) CHECK_FALSE(optional.ambiguous.empty());
        if (!optional.ambiguous.empty()) continue;
        double sum = 0;
        bool all = false, none = false;
        for (const Outcome& outcome : optional.outcomes) {
          sum += outcome.probability;
          all |= outcome.form == whole.form;
          none |= outcome.form == Canonical(form);
        }
        if (all && none && std::abs(sum - 1) < 1e-9) continue;
        CAPTURE(rule.name, by_word, Dump(form, g.tree), Dump(whole.form, g.tree), sum);
        CHECK(all);
        CHECK(none);
        CHECK(std::abs(sum - 1) < 1e-9);
      }
    }
  }
}

TEST_CASE("graph: a condition and its opposite share out the matches", "[unit]") {
  const Grammar g = SmallGrammar();
  const auto changed = [&](const Rule& rule, const Form& form) { return ApplyRule(g, rule, form).changed; };
  for (const char* node : {"Place", "voice", "cont", "root"}) {
    const auto rule = [&](const char* test) {
      const std::string condition = std::string("A.") + node + " " + test + " B." + node;
      return RuleBuilder(g, "A:[] B:[]").If(condition).Insert("E", true, "B").Insert("a", false, "A").rule();
    };
    const Rule free = RuleBuilder(g, "A:[] B:[]").Insert("E", true, "B").Insert("a", false, "A");
    for (const Form& form : Forms(g, 150, 0.05)) {
      CAPTURE(node, Dump(form, g.tree));
      // What is inserted fails for crossing or not, with the condition as without it.
      CHECK(changed(rule("="), form) + changed(rule("≠"), form) == changed(free, form));
      CHECK(changed(rule("is"), form) + changed(rule("isnot"), form) == changed(free, form));
    }
  }
}

}  // namespace
}  // namespace tiersmith::testing
