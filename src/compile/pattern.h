// A rule's pattern as an automaton over annotated letters, with the places it changes marked.
//
// Example: where N:[+nasal] C:[+cons Place] -- on /n k/ the automaton has one accepting run, which
// consumes n with the role "N, source bears Place" and k without one.
//
// Of a rule with several clauses the machine is the union of theirs, the later ones without the matches that an earlier
// one forestalls. What must agree across a match (α, the nodes an `if` compares) is kept in the states from where it is
// first met.
//
// Method, after Kaplan & Kay 1994 (rules as regular relations) with marked strings for what one run cannot see:
//   1. the where-pattern as an automaton whose states remember the place in the pattern, the
//      boundaries still to be met, which spreads have a source that bears their node, and for each such
//      spread a *zone* that watches that no other bearer stands between source and target;
//   2. minus the strings with a match of an `unless` pattern on the same labelled slots;
//   3. minus, for a gap with a changed end, the strings with a nearer slot at which the rule would apply:
//      automaton 1-2 again with that end's mark moved, determinised, complemented.
// Capacity and crossing are tests of single letters, because letters are annotated (compile/space.h).
// Letters are grouped by *profile*: the answers to all that 1-3 ask of a letter.
//
// Not here: which letters change, and how (compile/find.h, compile/build_letter.h).
// Tested by tests/agreement/.
#pragma once

#include <functional>
#include <map>
#include <memory>
#include <vector>

#include "compile/space.h"

namespace tiersmith {

struct Spread {
  int change = 0;  // index into Rule::changes
  int source = 0, target = 0;
  int insertion = -1;  // the change that inserts the target, beside the item labelled `target`
  NodeId node = 0, mother = 0;
  bool from_left = true;         // the source stands left of the target
  bool delinks = false;          // the rule also delinks the target's own
  int delink = -1;               // that change
  bool inserts_between = false;  // the rule inserts a bearer between source and target
  bool past_host = false;        // what is inserted stands behind its host, seen from the source
};

// Why a slot is changed: its label, and for each spread to that label whether its source bears the node.
struct Role {
  int label = 0;
  enum Ask : char { kNothing, kAsk, kAskOwnMother };  // the last: source and target share the mother
  std::vector<Ask> asks;                              // by spread
  std::vector<int> values;  // by variable: 1 + its value where a change to the label asks for it, else 0
  bool doubtful = false;    // whether the change crosses a line depends on what another item of the match is given
  std::int32_t merges = 0;  // bit i: change i makes this item's N and the one on its left one
};

using Content = std::vector<FeatureTree>;  // a list of instances with all under them

struct PatternArc {
  int profile = 0;
  int role = -1;  // index into PatternMachine::roles, or -1
  int next = 0;
};

struct PatternMachine {
  bool over_budget = false;
  int states = 0;
  std::vector<int> initial;
  std::vector<char> final;
  std::vector<std::vector<PatternArc>> arcs;  // by state
  std::vector<Role> roles;
  std::vector<std::int32_t> underway;  // by state: bit j, it stands between source and target of spread j
};

// Asks of letters what the pattern needs, and builds the machine. The rule is Flattened.
class PatternCompiler {
 public:
  PatternCompiler(const Rule& rule, const RuleSpace& space);
  ~PatternCompiler();

  // The profile of an annotated letter; numbers are dense and grow as letters come.
  int Profile(const Key& annotated);
  int profiles() const;
  const std::vector<Spread>& spreads() const;
  // A change that copies has a variable of its own in Role::values; this is the content that a value of it stands for.
  std::size_t VariableOf(std::size_t change) const;  // so has a spread, where the rule is `preserving`
  const Content& ContentOf(int value) const;
  // Does some gap ask of slots that a sweep has passed whether one of them would do, being nearer?
  bool AsksOfSlotsBehind(bool rightward) const;

  // What only the requests can tell (compile/requests.h).
  struct Judge {
    // Do two matches with these roles at one letter ask for what cannot both be met? Asked where one is to be preferred.
    std::function<bool(const Role& a, const Role& b, const Key& annotated)> conflict;
    // Is the letter spelled by a symbol of `segments` after what this role alone asks? Asked of `preserving` rules.
    std::function<bool(const Role& role, const Key& annotated)> preserves;
  };
  // The machine over all profiles seen so far. No states: the pattern never matches.
  PatternMachine Build(std::size_t max_states, const Judge& judge) const;

 private:
  struct Impl;
  std::unique_ptr<Impl> impl_;
};

}  // namespace tiersmith
