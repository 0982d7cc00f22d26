// Running machines on text: what cannot be read or written, length, boundaries, empty forms; recovery: order, how many, when to stop.
// Expected forms follow from grammar/notation.md §7, §8 and the rules written beside them; counts are worked out by hand.
#include "support/compiled_case.h"

#include <fmt/format.h>

#include <algorithm>

namespace tiersmith::testing {
namespace {

struct Row {
  const char* underlying;
  const char* surface;
};

std::vector<std::string> Forms(const Runner::Candidates& candidates) {
  std::vector<std::string> forms;
  for (const Runner::Candidate& candidate : candidates.best) forms.push_back(candidate.form);
  std::sort(forms.begin(), forms.end());
  return forms;
}

}  // namespace

TEST_CASE("runner: tags that the machine was not compiled for together", "[unit]") {
  std::string rules;  // so many tags that not all sets of them are compiled in
  for (const char tag : std::string("abcdefg"))
    rules += fmt::format("rule \"{0}\" {{ where N:/n/ #   delete N   only N in {0} }}\n", tag);
  Compiled grammar = CompileText(std::string(kSmallInventory) + rules +
                                 "lexicon { stem /pan/ a b   stem /tan/ c   stem /kan/ d e f g }");
  INFO(grammar.Messages());
  REQUIRE(grammar.runner != nullptr);
  std::string surface;
  TextError error;
  CHECK(grammar.runner->Derive("pan", &surface, &error));
  CHECK(surface == "pa");
  CHECK(grammar.runner->Derive("tan-kin", &surface, &error));  // of a suffix without tags
  CHECK(surface == "tankin");
  CHECK_FALSE(grammar.runner->Derive("pan@c", &surface, &error));
  CHECK(error.message == "/pan@stem@a@b@c/ has tags that this grammar was not compiled for together");
}

TEST_CASE("runner: text that cannot be read", "[unit]") {
  Compiled grammar = CompileText(std::string(kSmallInventory) + R"(
    allophones { ŋ }
    rule "velar" { where N:/n/ C:/k/   delink N.Place   spread C.Place to N }
  )");
  INFO(grammar.Messages());
  REQUIRE(grammar.cascade != nullptr);
  struct Bad {
    const char* form;
    Kind kind;
    std::size_t offset, length;
  };
  const Bad underlying[] = {
      {"pa☃", Kind::kUnknownCharacter, 2, 3}, {"fa", Kind::kUnknownCharacter, 0, 1}, {"aŋ", Kind::kBadForm, 1, 2},
      {"ːa", Kind::kBadForm, 0, 2},           {"p.a", Kind::kNotSupportedYet, 1, 1},
  };
  for (const Bad& bad : underlying) {
    CAPTURE(bad.form);
    std::string surface;
    bool answer = false;
    for (const bool deriving : {true, false}) {
      TextError error;
      const bool fine = deriving ? grammar.runner->Derive(bad.form, &surface, &error)
                                 : grammar.runner->IsCandidate(bad.form, "pa", &answer, &error);
      CHECK_FALSE(fine);
      CHECK(error.kind == bad.kind);
      CHECK(error.offset == bad.offset);
      CHECK(error.length == bad.length);
      CHECK(error.message != "");
      CHECK(error.remedy != "");
    }
  }
  Runner::Candidates candidates;
  TextError error;
  CHECK(grammar.runner->Recover("paŋ", 5, &candidates, &error));
  CHECK_FALSE(grammar.runner->Recover("pax", 5, &candidates, &error));
  CHECK(error.kind == Kind::kUnknownCharacter);
  CHECK(error.offset == 2);
}

TEST_CASE("runner: a letter that the machine was not compiled for", "[unit]") {
  // Three diacritics on one base are read if the grammar writes them somewhere, and compiled in if its data do.
  const std::string inventory = std::string(kSmallInventory) + R"(
    diacritics { ◌ʰ [sg] on [-son]  ◌̃ [+nasal] on [-son]  ◌̬ [+voice] on [-son] }
    rule "r" { where X:/t̬̃ʰ/ delete X }
  )";
  Compiled without = CompileText(inventory);
  INFO(without.Messages());
  REQUIRE(without.cascade != nullptr);
  TextError error;
  CHECK(without.Derive("at̬̃ʰa", &error) == "error");
  CHECK(error.kind == Kind::kBadForm);
  CHECK(error.message == "/at̬̃ʰa/ has a letter with more diacritics than this grammar was compiled for");
  CHECK(error.remedy == "write the letter in the grammar's data, so that it is compiled in");
  CHECK(without.Derive("at̃ʰa") == "at̃ʰa");
  Compiled with = CompileText(inventory + "data { /at̬̃ʰa/ [aa] }");
  REQUIRE(with.cascade != nullptr);
  CHECK(with.Derive("at̬̃ʰa") == "aa");
}

