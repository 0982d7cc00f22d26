// What the notation has and the interpreter and the compiler together do not run yet: the one place that says so.
//
// The checker resolves all of it, and refuses what is listed here at its place, unless a grammar is loaded with
// Reach::kWhole. A construct that the compiler has learned is struck out here and nowhere else.
// Tested by tests/unit/model/check_test.cc.
#pragma once

#include <string>
#include <vector>

#include "grammar/syntax.h"
#include "model/grammar.h"

namespace tiersmith {

struct NotYet {
  Span span;
  std::string what;  // "`prefer` is"
  std::string remedy;
};

// `name`: the place for what is said of a rule as a whole.
std::vector<NotYet> NotRunYet(const Rule& rule, Span name, const Tree& tree);

}  // namespace tiersmith
