#include "run/lattice.h"

#include <algorithm>
#include <cmath>
#include <map>
#include <queue>
#include <unordered_map>

namespace tiersmith {
namespace {

// Drops nodes that no whole way goes through; the others keep their order.
Lattice Trimmed(const Lattice& lattice) {
  const std::vector<char> keep = CanEnd(lattice.arcs, lattice.ends);
  Lattice result;
  if (lattice.arcs.empty() || !keep[0]) return result;
  std::vector<int> number(lattice.arcs.size(), -1);
  int count = 0;
  for (std::size_t n = 0; n < keep.size(); ++n) {
    if (keep[n]) number[n] = count++;
  }
  for (std::size_t n = 0; n < keep.size(); ++n) {
    if (!keep[n]) continue;
    result.ends.push_back(lattice.ends[n]);
    result.arcs.emplace_back();
    for (const LatticeArc& arc : lattice.arcs[n]) {
      if (keep[static_cast<std::size_t>(arc.next)])
        result.arcs.back().push_back({arc.label, arc.probability, number[static_cast<std::size_t>(arc.next)]});
    }
  }
  return result;
}

// The nodes so that every arc leads onward.
std::vector<int> InOrder(const Lattice& lattice) {
  std::vector<int> coming(lattice.arcs.size(), 0), order;
  for (const auto& arcs : lattice.arcs) {
    for (const LatticeArc& arc : arcs) ++coming[static_cast<std::size_t>(arc.next)];
  }
  for (std::size_t n = 0; n < coming.size(); ++n) {
    if (coming[n] == 0) order.push_back(static_cast<int>(n));
  }
  for (std::size_t i = 0; i < order.size(); ++i) {
    for (const LatticeArc& arc : lattice.arcs[static_cast<std::size_t>(order[i])]) {
      if (--coming[static_cast<std::size_t>(arc.next)] == 0) order.push_back(arc.next);
    }
  }
  return order;
}

// Finds the likeliest strings best first. A prefix is as likely as all its continuations together, so a whole string that
// comes up is at least as likely as any still to come.
class Search {
 public:
  explicit Search(const Lattice& lattice) : lattice_(lattice), order_(InOrder(lattice)) {
    place_.resize(order_.size());
    for (std::size_t i = 0; i < order_.size(); ++i) place_[static_cast<std::size_t>(order_[i])] = static_cast<int>(i);
    rest_.assign(lattice.arcs.size(), 0);
    for (std::size_t i = order_.size(); i-- > 0;) {
      const auto n = static_cast<std::size_t>(order_[i]);
      rest_[n] = lattice.ends[n] ? 1 : 0;
      for (const LatticeArc& arc : lattice.arcs[n])
        rest_[n] += arc.probability * rest_[static_cast<std::size_t>(arc.next)];
    }
  }

  std::vector<Likely> Run(std::size_t most, bool* more) {
    std::vector<Likely> found;
    *more = false;
    if (lattice_.arcs.empty()) return found;
    Prefix start;
    start.reached[place_[0]] = 1;
    Open(std::move(start));
    while (!open_.empty()) {
      Prefix prefix = open_.top();
      open_.pop();
      if (prefix.whole) {
        if (found.size() == most) {
          *more = true;
          break;
        }
        found.push_back({std::move(prefix.labels), prefix.mass});
        continue;
      }
      Extend(prefix);
    }
    return found;
  }

 private:
  struct Prefix {
    std::vector<int> labels;
    std::map<int, double> reached;  // place in the order -> probability of being there after the labels
    double mass = 0;
    bool whole = false;

    friend bool operator<(const Prefix& a, const Prefix& b) {  // for the queue: the likelier comes up first
      if (a.mass != b.mass) return a.mass < b.mass;
      return a.labels > b.labels;
    }
  };

