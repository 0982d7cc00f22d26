// Segments, archisegments, allophones, diacritics, omit and Completion. Expected contents are worked out by hand from the
// notation (grammar/notation.md §3, §4).
#include "support/model_case.h"

namespace tiersmith::testing {
namespace {

std::string Full(const Grammar& grammar, const std::string& symbol) {
  return Show(SymbolNamed(grammar, symbol).full, grammar.tree);
}
std::string Underlying(const Grammar& grammar, const std::string& symbol) {
  return Show(SymbolNamed(grammar, symbol).underlying, grammar.tree);
}
std::string Spelled(const Grammar& grammar, const FeatureTree& content) {
  const int symbol = grammar.inventory.Spell(content).symbol;
  return symbol < 0 ? "" : grammar.inventory.symbols[static_cast<std::size_t>(symbol)].text;
}
// The content of a symbol with nodes taken away.
FeatureTree Less(const Grammar& grammar, const std::string& symbol, std::initializer_list<const char*> nodes) {
  FeatureTree content = SymbolNamed(grammar, symbol).full;
  for (const char* node : nodes) Remove(&content, *grammar.tree.Find(node));
  Prune(grammar.tree, &content);
  return content;
}

TEST_CASE("inventory: what entries mean", "[unit]") {
  const Loaded loaded = LoadOrFail(std::string(kSmallTree) + R"(
segments from "ipa" { p t n s u a kʷ }
segments from "ipa" [Coronal] { i }
segments {
  c = t [-cont +cont]
  b = p [+voice]
  j = i [-syll no Coronal]
  X [+son Dorsal]
  without ±high ±back in [-syll]
}
archisegments { N = n [no Place]  I = i [no back] }
allophones { ŋ  m = p [+son +nasal +voice] }
)");
  const Grammar& g = *loaded.grammar;
  struct Row {
    const char* symbol;
    const char* content;
  };
  const Row rows[] = {
      {"p", "root[-son -syll -nasal -cont Laryngeal[-voice] Place[•Labial]]"},
      {"b", "root[-son -syll -nasal -cont Laryngeal[+voice] Place[•Labial]]"},
      {"c", "root[-son -syll -nasal -cont +cont Laryngeal[-voice] Place[•Coronal]]"},
      {"i", "root[+son +syll -nasal +cont Laryngeal[+voice] Place[•Coronal •Dorsal[+high -back]]]"},
      {"j", "root[+son -syll -nasal +cont Laryngeal[+voice] Place[•Dorsal]]"},  // `without` takes for good
      {"u", "root[+son +syll -nasal +cont Laryngeal[+voice] Place[•Labial[round] •Dorsal[+high +back]]]"},
      {"X", "root[+son Place[•Dorsal]]"},
      {"N", "root[+son -syll +nasal -cont Laryngeal[+voice]]"},
      {"I", "root[+son +syll -nasal +cont Laryngeal[+voice] Place[•Coronal •Dorsal[+high]]]"},
      {"kʷ", "root[-son -syll -nasal -cont Laryngeal[-voice] Place[•Labial[round] •Dorsal]]"},
      {"m", "root[+son -syll +nasal -cont Laryngeal[+voice] Place[•Labial]]"},
  };
  for (const Row& row : rows) {
    CAPTURE(row.symbol);
    CHECK(Full(g, row.symbol) == row.content);
  }
  CHECK(SymbolNamed(g, "N").kind == Symbol::Kind::kArchisegment);
  CHECK(SymbolNamed(g, "N").in_underlying);
  CHECK_FALSE(SymbolNamed(g, "ŋ").in_underlying);
  CHECK(SymbolNamed(g, "p").in_underlying);
}

TEST_CASE("inventory: order of declarations does not matter", "[unit]") {
  // The right a is the library's; an entry with a bundle replaces a bare listing, wherever it stands.
  for (const char* segments : {"segments { a = a [+high] b = a [-voice] }\nsegments from \"ipa\" { a p }",
                               "segments from \"ipa\" { a p }\nsegments { b = a [-voice] a = a [+high] }"}) {
    const Loaded loaded = LoadOrFail(std::string(segments) + kSmallTree);
    CHECK(Full(*loaded.grammar, "a") == "root[+son +syll -nasal +cont Laryngeal[+voice] Place[•Dorsal[+high -back]]]");
    CHECK(Full(*loaded.grammar, "b") == "root[+son +syll -nasal +cont Laryngeal[-voice] Place[•Dorsal[+high -back]]]");
  }
}

TEST_CASE("inventory: diacritics", "[unit]") {
  const Loaded loaded = LoadOrFail(std::string(kSmallTree) + R"(
segments from "ipa" { p t s u }
segments { a = ɑ [-high] }
archisegments { T = t [no voice] }
allophones { z = s [+voice] }
diacritics { ◌ʷ [Labial round]  ◌̃ [+nasal] on [+syll]  ⁿ◌ [+voice] surface  ◌˖ [-back] }
)");
  const Grammar& g = *loaded.grammar;
  CHECK(Full(g, "tʷ") == "root[-son -syll -nasal -cont Laryngeal[-voice] Place[•Labial[round] •Coronal]]");
  CHECK(Full(g, "ũ") == "root[+son +syll +nasal +cont Laryngeal[+voice] Place[•Labial[round] •Dorsal[+high +back]]]");
  CHECK(SymbolNamed(g, "tʷ").diacritics == 1);
  CHECK(SymbolNamed(g, "tʷ").in_underlying);
  CHECK_FALSE(SymbolNamed(g, "ⁿt").in_underlying);  // `surface`
  CHECK_FALSE(SymbolNamed(g, "zʷ").in_underlying);  // from an allophone
  CHECK(SymbolNamed(g, "Tʷ").in_underlying);
  CHECK_FALSE(SymbolNamed(g, "Tʷ").completes);      // from an archisegment
  CHECK_FALSE(g.inventory.Find("t̃").has_value());   // `on [+syll]`
  CHECK_FALSE(g.inventory.Find("uʷ").has_value());  // it adds nothing there
  CHECK_FALSE(g.inventory.Find("t˖").has_value());  // no Dorsal to hang it from
  CHECK(Full(g, "u˖") == "root[+son +syll -nasal +cont Laryngeal[+voice] Place[•Labial[round] •Dorsal[+high -back]]]");
  CHECK(g.inventory.Find("ã˖").has_value());  // two at once
  CHECK(SymbolNamed(g, "ã˖").diacritics == 2);
  // One vowel, two marks; a˖ ʷ in either order is the same symbol.
  CHECK(Full(g, "aʷ˖") == "root[+son +syll -nasal +cont Laryngeal[+voice] Place[•Labial[round] •Dorsal[-high -back]]]");

  const std::vector<int> none = g.inventory.UnderlyingSymbols(0), two = g.inventory.UnderlyingSymbols(2);
  CHECK(none.size() == 6);  // p t s u a T
  CHECK(two.size() > none.size());
}

TEST_CASE("inventory: three diacritics where the grammar writes them", "[unit]") {
  const std::string text = std::string(kSmallTree) + R"(
segments from "ipa" { t }
segments { a = ɑ [-high] }
diacritics { ◌ʷ [Labial round]  ◌̃ [+nasal]  ◌˖ [-back]  ◌̥ [-voice] }
)";
  CHECK_FALSE(LoadOrFail(text).grammar->inventory.Find("ḁ̃˖").has_value());
  const Loaded written = LoadOrFail(text + "data { /tḁ̃˖/ [ta] }");
  CHECK(SymbolNamed(*written.grammar, "ḁ̃˖").diacritics == 3);
  CHECK(SymbolNamed(*written.grammar, "ã˖̥").diacritics == 3);  // a set: any order
}

TEST_CASE("inventory: omit and completion", "[unit]") {
  const Loaded loaded = LoadOrFail(std::string(kSmallTree) + R"(
segments from "ipa" { p t k n s i u }
segments { d = t [+voice]  c = t [-cont +cont] }
archisegments { N = n [no Place] }
class Son = [+son]
omit { ±voice in Son   -voice in [-son]   -cont everywhere   -back in /i/ }
)");
  const Grammar& g = *loaded.grammar;
  CHECK(Underlying(g, "t") == "root[-son -syll -nasal Place[•Coronal]]");
  CHECK(Underlying(g, "d") == "root[-son -syll -nasal Laryngeal[+voice] Place[•Coronal]]");
  CHECK(Underlying(g, "n") == "root[+son -syll +nasal Place[•Coronal]]");
  CHECK(Underlying(g, "i") == "root[+son +syll -nasal +cont Place[•Dorsal[+high]]]");
  // Nothing is taken from a contour.
  CHECK(Underlying(g, "c") == "root[-son -syll -nasal -cont +cont Place[•Coronal]]");

  struct Row {
    const char* symbol;
    std::initializer_list<const char*> less;
    const char* spelled;
  };
  const Row rows[] = {
      {"t", {}, "t"},
      {"t", {"voice"}, "t"},
      {"d", {"voice"}, "t"},  // delinking is devoicing where omit lists the value
      {"t", {"voice", "cont"}, "t"},
      {"n", {"voice"}, "n"},
      {"n", {"nasal"}, ""},  // omit does not list it: no symbol
      {"i", {"back"}, "i"},
      {"u", {"back"}, ""},
      {"c", {"cont"}, "t"},  // both parts of the contour gone, -cont is completed
      {"n", {"Place"}, ""},  // completion never chooses archisegments
      {"t", {"Coronal"}, ""},
  };
  for (const Row& row : rows) {
    CAPTURE(row.symbol, row.spelled);
    CHECK(Spelled(g, Less(g, row.symbol, row.less)) == row.spelled);
  }
}

TEST_CASE("inventory: omit leaves bare articulators that stand", "[unit]") {
  const Loaded loaded = LoadOrFail(R"(
tree {
  root > ±son Place
  Place > •Coronal Free
  Coronal > ±anterior
  Free > ±high
}
segments { t [-son +anterior]  x [-son +high]  c [+son -anterior] }
omit { +anterior +high everywhere }
)");
  const Grammar& g = *loaded.grammar;
  CHECK(Underlying(g, "t") == "root[-son Place[•Coronal]]");
  CHECK(Underlying(g, "x") == "root[-son]");  // Free and Place are pruned
  CHECK(Spelled(g, Less(g, "t", {"anterior"})) == "t");
  CHECK(Spelled(g, Less(g, "t", {"Place"})) == "x");  // a Coronal that stands does not come back
  CHECK(Spelled(g, Less(g, "c", {"anterior"})) == "");
}

TEST_CASE("inventory: listed symbols before diacritics, fewest first; two are undecided", "[unit]") {
  const Loaded loaded = LoadOrFail(R"(
tree {
  root > ±son ±back ±round ±high
}
segments { a [+son -back -round -high]  o [+son +back +round -high] }
diacritics { ◌̟ [+back]  ◌̹ [+round]  ◌̝ [-back]  ◌̞ [-round] }
)");
  const Grammar& g = *loaded.grammar;
  FeatureTree both = SymbolNamed(g, "a").full;
  SetValues(g.tree, &both, *g.tree.Find("back"), {1});
  // a with ◌̟ and o with ◌̞ are the same tree: undecided.
  const Inventory::Spelling& spelling = g.inventory.Spell(both);
  CHECK(spelling.symbol == -1);
  REQUIRE(spelling.candidates.size() == 2);
  // a with both marks is o, which is listed.
  SetValues(g.tree, &both, *g.tree.Find("round"), {1});
  CHECK(Spelled(g, both) == "o");
  CHECK(g.inventory.Spell(both).candidates.size() == 1);
}

TEST_CASE("inventory: literals match what is spelled so or equals the symbol", "[unit]") {
  const Loaded loaded = LoadOrFail(std::string(kSmallTree) + R"(
segments from "ipa" { t n }
segments { d = t [+voice] }
archisegments { N = n [no Place] }
omit { -voice in [-son] }
rule "r" { where /t/ /N/ X:/n/  delete X }
)");
  const Grammar& g = *loaded.grammar;
  REQUIRE(g.inventory.literals.size() == 3);
  CHECK(g.inventory.LiteralMatches(0, SymbolNamed(g, "t").full));
  CHECK(g.inventory.LiteralMatches(0, SymbolNamed(g, "t").underlying));
  CHECK_FALSE(g.inventory.LiteralMatches(0, SymbolNamed(g, "d").full));
  CHECK(g.inventory.LiteralMatches(1, Less(g, "n", {"Place"})));
  CHECK_FALSE(g.inventory.LiteralMatches(1, SymbolNamed(g, "n").full));
}

TEST_CASE("inventory: trees without a symbol are told by the nearest one", "[unit]") {
  const Loaded loaded = LoadOrFail(std::string(kSmallTree) + R"(
segments from "ipa" { p t i u }
archisegments { I = i [no back] }
)");
  const Grammar& g = *loaded.grammar;
  FeatureTree content = SymbolNamed(g, "i").full;
  CHECK(g.inventory.Describe(content, g.tree) == "i");
  SetValues(g.tree, &content, *g.tree.Find("back"), {1});
  CHECK(g.inventory.Describe(content, g.tree) == "i{+back}");
  CHECK(g.inventory.Describe(SymbolNamed(g, "I").full, g.tree) == "I");
  CHECK(g.inventory.Describe(Less(g, "t", {"Place"}), g.tree) == "p{no Place}");
  CHECK(g.inventory.Describe(Less(g, "u", {"round"}), g.tree) == "u{no round}");
}

TEST_CASE("inventory: a contour the tree has no room for", "[unit]") {
  const Loaded loaded = LoadOrFail("tree { root > ±cons ±cont ±strident }\nsegments from \"ipa\" { t t͡s s }");
  CHECK(Full(*loaded.grammar, "t͡s") == "root[+cons -cont +strident]");
  REQUIRE(loaded.diagnostics.all().size() == 1);
  CHECK(loaded.diagnostics.all()[0].severity == Severity::kWarning);
  CHECK(loaded.Covered(loaded.diagnostics.all()[0]) == "t͡s");
}

TEST_CASE("inventory: symbols that fall together", "[unit]") {
  const Loaded tree = Load("tree { root > ±cons ±son ±nasal }\nsegments from \"ipa\" { t n k }");
  REQUIRE(tree.diagnostics.all().size() == 1);
  const Diagnostic& first = tree.diagnostics.all()[0];
  CHECK(first.kind == Kind::kSymbolsFallTogether);
  CHECK(tree.Covered(first) == "k");
  CHECK(first.message == "'t' and 'k' fall together in this tree");
  REQUIRE(first.also.size() == 1);
  CHECK(tree.sources->text(0).substr(first.also[0].first.begin, 1) == "t");

  const Loaded omit =
      Load("tree { root > ±cons ±son ±voice }\nsegments from \"ipa\" { t d n }\nomit { ±voice in [-son] }");
  REQUIRE(omit.diagnostics.all().size() == 1);
  CHECK(omit.diagnostics.all()[0].kind == Kind::kSymbolsFallTogether);
  CHECK(omit.diagnostics.all()[0].message == "'t' and 'd' fall together once `omit` has taken its part");
  // Pairs the notation names.
  for (const char* pair : {"ə ʌ", "ʃ ɕ", "a ɐ"}) {
    const Loaded loaded = Load(std::string(kFullTree) + "segments from \"ipa\" { " + pair + " }");
    CAPTURE(pair);
    REQUIRE(loaded.diagnostics.all().size() == 1);
    CHECK(loaded.diagnostics.all()[0].kind == Kind::kSymbolsFallTogether);
  }
  LoadOrFail(std::string(kFullTree) + "segments from \"ipa\" { ɑ a }\nsegments { ɐ = ɑ [-low] }");
}

TEST_CASE("inventory: unspecified features are said once", "[unit]") {
  const auto warnings = [](const std::string& segments) {
    const Loaded loaded = LoadOrFail("tree { root > ±cons ±son ±crunchy }\n" + segments);
    std::string text;
    for (const Diagnostic& d : loaded.diagnostics.all()) {
      CHECK(d.kind == Kind::kUnspecifiedFeature);
      text += loaded.Covered(d) + " ";
    }
    return text;
  };
  CHECK(warnings("segments from \"ipa\" { t n i }") == "crunchy ");
  CHECK(warnings("segments from \"ipa\" { t n i }\nsegments { k = t [+crunchy] }") == "");
  CHECK(warnings("segments { x [+crunchy] y [-crunchy] }") == "");
}

}  // namespace
}  // namespace tiersmith::testing
