// Notes for traces (notes.h); plumbing.
#include "graph/notes.h"

#include <algorithm>

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

// "+back", "-cont +cont", "no Place", for the settings of a change that change something.
std::string ValuesOf(const View& view, const Setting& setting) {
  const Tree& tree = view.graph().tree();
  if (setting.values.empty()) return "no " + tree[setting.node].name;
  std::string text;
  for (Value value : setting.values) text += (text.empty() ? "" : " ") + tree.ValueName(setting.node, value);
  return text;
}

// The other segments that hold the mother something happened to: " (held by t too)".
std::string HeldToo(const View& view, int slot, InstanceId mother) {
  if (mother == kNone || mother >= view.graph().nodes.size()) return "";
  std::string text;
  for (int other = 0; other < view.size(); ++other) {
    if (other == slot || view.root(other) == view.root(slot)) continue;
    if (!view.graph().Holds(view.slot(other), mother)) continue;
    text += (text.empty() ? "" : ", ") + NameOfSlot(view, other);
  }
  return text.empty() ? "" : " (held by " + text + " too)";
}

std::string NoteOf(const View& view, const Change& change, const LabelSlots& match, const Requests& alone) {
  const Tree& tree = view.graph().tree();
  const int slot = match[change.target];
  if (slot < 0) return "";
  const std::string name = NameOfSlot(view, slot);
  switch (change.op) {
    case Change::Op::kSpread: {
      const InstanceId mother = alone.MotherOf(slot, change.node);
      const InstanceId carried = Carried(view, change, match);
      if (carried == kNone || !alone.LineAdded(mother, change.node, carried)) return "";
      return NameOfSlot(view, match[change.source]) + "'s " + tree[change.node].name + " spread to " + name +
             HeldToo(view, slot, mother);
    }
    case Change::Op::kDelink: {
      const InstanceId mother = alone.MotherOf(slot, change.node);
      if (!alone.LineCut(mother, change.node)) return "";
      return name + "'s " + tree[change.node].name + " cut" + HeldToo(view, slot, mother);
    }
    case Change::Op::kSet:
    case Change::Op::kFill: {
      std::string values, held;
      for (const Setting& setting : change.settings) {
        const InstanceId mother = alone.MotherOf(slot, setting.node);
        if (!alone.ContentAsked(mother, setting.node)) continue;
        values += (values.empty() ? "" : ", ") + ValuesOf(view, setting);
        if (held.empty()) held = HeldToo(view, slot, mother);
      }
      if (values.empty()) return "";
      return name + (change.op == Change::Op::kSet ? " set to [" : " filled with [") + values + "]" + held;
    }
    case Change::Op::kInsert:
      return SymbolOf(view, change.inserted) + " inserted " + (change.before ? "before " : "after ") + name;
    case Change::Op::kDelete:
      return name + " deleted";
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

void NoteChanges(const View& view, const Rule& rule, const LabelSlots& match, StepNotes* notes) {
  Requests alone(view, rule);
  alone.Add(match);
  // What is cut is told before what takes its place.
  for (bool cut : {true, false}) {
    for (const Change& change : rule.changes) {
      if ((change.op == Change::Op::kDelink) != cut) continue;
      std::string note = NoteOf(view, change, match, alone);
      if (!note.empty()) AddOnce(&notes->changes, std::move(note));
    }
  }
}

void NoteBlocked(const View& view, const Rule& rule, const LabelSlots& match, const std::string& reason,
                 StepNotes* notes) {
  const Tree& tree = view.graph().tree();
  std::string note = "blocked at " + NameOfSlot(view, match[rule.changes.front().target]) + ": ";
  if (const Change* change = WithoutRoom(view, rule, match)) {
    note = "blocked at " + NameOfSlot(view, match[change->target]) + ": no room for ";
    note += change->op == Change::Op::kSpread ? tree[change->node].name : std::string("so many values");
    if (change->op == Change::Op::kSpread) {
      note += " from " + NameOfSlot(view, match[change->source]);
    }
  } else {
    Requests alone(view, rule);
    alone.Add(match);
    note += reason == "crossing" ? "a line would cross another on the tier of " + alone.CrossedTier() : reason;
  }
  AddOnce(&notes->blocked, std::move(note));
}

}  // namespace tiersmith::graph
