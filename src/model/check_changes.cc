// Changes: what they name, what they may be asked of, and which may stand beside each other in one clause.
//
// Example: `delink N.Place  spread T.Place to N` is two changes of N, whose lines of Place are moved; `set N [+high]`
// beside them would change what hangs under a node whose lines move, which is refused. Does not handle: what changes
// do to forms (graph/, compile/). Tested by tests/unit/model/check_test.cc.
#include <algorithm>

#include "model/check.h"
#include "model/content.h"

namespace tiersmith {
namespace {

Span Covering(Span a, Span b) {
  if (a.end == 0 || a.file != b.file) return b;
  return {a.file, std::min(a.begin, b.begin), std::max(a.end, b.end)};
}

bool TakesAway(const Setting& setting) { return setting.values.empty() && setting.variable < 0; }

}  // namespace

// ---- labels -----------------------------------------------------------------------------------------

int Checker::AddClauseLabel(const std::string& name, Clause::LabelKind kind, Clause* clause) {
  clause->labels.push_back(name);
  clause->label_kinds.push_back(kind);
  return static_cast<int>(clause->labels.size()) - 1;
}

bool Checker::AddInsertedLabels(const syntax::Clause& written, RuleContext* context) {
  bool good = true;
  std::set<std::string> seen;
  for (const syntax::Change& change : written.changes) {
    const std::string& name = change.inserted.text;
    if (change.kind != syntax::Change::Kind::kInsert || name.empty()) continue;
    if (!seen.insert(name).second || context->own_labels.count(name) != 0) {
      Error(Kind::kBadRule, change.inserted.span, "label '" + name + "' is used twice",
            "give what is inserted a label of its own");
      good = false;
    } else if (classes_.count(name) != 0) {
      Error(Kind::kBadRule, change.inserted.span, "label '" + name + "' is the name of a class",
            "choose a label that no class has");
      good = false;
    } else if (context->used.count(name) != 0) {
      context->inserted[name] = AddClauseLabel(name, Clause::LabelKind::kInserted, context->clause);
    }
  }
  return good;
}

std::optional<int> Checker::LabelOf(const syntax::Name& name, const RuleContext& context, LabelUse use) {
  const auto found = context.own_labels.find(name.text);
  if (found != context.own_labels.end()) {
    const bool boundary = context.clause->KindOf(found->second) == Clause::LabelKind::kBoundary;
    if (!boundary || use == LabelUse::kSlotOrBoundary) return found->second;
    Error(Kind::kBadRule, name.span, "'" + name.text + "' is a boundary, which can only be deleted",
          "name a slot of the `where` here");
    return std::nullopt;
  }
  const auto inserted = context.inserted.find(name.text);
  if (inserted != context.inserted.end()) {
    if (use == LabelUse::kSlotOrInserted) return inserted->second;
    Error(Kind::kBadRule, name.span,
          "'" + name.text + "' is inserted by this rule: only `spread .. to`, `set` and `fill` go on with it",
          "insert what you want to have in the end, or write a second rule");
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

// ---- changes ----------------------------------------------------------------------------------------

bool Checker::ResolveChange(const syntax::Change& change, RuleContext* context) {
  switch (change.kind) {
    case syntax::Change::Kind::kSpread:
    case syntax::Change::Kind::kDelink:
      return ResolveLine(change, context);
    case syntax::Change::Kind::kSetAs:
    case syntax::Change::Kind::kFillAs:
    case syntax::Change::Kind::kMerge:
      return ResolvePair(change, context);
    case syntax::Change::Kind::kSet:
    case syntax::Change::Kind::kFill:
      return ResolveContent(change, context);
    case syntax::Change::Kind::kSetLiteral:
      return ResolveSetLiteral(change, context);
    case syntax::Change::Kind::kInsert:
      return ResolveInsert(change, context);
    case syntax::Change::Kind::kDelete:
      return ResolveTarget(change, Change::Op::kDelete, context);
    case syntax::Change::Kind::kLengthen:
      return ResolveTarget(change, Change::Op::kLengthen, context);
    case syntax::Change::Kind::kShorten:
      return ResolveTarget(change, Change::Op::kShorten, context);
  }
  return false;
}

bool Checker::ResolveTarget(const syntax::Change& change, Change::Op op, RuleContext* context) {
  const LabelUse use = op == Change::Op::kDelete ? LabelUse::kSlotOrBoundary : LabelUse::kSlot;
  const std::optional<int> label = LabelOf(change.label, *context, use);
  if (!label) return false;
  Change result;
  result.op = op;
  result.target = *label;
  result.span = change.span;
  context->clause->changes.push_back(std::move(result));
  return true;
}

// The node of X.N.
std::optional<NodeId> Checker::ChangedNode(const syntax::Path& path) {
  const std::optional<NodeId> node = NodeOf(path.node, Kind::kUnknownNode);
  if (node != kSlotNode) return node;
  Error(Kind::kBadRule, path.node.span, "a slot is borne by nothing: it has no lines and is no content",
        "name root or a node under it, or write `delete`");
  return std::nullopt;
}

bool Checker::ResolveLine(const syntax::Change& change, RuleContext* context) {
  const bool spread = change.kind == syntax::Change::Kind::kSpread;
  std::optional<int> target;
  bool good = true;
  if (spread) {
    target = LabelOf(change.label, *context, LabelUse::kSlotOrInserted);
    good = target.has_value();
  }
  for (const syntax::Path& path : change.paths) {
    const std::optional<int> label = LabelOf(path.label, *context);
    const std::optional<NodeId> node = ChangedNode(path);
    const std::optional<Member> member = node ? MemberOf(path, *node) : std::nullopt;
    if (!label || !member) {
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
    result.member = *member;
    result.span = Covering(path.span, change.paths.size() == 1 ? change.span : path.span);
    context->clause->changes.push_back(std::move(result));
  }
  return good;
}

// set X.N as Y.N, fill X.N as Y.N (without a node: the whole segment), merge X.N Y.N
bool Checker::ResolvePair(const syntax::Change& change, RuleContext* context) {
  const bool merge = change.kind == syntax::Change::Kind::kMerge;
  const syntax::Path& left = change.paths[0];
  const syntax::Path& right = change.paths[1];
  const bool whole = left.node.text.empty() && right.node.text.empty();
  const std::optional<int> target = LabelOf(left.label, *context, merge ? LabelUse::kSlot : LabelUse::kSlotOrInserted);
  const std::optional<int> source = LabelOf(right.label, *context);
  const std::optional<NodeId> node = whole ? kRootNode : ChangedNode(left);
  const std::optional<NodeId> other = whole ? kRootNode : ChangedNode(right);
  if (!target || !source || !node || !other) return false;
  const auto bad = [&](Span span, const std::string& message, const std::string& remedy) {
    Error(Kind::kBadRule, span, message, remedy);
    return false;
  };
  const std::string verb = merge ? "`merge`" : change.kind == syntax::Change::Kind::kSetAs ? "`set`" : "`fill`";
  if (*node != *other) {
    return bad(change.span,
               verb + " takes one node of both items, and '" + left.node.text + "' is not '" + right.node.text + "'",
               "name the same node on both sides");
  }
  if (*target == *source) {
    return bad(change.span, "'" + left.label.text + "' is named on both sides", "name two items of the `where`");
  }
  const bool narrowed = left.member != syntax::Path::Member::kFacing;
  if (narrowed || (merge && right.member != syntax::Path::Member::kFacing)) {
    return bad(narrowed ? left.span : right.span,
               merge ? "neighbours of one tier merge: `merge` picks out no member of a contour"
                     : verb + " with `as` gives all of '" + left.node.text + "' anew, not one member of it",
               merge ? "name the node alone" : "name the node alone on the left");
  }
  const std::optional<Member> member = MemberOf(right, *node);
  if (!member) return false;
  Change result;
  result.op = merge                                         ? Change::Op::kMerge
              : change.kind == syntax::Change::Kind::kSetAs ? Change::Op::kSetAs
                                                            : Change::Op::kFillAs;
  result.target = *target;
  result.source = *source;
  result.node = *node;
  result.member = *member;
  result.span = change.span;
  context->clause->changes.push_back(std::move(result));
  return true;
}

bool Checker::ResolveContent(const syntax::Change& change, RuleContext* context) {
  const bool fill = change.kind == syntax::Change::Kind::kFill;
  const std::optional<int> label = LabelOf(change.label, *context, LabelUse::kSlotOrInserted);
  Change result;
  result.op = fill ? Change::Op::kFill : Change::Op::kSet;
  result.span = change.span;
  bool good = ResolveSettings(change.bundle, context, &result.settings) && label;
  if (!good) return false;
  result.target = *label;
  if (result.settings.empty()) {
    Error(Kind::kBadRule, change.span, std::string(fill ? "`fill`" : "`set`") + " with an empty bundle changes nothing",
          "name the features: [+f]");
    return false;
  }
  if (!CheckTakenAway(change, result.settings)) return false;
  const Tree& tree = grammar_.tree;
  const std::vector<Setting> all = result.settings;
  const auto covered = [&](const Setting& setting) {
    // [Labial round]: the Labial comes along with the round under it.
    return tree[setting.node].type == TreeNode::Type::kClass && !setting.values.empty() &&
           std::any_of(all.begin(), all.end(), [&](const Setting& other) {
             return other.node != setting.node && !TakesAway(other) && tree.Dominates(setting.node, other.node);
           });
  };
  result.settings.erase(std::remove_if(result.settings.begin(), result.settings.end(), covered), result.settings.end());
  context->clause->changes.push_back(std::move(result));
  return true;
}

// `fill` takes nothing away; one bundle does not replace a node and say something of what is under it.
bool Checker::CheckTakenAway(const syntax::Change& written, const std::vector<Setting>& settings) {
  const Tree& tree = grammar_.tree;
  bool good = true;
  for (const Setting& above : settings) {
    if (written.kind == syntax::Change::Kind::kFill && TakesAway(above)) {
      Error(Kind::kBadRule, written.bundle.span, "`fill` gives what is missing and takes nothing away",
            "write `set " + written.label.text + " [no " + tree[above.node].name + "]`");
      good = false;
    }
    if (!above.values.empty()) continue;
    for (const Setting& below : settings) {
      if (above.node == below.node || !tree.Dominates(above.node, below.node)) continue;
      Error(Kind::kBadRule, written.bundle.span,
            "the bundle " + std::string(TakesAway(above) ? "takes '" : "replaces '") + tree[above.node].name +
                (TakesAway(above) ? "' away" : "'") + " and says something of '" + tree[below.node].name + "' under it",
            TakesAway(above) ? "write two rules, or name the features to take away one by one" : "write two rules");
      good = false;
    }
  }
  return good;
}

// /k/ or /kː/: the content of a new root.
bool Checker::ResolveLiteralContent(const syntax::FormText& literal, Change* change) {
  const std::optional<std::vector<int>> symbols = SymbolsOf(literal, &change->is_long);
  if (!symbols) return false;
  if (symbols->size() != 1) {
    Error(Kind::kBadRule, literal.span, "/" + literal.raw + "/ is no single symbol", "give one symbol at a time");
    return false;
  }
  change->inserted = grammar_.inventory.symbols[static_cast<std::size_t>((*symbols)[0])].underlying;
  return true;
}

bool Checker::ResolveSetLiteral(const syntax::Change& change, RuleContext* context) {
  const std::optional<int> label = LabelOf(change.label, *context);
  Change result;
  result.op = Change::Op::kSetLiteral;
  result.node = kRootNode;
  result.span = change.span;
  if (!ResolveLiteralContent(change.content.literal, &result) || !label) return false;
  result.target = *label;
  context->clause->changes.push_back(std::move(result));
  return true;
}

bool Checker::ResolveInsert(const syntax::Change& change, RuleContext* context) {
  const std::optional<int> host = LabelOf(change.label, *context);
  Change result;
  result.op = Change::Op::kInsert;
  result.before = change.before;
  result.span = change.span;
  result.inserted = FeatureTree{kRootNode, 0, {}};
  switch (change.content.kind) {
    case syntax::Set::Kind::kLiteral:
      if (!ResolveLiteralContent(change.content.literal, &result)) return false;
      break;
    case syntax::Set::Kind::kBundle: {
      std::vector<Setting> settings;
      if (!ResolveSettings(change.content.bundle, nullptr, &settings)) return false;
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
  const auto label = context->inserted.find(change.inserted.text);
  if (label != context->inserted.end()) result.inserted_label = label->second;
  context->clause->changes.push_back(std::move(result));
  return true;
}

// ---- changes beside each other ----------------------------------------------------------------------

namespace {

bool MovesLines(const Change& change) {
  return change.op == Change::Op::kSpread || change.op == Change::Op::kDelink || change.op == Change::Op::kMerge;
}

bool GivesWhole(const Change& change) {
  return change.op == Change::Op::kSetAs || change.op == Change::Op::kFillAs || change.op == Change::Op::kSetLiteral;
}

// The nodes a change is about, of those that are already there.
std::vector<NodeId> ChangedNodes(const Change& change) {
  std::vector<NodeId> nodes;
  if (MovesLines(change) || GivesWhole(change)) nodes.push_back(change.node);
  for (const Setting& setting : change.settings) nodes.push_back(setting.node);
  return nodes;
}

// The nodes whose instance goes, with all under it, for another or for none.
std::vector<NodeId> ReplacedNodes(const Change& change) {
  std::vector<NodeId> nodes;
  if (GivesWhole(change)) nodes.push_back(change.node);
  for (const Setting& setting : change.settings) {
    if (setting.values.empty()) nodes.push_back(setting.node);
  }
  return nodes;
}

bool OfOneItem(const Change& a, const Change& b) {
  const auto changes = [](const Change& change, int label) {
    return change.target == label || (change.op == Change::Op::kMerge && change.source == label);
  };
  return changes(b, a.target) || (a.op == Change::Op::kMerge && changes(b, a.source));
}

bool ChangesLength(const Change& change) {
  return change.op == Change::Op::kLengthen || change.op == Change::Op::kShorten;
}

// Does the change give its item such a node anew?
bool Gives(const Change& change, NodeId node) {
  if (change.op == Change::Op::kSetLiteral) return node == kRootNode || Bears(change.inserted, node);
  if (GivesWhole(change)) return change.node == node || change.node == kRootNode;
  return std::any_of(change.settings.begin(), change.settings.end(),
                     [node](const Setting& setting) { return setting.node == node && !TakesAway(setting); });
}

// Does an item stand between two others of the `where`?
bool StandsBetween(const Clause& clause, int label, int one, int other) {
  const auto place = [&](int of) {
    const std::vector<PatternItem>& items = clause.where.items;
    return std::find_if(items.begin(), items.end(), [of](const PatternItem& item) { return item.label == of; });
  };
  return place(label) > std::min(place(one), place(other)) && place(label) < std::max(place(one), place(other));
}

std::string LabelName(const Clause& clause, int label) { return clause.labels[static_cast<std::size_t>(label)]; }

}  // namespace

bool Checker::CheckChanges(const syntax::Rule& written, const Rule& rule, const Clause& clause) {
  for (const Change& change : clause.changes) {
    if (MovesLines(change) && !CheckBesideLine(clause, change)) return false;
    if (change.op == Change::Op::kMerge && !CheckBesideMerged(clause, change)) return false;
    if (!CheckBesideReplaced(clause, change)) return false;
    if (ChangesLength(change) && !CheckBesideLength(clause, change)) return false;
  }
  return rule.mode == Rule::Mode::kAtOnce || CheckOneChanged(written, clause);
}

bool Checker::RefuseBeside(const Change& change, const Change& other, const std::string& message,
                           const std::string& first) {
  diagnostics_.Add({Kind::kBadRule,
                    Severity::kError,
                    other.span,
                    message,
                    "write two rules, one after the other",
                    {{change.span, first}}});
  return false;
}

// Lines of a node moved, and the same rule at work on that node by contents, or under it.
bool Checker::CheckBesideLine(const Clause& clause, const Change& line) {
  const Tree& tree = grammar_.tree;
  const std::string& name = tree[line.node].name;
  const std::string here = "lines of '" + name + "' are moved here";
  for (const Change& other : clause.changes) {
    if (&other == &line) continue;
    const bool one_merges = (line.op == Change::Op::kMerge) != (other.op == Change::Op::kMerge);
    for (const NodeId node : ChangedNodes(other)) {
      if (node == line.node && OfOneItem(line, other)) {
        if (!MovesLines(other)) {
          return RefuseBeside(
              line, other,
              "this rule asks for a line and a content of '" + name + "' on '" + LabelName(clause, other.target) + "'",
              here);
        }
        if (one_merges) {
          return RefuseBeside(line, other,
                              "this rule merges '" + name + "' of an item and moves its lines all the same", here);
        }
      }
      if (node == line.node || !tree.Dominates(line.node, node)) continue;
      return RefuseBeside(
          line, other, "this rule moves lines of '" + name + "' and changes '" + tree[node].name + "' under it", here);
    }
  }
  return true;
}

// What two items come to share, and a new one between them, whose line theirs would cross.
bool Checker::CheckBesideMerged(const Clause& clause, const Change& merge) {
  const std::string& name = grammar_.tree[merge.node].name;
  for (const Change& other : clause.changes) {
    if (!Gives(other, merge.node) || !StandsBetween(clause, other.target, merge.source, merge.target)) continue;
    return RefuseBeside(merge, other,
                        "this rule merges '" + name + "' of '" + LabelName(clause, merge.target) + "' and '" +
                            LabelName(clause, merge.source) + "' and gives one to '" + LabelName(clause, other.target) +
                            "' between them",
                        "'" + name + "' is merged here");
  }
  return true;
}

// What one clause merges must be alike when another clause has changed it, too.
bool Checker::CheckMergesAcross(const Rule& rule) {
  std::vector<const Clause*> clauses{&rule};
  for (const Clause& clause : rule.otherwise) clauses.push_back(&clause);
  for (const Clause* merging : clauses) {
    for (const Change& merge : merging->changes) {
      if (merge.op != Change::Op::kMerge) continue;
      for (const Clause* clause : clauses) {
        for (const Change& other : clause->changes) {
          for (const NodeId node : ChangedNodes(other)) {
            if (node == merge.node || !grammar_.tree.Dominates(merge.node, node)) continue;
            const std::string& name = grammar_.tree[merge.node].name;
            return RefuseBeside(
                merge, other,
                "one clause merges '" + name + "' and another changes '" + grammar_.tree[node].name + "' under it",
                "'" + name + "' is merged here");
          }
        }
      }
    }
  }
  return true;
}

// A node taken away or given as a whole, and the same rule at work on it or under it; one bundle that does both is told
// by itself. Whoever shares the node would feel both, so the labels make no difference, but for the root: a new one
// is of its slot alone.
bool Checker::CheckBesideReplaced(const Clause& clause, const Change& replacing) {
  const Tree& tree = grammar_.tree;
  for (const NodeId replaced : ReplacedNodes(replacing)) {
    const bool gives = std::none_of(replacing.settings.begin(), replacing.settings.end(), TakesAway);
    const std::string what =
        gives ? "gives '" + tree[replaced].name + "' anew" : "takes '" + tree[replaced].name + "' away";
    for (const Change& other : clause.changes) {
      if (&other == &replacing || (replaced == kRootNode && !OfOneItem(replacing, other))) continue;
      for (const NodeId node : ChangedNodes(other)) {
        const bool same = node == replaced;
        if (!tree.Dominates(replaced, node) || (same && !(GivesWhole(replacing) && OfOneItem(replacing, other))))
          continue;
        return RefuseBeside(
            replacing, other,
            "this rule " + what + " and changes " + (same ? "it once more" : "'" + tree[node].name + "' under it"),
            "'" + tree[replaced].name + (gives ? "' is given here" : "' is taken away here"));
      }
    }
  }
  return true;
}

// A root made longer or shorter, and the same rule at work on which root that is.
bool Checker::CheckBesideLength(const Clause& clause, const Change& change) {
  const bool lengthen = change.op == Change::Op::kLengthen;
  const std::string asks = "this rule asks to " + std::string(lengthen ? "lengthen" : "shorten") + " '" +
                           LabelName(clause, change.target) + "' and ";
  for (const Change& other : clause.changes) {
    if (&other == &change || !OfOneItem(change, other)) continue;
    if (ChangesLength(other) && other.op != change.op) {
      return RefuseBeside(change, other, asks + (lengthen ? "to shorten it" : "to lengthen it"),
                          "its length is changed here");
    }
    const std::vector<NodeId> nodes = ChangedNodes(other);
    if (std::find(nodes.begin(), nodes.end(), kRootNode) == nodes.end()) continue;
    return RefuseBeside(change, other, asks + "moves or replaces its root", "its length is changed here");
  }
  return true;
}

// An inserted item counts as its host.
bool Checker::CheckOneChanged(const syntax::Rule& written, const Clause& clause) {
  const auto item = [&](int label) {
    for (const Change& change : clause.changes) {
      if (change.op == Change::Op::kInsert && change.inserted_label == label && label >= 0) return change.target;
    }
    return label;
  };
  const Change& first = clause.changes[0];
  for (const Change& change : clause.changes) {
    const int other = change.op == Change::Op::kMerge ? change.source : item(change.target);
    if (clause.KindOf(other) == Clause::LabelKind::kBoundary) {
      Error(Kind::kBadRule, change.span, "an iterative rule visits segments, and this changes a boundary",
            "leave `iterate` out");
      return false;
    }
    if (other == item(first.target)) continue;
    diagnostics_.Add({Kind::kBadRule,
                      Severity::kError,
                      change.span,
                      "an iterative rule changes one item, and \"" + written.name.text + "\" changes '" +
                          LabelName(clause, first.target) + "' and '" + LabelName(clause, other) + "'",
                      "write one rule for each, or leave `iterate` out",
                      {{first.span, "the first change is here"}}});
    return false;
  }
  return true;
}

}  // namespace tiersmith
