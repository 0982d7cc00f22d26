// What patterns and conditions ask beyond values: variables, sharing, length, edges of contours, conditions, domains, tags.
// Every expected graph is worked out by hand from grammar/notation.md §5, §6, §8, never from output.
#include "unit/graph/graph_case.h"

namespace tiersmith::testing {
namespace {

TEST_CASE("graph: variables agree across the pattern", "[unit]") {
  const Grammar g = SmallGrammar();
  // Two neighbours agreeing in voice; the second is nasalised where they do.
  const auto mark = [&](const char* where) { return RuleBuilder(g, where).Set("B", "+nasal").rule(); };
  const Rule voice = mark("A:[-syll αvoice] B:[-syll αvoice]"), differs = mark("A:[-syll αvoice] B:[-syll -αvoice]"),
             place = mark("A:[-syll αPlace] B:[-syll αPlace]"), labial = mark("A:[-syll αround] B:[+syll αround]"),
             two = mark("A:[αback βhigh] B:[αback βhigh]"), cont = mark("A:[αcont] B:[-syll αcont]"),
             begins = mark("A:[+syll αcont] B:[-syll -αcont]");
  CheckRows(g, {
                   {voice, "p t", "p t{+nasal}"},
                   {voice, "b t", "b t"},
                   // An item with neither value does not match, with or without the minus.
                   {voice, "t{no voice} t{no voice}", "t{no voice} t{no voice}"},
                   {differs, "b t", "b t{+nasal}"},
                   {differs, "b d", "b d"},
                   {differs, "b t{no voice}", "b t{no voice}"},
                   // A class node: equal content, shared or not; one without it does not match.
                   {place, "t d", "t d{+nasal}"},
                   {place, "t p", "t p"},
                   {place, "t{Place:1} d{Place:1}", "t{Place:1} d{+nasal Place:1}"},
                   {place, "t{no Place} d{no Place}", "t{no Place} d{no Place}"},
                   {place, "t d{-ant}", "t d{-ant}"},
                   // A bare feature: there or not.
                   {labial, "p{round} u", "p{round} u{+nasal}"},
                   {labial, "p u", "p u"},
                   {labial, "p a", "p a{+nasal}"},
                   {two, "i i", "i i{+nasal}"},
                   {two, "i u", "i u"},
                   {two, "a u", "a u"},
                   // Of a contour any member, unless a part is asked for.
                   {cont, "a c", "a c{+nasal}"},
                   {cont, "t c", "t c{+nasal}"},
                   {cont, "t s", "t s"},
                   {begins, "a c", "a c{+nasal}"},
                   {begins, "a s", "a s"},
               });
}

TEST_CASE("graph: the content of a variable is set and filled", "[unit]") {
  const Grammar g = SmallGrammar();
  // Latin liquid dissimilation with ±ant for ±lateral: a suffix liquid differs from the one before (after Steriade 1987,
  // from memory): set to the opposite of what the nearest bearer has.
  const Rule dissimilate = RuleBuilder(g, "A:[αant] ... B:[-syll ant]").Set("B", "-αant");
  // SPE vowel harmony by variables (Chomsky and Halle 1968, from memory): [αback] after [αback].
  const Rule harmony = RuleBuilder(g, "A:[+syll αback] ( [-syll] )0- B:[+syll]").Set("B", "αback");
  CheckRows(g, {
                   {dissimilate, "t a p a t", "t a p a t{-ant}"},
                   {dissimilate, "t{-ant} a t{-ant}", "t{-ant} a t"},
                   {dissimilate, "t a d{-ant}", "t a d{-ant}"},
                   {harmony, "i t u", "i t u{-back}"},
                   {harmony, "a t i", "a t i{+back}"},
                   {harmony, "E t i", "E t i"},
                   {RuleBuilder(g, "A:[+nasal αPlace] B:[-son]").Set("B", "αPlace"), "m t", "m p"},
                   {RuleBuilder(g, "A:[+nasal αPlace] B:[-son]").Fill("B", "αPlace"), "m t{no Place}", "m p"},
                   {RuleBuilder(g, "A:[+nasal αPlace] B:[-son]").Fill("B", "αPlace"), "m t", "m t"},
                   {RuleBuilder(g, "A:[+syll αround] B:[-syll]").Set("B", "αround"), "u k", "u k{round}"},
                   {RuleBuilder(g, "A:[+syll αround] B:[-syll]").Set("B", "αround"), "a p{round}", "a p"},
                   {RuleBuilder(g, "A:[+syll -αround] B:[-syll]").Set("B", "αround"), "a p", "a p{round}"},
                   // A contour has two values to agree with: two ways, two contents asked.
                   {RuleBuilder(g, "A:[αcont] B:[+syll]").Set("B", "αcont"), "c a{no cont}", "", "ambiguous"},
                   // One of them is there already and so not asked.
                   {RuleBuilder(g, "A:[αcont] B:[+syll]").Set("B", "αcont"), "c a", "c a{-cont}"},
                   // Already equal: nothing changes, shared or not.
                   {RuleBuilder(g, "A:[-syll αPlace] B:[-syll]").Set("B", "αPlace"), "n{Place:1} t{Place:1}",
                    "n{Place:1} t{Place:1}"},
               });
}

TEST_CASE("graph: shared, unshared and length", "[unit]") {
  const Grammar g = SmallGrammar();
  const auto nasal = [&](const char* test) {
    return RuleBuilder(g, std::string("A:[") + test + "]").Set("A", "+nasal").rule();
  };
  CheckRows(g,
            {
                {nasal("shared Place"), "n{Place:1} t{Place:1} t", "n{Place:1} t{+nasal Place:1} t"},
                {nasal("shared> Place"), "t{Place:1} t{Place:1} t", "t{+nasal Place:1} t{Place:1} t"},
                {nasal("shared< Place"), "t{Place:1} t{Place:1} t", "t{Place:1} t{+nasal Place:1} t"},
                // Through a node above, and by the other half of a long one.
                {nasal("shared ant"), "t{Place:1} t{Place:1} t", "t{+nasal Place:1} t{+nasal Place:1} t"},
                {nasal("shared Place"), "t{root:1} t{root:1}", "t{+nasal root:1} t{root:1}"},
                {nasal("shared root"), "t{root:1} t{root:1} d{Place:2} t{Place:2}",
                 "t{+nasal root:1} t{root:1} d{Place:2} t{Place:2}"},
                // Unshared: it bears one and nobody else does.
                {nasal("unshared Place"), "t{Place:1} d{Place:1} d", "t{Place:1} d{Place:1} d{+nasal}"},
                {nasal("unshared Place"), "t{no Place}", "t{no Place}"},
                {nasal("unshared> Place"), "t{Place:1} d{Place:1}", "t{Place:1} d{+nasal Place:1}"},
                {nasal("long"), "t{root:1} t{root:1} d", "t{+nasal root:1} t{root:1} d"},
                {nasal("short"), "t{root:1} t{root:1} d", "t{root:1} t{root:1} d{+nasal}"},
                {RuleBuilder(g, "A:[half1]").Delete("A"), "t{root:1} t{root:1} d a", "t d a"},
                {RuleBuilder(g, "A:[half2] B:[]").Delete("B"), "t{root:1} t{root:1} d d", "t{root:1} t{root:1} d"},
                {RuleBuilder(g, "A:[half1] B:[]").Set("B", "+nasal"), "t d t{root:1} t{root:1} t",
                 "t d t{+nasal root:1} t{root:1} t"},
                // A slot without a root is none of these.
                {RuleBuilder(g, "A:[short]|empty").Delete("A"), "_ t{root:1} t{root:1}", "t{root:1} t{root:1}"},
                {RuleBuilder(g, "A:not[long] ( empty )").Delete("A"), "_ t{root:1} t{root:1}", "_ t{root:1} t{root:1}"},
            });
}

TEST_CASE("graph: edges of contours", "[unit]") {
  const Grammar g = SmallGrammar();
  // Affricates are stops to what precedes and fricatives to what follows (edge effects: Sagey 1986, from memory).
  const auto rule = [&](const char* where) { return RuleBuilder(g, where).Set("B", "+voice").rule(); };
  CheckRows(g, {
                   {rule("B:[-son] A:[begins -cont]"), "t c", "d c"},
                   {rule("B:[-son] A:[begins +cont]"), "t c", "t c"},
                   {rule("A:[ends +cont] B:[-son]"), "c t", "c d"},
                   {rule("A:[ends -cont] B:[-son]"), "c t", "c t"},
                   {rule("A:[ends -cont] B:[-son]"), "n t", "n d"},
                   {rule("A:[begins +cont] B:[-son]"), "t{no cont} t", "t{no cont} t"},
               });
}

TEST_CASE("graph: conditions", "[unit]") {
  const Grammar g = SmallGrammar();
  const auto rule = [&](const char* condition) {
    return RuleBuilder(g, "A:[-syll] B:[-syll]").If(condition).Delete("B").rule();
  };
  CheckRows(
      g, {
             {rule("A.Place = B.Place"), "n t", "n"},
             {rule("A.Place = B.Place"), "n p", "n p"},
             {rule("A.Place = B.Place"), "n{Place:1} t{Place:1}", "n"},
             // If either lacks it they are not equal, and so unequal.
             {rule("A.Place = B.Place"), "N t{no Place}", "N t{no Place}"},
             {rule("A.Place ≠ B.Place"), "N t{no Place}", "N"},
             {rule("A.Place ≠ B.Place"), "N t", "N"},
             {rule("A.Place ≠ B.Place"), "n t", "n t"},
             {rule("A.Place is B.Place"), "n t", "n t"},
             {rule("A.Place is B.Place"), "n{Place:1} t{Place:1}", "n"},
             {rule("A.Place isnot B.Place"), "n t", "n"},
             {rule("A.Place isnot B.Place"), "N N", "N"},
             {rule("A.Place isnot B.Place"), "n{Place:1} t{Place:1}", "n{Place:1} t{Place:1}"},
             // Two items, not two halves.
             {rule("A.root isnot B.root"), "t{root:1} t{root:1}", "t{root:1} t{root:1}"},
             {rule("A.root = B.root"), "t t d", "t d"},
             {rule("A.root = B.root"), "t d", "t d"},
             // Equal: all members; the same: those that face each other, or the one named.
             {rule("A.cont = B.cont"), "c s", "c s"},
             {rule("A.cont = B.cont"), "c c", "c"},
             {rule("A.cont/last = B.cont"), "c s", "c"},
             {rule("A.-cont = B.cont"), "c t", "c"},
             {rule("A.-cont = B.-cont"), "s t", "s t"},
             {rule("A.cont is B.cont"), "c{cont/2:1} s{cont:1}", "c"},
             {rule("A.cont/first is B.cont"), "c{cont/2:1} s{cont:1}", "c{cont/2:1} s{cont:1}"},
             {rule("A.+cont is B.cont"), "c{cont/2:1} s{cont:1}", "c"},
             // Two conditions: both.
             {RuleBuilder(g, "A:[] B:[]").If("A.Place = B.Place").If("A.voice ≠ B.voice").Delete("B"), "t t d", "t t"},
         });
}

TEST_CASE("graph: the same morpheme", "[unit]") {
  const Grammar g = SmallGrammar();
  const Rule joined = RuleBuilder(g, "A:[-syll] & B:[-syll]").Set("B", "+voice");
  const Rule far = RuleBuilder(g, "A:[-syll] & ... B:[-son -voice]").Delete("B");
  const Rule behind = RuleBuilder(g, "A:[-syll] & ( [+syll] )0- B:[-syll]").Set("B", "+voice");
  CheckRows(g, {
                   {joined, "p t", "p d"},
                   {joined, "p - t", "p - t"},
                   {joined, "p = t", "p = t"},
                   {joined, "p _ t", "p _ d"},
                   {joined, "p - _ t", "p - _ t"},
                   {far, "p a t", "p a"},
                   {far, "p a - t", "p a - t"},
                   // & joins the two items beside it; what a group stands for comes first.
                   {behind, "p a - t", "p a - d"},
                   {behind, "p - a t", "p - a t"},
                   {behind, "p - t", "p - t"},
               });
}

TEST_CASE("graph: domains", "[unit]") {
  const Grammar g = SmallGrammar();
  const auto rule = [&](const char* where, Domain domain) {
    return RuleBuilder(g, where).Set("B", "+voice").Within(domain).rule();
  };
  const auto gap = [&](Domain domain) {
    return RuleBuilder(g, "A:[-syll] ... B:[-syll]").Delete("B").Within(domain).rule();
  };
  const char* two = "A:[-syll] B:[-syll]";
  CheckRows(g, {
                   {rule(two, Domain::kMorpheme), "p t - t = t", "p d - t = t"},
                   {rule(two, Domain::kHost), "p - t = t", "p - d = t"},
                   {rule(two, Domain::kWord), "p - t = t # t", "p - d = d # t"},
                   {rule(two, Domain::kPhrase), "p - t # t ‖ t", "p - d # d ‖ t"},
                   // What is weaker than the edge may be named.
                   {rule("A:[-syll] # B:[-syll]", Domain::kPhrase), "p - t # t", "p - t # d"},
                   {rule("A:[-syll] = B:[-syll]", Domain::kHost), "p = t", "p = t"},
                   // Beside the match any boundary may be named.
                   {rule("B:[-syll] #", Domain::kMorpheme), "p - t # t", "p - d # d"},
                   {gap(Domain::kPhrase), "p a # t", "p a #"},
                   {gap(Domain::kMorpheme), "p a - t", "p a - t"},
                   {gap(Domain::kMorpheme), "p a t", "p a"},
                   // `unless` stays within it too.
                   {RuleBuilder(g, "B:[-syll]").Set("B", "+voice").Unless("B A:[+syll]").Within(Domain::kMorpheme),
                    "t - a t a", "d - a t a"},
               });
}

TEST_CASE("graph: the stem", "[unit]") {
  const Grammar g = SmallGrammar();
  const auto rule = [&](const char* where) {
    return RuleBuilder(g, where).Set("B", "+voice").Within(Domain::kStem).rule();
  };
  const Rule one = rule("B:[-syll]"), two = rule("A:[] B:[-syll]");
  CheckRows(g, {
                   // From the first stem morpheme through its last suffix.
                   {one, "‖@prefix t -@stem t -@suffix t =@clitic t", "‖@prefix t -@stem d -@suffix d =@clitic t"},
                   {two, "‖@prefix a -@stem t -@suffix t =@clitic t", "‖@prefix a -@stem t -@suffix d =@clitic t"},
                   // Two stems of one host and no other morpheme between them are one.
                   {two, "‖@stem a -@stem t -@suffix t", "‖@stem a -@stem d -@suffix d"},
                   {two, "‖@stem a -@suffix a -@prefix t -@stem t t", "‖@stem a -@suffix a -@prefix t -@stem t d"},
                   // A morpheme without slots ends it all the same, and so do stronger boundaries.
                   {two, "‖@stem a -@prefix -@stem t", "‖@stem a -@prefix -@stem t"},
                   {two, "‖@stem a =@stem t #@stem t", "‖@stem a =@stem t #@stem t"},
                   {one, "‖@stem t =@suffix t", "‖@stem d =@suffix t"},
                   // Without tags there is no stem.
                   {one, "t", "t"},
               });
}

TEST_CASE("graph: tags of morphemes", "[unit]") {
  Grammar g = SmallGrammar();
  g.tags.push_back("strong");
  const auto set = [&](const char* where) { return RuleBuilder(g, where).Set("A", "+voice"); };
  const char* in = "‖@stem t -@suffix@strong t #@stem t";
  CheckRows(
      g,
      {
          {set("A:[-son]").Only("strong"), in, "‖@stem t -@suffix@strong d #@stem t"},
          {set("A:[-son]").Except("strong"), in, "‖@stem d -@suffix@strong t #@stem d"},
          {set("A:[-son]").Only("word strong"), in, "‖@stem d -@suffix@strong d #@stem t"},
          {set("A:[-son]").Except("word strong"), in, "‖@stem t -@suffix@strong t #@stem d"},
          {set("A:[-son] B:[-son]").Only("B in strong"), in, "‖@stem d -@suffix@strong t #@stem t"},
          {set("A:[-son] B:[-son]").Except("B in strong"), "‖@stem t -@strong t -@stem t t",
           "‖@stem t -@strong d -@stem d t"},
          // All changed items; none of them.
          {set("A:[-son] B:[-son]").Set("B", "+nasal").Only("strong"), "‖@stem t -@strong t", "‖@stem t -@strong t"},
          {set("A:[-son] B:[-son]").Set("B", "+nasal").Except("strong"), "‖@stem t -@strong t", "‖@stem t -@strong t"},
          // The last boundary before a slot opens its morpheme, slots without a root or not; before any, no tags.
          {set("A:[-son]").Only("strong"), "‖@strong -@stem t -@strong _ t", "‖@strong -@stem t -@strong _ d"},
          {set("A:[-son]").Only("strong"), "t t", "t t"},
          {set("A:[-son]").Except("strong"), "t a", "d a"},
          // A morpheme without slots is one of the word.
          {set("A:[-son]").Only("word strong"), "‖@stem t -@strong", "‖@stem d -@strong"},
      });
}

}  // namespace
}  // namespace tiersmith::testing
