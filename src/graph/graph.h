// A form as an autosegmental graph that lines can be drawn in and cut from.
//
// The interpreter's own structure: a pool of instances, each with the list of those hanging from it, and the string
// of items above them. In /anta/ with one Place for n and t, two roots list the same Place. The plain value
// (model/form.h) is what goes in and comes out.
// Tested by tests/unit/graph/graph_rulings_test.cc.
#pragma once

#include <boost/container/small_vector.hpp>
#include <cstdint>
#include <optional>
#include <vector>

#include "model/form.h"
#include "model/tree.h"

namespace tiersmith::graph {

inline constexpr InstanceId kNone = static_cast<InstanceId>(-1);

using IdList = boost::container::small_vector<InstanceId, 8>;

struct Node {
  NodeId node = 0;
  Value value = 0;
  IdList daughters;  // in tree order of kinds; contours in their order
};

class Graph {
 public:
  Graph(const Form& form, const Tree& tree);

  // The plain value, instances numbered by first mention; what nothing holds is dropped.
  Form ToForm() const;

  const Tree& tree() const { return *tree_; }
  const Node& operator[](InstanceId id) const { return nodes[id]; }

  // What `mother` bears of `node`, in order.
  IdList ListOf(InstanceId mother, NodeId node) const;
  // The one of `node` that `slot` bears, or kNone (of several: the first). The slot itself for node 0.
  InstanceId FindUnder(InstanceId slot, NodeId node) const;
  // All of `node` that `slot` bears, in order.
  IdList AllUnder(InstanceId slot, NodeId node) const;
  // Is `id` the instance `above` or anywhere under it?
  bool Holds(InstanceId above, InstanceId id) const;
  // Equal value and equal content below.
  bool Equal(InstanceId a, InstanceId b) const;
  FeatureTree Content(InstanceId id) const;

  InstanceId Add(NodeId node, Value value);
  InstanceId AddContent(const FeatureTree& content);
  // Replaces what `mother` bears of `node`.
  void SetList(InstanceId mother, NodeId node, const IdList& list);

  // All holders of `gone` hold `kept`.
  void Merge(InstanceId kept, InstanceId gone);
  // The instances of `node` from left to right, each stretch once; floats stand where they are.
  std::vector<InstanceId> TierOf(NodeId node) const;

  // Do lines cross? On each tier the mothers' lists are written one after the other, each mother once; an
  // instance must stand in one unbroken stretch.
  bool Crosses() const { return CrossedTier().has_value(); }
  std::optional<NodeId> CrossedTier() const;  // the first tier on which they do
  // Takes away class nodes with nothing under them (never a root, never one that stands on its own).
  void Prune();

  std::vector<Node> nodes;
  std::vector<FormItem> items;

 private:
  const Tree* tree_;
};

}  // namespace tiersmith::graph
