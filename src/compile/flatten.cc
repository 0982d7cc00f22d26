#include "compile/flatten.h"

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

std::vector<const Clause*> ClausesOf(const Rule& rule) {
  std::vector<const Clause*> clauses{&rule};
  for (const Clause& clause : rule.otherwise) clauses.push_back(&clause);
  return clauses;
}

}  // namespace tiersmith
