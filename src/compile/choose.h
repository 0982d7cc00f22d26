// Optional rules: at each site, to apply or not to, with its probability.
//
// Reads the letters with requests that find.h writes (at once, before requests travel along shared mothers) and
// takes requests away where the draw says so: /tat/ under an optional rule with two sites has four ways. A site is what is
// linked by asking the same of one object, here or in letters that hold it too, or by being asked in one match: with
// `spread N.nasal to V, delete N`, V and N of /tan/ draw once.
// Method: where matches change several items, a first pass, leftward, notes the states of the pattern from which a match
// goes on to ask more. Runs that stand in one such state will ask the same, so the second, rightward, has at most one site for
// each; it draws at the first letter of a site, and where two turn out to be one, only what was drawn alike goes on.
// (A sweep draws at each visit: compile/find.cc.)
#pragma once

#include "compile/requests.h"
#include "compile/sides.h"

namespace tiersmith {

// Negative natural logs of the two outcomes of a draw.
struct Draw {
  explicit Draw(double probability);
  float apply, leave;
};

// The matches of a rule as both sides tell them.
struct TwoSides {
  const PatternMachine& machine;
  const std::vector<std::vector<RoleArc>>& arcs;  // by profile
  const Side& left;
  const Side& right;
};

// Symbols read: an annotated letter, its request, what find.h adds; then the profile, the state of the left side before it and
// that of the right side after it, which are taken away. No starts if it needs more than `max_states`.
Tape Choose(const Tape& found, const TwoSides& sides, const RequestSpace& requests, std::size_t max_states);

}  // namespace tiersmith
