// `fuse N within morpheme`: neighbours on N's tier with equal content are read as one instance.
//
// /anta/ with `fuse Place within morpheme`: n's and t's Place are one from the start; in /an-ta/ each is its own.
// Tested by tests/unit/graph/graph_rules_test.cc.
#include <algorithm>

#include "graph/graph.h"
#include "graph/interpreter.h"
#include "graph/matching.h"

namespace tiersmith {
namespace graph {
namespace {

// An instance with the slots that bear it, first and last.
struct Stretch {
  InstanceId id = kNone;
  int first = -1, last = -1;  // ordinals; -1: it floats
};

std::vector<Stretch> StretchesOf(const View& view, NodeId node) {
  std::vector<Stretch> stretches;
  for (InstanceId id : view.graph().TierOf(node)) {
    Stretch stretch{id};
    for (int slot = 0; slot < view.size(); ++slot) {
      if (!view.graph().Holds(view.slot(slot), id)) continue;
      if (stretch.first < 0) stretch.first = slot;
      stretch.last = slot;
    }
    stretches.push_back(stretch);
  }
  return stretches;
}

std::vector<Way> MatchesOf(const View& view, const Fusion& fusion) {
  if (!fusion.in) return {};
  Rule rule;  // a pattern and no changes; inside the word
  rule.where = *fusion.in;
  return FindWays(view, rule, rule, /*with_slots=*/true);
}

void Fuse(const Grammar& grammar, const Fusion& fusion, Graph* graph) {
  const Graph before = *graph;
  const View view(grammar, before);
  const std::vector<Way> ways = MatchesOf(view, fusion);
  const auto inside = [&](const Stretch& a, const Stretch& b) {
    return !fusion.in || std::any_of(ways.begin(), ways.end(), [&](const Way& way) {
      return way.slots.front() <= a.last && way.slots.back() >= b.first;
    });
  };
  const std::vector<Stretch> stretches = StretchesOf(view, fusion.node);
  InstanceId kept = stretches.empty() ? kNone : stretches.front().id;
  for (std::size_t i = 1; i < stretches.size(); ++i) {
    const Stretch &a = stretches[i - 1], &b = stretches[i];
    const bool one_morpheme =
        a.last >= 0 && b.first >= 0 &&
        view.StretchOf(a.last, Boundary::kMorpheme) == view.StretchOf(b.first, Boundary::kMorpheme);
    if (one_morpheme && before.Equal(a.id, b.id) && inside(a, b)) {
      graph->Merge(kept, b.id);
    } else {
      kept = b.id;
    }
  }
}

}  // namespace
}  // namespace graph

Form Fused(const Grammar& grammar, const Form& typed) {
  graph::Graph graph(typed, grammar.tree);
  for (const Fusion& fusion : grammar.fusions) graph::Fuse(grammar, fusion, &graph);
  return graph.ToForm();
}

}  // namespace tiersmith
