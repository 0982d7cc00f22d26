// Length in rules that iterate, by both engines. Expected forms are worked out by hand from grammar/notation.md §9: a sweep
// visits each root once, sees the results behind it and the input ahead.
#include "support/compiled_case.h"

namespace tiersmith::testing {
namespace {

Compiled CheckRows(const std::string& rule, const std::vector<DerivedRow>& rows) {
  Compiled grammar = CheckByBoth(std::string(kSmallInventory) + "class C = [-syll]\n" + rule, rows);
  CheckRecovered(grammar, rows);
  return grammar;
}

}  // namespace

TEST_CASE("length in a sweep: a long vowel is shortened after a long one", "[unit]") {
  // Rightward a vowel that was shortened no longer shortens the next: every second one goes.
  Compiled grammar =
      CheckRows("rule \"rhythm\" { where A:[+syll long] C₁ X:[+syll long]   shorten X   iterate rightward }",
                {
                    {"aː", "aː"},
                    {"tataː", "tataː"},
                    {"taːtaː", "taːta"},
                    {"taːtaːtaː", "taːtataː"},
                    {"taːtaːtaːtaː", "taːtataːta"},
                    {"taːtataːtaː", "taːtataːta"},
                    {"aːtːiːntaː", "aːtːintaː"},
                    {"taː-taː-taː", "taːtataː"},
                    {"taː#taː", "taː taː"},
                    {"taːaː", "taːaː"},
                });
  // What is short on the surface may have been long only where it stands after a long one.
  CHECK(grammar.IsCandidate("taːtaːtaː", "taːtataː"));
  CHECK(!grammar.IsCandidate("taːtaːtaː", "taːtata"));
  CHECK(!grammar.IsCandidate("tataː", "tata"));
  // Leftward the vowel before is still the input's: all but the first go.
  CheckRows("rule \"rhythm\" { where A:[+syll long] C₁ X:[+syll long]   shorten X   iterate leftward }",
            {
                {"taːtaː", "taːta"},
                {"taːtaːtaː", "taːtata"},
                {"taːtaːtaːtaː", "taːtatata"},
                {"taːtataːtaː", "taːtataːta"},
                {"aːtːiːntaː", "aːtːinta"},
            });
}

TEST_CASE("length in a sweep: a long vowel is shortened before a long one", "[unit]") {
  CheckRows("rule \"rhythm\" { where X:[+syll long] C₁ A:[+syll long]   shorten X   iterate leftward }",
            {
                {"taːtaː", "tataː"},
                {"taːtaːtaː", "taːtataː"},
                {"taːtaːtaːtaː", "tataːtataː"},
                {"aːtːiːntaː", "aːtːintaː"},
            });
  CheckRows("rule \"rhythm\" { where X:[+syll long] C₁ A:[+syll long]   shorten X   iterate rightward }",
            {
                {"taːtaːtaː", "tatataː"},
                {"taːtaːtaːtaː", "tatatataː"},
            });
}

TEST_CASE("length in a sweep: a short vowel is lengthened after or before a short one", "[unit]") {
  CheckRows("rule \"iamb\" { where A:[+syll short] C₁ X:[+syll short]   lengthen X   iterate rightward }",
            {
                {"tata", "tataː"},
                {"tatata", "tataːta"},
                {"tatatata", "tataːtataː"},
                {"taːtata", "taːtataː"},
                {"ta-ta-ta", "tataːta"},
            });
  CheckRows("rule \"iamb\" { where A:[+syll short] C₁ X:[+syll short]   lengthen X   iterate leftward }",
            {
                {"tatata", "tataːtaː"},
                {"taːtata", "taːtataː"},
            });
  CheckRows("rule \"trochee\" { where X:[+syll short] C₁ A:[+syll short]   lengthen X   iterate leftward }",
            {
                {"tatata", "tataːta"},
                {"tatatata", "taːtataːta"},
            });
}

TEST_CASE("length in a sweep: another segment, and long", "[unit]") {
  CheckRows("rule \"raise\" { where A:[+syll short] C₁ X:[+syll short +low]   set X /iː/   iterate rightward }",
            {
                {"tata", "tatiː"},
                {"tatata", "tatiːta"},
                {"tatatata", "tatiːtatiː"},
                {"tatita", "tatitiː"},
            });
  CheckRows("rule \"raise\" { where A:[+syll short] C₁ X:[+syll short +low]   set X /iː/   iterate leftward }",
            {
                {"tatata", "tatiːtiː"},
                {"tataːta", "tataːta"},
            });
}

TEST_CASE("length: the same segment short and long in one rule", "[unit]") {
  // At the end of a word i, elsewhere iː.
  const std::string clauses =
      "where X:[+syll short +low] #  set X /i/  otherwise where X:[+syll short +low] C  set X /iː/";
  for (const char* mode : {"", "  iterate rightward", "  iterate leftward"}) {
    CheckRows("rule \"raise\" { " + clauses + mode + " }", {
                                                               {"ta", "ti"},
                                                               {"tata", "tiːti"},
                                                               {"tatat", "tiːtiːt"},
                                                               {"taːta", "taːti"},
                                                           });
  }
}

}  // namespace tiersmith::testing
