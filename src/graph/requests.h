// What matches ask of the objects of a form, merged, and what the form becomes.
//
// A request is made to a mother, not to a segment: with n and t holding one Place, `set` of Coronal under n's Place is
// a request to that Place, and t shows the result. Requests of several matches on one (mother, node)
// are merged; two that cannot both be met are ambiguous. A match alone may fail: no room, or a line would cross
// another (the ban on crossing lines: Goldsmith 1976).
// Everything is decided on the form before, inserted items included; then insertions, lines, contents, deletions, in
// that order.
// Tested by tests/unit/graph/graph_changes_test.cc and graph_rulings_test.cc.
#pragma once

#include <boost/container/small_vector.hpp>
#include <string>
#include <vector>

#include "graph/graph.h"
#include "graph/matching.h"
#include "model/grammar.h"

namespace tiersmith::graph {

class Requests {
 public:
  explicit Requests(const View& view);

  // If `asked` is given, the numbers of the requests that the match makes are added to it: two matches with a number in
  // common ask the same of the same object.
  void Add(const Match& match, std::vector<int>* asked = nullptr);

  // Would the match's lines and contents fit? The change that does not, or null. Requires: Add(match).
  const Change* WithoutRoom(const Match& match) const;
  // Does anything asked for so far change anything?
  bool Changes() const;
  // One match alone, on the form before: mothers that only lose something, and deletions, left aside.
  bool CrossesAlone() const;
  std::string CrossedTier() const;  // of the match that CrossesAlone(), the node
  // Not empty: which object is asked for what cannot all be met.
  std::string Conflict() const;
  // That, or lines of two changes that cross.
  std::string Ambiguity() const;
  // The mothers of the form before that something non-vacuous happens to.
  std::vector<InstanceId> MothersChanged() const;
  // The form after. Requires: no ambiguity.
  Graph Result() const;

  // For notes.
  // An item's slot; position orders items from left to right. No slot: kNone.
  struct Item {
    InstanceId slot = kNone;
    int position = 0;
  };
  Item ItemOf(const Match& match, int label) const;
  // The instance that a spread carries: of the source's Ns the one that faces the target. kNone: it bears none.
  InstanceId Carried(const Change& change, const Match& match) const;
  // The mothers of `node` under a slot: those borne, else the one made for it.
  IdList MothersOf(InstanceId slot, NodeId node) const;
  bool LineAdded(InstanceId mother, NodeId node, InstanceId instance) const;
  bool LineCut(InstanceId mother, NodeId node) const;
  bool ContentAsked(InstanceId mother, NodeId node) const;
  bool Deletes(int slot) const;
  bool DeletesSlot() const { return !deletions_.empty(); }
  bool Merges() const { return !merges_.empty(); }
  bool DeletesBoundary() const { return !boundary_deletions_.empty(); }

 private:
  struct Lines {
    InstanceId mother;
    NodeId node;
    IdList left, right;  // new instances asked for at its left and its right edge
    IdList cut;          // of its own
    int room;
  };
  // The new list of `node`: values, or whole trees.
  struct Content {
    InstanceId mother;
    NodeId node;
    const std::vector<Value>* values;  // null: `trees`
    std::vector<FeatureTree> trees;
    bool is_long;  // of a root: on two slots
  };
  struct Insertion {
    int host;
    const Change* change;
    InstanceId slot;  // the first, if it is long
  };
  struct Made {
    InstanceId above;
    NodeId node;
    InstanceId made;
  };
  struct Merged {
    InstanceId kept, gone;
  };
  enum class Ask { kLeft, kRight, kCut, kContent, kInsert, kDelete, kDeleteBoundary, kLengthen, kMerge };
  struct Asked {
    Ask ask;
    InstanceId mother;
    NodeId node;
    InstanceId what;
  };

  void Note(Ask ask, InstanceId mother, NodeId node, InstanceId what);
  // The mother of `node` under the slot that faces left or right, with the class nodes that are missing made, once per
  // object.
  InstanceId MakeMotherOf(InstanceId slot, NodeId node, bool right);
  IdList MakeMothersOf(InstanceId slot, NodeId node);
  InstanceId MakeUnder(InstanceId above, NodeId node);
  bool IsMade(InstanceId id) const;
  Lines& LinesAt(InstanceId mother, NodeId node);

