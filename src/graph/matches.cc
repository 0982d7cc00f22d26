// Judging matches (matches.h).
#include "graph/matches.h"

#include <algorithm>

namespace tiersmith::graph {
namespace {

using Nodes = boost::container::small_vector<NodeId, 8>;

// ---- sharing blocked ------------------------------------------------------------------------------

// What a set says of nodes: those it mentions, and those it says are shared. `long` is said of the root.
void Mentioned(const SlotTest& test, bool denied, Nodes* nodes, Nodes* shared) {
  for (const FeatureTest& feature : test.bundle) {
    nodes->push_back(feature.node);
    switch (feature.kind) {
      case FeatureTest::Kind::kShared:
      case FeatureTest::Kind::kLong:
      case FeatureTest::Kind::kHalfFirst:
      case FeatureTest::Kind::kHalfSecond:
        if (!denied) shared->push_back(feature.node);
        break;
      case FeatureTest::Kind::kBears:
      case FeatureTest::Kind::kLacks:
      case FeatureTest::Kind::kHasValue:
      case FeatureTest::Kind::kLacksValue:
      case FeatureTest::Kind::kAgrees:
      case FeatureTest::Kind::kDiffers:
      case FeatureTest::Kind::kUnshared:
      case FeatureTest::Kind::kShort:
        break;
    }
  }
  if (test.op == SlotTest::Op::kLiteral) nodes->push_back(kRootNode);
  for (const SlotTest& arg : test.args) Mentioned(arg, denied || test.op == SlotTest::Op::kNot, nodes, shared);
}

void MentionedAt(const Pattern& pattern, int label, Nodes* nodes, Nodes* shared) {
  for (const PatternItem& item : pattern.items) {
    if (item.kind == PatternItem::Kind::kSlot && item.label == label) Mentioned(item.test, false, nodes, shared);
    for (const Pattern& alternative : item.alternatives) MentionedAt(alternative, label, nodes, shared);
  }
}

void MentionedByChange(const Change& change, int label, Nodes* nodes) {
  if (change.target != label && !(change.op == Change::Op::kMerge && change.source == label)) return;
  switch (change.op) {
    case Change::Op::kSpread:
    case Change::Op::kDelink:
    case Change::Op::kSetAs:
    case Change::Op::kFillAs:
    case Change::Op::kMerge:
      nodes->push_back(change.node);
      break;
    case Change::Op::kSet:
    case Change::Op::kFill:
      for (const Setting& setting : change.settings) nodes->push_back(setting.node);
      break;
    case Change::Op::kSetLiteral:
    case Change::Op::kLengthen:
    case Change::Op::kShorten:
      nodes->push_back(kRootNode);
      break;
    case Change::Op::kInsert:
    case Change::Op::kDelete:
      break;
  }
}

// Can one get down from `above` to any of `sought`, other than through one of `free`?
bool Reaches(const Graph& graph, InstanceId above, const IdList& sought, const IdList& free) {
  if (std::find(free.begin(), free.end(), above) != free.end()) return false;
  if (std::find(sought.begin(), sought.end(), above) != sought.end()) return true;
  const IdList& daughters = graph[above].daughters;
  return std::any_of(daughters.begin(), daughters.end(),
                     [&](InstanceId daughter) { return Reaches(graph, daughter, sought, free); });
}

}  // namespace

const char* NameOf(Failure failure) {
  switch (failure) {
    case Failure::kStands:
      return "";
    case Failure::kCapacity:
      return "capacity";
    case Failure::kCrossing:
      return "crossing";
    case Failure::kSharing:
      return "sharing";
    case Failure::kPreserving:
      return "preserving";
    case Failure::kPreferred:
      return "prefer";
  }
  return "";
}

// ---- from ways to matches -------------------------------------------------------------------------

Matches::Matches(const View& view, const Rule& rule) : view_(view), rule_(rule) {
  AddClause(rule, 0);
  int number = 0;
  for (const Clause& clause : rule.otherwise) AddClause(clause, ++number);
}

void Matches::AddClause(const Clause& clause, int number) {
  const Ways ways = FindWays(view_, rule_, clause, AsksForSlots(rule_));
  const std::size_t begin = candidates_.size();
  MatchOf match_of;
  for (const Way& way : ways) {
    if (candidates_.size() == begin || !(candidates_.back().match == way.match)) {  // those of one stand together
      candidates_.emplace_back();
      candidates_.back().match = way.match;
      candidates_.back().clause = number;
    }
    match_of.push_back(static_cast<int>(candidates_.size()) - 1);
  }
  // A match stands if some way of it has no nearer slot in any of its gaps.
  boost::container::small_vector<char, 16> nearest(candidates_.size(), 0);
  for (std::size_t i = 0; i < ways.size(); ++i) {
    const std::size_t at = static_cast<std::size_t>(match_of[i]);
    if ((nearest[at] && !AsksForSlots(rule_)) || HasNearer(ways, match_of, ways[i])) continue;
    if (AsksForSlots(rule_)) NoteSlots(ways[i], !nearest[at], &candidates_[at]);
    nearest[at] = 1;
  }
  std::size_t end = begin;
  for (std::size_t i = begin; i < candidates_.size(); ++i) {
    if (!nearest[i]) continue;
    if (end != i) candidates_[end] = std::move(candidates_[i]);
    ++end;
  }
  candidates_.resize(end);
}

// What the slots of one way more, the first or a further one, say of a match.
void Matches::NoteSlots(const Way& way, bool is_first, Candidate* candidate) const {
  const bool shared = rule_.sharing_blocked && SharedOutside(way);
  candidate->shared_outside = shared && (is_first || candidate->shared_outside);
  const int first = way.slots.front();
  const bool further = rule_.prefer == Rule::Prefer::kRight ? first > candidate->first : first < candidate->first;
  if (is_first || further) candidate->first = first;
}

// In some gap with a changed end: would the rule apply at a slot nearer to the other end?
bool Matches::HasNearer(const Ways& ways, const MatchOf& match_of, const Way& way) {
  for (const Way::Gap& gap : way.gaps) {
    if (gap.item->tier || (!gap.left_changes && !gap.right_changes)) continue;
    for (std::size_t i = 0; i < ways.size(); ++i) {
      const auto nearer = [&](const Way::Gap& other) { return IsNearer(other, gap); };
      if (!std::any_of(ways[i].gaps.begin(), ways[i].gaps.end(), nearer)) continue;
      if (rule_.sharing_blocked && SharedOutside(ways[i])) continue;
      if (Judged(static_cast<std::size_t>(match_of[i])).failure == Failure::kStands) return true;
    }
  }
  return false;
}

bool Matches::IsNearer(const Way::Gap& other, const Way::Gap& gap) {
  if (other.item != gap.item) return false;
  const auto inside = [&](int slot) { return slot > gap.left && slot < gap.right; };
  return (gap.left_changes && other.right == gap.right && inside(other.left)) ||
         (gap.right_changes && other.left == gap.left && inside(other.right));
}

// ---- judging one match ----------------------------------------------------------------------------

const Matches::Candidate& Matches::Judged(std::size_t i) {
  if (!candidates_[i].judged) Judge(&candidates_[i]);
  return candidates_[i];
}

void Matches::Judge(Candidate* candidate) const {
  candidate->judged = true;
  Requests alone(view_);
  alone.Add(candidate->match);
  if (alone.WithoutRoom(candidate->match) != nullptr) {
    candidate->failure = Failure::kCapacity;
    return;
  }
  candidate->changes = alone.Changes();
  if (candidate->changes && alone.CrossesAlone()) {
    candidate->failure = Failure::kCrossing;
  } else if (candidate->changes && rule_.preserving && !Preserves(alone)) {
    candidate->failure = Failure::kPreserving;
  }
}

// Is every root whose tree the match changes, or that it brings in, then spelled by a symbol of `segments`?
bool Matches::Preserves(const Requests& alone) const {
  if (!alone.Conflict().empty()) return true;  // there is no result to judge
  const Inventory& inventory = view_.grammar().inventory;
  const Graph& before = view_.graph();
  const Graph after = alone.Result();
  for (const FormItem& item : after.items) {
    if (item.kind != FormItem::Kind::kSlot) continue;
    const InstanceId root = after.FindUnder(item.instance, kRootNode);
    if (root == kNone) continue;
    const FeatureTree tree = after.Content(root);
    if (root < before.nodes.size() && before.Content(root) == tree) continue;
    const int symbol = inventory.Spell(tree).symbol;
    if (symbol < 0 || inventory.symbols[static_cast<std::size_t>(symbol)].kind != Symbol::Kind::kSegment) return false;
  }
  return true;
}

// Of the nodes mentioned for a changed item, or of those above them: is one held by a slot outside the match, other
// than through a node that the item's bundle says is shared? Where the item bears none, the nearest above it counts.
bool Matches::SharedOutside(const Way& way) const {
  const Graph& graph = view_.graph();
  const Clause& clause = *way.match.clause;
  for (int label : ChangedLabels(clause)) {
    const int at = way.match.labels[label];
    if (at < 0 || clause.KindOf(label) != Clause::LabelKind::kSlot) continue;
    Nodes mentioned, shared;
    MentionedAt(clause.where, label, &mentioned, &shared);
    for (const Change& change : clause.changes) MentionedByChange(change, label, &mentioned);
    for (const Condition& condition : clause.conditions) {
      if (condition.left == label || condition.right == label) mentioned.push_back(condition.node);
    }
    IdList sought, free;
    for (NodeId node : mentioned) {
      IdList there = graph.AllUnder(view_.slot(at), node);
      while (there.empty()) there = graph.AllUnder(view_.slot(at), node = graph.tree()[node].mother);
      sought.insert(sought.end(), there.begin(), there.end());
    }
    for (NodeId node : shared) {
      const IdList there = graph.AllUnder(view_.slot(at), node);
      free.insert(free.end(), there.begin(), there.end());
    }
    for (int slot = 0; slot < view_.size(); ++slot) {
      const bool outside = std::find(way.slots.begin(), way.slots.end(), slot) == way.slots.end();
      if (outside && Reaches(graph, view_.slot(slot), sought, free)) return true;
    }
  }
  return false;
}

// ---- among matches --------------------------------------------------------------------------------

std::vector<std::size_t> Matches::Standing(const std::vector<std::size_t>& among,
                                           const std::function<void(std::size_t, Failure)>& failed) {
  std::vector<std::size_t> able, standing, applying;
  for (std::size_t i : among) {
    const Candidate& candidate = Judged(i);
    const Failure failure =
        candidate.failure == Failure::kStands && candidate.shared_outside ? Failure::kSharing : candidate.failure;
    if (failure == Failure::kStands) {
      able.push_back(i);
    } else {
      failed(i, failure);
    }
  }
  for (std::size_t i : able) {
    const bool gives_way = candidates_[i].clause > 0 && std::any_of(able.begin(), able.end(), [&](std::size_t other) {
                             return candidates_[other].clause < candidates_[i].clause && Changed(other, i);
                           });
    if (!gives_way) standing.push_back(i);
  }
  if (rule_.prefer == Rule::Prefer::kNone) return standing;
  for (std::size_t i : standing) {
    const bool beaten =
        std::any_of(standing.begin(), standing.end(), [&](std::size_t other) { return Beats(other, i); });
    if (beaten) {
      failed(i, Failure::kPreferred);
    } else {
      applying.push_back(i);
    }
  }
  return applying;
}

// The items of the form that a match changes; of a boundary, all that would go.
std::vector<int> Matches::ChangedItems(const Match& match) const {
  std::vector<int> items;
  for (int label : ChangedLabels(*match.clause)) {
    const int at = match.labels[label];
    if (at < 0) continue;
    if (match.clause->KindOf(label) == Clause::LabelKind::kSlot) {
      items.push_back(view_.item(at));
    } else {
      const std::vector<int> run = view_.RunBefore(at, match.clause->where.names_empty);
      items.insert(items.end(), run.begin(), run.end());
    }
  }
  return items;
}

bool Matches::Changed(std::size_t earlier, std::size_t i) const {
  const std::vector<int> theirs = ChangedItems(candidates_[earlier].match);
  const std::vector<int> ours = ChangedItems(candidates_[i].match);
  return std::any_of(ours.begin(), ours.end(),
                     [&](int item) { return std::find(theirs.begin(), theirs.end(), item) != theirs.end(); });
}

int Matches::FirstSource(const Match& match) const {
  for (const Change& change : match.clause->changes) {
    if (change.source >= 0 && match.clause->KindOf(change.source) == Clause::LabelKind::kSlot) {
      return match.labels[change.source];
    }
  }
  return -1;
}

bool Matches::Beats(std::size_t other, std::size_t i) const {
  const auto place = [&](std::size_t k) {
    return std::make_pair(candidates_[k].first, FirstSource(candidates_[k].match));
  };
  const bool further = rule_.prefer == Rule::Prefer::kLeft ? place(other) < place(i) : place(other) > place(i);
  return further && InConflict(other, i);
}

// Neither alone, but both together ask for what cannot be met.
bool Matches::InConflict(std::size_t a, std::size_t b) const {
  Requests both(view_);
  both.Add(candidates_[a].match);
  both.Add(candidates_[b].match);
  if (both.Conflict().empty()) return false;
  for (std::size_t i : {a, b}) {
    Requests alone(view_);
    alone.Add(candidates_[i].match);
    if (!alone.Conflict().empty()) return false;
  }
  return true;
}

}  // namespace tiersmith::graph
