// Where a rule's pattern matches: all ways, found by trying.
//
// The pattern is laid on the string of slots from every place. In /an-pa/, `A:[+nasal] B:[-son]` lies on n and p (the
// boundary between them is weaker than `#`), `A:[+nasal] # B:[-son]` on nothing (the edges of a word are
// never crossed). What a match then asks for, and whether it may, is requests.h.
// Not here: the no-nearer-slot condition on gaps, which needs to know which matches fail (apply.cc).
// Tested by tests/unit/graph/graph_rulings_test.cc.
#pragma once

#include <boost/container/small_vector.hpp>
#include <tuple>
#include <vector>

#include "graph/graph.h"
#include "model/grammar.h"

namespace tiersmith::graph {

// The slots a pattern sees, with the strength of the run of boundaries before each and after the last.
struct Track {
  boost::container::small_vector<int, 16> slots;      // ordinals, left to right
  boost::container::small_vector<Boundary, 17> runs;  // runs[i]: before slots[i]; the ends of the form are ‖
};

// One form, made ready for matching. Slots are known by their ordinal, left to right from 0.
class View {
 public:
  View(const Grammar& grammar, const Graph& graph);

  const Grammar& grammar() const { return grammar_; }
  const Graph& graph() const { return graph_; }
  int size() const { return static_cast<int>(slots_.size()); }
  InstanceId slot(int ordinal) const { return slots_[ordinal].slot; }
  InstanceId root(int ordinal) const { return slots_[ordinal].root; }  // kNone: empty
  int item(int ordinal) const { return slots_[ordinal].item; }
  const Track& track(bool names_empty) const { return names_empty ? all_ : rooted_; }

  bool Bears(int ordinal, NodeId node) const;
  bool Passes(const SlotTest& test, int ordinal) const;

 private:
  struct Slot {
    InstanceId slot = kNone;
    InstanceId root = kNone;
    int item = 0;
    std::uint32_t begin = 0, end = 0;  // what it bears: a range of borne_
  };
  struct Borne {
    NodeId node;
    Value value;
  };
  void Collect(InstanceId id);
  bool Passes(const FeatureTest& test, const Slot& slot) const;

  const Grammar& grammar_;
  const Graph& graph_;
  boost::container::small_vector<Slot, 16> slots_;
  boost::container::small_vector<Borne, 128> borne_;
  Track all_, rooted_;
};

using LabelSlots = boost::container::small_vector<int, 6>;  // per label an ordinal, or -1

// One way of matching, as far as it matters: the slots of the labels, and what each gap lies between.
struct Way {
  struct Gap {
    const PatternItem* item;
    int left, right;                   // ordinals of the slots on its two sides
    bool left_changes, right_changes;  // is that item changed by the rule?

    friend bool operator==(const Gap& a, const Gap& b) {
      return a.item == b.item && a.left == b.left && a.right == b.right;
    }
    friend bool operator<(const Gap& a, const Gap& b) {
      return std::tie(a.left, a.right, a.item) < std::tie(b.left, b.right, b.item);
    }
  };
  LabelSlots labels;
  std::vector<Gap> gaps;
};
bool operator==(const Way& a, const Way& b);
bool operator<(const Way& a, const Way& b);  // by labels first, so that the ways of one match stand together

// All ways of matching rule.where, measured gaps included, that no `unless` discards; each once, in order.
std::vector<Way> FindWays(const View& view, const Rule& rule);

}  // namespace tiersmith::graph
