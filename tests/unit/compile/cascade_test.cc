// Compiling grammars: sizes, budgets and cuts, and what compiling refuses, with the shortest form that shows why.
// Sizes are worked out by hand where the machine is small enough; shortest forms are checked against the interpreter.
#include "compile/cascade_data.h"

#include <functional>
#include <set>

#include "support/compiled_case.h"

namespace tiersmith::testing {
namespace {

bool SameStats(const std::vector<SegmentStats>& a, const std::vector<SegmentStats>& b) {
  if (a.size() != b.size()) return false;
  for (std::size_t i = 0; i < a.size(); ++i) {
    const bool same = a[i].rules == b[i].rules && a[i].states == b[i].states && a[i].arcs == b[i].arcs &&
                      a[i].classes == b[i].classes && a[i].letters == b[i].letters && a[i].bytes == b[i].bytes;
    if (!same) return false;
  }
  return true;
}

// Every form of exactly `length` letters over the grammar's symbols, ː and the boundaries, as it would be typed.
void ForEachForm(const std::vector<std::string>& letters, std::size_t length,
                 const std::function<void(const std::string&)>& visit) {
  std::vector<std::size_t> at(length, 0);
  while (true) {
    std::string form;
    for (const std::size_t i : at) form += letters[i];
    visit(form);
    std::size_t k = 0;
    while (k < length && ++at[k] == letters.size()) at[k++] = 0;
    if (k == length) return;
  }
}

const Diagnostic* Find(const Diagnostics& diagnostics, Kind kind) {
  for (const Diagnostic& d : diagnostics.all()) {
    if (d.kind == kind) return &d;
  }
  return nullptr;
}

// The form in a message: what stands between the first two slashes.
std::string FormIn(const std::string& message) {
  const std::size_t begin = message.find('/') + 1;
  return message.substr(begin, message.find('/', begin) - begin);
}

}  // namespace

TEST_CASE("cascade: the size of a machine worked out by hand", "[unit]") {
  // Obstruents become voiced, wherever they stand. What can be seen of a letter is ±son and ±voice: p t k; b d ɡ; m n a i. From
  // the open state each of the three goes on short, or long to a state of its own that waits for the other half, from which it
  // comes back or stays; four boundaries stay open.
  Compiled grammar = CompileText(R"(
    tree {
      root   > ±cons ±son ±syll ±nasal ±cont
      root   > Laryngeal > ±voice
      root   > Place > •Labial •Coronal •Dorsal
      Dorsal > ±high ±low
    }
    segments from "ipa" { p t k b d ɡ m n a i }
    rule "voice" { where X:[-son] set X [+voice] }
  )");
  INFO(grammar.Messages());
  REQUIRE(grammar.cascade != nullptr);
  const std::vector<SegmentStats> stats = grammar.cascade->Stats();
  REQUIRE(stats.size() == 1);
  CHECK(stats[0].states == 1 + 3);
  CHECK(stats[0].arcs == 3 * 4 + 4);
  CHECK(stats[0].classes == 3 * 2 + 4);
  CHECK(stats[0].letters == 10 * 2 + 4);
  CHECK(stats[0].rules == std::vector<std::string>{"voice"});
  const Segment& segment = grammar.cascade->data().segments[0];
  CHECK(segment.machine.arcs.size() == stats[0].states);
  CHECK(segment.machine.ArcCount() == stats[0].arcs);
  // A nasal takes the voice of what follows: no rule sees place, so the number of consonants makes no difference.
  const auto sizes = [](const std::string& symbols) {
    Compiled compiled = CompileText(
        "tree {\nroot > ±son ±syll ±nasal ±cont ±cons\nroot > Laryngeal > ±voice\n"
        "root > Place > •Labial •Coronal •Dorsal\nCoronal > ±anterior\nDorsal > ±back ±high ±low\n}\n"
        "segments from \"ipa\" { " +
        symbols +
        " }\n"
        "rule \"voice\" { where N:[+nasal] X:[-son] set X [+voice] }");
    REQUIRE(compiled.cascade != nullptr);
    const SegmentStats s = compiled.cascade->Stats()[0];
    return std::vector<std::size_t>{s.states, s.arcs, s.classes};
  };
  CHECK(sizes("p b m a") == sizes("p t k b d ɡ m n ŋ a i u"));
}

TEST_CASE("cascade: rulesets have the same size every time", "[unit]") {
  // Letters: each symbol short and long, and four boundaries; the numbers of symbols are counted in the files.
  const std::vector<std::pair<const char*, std::size_t>> rulesets = {{"spanish-nasal-place", 23 + 3},
                                                                     {"sanskrit-nati", 35 + 3},
                                                                     {"turkish-vowel-harmony", 28 + 2},
                                                                     {"finnish-vowel-harmony", 21 + 3},
                                                                     {"english-plural", 35 + 2}};
  for (const auto& [name, symbols] : rulesets) {
    CAPTURE(name);
    Compiled one = CompileRuleset(name), two = CompileRuleset(name);
    INFO(one.Messages());
    REQUIRE(one.cascade != nullptr);
    REQUIRE(two.cascade != nullptr);
    const std::vector<SegmentStats> stats = one.cascade->Stats();
    CHECK(SameStats(stats, two.cascade->Stats()));
    CHECK(one.diagnostics.all().size() == two.diagnostics.all().size());
    CHECK(stats.size() == 1);
    CHECK(stats[0].rules.size() == one.grammar().rules.size());
    CHECK(stats[0].letters == symbols * 2 + 4);
  }
}

TEST_CASE("cascade: budgets name the rule", "[unit]") {
  const auto limited = [](std::size_t states, std::size_t arcs, std::size_t side_states) {
    Limits limits;
    limits.states = states;
    limits.arcs = arcs;
    limits.side_states = side_states;
    return limits;
  };
  const std::string rule = "rule \"easy\" { where [-syll] X:[-son] [+syll] # set X [-voice]";
  // Which of the slots before are voiced must be kept in mind for eight of them.
  const std::string wide = "rule \"easy\" { where [+voice] [] [] [] [] [] [] [] X:[-son] set X [-voice] }";
  const std::pair<Limits, std::string> rows[] = {{limited(2, 1'000'000, 4'096), rule + " }"},
                                                 {limited(20'000, 3, 4'096), rule + " }"},
                                                 {limited(20'000, 1'000'000, 1), wide}};
  for (const auto& [limits, text] : rows) {
    CAPTURE(limits.states, limits.arcs, limits.side_states);
    Compiled compiled = CompileText(kSmallInventory + text, limits);
    INFO(compiled.Messages());
    CHECK(compiled.cascade == nullptr);
    REQUIRE(compiled.diagnostics.all().size() == 1);
    const Diagnostic& d = compiled.diagnostics.all()[0];
    CHECK(d.kind == Kind::kLimit);
    CHECK(d.severity == Severity::kError);
    CHECK(d.message.find("\"easy\"") != std::string::npos);
    CHECK(d.remedy != "");
    CHECK(compiled.loaded.Covered(d) == text);
    CHECK(CompileText(kSmallInventory + text).cascade != nullptr);  // with the usual budgets it compiles
  }
}

// A pattern that is too large is refused, at once, and not taken for one that never matches.
TEST_CASE("cascade: patterns past every budget are refused", "[unit]") {
  const char* rules[] = {
      "rule \"q\" { where X:[-syll] ((((([-syll]₀⁹⁹)₀⁹⁹)₀⁹⁹)₀⁹⁹)₀⁹⁹) Y:[+syll] delete X }",
      "rule \"q\" { where X:[-son -voice] (([-son]₀⁹⁹ [+son]₀⁹⁹)₀³⁰ [-son])₀⁹⁹ [+nasal] set X [+voice] }",
      "rule \"q\" { where X:[-syll] unless X ((((([-syll]₀⁹⁹)₀⁹⁹)₀⁹⁹)₀⁹⁹)₀⁹⁹) [+syll] delete X }",
  };
  for (const char* rule : rules) {
    CAPTURE(rule);
    Compiled compiled = CompileText(std::string(kSmallInventory) + rule);
    CHECK(compiled.cascade == nullptr);
    REQUIRE(compiled.diagnostics.all().size() == 1);
    CHECK(compiled.diagnostics.all()[0].kind == Kind::kLimit);
  }
}

// Whatever stands between, the form shown is an underlying one, and what is said of it is the same.
TEST_CASE("cascade: messages past a cut show underlying forms", "[unit]") {
  const std::string before =
      "rule \"one\" { where X:/t/ [+syll] set X [-voice +nasal] } rule \"two\" { where X:/k/ # delete X } ";
  const std::string rules[] = {
      "rule \"r\" { where L:[-son] N:/n/ R:[-son] delink N.Place spread L.Place to N spread R.Place to N }",
      "rule \"three\" { where N:[+nasal] C:[+cons Place] delink N.Place spread C.Place to N } "
      "rule \"r\" { where X:[-son Dorsal] set X [Labial] iterate rightward }",
      "rule \"r\" { where X:[+nasal] set X [-voice] }",
  };
  Limits each;
  each.joined_states = 1;
  for (const std::string& rule : rules) {
    CAPTURE(rule);
    const Compiled cut = CompileText(kSmallInventory + before + rule, each);
    const Diagnostics& whole = CompileText(kSmallInventory + before + rule).diagnostics;
    REQUIRE(!cut.diagnostics.all().empty());
    CHECK(whole.all().size() == cut.diagnostics.all().size());
    const Reader reader(cut.grammar());
    for (const Diagnostic& d : cut.diagnostics.all()) {
      CAPTURE(d.message);
      CHECK(Find(whole, d.kind) != nullptr);
      std::vector<Token> tokens;
      TextError error;
      REQUIRE(reader.Read(FormIn(d.message), Reader::Side::kUnderlying, &tokens, &error));
      const Derivation derived = Derive(cut.grammar(), reader.FormOf(tokens, Reader::Side::kUnderlying));
      std::string text;
      FeatureTree tree;
      CHECK((!derived.problem.empty() || !WriteForm(cut.grammar(), derived.surface, &text, &tree)));
    }
  }
}

// Where the next rule would pass a budget the cascade is cut, and the machines run one after the other: no form comes out differently.
TEST_CASE("cascade: cut in two it derives the same", "[unit]") {
  struct Case {
    const char* ruleset;
    std::size_t from, to;           // the budgets tried
    std::vector<std::string> more;  // forms beside the rows
  };
  const std::vector<Case> cases = {
      {"english-plural", 39, 60, {"kæs-z", "z-z", "s-s-z", "t͡ʃ-z#d-z", "kæːz-zː", "p-z=z", ""}},
      {"finnish-vowel-harmony", 30, 75, {"a-UUs-tOn", "i-A-i-O", "tæi=nA#O", "Aː-o-Uː", ""}},
  };
  for (const Case& c : cases) {
    CAPTURE(c.ruleset);
    Compiled whole = CompileRuleset(c.ruleset);
    REQUIRE(whole.cascade != nullptr);
    CHECK(whole.cascade->Stats().size() == 1);
    Compiled cut;
    for (std::size_t states = c.from; states <= c.to && cut.cascade == nullptr; ++states) {
      Limits limits;
      limits.states = states;
      cut = CompileRuleset(c.ruleset, limits);
    }
    INFO(cut.Messages());
    REQUIRE(cut.cascade != nullptr);
    const std::vector<SegmentStats> segments = cut.cascade->Stats();
    CHECK(segments.size() > 1);
    // Every rule once, in order.
    std::vector<std::string> rules;
    for (const SegmentStats& segment : segments) rules.insert(rules.end(), segment.rules.begin(), segment.rules.end());
    CHECK(rules == whole.cascade->Stats()[0].rules);
    std::vector<std::string> forms = c.more;
    for (const DataRow& row : whole.grammar().data) forms.push_back(row.underlying);
    for (const std::string& form : forms) {
      CAPTURE(form);
      const std::string surface = whole.Derive(form);
      CHECK(cut.Derive(form) == surface);
      if (surface.compare(0, 5, "error") == 0) continue;
      CHECK(cut.IsCandidate(form, surface));
      CHECK_FALSE(cut.IsCandidate(form + "p", surface));
    }
    for (const char* surface : {"ip", "pul", "zɪz"}) {
      TextError error;
      Runner::Candidates of_whole, of_cut;
      const bool fine = whole.runner->Recover(surface, 1'000'000, &of_whole, &error);
      CHECK(cut.runner->Recover(surface, 1'000'000, &of_cut, &error) == fine);
      std::set<std::string> one, other;
      for (const Runner::Candidate& candidate : of_whole.best) one.insert(candidate.form);
      for (const Runner::Candidate& candidate : of_cut.best) other.insert(candidate.form);
      CAPTURE(surface);
      CHECK(one == other);
    }
  }
}

TEST_CASE("cascade: a rule that can never apply is warned of, one that can is not", "[unit]") {
  struct Row {
    const char* rules;
    const char* warned;  // names of rules, a space after each
  };
  const Row rows[] = {
      {"rule \"a\" { where X:[+nasal -son] delete X }", "a "},                                  // no such segment
      {"rule \"a\" { where X:[-son] set X [-son] }", "a "},                                     // changes nothing
      {"rule \"a\" { where X:/h/ delete X } rule \"b\" { where X:/h/ Y:/p/ delete Y }", "b "},  // none is left
      {"rule \"b\" { where X:/h/ Y:/p/ delete Y } rule \"a\" { where X:/h/ delete X }", ""},
      {"rule \"a\" { where X:/h/ unless X delete X }", "a "},                  // always excepted
      {"rule \"a\" { where X:[+nasal] Y:[-son] spread Y.Place to X }", "a "},  // every nasal has a Place already
      {"rule \"a\" { where X:/h/ # delete X }", ""},
  };
  for (const Row& row : rows) {
    CAPTURE(row.rules);
    Compiled compiled = CompileText(std::string(kSmallInventory) + row.rules + "\ndata { /a/ [a] }");
    std::string warned;
    for (const Diagnostic& d : compiled.diagnostics.all()) {
      if (d.kind != Kind::kNeverApplies) continue;
      CHECK(d.severity == Severity::kWarning);
      const std::size_t begin = d.message.find('"') + 1;
      warned += d.message.substr(begin, d.message.find('"', begin) - begin) + " ";
    }
    INFO(compiled.Messages());
    CHECK(compiled.cascade != nullptr);
    CHECK(warned == row.warned);
  }
}

TEST_CASE("cascade: what is refused names a shortest form", "[unit]") {
  struct Row {
    Kind kind;
    const char* symbols;
    const char* rules;
    std::size_t length;  // letters of a shortest form, by hand
  };
  const Row rows[] = {
      // Both neighbours give the nasal their place.
      {Kind::kAmbiguousRule, "p t m n a",
       "rule \"r\" { where L:[-son] N:[+nasal] R:[-son] delink N.Place spread L.Place to N spread R.Place to N }", 3},
      {Kind::kAmbiguousRule, "p t m a",
       "rule \"r\" { where L:[-son] - N:[+nasal] R:[-son] delink N.Place spread L.Place to N spread R.Place to N }", 4},
      // The nasal holds the Place of the stop, so what the sweep does to the stop reaches it.
      {Kind::kReachesOtherRoot, "p t m n a",
       "rule \"s\" { where N:[+nasal] C:[-son] delink N.Place spread C.Place to N }"
       "rule \"r\" { where C:[-son Coronal] set C [Labial] iterate rightward }",
       2},
      {Kind::kReachesOtherRoot, "p t m a",
       "rule \"s\" { where N:[+nasal] C:[-son] delink N.Place spread C.Place to N }"
       "rule \"r\" { where C:[-son Coronal] [+syll] # set C [Labial] iterate leftward }",
       3},
  };
  for (const Row& row : rows) {
    CAPTURE(row.rules);
    Compiled compiled = CompileText(
        "tree {\nroot > ±cons ±son ±syll ±nasal ±cont\nroot > Place > •Labial •Coronal •Dorsal\nDorsal > ±high "
        "±low\n}\n"
        "segments from \"ipa\" { " +
        std::string(row.symbols) + " }\n" + row.rules);
    INFO(compiled.loaded.Messages() << compiled.Messages());
    CHECK(compiled.cascade == nullptr);
    const Diagnostic* refused = Find(compiled.diagnostics, row.kind);
    REQUIRE(refused != nullptr);
    CHECK(refused->severity == Severity::kError);
    CHECK(refused->remedy != "");
    CHECK(refused->message.find("\"r\"") != std::string::npos);
    const Grammar& grammar = compiled.grammar();
    const Reader reader(grammar);
    const auto problem = [&](const std::string& form) {
      std::vector<Token> tokens;
      TextError error;
      if (!reader.Read(form, Reader::Side::kUnderlying, &tokens, &error)) return std::string();
      return Derive(grammar, reader.FormOf(tokens, Reader::Side::kUnderlying)).problem;
    };
    const std::string named = FormIn(refused->message);
    CAPTURE(named);
    CHECK(problem(named) != "");
    std::vector<Token> tokens;
    TextError error;
    REQUIRE(reader.Read(named, Reader::Side::kUnderlying, &tokens, &error));
    CHECK(tokens.size() == row.length);
    std::vector<std::string> letters = {"ː", "-", "=", "#", "‖"};
    for (const Symbol& symbol : grammar.inventory.symbols) letters.push_back(symbol.text);
    std::size_t tried = 0;
    for (std::size_t length = 1; length < tokens.size(); ++length) {
      ForEachForm(letters, length, [&](const std::string& form) {
        ++tried;
        if (problem(form) != "") FAIL_CHECK(form << " is shorter");
      });
    }
    CHECK(tried >= 9);
  }
}

}  // namespace tiersmith::testing
