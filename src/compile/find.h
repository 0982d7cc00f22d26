// Where a rule applies: annotated letters -> annotated letters with requests.
//
// At once: L, the subsets of the pattern machine from the left, and R, those from the right; at letter a
// between l and r the roles are { role : q -a:role-> q', q in l, q' in r }: exact for overlapping matches, several changed items and
// conditions on both sides. /n n k/ with [+nasal] [+cons Place]: both n get
// a role, each by its own match.
// Iterative: one pass reads the input ahead, then one goes with the sweep and reads its own output behind; it
// visits a root at its first slot on the way and decides for all its slots.
// One thing a sweep cannot see: a slot behind that could not change because of a line towards what is ahead, when that
// line is cut later in the sweep, and a gap then asks whether this slot is the nearer one. Such a letter is marked
// kUnsure, and a grammar that can reach one is refused.
//
// Layout of the symbols written: annotated letter (kOver as it is after the changes behind, when iterating),
// then the request key, then the contents on the left, then on the right, by block of the request and by node (-1: none or
// not asked).
// At once only the left contents are filled; the right ones hold whether they are needed.
#pragma once

#include "base/limits.h"
#include "compile/build_letter.h"
#include "compile/pattern.h"
#include "compile/requests.h"

namespace tiersmith {

struct Found {
  Tape tape;
  bool over_budget = false;
};

Found FindAtOnce(const Tape& annotated, PatternCompiler& pattern, const RequestSpace& requests, ContentPool& pool,
                 const Limits& limits);

Found FindIterating(const Tape& annotated, PatternCompiler& pattern, const RequestSpace& requests, ContentPool& pool,
                    const Limits& limits);

// `complete`: at each root that one symbol spells, what the symbol's tree has more is asked for. A root that would get a node
// inside a span of it stays; a node that another root holds as well and that would get something marks the letter kUnsure.
Found FindIncomplete(const Tape& annotated, const RequestSpace& requests, const Limits& limits);

}  // namespace tiersmith
