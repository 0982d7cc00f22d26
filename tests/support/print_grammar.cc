// Prints grammars, rules and forms in the notation, so that a case found by the agreement tests can be run again.
#include <algorithm>

#include "support/generate.h"

namespace tiersmith::testing {
namespace {

std::string Joined(const std::vector<std::string>& parts, const std::string& between) {
  std::string text;
  for (const std::string& part : parts) text += (text.empty() ? "" : between) + part;
  return text;
}

std::string VariableText(int variable) { return std::vector<std::string>{"α", "β", "γ", "δ"}[variable % 4]; }

std::string SideText(FeatureTest::Side side) {
  if (side == FeatureTest::Side::kEither) return "";
  return side == FeatureTest::Side::kLeft ? " leftward" : " rightward";
}

std::string PartText(FeatureTest::Part part) {
  if (part == FeatureTest::Part::kAny) return "";
  return part == FeatureTest::Part::kFirst ? "begins " : "ends ";
}

std::string Feature(const Tree& tree, const FeatureTest& test) {
  const std::string& name = tree[test.node].name;
  switch (test.kind) {
    case FeatureTest::Kind::kBears:
      return name;
    case FeatureTest::Kind::kLacks:
      return "no " + name;
    case FeatureTest::Kind::kHasValue:
      return PartText(test.part) + tree.ValueName(test.node, test.value);
    case FeatureTest::Kind::kLacksValue:
      return "no " + PartText(test.part) + tree.ValueName(test.node, test.value);
    case FeatureTest::Kind::kAgrees:
      return PartText(test.part) + VariableText(test.variable) + name;
    case FeatureTest::Kind::kDiffers:
      return PartText(test.part) + "-" + VariableText(test.variable) + name;
    case FeatureTest::Kind::kShared:
      return "shared " + name + SideText(test.side);
    case FeatureTest::Kind::kUnshared:
      return "unshared " + name + SideText(test.side);
    case FeatureTest::Kind::kLong:
      return "long";
    case FeatureTest::Kind::kShort:
      return "short";
    case FeatureTest::Kind::kHalfFirst:
      return "half first";
    case FeatureTest::Kind::kHalfSecond:
      return "half second";
  }
  return "";
}

std::string SettingsText(const Tree& tree, const std::vector<Setting>& settings) {
  std::vector<std::string> parts;
  for (const Setting& setting : settings) {
    const std::string& name = tree[setting.node].name;
    if (setting.variable >= 0) {
      parts.push_back((setting.differs ? "-" : "") + VariableText(setting.variable) + name);
    } else if (setting.values.empty()) {
      parts.push_back("no " + name);
    }
    for (Value value : setting.values) parts.push_back(tree.ValueName(setting.node, value));
  }
  return "[" + Joined(parts, ", ") + "]";
}

std::string DomainText(Domain domain) {
  switch (domain) {
    case Domain::kMorpheme:
      return "morpheme";
    case Domain::kStem:
      return "stem";
    case Domain::kHost:
      return "host";
    case Domain::kWord:
      return "word";
    case Domain::kPhrase:
      return "phrase";
  }
  return "";
}

// Everything a root bears and lacks: nothing is left to what a library says of the symbol.
void Describe(const Tree& tree, NodeId node, const FeatureTree* content, std::vector<std::string>* parts) {
  for (NodeId daughter : tree[node].daughters) {
    std::vector<const FeatureTree*> borne;
    if (content != nullptr) {
      for (const FeatureTree& under : content->daughters) {
        if (under.node == daughter) borne.push_back(&under);
      }
    }
    if (borne.empty()) {
      parts->push_back("no " + tree[daughter].name);
      continue;
    }
    for (const FeatureTree* under : borne) parts->push_back(tree.ValueName(daughter, under->value));
    Describe(tree, daughter, borne.front(), parts);
  }
}

std::string RootBundle(const Tree& tree, const FeatureTree& root) {
  std::vector<std::string> parts;
  Describe(tree, kRootNode, &root, &parts);
  return "[" + Joined(parts, ", ") + "]";
}

const Symbol* SymbolOf(const Grammar& grammar, const FeatureTree& root) {
  for (const Symbol& symbol : grammar.inventory.symbols) {
    if (symbol.underlying == root) return &symbol;
  }
  return nullptr;
}

class RulePrinter {
 public:
  RulePrinter(const Grammar& grammar, const Rule& rule)
      : grammar_(grammar), tree_(grammar.tree), rule_(rule), clause_(&rule) {}

