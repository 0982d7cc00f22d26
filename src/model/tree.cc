// The feature tree: finding nodes by name, dominance, names of values.
// Tested by tests/unit/model/form_test.cc and check_test.cc.
#include "model/tree.h"

namespace tiersmith {

std::optional<NodeId> Tree::Find(std::string_view name) const {
  for (std::size_t i = 0; i < nodes.size(); ++i) {
    if (nodes[i].name == name) return static_cast<NodeId>(i);
  }
  return std::nullopt;
}

bool Tree::Dominates(NodeId above, NodeId node) const {
  while (node != above) {
    if (node == kSlotNode) return false;
    node = nodes[node].mother;
  }
  return true;
}

std::string Tree::ValueName(NodeId node, Value value) const {
  const TreeNode& kind = nodes[node];
  switch (kind.type) {
    case TreeNode::Type::kClass:
    case TreeNode::Type::kBare:
      return kind.name;
    case TreeNode::Type::kBinary:
      return (value != 0 ? "+" : "-") + kind.name;
    case TreeNode::Type::kMany:
      return kind.name + ":" + (value < kind.values.size() ? kind.values[value] : std::to_string(int{value}));
  }
  return kind.name;
}

}  // namespace tiersmith