  void AddInsertion(const Change& change, const Match& match);
  void AddChange(const Change& change, const Match& match);
  void AddSpread(const Change& change, const Match& match);
  void AddDelink(const Change& change, const Match& match);
  void AddSetting(const Setting& setting, const Match& match, InstanceId slot, bool only_missing);
  void AddCopy(const Change& change, const Match& match);
  void AddLiteral(const Change& change, InstanceId slot);
  void AddMerge(const Change& change, const Match& match);
  void AddDeletion(const Change& change, const Match& match);
  void AddShortening(InstanceId slot);
  void AddLengthening(InstanceId root);
  void DeleteSlot(int slot);
  void AskContent(Content content);
  void AskTrees(InstanceId slot, NodeId node, std::vector<FeatureTree> trees, bool only_missing);
  std::vector<FeatureTree> TreesOf(const Setting& setting, const Match& match) const;
  bool SameContent(const Content& a, const Content& b) const;

  bool SpreadHasRoom(const Change& spread, const Match& match) const;
  bool SettingsHaveRoom(const Change& change, const Match& match) const;
  bool CopyHasRoom(const Change& change, const Match& match) const;
  int RoomAt(InstanceId slot, NodeId node) const;

  bool IsOld(InstanceId id) const { return id < view_.graph().nodes.size(); }
  // On the form before, inserted items included.
  IdList OldList(InstanceId mother, NodeId node) const;
  IdList OldUnder(InstanceId slot, NodeId node) const;
  FeatureTree OldContent(InstanceId id) const;
  bool OldEqual(InstanceId a, InstanceId b) const;
  int OrdinalOf(InstanceId slot) const;  // -1: inserted
  std::vector<int> SlotsOfRoot(InstanceId root) const;

  struct NewList {
    IdList list;
    IdList added_left, added_right;
    bool nothing_kept = false;
  };
  // A line to an instance equal to its neighbour-to-be is not drawn (but judged: whether it would cross comes first).
  NewList Merge(const Lines& lines, bool also_equal = false) const;
  std::string LineConflict(const Lines& lines) const;
  // The form with lines alone, and with everything but deletions. Alone: mothers that only lose something are left aside.
  Graph WithLines(bool alone) const;
  Graph BeforeDeletions(bool alone) const;
  // Behind a slot, one more that bears this root.
  struct Longer {
    InstanceId behind, root;
  };
  using Longers = boost::container::small_vector<Longer, 2>;
  void SetContents(Graph& graph, bool alone) const;
  void SetRoots(Graph& graph, Longers* longer) const;
  void Lengthen(const Graph& graph, Longers* longer) const;
  InstanceId Surviving(InstanceId id) const;
  // The items with what is inserted (each insertion's slot beside it, or kNone) and made longer; boundaries deleted.
  void SetItems(Graph& graph, const IdList& inserted, const Longers& longer) const;
  IdList InsertedSlots() const;
  bool InsertionsCross() const;
  bool LinesCross() const;
  bool AreNeighbours(InstanceId a, InstanceId b, const Match& match) const;

  const View& view_;
  Graph made_graph_;  // the form before with the trees of inserted items, and the class nodes made hanging in it
  boost::container::small_vector<Made, 4> made_;
  boost::container::small_vector<Lines, 4> lines_;
  boost::container::small_vector<Content, 4> contents_;
  boost::container::small_vector<Insertion, 4> insertions_;
  boost::container::small_vector<InstanceId, 2> lengthened_;  // roots
  boost::container::small_vector<Merged, 2> merges_;
  boost::container::small_vector<int, 4> deletions_;           // of slots, by ordinal
  boost::container::small_vector<int, 2> boundary_deletions_;  // by item
  InstanceId disputed_ = kNone;                                // a mother asked for two contents
  NodeId disputed_node_ = 0;
  std::vector<Asked> asked_;            // each request once, where they are numbered
  std::vector<int>* asking_ = nullptr;  // of the match being added
};

}  // namespace tiersmith::graph
