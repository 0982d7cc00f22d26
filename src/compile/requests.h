// What a rule asks of the objects in one letter, and how two askings of one object combine.
//
// A *request* concerns one node N and the mother that bears it (or would): draw a line to the nearest N on the left, cut
// the mother's own, put these values there. Requests on the slot itself are insertions and deletion.
// Layout of a request key: [slot bits, request of node 0, request of node 1, ...] over RequestSpace::nodes; then the same
// nodes once more for each insertion that other changes go on with: what is asked of the item inserted beside this slot.
// The rulings on what combines, and what is ambiguous, are in grammar/notation.md ("Rulings").
#pragma once

#include <vector>

#include "compile/pattern.h"
#include "compile/space.h"

namespace tiersmith {

enum RequestBit : std::int32_t {
  kCutFirst = 1,   // of the mother's own: the first (and only) one goes
  kCutMiddle = 2,  // those between
  kCutLast = 4,    // the last of several
  kCutAll = kCutFirst | kCutMiddle | kCutLast,
  kLineLeft = 8,  // a line to the nearest N on the left
  kLineRight = 16,
  kClash = 32,      // two contents asked for
  kMergeLeft = 64,  // its first N and the nearest one on the left become one
  kValuesShift = 7  // from here up: 1 + index into RequestSpace::contents, or 0
};
enum SlotBit : std::int32_t {
  kDeleteSlot = 1,
  kReaches = 2,   // an iterative change that reaches another root
  kUnsure = 4,    // an iterative change that may free a nearer target behind it (compile/find.h)
  kLengthen = 8,  // the root gets one slot more, behind its last one
  kShorten = 16,  // the root loses its last slot
  kLength = kLengthen | kShorten,
  kJoined = 32,      // its new root is that of the slot on its left as well
  kInsertShift = 6,  // from here up: one bit for each change of the rule
};

class RequestSpace {
 public:
  RequestSpace(const Rule& rule, const RuleSpace& space, const PatternCompiler& pattern);

  const std::vector<NodeId>& nodes() const { return nodes_; }
  const std::vector<Content>& contents() const { return contents_; }
  std::size_t size() const { return 1 + blocks() * nodes_.size(); }
  // Requests by node of the slot itself (block 0) and of what is inserted beside it.
  std::size_t blocks() const { return 1 + grown_.size(); }
  // Of an insertion, the block of what it brings, or 0: nothing goes on with that.
  std::size_t BlockOf(std::size_t change) const;
  // Is a line of this kind asked for an item inserted before, or after, the slot?
  bool AsksBeside(const std::int32_t* request, bool before, std::size_t node_index, std::int32_t line) const;
  // Contents that lines lead to the slot or to what is inserted beside it: by block, by node.
  std::size_t contents_size() const { return blocks() * nodes_.size(); }
  // Puts a content there for every such item.
  void GiveBeside(const std::int32_t* request, bool before, std::size_t node_index, std::int32_t line,
                  std::int32_t content, Key* contents) const;
  Key None() const { return Key(size(), 0); }
  int IndexOf(NodeId node) const;
  bool SpreadsFrom(bool left, std::size_t node_index) const;

  // What the roles at one letter ask.
  Key Of(const std::vector<const Role*>& roles, const Key& annotated) const;
  // The request for this content.
  std::int32_t AskFor(const Content& content, bool is_long = false) const {
    return (1 + ContentIndex(content, is_long)) << kValuesShift;
  }
  // Is something asked of a mother of the slot that another root holds as well?
  bool ReachesFurther(const Key& request, const Key& annotated) const;
  // Would what two matches ask of one letter not go together, though each alone does?
  bool InConflict(const Role& a, const Role& b, const Key& annotated) const;
  // Is the slot given a new root that is long?
  bool GivesLong(const Key& request) const;
  // Both of one object.
  static std::int32_t Combine(std::int32_t a, std::int32_t b);
  const Rule& rule() const { return rule_; }
  const RuleSpace& space() const { return space_; }

 private:
  // The slot or what is inserted beside it, with the requests of its nodes.
  struct Item {
    Key letter;
    std::int32_t* asks;
  };
  void AskOf(std::size_t change, const Role& role, const Item& item) const;
  bool Clashes(const Key& request, const Key& annotated) const;
  bool Clash(const Key& annotated, const std::int32_t* asks) const;
  std::int32_t AskSpread(const Role& role, std::size_t spread, const Key& annotated, std::int32_t* held) const;
  std::int32_t CutOf(const Change& change, const Role& role, const Key& annotated) const;
  void AskSettings(const Change& change, const Role& role, const Item& item) const;
  void AskCopy(NodeId node, bool fill, const Content& content, const Item& item) const;
  void AskContent(NodeId node, const Content& content, const Item& item, bool is_long = false) const;
  int ContentIndex(const Content& content, bool is_long) const;

  const Rule& rule_;
  const RuleSpace& space_;
  const PatternCompiler& pattern_;
  const std::vector<Spread>& spreads_;
  std::vector<NodeId> nodes_;
  std::vector<std::size_t> grown_;         // the insertions that other changes go on with
  mutable std::vector<Content> contents_;  // grows as roles ask for more
  mutable std::vector<char> long_;         // of each: is the root to be long
};

// What a letter's part bears of `node`, in order.
Content ContentUnder(const LetterPart& part, NodeId node);

// What a setting whose variable has this value puts there.
std::vector<Value> BorrowedValues(const Tree& tree, const Setting& setting, int value);

// Carries requests along the spans of shared mothers, in one direction: a request made of one holder is made of all. State of
// one request node: the request carried for each of its ancestors below the slot.
class RequestCarrier {
 public:
  RequestCarrier(const RequestSpace& requests, bool rightward);

  std::size_t StateSize(std::size_t node_index) const { return ancestors_[node_index].size(); }
  // Adds what is carried here to `request`, and takes what is to be carried on.
  void Step(const Key& annotated, std::size_t node_index, std::int32_t* state, std::int32_t* request) const;

 private:
  const RequestSpace& requests_;
  std::int32_t from_, onward_;  // marks of a line to the holder before, and to the next
  std::vector<std::vector<NodeId>> ancestors_;
};

}  // namespace tiersmith