  // Follows the arcs that write nothing, and puts the prefix among the open ones.
  void Open(Prefix prefix) {
    for (auto it = prefix.reached.begin(); it != prefix.reached.end(); ++it) {  // arcs lead onward in the order
      for (const LatticeArc& arc :
           lattice_.arcs[static_cast<std::size_t>(order_[static_cast<std::size_t>(it->first)])]) {
        if (arc.label == Lattice::kNothing)
          prefix.reached[place_[static_cast<std::size_t>(arc.next)]] += it->second * arc.probability;
      }
    }
    double whole = 0, mass = 0;
    for (const auto& [place, probability] : prefix.reached) {
      const auto n = static_cast<std::size_t>(order_[static_cast<std::size_t>(place)]);
      if (lattice_.ends[n]) whole += probability;
      for (const LatticeArc& arc : lattice_.arcs[n]) {
        if (arc.label != Lattice::kNothing)
          mass += probability * arc.probability * rest_[static_cast<std::size_t>(arc.next)];
      }
    }
    if (whole > 0) {
      Prefix done;
      done.labels = prefix.labels;
      done.mass = whole;
      done.whole = true;
      open_.push(std::move(done));
    }
    prefix.mass = mass;
    if (mass > 0) open_.push(std::move(prefix));
  }

  void Extend(const Prefix& prefix) {
    std::map<int, Prefix> longer;  // by label
    for (const auto& [place, probability] : prefix.reached) {
      for (const LatticeArc& arc : lattice_.arcs[static_cast<std::size_t>(order_[static_cast<std::size_t>(place)])]) {
        if (arc.label == Lattice::kNothing) continue;
        longer[arc.label].reached[place_[static_cast<std::size_t>(arc.next)]] += probability * arc.probability;
      }
    }
    for (auto& [label, next] : longer) {
      next.labels = prefix.labels;
      next.labels.push_back(label);
      Open(std::move(next));
    }
  }

