// What matches ask of the objects of a form, merged, and what the form becomes.
//
// A request is made to a mother, not to a segment: with n and t holding one Place, `set` of Coronal under n's Place is
// a request to that Place, and t shows the result. Requests of several matches on one (mother, node)
// are merged; two that cannot both be met are ambiguous. A match alone may fail: no room, or a line would cross
// another (the ban on crossing lines: Goldsmith 1976).
// Everything is decided on the form before; then insertions, lines, contents, deletions, in that order.
// Tested by tests/unit/graph/graph_changes_test.cc and graph_rulings_test.cc.
#pragma once

#include <boost/container/small_vector.hpp>
#include <string>
#include <vector>

#include "graph/graph.h"
#include "graph/matching.h"
#include "model/grammar.h"

namespace tiersmith::graph {

// How many of `node` the mother under this slot may hold.
int RoomAt(const View& view, NodeId node, int slot);

// The instance that a spread carries: of the source's Ns the one that faces the target. kNone: it bears none.
InstanceId Carried(const View& view, const Change& change, const LabelSlots& match);

// Would the match's lines and contents fit? The change that does not, or null.
const Change* WithoutRoom(const View& view, const Rule& rule, const LabelSlots& match);

class Requests {
 public:
  struct Lines {
    InstanceId mother;
    NodeId node;
    IdList left, right;  // new instances asked for at its left and its right edge
    IdList cut;          // of its own
    int room;
  };
  struct Content {
    InstanceId mother;
    NodeId node;
    const std::vector<Value>* values;
  };
  struct Insertion {
    int host;
    int change;  // its place in Rule::changes
  };

  Requests(const View& view, const Rule& rule);

  void Add(const LabelSlots& match);

  // Does anything asked for so far change anything?
  bool Changes() const;
  // One match alone, on the form before: mothers that only lose something, and deletions, left aside.
  bool CrossesAlone() const;
  std::string CrossedTier() const;  // of the match that CrossesAlone(), the node
  // Not empty: which object is asked for different things.
  std::string Ambiguity() const;
  // The mothers of the form before that something non-vacuous happens to.
  std::vector<InstanceId> MothersChanged() const;
  // The form after. Requires: no ambiguity.
  Graph Result() const;

  // For notes.
  // The mother of `node` under a slot: the one borne, else the one made for it, else kNone.
  InstanceId MotherOf(int slot, NodeId node) const;
  bool LineAdded(InstanceId mother, NodeId node, InstanceId instance) const;
  bool LineCut(InstanceId mother, NodeId node) const;
  bool ContentAsked(InstanceId mother, NodeId node) const;

 private:
  struct Made {
    InstanceId above;
    NodeId node;
    InstanceId made;
  };

  // The mother of `node` under the slot, with the class nodes that are missing made, once per object.
  InstanceId MakeMotherOf(int slot, NodeId node);
  InstanceId MakeUnder(InstanceId above, NodeId node);
  InstanceId FindMade(InstanceId above, NodeId node) const;
  Lines& LinesAt(InstanceId mother, NodeId node);
  void AddSpread(const Change& change, const LabelSlots& match);
  void AddDelink(const Change& change, const LabelSlots& match);
  void AddSetting(const Setting& setting, int slot, bool only_missing);
  void AskContent(InstanceId mother, NodeId node, const std::vector<Value>& values);

  bool IsOld(InstanceId id) const { return id < view_.graph().nodes.size(); }
  IdList OldList(InstanceId mother, NodeId node) const;
  struct Merged {
    IdList list;
    IdList added_left, added_right;
    bool nothing_kept = false;
  };
  // A line to an instance equal to its neighbour-to-be is not drawn (but judged: whether it would cross comes first).
  Merged Merge(const Lines& lines, bool also_equal = false) const;
  std::string LineAmbiguity(const Lines& lines) const;
  // The form with everything but deletions. Alone: mothers that only lose something are left aside.
  Graph BeforeDeletions(bool alone) const;
  void Insert(Graph& graph) const;
  bool InsertionsCross() const;

  const View& view_;
  const Rule& rule_;
  Graph made_graph_;  // the form before with the class nodes made hanging in it
  boost::container::small_vector<Made, 4> made_;
  boost::container::small_vector<Lines, 4> lines_;
  boost::container::small_vector<Content, 4> contents_;
  boost::container::small_vector<Insertion, 4> insertions_;
  boost::container::small_vector<int, 4> deletions_;
  InstanceId disputed_ = kNone;  // a mother asked for two contents
  NodeId disputed_node_ = 0;
};

}  // namespace tiersmith::graph
