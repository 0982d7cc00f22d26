// Each error of the notation: its kind, and the text its span covers; that reading goes on behind it; and
// that no input, however broken, does more than give errors. `where X:/k delete X }` leaves a form open up to
// its line's end.
#include <catch2/catch.hpp>
#include <cctype>
#include <fstream>
#include <iterator>
#include <random>
#include <regex>
#include <sstream>

#include "grammar/parse.h"

namespace tiersmith {
namespace {

struct Found {
  std::vector<Diagnostic> errors;
  syntax::File file;
  std::string text;

  std::string Covered(std::size_t i) const {
    return text.substr(errors[i].span.begin, errors[i].span.end - errors[i].span.begin);
  }
};

Found Read(const std::string& text) {
  SourceMap sources;
  Diagnostics diagnostics;
  Found found;
  found.text = text;
  found.file = Parse(sources, sources.Add("test.tier", text), diagnostics);
  found.errors = diagnostics.all();
  return found;
}

std::string Names(const Found& found) {
  std::string names;
  for (std::size_t i = 0; i < found.errors.size(); ++i)
    names += "[" + found.Covered(i) + "] " + found.errors[i].message + "\n";
  return names;
}

struct Row {
  const char* text;
  Kind kind;
  const char* covered;
};

void CheckRow(const Row& row) {
  const Found found = Read(row.text);
  INFO(row.text << "\n" << Names(found));
  REQUIRE(found.errors.size() == 1);
  CHECK(found.errors[0].kind == row.kind);
  CHECK(found.Covered(0) == row.covered);
  CHECK(!found.errors[0].message.empty());
  CHECK(!found.errors[0].remedy.empty());
  CHECK(found.errors[0].message.find('@') == std::string::npos);
  CHECK(found.errors[0].message.find("boost") == std::string::npos);
}

}  // namespace

TEST_CASE("errors: one mistake, one message, the right place", "[unit]") {
  const Row rows[] = {
      // words where none fits
      {"sgments { p t }", Kind::kSyntax, "sgments"},
      {"class V = [+syll]\n}", Kind::kSyntax, "}"},
      {"language Velmari", Kind::kSyntax, "Velmari"},
      {"tree", Kind::kSyntax, ""},
      {"tree { root }", Kind::kSyntax, ""},
      {"tree { root > }", Kind::kSyntax, ""},
      {"tree { root > Place > }", Kind::kSyntax, ""},
      {"tree { root > ± }", Kind::kSyntax, ""},
      {"tree { slot > Tone: H L ±a }", Kind::kSyntax, "±a"},
      {"tree { slot > Tone ×0 }", Kind::kSyntax, "×0"},
      {"segments \"ipa\" { p }", Kind::kSyntax, "\""},
      {"segments { p = }", Kind::kSyntax, ""},
      {"segments { p [+ }", Kind::kSyntax, ""},
      {"segments { p, t }", Kind::kSyntax, ","},
      {"segments { a-b }", Kind::kSyntax, "-"},
      {"diacritics { ◌̃ }", Kind::kSyntax, ""},
      {"omit { -back /i/ }", Kind::kSyntax, "/"},
      {"omit { -back }", Kind::kSyntax, ""},
      {"class V [+syll]", Kind::kSyntax, "["},
      {"class V = ", Kind::kSyntax, ""},
      {"class V = A B", Kind::kSyntax, "B"},
      {"class V = A or", Kind::kSyntax, ""},
      {"class V = not not A", Kind::kSyntax, "not"},
      {"class V = A but B", Kind::kSyntax, "B"},
      {"class V = {A | B", Kind::kSyntax, ""},
      {"class V = [+syll -foo)", Kind::kSyntax, ")"},
      {"class V = [+]", Kind::kSyntax, "]"},
      {"class V = [Tone:]", Kind::kSyntax, "]"},
      {"pattern P = (A", Kind::kSyntax, ""},
      {"pattern P = X:C₀", Kind::kSyntax, "₀"},
      {"pattern P = X:C_0^2", Kind::kSyntax, "_0^2"},
      {"pattern P = C_3^2", Kind::kSyntax, "_3^2"},
      {"pattern P = C₀⁰", Kind::kSyntax, "₀⁰"},
      {"pattern P = C_0^100", Kind::kSyntax, "_0^100"},
      {"rule voicing { where A:V delete A }", Kind::kSyntax, "voicing"},
      {"rule \"r\" where A:V delete A", Kind::kSyntax, "where"},
      {"rule \"r\" { A:V delete A }", Kind::kSyntax, "A"},
      {"rule \"r\" { where A:V }", Kind::kSyntax, ""},
      {"rule \"r\" { where A:V spraed A.b to A }", Kind::kSyntax, "A.b"},
      {"rule \"r\" { where A:V spread A.b }", Kind::kSyntax, ""},
      {"rule \"r\" { where A:V spread A to A }", Kind::kSyntax, "A"},
      {"rule \"r\" { where A:V set A }", Kind::kSyntax, ""},
      {"rule \"r\" { where A:V insert /i/ before A }", Kind::kSyntax, "/"},
      {"rule \"r\" { where A:V insert E:/i/ A }", Kind::kSyntax, "A"},
      {"rule \"r\" { where A:V iterate delete A }", Kind::kSyntax, "delete"},
      {"rule \"r\" { where A:V iterate rightward iterate leftward delete A }", Kind::kSyntax, "iterate leftward"},
      // agreement, edges, sharing, length
      {"class V = [α back]", Kind::kSyntax, "back"},
      {"class V = [alpha]", Kind::kSyntax, "]"},
      {"class V = [+αback]", Kind::kSyntax, "α"},
      {"class V = [begins no cont]", Kind::kSyntax, "no"},
      {"class V = [ends]", Kind::kSyntax, "]"},
      {"class V = [shared]", Kind::kSyntax, "]"},
      {"class V = [half]", Kind::kSyntax, "]"},
      {"class V = [half third]", Kind::kSyntax, "third"},
      {"class \"\" = [+syll]", Kind::kSyntax, "\""},
      // & stands between items, a labelled boundary takes no quantity
      {"pattern P = & A", Kind::kSyntax, "&"},
      {"pattern P = A &", Kind::kSyntax, ""},
      {"pattern P = A & & B", Kind::kSyntax, "&"},
      {"pattern P = B:#₀", Kind::kSyntax, "₀"},
      // tests and tags
      {"rule \"r\" { where A:V B:V delete A if A = B }", Kind::kSyntax, "A"},
      {"rule \"r\" { where A:V B:V delete A if A.a B.a }", Kind::kSyntax, "B.a"},
      {"rule \"r\" { where A:V B:V delete A unless A.a is B }", Kind::kSyntax, "B"},
      {"rule \"r\" { where A:V delete A only }", Kind::kSyntax, ""},
      {"rule \"r\" { where A:V delete A except A in }", Kind::kSyntax, ""},
      {"rule \"r\" { only noun where A:V delete A }", Kind::kSyntax, "only"},
      // paths and changes
      {"rule \"r\" { where A:V delink A.- }", Kind::kSyntax, ""},
      {"rule \"r\" { where A:V delink A.Tone:(H L) }", Kind::kSyntax, "("},
      {"rule \"r\" { where A:V spread A.x to A.y }", Kind::kSyntax, "A.y"},
      {"rule \"r\" { where A:V B:V set A.N as B }", Kind::kSyntax, "B"},
      {"rule \"r\" { where A:V B:V set A as B.N }", Kind::kSyntax, "B.N"},
      {"rule \"r\" { where A:V set A.N [-a] }", Kind::kSyntax, "["},
      {"rule \"r\" { where A:V fill A /k/ }", Kind::kSyntax, "/"},
      {"rule \"r\" { where A:V lengthen A.root }", Kind::kSyntax, "A.root"},
      {"rule \"r\" { where A:V shorten }", Kind::kSyntax, ""},
      {"rule \"r\" { where A:V B:V merge A.N, B.N }", Kind::kSyntax, ","},
      {"rule \"r\" { where A:V B:V merge A.N B }", Kind::kSyntax, "B"},
      // clauses and modifiers
      {"rule \"r\" { where A:V delete A otherwise A:C delete A }", Kind::kSyntax, "A"},
      {"rule \"r\" { where A:V delete A otherwise where A:C }", Kind::kSyntax, ""},
      {"rule \"r\" { where A:V otherwise where A:C delete A }", Kind::kSyntax, "otherwise"},
      {"rule \"r\" { within word where A:V delete A otherwise where A:C delete A within stem }", Kind::kSyntax,
       "within stem"},
      {"rule \"r\" { where A:V delete A preserving preserving }", Kind::kSyntax, "preserving"},
      {"rule \"r\" { where A:V delete A prefer first }", Kind::kSyntax, "first"},
      {"rule \"r\" { where A:V delete A sharing }", Kind::kSyntax, ""},
      {"rule \"r\" { where A:V delete A within clause }", Kind::kSyntax, "clause"},
      {"rule \"r\" { where A:V delete A optional 0 }", Kind::kSyntax, "0"},
      {"rule \"r\" { where A:V delete A optional 30 }", Kind::kSyntax, "30"},
      {"rule \"r\" { where A:V delete A optional 0,3 }", Kind::kSyntax, "0"},
      {"rule \"r\" { where A:V delete A optional .3 }", Kind::kSyntax, "."},
      {"rule \"r\" { where A:V delete A optional by word 0.3 }", Kind::kSyntax, "by"},
      // steps and declarations of the whole grammar
      {"class V = [+syll]\ninclude \"base.tier\"", Kind::kSyntax, "include"},
      {"include base", Kind::kSyntax, "base"},
      {"strict everywhere", Kind::kSyntax, "everywhere"},
      {"complete [+nasal]", Kind::kSyntax, "["},
      {"sharing", Kind::kSyntax, ""},
      {"sharing maybe", Kind::kSyntax, "maybe"},
      {"fuse Place", Kind::kSyntax, ""},
      {"fuse Place within word", Kind::kSyntax, "word"},
      {"fuse Place within morpheme in", Kind::kSyntax, ""},
      {"data { /a/ b }", Kind::kSyntax, "b"},
      {"data { [b] }", Kind::kSyntax, "["},
      {"data { /a/ [b] 'c' d }", Kind::kSyntax, "d"},
      {"data from forms { /a/ [b] }", Kind::kSyntax, "forms"},
      {"data { /a/ * }", Kind::kSyntax, ""},
      {"data from \"x.tsv\" { underlying : 1 }", Kind::kSyntax, ":"},
      {"lexicon { /mo/ 'go' }", Kind::kSyntax, "/"},
      {"lexicon { stem 'go' }", Kind::kSyntax, "'"},
      {"lexicon { stem /mo/ 'go' weight heavy }", Kind::kSyntax, "heavy"},
      {"lexicon { stem /mo/ weight 2 weight 3 }", Kind::kSyntax, "mo"},
      {"lexicon { stem /mo/ in /wen/ }", Kind::kSyntax, "/"},
      {"lexicon { stem /mo/ 'go' verb in PST }", Kind::kSyntax, ""},
      {"lexicon { suffix /-ki/ at /x/ }", Kind::kSyntax, "/"},
      {"lexicon { stem /mo/ data }", Kind::kReservedWord, "data"},
      {"paradigm { stem noun }", Kind::kSyntax, ""},
      {"paradigm noun { number : SG }", Kind::kSyntax, ""},
      {"paradigm noun { number /-lAn/ }", Kind::kSyntax, "/"},
      {"paradigm noun { number : PL /-lAn/ after, /-n/ }", Kind::kSyntax, ","},
      {"spelling { ng ŋ }", Kind::kSyntax, "ŋ"},
      {"spelling { ng = }", Kind::kSyntax, ""},
      {"spelling { n = ŋ before }", Kind::kSyntax, ""},
      {"length long", Kind::kSyntax, "long"},
      // blocks
      {"segments { p t k\nclass V = [+syll]", Kind::kUnclosedBlock, "{"},
      {"rule \"r\" { where A:V delete A", Kind::kUnclosedBlock, "{"},
      {"tree {\n  root > ±son\n", Kind::kUnclosedBlock, "{"},
      // forms, strings, glosses: never further than their line
      {"class V = /i or /e/", Kind::kUnclosedForm, "/"},
      {"rule \"r\" { where A:/k  delete A }\nclass V = [+syll]", Kind::kUnclosedForm, "/k  delete A }"},
      {"data { /a [b]\n /c/ [d] }", Kind::kUnclosedForm, "/a [b]"},
      {"data { /a/ [b\n /c/ [d] }", Kind::kUnclosedForm, "[b"},
      {"data { /a/ [b] 'rope\n /c/ [d] }", Kind::kUnclosedForm, "'rope"},
      {"data { /a/ [b] 'it's\n /c/ [d] }", Kind::kUnclosedForm, "'it's"},
      {"language \"Velmari\nclass V = [+syll]", Kind::kUnclosedForm, "\"Velmari"},
      // reserved words
      {"class stem = [+syll]", Kind::kReservedWord, "stem"},
      {"class rule = [+syll]", Kind::kReservedWord, "rule"},
      {"pattern word = C #", Kind::kReservedWord, "word"},
      {"tree { root > ±cons stem }", Kind::kReservedWord, "stem"},
      {"tree { syllable > a }", Kind::kReservedWord, "syllable"},
      {"tree { slot > Tone: H shared }", Kind::kReservedWord, "shared"},
      {"class V = [+foot]", Kind::kReservedWord, "foot"},
      {"class V = [+a tree]", Kind::kReservedWord, "tree"},
      {"class V = A or data", Kind::kSyntax, ""},  // a section word ends the class: `data` begins a block without one
      {"omit { -mora everywhere }", Kind::kReservedWord, "mora"},
      {"rule \"r\" { where tree A:V delete A }", Kind::kReservedWord, "tree"},
      {"rule \"r\" { where link:V delete A }", Kind::kReservedWord, "link"},
      {"rule \"r\" { where A:V spread A.foot to A }", Kind::kReservedWord, "foot"},
      {"rule \"r\" { where A:V delete only }", Kind::kReservedWord, "only"},
  };
  for (const Row& row : rows) {
    if (std::string(row.text) == "class V = /i or /e/" || std::string(row.text) == "class V = A or data")
      continue;  // below
    CheckRow(row);
  }
}

TEST_CASE("errors: two messages where a mistake shows twice", "[unit]") {
  // The slash that is missing makes `/i or /` a form; what follows it has nothing to close it.
  const Found slash = Read("class V = /i or /e/");
  REQUIRE(slash.errors.size() == 1);
  CHECK(slash.errors[0].kind == Kind::kUnclosedForm);
  CHECK(slash.Covered(0) == "/");
  const Found data = Read("class V = A or data");
  REQUIRE(data.errors.size() == 2);
  CHECK(data.errors[0].kind == Kind::kSyntax);
  CHECK(data.errors[1].kind == Kind::kSyntax);
}

TEST_CASE("errors: what a later release brings is named and passed", "[unit]") {
  const Row rows[] = {
      {"given stress", Kind::kNotSupportedYet, "given"},
      {"print syllables stress", Kind::kNotSupportedYet, "syllables stress"},
      {"tree from \"geometry-1\"", Kind::kNotSupportedYet, "from \"geometry-1\""},
      {"tree { one tier Coronal }", Kind::kNotSupportedYet, "tier Coronal"},
      {"parse", Kind::kNotSupportedYet, "parse"},
      {"apply \"r\" within phrase", Kind::kNotSupportedYet, "apply"},
      {"stratum word { rule \"r\" { where A:V delete A } }", Kind::kNotSupportedYet, "stratum"},
      {"syllable { peak [+syll]  onset (C)  coda ({[no Place] | C}) before [onset] }", Kind::kNotSupportedYet,
       "syllable"},
      {"mora { peak 1 }", Kind::kNotSupportedYet, "mora"},
      {"foot { form head [heavy] }", Kind::kNotSupportedYet, "foot"},
      {"stress { main last foot }", Kind::kNotSupportedYet, "stress"},
      {"melody Tone { within word }", Kind::kNotSupportedYet, "melody"},
      {"dock Tone leftward", Kind::kNotSupportedYet, "dock"},
      {"paradigm noun { number : DU copy first (C) V - }", Kind::kNotSupportedYet, "copy first (C) V -"},
      {"paradigm noun { voice : AV /-um-/ after # C }", Kind::kNotSupportedYet, "#"},
      {"paradigm noun { PFV : /1a2a3/ over C }", Kind::kNotSupportedYet, "over C"},
      {"data from \"cldf/forms.csv\" { where Language_ID = velm }", Kind::kNotSupportedYet, "where Language_ID = velm"},
      {"diacritics { ꜜ {D} before syllable }", Kind::kNotSupportedYet, "{D}"},
      {"class V = [linked]", Kind::kNotSupportedYet, "linked"},
      {"class V = [held by [+syll]]", Kind::kNotSupportedYet, "held by"},
      {"class V = [no Tone:H]", Kind::kNotSupportedYet, ":H"},
      {"class V = [first in foot]", Kind::kNotSupportedYet, "first in foot"},
      {"class V = [heavy]", Kind::kNotSupportedYet, "heavy"},
      {"class V = ⟨k⟩", Kind::kNotSupportedYet, "⟨k⟩"},
      {"pattern P = T:[floating Tone:H]", Kind::kNotSupportedYet, "floating"},
      {"pattern P = A . B", Kind::kNotSupportedYet, "."},
      {"rule \"r\" { on Tone where A:V delete A }", Kind::kNotSupportedYet, "on Tone"},
      {"rule \"r\" { on Tone over V where A:V delete A }", Kind::kNotSupportedYet, "on Tone"},
      {"rule \"r\" { within foot where A:V delete A }", Kind::kNotSupportedYet, "foot"},
      {"rule \"r\" { where A:V delete A cutting }", Kind::kNotSupportedYet, "cutting"},
      {"rule \"r\" { where A:V delete A derived }", Kind::kNotSupportedYet, "derived"},
      {"rule \"r\" { where A:V delete A repeat 2 }", Kind::kNotSupportedYet, "repeat 2"},
      {"rule \"r\" { where A:V delink A.Place.Coronal }", Kind::kNotSupportedYet, ".Coronal"},
      {"rule \"r\" { where A:V delink A all }", Kind::kNotSupportedYet, "all"},
      {"rule \"r\" { where A:V spread A rightward }", Kind::kNotSupportedYet, "rightward"},
      {"rule \"r\" { where A:V delete A wholly }", Kind::kNotSupportedYet, "wholly"},
      {"rule \"r\" { where A:V delete A.N }", Kind::kNotSupportedYet, "A.N"},
      {"rule \"r\" { where A:V B:V merge A B }", Kind::kNotSupportedYet, "A B"},
      {"rule \"r\" { where A:V B:V swap A B }", Kind::kNotSupportedYet, "swap"},
      {"rule \"r\" { where A:V B:V link A to B }", Kind::kNotSupportedYet, "link"},
      {"rule \"r\" { where A:V copy A before A }", Kind::kNotSupportedYet, "copy"},
      {"rule \"r\" { where A:V insert T:{D} before A }", Kind::kNotSupportedYet, "{D}"},
      {"rule \"r\" { where A:V insert [L] before A }", Kind::kNotSupportedYet, "[L]"},
  };
  for (const Row& row : rows) {
    CheckRow(row);
    // Reading goes on: the class behind it is there, and nothing else was taken for an error.
    const Found more = Read(std::string(row.text) + "\nclass Behind = [+syll]\n");
    CAPTURE(row.text, Names(more));
    REQUIRE(more.errors.size() == 1);
    REQUIRE(!more.file.tops.empty());
    CHECK(std::holds_alternative<syntax::Class>(more.file.tops.back()));
    CHECK((!more.file.unsupported.empty()));
  }
}

TEST_CASE("errors: reading goes on behind each", "[unit]") {
  const Found found = Read(
      "tree {\n"
      "  root > ±cons ? ±son\n"
      "  root > Place > •Labial\n"
      "}\n"
      "segments { p t\n"
      "class V = [+syll\n"
      "class C = [-syll]\n"
      "rule \"one\" {\n"
      "  where X:/k\n"
      "  delete X\n"
      "}\n"
      "rule \"two\" { where X:V  delete X }\n"
      "rule \"three\" { where X:V  delet X }\n"
      "data {\n"
      "  /a/ b\n"
      "  /a/ [b]\n"
      "}\n");
  INFO(Names(found));
  REQUIRE(found.errors.size() == 6);
  CHECK(found.Covered(0) == "?");
  CHECK(found.errors[1].kind == Kind::kUnclosedBlock);
  CHECK(found.errors[2].kind == Kind::kSyntax);  // the bundle of class V
  CHECK(found.errors[3].kind == Kind::kUnclosedForm);
  CHECK(found.Covered(3) == "/k");
  CHECK(found.errors[4].kind == Kind::kSyntax);  // `delet X` reads as two more items, and nothing is changed
  CHECK(found.Covered(5) == "b");
  const std::vector<syntax::Top>& tops = found.file.tops;
  REQUIRE(tops.size() == 5);
  CHECK(std::get<syntax::Tree>(tops[0]).lines.size() == 1);
  CHECK(std::holds_alternative<syntax::Segments>(tops[1]));
  CHECK(std::get<syntax::Class>(tops[2]).name.text == "C");
  CHECK(std::get<syntax::Rule>(tops[3]).name.text == "two");
  CHECK(std::get<syntax::Data>(found.file.tops[4]).rows.size() == 1);
}

TEST_CASE("spans cover what they name, in bytes", "[unit]") {
  const std::string text =
      "-- ŋ\nrule \"nasal plāce\" { where N:[+nasal  \"ŋ f\"] C:/t͡ʃ/  -- so\n  spread  C . Place to N delink "
      "N.Tóne -- x\n }";
  const Found broken = Read(text);
  CHECK(broken.errors.size() == 1);  // `C . Place` is not glued
  const std::string good =
      "-- ŋ\nrule \"nasal plāce\" { where N:[+nasal  \"ŋ f\"] C:/t͡ʃ/  -- so\n  spread  C.Place to N delink "
      "N.Tóne -- x\n }";
  const Found found = Read(good);
  REQUIRE(found.errors.empty());
  const auto& rule = std::get<syntax::Rule>(found.file.tops.at(0));
  const auto covered = [&](Span span) { return good.substr(span.begin, span.end - span.begin); };
  CHECK(covered(rule.span) == good.substr(6));
  CHECK(covered(rule.name.span) == "\"nasal plāce\"");
  CHECK(covered(rule.where.span) == "N:[+nasal  \"ŋ f\"] C:/t͡ʃ/");
  REQUIRE(rule.where.items.size() == 2);
  CHECK(covered(rule.where.items[0].span) == "N:[+nasal  \"ŋ f\"]");
  CHECK(covered(rule.where.items[0].label->span) == "N");
  CHECK(covered(rule.where.items[0].set.span) == "[+nasal  \"ŋ f\"]");
  CHECK(covered(rule.where.items[0].set.bundle.feats.at(0).span) == "+nasal");
  CHECK(covered(rule.where.items[0].set.bundle.feats.at(0).name.span) == "nasal");
  CHECK(covered(rule.where.items[0].set.bundle.feats.at(1).span) == "\"ŋ f\"");
  CHECK(covered(rule.where.items[1].set.literal.span) == "t͡ʃ");
  REQUIRE(rule.changes.size() == 2);
  CHECK(covered(rule.changes[0].span) == "spread  C.Place to N");
  CHECK(covered(rule.changes[0].paths.at(0).span) == "C.Place");
  CHECK(covered(rule.changes[0].paths.at(0).node.span) == "Place");
  CHECK(covered(rule.changes[1].span) == "delink N.Tóne");
}

TEST_CASE("errors: deep brackets are refused, not followed", "[unit]") {
  for (const char* open : {"{", "(", "["}) {
    std::string text = "pattern P = ";
    for (int i = 0; i < 100000; ++i) text += open;
    const Found found = Read(text);
    REQUIRE(!found.errors.empty());
    CHECK(found.errors[0].kind == Kind::kLimit);
  }
  std::string text = "class V = ";
  for (int i = 0; i < 100000; ++i) text += "not ";
  CHECK(!Read(text).errors.empty());
}

TEST_CASE("errors: what was expected is said in words", "[unit]") {
  const struct {
    const char* text;
    const char* expected;
  } rows[] = {
      {"rule \"x\" { where X:[+son] optional }", "expected the probability with which it applies, found the end"},
      {"rule \"x\" { where H:[+son] optional delete H }",
       "expected the probability with which it applies, found 'delete'"},
      {"lexicon { stem /pat/ noun Tone:(H L) }", "a melody of a morpheme is not supported yet"},
      {"class V = [no within back]", "'within' is a word of the notation and cannot be a name here"},
      {"class V = [no : back]", "expected a feature, found ':'"},
      {"class V = [no Tone:]", "expected a name or '(', found ']'"},
  };
  for (const auto& row : rows) {
    const Found found = Read(row.text);
    INFO(row.text << "\n" << Names(found));
    REQUIRE(!found.errors.empty());
    CHECK(found.errors[0].message == row.expected);
  }
}

TEST_CASE("errors: the remedy is about what stands there", "[unit]") {
  const struct {
    const char* text;
    const char* remedy;
  } rows[] = {
      {"rule \"r\" { only noun where A:V delete A }", "a clause begins with its pattern"},
      {"rule \"r\" { where A:V B:V delete A if A = B }", "X.Place"},
      {"rule \"r\" { where A:V B:V delete A if A.a B.a }", "a test reads"},
      {"rule \"r\" { where A:V delete A only }", "only X in loan"},
      {"rule \"r\" { where A:V delete A prefer rightward }", "prefer left"},
      {"rule \"r\" { where A:V delete A sharing }", "sharing blocked"},
      {"rule \"r\" { where A:V delete A within clause }", "within phrase"},
      {"rule \"r\" { where A:V set A.N [-a] }", "set X.Place as Y.Place"},
      {"rule \"r\" { where A:V fill A /k/ }", "fill X [-back]"},
      {"rule \"r\" { where A:V set A }", "set X /k/"},
      {"rule \"r\" { where A:V lengthen A.root }", "write its label alone"},
      {"rule \"r\" { where A:V spraed A.b to A }", "follows spread or delink"},
      {"rule \"r\" { where A:V otherwise where A:C delete A }", "say what the clause does"},
      {"rule \"r\" { where A:V delete A optional 30 }", "optional 0.3"},
      {"rule \"r\" { where A:V delete A optional by word 0.3 }", "by word behind it"},
      {"rule \"r\" { where A:V delete A iterate left }", "iterate rightward"},
      {"rule \"r\" { where A:V insert i before A }", "insert E:/i/ before X"},
      {"rule \"r\" { where A:C # delete # }", "delete B"},
      {"rule \"r\" { where A:V A → E }", "changes are said in words"},
      {"rule \"r\" { where A:V -> E }", "changes are said in words"},
      {"rule \"r\" { [-son] → [+voice] / C _ }", "where a rule applies is said in its pattern"},
      {"class V = [±back]", "named alone"},
      {"class V = [shared +back]", "shared voice"},
      {"class V = [α back]", "glue the two"},
      {"class V = [+αback]", "right before its feature"},
      {"class V = [ends no cont]", "begins -cont"},
      {"class V = [half third]", "half first"},
      {"class V = [+syll]\ninclude \"base.tier\"", "before the first section"},
      {"fuse Place within word", "fuse Place within morpheme"},
  };
  for (const auto& row : rows) {
    const Found found = Read(row.text);
    INFO(row.text << "\n" << Names(found));
    REQUIRE(found.errors.size() == 1);
    CHECK_THAT(found.errors[0].remedy, Catch::Contains(row.remedy));
  }
}

// Tokens as a reader sees them: words with their letters, any other character alone, blanks with what they follow.
std::vector<std::string> Tokens(const std::string& text) {
  std::vector<std::string> tokens;
  bool in_word = false;
  for (const char c : text) {
    const bool blank = c == ' ' || c == '\n';
    const bool word = std::isalnum(static_cast<unsigned char>(c)) || static_cast<unsigned char>(c) >= 0x80;
    if (tokens.empty() || !(blank || (word && in_word)))
      tokens.emplace_back(1, c);
    else
      tokens.back() += c;
    in_word = word;
  }
  return tokens;
}

TEST_CASE("errors: no message names a type of the program", "[unit]") {
  std::stringstream grammar;
  grammar << std::ifstream(std::string(TIERSMITH_TEST_SOURCE) + "/demo/sketch.tier").rdbuf();
  const std::vector<std::string> whole = Tokens(grammar.str());
  REQUIRE(whole.size() > 300);
  // Words that the demo does not use stand in some of the messages too.
  const char* const others[] = {
      "optional ", "within ", "only ",      "except ", "repeat ",  "on ",    "copy ",   "merge ",  "swap ",
      "link ",     "to ",     "floating ",  "held ",   "by ",      "first ", "shared ", "begins ", "as ",
      "if ",       "unless ", "otherwise ", "prefer ", "sharing ", "α",      "{",       "}",       "(",
      ")",         "[",       "]",          "~ ",      "* ",       "± ",     "+",       "- ",      ": ",
      ". ",        "| ",      "= ",         "× ",      "¬ ",       "⟨",      "/",       "\""};
  const std::regex mangled("boost|spirit|N5|N9tiersmith|St[0-9]|E_|undefined|@");
  std::mt19937 random(20260);
  std::size_t messages = 0;
  for (int round = 0; round < 6000; ++round) {
    std::vector<std::string> tokens = whole;
    for (unsigned i = 0, n = 1 + random() % 3; i < n; ++i) {
      const auto at = static_cast<std::ptrdiff_t>(random() % tokens.size());
      switch (random() % 4) {
        case 0:
          tokens.erase(tokens.begin() + at);
          break;
        case 1:
          tokens.insert(tokens.begin() + at, whole[random() % whole.size()]);
          break;
        case 2:
          tokens.insert(tokens.begin() + at, others[random() % std::size(others)]);
          break;
        default:
          std::swap(tokens[static_cast<std::size_t>(at)], tokens[random() % tokens.size()]);
          break;
      }
    }
    std::string text;
    for (const std::string& token : tokens) text += token;
    for (const Diagnostic& d : Read(text).errors) {
      ++messages;
      INFO(round << ": " << d.message << "\n" << d.remedy);
      REQUIRE(!std::regex_search(d.message, mangled));
      REQUIRE(!d.remedy.empty());
    }
  }
  CHECK(messages > 6000);
}

TEST_CASE("broken input gives errors and nothing worse", "[unit]") {
  std::stringstream grammar;
  grammar << std::ifstream(std::string(TIERSMITH_TEST_SOURCE) +
                           "/rulesets/finnish-vowel-harmony/finnish-vowel-harmony.tier")
                 .rdbuf();
  const std::string whole = grammar.str();
  REQUIRE(whole.size() > 500);
  const auto check = [](const std::string& text) {
    for (const Diagnostic& d : Read(text).errors) {
      REQUIRE(d.span.begin <= d.span.end);
      REQUIRE(d.span.end <= text.size());
      REQUIRE(!d.message.empty());
    }
  };
  for (std::size_t length = 0; length < whole.size(); ++length)
    check(whole.substr(0, length));  // also inside a character
  std::mt19937 random(7);
  for (int round = 0; round < 1000; ++round) {
    std::string text = whole;
    for (int i = 0; i < 4; ++i) {
      const std::size_t at = random() % text.size();
      switch (random() % 4) {
        case 0:
          text.erase(at, 1 + random() % 9);
          break;
        case 1:
          text[at] = static_cast<char>(random() % 256);
          break;
        case 2:
          text.insert(at, 1, "{}[]()/'\"-;.:=#|_"[random() % 17]);
          break;
        default:
          text.insert(at, text.substr(random() % text.size(), random() % 30));
          break;
      }
    }
    check(text);
  }
}

}  // namespace tiersmith
