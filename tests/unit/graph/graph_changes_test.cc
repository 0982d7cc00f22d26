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

TEST_CASE("graph: set to a literal", "[unit]") {
  const Grammar g = SmallGrammar();
  const auto set = [&](const char* where, const char* symbol) {
    return RuleBuilder(g, where).SetLiteral("A", symbol).rule();
  };
  const Rule both = RuleBuilder(g, "A:[-son] B:[-son]").SetLiteral("A", "n").SetLiteral("B", "s");
  CheckRows(
      g, {
             {set("A:[-son]", "n"), "t a", "n a"},
             {set("A:[+nasal]", "n"), "n", "n"},
             {set("A:empty", "t"), "_ a", "t a"},
             // The other half keeps its own; both halves given the same share the new root.
             {set("A:[half1]", "n"), "t{root:1} t{root:1}", "n t"},
             {set("A:[half2]", "n"), "t{root:1} t{root:1}", "t n"},
             {set("A:[-son]", "n"), "t{root:1} t{root:1}", "n{root:1} n{root:1}"},
             {set("A:[-son]", "n"), "t t", "n n"},
             {both, "t{root:1} t{root:1}", "n s"},
             // The old root goes with all under it; what others hold of it stays with them.
             {set("A:[+nasal]", "p"), "n{Place:1} t{Place:1}", "p t"},
             // A root in the middle of a span.
             {set("A:[+nasal]", "p"), "t{Place:1} n{Place:1} t{Place:1}", "t{Place:1} n{Place:1} t{Place:1}", "",
              "crossing"},
             // A literal says its length: the new root is to be long.
             {set("A:[-son]", "nː"), "t a", "n{root:1} n{root:1} a"},
             {set("A:[-son]", "nː"), "t{root:1} t{root:1} a", "n{root:1} n{root:1} a"},
             {set("A:[half2]", "nː"), "t{root:1} t{root:1} a", "t n{root:1} n{root:1} a"},
             {set("A:[half1]", "nː"), "t{root:1} t{root:1} a", "n{root:1} n{root:1} t a"},
             {set("A:[-son]", "tː"), "t a", "t{root:1} t{root:1} a"},
             {set("A:[-son]", "tː"), "t{root:1} t{root:1} a", "t{root:1} t{root:1} a"},
             {RuleBuilder(g, "A:[-son] B:[+syll]").SetLiteral("A", "n").SetLiteral("A", "m"), "t a", "", "ambiguous"},
         });
}

TEST_CASE("graph: set and fill as another", "[unit]") {
  const Grammar g = SmallGrammar();
  const auto set = [&](const char* target, const char* source) {
    return RuleBuilder(g, "A:[-syll] B:[-syll]").SetAs(target, source).rule();
  };
  const auto fill = [&](const char* target, const char* source) {
    return RuleBuilder(g, "A:[-syll] B:[-syll]").FillAs(target, source).rule();
  };
  CheckRows(g, {
                   // An equal node of its own, no line.
                   {set("A.Place", "B.Place"), "n k", "ŋ k"},
                   {set("A.Place", "B.Place"), "N k", "ŋ k"},
                   {set("A.Place", "B.Place"), "n N", "N N"},
                   {set("A.Place", "B.Place"), "n{Place:1} t{Place:1}", "n{Place:1} t{Place:1}"},
                   // Decided on the form before.
                   {set("A.Place", "B.Place"), "n p k", "m k{-voice} k"},
                   {fill("A.Place", "B.Place"), "N k", "ŋ k"},
                   {fill("A.Place", "B.Place"), "n k", "n k"},
                   {fill("A.Place", "B.Place"), "N N", "N N"},
                   // What is set hangs from the mother, for all who hold it.
                   {RuleBuilder(g, "A:[+nasal] B:[-son] C:[-son]").SetAs("A.Coronal", "C.Coronal"),
                    "n{Place:1} d{Place:1} t{-ant}", "n{-ant Place:1} d{-ant Place:1} t{-ant}"},
                   // All members of a contour, or the one named.
                   {set("A.cont", "B.cont"), "t c", "c c"},
                   {set("A.cont", "B.cont"), "c s", "s s"},
                   {set("A.cont", "B.cont/last"), "t c", "s c"},
                   {set("A.cont", "B.-cont"), "s c", "t c"},
                   {set("A.cont", "B.-cont"), "t s", "t{no cont} s"},
                   {set("A.cont", "B.cont"), "n c", "n c", "", "capacity"},
                   {fill("A.cont", "B.cont"), "n c", "n c"},
                   // The whole segment: the slot gets a root of its own.
                   {set("A.root", "B.root"), "n k", "k k"},
                   {RuleBuilder(g, "A:[half1] [] B:[]").SetAs("A.root", "B.root"), "t{root:1} t{root:1} a", "a t a"},
                   {RuleBuilder(g, "A:[-syll] ( [-syll] )0- B:[+syll]").SetAs("A.root", "B.root"),
                    "t{root:1} t{root:1} a", "a{root:1} a{root:1} a"},
                   {RuleBuilder(g, "A:[-syll] B:empty").SetAs("A.root", "B.root"), "t _", "_ _"},
               });
}

