// The checker at work on rules: what each construct comes to, and what each mistake is called. Expected values are
// written by hand from grammar/notation.md; nothing is run.
#include "model/check.h"
#include "support/model_case.h"

namespace tiersmith::testing {
namespace {

using Test = FeatureTest::Kind;
using Part = FeatureTest::Part;
using Op = Change::Op;

const std::string kHead = kSmallHead + "class V = [+syll] class C = [-syll]\n";
// Contours on the root, of a class node and on the slot, and features of several values.
const std::string kToneHead =
    "tree { root > ±syll ±cont ×2\n root > Height: low mid high\n root > A ×2\n A > ±f g\n slot > Tone: H M L ×2\n"
    " slot > Length: a b c ×4 }\nsegments { a [+syll -cont Height:low]  i [+syll +cont Height:high]  p [-syll] }\n";

Loaded Whole(const std::string& rules, const std::string& head = kHead) {
  return LoadOrFail(head + rules, Reach::kWhole);
}

void CheckMistakes(const std::string& head, std::initializer_list<Mistake> rows) {
  CheckRows(head, rows, Severity::kError, Reach::kWhole);
}

NodeId Node(const Loaded& loaded, const char* name) { return *loaded.grammar->tree.Find(name); }

const PatternItem& ItemOf(const Loaded& loaded, std::size_t rule, std::size_t item) {
  return loaded.grammar->rules[rule].where.items[item];
}

// The parts asked of the values in the bundles of each slot, in order: "- first last".
std::string PartsOf(const Pattern& pattern) {
  std::string all;
  const auto in_test = [&](const auto& self, const SlotTest& test) -> void {
    for (const FeatureTest& feature : test.bundle) {
      all += feature.part == Part::kFirst ? "first " : feature.part == Part::kLast ? "last " : "- ";
    }
    for (const SlotTest& arg : test.args) self(self, arg);
  };
  const auto in_pattern = [&](const auto& self, const Pattern& some) -> void {
    for (const PatternItem& item : some.items) {
      in_test(in_test, item.test);
      for (const Pattern& alternative : item.alternatives) self(self, alternative);
    }
  };
  in_pattern(in_pattern, pattern);
  if (!all.empty()) all.pop_back();
  return all;
}

// ---- agreement --------------------------------------------------------------------------------------

TEST_CASE("check rules: variables are numbered by clause", "[unit]") {
  const Loaded loaded = Whole(R"(
rule "r" {
  where A:[αback βhigh] but not /i/ ([αround])₀ B:[-βhigh αback]
  unless B [βhigh]
  set B [αround -βvoice]
  otherwise where A:[γPlace] B:[γPlace]  delete A
}
)");
  CHECK(loaded.diagnostics.all().empty());
  const Rule& rule = loaded.grammar->rules[0];
  CHECK(rule.variables == 2);
  const std::vector<FeatureTest>& first = rule.where.items[0].test.args[0].bundle;
  REQUIRE(first.size() == 2);
  CHECK(first[0].kind == Test::kAgrees);
  CHECK(first[0].node == Node(loaded, "back"));
  CHECK(first[0].variable == 0);
  CHECK(first[1].variable == 1);
  const std::vector<FeatureTest>& last = rule.where.items[2].test.bundle;
  CHECK(last[0].kind == Test::kDiffers);
  CHECK(last[0].variable == 1);
  CHECK(last[1].variable == 0);
  CHECK(rule.unless[0].items[1].test.bundle[0].variable == 1);
  REQUIRE(rule.changes[0].settings.size() == 2);
  CHECK(rule.changes[0].settings[0].variable == 0);
  CHECK(rule.changes[0].settings[0].values.empty());
  CHECK_FALSE(rule.changes[0].settings[0].differs);
  CHECK(rule.changes[0].settings[1].variable == 1);
  CHECK(rule.changes[0].settings[1].differs);
  REQUIRE(rule.otherwise.size() == 1);
  CHECK(rule.otherwise[0].variables == 1);
  CHECK(rule.otherwise[0].where.items[0].test.bundle[0].variable == 0);
  CHECK(rule.otherwise[0].labels == std::vector<std::string>{"A", "B"});
}

TEST_CASE("check rules: mistakes in agreement", "[unit]") {
  CheckMistakes(
      kHead,
      {
          {"rule \"r\" { where A:[αbakc] B:[αback] delete A }", Kind::kUnknownFeature, "bakc", "did you mean 'back'?"},
          {"class X = [αback]", Kind::kBadRule, "αback", "by it the items of a rule agree"},
          {"rule \"r\" { where A:[αback] B:[] but not [αback] delete A }", Kind::kBadRule, "αback", "not under `or`"},
          {"rule \"r\" { where A:[αback] B:{[αback] | C} delete A }", Kind::kBadRule, "αback", "not under `or`"},
          {"rule \"r\" { where A:[αback] B:{[+syll] or [αback]} delete A }", Kind::kBadRule, "αback", "not under `or`"},
          {"rule \"r\" { where A:[αPlace] B:[-αPlace] delete A }", Kind::kBadValue, "-αPlace", "has no opposite"},
          {"rule \"r\" { where A:[αround] B:[-αround] delete A }", Kind::kBadValue, "-αround", "has no opposite"},
          {"rule \"r\" { where A:[αback] B:[αPlace] delete A }", Kind::kBadValue, "αPlace",
           "cannot be a value of both 'back' and 'Place'"},
          {"rule \"r\" { where A:V set A [αback] }", Kind::kBadRule, "αback", "stands nowhere in the `where`"},
          {"rule \"r\" { where A:V ([αback]) set A [αback] }", Kind::kBadRule, "αback", "may be left out"},
          {"rule \"r\" { where A:V unless A [αback] set A [αback] }", Kind::kBadRule, "αback", "only in `unless`"},
          {"rule \"r\" { where A:[αback] insert E:[+syll αback] after A }", Kind::kBadValue, "αback", "set X [αback]"},
          {"rule \"r\" { where A:[αback] set A [αback +back] }", Kind::kBadValue, "+back", "given twice"},
          {"rule \"r\" { where A:[αPlace] B:C set B [αPlace +back] }", Kind::kBadRule, "[αPlace +back]",
           "replaces 'Place' and says something of 'back'"},
          {"segments { b = p [αvoice] }", Kind::kBadValue, "αvoice", "gives no content here"},
          {"omit { -voice in [αback] }", Kind::kBadRule, "αback", "by it the items of a rule agree"},
      });
  CheckRows(kHead,
            {
                {"rule \"r\" { where A:[αback] delete A }", Kind::kBadRule, "αback", "nothing for it to agree with"},
                {"rule \"r\" { where A:[αback no back] B:[αback] delete A }", Kind::kNeverApplies, "[αback no back]",
                 "'agreement in back' and 'no back'"},
                {"rule \"r\" { where A:[αback -αback] delete A }", Kind::kNeverApplies, "[αback -αback]",
                 "'agreement in back' and 'difference in back'"},
            },
            Severity::kWarning, Reach::kWhole);
  // Two slots of one group agree; a bare feature agrees in not being there; a value fixes what α is.
  CHECK(Whole("rule \"r\" { where A:C [αback]₂ A2:[αround no round] [αround] [βback +back] [βback] delete A }")
            .diagnostics.all()
            .empty());
}

// ---- what a form alone can answer ---------------------------------------------------------------------

TEST_CASE("check rules: sharing and length", "[unit]") {
  const Loaded loaded = Whole(R"(
class Long = [long]
rule "r" { where A:[shared Place rightward] B:[unshared root] [short] [half first] X:[half second] Long  delete A }
)");
  CHECK(loaded.diagnostics.all().empty());
  const auto test = [&](std::size_t item) { return ItemOf(loaded, 0, item).test.bundle[0]; };
  CHECK(test(0).kind == Test::kShared);
  CHECK(test(0).node == Node(loaded, "Place"));
  CHECK(test(0).side == FeatureTest::Side::kRight);
  CHECK(test(1).kind == Test::kUnshared);
  CHECK(test(1).node == kRootNode);
  CHECK(test(1).side == FeatureTest::Side::kEither);
  CHECK(test(2).kind == Test::kShort);
  CHECK(test(3).kind == Test::kHalfFirst);
  CHECK(test(4).kind == Test::kHalfSecond);
  CHECK(test(5).kind == Test::kLong);
  CHECK(test(5).node == kRootNode);

  CheckMistakes(
      kHead,
      {
          {"omit { -voice in [long] }", Kind::kBadValue, "[long]", "only rules can ask this"},
          {"class L = [long] omit { -voice in L }", Kind::kBadValue, "L", "only rules can ask this"},
          {"diacritics { ◌ʷ [round] on [shared Place] }", Kind::kBadValue, "[shared Place]", "only rules can ask this"},
          {"segments { without ±voice in {[long] or V} }", Kind::kBadValue, "{[long] or V}", "only rules can ask this"},
          {"segments { b = p [long] }", Kind::kBadValue, "long", "no content to give"},
          {"rule \"r\" { where A:V set A [long] }", Kind::kBadValue, "long", "`lengthen`"},
          {"rule \"r\" { where A:[shared Plaec] delete A }", Kind::kUnknownFeature, "Plaec", "did you mean 'Place'?"},
          {"rule \"r\" { where A:[shared slot] delete A }", Kind::kBadValue, "shared slot", "never shared"},
      });
  CheckRows(
      kHead,
      {
          {"rule \"r\" { where A:[long short] delete A }", Kind::kNeverApplies, "[long short]", "'long' and 'short'"},
          {"rule \"r\" { where A:[half second half first] delete A }", Kind::kNeverApplies, "[half second half first]",
           "'half second' and 'half first'"},
          {"rule \"r\" { where A:[shared Place no Place] delete A }", Kind::kNeverApplies, "[shared Place no Place]",
           "'shared Place' and 'no Place'"},
          {"rule \"r\" { where A:[unshared Place, shared Place leftward] delete A }", Kind::kNeverApplies,
           "[unshared Place, shared Place leftward]", "'unshared Place' and 'shared Place leftward'"},
      },
      Severity::kWarning, Reach::kWhole);
  CHECK(Whole("rule \"r\" { where A:[shared Place leftward, unshared Place rightward] delete A }")
            .diagnostics.all()
            .empty());
}

// ---- contours ---------------------------------------------------------------------------------------

TEST_CASE("check rules: edges of contours", "[unit]") {
  struct Row {
    const char* rule;
    const char* parts;
  };
  const Row rows[] = {
      // The neighbours face the changed item; it is matched by any part itself, and so is what stands further off.
      {"where [+cont] [+cont] X:[+cont] [+cont] [+cont]  delete X", "- last - first -"},
      // Boundaries, gaps and quantities aside.
      {"where [+cont] - [+cont]₀ X:[+cont] ([-cont]) [-cont]  delete X", "last - - - first"},
      {"where [+cont] ... X:[+cont] - [-cont]  delete X", "last - first"},
      // Between two changed items by any part.
      {"where [+cont] A:V [+cont] B:V [+cont]  set A [Height:mid]  set B [Height:mid]", "last - - - first"},
      // Only Y is changed by a spread.
      {"where X:[+cont] Y:[+cont] [+cont]  spread X.Height to Y", "last - first"},
      // Nodes of which one root has one have no edges.
      {"where [+syll -cont] X:[] delete X", "- last"},
      // Within a set; a value that is not there; agreement.
      {"where {[+cont] | [Tone:H]} X:[αcont] [αcont] delete X", "last last - first"},
      {"where X:[] [] but not [+cont] delete X", "first"},
      // What hangs from a node that may stand twice.
      {"where [+f] X:[] delete X", "last"},
      // A bundle that tells the contour itself is left as it is.
      {"where [begins -cont] X:[] [-cont +cont] delete X", "first - -"},
      {"where [begins -cont ends +cont] X:[ends -cont] delete X", "first last last"},
      // Where there is one only, begins and ends say nothing.
      {"where X:[] [begins Height:low] delete X", "-"},
      // A list is all there is.
      {"where X:[] [Tone:(H L)] delete X", "first last"},
  };
  for (const auto& row : rows) {
    CAPTURE(row.rule);
    const Loaded loaded = Whole("class V = [+syll] rule \"r\" { " + std::string(row.rule) + " }", kToneHead);
    CHECK(PartsOf(loaded.grammar->rules[0].where) == row.parts);
  }
  // The classes themselves are as they were, and an `unless` that names a changed item faces it likewise.
  const Loaded loaded = Whole(R"(
class Stop = [-cont]
rule "r" { where Stop X:[] Stop Stop  delete X  unless X [+cont] [+cont] }
)",
                              kToneHead);
  CHECK(PartsOf(loaded.grammar->rules[0].where) == "last first -");
  CHECK(PartsOf(loaded.grammar->rules[0].unless[0]) == "first -");

