// A rule with all its clauses on one list of labels and one of changes.
//
// The compiler asks of a letter what all clauses ask; which clause a label belongs to is told by its number. With
// `where X:[+a] .. otherwise where Y:[+b] ..` the labels are X, Y, the changes those of both clauses in order, and
// `otherwise` keeps the patterns, conditions and tag tests of the second.
#pragma once

#include <vector>

#include "model/grammar.h"

namespace tiersmith {

// Labels and variables renumbered; `changes` holds those of all clauses, in order.
Rule Flattened(const Rule& rule);

// The first clause and those after `otherwise`, in order.
std::vector<const Clause*> ClausesOf(const Rule& rule);

// Of a clause, or a flattened rule: the insertion that brings in the item of this label, as a change; -1: the label is of the pattern.
int InsertionOf(const Clause& clause, int label);

// The label of the pattern at which a change is asked for: of what is inserted, its host's.
int HostOf(const Clause& clause, int label);

// `fuse N within morpheme` as a rule that comes before the others: neighbours with equal N are merged.
Rule FusionAsRule(const Fusion& fusion, const Tree& tree);

// What happens to a typed form, in order: fusions, then the grammar's rules.
std::vector<Rule> StepsOf(const Grammar& grammar);

}  // namespace tiersmith
