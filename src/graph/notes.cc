// Notes for traces (notes.h); plumbing.
#include "graph/notes.h"

#include <algorithm>

#include "graph/requests.h"

namespace tiersmith::graph {
namespace {

std::string SymbolOf(const View& view, const FeatureTree& root) {
  const Inventory& inventory = view.grammar().inventory;
  const Inventory::Spelling& spelling = inventory.Spell(root);
  if (spelling.symbol >= 0) return inventory.symbols[spelling.symbol].text;
  const std::string described = inventory.Describe(root, view.graph().tree());
  return described.empty() ? "a slot" : described;
}

std::string SymbolAt(const View& view, int slot) {
  const InstanceId root = view.root(slot);
  return root == kNone ? "an empty slot" : SymbolOf(view, view.graph().Content(root));
}

void AddOnce(std::vector<std::string>* lines, std::string line) {
  if (std::find(lines->begin(), lines->end(), line) == lines->end()) lines->push_back(std::move(line));
}

// "+back", "-cont +cont", "no Place"; with a variable, its value.
std::string ValuesOf(const View& view, const Setting& setting, const Match& match) {
  const Tree& tree = view.graph().tree();
  const std::string none = "no " + tree[setting.node].name;
  if (setting.variable >= 0) {
    const TreeNode::Type type = tree[setting.node].type;
    if (type == TreeNode::Type::kClass) return tree[setting.node].name;
    const InstanceId bound = match.variables[static_cast<std::size_t>(setting.variable)];
    const Value value = static_cast<Value>(setting.differs ? 1 - bound : bound);
    if (type == TreeNode::Type::kBare) return value == 0 ? none : tree[setting.node].name;
    return tree.ValueName(setting.node, value);
  }
  if (setting.values.empty()) return none;
  std::string text;
  for (Value value : setting.values) text += (text.empty() ? "" : " ") + tree.ValueName(setting.node, value);
  return text;
}

// The other segments that hold the mother something happened to: " (held by t too)".
std::string HeldToo(const View& view, InstanceId slot, InstanceId mother) {
  if (mother == kNone || mother >= view.graph().nodes.size()) return "";
  const InstanceId root = view.graph().FindUnder(slot, kRootNode);
  std::string text;
  for (int other = 0; other < view.size(); ++other) {
    if (view.slot(other) == slot || view.root(other) == root) continue;
    if (!view.graph().Holds(view.slot(other), mother)) continue;
    text += (text.empty() ? "" : ", ") + NameOfSlot(view, other);
  }
  return text.empty() ? "" : " (held by " + text + " too)";
}

std::string NameOfLabel(const View& view, const Match& match, int label) {
  if (match.clause->KindOf(label) == Clause::LabelKind::kInserted) {
    for (const Change& change : match.clause->changes) {
      if (change.op == Change::Op::kInsert && change.inserted_label == label) return SymbolOf(view, change.inserted);
    }
  }
  const int at = match.labels[label];
  if (match.clause->KindOf(label) == Clause::LabelKind::kBoundary) {
    const std::vector<int> run = view.RunBefore(at, match.clause->where.names_empty);
    return run.empty() ? "the end" : BoundarySign(view.graph().items[static_cast<std::size_t>(run.front())].boundary);
  }
  return at < 0 ? "nothing" : NameOfSlot(view, at);
}

// "Place", "Place's last", "Tone:H": of a contour, which.
std::string NameOfMember(const Tree& tree, const Change& change) {
  switch (change.member.which) {
    case Member::Which::kWhole:
      return tree[change.node].name;
    case Member::Which::kValue:
      return tree.ValueName(change.node, change.member.value);
    case Member::Which::kFirst:
      return "first " + tree[change.node].name;
    case Member::Which::kLast:
      return "last " + tree[change.node].name;
  }
  return "";
}

// "n set to [..] (held by t too)" for what is asked of the contents of these nodes; "" for nothing.
std::string ContentNote(const View& view, const Match& match, const Change& change, const Requests& alone,
                        const std::string& what) {
  const InstanceId slot = alone.ItemOf(match, change.target).slot;
  std::string held;
  bool asked = false;
  const auto add = [&](NodeId node) {
    for (InstanceId mother : alone.MothersOf(slot, node)) {
      if (!alone.ContentAsked(mother, node)) continue;
      asked = true;
      if (held.empty()) held = HeldToo(view, slot, mother);
    }
  };
  for (const Setting& setting : change.settings) add(setting.node);
  if (change.settings.empty()) add(change.op == Change::Op::kSetLiteral ? kRootNode : change.node);
  return asked ? NameOfLabel(view, match, change.target) + what + held : "";
}

std::string SettingsNote(const View& view, const Match& match, const Change& change, const Requests& alone) {
  const InstanceId slot = alone.ItemOf(match, change.target).slot;
  std::string values;
  for (const Setting& setting : change.settings) {
    const IdList mothers = alone.MothersOf(slot, setting.node);
    const bool asked = std::any_of(mothers.begin(), mothers.end(),
                                   [&](InstanceId mother) { return alone.ContentAsked(mother, setting.node); });
    if (asked) values += (values.empty() ? "" : ", ") + ValuesOf(view, setting, match);
  }
  const char* verb = change.op == Change::Op::kSet ? " set to [" : " filled with [";
  return ContentNote(view, match, change, alone, verb + values + "]");
}

std::string SpreadNote(const View& view, const Match& match, const Change& change, const Requests& alone) {
  const InstanceId slot = alone.ItemOf(match, change.target).slot;
  const InstanceId carried = alone.Carried(change, match);
  if (carried == kNone) return "";
  for (InstanceId mother : alone.MothersOf(slot, change.node)) {
    if (!alone.LineAdded(mother, change.node, carried)) continue;
    return NameOfLabel(view, match, change.source) + "'s " + NameOfMember(view.graph().tree(), change) + " spread to " +
           NameOfLabel(view, match, change.target) + HeldToo(view, slot, mother);
  }
  return "";
}

std::string DelinkNote(const View& view, const Match& match, const Change& change, const Requests& alone) {
  const InstanceId slot = alone.ItemOf(match, change.target).slot;
  for (InstanceId mother : alone.MothersOf(slot, change.node)) {
    if (!alone.LineCut(mother, change.node)) continue;
    return NameOfLabel(view, match, change.target) + "'s " + NameOfMember(view.graph().tree(), change) + " cut" +
           HeldToo(view, slot, mother);
  }
  return "";
}

std::string NoteOf(const View& view, const Match& match, const Change& change, const Requests& alone) {
  const Tree& tree = view.graph().tree();
  if (match.labels[change.target] < 0 && match.clause->KindOf(change.target) != Clause::LabelKind::kInserted) return "";
  const std::string name = NameOfLabel(view, match, change.target);
  switch (change.op) {
    case Change::Op::kSpread:
      return SpreadNote(view, match, change, alone);
    case Change::Op::kDelink:
      return DelinkNote(view, match, change, alone);
    case Change::Op::kSet:
    case Change::Op::kFill:
      return SettingsNote(view, match, change, alone);
    case Change::Op::kSetAs:
      return ContentNote(view, match, change, alone,
                         "'s " + tree[change.node].name + " set as " + NameOfLabel(view, match, change.source) + "'s");
    case Change::Op::kFillAs:
      return ContentNote(
          view, match, change, alone,
          "'s " + tree[change.node].name + " filled as " + NameOfLabel(view, match, change.source) + "'s");
    case Change::Op::kSetLiteral:
      return ContentNote(view, match, change, alone,
                         " set to " + SymbolOf(view, change.inserted) + (change.is_long ? "ː" : ""));
    case Change::Op::kInsert:
      return SymbolOf(view, change.inserted) + (change.is_long ? "ː" : "") + " inserted " +
             (change.before ? "before " : "after ") + name;
    case Change::Op::kDelete: {
      const bool end = match.clause->KindOf(change.target) == Clause::LabelKind::kBoundary && !alone.DeletesBoundary();
      return end ? "" : name + " deleted";
    }
    case Change::Op::kLengthen:
      return name + " made longer";
    case Change::Op::kShorten:
      return alone.DeletesSlot() ? name + " made shorter" : "";
    case Change::Op::kMerge:
      if (!alone.Merges()) return "";
      return NameOfLabel(view, match, change.source) + "'s and " + name + "'s " + tree[change.node].name + " made one";
  }
  return "";
}

}  // namespace

std::string NameOfSlot(const View& view, int slot) {
  const std::string symbol = SymbolAt(view, slot);
  int same = 0;
  for (int other = 0; other < view.size(); ++other) same += SymbolAt(view, other) == symbol;
  return same < 2 ? symbol : symbol + " (slot " + std::to_string(slot + 1) + ")";
}

void NoteChanges(const View& view, const Match& match, StepNotes* notes) {
  Requests alone(view);
  alone.Add(match);
  // What is cut is told before what takes its place.
  for (bool cut : {true, false}) {
    for (const Change& change : match.clause->changes) {
      if ((change.op == Change::Op::kDelink) != cut) continue;
      std::string note = NoteOf(view, match, change, alone);
      if (!note.empty()) AddOnce(&notes->changes, std::move(note));
    }
  }
}

void NoteBlocked(const View& view, const Match& match, Failure failure, StepNotes* notes) {
  const Tree& tree = view.graph().tree();
  Requests alone(view);
  alone.Add(match);
  const auto at = [&](int label) { return "blocked at " + NameOfLabel(view, match, label) + ": "; };
  std::string note = at(match.clause->changes.front().target);
  switch (failure) {
    case Failure::kStands:
      return;
    case Failure::kCapacity: {
      const Change& change = *alone.WithoutRoom(match);
      const bool spread = change.op == Change::Op::kSpread;
      note = at(change.target) + "no room for " + (spread ? tree[change.node].name : std::string("so many values"));
      if (spread) note += " from " + NameOfLabel(view, match, change.source);
      break;
    }
    case Failure::kCrossing:
      note += "a line would cross another on the tier of " + alone.CrossedTier();
      break;
    case Failure::kSharing:
      note += "sharing (a node that the rule mentions is held outside the match)";
      break;
    case Failure::kPreserving:
      note += "preserving (the result is no symbol of `segments`)";
      break;
    case Failure::kPreferred:
      note += "another match is preferred";
      break;
  }
  AddOnce(&notes->blocked, std::move(note));
}

}  // namespace tiersmith::graph
