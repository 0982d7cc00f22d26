// The feature tree: which node kinds there are, who dominates whom, and what each may bear.
//
// Node 0 is `slot`, node 1 is `root`; mothers come before daughters. A *node* here is a kind
// (Place, back); the things in a form are *instances* of it (model/form.h).
#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "base/diagnostics.h"
#include "model/slot_test.h"

namespace tiersmith {

inline constexpr NodeId kSlotNode = 0;
inline constexpr NodeId kRootNode = 1;

struct TreeNode {
  enum class Type { kClass, kBinary, kBare, kMany };
  std::string name;
  Type type = Type::kClass;
  NodeId mother = 0;                // of slot: slot itself
  std::vector<NodeId> daughters;    // in tree order
  std::vector<std::string> values;  // kMany
  int max = 1;                      // x n: instances one mother may hold, in order
  std::optional<SlotTest> room;     // `in [..]` after x n: who has the room; others hold one
  bool floating = false;            // may stand unlinked
  bool standing = false;            // •: not pruned when bare
  bool abstract_ = false;           // no output may bear it
  Span span;
};

class Tree {
 public:
  std::vector<TreeNode> nodes;

  const TreeNode& operator[](NodeId node) const { return nodes[node]; }
  std::optional<NodeId> Find(std::string_view name) const;
  // True if `above` is `node` or dominates it.
  bool Dominates(NodeId above, NodeId node) const;
  // "+back", "-back", "round", "Tone:H", "Place"
  std::string ValueName(NodeId node, Value value) const;
};

}  // namespace tiersmith
