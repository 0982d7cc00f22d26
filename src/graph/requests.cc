// Collecting, judging and carrying out requests (requests.h).
#include "graph/requests.h"

#include <algorithm>
#include <limits>

namespace tiersmith::graph {
namespace {

bool Has(const IdList& list, InstanceId id) { return std::find(list.begin(), list.end(), id) != list.end(); }

bool SameValues(const Graph& graph, const IdList& list, const std::vector<Value>& values) {
  return std::equal(list.begin(), list.end(), values.begin(), values.end(),
                    [&](InstanceId id, Value value) { return graph[id].value == value; });
}

bool IsClass(const Tree& tree, NodeId node) { return tree[node].type == TreeNode::Type::kClass; }

IdList ListAt(const View& view, int slot, NodeId node) {
  const InstanceId mother = view.graph().FindUnder(view.slot(slot), view.graph().tree()[node].mother);
  return mother == kNone ? IdList() : view.graph().ListOf(mother, node);
}

bool SpreadHasRoom(const View& view, const Rule& rule, const Change& spread, const LabelSlots& match) {
  const InstanceId carried = Carried(view, spread, match);
  if (carried == kNone) return true;
  const int target = match[spread.target];
  const IdList old = ListAt(view, target, spread.node);
  if (Has(old, carried)) return true;
  const bool emptied = std::any_of(rule.changes.begin(), rule.changes.end(), [&](const Change& change) {
    return change.op == Change::Op::kDelink && change.target == spread.target && change.node == spread.node;
  });
  const int stays = emptied ? 0 : static_cast<int>(old.size());
  return stays + 1 <= RoomAt(view, spread.node, target);
}

// A contour is more than one; where it would not fit, `set` and `fill` have no room either.
bool SettingsHaveRoom(const View& view, const Change& change, int slot) {
  return std::all_of(change.settings.begin(), change.settings.end(), [&](const Setting& setting) {
    if (setting.values.size() < 2) return true;
    const IdList old = ListAt(view, slot, setting.node);
    if (change.op == Change::Op::kFill && !old.empty()) return true;
    if (SameValues(view.graph(), old, setting.values)) return true;
    return static_cast<int>(setting.values.size()) <= RoomAt(view, setting.node, slot);
  });
}

}  // namespace

int RoomAt(const View& view, NodeId node, int slot) {
  const TreeNode& kind = view.graph().tree()[node];
  return !kind.room || view.Passes(*kind.room, slot) ? kind.max : 1;
}

InstanceId Carried(const View& view, const Change& change, const LabelSlots& match) {
  const int source = match[change.source], target = match[change.target];
  if (source < 0 || target < 0) return kNone;
  const IdList list = ListAt(view, source, change.node);
  if (list.empty()) return kNone;
  return source < target ? list.back() : list.front();
}

const Change* WithoutRoom(const View& view, const Rule& rule, const LabelSlots& match) {
  for (const Change& change : rule.changes) {
    if (match[change.target] < 0) continue;
    switch (change.op) {
      case Change::Op::kSpread:
        if (!SpreadHasRoom(view, rule, change, match)) return &change;
        break;
      case Change::Op::kSet:
      case Change::Op::kFill:
        if (!SettingsHaveRoom(view, change, match[change.target])) return &change;
        break;
      case Change::Op::kDelink:
      case Change::Op::kInsert:
      case Change::Op::kDelete:
        break;
    }
  }
  return nullptr;
}

Requests::Requests(const View& view, const Rule& rule) : view_(view), rule_(rule), made_graph_(view.graph()) {}

// ---- collecting ---------------------------------------------------------------------------------

void Requests::Add(const LabelSlots& match) {
  for (std::size_t i = 0; i < rule_.changes.size(); ++i) {
    const Change& change = rule_.changes[i];
    const int slot = match[change.target];
    if (slot < 0) continue;
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
          AddSetting(setting, slot, change.op == Change::Op::kFill);
        }
        break;
      case Change::Op::kInsert: {
        const bool known = std::any_of(insertions_.begin(), insertions_.end(), [&](const Insertion& other) {
          return other.host == slot && other.change == static_cast<int>(i);
        });
        if (!known) insertions_.push_back({slot, static_cast<int>(i)});
        break;
      }
      case Change::Op::kDelete:
        if (std::find(deletions_.begin(), deletions_.end(), slot) == deletions_.end()) {
          deletions_.push_back(slot);
        }
        break;
    }
  }
}

