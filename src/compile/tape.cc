#include "compile/tape.h"

namespace tiersmith {
namespace {

// Remembers what a pass did with a (state, symbol) pair: arcs repeat, pairs do not.
class Stepper {
 public:
  struct Way {
    int state;
    int symbol;
    float weight;
  };
  Stepper(const Tape& tape, const PassChoice& step, KeyPool* out) : tape_(tape), step_(step), out_(out) {}

  int State(const Key& key) { return states_.Intern(key); }

  const std::vector<Way>& Step(int state, int symbol) {
    const std::uint64_t key =
        (static_cast<std::uint64_t>(static_cast<std::uint32_t>(state)) << 32) | static_cast<std::uint32_t>(symbol);
    const auto it = memo_.find(key);
    if (it != memo_.end()) return it->second;
    std::vector<Way> ways;
    for (const PassStep& done : step_(states_[state], tape_.symbols[symbol])) {
      ways.push_back({states_.Intern(done.state), out_->Intern(done.symbol), done.weight});
    }
    return memo_.emplace(key, std::move(ways)).first->second;
  }

 private:
  const Tape& tape_;
  const PassChoice& step_;
  KeyPool states_;
  KeyPool* out_;
  std::unordered_map<std::uint64_t, std::vector<Way>> memo_;
};

PassChoice OnlyOne(const PassFunction& step) {
  return [&step](const Key& state, const Key& symbol) { return std::vector<PassStep>{step(state, symbol)}; };
}

// States of the result: pairs (state of the tape, state of the pass).
class Pairs {
 public:
  int Intern(int a, int b) {
    const std::uint64_t key =
        (static_cast<std::uint64_t>(static_cast<std::uint32_t>(a)) << 32) | static_cast<std::uint32_t>(b);
    const auto [it, added] = ids_.emplace(key, static_cast<int>(pairs_.size()));
    if (added) pairs_.emplace_back(a, b);
    return it->second;
  }
  const std::pair<int, int>& operator[](int id) const { return pairs_[id]; }
  std::size_t size() const { return pairs_.size(); }

 private:
  std::unordered_map<std::uint64_t, int> ids_;
  std::vector<std::pair<int, int>> pairs_;
};

}  // namespace

std::size_t Tape::ArcCount() const {
  std::size_t count = 0;
  for (const auto& state : arcs) count += state.size();
  return count;
}

Tape PassRightward(const Tape& tape, const Key& initial, const PassFunction& step, std::size_t max_states) {
  return ChooseRightward(tape, initial, OnlyOne(step), max_states);
}

Tape PassLeftward(const Tape& tape, const Key& initial, const PassFunction& step, std::size_t max_states) {
  return ChooseLeftward(tape, initial, OnlyOne(step), max_states);
}

Tape ChooseRightward(const Tape& tape, const Key& initial, const PassChoice& step, std::size_t max_states) {
  Tape result;
  Stepper stepper(tape, step, &result.symbols);
  Pairs pairs;
  for (int start : tape.starts) result.starts.push_back(pairs.Intern(start, stepper.State(initial)));
  for (std::size_t at = 0; at < pairs.size(); ++at) {
    if (pairs.size() > max_states) return Tape{};
    const auto [state, pass] = pairs[static_cast<int>(at)];
    std::vector<TapeArc> arcs;
    arcs.reserve(tape.arcs[state].size());
    for (const TapeArc& arc : tape.arcs[state]) {
      for (const Stepper::Way& way : stepper.Step(pass, arc.out))
        arcs.push_back({arc.in, way.symbol, pairs.Intern(arc.next, way.state), arc.weight + way.weight});
    }
    result.arcs.push_back(std::move(arcs));
    result.ends.push_back(tape.ends[state]);
  }
  return result;
}

Tape ChooseLeftward(const Tape& tape, const Key& initial, const PassChoice& step, std::size_t max_states) {
  Tape result;
  Stepper stepper(tape, step, &result.symbols);
  Pairs pairs;
  std::vector<std::vector<TapeArc>> into(tape.arcs.size());  // `next` is the state the arc comes from
  for (std::size_t state = 0; state < tape.arcs.size(); ++state) {
    for (const TapeArc& arc : tape.arcs[state])
      into[arc.next].push_back({arc.in, arc.out, static_cast<int>(state), arc.weight});
  }
  const int pass_start = stepper.State(initial);
  for (std::size_t state = 0; state < tape.arcs.size(); ++state) {
    if (tape.ends[state]) pairs.Intern(static_cast<int>(state), pass_start);
  }
  const std::size_t ends = pairs.size();
  for (std::size_t at = 0; at < pairs.size(); ++at) {
    if (pairs.size() > max_states) return Tape{};
    const auto [state, pass] = pairs[static_cast<int>(at)];
    if (result.arcs.size() < pairs.size()) result.arcs.resize(pairs.size());
    for (const TapeArc& arc : into[state]) {
      for (const Stepper::Way& way : stepper.Step(pass, arc.out)) {
        const int source = pairs.Intern(arc.next, way.state);
        if (result.arcs.size() < pairs.size()) result.arcs.resize(pairs.size());
        result.arcs[source].push_back({arc.in, way.symbol, static_cast<int>(at), arc.weight + way.weight});
      }
    }
  }
  result.ends.assign(pairs.size(), 0);
  for (std::size_t end = 0; end < ends; ++end) result.ends[end] = 1;
  std::vector<char> is_start(tape.arcs.size(), 0);
  for (int start : tape.starts) is_start[start] = 1;
  for (std::size_t at = 0; at < pairs.size(); ++at) {
    if (is_start[pairs[static_cast<int>(at)].first]) result.starts.push_back(static_cast<int>(at));
  }
  return result;
}

}  // namespace tiersmith
