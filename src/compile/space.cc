#include "compile/space.h"

#include <algorithm>

#include "compile/flatten.h"
#include "compile/plan.h"

namespace tiersmith {
namespace {

bool AsksOfLinks(const FeatureTest& test) {
  switch (test.kind) {
    case FeatureTest::Kind::kShared:
    case FeatureTest::Kind::kUnshared:
    case FeatureTest::Kind::kLong:
    case FeatureTest::Kind::kShort:
    case FeatureTest::Kind::kHalfFirst:
    case FeatureTest::Kind::kHalfSecond:
      return true;
    case FeatureTest::Kind::kBears:
    case FeatureTest::Kind::kLacks:
    case FeatureTest::Kind::kHasValue:
    case FeatureTest::Kind::kLacksValue:
    case FeatureTest::Kind::kAgrees:
    case FeatureTest::Kind::kDiffers:
      return false;
  }
  return false;
}

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
  stems_ = rule.within == Domain::kStem;
  for (const Clause* clause : ClausesOf(rule)) {
    for (const TagTest& test : clause->tags) {
      if (std::find(tags_.begin(), tags_.end(), test.tag) == tags_.end()) tags_.push_back(test.tag);
    }
  }
}

std::int32_t RuleSpace::TagsOf(int class_id) const {
  std::int32_t tags = 0;
  for (std::size_t i = 0; i < tags_.size(); ++i) {
    if (classes_[class_id].visible.tags >> tags_[i] & 1u) tags |= kMorphemeTags << i;
  }
  return tags;
}

// Of a boundary with this known before it: kInStem if both its sides are of one stem.
std::int32_t RuleSpace::StemGoesOn(std::int32_t state, int class_id) const {
  const bool weak = classes_[class_id].visible.boundary == Boundary::kMorpheme;
  return weak && (state & kInStem) ? AroundAfter(state, class_id) & kInStem : 0;
}

bool RuleSpace::Allows(const Key& annotated, const TagTest& test) const {
  const auto at = std::find(tags_.begin(), tags_.end(), test.tag) - tags_.begin();
  const std::int32_t scope = test.scope == TagTest::Scope::kWord ? kWordTags : kMorphemeTags;
  const bool tagged = (Around(annotated) & (scope << at)) != 0;
  return tagged == test.only;
}

// What is known behind a letter from what was known before it; read from left to right.
std::int32_t RuleSpace::AroundAfter(std::int32_t state, int class_id) const {
  const Letter& letter = classes_[class_id].visible;
  if (letter.kind != FormItem::Kind::kBoundary) return state;
  const std::int32_t tags = TagsOf(class_id);
  std::int32_t word = state & ~(kWordTags - 1) & (kInStem - 1);
  if (letter.boundary >= Boundary::kWord) word = 0;
  std::int32_t after = tags | word | tags * kWordTags;
  if (stems_) {
    constexpr std::uint64_t kStem = 1, kSuffix = 4;  // Grammar::tags
    const bool goes_on = (state & kInStem) && letter.boundary == Boundary::kMorpheme && (letter.tags & kSuffix);
    if ((letter.tags & kStem) || goes_on) after |= kInStem;
  }
  return after;
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

bool RuleSpace::MotherElsewhere(const Key& annotated, NodeId node) const {
  for (NodeId at = LowestAncestor(annotated[0], node); at != kSlotNode && at != kRootNode; at = tree()[at].mother) {
    if (Marks(annotated, at) & (kObjectLeft | kObjectRight)) return true;
  }
  return false;
}

int RuleSpace::Room(int class_id, NodeId node) const {
  const TreeNode& kind = tree()[node];
  return kind.room.has_value() && !classes_.Matches(class_id, *kind.room) ? 1 : kind.max;
}

bool RuleSpace::Matches(const Key& annotated, const SlotTest& test) const {
  const auto matches = [&](const SlotTest& inner) { return Matches(annotated, inner); };
  switch (test.op) {
    case SlotTest::Op::kAny:
    case SlotTest::Op::kEmpty:
    case SlotTest::Op::kLiteral:
      return classes_.Matches(annotated[0], test);
    case SlotTest::Op::kBundle:
      return classes_.Matches(annotated[0], test) &&
             std::all_of(test.bundle.begin(), test.bundle.end(),
                         [&](const FeatureTest& t) { return !AsksOfLinks(t) || Passes(annotated, t); });
    case SlotTest::Op::kAnd:
      return std::all_of(test.args.begin(), test.args.end(), matches);
    case SlotTest::Op::kOr:
      return std::any_of(test.args.begin(), test.args.end(), matches);
    case SlotTest::Op::kNot:
      return IsSlot(annotated[0]) && Of(annotated[0], kRootNode).count > 0 && !matches(test.args[0]);
  }
  return false;
}

Key RuleSpace::Inserted(const Change& insertion, const Key& host) const {
  Letter letter;
  letter.part.daughters.push_back(PartOf(insertion.inserted));
  Key annotated(AnnotatedSize(), 0);
  annotated[0] = classes_.Classify(letter).class_id;
  SetAround(&annotated, Around(host));
  for (std::size_t i = 0; i < live_.size(); ++i) {
    const bool bears = Of(annotated[0], live_[i]).count > 0;
    if (!bears && PassesOver(host, live_[i], insertion.before)) annotated[1 + i] = kOver;
  }
  return annotated;
}

// Tests of sharing and length, read off the marks.
bool RuleSpace::Passes(const Key& annotated, const FeatureTest& test) const {
  const std::int32_t marks = Marks(annotated, test.node) & (kFromLeft | kToRight);
  const bool bears = Of(annotated[0], test.node).count > 0;
  std::int32_t asked = kFromLeft | kToRight;
  if (test.side == FeatureTest::Side::kLeft) asked = kFromLeft;
  if (test.side == FeatureTest::Side::kRight) asked = kToRight;
  switch (test.kind) {
    case FeatureTest::Kind::kShared:
      return bears && (marks & asked);
    case FeatureTest::Kind::kUnshared:
      return bears && !(marks & asked);
    case FeatureTest::Kind::kLong:
      return marks != 0;
    case FeatureTest::Kind::kShort:
      return marks == 0;
    case FeatureTest::Kind::kHalfFirst:
      return marks == kToRight;
    case FeatureTest::Kind::kHalfSecond:
      return marks & kFromLeft;
    case FeatureTest::Kind::kBears:
    case FeatureTest::Kind::kLacks:
    case FeatureTest::Kind::kHasValue:
    case FeatureTest::Kind::kLacksValue:
    case FeatureTest::Kind::kAgrees:
    case FeatureTest::Kind::kDiffers:
      return true;
  }
  return true;
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
        step.state.back() = AroundAfter(state.back(), class_id);
        step.symbol.push_back(IsSlot(class_id) ? state.back() : StemGoesOn(state.back(), class_id));
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
        if (!IsSlot(symbol[0])) {
          const bool word_ends = classes_[symbol[0]].visible.boundary >= Boundary::kWord;
          step.state.back() = word_ends ? 0 : state.back() | TagsOf(symbol[0]) * kWordTags;
          return step;
        }
        step.symbol.back() |= state.back();
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
