// The content of one instance and all under it, as a plain value: no identity, no sharing.
#pragma once

#include <cstddef>
#include <vector>

#include "model/slot_test.h"

namespace tiersmith {

// Daughters stand in tree order of their kinds; several of one kind (a contour) in their order.
struct FeatureTree {
  NodeId node = 1;
  Value value = 0;
  std::vector<FeatureTree> daughters;

  friend bool operator==(const FeatureTree& a, const FeatureTree& b) {
    return a.node == b.node && a.value == b.value && a.daughters == b.daughters;
  }
  friend bool operator!=(const FeatureTree& a, const FeatureTree& b) { return !(a == b); }
  friend bool operator<(const FeatureTree& a, const FeatureTree& b);  // any total order
};

std::size_t Hash(const FeatureTree& tree);

}  // namespace tiersmith
