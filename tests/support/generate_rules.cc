// Rules and grammars for the agreement tests (generate.h), random and exhaustive.
#include <algorithm>
#include <functional>
#include <iterator>

#include "compile/flatten.h"
#include "graph/interpreter.h"
#include "model/content.h"
#include "support/generate.h"
#include "support/small_grammar.h"

namespace tiersmith::testing {
namespace {

using Op = Change::Op;
using Kind = PatternItem::Kind;

bool MentionsEmpty(const SlotTest& test) {
  return test.op == SlotTest::Op::kEmpty || std::any_of(test.args.begin(), test.args.end(), MentionsEmpty);
}

bool MentionsEmpty(const Pattern& pattern) {
  return std::any_of(pattern.items.begin(), pattern.items.end(), [](const PatternItem& item) {
    return (item.kind == Kind::kSlot && MentionsEmpty(item.test)) ||
           std::any_of(item.alternatives.begin(), item.alternatives.end(),
                       [](const Pattern& p) { return MentionsEmpty(p); });
  });
}

// At or under a class node that may be a contour.
bool UnderContour(const Tree& tree, NodeId node) {
  for (; node > kRootNode; node = tree[node].mother) {
    if (tree[node].type == TreeNode::Type::kClass && tree[node].max > 1) return true;
  }
  return false;
}

bool Relinks(const Change& change) { return change.op == Op::kSpread || change.op == Op::kDelink; }

std::vector<NodeId> NodesChanged(const Change& change) {
  if (Relinks(change)) return {change.node};
  std::vector<NodeId> nodes;
  for (const Setting& setting : change.settings) nodes.push_back(setting.node);
  return nodes;
}

// ---- random pieces ----------------------------------------------------------------------------------

class RuleMaker {
 public:
  RuleMaker(Rng& rng, const Grammar& grammar, const std::vector<NamedTest>& tests,
            const std::vector<FeatureTree>& letters)
      : rng_(rng), grammar_(grammar), tree_(grammar.tree), tests_(tests), letters_(letters) {
    for (std::size_t node = 2; node < tree_.nodes.size(); ++node) {
      if (!UnderContour(tree_, static_cast<NodeId>(node)) && !tree_[node].floating) {
        nodes_.push_back(static_cast<NodeId>(node));
      }
    }
  }

  Rule Make(Op first, Rule::Mode mode) {
    Rule rule;
    rule.name = "r";
    rule.mode = mode;
    MakeWhere(&rule, first == Op::kSpread ? 2 : 1);
    MakeChanges(&rule, first);
    while (Chance(rng_, 0.15) && rule.unless.size() < 2) rule.unless.push_back(Unless(rule));
    NoteEmpty(&rule.where);
    for (Pattern& pattern : rule.unless) NoteEmpty(&pattern);
    return rule;
  }

 private:
  template <typename T>
  const T& Any(const std::vector<T>& list) {
    return list[Below(rng_, static_cast<int>(list.size()))];
  }

  SlotTest Test() {
    if (Chance(rng_, 0.02)) {
      SlotTest empty;
      empty.op = SlotTest::Op::kEmpty;
      return empty;
    }
    if (Chance(rng_, 0.25)) return SlotTest();
    if (Chance(rng_, 0.85)) return Any(tests_).test;
    SlotTest test;
    const int op = Below(rng_, 3);
    test.op = op == 0 ? SlotTest::Op::kAnd : op == 1 ? SlotTest::Op::kOr : SlotTest::Op::kNot;
    test.args = {Any(tests_).test};
    if (op != 2) test.args.push_back(Any(tests_).test);
    return test;
  }

