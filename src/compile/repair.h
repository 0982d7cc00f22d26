// Keeping link bits right when lists of instances change.
//
// Letters come from right to left, and in each letter the mother's entries from right to left. Per node one memory
// says what the next new entry to the right is: unrelated, the nearest old instance to the right, the
// instance that stood nearest on the left of it before the rule, and so on. In /n n k/, once the second n
// gives up its Place and takes that of k, the first n is no longer linked to the second: the bit that changes sits on a
// letter the rule did not touch.
// Where two mother parts remain one object, the bits under them are implied and only the span's
// right end is looked at.
//
// Tested by tests/agreement/ (every change with sharing).
#pragma once

#include <vector>

#include "compile/build_letter.h"

namespace tiersmith {

class Repair {
 public:
  enum Next : std::int32_t {
    kUnrelated = 0,
    kNearestOld = 1,    // the nearest old N to the right
    kOldToTheLeft = 2,  // the N that was nearest on the left of that entry
    kNewToTheLeft = 3,  // whatever new entry comes next to the left
    kBehindFresh = 4,   // unrelated, with a new N between here and the nearest old one
  };
  // Lines that would cross only if someone further left still holds what an entry to the right took.
  enum Pending : std::int32_t {
    kNothing = 0,
    kOldLeftTaken = 16,     // an entry on the right, not the next one, holds the N that is nearest on the left
    kNearestOldTaken = 32,  // ... holds the nearest old N to the right, which its own bearer gave up
  };
  // Two entries a live node. The first: Next, Pending, and whether the nearest old N to the right is still held by someone (kAliveBit).
  // The second: 1 + what the first was before the node's mother was given up here, or 0: should the next mother to the left be the
  // same object, its list is still to be settled there.
  static constexpr std::int32_t kNextMask = 7, kAliveBit = 8, kPendingMask = 48;
  static constexpr std::size_t kEntries = 2;
  // At the right end of a form: as if an unlinked bearer stood there.
  static constexpr std::int32_t kStart[kEntries] = {kNearestOld | kAliveBit, 0};

  // `iterating_left`: an old N on the left that spans over the letter is also the next new one on the right.
  Repair(const RuleSpace& space, const std::vector<char>& kept_links, bool iterating_left)
      : space_(space), kept_links_(kept_links), iterating_left_(iterating_left) {}

  // Takes the letter as annotated before the change and its parts after it (null: the slot is deleted). Writes the stored link
  // bits into `after` (only for nodes with kept_links) and updates `memory`. False: lines would cross.
  // An inserted letter has nothing before: `before` is then an empty slot, and all parts are fresh. `merges`: the nodes of
  // which the letter's first instance and the nearest one on the left become one.
  bool Letter(const Key& before, WorkPart* after, std::int32_t* memory, const NodeSet* merges = nullptr) const;

 private:
  bool BearsMother(int class_id, NodeId node) const;

  const RuleSpace& space_;
  std::vector<char> kept_links_;  // by live node
  bool iterating_left_;
};

}  // namespace tiersmith