  std::string Run() {
    std::string text = "rule \"" + rule_.name + "\" {";
    if (rule_.within != Domain::kWord) text += " within " + DomainText(rule_.within);
    text += ClauseText();
    for (const Clause& clause : rule_.otherwise) {
      clause_ = &clause;
      text += "  otherwise" + ClauseText();
    }
    switch (rule_.mode) {
      case Rule::Mode::kAtOnce:
        break;
      case Rule::Mode::kRightward:
        text += "  iterate rightward";
        break;
      case Rule::Mode::kLeftward:
        text += "  iterate leftward";
        break;
    }
    if (rule_.prefer != Rule::Prefer::kNone)
      text += rule_.prefer == Rule::Prefer::kLeft ? "  prefer left" : "  prefer right";
    if (rule_.preserving) text += "  preserving";
    if (rule_.sharing_blocked) text += "  sharing blocked";
    if (rule_.probability < 1)
      text += "  optional " + std::to_string(rule_.probability) + (rule_.by_word ? " by word" : "");
    return text + " }";
  }

 private:
  std::string ClauseText() {
    std::string text = " where " + PatternText(clause_->where, false);
    for (const Condition& condition : clause_->conditions) {
      static const char* const signs[] = {" = ", " ≠ ", " is ", " is not "};
      text += "  if " + PathText(condition.left, condition.node, condition.left_member) +
              signs[static_cast<int>(condition.test)] +
              PathText(condition.right, condition.node, condition.right_member);
    }
    for (const Pattern& pattern : clause_->unless) text += "  unless " + PatternText(pattern, true);
    for (const TagTest& test : clause_->tags) {
      text += test.only ? "  only " : "  except ";
      if (test.scope == TagTest::Scope::kLabel) text += clause_->labels[test.label] + " in ";
      if (test.scope == TagTest::Scope::kWord) text += "word ";
      text += grammar_.tags[test.tag];
    }
    for (const Change& change : clause_->changes) text += "  " + ChangeText(change);
    return text;
  }

  std::string PathText(int label, NodeId node, const Member& member) const {
    const std::string path = clause_->labels[label] + ".";
    const std::string& name = tree_[node].name;
    switch (member.which) {
      case Member::Which::kWhole:
        return path + name;
      case Member::Which::kFirst:
        return path + name + " first";
      case Member::Which::kLast:
        return path + name + " last";
      case Member::Which::kValue:
        return path + tree_.ValueName(node, member.value);
    }
    return path;
  }

  std::string PatternText(const Pattern& pattern, bool unless) const {
    std::vector<std::string> parts;
    for (const PatternItem& item : pattern.items) parts.push_back(ItemText(item, unless));
    return Joined(parts, " ");
  }

  std::string ItemText(const PatternItem& item, bool unless) const {
    switch (item.kind) {
      case PatternItem::Kind::kSlot:
        if (item.label < 0) return PrintTest(grammar_, item.test);
        if (unless && item.test.op == SlotTest::Op::kAny) return clause_->labels[item.label];
        return clause_->labels[item.label] + ":" + PrintTest(grammar_, item.test);
      case PatternItem::Kind::kBoundary:
        return (item.label < 0 ? "" : clause_->labels[item.label] + ":") + BoundarySign(item.boundary);
      case PatternItem::Kind::kSameMorpheme:
        return "&";
      case PatternItem::Kind::kGap:
        return "..." + (item.tier ? tree_[*item.tier].name : "");
      case PatternItem::Kind::kGroup: {
        std::vector<std::string> alternatives;
        for (const Pattern& pattern : item.alternatives) alternatives.push_back(PatternText(pattern, unless));
        const bool once = item.min == 1 && item.max == 1;
        if (once) return "{" + Joined(alternatives, " | ") + "}";
        std::string quantity = "_" + std::to_string(item.min);
        if (item.max >= 0) quantity += "^" + std::to_string(item.max);
        if (alternatives.size() == 1) return "(" + alternatives[0] + ")" + quantity;
        return "{" + Joined(alternatives, " | ") + "}" + quantity;
      }
    }
    return "";
  }

