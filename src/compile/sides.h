// Subset automata of a pattern machine, one from each side.
#pragma once

#include <vector>

#include "compile/pattern.h"

namespace tiersmith {

// Deterministic over profiles, and minimal: subsets from which the same roles follow, whatever comes, are one state.
struct Side {
  int start = 0;
  std::vector<std::vector<int>> next;      // by state, by profile
  std::vector<std::vector<char>> members;  // by state, by machine state: one of its subsets
  std::vector<std::int32_t> underway;      // by state: PatternMachine::underway of all its subsets
};

// Arcs with a role, by profile.
struct RoleArc {
  int from, role, to;
};
std::vector<std::vector<RoleArc>> RoleArcs(const PatternMachine& machine, int profiles);

// The same machine read from its end.
PatternMachine Reversed(const PatternMachine& machine);

// The subsets reachable from the initial states; none if more than `max_states` arise.
Side SubsetsOf(const PatternMachine& machine, int profiles, std::size_t max_states);

}  // namespace tiersmith
