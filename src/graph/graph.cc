// Building, reading and changing the graph (graph.h); plumbing but for Crosses(), which is the ban on
// crossing lines.
#include "graph/graph.h"

#include <algorithm>

namespace tiersmith::graph {
namespace {

using Flags = boost::container::small_vector<char, 96>;

class CrossingWalk {
 public:
  explicit CrossingWalk(const Graph& graph)
      : graph_(graph), seen_(graph.nodes.size(), 0), last_(graph.tree().nodes.size(), kNone) {}

  std::optional<NodeId> Run() {
    for (const FormItem& item : graph_.items) {
      if (item.kind == FormItem::Kind::kSlot) Mother(item.instance);
      if (item.kind == FormItem::Kind::kFloat) Borne(item.instance);
    }
    return crossed_;
  }

 private:
  void Mother(InstanceId mother) {
    for (InstanceId daughter : graph_[mother].daughters) Borne(daughter);
  }

  void Borne(InstanceId id) {
    InstanceId& last = last_[graph_[id].node];
    if (last == id) return;  // the same stretch goes on
    if (seen_[id]) {
      if (!crossed_) crossed_ = graph_[id].node;  // a second stretch
      return;
    }
    last = id;
    seen_[id] = 1;
    Mother(id);
  }

  const Graph& graph_;
  Flags seen_;
  boost::container::small_vector<InstanceId, 48> last_;  // per kind, the instance written last
  std::optional<NodeId> crossed_;
};

class PruneWalk {
 public:
  explicit PruneWalk(Graph& graph) : graph_(graph), seen_(graph.nodes.size(), 0) {}

  void Under(InstanceId id) {
    if (seen_[id]) return;
    seen_[id] = 1;
    IdList& daughters = graph_.nodes[id].daughters;
    for (InstanceId daughter : daughters) Under(daughter);
    daughters.erase(std::remove_if(daughters.begin(), daughters.end(), [this](InstanceId d) { return Bare(d); }),
                    daughters.end());
  }

 private:
  bool Bare(InstanceId id) const {
    const Node& node = graph_[id];
    const TreeNode& kind = graph_.tree()[node.node];
    return kind.type == TreeNode::Type::kClass && node.node > kRootNode && !kind.standing && node.daughters.empty();
  }

  Graph& graph_;
  Flags seen_;
};

class Numbering {
 public:
  explicit Numbering(const Graph& graph) : graph_(graph), number_(graph.nodes.size(), kNone) {
    form_.instances.reserve(graph.nodes.size());
    form_.items.reserve(graph.items.size());
  }

  Form Run() {
    for (FormItem item : graph_.items) {
      const bool boundary = item.kind == FormItem::Kind::kBoundary;
      item.instance = boundary ? 0 : Number(item.instance);
      if (!boundary) item.boundary = Boundary::kNone;
      form_.items.push_back(item);
    }
    return std::move(form_);
  }

 private:
  InstanceId Number(InstanceId id) {
    if (number_[id] != kNone) return number_[id];
    const InstanceId mine = static_cast<InstanceId>(form_.instances.size());
    number_[id] = mine;
    const Node& node = graph_[id];
    form_.instances.push_back({node.node, node.value, {}});
    const std::size_t count = node.daughters.size();
    if (count == 0) return mine;
    std::vector<InstanceId> daughters(count);
    for (std::size_t i = 0; i < count; ++i) daughters[i] = Number(node.daughters[i]);
    form_.instances[mine].daughters = std::move(daughters);
    return mine;
  }

