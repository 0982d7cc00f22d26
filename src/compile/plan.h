// What the rules of a grammar look at, before any machine is built: which nodes are visible to them, and whose link bits
// are in force before each rule (DEVELOPERS.md, "The compiler").
//
// A rule reads the bits of the nodes it spreads, cuts, sets or fills, of all nodes above them, and of all that an
// insertion brings. Bits are in force from the start up to their last reader; the root's stay to the end, for `ː` is
// written with them. Reading a node is reading all above it, so a set of live nodes is closed upward.
#pragma once

#include <set>
#include <vector>

#include "letters/classes.h"
#include "model/grammar.h"

namespace tiersmith {

struct Plan {
  NodeSet visible;
  std::set<int> literals;
  std::vector<std::vector<NodeId>> live;  // before each step (StepsOf), and after the last; mothers first
};

// The nodes whose links the rule reads.
NodeSet NodesRead(const Rule& rule, const Tree& tree);

// The nodes of whose lines its patterns ask, in tests, conditions or for `sharing blocked`, and all above them.
NodeSet LinksAsked(const Rule& rule, const Tree& tree);

// `sharing blocked`: the nodes that a rule mentions for an item it changes, in its bundle, conditions and changes; and those
// of which the bundle says that they are shared.
std::vector<NodeId> MentionedFor(const Rule& flattened, int label, std::vector<NodeId>* shared);

// The tags that rules ask for, as bits of FormItem::tags.
std::uint64_t TagsRead(const Grammar& grammar);

Plan MakePlan(const Grammar& grammar, bool keep_all_links);

}  // namespace tiersmith
