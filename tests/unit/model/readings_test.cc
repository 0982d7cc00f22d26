// Kinds and tags of typed forms. Expected readings are worked out by hand from grammar/notation.md, "Words".
#include "model/readings.h"

#include "support/model_case.h"

namespace tiersmith::testing {
namespace {

const std::string kHead = std::string(kSmallTree) + "segments from \"ipa\" { t k p m n s a i u }\n";
// Asks for tags, so that forms bear them. The checker resolves such rules; the whole notation is loaded.
const std::string kAsking = "rule \"r\" { where X:[+nasal] # delete X only loan except strong only noun }\n";

Loaded LoadWhole(const std::string& text) {
  Loaded loaded;
  loaded.grammar = LoadGrammarText("t.tier", text, loaded.sources, loaded.diagnostics, Reach::kWhole);
  INFO(loaded.Messages());
  REQUIRE(loaded.grammar != nullptr);
  return loaded;
}

std::string ReadingsOf(const FormReader& reader, const std::string& typed) {
  std::vector<Reading> readings;
  TextError error;
  if (!reader.Read(typed, {}, &readings, &error))
    return "error at " + std::to_string(error.offset) + "+" + std::to_string(error.length) + ": " + error.message;
  std::string all;
  for (const Reading& reading : readings) all += (all.empty() ? "" : " or ") + Described(reading);
  return all;
}

TEST_CASE("readings: kinds and tags", "[unit]") {
  const Loaded loaded = LoadWhole(kHead + kAsking + R"(
    lexicon {
      stem /tan/ 'rope' noun   stem /sak/ loan   stem /ki/ noun
      prefix /mu-/ strong   suffix /-ki/ strong   suffix /-pa/   clitic /=ki/   clitic /ta=/ strong
      suffix /-mi/ strong   suffix /-mi/ loan   stem /ni/ 'go' noun in PST /nak/
    }
    paradigm noun { number : SG // PL /-ku/ }
  )");
  const FormReader reader(*loaded.grammar);
  struct Row {
    const char* typed;
    const char* readings;
  };
  const Row rows[] = {
      {"tan", "tan@stem@noun"},
      {"tan-pa", "tan@stem@noun-pa@suffix"},
      {"mu-tan", "mu@prefix@strong-tan@stem@noun"},
      {"tan-mu", "tan@stem@noun-mu@suffix"},  // a prefix entry stands before a boundary, and none is there
      {"mu", "mu@stem"},                      // nor here: without an entry it is the stem
      {"tan-ki", "tan@stem@noun-ki@stem@noun or tan@stem@noun-ki@suffix@strong"},  // two entries, two readings
      {"tan=ki", "tan@stem@noun=ki@stem@noun or tan@stem@noun=ki@clitic"},
      {"ta=tan", "ta@clitic@strong=tan@stem@noun"},
      {"tan-ki@suffix", "tan@stem@noun-ki@suffix@strong"},
      {"tan-ki@strong", "tan@stem@noun-ki@suffix@strong"},  // typed tags choose where they can
      {"tan-mi", "tan@stem@noun-mi@suffix@strong or tan@stem@noun-mi@suffix@loan"},
      {"tan-pa@strong", "tan@stem@noun-pa@suffix@strong"},  // and are added where no entry has them
      {"tan@loan", "tan@stem@noun@loan"},
      {"pi-na-tu", "pi@stem-na@suffix-tu@suffix"},  // no stem known: the first without an entry
      {"mu-pi-na", "mu@prefix@strong-pi@stem-na@suffix"},
      {"pi-tan-na", "pi@prefix-tan@stem@noun-na@suffix"},  // beside a stem known by entry
      {"pi-√na-tu", "pi@prefix-na@stem-tu@suffix"},        // or by √
      {"tan-sak-pi", "tan@stem@noun-sak@stem@loan-pi@suffix"},
      {"tan-pi-sak", "tan@stem@noun-pi@suffix-sak@stem@loan"},        // after any stem
      {"pi-na tan-na", "pi@stem-na@suffix#tan@stem@noun-na@suffix"},  // word by word
      {"nak-ku", "nak@stem@noun-ku@suffix@PL"},                       // a stem's other form, a value of a paradigm
      {"tan@\"loan\"", "tan@stem@noun@loan"},
      {"tan@lona", "error at 3+5: no rule asks for the tag 'lona', and no entry has it"},
      {"@loan", "error at 0+1: no morpheme stands before this tag"},
      {"tan@", "error at 3+1: a tag has no name here"},
      {"ta@noun√n", "error at 7+3: √ stands inside a morpheme"},
      {"ta@\"noun\"n", "error at 9+1: a symbol stands behind the tag of its morpheme"},
      {"ta√n", "error at 2+3: √ stands inside a morpheme"},
  };
  for (const Row& row : rows) {
    CAPTURE(row.typed);
    CHECK(ReadingsOf(reader, row.typed) == row.readings);
  }
}

TEST_CASE("readings: tags reach the boundary that opens the morpheme", "[unit]") {
  const Loaded loaded = LoadWhole(kHead + kAsking + "lexicon { stem /tan/ noun suffix /-ki/ strong loan }");
  const Grammar& grammar = *loaded.grammar;
  REQUIRE(grammar.tags == std::vector<std::string>{"stem", "prefix", "suffix", "clitic", "loan", "strong", "noun"});
  const FormReader reader(grammar);
  std::vector<Reading> readings;
  TextError error;
  const auto bits = [&](const std::string& typed, std::vector<std::string> stem_tags = {}) {
    REQUIRE(reader.Read(typed, stem_tags, &readings, &error));
    std::string all;
    for (const FormItem& item : reader.FormOf(readings.at(0)).items) {
      if (item.kind == FormItem::Kind::kBoundary) all += BoundarySign(item.boundary) + std::to_string(item.tags) + " ";
    }
    return all;
  };
  CHECK(bits("tan-ki") == "‖65 -52 ");            // stem noun; suffix loan strong
  CHECK(bits("tan-ki", {"loan"}) == "‖81 -52 ");  // tags of the row are those of its stem
  CHECK(bits("tan # ki") == "‖65 #0 #0 #1 ");     // of a run, the last opens
  CHECK(bits("‖tan") == "‖0 ‖65 ");
  std::string text;
  CHECK(WriteForm(grammar, reader.FormOf(readings[0]), &text, nullptr));
  CHECK(text == "‖tan");  // the ‖ that is there for its tags is not written, one that was typed is
  REQUIRE(reader.Read("tan-ki", {}, &readings, &error));
  CHECK(DescribeForm(grammar, reader.FormOf(readings[0])) == "tan-ki");
  CHECK(Defects(reader.FormOf(readings[0]), grammar.tree).empty());
}

TEST_CASE("readings: where no rule asks for tags a form has one reading, and is as it was", "[unit]") {
  const Loaded loaded = LoadOrFail(kHead + "lexicon { stem /tan/ noun stem /ki/ suffix /-ki/ strong }");
  const FormReader reader(*loaded.grammar);
  std::vector<Reading> readings;
  TextError error;
  REQUIRE(reader.Read("tan-ki", {}, &readings, &error));
  REQUIRE(readings.size() == 1);
  const Form form = reader.FormOf(readings[0]);
  CHECK(form.items.size() == 6);
  CHECK(form.items[3].tags == 0);
}

TEST_CASE("tags: one that only typed forms would bear is a warning", "[unit]") {
  const Loaded loaded =
      LoadWhole(kHead + "rule \"r\" { where X:[+nasal] # delete X only laon }\n" + "lexicon { stem /tan/ loan }");
  REQUIRE(loaded.diagnostics.all().size() == 1);
  const Diagnostic& d = loaded.diagnostics.all()[0];
  CHECK(d.kind == Kind::kUnknownTag);
  CHECK(d.severity == Severity::kWarning);
  CHECK(loaded.Covered(d) == "only laon");
  CHECK(d.remedy.find("'loan'") != std::string::npos);
}

}  // namespace
}  // namespace tiersmith::testing
