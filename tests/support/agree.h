// Comparing the machine with the graph interpreter, and counting what was compared.
#pragma once

#include <cstdint>
#include <map>
#include <optional>
#include <string>
#include <vector>

#include "model/grammar.h"

namespace tiersmith::testing {

struct Tally {
  std::uint64_t pairs = 0;                    // (rules, form) compared
  std::uint64_t changed = 0;                  // of these, the form changed
  std::uint64_t ambiguous = 0, reaching = 0;  // both engines refuse
  std::uint64_t unsure = 0;    // forms on which the machine refuses a sweep over a gap (compile/find.h): not compared
  std::uint64_t too_many = 0;  // forms with more outcomes than the interpreter follows: not compared
  std::map<std::string, std::uint64_t> blocked;  // by reason: matches that failed
  double worst_sum = 0;  // of the probabilities of one form's outcomes, the largest distance from 1
  std::uint64_t rules = 0;
  std::uint64_t over_budget = 0;                 // rules whose machine passes the limits: not compared
  std::map<std::string, std::uint64_t> applied;  // by shape of the rule: forms that it changed

  // Forms changed by rules of a mode whose shape names an operation.
  std::uint64_t Applied(const std::string& operation, const std::string& mode) const;
  double ChangedShare() const { return pairs == 0 ? 0 : static_cast<double>(changed) / static_cast<double>(pairs); }
  // A table for the log.
  std::string Report() const;
};

// The seed in $TIERSMITH_SEED, or this one.
std::uint64_t SeedOr(std::uint64_t seed);

// Compiles the grammar's only rule over the letters of these forms and compares both engines on every form: result with all sharing,
// ambiguity, reach. Of the forms that do not change, only as many are counted and compared as changed ones (and `least`). The
// first disagreement, as a .tier file to replay; none if there is none.
std::optional<std::string> CompareRule(const Grammar& grammar, const std::vector<Form>& forms, std::size_t least,
                                       Tally* tally);

// Compiles the whole grammar as users do (classes of letters, bits only while in force, composed and merged) and compares
// surface forms with their long roots. Forms: as typed.
std::optional<std::string> CompareGrammar(const Grammar& grammar, const std::vector<Form>& forms, Tally* tally,
                                          bool* compiled);

}  // namespace tiersmith::testing
