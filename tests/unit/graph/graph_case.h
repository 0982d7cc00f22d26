// One row of a test of the interpreter: a rule, a form, the graph that must come out.
#pragma once

#include <catch2/catch.hpp>
#include <string>
#include <vector>

#include "graph/interpreter.h"
#include "support/small_grammar.h"

namespace tiersmith::testing {

struct Row {
  Rule rule;
  const char* in;
  const char* out;           // "" where there is no result
  const char* problem = "";  // "ambiguous", "reaches"
  const char* blocked = "";  // "capacity", "crossing"
};

inline void CheckRows(const Grammar& grammar, const std::vector<Row>& rows) {
  for (const Row& row : rows) {
    CAPTURE(row.rule.name, row.in);
    const Form in = FormOf(grammar, row.in);
    const Application result = ApplyRule(grammar, row.rule, in, /*notes=*/true);
    CHECK((result.ambiguous.empty() ? "" : "ambiguous") + std::string(result.reaches.empty() ? "" : "reaches") ==
          row.problem);
    std::string blocked;
    for (const auto& [reason, count] : result.blocked) blocked += (blocked.empty() ? "" : " ") + reason;
    CHECK(blocked == row.blocked);
    const bool none = std::string(row.problem) != "";
    CHECK(Dump(result.form, grammar.tree) == Dump(none ? in : FormOf(grammar, row.out), grammar.tree));
    CHECK(result.form == Canonical(result.form));
    CHECK(Defects(result.form, grammar.tree) == "");
    const bool same = result.form == in;
    CHECK((result.changed > 0) == !same);
    CHECK(result.notes.blocked.empty() == blocked.empty());
  }
}

}  // namespace tiersmith::testing