  const Lattice& lattice_;
  std::vector<int> order_, place_;
  std::vector<double> rest_;  // by node: the probability of all ways from it to an end
  std::priority_queue<Prefix> open_;
};

}  // namespace

Lattice Lattice::Of(const std::vector<int>& labels) {
  Lattice lattice;
  lattice.arcs.resize(labels.size() + 1);
  lattice.ends.assign(labels.size() + 1, 0);
  lattice.ends.back() = 1;
  for (std::size_t i = 0; i < labels.size(); ++i) lattice.arcs[i].push_back({labels[i], 1, static_cast<int>(i) + 1});
  return lattice;
}

int LetterNumbers::Number(const LetterClasses::Parts& letter) {
  const auto c = static_cast<std::size_t>(letter.class_id), r = static_cast<std::size_t>(letter.rest);
  if (by_class_.size() <= c) by_class_.resize(c + 1);
  if (by_class_[c].size() <= r) by_class_[c].resize(r + 1, -1);
  if (by_class_[c][r] < 0) {
    by_class_[c][r] = static_cast<int>(letters_.size());
    letters_.push_back(letter);
  }
  return by_class_[c][r];
}

Lattice Through(const Lattice& in, const Segment& segment, LetterNumbers* letters, std::int32_t* flags) {
  const Tape& machine = segment.machine;
  Lattice result;
  result.arcs.resize(1);
  result.ends.resize(1, 0);
  std::map<std::pair<int, int>, int> ids;
  std::vector<std::pair<int, int>> pairs;  // (node of `in`, state); -1: a node between, or the start
  const auto intern = [&](int node, int state) {
    const auto [it, added] = ids.emplace(std::make_pair(node, state), static_cast<int>(result.arcs.size()));
    if (added) {
      pairs.emplace_back(node, state);
      result.arcs.emplace_back();
      result.ends.push_back(in.ends[static_cast<std::size_t>(node)] && machine.ends[static_cast<std::size_t>(state)]);
    }
    return it->second;
  };
  if (in.arcs.empty()) return Lattice{};
  for (int start : machine.starts) {
    const int to = intern(0, start);
    result.arcs[0].push_back({Lattice::kNothing, 1, to});
  }
  std::vector<std::pair<std::size_t, std::int32_t>> flagged;  // node -> flags of some arc from it
  for (std::size_t at = 0; at < pairs.size(); ++at) {
    const auto [node, state] = pairs[at];
    const auto from = static_cast<std::size_t>(ids.at({node, state}));
    for (const LatticeArc& step : in.arcs[static_cast<std::size_t>(node)]) {
      if (step.label == Lattice::kNothing) {
        const int to = intern(step.next, state);
        result.arcs[from].push_back({Lattice::kNothing, step.probability, to});
        continue;
      }
      const LetterClasses::Parts letter = (*letters)[step.label];
      for (const TapeArc& arc : machine.arcs[static_cast<std::size_t>(state)]) {
        if (arc.in != letter.class_id) continue;
        const Key& string = machine.symbols[arc.out];
        double probability = step.probability * std::exp(-double{arc.weight});
        const int to = intern(step.next, arc.next);
        if (string[0] != 0) flagged.emplace_back(static_cast<std::size_t>(to), string[0]);
        std::size_t source = from;
        if (string.size() == 1) result.arcs[source].push_back({Lattice::kNothing, probability, to});
        for (std::size_t k = 1; k + 1 < string.size(); k += 2) {
          const bool last = k + 3 > string.size();
          int next = to;
          if (!last) {
            next = static_cast<int>(result.arcs.size());
            result.arcs.emplace_back();
            result.ends.push_back(0);
          }
          const int label = letters->Number({string[k], string[k + 1] < 0 ? letter.rest : string[k + 1]});
          result.arcs[source].push_back({label, probability, next});
          probability = 1;
          source = static_cast<std::size_t>(next);
        }
      }
    }
  }
  const std::vector<char> keep = CanEnd(result.arcs, result.ends);
  for (const auto& [node, flag] : flagged) {
    if (keep[node]) *flags |= flag;
  }
  return Trimmed(result);
}

Lattice Relabelled(const Lattice& in, const std::function<std::pair<int, int>(int state, int label)>& map) {
  Lattice result;
  if (in.arcs.empty()) return result;
  std::map<std::pair<int, int>, int> ids;
  std::vector<std::pair<int, int>> pairs;
  const auto intern = [&](int node, int state) {
    const auto [it, added] = ids.emplace(std::make_pair(node, state), static_cast<int>(pairs.size()));
    if (added) pairs.emplace_back(node, state);
    return it->second;
  };
  intern(0, 0);
  for (std::size_t at = 0; at < pairs.size(); ++at) {
    const auto [node, state] = pairs[at];
    result.arcs.emplace_back();
    result.ends.push_back(in.ends[static_cast<std::size_t>(node)]);
    for (const LatticeArc& arc : in.arcs[static_cast<std::size_t>(node)]) {
      const auto [after, label] =
          arc.label == Lattice::kNothing ? std::make_pair(state, Lattice::kNothing) : map(state, arc.label);
      result.arcs[at].push_back({label, arc.probability, intern(arc.next, after)});
    }
  }
  return result;
}

double Probability(const Lattice& lattice, const std::function<int(int state, int label)>& step,
                   const std::function<bool(int state)>& ends) {
  std::map<std::pair<int, int>, double> known;  // node, state -> the probability from there on
  const std::function<double(int, int)> from = [&](int node, int state) {
    const auto found = known.find({node, state});
    if (found != known.end()) return found->second;
    double sum = lattice.ends[static_cast<std::size_t>(node)] && ends(state) ? 1 : 0;
    for (const LatticeArc& arc : lattice.arcs[static_cast<std::size_t>(node)]) {
      const int after = arc.label == Lattice::kNothing ? state : step(state, arc.label);
      if (after >= 0) sum += arc.probability * from(arc.next, after);
    }
    known[{node, state}] = sum;
    return sum;
  };
  return lattice.arcs.empty() ? 0 : from(0, 0);
}

std::vector<Likely> Likeliest(const Lattice& lattice, std::size_t most, bool* more) {
  return Search(lattice).Run(most, more);
}

}  // namespace tiersmith