  CheckMistakes(kToneHead,
                {
                    {"rule \"r\" { where X:[begins A] delete X }", Kind::kBadValue, "begins A", "no value to begin"},
                    {"rule \"r\" { where X:[Tone:(H H)] delete X }", Kind::kBadValue, "Tone:(H H)", "side by side"},
                    {"rule \"r\" { where X:[Tone:(H L H)] delete X }", Kind::kBadValue, "Tone:(H L H)", "at most 2"},
                    {"rule \"r\" { where X:[Tone:(H X)] delete X }", Kind::kBadValue, "X", "no value 'X'"},
                    {"rule \"r\" { where X:[Length:(a b)] delete X }", Kind::kNotSupportedYet, "Length:(a b)",
                     "begins Length:a ends Length:b"},
                    {"rule \"r\" { where X:[] set X [begins +cont] }", Kind::kBadValue, "begins +cont", "side by side"},
                    {"omit { +syll in [begins +cont] }", Kind::kBadValue, "[begins +cont]", "only rules can ask"},
                });
}

TEST_CASE("check rules: one member of a contour", "[unit]") {
  const Loaded loaded = Whole(R"(
rule "r" {
  where A:V B:V  if A.Tone first = B.Tone last
  delink A.-cont  spread B.Tone:H to A  set B.Tone as A.Tone:M
}
)",
                              "class V = [+syll] " + kToneHead);
  const Rule& rule = loaded.grammar->rules[0];
  CHECK(rule.conditions[0].left_member.which == Member::Which::kFirst);
  CHECK(rule.conditions[0].right_member.which == Member::Which::kLast);
  CHECK(rule.changes[0].member.which == Member::Which::kValue);
  CHECK(rule.changes[0].member.value == 0);
  CHECK(rule.changes[1].member.value == 0);
  CHECK(rule.changes[2].member.value == 1);
  CheckMistakes(
      "class V = [+syll] " + kToneHead,
      {
          {"rule \"r\" { where X:V delink X.+A }", Kind::kBadValue, "X.+A", "cannot be +A"},
          {"rule \"r\" { where X:V delink X.-Tone }", Kind::kBadValue, "X.-Tone", "cannot be -Tone"},
          {"rule \"r\" { where X:V delink X.A:H }", Kind::kBadValue, "X.A:H", "no values to name"},
          {"rule \"r\" { where X:V delink X.Tone:Q }", Kind::kBadValue, "Q", "no value 'Q'"},
          {"rule \"r\" { where X:V Y:V set X.Tone first as Y.Tone }", Kind::kBadRule, "X.Tone first",
           "name the node alone on the left"},
          {"rule \"r\" { where X:V Y:V merge X.Tone Y.Tone:H }", Kind::kBadRule, "Y.Tone:H", "picks out no member"},
      });
}

