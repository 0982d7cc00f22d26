// Recovery from the words of a lexicon. What is a word is worked out by hand from the lexicon and the paradigms as they
// stand (src/analyse/word_graph.h); the language is invented.
#include "analyse/word_graph.h"

#include <algorithm>

#include "support/compiled_case.h"

namespace tiersmith::testing {
namespace {

// From here on only words; those left out.
std::vector<std::string> AllowWords(Compiled& grammar) {
  INFO(grammar.Messages());
  REQUIRE(grammar.runner != nullptr);
  const FormReader reader(grammar.grammar());
  Diagnostics diagnostics;
  std::vector<std::string> left_out;
  grammar.runner->AllowOnly(WordsAllowed(reader, grammar.grammar(), diagnostics), &left_out);
  CHECK(diagnostics.all().empty());
  return left_out;
}

// "form restorations 'gloss'".
std::vector<std::string> Words(Compiled& grammar, const std::string& surface) {
  std::vector<std::string> words;
  for (const Runner::Candidate& candidate : grammar.Recover(surface, 20).best)
    words.push_back(candidate.form + " " + std::to_string(candidate.restorations) + " '" + candidate.gloss + "'");
  std::sort(words.begin(), words.end());
  return words;
}

using Strings = std::vector<std::string>;

TEST_CASE("words for recovery: cells, stems alone, affixes outside paradigms, several words", "[unit]") {
  Compiled grammar = CompileText(std::string(kSmallInventory) + R"(
rule "place" { where N:[+nasal] T:[+cons Labial]   delink N.Place   spread T.Place to N }
lexicon {
  stem /tan/ 'rope' noun   stem /mat/ 'go' verb   stem /ni/ 'yes'   stem /nim/ 'no'
  prefix /in-/ 'not'   suffix /-pa/ 'too'   clitic /=pi/ 'and'   clitic /ti=/ 'the'   suffix /-ta/ 'plural'
}
paradigm noun { stem noun; number : SG //  PL /-ta/ }
)");
  CHECK(AllowWords(grammar).empty());
  CHECK(Words(grammar, "tan") == Strings{"tan 0 'rope SG'"});
  CHECK(Words(grammar, "tanta") == Strings{"tan-ta 1 'rope PL'"});
  CHECK(Words(grammar, "mat") == Strings{"mat 0 'go'"});  // no paradigm takes it
  CHECK(Words(grammar, "matta").empty());                 // -ta stands in a paradigm, which takes no verbs
  CHECK(Words(grammar, "matpa") == Strings{"mat-pa 1 'go too'"});
  CHECK(Words(grammar, "tampa") == Strings{"tan-pa 1 'rope SG too'"});  // the surface form is not the lexicon's
  CHECK(Words(grammar, "tampapi") == Strings{"tan-pa=pi 2 'rope SG too and'"});
  CHECK(Words(grammar, "tampipa").empty());  // no suffix behind a clitic
  CHECK(Words(grammar, "intam").empty());
  CHECK(Words(grammar, "intan") == Strings{"in-tan 1 'not rope SG'"});
  CHECK(Words(grammar, "inintanta") == Strings{"in-in-tan-ta 3 'not not rope PL'"});
  CHECK(Words(grammar, "tiimmat") == Strings{"ti=in-mat 2 'the not go'"});
  CHECK(Words(grammar, "ti").empty());       // a clitic alone is no word
  CHECK(Words(grammar, "intitan").empty());  // proclitics stand before prefixes
  CHECK(Words(grammar, "ni") == Strings{"ni 0 'yes'"});
  CHECK(Words(grammar, "nim mat") == Strings{"nim#mat 1 'no # go'"});
  CHECK(Words(grammar, "nim‖inmat").empty());
  CHECK(Words(grammar, "nim‖immat") == Strings{"nim‖in-mat 2 'no # not go'"});
  CHECK(Words(grammar, "tan tan ni") == Strings{"tan#tan#ni 2 'rope SG # rope SG # yes'"});
  CHECK(Words(grammar, "tannim").empty());  // two words need a boundary
  // What forms are candidates is asked without the lexicon.
  CHECK(grammar.IsCandidate("matta", "matta"));
}

TEST_CASE("words for recovery: stems with the same cells share them", "[unit]") {
  Compiled grammar = CompileText(std::string(kSmallInventory) + R"(
class C = [-syll]
rule "loss" { where T:/t/ #   delete T   only T in loan }
lexicon {
  stem /tan/ 'rope' noun   stem /pin/ 'hill' noun   stem /kat/ 'cake' noun loan
  stem /ni/ 'go' noun in PL /nap/
}
paradigm noun { stem noun; number : SG //  PL /-ta/ after C, /-ma/; case : NOM //  OBL /in-/ }
)");
  INFO(grammar.Messages());
  REQUIRE(grammar.runner != nullptr);
  Diagnostics diagnostics;
  const WordGraph graph = WordsAllowed(FormReader(grammar.grammar()), grammar.grammar(), diagnostics);
  // tan, pin, kat, ni and nap, each also behind in-; what follows them: SG and PL -ta, with NOM and with OBL.
  CHECK(graph.pieces.size() == 10 + 4);
  CHECK(AllowWords(grammar).empty());
  CHECK(Words(grammar, "tan") == Strings{"tan 0 'rope SG NOM'"});
  CHECK(Words(grammar, "tanta") == Strings{"tan-ta 1 'rope PL NOM'"});
  CHECK(Words(grammar, "intanta") == Strings{"in-tan-ta 2 'rope PL OBL'"});
  CHECK(Words(grammar, "napta") == Strings{"nap-ta 1 'go PL NOM'"});
  CHECK(Words(grammar, "nap").empty());
  CHECK(Words(grammar, "nita").empty());
  CHECK(Words(grammar, "ka") == Strings{"kat@loan 1 'cake SG NOM'"});  // t is put back
  CHECK(Words(grammar, "inkatta") == Strings{"in-kat@loan-ta 2 'cake PL OBL'"});
}

TEST_CASE("words for recovery: two entries of one form, and tags", "[unit]") {
  Compiled grammar = CompileText(std::string(kSmallInventory) + R"(
rule "final devoicing" { where X:[-son] #   set X [-voice]   except X in loan }
lexicon {
  stem /tab/ 'hill'   stem /tab/ 'cake' loan   stem /pid/ 'one' loan   stem /pid/ 'two' loan
  suffix /-ad/ 'PL'
}
)");
  AllowWords(grammar);
  CHECK(Words(grammar, "tap") == Strings{"tab 0 'hill'"});
  CHECK(Words(grammar, "tab") == Strings{"tab@loan 0 'cake'"});  // the lexicon's tags are not restored
  CHECK(Words(grammar, "pid") == Strings{"pid@loan 0 'one / two'"});
  CHECK(Words(grammar, "tabat") == Strings{"tab-ad 1 'hill PL'", "tab@loan-ad 1 'cake PL'"});
  CHECK(Words(grammar, "pit").empty());
  CHECK(Words(grammar, "tap tab") == Strings{"tab#tab@loan 1 'hill # cake'"});
}

TEST_CASE("words for recovery: any number of lost affixes is said", "[unit]") {
  Compiled grammar = CompileText(std::string(kSmallInventory) + R"(
rule "h loss" { where X:/h/   delete X }
lexicon { stem /ta/ 'hill'   suffix /-h/ 'PL' }
)");
  AllowWords(grammar);
  const Runner::Candidates candidates = grammar.Recover("ta", 3);
  CHECK(candidates.infinite);
  REQUIRE(candidates.best.size() == 3);
  CHECK(candidates.best[0].form == "ta");
  CHECK(candidates.best[1].form == "ta-h");
  CHECK(candidates.best[1].restorations == 2);  // the boundary and the h
  CHECK(candidates.best[2].gloss == "hill PL PL");
}

}  // namespace
}  // namespace tiersmith::testing
