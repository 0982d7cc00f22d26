// Letter-by-letter machines without epsilon arcs, and the one way they are built: by *passes*.
//
// A Tape is a non-deterministic transducer whose arcs read one letter and write one symbol of
// some intermediate alphabet. A rule machine is made by applying deterministic passes to the tape
// of all strings, each from left to right or from right to left (Schützenberger 1961: a two-sided machine is
// one pass each way). A left-to-right pass explores forward from the starts; a right-to-left pass explores
// backward from the ends, so its states are guesses when the tape is read forward, and exactly one guess
// survives: the tape stays unambiguous. Both keep every state on some accepted path.
//
// Pass states and symbols are keys, short vectors of integers; each pass gives them its meaning.
// Tested by tests/unit/compile/cascade_test.cc (sizes) and all of tests/agreement/.
#pragma once

#include <cstdint>
#include <functional>
#include <unordered_map>
#include <utility>
#include <vector>

namespace tiersmith {

using Key = std::vector<std::int32_t>;

struct KeyHash {
  std::size_t operator()(const Key& key) const {
    std::uint64_t hash = 1469598103934665603ULL;
    for (std::int32_t v : key) hash = (hash ^ static_cast<std::uint32_t>(v)) * 1099511628211ULL ^ (hash >> 29);
    return static_cast<std::size_t>(hash);
  }
};

class KeyPool {
 public:
  KeyPool() = default;
  KeyPool(KeyPool&&) = default;
  KeyPool& operator=(KeyPool&&) = default;

  int Intern(const Key& key) {
    const auto [it, added] = ids_.emplace(key, static_cast<int>(keys_.size()));
    if (added) keys_.push_back(&it->first);
    return it->second;
  }
  const Key& operator[](int id) const { return *keys_[id]; }
  int size() const { return static_cast<int>(keys_.size()); }

 private:
  std::unordered_map<Key, int, KeyHash> ids_;
  std::vector<const Key*> keys_;  // node-based map: addresses hold
};

struct TapeArc {
  int in = 0;   // class
  int out = 0;  // symbol of the tape's own pool
  int next = 0;
  float weight = 0;  // negative natural log of the probability; 0 where nothing is optional
};

struct Tape {
  std::vector<std::vector<TapeArc>> arcs;  // by state
  std::vector<int> starts;
  std::vector<char> ends;  // by state: may a string end here
  KeyPool symbols;         // what `out` numbers

  std::size_t ArcCount() const;
};

// One deterministic pass: given its state and the symbol read, the state after and the symbol written.
struct PassStep {
  Key state;
  Key symbol;
  float weight = 0;  // added to that of the arc
};
using PassFunction = std::function<PassStep(const Key& state, const Key& symbol)>;
// A pass with a choice: all ways to go on; none, and the string is not accepted.
using PassChoice = std::function<std::vector<PassStep>(const Key& state, const Key& symbol)>;

// All return an empty tape (no starts) if more than `max_states` states arise.
Tape PassRightward(const Tape& tape, const Key& initial, const PassFunction& step, std::size_t max_states);
Tape PassLeftward(const Tape& tape, const Key& initial, const PassFunction& step, std::size_t max_states);
Tape ChooseRightward(const Tape& tape, const Key& initial, const PassChoice& step, std::size_t max_states);
Tape ChooseLeftward(const Tape& tape, const Key& initial, const PassChoice& step, std::size_t max_states);

// Which states a string can end from; arcs of any kind that has a `next`.
template <class Arc>
std::vector<char> CanEnd(const std::vector<std::vector<Arc>>& arcs, const std::vector<char>& ends) {
  std::vector<std::vector<int>> into(arcs.size());
  for (std::size_t s = 0; s < arcs.size(); ++s) {
    for (const Arc& arc : arcs[s]) into[arc.next].push_back(static_cast<int>(s));
  }
  std::vector<char> can = ends;
  std::vector<int> stack;
  for (std::size_t s = 0; s < ends.size(); ++s) {
    if (ends[s]) stack.push_back(static_cast<int>(s));
  }
  while (!stack.empty()) {
    const int s = stack.back();
    stack.pop_back();
    for (int before : into[s]) {
      if (can[before]) continue;
      can[before] = 1;
      stack.push_back(before);
    }
  }
  return can;
}

// What a machine of strings (symbols [flags, class, rest, ...]) writes, as a tape that reads and writes the same class, one
// letter an arc: the domain of a further machine. No starts if it needs more than `max_states`.
Tape OutputsOf(const Tape& tape, std::size_t max_states);

// Merges states with equal futures, exactly: without weights by OpenFst (arcs as labels of an acceptor), with weights so that
// ways of writing the same count together.
Tape Reduce(Tape tape);

}  // namespace tiersmith
