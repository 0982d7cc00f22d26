// One application of a rule, at once or in a sweep, and a derivation.
//
// Ways of matching are found by trying (matching.h), each match is judged alone on the form before (requests.h), gaps
// keep only the nearest, and what is left is carried out together. With `delink N.Place spread C.Place to N` on /anpa/:
// one match, n's Place cut and p's Place drawn to n, /ampa/ with one Place under two roots.
// An iterative rule does the same at each root in turn, on the form as the sweep has left it.
// Not here: optional rules, cyclic application, prosody.
// Tested by tests/unit/graph/, and against the compiler by tests/agreement/.
#include <algorithm>
#include <memory>

#include "graph/interpreter.h"
#include "graph/matching.h"
#include "graph/notes.h"
#include "graph/requests.h"

namespace tiersmith {
namespace graph {
namespace {

enum class Failure { kNone, kCapacity, kCrossing };

const char* NameOf(Failure failure) {
  switch (failure) {
    case Failure::kNone:
      return "";
    case Failure::kCapacity:
      return "capacity";
    case Failure::kCrossing:
      return "crossing";
  }
  return "";
}

// Two ways with the same slots for the labels are one match.
struct Match {
  LabelSlots labels;
  bool judged = false;  // the rest is known; judging costs, and a sweep asks for few
  Failure failure = Failure::kNone;
  bool changes = false;  // alone, does it change anything
};

class Matches {
 public:
  Matches(const View& view, const Rule& rule) : view_(view), rule_(rule) {
    const std::vector<Way> ways = FindWays(view, rule);
    boost::container::small_vector<int, 16> match_of;
    for (const Way& way : ways) match_of.push_back(Find(way.labels));
    // A match stands if some way of it has no nearer slot in any of its gaps.
    boost::container::small_vector<char, 16> nearest(matches_.size(), 0);
    for (std::size_t i = 0; i < ways.size(); ++i) {
      if (!nearest[match_of[i]]) nearest[match_of[i]] = !HasNearer(ways, match_of, ways[i]);
    }
    std::size_t kept = 0;
    for (std::size_t i = 0; i < matches_.size(); ++i) {
      if (!nearest[i]) continue;
      if (kept != i) matches_[kept] = matches_[i];
      ++kept;
    }
    matches_.resize(kept);
  }

  std::size_t size() const { return matches_.size(); }
  const LabelSlots& labels(std::size_t i) const { return matches_[i].labels; }
  const Match& Judged(std::size_t i) {
    Match& match = matches_[i];
    if (!match.judged) Judge(&match);
    return match;
  }

 private:
  int Find(const LabelSlots& labels) {
    if (matches_.empty() || matches_.back().labels != labels) {  // the ways of one match stand together
      matches_.emplace_back();
      matches_.back().labels = labels;
    }
    return static_cast<int>(matches_.size()) - 1;
  }

  void Judge(Match* match) const {
    match->judged = true;
    if (WithoutRoom(view_, rule_, match->labels) != nullptr) {
      match->failure = Failure::kCapacity;
      return;
    }
    Requests alone(view_, rule_);
    alone.Add(match->labels);
    match->changes = alone.Changes();
    if (match->changes && alone.CrossesAlone()) match->failure = Failure::kCrossing;
  }

  // In some gap with a changed end: would the rule apply at a slot nearer to the other end?
  bool HasNearer(const std::vector<Way>& ways, const boost::container::small_vector<int, 16>& match_of,
                 const Way& way) {
    for (const Way::Gap& gap : way.gaps) {
      if (gap.item->tier || (!gap.left_changes && !gap.right_changes)) continue;
      for (std::size_t i = 0; i < ways.size(); ++i) {
        const auto nearer = [&](const Way::Gap& other) { return IsNearer(other, gap); };
        if (std::any_of(ways[i].gaps.begin(), ways[i].gaps.end(), nearer) &&
            Judged(match_of[i]).failure == Failure::kNone) {
          return true;
        }
      }
    }
    return false;
  }

  static bool IsNearer(const Way::Gap& other, const Way::Gap& gap) {
    if (other.item != gap.item) return false;
    const auto inside = [&](int slot) { return slot > gap.left && slot < gap.right; };
    return (gap.left_changes && other.right == gap.right && inside(other.left)) ||
           (gap.right_changes && other.left == gap.left && inside(other.right));
  }

  const View& view_;
  const Rule& rule_;
  std::vector<Match> matches_;
};

class Run {
 public:
  Run(const Grammar& grammar, const Rule& rule, const Form& form, bool notes)
      : grammar_(grammar), rule_(rule), form_(form), notes_(notes), graph_(form, grammar.tree) {}

  Application AtOnce() {
    const View view(grammar_, graph_);
    Matches matches(view, rule_);
    Apply(view, matches, nullptr);
    return Finished();
  }

  Application Sweep(bool rightward) {
    for (const Visit& visit : Visits(rightward)) {
      if (!Problem().empty()) break;
      if (view_ == nullptr) {
        view_ = std::make_unique<View>(grammar_, graph_);
        matches_ = std::make_unique<Matches>(*view_, rule_);
      }
      if (matches_->size() == 0) break;  // and so it will stay
      if (Apply(*view_, *matches_, &visit)) {
        matches_.reset();
        view_.reset();
      }
    }
    return Finished();
  }

 private:
  // A root with its slots, or one slot without a root.
  struct Visit {
    InstanceId root = kNone;
    InstanceId slot = kNone;
  };