// ---- patterns ---------------------------------------------------------------------------------------

TEST_CASE("check rules: boundaries with labels, and &", "[unit]") {
  const Loaded loaded = Whole("rule \"r\" { within phrase where X:V & B2:C B:# Y:V  delete B }");
  CHECK(loaded.diagnostics.all().empty());
  const Rule& rule = loaded.grammar->rules[0];
  CHECK(rule.within == Domain::kPhrase);
  CHECK(rule.labels == std::vector<std::string>{"X", "B2", "B", "Y"});
  CHECK(rule.KindOf(1) == Clause::LabelKind::kSlot);
  CHECK(rule.KindOf(2) == Clause::LabelKind::kBoundary);
  CHECK(rule.where.items[1].kind == PatternItem::Kind::kSameMorpheme);
  CHECK(rule.where.items[3].label == 2);
  CHECK(rule.changes[0].op == Op::kDelete);
  CHECK(rule.changes[0].target == 2);
  CheckMistakes(
      kHead,
      {
          {"rule \"r\" { where X:V B:- Y:V set B [+back] }", Kind::kBadRule, "B", "can only be deleted"},
          {"rule \"r\" { where X:V B:- Y:V insert E:/i/ before B }", Kind::kBadRule, "B", "can only be deleted"},
          {"rule \"r\" { where X:V B:- Y:V delete B if X.back = B.back }", Kind::kBadRule, "B", "can only be deleted"},
          {"rule \"r\" { where X:V B:- X:V delete B }", Kind::kBadRule, "X", "used twice"},
          {"rule \"r\" { where X:V B:- Y:V delete B unless X B:- /p/ }", Kind::kBadRule, "B", "has no label"},
          {"rule \"r\" { where X:V B:- Y:V delete B unless X B /p/ }", Kind::kBadRule, "B", "a boundary has no label"},
          {"rule \"r\" { where X:V & - Y:V delete X }", Kind::kBadRule, "&", "in one morpheme"},
          {"rule \"r\" { where X:V B:- Y:V delete B iterate rightward }", Kind::kBadRule, "delete B",
           "visits segments"},
      });
  // The edge of the domain inside a pattern is never met.
  CheckRows(
      kHead,
      {
          {"rule \"r\" { where X:V # Y:V delete X }", Kind::kNeverApplies, "#", "stays within the word"},
          {"rule \"r\" { within morpheme where X:V - Y:V delete X }", Kind::kNeverApplies, "-",
           "stays within the morpheme"},
          {"rule \"r\" { within host where X:V = Y:V delete X }", Kind::kNeverApplies, "=", "stays within the host"},
      },
      Severity::kWarning, Reach::kWhole);
  for (const char* text : {"within stem where X:V - Y:V delete X", "within phrase where X:V # Y:V delete X"}) {
    CAPTURE(text);
    CHECK(Whole("rule \"r\" { " + std::string(text) + " }").diagnostics.all().empty());
  }
}

