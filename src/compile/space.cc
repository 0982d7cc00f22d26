#include "compile/space.h"

#include "compile/plan.h"

namespace tiersmith {
namespace {

void Collect(const LetterPart& part, const Tree& tree, std::vector<RuleSpace::Bearing>* bearings) {
  const std::vector<NodeId>& kinds = tree[part.node].daughters;
  for (std::size_t i = 0; i < kinds.size(); ++i) {
    (*bearings)[kinds[i]].mother = true;
    if (part.links >> i & 1u) (*bearings)[kinds[i]].bit = true;
  }
  for (const LetterPart& daughter : part.daughters) {
    ++(*bearings)[daughter.node].count;
    Collect(daughter, tree, bearings);
  }
}

}  // namespace

RuleSpace::RuleSpace(LetterClasses& classes, const Rule& rule, std::vector<NodeId> live)
    : classes_(classes), live_(std::move(live)), live_index_(classes.grammar().tree.nodes.size(), -1) {
  const NodeSet read = NodesRead(rule, tree());
  for (std::size_t i = 0; i < live_.size(); ++i) {
    live_index_[live_[i]] = static_cast<int>(i);
    watched_.push_back(read[live_[i]] || live_[i] == kRootNode);  // a sweep asks where a root begins
  }
}

const RuleSpace::Bearing& RuleSpace::Of(int class_id, NodeId node) const {
  while (static_cast<int>(bearings_.size()) <= class_id) {
    std::vector<Bearing> bearings(tree().nodes.size());
    const Letter& letter = classes_[static_cast<int>(bearings_.size())].visible;
    if (letter.kind == FormItem::Kind::kSlot) {
      bearings[kSlotNode].count = 1;
      bearings[kSlotNode].mother = true;
      Collect(letter.part, tree(), &bearings);
    }
    bearings_.push_back(std::move(bearings));
  }
  return bearings_[class_id][node];
}

NodeId RuleSpace::LowestAncestor(int class_id, NodeId node) const {
  NodeId at = tree()[node].mother;
  while (at != kSlotNode && Of(class_id, at).count == 0) at = tree()[at].mother;
  return at;
}

int RuleSpace::Room(int class_id, NodeId node) const {
  const TreeNode& kind = tree()[node];
  return kind.room.has_value() && !classes_.Matches(class_id, *kind.room) ? 1 : kind.max;
}

Key RuleSpace::LeftMarks(const Key& state, int class_id) const {
  Key marks(live_.size(), 0);
  if (!IsSlot(class_id)) return marks;
  for (std::size_t i = 0; i < live_.size(); ++i) {
    if (!watched_[i]) continue;
    const int mother = live_index_[tree()[live_[i]].mother];
    const bool linked = state[i] & kToRight;
    if (Of(class_id, live_[i]).count == 0) {
      marks[i] = linked ? kOver : 0;
      continue;
    }
    const bool same_mother = mother >= 0 && (marks[mother] & kFromLeft);
    const bool object_left = same_mother ? (state[i] & kObjectLeft) != 0 : linked;
    marks[i] = (linked ? kFromLeft : 0) | (object_left ? kObjectLeft : 0);
  }
  return marks;
}

Key RuleSpace::RightMarks(const Key& state, const Key& annotated) const {
  Key marks(live_.size(), 0);
  const int class_id = annotated[0];
  if (!IsSlot(class_id)) return marks;
  for (std::size_t i = 0; i < live_.size(); ++i) {
    const Bearing& bearing = Of(class_id, live_[i]);
    if (bearing.count == 0) continue;
    const int mother = live_index_[tree()[live_[i]].mother];
    const bool same_mother = mother >= 0 && (marks[mother] & kToRight);
    const bool linked = same_mother || bearing.bit;
    const bool object_right = same_mother ? (state[i] & kObjectRight) != 0 : bearing.bit;
    marks[i] = (linked ? kToRight : 0) | (object_right ? kObjectRight : 0);
  }
  return marks;
}

Tape RuleSpace::Annotate(const Tape& tape, std::size_t max_states) const {
  const Key start = LeftStart();
  Tape left = PassRightward(
      tape, start,
      [this](const Key& state, const Key& symbol) {
        PassStep step{state, symbol};
        const int class_id = symbol[0];
        const Key marks = LeftMarks(state, class_id);
        step.symbol.resize(1);
        step.symbol.insert(step.symbol.end(), marks.begin(), marks.end());
        if (!IsSlot(class_id)) return step;
        for (std::size_t i = 0; i < live_.size(); ++i) {
          const Bearing& bearing = Of(class_id, live_[i]);
          if (bearing.count == 0 || !watched_[i]) continue;
          const int mother = live_index_[tree()[live_[i]].mother];
          // The object mark is wanted only where the mother goes on: by then it is the same object.
          const bool mother_goes_on = mother >= 0 && (step.state[mother] & kToRight);
          const bool linked = bearing.bit || mother_goes_on;
          step.state[i] = (linked ? kToRight : 0) | (mother_goes_on ? marks[i] & kObjectLeft : 0);
        }
        return step;
      },
      max_states);
  return PassLeftward(
      left, start,
      [this](const Key& state, const Key& symbol) {
        PassStep step{state, symbol};
        if (!IsSlot(symbol[0])) return step;
        const Key marks = RightMarks(state, symbol);
        for (std::size_t i = 0; i < live_.size(); ++i) {
          step.symbol[1 + i] |= marks[i];
          if (Of(symbol[0], live_[i]).count == 0) continue;
          const int mother = live_index_[tree()[live_[i]].mother];
          const bool mother_goes_on = mother >= 0 && (!watched_[mother] || (symbol[1 + mother] & kFromLeft));
          step.state[i] = mother_goes_on ? marks[i] & kObjectRight : 0;
        }
        return step;
      },
      max_states);
}

}  // namespace tiersmith
