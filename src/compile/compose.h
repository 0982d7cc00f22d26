// Composition of aligned machines (symbols: strings of letters, compile/rule_machine.h), and searches in them.
#pragma once

#include <functional>
#include <optional>
#include <vector>

#include "compile/tape.h"

namespace tiersmith {

// first, then second. Every state is on an accepted path. Empty (no starts) with `over_budget` set if it passes a limit.
Tape Compose(const Tape& first, const Tape& second, std::size_t max_states, std::size_t max_arcs, bool* over_budget);

// All classes that the machine writes, sorted.
std::vector<int> ClassesWritten(const Tape& tape);

// The arcs of a shortest accepted path that uses an arc for which `wanted` holds; none if there is none. The position
// of that arc on the path goes to `at`.
std::vector<TapeArc> ShortestThrough(const Tape& tape, const std::function<bool(const TapeArc&)>& wanted,
                                     std::size_t* at);

// The arcs of a shortest accepted path that writes these classes; none if there is none. `written_by`: for each of the
// classes the position of its arc on the path.
std::vector<TapeArc> ShortestWriting(const Tape& tape, const std::vector<int>& classes,
                                     std::vector<std::size_t>* written_by);

// Replaces the symbols of a tape.
Tape MapSymbols(const Tape& tape, const std::function<Key(const Key&)>& map);

}  // namespace tiersmith