// ---- conditions and tags ------------------------------------------------------------------------------

TEST_CASE("check rules: conditions", "[unit]") {
  const Loaded loaded = Whole(R"(
rule "r" {
  where A:V C B:V  delete C
  if A.Place = B.Place  if A.back ≠ B.back  if A.root is B.root  if A.root is not B.root
  unless A.Place = B.Place  unless A.back ≠ B.back  unless A.root is B.root  unless A.root is not B.root
}
)");
  const std::vector<Condition>& conditions = loaded.grammar->rules[0].conditions;
  REQUIRE(conditions.size() == 8);
  using Kind = Condition::Test;
  const Kind expected[] = {Kind::kEqual,   Kind::kUnequal, Kind::kSame,    Kind::kNotSame,
                           Kind::kUnequal, Kind::kEqual,   Kind::kNotSame, Kind::kSame};
  for (std::size_t i = 0; i < 8; ++i) CHECK(conditions[i].test == expected[i]);
  CHECK(conditions[0].left == 0);
  CHECK(conditions[0].right == 2);
  CHECK(conditions[0].node == Node(loaded, "Place"));
  CHECK(conditions[2].node == kRootNode);
  CheckMistakes(kHead, {
                           {"rule \"r\" { where A:V B:V delete A if A.back = B.high }", tiersmith::Kind::kBadRule,
                            "A.back = B.high", "name one node on both sides: A.back and B.back"},
                           {"rule \"r\" { where A:V B:V delete A if A.back = C.back }", tiersmith::Kind::kUnknownLabel,
                            "C", "labelled 'C'"},
                           {"rule \"r\" { where A:V B:V delete A if A.bakc = B.back }", tiersmith::Kind::kUnknownNode,
                            "bakc", "did you mean 'back'?"},
                           {"rule \"r\" { where A:V B:V delete A if A.back = A.back }", tiersmith::Kind::kBadRule,
                            "A.back = A.back", "held against itself"},
                           {"rule \"r\" { where A:V B:V delete A unless A.slot is B.slot }", tiersmith::Kind::kBadRule,
                            "A.slot is B.slot", "never one slot"},
                           {"rule \"r\" { where A:V insert E:/i/ after A if A.back = E.back }",
                            tiersmith::Kind::kBadRule, "E", "is inserted by this rule"},
                       });
}

