// Where a clause's pattern matches: all ways, found by trying.
//
// The pattern is laid on the string of slots from every place. In /an-pa/, `A:[+nasal] B:[-son]` lies on n and p (the
// boundary between them is weaker than `#`), `A:[+nasal] # B:[-son]` on nothing (the edges of the domain are
// never crossed). What a match then asks for, and whether it may, is requests.h.
// Not here: the no-nearer-slot condition on gaps, which needs to know which matches fail (matches.h).
// Tested by tests/unit/graph/graph_rulings_test.cc and graph_patterns_test.cc.
#pragma once

#include <boost/container/small_vector.hpp>
#include <cstdint>
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
  // Of a test with a variable: could it hold of some value?
  bool Passes(const SlotTest& test, int ordinal) const;
  // The values of its variable with which the test (kAgrees, kDiffers) holds. 1 and 0 stand for + and -, there and not
  // there; content of a class node is known by the first instance in the form that has it.
  IdList ValuesFor(const FeatureTest& test, int ordinal) const;

  // The tags of the morpheme that the last boundary before the slot opens; of no slot (size()), none.
  std::uint64_t MorphemeTags(int ordinal) const;
  // Those of all morphemes of its word.
  std::uint64_t WordTags(int ordinal) const;
  // Which stretch between boundaries of this strength or more it stands in.
  int StretchOf(int ordinal, Boundary strength) const;
  // Which stem it stands in: from a stem morpheme over all stems and suffixes that follow within the host. 0: in none.
  int StemOf(int ordinal) const;
  // The strongest boundaries (items) of the run before a slot; none at the two ends of the form.
  std::vector<int> RunBefore(int ordinal, bool names_empty) const;

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
    InstanceId id;
  };
  void Collect(InstanceId id);
  bool Passes(const FeatureTest& test, int ordinal) const;
  bool BorneByAnother(InstanceId id, int ordinal, FeatureTest::Side side) const;
  bool IsLong(int ordinal) const;
  InstanceId FirstWithContentOf(InstanceId id) const;

  const Grammar& grammar_;
  const Graph& graph_;
  boost::container::small_vector<Slot, 16> slots_;
  boost::container::small_vector<Borne, 128> borne_;
  Track all_, rooted_;
};

// Per label an ordinal, or -1. A boundary is known by the slot behind it; at the end of the form, size().
using LabelSlots = boost::container::small_vector<int, 6>;
using Bindings = boost::container::small_vector<InstanceId, 2>;  // per variable its value (View::ValuesFor), or kNone

// What a way of matching comes to: two with the same labels and variables ask the same.
struct Match {
  const Clause* clause = nullptr;
  LabelSlots labels;
  Bindings variables;

  friend bool operator==(const Match& a, const Match& b) {
    return a.labels == b.labels && a.variables == b.variables && a.clause == b.clause;
  }
  friend bool operator<(const Match& a, const Match& b) {
    if (a.labels != b.labels) return a.labels < b.labels;
    return a.variables < b.variables;
  }
};

// One way of matching, as far as it matters.
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
  Match match;
  std::vector<Gap> gaps;
  std::vector<int> slots;  // all that are matched, left to right; only where they are asked for
};
bool operator==(const Way& a, const Way& b);
bool operator<(const Way& a, const Way& b);  // by match first, so that the ways of one match stand together

// The labels of the form's items that the clause changes: after `to`, of set, fill, delink, delete, lengthen, shorten;
// both of merge; the host of an insertion.
boost::container::small_vector<int, 4> ChangedLabels(const Clause& clause);

// Which of the instances in a list a member names.
IdList Chosen(const Graph& graph, const IdList& list, const Member& member);
// The one of them that faces an item to the right (left); kNone: there is none.
InstanceId Facing(const IdList& list, bool right);

// Does the rule ask which slots a match holds?
bool AsksForSlots(const Rule& rule);

// All ways of matching clause.where, measured gaps included, of which the conditions and tags hold and that no `unless`
// discards; each once, in order. Way::slots is filled where asked for.
std::vector<Way> FindWays(const View& view, const Rule& rule, const Clause& clause, bool with_slots);

}  // namespace tiersmith::graph
