// A derivation: the rules in order, on all forms that come out of the optional ones.
//
// Each form that may stand after a rule is followed once, with the probabilities of all ways to it summed; the step
// that the likeliest of them took leads back, so that the steps told are those to the likeliest surface.
// Tested by tests/unit/graph/graph_changes_test.cc and graph_optional_test.cc.
#include <algorithm>
#include <string>
#include <utility>
#include <vector>

#include "base/limits.h"
#include "graph/apply.h"

namespace tiersmith {
namespace graph {
namespace {

Form WithoutEmptySlots(const Form& form) {
  Form kept = form;
  kept.items.erase(std::remove_if(kept.items.begin(), kept.items.end(),
                                  [&](const FormItem& item) {
                                    return item.kind == FormItem::Kind::kSlot && RootOf(form, item) < 0;
                                  }),
                   kept.items.end());
  return Canonical(kept);
}

class Follower {
 public:
  Follower(const Grammar& grammar, const Form& underlying, bool notes) : grammar_(grammar), notes_(notes) {
    Result start;
    start.form = grammar.fusions.empty() ? Canonical(underlying) : Fused(grammar, underlying);
    derivation_.underlying = start.form;
    levels_.reserve(grammar.rules.size() + 1);
    levels_.push_back({});
    levels_.back().push_back(std::move(start));
  }

  Derivation Run() {
    for (const Rule& rule : grammar_.rules) {
      Follow(rule);
      if (derivation_.problem.empty()) continue;
      derivation_.surface = WithoutEmptySlots(levels_.back().front().form);
      Tell(0);
      return std::move(derivation_);
    }
    std::vector<Result> surfaces;
    for (const Result& last : levels_.back()) {
      surfaces.emplace_back();
      surfaces.back().form = WithoutEmptySlots(last.form);
      surfaces.back().probability = last.probability;
      surfaces.back().likeliest = last.likeliest;
      surfaces.back().from = surfaces.size() - 1;
    }
    if (surfaces.size() > 1) SumEqualForms(&surfaces);
    for (const Result& surface : surfaces) derivation_.outcomes.push_back({surface.form, surface.probability});
    derivation_.surface = std::move(surfaces.front().form);
    Tell(surfaces.front().from);
    return std::move(derivation_);
  }

 private:
  // All forms that this rule makes of those before it; of the first with a problem, that alone.
  void Follow(const Rule& rule) {
    std::vector<Result> after;
    const std::vector<Result>& before = levels_.back();
    for (std::size_t from = 0; from < before.size() && derivation_.problem.empty(); ++from) {
      Results results = ApplyAllWays(grammar_, rule, before[from].form, notes_);
      if (results.HasProblem()) {
        derivation_.problem = ProblemOf(rule, results);
        derivation_.too_many = !results.too_many.empty();
        after.clear();
      }
      for (Result& result : results.results) {
        result.probability *= before[from].probability;
        result.likeliest *= before[from].likeliest;
        result.from = from;
        after.push_back(std::move(result));
      }
    }
    if (after.size() > 1) SumEqualForms(&after);
    if (after.size() > Limits().outcomes) {
      derivation_.problem = "up to rule '" + rule.name + "', optional rules may come out in more than " +
                            std::to_string(Limits().outcomes) + " ways";
      derivation_.too_many = true;
    }
    levels_.push_back(std::move(after));
  }

  static std::string ProblemOf(const Rule& rule, const Results& results) {
    if (!results.ambiguous.empty()) return "rule '" + rule.name + "' is ambiguous here: " + results.ambiguous;
    if (!results.reaches.empty()) return "rule '" + rule.name + "' changes one root at a time: " + results.reaches;
    return "rule '" + rule.name + "': " + results.too_many;
  }

  // The steps that led to this one of the last forms.
  void Tell(std::size_t last) {
    derivation_.steps.resize(levels_.size() - 1);
    for (std::size_t level = levels_.size() - 1; level > 0; --level) {
      Result& result = levels_[level][last];
      Step& step = derivation_.steps[level - 1];
      step.rule = static_cast<int>(level) - 1;
      step.applied = result.changed > 0;
      step.notes = std::move(result.notes);
      step.after = std::move(result.form);
      last = result.from;
    }
  }

  const Grammar& grammar_;
  const bool notes_;
  Derivation derivation_;
  std::vector<std::vector<Result>> levels_;  // after each rule; first the underlying form
};

}  // namespace
}  // namespace graph

Application ApplyRule(const Grammar& grammar, const Rule& rule, const Form& form, bool notes) {
  graph::Results results = graph::ApplyAllWays(grammar, rule, form, notes);
  Application application;
  for (const graph::Result& result : results.results) {
    application.outcomes.push_back({result.form, result.probability});
  }
  graph::Result& likeliest = results.results.front();
  application.form = std::move(likeliest.form);
  application.changed = likeliest.changed;
  application.blocked = std::move(likeliest.blocked);
  application.notes = std::move(likeliest.notes);
  application.ambiguous = std::move(results.ambiguous);
  application.reaches = std::move(results.reaches);
  application.too_many = std::move(results.too_many);
  return application;
}

Derivation Derive(const Grammar& grammar, const Form& underlying, bool notes) {
  return graph::Follower(grammar, underlying, notes).Run();
}

}  // namespace tiersmith