TEST_CASE("check rules: tags", "[unit]") {
  const Loaded loaded = Whole(R"(
rule "r" { where A:V B:V  delete A  only loan  except B in stem  only word verb
           otherwise where A:V  delete A  except loan }
)");
  CHECK(loaded.grammar->tags == std::vector<std::string>{"stem", "prefix", "suffix", "clitic", "loan", "verb"});
  const Rule& rule = loaded.grammar->rules[0];
  REQUIRE(rule.tags.size() == 3);
  CHECK(rule.tags[0].only);
  CHECK(rule.tags[0].scope == TagTest::Scope::kChanged);
  CHECK(rule.tags[0].tag == 4);
  CHECK_FALSE(rule.tags[1].only);
  CHECK(rule.tags[1].scope == TagTest::Scope::kLabel);
  CHECK(rule.tags[1].label == 1);
  CHECK(rule.tags[1].tag == 0);
  CHECK(rule.tags[2].scope == TagTest::Scope::kWord);
  CHECK(rule.tags[2].tag == 5);
  CHECK(rule.otherwise[0].tags[0].tag == 4);
  CheckMistakes(kHead,
                {{"rule \"r\" { where A:V delete A only Q in loan }", Kind::kUnknownLabel, "Q", "labelled 'Q'"}});
  std::string many = "rule \"r\" { where A:V delete A";
  for (int i = 0; i < 57; ++i) many += " except t" + std::to_string(i);
  CheckMistakes(kHead, {{(many + " }").c_str(), Kind::kLimit, "t56", "more than 60 tags"}});
}

// ---- changes ----------------------------------------------------------------------------------------

