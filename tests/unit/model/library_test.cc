// The segment library: what "ipa" says. The values are the ones fixed in the notation (grammar/notation.md §3, "Library
// values"), after the chart of the International Phonetic Association (2020 revision); every row repeats a clause of that page.
#include "model/library.h"

#include "support/model_case.h"

namespace tiersmith::testing {
namespace {

FeatureTree ContentIn(Library& library, const Tree& tree, const std::string& symbol) {
  INFO(symbol);
  const Library::Segment* segment = library.Find(symbol);
  REQUIRE(segment != nullptr);
  return library.ContentOf(*segment, tree, nullptr);
}

Library LoadIpa() {
  Library library;
  Diagnostics diagnostics;
  SourceMap sources;
  REQUIRE(library.Load("ipa", Span{}, sources, diagnostics));
  return library;
}

TEST_CASE("ipa: the values the notation fixes", "[unit]") {
  const Loaded loaded = LoadOrFail(std::string(kFullTree) + "segments from \"ipa\" { p a }");
  const Tree& tree = loaded.grammar->tree;
  Library library = LoadIpa();
  struct Row {
    const char* symbols;
    const char* bundle;
  };
  const Row rows[] = {
      // Contested values.
      {"h ɦ", "-cons -son +cont sg no Place"},
      {"ʔ", "-cons -son -cont cg no Place"},
      {"i y ɨ ʉ ɯ u ɪ ʏ ʊ e ø ɘ ɵ ɤ o ə ɛ œ ɜ ɞ ʌ ɔ æ a ɐ ɑ ɒ", "-cons +son +syll +cont Dorsal no Coronal"},
      {"y ʉ u ʏ ʊ ø ɵ o œ ɞ ɔ ɒ ɶ", "Labial round"},
      {"i ɨ ɯ ɪ e ɘ ɤ ə ɛ ɜ ʌ æ a ɐ ɑ", "no Labial no round"},
      {"a ɐ", "+low -back"},
      {"ɑ", "+low +back"},
      {"ɨ ʉ ɘ ɵ ə ɜ ɞ", "+back"},
      {"i y ɪ ʏ e ø ɛ œ æ", "-back"},
      {"l r ɾ", "+cont +son"},
      {"m ɱ n ɳ ɲ ŋ ɴ", "-cont +nasal +son"},
      {"f v s z ʃ ʒ ʂ ʐ ɕ ʑ", "+strident +cont -son"},
      {"θ ð", "-strident +cont"},
      {"k ɡ ŋ x ɣ", "Dorsal +high -low +back no Coronal"},
      {"q ɢ ɴ χ ʁ ʀ", "Dorsal -high -low +back"},
      {"c ɟ ɲ ç ʝ ʎ", "Coronal -anterior +distributed Dorsal +high -low -back"},
      {"j", "-cons Dorsal +high -low -back no Coronal"},
      {"w", "-cons Labial round Dorsal +high -low +back"},
      {"ɕ ʑ", "Coronal no Dorsal"},
      {"ʋ ɹ ɻ l ɭ", "+cons +son +cont"},
      {"j w ɥ ɰ", "-cons +son"},
      {"ʈ ɖ ɳ ʂ ʐ ɭ ɽ ɻ", "Coronal -anterior -distributed"},
      {"e o", "+tense +atr"},
      {"ɛ ɔ", "-tense -atr"},
      {"p t k f s x", "-voice"},
      {"b d ɡ v z ɣ", "+voice"},
      {"m n l r j w i a", "+voice"},
      {"ɓ ɗ ɠ", "cg +voice"},
      {"pʼ tʼ kʼ sʼ", "cg -voice"},
      {"pʰ tʰ kʰ", "sg -voice"},
      {"bʱ dʱ", "sg +voice"},
      {"f v ʋ ɱ", "Labial labiodental"},
      {"p b m", "Labial no labiodental no round"},
      {"r", "trill no tap"},
      {"ɾ", "tap no trill"},
      {"ħ ʕ", "Radical rtr"},
      // Signs of the library.
      {"kʷ", "Labial round Dorsal"},
      {"t̪ d̪ n̪", "+anterior +distributed"},
      {"sˤ", "Radical rtr Coronal +strident"},
      {"ã", "+nasal +syll"},
      {"t̪ʰ tʰ̪", "sg +distributed"},
      {"n̥", "-voice +nasal"},
      {"r̩", "+syll +cons"},
  };
  for (const Row& row : rows) {
    std::istringstream symbols(row.symbols);
    for (std::string symbol; symbols >> symbol;) {
      CAPTURE(symbol, row.bundle);
      CHECK(Missing(ContentIn(library, tree, symbol), tree, row.bundle) == "");
    }
  }
}

TEST_CASE("ipa: what every segment, obstruent, Coronal and Dorsal has", "[unit]") {
  const Loaded loaded = LoadOrFail(std::string(kFullTree) + "segments from \"ipa\" { p a }");
  const Tree& tree = loaded.grammar->tree;
  Library library = LoadIpa();
  CHECK(library.Symbols().size() > 120);
  const auto both = [&](const FeatureTree& content, std::initializer_list<const char*> names) {
    for (const char* name : names) {
      if (!Bears(content, *tree.Find(name))) return std::string(name);
    }
    return std::string();
  };
  for (const std::string& symbol : library.Symbols()) {
    CAPTURE(symbol);
    const FeatureTree content = ContentIn(library, tree, symbol);
    CHECK(both(content, {"cons", "son", "syll", "nasal", "lateral", "cont", "voice"}) == "");
    const bool obstruent = BearsValue(content, *tree.Find("son"), 0);
    CHECK(Bears(content, *tree.Find("strident")) == obstruent);
    if (Bears(content, *tree.Find("Coronal"))) CHECK(both(content, {"anterior", "distributed"}) == "");
    if (Bears(content, *tree.Find("Dorsal"))) CHECK(both(content, {"high", "low", "back"}) == "");
    // Affricates and only they are contours of the chart.
    CHECK((CountOf(content, *tree.Find("cont")) == 2) ==
          (library.Find(symbol)->name.find("affricate") != std::string::npos));
    Form form;
    form.instances.push_back({kSlotNode, 0, {}});
    const InstanceId root = AddContent(form, content);
    form.instances[0].daughters = {root};
    form.items.push_back({FormItem::Kind::kSlot, Boundary::kNone, 0});
    CHECK(Defects(form, tree) == "");
  }
}

TEST_CASE("ipa: features hang where the tree hangs them", "[unit]") {
  const auto content = [](const std::string& tree, const std::string& symbol) {
    const Loaded loaded = LoadOrFail("tree { " + tree + " }\nsegments from \"ipa\" { " + symbol + " }");
    return Show(SymbolNamed(*loaded.grammar, symbol).full, loaded.grammar->tree);
  };
  CHECK(content("root > ±cons ±back ±voice", "k") == "root[+cons +back -voice]");
  // Bare here, binary there: + is there.
  CHECK(content("root > ±cons Laryngeal\n Laryngeal > voice", "d") == "root[+cons Laryngeal[voice]]");
  CHECK(content("root > ±cons Laryngeal\n Laryngeal > voice", "t") == "root[+cons]");
  // Binary here, bare there: - on every other segment that bears its mother.
  CHECK(content("root > ±cons ±round", "i") == "root[-cons -round]");
  CHECK(content("root > ±cons Place\n Place > •Labial •Dorsal\n Labial > ±round", "p") ==
        "root[+cons Place[•Labial[-round]]]");
  CHECK(content("root > ±cons Place\n Place > •Labial •Dorsal\n Labial > ±round", "i") == "root[-cons Place[•Dorsal]]");
  CHECK(content("root > ±cons Place\n Place > •Labial •Dorsal\n Labial > ±round", "u") ==
        "root[-cons Place[•Labial[+round] •Dorsal]]");
  // A class node that nothing is left under goes, one that stands on its own stays.
  CHECK(content("root > ±cons Place\n Place > Coronal\n Coronal > crunchy", "t") == "root[+cons]");
  CHECK(content("root > ±cons ×2", "t") == "root[+cons]");
  // Ties and ligatures are one symbol; contours keep their order.
  CHECK(content("root > ±cont ×2", "t͡s") == "root[-cont +cont]");
  CHECK(content("root > ±cont ×2", "ʦ") == "root[-cont +cont]");
}

}  // namespace
}  // namespace tiersmith::testing
