// Subset automata of a pattern machine, one from each side.
#pragma once

#include <vector>

#include "compile/pattern.h"

namespace tiersmith {

// Deterministic over profiles. `members[s]`: the states of the machine in subset s (in a reduced side, only those that can
// take, or result from, a role).
struct Side {
  int start = 0;
  std::vector<std::vector<int>> next;     // by state, by profile
  std::vector<std::vector<char>> members; // by state, by machine state
};

// The same machine read from its end.
PatternMachine Reversed(const PatternMachine& machine);

// All reachable subsets from the initial states; none if more than `max_states` arise.
// With `reduce`, states that differ only in members without roles are merged (Moore refinement).
Side SubsetsOf(const PatternMachine& machine, int profiles, bool reduce, std::size_t max_states);

}  // namespace tiersmith
