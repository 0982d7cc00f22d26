// Optional rules: how many draws, what each outcome is, with which probability; by hand from notation.md §6, §8.
#include <algorithm>
#include <cmath>

#include "unit/graph/graph_case.h"

namespace tiersmith::testing {
namespace {

constexpr Rule::Mode kRightward = Rule::Mode::kRightward;

struct Expected {
  const char* form;
  double probability;
};
struct OptionalRow {
  Rule rule;
  const char* in;
  std::vector<Expected> outcomes;  // likeliest first
};

void CheckOutcomes(const Grammar& grammar, const std::vector<Outcome>& outcomes,
                   const std::vector<Expected>& expected) {
  REQUIRE(outcomes.size() == expected.size());
  for (std::size_t i = 0; i < expected.size(); ++i) {
    CAPTURE(i, Dump(outcomes[i].form, grammar.tree), outcomes[i].probability);
    CHECK(Dump(outcomes[i].form, grammar.tree) == Dump(FormOf(grammar, expected[i].form), grammar.tree));
    CHECK(std::abs(outcomes[i].probability - expected[i].probability) < 1e-12);
  }
}

void CheckOptional(const Grammar& grammar, const std::vector<OptionalRow>& rows) {
  for (const OptionalRow& row : rows) {
    CAPTURE(row.rule.name, row.in);
    const Application result = ApplyRule(grammar, row.rule, FormOf(grammar, row.in), true);
    CHECK(result.ambiguous + result.reaches + result.too_many == "");
    CheckOutcomes(grammar, result.outcomes, row.outcomes);
    CHECK(result.form == result.outcomes.front().form);
    CHECK((result.changed == 0) == (result.form == FormOf(grammar, row.in)));
  }
}

TEST_CASE("graph: one draw a site", "[unit]") {
  const Grammar g = SmallGrammar();
  const Rule voice = RuleBuilder(g, "A:[-son]").Set("A", "+voice").Optional(0.3);
  const Rule drop = RuleBuilder(g, "A:[+syll] #").Delete("A").Optional(0.6);
  const Rule word = RuleBuilder(g, "A:[-son]").Set("A", "+voice").Optional(0.3, /*by_word=*/true);
  const Rule phrase =
      RuleBuilder(g, "A:[-son]").Set("A", "+voice").Within(Domain::kPhrase).Optional(0.3, /*by_word=*/true);
  const Rule two = RuleBuilder(g, "( [-syll] )0-1 A:[-son]").Set("A", "+voice").Optional(0.3);
  const Rule place = RuleBuilder(g, "A:[Place -syll]").Set("A", "-ant").Optional(0.3);
  const Rule merge = RuleBuilder(g, "A:[-syll] B:[-syll]").Merge("A.Place", "B.Place").Optional(0.25);
  CheckOptional(
      g,
      {
          {voice, "t", {{"t", 0.7}, {"d", 0.3}}},
          {voice, "t a p", {{"t a p", 0.49}, {"d a p", 0.21}, {"t a b", 0.21}, {"d a b", 0.09}}},
          // No draw where nothing would change.
          {voice, "d", {{"d", 1}}},
          {voice, "d t", {{"d t", 0.7}, {"d d", 0.3}}},
          {drop, "t a", {{"t", 0.6}, {"t a", 0.4}}},
          // Several ways to one change are one site, and so are matches on one object.
          {two, "p t", {{"p t", 0.49}, {"b t", 0.21}, {"p d", 0.21}, {"b d", 0.09}}},
          {voice, "t{root:1} t{root:1}", {{"t{root:1} t{root:1}", 0.7}, {"d{root:1} d{root:1}", 0.3}}},
          {place, "n{Place:1} t{Place:1}", {{"n{Place:1} t{Place:1}", 0.7}, {"n{-ant Place:1} t{-ant Place:1}", 0.3}}},
          {place,
           "n{ant:1} t{ant:1}",
           {{"n{ant:1} t{ant:1}", 0.49}, {"n{-ant} t", 0.21}, {"n t{-ant}", 0.21}, {"n{-ant} t{-ant}", 0.09}}},
          {merge,
           "n t d",
           {{"n t d", 0.5625},
            {"n{Place:1} t{Place:1} d", 0.1875},
            {"n t{Place:1} d{Place:1}", 0.1875},
            {"n{Place:1} t{Place:1} d{Place:1}", 0.0625}}},
          // By word: one draw for all sites of a word.
          {word, "t a p", {{"t a p", 0.7}, {"d a b", 0.3}}},
          {word, "t - p # t", {{"t - p # t", 0.49}, {"d - b # t", 0.21}, {"t - p # d", 0.21}, {"d - b # d", 0.09}}},
          {phrase, "t # t ‖ t", {{"t # t ‖ t", 0.49}, {"d # d ‖ t", 0.21}, {"t # t ‖ d", 0.21}, {"d # d ‖ d", 0.09}}},
      });
}

TEST_CASE("graph: no result if one outcome is ambiguous, though others are not", "[unit]") {
  const Grammar g = SmallGrammar();
  // Each of /pc/, /cs/ takes another half of the affricate, so that only both together ask for two contents of it.
  const Rule halves = RuleBuilder(g, "A:[-son] B:[-son]").Set("A", "-cont").Set("B", "+cont").Optional(0.4);
  CheckOptional(g, {{halves, "p c", {{"p c", 0.6}, {"p s", 0.4}}}});
  const Application both = ApplyRule(g, halves, FormOf(g, "p c s"), true);
  CHECK(both.ambiguous.find("two different contents") != std::string::npos);
  CHECK(both.form == FormOf(g, "p c s"));
}

TEST_CASE("graph: a sweep draws at each visit", "[unit]") {
  const Grammar g = SmallGrammar();
  const auto spread = [&](bool by_word) {
    return RuleBuilder(g, "A:[voice] B:[no voice]")
        .Spread("A.voice", "B")
        .Mode(kRightward)
        .Optional(0.5, by_word)
        .rule();
  };
  CheckOptional(g, {
                       // Where the first is passed over, there is nothing to spread to the second.
                       {spread(false),
                        "d t{no voice} t{no voice}",
                        {{"d t{no voice} t{no voice}", 0.5},
                         {"d{voice:1} d{voice:1} d{voice:1}", 0.25},
                         {"d{voice:1} d{voice:1} t{no voice}", 0.25}}},
                       {spread(true),
                        "d t{no voice} t{no voice}",
                        {{"d{voice:1} d{voice:1} d{voice:1}", 0.5}, {"d t{no voice} t{no voice}", 0.5}}},
                       {spread(true),
                        "d t{no voice} # d t{no voice} ",
                        {{"d{voice:1} d{voice:1} # d{voice:2} d{voice:2}", 0.25},
                         {"d{voice:1} d{voice:1} # d t{no voice}", 0.25},
                         {"d t{no voice} # d{voice:2} d{voice:2}", 0.25},
                         {"d t{no voice} # d t{no voice}", 0.25}}},
                   });
}

TEST_CASE("graph: a derivation follows all outcomes", "[unit]") {
  Grammar g = SmallGrammar();
  g.rules = {RuleBuilder(g, "A:[-son]").Set("A", "+voice").Optional(0.4),
             RuleBuilder(g, "A:[+voice -son]").Set("A", "+nasal"), RuleBuilder(g, "A:[-son -nasal]").Delete("A")};
  const Derivation derivation = Derive(g, FormOf(g, "t a"), true);
  CHECK(derivation.problem == "");
  CheckOutcomes(g, derivation.outcomes, {{"a", 0.6}, {"d{+nasal} a", 0.4}});
  CHECK(derivation.surface == FormOf(g, "a"));
  REQUIRE(derivation.steps.size() == 3);
  CHECK_FALSE(derivation.steps[0].applied);
  CHECK(derivation.steps[0].after == FormOf(g, "t a"));
  CHECK(derivation.steps[2].applied);
  CHECK(derivation.steps[2].notes.changes == std::vector<std::string>{"t deleted"});

  // Two ways to one surface are summed.
  g.rules = {RuleBuilder(g, "A:[-son]").Set("A", "+voice").Optional(0.4),
             RuleBuilder(g, "A:[-son]").Set("A", "-voice")};
  CheckOutcomes(g, Derive(g, FormOf(g, "t a")).outcomes, {{"t a", 1}});

  // An outcome that a later rule is ambiguous on: there is no result.
  g.rules = {RuleBuilder(g, "A:[+nasal]").Delink("A.cont").Optional(0.4),
             RuleBuilder(g, "A:[] B:[no cont +nasal] C:[+syll]").Spread("A.cont", "B").Spread("C.cont", "B")};
  g.rules[1].name = "both";
  CHECK(Derive(g, FormOf(g, "a n i")).problem.find("rule 'both' is ambiguous here") == 0);

  // One site asks for two contents, the other does not.
  const Rule contents = RuleBuilder(g, "A:[-syll] ( [] )0-1 B:[-syll]")
                            .Insert("E", true, "A", "N")
                            .SetAs("N.Place", "B.Place")
                            .Optional(0.3);
  CHECK(ApplyRule(g, contents, FormOf(g, "t p k")).ambiguous == "two different contents asked for Place");

  g.rules = {RuleBuilder(g, "A:[-son]").Set("A", "+voice").Optional(0.4)};
  g.rules[0].name = "voicing";
  std::string many;
  for (int i = 0; i < 13; ++i) many += "t a ";
  CHECK(Derive(g, FormOf(g, many)).problem == "rule 'voicing': it is optional and may come out in more than 4096 ways");
}

}  // namespace
}  // namespace tiersmith::testing
