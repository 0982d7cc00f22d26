// Random rules with one construct of the whole notation each (generate.h): what agrees, conditions, sharing, domains, tags,
// further clauses, optional rules, the further changes.
#include <algorithm>

#include "compile/flatten.h"
#include "model/content.h"
#include "model/not_run_yet.h"
#include "support/generate.h"
#include "support/small_grammar.h"

namespace tiersmith::testing {
namespace {

using Op = Change::Op;
using Kind = PatternItem::Kind;

bool ChangesLength(const Change& change) { return change.op == Op::kLengthen || change.op == Op::kShorten; }

std::vector<NodeId> NodesOf(const Change& change) {
  std::vector<NodeId> nodes;
  for (const Setting& setting : change.settings) nodes.push_back(setting.node);
  const bool of_node = change.op != Op::kInsert && change.op != Op::kDelete && !ChangesLength(change);
  if (of_node && nodes.empty()) nodes.push_back(change.node);
  return nodes;
}

// Is a node merged in one clause, and something under it changed in another? The checker refuses that.
bool MergesAcross(const Rule& rule, const Tree& tree) {
  std::vector<Change> all = rule.changes;
  for (const Clause& clause : rule.otherwise) all.insert(all.end(), clause.changes.begin(), clause.changes.end());
  return std::any_of(all.begin(), all.end(), [&](const Change& merge) {
    if (merge.op != Op::kMerge) return false;
    return std::any_of(all.begin(), all.end(), [&](const Change& other) {
      const std::vector<NodeId> nodes = NodesOf(other);
      return std::any_of(nodes.begin(), nodes.end(),
                         [&](NodeId node) { return node != merge.node && tree.Dominates(merge.node, node); });
    });
  });
}

class Decorator {
 public:
  Decorator(Rng& rng, const Grammar& grammar, const std::vector<FeatureTree>& letters, Rule* rule)
      : rng_(rng), grammar_(grammar), tree_(grammar.tree), letters_(letters), rule_(rule) {}

  bool Add(Construct construct) {
    switch (construct) {
      case Construct::kAgreement:
        return Agreement();
      case Construct::kAgreeingNode:
        return AgreeingNode();
      case Construct::kGivenNode:
        return GivenNode();
      case Construct::kAgreeingUnless:
        return AgreeingUnless();
      case Construct::kShared:
        return AddTest(Random({FeatureTest::Kind::kShared, FeatureTest::Kind::kShared, FeatureTest::Kind::kUnshared}));
      case Construct::kLength:
        return AddTest(Random({FeatureTest::Kind::kLong, FeatureTest::Kind::kShort, FeatureTest::Kind::kHalfFirst,
                               FeatureTest::Kind::kHalfSecond}));
      case Construct::kPart:
        return Part();
      case Construct::kEqual:
        return Compare(Random({Condition::Test::kEqual, Condition::Test::kUnequal}));
      case Construct::kSame:
        return Compare(Random({Condition::Test::kSame, Condition::Test::kNotSame}));
      case Construct::kSameMorpheme:
        return SameMorpheme();
      case Construct::kDomain:
        rule_->within = Random({Domain::kMorpheme, Domain::kHost, Domain::kPhrase});
        return true;
      case Construct::kStem:
        rule_->within = Domain::kStem;
        return true;
      case Construct::kTags:
        return Tags();
      case Construct::kOtherwise:
        return true;  // Otherwise adds the clause
      case Construct::kOptional:
        rule_->probability = Random({0.3, 0.5, 0.75});
        return true;
      case Construct::kByWord:
        rule_->probability = Random({0.3, 0.5, 0.75});
        rule_->by_word = true;
        return true;
      case Construct::kPrefer:
        if (Slots().empty() || (Chance(rng_, 0.7) && !Contest())) return false;
        rule_->prefer = Random({Rule::Prefer::kLeft, Rule::Prefer::kRight});
        return true;
      case Construct::kPreserving:
        rule_->preserving = true;
        return true;
      case Construct::kSharingBlocked:
        rule_->sharing_blocked = true;
        return true;
      case Construct::kNewRoot:
        return NewRoot();
      case Construct::kCopy:
        return Copy();
      case Construct::kLengthen:
        return ChangeLength(Op::kLengthen);
      case Construct::kShorten:
        return ChangeLength(Op::kShorten);
      case Construct::kMerge:
        return Merge();
      case Construct::kBoundary:
        return DeleteBoundary();
      case Construct::kBoundaryAtEnd:
        return DeleteBoundaryAtEnd();
      case Construct::kLongInsertion:
        return Only(Op::kInsert);
      case Construct::kMember:
        return Member();
      case Construct::kTwoContents:
        return TwoContents();
      case Construct::kInsertedGrown:
        return InsertedGrown();
      case Construct::kComplete:
        *rule_ = Rule();
        rule_->kind = Rule::Kind::kComplete;
        rule_->name = "complete";
        return true;
      case Construct::kSeveralItems:
        rule_->probability = Random({0.3, 0.5, 0.75});
        return SeveralItems();
      case Construct::kSeveralChanges:
        return SeveralChanges();
    }
    return false;
  }