TEST_CASE("check rules: changes of whole segments and nodes", "[unit]") {
  const Loaded loaded = Whole(R"(
rule "a" { where X:C Y:C  set X /t/  lengthen Y }
rule "b" { where X:C Y:C  set X /tː/  shorten Y }
rule "c" { where X:C Y:C  set X as Y }
rule "d" { where X:C Y:C  set X.Place as Y.Place  fill X.voice as Y.voice }
rule "e" { where X:C Y:C  merge X.Place Y.Place }
rule "f" { where X:C Y:C  fill X as Y }
rule "g" { where X:V Y:C  insert E:/iː/ after Y  spread X.back to E  set E [+high]  fill E.Labial as X.Labial }
rule "h" { where X:C  insert E:/i/ after X }
)");
  const std::vector<Rule>& rules = loaded.grammar->rules;
  const auto change = [&](std::size_t rule, std::size_t i) { return rules[rule].changes[i]; };
  CHECK(change(0, 0).op == Op::kSetLiteral);
  CHECK(change(0, 0).target == 0);
  CHECK(change(0, 0).node == kRootNode);
  CHECK(change(0, 0).inserted == SymbolNamed(*loaded.grammar, "t").underlying);
  CHECK_FALSE(change(0, 0).is_long);
  CHECK(change(0, 1).op == Op::kLengthen);
  CHECK(change(0, 1).target == 1);
  CHECK(change(1, 0).is_long);
  CHECK(change(1, 1).op == Op::kShorten);
  CHECK(change(2, 0).op == Op::kSetAs);
  CHECK(change(2, 0).target == 0);
  CHECK(change(2, 0).source == 1);
  CHECK(change(2, 0).node == kRootNode);
  CHECK(change(3, 0).node == Node(loaded, "Place"));
  CHECK(change(3, 1).op == Op::kFillAs);
  CHECK(change(4, 0).op == Op::kMerge);
  CHECK(change(4, 0).target == 0);
  CHECK(change(4, 0).source == 1);
  CHECK(change(5, 0).op == Op::kFillAs);
  CHECK(change(5, 0).node == kRootNode);
  REQUIRE(rules[6].labels == std::vector<std::string>{"X", "Y", "E"});
  CHECK(rules[6].KindOf(2) == Clause::LabelKind::kInserted);
  CHECK(change(6, 0).inserted_label == 2);
  CHECK(change(6, 0).is_long);
  for (const std::size_t i : {1, 2, 3}) CHECK(change(6, i).target == 2);
  CHECK(change(7, 0).inserted_label == -1);  // nothing else names it
  CHECK(rules[7].labels == std::vector<std::string>{"X"});

  CheckMistakes(
      kHead,
      {
          {"rule \"r\" { where X:V set X /pt/ }", Kind::kBadRule, "pt", "no single symbol"},
          {"rule \"r\" { where X:V set X /pːː/ }", Kind::kBadRule, "ː", "one slot each symbol"},
          {"rule \"r\" { where X:V set X /q/ }", Kind::kUnknownSymbol, "q", "no symbol of the grammar"},
          {"rule \"r\" { where X:V Y:V set X.back as Y.high }", Kind::kBadRule, "set X.back as Y.high",
           "the same node on both sides"},
          {"rule \"r\" { where X:V Y:V set X as X }", Kind::kBadRule, "set X as X", "named on both sides"},
          {"rule \"r\" { where X:V Y:V merge X.Place X.Place }", Kind::kBadRule, "merge X.Place X.Place",
           "named on both sides"},
          {"rule \"r\" { where X:V Y:V merge X.Place Y.back }", Kind::kBadRule, "merge X.Place Y.back",
           "the same node on both sides"},
          {"rule \"r\" { where X:V Y:V delink X.slot }", Kind::kBadRule, "slot", "borne by nothing"},
          {"rule \"r\" { where X:V insert E:/i/ after X lengthen E }", Kind::kBadRule, "E", "is inserted by this rule"},
          {"rule \"r\" { where X:V insert E:/i/ after X spread E.back to X }", Kind::kBadRule, "E",
           "is inserted by this rule"},
          {"rule \"r\" { where X:V insert E:/i/ after X insert F:/a/ after E }", Kind::kBadRule, "E",
           "is inserted by this rule"},
          {"rule \"r\" { where X:V insert E:/i/ after X insert E:/a/ before X }", Kind::kBadRule, "E", "used twice"},
          {"rule \"r\" { where X:V insert C:/i/ after X }", Kind::kBadRule, "C", "the name of a class"},
      });
}

