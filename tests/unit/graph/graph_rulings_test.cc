// What one application of a rule means, point by point; every expected graph is worked out by hand from
// grammar/notation.md §5, §6, §8, never from output.
#include <algorithm>

#include "unit/graph/graph_case.h"

namespace tiersmith::testing {
namespace {

constexpr Rule::Mode kRightward = Rule::Mode::kRightward;
constexpr Rule::Mode kLeftward = Rule::Mode::kLeftward;

TEST_CASE("graph: empty slots are seen only by patterns that name them", "[unit]") {
  const Grammar g = SmallGrammar();
  const Rule plain = RuleBuilder(g, "A:[-syll] B:[-syll]").Set("B", "+voice");
  const Rule named = RuleBuilder(g, "A:[-syll] empty B:[-syll]").Set("B", "+voice");
  const Rule seen = RuleBuilder(g, "A:[-syll] B:[-syll] ( empty )").Set("B", "+voice");
  const Rule negated = RuleBuilder(g, "A:not[+syll] B:[-syll] ( empty )").Set("B", "+voice");
  CheckRows(g, {
                   {plain, "t _ t", "t _ d"},
                   {named, "t _ t", "t _ d"},
                   {named, "t t", "t t"},
                   {seen, "t _ t", "t _ t"},
                   {seen, "t t", "t d"},
                   // `not [..]` is false of a slot without a root.
                   {negated, "_ t", "_ t"},
                   {negated, "p t", "p d"},
                   // `unless` sees empty slots only if it names them itself.
                   {RuleBuilder(g, "A:[-syll]").Set("A", "+voice").Unless("A [+syll]"), "t _ a", "t _ a"},
                   {RuleBuilder(g, "A:[-syll]").Set("A", "+voice").Unless("A empty"), "t _ a p", "t _ a b"},
               });
}

TEST_CASE("graph: boundaries between and beside matched slots", "[unit]") {
  const Grammar g = SmallGrammar();
  const auto rule = [&](const char* where) { return RuleBuilder(g, where).Set("B", "+voice").rule(); };
  const Rule plain = rule("A:[-syll] B:[-syll]"), morpheme = rule("A:[-syll] - B:[-syll]"),
             clitic = rule("A:[-syll] = B:[-syll]"), word = rule("A:[-syll] # B:[-syll]"), final = rule("B:[-syll] -"),
             word_final = rule("B:[-syll] #"), initial = rule("# B:[-syll]"), phrase = rule("B:[-syll] ‖");
  CheckRows(g, {
                   {plain, "p - t", "p - d"},
                   {plain, "p = t", "p = d"},
                   {plain, "p # t", "p # t"},
                   {plain, "p ‖ t", "p ‖ t"},
                   // A named boundary between two slots: the run is as strong as its strongest.
                   {morpheme, "p t", "p t"},
                   {morpheme, "p - t", "p - d"},
                   {morpheme, "p - - t", "p - - d"},
                   {morpheme, "p = t", "p = t"},
                   {morpheme, "p - = t", "p - = t"},
                   {clitic, "p - = t", "p - = d"},
                   {clitic, "p - t", "p - t"},
                   // The edges of the domain are never crossed.
                   {word, "p # t", "p # t"},
                   // At the edge of a match a stronger one serves, and the ends of a form are the strongest.
                   {final, "t a", "t a"},
                   {final, "t - a", "d - a"},
                   {final, "t # a", "d # a"},
                   {final, "a t", "a d"},
                   {word_final, "t - a", "t - a"},
                   {word_final, "t # a", "d # a"},
                   {word_final, "t - _ # a", "d - _ # a"},
                   {initial, "t a # t", "d a # d"},
                   {phrase, "t # a t", "t # a d"},
                   // What is optional decides anew whether the boundary is at the edge.
                   {rule("( [+syll] ) # B:[-syll]"), "a # t", "a # d"},
               });
}

TEST_CASE("graph: gaps", "[unit]") {
  const Grammar g = SmallGrammar();
  const Rule voice = RuleBuilder(g, "A:[+syll] ... B:[no voice]").Spread("A.voice", "B");
  const Rule past = RuleBuilder(g, "A:[+syll] ... B:[-son no voice]").Spread("A.voice", "B").Unless("B [+nasal]");
  const Rule drop = RuleBuilder(g, "A:[Labial +nasal] ... B:[Coronal +nasal]").Delete("B");
  const Rule first = RuleBuilder(g, "A:[Labial +nasal] ... B:[Coronal +nasal]").Delete("A");
  const Rule cut = RuleBuilder(g, "A:[voice -syll] ... B:[-son]").Delink("A.voice");
  const Rule tier = RuleBuilder(g, "A:[+nasal] ...Place B:[-son]").Delete("B");
  const Rule guard = RuleBuilder(g, "A:[-syll]").Set("A", "-cons").Unless("A ... [Labial]");
  CheckRows(g, {
                   // Nothing that bears the spread node stands between.
                   {voice, "a d t{no voice}", "a d t{no voice}"},
                   // The nearer one is the target.
                   {voice, "a N{no voice} t{no voice}", "a{voice:1} N{voice:1} t{no voice}"},
                   {RuleBuilder(g, "A:[+syll] ... B:[no voice]").Spread("A.voice", "B").Mode(kRightward),
                    "a N{no voice} d{no voice}", "a{voice:1} N{voice:1} d{no voice}"},
                   // One at which the rule does not apply is not nearer.
                   {past, "a t{no voice} n{no voice} t{no voice}", "a{voice:1} t{no voice} n{no voice} d{voice:1}"},
                   {voice, "a # t{no voice}", "a # t{no voice}"},
                   {voice, "a - _ - t{no voice}", "a{voice:1} - _ - d{voice:1}"},
                   // Zero slots between are enough.
                   {voice, "a t{no voice}", "a{voice:1} d{voice:1}"},
                   // Deleting measures by nothing but nearness, from either end.
                   {drop, "m a n a n", "m a a n"},
                   {first, "m a m a n", "m a a n"},
                   // Without a spread: by what is cut, set or filled at the ends.
                   {cut, "d a t", "d a t"},
                   {cut, "d E{no voice} t", "d{no voice} E{no voice} t"},
                   // `...Place` asks for that tier alone, and for no nearness.
                   {tier, "n a p", "n a p"},
                   {tier, "n E p", "n E"},
                   {tier, "N E p{no Place} t", "N E"},
                   // In `unless` a gap passes over anything inside the domain.
                   {guard, "t a n u", "t a n u"},
                   {guard, "t a t # u", "t{-cons} a t{-cons} # u"},
               });
}

TEST_CASE("graph: unless", "[unit]") {
  const Grammar g = SmallGrammar();
  const Rule rule =
      RuleBuilder(g, "A:[-son] B:[]").Set("A", "+voice").Unless("A:[Labial]").Unless("[+nasal] A B:[+syll]");
  CheckRows(g, {
                   {rule, "t a", "d a"},
                   {rule, "p a", "p a"},
                   {rule, "n t a", "n t a"},
                   {rule, "n t m", "n d m"},
                   {rule, "a t a", "a d a"},
               });
}

TEST_CASE("graph: capacity", "[unit]") {
  const Grammar g = SmallGrammar();
  const Rule place = RuleBuilder(g, "A:[+nasal] B:[-son]").Spread("A.Place", "B");
  const Rule relink = RuleBuilder(g, "A:[+nasal] B:[-son]").Spread("A.Place", "B").Delink("B.Place");
  const Rule cont = RuleBuilder(g, "A:[+son] B:[-son]").Spread("A.cont", "B");
  const Rule cont_left = RuleBuilder(g, "A:[-son] B:[+son]").Spread("B.cont", "A");
  const Rule facing = RuleBuilder(g, "A:[-son] B:[-son]").Delink("B.cont").Spread("A.cont", "B");
  const Rule facing_left = RuleBuilder(g, "A:[-son] B:[-son]").Delink("A.cont").Spread("B.cont", "A");
  CheckRows(g, {
                   {place, "n k", "n k", "", "capacity"},
                   // Room goes before "two equal values".
                   {place, "n t", "n t", "", "capacity"},
                   {place, "n{Place:1} t{Place:1}", "n{Place:1} t{Place:1}"},
                   {relink, "n k", "n{Place:1} t{Place:1}"},
                   {relink, "n{Place:1} t{Place:1}", "n{Place:1} t{Place:1}"},
                   // Room for two where the tree says so, at the source's side; never two equal side by side.
                   {cont, "a t", "a{cont:1} t{+cont -cont cont:1}"},
                   {cont, "a s", "a s"},
                   {cont, "n t", "n t"},
                   {cont, "a c", "a c", "", "capacity"},
                   {RuleBuilder(g, "A:[+nasal] B:[+syll]").Spread("A.cont", "B"), "n a", "n a", "", "capacity"},
                   {cont_left, "t a", "t{-cont +cont cont/2:1} a{cont:1}"},
                   // Of a contour the member that faces the target.
                   {facing, "c t", "c{cont/2:1} s{cont:1}"},
                   {facing_left, "s c", "t{cont:1} c{cont:1}"},
                   // Cutting beside a spread of what is shared already takes the others.
                   {facing, "t{cont:1} c{cont:1}", "t{cont:1} t{cont:1}"},
               });
}

TEST_CASE("graph: lines never cross", "[unit]") {
  const Grammar g = SmallGrammar();
  const Rule over = RuleBuilder(g, "A:[Place] [] C:[no Place]").Spread("A.Place", "C");
  const Rule cut_too = RuleBuilder(g, "A:[Place] B:[] C:[no Place]").Delink("B.Place").Spread("A.Place", "C");
  const Rule both = RuleBuilder(g, "A:[Place] B:[no Place] C:[no Place]").Spread("A.Place", "B").Spread("A.Place", "C");
  const Rule devoice = RuleBuilder(g, "B:[+nasal]").Set("B", "-voice");
  const Rule create = RuleBuilder(g, "B:[+syll no Place]").Set("B", "Coronal");
  const Rule schwa = RuleBuilder(g, "A:[-syll] B:[-syll]").Insert("E", true, "B");
  const Rule vowel = RuleBuilder(g, "A:[-syll] B:[-syll]").Insert("i", true, "B");
  CheckRows(g, {
                   {over, "t k N", "t k N", "", "crossing"},
                   {over, "t E N", "t{Place:1} E n{Place:1}"},
                   // The form before counts, less only what the receiving mothers themselves give up.
                   {cut_too, "t k N", "t k N", "", "crossing"},
                   {both, "t E N", "t{Place:1} E{Coronal +ant Place:1} n{Place:1}"},
                   // A line to the very instance whose span passes over the target is fine.
                   {RuleBuilder(g, "A:[-son] B:[no Place]").Spread("A.Place", "B"), "t{Place:1} E t{Place:1}",
                    "t{Place:1} E{Coronal +ant Place:1} t{Place:1}"},
                   // set in the middle of a span, and at its edge; under a shared mother nothing stands in the way.
                   {devoice, "d{voice:1} n{voice:1} d{voice:1}", "d{voice:1} n{voice:1} d{voice:1}", "", "crossing"},
                   {devoice, "n{voice:1} d{voice:1} d{voice:1}", "n{-voice} d{voice:1} d{voice:1}"},
                   {devoice, "d{Laryngeal:1} n{Laryngeal:1} d{Laryngeal:1}",
                    "t{Laryngeal:1} n{-voice Laryngeal:1} t{Laryngeal:1}"},
                   // Taking away inside a span crosses nothing.
                   {RuleBuilder(g, "B:[+nasal]").Delink("B.voice"), "d{voice:1} n{voice:1} d{voice:1}",
                    "d{voice:1} n{no voice} d{voice:1}"},
                   // A class node made inside a span of its kind.
                   {create, "t{Place:1} E t{Place:1}", "t{Place:1} E t{Place:1}", "", "crossing"},
                   {create, "t E t", "t E{Coronal} t"},
                   // The integrity of geminates (Kenstowicz and Pyle 1973; Hayes 1986; from memory).
                   {schwa, "t{root:1} t{root:1}", "t{root:1} t{root:1}", "", "crossing"},
                   {schwa, "t t", "t E t"},
                   // A bearer goes into no span, what bears none does.
                   {vowel, "n{Place:1} t{Place:1}", "n{Place:1} t{Place:1}", "", "crossing"},
                   {schwa, "n{Place:1} t{Place:1}", "n{Place:1} E t{Place:1}"},
               });
}

TEST_CASE("graph: requests are made to mothers, whoever holds them", "[unit]") {
  const Grammar g = SmallGrammar();
  CheckRows(g, {
                   // Delinking and setting under a shared Place reaches both.
                   {RuleBuilder(g, "A:[+nasal]").Delink("A.Coronal"), "n{Place:1} t{Place:1}", "N t{no Place}"},
                   {RuleBuilder(g, "A:[+nasal]").Set("A", "Coronal"), "m{Place:1} p{Place:1}",
                    "m{Coronal Place:1} p{Coronal Place:1}"},
                   // The line of one mother alone.
                   {RuleBuilder(g, "A:[+nasal]").Delink("A.Place"), "n{Place:1} t{Place:1}", "N t"},
                   {RuleBuilder(g, "A:[+syll]").Set("A", "-back"), "u{back:1} a{back:1}", "u{-back} a{-back}"},
                   // One half of a geminate: the root hears it.
                   {RuleBuilder(g, "A:[-son] B:[+syll]").Set("A", "+voice"), "t{root:1} t{root:1} a",
                    "d{root:1} d{root:1} a"},
                   {RuleBuilder(g, "N:[+nasal no Place] C:[-son]").Spread("C.Place", "N"), "N{root:1} N{root:1} p",
                    "m{root:1 Place:1} m{root:1} p{Place:1}"},
                   // A missing Coronal under a shared Place is made once, and shared.
                   {RuleBuilder(g, "A:[Place]").Set("A", "-ant"), "m{Place:1} p{Place:1}",
                    "m{Coronal -ant Place:1} p{Coronal -ant Place:1}"},
                   // Setting the only value borne changes nothing, shared or not.
                   {RuleBuilder(g, "A:[+nasal]").Set("A", "+voice"), "n{voice:1} d{voice:1}", "n{voice:1} d{voice:1}"},
                   {RuleBuilder(g, "A:[-son]").Set("A", "-cont"), "c", "t"},
               });
}

TEST_CASE("graph: requests that meet on one mother", "[unit]") {
  const Grammar g = SmallGrammar();
  const Rule sides = RuleBuilder(g, "A:[] B:[no cont] C:[]").Spread("A.cont", "B").Spread("C.cont", "B");
  const Rule contents = RuleBuilder(g, "A:[+nasal] B:[-son]").Set("A", "+ant").Set("B", "-ant");
  const Rule nasal = RuleBuilder(g, "A:[+nasal] B:[-syll Place]").Spread("B.Place", "A").Delink("A.Place");
  const Rule lose = RuleBuilder(g, "A:[+nasal] B:[-syll]").Spread("B.Place", "A").Delink("A.Place");
  // From two slots off, from the left or from the right.
  Rule off = RuleBuilder(g, "A:[Place] [no Place] B:[no Place]").Spread("A.Place", "B");
  Pattern mirrored = off.where;
  std::reverse(mirrored.items.begin(), mirrored.items.end());
  PatternItem either;
  either.kind = PatternItem::Kind::kGroup;
  either.alternatives = {off.where, mirrored};
  off.where.items = {either};
  CheckRows(
      g, {
             // From opposite sides into room for both: both.
             {sides, "n t{no cont} i", "n{cont:1} t{-cont +cont cont:1 cont/2:2} i{cont:2}"},
             {sides, "a t{no cont} i", "", "ambiguous"},
             {sides, "n a{no cont} i", "", "ambiguous"},
             // One instance from both sides is one line.
             {sides, "a{cont:1} t{no cont} i{cont:1}", "a{cont:1} s{cont:1} i{cont:1}"},
             {contents, "n t", "n t{-ant}"},
             {contents, "n{no ant Coronal:1} t{no ant Coronal:1}", "", "ambiguous"},
             {RuleBuilder(g, "A:[voice] B:[-son]").Spread("A.voice", "B").Delink("B.voice").Set("B", "-voice"), "a d",
              "", "ambiguous"},
             // Between the halves of a long nasal nothing is asked (what is shared already is not spread), so nothing
             // stands against the line from p, nor against the cut of what the root had.
             {nasal, "n{root:1} n{root:1} p", "m{root:1 Place:1} m{root:1} p{Place:1}"},
             {nasal, "n{Place:1} n{Place:1} p", "n m{Place:1} p{Place:1}"},
             {nasal, "m{root:1} m{root:1} N", "m{root:1} m{root:1} N"},
             {lose, "n{root:1} n{root:1} N", "N{root:1} N{root:1} N"},
             // Two changes, each fine alone, whose lines would cross each other.
             {off, "p N N", "p{Place:1} N m{Place:1}"},
             {off, "p N N t", "", "ambiguous"},
             {off, "p N E N t", "", "ambiguous"},
             {off, "p N E N E t", "p{Place:1} N E{Labial Place:1} n{Place:2} E t{Place:2}"},
         });
}

TEST_CASE("graph: the order of changes, and deletion", "[unit]") {
  const Grammar g = SmallGrammar();
  CheckRows(g, {
                   // The deleted nasal leaves its nasality behind.
                   {RuleBuilder(g, "A:[+nasal] B:[-son]").Delete("A").Delink("B.nasal").Spread("A.nasal", "B"), "n t",
                    "t{+nasal}"},
                   {RuleBuilder(g, "A:[+syll]").Delete("A").Insert("E", true, "A"), "t a", "t E"},
                   // A change asked of a deleted slot matters where another slot shares the object.
                   {RuleBuilder(g, "A:[+nasal]").Delete("A").Set("A", "-ant"), "n{Place:1} t{Place:1}", "t{-ant}"},
                   {RuleBuilder(g, "A:[+nasal]").Delete("A").Set("A", "-ant"), "n t", "t"},
                   // Everything is decided on the form before.
                   {RuleBuilder(g, "A:[-son] B:[-son]").Set("A", "+voice").Set("B", "-voice"), "t d", "d t"},
               });
}

TEST_CASE("graph: sweeps", "[unit]") {
  const Grammar g = SmallGrammar();
  const auto rule = [&](const char* where, Rule::Mode mode) {
    return RuleBuilder(g, where).Set("A", "-ant").Mode(mode).rule();
  };
  CheckRows(
      g,
      {
          // A change that reaches another root has no result, but a vacuous one reaches nobody.
          {rule("A:[+nasal]", kRightward), "n{Place:1} t{Place:1}", "", "reaches"},
          {rule("A:[+nasal]", kRightward), "n{-ant Place:1} t{-ant Place:1}", "n{-ant Place:1} t{-ant Place:1}"},
          {rule("A:[+nasal]", kLeftward), "n{ant:1} t{ant:1}", "n{-ant} t"},
          {RuleBuilder(g, "A:[+nasal]").Delink("A.Coronal").Mode(kRightward), "n{Place:1} t{Place:1}", "", "reaches"},
          {RuleBuilder(g, "A:[+nasal]").Delink("A.Place").Mode(kRightward), "n{Place:1} t{Place:1}", "N t"},
          // A geminate is visited once, with both its slots.
          {rule("[+syll] A:[-son]", kRightward), "a t{root:1} t{root:1}", "a t{-ant root:1} t{root:1}"},
          {rule("[+syll] A:[-son]", kLeftward), "a t{root:1} t{root:1}", "a t{-ant root:1} t{root:1}"},
          {RuleBuilder(g, "A:[-son]").Delete("A").Mode(kRightward), "a t{root:1} t{root:1} a", "a a"},
          // A slot without a root is visited too, and what it gets is there for the next.
          {RuleBuilder(g, "A:[+syll] B:empty").Spread("A.root", "B").Mode(kRightward), "a _ _",
           "a{root:1} a{root:1} a{root:1}"},
          {RuleBuilder(g, "A:[+syll] B:empty").Spread("A.root", "B").Mode(kLeftward), "a _ _", "a{root:1} a{root:1} _"},
          // Harmony step by step, over consonants that bear no Dorsal.
          {RuleBuilder(g, "A:[+syll] ... B:[+syll no back]").Spread("A.back", "B").Mode(kRightward),
           "i t a{no back} p a{no back}", "i{back:1} t a{-back back:1} p a{-back back:1}"},
          {RuleBuilder(g, "A:[+syll] ... B:[+syll no back]").Spread("A.back", "B").Mode(kRightward), "i k a{no back}",
           "i k a{no back}"},
      });
}

TEST_CASE("graph: quantities count in every way", "[unit]") {
  const Grammar g = SmallGrammar();
  CheckRows(g, {
                   {RuleBuilder(g, "A:[+nasal] ( [-syll] )0- B:[+syll]").Set("B", "+nasal"), "n t s a t a",
                    "n t s a{+nasal} t a"},
                   {RuleBuilder(g, "A:[+nasal] ( [-syll] )1- B:[+syll]").Set("B", "+nasal"), "n a", "n a"},
                   {RuleBuilder(g, "A:[+nasal] ( [-syll] )0-1 B:[+syll]").Set("B", "+nasal"), "n t s a", "n t s a"},
                   {RuleBuilder(g, "# ( [] )0- B:[+syll]").Set("B", "+nasal"), "a t a", "a{+nasal} t a{+nasal}"},
                   {RuleBuilder(g, "A:[+nasal] ( - )0- B:[+syll]").Set("B", "+nasal"), "n - a", "n - a{+nasal}"},
               });
}

TEST_CASE("graph: notes say what was cut, spread, set and blocked", "[unit]") {
  const Grammar g = SmallGrammar();
  const auto notes = [&](const Rule& rule, const char* form) {
    return ApplyRule(g, rule, FormOf(g, form), true).notes;
  };
  const Rule place = RuleBuilder(g, "A:[+nasal] B:[-son]").Spread("B.Place", "A").Delink("A.Place");
  CHECK(notes(place, "a n k").changes == std::vector<std::string>{"n's Place cut", "k's Place spread to n"});
  CHECK(notes(RuleBuilder(g, "A:[+nasal]").Set("A", "-ant"), "n{Place:1} t{Place:1}").changes ==
        std::vector<std::string>{"n set to [-ant] (held by t too)"});
  CHECK(notes(RuleBuilder(g, "A:[+syll] #").Delete("A"), "a t a").changes ==
        std::vector<std::string>{"a (slot 3) deleted"});
  CHECK(notes(RuleBuilder(g, "A:[-syll] B:[-syll]").Insert("E", true, "B"), "t p").changes ==
        std::vector<std::string>{"E inserted before p"});
  CHECK(notes(RuleBuilder(g, "A:[+nasal] B:[-son]").Spread("B.Place", "A"), "n k").blocked ==
        std::vector<std::string>{"blocked at n: no room for Place from k"});
  CHECK(notes(RuleBuilder(g, "A:[-syll] B:[-syll]").Insert("E", true, "B"), "t{root:1} t{root:1}").blocked ==
        std::vector<std::string>{"blocked at t (slot 2): a line would cross another on the tier of root"});
}

}  // namespace
}  // namespace tiersmith::testing
