// Which rule a failing row is put down to. The four cases of analyse/check.h, on a small grammar of our own; which rule
// is guilty follows from the rules themselves (leave it out by hand and read the form), not from output of the program.
#include "analyse/check.h"

#include <catch2/catch.hpp>
#include <memory>

using namespace tiersmith;

namespace {

constexpr const char* kGrammar = R"(language "Small"
tree {
  root    > ±cons ±son ±syll ±nasal ±cont ±lateral
  root    > Laryngeal > ±voice sg
  root    > Place > •Labial •Coronal •Dorsal
  Coronal > ±anterior ±distributed
  Dorsal  > ±high ±low ±back
}
segments from "ipa" { p t k b d ɡ m n h l  i ɯ æ  a = ɑ  without ±back in [-syll] }
archisegments { A = a [no back]  I = i [no back] }
allophones { ŋ }
omit { -voice in [-son] }
rule "h loss"          { where H:/h/ [-syll]   delete H }
rule "final vowel"     { where [-syll] X:[-syll] #   insert E:/I/ before X }
rule "back harmony"    { where S:[+syll back] ... T:[+syll, no back]   spread S.back to T   iterate rightward }
rule "final devoicing" { where X:[-son voice] #   delink X.voice }
rule "nasal place"     { where N:[+nasal] T:[+cons Place]   delink N.Place   spread T.Place to N }
)";

class Fixture {
 public:
  Fixture() {
    setenv("TIERSMITH_RULESETS", TIERSMITH_TEST_RULESETS, 1);
    Diagnostics diagnostics;
    grammar_ = LoadGrammarText("small.tier", kGrammar, std::make_shared<SourceMap>(), diagnostics);
    for (const Diagnostic& diagnostic : diagnostics.all()) UNSCOPED_INFO(diagnostic.message);
    REQUIRE(grammar_ != nullptr);
  }

  CheckedRow Row(const std::string& underlying, std::vector<std::string> surfaces) {
    DataRow row;
    row.underlying = underlying;
    row.surfaces = std::move(surfaces);
    result_ = Check(*grammar_, {row}, nullptr);
    return result_.rows.at(0);
  }

  std::string RuleOf(const CheckedRow& row) const {
    return row.explanation.rule < 0 ? "" : grammar_->rules[static_cast<std::size_t>(row.explanation.rule)].name;
  }

  std::unique_ptr<Grammar> grammar_;
  CheckResult result_;
};

using Case = Explanation::Case;

}  // namespace

TEST_CASE_METHOD(Fixture, "rows that pass", "[check]") {
  CHECK(Row("ni-lA", {"nilæ"}).passed);
  CHECK(Row("ni-lA", {"nila", "nilæ"}).passed);  // any one passes
  CHECK(Row("tak-lA", {"takla"}).passed);
  CHECK(Row("ni-ilA", {"niːlæ"}).passed);  // Xː against XX is not compared
  CHECK(result_.failed == 0);
}

TEST_CASE_METHOD(Fixture, "one rule, left out, gives the expected form", "[check]") {
  struct Sample {
    const char* underlying;
    const char* expected;
    const char* rule;
    const char* difference;
  };
  const Sample samples[] = {
      {"an-pa", "anpa", "nasal place", "m for n"},
      {"tad", "tad", "final devoicing", "t for d"},
      {"tah-ta", "tahta", "h loss", "no h after a"},
      {"tikl", "tikl", "final vowel", "i too many"},
  };
  for (const Sample& sample : samples) {
    CAPTURE(sample.underlying, sample.expected);
    const CheckedRow row = Row(sample.underlying, {sample.expected});
    CHECK_FALSE(row.passed);
    CHECK(row.explanation.which == Case::kOneRule);
    CHECK(RuleOf(row) == sample.rule);
    CHECK(row.explanation.difference == sample.difference);
    CHECK_FALSE(row.explanation.changes.empty());
  }
}

TEST_CASE_METHOD(Fixture, "a rule that feeds another is the one to name", "[check]") {
  // h is lost, so n stands before p and takes its place: ampa. Without "h loss" n stands before h, which has no Place
  // to give, and anhpa comes out; without "nasal place" it would be anpa.
  const CheckedRow row = Row("anhp-a", {"anhpa"});
  CHECK(row.explanation.which == Case::kOneRule);
  CHECK(RuleOf(row) == "h loss");
  CHECK(row.explanation.also.empty());
}

TEST_CASE_METHOD(Fixture, "right at one place and wrong at another: the last rule that changed the segment",
                 "[check]") {
  const CheckedRow row = Row("tak-lA-lI", {"taklali"});
  CHECK(row.explanation.which == Case::kLastChange);
  CHECK(RuleOf(row) == "back harmony");
  CHECK(row.explanation.difference == "ɯ for i");

  // Both nasals assimilate; the row has only the second one so.
  const CheckedRow nasals = Row("an-pan-ka", {"anpaŋka"});
  CHECK(nasals.explanation.which == Case::kLastChange);
  CHECK(RuleOf(nasals) == "nasal place");

  // Two h are lost, the row keeps the second.
  const CheckedRow gap = Row("tah-tah-ta", {"tatahta"});
  CHECK(gap.explanation.which == Case::kLastChange);
  CHECK(RuleOf(gap) == "h loss");
  CHECK(gap.explanation.difference == "no h after a");

  // The place is followed back through the insertion that came later (tatalɯk).
  const CheckedRow inserted = Row("tah-talk", {"tahtalk"});
  CHECK(inserted.explanation.which == Case::kLastChange);
  CHECK(RuleOf(inserted) == "h loss");
}

TEST_CASE_METHOD(Fixture, "no rule touched the segment", "[check]") {
  const CheckedRow row = Row("taha", {"tahi"});
  CHECK(row.explanation.which == Case::kNoRule);
  CHECK(row.explanation.difference == "a for i");
  CHECK(Describe(row.explanation, *grammar_).find("a rule is missing or did not apply") != std::string::npos);
}

TEST_CASE_METHOD(Fixture, "rows that cannot be read, and signs the grammar lacks", "[check]") {
  const CheckedRow row = Row("ta8a", {"ta"});
  REQUIRE(row.unreadable.has_value());
  CHECK(row.unreadable->offset == 2);
  CHECK_FALSE(row.passed);

  const CheckedRow strange = Row("ta", {"tʙ"});
  CHECK(strange.explanation.expected_note.find("U+0299") != std::string::npos);
}
