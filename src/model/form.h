// A form as a plain value: the autosegmental graph written down (grammar/notation.md §8 says what rules do to it).
//
// `instances` is a pool; an instance held by several mothers is shared, which is how geminates,
// long vowels and spreading look. Example, /anta/ after place assimilation under a Place node:
// the root of n and the root of t list the same Place instance among their daughters.
#pragma once

#include <cstdint>
#include <string>
#include <vector>

#include "model/feature_tree.h"
#include "model/tree.h"

namespace tiersmith {

using InstanceId = std::uint32_t;

struct Instance {
  NodeId node = 0;
  Value value = 0;
  std::vector<InstanceId> daughters;  // in tree order of kinds; contours in their order

  friend bool operator==(const Instance& a, const Instance& b) {
    return a.node == b.node && a.value == b.value && a.daughters == b.daughters;
  }
};

enum class Boundary : std::uint8_t { kNone, kMorpheme, kClitic, kWord, kPhrase };  // by strength

// As it is typed: "-", "=", "#", "‖".
const char* BoundarySign(Boundary boundary);

struct FormItem {
  enum class Kind : std::uint8_t { kSlot, kBoundary, kFloat };
  Kind kind = Kind::kSlot;
  Boundary boundary = Boundary::kNone;  // kBoundary
  InstanceId instance = 0;              // kSlot: of node 0, in this item only; kFloat: the floating one
  // kBoundary: the tags of the morpheme that it opens, one bit for each of Grammar::tags. Where some rule asks for tags,
  // a form begins with a ‖ that opens its first morpheme; otherwise tags are 0 and no such item stands there.
  std::uint64_t tags = 0;

  friend bool operator==(const FormItem& a, const FormItem& b) {
    return a.kind == b.kind && a.boundary == b.boundary && a.instance == b.instance && a.tags == b.tags;
  }
};

struct Form {
  std::vector<Instance> instances;
  std::vector<FormItem> items;

  friend bool operator==(const Form& a, const Form& b) { return a.instances == b.instances && a.items == b.items; }
};

// The same form with instances numbered in order of first mention (items left to right, depth
// first) and unreachable ones dropped: two forms are the same graph iff their canonical forms
// are equal.
Form Canonical(const Form& form);

// The root's id of a slot item, or -1 for an empty slot.
std::int64_t RootOf(const Form& form, const FormItem& item);

// The content under an instance.
FeatureTree ContentOf(const Form& form, InstanceId instance);
// Adds a fresh copy of `content` to the pool and returns its id.
InstanceId AddContent(Form& form, const FeatureTree& content);

// Names every broken promise of the data structure, or "" if there is none: a mother holds more than its
// room, instances of one tier cross, a float stands inside a bearer of its tier, a kind hangs from the wrong mother, roots share non-neighbouring slots.
std::string Defects(const Form& form, const Tree& tree);

// One line for tests and messages, with sharing shown: "s1[root1[+cons Place2[•Coronal]]] - s2[..]".
std::string Dump(const Form& form, const Tree& tree);

}  // namespace tiersmith