TEST_CASE("check rules: changes that cannot stand beside each other", "[unit]") {
  CheckMistakes(
      kHead,
      {
          {"rule \"r\" { where X:C Y:C set X /t/ spread Y.Place to X }", Kind::kBadRule, "spread Y.Place to X",
           "gives 'root' anew and changes 'Place' under it"},
          {"rule \"r\" { where X:C Y:C set X as Y set X [+voice] }", Kind::kBadRule, "set X [+voice]",
           "gives 'root' anew and changes 'voice' under it"},
          {"rule \"r\" { where X:C Y:C set X.Place as Y.Place set Y [+back] }", Kind::kBadRule, "set Y [+back]",
           "gives 'Place' anew and changes 'back' under it"},
          {"rule \"r\" { where X:C Y:C set X.back as Y.back set X [+back] }", Kind::kBadRule, "set X [+back]",
           "changes it once more"},
          {"rule \"r\" { where X:C Y:C set X /t/ delink X.root }", Kind::kBadRule, "delink X.root",
           "changes it once more"},
          {"rule \"r\" { where X:C Y:C merge X.Place Y.Place set Y [+back] }", Kind::kBadRule, "set Y [+back]",
           "moves lines of 'Place' and changes 'back' under it"},
          {"rule \"r\" { where X:C Y:C merge X.Place Y.Place delink Y.Place }", Kind::kBadRule, "delink Y.Place",
           "merges 'Place' of an item and moves its lines"},
          {"rule \"r\" { where X:C Y:C merge X.voice Y.voice set Y [+voice] }", Kind::kBadRule, "set Y [+voice]",
           "a line and a content of 'voice' on 'Y'"},
          {"rule \"r\" { where X:C Y:V Z:C merge X.voice Z.voice set Y /i/ }", Kind::kBadRule, "set Y /i/",
           "merges 'voice' of 'X' and 'Z' and gives one to 'Y' between them"},
          {"rule \"r\" { where X:C Y:V Z:C merge Z.voice X.voice set Y [-voice] }", Kind::kBadRule, "set Y [-voice]",
           "gives one to 'Y' between them"},
          {"rule \"r\" { where X:C Y:C merge X.Place Y.Place otherwise where Z:V delink Z.back }", Kind::kBadRule,
           "delink Z.back", "one clause merges 'Place' and another changes 'back' under it"},
          {"rule \"r\" { where X:C lengthen X set X /t/ }", Kind::kBadRule, "set X /t/", "moves or replaces its root"},
          {"rule \"r\" { where X:C lengthen X shorten X }", Kind::kBadRule, "shorten X",
           "to lengthen 'X' and to shorten it"},
          {"rule \"r\" { where X:C delink X.root shorten X }", Kind::kBadRule, "delink X.root",
           "moves or replaces its root"},
          {"rule \"r\" { where X:C Y:C merge X.Place Y.Place iterate leftward }", Kind::kBadRule,
           "merge X.Place Y.Place", "changes one item"},
          {"rule \"r\" { where X:C delete X otherwise where X:V Y:V delete X delete Y iterate leftward }",
           Kind::kBadRule, "delete Y", "changes one item"},
      });
  for (const char* rule :
       {"where X:C Y:C  set X /t/  set Y [+voice]", "where X:C Y:C  set X /t/  spread X.Place to Y",
        "where X:C  lengthen X  set X [+voice]", "where X:C Y:C  set X.back as Y.back  set X [+high]",
        "where X:V  insert E:/i/ after X  spread X.back to E  iterate leftward",
        "where X:C Z:C Y:V  merge X.voice Z.voice  set Y /i/",
        "where X:C Y:V Z:C  merge X.Place Z.Place  set Y [+voice]",
        "where X:C Y:C  merge X.Place Y.Place  otherwise where Z:V  delink Z.voice"}) {
    CAPTURE(rule);
    CHECK(Whole("rule \"r\" { " + std::string(rule) + " }").diagnostics.all().empty());
  }
}

// ---- the rule and the grammar as a whole ----------------------------------------------------------------

