// Reading and writing forms (grammar/notation.md §7: symbols are read longest first), comparison, and what is
// said of text that cannot be read. Equated signs are those the notation lists; code points and names are Unicode's.
#include "model/text.h"

#include "model/character_names.h"
#include "model/normal_text.h"
#include "support/model_case.h"

namespace tiersmith::testing {
namespace {

constexpr Reader::Side kUnderlying = Reader::Side::kUnderlying;
constexpr Reader::Side kSurface = Reader::Side::kSurface;

const char* const kGrammar = R"(
segments from "ipa" { p t k ɡ b d s ʃ t͡s t͡ʃ ç n r i u a ø }
segments { tʰ = tʰ  t̪ʰ = tʰ [+distributed]  ɐ = a [-low] }
archisegments { N = n [no Place]  A = a [no back] }
allophones { ŋ }
diacritics { ◌̃ [+nasal] on [+syll]  ◌ʷ [Labial round] on [-syll]  ◌ˤ [rtr] }
)";

// "p a ː - N": symbols by their text, a space after each token.
std::string Tokens(const Grammar& g, const Reader& reader, const std::string& text, Reader::Side side) {
  std::vector<Token> tokens;
  TextError error;
  if (!reader.Read(text, side, &tokens, &error)) {
    return "error at " + std::to_string(error.offset) + "+" + std::to_string(error.length) + ": " + error.message;
  }
  std::string result;
  for (const Token& token : tokens) {
    if (!result.empty()) result += ' ';
    switch (token.kind) {
      case Token::Kind::kSymbol:
        result += g.inventory.symbols[static_cast<std::size_t>(token.symbol)].text;
        break;
      case Token::Kind::kLength:
        result += "ː";
        break;
      case Token::Kind::kBoundary:
        result += token.boundary == Boundary::kMorpheme ? "-"
                  : token.boundary == Boundary::kClitic ? "="
                  : token.boundary == Boundary::kWord   ? "#"
                                                        : "‖";
        break;
    }
  }
  return result;
}

TEST_CASE("text: normalisation", "[unit]") {
  struct Row {
    const char* typed;
    const char32_t* normal;
  };
  const Row rows[] = {
      {"g", U"\u0261"},
      {"a:", U"a\u02D0"},
      {"t'", U"t\u02BC"},
      {"t\u2019", U"t\u02BC"},
      {"t\u035Cs", U"t\u0361s"},
      {"\u02A6", U"t\u0361s"},
      {"\u02A7", U"t\u0361\u0283"},
      {"\u02A4", U"d\u0361\u0292"},
      {"\u00E3", U"a\u0303"},  // one code point or two
      {"a\u0303", U"a\u0303"},
      {"\u00E7", U"c\u0327"},
      {"n\u0303\u032A", U"n\u032A\u0303"},  // canonical order: below (220) before above (230)
      {"\u1E69", U"s\u0323\u0307"},
      {"\U0001D15E", U"\U0001D157\U0001D165"},
      {"", U""},
  };
  for (const Row& row : rows) {
    CAPTURE(row.typed);
    CHECK(Normalise(row.typed) == row.normal);
  }
}

TEST_CASE("text: reading", "[unit]") {
  const Loaded loaded = LoadOrFail(std::string(kFullTree) + kGrammar);
  const Grammar& g = *loaded.grammar;
  const Reader reader(g);
  struct Row {
    const char* text;
    Reader::Side side;
    const char* tokens;
  };
  const Row rows[] = {
      {"pata", kUnderlying, "p a t a"},
      {"pat-a=ta#pa", kUnderlying, "p a t - a = t a # p a"},
      {"pa  ta", kSurface, "p a # t a"},
      {"pa||ta‖", kUnderlying, "p a ‖ t a ‖"},
      {"t͡ʃʃ", kUnderlying, "t͡ʃ ʃ"},  // longest first
      {"tʃ", kUnderlying, "t ʃ"},    // no tie: two symbols
      {"t͜sʦ", kUnderlying, "t͡s t͡s"},
      {"ga", kUnderlying, "ɡ a"},
      {"ta:", kUnderlying, "t a ː"},
      {"aːː", kUnderlying, "a ː ː"},
      {"a-NA", kUnderlying, "a - N A"},
      {"aŋa", kSurface, "a ŋ a"},
      {"\u00E3", kUnderlying, "ã"},
      {"ã", kUnderlying, "ã"},
      {"ãː", kUnderlying, "ã ː"},
      {"aː\u0303", kUnderlying, "ã ː"},    // marks may stand behind the length sign
      {"tˤʷtʷˤ", kUnderlying, "tʷˤ tʷˤ"},  // a set
      {"t̪ʰtʰ̪", kUnderlying, "t̪ʰ t̪ʰ"},
      {"ça", kUnderlying, "ç a"},  // c with cedilla, decomposed or not
      {"", kUnderlying, ""},
      // What cannot be read.
      {"paŋa", kUnderlying, "error at 2+2: 'ŋ' does not stand in underlying forms: it is surface only"},
      {"paN", kSurface, "error at 2+1: 'N' does not stand in surface forms: it is an archisegment"},
      {"paNʷ", kSurface, "error at 2+3: 'Nʷ' does not stand in surface forms: it is an archisegment"},
      {"ːpa", kUnderlying, "error at 0+2: ː lengthens nothing here"},
      {"pa-:", kUnderlying, "error at 3+1: ː lengthens nothing here"},
      {"paɛ", kUnderlying, "error at 2+2: 'ɛ' (U+025B, LATIN SMALL LETTER OPEN E) is in no symbol of the grammar"},
      {"pa☃", kUnderlying, "error at 2+3: '☃' (U+2603, sign) is in no symbol of the grammar"},
      {"pa\u0300", kUnderlying, "error at 2+2: '◌̀' (U+0300, COMBINING GRAVE ACCENT) is in no symbol of the grammar"},
      {"t\u0303", kUnderlying, "error at 1+2: 't̃' is no symbol: ◌̃ may not stand on that base"},
      {"ˈpa", kSurface, "error at 0+2: marks of stress and syllables (ˈ ˌ .) are not read by this release"},
      {"pa{H}", kUnderlying, "error at 2+1: floating instances {..} are not read by this release"},
      {"pa@noun", kUnderlying, "error at 2+1: a tag stands in underlying forms that are typed or listed as data"},
      {"p|a", kUnderlying, "error at 1+1: '|' (U+007C, VERTICAL LINE) is in no symbol of the grammar"},
  };
  for (const Row& row : rows) {
    CAPTURE(row.text);
    CHECK(Tokens(g, reader, row.text, row.side) == row.tokens);
  }
}

TEST_CASE("text: the nearest symbol is named", "[unit]") {
  const Loaded loaded =
      LoadOrFail(std::string(kFullTree) + "segments from \"ipa\" { p t k n s i u a ɡ ø }\nsegments { o = o [-tense] }");
  const Reader reader(*loaded.grammar);
  struct Row {
    const char* text;
    const char* nearest;
  };
  const Row rows[] = {
      {"T", "t"},
      {"ŧ", "t"},
      {"ɳ", "n"},
      {"ö", ""},
      {"Ø", "ø"},
      {"☃", ""},
      // By features (the chart's descriptions): the only nasal; the other bilabial stop; the other open vowel.
      {"ŋ", "n"},
      {"m", "n"},
      {"b", "p"},
      {"ɑ", "a"},
      {"ʃ", "s"},
      {"c", "k"}};
  for (const Row& row : rows) {
    std::vector<Token> tokens;
    TextError error;
    CAPTURE(row.text);
    REQUIRE_FALSE(reader.Read(row.text, kUnderlying, &tokens, &error));
    CHECK(error.kind == Kind::kUnknownCharacter);
    const std::string wanted = row.nearest[0] == '\0' ? "" : "did you mean '" + std::string(row.nearest) + "'?";
    CHECK((wanted.empty() ? error.remedy.find("did you mean") == std::string::npos : error.remedy.find(wanted) == 0));
  }
}

TEST_CASE("text: more diacritics than two are refused by name", "[unit]") {
  const Loaded loaded = LoadOrFail(
      std::string(kFullTree) + "segments from \"ipa\" { t a }\ndiacritics { ◌ʷ [Labial round]  ◌ˤ [rtr]  ◌ʰ [sg] }");
  const Reader reader(*loaded.grammar);
  CHECK(Tokens(*loaded.grammar, reader, "tʷˤ", kUnderlying) == "tʷˤ");
  CHECK(Tokens(*loaded.grammar, reader, "tʰʷˤ", kUnderlying) ==
        "error at 5+2: 'tʰʷˤ' carries more than two diacritics");
}

TEST_CASE("text: forms", "[unit]") {
  const Loaded loaded =
      LoadOrFail(std::string(kSmallTree) +
                 "segments from \"ipa\" { t a }\narchisegments { A = a [no back] }\nomit { -voice in [-son] }");
  const Grammar& g = *loaded.grammar;
  const Reader reader(g);
  const auto form = [&](const char* text, Reader::Side side) {
    std::vector<Token> tokens;
    TextError error;
    REQUIRE(reader.Read(text, side, &tokens, &error));
    const Form made = reader.FormOf(tokens, side);
    CHECK(Defects(made, g.tree) == "");
    return made;
  };
  CHECK(Dump(form("t-A", kUnderlying), g.tree) ==
        "s1[root[-son -syll -nasal -cont Place[•Coronal]]] - "
        "s2[root[+son +syll -nasal +cont Laryngeal[+voice] Place[•Dorsal[-high]]]]");
  CHECK(Dump(form("tː", kSurface), g.tree) ==
        "s1[root1[-son -syll -nasal -cont Laryngeal[-voice] Place[•Coronal]]] s2[root1]");
  CHECK(Canonical(form("taːt", kUnderlying)) == form("taːt", kUnderlying));

  // Writing: boundaries - and = are not written, # is a space; traces write them all.
  const auto written = [&](const char* text) {
    std::string result;
    return WriteForm(g, form(text, kUnderlying), &result, nullptr) ? result : std::string("-");
  };
  CHECK(written("ta-ta=ta#ta‖ta") == "tatata ta‖ta");
  CHECK(written("taːttː") == "taːttː");
  CHECK(DescribeForm(g, form("ta-ta=ta#ta‖tA", kUnderlying)) == "ta-ta=ta#ta‖tA");
  std::string text;
  FeatureTree no_symbol;
  CHECK_FALSE(WriteForm(g, form("tA", kUnderlying), &text, &no_symbol));
  CHECK(no_symbol == SymbolNamed(g, "A").full);
  // Empty slots are not written; one root over a boundary is one long segment, for - is not written.
  Form geminate = form("t-t", kUnderlying);
  geminate.instances[geminate.items[2].instance].daughters = geminate.instances[geminate.items[0].instance].daughters;
  CHECK(WriteForm(g, geminate, &text, nullptr));
  CHECK(text == "tː");
  CHECK(DescribeForm(g, geminate) == "t-t");
  geminate.instances[geminate.items[2].instance].daughters.clear();
  CHECK(WriteForm(g, geminate, &text, nullptr));
  CHECK(text == "t");
}

TEST_CASE("text: comparison of surface forms", "[unit]") {
  struct Row {
    const char* a;
    const char* b;
    bool same;
  };
  const Row rows[] = {
      {"atːa", "atta", true},  {"at:a", "atta", true},  {"aːt", "aat", true},  {"ata", "atta", false},
      {"ã", "\u00E3", true},   {"gata", "ɡata", true},  {"t͡ʃː", "t͡ʃt͡ʃ", true}, {"t͡ʃː", "t͡ʃʃ", false},
      {"tʰː", "tʰtʰ", true},   {"t̪ʰ", "tʰ̪", true},      {"aː̃", "ãː", true},    {"ãã", "ãː", true},
      {"pa-ta", "pata", true}, {"pa ta", "pata", true}, {"ⁿdː", "ⁿdⁿd", true}, {"tʼ", "t'", true},
      {"ʦa", "t͜sa", true},     {"pa", "ba", false},     {"paː", "pa", false},  {"", "", true},
  };
  for (const Row& row : rows) {
    CAPTURE(row.a, row.b);
    CHECK((ComparisonKey(row.a) == ComparisonKey(row.b)) == row.same);
  }
}

TEST_CASE("text: names of characters", "[unit]") {
  CHECK(CharacterName(U'\u014B') == "LATIN SMALL LETTER ENG");
  CHECK(CharacterName(U'\u0361') == "COMBINING DOUBLE INVERTED BREVE");
  CHECK(CharacterName(U'\u02B0') == "MODIFIER LETTER SMALL H");
  CHECK(CharacterName(U'\u05D0') == "letter");  // outside the blocks of transcription: the category
  CHECK(CharacterName(0x7) == "invisible control character");
}

}  // namespace
}  // namespace tiersmith::testing
