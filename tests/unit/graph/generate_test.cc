// The generators of the agreement tests: what they make is well-formed, varied, and changes things.
#include <catch2/catch.hpp>
#include <map>
#include <memory>
#include <set>

#include "graph/interpreter.h"
#include "support/generate.h"
#include "support/small_grammar.h"

namespace tiersmith::testing {
namespace {

// Counts of holders show what is shared.
std::set<std::string> SharedNodes(const Grammar& grammar, const Form& form) {
  std::vector<int> holders(form.instances.size(), 0);
  for (const Instance& instance : form.instances) {
    for (InstanceId daughter : instance.daughters) ++holders[daughter];
  }
  std::set<std::string> nodes;
  for (std::size_t i = 0; i < holders.size(); ++i) {
    if (holders[i] > 1) nodes.insert(grammar.tree[form.instances[i].node].name);
  }
  return nodes;
}

TEST_CASE("generate: random forms are well-formed and share what may be shared", "[unit]") {
  const Grammar g = SmallGrammar();
  const std::vector<FeatureTree> letters = LettersOf(g);
  Rng rng(1);
  std::set<std::string> shared;
  FormOptions options;
  options.empty = 0.05;
  for (int i = 0; i < 2000; ++i) {
    const Form form = RandomForm(rng, g, letters, options);
    REQUIRE(Defects(form, g.tree) == "");
    REQUIRE(form == Canonical(form));
    REQUIRE(form.items.size() <= 6);
    for (const std::string& name : SharedNodes(g, form)) shared.insert(name);
  }
  for (const char* name : {"root", "Laryngeal", "voice", "Place", "Coronal", "ant", "cont", "nasal", "Dorsal"}) {
    CHECK(shared.count(name) == 1);
  }
}

TEST_CASE("generate: wide forms have class contours, floats and slot-borne instances", "[unit]") {
  const Grammar g = WideGrammar();
  const NodeId cplace = NodeOf(g, "Cplace");
  Rng rng(2);
  int floats = 0, contours = 0;
  std::set<std::string> shared;
  for (int i = 0; i < 2000; ++i) {
    const Form form = RandomWideForm(rng, g, 7);
    CAPTURE(Dump(form, g.tree));
    REQUIRE(Defects(form, g.tree) == "");
    for (const FormItem& item : form.items) floats += item.kind == FormItem::Kind::kFloat;
    for (const Instance& instance : form.instances) {
      int of_cplace = 0;
      for (InstanceId daughter : instance.daughters) of_cplace += form.instances[daughter].node == cplace;
      contours += of_cplace > 1;
    }
    for (const std::string& name : SharedNodes(g, form)) shared.insert(name);
  }
  CHECK(floats > 200);
  CHECK(contours > 200);
  for (const char* name : {"Tone", "Cplace", "grave", "root", "Lip"}) CHECK(shared.count(name) == 1);
}

TEST_CASE("generate: all forms of a size", "[unit]") {
  const Grammar g = SmallGrammar();
  const std::vector<FeatureTree> letters = {ContentOfSymbol(g, "t"), ContentOfSymbol(g, "a"), ContentOfSymbol(g, "N")};
  const auto count = [&](const AllFormsOptions& options) {
    std::set<std::string> seen;
    int forms = 0;
    ForEachForm(g, letters, options, [&](const Form& form) {
      REQUIRE(Defects(form, g.tree) == "");
      seen.insert(Dump(form, g.tree));
      ++forms;
      return true;
    });
    CHECK(static_cast<int>(seen.size()) == forms);  // each once
    return forms;
  };
  AllFormsOptions options;
  options.max_items = 3;
  CHECK(count(options) == 3 + 9 + 27);
  options.boundaries = {Boundary::kMorpheme};
  CHECK(count(options) == 3 + 9 + 27 + 9);  // and x-y
  options.boundaries = {};
  options.max_items = 2;
  options.sharing = {kRootNode};
  CHECK(count(options) == 3 + 9 + 3);
  // tt aa: two roots apart, with Laryngeal apart or one; or one root. NN the same. ta, at, ..: voice differs or
  // does not: a and N are both voiced, so aN Na have two each.
  options.sharing = {kRootNode, NodeOf(g, "Laryngeal")};
  CHECK(count(options) == 3 + 3 * 3 + 2 * 2 + 4);
  int first = 0;
  ForEachForm(g, letters, options, [&](const Form&) { return ++first < 5; });
  CHECK(first == 5);
}

TEST_CASE("generate: rules keep to what the checker lets through", "[unit]") {
  const Grammar g = SmallGrammar();
  CHECK(Refused(g.tree, RuleBuilder(g, "A:[] B:[]").Delink("A.Place").Set("B", "+ant")));
  CHECK(Refused(g.tree, RuleBuilder(g, "A:[] B:[]").Delink("A.Place").Delink("B.Coronal")));
  CHECK(Refused(g.tree, RuleBuilder(g, "A:[]").Spread("A.Place", "A")));
  CHECK(Refused(g.tree, RuleBuilder(g, "A:[] B:[]").Set("A", "+ant").Set("B", "+ant").Mode(Rule::Mode::kRightward)));
  CHECK_FALSE(Refused(g.tree, RuleBuilder(g, "A:[] B:[]").Delink("A.Place").Spread("B.Place", "A")));
  const Grammar wide = WideGrammar();
  CHECK(Refused(wide.tree, RuleBuilder(wide, "A:[]").Set("A", "+grave")));

  std::map<std::string, int> shapes;
  int rules = 0;
  ForEachRule(g, SmallRules(g), [&](const Rule& rule) {
    ++shapes[ShapeOf(rule)];
    ++rules;
    REQUIRE_FALSE(Refused(g.tree, rule));
    return true;
  });
  // One item: 6 tests x 3 modes x (2 delinks, 2 sets, 2 fills, 2 insertions, 1 deletion) = 162. Two: 36 pairs of tests x 3
  // modes x with or without a gap x 2 targets x (those 9, 2 spreads, 2 spreads with delinking) = 5616.
  CHECK(rules == 162 + 5616);
  CHECK(shapes.size() == 7 * 3);
}

TEST_CASE("generate: random grammars change their forms", "[unit]") {
  Rng rng(3);
  int forms = 0, changed = 0, problems = 0;
  std::map<std::string, int> shapes;
  for (int i = 0; i < 40; ++i) {
    const Grammar g = RandomGrammar(rng, 6);
    const std::vector<FeatureTree> letters = LettersOf(g);
    for (const Rule& rule : g.rules) ++shapes[ShapeOf(rule)];
    for (int k = 0; k < 50; ++k) {
      const Form form = RandomForm(rng, g, letters, FormOptions());
      const Derivation derivation = Derive(g, form);
      ++forms;
      problems += !derivation.problem.empty();
      changed += derivation.problem.empty() && !(derivation.surface == form);
      for (const Step& step : derivation.steps) {
        CAPTURE(PrintCase(g, form), step.rule);
        REQUIRE(Canonical(step.after) == step.after);
      }
    }
  }
  CAPTURE(forms, changed, problems);
  CHECK(changed * 2 > forms);
  CHECK(problems * 20 < forms);
  CHECK(shapes.size() > 20);
}

TEST_CASE("generate: a case is printed in the notation", "[unit]") {
  Grammar g = SmallGrammar();
  const Rule rule = RuleBuilder(g, "# A:[+nasal no Place] ( [-syll] )0-2 - B:[-son]|[+syll] ...Place C:not[]")
                        .Unless("A ... [+syll]")
                        .Delink("A.Place")
                        .Spread("C.Place", "A")
                        .Insert("a", true, "B")
                        .Mode(Rule::Mode::kLeftward);
  CHECK(PrintRule(g, rule).substr(0, 5) == "rule ");
  const std::string text = PrintRule(g, rule);
  for (const char* part :
       {"where # A:[+nasal, no Place] ([-syll])_0^2 - B:{[-son] | [+syll]} ...Place C:{not []}", "unless A ... [+syll]",
        "delink A.Place  spread C.Place to A  insert J1:/a/ before B  iterate leftward }"}) {
    CAPTURE(text);
    CHECK(text.find(part) != std::string::npos);
  }
  CHECK(PrintForm(g, FormOf(g, "a{root:1} a{root:1} - n t # i")) == "aː-nt i");
  CHECK(PrintForm(g, FormOf(g, "n{Place:1} t{Place:1}")) == "");
  CHECK(PrintForm(g, FormOf(g, "a{root:1} - a{root:1}")) == "");
  g.rules = {rule};
  const std::string printed = PrintCase(g, FormOf(g, "a n"));
  CHECK(printed.find("root > ±cons ±son ±syll ±nasal ±cont ×2 in [-son] Laryngeal Place\n") != std::string::npos);
  CHECK(printed.find("Place > •Labial •Coronal •Dorsal\n") != std::string::npos);
  CHECK(printed.find("derive case.tier 'an' --trace") != std::string::npos);
  CHECK(printed.find("archisegments {") != std::string::npos);
}

// A node of one tree by its name in another: printing a tree may number it differently.
Form Renumbered(Form form, const Tree& from, const Tree& to) {
  for (Instance& instance : form.instances) instance.node = *to.Find(from[instance.node].name);
  return form;
}

// Read from text, tests of values beside a changed item face it (notation.md §4); generated ones ask of any part.
bool AsksOfContours(const Grammar& grammar) {
  const auto in_test = [&](const auto& self, const SlotTest& test) -> bool {
    return std::any_of(test.bundle.begin(), test.bundle.end(),
                       [&](const FeatureTest& feature) { return grammar.tree[feature.node].max > 1; }) ||
           std::any_of(test.args.begin(), test.args.end(), [&](const SlotTest& arg) { return self(self, arg); });
  };
  const auto in_pattern = [&](const auto& self, const Pattern& pattern) -> bool {
    return std::any_of(pattern.items.begin(), pattern.items.end(), [&](const PatternItem& item) {
      return in_test(in_test, item.test) ||
             std::any_of(item.alternatives.begin(), item.alternatives.end(),
                         [&](const Pattern& alternative) { return self(self, alternative); });
    });
  };
  return std::any_of(grammar.rules.begin(), grammar.rules.end(), [&](const Rule& rule) {
    return in_pattern(in_pattern, rule.where) ||
           std::any_of(rule.unless.begin(), rule.unless.end(),
                       [&](const Pattern& unless) { return in_pattern(in_pattern, unless); });
  });
}

TEST_CASE("generate: a printed grammar is read back as the same grammar", "[unit]") {
  Rng rng(4);
  for (int i = 0; i < 20;) {
    const Grammar g = RandomGrammar(rng, 4, /*with_problems=*/true);
    if (AsksOfContours(g)) continue;
    ++i;
    const std::string text = PrintGrammar(g);
    CAPTURE(text);
    Diagnostics diagnostics;
    const auto read = LoadGrammarText("case.tier", text, std::make_shared<SourceMap>(), diagnostics);
    for (const Diagnostic& diagnostic : diagnostics.all()) {
      if (diagnostic.severity == Severity::kError) FAIL_CHECK(diagnostic.message);
    }
    REQUIRE(read != nullptr);
    const std::vector<FeatureTree> letters = LettersOf(g);
    for (int k = 0; k < 25; ++k) {
      const Form form = RandomForm(rng, g, letters, FormOptions());
      const Derivation a = Derive(g, form), b = Derive(*read, Renumbered(form, g.tree, read->tree));
      CHECK(a.problem.empty() == b.problem.empty());
      if (a.problem.empty()) CHECK(Dump(a.surface, g.tree) == Dump(b.surface, read->tree));
    }
  }
}

}  // namespace
}  // namespace tiersmith::testing
