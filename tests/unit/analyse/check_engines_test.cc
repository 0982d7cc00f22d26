// A row whose two derivations differ is a defect of the program, and said to be one, also where rules are optional. A defect is
// made here by giving the check the machine of another grammar.
#include "analyse/check.h"
#include "support/compiled_case.h"

namespace tiersmith::testing {
namespace {

std::string Rules(const std::string& how) {
  return std::string(kSmallInventory) + "rule \"voicing\" { where [+syll] X:[-son Labial] [+syll]   set X [+voice]   " +
         how + " }\n";
}

CheckedRow Row(const Compiled& interpreted, const Compiled& machine, const std::string& underlying) {
  DataRow row;
  row.underlying = underlying;
  row.surfaces = {underlying};
  return Check(interpreted.grammar(), {row}, machine.runner.get()).rows.at(0);
}

TEST_CASE("check: differing engines", "[unit]") {
  const Compiled quarter = CompileText(Rules("optional 0.25")), third = CompileText(Rules("optional 0.3"));
  const Compiled always = CompileText(Rules(""));
  CHECK(Row(quarter, quarter, "apa").passed);
  CHECK(Row(quarter, quarter, "apa").engines_differ.empty());
  CHECK(Row(quarter, third, "ipi").engines_differ == "ipi 0.700000, ibi 0.300000");
  CHECK_FALSE(Row(quarter, third, "ipi").passed);
  CHECK(Row(quarter, third, "pi").passed);  // nothing to draw for
  CHECK(Row(quarter, always, "apa").engines_differ == "aba");
  CHECK(Row(always, quarter, "apa").engines_differ == "apa 0.750000, aba 0.250000");
  CHECK(Row(always, always, "aba").engines_differ.empty());
}

TEST_CASE("check: where the interpreter gives up, there is nothing to compare", "[unit]") {
  const Compiled quarter = CompileText(Rules("optional 0.25"));
  std::string many = "a";
  for (int i = 0; i < 13; ++i) many += "pa";  // 8192 outcomes
  const CheckedRow row = Row(quarter, quarter, many);
  CHECK_FALSE(row.passed);
  CHECK(row.engines_differ.empty());
  CHECK(row.explanation.problem.find("4096") != std::string::npos);
}

}  // namespace
}  // namespace tiersmith::testing
