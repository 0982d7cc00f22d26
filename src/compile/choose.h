// Optional rules: at each site, to apply or not to, with its probability.
//
// Reads the letters with requests that find.h writes (at once, before requests travel along shared mothers) and
// takes requests away where the draw says so: /tat/ under an optional rule with two sites has four ways. Letters that ask
// the same of one object are one site and draw once.
// (A sweep draws at each visit: compile/find.cc.)
#pragma once

#include "compile/find.h"
#include "compile/requests.h"

namespace tiersmith {

// Negative natural logs of the two outcomes of a draw.
struct Draw {
  explicit Draw(double probability);
  float apply, leave;
};

// May the rule's draws be told letter by letter? Not where matches change several items: what they would have to agree
// on lies apart.
bool DrawsLocally(const Rule& rule);

Found Choose(const Found& found, const RequestSpace& requests, std::size_t max_states);

}  // namespace tiersmith
