// Tests of slots, runs of boundaries, and the search for ways of matching (matching.h).
#include "graph/matching.h"

#include <algorithm>

namespace tiersmith::graph {
namespace {

constexpr bool InsideDomain(Boundary run) { return run < Boundary::kWord; }

// Which side of a gap a label's slot lies on decides which nodes the gap is measured by.
bool Across(const Way::Gap& gap, int a, int b) {
  return (a <= gap.left && b >= gap.right) || (b <= gap.left && a >= gap.right);
}

// The nodes whose bearers may not stand in a plain gap of the rule.
using Nodes = boost::container::small_vector<NodeId, 6>;
Nodes MeasuredBy(const Rule& rule, const Way::Gap& gap, const LabelSlots& labels) {
  Nodes nodes;
  for (const Change& change : rule.changes) {
    if (change.op != Change::Op::kSpread) continue;
    const int source = labels[change.source], target = labels[change.target];
    if (source >= 0 && target >= 0 && Across(gap, source, target)) nodes.push_back(change.node);
  }
  if (!nodes.empty()) return nodes;
  for (const Change& change : rule.changes) {
    const int at = labels[change.target];
    if (at != gap.left && at != gap.right) continue;
    if (change.op == Change::Op::kDelink) nodes.push_back(change.node);
    for (const Setting& setting : change.settings) nodes.push_back(setting.node);
  }
  return nodes;
}

bool BearerBetween(const View& view, const Way::Gap& gap, NodeId node) {
  if (node <= kRootNode) return false;  // the root never counts
  for (int slot = gap.left + 1; slot < gap.right; ++slot) {
    if (view.Bears(slot, node)) return true;
  }
  return false;
}

bool Mentions(const Pattern& pattern, int label) {
  return std::any_of(pattern.items.begin(), pattern.items.end(), [&](const PatternItem& item) {
    return item.label == label || std::any_of(item.alternatives.begin(), item.alternatives.end(),
                                              [&](const Pattern& p) { return Mentions(p, label); });
  });
}

class Search {
 public:
  // `fixed`: the slots that labels already have (unless), or null (where).
  Search(const View& view, const Rule& rule, const Pattern& pattern, const LabelSlots* fixed)
      : view_(view),
        rule_(rule),
        pattern_(pattern),
        fixed_(fixed),
        track_(view.track(pattern.names_empty)),
        labels_(rule.labels.size(), -1) {
    NumberSlotItems(pattern);
    known_.resize(slot_items_.size() * view.size(), 0);
  }

  // Every way, each once, by the slots of the labels from left to right.
  std::vector<Way> All() {
    if (!SomeItemHasNoSlot()) Continue({&pattern_, 0, nullptr, 0, {}, nullptr});
    if (ways_.size() > 1) KeepEachOnce();
    return std::move(ways_);
  }
  bool Any() { return !SomeItemHasNoSlot() && Continue({&pattern_, 0, nullptr, 0, {}, nullptr}); }

 private:
  // How far the search has come along the track.
  struct Place {
    int last = -1;  // the slot matched last, as a place on the track; -1: none yet
    Boundary least = Boundary::kPhrase, most = Boundary::kNone;  // boundary items since then
    const PatternItem* gap = nullptr;                            // a gap since then
    bool boundary() const { return most != Boundary::kNone; }
    bool SameAs(const Place& other) const {
      return last == other.last && least == other.least && most == other.most && gap == other.gap;
    }
  };
  // What is still to be matched: the items of a pattern from `next` on, then what follows the group it
  // stands in.
  struct Rest {
    const Pattern* pattern;
    std::size_t next;
    const PatternItem* group;  // the group the pattern is an alternative of, or null
    int times;                 // of the group, this one included
    Place start;               // where this repetition began
    const Rest* after;         // what follows the group
  };

  void NumberSlotItems(const Pattern& pattern) {
    for (const PatternItem& item : pattern.items) {
      if (item.kind == PatternItem::Kind::kSlot) slot_items_.push_back(&item);
      for (const Pattern& alternative : item.alternatives) NumberSlotItems(alternative);
    }
  }

  bool Passes(const PatternItem& item, int ordinal) {
    const std::size_t row = std::find(slot_items_.begin(), slot_items_.end(), &item) - slot_items_.begin();
    signed char& known = known_[row * view_.size() + ordinal];
    if (known == 0) known = view_.Passes(item.test, ordinal) ? 1 : -1;
    return known > 0;
  }

  bool SomeItemHasNoSlot() {
    for (const PatternItem& item : pattern_.items) {
      if (item.kind != PatternItem::Kind::kSlot) continue;
      if (std::none_of(track_.slots.begin(), track_.slots.end(), [&](int s) { return Passes(item, s); })) {
        return true;
      }
    }
    return false;
  }

