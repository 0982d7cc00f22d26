// See not_run_yet.h.
#include "model/not_run_yet.h"

#include <algorithm>

namespace tiersmith {
namespace {

class Lister {
 public:
  explicit Lister(const Tree& tree) : tree_(tree) {}

  std::vector<NotYet> Take() { return std::move(found_); }

  void VisitWhole(const Rule& rule, Span name) {
    if (rule.kind == Rule::Kind::kComplete) Add(name, "`complete` is");
    if (!rule.otherwise.empty()) Add(name, "`otherwise` is", "write a rule of its own for the other sites");
    if (rule.within != Domain::kWord) Add(name, "`within` of anything but the word is");
    if (rule.prefer != Rule::Prefer::kNone) Add(name, "`prefer` is");
    if (rule.sharing_blocked) Add(name, "`sharing blocked` is");
    if (rule.preserving) Add(name, "`preserving` is");
    if (rule.probability < 1) Add(name, "`optional` is");
  }

  void VisitClause(const Clause& clause) {
    VisitPattern(clause.where);
    for (const Pattern& unless : clause.unless) VisitPattern(unless);
    for (const Condition& condition : clause.conditions) Add(condition.span, "a comparison of two items is");
    for (const TagTest& tag : clause.tags) Add(tag.span, tag.only ? "`only` is" : "`except` is");
    for (const Change& change : clause.changes) VisitChange(change);
  }

 private:
  void Add(Span span, std::string what, std::string remedy = "take it out, or state the analysis without it") {
    const bool said = std::any_of(found_.begin(), found_.end(), [&](const NotYet& construct) {
      return construct.what == what && construct.span.begin == span.begin && construct.span.file == span.file;
    });
    if (!said) found_.push_back({span, std::move(what), std::move(remedy)});
  }

  void VisitPattern(const Pattern& pattern) {
    for (const PatternItem& item : pattern.items) {
      if (item.kind == PatternItem::Kind::kSameMorpheme) Add(item.span, "`&` is");
      if (item.kind == PatternItem::Kind::kBoundary && item.label >= 0) Add(item.span, "a labelled boundary is");
      VisitTest(item.test, item.span);
      for (const Pattern& alternative : item.alternatives) VisitPattern(alternative);
    }
  }

  void VisitTest(const SlotTest& test, Span span) {
    for (const FeatureTest& feature : test.bundle) {
      if (feature.part != FeatureTest::Part::kAny) Add(span, "`begins`, `ends` or a list of values in a test is");
      switch (feature.kind) {
        case FeatureTest::Kind::kBears:
        case FeatureTest::Kind::kLacks:
        case FeatureTest::Kind::kHasValue:
        case FeatureTest::Kind::kLacksValue:
          break;
        case FeatureTest::Kind::kAgrees:
        case FeatureTest::Kind::kDiffers:
          Add(span, "agreement of items, α β γ δ, is", "write one rule for each value");
          break;
        case FeatureTest::Kind::kShared:
        case FeatureTest::Kind::kUnshared:
          Add(span, "`shared` or `unshared` is");
          break;
        case FeatureTest::Kind::kLong:
        case FeatureTest::Kind::kShort:
        case FeatureTest::Kind::kHalfFirst:
        case FeatureTest::Kind::kHalfSecond:
          Add(span, "`long`, `short` or `half` is");
          break;
      }
    }
    for (const SlotTest& arg : test.args) VisitTest(arg, span);
  }

  void VisitChange(const Change& change) {
    switch (change.op) {
      case Change::Op::kSpread:
      case Change::Op::kDelink:
      case Change::Op::kSet:
      case Change::Op::kFill:
      case Change::Op::kInsert:
      case Change::Op::kDelete:
        break;
      case Change::Op::kSetAs:
        Add(change.span, "`set .. as` is");
        break;
      case Change::Op::kFillAs:
        Add(change.span, "`fill .. as` is");
        break;
      case Change::Op::kSetLiteral:
        Add(change.span, "`set` with a symbol is", "name the features: set X [..]");
        break;
      case Change::Op::kLengthen:
        Add(change.span, "`lengthen` is");
        break;
      case Change::Op::kShorten:
        Add(change.span, "`shorten` is");
        break;
      case Change::Op::kMerge:
        Add(change.span, "`merge` is");
        break;
    }
    if (change.inserted_label >= 0) {
      Add(change.span, "an inserted item that other changes go on with is", "insert it with that content");
    }
    if (change.op == Change::Op::kInsert && change.is_long) Add(change.span, "inserting a long segment is");
    if (change.member.which != Member::Which::kWhole) Add(change.span, "one member of a contour is");
    VisitNode(change.node, change.span);
    for (const Setting& setting : change.settings) VisitNode(setting.node, change.span);
  }

  // What hangs from the slot, and what one mother may hold several subtrees of.
  void VisitNode(NodeId node, Span span) {
    if (node == kSlotNode) return;  // of a change without a node
    if (!tree_.Dominates(kRootNode, node)) {
      Add(span, "'" + tree_[node].name + "' is borne by the slot; changing it is", "change a node under root");
      return;
    }
    for (NodeId above = node; above > kRootNode; above = tree_[above].mother) {
      if (tree_[above].type != TreeNode::Type::kClass || tree_[above].max < 2) continue;
      Add(span,
          "one mother may hold several of '" + tree_[above].name +
              "', a class node; changing it or what hangs from it is",
          "take ×" + std::to_string(tree_[above].max) + " away from " + tree_[above].name);
      return;
    }
  }

  const Tree& tree_;
  std::vector<NotYet> found_;
};

}  // namespace

std::vector<NotYet> NotRunYet(const Rule& rule, Span name, const Tree& tree) {
  Lister lister(tree);
  lister.VisitWhole(rule, name);
  lister.VisitClause(rule);
  for (const Clause& clause : rule.otherwise) lister.VisitClause(clause);
  return lister.Take();
}

std::vector<NotYet> NotRunYet(const syntax::Strict& strict) {
  return {{strict.span, "`strict` is", "take it out: trees without a symbol that data reach are errors all the same"}};
}

std::vector<NotYet> NotRunYet(const syntax::Fuse& fuse) {
  return {{fuse.span, "`fuse` is", "take it out, or begin with a rule that spreads"}};
}

}  // namespace tiersmith