TEST_CASE("runner: a tree without a symbol at the end", "[unit]") {
  // There is no voiced k. The data do not reach it, so that is a warning, and an error where such a form comes.
  Compiled grammar = CompileText(std::string(kSmallInventory) + R"(
    rule "voice" { where [+nasal] X:[-son] set X [+voice] }
    data { /anta/ [anda] }
  )");
  INFO(grammar.Messages());
  REQUIRE(grammar.cascade != nullptr);
  CHECK(grammar.Messages().find("[no-symbol]") != std::string::npos);
  CHECK(grammar.Derive("anta") == "anda");
  TextError error;
  CHECK(grammar.Derive("anka", &error) == "error");
  CHECK(error.kind == Kind::kNoSymbol);
  CHECK(error.message == "/anka/ comes to a tree that no symbol spells: k{+voice}");
  CHECK(error.remedy != "");
}

TEST_CASE("runner: nothing left, nothing there", "[unit]") {
  Compiled grammar = CompileText(std::string(kSmallInventory) + "rule \"h loss\" { where H:/h/ delete H }");
  REQUIRE(grammar.cascade != nullptr);
  for (const Row& row :
       {Row{"", ""}, {"h", ""}, {"hːh", ""}, {"-", ""}, {"h-h", ""}, {"h#h", " "}, {"h‖", "‖"}, {"hah", "a"}}) {
    CAPTURE(row.underlying);
    CHECK(grammar.Derive(row.underlying) == row.surface);
    CHECK(grammar.IsCandidate(row.underlying, row.surface));
    CHECK(Trace(grammar.grammar(), row.underlying).problem == "");
  }
  CHECK_FALSE(grammar.IsCandidate("a", ""));
  const Runner::Candidates candidates = grammar.Recover("", 3);
  REQUIRE(candidates.best.size() == 3);
  CHECK(candidates.best[0].form == "");
  CHECK(candidates.best[0].restorations == 0);
  CHECK(candidates.best[1].restorations == 1);
  CHECK(candidates.infinite);
  CHECK(candidates.more);
}

TEST_CASE("runner: tags, in and out", "[unit]") {
  for (const char* optional : {"", " optional 0.5"}) {
    Compiled grammar = CompileText(std::string(kSmallInventory) + "lexicon { stem /tan/ loan stem /pan/ }\n" +
                                   "rule \"loans lose n\" { where X:[+nasal] # delete X only loan" + optional + " }");
    CAPTURE(optional, grammar.Messages());
    REQUIRE(grammar.runner != nullptr);
    CHECK(grammar.Derive("pan") == "pan");
    CHECK(grammar.Derive("‖pan") == "‖pan");
    if (*optional == '\0') CHECK(grammar.Derive("tan") == "ta");
    CHECK(grammar.IsCandidate("tan", "ta"));
    CHECK_FALSE(grammar.IsCandidate("pan", "pa"));
    CHECK(grammar.IsCandidate("pan@loan", "pa"));
    CHECK(grammar.Recover("pan", 1).best.at(0).form == "pan");
  }
}

TEST_CASE("runner: length and boundaries, in and out", "[unit]") {
  Compiled grammar = CompileText(std::string(kSmallInventory) + R"(
    rule "voice"  { where [+syll] X:[-son no sg] [+syll]   set X [+voice]   unless X:[Dorsal] }
    rule "copy"   { where A:[+syll] - H:/h/   delink H.root   spread A.root to H }
    rule "h loss" { where H:/h/   delete H }
    data { /aka/ [aka] }
  )");
  INFO(grammar.Messages());
  REQUIRE(grammar.cascade != nullptr);
  const Row rows[] = {
      {"ta", "ta"},      {"taːta", "taːda"}, {"taata", "taada"},  // two roots are written as two
      {"atːa", "atːa"},                                           // each of its slots has a t beside it
      {"atta", "atta"},  {"aːːta", "aːːda"}, {"a:ta", "aːda"},    // the typist's length sign
      {"at-a", "ada"},   {"at=a", "ada"},    {"at#a", "at a"},    // no match crosses a word's edge
      {"at a", "at a"},  {"at  a", "at a"},  {"at||a", "at‖a"},  {"ta-ta=ta#ta‖ta", "tadada ta‖ta"},
      {"a-ha", "aːa"},  // one root on two slots comes out long
      {"aː-ha", "aːːa"}, {"ai-ha", "aiːa"},  {"a-hːa", "aːa"},   {"aha", "aa"},
      {"a-h", "aː"},     {"aka", "aka"},     {"-a-", "a"},
  };
  for (const Row& row : rows) {
    CAPTURE(row.underlying);
    CHECK(grammar.Derive(row.underlying) == row.surface);
    CHECK(grammar.IsCandidate(row.underlying, row.surface));
    std::string text;
    CHECK(WriteForm(grammar.grammar(), Trace(grammar.grammar(), row.underlying).surface, &text, nullptr));
    CHECK(text == row.surface);
  }
  // On the surface Xː and XX are the same to the ear: either is a candidate of either spelling.
  for (const char* surface : {"taːda", "taada"}) {
    for (const char* underlying : {"taːta", "taata", "ta-ata", "tahata"}) {
      CAPTURE(surface, underlying);
      CHECK(grammar.IsCandidate(underlying, surface));
    }
    CHECK_FALSE(grammar.IsCandidate("tata", surface));     // one a
    CHECK_FALSE(grammar.IsCandidate("ta-hata", surface));  // three
  }
  // A word boundary is written, so it is not restored, and not passed over.
  CHECK_FALSE(grammar.IsCandidate("at#a", "ata"));
  CHECK_FALSE(grammar.IsCandidate("ata", "at a"));
  CHECK(grammar.IsCandidate("at#a", "at a"));
}

