// Grammars, rules and forms for the agreement tests: at random from a seed, and all of a small shape.
//
// Forms are well-formed always (Defects() is empty): sharing is made only between neighbours on a tier whose content
// is equal. Rules keep to what the checker lets through. A case is printed as a .tier file that can be run again.
#pragma once

#include <cstdint>
#include <functional>
#include <random>
#include <string>
#include <vector>

#include "model/grammar.h"

namespace tiersmith::testing {

using Rng = std::mt19937_64;

inline bool Chance(Rng& rng, double p) { return std::uniform_real_distribution<double>(0, 1)(rng) < p; }
inline int Below(Rng& rng, int n) { return std::uniform_int_distribution<int>(0, n - 1)(rng); }

// ---- forms ----------------------------------------------------------------------------------------

// The underlying content of every symbol that may stand in underlying forms.
std::vector<FeatureTree> LettersOf(const Grammar& grammar);

// Makes neighbours on the tier of each of `nodes` (mothers first) one instance wherever they are equal and `yes` says so.
Form Shared(const Form& form, const Tree& tree, const std::vector<NodeId>& nodes, const std::function<bool()>& yes);

struct FormOptions {
  int min_items = 1, max_items = 6;
  double boundary = 0.12;
  double empty = 0.0;           // a slot without a root
  double again = 0.3;           // a slot like the one before: makes equal neighbours, hence sharing, likely
  double geminate = 0.3;        // equal neighbouring roots are one
  double share = 0.25;          // equal neighbours on any other tier are one
  std::vector<NodeId> sharing;  // which tiers may be shared; empty: all
};
Form RandomForm(Rng& rng, const Grammar& grammar, const std::vector<FeatureTree>& letters, const FormOptions& options);

// Forms that can be typed: of sharing, only long segments.
std::vector<Form> TypedForms(Rng& rng, const Grammar& grammar, std::size_t count);

// Any form the tree allows: trees made up node by node, contours of class nodes, instances borne by slots, floats
// with all under them, boundaries, sharing. For decode(encode(form)) == form.
Form RandomWideForm(Rng& rng, const Grammar& grammar, int max_items);

struct AllFormsOptions {
  int max_items = 4;
  bool with_empty = false;
  std::vector<Boundary> boundaries;  // these stand among the items (never first, last or side by side)
  std::vector<NodeId> sharing;       // on these tiers every way of sharing; empty: nothing is shared
};
// Smallest first; stops when the callback returns false.
void ForEachForm(const Grammar& grammar, const std::vector<FeatureTree>& letters, const AllFormsOptions& options,
                 const std::function<bool(const Form&)>& callback);

// ---- rules ----------------------------------------------------------------------------------------

struct NamedTest {
  std::string name;
  SlotTest test;
};
// [], C, V, N (nasal), voiceless, without Place first (the six of the exhaustive tests), then more, then the grammar's literals.
std::vector<NamedTest> NamedTests(const Grammar& grammar);

// Would the checker refuse it (notation §5, what is said of relinking and of iteration; nodes with contoured mothers)?
bool Refused(const Tree& tree, const Rule& rule);
// Sets Pattern::names_empty from what the items mention.
void NoteEmpty(Pattern* pattern);

// A rule of any shape. Not refused, but it may be ambiguous, reach other roots, or never change anything.
Rule RandomRule(Rng& rng, const Grammar& grammar, const std::vector<NamedTest>& tests,
                const std::vector<FeatureTree>& letters);
// One that does this, among perhaps other things, in this mode.
Rule RandomRule(Rng& rng, const Grammar& grammar, const std::vector<NamedTest>& tests,
                const std::vector<FeatureTree>& letters, Change::Op op, Rule::Mode mode);

// Nodes to share: the root, and a few that have to do with the rule.
std::vector<NodeId> SharingFor(Rng& rng, const Tree& tree, const Rule& rule);

// ---- the whole notation -----------------------------------------------------------------------------

// What a rule of RandomRuleWith has beyond the first release.
enum class Construct {
  kAgreement,
  kAgreeingNode,
  kShared,
  kLength,
  kPart,
  kEqual,
  kSame,
  kSameMorpheme,
  kDomain,
  kStem,
  kTags,
  kOtherwise,
  kOptional,
  kByWord,
  kPrefer,
  kPreserving,
  kSharingBlocked,
  kNewRoot,
  kCopy,
  kLengthen,
  kShorten,
  kMerge,
  kBoundary,
  kLongInsertion,
  kMember,
  kTwoContents,
  kComplete,
  kGivenNode,
  kInsertedGrown,
  kAgreeingUnless,
  kSeveralItems,
  kBoundaryAtEnd,
  kSeveralChanges
};
const std::vector<Construct>& AllConstructs();
const char* NameOf(Construct construct);
// Takes some values out of what symbols mean in forms, as `omit` does: `complete` then has something to do.
void OmitSome(Grammar* grammar);
// A random rule of any shape with this construct.
Rule RandomRuleWith(Rng& rng, const Grammar& grammar, const std::vector<NamedTest>& tests,
                    const std::vector<FeatureTree>& letters, Construct construct);
// Adds the construct to a rule; false where its shape has no place for it.
bool Decorate(Rng& rng, const Grammar& grammar, const std::vector<FeatureTree>& letters, Construct construct,
              Rule* rule);
bool AsksForTags(const Rule& rule);
// The form with a kind and some of two tags on each morpheme, as forms are where rules ask for tags.
Form WithTags(Rng& rng, const Form& form);

// What a rule does to a sample of forms.
struct Effect {
  int forms = 0, changed = 0, ambiguous = 0, reaching = 0, blocked = 0;
};
Effect EffectOn(const Grammar& grammar, const Rule& rule, const std::vector<Form>& forms);

// The best of several random rules: one that changes many of the forms and has a result for all of them (now and
// then one that has not, if `with_problems`).
Rule UsefulRule(Rng& rng, const Grammar& grammar, const std::vector<NamedTest>& tests,
                const std::vector<FeatureTree>& letters, const std::vector<Form>& sample, bool with_problems = false);

// SmallGrammar with some of its symbols and 1 to `max_rules` useful rules.
Grammar RandomGrammar(Rng& rng, int max_rules, bool with_problems = false);

struct AllRulesOptions {
  int min_items = 1, max_items = 2;
  std::vector<NamedTest> tests;                // for every item
  std::vector<NodeId> nodes;                   // spread (with and without delinking) and delinked
  std::vector<std::vector<Setting>> settings;  // set and filled
  std::vector<FeatureTree> inserted;
  bool gaps = true;  // each connection adjacent or a gap (one gap at most)
  std::vector<Rule::Mode> modes = {Rule::Mode::kAtOnce, Rule::Mode::kRightward, Rule::Mode::kLeftward};
};
// Nodes, settings and insertions that suit SmallGrammar, and its six tests.
AllRulesOptions SmallRules(const Grammar& grammar);
// Each change x mode x connection x tests x which items change; refused ones left out. Stops on false.
void ForEachRule(const Grammar& grammar, const AllRulesOptions& options,
                 const std::function<bool(const Rule&)>& callback);

// "spread+delink at once": for counting what was tried.
std::string ShapeOf(const Rule& rule);

// ---- printing -------------------------------------------------------------------------------------

std::string PrintTest(const Grammar& grammar, const SlotTest& test);
std::string PrintRule(const Grammar& grammar, const Rule& rule);
std::string PrintGrammar(const Grammar& grammar);
// As it would be typed; empty if it cannot be (it shares more than roots, or a root is of no symbol).
std::string PrintForm(const Grammar& grammar, const Form& form);
// A .tier file with the form, what is shared in it, and the command that replays it, as comments.
std::string PrintCase(const Grammar& grammar, const Form& form);

}  // namespace tiersmith::testing
