// Further clauses, preference, the Linking Constraint, structure preservation, completion, fusion.
// Every expected graph is worked out by hand from grammar/notation.md §4 to §6 and §8, never from output.
#include "unit/graph/graph_case.h"

namespace tiersmith::testing {
namespace {

constexpr Rule::Mode kRightward = Rule::Mode::kRightward;
constexpr Rule::Mode kLeftward = Rule::Mode::kLeftward;
constexpr Rule::Prefer kPreferLeft = Rule::Prefer::kLeft;
constexpr Rule::Prefer kPreferRight = Rule::Prefer::kRight;

TEST_CASE("graph: otherwise", "[unit]") {
  const Grammar g = SmallGrammar();
  // Before a vowel voiced, else [-ant].
  const auto rule = [&](Rule::Mode mode) {
    return RuleBuilder(g, "A:[Coronal -son] [+syll]")
        .Set("A", "+voice")
        .Otherwise("A:[Coronal -son]")
        .Set("A", "-ant")
        .Mode(mode)
        .rule();
  };
  // The first clause fails for room: its match counts as none.
  const Rule full =
      RuleBuilder(g, "A:[+nasal] B:[-son]").Spread("A.Place", "B").Otherwise("B:[-son]").Set("B", "+voice");
  // Two changed items: one taken is enough.
  const Rule pair =
      RuleBuilder(g, "A:[+nasal]").Set("A", "-cons").Otherwise("A:[] B:[-son]").Set("A", "-ant").Set("B", "+voice");
  const Rule third = RuleBuilder(g, "A:[+nasal]")
                         .Set("A", "-cons")
                         .Otherwise("A:[] B:[-son]")
                         .Set("A", "-ant")
                         .Set("B", "+voice")
                         .Otherwise("B:[-son]")
                         .Set("B", "+cont");
  const Rule boundary =
      RuleBuilder(g, "[+syll] B:- [+syll]").Delete("B").Otherwise("A:[] B:- []").Delete("B").Delete("A");
  const Rule half = RuleBuilder(g, "A:[half1]").Delete("A").Otherwise("A:[-son]").Set("A", "+voice");
  CheckRows(g, {
                   {rule(Rule::Mode::kAtOnce), "t a t p", "d a t{-ant} p"},
                   {rule(kRightward), "t a t p", "d a t{-ant} p"},
                   {rule(kLeftward), "t a t p", "d a t{-ant} p"},
                   // Vacuously is matched too.
                   {rule(Rule::Mode::kAtOnce), "d a", "d a"},
                   {full, "n k", "n g", "", "capacity"},
                   {full, "n k{no Place}", "n{Place:1} t{Place:1}"},
                   {full, "k", "g"},
                   {pair, "n t", "n{-cons} t"},
                   {pair, "t t", "t{-ant} d"},
                   // A match that gives way itself stands before later clauses all the same.
                   {third, "n t", "n{-cons} t"},
                   {third, "t", "s"},
                   {boundary, "a - a", "a a"},
                   {boundary, "a - t", "t"},
                   {boundary, "t - a - a", "a a"},
                   // The same slot, not the same root.
                   {half, "t{root:1} t{root:1}", "d"},
               });
}

TEST_CASE("graph: prefer", "[unit]") {
  const Grammar g = SmallGrammar();
  const auto sides = [&](Rule::Prefer prefer) {
    Rule rule = RuleBuilder(g, "A:[] B:[no cont]").Spread("A.cont", "B").Prefer(prefer);
    PatternItem either;
    either.kind = PatternItem::Kind::kGroup;
    Pattern mirrored;
    mirrored.items = {rule.where.items[1], rule.where.items[0]};
    either.alternatives = {rule.where, mirrored};
    rule.where.items = {either};
    return rule;
  };
  const auto contents = [&](Rule::Prefer prefer) {
    return RuleBuilder(g, "A:[-syll αback] B:[+syll]").Set("B", "αback").Prefer(prefer).rule();
  };
  const Rule chain = RuleBuilder(g, "A:[+syll αback] B:[+syll no back]").Set("B", "αback").Prefer(kPreferLeft);
  CheckRows(g, {
                   {sides(Rule::Prefer::kNone), "a t{no cont} i", "", "ambiguous"},
                   {sides(kPreferLeft), "a t{no cont} i", "a{cont:1} s{cont:1} i", "", "prefer"},
                   {sides(kPreferRight), "a t{no cont} i", "a s{cont:1} i{cont:1}", "", "prefer"},
                   // Both can be met: nobody gives way.
                   {sides(kPreferLeft), "n t{no cont} i", "n{cont:1} t{-cont +cont cont:1 cont/2:2} i{cont:2}"},
                   {contents(kPreferLeft), "k a", "k a"},
                   {chain, "i a{no back} a{no back}", "i i{-high} a{no back}"},
               });
  // The same first item: the source decides.
  const auto source = [&](Rule::Prefer prefer) {
    return RuleBuilder(g, "[-syll] B:[+syll no back] ( [] )0-1 A:[back]")
        .SetAs("B.back", "A.back")
        .Prefer(prefer)
        .rule();
  };
  CheckRows(g, {
                   {source(Rule::Prefer::kNone), "p a{no back} i u", "", "ambiguous"},
                   {source(kPreferLeft), "p a{no back} i u", "p a{-back} i u", "", "prefer"},
                   {source(kPreferRight), "p a{no back} i u", "p a i u", "", "prefer"},
               });
}

TEST_CASE("graph: sharing blocked, the Linking Constraint", "[unit]") {
  const Grammar g = SmallGrammar();
  // Spirantisation after a vowel spares geminates: a line in the rule stands for the only one there is (Hayes 1986, on
  // Tigrinya; from memory).
  const auto spirant = [&](const char* where) {
    return RuleBuilder(g, where).Set("A", "+cont").SharingBlocked().rule();
  };
  const Rule plain = spirant("[+syll] A:[-son -cont]"), both = spirant("[+syll] A:[-son -cont] [-syll]"),
             shared = spirant("[+syll] A:[-son -cont shared root]"), literal = spirant("[+syll] A:[-son]");
  const auto debuccalise = [&](const char* where) {
    return RuleBuilder(g, where).Delink("A.Place").SharingBlocked().rule();
  };
  const Rule voice = RuleBuilder(g, "A:[-son] [+syll]").Set("A", "+voice").SharingBlocked();
  const Rule vacuous = RuleBuilder(g, "A:[-son -cont]")
                           .Set("A", "-cont")
                           .SharingBlocked()
                           .Otherwise("A:[-son shared root]|[short]")
                           .Set("A", "+voice");
  CheckRows(g, {
                   {plain, "a k a", "a k{+cont} a"},
                   {plain, "a k{root:1} k{root:1} a", "a k{root:1} k{root:1} a", "", "sharing"},
                   // Both halves in the match; or the bundle says that it may.
                   {both, "a k{root:1} k{root:1} a", "a k{+cont root:1} k{root:1} a"},
                   {shared, "a k{root:1} k{root:1} a", "a k{+cont root:1} k{root:1} a"},
                   {spirant("[+syll] A:[-son -cont long]"), "a k{root:1} k{root:1} a", "a k{+cont root:1} k{root:1} a"},
                   {literal, "a k{root:1} k{root:1} a", "a k{root:1} k{root:1} a", "", "sharing"},
                   // Place is not mentioned by a rule of manner.
                   {plain, "a k{Place:1} g{Place:1} a", "a k{+cont Place:1} g{Place:1} a"},
                   {plain, "a t{cont:1} k{cont:1} a", "a t{cont:1} k{cont:1} a", "", "sharing"},
                   // What the change names is mentioned, and so is what is under a shared node.
                   {debuccalise("A:[+nasal]"), "n{Place:1} t{Place:1}", "n{Place:1} t{Place:1}", "", "sharing"},
                   {debuccalise("A:[+nasal shared Place]"), "n{Place:1} t{Place:1}", "N t"},
                   {debuccalise("A:[+nasal ant]"), "n{Place:1} t{Place:1}", "n{Place:1} t{Place:1}", "", "sharing"},
                   {debuccalise("A:[+nasal ant shared Place]"), "n{Place:1} t{Place:1}", "N t"},
                   {debuccalise("A:[+nasal ant shared Place]"), "n{ant:1} t{ant:1}", "n{ant:1} t{ant:1}"},
                   {debuccalise("A:[+nasal]"), "n{ant:1} t{ant:1}", "N t"},
                   {debuccalise("A:[+nasal] [-son]"), "n{Place:1} t{Place:1}", "N t"},
                   // Where it bears none, the nearest node above.
                   {voice, "t{no voice} a", "d a"},
                   {voice, "t{no voice root:1} t{no voice root:1} a", "t{no voice root:1} t{no voice root:1} a", "",
                    "sharing"},
                   // A match that is blocked counts as none, vacuous or not.
                   {vacuous, "t", "t"},
                   {vacuous, "t{root:1} t{root:1}", "d{root:1} d{root:1}", "", "sharing"},
               });
}

TEST_CASE("graph: preserving", "[unit]") {
  Grammar g = SmallGrammar();
  const Rule voice = RuleBuilder(g, "A:[-son]").Set("A", "+voice").Preserving();
  const Rule round = RuleBuilder(g, "A:[-son]").Set("A", "round").Preserving();
  const Rule cut = RuleBuilder(g, "A:[+nasal]").Delink("A.Place").Preserving();
  const Rule insert = RuleBuilder(g, "A:[-syll] B:[-syll]").Insert("I", true, "B").Preserving();
  const Rule labial = RuleBuilder(g, "A:[+nasal]").Set("A", "no Coronal Labial").Preserving();
  const Rule otherwise =
      RuleBuilder(g, "A:[-son]").Set("A", "round").Preserving().Otherwise("A:[-son]").Set("A", "+voice");
  CheckRows(g, {
                   {voice, "p t k s c", "b d g z c", "", "preserving"},
                   {voice, "d{-ant}", "d{-ant}"},
                   {round, "p", "p", "", "preserving"},
                   // An archisegment is no symbol of `segments`.
                   {cut, "n", "n", "", "preserving"},
                   // What is brought in counts, and what is reached through sharing.
                   {insert, "t t", "t t", "", "preserving"},
                   {labial, "n{Place:1} d{Place:1}", "m{Place:1} b{Place:1}"},
                   {labial, "n{Place:1} s{Place:1}", "n{Place:1} s{Place:1}", "", "preserving"},
                   // What was no symbol before and is not changed stays out of it.
                   {voice, "t p{round}", "d p{round}", "", "preserving"},
                   {otherwise, "p", "b", "", "preserving"},
               });
}

TEST_CASE("graph: complete", "[unit]") {
  Grammar g = SmallGrammar();
  const auto omit = [&](const char* node, Value value, std::vector<std::string> symbols) {
    Inventory::OmitEntry entry{NodeOf(g, node), value, std::vector<bool>(g.inventory.symbols.size(), false)};
    for (const std::string& symbol : symbols) entry.takes[static_cast<std::size_t>(*g.inventory.Find(symbol))] = true;
    g.inventory.omitted.push_back(entry);
  };
  omit("voice", 0, {"t", "p", "s"});
  omit("ant", 1, {"t", "n", "s"});
  omit("cont", 1, {"s"});
  Symbol other = g.inventory.symbols[static_cast<std::size_t>(*g.inventory.Find("d"))];
  const Grammar plain = SmallGrammar();
  other.text = "ɖ";
  other.full = ContentOf(FormOf(plain, "d{-ant}"), 1);
  other.underlying = other.full;
  g.inventory.by_text["ɖ"] = static_cast<int>(g.inventory.symbols.size());
  g.inventory.symbols.push_back(other);
  for (Inventory::OmitEntry& entry : g.inventory.omitted) entry.takes.push_back(false);
  omit("ant", 0, {"ɖ"});
  Rule complete;
  complete.kind = Rule::Kind::kComplete;
  complete.name = "complete";
  CheckRows(g, {
                   {complete, "t{no voice}", "t"},
                   {complete, "t p", "t p"},
                   // No symbol, or several: unchanged.
                   {complete, "k{no voice} b{no voice}", "k{no voice} p"},
                   {complete, "t{no ant no voice} p{no Place}", "t p{no Place}"},
                   // One root on two slots, one Place under two roots that agree.
                   {complete, "t{no voice root:1} t{no voice root:1}", "t{root:1} t{root:1}"},
                   {complete, "n{no ant Place:1} t{no ant Place:1}", "n{Place:1} t{Place:1}"},
                   {complete, "n{no ant Place:1} t{Place:1}", "n{Place:1} t{Place:1}"},
                   // Two that differ get each their own; those alike beside each other go on sharing.
                   {complete, "n{no ant Place:1} d{no ant Place:1}", "n ɖ"},
                   {complete, "n{no ant Place:1} n{no ant Place:1} d{no ant Place:1} n{no ant Place:1}",
                    "n{Place:1} n{Place:1} ɖ n"},
                   // What is above the difference parts, what is beside it does not.
                   {complete, "n{no ant Coronal:1 Place:2} d{no ant Coronal:1 Place:2}", "n ɖ"},
                   // Inside a span of what it would get it stays as it is.
                   {complete, "p{voice:1} t{no voice} p{voice:1}", "p{voice:1} t{no voice} p{voice:1}", "", "crossing"},
                   {complete, "p{voice:1} t{no voice} k{voice:1} t{no voice}", "p{voice:1} t{no voice} k{voice:1} t",
                    "", "crossing"},
               });
}

TEST_CASE("graph: fuse", "[unit]") {
  Grammar g = SmallGrammar();
  const auto fused = [&](const std::vector<Fusion>& fusions, const char* form) {
    g.fusions = fusions;
    const Form result = Fused(g, FormOf(g, form));
    CHECK(Defects(result, g.tree) == "");
    return Dump(result, g.tree);
  };
  const auto graph = [&](const char* form) { return Dump(FormOf(g, form), g.tree); };
  const Fusion place{NodeOf(g, "Place"), {}, {}}, voice{NodeOf(g, "voice"), {}, {}}, root{kRootNode, {}, {}};
  CHECK(fused({place}, "a n t a") == graph("a n{Place:1} t{Place:1} a"));
  CHECK(fused({place}, "a n - t a") == graph("a n - t a"));
  CHECK(fused({place}, "n t d") == graph("n{Place:1} t{Place:1} d{Place:1}"));
  CHECK(fused({place}, "n t - t") == graph("n{Place:1} t{Place:1} - t"));
  // What bears no Place stands between, what bears another parts them.
  CHECK(fused({place}, "t E t") == graph("t{Place:1} E t{Place:1}"));
  CHECK(fused({place}, "t a t") == graph("t a t"));
  CHECK(fused({root}, "t t d") == graph("t{root:1} t{root:1} d"));
  CHECK(fused({root}, "t d t") == graph("t d t"));
  CHECK(fused({place, voice}, "n d") == graph("n{Place:1 voice:1} d{Place:1 voice:1}"));
  // Already one: nothing more.
  CHECK(fused({place}, "n{Place:1} t{Place:1} s") == graph("n{Place:1} t{Place:1} s{Place:1}"));
  // Both inside one match of the pattern.
  const Rule cluster = RuleBuilder(g, "[+nasal] [-syll]"), long_match = RuleBuilder(g, "[-syll] [+syll] [-syll] #");
  CHECK(fused({{NodeOf(g, "Place"), cluster.where, {}}}, "n t t") == graph("n{Place:1} t{Place:1} t"));
  CHECK(fused({{NodeOf(g, "Place"), long_match.where, {}}}, "t E t E t") == graph("t E t{Place:1} E t{Place:1}"));
  g.fusions = {place};
  g.rules = {RuleBuilder(g, "A:[+nasal]").Set("A", "-ant")};
  CHECK(Dump(Derive(g, FormOf(g, "n t")).surface, g.tree) == graph("n{-ant Place:1} t{-ant Place:1}"));
}

TEST_CASE("graph: a nearer slot counts only where the whole rule would apply", "[unit]") {
  Grammar g = SmallGrammar();
  g.tags.push_back("weak");
  const auto drop = [&](const char* where) { return RuleBuilder(g, where).Delete("B"); };
  const char* gap = "A:[+nasal] ... B:[-son]";
  CheckRows(g, {
                   {drop(gap), "n t a p", "n a p"},
                   {drop(gap).If("A.Place ≠ B.Place"), "n t a p", "n t a"},
                   {drop(gap).Except("weak"), "‖ n -@weak t a -@stem p", "‖ n -@weak t a -@stem"},
                   {drop("A:[+nasal αback] ... B:[-son αback]"), "ŋ t a k", "ŋ t a"},
                   {RuleBuilder(g, gap).Set("B", "round").Preserving(), "n p a t", "n p a t", "", "preserving"},
                   // A match on half of a long one is blocked and so nothing nearer.
                   {drop("A:[+nasal] ... B:[-son -voice]").SharingBlocked(), "n t{root:1} t{root:1} a k",
                    "n t{root:1} t{root:1} a", "", "sharing"},
                   // One that gives way to an earlier clause is nearer all the same.
                   {RuleBuilder(g, "B:[-son Labial]").Set("B", "+nasal").Otherwise(gap).Delete("B"), "n p a t",
                    "n p{+nasal} a t"},
               });
}

TEST_CASE("graph: clauses, preference and draws in a sweep", "[unit]") {
  const Grammar g = SmallGrammar();
  // A vowel without back takes that of the vowel before; where none is before, of the one behind.
  const Rule harmony = RuleBuilder(g, "A:[+syll back] ( [-syll] )0- B:[+syll no back]")
                           .SetAs("B.back", "A.back")
                           .Otherwise("B:[+syll no back] ( [-syll] )0- A:[+syll back]")
                           .SetAs("B.back", "A.back")
                           .Mode(kRightward);
  const auto either = [&](Rule::Prefer prefer) {
    return RuleBuilder(g, "[-syll] B:[+syll no back] ( [-syll] )0-1 ( [+syll] )0-1 A:[+syll back]")
        .SetAs("B.back", "A.back")
        .Prefer(prefer)
        .Mode(kRightward)
        .rule();
  };
  CheckRows(g, {
                   {harmony, "i t a{no back} t u", "i t a{-back} t u"},
                   {harmony, "a{no back} t u", "a t u"},
                   // The first has been given one when the second is visited.
                   {harmony, "a{no back} a{no back} t i", "a{no back} a{-back} t i"},
                   {either(kPreferLeft), "t a{no back} i u", "t a{-back} i u", "", "prefer"},
                   {either(kPreferRight), "t a{no back} i u", "t a i u", "", "prefer"},
                   {either(Rule::Prefer::kNone), "t a{no back} i u", "", "ambiguous"},
               });
}

TEST_CASE("graph: notes of the further changes and failures", "[unit]") {
  const Grammar g = SmallGrammar();
  const auto notes = [&](const Rule& rule, const char* form) {
    return ApplyRule(g, rule, FormOf(g, form), true).notes;
  };
  using Lines = std::vector<std::string>;
  CHECK(notes(RuleBuilder(g, "A:[+nasal] B:[-son]").SetAs("A.Place", "B.Place"), "n k").changes ==
        Lines{"n's Place set as k's"});
  CHECK(notes(RuleBuilder(g, "A:[+nasal] B:[-son]").FillAs("A.Place", "B.Place"), "N k").changes ==
        Lines{"N's Place filled as k's"});
  CHECK(notes(RuleBuilder(g, "A:[+nasal]").SetLiteral("A", "kː"), "n").changes == Lines{"n set to kː"});
  CHECK(notes(RuleBuilder(g, "A:[+syll]").Lengthen("A"), "t a").changes == Lines{"a made longer"});
  CHECK(notes(RuleBuilder(g, "A:[half1]").Shorten("A"), "t a{root:1} a{root:1}").changes ==
        Lines{"a (slot 2) made shorter"});
  CHECK(notes(RuleBuilder(g, "A:[-syll] B:[-syll]").Merge("A.Place", "B.Place"), "n t").changes ==
        Lines{"n's and t's Place made one"});
  CHECK(notes(RuleBuilder(g, "A:[] B:- C:[]").Delete("B"), "n - t").changes == Lines{"- deleted"});
  CHECK(notes(RuleBuilder(g, "A:[+syll αback] B:[+syll]").Set("B", "-αback"), "i i").changes ==
        Lines{"i (slot 2) set to [+back]"});
  CHECK(notes(RuleBuilder(g, "A:[-syll] B:[-syll]").Insert("E", true, "B", "N").Set("N", "+nasal"), "t p").changes ==
        Lines{"E inserted before p", "E set to [+nasal]"});
  CHECK(notes(RuleBuilder(g, "A:[-son]").Delink("A.-cont"), "c").changes == Lines{"c's -cont cut"});

  CHECK(notes(RuleBuilder(g, "A:[-son]").Set("A", "round").Preserving(), "p").blocked ==
        Lines{"blocked at p: preserving (the result is no symbol of `segments`)"});
  CHECK(notes(RuleBuilder(g, "A:[half1 -cont]|[-cont]").Set("A", "+cont").SharingBlocked(), "t{cont:1} p{cont:1}")
            .blocked.front() == "blocked at t: sharing (a node that the rule mentions is held outside the match)");
  CHECK(notes(RuleBuilder(g, "( [] )0-1 A:[back] B:[+syll no back] ( [] )0-1").SetAs("B.back", "A.back"), "a E")
            .blocked.empty());
}

}  // namespace
}  // namespace tiersmith::testing