TEST_CASE("graph: longer and shorter", "[unit]") {
  const Grammar g = SmallGrammar();
  const Rule longer = RuleBuilder(g, "A:[+syll]").Lengthen("A");
  const Rule shorter = RuleBuilder(g, "A:[+syll]").Shorten("A");
  // Compensatory lengthening: the slot of a lost nasal goes to the vowel before it (Latin, from memory).
  const Rule compensate = RuleBuilder(g, "A:[+syll] N:[+nasal] [+cont -syll]").Delete("N").Lengthen("A");
  CheckRows(
      g,
      {
          {longer, "t a t", "t a{root:1} a{root:1} t"},
          {longer, "a{root:1} a{root:1}", "a{root:1} a{root:1} a{root:1}"},
          {longer, "a{back:1} t a{back:1}", "a{root:1 back:2} a{root:1} t a{root:3 back:2} a{root:3}"},
          {shorter, "a{root:1} a{root:1} t", "a t"},
          {shorter, "a{root:1} a{root:1} a{root:1}", "a{root:1} a{root:1}"},
          {shorter, "a t a", "a t a"},
          {compensate, "i n s u t a", "i{root:1} i{root:1} s u t a"},
          {RuleBuilder(g, "A:[+syll]").Lengthen("A").Insert("E", false, "A"), "t a", "t a{root:1} a{root:1} E"},
          // What is lengthened and goes, goes.
          {RuleBuilder(g, "A:[+syll]").Lengthen("A").Delete("A"), "t a", "t"},
          {RuleBuilder(g, "A:[-syll]").Lengthen("A").Mode(kRightward), "t p",
           "t{root:1} t{root:1} p{root:2} p{root:2}"},
          {RuleBuilder(g, "A:[-syll]").Shorten("A").Mode(kLeftward), "t{root:1} t{root:1} p{root:2} p{root:2}", "t p"},
      });
}

TEST_CASE("graph: merge", "[unit]") {
  const Grammar g = SmallGrammar();
  const Rule place = RuleBuilder(g, "A:[-syll] B:[-syll]").Merge("A.Place", "B.Place");
  const Rule far = RuleBuilder(g, "A:[-syll] ... B:[-syll]").Merge("A.Place", "B.Place");
  const Rule root = RuleBuilder(g, "A:[] B:[]").Merge("A.root", "B.root");
  const Rule cont = RuleBuilder(g, "A:[-syll] B:[-syll]").Merge("A.cont", "B.cont");
  const Rule back = RuleBuilder(g, "A:[-syll] B:[-syll]").Merge("B.Place", "A.Place");
  CheckRows(g,
            {
                {place, "n t", "n{Place:1} t{Place:1}"},
                {place, "n p", "n p"},
                {place, "N t", "N t"},
                {place, "n t d", "n{Place:1} t{Place:1} d{Place:1}"},
                {place, "n{Place:1} t{Place:1}", "n{Place:1} t{Place:1}"},
                // All holders of the one hold the other.
                {place, "n{Place:1} t{Place:1} d{Place:2} s{Place:2}", "n{Place:1} t{Place:1} d{Place:1} s{Place:1}"},
                {far, "t E t", "t{Place:1} E t{Place:1}"},
                {far, "t a t", "t a t"},
                {root, "t t a", "t{root:1} t{root:1} a"},
                {root, "t d", "t d"},
                {root, "t - t", "t{root:1} - t{root:1}"},
                // Of contours those that face each other.
                {cont, "c s", "c{cont/2:1} s{cont:1}"},
                {cont, "c t", "c t"},
                // What hangs under the one that goes, and is held elsewhere, stays there.
                {place, "n t{ant:1} d{-voice ant:1}", "n{Place:1} t{Place:1} t{Place:1}"},
                {back, "n t", "n{Place:1} t{Place:1}"},
                {RuleBuilder(g, "A:[+nasal] B:[-syll]").Merge("A.Place", "B.Place").Mode(kRightward), "n t",
                 "n{Place:1} t{Place:1}"},
                {RuleBuilder(g, "A:[+nasal] B:[-syll]").Merge("A.Place", "B.Place").Mode(kRightward),
                 "n t{Place:1} d{Place:1}", "", "reaches"},
            });
}

