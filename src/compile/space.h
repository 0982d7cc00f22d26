// What one rule needs to know of letters: the bits in force, who bears what, and *annotated* letters.
//
// A link bit sits on the left member of a pair, and one under a shared mother is implied. So that the rest of the
// compiler can ask both neighbours of a slot the same questions, two passes annotate each
// letter, for every node with bits in force ("live", compile/plan.h):
//   kFromLeft    its first N is the last N of the bearer before
//   kToRight     its last N is the first N of the next bearer
//   kObjectLeft  the same two of the mother as an object: of its first and last holder
//   kObjectRight
//   kOver        it bears no N, but one N is held on both sides of it
// An annotated letter is the key [class, marks of live node 0, marks of live node 1, ..., surroundings]; the last says
// what the rule asks of the morpheme and the word around the letter (0 where it asks nothing).
#pragma once

#include <vector>

#include "compile/tape.h"
#include "letters/classes.h"
#include "model/grammar.h"

namespace tiersmith {

// Surroundings of a slot: bit i for the i-th tag that the rule asks for, of its morpheme; and of some morpheme of its word;
// whether it stands in a stem. Of a boundary: does the stem go on across it.
enum Surroundings : std::int32_t { kMorphemeTags = 1, kWordTags = 1 << 12, kInStem = 1 << 24 };
constexpr std::size_t kMostTagsOfARule = 12;

enum LinkMark : std::int32_t { kFromLeft = 1, kToRight = 2, kObjectLeft = 4, kObjectRight = 8, kOver = 16 };

class RuleSpace {
 public:
  struct Bearing {
    bool mother = false;  // bears the node's mother
    int count = 0;        // instances of the node
    bool bit = false;     // the stored link bit
  };

  // `live`: nodes with bits in force in the input, mothers first, without `slot`. What stands on the left of a letter is
  // told only for the nodes that the rule draws, cuts, sets or brings in, and those above them ("watched").
  RuleSpace(LetterClasses& classes, const Rule& rule, std::vector<NodeId> live);

  LetterClasses& classes() const { return classes_; }
  const Tree& tree() const { return classes_.grammar().tree; }
  const std::vector<NodeId>& live() const { return live_; }
  int LiveIndex(NodeId node) const { return live_index_[node]; }
  bool Watched(std::size_t live) const { return watched_[live] != 0; }
  bool IsSlot(int class_id) const { return classes_[class_id].visible.kind == FormItem::Kind::kSlot; }

  const Bearing& Of(int class_id, NodeId node) const;
  // Marks of a node in an annotated letter. One without bits in force has no lines of its own: it goes where its mother goes.
  std::int32_t Marks(const Key& annotated, NodeId node) const {
    if (live_index_[node] >= 0) return annotated[1 + live_index_[node]];
    if (node == kSlotNode || Of(annotated[0], node).count == 0) return 0;
    return Marks(annotated, tree()[node].mother) & (kFromLeft | kToRight);
  }
  // The lowest proper ancestor of `node` that the letter bears (slot at the highest).
  NodeId LowestAncestor(int class_id, NodeId node) const;
  // Does an annotated letter pass? Agreement (α) counts as passed: it is no question to one letter.
  bool Matches(const Key& annotated, const SlotTest& test) const;
  // Is the mother that bears `node` here (or would), or one above it, held by another root as well?
  bool MotherElsewhere(const Key& annotated, NodeId node) const;
  // How many of `node` a mother in this letter may hold.
  int Room(int class_id, NodeId node) const;
  // Does a span of the node pass over the place before, or after, a slot?
  bool PassesOver(const Key& annotated, NodeId node, bool before) const {
    const std::int32_t lines = Marks(annotated, node);
    return (lines & (Of(annotated[0], node).count == 0 ? kOver : before ? kFromLeft : kToRight)) != 0;
  }
  // What an insertion brings, as it would stand beside this slot.
  Key Inserted(const Change& insertion, const Key& host) const;
  std::size_t AnnotatedSize() const { return 2 + live_.size(); }
  std::int32_t Around(const Key& annotated) const { return annotated[1 + live_.size()]; }
  void SetAround(Key* annotated, std::int32_t around) const { (*annotated)[1 + live_.size()] = around; }
  // Does a slot so surrounded pass a tag test of the rule?
  bool Allows(const Key& annotated, const TagTest& test) const;

  // Tape whose symbols are [class] -> tape whose symbols are annotated letters.
  Tape Annotate(const Tape& tape, std::size_t max_states) const;

  // The left half of the annotation, one letter at a time. A key of the pass holds per live node whether the last bearer
  // is linked to the right, and its kObjectLeft.
  // Last comes what is known of the morpheme and the word (Surroundings).
  Key LeftStart() const { return Key(live_.size() + 1, 0); }
  // Marks of the letter's left side (kFromLeft, kObjectLeft, kOver), from the state before it.
  Key LeftMarks(const Key& state, int class_id) const;
  // The mirror image for the right side; the state holds the same of the next bearer.
  Key RightMarks(const Key& state, const Key& annotated) const;

 private:
  bool Passes(const Key& annotated, const FeatureTest& test) const;
  std::int32_t TagsOf(int class_id) const;  // of a boundary, as the rule numbers them
  std::int32_t AroundAfter(std::int32_t state, int class_id) const;
  std::int32_t StemGoesOn(std::int32_t state, int class_id) const;

  LetterClasses& classes_;
  std::vector<NodeId> live_;
  std::vector<int> live_index_;
  std::vector<char> watched_;                           // by live node
  std::vector<int> tags_;                               // those the rule asks for
  bool stems_;                                          // does it ask where stems are
  mutable std::vector<std::vector<Bearing>> bearings_;  // by class, by node
};

}  // namespace tiersmith