TEST_CASE("runner: candidates by restorations, as many as asked for", "[unit]") {
  Compiled grammar = CompileText(std::string(kSmallInventory) + R"(
    rule "nasal place" { where N:[+nasal] C:[+cons Place]   delink N.Place   spread C.Place to N }
    data { /anpa/ [ampa] }
  )");
  INFO(grammar.Messages());
  REQUIRE(grammar.cascade != nullptr);
  // m or n, and before each of four segments and at the end no boundary, - or =.
  constexpr std::size_t kAll = 2 * 3 * 3 * 3 * 3 * 3;
  for (const std::size_t best :
       {std::size_t{0}, std::size_t{1}, std::size_t{2}, std::size_t{30}, kAll - 1, kAll, kAll + 1, 4 * kAll}) {
    CAPTURE(best);
    const Runner::Candidates candidates = grammar.Recover("ampa", best);
    CHECK(candidates.best.size() == std::min(best, kAll));
    CHECK(candidates.more == (best < kAll));
    CHECK_FALSE(candidates.infinite);
    for (std::size_t i = 0; i < candidates.best.size(); ++i) {
      const Runner::Candidate& candidate = candidates.best[i];
      CAPTURE(candidate.form);
      CHECK(candidate.restorations ==
            std::count_if(candidate.form.begin(), candidate.form.end(), [](char c) { return c == '-' || c == '='; }));
      CHECK(candidate.weight == 0);
      if (i > 0) CHECK(candidates.best[i - 1].restorations <= candidate.restorations);
    }
    std::vector<std::string> forms = Forms(candidates);
    CHECK(std::adjacent_find(forms.begin(), forms.end()) == forms.end());
  }
  CHECK(Forms(grammar.Recover("ampa", 2)) == std::vector<std::string>{"ampa", "anpa"});
  // 2 forms without a boundary, 2 × 5 × 2 with one: those come before the ones with two.
  CHECK(grammar.Recover("ampa", 22).best.back().restorations == 1);
  CHECK(grammar.Recover("ampa", 23).best.back().restorations == 2);
  // No underlying form comes out so: an empty list, and nothing beyond it.
  const Runner::Candidates none = grammar.Recover("anpa", 10);
  CHECK(none.best.empty());
  CHECK_FALSE(none.more);
  CHECK_FALSE(none.infinite);
}

TEST_CASE("runner: a deleted slot is a restoration, an inserted one is none", "[unit]") {
  Compiled deleting = CompileText(std::string(kSmallInventory) + "rule \"last\" { where V:/i/ #   delete V }");
  REQUIRE(deleting.cascade != nullptr);
  for (const Runner::Candidate& candidate : deleting.Recover("pat", 1000).best) {
    CAPTURE(candidate.form);
    const auto& f = candidate.form;
    CHECK(candidate.restorations ==
          std::count_if(f.begin(), f.end(), [](char c) { return c == '-' || c == '=' || c == 'i'; }));
  }
  Compiled inserting =
      CompileText(std::string(kSmallInventory) + "rule \"break\" { where C:[-syll] # insert V:/i/ after C }");
  REQUIRE(inserting.cascade != nullptr);
  CHECK(inserting.Derive("pat") == "pati");
  CHECK(inserting.IsCandidate("pat", "pati"));
  CHECK(Forms(inserting.Recover("pati", 2)) == std::vector<std::string>{"pat", "pati"});
  CHECK(inserting.Recover("pat", 5).best.empty());
}

// The same grammar run twice, and a form after one that failed: nothing is left over from the call before.
TEST_CASE("runner: calls do not depend on each other", "[unit]") {
  Compiled grammar = CompileText(std::string(kSmallInventory) + "rule \"last\" { where V:/i/ #   delete V }");
  REQUIRE(grammar.cascade != nullptr);
  for (int round = 0; round < 2; ++round) {
    CHECK(grammar.Derive("pati") == "pat");
    TextError error;
    CHECK(grammar.Derive("pat☃", &error) == "error");
    CHECK(grammar.Derive("ta") == "ta");
    CHECK(grammar.IsCandidate("pati", "pat"));
    CHECK(Forms(grammar.Recover("pa", 2)).size() == 2);
    CHECK_FALSE(grammar.IsCandidate("pata", "pat"));
  }
}

}  // namespace tiersmith::testing
