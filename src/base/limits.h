// Budgets of the interpreter, the compiler and recovery. Exceeding one is a diagnostic that names the rule.
#pragma once

#include <cstddef>

namespace tiersmith {

struct Limits {
  std::size_t states = 20'000;        // of a cascade segment of one rule
  std::size_t arcs = 1'000'000;       // of a cascade segment of one rule
  std::size_t joined_states = 2'000;  // of a segment of several rules; past it a new one begins
  std::size_t joined_arcs = 100'000;  // of a segment of several rules; past it a new one begins
  std::size_t side_states = 4'096;    // of the pattern automaton of one rule, read from either side
  std::size_t step_states = 262'144;  // of what one rule's machine is between two of its passes
  std::size_t outcomes = 4'096;       // of optional rules on one form
  std::size_t candidates = 1'000;     // recovered forms listed at most
};

}  // namespace tiersmith
