#include "compile/repair.h"

#include <algorithm>

namespace tiersmith {
namespace {

// What became of a letter's old instances of one node.
enum class Old { kNone, kInPlace, kGivenUp, kElsewhere };  // the last: dealt with at another letter that holds them

struct NodeState {
  Old old = Old::kNone;
  bool raw = false;            // the new last entry is the first entry of the next bearer (stored or implied)
  WorkPart* part = nullptr;    // the new entry, for class nodes
  Origin from = Origin::kOwn;  // how `part` came here, inherited downward
};

bool FromRight(Origin origin) { return origin == Origin::kOldRight || origin == Origin::kNewRight; }
bool IsFresh(Origin origin) { return origin == Origin::kFresh || origin == Origin::kFreshJoined; }
bool FromLeft(Origin origin) { return origin == Origin::kOldLeft || origin == Origin::kNewLeft; }

// The memory of one node while one letter's entries go by.
struct Walker {
  explicit Walker(std::int32_t memory)
      : next(memory & Repair::kNextMask),
        pending(memory & Repair::kPendingMask),
        alive((memory & Repair::kAliveBit) != 0) {}
  std::int32_t Memory() const { return next | pending | (alive ? Repair::kAliveBit : 0); }

  std::int32_t next;
  std::int32_t pending;
  bool alive;
  bool crossed = false;
  bool given_away = false;  // what was given up here is held on the right
  bool first_done = false;
  bool bit = false;  // link of the last new entry