TEST_CASE("graph: inserted items in other changes", "[unit]") {
  const Grammar g = SmallGrammar();
  const char* two = "A:[-syll] B:[-syll]";
  // A copied vowel: what is inserted bears no back and gets it by a line (after Clements 1986 on Barra Gaelic; from memory).
  const Rule echo = RuleBuilder(g, "V:[+syll] A:[-syll] B:[-syll]").Insert("E", true, "B", "N").Spread("V.Place", "N");
  CheckRows(
      g,
      {
          {RuleBuilder(g, "V:[+syll] A:[-syll no Place] B:[-syll]").Insert("E", true, "B", "N").Spread("V.Place", "N"),
           "a N t", "a{Place:1} N E{Dorsal -high +back Place:1} t"},
          // The line would pass over s.
          {echo, "a s t", "a s t", "", "crossing"},
          {RuleBuilder(g, two).Insert("E", true, "B", "N").Set("N", "+nasal"), "t p", "t E{+nasal} p"},
          {RuleBuilder(g, two).Insert("E", true, "B", "N").SetAs("N.Place", "B.Place"), "t p", "t E{Labial} p"},
          {RuleBuilder(g, two).Insert("E", true, "B", "N").SetAs("N.root", "A.root"), "t p", "t t p"},
          {RuleBuilder(g, two).Insert("iː", true, "B", "N").SetAs("N.root", "A.root"), "t p",
           "t t{root:1} t{root:1} p"},
          // From the inserted to another; two inserted on one side, in their order.
          {RuleBuilder(g, two).Insert("d", true, "B", "N").Delink("B.voice").Spread("N.voice", "B"), "t p",
           "t d{voice:1} b{voice:1}"},
          {RuleBuilder(g, two).Insert("d", true, "B", "N").Insert("T", true, "B", "M").Spread("N.voice", "M"), "t p",
           "t d{voice:1} d{voice:1} p"},
          {RuleBuilder(g, two).Insert("d", true, "B", "N").Insert("T", false, "A", "M").Spread("N.voice", "M"), "t p",
           "t d{voice:1} d{voice:1} p"},
          // No room.
          {RuleBuilder(g, two).Insert("d", true, "B", "N").Spread("B.voice", "N"), "t p", "t p", "", "capacity"},
          // Long, and in the morpheme of the host.
          {RuleBuilder(g, "A:[-syll] - B:[-syll]").Insert("iː", true, "B"), "t - p", "t - i{root:1} i{root:1} p"},
          {RuleBuilder(g, "A:[-syll] - B:[-syll]").Insert("iː", false, "A", "N").Set("N", "-high"), "t - p",
           "t i{-high root:1} i{root:1} - p"},
          // Asked twice of one host, it is one, and so are its lines.
          {RuleBuilder(g, "V:[+syll] A:[-syll no Place] ( [-syll] )0-1")
               .Insert("E", false, "A", "N")
               .Spread("V.back", "N"),
           "a N N", "a{back:1} N E{Dorsal +back back:1} N"},
          {RuleBuilder(g, two).Insert("E", true, "B", "N").Set("N", "+nasal").Mode(kRightward), "t p k",
           "t E{+nasal} p E{+nasal} k"},
      });
}