 private:
  template <class T>
  T Random(std::initializer_list<T> list) {
    return list.begin()[Below(rng_, static_cast<int>(list.size()))];
  }
  NodeId Node() { return static_cast<NodeId>(kRootNode + 1 + Below(rng_, static_cast<int>(tree_.nodes.size()) - 2)); }

  std::vector<PatternItem*> Slots() {
    std::vector<PatternItem*> slots;
    for (PatternItem& item : rule_->where.items) {
      if (item.kind == Kind::kSlot && item.test.op != SlotTest::Op::kEmpty) slots.push_back(&item);
    }
    return slots;
  }
  static void Require(PatternItem* item, FeatureTest test) {
    if (item->test.op != SlotTest::Op::kBundle) item->test = SlotTest();
    item->test.op = SlotTest::Op::kBundle;
    item->test.bundle.push_back(test);
  }

  bool AddTest(FeatureTest::Kind kind) {
    std::vector<PatternItem*> slots = Slots();
    if (slots.empty()) return false;
    FeatureTest test;
    test.kind = kind;
    test.node = kind == FeatureTest::Kind::kShared || kind == FeatureTest::Kind::kUnshared ? Node() : kRootNode;
    test.side = Random({FeatureTest::Side::kEither, FeatureTest::Side::kLeft, FeatureTest::Side::kRight});
    if (test.node == kRootNode) test.side = FeatureTest::Side::kEither;
    Require(slots[static_cast<std::size_t>(Below(rng_, static_cast<int>(slots.size())))], test);
    return true;
  }

  bool Agreement() {
    std::vector<PatternItem*> slots = Slots();
    if (slots.size() < 2) return false;
    NodeId node = Node();
    while (tree_[node].type == TreeNode::Type::kClass) node = Node();
    const bool binary = tree_[node].type == TreeNode::Type::kBinary;
    std::shuffle(slots.begin(), slots.end(), rng_);
    rule_->variables = 1;
    const std::size_t tests = Chance(rng_, 0.5) ? 2 : 1;
    for (std::size_t i = 0; i < tests; ++i) {
      FeatureTest test;
      test.kind = binary && Chance(rng_, 0.3) ? FeatureTest::Kind::kDiffers : FeatureTest::Kind::kAgrees;
      test.node = node;
      test.variable = 0;
      Require(slots[i], test);
    }
    if (tests == 2 && Chance(rng_, 0.5)) return true;
    Change change;
    change.op = Random({Op::kSet, Op::kFill});
    change.target = slots[1]->label;
    if (change.target < 0) return tests == 2;
    Setting setting{node, {}, 0, binary && Chance(rng_, 0.3)};
    change.settings = {setting};
    rule_->changes = {change};
    return true;
  }

  NodeId ClassNode() {
    NodeId node = Node();
    while (tree_[node].type != TreeNode::Type::kClass) node = Node();
    return node;
  }
  static FeatureTest Agrees(NodeId node) {
    FeatureTest test;
    test.kind = FeatureTest::Kind::kAgrees;
    test.node = node;
    test.variable = 0;
    return test;
  }

  bool AgreeingNode() {
    std::vector<PatternItem*> slots = Slots();
    if (slots.size() < 2) return false;
    const NodeId node = ClassNode();
    rule_->variables = 1;
    std::shuffle(slots.begin(), slots.end(), rng_);
    for (std::size_t i = 0; i < 2; ++i) Require(slots[i], Agrees(node));
    return true;
  }

  // An item is given what a variable stands for at another, now and then at both.
  bool GivenNode() {
    std::vector<PatternItem*> slots = Slots();
    if (slots.size() < 2) return false;
    std::shuffle(slots.begin(), slots.end(), rng_);
    if (slots[1]->label < 0) return false;
    const NodeId node = ClassNode();
    rule_->variables = 1;
    Require(slots[0], Agrees(node));
    if (Chance(rng_, 0.2)) Require(slots[1], Agrees(node));
    Change change;
    change.op = Random({Op::kSet, Op::kSet, Op::kFill});
    change.target = slots[1]->label;
    change.settings = {{node, {}, 0, false}};
    rule_->changes = {change};
    return true;
  }

