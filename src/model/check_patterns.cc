// Patterns: items as they are written -> items in order, with classes and named patterns gone.
//
// Example: `N:[+nasal] C₀ Nasal #` is a labelled slot, a group of any number of slots, a slot and a boundary. Does not
// handle: what one slot is asked (check_sets.cc). Tested by tests/unit/model/check_test.cc.
#include <algorithm>

#include "model/check.h"

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
  group.span = item.span;
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

}  // namespace

// A named pattern is told once, whether a rule uses it or not.
void Checker::CheckPatterns() {
  for (const auto& [name, declared] : patterns_) {
    Clause scratch;
    std::vector<Variable> variables;
    RuleContext context;
    context.clause = &scratch;
    context.variables = &variables;
    context.expanding.push_back(name);
    Pattern pattern;
    if (!ResolvePattern(declared->pattern, &context, &pattern)) failed_patterns_.insert(name);
  }
}

// A class named once in a pattern is its own label.
void Checker::CountMentions(const syntax::Pattern& pattern, RuleContext* context) {
  for (const SyntaxItem& item : pattern.items) {
    const std::string name = ClassOf(item);
    if (!name.empty()) ++context->mentions[name];
    for (const syntax::Pattern& alternative : item.alternatives) CountMentions(alternative, context);
  }
}

void Checker::CollectUsedLabels(const syntax::Clause& written, RuleContext* context) {
  for (const syntax::Change& change : written.changes) {
    for (const syntax::Path& path : change.paths) context->used.insert(path.label.text);
    context->used.insert(change.label.text);
  }
  for (const std::vector<syntax::Condition>* tests : {&written.conditions, &written.unless_conditions}) {
    for (const syntax::Condition& test : *tests) {
      context->used.insert(test.left.label.text);
      context->used.insert(test.right.label.text);
    }
  }
  for (const syntax::TagTest& tag : written.tags) context->used.insert(tag.label.text);
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
    case SyntaxItem::Kind::kBoundary:
      return ResolveBoundary(item, context, pattern);
    case SyntaxItem::Kind::kGap:
      return ResolveGap(item, *context, pattern);
    case SyntaxItem::Kind::kSameMorpheme: {
      PatternItem same;
      same.kind = PatternItem::Kind::kSameMorpheme;
      same.span = item.span;
      pattern->items.push_back(std::move(same));
      return true;
    }
    case SyntaxItem::Kind::kGroup:
      return ResolveGroup(item, context, pattern);
  }
  return false;
}

bool Checker::ResolveBoundary(const SyntaxItem& item, RuleContext* context, Pattern* pattern) {
  PatternItem boundary;
  boundary.kind = PatternItem::Kind::kBoundary;
  boundary.boundary = BoundaryOf(item.boundary);
  boundary.span = item.span;
  if (!pattern->items.empty() && pattern->items.back().kind == PatternItem::Kind::kBoundary) {
    Error(Kind::kBadRule, item.span, "two boundaries stand side by side",
          "a run of boundaries counts as its strongest: write only that one");
    return false;
  }
  if (item.label) {
    if (context->in_unless) {
      Error(Kind::kBadRule, item.label->span, "in `unless` a boundary has no label",
            "write its sign alone; its place is told by the items beside it");
      return false;
    }
    if (!AddLabel(*item.label, item, context, &boundary.label)) return false;
    context->clause->label_kinds[static_cast<std::size_t>(boundary.label)] = Clause::LabelKind::kBoundary;
  }
  pattern->items.push_back(std::move(boundary));
  return true;
}

