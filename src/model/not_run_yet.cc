// See not_run_yet.h.
#include "model/not_run_yet.h"

#include <algorithm>

namespace tiersmith {
namespace {

class Lister {
 public:
  explicit Lister(const Tree& tree) : tree_(tree) {}

  std::vector<NotYet> Take() { return std::move(found_); }

  // What a sweep has deleted would still stand where lines are drawn.
  void VisitClausesTogether(const Rule& rule, Span name) {
    if (rule.mode == Rule::Mode::kAtOnce || rule.otherwise.empty()) return;
    const auto does = [&](Change::Op op) {
      const auto in = [op](const Clause& clause) {
        return std::any_of(clause.changes.begin(), clause.changes.end(), [op](const Change& c) { return c.op == op; });
      };
      return in(rule) || std::any_of(rule.otherwise.begin(), rule.otherwise.end(), in);
    };
    if (does(Change::Op::kDelete) && does(Change::Op::kSpread))
      Add(name, "deleting in one clause and spreading in another of a rule that iterates is", "write two rules");
  }

  void VisitClause(const Rule& rule, const Clause& clause) {
    if (!rule.otherwise.empty()) VisitEnds(clause.where);
    if (rule.by_word) VisitEndsOfWord(clause.where);
    for (const Change& change : clause.changes) {
      VisitChange(change);
      if (change.op == Change::Op::kSpread) VisitPassedOn(clause, change);
      if (clause.KindOf(change.target) == Clause::LabelKind::kInserted) VisitInserted(rule, clause, change);
    }
  }

 private:
  void Add(Span span, std::string what, std::string remedy = "take it out, or state the analysis without it") {
    const bool said = std::any_of(found_.begin(), found_.end(), [&](const NotYet& construct) {
      return construct.what == what && construct.span.begin == span.begin && construct.span.file == span.file;
    });
    if (!said) found_.push_back({span, std::move(what), std::move(remedy)});
  }

  // What one clause takes from another is told by letters, and the form's edge is none.
  void VisitEnds(const Pattern& pattern) {
    for (std::size_t i = 0; i < pattern.items.size(); ++i) {
      const PatternItem& item = pattern.items[i];
      const bool end = i == 0 || i + 1 == pattern.items.size();
      if (item.kind == PatternItem::Kind::kBoundary && item.label >= 0 && end)
        Add(item.span, "beside `otherwise`, a labelled boundary at the end of a pattern is",
            "let the pattern name the item beyond it: [] is any");
      for (const Pattern& alternative : item.alternatives) VisitEnds(alternative);
    }
  }

  // A match is of the word where its first slot stands, which need not be that of a boundary beyond its slots.
  void VisitEndsOfWord(const Pattern& pattern) {
    const auto visit = [&](auto item, auto end) {
      for (; item != end && item->kind != PatternItem::Kind::kSlot; ++item) {
        if (item->kind == PatternItem::Kind::kBoundary && item->label >= 0)
          Add(item->span, "a labelled boundary that may come first or last in a rule with `by word` is",
              "let the pattern name the item beyond it: [] is any");
      }
    };
    visit(pattern.items.begin(), pattern.items.end());
    visit(pattern.items.rbegin(), pattern.items.rend());
  }

  void VisitChange(const Change& change) {
    const bool cuts = change.op == Change::Op::kDelink && change.member.which == Member::Which::kValue;
    if (cuts && tree_[change.node].max > 3) Add(change.span, "one member of a contour of more than three parts is");
    VisitNode(change.node, change.span);
    for (const Setting& setting : change.settings) VisitNode(setting.node, change.span);
  }

  // Lines and contents of one match are judged against each other only where all its items stood there before.
  void VisitInserted(const Rule& rule, const Clause& clause, const Change& change) {
    if (rule.mode != Rule::Mode::kAtOnce && change.op == Change::Op::kSpread) {
      Add(change.span, "spreading to what the rule inserts in a rule that iterates is",
          "apply the rule at once, or copy: set E.N as X.N");
    }
    for (const Change& other : clause.changes) {
      if (other.target == change.target) continue;
      for (NodeId node : NodesGiven(change)) {
        for (NodeId given : NodesGiven(other)) {
          if (node != given && !tree_.Dominates(node, given) && !tree_.Dominates(given, node)) continue;
          Add(change.span,
              "giving '" + tree_[node].name + "' to what the rule inserts and '" + tree_[given].name +
                  "' to another item is",
              "do one of the two in a rule of its own");
          return;
        }
      }
    }
  }

  // In exchange the one line may cross the other, which no item tells alone.
  void VisitPassedOn(const Clause& clause, const Change& spread) {
    const auto at_source = [&](Change::Op op) {
      return std::find_if(clause.changes.begin(), clause.changes.end(), [&](const Change& other) {
        return other.op == op && other.target == spread.source && other.node == spread.node;
      });
    };
    const auto drawn = at_source(Change::Op::kSpread);
    if (drawn == clause.changes.end() || at_source(Change::Op::kDelink) == clause.changes.end()) return;
    const std::string& name = tree_[spread.node].name;
    Add(drawn->span, "drawing '" + name + "' to an item in place of what the rule spreads from there is",
        "give it a copy: set X." + name + " as Y." + name);
  }

  // The nodes that the item gets, if it has not got them already.
  static std::vector<NodeId> NodesGiven(const Change& change) {
    std::vector<NodeId> nodes;
    switch (change.op) {
      case Change::Op::kSpread:
      case Change::Op::kSetAs:
      case Change::Op::kFillAs:
      case Change::Op::kSetLiteral:
      case Change::Op::kMerge:
        nodes.push_back(change.node);
        break;
      case Change::Op::kSet:
      case Change::Op::kFill:
        for (const Setting& setting : change.settings) {
          if (!setting.values.empty() || setting.variable >= 0) nodes.push_back(setting.node);
        }
        break;
      case Change::Op::kDelink:
      case Change::Op::kInsert:
      case Change::Op::kDelete:
      case Change::Op::kLengthen:
      case Change::Op::kShorten:
        break;
    }
    return nodes;
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
  lister.VisitClause(rule, rule);
  for (const Clause& clause : rule.otherwise) lister.VisitClause(rule, clause);
  lister.VisitClausesTogether(rule, name);
  return lister.Take();
}

}  // namespace tiersmith
