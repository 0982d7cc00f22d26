// Rules and the other steps of a derivation: clauses with their conditions and tags, and what is said of a rule as a
// whole; `complete`, `fuse`.
//
// Example: `where N:[+nasal] C:[+cons Place] if N.root is not C.root  delink N.Place  spread C.Place to N` is a clause
// with labels N and C, two items, a condition and two changes. Does not handle: items (check_patterns.cc), changes
// (check_changes.cc), what a rule does to forms (graph/, compile/). Tested by tests/unit/model/check_test.cc.
#include <algorithm>

#include "model/check.h"
#include "model/content.h"

namespace tiersmith {
namespace {

// FormItem::tags has a bit for each; the rest is kept for what a form itself must say.
constexpr std::size_t kMostTags = 60;

bool NamesLabel(const Pattern& pattern) {
  return std::any_of(pattern.items.begin(), pattern.items.end(), [](const PatternItem& item) {
    return item.label >= 0 || std::any_of(item.alternatives.begin(), item.alternatives.end(), NamesLabel);
  });
}

Rule::Mode ModeOf(syntax::Rule::Mode mode) {
  switch (mode) {
    case syntax::Rule::Mode::kAtOnce:
      return Rule::Mode::kAtOnce;
    case syntax::Rule::Mode::kRightward:
      return Rule::Mode::kRightward;
    case syntax::Rule::Mode::kLeftward:
      return Rule::Mode::kLeftward;
  }
  return Rule::Mode::kAtOnce;
}

Rule::Prefer PreferOf(syntax::Rule::Prefer prefer) {
  switch (prefer) {
    case syntax::Rule::Prefer::kNone:
      return Rule::Prefer::kNone;
    case syntax::Rule::Prefer::kLeft:
      return Rule::Prefer::kLeft;
    case syntax::Rule::Prefer::kRight:
      return Rule::Prefer::kRight;
  }
  return Rule::Prefer::kNone;
}

Domain DomainOf(syntax::Domain domain) {
  switch (domain) {
    case syntax::Domain::kMorpheme:
      return Domain::kMorpheme;
    case syntax::Domain::kStem:
      return Domain::kStem;
    case syntax::Domain::kHost:
      return Domain::kHost;
    case syntax::Domain::kWord:
      return Domain::kWord;
    case syntax::Domain::kPhrase:
      return Domain::kPhrase;
  }
  return Domain::kWord;
}

// Kept for a match that `unless` would drop where the test holds.
Condition::Test TestOf(syntax::Condition::Test test, bool opposite) {
  switch (test) {
    case syntax::Condition::Test::kEqual:
      return opposite ? Condition::Test::kUnequal : Condition::Test::kEqual;
    case syntax::Condition::Test::kUnequal:
      return opposite ? Condition::Test::kEqual : Condition::Test::kUnequal;
    case syntax::Condition::Test::kIs:
      return opposite ? Condition::Test::kNotSame : Condition::Test::kSame;
    case syntax::Condition::Test::kIsNot:
      return opposite ? Condition::Test::kSame : Condition::Test::kNotSame;
  }
  return Condition::Test::kEqual;
}

}  // namespace

void Checker::CheckRules() {
  CheckPatterns();
  std::map<std::string, Span> seen;
  for (const syntax::Top& top : file_.tops) {
    if (const auto* complete = std::get_if<syntax::Complete>(&top)) CheckComplete(*complete);
    if (const auto* fuse = std::get_if<syntax::Fuse>(&top)) CheckFusion(*fuse);
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
  CheckFloats();
}

// Losing its last line, such a node would stay as an item of the form, which rules of this release do not see to.
void Checker::CheckFloats() {
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

void Checker::CheckComplete(const syntax::Complete& written) {
  Rule step;
  step.kind = Rule::Kind::kComplete;
  step.name = "complete";
  step.span = written.span;
  RefuseNotRun(NotRunYet(step, written.span, grammar_.tree));
  grammar_.rules.push_back(std::move(step));
}

void Checker::CheckFusion(const syntax::Fuse& written) {
  Fusion fusion;
  fusion.span = written.span;
  const std::optional<NodeId> node = NodeOf(written.node, Kind::kUnknownNode);
  if (node == kSlotNode) {
    Error(Kind::kBadRule, written.node.span, "slots are not read as one", "name root or a node under it");
    return;
  }
  if (written.in) {
    Clause clause;
    RuleContext context;
    context.clause = &clause;
    context.span = written.span;
    Pattern pattern;
    if (!ResolvePattern(*written.in, &context, &pattern) || !CheckShape(pattern, *written.in, context)) return;
    if (!clause.labels.empty()) {
      Error(Kind::kBadRule, written.in->span, "a label means nothing here: `fuse` changes no item by name",
            "take the label away");
      return;
    }
    fusion.in = std::move(pattern);
  }
  if (!node) return;
  fusion.node = *node;
  grammar_.fusions.push_back(std::move(fusion));
}

void Checker::RefuseNotRun(const std::vector<NotYet>& constructs) {
  if (reach_ == Reach::kWhole) return;
  for (const NotYet& construct : constructs)
    Error(Kind::kNotSupportedYet, construct.span, construct.what + " not supported by this release", construct.remedy);
}

void Checker::CheckRule(const syntax::Rule& written) {
  Rule rule;
  rule.name = written.name.text;
  rule.span = written.span;
  rule.mode = ModeOf(written.mode);
  rule.within = DomainOf(written.within);
  rule.prefer = PreferOf(written.prefer);
  rule.preserving = written.preserving;
  rule.sharing_blocked = written.sharing == syntax::Rule::Sharing::kUnsaid
                             ? sharing_blocked_
                             : written.sharing == syntax::Rule::Sharing::kBlocked;
  rule.probability = written.probability.value_or(1);
  rule.by_word = written.by_word;
  bool good = CheckClause(written, written, rule, &rule);
  for (const syntax::Clause& further : written.otherwise) {
    Clause clause;
    good = CheckClause(further, written, rule, &clause) && good;
    rule.otherwise.push_back(std::move(clause));
  }
  good = good && CheckMergesAcross(rule);
  if (good) RefuseNotRun(NotRunYet(rule, written.name.span, grammar_.tree));
  grammar_.rules.push_back(std::move(rule));
}

// ---- clauses ----------------------------------------------------------------------------------------

bool Checker::CheckClause(const syntax::Clause& written, const syntax::Rule& whole, const Rule& rule, Clause* clause) {
  std::vector<Variable> variables;
  RuleContext context;
  context.clause = clause;
  context.within = rule.within;
  context.span = whole.span;
  context.variables = &variables;
  CountMentions(written.where, &context);
  CollectUsedLabels(written, &context);
  bool good = ResolvePattern(written.where, &context, &clause->where);
  if (good) good = CheckShape(clause->where, written.where, context);
  context.broken = !good;
  for (const syntax::Pattern& unless : written.unless) good = ResolveUnless(unless, context, clause) && good;
  good = AddInsertedLabels(written, &context) && good;
  for (const syntax::Condition& test : written.conditions) good = ResolveCondition(test, false, &context) && good;
  for (const syntax::Condition& test : written.unless_conditions) good = ResolveCondition(test, true, &context) && good;
  for (const syntax::TagTest& tag : written.tags) good = ResolveTag(tag, &context) && good;
  for (const syntax::Change& change : written.changes) good = ResolveChange(change, &context) && good;
  if (!good) return false;
  clause->variables = static_cast<int>(variables.size());
  WarnLonelyVariables(context);
  FaceEdges(clause);
  return CheckChanges(whole, rule, *clause);
}

bool Checker::ResolveUnless(const syntax::Pattern& written, const RuleContext& context, Clause* clause) {
  Pattern pattern;
  RuleContext inner = context;
  inner.in_unless = true;
  if (!ResolvePattern(written, &inner, &pattern) || !CheckShape(pattern, written, inner)) return false;
  if (!context.broken && !NamesLabel(pattern)) {
    Error(Kind::kBadRule, written.span, "this `unless` speaks of no item of the rule",
          "let it name a label of the `where`: its place is told by that item");
    return false;
  }
  clause->unless.push_back(std::move(pattern));
  return true;
}

bool Checker::ResolveCondition(const syntax::Condition& written, bool opposite, RuleContext* context) {
  const std::optional<int> left = LabelOf(written.left.label, *context);
  const std::optional<int> right = LabelOf(written.right.label, *context);
  const std::optional<NodeId> node = NodeOf(written.left.node, Kind::kUnknownNode);
  const std::optional<NodeId> other = NodeOf(written.right.node, Kind::kUnknownNode);
  if (!left || !right || !node || !other) return false;
  if (*node != *other) {
    Error(Kind::kBadRule, written.span,
          "'" + written.left.node.text + "' and '" + written.right.node.text + "' are two nodes and never the same",
          "name one node on both sides: " + written.left.label.text + "." + written.left.node.text + " and " +
              written.right.label.text + "." + written.left.node.text);
    return false;
  }
  if (*node == kSlotNode) {
    Error(Kind::kBadRule, written.span, "two items are never one slot", "name root or a node under it");
    return false;
  }
  const std::optional<Member> left_member = MemberOf(written.left, *node);
  const std::optional<Member> right_member = MemberOf(written.right, *node);
  if (!left_member || !right_member) return false;
  if (*left == *right && left_member->which == right_member->which && left_member->value == right_member->value) {
    Error(Kind::kBadRule, written.span, "'" + written.left.label.text + "' is held against itself",
          "name two items of the `where`");
    return false;
  }
  Condition condition;
  condition.test = TestOf(written.test, opposite);
  condition.left = *left;
  condition.right = *right;
  condition.node = *node;
  condition.left_member = *left_member;
  condition.right_member = *right_member;
  condition.span = written.span;
  context->clause->conditions.push_back(condition);
  return true;
}

// X.-cont, X.Tone:H, X.Tone first
std::optional<Member> Checker::MemberOf(const syntax::Path& path, NodeId node) {
  const TreeNode& kind = grammar_.tree[node];
  const auto valued = [&](Value value) { return Member{Member::Which::kValue, value}; };
  switch (path.member) {
    case syntax::Path::Member::kFacing:
      return Member();
    case syntax::Path::Member::kFirst:
      return Member{Member::Which::kFirst, 0};
    case syntax::Path::Member::kLast:
      return Member{Member::Which::kLast, 0};
    case syntax::Path::Member::kPlus:
    case syntax::Path::Member::kMinus: {
      const bool plus = path.member == syntax::Path::Member::kPlus;
      if (kind.type == TreeNode::Type::kBinary) return valued(plus ? 1 : 0);
      Error(Kind::kBadValue, path.span, "'" + kind.name + "' cannot be " + (plus ? "+" : "-") + kind.name,
            "narrow it by its place, `" + path.label.text + "." + kind.name + " first`, or take the sign away");
      return std::nullopt;
    }
    case syntax::Path::Member::kValue: {
      if (kind.type != TreeNode::Type::kMany) {
        Error(Kind::kBadValue, path.span, "'" + kind.name + "' has no values to name after a colon",
              "narrow it by its place, `" + path.label.text + "." + kind.name + " first`, or by its sign");
        return std::nullopt;
      }
      const std::optional<Value> value = ValueOf(kind, path.value);
      if (!value) return std::nullopt;
      return valued(*value);
    }
  }
  return std::nullopt;
}

bool Checker::ResolveTag(const syntax::TagTest& written, RuleContext* context) {
  TagTest test;
  test.only = written.only;
  test.span = written.span;
  switch (written.scope) {
    case syntax::TagTest::Scope::kChanged:
      test.scope = TagTest::Scope::kChanged;
      break;
    case syntax::TagTest::Scope::kLabel: {
      const std::optional<int> label = LabelOf(written.label, *context);
      if (!label) return false;
      test.scope = TagTest::Scope::kLabel;
      test.label = *label;
      break;
    }
    case syntax::TagTest::Scope::kWord:
      test.scope = TagTest::Scope::kWord;
      break;
  }
  std::vector<std::string>& tags = grammar_.tags;
  const auto known = std::find(tags.begin(), tags.end(), written.tag.text);
  test.tag = static_cast<int>(known - tags.begin());
  if (known == tags.end()) {
    if (tags.size() == kMostTags) {
      Error(Kind::kLimit, written.tag.span,
            "the rules ask for more than " + std::to_string(kMostTags) +
                " tags, stem, prefix, suffix and clitic included",
            "let one tag stand for several classes of morphemes");
      return false;
    }
    tags.push_back(written.tag.text);
  }
  context->clause->tags.push_back(test);
  return true;
}

void Checker::WarnLonelyVariables(const RuleContext& context) {
  for (const Variable& variable : *context.variables) {
    if (variable.places > 1 || variable.several) continue;
    const std::string& node = grammar_.tree[variable.node].name;
    diagnostics_.Warning(Kind::kBadRule, variable.span,
                         "'" + variable.name + "' stands here alone: there is nothing for it to agree with",
                         "write it a second time, or only `" + node + "` for an item that bears " + node);
  }
}

// ---- facing edges -----------------------------------------------------------------------------------

namespace {

using Part = FeatureTest::Part;

bool AsksValue(const FeatureTest& test) {
  switch (test.kind) {
    case FeatureTest::Kind::kHasValue:
    case FeatureTest::Kind::kLacksValue:
    case FeatureTest::Kind::kAgrees:
    case FeatureTest::Kind::kDiffers:
      return true;
    case FeatureTest::Kind::kBears:
    case FeatureTest::Kind::kLacks:
    case FeatureTest::Kind::kShared:
    case FeatureTest::Kind::kUnshared:
    case FeatureTest::Kind::kLong:
    case FeatureTest::Kind::kShort:
    case FeatureTest::Kind::kHalfFirst:
    case FeatureTest::Kind::kHalfSecond:
      return false;
  }
  return false;
}

// Does the bundle itself say how the contour goes: [-f +f], [begins -f]?
bool SaysContour(const std::vector<FeatureTest>& bundle, const FeatureTest& test) {
  return std::any_of(bundle.begin(), bundle.end(), [&](const FeatureTest& other) {
    const bool two_values =
        test.kind == FeatureTest::Kind::kHasValue && other.kind == test.kind && other.value != test.value;
    return other.node == test.node && AsksValue(other) && (other.part != Part::kAny || two_values);
  });
}

template <typename MayBeContour>
void Face(Part part, const MayBeContour& may_be_contour, SlotTest* test) {
  const std::vector<FeatureTest> written = test->bundle;
  for (FeatureTest& feature : test->bundle) {
    if (AsksValue(feature) && may_be_contour(feature.node) && !SaysContour(written, feature)) feature.part = part;
  }
  for (SlotTest& arg : test->args) Face(part, may_be_contour, &arg);
}

}  // namespace

// The nearest single item on either side of what changes is matched by the edge that faces it (design: contours). What
// stands between two changed items, or is changed itself, is matched by any part.
void Checker::FaceEdges(Clause* clause) const {
  std::set<int> changed;
  for (const Change& change : clause->changes) {
    changed.insert(change.target);
    if (change.op == Change::Op::kMerge) changed.insert(change.source);
  }
  const auto is_changed = [&](const PatternItem& item) { return item.label >= 0 && changed.count(item.label) != 0; };
  const auto is_slot = [](const PatternItem& item) { return item.kind == PatternItem::Kind::kSlot; };
  const auto contour = [this](NodeId node) { return MayBeContour(node); };
  const auto face = [&](Pattern* pattern) {
    std::vector<PatternItem>& items = pattern->items;
    const auto first = std::find_if(items.begin(), items.end(), is_changed);
    if (first == items.end()) return;
    const auto last = std::find_if(items.rbegin(), items.rend(), is_changed);
    const auto before = std::find_if(std::make_reverse_iterator(first), items.rend(), is_slot);
    const auto after = std::find_if(last.base(), items.end(), is_slot);
    if (before != items.rend()) Face(Part::kLast, contour, &before->test);
    if (after != items.end()) Face(Part::kFirst, contour, &after->test);
  };
  face(&clause->where);
  for (Pattern& unless : clause->unless) face(&unless);
}

}  // namespace tiersmith