bool Checker::ResolveGap(const SyntaxItem& item, const RuleContext& context, Pattern* pattern) {
  PatternItem gap;
  gap.kind = PatternItem::Kind::kGap;
  gap.span = item.span;
  if (context.depth > 0) {
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

// One item, or a group where it has a quantity.
void Checker::Append(PatternItem slot, const SyntaxItem& item, Pattern* pattern) {
  if (slot.kind == PatternItem::Kind::kSlot && NamesEmpty(slot.test)) pattern->names_empty = true;
  Pattern inner;
  slot.span = item.span;
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
  *index = AddClauseLabel(label.text, Clause::LabelKind::kSlot, context->clause);
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
    const bool outer_repeated = context->repeated;
    context->repeated = outer_repeated || !Once(item);
    std::optional<SlotTest> test = ResolveSet(item.set, context);
    context->repeated = outer_repeated;
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
    one.span = item.span;
    several.items.push_back(std::move(one));
  }
  AddQuantified(item, std::move(several), pattern);
  return true;
}

// In `unless`, a label of the `where` is that item again; the label of a class has passed the class already.
bool Checker::ResolveOwnLabel(const SyntaxItem& item, const RuleContext& context, Pattern* pattern) {
  const std::string& name = item.name.text;
  PatternItem slot;
  slot.label = context.own_labels.at(name);
  slot.span = item.span;
  if (context.clause->KindOf(slot.label) == Clause::LabelKind::kBoundary) {
    Error(Kind::kBadRule, item.span, "'" + name + "' is a boundary, and in `unless` a boundary has no label",
          "write its sign: its place is told by the items beside it");
    return false;
  }
  if (!Once(item)) {
    Error(Kind::kBadRule, item.span, "'" + name + "' is one item of the rule and takes no quantity",
          "take the quantity away");
    return false;
  }
  pattern->items.push_back(std::move(slot));
  return true;
}

bool Checker::ResolveNameItem(const SyntaxItem& item, RuleContext* context, Pattern* pattern) {
  const std::string& name = item.name.text;
  if (context->in_unless && context->own_labels.count(name) != 0) return ResolveOwnLabel(item, *context, pattern);
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
    inner.repeated = context->repeated || !Once(item);
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
    slot.label = AddClauseLabel(name, Clause::LabelKind::kSlot, context->clause);
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
  group.span = item.span;
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
  if (group.alternatives.size() == 1 && !item.label) {
    AddQuantified(item, std::move(group.alternatives[0]), pattern);
    return true;
  }
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

namespace {

bool MayBeSlot(const PatternItem& item) {
  return item.kind == PatternItem::Kind::kSlot || item.kind == PatternItem::Kind::kGroup;
}

// Does the item with this index stand between two for which this is true?
template <typename Items, typename Test>
bool Between(const Items& items, std::size_t i, const Test& test) {
  return i > 0 && i + 1 < items.size() && test(items[i - 1]) && test(items[i + 1]);
}

bool IsOneSlot(const PatternItem& item) { return item.kind == PatternItem::Kind::kSlot; }

// The weakest boundary that a match within such a domain never crosses.
Boundary EdgeOf(Domain domain) {
  switch (domain) {
    case Domain::kMorpheme:
      return Boundary::kMorpheme;
    case Domain::kStem:  // a prefix's boundary is an edge as well, but a suffix's is not
    case Domain::kHost:
      return Boundary::kClitic;
    case Domain::kWord:
      return Boundary::kWord;
    case Domain::kPhrase:
      return Boundary::kPhrase;
  }
  return Boundary::kPhrase;
}

const char* DomainName(Domain domain) {
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

}  // namespace

// What can be seen of a pattern as a whole.
bool Checker::CheckShape(const Pattern& pattern, const syntax::Pattern& written, const RuleContext& context) {
  if (std::none_of(pattern.items.begin(), pattern.items.end(), MayBeSlot)) {
    Error(Kind::kBadRule, written.span.end > 0 ? written.span : context.span, "a pattern needs at least one slot",
          "write an item: [] is any slot");
    return false;
  }
  bool good = CheckSameMorpheme(written);
  for (std::size_t i = 0; i < pattern.items.size(); ++i) {
    const PatternItem& item = pattern.items[i];
    if (item.kind != PatternItem::Kind::kGap || Between(pattern.items, i, IsOneSlot)) continue;
    Error(Kind::kBadRule, item.span, "a gap stands between two single slots",
          "write one item without a quantity before it and one after it");
    good = false;
  }
  WarnEdgeInside(pattern, context);
  return good;
}

bool Checker::CheckSameMorpheme(const syntax::Pattern& written) {
  const auto may_be_slot = [](const SyntaxItem& item) {
    return item.kind == SyntaxItem::Kind::kSet || item.kind == SyntaxItem::Kind::kName ||
           item.kind == SyntaxItem::Kind::kGroup;
  };
  bool good = true;
  for (std::size_t i = 0; i < written.items.size(); ++i) {
    const SyntaxItem& item = written.items[i];
    for (const syntax::Pattern& alternative : item.alternatives) good = CheckSameMorpheme(alternative) && good;
    if (item.kind != SyntaxItem::Kind::kSameMorpheme || Between(written.items, i, may_be_slot)) continue;
    Error(Kind::kBadRule, item.span, "`&` says that two items follow each other in one morpheme",
          "write an item on either side of it, inside the same brackets, and no boundary or gap");
    good = false;
  }
  return good;
}

void Checker::WarnEdgeInside(const Pattern& pattern, const RuleContext& context) {
  for (std::size_t i = 0; i < pattern.items.size(); ++i) {
    const PatternItem& item = pattern.items[i];
    if (item.kind != PatternItem::Kind::kBoundary || item.boundary < EdgeOf(context.within)) continue;
    if (!Between(pattern.items, i, IsOneSlot)) continue;
    const std::string domain = DomainName(context.within);
    diagnostics_.Warning(
        Kind::kNeverApplies, item.span,
        "this never matches: a rule stays within the " + domain + ", and this boundary is the edge of one",
        "put the boundary at an end of the pattern, take it out, or let the rule see more: `within phrase`");
  }
}

}  // namespace tiersmith
