#include "run/walker.h"

#include <algorithm>

namespace tiersmith {

Walker::Walker(const Segment& segment) : segment_(segment) {
  const Tape& machine = segment.machine;
  for (const auto& arcs : machine.arcs) {
    for (const TapeArc& arc : arcs) classes_ = std::max(classes_, arc.in + 1);
  }
  first_.reserve(machine.arcs.size() * classes_ + 1);
  for (const auto& arcs : machine.arcs) {
    std::vector<TapeArc> sorted = arcs;
    std::stable_sort(sorted.begin(), sorted.end(), [](const TapeArc& a, const TapeArc& b) { return a.in < b.in; });
    std::size_t at = 0;
    for (int c = 0; c < classes_; ++c) {
      first_.push_back(static_cast<std::int32_t>(arcs_.size()));
      for (; at < sorted.size() && sorted[at].in == c; ++at) arcs_.push_back(sorted[at]);
    }
  }
  first_.push_back(static_cast<std::int32_t>(arcs_.size()));
}

bool Walker::Run(std::vector<LetterClasses::Parts>* letters, std::int32_t* flags) {
  const Tape& machine = segment_.machine;
  steps_.clear();
  columns_.clear();
  columns_.push_back(0);
  for (int start : machine.starts) steps_.push_back({start, -1, -1});
  for (const LetterClasses::Parts& letter : *letters) {
    const std::size_t from = columns_.back(), to = steps_.size();
    columns_.push_back(to);
    if (letter.class_id >= classes_) return false;
    for (std::size_t s = from; s < to; ++s) {
      const std::size_t row = static_cast<std::size_t>(steps_[s].state) * classes_ + letter.class_id;
      for (std::int32_t a = first_[row]; a < first_[row + 1]; ++a) {
        steps_.push_back({arcs_[a].next, static_cast<std::int32_t>(s), arcs_[a].out});
      }
    }
    if (steps_.size() == to) return false;
  }
  std::int32_t at = -1;
  for (std::size_t s = columns_.back(); s < steps_.size(); ++s) {
    if (machine.ends[steps_[s].state]) at = static_cast<std::int32_t>(s);
  }
  if (at < 0) return false;
  // Backwards along the accepted path; what is written is put together from its end.
  written_.clear();
  for (std::size_t i = letters->size(); i-- > 0; at = steps_[at].previous) {
    const Key& string = machine.symbols[steps_[at].out];
    *flags |= string[0];
    for (std::size_t k = string.size(); k > 1; k -= 2) {
      written_.push_back({string[k - 2], string[k - 1] < 0 ? (*letters)[i].rest : string[k - 1]});
    }
  }
  letters->assign(written_.rbegin(), written_.rend());
  return true;
}

}  // namespace tiersmith
