// The linear encoding: a form as a string of letters, one letter an item (DEVELOPERS.md, "The compiler").
//
// A slot's letter is its tree of parts. Every mother part has, for each kind of daughter it bears,
// one link bit: 1 if its last N is also the first N of the next part (to the right, through the whole
// string) that bears an N. /n k/ with one Place: the root part of n has Place linked, k's has not.
// Where two neighbouring mother parts are one object, all under them is shared as well: those
// bits are implied and stored as 0 (closed under descent; a geminate costs one bit).
// Source of the idea: Kornai 1995 and Bird & Ellison 1994 on linear encodings; one bit a node and
// segment is not injective, one bit a mother part is.
//
// Tested by tests/agreement/encode_test.cc: Decode(Encode(g)) == g with contours and floats.
#pragma once

#include <cstdint>
#include <optional>
#include <unordered_map>
#include <vector>

#include "model/form.h"
#include "model/tree.h"

namespace tiersmith {

struct LetterPart {
  NodeId node = 0;
  Value value = 0;
  std::uint32_t links = 0;  // bit i: the link of Tree[node].daughters[i]
  std::vector<LetterPart> daughters;

  friend bool operator==(const LetterPart& a, const LetterPart& b) {
    return a.node == b.node && a.value == b.value && a.links == b.links && a.daughters == b.daughters;
  }
  friend bool operator!=(const LetterPart& a, const LetterPart& b) { return !(a == b); }
};

struct Letter {
  FormItem::Kind kind = FormItem::Kind::kSlot;
  Boundary boundary = Boundary::kNone;
  std::uint64_t tags = 0;  // kBoundary: of the morpheme it opens (FormItem::tags)
  LetterPart part;         // kSlot: of node 0; kFloat: of the floating node

  friend bool operator==(const Letter& a, const Letter& b) {
    return a.kind == b.kind && a.boundary == b.boundary && a.tags == b.tags && a.part == b.part;
  }
};

std::size_t Hash(const LetterPart& part);
std::size_t Hash(const Letter& letter);

// Position of `node` among its mother's daughters: which bit of the mother's `links` is its.
int LinkBit(const Tree& tree, NodeId node);

// Requires: Defects(form, tree) is empty.
std::vector<Letter> Encode(const Form& form, const Tree& tree);

// None if the string is ill-formed: a link with no next bearer, across a float of that tier, or
// between unequal contents. Otherwise canonical.
std::optional<Form> Decode(const std::vector<Letter>& letters, const Tree& tree);

// The root's content without its links; none for an empty slot.
std::optional<FeatureTree> RootContent(const Letter& letter);
LetterPart PartOf(const FeatureTree& content);
FeatureTree ContentOf(const LetterPart& part);

// Is the slot's root the next slot's too?
bool RootGoesOn(const Letter& letter, const Tree& tree);

// Letters and their numbers, in order of first mention.
class Alphabet {
 public:
  int Intern(const Letter& letter);
  int Find(const Letter& letter) const;  // -1 if it is not there
  const Letter& operator[](int id) const { return letters_[id]; }
  int size() const { return static_cast<int>(letters_.size()); }

 private:
  struct LetterHash {
    std::size_t operator()(const Letter& letter) const { return Hash(letter); }
  };
  std::vector<Letter> letters_;
  std::unordered_map<Letter, int, LetterHash> ids_;
};

}  // namespace tiersmith
