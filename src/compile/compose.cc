#include "compile/compose.h"

#include <algorithm>
#include <deque>
#include <map>
#include <set>

namespace tiersmith {
namespace {

// Keeps the states from which a string can end, numbers them again, and drops unused symbols.
Tape Trim(Tape&& tape) {
  const std::size_t n = tape.arcs.size();
  const std::vector<char> keep = CanEnd(tape.arcs, tape.ends);
  Tape result;
  std::vector<int> number(n, -1);
  int count = 0;
  for (std::size_t s = 0; s < n; ++s) {
    if (keep[s]) number[s] = count++;
  }
  result.arcs.resize(count);
  result.ends.resize(count);
  std::vector<int> symbol(tape.symbols.size(), -1);
  for (std::size_t s = 0; s < n; ++s) {
    if (!keep[s]) continue;
    result.ends[number[s]] = tape.ends[s];
    for (const TapeArc& arc : tape.arcs[s]) {
      if (!keep[arc.next]) continue;
      if (symbol[arc.out] < 0) symbol[arc.out] = result.symbols.Intern(tape.symbols[arc.out]);
      result.arcs[number[s]].push_back({arc.in, symbol[arc.out], number[arc.next], arc.weight});
    }
  }
  for (int s : tape.starts) {
    if (keep[s]) result.starts.push_back(number[s]);
  }
  return result;
}

// Runs the second machine over the letters that one arc of the first writes.
class StringRunner {
 public:
  struct Way {
    int state;
    Key written;
    float weight;
  };
  explicit StringRunner(const Tape& second) : second_(second) {
    by_class_.resize(second.arcs.size());
    for (std::size_t s = 0; s < second.arcs.size(); ++s) {
      for (const TapeArc& arc : second.arcs[s]) by_class_[s][arc.in].push_back(arc);
    }
  }

  // All ways from `state` over `string` ([flags, class, rest, ...]).
  std::vector<Way> Run(int state, const Key& string) const {
    std::vector<Way> ways{{state, Key{string[0]}, 0}};
    for (std::size_t k = 1; k + 1 < string.size() && !ways.empty(); k += 2) {
      std::vector<Way> next;
      for (const Way& way : ways) {
        const auto it = by_class_[way.state].find(string[k]);
        if (it == by_class_[way.state].end()) continue;
        for (const TapeArc& arc : it->second) {
          const Key& more = second_.symbols[arc.out];
          Way longer{arc.next, way.written, way.weight + arc.weight};
          longer.written[0] |= more[0];
          for (std::size_t m = 1; m + 1 < more.size(); m += 2) {
            longer.written.push_back(more[m]);
            longer.written.push_back(more[m + 1] < 0 ? string[k + 1] : more[m + 1]);
          }
          next.push_back(std::move(longer));
        }
      }
      ways = std::move(next);
    }
    return ways;
  }

