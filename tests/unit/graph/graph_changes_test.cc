// Each change in each mode, worked out by hand from the meaning of rules (grammar/notation.md §6, §8).
#include "unit/graph/graph_case.h"

namespace tiersmith::testing {
namespace {

constexpr Rule::Mode kAtOnce = Rule::Mode::kAtOnce;
constexpr Rule::Mode kRightward = Rule::Mode::kRightward;
constexpr Rule::Mode kLeftward = Rule::Mode::kLeftward;

TEST_CASE("graph: spread, mode by mode", "[unit]") {
  const Grammar g = SmallGrammar();
  const auto rule = [&](Rule::Mode mode) {
    return RuleBuilder(g, "A:[voice] B:[no voice]").Spread("A.voice", "B").Mode(mode).rule();
  };
  const char* in = "d t{no voice} t{no voice}";
  CheckRows(g, {
                   {rule(kAtOnce), in, "d{voice:1} d{voice:1} t{no voice}"},
                   // The second t sees the first, which has just been given voice; one voice in the end.
                   {rule(kRightward), in, "d{voice:1} d{voice:1} d{voice:1}"},
                   // The second t is visited while the first has no voice yet.
                   {rule(kLeftward), in, "d{voice:1} d{voice:1} t{no voice}"},
                   {rule(kAtOnce), "t{no voice} d", "t{no voice} d"},
                   {RuleBuilder(g, "N:[+nasal no Place] C:[Place]").Spread("C.Place", "N"), "a N p a",
                    "a m{Place:1} p{Place:1} a"},
                   // Place and Dorsal are made once for two spreads; only the features are shared.
                   {RuleBuilder(g, "A:[+syll] B:[no Place]").Spread("A.back", "B").Spread("A.high", "B"), "a E",
                    "a{back:1 high:1} a{back:1 high:1}"},
                   // Spreading what the source does not bear changes nothing and stops nothing.
                   {RuleBuilder(g, "A:[] B:[]").Spread("A.Place", "B").Delete("A"), "E p", "p"},
               });
}

TEST_CASE("graph: delink, mode by mode", "[unit]") {
  const Grammar g = SmallGrammar();
  const auto rule = [&](Rule::Mode mode) {
    return RuleBuilder(g, "B:[voice] A:[voice]").Delink("A.voice").Mode(mode).rule();
  };
  CheckRows(g, {
                   {rule(kAtOnce), "d d d", "d d{no voice} d{no voice}"},
                   {rule(kRightward), "d d d", "d d{no voice} d"},
                   {rule(kLeftward), "d d d", "d d{no voice} d{no voice}"},
                   // With the voice goes the bare Laryngeal, but not a bare articulator.
                   {RuleBuilder(g, "A:[ant]").Delink("A.ant"), "t", "t{no ant}"},
                   {RuleBuilder(g, "A:[-son]").Delink("A.Place"), "t N", "t{no Place} N"},
                   {RuleBuilder(g, "A:[+nasal]").Delink("A.Place"), "N", "N"},
                   // All members of a contour go.
                   {RuleBuilder(g, "A:[-son]").Delink("A.cont"), "c", "c{no cont}"},
                   // The slot stays.
                   {RuleBuilder(g, "A:[-son]").Delink("A.root"), "t a", "_ a"},
               });
}

TEST_CASE("graph: set and fill, mode by mode", "[unit]") {
  const Grammar g = SmallGrammar();
  const auto set = [&](Rule::Mode mode) {
    return RuleBuilder(g, "A:[-son] B:[-son +voice]").Set("A", "+voice").Mode(mode).rule();
  };
  const auto fill = [&](Rule::Mode mode) {
    return RuleBuilder(g, "A:[-son no voice] B:[-son +voice]").Fill("A", "+voice").Mode(mode).rule();
  };
  CheckRows(g,
            {
                {set(kAtOnce), "t t d", "t d d"},
                {set(kLeftward), "t t d", "d d d"},
                {set(kRightward), "t t d", "t d d"},
                {fill(kAtOnce), "t{no voice} t{no voice} d", "t{no voice} d d"},
                {fill(kLeftward), "t{no voice} t{no voice} d", "d d d"},
                {fill(kRightward), "t{no voice} t{no voice} d", "t{no voice} d d"},
                {RuleBuilder(g, "A:[-son]").Fill("A", "+voice"), "t", "t"},
                // A bundle: values, class nodes on the way, one taken away.
                {RuleBuilder(g, "A:[-son]").Set("A", "no Labial Coronal -ant"), "p", "t{-ant}"},
                {RuleBuilder(g, "A:[+nasal]").Fill("A", "Coronal +ant"), "N m", "n m{Coronal +ant}"},
                {RuleBuilder(g, "A:[+nasal]").Fill("A", "Coronal"), "N", "n{no ant}"},
                {RuleBuilder(g, "A:[+nasal]").Set("A", "Coronal"), "n", "n"},
                {RuleBuilder(g, "A:[-son]").Set("A", "no Place"), "t p", "t{no Place} p{no Place}"},
                // A contour, in the order given; what has no room for it is blocked.
                {RuleBuilder(g, "A:[-son]").Set("A", "-cont +cont"), "t c", "c c"},
                {RuleBuilder(g, "A:[+son]").Set("A", "-cont +cont"), "a", "a", "", "capacity"},
                // A slot without a root gets one.
                {RuleBuilder(g, "A:empty").Set("A", "+voice"), "_ a", "E{no cons no son no syll no nasal no cont} a"},
            });
}

TEST_CASE("graph: insert, mode by mode", "[unit]") {
  const Grammar g = SmallGrammar();
  const auto rule = [&](Rule::Mode mode) {
    return RuleBuilder(g, "A:[-syll] B:[-syll] C:[-syll]").Insert("i", true, "B").Mode(mode).rule();
  };
  CheckRows(g, {
                   {rule(kAtOnce), "t p k s", "t i p i k s"},
                   {rule(kRightward), "t p k s", "t i p i k s"},
                   // The i before k comes first and takes p's right neighbour away.
                   {rule(kLeftward), "t p k s", "t p i k s"},
                   {RuleBuilder(g, "A:[-syll] - B:[-syll]").Insert("E", true, "B"), "t - p", "t - E p"},
                   {RuleBuilder(g, "A:[-syll] - B:[-syll]").Insert("E", false, "A"), "t - p", "t E - p"},
                   {RuleBuilder(g, "A:[-syll]").Insert("i", true, "A").Insert("u", true, "A").Insert("a", false, "A"),
                    "t", "i u t a"},
                   // Asked twice of one host, it is one.
                   {RuleBuilder(g, "[+syll] A:[-syll] ( [-syll] )").Insert("E", false, "A"), "a t p", "a t E p"},
                   // What was inserted is not visited.
                   {RuleBuilder(g, "A:[+syll]").Insert("a", false, "A").Mode(kRightward), "a", "a a"},
               });
}

TEST_CASE("graph: delete, mode by mode", "[unit]") {
  const Grammar g = SmallGrammar();
  const auto rule = [&](Rule::Mode mode) {
    return RuleBuilder(g, "[+syll] [-syll] W:[+syll] [-syll] [+syll]").Delete("W").Mode(mode).rule();
  };
  CheckRows(g, {
                   {rule(kAtOnce), "t a t i t u t a", "t a t t t a"},
                   {rule(kRightward), "t a t i t u t a", "t a t t u t a"},
                   {rule(kLeftward), "t a t i t u t a", "t a t i t t a"},
                   // One slot of a long one.
                   {RuleBuilder(g, "A:[+syll] B:[+syll]").Delete("A"), "i{root:1} i{root:1}", "i"},
                   {RuleBuilder(g, "A:[-syll] -").Delete("A"), "a t - p a", "a - p a"},
               });
}

TEST_CASE("graph: a derivation erases empty slots at its end and stops at a problem", "[unit]") {
  Grammar g = SmallGrammar();
  g.rules = {RuleBuilder(g, "A:[-son]").Delink("A.root"), RuleBuilder(g, "A:[+syll] B:empty").Spread("A.root", "B")};
  const Derivation derivation = Derive(g, FormOf(g, "t a t t"), true);
  CHECK(derivation.problem == "");
  REQUIRE(derivation.steps.size() == 2);
  CHECK(derivation.steps[0].applied);
  CHECK(derivation.steps[0].after == FormOf(g, "_ a _ _"));
  CHECK(derivation.steps[1].after == FormOf(g, "_ a{root:1} a{root:1} _"));
  CHECK(derivation.surface == FormOf(g, "a{root:1} a{root:1}"));

  g.rules = {RuleBuilder(g, "A:[+nasal]").Set("A", "+voice"),
             RuleBuilder(g, "A:[+nasal]").Set("A", "no Coronal Labial").Mode(kRightward)};
  g.rules[1].name = "labial";
  const Derivation stopped = Derive(g, FormOf(g, "n{Place:1} t{Place:1}"), true);
  REQUIRE(stopped.steps.size() == 2);
  CHECK_FALSE(stopped.steps[0].applied);
  CHECK(stopped.problem.find("'labial'") != std::string::npos);
}

}  // namespace
}  // namespace tiersmith::testing