  // Barred beside a slot that agrees: with an item of the `where`, or with the very item that both name.
  bool AgreeingUnless() {
    std::vector<PatternItem*> slots = Slots();
    std::shuffle(slots.begin(), slots.end(), rng_);
    const auto labelled = std::find_if(slots.begin(), slots.end(), [](PatternItem* slot) { return slot->label >= 0; });
    if (labelled == slots.end()) return false;
    const NodeId node = Node();
    rule_->variables = 1;
    PatternItem item, other, between;
    item.label = (*labelled)->label;
    between.kind = Kind::kGroup;
    between.max = Random({1, 2, -1});
    between.alternatives.resize(1);
    between.alternatives[0].items.resize(1);
    Require(&other, Agrees(node));
    const bool shared = Chance(rng_, 0.6);
    if (shared) Require(slots[0], Agrees(node));
    if (!shared || Chance(rng_, 0.2)) Require(&item, Agrees(node));
    if (tree_[node].type == TreeNode::Type::kBinary && Chance(rng_, 0.3))
      other.test.bundle.back().kind = FeatureTest::Kind::kDiffers;
    std::vector<PatternItem> items{item, other};
    if (Chance(rng_, 0.4)) items.insert(items.begin() + 1, between);
    if (Chance(rng_, 0.5)) std::reverse(items.begin(), items.end());
    rule_->unless.emplace_back();
    rule_->unless.back().items = std::move(items);
    return true;
  }

  bool Part() {
    std::vector<PatternItem*> slots = Slots();
    if (slots.empty()) return false;
    FeatureTest test;
    test.kind = Random({FeatureTest::Kind::kHasValue, FeatureTest::Kind::kLacksValue});
    test.node = NodeOf(grammar_, "cont");
    test.value = static_cast<Value>(Below(rng_, 2));
    test.part = Random({FeatureTest::Part::kFirst, FeatureTest::Part::kLast});
    Require(slots[static_cast<std::size_t>(Below(rng_, static_cast<int>(slots.size())))], test);
    return true;
  }

  bool TwoLabels(int* a, int* b) {
    std::vector<int> labels;
    for (PatternItem* slot : Slots()) {
      if (slot->label >= 0) labels.push_back(slot->label);
    }
    if (labels.size() < 2) return false;
    std::shuffle(labels.begin(), labels.end(), rng_);
    *a = labels[0];
    *b = labels[1];
    return true;
  }

  bool Compare(Condition::Test kind) {
    Condition condition;
    condition.test = kind;
    if (!TwoLabels(&condition.left, &condition.right)) return false;
    condition.node = Chance(rng_, 0.2) ? kRootNode : Node();
    rule_->conditions.push_back(condition);
    return true;
  }

  bool SameMorpheme() {
    std::vector<PatternItem>& items = rule_->where.items;
    for (std::size_t i = 1; i < items.size(); ++i) {
      if (items[i - 1].kind != Kind::kSlot || items[i].kind != Kind::kSlot) continue;
      PatternItem same;
      same.kind = Kind::kSameMorpheme;
      items.insert(items.begin() + static_cast<std::ptrdiff_t>(i), same);
      return true;
    }
    return false;
  }

  bool Tags() {
    const int tests = Chance(rng_, 0.3) ? 2 : 1;
    for (int i = 0; i < tests; ++i) {
      TagTest test;
      test.only = Chance(rng_, 0.5);
      test.scope = Random({TagTest::Scope::kChanged, TagTest::Scope::kLabel, TagTest::Scope::kWord});
      test.label = test.scope == TagTest::Scope::kLabel ? Below(rng_, static_cast<int>(rule_->labels.size())) : -1;
      test.tag = Below(rng_, 6);
      rule_->tags.push_back(test);
    }
    return true;
  }

  bool Only(Op op) {
    Change change;
    change.op = op;
    change.target = Below(rng_, static_cast<int>(rule_->labels.size()));
    change.before = Chance(rng_, 0.5);
    if (op == Op::kInsert) {
      change.inserted = letters_[static_cast<std::size_t>(Below(rng_, static_cast<int>(letters_.size())))];
      change.is_long = true;
    }
    rule_->changes = {change};
    return true;
  }

  // Alone, or beside what else the rule does; often where length is asked for.
  bool ChangeLength(Op op) {
    Only(op);
    if (Chance(rng_, 0.6)) AddChanges();
    if (Chance(rng_, 0.6)) AddTest(Random({FeatureTest::Kind::kLong, FeatureTest::Kind::kShort}));
    if (rule_->mode != Rule::Mode::kAtOnce && Chance(rng_, 0.2)) {
      rule_->probability = 0.5;
      rule_->by_word = Chance(rng_, 0.5);
    }
    return true;
  }