  PatternItem SlotItem(int label) {
    PatternItem item;
    item.test = Test();
    item.label = label;
    return item;
  }
  PatternItem BoundaryItem() {
    PatternItem item;
    item.kind = Kind::kBoundary;
    item.boundary = Chance(rng_, 0.7) ? Boundary::kMorpheme : Boundary::kClitic;
    return item;
  }
  PatternItem EdgeItem() {
    PatternItem item = BoundaryItem();
    if (Chance(rng_, 0.5)) item.boundary = Chance(rng_, 0.7) ? Boundary::kWord : Boundary::kPhrase;
    return item;
  }
  PatternItem GapItem() {
    PatternItem item;
    item.kind = Kind::kGap;
    if (Chance(rng_, 0.3)) item.tier = Any(nodes_);
    return item;
  }
  PatternItem GroupItem() {
    PatternItem item;
    item.kind = Kind::kGroup;
    item.min = Below(rng_, 2);
    const int most[] = {1, 2, -1};
    item.max = most[Below(rng_, 3)];
    const int alternatives = Chance(rng_, 0.25) ? 2 : 1;
    for (int i = 0; i < alternatives; ++i) {
      Pattern pattern;
      pattern.items.push_back(SlotItem(-1));
      if (Chance(rng_, 0.2)) pattern.items.push_back(SlotItem(-1));
      item.alternatives.push_back(pattern);
    }
    return item;
  }

  void MakeWhere(Rule* rule, int least) {
    const int pick = Below(rng_, 10);
    const int slots = std::max(least, pick < 2 ? 1 : pick < 7 ? 2 : 3);
    std::vector<PatternItem>& items = rule->where.items;
    if (Chance(rng_, 0.1)) items.push_back(EdgeItem());
    if (Chance(rng_, 0.04)) items.push_back(GroupItem());
    for (int i = 0; i < slots; ++i) {
      const int between = Below(rng_, 20);
      if (i > 0 && between < 5) items.push_back(GapItem());
      if (i > 0 && between == 5) items.push_back(BoundaryItem());
      if (i > 0 && (between == 6 || between == 7)) items.push_back(GroupItem());
      items.push_back(SlotItem(i));
      rule->labels.push_back(std::string(1, static_cast<char>('X' + i)));
    }
    if (Chance(rng_, 0.04)) items.push_back(GroupItem());
    if (Chance(rng_, 0.1)) items.push_back(EdgeItem());
  }

  Pattern Unless(const Rule& rule) {
    Pattern pattern;
    PatternItem bare;
    bare.label = Below(rng_, static_cast<int>(rule.labels.size()));
    if (Chance(rng_, 0.3)) bare.test = Any(tests_).test;
    pattern.items = {bare};
    const int more = bare.test.op == SlotTest::Op::kAny ? 1 + Below(rng_, 2) : Below(rng_, 2);
    for (int i = 0; i < more; ++i) {
      const bool before = Chance(rng_, 0.5);
      std::vector<PatternItem> added;
      if (Chance(rng_, 0.2)) {
        added = {EdgeItem()};
        const PatternItem& end = before ? pattern.items.front() : pattern.items.back();
        if (end.kind != Kind::kSlot) continue;
      } else {
        added = {SlotItem(-1)};
        const PatternItem& end = before ? pattern.items.front() : pattern.items.back();
        if (end.kind == Kind::kSlot && Chance(rng_, 0.25)) added.push_back(GapItem());
        if (!before) std::reverse(added.begin(), added.end());
      }
      pattern.items.insert(before ? pattern.items.begin() : pattern.items.end(), added.begin(), added.end());
    }
    return pattern;
  }

  // A contour is asked for only of what surely has the room.
  bool SurelyHasRoom(const Rule& rule, int label, NodeId node) const {
    if (tree_[node].max < 2) return false;
    if (!tree_[node].room) return true;
    for (const PatternItem& item : rule.where.items) {
      if (item.kind != Kind::kSlot || item.label != label || item.test.op != SlotTest::Op::kBundle) continue;
      const auto& room = tree_[node].room->bundle;
      return tree_[node].room->op == SlotTest::Op::kBundle &&
             std::all_of(room.begin(), room.end(), [&](const FeatureTest& asked) {
               return std::any_of(item.test.bundle.begin(), item.test.bundle.end(), [&](const FeatureTest& test) {
                 return test.kind == asked.kind && test.node == asked.node && test.value == asked.value;
               });
             });
    }
    return false;
  }

