#include "compile/sides.h"

#include <algorithm>
#include <map>

namespace tiersmith {
namespace {

// Merges states with the same colour, the members that can take a role, now and after every string (Moore refinement).
Side Refine(const Side& side, const std::vector<char>& interesting) {
  const std::size_t n = side.next.size();
  std::map<std::vector<char>, int> colours;
  std::vector<int> block(n);
  std::vector<std::vector<char>> colour(n);
  for (std::size_t s = 0; s < n; ++s) {
    colour[s] = side.members[s];
    for (std::size_t q = 0; q < interesting.size(); ++q) colour[s][q] = colour[s][q] && interesting[q];
    block[s] = colours.emplace(colour[s], static_cast<int>(colours.size())).first->second;
  }
  std::size_t count = colours.size();
  while (true) {
    std::map<std::vector<int>, int> signatures;
    std::vector<int> refined(n);
    for (std::size_t s = 0; s < n; ++s) {
      std::vector<int> signature{block[s]};
      for (int next : side.next[s]) signature.push_back(block[next]);
      refined[s] = signatures.emplace(std::move(signature), static_cast<int>(signatures.size())).first->second;
    }
    block = std::move(refined);
    if (signatures.size() == count) break;
    count = signatures.size();
  }
  Side result;
  result.start = block[side.start];
  result.next.resize(count);
  result.members.resize(count);
  result.underway.assign(count, 0);
  for (std::size_t s = 0; s < n; ++s) {
    result.underway[block[s]] |= side.underway[s];
    if (!result.members[block[s]].empty()) continue;
    result.members[block[s]] = side.members[s];
    for (int next : side.next[s]) result.next[block[s]].push_back(block[next]);
  }
  return result;
}

}  // namespace

std::vector<std::vector<RoleArc>> RoleArcs(const PatternMachine& machine, int profiles) {
  std::vector<std::vector<RoleArc>> arcs(profiles);
  for (int s = 0; s < machine.states; ++s) {
    for (const PatternArc& arc : machine.arcs[s]) {
      if (arc.role >= 0) arcs[arc.profile].push_back({s, arc.role, arc.next});
    }
  }
  return arcs;
}

PatternMachine Reversed(const PatternMachine& machine) {
  PatternMachine result;
  result.states = machine.states;
  result.roles = machine.roles;
  result.arcs.resize(machine.states);
  result.underway = machine.underway;
  result.final.assign(machine.states, 0);
  for (int s : machine.initial) result.final[s] = 1;
  for (int s = 0; s < machine.states; ++s) {
    if (machine.final[s]) result.initial.push_back(s);
    for (const PatternArc& arc : machine.arcs[s]) result.arcs[arc.next].push_back({arc.profile, arc.role, s});
  }
  return result;
}

Side SubsetsOf(const PatternMachine& machine, int profiles, std::size_t max_states) {
  Side side;
  std::map<std::vector<char>, int> ids;
  const auto intern = [&](const std::vector<char>& set) {
    const auto [it, added] = ids.emplace(set, static_cast<int>(side.members.size()));
    if (added) side.members.push_back(set);
    return it->second;
  };
  std::vector<char> initial(machine.states, 0);
  for (int s : machine.initial) initial[s] = 1;
  side.start = intern(initial);
  std::vector<std::vector<char>> next(profiles);
  for (std::size_t at = 0; at < side.members.size(); ++at) {
    if (side.members.size() > max_states) return Side{};
    for (auto& set : next) set.assign(machine.states, 0);
    for (int s = 0; s < machine.states; ++s) {
      if (!side.members[at][s]) continue;
      for (const PatternArc& arc : machine.arcs[s]) next[arc.profile][arc.next] = 1;
    }
    std::vector<int> row(profiles);
    for (int p = 0; p < profiles; ++p) row[p] = intern(next[p]);
    side.next.push_back(std::move(row));
  }
  for (const std::vector<char>& set : side.members) {
    std::int32_t underway = 0;
    for (int s = 0; s < machine.states; ++s) underway |= set[s] ? machine.underway[s] : 0;
    side.underway.push_back(underway);
  }
  std::vector<char> interesting(machine.states, 0);
  for (int s = 0; s < machine.states; ++s) {
    for (const PatternArc& arc : machine.arcs[s]) {
      if (arc.role >= 0) interesting[s] = 1;
    }
  }
  return Refine(side, interesting);
}

}  // namespace tiersmith