  std::vector<Visit> Visits(bool rightward) const {
    std::vector<Visit> visits;
    const auto add = [&](const FormItem& item) {
      if (item.kind != FormItem::Kind::kSlot) return;
      const InstanceId root = graph_.FindUnder(item.instance, kRootNode);
      const bool known = root != kNone && std::any_of(visits.begin(), visits.end(),
                                                      [&](const Visit& visit) { return visit.root == root; });
      if (!known) visits.push_back({root, item.instance});
    };
    if (rightward) {
      std::for_each(graph_.items.begin(), graph_.items.end(), add);
    } else {
      std::for_each(graph_.items.rbegin(), graph_.items.rend(), add);
    }
    return visits;
  }

  bool IsAt(const View& view, const LabelSlots& labels, const Visit& visit) const {
    const int slot = labels[rule_.changes.front().target];
    if (slot < 0) return false;
    return visit.root == kNone ? view.slot(slot) == visit.slot : view.root(slot) == visit.root;
  }

  // Carries out the matches together (those at the visit, if there is one). True if the form changed.
  bool Apply(const View& view, Matches& matches, const Visit* visit) {
    Requests requests(view, rule_);
    std::vector<const Match*> changing;
    for (std::size_t i = 0; i < matches.size(); ++i) {
      if (visit != nullptr && !IsAt(view, matches.labels(i), *visit)) continue;
      const Match& match = matches.Judged(i);
      if (match.failure != Failure::kNone) {
        ++result_.blocked[NameOf(match.failure)];
        if (notes_) NoteBlocked(view, rule_, match.labels, NameOf(match.failure), &result_.notes);
        continue;
      }
      requests.Add(match.labels);
      if (match.changes) changing.push_back(&match);
    }
    // One may undo another: what one match cuts, another may ask for.
    if (changing.empty() || !requests.Changes()) return false;
    result_.changed += static_cast<int>(changing.size());
    if (notes_) {
      for (const Match* match : changing) NoteChanges(view, rule_, match->labels, &result_.notes);
    }
    result_.ambiguous = requests.Ambiguity();
    if (visit != nullptr) result_.reaches = Reached(view, requests, *visit);
    if (!Problem().empty()) return false;
    Graph after = requests.Result();
    graph_ = std::move(after);
    return true;
  }

  // Another root that holds, directly or from above, a mother that something happens to.
  std::string Reached(const View& view, const Requests& requests, const Visit& visit) const {
    for (InstanceId mother : requests.MothersChanged()) {
      for (int slot = 0; slot < view.size(); ++slot) {
        const InstanceId root = view.root(slot);
        if (root == kNone || root == visit.root) continue;
        if (view.graph().Holds(root, mother)) {
          return "the change reaches " + NameOfSlot(view, slot) + ", which shares " +
                 grammar_.tree[view.graph()[mother].node].name;
        }
      }
    }
    return "";
  }

  std::string Problem() const { return result_.ambiguous.empty() ? result_.reaches : result_.ambiguous; }

  Application Finished() {
    if (!Problem().empty()) {
      result_.form = form_;
      result_.changed = 0;
    } else {
      result_.form = graph_.ToForm();
    }
    return std::move(result_);
  }

  const Grammar& grammar_;
  const Rule& rule_;
  const Form& form_;
  const bool notes_;
  Graph graph_;
  std::unique_ptr<View> view_;        // of the form as it is now
  std::unique_ptr<Matches> matches_;  // on it
  Application result_;
};

Form WithoutEmptySlots(const Form& form) {
  Form kept = form;
  kept.items.erase(std::remove_if(kept.items.begin(), kept.items.end(),
                                  [&](const FormItem& item) {
                                    return item.kind == FormItem::Kind::kSlot && RootOf(form, item) < 0;
                                  }),
                   kept.items.end());
  return Canonical(kept);
}

}  // namespace
}  // namespace graph

Application ApplyRule(const Grammar& grammar, const Rule& rule, const Form& form, bool notes) {
  graph::Run run(grammar, rule, form, notes);
  switch (rule.mode) {
    case Rule::Mode::kAtOnce:
      return run.AtOnce();
    case Rule::Mode::kRightward:
      return run.Sweep(true);
    case Rule::Mode::kLeftward:
      return run.Sweep(false);
  }
  return {};
}

Derivation Derive(const Grammar& grammar, const Form& underlying, bool notes) {
  Derivation derivation;
  derivation.underlying = Canonical(underlying);
  const Form* current = &derivation.underlying;
  derivation.steps.reserve(grammar.rules.size());
  for (std::size_t i = 0; i < grammar.rules.size(); ++i) {
    const Rule& rule = grammar.rules[i];
    Application application = ApplyRule(grammar, rule, *current, notes);
    if (!application.ambiguous.empty()) {
      derivation.problem = "rule '" + rule.name + "' is ambiguous here: " + application.ambiguous;
    } else if (!application.reaches.empty()) {
      derivation.problem = "rule '" + rule.name + "' changes one root at a time: " + application.reaches;
    }
    Step step;
    step.rule = static_cast<int>(i);
    step.after = std::move(application.form);
    step.applied = application.changed > 0;
    step.notes = std::move(application.notes);
    derivation.steps.push_back(std::move(step));
    current = &derivation.steps.back().after;
    if (!derivation.problem.empty()) break;
  }
  derivation.surface = graph::WithoutEmptySlots(*current);
  return derivation;
}

}  // namespace tiersmith
