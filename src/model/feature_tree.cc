// The content of an instance as a plain value: order and hash.
// Tested by tests/unit/model/form_test.cc.
#include "model/feature_tree.h"

#include <cstdint>

namespace tiersmith {

bool operator<(const FeatureTree& a, const FeatureTree& b) {
  if (a.node != b.node) return a.node < b.node;
  if (a.value != b.value) return a.value < b.value;
  return a.daughters < b.daughters;
}

namespace {

std::uint64_t Mix(std::uint64_t h, std::uint64_t x) {
  h ^= x;
  h *= 0x9E3779B97F4A7C15ull;
  return h ^ (h >> 29);
}

std::uint64_t MixTree(std::uint64_t h, const FeatureTree& tree) {
  h = Mix(h, (std::uint64_t{tree.node} << 16) | (std::uint64_t{tree.value} << 8) | 1);
  for (const FeatureTree& daughter : tree.daughters) h = MixTree(h, daughter);
  // The closing sign keeps [a [b]] and [a b] apart.
  return Mix(h, 2);
}

}  // namespace

std::size_t Hash(const FeatureTree& tree) { return static_cast<std::size_t>(MixTree(0xCBF29CE484222325ull, tree)); }

}  // namespace tiersmith