  // One or two changes more, of any kind; in a sweep, of the item visited.
  void AddChanges() {
    std::vector<int> slots;
    for (PatternItem* slot : Slots()) {
      if (slot->label >= 0) slots.push_back(slot->label);
    }
    if (slots.empty()) return;
    const auto any_slot = [&] { return slots[static_cast<std::size_t>(Below(rng_, static_cast<int>(slots.size())))]; };
    const std::size_t wanted = rule_->changes.size() + (Chance(rng_, 0.3) ? 2 : 1);
    for (int tries = 0; tries < 20 && rule_->changes.size() < wanted; ++tries) {
      const bool sweeps = rule_->mode != Rule::Mode::kAtOnce;
      const int target = sweeps ? rule_->changes.front().target : any_slot(), source = any_slot();
      rule_->changes.push_back(AnyChange(target, source));
      const Change& change = rule_->changes.back();
      const bool pair = change.source >= 0;
      if ((pair && source == target) || (sweeps && change.op == Op::kMerge) || !StandBesideEachOther())
        rule_->changes.pop_back();
    }
    std::shuffle(rule_->changes.begin(), rule_->changes.end(), rng_);
  }

  Change AnyChange(int target, int source) {
    Change change;
    change.target = target;
    change.op = Random({Op::kSpread, Op::kDelink, Op::kDelink, Op::kSet, Op::kSetLiteral, Op::kInsert, Op::kInsert,
                        Op::kDelete, Op::kDelete, Op::kLengthen, Op::kShorten, Op::kMerge});
    switch (change.op) {
      case Op::kSpread:
      case Op::kSet:
      case Op::kFill:
      case Op::kSetAs:
      case Op::kFillAs:
        return ChangeOf(target, source);
      case Op::kMerge:
        change.source = source;
        change.node = Chance(rng_, 0.2) ? kRootNode : Node();
        break;
      case Op::kDelink:
        change.node = Node();
        break;
      case Op::kSetLiteral:
        change.node = kRootNode;
        change.inserted = AnyLetter();
        change.is_long = Chance(rng_, 0.35);
        break;
      case Op::kInsert:
        change.inserted = AnyLetter();
        change.before = Chance(rng_, 0.5);
        change.is_long = Chance(rng_, 0.15);
        break;
      case Op::kDelete:
      case Op::kLengthen:
      case Op::kShorten:
        break;
    }
    return change;
  }
  const FeatureTree& AnyLetter() {
    return letters_[static_cast<std::size_t>(Below(rng_, static_cast<int>(letters_.size())))];
  }

  // A rule whose matches contend for one slot: it may get what any of several others has.
  bool Contest() {
    PatternItem ends[2];
    for (int i = 0; i < 2; ++i) {
      ends[i].label = i;
      if (Chance(rng_, 0.4)) ends[i].test = Slots().front()->test;
    }
    PatternItem any, group;
    any.test = SlotTest();
    group.kind = Kind::kGroup;
    group.min = 0;
    group.max = 1;
    group.alternatives.resize(1);
    group.alternatives[0].items = {any};
    rule_->where.items = {ends[0], group, ends[1]};
    rule_->labels = {"X", "Y"};
    rule_->unless.clear();
    rule_->mode = Rule::Mode::kAtOnce;
    Change change;
    change.op = Op::kSetAs;
    change.node = Chance(rng_, 0.2) ? kRootNode : NodeOf(grammar_, "Place");
    change.target = Below(rng_, 2);
    change.source = 1 - change.target;
    rule_->changes = {change};
    return true;
  }

  // One node given on two items of a match.
  bool TwoContents() {
    int a = 0, b = 0;
    if (!TwoLabels(&a, &b)) return false;
    NodeId node = Node();
    while (tree_[node].type == TreeNode::Type::kClass) node = Node();
    rule_->mode = Rule::Mode::kAtOnce;
    rule_->changes.clear();
    for (int label : {a, b}) {
      Change change;
      change.op = Random({Op::kSet, Op::kSet, Op::kFill});
      change.target = label;
      const bool bare = tree_[node].type == TreeNode::Type::kBare;
      change.settings = {{node, {static_cast<Value>(bare ? 0 : Below(rng_, 2))}, -1, false}};
      if (change.op == Op::kSet && Chance(rng_, 0.2)) change.settings[0].values.clear();
      if (Chance(rng_, 0.2)) {
        change.settings.clear();
        change.op = Op::kSetLiteral;
        change.inserted = letters_[static_cast<std::size_t>(Below(rng_, static_cast<int>(letters_.size())))];
      } else if (Chance(rng_, 0.2)) {
        change.settings.clear();
        change.op = Op::kSetAs;
        change.node = Chance(rng_, 0.3) ? kRootNode : node;
        change.source = label == a ? b : a;
      }
      rule_->changes.push_back(change);
    }
    return true;
  }

