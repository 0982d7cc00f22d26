// What a pattern asks of one slot.
#pragma once

#include <cstdint>
#include <vector>

namespace tiersmith {

using NodeId = std::uint16_t;
// Value of an instance. Class nodes and bare features: 0. Binary: 0 is minus, 1 is plus.
// Many-valued: the position in TreeNode::values.
using Value = std::uint8_t;

struct FeatureTest {
  enum class Kind { kBears, kLacks, kHasValue, kLacksValue };
  Kind kind = Kind::kBears;
  NodeId node = 0;
  Value value = 0;
};

// A slot without a root satisfies only kEmpty (alone or through kOr, kAnd); kNot of anything is false of it.
// A feature test on a contour is true if any part satisfies it.
struct SlotTest {
  enum class Op { kAny, kEmpty, kBundle, kLiteral, kAnd, kOr, kNot };
  Op op = Op::kAny;
  std::vector<FeatureTest> bundle;  // kBundle: all must hold
  int literal = -1;                 // kLiteral: index into Grammar::literals
  std::vector<SlotTest> args;       // kAnd, kOr: 2 or more; kNot: 1
};

}  // namespace tiersmith