TEST_CASE("graph: members of contours", "[unit]") {
  const Grammar g = SmallGrammar();
  const auto cut = [&](const char* path) { return RuleBuilder(g, "A:[-son]").Delink(path).rule(); };
  const Rule replace = RuleBuilder(g, "B:[+syll] A:[-son]").Spread("B.cont", "A").Delink("A.cont/first");
  CheckRows(g, {
                   {cut("A.-cont"), "c t s", "s t{no cont} s"},
                   {cut("A.+cont"), "c", "t"},
                   {cut("A.cont/first"), "c t", "s t{no cont}"},
                   {cut("A.cont/last"), "c", "t"},
                   // Cutting one makes room for one.
                   {replace, "a s", "a{cont:1} s{cont:1}"},
                   // What is not the facing one may have to cross it.
                   {RuleBuilder(g, "A:[-son] B:[-son]").Spread("A.cont/first", "B").Delink("B.cont"), "c s", "c s", "",
                    "crossing"},
                   {RuleBuilder(g, "A:[-son] B:[-son]").Spread("A.+cont", "B").Delink("B.cont"), "c t",
                    "c{cont/2:1} s{cont:1}"},
                   {RuleBuilder(g, "A:[-son] B:[-son]").Spread("A.-cont", "B").Delink("B.cont"), "s s", "s s{no cont}"},
               });
}

TEST_CASE("graph: boundaries deleted", "[unit]") {
  const Grammar g = SmallGrammar();
  const auto drop = [&](const char* where) { return RuleBuilder(g, where).Delete("B").Within(Domain::kPhrase).rule(); };
  const Rule word = drop("[+syll] B:# [+syll]"), morpheme = drop("[+syll] B:- [+syll]"), final = drop("[+syll] B:#");
  CheckRows(g, {
                   {morpheme, "‖@stem a -@suffix a", "‖@stem a a"},
                   // The words become one, their morphemes stay apart.
                   {word, "‖@stem a #@stem a", "‖@stem a -@stem a"},
                   {drop("[+syll] B:= [+syll]"), "a =@clitic a", "a -@clitic a"},
                   // Of a run, those as strong as its strongest.
                   {word, "a - # # a", "a - - - a"},
                   {morpheme, "a - - a", "a a"},
                   {morpheme, "a # a", "a # a"},
                   // Beside the match a stronger one serves. The ends of a form stay.
                   {final, "a # t", "a - t"},
                   {final, "t a", "t a"},
                   {drop("B:# [+syll]"), "‖@stem a", "‖@stem a"},
                   {drop("[-syll] B:- [+syll] C:[]"), "t - _ a t", "t _ a t"},
                   {RuleBuilder(g, "A:[+syll] B:# C:[+syll]").Delete("B").Delete("A").Within(Domain::kPhrase), "a # u",
                    "- u"},
               });
}

TEST_CASE("graph: class nodes that are contours", "[unit]") {
  const Grammar g = WideGrammar();
  const auto result = [&](const Rule& rule, const Form& form) {
    const Application application = ApplyRule(g, rule, form);
    CHECK(Defects(application.form, g.tree) == "");
    return application.form;
  };
  const auto spread = [&](const char* path, const char* target) {
    return RuleBuilder(g, "A:[-son] B:[-son]").Spread(path, target).rule();
  };
  const auto cut = [&](const char* path) { return RuleBuilder(g, "A:[-son] B:[-son]").Delink(path).rule(); };
  CHECK(result(spread("A.Cplace", "B"), FormOf(g, "t{+grave} p")) ==
        FormOf(g, "t{+grave Cplace:1} p{+grave Cplace:1}"));
  // There is room for two: p bears t's and its own, in that order.
  const Form contour = result(spread("A.Cplace", "B"), FormOf(g, "t{+grave} p{-grave}"));
  const std::string dump = Dump(contour, g.tree), end = "Cplace1 Cplace[-grave]]]";
  CHECK(dump.substr(dump.size() - end.size()) == end);
  CHECK(result(cut("B.Cplace/first"), contour) == FormOf(g, "t{+grave} p{-grave}"));
  CHECK(result(cut("B.Cplace/last"), contour) == FormOf(g, "t{+grave Cplace:1} p{+grave Cplace:1}"));
  CHECK(result(cut("B.Cplace"), contour) == FormOf(g, "t{+grave} p"));
  // Two from the other side: the facing one is held already.
  CHECK(result(spread("B.Cplace", "A"), contour) == contour);
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
