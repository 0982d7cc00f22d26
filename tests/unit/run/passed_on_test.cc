// Several changes of one match on forms that share: what comes out of both engines, by hand from grammar/notation.md §8. Whether a
// line is crossed is judged on all that a match asks for together.
#include <catch2/catch.hpp>

#include "compile/cascade_data.h"
#include "graph/interpreter.h"
#include "run/run.h"
#include "support/small_grammar.h"

namespace tiersmith::testing {
namespace {

struct Case {
  const char* in;
  const char* out;
};

void CheckBoth(Grammar grammar, const Rule& rule, const std::vector<Case>& cases) {
  grammar.rules = {rule};
  std::vector<Letter> letters;
  for (const Case& row : cases) {
    for (Letter& letter : Encode(FormOf(grammar, row.in), grammar.tree)) letters.push_back(std::move(letter));
  }
  Diagnostics diagnostics;
  const std::unique_ptr<Cascade> cascade = CompileForTesting(grammar, letters, Limits(), diagnostics);
  REQUIRE(cascade != nullptr);
  Runner runner(grammar, *cascade);
  for (const Case& row : cases) {
    CAPTURE(row.in);
    const std::string expected = Dump(FormOf(grammar, row.out), grammar.tree);
    const Application by_interpreter = ApplyRule(grammar, rule, FormOf(grammar, row.in));
    CHECK(by_interpreter.ambiguous.empty());
    CHECK(Dump(by_interpreter.form, grammar.tree) == expected);
    const Runner::Answer answer = runner.Apply(FormOf(grammar, row.in));
    CHECK_FALSE(answer.unsure);
    CHECK_FALSE(answer.ambiguous);
    REQUIRE(answer.form.has_value());
    CHECK(Dump(*answer.form, grammar.tree) == expected);
  }
}

}  // namespace

TEST_CASE("passed on: a node, and set anew", "[unit]") {
  const Grammar g = SmallGrammar();
  const Rule right = RuleBuilder(g, "X:[] Y:[]").Spread("X.nasal", "Y").Delink("Y.nasal").Set("X", "+nasal");
  CheckBoth(g, right,
            {
                // s gets t's, and t one of its own: no other holder is passed over.
                {"t s", "t{+nasal} s"},
                // t and s hold one: nothing to draw or to cut. From s to p it would be held by t and p, past s.
                {"t{nasal:1} s{nasal:1} p", "t{+nasal} s p"},
            });
  const Rule left = RuleBuilder(g, "Y:[] X:[]").Spread("X.nasal", "Y").Delink("Y.nasal").Set("X", "+nasal");
  CheckBoth(g, left, {{"t s", "t s{+nasal}"}, {"t s{nasal:1} p{nasal:1}", "t s p{+nasal}"}});
}

TEST_CASE("passed on: places exchanged", "[unit]") {
  const Grammar g = SmallGrammar();
  const Rule copied =
      RuleBuilder(g, "Y:[+nasal] X:[-son]").Spread("Y.Place", "X").Delink("X.Place").SetAs("Y.Place", "X.Place");
  CheckBoth(g, copied,
            {
                {"n p", "m t"},
                {"n{Place:1} p{Place:1}", "n{Place:1} p{Place:1}"},  // they hold one
                // d and p would hold one Place, with another between them.
                {"d{Place:1} n{Place:1} p", "d{Place:1} n{Place:1} p"},
                {"d n p", "d m t"},
            });
}

TEST_CASE("passed on: one node to two items", "[unit]") {
  const Grammar g = SmallGrammar();
  const Rule both =
      RuleBuilder(g, "X:[+nasal Place] Z:[-syll] Y:[no Place]").Spread("X.Place", "Y").Spread("X.Place", "Z");
  CheckBoth(g, both, {{"n N N", "n{Place:1} n{Place:1} n{Place:1}"}});
}

TEST_CASE("passed on: a sweep frees what the halves of the next root share", "[unit]") {
  const Grammar g = SmallGrammar();
  const Rule right = RuleBuilder(g, "X:[-syll] Y:[-syll]").Set("Y", "+syll").Mode(Rule::Mode::kRightward);
  // Of k the second half has a consonant before it, the first. It may be set, since t holds its syll no longer.
  CheckBoth(g, right, {{"p t{syll:1} k{root:2 syll:1} k{root:2} s{syll:1}", "p t{+syll} k{root:2 +syll} k{root:2} s"}});
}

}  // namespace tiersmith::testing
