// Two optional rules in a row: what comes out with which probability, from both engines, and the same by hand from
// grammar/notation.md §6 and §8 (`optional`). Each number beside a form says how it comes about.
#include <algorithm>
#include <cmath>
#include <map>

#include "model/text.h"
#include "support/compiled_case.h"

namespace tiersmith::testing {
namespace {

using Probabilities = std::map<std::string, double>;  // by surface

struct Row {
  const char* underlying;
  Probabilities surfaces;
};

// The same forms, with the same probabilities; and they are all there is.
void CheckSame(const Probabilities& found, const Probabilities& expected) {
  double sum = 0;
  for (const auto& [surface, probability] : found) {
    CAPTURE(surface, probability);
    sum += probability;
    const auto wanted = expected.find(surface);
    REQUIRE(wanted != expected.end());
    CHECK(std::abs(probability - wanted->second) < 1e-6);
  }
  CHECK(found.size() == expected.size());
  CHECK(std::abs(sum - 1) < 1e-6);
}

Probabilities ByMachine(Compiled& grammar, const char* underlying) {
  std::vector<Runner::Output> outputs;
  bool more = true;
  TextError error;
  REQUIRE(grammar.runner->DeriveAll(underlying, 100, &outputs, &more, &error));
  CHECK_FALSE(more);
  Probabilities found;
  for (const Runner::Output& output : outputs) CHECK(found.emplace(output.surface, output.probability).second);
  const auto likelier = [](const Runner::Output& a, const Runner::Output& b) { return a.probability > b.probability; };
  CHECK(std::is_sorted(outputs.begin(), outputs.end(), likelier));
  CHECK(grammar.Derive(underlying) == outputs.front().surface);
  return found;
}

Probabilities ByInterpreter(const Compiled& grammar, const char* underlying) {
  const Derivation derivation = Trace(grammar.grammar(), underlying);
  CHECK(derivation.problem == "");
  Probabilities found;
  for (const Outcome& outcome : derivation.outcomes) {
    std::string surface;
    FeatureTree no_symbol;
    REQUIRE(WriteForm(grammar.grammar(), outcome.form, &surface, &no_symbol));
    found[surface] += outcome.probability;
  }
  return found;
}

void CheckRows(const char* rules, const std::vector<Row>& rows) {
  Compiled grammar = CompileText(std::string(kSmallInventory) + "class C = [-syll]\n" + rules);
  INFO(grammar.Messages());
  REQUIRE(grammar.runner != nullptr);
  CHECK(grammar.runner->weighted());
  for (const Row& row : rows) {
    CAPTURE(row.underlying);
    CheckSame(ByMachine(grammar, row.underlying), row.surfaces);
    CheckSame(ByInterpreter(grammar, row.underlying), row.surfaces);
  }
}

TEST_CASE("optional: a sweep that feeds itself, then one draw a word", "[unit]") {
  // Voice goes from obstruent to obstruent, each time with .4; then the word's last cluster devoices with .25, as a whole.
  const char* const rules = R"(
    rule "voicing"   { where A:[-son +voice] B:{/p/ | /t/}   set B [+voice]   iterate rightward   optional 0.4 }
    rule "devoicing" { where X:[-son +voice] C₀ #   set X [-voice]   optional 0.25 by word }
  )";
  CheckRows(rules,
            {
                // t: .4. Then b and d, or b alone, devoice at one draw: two ways to apt, .4 × .25 + .6 × .25.
                {"abt", {{"abd", .4 * .75}, {"abt", .6 * .75}, {"apt", .25}}},
                // t: .4; p only behind d: where t was passed over there is no draw for p. The last cluster is empty.
                {"abtpa", {{"abtpa", .6}, {"abdpa", .4 * .6}, {"abdba", .4 * .4}}},
                // A geminate is one root: one draw, and both halves go with it.
                {"abtːa", {{"abtːa", .6}, {"abdːa", .4}}},
                // Two roots: the second is drawn for where the first has become d.
                {"abtta", {{"abtta", .6}, {"abdta", .4 * .6}, {"abdda", .4 * .4}}},
                // Two words, each as abt and drawn for by itself: voice does not pass #.
                {"abt#adp",
                 {{"abd adb", .3 * .3},
                  {"abd adp", .3 * .45},
                  {"abd atp", .3 * .25},
                  {"abt adb", .45 * .3},
                  {"abt adp", .45 * .45},
                  {"abt atp", .45 * .25},
                  {"apt adb", .25 * .3},
                  {"apt adp", .25 * .45},
                  {"apt atp", .25 * .25}}},
                // Nothing would change: no draw.
                {"bap", {{"bap", 1}}},
                {"", {{"", 1}}},
            });
}

TEST_CASE("optional: one draw a site at once, then one a word in a sweep", "[unit]") {
  // p and t become voiced, each with .3; then voice goes from obstruent to obstruent all through a word, or not at all.
  const char* const rules = R"(
    rule "voice" { where X:{/p/ | /t/}   set X [+voice]   optional 0.3 }
    rule "goes"  { where A:[-son +voice] B:{/p/ | /t/}   set B [+voice]   iterate rightward   optional 0.5 by word }
  )";
  CheckRows(
      rules,
      {
          // One root on two slots is one site; its second half is no target of its first.
          {"atːa", {{"atːa", .7}, {"adːa", .3}}},
          // Two sites: tt .49, dt .21, td .21, dd .09. Behind d, t changes at .5: two ways to dd.
          {"atta", {{"atta", .49}, {"adta", .21 * .5}, {"atda", .21}, {"adda", .09 + .21 * .5}}},
          // b is there at the start. tp .49, dp .21, tb .21, db .09; the sweep's one draw decides for the whole word, so
          // that bdp comes only from dp and btp only from tp, and what is applied to all ends as bdb.
          {"abtpa",
           {{"abtpa", .49 * .5},
            {"abdpa", .21 * .5},
            {"abtba", .21 * .5},
            {"abdba", .09 + .49 * .5 + .21 * .5 + .21 * .5}}},
      });
}

TEST_CASE("optional: several items of a match are one draw", "[unit]") {
  const char* const vowels = "diacritics { ◌̃ [+nasal] on [+syll] }\n";
  const char* const loss = R"(
    rule "nasal loss" { where V:[+syll] N:[+nasal -syll]   delink V.nasal   spread N.nasal to V   delete N   optional 0.4 }
  )";
  CheckRows((std::string(vowels) + loss).c_str(),
            {
                {"tan", {{"tan", .6}, {"tã", .4}}},
                // Two matches with nothing in common.
                {"tanin", {{"tanin", .36}, {"tãin", .24}, {"tanĩ", .24}, {"tãĩ", .16}}},
                {"ta", {{"ta", 1}}},
            });
  // A nasal between two vowels: a vowel that two of them change links their matches.
  const char* const both = R"(
    rule "both" { where V:[+syll] N:[+nasal -syll] W:[+syll]   set V [+nasal]   set W [+nasal]   delete N   optional 0.4 }
  )";
  CheckRows((std::string(vowels) + both).c_str(),
            {
                {"anita", {{"anita", .6}, {"ãĩta", .4}}},
                // One site of three, /i/ and /a/ in the middle being asked the same from both sides.
                {"animani", {{"animani", .6}, {"ãĩãĩ", .4}}},
                // A vowel that is nasal already is asked nothing: the sites on its sides draw for themselves.
                {"anĩma", {{"anĩma", .36}, {"ãĩma", .24}, {"anĩã", .24}, {"ãĩã", .16}}},
                {"anitani", {{"anitani", .36}, {"ãĩtani", .24}, {"anitãĩ", .24}, {"ãĩtãĩ", .16}}},
            });
}