  // What is inserted gets one or two things more: a line, a content, a copy.
  bool InsertedGrown() {
    std::vector<int> slots;
    for (PatternItem* slot : Slots()) {
      if (slot->label >= 0) slots.push_back(slot->label);
    }
    if (slots.empty()) return false;
    const auto any_slot = [&] { return slots[static_cast<std::size_t>(Below(rng_, static_cast<int>(slots.size())))]; };
    rule_->label_kinds.resize(rule_->labels.size(), Clause::LabelKind::kSlot);
    rule_->changes.clear();
    const bool sweeps = rule_->mode != Rule::Mode::kAtOnce;
    const int visited = any_slot();
    const int items = Chance(rng_, 0.2) ? 2 : 1;
    for (int i = 0; i < items; ++i) {
      Change insert;
      insert.op = Op::kInsert;
      insert.target = sweeps ? visited : any_slot();
      insert.before = Chance(rng_, 0.5);
      insert.is_long = Chance(rng_, 0.15);
      insert.inserted = letters_[static_cast<std::size_t>(Below(rng_, static_cast<int>(letters_.size())))];
      while (Chance(rng_, 0.6)) Remove(&insert.inserted, Node());
      Prune(tree_, &insert.inserted);
      insert.inserted_label = static_cast<int>(rule_->labels.size());
      rule_->labels.push_back("E" + std::to_string(i + 1));
      rule_->label_kinds.push_back(Clause::LabelKind::kInserted);
      rule_->changes.push_back(insert);
      const int changes = Chance(rng_, 0.3) ? 2 : 1;
      for (int k = 0; k < changes; ++k) rule_->changes.push_back(ChangeOf(insert.inserted_label, any_slot()));
    }
    if (Chance(rng_, 0.15)) {
      Change other;
      other.op = Random({Op::kDelete, Op::kDelink, Op::kSpread});
      other.target = sweeps ? visited : any_slot();
      other.node = Node();
      other.source = other.op == Op::kSpread ? any_slot() : -1;
      if (other.op == Op::kDelete) other.node = 0;
      rule_->changes.push_back(other);
    }
    if (Chance(rng_, 0.4)) With();
    return StandBesideEachOther() && NotRunYet(*rule_, {}, tree_).empty();
  }

  // What may be said of the rule as a whole; the content of a variable.
  void With() {
    const bool one_host = std::all_of(rule_->changes.begin(), rule_->changes.end(), [&](const Change& change) {
      return HostOf(*rule_, change.target) == rule_->changes.front().target;
    });
    switch (Below(rng_, 5)) {
      case 0:
        if (one_host) rule_->probability = Random({0.3, 0.5});
        break;
      case 1:
        rule_->preserving = true;
        break;
      case 2:
        rule_->prefer = Random({Rule::Prefer::kLeft, Rule::Prefer::kRight});
        break;
      case 3:
        rule_->sharing_blocked = true;
        break;
      case 4:
        Borrow();
        break;
    }
  }

  void Borrow() {
    std::vector<PatternItem*> slots = Slots();
    for (Change& change : rule_->changes) {
      if (change.settings.empty() || change.settings[0].values.empty()) continue;
      const NodeId node = Chance(rng_, 0.3) ? ClassNode() : change.settings[0].node;
      Require(slots[static_cast<std::size_t>(Below(rng_, static_cast<int>(slots.size())))], Agrees(node));
      rule_->variables = 1;
      const bool binary = tree_[node].type == TreeNode::Type::kBinary;
      change.settings = {{node, {}, 0, binary && Chance(rng_, 0.3)}};
      return;
    }
  }

  // What the checker lets through (model/check_changes.cc, "changes beside each other"), and a little less: no node is given
  // or moved together with one under it, nor given twice to one item.
  bool StandBesideEachOther() const {
    const std::vector<Change>& changes = rule_->changes;
    return std::all_of(changes.begin(), changes.end(), [&](const Change& a) {
      return std::all_of(changes.begin(), changes.end(),
                         [&](const Change& b) { return &a == &b || StandBeside(a, b); });
    });
  }
  static bool OfOneItem(const Change& a, const Change& b) {
    const auto changes = [](const Change& change, int label) {
      return change.target == label || (change.op == Op::kMerge && change.source == label);
    };
    return changes(b, a.target) || (a.op == Op::kMerge && changes(b, a.source));
  }
  static bool Gives(const Change& change, NodeId node) {
    if (change.op == Op::kSetLiteral) return node == kRootNode || Bears(change.inserted, node);
    if (change.op == Op::kSetAs || change.op == Op::kFillAs) return change.node == node || change.node == kRootNode;
    return std::any_of(change.settings.begin(), change.settings.end(), [node](const Setting& setting) {
      return setting.node == node && (!setting.values.empty() || setting.variable >= 0);
    });
  }
  // Labels are numbered from left to right.
  static bool Between(int label, int one, int other) {
    return label > std::min(one, other) && label < std::max(one, other);
  }
  bool StandBeside(const Change& a, const Change& b) const {
    const std::vector<NodeId> nodes = NodesOf(b);
    const bool one_item = OfOneItem(a, b);
    if (ChangesLength(a) && one_item) {
      if (ChangesLength(b)) return a.op == b.op;
      if (std::find(nodes.begin(), nodes.end(), kRootNode) != nodes.end()) return false;
    }
    if (a.op == Op::kMerge && Between(b.target, a.source, a.target) && Gives(b, a.node)) return false;
    for (NodeId above : NodesOf(a)) {
      for (NodeId node : nodes) {
        const bool lines = (a.op == Op::kSpread || a.op == Op::kDelink) && (b.op == Op::kSpread || b.op == Op::kDelink);
        if (above == node && one_item && !lines && !(a.op == Op::kMerge && b.op == Op::kMerge)) return false;
        const bool new_root = above == kRootNode && a.op != Op::kSpread && a.op != Op::kDelink && a.op != Op::kMerge;
        if (above != node && tree_.Dominates(above, node) && (one_item || !new_root)) return false;
      }
    }
    return true;
  }