  std::string ContentText(const Change& change) const {
    const Symbol* symbol = SymbolOf(grammar_, change.inserted);
    if (symbol == nullptr) return RootBundle(tree_, change.inserted);
    return "/" + symbol->text + (change.is_long ? "ː/" : "/");
  }

  std::string AsText(const Change& change) const {
    if (change.node == kRootNode) return clause_->labels[change.target] + " as " + clause_->labels[change.source];
    return PathText(change.target, change.node, Member()) + " as " +
           PathText(change.source, change.node, change.member);
  }

  std::string ChangeText(const Change& change) {
    const std::string& target = clause_->labels[change.target];
    switch (change.op) {
      case Change::Op::kSpread:
        return "spread " + PathText(change.source, change.node, change.member) + " to " + target;
      case Change::Op::kDelink:
        return "delink " + PathText(change.target, change.node, change.member);
      case Change::Op::kSet:
        return "set " + target + " " + SettingsText(tree_, change.settings);
      case Change::Op::kFill:
        return "fill " + target + " " + SettingsText(tree_, change.settings);
      case Change::Op::kSetAs:
        return "set " + AsText(change);
      case Change::Op::kFillAs:
        return "fill " + AsText(change);
      case Change::Op::kSetLiteral:
        return "set " + target + " " + ContentText(change);
      case Change::Op::kInsert: {
        const std::string label =
            change.inserted_label >= 0 ? clause_->labels[change.inserted_label] : "J" + std::to_string(++inserted_);
        return "insert " + label + ":" + ContentText(change) + (change.before ? " before " : " after ") + target;
      }
      case Change::Op::kDelete:
        return "delete " + target;
      case Change::Op::kLengthen:
        return "lengthen " + target;
      case Change::Op::kShorten:
        return "shorten " + target;
      case Change::Op::kMerge:
        return "merge " + PathText(change.source, change.node, Member()) + " " +
               PathText(change.target, change.node, Member());
    }
    return "";
  }

