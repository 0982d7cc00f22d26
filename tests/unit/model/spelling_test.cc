// The spelling, read and written. Expected forms are worked out by hand; the spelling is an invented one.
#include "model/speller.h"
#include "support/model_case.h"

namespace tiersmith::testing {
namespace {

const std::string kHead = std::string(kSmallTree) +
                          "segments from \"ipa\" { t k ɡ p m n ŋ s i u a }\n"
                          "class V = [+syll]\nclass C = [-syll]\n";

std::string ReadAll(const Speller& speller, const std::string& letters, Reader::Side side) {
  std::vector<std::string> readings;
  TextError error;
  if (!speller.Read(letters, side, &readings, &error))
    return "error at " + std::to_string(error.offset) + "+" + std::to_string(error.length) + ": " + error.message;
  std::string all;
  for (const std::string& reading : readings) all += (all.empty() ? "" : " or ") + reading;
  return all;
}

TEST_CASE("spelling: reading and writing", "[unit]") {
  const Loaded loaded = LoadOrFail(kHead + R"(
    spelling { ng = ŋ; n = ŋ before /k/; c = k; aa = aː; D < t; pp > pː; x = ks; n'g = nɡ; + < -; h < nothing
               y = i between V; "'" = = }
  )");
  const Speller speller(*loaded.grammar);
  struct Row {
    const char* letters;
    const char* symbols;
  };
  const Row reading[] = {
      {"tana", "tana"},
      {"tinga", "tiŋa"},            // the longest letters first
      {"tin'ga", "tinɡa"},          // unless a line parts the two
      {"tanca", "tanka or taŋka"},  // both are written so
      {"tansa", "tansa"},           // no ŋ here: the line is for before /k/
      {"taana", "taːna"},
      {"taaana", "taːana"},
      {"Dana", "tana"},    // read only
      {"tappa", "tappa"},  // written only: pp is read as two
      {"ta+na-sa", "ta-na-sa"},
      {"hahna", "ana"},
      {"aya", "aia"},
      {"tan'na", "tan=na"},
      {"tan na", "tan#na"},
      {"taŋa", "taŋa"},  // a symbol stands for itself, if nothing better is read
      {"tana@noun-na", "error at 4+1: a tag stands in underlying forms that are typed or listed as data"},
      {"tya", "error at 1+1: 'y' stands where no line of `spelling` has it"},
      {"taqa", "error at 2+1: 'q' (U+0071, LATIN SMALL LETTER Q) is in no symbol of the grammar"},
  };
  for (const Row& row : reading) {
    CAPTURE(row.letters);
    CHECK(ReadAll(speller, row.letters, Reader::Side::kSurface) == row.symbols);
  }
  CHECK(ReadAll(speller, "tangaa@noun-√cin", Reader::Side::kUnderlying) == "taŋaː@noun-√kin");
  const Row writing[] = {
      {"tana", "tana"},     {"tiŋa", "tinga"},    {"taŋka", "tanca"},      {"tanka", "tanca"},  {"taːna", "taana"},
      {"tapːa", "tappa"},   {"tappa", "tappa"},   {"ta-na=sa", "tana'sa"}, {"aia", "aya"},      {"tia", "tia"},
      {"tan na", "tan na"}, {"tan#na", "tan na"}, {"sːa", "sːa"},          {"tinɡa", "tin'ga"}, {"∅", "∅"},
  };
  for (const Row& row : writing) {
    CAPTURE(row.symbols);
    CHECK(speller.Write(row.letters, Reader::Side::kSurface) == row.symbols);
  }
}

TEST_CASE("spelling: letters that stand for nothing are written where their context holds", "[unit]") {
  const Loaded loaded = LoadOrFail(kHead + "spelling { h = nothing between V; \"\" > ŋ before /k/ }");
  const Speller speller(*loaded.grammar);
  CHECK(speller.Write("taia", Reader::Side::kSurface) == "tahiha");
  CHECK(speller.Write("taŋka", Reader::Side::kSurface) == "taka");
  CHECK(ReadAll(speller, "tahiha", Reader::Side::kSurface) == "taia");
  CHECK(ReadAll(speller, "hta", Reader::Side::kSurface) ==
        "error at 0+1: 'h' stands where no line of `spelling` has it");
}

TEST_CASE("spelling: a symbol that is always written otherwise gives way to a line", "[unit]") {
  // As where y is the letter of j and ü that of y.
  const Loaded loaded = LoadOrFail(kHead + "spelling { i = u; o = i; p = m after V; k > ɡ; s = k before V; e = s }");
  const Speller speller(*loaded.grammar);
  CHECK(ReadAll(speller, "titititititi", Reader::Side::kSurface) == "tutututututu");  // one reading, not 2^6
  CHECK(ReadAll(speller, "ton", Reader::Side::kSurface) == "tin");
  CHECK(ReadAll(speller, "pap", Reader::Side::kSurface) == "pap or pam");  // p is written p too
  CHECK(ReadAll(speller, "ka", Reader::Side::kSurface) == "ka");           // the line is not read
  CHECK(ReadAll(speller, "sa", Reader::Side::kSurface) == "ka");           // s would be written e
  CHECK(ReadAll(speller, "as", Reader::Side::kSurface) == "as");           // nothing else can be read
  CHECK(speller.Write("tutin", Reader::Side::kSurface) == "titon");
}

TEST_CASE("spelling: length doubled holds for symbols too", "[unit]") {
  const Loaded loaded = LoadOrFail(kHead + "length doubled in C\nspelling { c = k; ng = ŋ }");
  const Grammar& grammar = *loaded.grammar;
  const Reader reader(grammar);
  std::vector<Token> tokens;
  TextError error;
  REQUIRE(reader.Read("attasː", Reader::Side::kSurface, &tokens, &error));
  const Form form = reader.FormOf(tokens, Reader::Side::kSurface);
  CHECK(RootOf(form, form.items[1]) == RootOf(form, form.items[2]));
  std::string text;
  REQUIRE(WriteForm(grammar, form, &text, nullptr));
  CHECK(text == "attass");
  CHECK(TextOf(grammar, tokens) == "attass");
  REQUIRE(reader.Read("aa-t-t", Reader::Side::kUnderlying, &tokens, &error));
  const Form apart = reader.FormOf(tokens, Reader::Side::kUnderlying);
  CHECK(RootOf(apart, apart.items[0]) != RootOf(apart, apart.items[1]));  // not in C
  CHECK(RootOf(apart, apart.items[3]) != RootOf(apart, apart.items[5]));  // a boundary stands between
  const Speller speller(grammar);
  CHECK(speller.Write("akːaŋːa", Reader::Side::kSurface) == "accangnga");
  CHECK(ReadAll(speller, "acca", Reader::Side::kSurface) == "akka");
}

TEST_CASE("spelling: a line is read where all it means may stand", "[unit]") {
  const Loaded loaded = LoadOrFail(
      std::string(kSmallTree) + "segments from \"ipa\" { t k n a }\nallophones { ŋ }\nspelling { n = ŋ before /k/ }");
  const Speller speller(*loaded.grammar);
  CHECK(ReadAll(speller, "tanka", Reader::Side::kUnderlying) == "tanka");
  CHECK(ReadAll(speller, "tanka", Reader::Side::kSurface) == "tanka or taŋka");
}

TEST_CASE("spelling: rows of data come to symbols", "[unit]") {
  const Loaded loaded = LoadOrFail(kHead + R"(
    spelling { ng = ŋ; n = ŋ before /k/ }
    data { ⟨tanka⟩ [tanga] ~ [nka] * [ga] 'x' }
  )");
  REQUIRE(loaded.grammar->data.size() == 1);
  const DataRow& row = loaded.grammar->data[0];
  CHECK(row.underlying == "tanka");
  CHECK(row.also == std::vector<std::string>{"taŋka"});
  CHECK(row.surfaces == std::vector<std::string>{"taŋa", "nka", "ŋka"});
  CHECK(row.starred == std::vector<std::string>{"ɡa"});
  CHECK(row.surface_spans.size() == 3);
}

}  // namespace
}  // namespace tiersmith::testing
