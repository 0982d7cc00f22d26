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
  enum class Kind {
    kBears,
    kLacks,
    kHasValue,
    kLacksValue,
    kAgrees,      // its value of `node` (two-valued: - is 0, + is 1; bare: not there is 0, there is 1; class node: its
                  // content) is that of the variable; where it bears none (bare aside), it fails
    kDiffers,     // its value of the two-valued `node` is the other one
    kShared,      // an N that it bears is borne by another slot too, by its own line or through a node above
    kUnshared,    // it bears N, and none of them is borne by another slot
    kLong,        // its root has more than one slot
    kShort,       // its root has this slot only
    kHalfFirst,   // the first slot of a long root
    kHalfSecond,  // a further slot of a long root
  };
  // Of a contour: may any part pass, or is the first (last) one asked? With kHasValue, kLacksValue, kAgrees, kDiffers.
  enum class Part { kAny, kFirst, kLast };
  enum class Side { kEither, kLeft, kRight };
  Kind kind = Kind::kBears;
  NodeId node = 0;  // kLong to kHalfSecond: root
  Value value = 0;
  Part part = Part::kAny;
  Side side = Side::kEither;  // kShared, kUnshared: where the other slot stands
  int variable = -1;          // kAgrees, kDiffers: index into Clause::variables
};

// A slot without a root satisfies only kEmpty (alone or through kOr, kAnd); kNot of anything is false of it.
// kAgrees and kDiffers stand in bundles that are not inside kNot or kOr.
struct SlotTest {
  enum class Op { kAny, kEmpty, kBundle, kLiteral, kAnd, kOr, kNot };
  Op op = Op::kAny;
  std::vector<FeatureTest> bundle;  // kBundle: all must hold
  int literal = -1;                 // kLiteral: index into Grammar::literals
  std::vector<SlotTest> args;       // kAnd, kOr: 2 or more; kNot: 1
};

}  // namespace tiersmith
