// One application of a rule: all ways it may come out.
#pragma once

#include <map>
#include <string>
#include <vector>

#include "graph/interpreter.h"

namespace tiersmith::graph {

struct Result {
  Form form;
  double probability = 1;  // of all ways with this form
  double likeliest = 1;    // of the likeliest of them; the rest is told of that one
  std::size_t from = 0;    // in a derivation: which of the forms before it came from
  int changed = 0;         // matches that changed something
  std::map<std::string, int> blocked;
  StepNotes notes;
};

struct Results {
  std::vector<Result> results;  // each form once, likeliest first; the form as it was if there is a problem
  std::string ambiguous, reaches, too_many;

  bool HasProblem() const { return !ambiguous.empty() || !reaches.empty() || !too_many.empty(); }
};

Results ApplyAllWays(const Grammar& grammar, const Rule& rule, const Form& form, bool notes);

// Rule::Kind::kComplete (complete.cc).
Result Completed(const Grammar& grammar, const Form& form, bool notes);

// Each form once, probabilities summed, likeliest first, of equally likely ones the first.
void SumEqualForms(std::vector<Result>* results);

}  // namespace tiersmith::graph