void Requests::AddSpread(const Change& change, const LabelSlots& match) {
  const InstanceId carried = Carried(view_, change, match);
  if (carried == kNone) return;
  const int target = match[change.target];
  const InstanceId mother = MakeMotherOf(target, change.node);
  if (Has(OldList(mother, change.node), carried)) return;  // held already: no line is drawn
  Lines& lines = LinesAt(mother, change.node);
  IdList& side = match[change.source] < target ? lines.left : lines.right;
  if (!Has(side, carried)) side.push_back(carried);
  lines.room = std::min(lines.room, RoomAt(view_, change.node, target));
}

// What the same match spreads to the same mother is not cut: only the mother's other instances are.
void Requests::AddDelink(const Change& change, const LabelSlots& match) {
  const int slot = match[change.target];
  const InstanceId mother = view_.graph().FindUnder(view_.slot(slot), view_.graph().tree()[change.node].mother);
  if (mother == kNone) return;
  for (InstanceId id : OldList(mother, change.node)) {
    const bool spread_too = std::any_of(rule_.changes.begin(), rule_.changes.end(), [&](const Change& other) {
      return other.op == Change::Op::kSpread && other.target == change.target && other.node == change.node &&
             Carried(view_, other, match) == id;
    });
    if (spread_too) continue;
    Lines& lines = LinesAt(mother, change.node);
    if (!Has(lines.cut, id)) lines.cut.push_back(id);
  }
}

void Requests::AddSetting(const Setting& setting, int slot, bool only_missing) {
  const IdList old = ListAt(view_, slot, setting.node);
  if (only_missing && !old.empty()) return;
  if (old.empty() && setting.values.empty()) return;
  if (!setting.values.empty() && !old.empty() && IsClass(view_.graph().tree(), setting.node)) return;
  if (!old.empty() && SameValues(view_.graph(), old, setting.values)) return;
  AskContent(MakeMotherOf(slot, setting.node), setting.node, setting.values);
}

void Requests::AskContent(InstanceId mother, NodeId node, const std::vector<Value>& values) {
  if (IsClass(view_.graph().tree(), node) && !values.empty()) MakeUnder(mother, node);
  for (const Content& other : contents_) {
    if (other.mother != mother || other.node != node) continue;
    if (*other.values == values) return;
    disputed_ = mother;
    disputed_node_ = node;
  }
  contents_.push_back({mother, node, &values});
}

Requests::Lines& Requests::LinesAt(InstanceId mother, NodeId node) {
  for (Lines& lines : lines_) {
    if (lines.mother == mother && lines.node == node) return lines;
  }
  lines_.push_back({mother, node, {}, {}, {}, std::numeric_limits<int>::max()});
  return lines_.back();
}

InstanceId Requests::MakeMotherOf(int slot, NodeId node) {
  const NodeId kind = view_.graph().tree()[node].mother;
  if (kind == kSlotNode) return view_.slot(slot);
  const InstanceId there = view_.graph().FindUnder(view_.slot(slot), kind);
  return there != kNone ? there : MakeUnder(MakeMotherOf(slot, kind), kind);
}

InstanceId Requests::MakeUnder(InstanceId above, NodeId node) {
  const InstanceId known = FindMade(above, node);
  if (known != kNone) return known;
  const InstanceId made = made_graph_.Add(node, 0);
  made_graph_.SetList(above, node, {made});
  made_.push_back({above, node, made});
  return made;
}

InstanceId Requests::FindMade(InstanceId above, NodeId node) const {
  for (const Made& made : made_) {
    if (made.above == above && made.node == node) return made.made;
  }
  return kNone;
}

InstanceId Requests::MotherOf(int slot, NodeId node) const {
  const NodeId kind = view_.graph().tree()[node].mother;
  if (kind == kSlotNode) return view_.slot(slot);
  const InstanceId there = view_.graph().FindUnder(view_.slot(slot), kind);
  if (there != kNone) return there;
  const InstanceId above = MotherOf(slot, kind);
  return above == kNone ? kNone : FindMade(above, kind);
}

IdList Requests::OldList(InstanceId mother, NodeId node) const {
  return IsOld(mother) ? view_.graph().ListOf(mother, node) : IdList();
}

// ---- judging ------------------------------------------------------------------------------------

