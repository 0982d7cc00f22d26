#include "compile/plan.h"

#include "compile/flatten.h"

namespace tiersmith {
namespace {

void AddUpward(const Tree& tree, NodeId node, NodeSet* set) {
  for (; node != kSlotNode; node = tree[node].mother) (*set)[node] = true;
}

void AddDownward(const Tree& tree, NodeId node, NodeSet* set) {
  (*set)[node] = true;
  for (NodeId daughter : tree[node].daughters) AddDownward(tree, daughter, set);
}

void AddTest(const Tree& tree, const SlotTest& test, Plan* plan) {
  for (const FeatureTest& feature : test.bundle) {
    AddUpward(tree, feature.node, &plan->visible);
    if (feature.kind == FeatureTest::Kind::kAgrees) AddDownward(tree, feature.node, &plan->visible);  // its content
  }
  if (test.op == SlotTest::Op::kLiteral) plan->literals.insert(test.literal);
  for (const SlotTest& inner : test.args) AddTest(tree, inner, plan);
}

void AddPattern(const Tree& tree, const Pattern& pattern, Plan* plan) {
  for (const PatternItem& item : pattern.items) {
    if (item.kind == PatternItem::Kind::kSlot) AddTest(tree, item.test, plan);
    if (item.tier.has_value()) AddUpward(tree, *item.tier, &plan->visible);
    for (const Pattern& alternative : item.alternatives) AddPattern(tree, alternative, plan);
  }
}

// The nodes whose links a test asks for.
void AddLinksRead(const Tree& tree, const SlotTest& test, NodeSet* read) {
  for (const FeatureTest& feature : test.bundle) {
    const bool links = feature.kind == FeatureTest::Kind::kShared || feature.kind == FeatureTest::Kind::kUnshared ||
                       feature.kind == FeatureTest::Kind::kLong || feature.kind == FeatureTest::Kind::kShort ||
                       feature.kind == FeatureTest::Kind::kHalfFirst || feature.kind == FeatureTest::Kind::kHalfSecond;
    if (links) AddUpward(tree, feature.node, read);
  }
  for (const SlotTest& inner : test.args) AddLinksRead(tree, inner, read);
}

void AddLinksRead(const Tree& tree, const Pattern& pattern, NodeSet* read) {
  for (const PatternItem& item : pattern.items) {
    AddLinksRead(tree, item.test, read);
    for (const Pattern& alternative : item.alternatives) AddLinksRead(tree, alternative, read);
  }
}

void AddContent(const FeatureTree& content, NodeSet* set) {
  (*set)[content.node] = true;
  for (const FeatureTree& daughter : content.daughters) AddContent(daughter, set);
}

bool AsksOfInstance(const Condition& condition) {
  return condition.test == Condition::Test::kSame || condition.test == Condition::Test::kNotSame;
}

// The nodes whose links a change asks for.
void AddLinksRead(const Tree& tree, const Change& change, NodeSet* read) {
  switch (change.op) {
    case Change::Op::kSpread:
    case Change::Op::kDelink:
      AddUpward(tree, change.node, read);
      break;
    case Change::Op::kSet:
    case Change::Op::kFill:
      for (const Setting& setting : change.settings) {
        AddUpward(tree, setting.node, read);
        if (setting.variable >= 0) AddDownward(tree, setting.node, read);  // its content comes along
      }
      break;
    case Change::Op::kInsert:
      AddContent(change.inserted, read);
      break;
    case Change::Op::kSetAs:
    case Change::Op::kFillAs:
    case Change::Op::kMerge:
      AddUpward(tree, change.node, read);
      AddDownward(tree, change.node, read);
      break;
    case Change::Op::kSetLiteral:
      AddDownward(tree, kRootNode, read);
      break;
    case Change::Op::kDelete:
    case Change::Op::kLengthen:
    case Change::Op::kShorten:
      break;
  }
}

void AddVisible(const Tree& tree, const Change& change, NodeSet* visible) {
  switch (change.op) {
    case Change::Op::kSpread:
    case Change::Op::kDelink:
    case Change::Op::kSetAs:
    case Change::Op::kFillAs:
    case Change::Op::kMerge:
      AddDownward(tree, change.node, visible);
      break;
    case Change::Op::kSetLiteral:
      AddDownward(tree, kRootNode, visible);
      break;
    case Change::Op::kSet:
    case Change::Op::kFill:
      for (const Setting& setting : change.settings) AddDownward(tree, setting.node, visible);
      break;
    case Change::Op::kInsert:
    case Change::Op::kDelete:
    case Change::Op::kLengthen:
    case Change::Op::kShorten:
      break;
  }
}

// What a set says of nodes: those it mentions, and those it says are shared. `long` is said of the root.
void Mentioned(const SlotTest& test, bool denied, std::vector<NodeId>* nodes, std::vector<NodeId>* shared) {
  for (const FeatureTest& feature : test.bundle) {
    nodes->push_back(feature.node);
    const bool says_shared = feature.kind == FeatureTest::Kind::kShared || feature.kind == FeatureTest::Kind::kLong ||
                             feature.kind == FeatureTest::Kind::kHalfFirst ||
                             feature.kind == FeatureTest::Kind::kHalfSecond;
    if (says_shared && !denied) shared->push_back(feature.node);
  }
  if (test.op == SlotTest::Op::kLiteral) nodes->push_back(kRootNode);
  for (const SlotTest& arg : test.args) Mentioned(arg, denied || test.op == SlotTest::Op::kNot, nodes, shared);
}

void MentionedAt(const Pattern& pattern, int label, std::vector<NodeId>* nodes, std::vector<NodeId>* shared) {
  for (const PatternItem& item : pattern.items) {
    if (item.kind == PatternItem::Kind::kSlot && item.label == label) Mentioned(item.test, false, nodes, shared);
    for (const Pattern& alternative : item.alternatives) MentionedAt(alternative, label, nodes, shared);
  }
}

void AddMentioned(const Change& change, int label, std::vector<NodeId>* nodes) {
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

void AddClause(const Tree& tree, const Clause& clause, Plan* plan) {
  AddPattern(tree, clause.where, plan);
  for (const Pattern& pattern : clause.unless) AddPattern(tree, pattern, plan);
  for (const Condition& condition : clause.conditions) {
    AddUpward(tree, condition.node, &plan->visible);
    AddDownward(tree, condition.node, &plan->visible);
  }
  for (const Change& change : clause.changes) AddVisible(tree, change, &plan->visible);
}

}  // namespace

std::vector<NodeId> MentionedFor(const Rule& flattened, int label, std::vector<NodeId>* shared) {
  std::vector<NodeId> nodes;
  for (const Clause* clause : ClausesOf(flattened)) {
    MentionedAt(clause->where, label, &nodes, shared);
    for (const Condition& condition : clause->conditions) {
      if (condition.left == label || condition.right == label) nodes.push_back(condition.node);
    }
  }
  for (const Change& change : flattened.changes) AddMentioned(change, label, &nodes);
  return nodes;
}

NodeSet LinksAsked(const Rule& rule, const Tree& tree) {
  NodeSet asked(tree.nodes.size(), false);
  for (const Clause* clause : ClausesOf(rule)) {
    AddLinksRead(tree, clause->where, &asked);
    for (const Pattern& pattern : clause->unless) AddLinksRead(tree, pattern, &asked);
    for (const Condition& condition : clause->conditions) {
      if (AsksOfInstance(condition)) AddUpward(tree, condition.node, &asked);
    }
  }
  if (rule.inside) AddLinksRead(tree, *rule.inside, &asked);
  if (!rule.sharing_blocked) return asked;
  const Rule flat = Flattened(rule);
  std::vector<NodeId> nodes;
  for (std::size_t label = 0; label < flat.labels.size(); ++label) {
    for (NodeId node : MentionedFor(flat, static_cast<int>(label), &nodes)) AddUpward(tree, node, &asked);
  }
  for (NodeId node : nodes) AddUpward(tree, node, &asked);
  return asked;
}

NodeSet NodesRead(const Rule& rule, const Tree& tree) {
  NodeSet read = LinksAsked(rule, tree);
  if (rule.kind == Rule::Kind::kComplete) AddDownward(tree, kRootNode, &read);
  for (const Clause* clause : ClausesOf(rule)) {
    for (const Change& change : clause->changes) AddLinksRead(tree, change, &read);
  }
  return read;
}

std::uint64_t TagsRead(const Grammar& grammar) {
  std::uint64_t read = 0;
  for (const Rule& rule : grammar.rules) {
    if (rule.within == Domain::kStem) read |= 1 | 4;  // stem, suffix
    for (const Clause* clause : ClausesOf(rule)) {
      for (const TagTest& test : clause->tags) read |= std::uint64_t{1} << test.tag;
    }
  }
  return read;
}

Plan MakePlan(const Grammar& grammar, bool keep_all_links) {
  const Tree& tree = grammar.tree;
  Plan plan;
  plan.visible.assign(tree.nodes.size(), false);
  plan.visible[kSlotNode] = plan.visible[kRootNode] = true;
  std::vector<NodeSet> reads;
  for (const Rule& rule : StepsOf(grammar)) {
    for (const Clause* clause : ClausesOf(rule)) AddClause(tree, *clause, &plan);
    if (rule.inside) AddPattern(tree, *rule.inside, &plan);
    if (rule.preserving || rule.kind == Rule::Kind::kComplete)
      AddDownward(tree, kRootNode, &plan.visible);  // spelling asks for all of a letter
    reads.push_back(NodesRead(rule, tree));
  }
  NodeSet live(tree.nodes.size(), keep_all_links);
  live[kRootNode] = true;
  live[kSlotNode] = false;
  plan.live.resize(reads.size() + 1);
  for (std::size_t i = reads.size() + 1; i-- > 0;) {
    if (i < reads.size()) {
      for (std::size_t n = kRootNode; n < live.size(); ++n) live[n] = live[n] || reads[i][n];
    }
    for (std::size_t n = kRootNode; n < live.size(); ++n) {
      if (live[n]) plan.live[i].push_back(static_cast<NodeId>(n));
    }
    for (std::size_t n = 0; n < live.size(); ++n) plan.visible[n] = plan.visible[n] || live[n];
  }
  // Room depends on the mother's own features.
  for (std::size_t n = 0; n < tree.nodes.size(); ++n) {
    if (plan.visible[n] && tree.nodes[n].room.has_value()) AddTest(tree, *tree.nodes[n].room, &plan);
  }
  return plan;
}

}  // namespace tiersmith
