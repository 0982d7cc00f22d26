// Cases on which the two engines once differed, found by the random agreement tests and made small. What comes out is derived by hand
// from grammar/notation.md and said beside each; the grammar is the small one of tests/support.
#include <catch2/catch.hpp>

#include "graph/interpreter.h"
#include "support/agree.h"
#include "support/small_grammar.h"

namespace tiersmith::testing {
namespace {

// The interpreter gives this form, and the machine what the interpreter gives.
void CheckForms(const Rule& rule, const Form& before, const Form& after) {
  Grammar grammar = SmallGrammar();
  grammar.rules = {rule};
  const Application applied = ApplyRule(grammar, rule, before);
  CHECK(applied.ambiguous == "");
  CHECK(Dump(applied.form, grammar.tree) == Dump(after, grammar.tree));
  Tally tally;
  CHECK(CompareRule(grammar, {before}, 1, &tally).value_or("") == "");
  CHECK(tally.pairs == 1);
}

void CheckBoth(const Rule& rule, const std::string& before, const std::string& after) {
  CAPTURE(rule.name, before);
  const Grammar grammar = SmallGrammar();
  CheckForms(rule, FormOf(grammar, before), FormOf(grammar, after));
}

// Both refuse it.
void CheckAmbiguous(const Rule& rule, const std::string& before) {
  CAPTURE(rule.name, before);
  Grammar grammar = SmallGrammar();
  grammar.rules = {rule};
  Tally tally;
  CHECK(CompareRule(grammar, {FormOf(grammar, before)}, 1, &tally).value_or("") == "");
  CHECK(tally.ambiguous == 1);
}

// The interpreter runs it; the machine says that it cannot.
void CheckRefused(const Rule& rule, const Form& form) {
  Grammar grammar = SmallGrammar();
  grammar.rules = {rule};
  CHECK(ApplyRule(grammar, rule, form).ambiguous == "");
  Tally tally;
  CHECK(CompareRule(grammar, {form}, 1, &tally).value_or("") == "");
  CHECK(tally.unsure == 1);
}

}  // namespace

TEST_CASE("found by chance: one clause spreads what another changes", "[unit]") {
  // Lines before contents: what spreads is the Place of d, to which Labial is given, whoever holds it then and whether d stays.
  const Grammar g = SmallGrammar();
  const auto to_vowel = [&](const char* where) {
    return RuleBuilder(g, where)
        .Spread("Y.Place", "Z")
        .Delink("Z.Place")
        .Otherwise("Y:[+voice -syll]")
        .Set("Y", "Labial");
  };
  const char* const vowel = "a{no Dorsal Labial Coronal +ant Place:1}";
  CheckBoth(to_vowel("Y:[Place] Z:[+syll]"), "p d a", std::string("p d{Labial Place:1} ") + vowel);
  CheckBoth(to_vowel("Y:[Place] Z:[+syll]").Delete("Y"), "p d a", std::string("p ") + vowel);
  CheckBoth(to_vowel("Z:[+syll] Y:[Place]"), "p a d", std::string("p ") + vowel + " d{Labial Place:1}");
  CheckBoth(to_vowel("Z:[+syll] Y:[Place]").Delete("Y"), "p a d", std::string("p ") + vowel);
  // Two changes of one root: a line to its first half, a content to its second. The content is asked of what the line replaces.
  CheckBoth(RuleBuilder(g, "X:[Dorsal] Y:[no Dorsal]")
                .Spread("X.Dorsal", "Y")
                .Otherwise("X:[-syll]")
                .Set("X", "+high")
                .Mode(Rule::Mode::kRightward),
            "a p{root:1} p{root:1}", "a{Dorsal:2} p{root:1 Dorsal -high +back Dorsal:2} p{root:1}");
}

TEST_CASE("found by chance: one draw of several is ambiguous", "[unit]") {
  // Where the first E takes what the long one has, and that one what its second half has, lines would cross.
  const Grammar g = SmallGrammar();
  CheckAmbiguous(RuleBuilder(g, "X:[voice] ( [] )0-1 Y:[Laryngeal]")
                     .Spread("Y.Laryngeal", "X")
                     .Delink("X.Laryngeal")
                     .Insert("t", true, "X")
                     .Optional(0.3),
                 "E E{root:1} E{root:1}");
}

TEST_CASE("found by chance: what spreads from an item that is set", "[unit]") {
  const Grammar g = SmallGrammar();
  const auto rule = [&](const char* where) {
    return RuleBuilder(g, where).Spread("X.son", "Y").Delink("Y.son").Set("X", "+son");
  };
  CheckBoth(rule("X:[-son] Y:[-son]"), "b p", "b{+son} p");
  // It spreads past a bearer before X has something new: the match fails.
  CheckBoth(rule("X:[-son] [] Y:[-son]"), "b p d", "b p d");
  CheckBoth(rule("X:[son] ...Coronal Y:[-cont]").Set("X", "Dorsal").SharingBlocked(),
            "i b b{root:1 Place:2} b{root:1} b{Place:2}", "i{son:3} b{son:3} b{root:1 Place:2} b{root:1} b{Place:2}");
  // Where X has something new, the line from one side of it to the other would cross: of the two matches one fails.
  CheckBoth(rule("X:[-son] Y:[-son]"), "b{son:1} d{son:1} p", "b{+son} d p");
  CheckBoth(rule("Y:[-son] X:[-son]"), "b d{son:1} p{son:1}", "b d p{+son}");
}

TEST_CASE("found by chance: a new root for half of a long contour", "[unit]") {
  // The first half of ts cannot have a new root: the other half and the neighbour hold one -cont (+cont), and N has another.
  const Grammar g = SmallGrammar();
  for (const char* form : {"N{cont:1} c{root:2 cont:1} c{root:2}", "c{root:2} c{root:2 cont/2:1} E{cont:1}"}) {
    CheckBoth(RuleBuilder(g, "[+son] Y:[-son]").SetLiteral("Y", "N"), form, form);
    CheckBoth(RuleBuilder(g, "Y:[-son] [+son]").SetLiteral("Y", "N"), form, form);
  }
}

TEST_CASE("found by chance: a sweep gives on what is behind, past what was given up", "[unit]") {
  // All after s take its Place, one after the other. The k between gives up the Dorsal of which the first k holds the high.
  const Grammar g = SmallGrammar();
  const Rule rule =
      RuleBuilder(g, "X:[] Y:[-cont]").Spread("X.Place", "Y").Delink("Y.Place").Mode(Rule::Mode::kRightward);
  CheckBoth(rule, "k{high:1} s k{high:1} p", "k s{Place:2} k{Place:2} p{Place:2}");
  CheckBoth(rule, "k{high:1} s k{high:1 Place:2} k{Place:2} p", "k s{Place:3} k{Place:3} k{Place:3} p{Place:3}");
  // The same of roots: what the first of the long one holds is on the right of what it was on the right of.
  CheckBoth(RuleBuilder(g, "X:[-voice] Y:[-son]").Spread("X.root", "Y").Delink("Y.root").Mode(Rule::Mode::kRightward),
            "b{son:1} c{son:1} c c", "b{son:1} c{son:1 root:2} c{root:2} c{root:2}");
  // Where the Place given up stands on the left as well, it is the one that goes on.
  CheckBoth(rule, "a{high:1} a{high:1 Place:2} k{Place:2} p", "a{high:1} a{high:1 Place:2} k{Place:2} p{Place:2}");
}

TEST_CASE("found by chance: what a sweep leads on keeps the line ahead", "[unit]") {
  // d takes the Dorsal of u, whose high k holds as well. So /g/, with a high of its own, goes before k alone.
  const Grammar g = SmallGrammar();
  const Rule rule = RuleBuilder(g, "X:[Coronal] Y:[-syll Place no Dorsal] Z:[Dorsal]")
                        .Spread("Z.Dorsal", "Y")
                        .Otherwise("Y:[]")
                        .Insert("g", true, "Y")
                        .Mode(Rule::Mode::kLeftward);
  CheckBoth(rule, "k{high:1} d d u{high:1}", "g k{high:1} d d{Dorsal +high +back Dorsal:2 high:1} u{Dorsal:2}");
}

TEST_CASE("found by chance: a sweep changes a root that it gave to a slot behind", "[unit]") {
  // s takes the root of the nasal. Where that then takes the Place of c, the slot behind would read otherwise: refused.
  const Grammar g = SmallGrammar();
  const Rule rule = RuleBuilder(g, "X:[-cont] Y:[Place]")
                        .Spread("Y.Place", "X")
                        .Delink("X.Place")
                        .Otherwise("- X:[Place] ... Y:[-cont]")
                        .Spread("Y.root", "X")
                        .Delink("X.root")
                        .Mode(Rule::Mode::kRightward);
  CheckBoth(rule, "- s ŋ", "- ŋ{root:1} ŋ{root:1}");
  CheckBoth(rule, "- s ŋ E", "- ŋ{root:1} ŋ{root:1} E");
  CheckRefused(rule, FormOf(g, "- s ŋ c"));
}

TEST_CASE("found by chance: a sweep over a root that spans a slot without one", "[unit]") {
  // One visit of the root, at the slot met first, decides for its slots on both sides of the empty one. No form is written so:
  // of a root with three slots, the one in the middle gives it up.
  const Grammar g = SmallGrammar();
  const auto hollow = [&g](const char* text) {
    return ApplyRule(g, RuleBuilder(g, "[long] X:[long] [long]").Delink("X.root"), FormOf(g, text)).form;
  };
  // Leftward, k and then g lose ±syll: Y is k's second half, then its first.
  CheckForms(RuleBuilder(g, "X:[-syll] Y:[]").Delink("X.syll").Mode(Rule::Mode::kLeftward),
             hollow("g k{root:1} k{root:1} k{root:1}"), hollow("g{no syll} k{no syll root:1} k{root:1} k{root:1}"));
  // Rightward, the first half of i goes after a; the second stood after the first then, which is not [-high].
  CheckForms(RuleBuilder(g, "[-high] Y:[+high]").Delete("Y").Mode(Rule::Mode::kRightward),
             hollow("a i{root:1} i{root:1} i{root:1}"), FormOf(g, "a _ i"));
  // The empty slot is visited after both halves of i, and what is ahead of it then is not followed: the machine refuses.
  CheckRefused(RuleBuilder(g, "[-high] X:[+high]|empty").Delete("X").Mode(Rule::Mode::kRightward),
               hollow("a i{root:1} i{root:1} i{root:1}"));
}

}  // namespace tiersmith::testing
