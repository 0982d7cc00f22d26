// `complete`: what the spelling of a root adds is written into the graph.
//
// Where `omit { -voice in [-son] }`, the tree of d without its voice is spelled t: t's -voice is hung in it. In /nd/
// with one Coronal that lacks ±anterior, and n, d spelled as segments that differ there, each root gets a Coronal of its
// own; what would be completed alike stays one instance. A root inside a span of what it would get stays as it is.
// Tested by tests/unit/graph/graph_rules_test.cc.
#include <map>
#include <utility>

#include "graph/apply.h"
#include "graph/matching.h"
#include "graph/notes.h"
#include "model/content.h"

namespace tiersmith::graph {
namespace {

class Completing {
 public:
  Completing(const Grammar& grammar, const Form& form, bool notes)
      : grammar_(grammar), notes_(notes), before_(form, grammar.tree), view_(grammar, before_), after_(before_) {}

  Result Run() {
    for (int slot = 0; slot < view_.size(); ++slot) Decide(slot);
    for (int slot = 0; slot < view_.size(); ++slot) {
      const InstanceId root = view_.root(slot);
      if (root != kNone) after_.SetList(view_.slot(slot), kRootNode, {Complete(root, full_.at(root))});
    }
    result_.form = after_.ToForm();
    return std::move(result_);
  }

 private:
  // What the slot's root is to be.
  void Decide(int slot) {
    const InstanceId root = view_.root(slot);
    if (root == kNone || full_.count(root) != 0) return;
    FeatureTree tree = before_.Content(root);
    const int symbol = grammar_.inventory.Spell(tree).symbol;
    const FeatureTree* full = symbol < 0 ? nullptr : &grammar_.inventory.symbols[static_cast<std::size_t>(symbol)].full;
    if (full == nullptr || *full == tree) {
      full_.emplace(root, std::move(tree));
      return;
    }
    Graph alone = before_;
    AddMissing(alone, root, *full);
    if (alone.Crosses()) {
      ++result_.blocked["crossing"];
      if (notes_) {
        result_.notes.blocked.push_back("blocked at " + NameOfSlot(view_, slot) +
                                        ": a line would cross another on the tier of " +
                                        grammar_.tree[*alone.CrossedTier()].name);
      }
      full_.emplace(root, std::move(tree));
      return;
    }
    ++result_.changed;
    if (notes_) {
      int steps = 0;
      result_.notes.changes.push_back(NameOfSlot(view_, slot) + " completed with [" +
                                      Difference(grammar_.tree, tree, *full, &steps) + "]");
    }
    full_.emplace(root, *full);
  }

  // Walks what an instance bears beside what it is to bear: `both` for what is there, `missing` for the rest.
  template <typename Both, typename Missing>
  void Walk(InstanceId id, const FeatureTree& full, const Both& both, const Missing& missing) {
    const IdList daughters = before_[id].daughters;
    std::size_t next = 0;
    for (const FeatureTree& daughter : full.daughters) {
      if (next < daughters.size() && before_[daughters[next]].node == daughter.node) {
        both(daughters[next++], daughter);
      } else {
        missing(daughter);
      }
    }
  }

  // In place, for whoever holds it.
  void AddMissing(Graph& graph, InstanceId id, const FeatureTree& full) {
    IdList daughters;
    Walk(
        id, full,
        [&](InstanceId there, const FeatureTree& daughter) {
          AddMissing(graph, there, daughter);
          daughters.push_back(there);
        },
        [&](const FeatureTree& daughter) { daughters.push_back(graph.AddContent(daughter)); });
    graph.nodes[id].daughters = daughters;
  }

  // The instance that is to stand for `id`, with this content: the one before, if it is to be the same; else a new one.
  InstanceId Complete(InstanceId id, const FeatureTree& full) {
    const auto known = last_.find(id);
    if (known != last_.end() && *known->second.first == full) return known->second.second;
    const InstanceId mine = known == last_.end() ? id : after_.Add(full.node, full.value);
    last_[id] = {&full, mine};
    IdList daughters;
    Walk(
        id, full,
        [&](InstanceId there, const FeatureTree& daughter) { daughters.push_back(Complete(there, daughter)); },
        [&](const FeatureTree& daughter) { daughters.push_back(after_.AddContent(daughter)); });
    after_.nodes[mine].daughters = daughters;
    return mine;
  }

  const Grammar& grammar_;
  const bool notes_;
  const Graph before_;
  const View view_;
  Graph after_;
  std::map<InstanceId, FeatureTree> full_;                                // per root
  std::map<InstanceId, std::pair<const FeatureTree*, InstanceId>> last_;  // what stands for it on the left
  Result result_;
};

}  // namespace

Result Completed(const Grammar& grammar, const Form& form, bool notes) {
  return Completing(grammar, form, notes).Run();
}

}  // namespace tiersmith::graph
