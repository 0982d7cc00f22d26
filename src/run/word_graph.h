// Which underlying forms are words, as recovery is told (run/run.h): pieces of forms as arcs of a graph.
//
// talu 'rope' NOM, PL -lA and the prefix un- give: start -> un -> (-)talu -> cells -> end, cells -> -lA -> end, .. What pieces there
// are and what may follow what is decided by who builds it (analyse/word_graph.h).
#pragma once

#include <cstddef>
#include <string>
#include <vector>

#include "model/readings.h"

namespace tiersmith {

struct WordGraph {
  struct Piece {
    Reading form;  // as if it stood alone
    std::string gloss;
    bool goes_on = false;  // the word before it: the form begins with a boundary, or is empty
  };
  struct Arc {
    int from = 0, to = 0;
    std::size_t piece = 0;
    Boundary behind = Boundary::kNone;  // what joins it to what stands before it
  };
  std::vector<Piece> pieces;
  std::vector<Arc> arcs;
  std::vector<int> ends;  // where a word may end; the start is 0
  int again = 0;          // where a next word goes on: its pieces begin with #, which may be ‖ as well
};

}  // namespace tiersmith
