// Lexicon and paradigms, checked. Expected entries are written by hand; the language is invented.
#include <unistd.h>

#include <filesystem>
#include <fstream>

#include "support/model_case.h"

namespace tiersmith::testing {
namespace {

const std::string kHead = std::string(kSmallTree) +
                          "segments from \"ipa\" { t k p m n l s i u a }\narchisegments { A = a [no back] }\n"
                          "class V = [+syll]\nclass C = [-syll]\n";

std::string Show(const Morph& morph) { return BoundarySign(morph.before) + morph.text + BoundarySign(morph.after); }

std::string Show(const LexiconEntry& entry) {
  std::ostringstream out;
  out << MorphemeKindName(entry.kind) << " " << Show(entry.form) << " '" << entry.gloss << "'";
  for (const std::string& tag : entry.tags) out << " " << tag;
  if (entry.weight != 1) out << " weight " << entry.weight;
  if (!entry.at.empty()) out << " at " << entry.at;
  for (const Suppletion& other : entry.suppletive) {
    out << " in";
    for (const std::string& tag : other.in) out << " " << tag;
    out << " " << Show(other.form);
  }
  if (!entry.id.empty()) out << " #" << entry.id;
  return out.str();
}

TEST_CASE("words: entries of the lexicon", "[unit]") {
  const Loaded loaded = LoadOrFail(kHead + R"(lexicon {
    stem /tilun/ 'rope' noun   stem /mu/ 'go' verb in PST SG /nin/ in PST /na/
    stem /pan/ noun loan noun weight 0.5
    prefix /mu-/ class1    suffix /-ki/ strong at word    clitic /=ta/   clitic /ni=/
  })");
  const std::vector<LexiconEntry>& entries = loaded.grammar->lexicon.entries;
  REQUIRE(entries.size() == 7);
  CHECK(Show(entries[0]) == "stem tilun 'rope' noun");
  CHECK(Show(entries[1]) == "stem mu 'go' verb in PST SG nin in PST na");
  CHECK(Show(entries[2]) == "stem pan '' noun loan weight 0.5");
  CHECK(Show(entries[3]) == "prefix mu- '' class1");
  CHECK(Show(entries[4]) == "suffix -ki '' strong at word");
  CHECK(Show(entries[5]) == "clitic =ta ''");
  CHECK(Show(entries[6]) == "clitic ni= ''");
}

TEST_CASE("words: the lexicon from a table", "[unit]") {
  namespace fs = std::filesystem;
  const fs::path folder = fs::temp_directory_path() / ("words-test-" + std::to_string(getpid()));
  fs::create_directories(folder);
  const auto write = [&](const std::string& name, const std::string& text) {
    std::ofstream(folder / name, std::ios::binary) << text;
    return (folder / name).string();
  };
  write("lex.tsv",
        "weight\tgloss\tid\ttags\tform\n2\trope\t17\tnoun loan\ttilun\n\tPL\t\t\t-lA\n\t\t\t\tmu-\n\tQ\t\t\t=ta\n"
        "\tknot\t\t\t⟨tinkun⟩\n");
  const std::string path = write("g.tier", kHead + "spelling { nk = kn }\nlexicon from \"lex.tsv\"\n");
  auto sources = std::make_shared<SourceMap>();
  Diagnostics diagnostics;
  const auto grammar = LoadGrammar(path, sources, diagnostics);
  REQUIRE(grammar != nullptr);
  const std::vector<LexiconEntry>& entries = grammar->lexicon.entries;
  REQUIRE(entries.size() == 5);
  CHECK(Show(entries[0]) == "stem tilun 'rope' noun loan weight 2 #17");
  CHECK(Show(entries[1]) == "suffix -lA 'PL'");
  CHECK(Show(entries[2]) == "prefix mu- ''");
  CHECK(Show(entries[3]) == "clitic =ta 'Q'");
  CHECK(Show(entries[4]) == "stem tiknun 'knot'");
  write("lex.tsv", "form\tgloss\ntilun\trope\ntiwun\tknot\n");
  Diagnostics bad;
  auto again = std::make_shared<SourceMap>();
  CHECK(LoadGrammar(path, again, bad) == nullptr);
  REQUIRE(bad.all().size() == 1);
  CHECK(bad.all()[0].kind == Kind::kUnknownCharacter);
  const SourceMap::Place place = again->Find(bad.all()[0].span);
  CHECK(place.path == (folder / "lex.tsv").string());
  CHECK(place.line == 3);
  CHECK(place.column == 3);
  fs::remove_all(folder);
}

TEST_CASE("words: a paradigm", "[unit]") {
  const Loaded loaded = LoadOrFail(kHead + R"(
    lexicon { stem /tilun/ noun }
    paradigm noun {
      stem noun
      number : SG //   PL /-lAn/
      case   : NOM //  LOC /-tA/ after C, /-sA/ after V   ABL /mu-/ at word   Q /=ta/
      PL : /-nA/
      PL LOC : /-lissA/
    })");
  REQUIRE(loaded.grammar->paradigms.size() == 1);
  const Paradigm& paradigm = loaded.grammar->paradigms[0];
  CHECK(paradigm.stems == std::vector<std::string>{"noun"});
  REQUIRE(paradigm.slots.size() == 2);
  CHECK(paradigm.slots[0].values[0].allomorphs[0].form.tokens.empty());
  const SlotValue& loc = paradigm.slots[1].values[1];
  REQUIRE(loc.allomorphs.size() == 2);
  CHECK(Show(loc.allomorphs[0].form) == "-tA");
  CHECK(loc.allomorphs[0].after.has_value());
  CHECK(paradigm.slots[1].values[2].allomorphs[0].kind == MorphemeKind::kPrefix);
  CHECK(paradigm.slots[1].values[2].allomorphs[0].at == "word");
  CHECK(paradigm.slots[1].values[3].allomorphs[0].kind == MorphemeKind::kClitic);
  REQUIRE(paradigm.overrides.size() == 2);  // more values first
  CHECK(paradigm.overrides[0].values == std::vector<int>{1, 1});
  CHECK(paradigm.overrides[1].values == std::vector<int>{1, -1});
}

TEST_CASE("words: infixes are a construct of a later release", "[unit]") {
  const Loaded loaded = Load(kHead + "paradigm verb { voice : AV /-um-/ }");
  REQUIRE(loaded.diagnostics.all().size() == 1);
  CHECK(loaded.diagnostics.all()[0].kind == Kind::kNotSupportedYet);
}

}  // namespace
}  // namespace tiersmith::testing