  const Graph& graph_;
  boost::container::small_vector<InstanceId, 96> number_;
  Form form_;
};

void CollectTier(const Graph& graph, InstanceId id, NodeId node, std::vector<InstanceId>* tier) {
  if (graph[id].node == node) {
    if (tier->empty() || tier->back() != id) tier->push_back(id);
    return;
  }
  for (InstanceId daughter : graph[id].daughters) CollectTier(graph, daughter, node, tier);
}

int RankUnder(const Tree& tree, NodeId mother, NodeId node) {
  const std::vector<NodeId>& daughters = tree[mother].daughters;
  return static_cast<int>(std::find(daughters.begin(), daughters.end(), node) - daughters.begin());
}

}  // namespace

Graph::Graph(const Form& form, const Tree& tree) : items(form.items), tree_(&tree) {
  nodes.reserve(form.instances.size() + 16);
  for (const Instance& instance : form.instances) {
    nodes.emplace_back();
    nodes.back().node = instance.node;
    nodes.back().value = instance.value;
    nodes.back().daughters.assign(instance.daughters.begin(), instance.daughters.end());
  }
}

Form Graph::ToForm() const { return Numbering(*this).Run(); }

IdList Graph::ListOf(InstanceId mother, NodeId node) const {
  IdList list;
  for (InstanceId daughter : nodes[mother].daughters) {
    if (nodes[daughter].node == node) list.push_back(daughter);
  }
  return list;
}

InstanceId Graph::FindUnder(InstanceId slot, NodeId node) const {
  if (node == kSlotNode) return slot;
  const InstanceId mother = FindUnder(slot, (*tree_)[node].mother);
  if (mother == kNone) return kNone;
  for (InstanceId daughter : nodes[mother].daughters) {
    if (nodes[daughter].node == node) return daughter;
  }
  return kNone;
}

IdList Graph::AllUnder(InstanceId slot, NodeId node) const {
  if (node == kSlotNode) return {slot};
  IdList list;
  for (InstanceId mother : AllUnder(slot, (*tree_)[node].mother)) {
    for (InstanceId daughter : nodes[mother].daughters) {
      if (nodes[daughter].node == node) list.push_back(daughter);
    }
  }
  return list;
}

bool Graph::Holds(InstanceId above, InstanceId id) const {
  if (above == id) return true;
  for (InstanceId daughter : nodes[above].daughters) {
    if (Holds(daughter, id)) return true;
  }
  return false;
}

bool Graph::Equal(InstanceId a, InstanceId b) const {
  if (a == b) return true;
  const Node& x = nodes[a];
  const Node& y = nodes[b];
  if (x.node != y.node || x.value != y.value || x.daughters.size() != y.daughters.size()) return false;
  for (std::size_t i = 0; i < x.daughters.size(); ++i) {
    if (!Equal(x.daughters[i], y.daughters[i])) return false;
  }
  return true;
}

FeatureTree Graph::Content(InstanceId id) const {
  FeatureTree tree;
  tree.node = nodes[id].node;
  tree.value = nodes[id].value;
  tree.daughters.reserve(nodes[id].daughters.size());
  for (InstanceId daughter : nodes[id].daughters) tree.daughters.push_back(Content(daughter));
  return tree;
}

InstanceId Graph::Add(NodeId node, Value value) {
  nodes.emplace_back();
  nodes.back().node = node;
  nodes.back().value = value;
  return static_cast<InstanceId>(nodes.size() - 1);
}

InstanceId Graph::AddContent(const FeatureTree& content) {
  const InstanceId id = Add(content.node, content.value);
  for (const FeatureTree& daughter : content.daughters) {
    const InstanceId added = AddContent(daughter);
    nodes[id].daughters.push_back(added);
  }
  return id;
}

void Graph::SetList(InstanceId mother, NodeId node, const IdList& list) {
  IdList& daughters = nodes[mother].daughters;
  daughters.erase(
      std::remove_if(daughters.begin(), daughters.end(), [&](InstanceId d) { return nodes[d].node == node; }),
      daughters.end());
  const NodeId kind = nodes[mother].node;
  const int rank = RankUnder(*tree_, kind, node);
  auto place = std::find_if(daughters.begin(), daughters.end(),
                            [&](InstanceId d) { return RankUnder(*tree_, kind, nodes[d].node) > rank; });
  daughters.insert(place, list.begin(), list.end());
}

// Of equal content: what hangs under them is one, pair by pair.
void Graph::Merge(InstanceId kept, InstanceId gone) {
  if (kept == gone) return;
  const IdList under_kept = nodes[kept].daughters, under_gone = nodes[gone].daughters;
  for (std::size_t i = 0; i < under_gone.size(); ++i) Merge(under_kept[i], under_gone[i]);
  for (Node& node : nodes) {
    std::replace(node.daughters.begin(), node.daughters.end(), gone, kept);
    node.daughters.erase(std::unique(node.daughters.begin(), node.daughters.end()), node.daughters.end());
  }
}

std::vector<InstanceId> Graph::TierOf(NodeId node) const {
  std::vector<InstanceId> tier;
  for (const FormItem& item : items) {
    if (item.kind != FormItem::Kind::kBoundary) CollectTier(*this, item.instance, node, &tier);
  }
  return tier;
}

std::optional<NodeId> Graph::CrossedTier() const { return CrossingWalk(*this).Run(); }

void Graph::Prune() {
  PruneWalk walk(*this);
  for (const FormItem& item : items) {
    if (item.kind != FormItem::Kind::kBoundary) walk.Under(item.instance);
  }
}

}  // namespace tiersmith::graph