  std::vector<Setting> Settings(const Rule& rule, int label, bool may_take) {
    std::vector<Setting> settings;
    const int count = Chance(rng_, 0.3) ? 2 : 1;
    for (int tries = 0; tries < 20 && static_cast<int>(settings.size()) < count; ++tries) {
      const NodeId node = Any(nodes_);
      const bool clash = std::any_of(settings.begin(), settings.end(), [&](const Setting& other) {
        return tree_.Dominates(node, other.node) || tree_.Dominates(other.node, node);
      });
      if (clash) continue;
      const bool take = may_take && Chance(rng_, 0.2);
      const TreeNode& kind = tree_[node];
      Setting setting{node, {}};
      switch (kind.type) {
        case TreeNode::Type::kClass:
          if (!take && !kind.standing) continue;
          if (!take) setting.values = {0};
          break;
        case TreeNode::Type::kBare:
          if (!take) setting.values = {0};
          break;
        case TreeNode::Type::kBinary:
        case TreeNode::Type::kMany: {
          const int values = kind.type == TreeNode::Type::kBinary ? 2 : static_cast<int>(kind.values.size());
          if (!take) setting.values = {static_cast<Value>(Below(rng_, values))};
          if (!take && values > 1 && SurelyHasRoom(rule, label, node) && Chance(rng_, 0.3)) {
            setting.values.push_back(static_cast<Value>((setting.values[0] + 1) % values));
          }
          break;
        }
      }
      settings.push_back(setting);
    }
    return settings;
  }

  NodeId Node(const Rule& rule) {
    const bool empties = MentionsEmpty(rule.where);
    return Chance(rng_, empties ? 0.5 : 0.03) ? kRootNode : Any(nodes_);
  }

  void MakeChanges(Rule* rule, Op op) {
    const int labels = static_cast<int>(rule->labels.size());
    int target = Below(rng_, labels);
    const int count = Chance(rng_, 0.2) ? 2 : 1;
    for (int i = 0; i < count; ++i) {
      if (i > 0) op = labels > 1 ? AnyOp() : Op::kSet;
      if (i > 0 && rule->mode == Rule::Mode::kAtOnce && Chance(rng_, 0.6)) target = Below(rng_, labels);
      MakeChange(rule, op, target);
    }
  }

  void MakeChange(Rule* rule, Op op, int target) {
    const int labels = static_cast<int>(rule->labels.size());
    Change change;
    change.op = op;
    change.target = target;
    switch (op) {
      case Op::kSpread: {
        change.node = Node(*rule);
        change.source = (target + 1 + Below(rng_, labels - 1)) % labels;
        rule->changes.push_back(change);
        const bool delinks = Chance(rng_, 0.5);
        MakeBear(rule, change.source, change.node, FeatureTest::Kind::kBears);
        if (!delinks) MakeBear(rule, target, change.node, FeatureTest::Kind::kLacks);
        if (!delinks) return;
        change.op = Op::kDelink;
        change.source = -1;
        break;
      }
      case Op::kDelink:
        change.node = Node(*rule);
        break;
      case Op::kSet:
      case Op::kFill:
        change.settings = Settings(*rule, target, op == Op::kSet);
        if (change.settings.empty()) return;
        if (op == Op::kFill) MakeBear(rule, target, change.settings.front().node, FeatureTest::Kind::kLacks);
        break;
      case Op::kInsert:
        change.inserted = Any(letters_);
        change.before = Chance(rng_, 0.5);
        break;
      case Op::kDelete:
      case Op::kSetAs:  // the others: generate_breadth.cc
      case Op::kFillAs:
      case Op::kSetLiteral:
      case Op::kLengthen:
      case Op::kShorten:
      case Op::kMerge:
        break;
    }
    rule->changes.push_back(change);
  }