TEST_CASE("optional: what links the items of several matches", "[unit]") {
  // Both obstruents become voiced. /ptdp/: p t and t d have t in common, t d and d p nothing, since d is voiced.
  CheckRows(
      R"(rule "voice" { where A:[-son -cont no Dorsal] B:[-son -cont no Dorsal]   set A [+voice]   set B [+voice]   optional 0.4 })",
      {
          {"apta", {{"apta", .6}, {"abda", .4}}},
          {"aptdpa", {{"aptdpa", .36}, {"abddpa", .24}, {"aptdba", .24}, {"abddba", .16}}},
          // The two halves of one root link the match of p with it and that of it with the other p.
          {"aptːpa", {{"aptːpa", .6}, {"abdːba", .4}}},
      });
  // However many obstruents there are, each is changed together with the last nasal, across whatever stands between.
  CheckRows(
      R"(rule "final" { where P:[-son -cont -voice no Dorsal] C₀ [+syll] []₀ N:[+nasal] #   set P [+voice]   delete N   optional 0.4 })",
      {
          {"patapin", {{"patapin", .6}, {"badabi", .4}}},
          {"patapi", {{"patapi", 1}}},
          {"pan#tan", {{"pan tan", .36}, {"ba tan", .24}, {"pan da", .24}, {"ba da", .16}}},
      });
  // A boundary goes with the vowel behind it, both of a run with it.
  CheckRows(R"(rule "join" { where V:[+syll] B:- W:[+syll]   delete B   delete W   optional 0.4 })",
            {
                {"ta-i", {{"tai", .6}, {"ta", .4}}},
                {"ta-i-a", {{"taia", .36}, {"tai", .24}, {"taa", .24}, {"ta", .16}}},
            });
  // By word: the sites of a word are one.
  CheckRows(
      R"(rule "voice" { where A:[-son -cont no Dorsal] B:[-son -cont no Dorsal] set A [+voice] set B [+voice] optional 0.4 by word })",
      {
          {"aptdpa", {{"aptdpa", .6}, {"abddba", .4}}},
          {"apta#pt", {{"apta pt", .36}, {"abda pt", .24}, {"apta bd", .24}, {"abda bd", .16}}},
      });
}

TEST_CASE("optional: ways summed before outputs are ranked, and as many as asked for", "[unit]") {
  // b stays with .4. Otherwise it becomes a nasal of one kind or the other, .3 each; both are lost, and what is left is likelier.
  Compiled grammar = CompileText(std::string(kSmallInventory) + R"(
    rule "first"  { where X:/b/ [+syll]   set X [+nasal +son +cont]   optional 0.6 }
    rule "second" { where X:[+nasal +cont]   set X [-cont]   optional 0.5 }
    rule "loss"   { where X:[+nasal]   delete X }
  )");
  INFO(grammar.Messages());
  REQUIRE(grammar.runner != nullptr);
  CheckSame(ByMachine(grammar, "bap"), {{"ap", .6}, {"bap", .4}});
  CheckSame(ByInterpreter(grammar, "bap"), {{"ap", .6}, {"bap", .4}});
  CHECK(grammar.Derive("bap") == "ap");
  std::vector<Runner::Output> outputs;
  bool more = false;
  TextError error;
  REQUIRE(grammar.runner->DeriveAll("babap", 2, &outputs, &more, &error));
  CHECK(more);  // aap .36, abap and baap .24 each, babap .16
  REQUIRE(outputs.size() == 2);
  CHECK(outputs[0].surface == "aap");
  CHECK(std::abs(outputs[0].probability - .36) < 1e-6);
  CHECK(std::abs(outputs[1].probability - .24) < 1e-6);
}

}  // namespace
}  // namespace tiersmith::testing