  // Each returns true to end the search.
  bool Continue(const Rest& rest) {
    if (rest.next == rest.pattern->items.size()) {
      return rest.group == nullptr ? Finish() : EndOfGroup(rest);
    }
    const PatternItem& item = rest.pattern->items[rest.next];
    Rest after = rest;
    ++after.next;
    switch (item.kind) {
      case PatternItem::Kind::kSlot:
        return Slot(item, after);
      case PatternItem::Kind::kBoundary: {
        const Place before = place_;
        place_.least = std::min(place_.least, item.boundary);
        place_.most = std::max(place_.most, item.boundary);
        const bool end = Continue(after);
        place_ = before;
        return end;
      }
      case PatternItem::Kind::kGap: {
        const Place before = place_;
        place_.gap = &item;
        const bool end = Continue(after);
        place_ = before;
        return end;
      }
      case PatternItem::Kind::kGroup:
        return Repeat(item, 0, after);
    }
    return false;
  }

  bool Repeat(const PatternItem& group, int times, const Rest& after) {
    if (times >= group.min && Continue(after)) return true;
    if (group.max >= 0 && times >= group.max) return false;
    for (const Pattern& alternative : group.alternatives) {
      if (Continue({&alternative, 0, &group, times + 1, place_, &after})) return true;
    }
    return false;
  }

  bool EndOfGroup(const Rest& rest) {
    // A repetition beyond those required that moved nothing on would repeat for ever.
    if (rest.times > rest.group->min && place_.SameAs(rest.start)) return false;
    return Repeat(*rest.group, rest.times, *rest.after);
  }

  bool Slot(const PatternItem& item, const Rest& after) {
    const int end = static_cast<int>(track_.slots.size());
    if (place_.last < 0) {
      if (place_.gap != nullptr) return false;
      for (int at = 0; at < end; ++at) {
        if (track_.runs[at] >= place_.most && Take(item, at, after)) return true;
      }
      return false;
    }
    int at = place_.last + 1;
    if (place_.gap == nullptr) {
      return at < end && MayFollow(track_.runs[at]) && Take(item, at, after);
    }
    if (place_.boundary()) return false;  // a gap lies between slots
    for (; at < end && InsideDomain(track_.runs[at]); ++at) {
      if (Take(item, at, after)) return true;
    }
    return false;
  }

  bool MayFollow(Boundary run) const {
    return InsideDomain(run) && (!place_.boundary() || (place_.least == run && place_.most == run));
  }

  bool Take(const PatternItem& item, int at, const Rest& after) {
    const int ordinal = track_.slots[at];
    if (fixed_ != nullptr && item.label >= 0 && !MayLabel(item.label, ordinal)) return false;
    if (!Passes(item, ordinal)) return false;
    const Place before = place_;
    if (place_.gap != nullptr) {
      gaps_.push_back({place_.gap, track_.slots[place_.last], ordinal, false, false});
    }
    place_ = Place();
    place_.last = at;
    const int label_before = item.label >= 0 ? labels_[item.label] : -1;
    if (item.label >= 0) labels_[item.label] = ordinal;
    const bool end = Continue(after);
    if (item.label >= 0) labels_[item.label] = label_before;
    place_ = before;
    if (place_.gap != nullptr) gaps_.pop_back();
    return end;
  }

  // In `unless`: a label of the rule's own pattern keeps its slot; one that only `unless` has is free.
  bool MayLabel(int label, int ordinal) const {
    return (*fixed_)[label] == ordinal || ((*fixed_)[label] < 0 && !Mentions(rule_.where, label));
  }

  bool Finish() {
    if (place_.last < 0 || place_.gap != nullptr) return false;
    if (track_.runs[place_.last + 1] < place_.most) return false;
    for (Way::Gap& gap : gaps_) {
      if (!Passable(gap)) return false;
    }
    if (fixed_ != nullptr) return true;
    ways_.push_back({labels_, gaps_});
    if (ways_.size() >= most_) {  // quantities come to the same match in many ways
      KeepEachOnce();
      most_ = std::max(most_, 2 * ways_.size());
    }
    return false;
  }

  void KeepEachOnce() {
    std::sort(ways_.begin(), ways_.end());
    ways_.erase(std::unique(ways_.begin(), ways_.end()), ways_.end());
  }

  // Nothing that the gap is measured by stands in it; also notes which of its ends the rule changes.
  bool Passable(Way::Gap& gap) {
    if (gap.item->tier) return !BearerBetween(view_, gap, *gap.item->tier);
    if (fixed_ != nullptr) return true;  // in `unless` a plain gap passes over anything
    for (NodeId node : MeasuredBy(rule_, gap, labels_)) {
      if (BearerBetween(view_, gap, node)) return false;
    }
    gap.left_changes = gap.right_changes = false;
    for (const Change& change : rule_.changes) {
      gap.left_changes |= labels_[change.target] == gap.left;
      gap.right_changes |= labels_[change.target] == gap.right;
    }
    return true;
  }

