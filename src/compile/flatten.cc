#include "compile/flatten.h"

#include <algorithm>

namespace tiersmith {
namespace {

struct Shift {
  int labels = 0;
  int variables = 0;

  void Label(int* label) const {
    if (*label >= 0) *label += labels;
  }
  void Test(SlotTest* test) const {
    for (FeatureTest& feature : test->bundle) {
      if (feature.variable >= 0) feature.variable += variables;
    }
    for (SlotTest& inner : test->args) Test(&inner);
  }
  void In(Pattern* pattern) const {
    for (PatternItem& item : pattern->items) {
      Label(&item.label);
      Test(&item.test);
      for (Pattern& alternative : item.alternatives) In(&alternative);
    }
  }
  void In(Change* change) const {
    Label(&change->source);
    Label(&change->target);
    Label(&change->inserted_label);
    for (Setting& setting : change->settings) {
      if (setting.variable >= 0) setting.variable += variables;
    }
  }
  void In(Clause* clause) const {
    In(&clause->where);
    for (Pattern& pattern : clause->unless) In(&pattern);
    for (Condition& condition : clause->conditions) {
      Label(&condition.left);
      Label(&condition.right);
    }
    for (TagTest& test : clause->tags) Label(&test.label);
    for (Change& change : clause->changes) In(&change);
  }
};

}  // namespace

Rule Flattened(const Rule& rule) {
  Rule flat = rule;
  for (Clause& clause : flat.otherwise) {
    const Shift shift{static_cast<int>(flat.labels.size()), flat.variables};
    shift.In(&clause);
    flat.label_kinds.resize(flat.labels.size(), Clause::LabelKind::kSlot);
    for (std::size_t i = 0; i < clause.labels.size(); ++i)
      flat.label_kinds.push_back(clause.KindOf(static_cast<int>(i)));
    flat.labels.insert(flat.labels.end(), clause.labels.begin(), clause.labels.end());
    flat.variables += clause.variables;
    flat.changes.insert(flat.changes.end(), clause.changes.begin(), clause.changes.end());
    clause.changes.clear();
  }
  return flat;
}

int InsertionOf(const Clause& clause, int label) {
  const auto found = std::find_if(clause.changes.begin(), clause.changes.end(), [label](const Change& change) {
    return label >= 0 && change.op == Change::Op::kInsert && change.inserted_label == label;
  });
  return found == clause.changes.end() ? -1 : static_cast<int>(found - clause.changes.begin());
}

int HostOf(const Clause& clause, int label) {
  const int insertion = InsertionOf(clause, label);
  return insertion < 0 ? label : clause.changes[static_cast<std::size_t>(insertion)].target;
}

Rule FusionAsRule(const Fusion& fusion, const Tree& tree) {
  Rule rule;
  rule.name = "fuse " + tree[fusion.node].name;
  rule.within = Domain::kMorpheme;
  rule.inside = fusion.in;
  rule.span = fusion.span;
  rule.labels = {"X", "Y"};
  PatternItem item, gap;
  item.test.op = SlotTest::Op::kBundle;
  FeatureTest bears;
  bears.node = fusion.node;
  item.test.bundle = {bears};
  item.label = 0;
  gap.kind = PatternItem::Kind::kGap;
  gap.tier = fusion.node;
  rule.where.items = {item, gap, item};
  rule.where.items.back().label = 1;
  Change merge;
  merge.op = Change::Op::kMerge;
  merge.source = 0;
  merge.target = 1;
  merge.node = fusion.node;
  merge.span = fusion.span;
  rule.changes = {merge};
  return rule;
}

std::vector<Rule> StepsOf(const Grammar& grammar) {
  std::vector<Rule> steps;
  for (const Fusion& fusion : grammar.fusions) steps.push_back(FusionAsRule(fusion, grammar.tree));
  steps.insert(steps.end(), grammar.rules.begin(), grammar.rules.end());
  return steps;
}

std::vector<const Clause*> ClausesOf(const Rule& rule) {
  std::vector<const Clause*> clauses{&rule};
  for (const Clause& clause : rule.otherwise) clauses.push_back(&clause);
  return clauses;
}

}  // namespace tiersmith
