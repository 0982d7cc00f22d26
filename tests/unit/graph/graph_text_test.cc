// Rules as users write them, checked and interpreted: what the checker hands over is what the interpreter expects.
// Latin, English and Tigrinya as in the handbooks (from memory): -alis/-aris after Steriade 1987, the English plural, the
// inalterability of geminates after Hayes 1986. The other words are invented.
#include "graph/interpreter.h"
#include "support/model_case.h"

namespace tiersmith::testing {
namespace {

const char* const kHead = R"(
tree {
  root    > ±cons ±son ±syll ±nasal ±lateral ±strident ±cont ×2 in [-son]
  root    > Laryngeal > ±voice
  root    > Place > •Labial •Coronal •Dorsal
  Labial  > round
  Coronal > ±anterior ±distributed
  Dorsal  > ±high ±low ±back
}
segments from "ipa" { p t k b d ɡ m n f v s z x l r i u e o a }
segments { without ±lateral in [-son] or [+nasal] or [+syll] }
allophones { ŋ }
class V = [+syll]
class C = [-syll]
)";

struct TextRow {
  const char* rules;
  const char* in;
  const char* out;  // outcomes in order, between spaces
};

std::string DerivedBy(const Grammar& grammar, const std::string& typed) {
  const Reader reader(grammar);
  std::vector<Token> tokens;
  TextError error;
  REQUIRE(reader.Read(typed, Reader::Side::kUnderlying, &tokens, &error));
  const Derivation derivation = Derive(grammar, reader.FormOf(tokens, Reader::Side::kUnderlying), true);
  if (!derivation.problem.empty()) return derivation.problem;
  std::string all;
  for (const Outcome& outcome : derivation.outcomes) {
    std::string text;
    FeatureTree no_symbol;
    REQUIRE(WriteForm(grammar, outcome.form, &text, &no_symbol));
    all += (all.empty() ? "" : " ") + text;
  }
  return all;
}

TEST_CASE("graph: rules as written", "[unit]") {
  const char* latin = R"(rule "unlike l" { where A:[αlateral] ... B:[lateral]  set B [-αlateral] })";
  const char* plural = R"(rule "plural" {
    where X:[+strident] - S:/z/   insert E:/i/ before S
    otherwise where X:[-voice] - S:/z/   set S [-voice]
  })";
  const char* spirant = R"(rule "spirant" { where V X:[-son -cont Dorsal -voice]  set X /x/  sharing blocked })";
  const char* nasal = R"(rule "nasal" { where N:[+nasal] T:[-son]  set N.Place as T.Place  preserving })";
  const char* join = R"(rule "join" { within phrase  where V B:# V  delete B }
                        rule "merge" { where A:V B:V  if A.root = B.root  merge A.root B.root })";
  const TextRow rows[] = {
      {latin, "naval", "naval"},
      {latin, "lunal", "lunar"},
      {latin, "floral", "floral"},
      {plural, "kat-z", "kats"},
      {plural, "bus-z", "busiz"},
      {plural, "dod-z", "dodz"},
      {spirant, "aka", "axa"},
      {spirant, "akːa", "akːa"},
      {spirant, "akka", "axka"},
      {nasal, "anpa", "ampa"},
      {nasal, "anka", "anka"},
      {join, "pa atu", "paːtu"},
      {join, "pa itu", "paitu"},
      {R"(rule "echo" { where V X:C #  insert E:[+syll -cons +son -nasal +cont +voice] after X  set E.Place as V.Place })",
       "mut", "mutu"},
      {R"(rule "lengthen" { where A:V N:/n/ [+cont -syll]  delete N  lengthen A })", "insula", "iːsula"},
      {R"(rule "shorten" { where A:[+syll long] #  shorten A })", "paraː", "para"},
      {R"(rule "voice" { where V X:[-son -voice] V  set X [+voice]  optional 0.3 })", "apata",
       "apata abata apada abada"},
      {R"(rule "stem" { where X:[-son -voice] V  set X [+voice]  within morpheme })", "ap-ata", "apada"},
      {R"(rule "joined" { where V & X:[-son -voice]  set X [+voice] })", "ap-ta", "abta"},
  };
  for (const TextRow& row : rows) {
    CAPTURE(row.rules, row.in);
    const Loaded loaded = Load(std::string(kHead) + row.rules, Reach::kWhole);
    CAPTURE(loaded.Messages());
    REQUIRE(loaded.grammar != nullptr);
    CHECK(DerivedBy(*loaded.grammar, row.in) == row.out);
  }
}

}  // namespace
}  // namespace tiersmith::testing