  const Grammar& grammar_;
  const Tree& tree_;
  const Rule& rule_;
  const Clause* clause_;
  int inserted_ = 0;
};

std::string DaughterText(const Grammar& grammar, NodeId node) {
  const TreeNode& kind = grammar.tree[node];
  std::string text;
  switch (kind.type) {
    case TreeNode::Type::kClass:
      text = (kind.standing ? "•" : "") + kind.name;
      break;
    case TreeNode::Type::kBinary:
      text = "±" + kind.name;
      break;
    case TreeNode::Type::kBare:
      text = kind.name;
      break;
    case TreeNode::Type::kMany:
      text = kind.name + ": " + Joined(kind.values, " ");
      break;
  }
  if (kind.max > 1) text += " ×" + std::to_string(kind.max);
  if (kind.room) text += " in " + PrintTest(grammar, *kind.room);
  if (kind.floating) text += " floating";
  return text;
}

std::string TreeText(const Grammar& grammar) {
  const Tree& tree = grammar.tree;
  std::string text = "tree {\n";
  for (std::size_t mother = 0; mother < tree.nodes.size(); ++mother) {
    std::string line;
    for (NodeId daughter : tree.nodes[mother].daughters) {
      if (daughter == kRootNode) continue;
      line += " " + DaughterText(grammar, daughter);
      if (tree[daughter].type != TreeNode::Type::kMany) continue;
      text += "  " + tree.nodes[mother].name + " >" + line + "\n";  // a many-valued one ends its line
      line.clear();
    }
    if (!line.empty()) text += "  " + tree.nodes[mother].name + " >" + line + "\n";
  }
  return text + "}\n";
}

std::string SymbolsText(const Grammar& grammar, Symbol::Kind kind, const std::string& block) {
  std::string text;
  for (const Symbol& symbol : grammar.inventory.symbols) {
    if (symbol.kind == kind) text += "  " + symbol.text + " " + RootBundle(grammar.tree, symbol.full) + "\n";
  }
  return text.empty() ? "" : block + " {\n" + text + "}\n";
}

}  // namespace

std::string PrintTest(const Grammar& grammar, const SlotTest& test) {
  const auto args = [&](const std::string& between) {
    std::vector<std::string> parts;
    for (const SlotTest& arg : test.args) parts.push_back(PrintTest(grammar, arg));
    return Joined(parts, between);
  };
  switch (test.op) {
    case SlotTest::Op::kAny:
      return "[]";
    case SlotTest::Op::kEmpty:
      return "empty";
    case SlotTest::Op::kBundle: {
      std::vector<std::string> parts;
      for (const FeatureTest& feature : test.bundle) parts.push_back(Feature(grammar.tree, feature));
      return "[" + Joined(parts, ", ") + "]";
    }
    case SlotTest::Op::kLiteral:
      return "/" + grammar.inventory.symbols[grammar.inventory.literals[test.literal].symbol].text + "/";
    case SlotTest::Op::kAnd: {
      std::vector<std::string> parts;
      for (const SlotTest& arg : test.args) parts.push_back("{" + PrintTest(grammar, arg) + "}");
      return "{" + Joined(parts, " and ") + "}";
    }
    case SlotTest::Op::kOr:
      return "{" + args(" | ") + "}";
    case SlotTest::Op::kNot:
      return "{not " + args("") + "}";
  }
  return "";
}

std::string PrintRule(const Grammar& grammar, const Rule& rule) { return RulePrinter(grammar, rule).Run(); }

std::string PrintGrammar(const Grammar& grammar) {
  std::string text = "language \"Generated\"\n" + TreeText(grammar);
  text += SymbolsText(grammar, Symbol::Kind::kSegment, "segments");
  text += SymbolsText(grammar, Symbol::Kind::kArchisegment, "archisegments");
  for (const Rule& rule : grammar.rules) text += PrintRule(grammar, rule) + "\n";
  return text;
}

std::string PrintForm(const Grammar& grammar, const Form& form) {
  std::string text;
  std::int64_t root_before = -1;  // of the slot just before, with nothing between
  std::size_t roots = 0;
  std::vector<std::size_t> holders(form.instances.size(), 0);
  for (const Instance& instance : form.instances) {
    for (InstanceId daughter : instance.daughters) ++holders[daughter];
  }
  for (std::size_t i = 0; i < holders.size(); ++i) {
    if (holders[i] > 1 && form.instances[i].node != kRootNode) return "";
  }
  for (const FormItem& item : form.items) {
    if (item.kind == FormItem::Kind::kFloat) return "";
    if (item.kind == FormItem::Kind::kBoundary) {
      text += item.boundary == Boundary::kWord ? " " : BoundarySign(item.boundary);
      root_before = -1;
      continue;
    }
    const std::int64_t root = RootOf(form, item);
    if (root < 0 || form.instances[item.instance].daughters.size() != 1) return "";
    if (root == root_before) {
      text += "ː";
      ++roots;
      continue;
    }
    const Symbol* symbol = SymbolOf(grammar, ContentOf(form, static_cast<InstanceId>(root)));
    if (symbol == nullptr) return "";
    text += symbol->text;
    root_before = root;
  }
  // Every further holder of a root must have been written as length.
  std::size_t further = 0;
  for (std::size_t count : holders) further += count > 1 ? count - 1 : 0;
  return further == roots ? text : "";
}

std::string PrintCase(const Grammar& grammar, const Form& form) {
  const std::string typed = PrintForm(grammar, form);
  std::string text = "-- form: " + Dump(form, grammar.tree) + "\n";
  text += typed.empty()
              ? "-- it cannot be typed: it shares more than the roots of long segments, or bears what no symbol is\n"
              : "-- save as case.tier, then: tiersmith derive case.tier '" + typed + "' --trace\n";
  return text + PrintGrammar(grammar);
}

}  // namespace tiersmith::testing