  Change ChangeOf(int label, int source) {
    Change change;
    change.op = Random({Op::kSpread, Op::kSpread, Op::kSpread, Op::kSet, Op::kFill, Op::kSetAs, Op::kFillAs});
    change.target = label;
    if (change.op == Op::kSet || change.op == Op::kFill) {
      NodeId node = Node();
      while (tree_[node].type == TreeNode::Type::kClass) node = Node();
      const bool bare = tree_[node].type == TreeNode::Type::kBare;
      change.settings = {{node, {static_cast<Value>(bare ? 0 : Below(rng_, 2))}, -1, false}};
      if (change.op == Op::kSet && Chance(rng_, 0.2)) change.settings[0].values.clear();
      return change;
    }
    change.source = source;
    change.node = change.op != Op::kSpread && Chance(rng_, 0.15) ? kRootNode : Node();
    return change;
  }

  // Several items of a match change at once, or one and the boundary between them, or what is inserted beside it.
  bool SeveralItems() {
    const int pick = Below(rng_, 10);
    if (pick < 2 && !TwoContents()) return false;
    if (pick == 2 && !DeleteBoundary()) return false;
    if (pick == 3) return InsertedGrown();
    rule_->mode = Rule::Mode::kAtOnce;
    if (pick < 6 && !Merge()) return false;
    if (Chance(rng_, 0.7)) AddChanges();
    return true;
  }

  // Two or three changes of any kinds in one match, mostly of one node; or what one item passes on to another and gets anew.
  bool SeveralChanges() {
    const int labels = static_cast<int>(rule_->labels.size());
    const bool sweeps = rule_->mode != Rule::Mode::kAtOnce;
    const int visited = Below(rng_, labels);
    const NodeId about = Node();
    rule_->changes.clear();
    int from = -1, to = -1;
    if (!sweeps && Chance(rng_, 0.5) && TwoLabels(&from, &to)) {
      for (Op op : {Op::kSpread, Op::kDelink}) rule_->changes.push_back(Moving(op, from, to, about));
    }
    for (int count = from >= 0 ? 1 : Chance(rng_, 0.5) ? 3 : 2; count > 0; --count) {
      const int target = sweeps ? visited : from >= 0 ? from : Below(rng_, labels);
      Change change =
          Chance(rng_, 0.25) ? Moving(Op::kDelink, -1, target, about) : ChangeOf(target, Below(rng_, labels));
      if (!change.settings.empty()) {
        if (Chance(rng_, 0.7) && tree_[about].type != TreeNode::Type::kClass) change.settings[0].node = about;
        if (tree_[change.settings[0].node].type == TreeNode::Type::kBare && !change.settings[0].values.empty())
          change.settings[0].values = {0};
      } else if (Chance(rng_, 0.7)) {
        change.node = about;
      }
      if (change.source == target) return false;
      rule_->changes.push_back(change);
    }
    return StandBesideEachOther() && NotRunYet(*rule_, {}, tree_).empty();
  }

  static Change Moving(Op op, int source, int target, NodeId node) {
    Change change;
    change.op = op;
    change.source = op == Op::kSpread ? source : -1;
    change.target = target;
    change.node = node;
    return change;
  }

  bool NewRoot() {
    Only(Op::kSetLiteral);
    Change& change = rule_->changes.front();
    change.inserted = letters_[static_cast<std::size_t>(Below(rng_, static_cast<int>(letters_.size())))];
    change.is_long = Chance(rng_, 0.35);
    return true;
  }

  bool Copy() {
    Change change;
    change.op = Random({Op::kSetAs, Op::kFillAs});
    if (!TwoLabels(&change.source, &change.target)) return false;
    change.node = Chance(rng_, 0.2) ? kRootNode : Node();
    rule_->changes = {change};
    return true;
  }

  bool Merge() {
    Change change;
    change.op = Op::kMerge;
    if (!TwoLabels(&change.source, &change.target)) return false;
    change.node = Chance(rng_, 0.2) ? kRootNode : Node();
    rule_->changes = {change};
    rule_->mode = Rule::Mode::kAtOnce;
    if (Chance(rng_, 0.6)) AddChanges();
    return true;
  }

