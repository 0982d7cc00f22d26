// The checker: what each mistake is called, the text it points at, and what is advised. Expected rows are written by hand
// from grammar/notation.md.
#include "model/check.h"

#include "support/model_case.h"

namespace tiersmith::testing {
namespace {

const std::string kHead = kSmallHead;

TEST_CASE("check: the tree", "[unit]") {
  CheckRows(
      "",
      {
          {"", Kind::kBadTree, "", "the grammar is empty"},
          {"segments { p [+son] }", Kind::kBadTree, "", "has no `tree`"},
          {"tree { root > ±cons }", Kind::kUnknownSymbol, "", "lists no segments"},
          {"tree { root > ±cons ±son ±cons } segments { p [+son] }", Kind::kDuplicate, "cons",
           "declared twice under root"},
          {"tree { root > A > ±f\n root > B > ±f } segments { p [+f] }", Kind::kNotSupportedYet, "f",
           "two mothers, A and B"},
          {"tree { root > Place > •Labial\n Labail > round } segments { p [round] }", Kind::kUnknownNode, "Labail",
           "did you mean 'Labial'?"},
          {"tree { root > ±f\n A > B\n B > A } segments { p [+f] }", Kind::kBadTree, "A", "hangs from itself"},
          {"tree { root > ±f\n f > g } segments { p [+f] }", Kind::kBadTree, "f",
           "has values, so nothing can hang from it"},
          {"tree { root > ±f\n root > Height: a b a } segments { p [+f] }", Kind::kDuplicate, "a",
           "twice among the values"},
          {"tree { root > ±f ×9 } segments { p [+f] }", Kind::kBadTree, "f", "1 to 8 times"},
          {"tree { root > ±f ±g ×2 in /p/ } segments { p [+f] }", Kind::kBadTree, "/p/", "by features, not by symbols"},
          {"tree { root > ±f root } segments { p [+f] }", Kind::kBadTree, "root", "hangs from nothing"},
      });
}

TEST_CASE("check: a tree as it comes out", "[unit]") {
  // Lines in any order; mothers before daughters; slot above root in every tree.
  const Loaded loaded = LoadOrFail(R"(
tree {
  Labial > round
  slot   > Tone: H M L ×2 floating
  root   > ±cons ±cont ×2 in [-cons] hidden abstract
  root   > Place > •Labial
}
segments { p [+cons Labial] }
)");
  const Tree& tree = loaded.grammar->tree;
  std::string names;
  for (const TreeNode& node : tree.nodes) names += node.name + "<" + tree[node.mother].name + " ";
  CHECK(names == "slot<slot root<slot cons<root cont<root hidden<root Place<root Labial<Place round<Labial Tone<slot ");
  CHECK(tree[*tree.Find("Place")].type == TreeNode::Type::kClass);
  CHECK_FALSE(tree[*tree.Find("Place")].standing);
  CHECK(tree[*tree.Find("Labial")].standing);
  CHECK(tree[*tree.Find("round")].type == TreeNode::Type::kBare);
  const TreeNode& cont = tree[*tree.Find("cont")];
  CHECK(cont.max == 2);
  REQUIRE(cont.room.has_value());
  CHECK(cont.room->bundle.size() == 1);
  const TreeNode& tone = tree[*tree.Find("Tone")];
  CHECK(tone.floating);
  CHECK(tone.max == 2);
  CHECK(tone.values == std::vector<std::string>{"H", "M", "L"});
  CHECK(tree[*tree.Find("hidden")].abstract_);
}

TEST_CASE("check: names in bundles, sets and literals", "[unit]") {
  CheckRows(kHead,
            {
                {"class V = [+sylb]", Kind::kUnknownFeature, "sylb", "did you mean 'syll'?"},
                {"class V = [+xyzzy]", Kind::kUnknownFeature, "xyzzy", "declare it in `tree`"},
                {"class V = [+round]", Kind::kBadValue, "+round", "write `round` or `no round`"},
                {"class V = [-Place]", Kind::kBadValue, "-Place", "class node"},
                {"class V = [back:x]", Kind::kBadValue, "back:x", "write `+back` or `-back`"},
                {"class V = Vowel", Kind::kUnknownClass, "Vowel", "there is no class 'Vowel'"},
                {"class Vowel = [+syll] class X = Vowels", Kind::kUnknownClass, "Vowels", "did you mean 'Vowel'?"},
                {"class X = syll", Kind::kUnknownClass, "syll", "in brackets: [syll]"},
                {"class X = p", Kind::kUnknownClass, "p", "between slashes: /p/"},
                {"class X = /q/", Kind::kUnknownSymbol, "q", "no symbol of the grammar"},
                {"class X = /pt/", Kind::kBadRule, "pt", "2 symbols; one is wanted"},
                {"class X = Y class Y = X", Kind::kBadRule, "X", "told by itself"},
                {"class X = [+syll] class X = [-syll]", Kind::kDuplicate, "X", "declared twice"},
                {"language \"a\" language \"b\"", Kind::kDuplicate, "\"b\"", "declared twice"},
            });
  CheckRows("tree { root > ±son\n root > Height: low mid\n slot > Tone: H L }\nsegments { a [+son Height:low] }\n",
            {
                {"class X = [Height:high]", Kind::kBadValue, "high", "its values are: low mid"},
                {"class X = [+Height]", Kind::kBadValue, "+Height", "write `Height:low`"},
                {"class X = [mid]", Kind::kUnknownFeature, "mid", "write Height:mid"},
                {"segments { e [Height] }", Kind::kBadValue, "Height", "needs a value"},
                {"segments { e [Tone:H] }", Kind::kNotSupportedYet, "Tone:H", "hangs from the slot"},
                {"diacritics { ◌́ [Tone:H] }", Kind::kNotSupportedYet, "Tone:H", "hangs from the slot"},
            });
}

TEST_CASE("check: the inventory", "[unit]") {
  CheckRows(kHead,
            {
                {"segments from \"ipa\" { ☃ }", Kind::kUnknownSymbol, "☃", "the library \"ipa\" has no '☃'"},
                {"segments { x = ☃ [+son] }", Kind::kUnknownSymbol, "☃", "say what it is"},
                {"segments from \"opi\" { k }", Kind::kMissingFile, "\"opi\"", "segment library"},
                {"segments { x = y [+son]  y = x [-son] }", Kind::kUnknownSymbol, "x", "by way of itself"},
                {"segments { p = p [+voice]  p = t [+voice] }", Kind::kDuplicate, "p", "defined twice"},
                {"allophones { p }", Kind::kDuplicate, "p", "in segments and in allophones"},
                {"segments { d = t [+voise] }", Kind::kUnknownFeature, "voise", "did you mean 'voice'?"},
                {"segments { d = t [+voice +voice] }", Kind::kBadValue, "+voice", "twice side by side"},
                {"segments { d = t [+voice -voice] }", Kind::kBadValue, "-voice", "at most 1 of 'voice'"},
                {"segments { d = t [+voice +son -voice] }", Kind::kBadValue, "-voice", "given twice in one bundle"},
                {"segments { d = n [-cont +cont] }", Kind::kBadValue, "[-cont +cont]", "no room for two of 'cont'"},
                {"segments { a: = a [+voice] }", Kind::kBadForm, "a:", "cannot be a symbol"},
                {"segments { x [+son +syll] without Place in [+son] }", Kind::kBadValue, "Place", "takes values"},
                {"omit { Place in [+son] }", Kind::kBadValue, "Place", "class node"},
                {"omit { back in [+son] }", Kind::kBadValue, "back", "±back for both"},
                {"omit { +round in [+son] }", Kind::kBadValue, "round", "takes no sign"},
                {"omit { ±bakc in [+son] }", Kind::kUnknownFeature, "bakc", "did you mean 'back'?"},
                {"diacritics { ◌ʷ [round]  ◌ʷ [+voice] }", Kind::kDuplicate, "◌ʷ", "declared twice"},
                {"diacritics { ʷ [round] }", Kind::kNotSupportedYet, "ʷ", "has no ◌"},
                {"diacritics { ◌ʷ [] }", Kind::kBadValue, "[]", "gives nothing"},
                {"segments { b = p }", Kind::kSymbolsFallTogether, "b", "'p' and 'b' fall together"},
            });
  CheckRows(kHead, {{"segments from \"ipa\" { p }", Kind::kDuplicate, "p", "listed twice"}}, Severity::kWarning);
  // No output may bear an abstract node, so no symbol that spells one does.
  const std::string weak = "tree { root > ±syll weak abstract }\nsegments { a [+syll] }\n";
  CheckRows(weak, {
                      {"segments { e [+syll weak] }", Kind::kBadValue, "e", "'weak', which is abstract"},
                      {"allophones { e [+syll weak] }", Kind::kBadValue, "e", "'weak', which is abstract"},
                  });
  const Loaded abstract = LoadOrFail(weak + "archisegments { A [+syll weak] } diacritics { ◌̆ [weak] }");
  CHECK_FALSE(SymbolNamed(*abstract.grammar, "A").completes);
  CHECK_FALSE(SymbolNamed(*abstract.grammar, "ă").completes);
}

TEST_CASE("check: rules", "[unit]") {
  CheckRows(
      kHead + "class V = [+syll] class C = [-syll] pattern Two = C C\n",
      {
          {"rule \"r\" { where X:[+nasl] delete X }", Kind::kUnknownFeature, "nasl", "did you mean 'nasal'?"},
          {"rule \"r\" { where X:Vw delete X }", Kind::kUnknownClass, "Vw", "did you mean 'V'?"},
          {"rule \"r\" { where X:[+nasal] delete Y }", Kind::kUnknownLabel, "Y", "no item of the rule is labelled 'Y'"},
          {"rule \"r\" { where V C V delete V }", Kind::kUnknownLabel, "V", "stands 2 times in the pattern"},
          {"rule \"r\" { where X:[+nasal] delink X.Plcae }", Kind::kUnknownNode, "Plcae", "did you mean 'Place'?"},
          {"rule \"r\" { where X:[+nasal] X:[-nasal] delete X }", Kind::kBadRule, "X", "used twice"},
          {"rule \"r\" { where V:[+nasal] C delete V }", Kind::kBadRule, "V", "name of a class"},
          {"rule \"r\" { where (X:[+nasal]) Y:[+syll] delete Y }", Kind::kBadRule, "X", "inside a repeated group"},
          {"rule \"r\" { where {X:[+nasal] C | C} Y:[+syll] delete Y }", Kind::kBadRule, "X",
           "one of several alternatives"},
          {"rule \"r\" { where C₀ ... X:[+syll] delete X }", Kind::kBadRule, "...", "between two single slots"},
          {"rule \"r\" { where ... X:[+syll] delete X }", Kind::kBadRule, "...", "between two single slots"},
          {"rule \"r\" { where - # X:[+syll] delete X }", Kind::kBadRule, "#", "two boundaries"},
          {"rule \"r\" { where X:V Y:V spread X.Place to X }", Kind::kBadRule, "X.Place", "spreads to itself"},
          {"rule \"r\" { where X:V Y:V delink Y.Place spread X.back to Y }", Kind::kBadRule, "spread X.back to Y",
           "moves lines of 'Place'"},
          {"rule \"r\" { where X:V Y:V spread X.Place to Y set Y [+back] }", Kind::kBadRule, "set Y [+back]",
           "changes 'back' under it"},
          {"rule \"r\" { where X:V Y:V spread X.back to Y set Y [+back] }", Kind::kBadRule, "set Y [+back]",
           "a line and a content of 'back' on 'Y'"},
          {"rule \"r\" { where Y:V fill Y [-back] delink Y.back }", Kind::kBadRule, "fill Y [-back]",
           "a line and a content of 'back' on 'Y'"},
          {"rule \"r\" { where Y:V set Y [no Place] delink Y.Place }", Kind::kBadRule, "set Y [no Place]",
           "a line and a content of 'Place' on 'Y'"},
          {"rule \"r\" { where Y:V set Y [no Place] set Y [+back] }", Kind::kBadRule, "set Y [+back]",
           "takes 'Place' away and changes 'back' under it"},
          {"rule \"r\" { where X:V Y:V set X [+nasal no Place] fill Y [-back] }", Kind::kBadRule, "fill Y [-back]",
           "takes 'Place' away and changes 'back' under it"},
          {"rule \"r\" { where X:V Y:V spread X.back to Y set Y [no Place] }", Kind::kBadRule, "spread X.back to Y",
           "takes 'Place' away and changes 'back' under it"},
          {"rule \"r\" { where Y:V delink Y.back set Y [no Place] }", Kind::kBadRule, "delink Y.back",
           "takes 'Place' away and changes 'back' under it"},
          {"rule \"r\" { where X:V Y:V delete X delete Y iterate rightward }", Kind::kBadRule, "delete Y",
           "changes one item"},
          {"rule \"r\" { where X:V set X [no Place +back] }", Kind::kBadRule, "[no Place +back]", "takes 'Place' away"},
          {"rule \"r\" { where X:V fill X [no round] }", Kind::kBadRule, "[no round]", "takes nothing away"},
          {"rule \"r\" { where X:V set X [+round] }", Kind::kBadValue, "+round", "write `round`"},
          {"rule \"r\" { where X:V insert E:/pt/ before X }", Kind::kBadRule, "pt", "no single symbol"},
          {"rule \"r\" { where X:V insert E:/q/ before X }", Kind::kUnknownSymbol, "q", "no symbol of the grammar"},
          {"rule \"r\" { where X:V insert X:/p/ before X }", Kind::kBadRule, "X", "used twice"},
          {"rule \"r\" { where X:V insert E:/p/ before X delete E }", Kind::kBadRule, "E", "is inserted by this rule"},
          {"rule \"r\" { where X:/pt/ delete X }", Kind::kBadRule, "X", "takes no label"},
          {"rule \"r\" { where X:/pː/ delete X }", Kind::kBadRule, "ː", "one slot each symbol"},
          {"pattern P = [-syll] X:[+syll] rule \"r\" { where Y:V P delete Y }", Kind::kBadRule, "X",
           "no labels inside"},
          {"pattern P = [+sylb] #", Kind::kUnknownFeature, "sylb", "did you mean 'syll'?"},
          {"pattern P = [+syll] Q pattern Q = P #", Kind::kBadRule, "P", "told by itself"},
          {"rule \"r\" { where X:V delete X unless [+nasal] # }", Kind::kBadRule, "[+nasal] #",
           "speaks of no item of the rule"},
          {"rule \"r\" { where X:V delete X unless Y:[+nasal] }", Kind::kBadRule, "Y", "labels no item of the rule"},
          {"rule \"r\" { where X:V delete X }  rule \"r\" { where X:C delete X }", Kind::kDuplicate, "\"r\"",
           "stands twice"},
      });
  CheckRows(
      "tree { root > ±son A ×2\n A > f ±g\n slot > Tone: H L }\nsegments { a [+son f]  p [-son f] }\n",
      {
          {"rule \"r\" { where X:[+son] delink X.f }", Kind::kNotSupportedYet, "delink X.f", "may hold several of 'A'"},
          {"rule \"r\" { where X:[+son] delink X.Tone }", Kind::kNotSupportedYet, "delink X.Tone", "borne by the slot"},
          {"rule \"r\" { where X:[+son] set X [Tone:H] }", Kind::kNotSupportedYet, "set X [Tone:H]",
           "borne by the slot"},
      });
  CheckRows(
      "tree { root > ±son f floating }\nsegments { a [+son f]  p [-son] }\n",
      {{"rule \"r\" { where X:[+son] delink X.son }", Kind::kNotSupportedYet, "f", "may float and 'a' bears it"}});
}

TEST_CASE("check: rules that never apply", "[unit]") {
  CheckRows(
      kHead,
      {
          {"rule \"r\" { where X:[+voice no Laryngeal] delete X }", Kind::kNeverApplies, "[+voice no Laryngeal]",
           "'+voice' and 'no Laryngeal'"},
          {"rule \"r\" { where X:[+back -back] delete X }", Kind::kNeverApplies, "[+back -back]",
           "'+back' and '-back'"},
          {"rule \"r\" { where X:[round no Labial] delete X }", Kind::kNeverApplies, "[round no Labial]",
           "'round' and 'no Labial'"},
          {"rule \"r\" { where X:[+syll] # [-syll] delete X }", Kind::kNeverApplies, "#", "stays within the word"},
      },
      Severity::kWarning);
  // A contour may have both values.
  const Loaded contour = LoadOrFail(kHead + "rule \"r\" { where X:[-cont +cont] # delete X }");
  CHECK(contour.diagnostics.all().empty());
}

TEST_CASE("check: several mistakes in one run", "[unit]") {
  const Loaded loaded = Load(
      kHead + "rule \"a\" { where X:[+nasl] delete X }\nrule \"b\" { where X:[+syll] delete Y }\ndata { /paq/ [p] }");
  std::string kinds;
  for (const Diagnostic& d : loaded.diagnostics.all()) kinds += loaded.Covered(d) + " ";
  CHECK(kinds == "nasl Y q ");
}

TEST_CASE("check: changes that may stand side by side", "[unit]") {
  const Loaded loaded = LoadOrFail(kHead + R"(
rule "two nodes"   { where X:[+syll] Y:[+syll]  spread X.high to Y  set Y [+back] }
rule "two items"   { where X:[+syll] Y:[+syll]  delink X.back  set Y [+back] }
rule "in place of" { where X:[+syll] Y:[+syll]  delink Y.Place  spread X.Place to Y }
rule "side by side" { where X:[+syll]  set X [no Place]  set X [-nasal] }
rule "above"       { where X:[+syll]  set X [no back]  set X [Labial] }
)");
  CHECK(loaded.diagnostics.all().empty());
}

TEST_CASE("check: one mistake is not said for ever", "[unit]") {
  const Loaded rows = Load(kHead + "data { /taqa/ [taqa]  /qa/ [q]  /ta/ [ta] }");
  REQUIRE(rows.diagnostics.all().size() == 1);
  CHECK(rows.diagnostics.all()[0].message ==
        "'q' (U+0071, LATIN SMALL LETTER Q) is in no symbol of the grammar (3 further forms have the same)");
  CHECK(Load(kHead + "class A = [+x] class B = [+x] class C = [+x] class D = [+x] class E = [+x]")
            .diagnostics.all()
            .size() == 3);
}

TEST_CASE("check: patterns, labels and changes", "[unit]") {
  const Loaded loaded = LoadOrFail(kHead + R"(
class V = [+syll]
class Nasal = [+nasal]
pattern Tail = [-syll]₀ #
rule "one" { where /pt/ V₁² {[+nasal] | /s/} Nasal Tail  delete Nasal  unless Nasal /t/ }
rule "two" { where A:V ...Place B:V - V  spread A.back, A.Labial to B  iterate leftward }
rule "three" { where {/p/ /t/ | /s/} X:[] but not V Y:empty  set X [Labial round -high]  insert E:/i/ after X }
)");
  const std::vector<Rule>& rules = loaded.grammar->rules;
  REQUIRE(rules.size() == 3);
  const Tree& tree = loaded.grammar->tree;

  const std::vector<PatternItem>& one = rules[0].where.items;
  REQUIRE(one.size() == 7);  // p t (V) {..} Nasal ([-syll]) #
  CHECK(one[0].test.op == SlotTest::Op::kLiteral);
  CHECK(one[1].test.op == SlotTest::Op::kLiteral);
  CHECK(one[2].kind == PatternItem::Kind::kGroup);
  CHECK(one[2].min == 1);
  CHECK(one[2].max == 2);
  CHECK(one[3].test.op == SlotTest::Op::kOr);  // alternatives of single items are a set
  CHECK(one[4].label == 0);                    // a class named once is its own label
  CHECK(rules[0].labels == std::vector<std::string>{"Nasal"});
  CHECK(one[5].kind == PatternItem::Kind::kGroup);
  CHECK(one[5].max == -1);
  CHECK(one[6].boundary == Boundary::kWord);
  REQUIRE(rules[0].unless.size() == 1);
  CHECK(rules[0].unless[0].items[0].label == 0);  // a bare label is that item
  CHECK(rules[0].unless[0].items[0].test.op == SlotTest::Op::kAny);

  CHECK(rules[1].mode == Rule::Mode::kLeftward);
  CHECK(rules[1].where.items[1].kind == PatternItem::Kind::kGap);
  CHECK(rules[1].where.items[1].tier == tree.Find("Place"));
  REQUIRE(rules[1].changes.size() == 2);
  CHECK(rules[1].changes[1].node == *tree.Find("Labial"));
  CHECK(rules[1].changes[1].source == 0);
  CHECK(rules[1].changes[1].target == 1);

  CHECK(rules[2].where.names_empty);
  CHECK(rules[2].where.items[0].alternatives.size() == 2);
  CHECK(rules[2].where.items[1].test.op == SlotTest::Op::kAnd);
  REQUIRE(rules[2].changes.size() == 2);
  // Labial comes along with round.
  REQUIRE(rules[2].changes[0].settings.size() == 2);
  CHECK(rules[2].changes[0].settings[0].node == *tree.Find("round"));
  CHECK(rules[2].changes[0].settings[1].values == std::vector<Value>{0});
  CHECK(rules[2].changes[1].inserted == SymbolNamed(*loaded.grammar, "i").underlying);
  CHECK_FALSE(rules[2].changes[1].before);
}

TEST_CASE("check: constructs of later releases are passed on, once each", "[unit]") {
  for (const char* text : {"rule \"r\" { where X:[+nasal] delete X repeat 2 }", "syllable { peak [+syll] }",
                           "melody Tone { within word }"}) {
    const Loaded loaded = Load(kHead + text);
    CAPTURE(text, loaded.Messages());
    CHECK(loaded.grammar == nullptr);
    REQUIRE(loaded.diagnostics.all().size() == 1);
    CHECK(loaded.diagnostics.all()[0].kind == Kind::kNotSupportedYet);
  }
}

TEST_CASE("check: the nearest name", "[unit]") {
  const std::vector<std::string> names = {"back", "Labial", "Place", "distributed", "C"};
  CHECK(NearestName("bakc", names) == "back");
  CHECK(NearestName("labial", names) == "Labial");
  CHECK(NearestName("distribued", names) == "distributed");
  CHECK(NearestName("Pace", names) == "Place");
  CHECK(NearestName("xyzzy", names) == "");
  CHECK(NearestName("D", names) == "");
  CHECK(NearestName("", names) == "");
}

}  // namespace
}  // namespace tiersmith::testing