Requests::Merged Requests::Merge(const Lines& lines, bool also_equal) const {
  const Graph& before = view_.graph();
  IdList kept = OldList(lines.mother, lines.node);
  kept.erase(std::remove_if(kept.begin(), kept.end(), [&](InstanceId id) { return Has(lines.cut, id); }), kept.end());
  Merged merged;
  merged.nothing_kept = kept.empty();
  for (InstanceId id : lines.left) {
    if (!also_equal && !kept.empty() && before.Equal(id, kept.front())) continue;
    merged.added_left.push_back(id);
  }
  for (InstanceId id : lines.right) {
    if (Has(merged.added_left, id)) continue;
    if (!also_equal && !kept.empty() && before.Equal(id, kept.back())) continue;
    merged.added_right.push_back(id);
  }
  merged.list = merged.added_left;
  merged.list.insert(merged.list.end(), kept.begin(), kept.end());
  merged.list.insert(merged.list.end(), merged.added_right.begin(), merged.added_right.end());
  return merged;
}

std::string Requests::LineAmbiguity(const Lines& lines) const {
  const Merged merged = Merge(lines);
  if (merged.added_left.empty() && merged.added_right.empty()) return "";
  const std::string name = view_.graph().tree()[lines.node].name;
  if (static_cast<int>(merged.list.size()) > lines.room) return "more than one " + name + " spreads to it";
  if (merged.nothing_kept) {
    for (std::size_t i = 1; i < merged.list.size(); ++i) {
      if (view_.graph().Equal(merged.list[i - 1], merged.list[i])) {
        return "two equal " + name + " spread to it";
      }
    }
  }
  return "";
}

bool Requests::Changes() const {
  if (!insertions_.empty() || !deletions_.empty() || !contents_.empty()) return true;
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
  return mothers;
}

bool Requests::CrossesAlone() const { return InsertionsCross() || BeforeDeletions(true).Crosses(); }

// Insertions come before lines: they are made while all lines of the form before still stand.
bool Requests::InsertionsCross() const {
  if (insertions_.empty()) return false;
  Graph graph = view_.graph();
  Insert(graph);
  return graph.Crosses();
}

std::string Requests::CrossedTier() const {
  const std::optional<NodeId> node = BeforeDeletions(true).CrossedTier();
  return node ? view_.graph().tree()[*node].name : "";
}

std::string Requests::Ambiguity() const {
  const Tree& tree = view_.graph().tree();
  if (disputed_ != kNone) return "two different contents asked for " + tree[disputed_node_].name;
  for (const Lines& lines : lines_) {
    const std::string why = LineAmbiguity(lines);
    if (!why.empty()) return why;
    const bool content = std::any_of(contents_.begin(), contents_.end(), [&](const Content& other) {
      return other.mother == lines.mother && other.node == lines.node;
    });
    if (content && Merge(lines).list != OldList(lines.mother, lines.node)) {
      return "a line and a content both asked for " + tree[lines.node].name;
    }
  }
  if (BeforeDeletions(false).Crosses()) return "the lines of two changes cross";
  return "";
}

// ---- carrying out -------------------------------------------------------------------------------

Graph Requests::BeforeDeletions(bool alone) const {
  Graph graph = made_graph_;
  if (!insertions_.empty()) Insert(graph);
  for (const Lines& lines : lines_) {
    if (alone && lines.left.empty() && lines.right.empty()) continue;
    graph.SetList(lines.mother, lines.node, Merge(lines, /*also_equal=*/alone).list);
  }
  for (const Content& content : contents_) {
    const bool class_node = IsClass(graph.tree(), content.node);
    if (class_node && !content.values->empty()) continue;  // made already
    if (alone && content.values->empty()) continue;
    IdList fresh;
    for (Value value : *content.values) fresh.push_back(graph.Add(content.node, value));
    graph.SetList(content.mother, content.node, fresh);
  }
  return graph;
}

void Requests::Insert(Graph& graph) const {
  std::vector<FormItem> items;
  items.reserve(graph.items.size() + insertions_.size());
  // In the order the changes are written, on one side of one host.
  const auto insert = [&](int host_item, bool before) {
    for (std::size_t i = 0; i < rule_.changes.size(); ++i) {
      for (const Insertion& insertion : insertions_) {
        if (insertion.change != static_cast<int>(i) || view_.item(insertion.host) != host_item) continue;
        if (rule_.changes[i].before != before) continue;
        const InstanceId root = graph.AddContent(rule_.changes[i].inserted);
        const InstanceId slot = graph.Add(kSlotNode, 0);
        graph.nodes[slot].daughters.push_back(root);
        items.push_back({FormItem::Kind::kSlot, Boundary::kNone, slot});
      }
    }
  };
  for (std::size_t item = 0; item < graph.items.size(); ++item) {
    insert(static_cast<int>(item), true);
    items.push_back(graph.items[item]);
    insert(static_cast<int>(item), false);
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

// ---- for notes ----------------------------------------------------------------------------------

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

}  // namespace tiersmith::graph
