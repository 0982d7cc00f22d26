// Tests of slots, runs of boundaries, and the search for ways of matching (matching.h).
#include "graph/matching.h"

#include <algorithm>

namespace tiersmith::graph {
namespace {

// The weakest boundary that bounds a domain.
constexpr Boundary EdgeOf(Domain domain) {
  switch (domain) {
    case Domain::kMorpheme:
      return Boundary::kMorpheme;
    case Domain::kStem:  // and more: View::StemOf
    case Domain::kHost:
      return Boundary::kClitic;
    case Domain::kWord:
      return Boundary::kWord;
    case Domain::kPhrase:
      return Boundary::kPhrase;
  }
  return Boundary::kWord;
}

constexpr std::uint64_t kStemTag = 1, kSuffixTag = 4;  // Grammar::tags begins with the four kinds

// Which side of a gap a label's slot lies on decides which nodes the gap is measured by.
bool Across(const Way::Gap& gap, int a, int b) {
  return (a <= gap.left && b >= gap.right) || (b <= gap.left && a >= gap.right);
}

// The nodes whose bearers may not stand in a plain gap of the rule.
using Nodes = boost::container::small_vector<NodeId, 6>;
Nodes MeasuredBy(const Clause& clause, const Way::Gap& gap, const LabelSlots& labels) {
  Nodes nodes;
  for (const Change& change : clause.changes) {
    if (change.op != Change::Op::kSpread && change.op != Change::Op::kMerge) continue;
    const int source = labels[change.source], target = labels[change.target];
    if (source >= 0 && target >= 0 && Across(gap, source, target)) nodes.push_back(change.node);
  }
  if (!nodes.empty()) return nodes;
  for (const Change& change : clause.changes) {
    if (clause.KindOf(change.target) != Clause::LabelKind::kSlot) continue;
    const int at = labels[change.target];
    if (at != gap.left && at != gap.right) continue;
    switch (change.op) {
      case Change::Op::kDelink:
      case Change::Op::kSetAs:
      case Change::Op::kFillAs:
        nodes.push_back(change.node);
        break;
      case Change::Op::kSet:
      case Change::Op::kFill:
        for (const Setting& setting : change.settings) nodes.push_back(setting.node);
        break;
      case Change::Op::kSpread:
      case Change::Op::kSetLiteral:  // of the root, which never counts
      case Change::Op::kInsert:
      case Change::Op::kDelete:
      case Change::Op::kLengthen:
      case Change::Op::kShorten:
      case Change::Op::kMerge:
        break;
    }
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
  // `fixed`: what labels and variables already stand for (unless), or null (where).
  Search(const View& view, const Rule& rule, const Clause& clause, const Pattern& pattern, const Match* fixed,
         bool with_slots = false)
      : view_(view),
        rule_(rule),
        clause_(clause),
        pattern_(pattern),
        fixed_(fixed),
        track_(view.track(pattern.names_empty)),
        edge_(EdgeOf(rule.within)),
        changed_(ChangedLabels(clause)),
        keeps_slots_(with_slots),
        labels_(clause.labels.size(), -1),
        variables_(static_cast<std::size_t>(clause.variables), kNone) {
    if (fixed != nullptr) variables_ = fixed->variables;
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
    std::size_t labelled = 0;                                    // where their labels begin in boundary_labels_
    bool joined = false;                                         // a & since then
    const PatternItem* gap = nullptr;                            // a gap since then
    bool boundary() const { return most != Boundary::kNone; }
    bool SameAs(const Place& other) const {
      return last == other.last && least == other.least && most == other.most && joined == other.joined &&
             gap == other.gap;
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
  using Tests = boost::container::small_vector<const FeatureTest*, 2>;

  void NumberSlotItems(const Pattern& pattern) {
    for (const PatternItem& item : pattern.items) {
      if (item.kind == PatternItem::Kind::kSlot) {
        slot_items_.push_back(&item);
        if (clause_.variables > 0) {
          with_variables_.emplace_back();
          CollectVariables(item.test, &with_variables_.back());
        }
      }
      for (const Pattern& alternative : item.alternatives) NumberSlotItems(alternative);
    }
  }

  static void CollectVariables(const SlotTest& test, Tests* tests) {
    for (const FeatureTest& feature : test.bundle) {
      if (feature.variable >= 0) tests->push_back(&feature);
    }
    for (const SlotTest& arg : test.args) CollectVariables(arg, tests);
  }

  std::size_t RowOf(const PatternItem& item) const {
    return std::find(slot_items_.begin(), slot_items_.end(), &item) - slot_items_.begin();
  }

  bool Passes(const PatternItem& item, int ordinal) {
    signed char& known = known_[RowOf(item) * view_.size() + ordinal];
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
    if (item.kind == PatternItem::Kind::kSlot) return Slot(item, after);
    if (item.kind == PatternItem::Kind::kGroup) return Repeat(item, 0, after);
    const Place before = place_;
    const bool labelled = item.kind == PatternItem::Kind::kBoundary && item.label >= 0;
    if (labelled) boundary_labels_.push_back(item.label);
    Pass(item);
    const bool end = Continue(after);
    place_ = before;
    if (labelled) boundary_labels_.pop_back();
    return end;
  }

  // What stands between slots.
  void Pass(const PatternItem& item) {
    switch (item.kind) {
      case PatternItem::Kind::kBoundary:
        place_.least = std::min(place_.least, item.boundary);
        place_.most = std::max(place_.most, item.boundary);
        break;
      case PatternItem::Kind::kGap:
        place_.gap = &item;
        break;
      case PatternItem::Kind::kSameMorpheme:
        place_.joined = true;
        break;
      case PatternItem::Kind::kSlot:
      case PatternItem::Kind::kGroup:
        break;
    }
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
      if (place_.gap != nullptr || place_.joined) return false;
      for (int at = 0; at < end; ++at) {
        if (track_.runs[at] >= place_.most && InSomeDomain(at) && Take(item, at, after)) return true;
      }
      return false;
    }
    int at = place_.last + 1;
    if (place_.gap == nullptr) {
      return at < end && MayFollow(at) && Take(item, at, after);
    }
    if (place_.boundary()) return false;  // a gap lies between slots
    for (; at < end && InsideDomain(at); ++at) {
      if (Take(item, at, after)) return true;
    }
    return false;
  }

  bool InSomeDomain(int at) const { return rule_.within != Domain::kStem || view_.StemOf(track_.slots[at]) != 0; }
  // May a match go on from the seen slot before this one?
  bool InsideDomain(int at) const {
    const Boundary run = track_.runs[at];
    if (run >= edge_ || (place_.joined && run != Boundary::kNone)) return false;
    return rule_.within != Domain::kStem || view_.StemOf(track_.slots[at - 1]) == view_.StemOf(track_.slots[at]);
  }
  bool MayFollow(int at) const {
    const Boundary run = track_.runs[at];
    return InsideDomain(at) && (!place_.boundary() || (place_.least == run && place_.most == run));
  }

  bool Take(const PatternItem& item, int at, const Rest& after) {
    const int ordinal = track_.slots[at];
    if (fixed_ != nullptr && !MayLabel(item, ordinal)) return false;
    if (!Passes(item, ordinal)) return false;
    const Place before = place_;
    if (place_.gap != nullptr) {
      gaps_.push_back({place_.gap, track_.slots[place_.last], ordinal, false, false});
    }
    LabelBoundaries(ordinal);
    place_ = Place();
    place_.last = at;
    place_.labelled = boundary_labels_.size();
    const int label_before = item.label >= 0 ? labels_[item.label] : -1;
    if (item.label >= 0) labels_[item.label] = ordinal;
    if (keeps_slots_) matched_.push_back(ordinal);
    const bool end = clause_.variables == 0 ? Continue(after) : Bind(with_variables_[RowOf(item)], 0, ordinal, after);
    if (keeps_slots_) matched_.pop_back();
    if (item.label >= 0) labels_[item.label] = label_before;
    place_ = before;
    if (place_.gap != nullptr) gaps_.pop_back();
    return end;
  }

  // The tests with variables of the item just taken, from `next` on.
  bool Bind(const Tests& tests, std::size_t next, int ordinal, const Rest& after) {
    if (next == tests.size()) return Continue(after);
    InstanceId& variable = variables_[static_cast<std::size_t>(tests[next]->variable)];
    const IdList values = view_.ValuesFor(*tests[next], ordinal);
    if (variable != kNone) {
      return std::find(values.begin(), values.end(), variable) != values.end() && Bind(tests, next + 1, ordinal, after);
    }
    bool end = false;
    for (InstanceId value : values) {
      variable = value;
      if ((end = Bind(tests, next + 1, ordinal, after))) break;
    }
    variable = kNone;
    return end;
  }

  // In `unless`: a label of the clause's own pattern keeps its item; one that only `unless` has is free.
  bool MayLabel(int label, int ordinal, int kept) const {
    return kept == ordinal || (kept < 0 && !Mentions(clause_.where, label));
  }
  bool MayLabel(const PatternItem& item, int ordinal) const {
    if (item.label >= 0 && !MayLabel(item.label, ordinal, fixed_->labels[item.label])) return false;
    return MayLabelBoundaries(ordinal);
  }
  bool MayLabelBoundaries(int ordinal) const {
    for (std::size_t i = place_.labelled; i < boundary_labels_.size(); ++i) {
      if (!MayLabel(boundary_labels_[i], ordinal, fixed_->labels[boundary_labels_[i]])) return false;
    }
    return true;
  }
  // The boundaries passed since the last slot are those before this one.
  void LabelBoundaries(int ordinal) {
    for (std::size_t i = place_.labelled; i < boundary_labels_.size(); ++i) labels_[boundary_labels_[i]] = ordinal;
  }

  bool Finish() {
    if (place_.last < 0 || place_.gap != nullptr || place_.joined) return false;
    const std::size_t behind = static_cast<std::size_t>(place_.last) + 1;
    if (track_.runs[behind] < place_.most) return false;
    const int ordinal = behind < track_.slots.size() ? track_.slots[behind] : view_.size();
    if (fixed_ != nullptr && !MayLabelBoundaries(ordinal)) return false;
    for (Way::Gap& gap : gaps_) {
      if (!Passable(gap)) return false;
    }
    if (fixed_ != nullptr) return true;
    LabelBoundaries(ordinal);
    ways_.push_back({{&clause_, labels_, variables_}, gaps_, matched_});
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
    for (NodeId node : MeasuredBy(clause_, gap, labels_)) {
      if (BearerBetween(view_, gap, node)) return false;
    }
    gap.left_changes = gap.right_changes = false;
    for (int label : changed_) {
      if (clause_.KindOf(label) != Clause::LabelKind::kSlot) continue;
      gap.left_changes |= labels_[label] == gap.left;
      gap.right_changes |= labels_[label] == gap.right;
    }
    return true;
  }

  const View& view_;
  const Rule& rule_;
  const Clause& clause_;
  const Pattern& pattern_;
  const Match* fixed_;
  const Track& track_;
  const Boundary edge_;
  const boost::container::small_vector<int, 4> changed_;
  const bool keeps_slots_;
  boost::container::small_vector<const PatternItem*, 8> slot_items_;
  std::vector<Tests> with_variables_;                      // per slot item, where the clause has variables
  boost::container::small_vector<signed char, 96> known_;  // per slot item and slot: 0 not tested yet
  Place place_;
  LabelSlots labels_;
  Bindings variables_;
  boost::container::small_vector<int, 2> boundary_labels_;
  std::vector<int> matched_;
  std::vector<Way::Gap> gaps_;
  std::vector<Way> ways_;
  std::size_t most_ = 256;
};

// ---- conditions and tags --------------------------------------------------------------------------

IdList BorneBy(const View& view, int ordinal, NodeId node) {
  return ordinal < 0 ? IdList() : view.graph().AllUnder(view.slot(ordinal), node);
}

bool EqualLists(const Graph& graph, const IdList& a, const IdList& b) {
  return std::equal(a.begin(), a.end(), b.begin(), b.end(),
                    [&](InstanceId x, InstanceId y) { return graph.Equal(x, y); });
}

bool Holds(const View& view, const Condition& condition, const LabelSlots& labels) {
  const Graph& graph = view.graph();
  const int left = labels[condition.left], right = labels[condition.right];
  const IdList a = Chosen(graph, BorneBy(view, left, condition.node), condition.left_member);
  const IdList b = Chosen(graph, BorneBy(view, right, condition.node), condition.right_member);
  const bool both = !a.empty() && !b.empty();
  const auto same = [&] { return both && Facing(a, left <= right) == Facing(b, left > right); };
  switch (condition.test) {
    case Condition::Test::kEqual:
      return both && EqualLists(graph, a, b);
    case Condition::Test::kUnequal:
      return !both || !EqualLists(graph, a, b);
    case Condition::Test::kSame:
      return same();
    case Condition::Test::kNotSame:
      return !same();
  }
  return false;
}

bool Holds(const View& view, const TagTest& test, const Match& match) {
  const std::uint64_t bit = std::uint64_t{1} << test.tag;
  const auto has = [&](int label) {
    const int at = match.labels[label];
    if (at < 0) return false;
    const bool word = test.scope == TagTest::Scope::kWord;
    return ((word ? view.WordTags(at) : view.MorphemeTags(at)) & bit) != 0;
  };
  if (test.scope == TagTest::Scope::kLabel) return has(test.label) == test.only;
  const auto changed = ChangedLabels(*match.clause);
  return std::all_of(changed.begin(), changed.end(),
                     [&](int label) { return match.labels[label] < 0 || has(label) == test.only; });
}

bool Discarded(const View& view, const Rule& rule, const Match& match) {
  const Clause& clause = *match.clause;
  return !std::all_of(clause.conditions.begin(), clause.conditions.end(), [&](const Condition& condition) {
    return Holds(view, condition, match.labels);
  }) || !std::all_of(clause.tags.begin(), clause.tags.end(), [&](const TagTest& test) {
    return Holds(view, test, match);
  }) || std::any_of(clause.unless.begin(), clause.unless.end(), [&](const Pattern& pattern) {
    return Search(view, rule, clause, pattern, &match).Any();
  });
}

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
  borne_.push_back({node.node, node.value, id});
  for (InstanceId daughter : node.daughters) Collect(daughter);
}

bool View::Bears(int ordinal, NodeId node) const {
  const Slot& slot = slots_[ordinal];
  for (std::uint32_t i = slot.begin; i < slot.end; ++i) {
    if (borne_[i].node == node) return true;
  }
  return false;
}

bool View::BorneByAnother(InstanceId id, int ordinal, FeatureTest::Side side) const {
  const int from = side == FeatureTest::Side::kRight ? ordinal + 1 : 0;
  const int to = side == FeatureTest::Side::kLeft ? ordinal : size();
  for (int other = from; other < to; ++other) {
    if (other == ordinal) continue;
    for (std::uint32_t i = slots_[other].begin; i < slots_[other].end; ++i) {
      if (borne_[i].id == id) return true;
    }
  }
  return false;
}

bool View::IsLong(int ordinal) const { return BorneByAnother(root(ordinal), ordinal, FeatureTest::Side::kEither); }

InstanceId View::FirstWithContentOf(InstanceId id) const {
  for (InstanceId other = 0; other < id; ++other) {
    if (graph_[other].node == graph_[id].node && graph_.Equal(other, id)) return other;
  }
  return id;
}

IdList View::ValuesFor(const FeatureTest& test, int ordinal) const {
  const TreeNode::Type type = graph_.tree()[test.node].type;
  const bool differs = test.kind == FeatureTest::Kind::kDiffers;
  const Slot& slot = slots_[ordinal];
  IdList values;
  if (type == TreeNode::Type::kBare) {
    values.push_back(Bears(ordinal, test.node) != differs ? 1 : 0);
    return values;
  }
  IdList borne;
  for (std::uint32_t i = slot.begin; i < slot.end; ++i) {
    if (borne_[i].node == test.node) borne.push_back(borne_[i].id);
  }
  if (borne.empty()) return values;
  if (test.part == FeatureTest::Part::kFirst) borne = {borne.front()};
  if (test.part == FeatureTest::Part::kLast) borne = {borne.back()};
  for (InstanceId id : borne) {
    const InstanceId value = type == TreeNode::Type::kClass ? FirstWithContentOf(id)
                             : differs                      ? 1u - graph_[id].value
                                                            : graph_[id].value;
    if (std::find(values.begin(), values.end(), value) == values.end()) values.push_back(value);
  }
  return values;
}

bool View::Passes(const FeatureTest& test, int ordinal) const {
  const Slot& slot = slots_[ordinal];
  bool bears = false, any = false, first = false, last = false;
  for (std::uint32_t i = slot.begin; i < slot.end; ++i) {
    if (borne_[i].node != test.node) continue;
    last = borne_[i].value == test.value;
    if (!bears) first = last;
    any |= last;
    bears = true;
  }
  const bool value = test.part == FeatureTest::Part::kAny ? any : test.part == FeatureTest::Part::kFirst ? first : last;
  const auto shared = [&] {
    return std::any_of(borne_.begin() + slot.begin, borne_.begin() + slot.end, [&](const Borne& borne) {
      return borne.node == test.node && BorneByAnother(borne.id, ordinal, test.side);
    });
  };
  switch (test.kind) {
    case FeatureTest::Kind::kBears:
      return bears;
    case FeatureTest::Kind::kLacks:
      return !bears;
    case FeatureTest::Kind::kHasValue:
      return value;
    case FeatureTest::Kind::kLacksValue:
      return !value;
    case FeatureTest::Kind::kAgrees:
    case FeatureTest::Kind::kDiffers:
      return !ValuesFor(test, ordinal).empty();
    case FeatureTest::Kind::kShared:
      return shared();
    case FeatureTest::Kind::kUnshared:
      return bears && !shared();
    case FeatureTest::Kind::kLong:
      return IsLong(ordinal);
    case FeatureTest::Kind::kShort:
      return !IsLong(ordinal);
    case FeatureTest::Kind::kHalfFirst:
      return IsLong(ordinal) && !BorneByAnother(slot.root, ordinal, FeatureTest::Side::kLeft);
    case FeatureTest::Kind::kHalfSecond:
      return BorneByAnother(slot.root, ordinal, FeatureTest::Side::kLeft);
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
      return rooted && std::all_of(test.bundle.begin(), test.bundle.end(),
                                   [&](const FeatureTest& t) { return Passes(t, ordinal); });
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

// ---- morphemes, stems, words ----------------------------------------------------------------------

std::uint64_t View::MorphemeTags(int ordinal) const {
  if (ordinal >= size()) return 0;
  for (int i = item(ordinal) - 1; i >= 0; --i) {
    if (graph_.items[i].kind == FormItem::Kind::kBoundary) return graph_.items[i].tags;
  }
  return 0;
}

std::uint64_t View::WordTags(int ordinal) const {
  if (ordinal >= size()) return 0;
  const auto boundary = [&](int i) { return graph_.items[i].boundary; };
  std::uint64_t tags = 0;
  for (int i = item(ordinal) - 1; i >= 0; --i) {
    tags |= graph_.items[i].tags;
    if (boundary(i) >= Boundary::kWord) break;
  }
  const int end = static_cast<int>(graph_.items.size());
  for (int i = item(ordinal) + 1; i < end && boundary(i) < Boundary::kWord; ++i) tags |= graph_.items[i].tags;
  return tags;
}

int View::StretchOf(int ordinal, Boundary strength) const {
  return static_cast<int>(std::count_if(graph_.items.begin(), graph_.items.begin() + item(ordinal),
                                        [&](const FormItem& other) { return other.boundary >= strength; }));
}

int View::StemOf(int ordinal) const {
  int stems = 0;
  bool inside = false;
  for (int i = 0; i < item(ordinal); ++i) {
    const FormItem& opening = graph_.items[i];
    if (opening.kind != FormItem::Kind::kBoundary) continue;
    if (opening.boundary > Boundary::kMorpheme) inside = false;
    const bool stem = (opening.tags & kStemTag) != 0;
    if (stem && !inside) ++stems;
    inside = stem || (inside && (opening.tags & kSuffixTag) != 0);
  }
  return inside ? stems : 0;
}

std::vector<int> View::RunBefore(int ordinal, bool names_empty) const {
  std::vector<int> strongest;
  if (ordinal >= size()) return strongest;
  const auto seen = [&](int i) {
    return graph_.items[i].kind == FormItem::Kind::kSlot &&
           (names_empty || graph_.FindUnder(graph_.items[i].instance, kRootNode) != kNone);
  };
  int i = item(ordinal) - 1;
  for (; i >= 0 && !seen(i); --i) {
    const FormItem& passed = graph_.items[i];
    if (passed.kind != FormItem::Kind::kBoundary) continue;
    if (!strongest.empty() && graph_.items[strongest.front()].boundary < passed.boundary) strongest.clear();
    if (strongest.empty() || graph_.items[strongest.front()].boundary == passed.boundary) strongest.push_back(i);
  }
  if (i < 0) strongest.clear();  // the beginning of the form
  return strongest;
}

// ---- finding --------------------------------------------------------------------------------------

bool operator==(const Way& a, const Way& b) { return a.match == b.match && a.gaps == b.gaps && a.slots == b.slots; }
bool operator<(const Way& a, const Way& b) {
  return std::tie(a.match, a.gaps, a.slots) < std::tie(b.match, b.gaps, b.slots);
}

boost::container::small_vector<int, 4> ChangedLabels(const Clause& clause) {
  boost::container::small_vector<int, 4> labels;
  const auto add = [&](int label) {
    if (clause.KindOf(label) == Clause::LabelKind::kInserted) return;
    if (std::find(labels.begin(), labels.end(), label) == labels.end()) labels.push_back(label);
  };
  for (const Change& change : clause.changes) {
    add(change.target);
    if (change.op == Change::Op::kMerge) add(change.source);
  }
  return labels;
}

IdList Chosen(const Graph& graph, const IdList& list, const Member& member) {
  IdList chosen;
  switch (member.which) {
    case Member::Which::kWhole:
      chosen = list;
      break;
    case Member::Which::kValue:
      for (InstanceId id : list) {
        if (graph[id].value == member.value) chosen.push_back(id);
      }
      break;
    case Member::Which::kFirst:
      if (!list.empty()) chosen.push_back(list.front());
      break;
    case Member::Which::kLast:
      if (!list.empty()) chosen.push_back(list.back());
      break;
  }
  return chosen;
}

InstanceId Facing(const IdList& list, bool right) {
  if (list.empty()) return kNone;
  return right ? list.back() : list.front();
}

bool AsksForSlots(const Rule& rule) {
  return rule.sharing_blocked || rule.prefer != Rule::Prefer::kNone || rule.by_word;
}

std::vector<Way> FindWays(const View& view, const Rule& rule, const Clause& clause, bool with_slots) {
  std::vector<Way> ways = Search(view, rule, clause, clause.where, nullptr, with_slots).All();
  if (ways.empty() || (clause.conditions.empty() && clause.tags.empty() && clause.unless.empty())) return ways;
  ways.erase(std::remove_if(ways.begin(), ways.end(), [&](const Way& way) { return Discarded(view, rule, way.match); }),
             ways.end());
  return ways;
}

}  // namespace tiersmith::graph
