// Rules: patterns of items -> tests in order; changes -> operations on labels and nodes.
//
// Example: `where N:[+nasal] C:[+cons Place]  delink N.Place  spread C.Place to N` has labels N and C, two
// slot items and two changes. Classes and named patterns are gone afterwards. Does not handle: what a rule
// does to forms (graph/, compile/). Tested by tests/unit/model/check_test.cc.
#include <algorithm>
#include <functional>

#include "model/check.h"
#include "model/content.h"

namespace tiersmith {
namespace {

using SyntaxItem = syntax::Item;

bool Once(const SyntaxItem& item) { return item.min == 1 && item.max == 1; }

// What an item came to, as often as the item says: once, it stands among the others; else it is a group.
void AddQuantified(const SyntaxItem& item, Pattern inner, Pattern* pattern) {
  if (Once(item)) {
    for (PatternItem& one : inner.items) pattern->items.push_back(std::move(one));
    return;
  }
  PatternItem group;
  group.kind = PatternItem::Kind::kGroup;
  group.min = item.min;
  group.max = item.max;
  group.alternatives.push_back(std::move(inner));
  pattern->items.push_back(std::move(group));
}

Boundary BoundaryOf(SyntaxItem::Boundary boundary) {
  switch (boundary) {
    case SyntaxItem::Boundary::kMorpheme:
      return Boundary::kMorpheme;
    case SyntaxItem::Boundary::kClitic:
      return Boundary::kClitic;
    case SyntaxItem::Boundary::kWord:
      return Boundary::kWord;
    case SyntaxItem::Boundary::kPhrase:
      return Boundary::kPhrase;
  }
  return Boundary::kNone;
}

// The class an item consists of, or "".
std::string ClassOf(const SyntaxItem& item) {
  if (item.kind == SyntaxItem::Kind::kName) return item.name.text;
  if (item.kind == SyntaxItem::Kind::kSet && item.set.kind == syntax::Set::Kind::kClass) return item.set.name.text;
  return "";
}

bool NamesEmpty(const SlotTest& test) {
  return test.op == SlotTest::Op::kEmpty || std::any_of(test.args.begin(), test.args.end(), NamesEmpty);
}

bool NamesLabel(const Pattern& pattern) {
  return std::any_of(pattern.items.begin(), pattern.items.end(), [](const PatternItem& item) {
    return item.label >= 0 || std::any_of(item.alternatives.begin(), item.alternatives.end(), NamesLabel);
  });
}

bool MovesLines(const Change& change) { return change.op == Change::Op::kSpread || change.op == Change::Op::kDelink; }

// The nodes a change is about, of those that are already there.
std::vector<NodeId> ChangedNodes(const Change& change) {
  std::vector<NodeId> nodes;
  if (MovesLines(change)) nodes.push_back(change.node);
  for (const Setting& setting : change.settings) nodes.push_back(setting.node);
  return nodes;
}

Span Covering(Span a, Span b) {
  if (a.end == 0 || a.file != b.file) return b;
  return {a.file, std::min(a.begin, b.begin), std::max(a.end, b.end)};
}

}  // namespace

// A named pattern is told once, whether a rule uses it or not.
void Checker::CheckPatterns() {
  for (const auto& [name, declared] : patterns_) {
    Rule scratch;
    RuleContext context;
    context.rule = &scratch;
    context.expanding.push_back(name);
    Pattern pattern;
    if (!ResolvePattern(declared->pattern, &context, &pattern)) failed_patterns_.insert(name);
  }
}

void Checker::CheckRules() {
  CheckPatterns();
  std::map<std::string, Span> seen;
  for (const syntax::Top& top : file_.tops) {
    const auto* rule = std::get_if<syntax::Rule>(&top);
    if (rule == nullptr) continue;
    const auto [place, fresh] = seen.emplace(rule->name.text, rule->name.span);
    if (!fresh) {
      diagnostics_.Add({Kind::kDuplicate,
                        Severity::kError,
                        rule->name.span,
                        "rule \"" + rule->name.text + "\" stands twice",
                        "give one of them another name",
                        {{place->second, "first declared here"}}});
    }
    CheckRule(*rule);
  }
  // Losing its last line, such a node would stay as an item of the form, which rules of this release do not
  // see to.
  for (std::size_t i = kRootNode + 1; i < grammar_.tree.nodes.size() && !grammar_.rules.empty(); ++i) {
    const NodeId node = static_cast<NodeId>(i);
    const TreeNode& kind = grammar_.tree[node];
    if (!kind.floating) continue;
    const auto& symbols = grammar_.inventory.symbols;
    const auto bearer =
        std::find_if(symbols.begin(), symbols.end(), [&](const Symbol& s) { return Bears(s.full, node); });
    if (bearer == symbols.end()) continue;
    Error(Kind::kNotSupportedYet, kind.span,
          "'" + kind.name + "' may float and '" + bearer->text +
              "' bears it: rules over floating nodes are not supported by this release",
          "take `floating` away from " + kind.name);
  }
}

void Checker::CheckRule(const syntax::Rule& written) {
  Rule rule;
  rule.name = written.name.text;
  rule.span = written.span;
  switch (written.mode) {
    case syntax::Rule::Mode::kAtOnce:
      rule.mode = Rule::Mode::kAtOnce;
      break;
    case syntax::Rule::Mode::kRightward:
      rule.mode = Rule::Mode::kRightward;
      break;
    case syntax::Rule::Mode::kLeftward:
      rule.mode = Rule::Mode::kLeftward;
      break;
  }
  RuleContext context;
  context.rule = &rule;
  CountMentions(written.where, &context);
  CollectUsedLabels(written, &context);
  bool good = ResolvePattern(written.where, &context, &rule.where);
  if (good) good = CheckShape(rule.where, written.where, context);
  context.broken = !good;
  for (const syntax::Pattern& unless : written.unless) {
    Pattern pattern;
    RuleContext inner = context;
    inner.in_unless = true;
    bool fine = ResolvePattern(unless, &inner, &pattern) && CheckShape(pattern, unless, inner);
    if (fine && good && !NamesLabel(pattern)) {
      Error(Kind::kBadRule, unless.span, "this `unless` speaks of no item of the rule",
            "let it name a label of the `where`: its place is told by that item");
      fine = false;
    }
    good = fine && good;
    if (fine) rule.unless.push_back(std::move(pattern));
  }
  if (written.changes.empty()) {
    Error(Kind::kBadRule, written.name.span, "rule \"" + rule.name + "\" changes nothing",
          "say what it does: spread, delink, set, fill, insert or delete");
    good = false;
  }
  bool changes_good = true;
  for (const syntax::Change& change : written.changes) changes_good = ResolveChange(change, &context) && changes_good;
  if (good && changes_good) CheckChanges(written, rule);
  grammar_.rules.push_back(std::move(rule));
}

// ---- patterns ---------------------------------------------------------------------------------------

// A class named once in a pattern is its own label.
void Checker::CountMentions(const syntax::Pattern& pattern, RuleContext* context) {
  for (const SyntaxItem& item : pattern.items) {
    const std::string name = ClassOf(item);
    if (!name.empty()) ++context->mentions[name];
    for (const syntax::Pattern& alternative : item.alternatives) CountMentions(alternative, context);
  }
}

void Checker::CollectUsedLabels(const syntax::Rule& written, RuleContext* context) {
  for (const syntax::Change& change : written.changes) {
    for (const syntax::Path& path : change.paths) context->used.insert(path.label.text);
    if (!change.label.text.empty()) context->used.insert(change.label.text);
    if (change.kind == syntax::Change::Kind::kInsert && !change.inserted.text.empty())
      context->inserted.insert(change.inserted.text);
  }
  // A bare name in `unless` may be the label of an item of the `where`.
  for (const syntax::Pattern& unless : written.unless) {
    for (const SyntaxItem& item : unless.items) {
      if (item.label) context->used.insert(item.label->text);
      const std::string name = ClassOf(item);
      if (!name.empty()) context->used.insert(name);
    }
  }
}

bool Checker::ResolvePattern(const syntax::Pattern& written, RuleContext* context, Pattern* pattern) {
  pattern->span = written.span;
  bool good = true;
  for (const SyntaxItem& item : written.items) good = ResolveItem(item, context, pattern) && good;
  return good;
}

bool Checker::ResolveItem(const SyntaxItem& item, RuleContext* context, Pattern* pattern) {
  if (item.max == 0 || (item.max > 0 && item.max < item.min)) {
    Error(Kind::kBadRule, item.span,
          item.max == 0 ? "nothing can stand here: the most of this quantity is 0"
                        : "the least of this quantity is above its most",
          "write the smaller number below and the larger above: C₁²");
    return false;
  }
  switch (item.kind) {
    case SyntaxItem::Kind::kSet:
      return ResolveSetItem(item, context, pattern);
    case SyntaxItem::Kind::kName:
      return ResolveNameItem(item, context, pattern);
    case SyntaxItem::Kind::kBoundary: {
      PatternItem boundary;
      boundary.kind = PatternItem::Kind::kBoundary;
      boundary.boundary = BoundaryOf(item.boundary);
      if (!pattern->items.empty() && pattern->items.back().kind == PatternItem::Kind::kBoundary) {
        Error(Kind::kBadRule, item.span, "two boundaries stand side by side",
              "a run of boundaries counts as its strongest: write only that one");
        return false;
      }
      pattern->items.push_back(std::move(boundary));
      return true;
    }
    case SyntaxItem::Kind::kGap: {
      PatternItem gap;
      gap.kind = PatternItem::Kind::kGap;
      if (context->depth > 0) {
        Error(Kind::kNotSupportedYet, item.span, "a gap inside ( ) or { } is not supported by this release",
              "write the rule twice, once with the gap");
        return false;
      }
      if (item.tier) {
        const std::optional<NodeId> tier = NodeOf(*item.tier, Kind::kUnknownNode);
        if (!tier) return false;
        gap.tier = *tier;
      }
      pattern->items.push_back(std::move(gap));
      return true;
    }
    case SyntaxItem::Kind::kGroup:
      return ResolveGroup(item, context, pattern);
  }
  return false;
}

// One item, or a group where it has a quantity.
void Checker::Append(PatternItem slot, const SyntaxItem& item, Pattern* pattern) {
  if (slot.kind == PatternItem::Kind::kSlot && NamesEmpty(slot.test)) pattern->names_empty = true;
  Pattern inner;
  inner.span = item.span;
  inner.names_empty = pattern->names_empty;
  inner.items.push_back(std::move(slot));
  AddQuantified(item, std::move(inner), pattern);
}

bool Checker::AddLabel(const syntax::Name& label, const SyntaxItem& item, RuleContext* context, int* index) {
  const auto bad = [&](const std::string& message, const std::string& remedy) {
    Error(Kind::kBadRule, label.span, message, remedy);
    return false;
  };
  const auto known = context->own_labels.find(label.text);
  if (context->in_unless) {
    // A label of the rule is that item, which must pass this test as well.
    if (known != context->own_labels.end()) {
      *index = known->second;
      return true;
    }
    return bad("'" + label.text + "' labels no item of the rule",
               "in `unless` only labels of the `where` mean something; take it away");
  }
  if (!context->expanding.empty()) {
    return bad("a named pattern has no labels inside", "take the label away, or write the pattern out in the rule");
  }
  if (known != context->own_labels.end()) {
    return bad("label '" + label.text + "' is used twice", "give each item a label of its own");
  }
  if (classes_.count(label.text) != 0 && ClassOf(item) != label.text) {
    return bad("label '" + label.text + "' is the name of a class, and this item is another",
               "choose a label that no class has");
  }
  if (!Once(item) || context->repeated) {
    return bad("label '" + label.text + "' stands inside a repeated group: it could be several slots, or none",
               "label an item outside, or write the items one by one");
  }
  if (context->alternative) {
    return bad("label '" + label.text + "' stands in one of several alternatives only",
               "label the whole set: " + label.text + ":{.. | ..}");
  }
  *index = static_cast<int>(context->rule->labels.size());
  context->rule->labels.push_back(label.text);
  context->own_labels[label.text] = *index;
  return true;
}

bool Checker::ResolveSetItem(const SyntaxItem& item, RuleContext* context, Pattern* pattern) {
  if (item.set.kind == syntax::Set::Kind::kClass && !item.label) {
    SyntaxItem named = item;
    named.kind = SyntaxItem::Kind::kName;
    named.name = item.set.name;
    return ResolveNameItem(named, context, pattern);
  }
  bool good = true;
  PatternItem slot;
  if (item.label) good = AddLabel(*item.label, item, context, &slot.label);
  if (item.set.kind != syntax::Set::Kind::kLiteral) {
    std::optional<SlotTest> test = ResolveSet(item.set);
    if (!test) return false;
    slot.test = std::move(*test);
    if (good) Append(std::move(slot), item, pattern);
    return good;
  }
  const std::optional<std::vector<int>> symbols = SymbolsOf(item.set.literal);
  if (!symbols) return false;
  if (symbols->size() == 1) {
    slot.test = LiteralTest((*symbols)[0]);
    if (good) Append(std::move(slot), item, pattern);
    return good;
  }
  if (item.label) {
    Error(Kind::kBadRule, item.label->span,
          "/" + item.set.literal.raw + "/ is " + std::to_string(symbols->size()) + " items and takes no label",
          "write the symbols one by one and label the one you mean");
    return false;
  }
  Pattern several;
  several.span = item.span;
  for (const int symbol : *symbols) {
    PatternItem one;
    one.test = LiteralTest(symbol);
    several.items.push_back(std::move(one));
  }
  AddQuantified(item, std::move(several), pattern);
  return true;
}

bool Checker::ResolveNameItem(const SyntaxItem& item, RuleContext* context, Pattern* pattern) {
  const std::string& name = item.name.text;
  if (context->in_unless && context->own_labels.count(name) != 0) {
    PatternItem slot;
    slot.label = context->own_labels.at(name);
    // The label of a class is that item again, and it passed the class already.
    if (!Once(item)) {
      Error(Kind::kBadRule, item.span, "'" + name + "' is one item of the rule and takes no quantity",
            "take the quantity away");
      return false;
    }
    pattern->items.push_back(std::move(slot));
    return true;
  }
  const auto named = patterns_.find(name);
  if (named != patterns_.end() && classes_.count(name) == 0) {
    if (failed_patterns_.count(name) != 0) return false;  // said where it is declared
    if (std::find(context->expanding.begin(), context->expanding.end(), name) != context->expanding.end()) {
      Error(Kind::kBadRule, item.span, "pattern '" + name + "' is told by itself", "write it out");
      return false;
    }
    RuleContext inner = *context;
    inner.expanding.push_back(name);
    inner.mentions.clear();  // labels do not come out of a named pattern
    inner.repeated = true;
    if (!Once(item)) ++inner.depth;
    Pattern expanded;
    if (!ResolvePattern(named->second->pattern, &inner, &expanded)) return false;
    if (expanded.names_empty) pattern->names_empty = true;
    AddQuantified(item, std::move(expanded), pattern);
    return true;
  }
  if (classes_.count(name) == 0) {
    if (SaidOften("class " + name)) return false;
    std::vector<std::string> known = ClassNames();
    for (const auto& [pattern_name, declared] : patterns_) known.push_back(pattern_name);
    std::string remedy = DidYouMean(name, known);
    if (grammar_.tree.Find(name)) remedy = "a feature stands in brackets: [" + name + "]; ";
    if (grammar_.inventory.Find(name)) remedy = "a symbol stands between slashes: /" + name + "/; ";
    Error(Kind::kUnknownClass, item.name.span, "there is no class or pattern '" + name + "'",
          Or(remedy, "declare it: `class " + name + " = [..]`"));
    return false;
  }
  std::optional<SlotTest> test = ResolveClass(item.name);
  if (!test) return false;
  PatternItem slot;
  slot.test = std::move(*test);
  const auto mentions = context->mentions.find(name);
  const bool own = !context->in_unless && mentions != context->mentions.end() && mentions->second == 1 &&
                   context->used.count(name) != 0 && context->own_labels.count(name) == 0 && !context->repeated &&
                   !context->alternative && Once(item);
  if (own) {
    slot.label = static_cast<int>(context->rule->labels.size());
    context->rule->labels.push_back(name);
    context->own_labels[name] = slot.label;
  }
  Append(std::move(slot), item, pattern);
  return true;
}

bool Checker::ResolveGroup(const SyntaxItem& item, RuleContext* context, Pattern* pattern) {
  const bool outer_repeated = context->repeated, outer_alternative = context->alternative;
  context->repeated = context->repeated || !Once(item);
  context->alternative = context->alternative || item.alternatives.size() > 1;
  ++context->depth;
  PatternItem group;
  group.kind = PatternItem::Kind::kGroup;
  group.min = item.min;
  group.max = item.max;
  bool good = true;
  for (const syntax::Pattern& alternative : item.alternatives) {
    Pattern resolved;
    good = ResolvePattern(alternative, context, &resolved) && good;
    if (resolved.names_empty) pattern->names_empty = true;
    group.alternatives.push_back(std::move(resolved));
  }
  --context->depth;
  context->repeated = outer_repeated;
  context->alternative = outer_alternative;
  if (!good) return false;
  // Alternatives of one slot each are a set.
  const bool is_set =
      group.alternatives.size() > 1 &&
      std::all_of(group.alternatives.begin(), group.alternatives.end(), [](const Pattern& p) {
        return p.items.size() == 1 && p.items[0].kind == PatternItem::Kind::kSlot && p.items[0].label < 0;
      });
  PatternItem slot;
  if (is_set) {
    slot.test.op = SlotTest::Op::kOr;
    for (Pattern& alternative : group.alternatives) slot.test.args.push_back(std::move(alternative.items[0].test));
  }
  if (item.label) {
    if (!is_set) {
      Error(Kind::kBadRule, item.label->span, "a label covers one slot, and this group is not a set of single items",
            "label the item you mean");
      return false;
    }
    if (!AddLabel(*item.label, item, context, &slot.label)) return false;
  }
  if (is_set) {
    Append(std::move(slot), item, pattern);
  } else {
    pattern->items.push_back(std::move(group));
  }
  return true;
}

// What can be seen of a pattern as a whole.
bool Checker::CheckShape(const Pattern& pattern, const syntax::Pattern& written, const RuleContext& context) {
  const auto may_be_slot = [](const PatternItem& item) {
    return item.kind == PatternItem::Kind::kSlot || item.kind == PatternItem::Kind::kGroup;
  };
  if (std::none_of(pattern.items.begin(), pattern.items.end(), may_be_slot)) {
    const Span span = written.span.end > 0 ? written.span : context.rule->span;
    Error(Kind::kBadRule, span, "a pattern needs at least one slot", "write an item: [] is any slot");
    return false;
  }
  bool good = true;
  for (std::size_t i = 0; i < pattern.items.size(); ++i) {
    const PatternItem& item = pattern.items[i];
    if (item.kind == PatternItem::Kind::kGap) {
      const bool between = i > 0 && i + 1 < pattern.items.size() &&
                           pattern.items[i - 1].kind == PatternItem::Kind::kSlot &&
                           pattern.items[i + 1].kind == PatternItem::Kind::kSlot;
      if (!between) {
        const auto gap = std::find_if(written.items.begin(), written.items.end(),
                                      [](const SyntaxItem& w) { return w.kind == SyntaxItem::Kind::kGap; });
        Error(Kind::kBadRule, gap != written.items.end() ? gap->span : written.span,
              "a gap stands between two single slots", "write one item without a quantity before it and one after it");
        good = false;
      }
    }
    const bool inner =
        i > 0 && i + 1 < pattern.items.size() && may_be_slot(pattern.items[i - 1]) && may_be_slot(pattern.items[i + 1]);
    const auto one_slot = [](const PatternItem& other) { return other.kind == PatternItem::Kind::kSlot; };
    if (item.kind == PatternItem::Kind::kBoundary && item.boundary >= Boundary::kWord && inner &&
        one_slot(pattern.items[i - 1]) && one_slot(pattern.items[i + 1])) {
      const auto place = std::find_if(written.items.begin(), written.items.end(), [&](const SyntaxItem& w) {
        return w.kind == SyntaxItem::Kind::kBoundary && BoundaryOf(w.boundary) == item.boundary;
      });
      diagnostics_.Warning(Kind::kNeverApplies, place != written.items.end() ? place->span : written.span,
                           "this never matches: a rule stays within the word, and this boundary is the edge of one",
                           "put the boundary at an end of the pattern, or take it out");
    }
  }
  return good;
}

// ---- changes ----------------------------------------------------------------------------------------

std::optional<int> Checker::LabelOf(const syntax::Name& name, const RuleContext& context) {
  const auto found = context.own_labels.find(name.text);
  if (found != context.own_labels.end()) return found->second;
  if (context.inserted.count(name.text) != 0) {
    Error(Kind::kNotSupportedYet, name.span,
          "'" + name.text + "' is inserted by this rule; changing it in the same rule is not supported by this release",
          "insert it with that content, or write a second rule");
    return std::nullopt;
  }
  if (context.broken) return std::nullopt;
  std::vector<std::string> known;
  for (const auto& [label, index] : context.own_labels) known.push_back(label);
  std::string remedy = DidYouMean(name.text, known);
  const auto mentions = context.mentions.find(name.text);
  if (mentions != context.mentions.end() && mentions->second > 1) {
    remedy = "the class stands " + std::to_string(mentions->second) +
             " times in the pattern: label the one you mean, X:" + name.text + "; ";
  } else if (mentions != context.mentions.end()) {
    remedy =
        "the class stands inside a repeated group or an alternative, where it could be several slots or "
        "none; ";
  }
  Error(Kind::kUnknownLabel, name.span, "no item of the rule is labelled '" + name.text + "'",
        Or(remedy, "label one: " + name.text + ":[..]"));
  return std::nullopt;
}

bool Checker::Changeable(NodeId node, Span span) {
  const Tree& tree = grammar_.tree;
  if (node == kSlotNode || IsSlotBorne(node)) {
    Error(Kind::kNotSupportedYet, span,
          "'" + tree[node].name + "' is borne by the slot; changing it is not supported by this release",
          "change a node under root");
    return false;
  }
  for (NodeId above = node; above > kRootNode; above = tree[above].mother) {
    if (tree[above].type != TreeNode::Type::kClass || tree[above].max < 2) continue;
    Error(Kind::kNotSupportedYet, span,
          "one mother may hold several of '" + tree[above].name +
              "', a class node; changing it or what hangs from it is not supported by this release",
          "take ×" + std::to_string(tree[above].max) + " away from " + tree[above].name);
    return false;
  }
  return true;
}

bool Checker::ResolveChange(const syntax::Change& change, RuleContext* context) {
  switch (change.kind) {
    case syntax::Change::Kind::kSpread:
    case syntax::Change::Kind::kDelink:
      return ResolveLine(change, context);
    case syntax::Change::Kind::kSet:
    case syntax::Change::Kind::kFill:
      return ResolveContent(change, context);
    case syntax::Change::Kind::kInsert:
      return ResolveInsert(change, context);
    case syntax::Change::Kind::kDelete: {
      const std::optional<int> label = LabelOf(change.label, *context);
      if (!label) return false;
      Change result;
      result.op = Change::Op::kDelete;
      result.target = *label;
      result.span = change.span;
      context->rule->changes.push_back(std::move(result));
      return true;
    }
  }
  return false;
}

bool Checker::ResolveLine(const syntax::Change& change, RuleContext* context) {
  const bool spread = change.kind == syntax::Change::Kind::kSpread;
  std::optional<int> target;
  bool good = true;
  if (spread) {
    target = LabelOf(change.label, *context);
    good = target.has_value();
  }
  for (const syntax::Path& path : change.paths) {
    const std::optional<int> label = LabelOf(path.label, *context);
    const std::optional<NodeId> node = NodeOf(path.node, Kind::kUnknownNode);
    if (!label || !node || !Changeable(*node, path.node.span)) {
      good = false;
      continue;
    }
    if (spread && target && *label == *target) {
      Error(Kind::kBadRule, path.span, "'" + path.label.text + "' spreads to itself", "spread to another item");
      good = false;
      continue;
    }
    Change result;
    result.op = spread ? Change::Op::kSpread : Change::Op::kDelink;
    result.source = spread ? *label : -1;
    result.target = spread ? target.value_or(-1) : *label;
    result.node = *node;
    result.span = Covering(path.span, change.paths.size() == 1 ? change.span : path.span);
    context->rule->changes.push_back(std::move(result));
  }
  return good;
}

bool Checker::ResolveContent(const syntax::Change& change, RuleContext* context) {
  const bool fill = change.kind == syntax::Change::Kind::kFill;
  const std::optional<int> label = LabelOf(change.label, *context);
  Change result;
  result.op = fill ? Change::Op::kFill : Change::Op::kSet;
  result.span = change.span;
  bool good = ResolveSettings(change.bundle, &result.settings) && label;
  if (!good) return false;
  result.target = *label;
  if (result.settings.empty()) {
    Error(Kind::kBadRule, change.span, std::string(fill ? "`fill`" : "`set`") + " with an empty bundle changes nothing",
          "name the features: [+f]");
    return false;
  }
  for (const Setting& setting : result.settings) {
    good = Changeable(setting.node, change.bundle.span) && good;
    if (fill && setting.values.empty()) {
      Error(Kind::kBadRule, change.bundle.span, "`fill` gives what is missing and takes nothing away",
            "write `set " + change.label.text + " [no " + grammar_.tree[setting.node].name + "]`");
      good = false;
    }
  }
  const Tree& tree = grammar_.tree;
  const std::vector<Setting> all = result.settings;
  const auto covered = [&](const Setting& setting) {
    // [Labial round]: the Labial comes along with the round under it.
    return tree[setting.node].type == TreeNode::Type::kClass && !setting.values.empty() &&
           std::any_of(all.begin(), all.end(), [&](const Setting& other) {
             return other.node != setting.node && !other.values.empty() && tree.Dominates(setting.node, other.node);
           });
  };
  for (const Setting& above : all) {
    for (const Setting& below : all) {
      if (!above.values.empty() || above.node == below.node || !tree.Dominates(above.node, below.node)) continue;
      Error(Kind::kBadRule, change.bundle.span,
            "the bundle takes '" + tree[above.node].name + "' away and says something of '" + tree[below.node].name +
                "' under it",
            "write two rules, or name the features to take away one by one");
      good = false;
    }
  }
  result.settings.erase(std::remove_if(result.settings.begin(), result.settings.end(), covered), result.settings.end());
  if (good) context->rule->changes.push_back(std::move(result));
  return good;
}

bool Checker::ResolveInsert(const syntax::Change& change, RuleContext* context) {
  const std::optional<int> host = LabelOf(change.label, *context);
  Change result;
  result.op = Change::Op::kInsert;
  result.before = change.before;
  result.span = change.span;
  result.inserted = FeatureTree{kRootNode, 0, {}};
  const bool twice = !change.inserted.text.empty() && !context->placed.insert(change.inserted.text).second;
  if (twice || context->own_labels.count(change.inserted.text) != 0) {
    Error(Kind::kBadRule, change.inserted.span, "label '" + change.inserted.text + "' is used twice",
          "give what is inserted a label of its own");
    return false;
  }
  switch (change.content.kind) {
    case syntax::Set::Kind::kLiteral: {
      const std::optional<std::vector<int>> symbols = SymbolsOf(change.content.literal);
      if (!symbols) return false;
      if (symbols->size() != 1) {
        Error(Kind::kBadRule, change.content.literal.span, "/" + change.content.literal.raw + "/ is no single symbol",
              "insert one symbol at a time");
        return false;
      }
      result.inserted = grammar_.inventory.symbols[static_cast<std::size_t>((*symbols)[0])].underlying;
      break;
    }
    case syntax::Set::Kind::kBundle: {
      std::vector<Setting> settings;
      if (!ResolveSettings(change.content.bundle, &settings)) return false;
      Apply(settings, &result.inserted);
      NodeId full = 0;
      if (!HasRoom(result.inserted, &full)) {
        Error(Kind::kBadValue, change.content.span,
              "what is inserted has no room for two of '" + grammar_.tree[full].name + "'", "give one value");
        return false;
      }
      break;
    }
    case syntax::Set::Kind::kClass:
    case syntax::Set::Kind::kEmpty:
    case syntax::Set::Kind::kOr:
    case syntax::Set::Kind::kAnd:
    case syntax::Set::Kind::kButNot:
    case syntax::Set::Kind::kNot:
      Error(Kind::kBadRule, change.content.span, "a set does not say which segment to insert",
            "write a symbol /ə/ or a bundle [+syll]");
      return false;
  }
  if (!host) return false;
  result.target = *host;
  context->rule->changes.push_back(std::move(result));
  return true;
}

// Which changes cannot stand beside each other in one rule.
void Checker::CheckChanges(const syntax::Rule& written, const Rule& rule) {
  for (const Change& change : rule.changes) {
    if (MovesLines(change) && !CheckBesideLine(rule, change)) return;
    if (!CheckBesideTaken(rule, change)) return;
  }
  CheckOneChanged(written, rule);
}

// Lines of a node moved, and the same rule at work on that node by contents, or under it.
bool Checker::CheckBesideLine(const Rule& rule, const Change& line) {
  const Tree& tree = grammar_.tree;
  const std::string& name = tree[line.node].name;
  const auto bad = [&](const Change& other, const std::string& message, const std::string& remedy) {
    diagnostics_.Add({Kind::kBadRule,
                      Severity::kError,
                      other.span,
                      message,
                      remedy,
                      {{line.span, "lines of '" + name + "' are moved here"}}});
    return false;
  };
  for (const Change& other : rule.changes) {
    for (const NodeId node : ChangedNodes(other)) {
      if (node == line.node && !MovesLines(other) && other.target == line.target) {
        return bad(other,
                   "this rule asks for a line and a content of '" + name + "' on '" +
                       rule.labels[static_cast<std::size_t>(line.target)] + "'",
                   "make two rules, one after the other");
      }
      if (node == line.node || !tree.Dominates(line.node, node)) continue;
      return bad(other, "this rule moves lines of '" + name + "' and changes '" + tree[node].name + "' under it",
                 "write two rules, one after the other");
    }
  }
  return true;
}

// A node taken away by `set X [no N]`, and the same rule at work under it; one bundle that does both is told by
// itself. Whoever shares the node would feel both, so the labels make no difference.
bool Checker::CheckBesideTaken(const Rule& rule, const Change& taking) {
  const Tree& tree = grammar_.tree;
  for (const Setting& taken : taking.settings) {
    if (!taken.values.empty()) continue;
    for (const Change& other : rule.changes) {
      for (const NodeId node : ChangedNodes(other)) {
        if (node == taken.node || !tree.Dominates(taken.node, node)) continue;
        diagnostics_.Add(
            {Kind::kBadRule,
             Severity::kError,
             other.span,
             "this rule takes '" + tree[taken.node].name + "' away and changes '" + tree[node].name + "' under it",
             "write two rules, one after the other",
             {{taking.span, "'" + tree[taken.node].name + "' is taken away here"}}});
        return false;
      }
    }
  }
  return true;
}

void Checker::CheckOneChanged(const syntax::Rule& written, const Rule& rule) {
  if (rule.mode == Rule::Mode::kAtOnce) return;
  for (const Change& change : rule.changes) {
    if (change.target == rule.changes[0].target) continue;
    diagnostics_.Add({Kind::kBadRule,
                      Severity::kError,
                      change.span,
                      "an iterative rule changes one item, and \"" + written.name.text + "\" changes '" +
                          rule.labels[static_cast<std::size_t>(rule.changes[0].target)] + "' and '" +
                          rule.labels[static_cast<std::size_t>(change.target)] + "'",
                      "write one rule for each, or leave `iterate` out",
                      {{rule.changes[0].span, "the first change is here"}}});
    return;
  }
}

}  // namespace tiersmith