  bool DeleteBoundary() {
    const std::vector<PatternItem>& items = rule_->where.items;
    for (std::size_t i = 1; i < items.size(); ++i) {
      if (items[i - 1].kind != Kind::kSlot || items[i].kind != Kind::kSlot) continue;
      rule_->changes.clear();
      DeleteBoundaryAt(i);
      rule_->within = Domain::kPhrase;
      return true;
    }
    return false;
  }

  bool DeleteBoundaryAtEnd() {
    const std::vector<PatternItem>& items = rule_->where.items;
    const bool first = Chance(rng_, 0.5);
    if ((first ? items.front() : items.back()).kind == Kind::kBoundary) return false;
    if (Chance(rng_, 0.6)) rule_->changes.clear();
    DeleteBoundaryAt(first ? 0 : items.size());
    rule_->within = Random({Domain::kWord, Domain::kPhrase, Domain::kMorpheme});
    if (Chance(rng_, 0.2)) rule_->probability = 0.5;
    return Chance(rng_, 0.7) || Tags();
  }

  void DeleteBoundaryAt(std::size_t place) {
    PatternItem boundary;
    boundary.kind = Kind::kBoundary;
    boundary.boundary = Random({Boundary::kMorpheme, Boundary::kMorpheme, Boundary::kClitic, Boundary::kWord});
    boundary.label = static_cast<int>(rule_->labels.size());
    rule_->where.items.insert(rule_->where.items.begin() + static_cast<std::ptrdiff_t>(place), boundary);
    rule_->label_kinds.resize(rule_->labels.size(), Clause::LabelKind::kSlot);
    rule_->labels.push_back("B");
    rule_->label_kinds.push_back(Clause::LabelKind::kBoundary);
    Change change;
    change.op = Op::kDelete;
    change.target = boundary.label;
    rule_->changes.push_back(change);
    rule_->mode = Rule::Mode::kAtOnce;
  }

  bool Member() {
    Change change;
    change.op = Op::kDelink;
    change.target = Below(rng_, static_cast<int>(rule_->labels.size()));
    change.node = NodeOf(grammar_, "cont");
    change.member.which =
        Random({tiersmith::Member::Which::kFirst, tiersmith::Member::Which::kLast, tiersmith::Member::Which::kValue});
    change.member.value = static_cast<Value>(Below(rng_, 2));
    rule_->changes = {change};
    return true;
  }

