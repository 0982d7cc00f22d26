// Reduce and OutputsOf (compile/tape.h), the work that OpenFst does for the compiler. Reduce: the tape's arcs, with their
// weights, become labels of an acceptor, which OpenFst makes small. Merging states of the
// acceptor never moves a label, so the alignment of input and output stays. Determinising may blow up: it is tried under a
// budget, and the smaller result is kept. Plain transducer minimisation would push labels and break the alignment.
#include <fst/determinize.h>
#include <fst/flags.h>
#include <fst/minimize.h>
#include <fst/rmepsilon.h>
#include <fst/vector-fst.h>

#include <algorithm>
#include <cmath>
#include <map>
#include <tuple>

#include "compile/tape.h"

DECLARE_bool(fst_error_fatal);

namespace tiersmith {
namespace {

using Acceptor = fst::VectorFst<fst::StdArc>;

// What one label of the acceptor stands for: an arc without its end.
using ArcLabel = std::tuple<int, int, float>;  // read, written, weight

Acceptor ToAcceptor(const Tape& tape, std::vector<ArcLabel>* labels) {
  Acceptor acceptor;
  std::map<ArcLabel, int> ids;
  const auto label = [&](const TapeArc& arc) {
    const ArcLabel key{arc.in, arc.out, arc.weight};
    const auto [it, added] = ids.emplace(key, static_cast<int>(labels->size()) + 1);
    if (added) labels->push_back(key);
    return it->second;
  };
  for (std::size_t s = 0; s < tape.arcs.size(); ++s) {
    acceptor.AddState();
    if (tape.ends[s]) acceptor.SetFinal(static_cast<int>(s), fst::TropicalWeight::One());
  }
  const int start = acceptor.AddState();
  acceptor.SetStart(start);
  for (std::size_t s = 0; s < tape.arcs.size(); ++s) {
    for (const TapeArc& arc : tape.arcs[s]) {
      const int l = label(arc);
      acceptor.AddArc(static_cast<int>(s), fst::StdArc(l, l, fst::TropicalWeight::One(), arc.next));
    }
  }
  for (int s : tape.starts) {
    if (tape.ends[s]) acceptor.SetFinal(start, fst::TropicalWeight::One());
    for (const TapeArc& arc : tape.arcs[s]) {
      const int l = label(arc);
      acceptor.AddArc(start, fst::StdArc(l, l, fst::TropicalWeight::One(), arc.next));
    }
  }
  return acceptor;
}

// Determinised by subsets as far as the budget goes; false if it goes past it.
bool DeterminizeWithin(const Acceptor& acceptor, int max_states, Acceptor* result) {
  const fst::DeterminizeFst<fst::StdArc> lazy(acceptor);
  int count = 0;
  for (fst::StateIterator<fst::DeterminizeFst<fst::StdArc>> it(lazy); !it.Done(); it.Next()) {
    if (++count > max_states) return false;
  }
  *result = Acceptor(lazy);
  return result->Properties(fst::kError, false) == 0;
}

std::size_t Arcs(const Acceptor& acceptor) {
  std::size_t count = 0;
  for (int s = 0; s < acceptor.NumStates(); ++s) count += acceptor.NumArcs(s);
  return count;
}

bool HasWeights(const Tape& tape) {
  return std::any_of(tape.arcs.begin(), tape.arcs.end(), [](const std::vector<TapeArc>& arcs) {
    return std::any_of(arcs.begin(), arcs.end(), [](const TapeArc& arc) { return arc.weight != 0; });
  });
}

// States are merged that write the same, with the same probability, on every continuation: the coarsest partition in which
// all states of a block have the same total weight of arcs to each block (lumping of weighted automata: Buchholz 2008).
// Several ways of writing the same become one arc with the sum of their probabilities.
Tape Lumped(Tape tape) {
  const std::size_t n = tape.arcs.size();
  std::vector<int> block(n);
  for (std::size_t s = 0; s < n; ++s) block[s] = tape.ends[s];
  std::size_t count = 1 + static_cast<std::size_t>(std::count(tape.ends.begin(), tape.ends.end(), 1) > 0);
  using Sums = std::map<std::tuple<int, int, int>, double>;  // read, written, block -> probability
  const auto sums_of = [&](std::size_t s) {
    Sums sums;
    for (const TapeArc& arc : tape.arcs[s]) sums[{arc.in, arc.out, block[arc.next]}] += std::exp(-double{arc.weight});
    return sums;
  };
  while (true) {
    // Rounded: sums of the same terms in another order differ in their last digits.
    std::map<std::pair<int, std::vector<std::int64_t>>, int> signatures;
    std::vector<int> refined(n);
    for (std::size_t s = 0; s < n; ++s) {
      std::pair<int, std::vector<std::int64_t>> signature{block[s], {}};
      for (const auto& [key, sum] : sums_of(s)) {
        signature.second.insert(signature.second.end(), {std::get<0>(key), std::get<1>(key), std::get<2>(key),
                                                         std::llround(-std::log(sum) * 1e6)});
      }
      refined[s] = signatures.emplace(std::move(signature), static_cast<int>(signatures.size())).first->second;
    }
    block = std::move(refined);
    if (signatures.size() == count) break;
    count = signatures.size();
  }
  Tape result;
  result.symbols = std::move(tape.symbols);
  result.arcs.resize(count);
  result.ends.resize(count);
  std::vector<char> done(count, 0);
  for (std::size_t s = 0; s < n; ++s) {
    if (done[block[s]]) continue;
    done[block[s]] = 1;
    result.ends[block[s]] = tape.ends[s];
    for (const auto& [key, sum] : sums_of(s)) {
      const double weight = -std::log(sum);
      result.arcs[block[s]].push_back({std::get<0>(key), std::get<1>(key), std::get<2>(key),
                                       std::abs(weight) < 1e-9 ? 0.0F : static_cast<float>(weight)});
    }
  }
  // Of several starts, those in one block count together: each is kept, for they accept different strings, or the same
  // with probabilities that add up.
  for (int s : tape.starts) result.starts.push_back(block[s]);
  return result;
}

}  // namespace

Tape Reduce(Tape tape) {
  FLAGS_fst_error_fatal = false;
  if (tape.starts.empty()) return tape;
  if (HasWeights(tape)) return Lumped(std::move(tape));
  std::vector<ArcLabel> labels;
  Acceptor small = ToAcceptor(tape, &labels);
  Acceptor determined;
  const bool fits = DeterminizeWithin(small, 2 * small.NumStates() + 16, &determined);
  if (fits) fst::Minimize(&determined, static_cast<Acceptor*>(nullptr));
  fst::Minimize(&small, static_cast<Acceptor*>(nullptr), fst::kShortestDelta, /*allow_nondet=*/true);
  if (fits && Arcs(determined) <= Arcs(small)) small = determined;
  Tape result;
  result.symbols = std::move(tape.symbols);
  if (small.Start() == fst::kNoStateId) return result;
  result.starts = {small.Start()};
  result.arcs.resize(small.NumStates());
  result.ends.resize(small.NumStates());
  for (int s = 0; s < small.NumStates(); ++s) {
    result.ends[s] = small.Final(s) != fst::TropicalWeight::Zero();
    for (fst::ArcIterator<Acceptor> it(small, s); !it.Done(); it.Next()) {
      const auto& [in, out, weight] = labels[it.Value().ilabel - 1];
      result.arcs[s].push_back({in, out, it.Value().nextstate, weight});
    }
  }
  return result;
}

Tape OutputsOf(const Tape& tape, std::size_t max_states) {
  FLAGS_fst_error_fatal = false;
  Acceptor acceptor;
  for (std::size_t s = 0; s <= tape.arcs.size(); ++s) acceptor.AddState();
  const int start = static_cast<int>(tape.arcs.size());
  acceptor.SetStart(start);
  for (int s : tape.starts) acceptor.AddArc(start, fst::StdArc(0, 0, fst::TropicalWeight::One(), s));
  for (std::size_t s = 0; s < tape.arcs.size(); ++s) {
    if (tape.ends[s]) acceptor.SetFinal(static_cast<int>(s), fst::TropicalWeight::One());
    for (const TapeArc& arc : tape.arcs[s]) {
      const Key& string = tape.symbols[arc.out];
      int from = static_cast<int>(s);
      for (std::size_t k = 1; k + 1 < string.size(); k += 2) {
        const int to = k + 3 < string.size() ? acceptor.AddState() : arc.next;
        acceptor.AddArc(from, fst::StdArc(string[k] + 1, string[k] + 1, fst::TropicalWeight::One(), to));
        from = to;
      }
      if (string.size() == 1) acceptor.AddArc(from, fst::StdArc(0, 0, fst::TropicalWeight::One(), arc.next));
    }
  }
  fst::RmEpsilon(&acceptor);
  Acceptor determined;
  if (!DeterminizeWithin(acceptor, static_cast<int>(max_states), &determined)) return Tape{};
  fst::Minimize(&determined, static_cast<Acceptor*>(nullptr));
  Tape result;
  if (determined.Start() == fst::kNoStateId) return result;
  result.starts = {determined.Start()};
  result.arcs.resize(determined.NumStates());
  result.ends.resize(determined.NumStates());
  for (int s = 0; s < determined.NumStates(); ++s) {
    result.ends[s] = determined.Final(s) != fst::TropicalWeight::Zero();
    for (fst::ArcIterator<Acceptor> it(determined, s); !it.Done(); it.Next()) {
      const int c = it.Value().ilabel - 1;
      result.arcs[s].push_back({c, result.symbols.Intern(Key{0, c, -1}), it.Value().nextstate});
    }
  }
  return result;
}

}  // namespace tiersmith