 private:
  const Tape& second_;
  std::vector<std::unordered_map<int, std::vector<TapeArc>>> by_class_;
};

}  // namespace

Tape Compose(const Tape& first, const Tape& second, std::size_t max_states, std::size_t max_arcs, bool* over_budget) {
  *over_budget = false;
  const StringRunner runner(second);
  Tape result;
  std::unordered_map<std::uint64_t, int> ids;
  std::vector<std::pair<int, int>> pairs;
  const auto intern = [&](int a, int b) {
    const std::uint64_t key =
        (static_cast<std::uint64_t>(static_cast<std::uint32_t>(a)) << 32) | static_cast<std::uint32_t>(b);
    const auto [it, added] = ids.emplace(key, static_cast<int>(pairs.size()));
    if (added) pairs.emplace_back(a, b);
    return it->second;
  };
  for (int a : first.starts) {
    for (int b : second.starts) result.starts.push_back(intern(a, b));
  }
  std::size_t arcs = 0;
  for (std::size_t at = 0; at < pairs.size(); ++at) {
    const auto [a, b] = pairs[at];
    result.arcs.emplace_back();
    result.ends.push_back(first.ends[a] && second.ends[b]);
    for (const TapeArc& arc : first.arcs[a]) {
      for (StringRunner::Way& way : runner.Run(b, first.symbols[arc.out])) {
        const int symbol = result.symbols.Intern(way.written);
        result.arcs.back().push_back({arc.in, symbol, intern(arc.next, way.state), arc.weight + way.weight});
        ++arcs;
      }
    }
    if (pairs.size() > 8 * max_states || arcs > 8 * max_arcs) {  // before trimming and merging
      *over_budget = true;
      return Tape{};
    }
  }
  return Trim(std::move(result));
}

std::vector<int> ClassesWritten(const Tape& tape) {
  std::set<int> classes;
  for (int i = 0; i < tape.symbols.size(); ++i) {
    for (std::size_t k = 1; k + 1 < tape.symbols[i].size(); k += 2) classes.insert(tape.symbols[i][k]);
  }
  return {classes.begin(), classes.end()};
}

std::vector<TapeArc> ShortestThrough(const Tape& tape, const std::function<bool(const TapeArc&)>& wanted,
                                     std::size_t* at) {
  const int n = static_cast<int>(tape.arcs.size());
  // Breadth first over (state, has a wanted arc been used).
  struct From {
    int node = -1;
    TapeArc arc;
  };
  std::vector<From> from(2 * n);
  std::vector<char> seen(2 * n, 0);
  std::deque<int> queue;
  for (int s : tape.starts) {
    if (!seen[2 * s]) queue.push_back(2 * s);
    seen[2 * s] = 1;
  }
  int found = -1;
  while (!queue.empty() && found < 0) {
    const int node = queue.front();
    queue.pop_front();
    if ((node & 1) && tape.ends[node / 2]) {
      found = node;
      break;
    }
    for (const TapeArc& arc : tape.arcs[node / 2]) {
      for (int used : {node & 1, wanted(arc) ? 1 : 0}) {
        const int next = 2 * arc.next + (used | (node & 1));
        if (seen[next]) continue;
        seen[next] = 1;
        from[next] = {node, arc};
        queue.push_back(next);
      }
    }
  }
  std::vector<TapeArc> path;
  if (found < 0) return path;
  std::vector<char> flips;
  for (int node = found; from[node].node >= 0; node = from[node].node) {
    path.push_back(from[node].arc);
    flips.push_back((node & 1) && !(from[node].node & 1));
  }
  std::reverse(path.begin(), path.end());
  std::reverse(flips.begin(), flips.end());
  *at = static_cast<std::size_t>(std::find(flips.begin(), flips.end(), 1) - flips.begin());
  return path;
}

std::vector<TapeArc> ShortestWriting(const Tape& tape, const std::vector<int>& classes,
                                     std::vector<std::size_t>* written_by) {
  // Breadth first over (state, how many of the classes are written).
  using Node = std::pair<int, std::size_t>;
  std::map<Node, std::pair<Node, TapeArc>> from;
  std::deque<Node> queue;
  for (int s : tape.starts) {
    if (from.emplace(Node{s, 0}, std::make_pair(Node{-1, 0}, TapeArc{})).second) queue.push_back({s, 0});
  }
  std::vector<TapeArc> path;
  written_by->clear();
  for (; !queue.empty(); queue.pop_front()) {
    const auto [state, done] = queue.front();
    if (tape.ends[state] && done == classes.size()) break;
    for (const TapeArc& arc : tape.arcs[state]) {
      const Key& string = tape.symbols[arc.out];
      std::size_t now = done;
      bool fits = true;
      for (std::size_t k = 1; fits && k + 1 < string.size(); k += 2, ++now)
        fits = now < classes.size() && classes[now] == string[k];
      if (fits && from.emplace(Node{arc.next, now}, std::make_pair(queue.front(), arc)).second)
        queue.push_back({arc.next, now});
    }
  }
  if (queue.empty()) return path;
  for (Node at = queue.front(); from.at(at).first.first >= 0; at = from.at(at).first)
    path.push_back(from.at(at).second);
  std::reverse(path.begin(), path.end());
  for (std::size_t i = 0; i < path.size(); ++i)
    written_by->insert(written_by->end(), (tape.symbols[path[i].out].size() - 1) / 2, i);
  return path;
}

Tape MapSymbols(const Tape& tape, const std::function<Key(const Key&)>& map) {
  Tape result;
  result.starts = tape.starts;
  result.ends = tape.ends;
  std::vector<int> number;
  for (int i = 0; i < tape.symbols.size(); ++i) number.push_back(result.symbols.Intern(map(tape.symbols[i])));
  result.arcs = tape.arcs;
  for (auto& arcs : result.arcs) {
    for (TapeArc& arc : arcs) arc.out = number[arc.out];
  }
  return result;
}

}  // namespace tiersmith
