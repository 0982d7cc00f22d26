// The graph interpreter: applies rules to autosegmental graphs directly, by drawing and cutting
// association lines. Slow and obvious; it is the judge of the compiler (DEVELOPERS.md) and
// it explains derivations. It knows nothing of letters, automata or OpenFst.
#pragma once

#include <map>
#include <string>
#include <vector>

#include "model/grammar.h"

namespace tiersmith {

// What happened at one step, in words: "n: Place delinked", "k's Place spread to n",
// "blocked at a: no room for Place".
struct StepNotes {
  std::vector<std::string> changes;
  std::vector<std::string> blocked;
};

// One way a form may come out. Of all ways with this form, the sum.
struct Outcome {
  Form form;
  double probability = 1;
};

struct Application {
  Form form;                      // the result (the input if there is a problem); optional: of the likeliest way
  std::vector<Outcome> outcomes;  // each form once, likeliest first; one of probability 1 unless the rule is optional
  int changed = 0;                // matches that changed something
  std::map<std::string, int> blocked;  // matches that failed, by reason: "capacity", "crossing", "sharing",
                                       // "preserving"; "prefer": gave way to another
  std::string ambiguous;               // not empty: two matches ask for different things; says what
  std::string reaches;                 // not empty: an iterative change reached another root
  std::string too_many;                // not empty: more outcomes than Limits::outcomes; says so
  StepNotes notes;                     // filled when asked for
};

// The form as it is read before the first rule: Grammar::fusions carried out, in order.
Form Fused(const Grammar& grammar, const Form& typed);

// Applies one rule once (one sweep if it iterates). Pure.
Application ApplyRule(const Grammar& grammar, const Rule& rule, const Form& form, bool notes = false);

struct Step {
  int rule = 0;  // index into Grammar::rules
  Form after;
  bool applied = false;
  StepNotes notes;
};
struct Derivation {
  Form underlying;  // fused
  std::vector<Step> steps;
  Form surface;  // empty slots erased; where rules are optional, the likeliest (and `steps` lead to it)
  std::vector<Outcome> outcomes;  // all surfaces, each once, likeliest first
  std::string problem;  // not empty: ambiguous, reaching another root, or too many outcomes; names the rule; surface is
                        // then not valid
  bool too_many = false;  // the problem is that there are more outcomes than Limits::outcomes
};
Derivation Derive(const Grammar& grammar, const Form& underlying, bool notes = false);

}  // namespace tiersmith