  Rng& rng_;
  const Grammar& grammar_;
  const Tree& tree_;
  const std::vector<FeatureTree>& letters_;
  Rule* rule_;
};

}  // namespace

const std::vector<Construct>& AllConstructs() {
  static const std::vector<Construct> all = {
      Construct::kAgreement,      Construct::kAgreeingNode,   Construct::kShared,       Construct::kLength,
      Construct::kPart,           Construct::kEqual,          Construct::kSame,         Construct::kSameMorpheme,
      Construct::kDomain,         Construct::kStem,           Construct::kTags,         Construct::kOtherwise,
      Construct::kOptional,       Construct::kByWord,         Construct::kPrefer,       Construct::kPreserving,
      Construct::kSharingBlocked, Construct::kNewRoot,        Construct::kCopy,         Construct::kLengthen,
      Construct::kShorten,        Construct::kMerge,          Construct::kBoundary,     Construct::kLongInsertion,
      Construct::kMember,         Construct::kTwoContents,    Construct::kComplete,     Construct::kGivenNode,
      Construct::kInsertedGrown,  Construct::kAgreeingUnless, Construct::kSeveralItems, Construct::kBoundaryAtEnd,
      Construct::kSeveralChanges};
  return all;
}

const char* NameOf(Construct construct) {
  static const char* const names[] = {"agreement (αf)",
                                      "agreement (αNode)",
                                      "shared, unshared",
                                      "long, short, half",
                                      "facing parts",
                                      "if = ≠",
                                      "if is, is not",
                                      "&",
                                      "within",
                                      "within stem",
                                      "only, except",
                                      "otherwise",
                                      "optional",
                                      "optional by word",
                                      "prefer",
                                      "preserving",
                                      "sharing blocked",
                                      "set /k/",
                                      "set, fill .. as",
                                      "lengthen",
                                      "shorten",
                                      "merge",
                                      "delete boundary",
                                      "insert long",
                                      "delink a member",
                                      "two contents",
                                      "complete",
                                      "set, fill [αNode]",
                                      "changes of the inserted",
                                      "agreement in unless",
                                      "optional, several items",
                                      "delete boundary at an end",
                                      "several changes"};
  return names[static_cast<int>(construct)];
}

std::vector<NodeId> SharingFor(Rng& rng, const Tree& tree, const Rule& rule) {
  std::vector<NodeId> near;
  for (const Condition& condition : rule.conditions) near.push_back(condition.node);
  const auto note = [&](const auto& self, const Pattern& pattern) -> void {
    for (const PatternItem& item : pattern.items) {
      for (const FeatureTest& test : item.test.bundle) {
        if (test.kind == FeatureTest::Kind::kShared || test.kind == FeatureTest::Kind::kUnshared)
          near.push_back(test.node);
      }
      for (const Pattern& alternative : item.alternatives) self(self, alternative);
    }
  };
  note(note, rule.where);
  for (const Change& change : rule.changes) {
    std::vector<NodeId> nodes;
    if (change.node > kRootNode) nodes.push_back(change.node);
    for (const Setting& setting : change.settings) nodes.push_back(setting.node);
    for (NodeId node : nodes) {
      for (NodeId other = kRootNode + 1; other < tree.nodes.size(); ++other) {
        if (tree.Dominates(node, other) || tree.Dominates(other, node)) near.push_back(other);
      }
    }
  }
  const int count = static_cast<int>(tree.nodes.size());
  for (int i = 0; i < 2; ++i) near.push_back(static_cast<NodeId>(kRootNode + 1 + Below(rng, count - kRootNode - 1)));
  std::vector<NodeId> sharing{kRootNode};
  for (int i = 0; i < 2; ++i) sharing.push_back(near[Below(rng, static_cast<int>(near.size()))]);
  std::sort(sharing.begin(), sharing.end());
  sharing.erase(std::unique(sharing.begin(), sharing.end()), sharing.end());
  return sharing;
}

bool AsksForTags(const Rule& rule) {
  const auto asks = [](const Clause& clause) { return !clause.tags.empty(); };
  return rule.within == Domain::kStem || asks(rule) || std::any_of(rule.otherwise.begin(), rule.otherwise.end(), asks);
}

Form WithTags(Rng& rng, const Form& form) {
  Form tagged = form;
  tagged.items.insert(tagged.items.begin(), {FormItem::Kind::kBoundary, Boundary::kPhrase, 0, 0});
  for (FormItem& item : tagged.items) {
    if (item.kind != FormItem::Kind::kBoundary) continue;
    item.tags = std::uint64_t{1} << Below(rng, 4);  // a kind
    for (int tag = 4; tag < 6; ++tag) {
      if (Chance(rng, 0.4)) item.tags |= std::uint64_t{1} << tag;
    }
  }
  return tagged;
}

void OmitSome(Grammar* grammar) {
  const Tree& tree = grammar->tree;
  for (const auto& [name, value] : {std::make_pair("voice", Value{0}), std::make_pair("ant", Value{1}),
                                    std::make_pair("nasal", Value{0}), std::make_pair("back", Value{1})}) {
    const NodeId node = NodeOf(*grammar, name);
    Inventory::OmitEntry entry;
    entry.node = node;
    entry.value = value;
    for (Symbol& symbol : grammar->inventory.symbols) {
      entry.takes.push_back(BearsValue(symbol.full, node, value));
      if (entry.takes.back()) Remove(&symbol.underlying, node);
      Prune(tree, &symbol.underlying);
    }
    grammar->inventory.omitted.push_back(entry);
  }
}

bool Decorate(Rng& rng, const Grammar& grammar, const std::vector<FeatureTree>& letters, Construct construct,
              Rule* rule) {
  return Decorator(rng, grammar, letters, rule).Add(construct);
}

Rule RandomRuleWith(Rng& rng, const Grammar& grammar, const std::vector<NamedTest>& tests,
                    const std::vector<FeatureTree>& letters, Construct construct) {
  for (;;) {
    Rule rule = RandomRule(rng, grammar, tests, letters);
    if (!Decorate(rng, grammar, letters, construct, &rule)) continue;
    const bool length = construct == Construct::kLengthen || construct == Construct::kShorten;
    const bool merge = construct == Construct::kMerge;
    if (construct == Construct::kOtherwise || (merge && Chance(rng, 0.2)) ||
        (length && rule.mode != Rule::Mode::kAtOnce && Chance(rng, 0.2))) {
      const int further = Chance(rng, 0.3) ? 2 : 1;
      for (int i = 0; i < further; ++i) {
        Rule other = RandomRule(rng, grammar, tests, letters);
        other.mode = rule.mode;
        while (Refused(grammar.tree, other)) {
          other = RandomRule(rng, grammar, tests, letters);
          other.mode = rule.mode;
        }
        rule.otherwise.push_back(other);
      }
    }
    if (construct == Construct::kComplete) return rule;
    if (MergesAcross(rule, grammar.tree)) continue;
    if (!rule.otherwise.empty() && !NotRunYet(rule, {}, grammar.tree).empty()) continue;
    NoteEmpty(&rule.where);
    if (!Refused(grammar.tree, rule)) return rule;
  }
}

}  // namespace tiersmith::testing
