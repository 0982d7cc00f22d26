// Collecting, judging and carrying out requests (requests.h).
#include "graph/requests.h"

#include <algorithm>
#include <limits>

#include "model/content.h"

namespace tiersmith::graph {
namespace {

bool Has(const IdList& list, InstanceId id) { return std::find(list.begin(), list.end(), id) != list.end(); }

bool SameValues(const Graph& graph, const IdList& list, const std::vector<Value>& values) {
  return std::equal(list.begin(), list.end(), values.begin(), values.end(),
                    [&](InstanceId id, Value value) { return graph[id].value == value; });
}

bool IsClass(const Tree& tree, NodeId node) { return tree[node].type == TreeNode::Type::kClass; }

// Adds a slot with the content that the change inserts.
InstanceId AddInserted(Graph& graph, const Change& change) {
  const InstanceId root = graph.AddContent(change.inserted);
  const InstanceId slot = graph.Add(kSlotNode, 0);
  graph.nodes[slot].daughters.push_back(root);
  return slot;
}

}  // namespace

Requests::Requests(const View& view) : view_(view), made_graph_(view.graph()) {}

// ---- the form before ------------------------------------------------------------------------------

bool Requests::IsMade(InstanceId id) const {
  return !IsOld(id) && std::any_of(made_.begin(), made_.end(), [&](const Made& made) { return made.made == id; });
}

IdList Requests::OldList(InstanceId mother, NodeId node) const {
  if (IsOld(mother)) return view_.graph().ListOf(mother, node);
  if (IsMade(mother)) return {};
  IdList list = made_graph_.ListOf(mother, node);
  list.erase(std::remove_if(list.begin(), list.end(), [&](InstanceId id) { return IsMade(id); }), list.end());
  return list;
}

IdList Requests::OldUnder(InstanceId slot, NodeId node) const {
  if (IsOld(slot)) return view_.graph().AllUnder(slot, node);
  IdList list = made_graph_.AllUnder(slot, node);
  list.erase(std::remove_if(list.begin(), list.end(), [&](InstanceId id) { return IsMade(id); }), list.end());
  return list;
}

FeatureTree Requests::OldContent(InstanceId id) const {
  return IsOld(id) ? view_.graph().Content(id) : made_graph_.Content(id);
}

bool Requests::OldEqual(InstanceId a, InstanceId b) const {
  return IsOld(a) && IsOld(b) ? view_.graph().Equal(a, b) : OldContent(a) == OldContent(b);
}

int Requests::OrdinalOf(InstanceId slot) const {
  for (int ordinal = 0; ordinal < view_.size(); ++ordinal) {
    if (view_.slot(ordinal) == slot) return ordinal;
  }
  return -1;
}

std::vector<int> Requests::SlotsOfRoot(InstanceId root) const {
  std::vector<int> slots;
  for (int ordinal = 0; ordinal < view_.size(); ++ordinal) {
    if (view_.root(ordinal) == root) slots.push_back(ordinal);
  }
  return slots;
}

// Inserted items stand between the slots, those on one side of a host in the order written.
Requests::Item Requests::ItemOf(const Match& match, int label) const {
  const int apart = 2 * (static_cast<int>(match.clause->changes.size()) + 1);
  if (match.clause->KindOf(label) != Clause::LabelKind::kInserted) {
    const int ordinal = match.labels[label];
    return ordinal < 0 ? Item() : Item{view_.slot(ordinal), ordinal * apart};
  }
  const Change* first = match.clause->changes.data();
  for (const Insertion& insertion : insertions_) {
    const Change& change = *insertion.change;
    if (change.inserted_label != label || insertion.host != match.labels[change.target]) continue;
    const int written = static_cast<int>(&change - first) + 1;
    return {insertion.slot, insertion.host * apart + (change.before ? written - apart / 2 : written)};
  }
  return {};
}

int Requests::RoomAt(InstanceId slot, NodeId node) const {
  const TreeNode& kind = view_.graph().tree()[node];
  if (!kind.room) return kind.max;
  const int ordinal = OrdinalOf(slot);
  const auto literal = [&](int index) {
    return view_.grammar().inventory.LiteralMatches(index, OldContent(OldUnder(slot, kRootNode).front()));
  };
  const bool passes = ordinal >= 0 ? view_.Passes(*kind.room, ordinal)
                                   : Passes(*kind.room, OldContent(OldUnder(slot, kRootNode).front()), literal);
  return passes ? kind.max : 1;
}

InstanceId Requests::Carried(const Change& change, const Match& match) const {
  const Item source = ItemOf(match, change.source), target = ItemOf(match, change.target);
  if (source.slot == kNone || target.slot == kNone) return kNone;
  return Facing(Chosen(made_graph_, OldUnder(source.slot, change.node), change.member),
                source.position < target.position);
}

// ---- room -----------------------------------------------------------------------------------------

const Change* Requests::WithoutRoom(const Match& match) const {
  for (const Change& change : match.clause->changes) {
    switch (change.op) {
      case Change::Op::kSpread:
        if (!SpreadHasRoom(change, match)) return &change;
        break;
      case Change::Op::kSet:
      case Change::Op::kFill:
        if (!SettingsHaveRoom(change, match)) return &change;
        break;
      case Change::Op::kSetAs:
      case Change::Op::kFillAs:
        if (!CopyHasRoom(change, match)) return &change;
        break;
      case Change::Op::kDelink:
      case Change::Op::kSetLiteral:
      case Change::Op::kInsert:
      case Change::Op::kDelete:
      case Change::Op::kLengthen:
      case Change::Op::kShorten:
      case Change::Op::kMerge:
        break;
    }
  }
  return nullptr;
}

bool Requests::SpreadHasRoom(const Change& spread, const Match& match) const {
  const InstanceId carried = Carried(spread, match);
  if (carried == kNone) return true;
  const Item source = ItemOf(match, spread.source), target = ItemOf(match, spread.target);
  const InstanceId mother = Facing(MothersOf(target.slot, spread.node), /*right=*/source.position > target.position);
  const IdList old = mother == kNone ? IdList() : OldList(mother, spread.node);
  if (Has(old, carried)) return true;
  IdList stays = old;
  for (const Change& change : match.clause->changes) {
    if (change.op != Change::Op::kDelink || change.target != spread.target || change.node != spread.node) continue;
    const IdList cut = Chosen(made_graph_, old, change.member);
    stays.erase(std::remove_if(stays.begin(), stays.end(), [&](InstanceId id) { return Has(cut, id); }), stays.end());
  }
  return static_cast<int>(stays.size()) + 1 <= RoomAt(target.slot, spread.node);
}

// A contour is more than one; where it would not fit, `set` and `fill` have no room either.
bool Requests::SettingsHaveRoom(const Change& change, const Match& match) const {
  const InstanceId slot = ItemOf(match, change.target).slot;
  if (slot == kNone) return true;
  return std::all_of(change.settings.begin(), change.settings.end(), [&](const Setting& setting) {
    if (setting.values.size() < 2) return true;
    const IdList old = OldUnder(slot, setting.node);
    if (change.op == Change::Op::kFill && !old.empty()) return true;
    if (SameValues(made_graph_, old, setting.values)) return true;
    return static_cast<int>(setting.values.size()) <= RoomAt(slot, setting.node);
  });
}

bool Requests::CopyHasRoom(const Change& change, const Match& match) const {
  const Item source = ItemOf(match, change.source), target = ItemOf(match, change.target);
  if (source.slot == kNone || target.slot == kNone) return true;
  const IdList copied = Chosen(made_graph_, OldUnder(source.slot, change.node), change.member);
  if (copied.size() < 2) return true;
  const IdList old = OldUnder(target.slot, change.node);
  if (change.op == Change::Op::kFillAs && !old.empty()) return true;
  const bool same = std::equal(old.begin(), old.end(), copied.begin(), copied.end(),
                               [&](InstanceId a, InstanceId b) { return OldEqual(a, b); });
  return same || static_cast<int>(copied.size()) <= RoomAt(target.slot, change.node);
}

// ---- collecting -----------------------------------------------------------------------------------

void Requests::Add(const Match& match, std::vector<int>* asked) {
  asking_ = asked;
  for (const Change& change : match.clause->changes) {
    if (change.op == Change::Op::kInsert) AddInsertion(change, match);
  }
  for (const Change& change : match.clause->changes) AddChange(change, match);
  asking_ = nullptr;
}

void Requests::Note(Ask ask, InstanceId mother, NodeId node, InstanceId what) {
  if (asking_ == nullptr) return;
  for (std::size_t i = 0; i < asked_.size(); ++i) {
    const Asked& known = asked_[i];
    if (known.ask == ask && known.mother == mother && known.node == node && known.what == what) {
      asking_->push_back(static_cast<int>(i));
      return;
    }
  }
  asking_->push_back(static_cast<int>(asked_.size()));
  asked_.push_back({ask, mother, node, what});
}

void Requests::AddChange(const Change& change, const Match& match) {
  if (change.op == Change::Op::kInsert) return;
  if (change.op == Change::Op::kDelete) {
    AddDeletion(change, match);
    return;
  }
  const InstanceId slot = ItemOf(match, change.target).slot;
  if (slot == kNone) return;
  switch (change.op) {
    case Change::Op::kSpread:
      AddSpread(change, match);
      break;
    case Change::Op::kDelink:
      AddDelink(change, match);
      break;
    case Change::Op::kSet:
    case Change::Op::kFill:
      for (const Setting& setting : change.settings) {
        AddSetting(setting, match, slot, change.op == Change::Op::kFill);
      }
      break;
    case Change::Op::kSetAs:
    case Change::Op::kFillAs:
      AddCopy(change, match);
      break;
    case Change::Op::kSetLiteral:
      AddLiteral(change, slot);
      break;
    case Change::Op::kLengthen: {
      const IdList roots = OldUnder(slot, kRootNode);
      if (!roots.empty()) AddLengthening(roots.front());
      break;
    }
    case Change::Op::kShorten:
      AddShortening(slot);
      break;
    case Change::Op::kMerge:
      AddMerge(change, match);
      break;
    case Change::Op::kInsert:
    case Change::Op::kDelete:
      break;
  }
}

void Requests::AddInsertion(const Change& change, const Match& match) {
  const int host = match.labels[change.target];
  if (host < 0) return;
  Note(Ask::kInsert, static_cast<InstanceId>(host), 0, static_cast<InstanceId>(&change - match.clause->changes.data()));
  const bool known = std::any_of(insertions_.begin(), insertions_.end(),
                                 [&](const Insertion& other) { return other.host == host && other.change == &change; });
  if (!known) insertions_.push_back({host, &change, AddInserted(made_graph_, change)});
}

void Requests::AddSpread(const Change& change, const Match& match) {
  const InstanceId carried = Carried(change, match);
  if (carried == kNone) return;
  const Item source = ItemOf(match, change.source), target = ItemOf(match, change.target);
  const bool from_left = source.position < target.position;
  const InstanceId mother = MakeMotherOf(target.slot, change.node, /*right=*/!from_left);
  if (Has(OldList(mother, change.node), carried)) return;  // held already: no line is drawn
  Note(from_left ? Ask::kLeft : Ask::kRight, mother, change.node, carried);
  Lines& lines = LinesAt(mother, change.node);
  IdList& side = from_left ? lines.left : lines.right;
  if (!Has(side, carried)) side.push_back(carried);
  lines.room = std::min(lines.room, RoomAt(target.slot, change.node));
}

// What the same match spreads to the same mother is not cut: only the mother's other instances are.
void Requests::AddDelink(const Change& change, const Match& match) {
  const InstanceId slot = ItemOf(match, change.target).slot;
  const IdList going = Chosen(made_graph_, OldUnder(slot, change.node), change.member);
  for (InstanceId mother : OldUnder(slot, view_.graph().tree()[change.node].mother)) {
    for (InstanceId id : OldList(mother, change.node)) {
      if (!Has(going, id)) continue;
      const auto& changes = match.clause->changes;
      const bool spread_too = std::any_of(changes.begin(), changes.end(), [&](const Change& other) {
        return other.op == Change::Op::kSpread && other.target == change.target && other.node == change.node &&
               Carried(other, match) == id;
      });
      if (spread_too) continue;
      Note(Ask::kCut, mother, change.node, id);
      Lines& lines = LinesAt(mother, change.node);
      if (!Has(lines.cut, id)) lines.cut.push_back(id);
    }
  }
}

void Requests::AddSetting(const Setting& setting, const Match& match, InstanceId slot, bool only_missing) {
  if (setting.variable >= 0) {
    if (match.variables[static_cast<std::size_t>(setting.variable)] == kNone) return;
    AskTrees(slot, setting.node, TreesOf(setting, match), only_missing);
    return;
  }
  const IdList all = OldUnder(slot, setting.node);
  if (only_missing && !all.empty()) return;
  if (all.empty() && setting.values.empty()) return;
  for (InstanceId mother : MakeMothersOf(slot, setting.node)) {
    const IdList old = OldList(mother, setting.node);
    if (!setting.values.empty() && !old.empty() && IsClass(view_.graph().tree(), setting.node)) continue;
    if (old.size() == setting.values.size() && SameValues(made_graph_, old, setting.values)) continue;
    AskContent({mother, setting.node, &setting.values, {}, false});
  }
}

// The same with what a variable or another item has.
void Requests::AskTrees(InstanceId slot, NodeId node, std::vector<FeatureTree> trees, bool only_missing) {
  const IdList all = OldUnder(slot, node);
  if (only_missing && (!all.empty() || trees.empty())) return;
  if (all.empty() && trees.empty()) return;
  for (InstanceId mother : MakeMothersOf(slot, node)) {
    const IdList old = OldList(mother, node);
    const bool same = std::equal(old.begin(), old.end(), trees.begin(), trees.end(),
                                 [&](InstanceId id, const FeatureTree& tree) { return OldContent(id) == tree; });
    if (!same) AskContent({mother, node, nullptr, trees, false});
  }
}

std::vector<FeatureTree> Requests::TreesOf(const Setting& setting, const Match& match) const {
  const InstanceId bound = match.variables[static_cast<std::size_t>(setting.variable)];
  const TreeNode::Type type = view_.graph().tree()[setting.node].type;
  if (type == TreeNode::Type::kClass) return {OldContent(bound)};
  const Value value = static_cast<Value>(setting.differs ? 1 - bound : bound);
  if (type != TreeNode::Type::kBare) return {{setting.node, value, {}}};
  if (value == 0) return {};
  return {{setting.node, 0, {}}};
}

void Requests::AddCopy(const Change& change, const Match& match) {
  const InstanceId source = ItemOf(match, change.source).slot;
  if (source == kNone) return;
  std::vector<FeatureTree> trees;
  for (InstanceId id : Chosen(made_graph_, OldUnder(source, change.node), change.member)) {
    trees.push_back(OldContent(id));
  }
  AskTrees(ItemOf(match, change.target).slot, change.node, std::move(trees), change.op == Change::Op::kFillAs);
}

void Requests::AddLiteral(const Change& change, InstanceId slot) {
  const IdList roots = OldUnder(slot, kRootNode);
  if (roots.empty() || OldContent(roots.front()) != change.inserted) {
    AskContent({slot, kRootNode, nullptr, {change.inserted}, change.is_long});
  } else if (change.is_long && SlotsOfRoot(roots.front()).size() < 2) {
    AddLengthening(roots.front());
  }
}

void Requests::AddLengthening(InstanceId root) {
  Note(Ask::kLengthen, root, kRootNode, 0);
  if (std::find(lengthened_.begin(), lengthened_.end(), root) == lengthened_.end()) lengthened_.push_back(root);
}

void Requests::AddShortening(InstanceId slot) {
  const IdList roots = OldUnder(slot, kRootNode);
  if (roots.empty()) return;
  const std::vector<int> slots = SlotsOfRoot(roots.front());
  if (slots.size() > 1) DeleteSlot(slots.back());
}

void Requests::AddDeletion(const Change& change, const Match& match) {
  const int at = match.labels[change.target];
  if (at < 0) return;
  if (match.clause->KindOf(change.target) == Clause::LabelKind::kSlot) {
    DeleteSlot(at);
    return;
  }
  for (int item : view_.RunBefore(at, match.clause->where.names_empty)) {
    Note(Ask::kDeleteBoundary, static_cast<InstanceId>(item), 0, 0);
    const bool known =
        std::find(boundary_deletions_.begin(), boundary_deletions_.end(), item) != boundary_deletions_.end();
    if (!known) boundary_deletions_.push_back(item);
  }
}

void Requests::DeleteSlot(int slot) {
  Note(Ask::kDelete, static_cast<InstanceId>(slot), 0, 0);
  if (!Deletes(slot)) deletions_.push_back(slot);
}

// Of the source's and the target's, those that face each other.
void Requests::AddMerge(const Change& change, const Match& match) {
  const Item source = ItemOf(match, change.source), target = ItemOf(match, change.target);
  if (source.slot == kNone) return;
  const bool from_left = source.position < target.position;
  const InstanceId kept = Facing(OldUnder(source.slot, change.node), from_left);
  const InstanceId gone = Facing(OldUnder(target.slot, change.node), !from_left);
  if (kept == kNone || gone == kNone || kept == gone) return;
  if (!OldEqual(kept, gone) || !AreNeighbours(kept, gone, match)) return;
  Note(Ask::kMerge, std::min(kept, gone), change.node, std::max(kept, gone));
  const InstanceId a = Surviving(kept), b = Surviving(gone);
  if (a != b) merges_.push_back({a, b});
}

// On the form before, with what this match inserts; where others insert between them, lines cross.
bool Requests::AreNeighbours(InstanceId a, InstanceId b, const Match& match) const {
  Graph graph = view_.graph();
  IdList inserted;
  for (const Insertion& insertion : insertions_) {
    const Change& change = *insertion.change;
    const std::vector<Change>& own = match.clause->changes;
    const bool of_match =
        &change >= own.data() && &change < own.data() + own.size() && insertion.host == match.labels[change.target];
    inserted.push_back(of_match ? AddInserted(graph, change) : kNone);
  }
  SetItems(graph, inserted, {});
  const std::vector<InstanceId> tier = graph.TierOf(graph[a].node);
  for (std::size_t i = 1; i < tier.size(); ++i) {
    if ((tier[i - 1] == a && tier[i] == b) || (tier[i - 1] == b && tier[i] == a)) return true;
  }
  return false;
}

InstanceId Requests::Surviving(InstanceId id) const {
  for (const Merged& merged : merges_) {
    if (merged.gone == id) return Surviving(merged.kept);
  }
  return id;
}

bool Requests::SameContent(const Content& a, const Content& b) const {
  if (a.is_long != b.is_long) return false;
  if (a.values != nullptr && b.values != nullptr) return *a.values == *b.values;
  const auto trees = [](const Content& content) {
    if (content.values == nullptr) return content.trees;
    std::vector<FeatureTree> listed;
    for (Value value : *content.values) listed.push_back({content.node, value, {}});
    return listed;
  };
  return trees(a) == trees(b);
}

void Requests::AskContent(Content content) {
  const bool made = content.values != nullptr && !content.values->empty();
  if (made && IsClass(view_.graph().tree(), content.node)) MakeUnder(content.mother, content.node);
  for (std::size_t i = 0; i < contents_.size(); ++i) {
    const Content& other = contents_[i];
    if (other.mother != content.mother || other.node != content.node) continue;
    if (SameContent(other, content)) {
      Note(Ask::kContent, content.mother, content.node, static_cast<InstanceId>(i));
      return;
    }
    disputed_ = content.mother;
    disputed_node_ = content.node;
  }
  Note(Ask::kContent, content.mother, content.node, static_cast<InstanceId>(contents_.size()));
  contents_.push_back(std::move(content));
}

Requests::Lines& Requests::LinesAt(InstanceId mother, NodeId node) {
  for (Lines& lines : lines_) {
    if (lines.mother == mother && lines.node == node) return lines;
  }
  lines_.push_back({mother, node, {}, {}, {}, std::numeric_limits<int>::max()});
  return lines_.back();
}

IdList Requests::MothersOf(InstanceId slot, NodeId node) const {
  return made_graph_.AllUnder(slot, view_.graph().tree()[node].mother);
}

InstanceId Requests::MakeMotherOf(InstanceId slot, NodeId node, bool right) {
  const NodeId kind = view_.graph().tree()[node].mother;
  const IdList there = made_graph_.AllUnder(slot, kind);
  return there.empty() ? MakeUnder(MakeMotherOf(slot, kind, right), kind) : Facing(there, right);
}

IdList Requests::MakeMothersOf(InstanceId slot, NodeId node) {
  MakeMotherOf(slot, node, false);
  return MothersOf(slot, node);
}

InstanceId Requests::MakeUnder(InstanceId above, NodeId node) {
  for (const Made& made : made_) {
    if (made.above == above && made.node == node) return made.made;
  }
  const InstanceId made = made_graph_.Add(node, 0);
  made_graph_.SetList(above, node, {made});
  made_.push_back({above, node, made});
  return made;
}

// ---- judging --------------------------------------------------------------------------------------

Requests::NewList Requests::Merge(const Lines& lines, bool also_equal) const {
  IdList kept = OldList(lines.mother, lines.node);
  kept.erase(std::remove_if(kept.begin(), kept.end(), [&](InstanceId id) { return Has(lines.cut, id); }), kept.end());
  NewList merged;
  merged.nothing_kept = kept.empty();
  for (InstanceId id : lines.left) {
    if (!also_equal && !kept.empty() && OldEqual(id, kept.front())) continue;
    merged.added_left.push_back(id);
  }
  for (InstanceId id : lines.right) {
    if (Has(merged.added_left, id)) continue;
    if (!also_equal && !kept.empty() && OldEqual(id, kept.back())) continue;
    merged.added_right.push_back(id);
  }
  merged.list = merged.added_left;
  merged.list.insert(merged.list.end(), kept.begin(), kept.end());
  merged.list.insert(merged.list.end(), merged.added_right.begin(), merged.added_right.end());
  return merged;
}

std::string Requests::LineConflict(const Lines& lines) const {
  const NewList merged = Merge(lines);
  if (merged.added_left.empty() && merged.added_right.empty()) return "";
  const std::string name = view_.graph().tree()[lines.node].name;
  if (static_cast<int>(merged.list.size()) > lines.room) return "more than one " + name + " spreads to it";
  if (merged.nothing_kept) {
    for (std::size_t i = 1; i < merged.list.size(); ++i) {
      if (OldEqual(merged.list[i - 1], merged.list[i])) return "two equal " + name + " spread to it";
    }
  }
  return "";
}

bool Requests::Changes() const {
  if (!insertions_.empty() || !deletions_.empty() || !contents_.empty() || !merges_.empty() || !lengthened_.empty() ||
      !boundary_deletions_.empty()) {
    return true;
  }
  return std::any_of(lines_.begin(), lines_.end(),
                     [this](const Lines& lines) { return Merge(lines).list != OldList(lines.mother, lines.node); });
}

std::vector<InstanceId> Requests::MothersChanged() const {
  std::vector<InstanceId> mothers;
  const auto add = [&](InstanceId mother) {
    if (IsOld(mother)) mothers.push_back(mother);
  };
  for (const Lines& lines : lines_) {
    if (Merge(lines).list != OldList(lines.mother, lines.node)) add(lines.mother);
  }
  for (const Content& content : contents_) add(content.mother);
  for (const Made& made : made_) add(made.above);
  for (const Merged& merged : merges_) {
    for (InstanceId id = 0; id < view_.graph().nodes.size(); ++id) {
      if (Has(view_.graph()[id].daughters, merged.gone)) add(id);
    }
  }
  return mothers;
}

bool Requests::CrossesAlone() const { return InsertionsCross() || LinesCross() || BeforeDeletions(true).Crosses(); }

// Insertions come before lines: they are made while all lines of the form before still stand.
bool Requests::InsertionsCross() const {
  if (insertions_.empty()) return false;
  Graph graph = view_.graph();
  IdList inserted;
  for (const Insertion& insertion : insertions_) inserted.push_back(AddInserted(graph, *insertion.change));
  SetItems(graph, inserted, {});
  return graph.Crosses();
}

// Lines come before contents: what spreads past another bearer crosses, though its source bears something new in the end.
bool Requests::LinesCross() const {
  if (lines_.empty() || contents_.empty()) return false;  // judged with the rest
  Graph graph = WithLines(true);
  SetItems(graph, InsertedSlots(), {});
  return graph.Crosses();
}

std::string Requests::CrossedTier() const {
  const std::optional<NodeId> node = (LinesCross() ? WithLines(true) : BeforeDeletions(true)).CrossedTier();
  return node ? view_.graph().tree()[*node].name : "";
}

std::string Requests::Conflict() const {
  const Tree& tree = view_.graph().tree();
  if (disputed_ != kNone) return "two different contents asked for " + tree[disputed_node_].name;
  for (const Lines& lines : lines_) {
    const std::string why = LineConflict(lines);
    if (!why.empty()) return why;
    const bool content = std::any_of(contents_.begin(), contents_.end(), [&](const Content& other) {
      return other.mother == lines.mother && other.node == lines.node;
    });
    if (content && Merge(lines).list != OldList(lines.mother, lines.node)) {
      return "a line and a content both asked for " + tree[lines.node].name;
    }
  }
  return "";
}

std::string Requests::Ambiguity() const {
  const std::string conflict = Conflict();
  if (!conflict.empty()) return conflict;
  return BeforeDeletions(false).Crosses() ? "the lines of two changes cross" : "";
}

// ---- carrying out ---------------------------------------------------------------------------------

Graph Requests::WithLines(bool alone) const {
  Graph graph = made_graph_;
  for (const Lines& lines : lines_) {
    if (alone && lines.left.empty() && lines.right.empty()) continue;
    graph.SetList(lines.mother, lines.node, Merge(lines, /*also_equal=*/alone).list);
  }
  for (const Merged& merged : merges_) graph.Merge(merged.kept, merged.gone);
  return graph;
}

Graph Requests::BeforeDeletions(bool alone) const {
  Graph graph = WithLines(alone);
  Longers longer;
  SetContents(graph, alone);
  SetRoots(graph, &longer);
  Lengthen(graph, &longer);
  SetItems(graph, InsertedSlots(), longer);
  return graph;
}

// Behind its last slot that stays its own; a root of which nothing stays is not made longer.
void Requests::Lengthen(const Graph& graph, Longers* longer) const {
  for (InstanceId root : lengthened_) {
    const InstanceId held = Surviving(root);
    const std::vector<int> slots = SlotsOfRoot(root);
    const auto last = std::find_if(slots.rbegin(), slots.rend(), [&](int slot) {
      return !Deletes(slot) && Has(graph[view_.slot(slot)].daughters, held);
    });
    if (last != slots.rend()) longer->push_back({view_.slot(*last), held});
  }
}

void Requests::SetContents(Graph& graph, bool alone) const {
  for (const Content& content : contents_) {
    const bool values = content.values != nullptr;
    if (values && IsClass(graph.tree(), content.node) && !content.values->empty()) continue;  // made already
    const bool none = values ? content.values->empty() : content.trees.empty();
    if ((alone && none) || (content.node == kRootNode && !none)) continue;
    IdList fresh;
    if (values) {
      for (Value value : *content.values) fresh.push_back(graph.Add(content.node, value));
    }
    for (const FeatureTree& tree : content.trees) fresh.push_back(graph.AddContent(tree));
    graph.SetList(content.mother, content.node, fresh);
  }
}

// Neighbouring slots of one root that are given the same content share the new root.
void Requests::SetRoots(Graph& graph, Longers* longer) const {
  const auto asked_of = [&](InstanceId slot) -> const Content* {
    for (const Content& content : contents_) {
      if (content.mother == slot && content.node == kRootNode && !content.trees.empty()) return &content;
    }
    return nullptr;
  };
  if (std::none_of(contents_.begin(), contents_.end(), [](const Content& c) { return c.node == kRootNode; })) return;
  const Content* before = nullptr;
  InstanceId root_before = kNone, fresh = kNone;
  for (InstanceId slot : InsertedSlots()) {
    const Content* asked = asked_of(slot);
    if (asked != nullptr) graph.SetList(slot, kRootNode, {graph.AddContent(asked->trees.front())});
  }
  for (int slot = 0; slot < view_.size(); ++slot) {
    const Content* asked = asked_of(view_.slot(slot));
    const InstanceId root = view_.root(slot);
    if (asked == nullptr && root == kNone) continue;  // lines of a root pass over slots without one
    const bool of_one_root = root != kNone && root == root_before;
    const bool goes_on = asked != nullptr && before != nullptr && of_one_root && SameContent(*asked, *before);
    before = asked;
    root_before = root;
    if (asked == nullptr) continue;
    if (!goes_on) fresh = graph.AddContent(asked->trees.front());
    graph.SetList(asked->mother, kRootNode, {fresh});
    if (!asked->is_long) continue;
    if (goes_on) {
      if (!longer->empty() && longer->back().root == fresh) longer->pop_back();  // long by itself
    } else if (!Deletes(slot)) {
      longer->push_back({asked->mother, fresh});
    }
  }
}

IdList Requests::InsertedSlots() const {
  IdList slots;
  for (const Insertion& insertion : insertions_) slots.push_back(insertion.slot);
  return slots;
}

void Requests::SetItems(Graph& graph, const IdList& inserted, const Longers& longer) const {
  if (inserted.empty() && longer.empty() && boundary_deletions_.empty()) return;
  std::vector<FormItem> items;
  items.reserve(graph.items.size() + 2 * inserted.size() + longer.size());
  const auto add = [&](InstanceId slot) { items.push_back({FormItem::Kind::kSlot, Boundary::kNone, slot}); };
  const auto add_another = [&](InstanceId root) {
    const InstanceId slot = graph.Add(kSlotNode, 0);
    graph.nodes[slot].daughters.push_back(root);
    add(slot);
  };
  // In the order the changes are written, on one side of one host.
  boost::container::small_vector<std::size_t, 4> written;
  for (std::size_t i = 0; i < insertions_.size(); ++i) written.push_back(i);
  std::sort(written.begin(), written.end(),
            [&](std::size_t a, std::size_t b) { return insertions_[a].change < insertions_[b].change; });
  const auto insert = [&](int host_item, bool before) {
    for (std::size_t i : written) {
      const Insertion& insertion = insertions_[i];
      if (view_.item(insertion.host) != host_item || insertion.change->before != before) continue;
      if (inserted[i] == kNone) continue;
      add(inserted[i]);
      if (insertion.change->is_long) add_another(graph[inserted[i]].daughters.front());
    }
  };
  for (int i = 0; i < static_cast<int>(graph.items.size()); ++i) {
    FormItem item = graph.items[static_cast<std::size_t>(i)];
    insert(i, true);
    const bool deleted =
        std::find(boundary_deletions_.begin(), boundary_deletions_.end(), i) != boundary_deletions_.end();
    // A stronger boundary leaves the morphemes apart.
    const bool weakened = deleted && item.boundary > Boundary::kMorpheme;
    if (weakened) item.boundary = Boundary::kMorpheme;
    if (!deleted || weakened) items.push_back(item);
    for (const Longer& one : longer) {
      if (item.kind == FormItem::Kind::kSlot && item.instance == one.behind) add_another(one.root);
    }
    insert(i, false);
  }
  graph.items = std::move(items);
}

Graph Requests::Result() const {
  Graph graph = BeforeDeletions(false);
  for (int slot : deletions_) {
    graph.items.erase(std::remove_if(graph.items.begin(), graph.items.end(),
                                     [&](const FormItem& item) {
                                       return item.kind == FormItem::Kind::kSlot && item.instance == view_.slot(slot);
                                     }),
                      graph.items.end());
  }
  graph.Prune();
  return graph;
}

// ---- for notes ------------------------------------------------------------------------------------

bool Requests::LineAdded(InstanceId mother, NodeId node, InstanceId instance) const {
  for (const Lines& lines : lines_) {
    if (lines.mother != mother || lines.node != node) continue;
    return Has(Merge(lines).list, instance) && !Has(OldList(mother, node), instance);
  }
  return false;
}

bool Requests::LineCut(InstanceId mother, NodeId node) const {
  for (const Lines& lines : lines_) {
    if (lines.mother != mother || lines.node != node) continue;
    const IdList list = Merge(lines).list;
    const IdList old = OldList(mother, node);
    return std::any_of(old.begin(), old.end(), [&](InstanceId id) { return !Has(list, id); });
  }
  return false;
}

bool Requests::ContentAsked(InstanceId mother, NodeId node) const {
  return std::any_of(contents_.begin(), contents_.end(),
                     [&](const Content& content) { return content.mother == mother && content.node == node; });
}

bool Requests::Deletes(int slot) const {
  return std::find(deletions_.begin(), deletions_.end(), slot) != deletions_.end();
}

}  // namespace tiersmith::graph