  const View& view_;
  const Rule& rule_;
  const Pattern& pattern_;
  const LabelSlots* fixed_;
  const Track& track_;
  boost::container::small_vector<const PatternItem*, 8> slot_items_;
  boost::container::small_vector<signed char, 96> known_;  // per slot item and slot: 0 not tested yet
  Place place_;
  LabelSlots labels_;
  std::vector<Way::Gap> gaps_;
  std::vector<Way> ways_;
  std::size_t most_ = 256;
};

Boundary RunAfter(const Graph& graph, int item) {
  Boundary run = Boundary::kNone;
  for (std::size_t i = item + 1; i < graph.items.size(); ++i) {
    if (graph.items[i].kind == FormItem::Kind::kSlot) break;
    if (graph.items[i].kind == FormItem::Kind::kBoundary) run = std::max(run, graph.items[i].boundary);
  }
  return run;
}

}  // namespace

View::View(const Grammar& grammar, const Graph& graph) : grammar_(grammar), graph_(graph) {
  for (std::size_t i = 0; i < graph.items.size(); ++i) {
    const FormItem& item = graph.items[i];
    if (item.kind != FormItem::Kind::kSlot) continue;
    Slot slot;
    slot.slot = item.instance;
    slot.item = static_cast<int>(i);
    slot.begin = static_cast<std::uint32_t>(borne_.size());
    for (InstanceId daughter : graph[item.instance].daughters) {
      if (graph[daughter].node == kRootNode) slot.root = daughter;
      Collect(daughter);
    }
    slot.end = static_cast<std::uint32_t>(borne_.size());
    slots_.push_back(slot);
  }
  // Runs: the ends of the form count as ‖; a slot that is not seen lets the run go on.
  Boundary since_rooted = Boundary::kPhrase;
  Boundary since_any = Boundary::kPhrase;
  for (int i = 0; i < size(); ++i) {
    all_.slots.push_back(i);
    all_.runs.push_back(since_any);
    const Boundary run = RunAfter(graph, slots_[i].item);
    since_any = run;
    if (slots_[i].root == kNone) {
      since_rooted = std::max(since_rooted, run);
      continue;
    }
    rooted_.slots.push_back(i);
    rooted_.runs.push_back(since_rooted);
    since_rooted = run;
  }
  all_.runs.push_back(Boundary::kPhrase);
  rooted_.runs.push_back(Boundary::kPhrase);
}

void View::Collect(InstanceId id) {
  const Node& node = graph_[id];
  borne_.push_back({node.node, node.value});
  for (InstanceId daughter : node.daughters) Collect(daughter);
}

bool View::Bears(int ordinal, NodeId node) const {
  const Slot& slot = slots_[ordinal];
  for (std::uint32_t i = slot.begin; i < slot.end; ++i) {
    if (borne_[i].node == node) return true;
  }
  return false;
}

bool View::Passes(const FeatureTest& test, const Slot& slot) const {
  bool bears = false, value = false;
  for (std::uint32_t i = slot.begin; i < slot.end; ++i) {
    if (borne_[i].node != test.node) continue;
    bears = true;
    value |= borne_[i].value == test.value;
  }
  switch (test.kind) {
    case FeatureTest::Kind::kBears:
      return bears;
    case FeatureTest::Kind::kLacks:
      return !bears;
    case FeatureTest::Kind::kHasValue:
      return value;
    case FeatureTest::Kind::kLacksValue:
      return !value;
  }
  return false;
}

bool View::Passes(const SlotTest& test, int ordinal) const {
  const Slot& slot = slots_[ordinal];
  const bool rooted = slot.root != kNone;
  switch (test.op) {
    case SlotTest::Op::kAny:
      return rooted;
    case SlotTest::Op::kEmpty:
      return !rooted;
    case SlotTest::Op::kBundle:
      return rooted &&
             std::all_of(test.bundle.begin(), test.bundle.end(), [&](const FeatureTest& t) { return Passes(t, slot); });
    case SlotTest::Op::kLiteral:
      return rooted && grammar_.inventory.LiteralMatches(test.literal, graph_.Content(slot.root));
    case SlotTest::Op::kAnd:
      return std::all_of(test.args.begin(), test.args.end(), [&](const SlotTest& t) { return Passes(t, ordinal); });
    case SlotTest::Op::kOr:
      return std::any_of(test.args.begin(), test.args.end(), [&](const SlotTest& t) { return Passes(t, ordinal); });
    case SlotTest::Op::kNot:
      return rooted && !Passes(test.args.front(), ordinal);
  }
  return false;
}

bool operator==(const Way& a, const Way& b) { return a.labels == b.labels && a.gaps == b.gaps; }
bool operator<(const Way& a, const Way& b) { return a.labels != b.labels ? a.labels < b.labels : a.gaps < b.gaps; }

std::vector<Way> FindWays(const View& view, const Rule& rule) {
  std::vector<Way> ways = Search(view, rule, rule.where, nullptr).All();
  if (rule.unless.empty() || ways.empty()) return ways;
  ways.erase(std::remove_if(ways.begin(), ways.end(),
                            [&](const Way& way) {
                              return std::any_of(rule.unless.begin(), rule.unless.end(), [&](const Pattern& pattern) {
                                return Search(view, rule, pattern, &way.labels).Any();
                              });
                            }),
             ways.end());
  return ways;
}

}  // namespace tiersmith::graph
