// Notes for traces: what a match did, and why one was blocked, in words with symbols.
// Tested by tests/unit/graph/graph_rulings_test.cc.
#pragma once

#include <string>

#include "graph/interpreter.h"
#include "graph/matches.h"

namespace tiersmith::graph {

// "n", or "a (slot 2)" where the form has several.
std::string NameOfSlot(const View& view, int slot);

// Adds what this match alone changes: "t's Place spread to n", "n: Place cut", "s deleted".
void NoteChanges(const View& view, const Match& match, StepNotes* notes);

// Adds why this match failed: "blocked at a: no room for Place".
void NoteBlocked(const View& view, const Match& match, Failure failure, StepNotes* notes);

}  // namespace tiersmith::graph
