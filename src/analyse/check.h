// Data against the grammar: every row derived, and for a row that fails, the first rule where it went wrong.
//
// With a rule of nasal place and the row /an-pa/ [anpa], [ampa] is derived, and the explanation names that rule: with
// it alone left out [anpa] comes out. A row gives no target derivation, only its two ends, so "where it went wrong" is
// defined by what would have reached the other end:
//   1. No result.   The derivation stops (two changes that exclude each other, a change that reaches another segment)
//                   or ends in a tree without a symbol: that is the explanation.
//   2. One rule.    Among the rules that changed the form, the first one such that the expected form comes out when
//                   this rule alone is left out and the others apply as before. Before it the expected form could
//                   still be reached by leaving one rule out; after it no more. Others that also mend it are listed.
//   3. Last change. No single rule mends it (the rule is right at one place and wrong at another, or two are wrong):
//                   derived and expected are aligned by symbols, the first difference is followed back through the
//                   derivation, and the last rule that changed, inserted or deleted that segment is named.
//   4. No rule.     That segment is as in the underlying form: a rule is missing, or one did not apply. What was
//                   blocked in this derivation, and why, is quoted.
// Cases 2 and 3 are evidence, not proof: the error may be in the data, in the underlying form or in an earlier rule.
//
// Where rules are optional a row passes if some way of applying them gives one of its surfaces, and the likeliest is
// explained where none does. A form with several readings (model/readings.h, model/speller.h) passes by one of them. A
// starred form must come out in no way.
//
// Not here: orders of rules. Tested by tests/unit/analyse/check_rows_test.cc.
#pragma once

#include <map>
#include <optional>
#include <string>
#include <vector>

#include "analyse/paradigm.h"
#include "model/grammar.h"
#include "model/readings.h"
#include "model/text.h"
#include "run/run.h"

namespace tiersmith {

struct Explanation {
  enum class Case { kNoResult, kOneRule, kLastChange, kNoRule };
  Case which = Case::kNoResult;
  int rule = -1;                     // kOneRule, kLastChange: index into Grammar::rules
  std::vector<int> also;             // kOneRule: further rules, each of which alone would mend it
  std::string difference;            // "m for n", "no ə after t", "t too many"; empty for kNoResult
  std::string problem;               // kNoResult: why there is none
  std::vector<std::string> changes;  // what the named rule did, in words
  std::vector<std::string> blocked;  // kNoRule: "'nasal place': blocked at n: ..."
  std::string starred;               // not empty: this form came out, and must not
  double starred_probability = 1;
  std::string expected_note;  // not empty: the expected form cannot be a form of this grammar, and why
};

struct CheckedRow {
  bool passed = false;
  std::optional<std::string> derived;   // the likeliest surface; none if there is no result
  std::optional<double> less_likely;    // it passes only by a surface less likely than that, with this probability
  std::string reading;                  // of several readings, the one that is told of
  std::optional<TextError> unreadable;  // the underlying form could not be read; no derivation then
  std::string engines_differ;           // not empty: the machine's result, where it is not the interpreter's
  Explanation explanation;              // of a row that fails and was read
};

struct CheckResult {
  std::vector<CheckedRow> rows;  // as the rows given
  int failed = 0;
  int engines_differ = 0;
  // Matches that failed as a whole, by rule (index) and reason, over all rows.
  std::map<int, std::map<std::string, int>> blocked;
};

// Derives every row by the graph interpreter, and by the machine too if one is given: where the two differ the row
// says so and counts as failed. A row passes if what is derived is one of its surfaces, up to ComparisonKey(). Requires: no
// row is spelled (ReadSpelled).
CheckResult Check(const Grammar& grammar, const std::vector<DataRow>& rows, Runner* runner);

// "went wrong at rule 'x': ..." in one line; the details are in the explanation.
std::string Describe(const Explanation& explanation, const Grammar& grammar);

}  // namespace tiersmith