  // Mostly asks for what lets a spread do something: a source that bears the node, a target that lacks it.
  void MakeBear(Rule* rule, int label, NodeId node, FeatureTest::Kind kind) {
    if (node == kRootNode || Chance(rng_, 0.4)) return;
    for (PatternItem& item : rule->where.items) {
      if (item.kind != Kind::kSlot || item.label != label || MentionsEmpty(item.test)) continue;
      if (item.test.op != SlotTest::Op::kBundle || Chance(rng_, 0.5)) item.test = SlotTest();
      item.test.op = SlotTest::Op::kBundle;
      item.test.bundle.push_back({kind, node, 0});
    }
  }

 public:
  Op AnyOp() {
    const Op all[] = {Op::kSpread, Op::kSpread, Op::kDelink, Op::kSet, Op::kFill, Op::kInsert, Op::kDelete};
    return all[Below(rng_, 7)];
  }
  Rule::Mode AnyMode() {
    const Rule::Mode all[] = {Rule::Mode::kAtOnce, Rule::Mode::kRightward, Rule::Mode::kLeftward};
    return all[Below(rng_, 3)];
  }

 private:
  Rng& rng_;
  const Grammar& grammar_;
  const Tree& tree_;
  const std::vector<NamedTest>& tests_;
  const std::vector<FeatureTree>& letters_;
  std::vector<NodeId> nodes_;  // that rules may change
};

const char* NameOf(Op op) {
  switch (op) {
    case Op::kSpread:
      return "spread";
    case Op::kDelink:
      return "delink";
    case Op::kSet:
      return "set";
    case Op::kFill:
      return "fill";
    case Op::kInsert:
      return "insert";
    case Op::kDelete:
      return "delete";
    case Op::kSetAs:
      return "set as";
    case Op::kFillAs:
      return "fill as";
    case Op::kSetLiteral:
      return "set a symbol";
    case Op::kLengthen:
      return "lengthen";
    case Op::kShorten:
      return "shorten";
    case Op::kMerge:
      return "merge";
  }
  return "";
}

}  // namespace

void NoteEmpty(Pattern* pattern) { pattern->names_empty = MentionsEmpty(*pattern); }

std::vector<NamedTest> NamedTests(const Grammar& grammar) {
  std::vector<NamedTest> tests;
  for (const char* bundle :
       {"",         "-syll", "+syll",       "+nasal",      "-voice",      "no Place", "-son", "+voice",
        "no voice", "Place", "Coronal",     "Labial",      "Dorsal",      "no back",  "back", "+high",
        "+cont",    "-cont", "-son -voice", "+syll -high", "-syll Place", "ant",      "cont"}) {
    tests.push_back({bundle, BundleOf(grammar, bundle)});
  }
  for (std::size_t i = 0; i < grammar.inventory.literals.size(); ++i) {
    SlotTest test;
    test.op = SlotTest::Op::kLiteral;
    test.literal = static_cast<int>(i);
    tests.push_back({"/" + grammar.inventory.symbols[grammar.inventory.literals[i].symbol].text + "/", test});
  }
  return tests;
}

bool Refused(const Tree& tree, const Rule& rule) {
  if (rule.changes.empty()) return true;
  for (const Change& change : rule.changes) {
    if (change.op == Op::kSpread && change.source == change.target) return true;
    const bool one = HostOf(rule, change.target) == HostOf(rule, rule.changes.front().target);
    if (rule.mode != Rule::Mode::kAtOnce && !one) return true;
    for (NodeId node : NodesChanged(change)) {
      if (UnderContour(tree, node)) return true;
      for (const Change& other : rule.changes) {
        if (Relinks(other) && other.node != node && tree.Dominates(other.node, node)) return true;
        for (const Setting& setting : other.settings) {
          // A line and a content of one node on one item never go together.
          if (Relinks(change) && setting.node == node && other.target == change.target) return true;
          if (setting.values.empty() && setting.node != node && tree.Dominates(setting.node, node)) return true;
        }
      }
    }
  }
  return false;
}

Rule RandomRule(Rng& rng, const Grammar& grammar, const std::vector<NamedTest>& tests,
                const std::vector<FeatureTree>& letters) {
  RuleMaker maker(rng, grammar, tests, letters);
  const Op op = maker.AnyOp();
  const Rule::Mode mode = maker.AnyMode();
  return RandomRule(rng, grammar, tests, letters, op, mode);
}

Rule RandomRule(Rng& rng, const Grammar& grammar, const std::vector<NamedTest>& tests,
                const std::vector<FeatureTree>& letters, Change::Op op, Rule::Mode mode) {
  for (;;) {
    Rule rule = RuleMaker(rng, grammar, tests, letters).Make(op, mode);
    if (!Refused(grammar.tree, rule)) return rule;
  }
}

Effect EffectOn(const Grammar& grammar, const Rule& rule, const std::vector<Form>& forms) {
  Effect effect;
  for (const Form& form : forms) {
    const Application result = ApplyRule(grammar, rule, form);
    ++effect.forms;
    effect.changed += result.changed > 0;
    effect.ambiguous += !result.ambiguous.empty();
    effect.reaching += !result.reaches.empty();
    effect.blocked += !result.blocked.empty();
  }
  return effect;
}

Rule UsefulRule(Rng& rng, const Grammar& grammar, const std::vector<NamedTest>& tests,
                const std::vector<FeatureTree>& letters, const std::vector<Form>& sample, bool with_problems) {
  Rule best;
  int best_changed = -1;
  const bool problems = with_problems && Chance(rng, 0.2);
  // What it does is chosen first, or the changes that come easily (insert, delete) would be nearly all.
  RuleMaker maker(rng, grammar, tests, letters);
  const Op op = maker.AnyOp();
  const Rule::Mode mode = maker.AnyMode();
  for (int tries = 0; tries < 200; ++tries) {
    const Rule rule = RandomRule(rng, grammar, tests, letters, op, mode);
    const Effect effect = EffectOn(grammar, rule, sample);
    if (!problems && effect.ambiguous + effect.reaching > 0) continue;
    if (effect.changed > best_changed) {
      best = rule;
      best_changed = effect.changed;
    }
    // Not always the first that changes much: rules that change a little are of interest too.
    const double enough = std::uniform_real_distribution<double>(0.15, 0.7)(rng);
    if (best_changed >= enough * effect.forms && tries >= 3) break;
  }
  return best;
}

Grammar RandomGrammar(Rng& rng, int max_rules, bool with_problems) {
  Grammar grammar = SmallGrammar();
  std::vector<Symbol>& symbols = grammar.inventory.symbols;
  std::shuffle(symbols.begin(), symbols.end(), rng);
  // A vowel, a nasal and another consonant come first, or few rules would find anything.
  const SlotTest sorts[] = {BundleOf(grammar, "+syll"), BundleOf(grammar, "+nasal"), BundleOf(grammar, "-son")};
  for (int sort = 2; sort >= 0; --sort) {
    const auto found = std::find_if(symbols.begin(), symbols.end(), [&](const Symbol& symbol) {
      return Passes(sorts[sort], symbol.full, [](int) { return false; });
    });
    std::rotate(symbols.begin(), found, found + 1);
  }
  symbols.resize(5 + Below(rng, 4));
  grammar.inventory.by_text.clear();
  grammar.inventory.literals.clear();
  for (std::size_t i = 0; i < symbols.size(); ++i) {
    grammar.inventory.by_text[symbols[i].text] = static_cast<int>(i);
    grammar.inventory.literals.push_back({static_cast<int>(i)});
  }
  const std::vector<FeatureTree> letters = LettersOf(grammar);
  const std::vector<NamedTest> tests = NamedTests(grammar);
  FormOptions options;
  options.min_items = 2;
  options.max_items = 7;
  std::vector<Form> sample;
  for (int i = 0; i < 60; ++i) sample.push_back(RandomForm(rng, grammar, letters, options));
  const int rules = 1 + Below(rng, max_rules);
  for (int i = 0; i < rules; ++i) {
    grammar.rules.push_back(UsefulRule(rng, grammar, tests, letters, sample, with_problems));
    grammar.rules.back().name = "r" + std::to_string(i + 1);
    for (Form& form : sample) form = ApplyRule(grammar, grammar.rules.back(), form).form;
  }
  return grammar;
}

AllRulesOptions SmallRules(const Grammar& grammar) {
  AllRulesOptions options;
  options.tests = NamedTests(grammar);
  options.tests.resize(6);
  for (const char* node : {"voice", "Place"}) options.nodes.push_back(NodeOf(grammar, node));
  for (const char* bundle : {"+voice", "Coronal"}) options.settings.push_back(SettingsOf(grammar, bundle));
  options.inserted = {ContentOfSymbol(grammar, "E")};
  return options;
}

namespace {

// The changes of a rule with so many items, one list for each.
std::vector<std::vector<Change>> AllChanges(const AllRulesOptions& options, int items) {
  std::vector<std::vector<Change>> all;
  for (int target = 0; target < items; ++target) {
    Change change;
    change.target = target;
    for (NodeId node : options.nodes) {
      change.node = node;
      change.op = Op::kDelink;
      const Change delink = change;
      all.push_back({delink});
      for (int source = 0; source < items; ++source) {
        if (source == target) continue;
        Change spread = change;
        spread.op = Op::kSpread;
        spread.source = source;
        all.push_back({spread});
        all.push_back({delink, spread});
      }
    }
    change.node = 0;
    for (const std::vector<Setting>& settings : options.settings) {
      change.settings = settings;
      for (Op op : {Op::kSet, Op::kFill}) {
        change.op = op;
        all.push_back({change});
      }
    }
    change.settings.clear();
    change.op = Op::kInsert;
    for (const FeatureTree& content : options.inserted) {
      change.inserted = content;
      for (bool before : {true, false}) {
        change.before = before;
        all.push_back({change});
      }
    }
    change.inserted = FeatureTree();
    change.op = Op::kDelete;
    all.push_back({change});
  }
  return all;
}

}  // namespace

void ForEachRule(const Grammar& grammar, const AllRulesOptions& options,
                 const std::function<bool(const Rule&)>& callback) {
  const int tests = static_cast<int>(options.tests.size());
  for (int items = options.min_items; items <= options.max_items; ++items) {
    const std::vector<std::vector<Change>> changes = AllChanges(options, items);
    int ways = 1;
    for (int i = 0; i < items; ++i) ways *= tests;
    // gap: 0 none, i between item i and the next.
    for (int gap = 0; gap < (options.gaps ? items : 1); ++gap) {
      for (int way = 0; way < ways; ++way) {
        Rule rule;
        rule.name = "small";
        for (int i = 0, rest = way; i < items; ++i, rest /= tests) {
          PatternItem item;
          item.test = options.tests[rest % tests].test;
          item.label = i;
          if (gap > 0 && i == gap) {
            PatternItem between;
            between.kind = Kind::kGap;
            rule.where.items.push_back(between);
          }
          rule.where.items.push_back(item);
          rule.labels.push_back(std::string(1, static_cast<char>('X' + i)));
        }
        NoteEmpty(&rule.where);
        for (Rule::Mode mode : options.modes) {
          rule.mode = mode;
          for (const std::vector<Change>& list : changes) {
            rule.changes = list;
            if (!Refused(grammar.tree, rule) && !callback(rule)) return;
          }
        }
      }
    }
  }
}

std::string ShapeOf(const Rule& rule) {
  std::string shape;
  for (const Change& change : rule.changes) {
    const std::string name = NameOf(change.op);
    if (shape.find(name) == std::string::npos) shape += (shape.empty() ? "" : "+") + name;
  }
  switch (rule.mode) {
    case Rule::Mode::kAtOnce:
      return shape + " at once";
    case Rule::Mode::kRightward:
      return shape + " rightward";
    case Rule::Mode::kLeftward:
      return shape + " leftward";
  }
  return shape;
}

}  // namespace tiersmith::testing
