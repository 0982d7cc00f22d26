// All ways a weighted grammar can write one form, and the likeliest of what they write.
//
// A lattice is an automaton without cycles over numbers, arcs with probabilities. /tat/ under two optional rules goes through
// both segments to one lattice; ways that write the same are summed before outputs are compared (.3 + .3 is more than .4).
// Grammars without optional rules need none of this: run/walker.h.
// Tested by tests/unit/run/lattice_test.cc and tests/agreement/.
#pragma once

#include <functional>
#include <vector>

#include "compile/cascade_data.h"

namespace tiersmith {

struct LatticeArc {
  int label = 0;  // kNothing: nothing is written
  double probability = 1;
  int next = 0;
};

struct Lattice {
  static constexpr int kNothing = -1;
  std::vector<std::vector<LatticeArc>> arcs;  // by node; node 0 is the start
  std::vector<char> ends;

  static Lattice Of(const std::vector<int>& labels);
};

// Labels stand for letters; numbers are dense and grow as letters come.
class LetterNumbers {
 public:
  int Number(const LetterClasses::Parts& letter);
  const LetterClasses::Parts& operator[](int number) const { return letters_[static_cast<std::size_t>(number)]; }

 private:
  std::vector<std::vector<int>> by_class_;  // class, rest -> number, or -1
  std::vector<LetterClasses::Parts> letters_;
};

// What a segment writes for all that `in` writes; no node if it accepts none of it. `flags` gets those of all its ways
// (compile/rule_machine.h).
Lattice Through(const Lattice& in, const Segment& segment, LetterNumbers* letters, std::int32_t* flags);

// Other labels for the same: `map` is told the state so far (0 at the start) and the label, and gives the state after and
// the label to write.
Lattice Relabelled(const Lattice& in, const std::function<std::pair<int, int>(int state, int label)>& map);

// The probability of all strings that an automaton accepts. `step` is told the state so far (0 at the start) and the label, and
// gives the state after, or -1.
double Probability(const Lattice& lattice, const std::function<int(int state, int label)>& step,
                   const std::function<bool(int state)>& ends);

struct Likely {
  std::vector<int> labels;
  double probability = 1;
};
// The `most` likeliest strings, each once with its probability, likeliest first; equal ones in order of their labels. `more`: are
// there others?
std::vector<Likely> Likeliest(const Lattice& lattice, std::size_t most, bool* more);

}  // namespace tiersmith
