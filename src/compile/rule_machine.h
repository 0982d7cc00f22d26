// One rule as an unambiguous machine: find, spans, lines and contents, repair, deletion, repair.
//
// The symbols it writes are strings of letters, aligned with the letter read:
// [flags, class, rest, class, rest, ...], rest -1 where the rest of the letter read rides along. /al-ʃams/: l is read, l's slot with the
// root of ʃ is written; under `insert E:/ə/ before X`, X is read and "ə X" is written; a deletion writes nothing.
// Tested by tests/agreement/.
#pragma once

#include "base/limits.h"
#include "compile/space.h"
#include "compile/tape.h"
#include "model/grammar.h"

namespace tiersmith {

enum OutputFlag : std::int32_t {
  kFlagChanged = 1,    // something was done here
  kFlagAmbiguous = 2,  // two matches ask for different things
  kFlagReaches = 4,    // an iterative change reached another root
  kFlagUnsure = 8,     // the machine cannot tell whether a nearer target behind became free (compile/find.h)
};

struct RuleMachine {
  Tape tape;
  bool over_budget = false;
};

// `classes_in`: the classes that may come. `live_in`, `live_out`: nodes whose link bits are in force before and after, mothers
// first. A node may be left out where nothing has a link of it.
RuleMachine CompileRule(const Rule& rule, LetterClasses& classes, const std::vector<int>& classes_in,
                        const std::vector<NodeId>& live_in, const std::vector<NodeId>& live_out, const Limits& limits);

}  // namespace tiersmith