  void New(bool linked, std::int32_t then) {
    if (!first_done) bit = linked;
    first_done = true;
    next = then;
  }
  void Kept(bool old_bit) {
    if (pending == Repair::kOldLeftTaken || (pending == Repair::kNearestOldTaken && old_bit)) crossed = true;
    pending = Repair::kNothing;
    New(next == Repair::kNewToTheLeft || next == Repair::kOldToTheLeft || (next == Repair::kNearestOld && old_bit),
        Repair::kNearestOld);
  }
  void GivenUp(bool old_bit) {
    if (pending != Repair::kNothing) {
      const bool goes_on = pending == Repair::kOldLeftTaken || old_bit;
      pending = goes_on ? Repair::kNearestOldTaken : Repair::kNothing;
    }
    if (next == Repair::kNewToTheLeft) return;
    given_away = next == Repair::kOldToTheLeft;
    next = next == Repair::kOldToTheLeft || (next == Repair::kNearestOld && old_bit) ? Repair::kNearestOld
                                                                                     : Repair::kUnrelated;
  }
  void Fresh() {
    if (next == Repair::kOldToTheLeft) pending = Repair::kOldLeftTaken;
    if (given_away && pending == Repair::kNothing) pending = Repair::kNearestOldTaken;
    New(next == Repair::kNewToTheLeft, Repair::kBehindFresh);
  }
  void OldRight() {
    if (alive && (next == Repair::kOldToTheLeft || next == Repair::kBehindFresh)) crossed = true;
    if (pending == Repair::kNearestOldTaken && next != Repair::kNearestOld) crossed = true;
    if (next == Repair::kOldToTheLeft) pending = Repair::kOldLeftTaken;
    New(next == Repair::kNearestOld || next == Repair::kNewToTheLeft, Repair::kNearestOld);
    alive = true;
  }
  void NewRight() { New(true, next); }
  void OldLeft() {
    if (pending == Repair::kOldLeftTaken && next != Repair::kOldToTheLeft) crossed = true;
    New(next == Repair::kOldToTheLeft || next == Repair::kNewToTheLeft, Repair::kOldToTheLeft);
  }
  void NewLeft(bool over) {
    New(next == Repair::kNewToTheLeft || (next == Repair::kNearestOld && over), Repair::kNewToTheLeft);
  }
};

}  // namespace

bool Repair::BearsMother(int class_id, NodeId node) const {
  const NodeId mother = space_.tree()[node].mother;
  return mother != kSlotNode && space_.Of(class_id, mother).count > 0;
}

bool Repair::Letter(const Key& before, WorkPart* after, std::int32_t* memory, const NodeSet* merges) const {
  const Tree& tree = space_.tree();
  std::vector<NodeState> states(space_.live().size());
  std::vector<std::pair<WorkPart*, std::uint32_t>> links;
  bool fine = true;
  for (std::size_t i = 0; i < space_.live().size(); ++i) {
    const NodeId node = space_.live()[i];
    const int mother_index = space_.LiveIndex(tree[node].mother);
    const int bit_index = LinkBit(tree, node);
    NodeState slot;
    slot.old = after == nullptr ? Old::kGivenUp : Old::kInPlace;
    slot.part = after;
    const NodeState& mother = mother_index < 0 ? slot : states[mother_index];
    NodeState& state = states[i];
    std::int32_t& before_loss = memory[kEntries * i + 1];
    if (before_loss != 0 && mother.old != Old::kElsewhere && BearsMother(before[0], node)) {
      if (space_.Marks(before, tree[node].mother) & kToRight) memory[kEntries * i] = before_loss - 1;
      before_loss = 0;
    }
    Walker walker(memory[kEntries * i]);

    const int old_count = space_.Of(before[0], node).count;
    const std::int32_t marks = space_.Marks(before, node);
    const bool old_bit = marks & kObjectRight;
    const bool over = marks & kOver;
    std::vector<WorkPart*> list;
    if (mother.part != nullptr) {
      for (WorkPart& daughter : mother.part->daughters) {
        if (daughter.node == node) list.push_back(&daughter);
      }
    }
    // The entries of a mother that is one object with the next bearer's are settled at its right end.
    const bool settled = mother.raw;
    const bool mother_moved = mother.part != nullptr && mother.from != Origin::kOwn && !IsFresh(mother.from);

    const auto merged = [&](NodeId of) { return merges != nullptr && (*merges)[of]; };
    const auto merged_above = [&](NodeId of) {
      while (of != kSlotNode && !merged(of)) of = tree[of].mother;
      return of != kSlotNode;
    };
    const auto moved_entries = [&] {  // under a mother that moved here they keep their links
      for (std::size_t k = list.size(); k-- > 0;) {
        walker.Kept(k + 1 == list.size() && (mother.part->links >> bit_index & 1u));
      }
    };
    const auto give_up = [&](bool merges_left) {
      const std::int32_t next = walker.next;
      const bool held = (old_count == 1 && old_bit && walker.alive) || next == kOldToTheLeft;
      // What a sweep took from here to the right is what was given up only if that stands further left as well.
      const bool lives = held || (next == kNewToTheLeft && (merges_left || (marks & kFromLeft)));
      for (int k = old_count; k-- > 0;) walker.GivenUp(k + 1 == old_count && old_bit);
      state.old = lives ? Old::kElsewhere : Old::kGivenUp;
      walker.alive = held;
      if (lives && merges_left) walker.next = kOldToTheLeft;
    };

    const auto lose = [&] {                                      // together with the mother
      if (mother_index >= 0) before_loss = walker.Memory() + 1;  // a slot is of one item only
      give_up(merged_above(node));
    };

    if (mother_moved) {
      if (!settled && FromRight(mother.from)) moved_entries();
      if (old_count > 0) {
        if (mother.old == Old::kElsewhere) {
          state.old = Old::kElsewhere;
        } else {
          const std::int32_t as_it_was = walker.Memory();
          lose();
          // What a sweep led here from the left goes on to the right: that is what comes next, and nothing between.
          if (settled && mother.from == Origin::kNewLeft && !list.empty()) walker = Walker(as_it_was);
        }
      }
      if (!settled && FromLeft(mother.from)) moved_entries();
      state.from = mother.from;
    } else if (mother.old == Old::kElsewhere) {
      state.old = old_count > 0 ? Old::kElsewhere : Old::kNone;
      walker.given_away = old_count > 0;
    } else if (mother.old == Old::kGivenUp) {
      if (old_count > 0) lose();
    }
    if (!mother_moved && mother.part != nullptr && !settled) {
      // New ones from the right, the old ones in their places, new ones from the left.
      for (std::size_t k = list.size(); k-- > 0 && FromRight(list[k]->origin);) {
        list[k]->origin == Origin::kNewRight ? walker.NewRight() : walker.OldRight();
      }
      if (old_count > 0 && mother.old == Old::kInPlace) {
        std::vector<char> kept(old_count, 0);
        for (const WorkPart* part : list) {
          if (part->origin == Origin::kOwn) kept[part->old_index] = 1;
        }
        const bool any_kept = std::find(kept.begin(), kept.end(), 1) != kept.end();
        if (!any_kept) {
          give_up(merged(node));
        } else {
          for (int k = old_count; k-- > 0;) {
            const bool bit = k + 1 == old_count && old_bit;
            kept[k] ? walker.Kept(bit) : walker.GivenUp(bit);
          }
          if (merged(node)) walker.next = kOldToTheLeft;
          state.old = Old::kInPlace;
          walker.alive = kept[0] != 0;
        }
      }
      for (std::size_t k = list.size(); k-- > 0;) {
        if (list[k]->origin == Origin::kFresh) walker.Fresh();
        if (list[k]->origin == Origin::kFreshJoined) walker.New(true, kBehindFresh);
      }
      for (std::size_t k = list.size(); k-- > 0;) {
        if (!FromLeft(list[k]->origin)) continue;
        if (list[k]->origin == Origin::kNewLeft) {
          walker.NewLeft(over);
        } else if (!over) {
          walker.OldLeft();
        } else if (iterating_left_) {
          walker.NewRight();
        } else {
          walker.OldRight();
        }
      }
    } else if (!mother_moved && settled && old_count > 0 && mother.old == Old::kInPlace) {
      state.old = Old::kElsewhere;
    }
    if (!list.empty()) {
      state.raw = settled || walker.bit;
      state.part = list.back();
      if (!mother_moved) state.from = list.back()->origin;
      if (!settled && walker.bit && kept_links_[i]) links.emplace_back(mother.part, 1u << bit_index);
    }
    fine = fine && !walker.crossed;
    memory[kEntries * i] = walker.Memory();
  }
  if (after == nullptr) return fine;
  const auto drop = [](const auto& self, WorkPart* part) -> void {
    part->links = 0;
    for (WorkPart& daughter : part->daughters) self(self, &daughter);
  };
  drop(drop, after);
  for (const auto& [part, bit] : links) part->links |= bit;
  return fine;
}

}  // namespace tiersmith
