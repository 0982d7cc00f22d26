// Which underlying forms are words, as recovery is told (run/run.h): pieces of forms as arcs of a graph.
//
// talu 'rope' NOM, PL -lA and the prefix un- give: start -> un -> (-)talu -> end, start -> talu-lA -> end, .. What pieces there
// are and what may follow what is decided by who builds it (analyse/word_graph.h).
#pragma once

#include <cstddef>
#include <string>
#include <vector>

#include "model/form.h"

namespace tiersmith {

struct WordGraph {
  struct Piece {
    Form form;         // as if it stood alone
    std::string text;  // what messages call it
    std::string gloss;
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
