// The words that a lexicon and its paradigms allow, for recovery.
//
// A word is: proclitics, prefixes, a core, suffixes, enclitics, any number of each. Cores are the words that the verb `words`
// lists: stems in the cells of the paradigms that take them, other stems alone. The affixes are those of the lexicon that
// stand in no paradigm: where they may come, paradigms say themselves. Words follow each other at # or ‖.
// Example: prefix /un-/, noun talu with PL /-lA/ in a paradigm: talu, talu-lA, un-talu, un-talu-lA, un-un-talu, ..
// Tested by tests/unit/analyse/word_graph_test.cc.
#pragma once

#include "analyse/paradigm.h"
#include "run/word_graph.h"

namespace tiersmith {

// An error in `diagnostics` for each cell without a form: it is not among the words.
WordGraph WordsAllowed(const FormReader& reader, const Grammar& grammar, Diagnostics& diagnostics);

}  // namespace tiersmith
