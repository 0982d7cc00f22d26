// Cells and words. Expected forms are worked out by hand from the paradigms as they stand; the language is invented.
#include "analyse/paradigm.h"

#include <catch2/catch.hpp>

#include "analyse/words.h"
#include "support/model_case.h"

namespace tiersmith::testing {
namespace {

const std::string kHead = std::string(kSmallTree) +
                          "segments from \"ipa\" { t k p m n l s i u a }\narchisegments { A = a [no back] }\n"
                          "class V = [+syll]\nclass C = [-syll]\nomit { ±back in /A/ }\n";

std::string Cells(const Grammar& grammar, const std::string& paradigm, const std::string& stem,
                  Diagnostics& diagnostics) {
  const FormReader reader(grammar);
  std::vector<LexiconEntry> stems;
  TextError error;
  REQUIRE(StemsNamed(reader, grammar, stem, &stems, &error));
  std::string all;
  for (const Paradigm& p : grammar.paradigms) {
    if (p.name != paradigm) continue;
    for (const ParadigmCell& cell : CellsOf(reader, grammar, p, stems.at(0), diagnostics))
      all += cell.name + ": " + (cell.form ? Described(*cell.form) : "none") + "\n";
  }
  return all;
}

TEST_CASE("paradigm: allomorphs, cells of their own, other stems, prefixes", "[unit]") {
  const Loaded loaded = LoadOrFail(kHead + R"(
    lexicon { stem /tilun/ 'rope' noun   stem /ma/ noun   stem /pi/ 'go' verb in PST PL /nak/ in PST /pu/
              suffix /-lAn/ strong }
    paradigm noun {
      stem noun
      number : SG //   PL /-lAn/
      case   : NOM //  LOC /-tA/ after C, /-sA/ after V   POSS /mu-/
      PL LOC : /-ki/
    }
    paradigm verb {
      stem verb
      person : ONE /ni-/ TWO /mi-/ after V, /im-/
      tense  : PRS //  PST /-ta/ after C, /-sa/
      number : SG // PL /-k/ after V, /-ik/
    })");
  const Grammar& grammar = *loaded.grammar;
  Diagnostics diagnostics;
  CHECK(Cells(grammar, "noun", "tilun", diagnostics) ==
        "SG NOM: tilun@stem@noun\n"
        "SG LOC: tilun@stem@noun-tA@suffix@LOC\n"
        "SG POSS: mu@prefix@POSS-tilun@stem@noun\n"
        "PL NOM: tilun@stem@noun-lAn@suffix@PL@strong\n"
        "PL LOC: tilun@stem@noun-ki@suffix@PL@LOC\n"
        "PL POSS: mu@prefix@POSS-tilun@stem@noun-lAn@suffix@PL@strong\n");
  CHECK(Cells(grammar, "noun", "ma", diagnostics).find("SG LOC: ma@stem@noun-sA@suffix@LOC\n") != std::string::npos);
  CHECK(Cells(grammar, "verb", "pi", diagnostics) ==
        "ONE PRS SG: ni@prefix@ONE-pi@stem@verb\n"
        "ONE PRS PL: ni@prefix@ONE-pi@stem@verb-k@suffix@PL\n"
        "ONE PST SG: ni@prefix@ONE-pu@stem@verb-sa@suffix@PST\n"
        "ONE PST PL: ni@prefix@ONE-nak@stem@verb-ta@suffix@PST-k@suffix@PL\n"
        "TWO PRS SG: im@prefix@TWO-pi@stem@verb\n"
        "TWO PRS PL: im@prefix@TWO-pi@stem@verb-k@suffix@PL\n"
        "TWO PST SG: im@prefix@TWO-pu@stem@verb-sa@suffix@PST\n"
        "TWO PST PL: im@prefix@TWO-nak@stem@verb-ta@suffix@PST-k@suffix@PL\n");
  CHECK(diagnostics.all().empty());
  // A stem that is not listed, with its tags.
  CHECK(Cells(grammar, "noun", "kal@strong", diagnostics).find("SG LOC: kal@stem@strong-tA@suffix@LOC\n") !=
        std::string::npos);
}

TEST_CASE("paradigm: of several entries with an affix's form, those with its value lend their tags", "[unit]") {
  const Loaded loaded = LoadOrFail(kHead + R"(
    lexicon { stem /ma/ noun  suffix /-ki/ strong PL  suffix /-ki/ weak  suffix /-ta/ strong  suffix /-ta/ weak }
    paradigm noun { stem noun; number : SG /-ta/ PL /-ki/ })");
  Diagnostics diagnostics;
  CHECK(Cells(*loaded.grammar, "noun", "ma", diagnostics) ==
        "SG: ma@stem@noun-ta@suffix@SG\nPL: ma@stem@noun-ki@suffix@PL@strong\n");
}

TEST_CASE("paradigm: where no allomorph fits the cell and the stem are named", "[unit]") {
  const Loaded loaded = LoadOrFail(kHead + R"(
    lexicon { stem /ma/ noun }
    paradigm noun { stem noun; case : NOM // LOC /-tA/ after C, /-sA/ after /i/ })");
  Diagnostics diagnostics;
  CHECK(Cells(*loaded.grammar, "noun", "ma", diagnostics) == "NOM: ma@stem@noun\nLOC: none\n");
  REQUIRE(diagnostics.all().size() == 1);
  CHECK(diagnostics.all()[0].message == "no form of 'LOC' fits after a: cell 'LOC' of ma");
  CHECK(loaded.Covered(diagnostics.all()[0]) == "LOC /-tA/ after C, /-sA/ after /i/");
}

TEST_CASE("outputs: tags reach the rules that ask for them, optional rules give every way", "[unit]") {
  Loaded loaded;
  loaded.grammar = LoadGrammarText("t.tier", kHead + R"(
    lexicon { stem /tan/ loan   stem /pan/   suffix /-ka/ strong }
    paradigm all { number : SG // PL /-ka/ }
    rule "loans lose n" { where X:[+nasal] # delete X only loan }
    rule "strong k"     { where X:/k/ delete X only strong optional 0.25 })",
                                   loaded.sources, loaded.diagnostics, Reach::kWhole);
  INFO(loaded.Messages());
  REQUIRE(loaded.grammar != nullptr);
  const Grammar& grammar = *loaded.grammar;
  const FormReader reader(grammar);
  Diagnostics diagnostics;
  std::vector<Word> words;
  REQUIRE(WordList(reader, grammar).First(0, &words, diagnostics));
  std::string all;
  for (const Word& word : words) {
    all += Described(word.form) + ":";
    for (const Runner::Output& output : OutputsOf(grammar, reader.FormOf(word.form)).all)
      all += " " + output.surface + " " + std::to_string(static_cast<int>(output.probability * 100 + 0.5));
    all += "\n";
  }
  CHECK(all ==
        "tan@stem@loan: ta 100\n"
        "tan@stem@loan-ka@suffix@PL@strong: tanka 75 tana 25\n"
        "pan@stem: pan 100\n"
        "pan@stem-ka@suffix@PL@strong: panka 75 pana 25\n");
}

TEST_CASE("words: every stem in every cell, and at random by weight", "[unit]") {
  const Loaded loaded = LoadOrFail(kHead + R"(
    lexicon { stem /tilun/ 'rope' noun weight 9   stem /ma/ 'yes'   suffix /-ki/ }
    paradigm noun { stem noun; number : SG // PL /-lAn/ })");
  const FormReader reader(*loaded.grammar);
  const WordList list(reader, *loaded.grammar);
  Diagnostics diagnostics;
  std::vector<Word> words;
  CHECK(list.First(0, &words, diagnostics));
  std::string all;
  for (const Word& word : words) all += word.form.text + " '" + word.gloss + "' ";
  CHECK(all == "tilun 'rope SG' tilun-lAn 'rope PL' ma 'yes' ");
  words.clear();
  CHECK_FALSE(list.First(2, &words, diagnostics));
  CHECK(words.size() == 2);
  int ropes = 0;
  const std::vector<Word> sample = list.Sample(2000, 7, diagnostics), again = list.Sample(2000, 7, diagnostics);
  for (std::size_t i = 0; i < sample.size(); ++i) {
    CHECK(sample[i].form.text == again[i].form.text);
    ropes += sample[i].form.text != "ma" ? 1 : 0;
  }
  CHECK(ropes > 1740);  // 1800 expected; 4.5 standard deviations are 60
  CHECK(ropes < 1860);
}

}  // namespace
}  // namespace tiersmith::testing
