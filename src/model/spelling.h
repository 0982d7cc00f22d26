// The lines of `spelling`, checked. `n = ŋ before /k/` lets the letter n stand for ŋ there, in reading and in writing.
#pragma once

#include <optional>
#include <string>
#include <vector>

#include "base/diagnostics.h"
#include "model/slot_test.h"
#include "model/token.h"

namespace tiersmith {

struct SpellingLine {
  std::string letters;
  std::vector<Token> means;  // symbols, ː, boundaries; none: nothing
  bool reads = true;
  bool writes = true;
  std::optional<SlotTest> before, after, between;  // of the neighbouring segments inside the word
  Span span;
};

struct Spelling {
  std::vector<SpellingLine> lines;  // in the order written
};

}  // namespace tiersmith