TEST_CASE("check rules: what is said of a rule as a whole", "[unit]") {
  const Loaded loaded = Whole(R"(
strict
sharing blocked
fuse Place within morpheme
fuse root within morpheme in C C
rule "a" { within host where X:V  delete X  prefer left  preserving  optional 0.25 by word }
complete
rule "b" { where X:V  delete X  sharing free  prefer right }
)");
  const Grammar& grammar = *loaded.grammar;
  CHECK(grammar.strict);
  REQUIRE(grammar.fusions.size() == 2);
  CHECK(grammar.fusions[0].node == Node(loaded, "Place"));
  CHECK_FALSE(grammar.fusions[0].in);
  CHECK(grammar.fusions[1].node == kRootNode);
  CHECK(grammar.fusions[1].in->items.size() == 2);
  REQUIRE(grammar.rules.size() == 3);
  CHECK(grammar.rules[0].within == Domain::kHost);
  CHECK(grammar.rules[0].prefer == Rule::Prefer::kLeft);
  CHECK(grammar.rules[0].preserving);
  CHECK(grammar.rules[0].sharing_blocked);
  CHECK(grammar.rules[0].probability == 0.25);
  CHECK(grammar.rules[0].by_word);
  CHECK(grammar.rules[1].kind == Rule::Kind::kComplete);
  CHECK(grammar.rules[1].name == "complete");
  CHECK_FALSE(grammar.rules[2].sharing_blocked);
  CHECK(grammar.rules[2].prefer == Rule::Prefer::kRight);
  CHECK(grammar.rules[2].probability == 1);

  CheckMistakes(kHead, {
                           {"fuse Plaec within morpheme", Kind::kUnknownNode, "Plaec", "did you mean 'Place'?"},
                           {"fuse slot within morpheme", Kind::kBadRule, "slot", "not read as one"},
                           {"fuse Place within morpheme in X:C C", Kind::kBadRule, "X:C C", "means nothing here"},
                           {"fuse Place within morpheme in C [αback]", Kind::kBadRule, "αback", "by it the items"},
                           {"sharing blocked sharing free", Kind::kDuplicate, "sharing free", "declared twice"},
                       });
}

TEST_CASE("check rules: the examples of the reference stand", "[unit]") {
  const Loaded loaded = Whole(R"(
rule "clusters agree" { where X:[-son] Y:[-son αvoice]      set X [αvoice] }
rule "affricates"     { where X:/t/ Y:[-cont]               delink X.-cont }
rule "echo"           { where X:V C₁ E:[+syll, no Place]    set E.Place as X.Place }
rule "one nasal"      { where N:[+nasal] & M:[+nasal]       merge N.Place M.Place }
rule "long by loss"   { where X:V H:/s/ C                   lengthen X   delete H }
rule "one word"       { within phrase   where C B:# C       delete B }
rule "no twins"       { where X:C Y:C   if X.root = Y.root   if X.root is not Y.root   except Y in loan   delete X }
rule "own labels"     { where V C   if V.Place = C.Place   delete C   only V in stem }
rule "final vowels" {
  where X:[+syll long] #        shorten X   except loan
  otherwise where X:[+syll] #   delete X    only X in suffix
  preserving
  optional 0.25 by word
}
)");
  CHECK(loaded.diagnostics.all().empty());
  CHECK(loaded.grammar->rules[7].labels == std::vector<std::string>{"V", "C"});
  CHECK(loaded.grammar->rules[8].otherwise[0].tags[0].label == 0);
}

// Each is answered at its place as long as compiler and interpreter together do not run it.
TEST_CASE("check rules: what is not run yet is said at its place", "[unit]") {
  const Mistake rows[] = {
      {"rule \"r\" { where X:V insert E:/i/ after X spread X.back to E iterate rightward }", Kind::kNotSupportedYet,
       "spread X.back to E", "in a rule that iterates"},
      {"rule \"r\" { where X:V Y:V insert E:/i/ after X spread X.back to E set Y [+back] }", Kind::kNotSupportedYet,
       "spread X.back to E", "another item"},
      {"rule \"r\" { where X:V B:# delete B otherwise where X:V delete X }", Kind::kNotSupportedYet, "B:#",
       "at the end of a pattern"},
      {"rule \"r\" { where X:V B:# delete B optional 0.5 by word }", Kind::kNotSupportedYet, "B:#", "`by word`"},
      {"rule \"r\" { where X:V Y:V Z:V spread X.back to Y delink Y.back spread Y.back to Z }", Kind::kNotSupportedYet,
       "spread X.back to Y", "in place of what the rule spreads from there"},
      {"rule \"r\" { where V₀ B:- X:V delete B optional 0.5 by word }", Kind::kNotSupportedYet, "B:-", "`by word`"},
  };
  for (const Mistake& row : rows) CheckRows(kHead, {row});
  for (const Mistake& row : rows) {
    CAPTURE(row.text);
    CHECK(Load(kHead + row.text, Reach::kWhole).grammar != nullptr);
  }
}

}  // namespace
}  // namespace tiersmith::testing
