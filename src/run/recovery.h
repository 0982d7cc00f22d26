// The cascade inverted: from a surface form to the underlying forms that come out so.
//
// Method: the surface form as a lattice of letters (a symbol may be written for several letters, boundaries are not
// written, XX may be one root or two), composed with each segment inverted, from the last to the first, and with the acceptor
// of underlying forms, which may be that of the words of a lexicon. Each restored slot or boundary costs 1, so every cycle has
// positive weight and the n best paths are the forms with the fewest restorations. Where rules are obligatory the machines are
// unambiguous, so distinct paths are distinct forms; optional rules, and words with several analyses, give one form several
// paths, of which one is kept. Its probability is that of all ways from the form to this surface (run/lattice.h).
// Example: [impaɾable] -> in-paɾable, im-paɾable, impaɾable, ...
// Tested by tests/published/ (each row is a candidate of its own surface form) and tests/unit/run/.
#pragma once

#include <memory>
#include <vector>

#include "compile/cascade.h"
#include "letters/classes.h"
#include "model/text.h"
#include "run/run.h"
#include "run/word_graph.h"

namespace tiersmith {

class Recovery {
 public:
  Recovery(const Grammar& grammar, const Cascade& cascade);
  ~Recovery();

  // The `best` candidates with the fewest restorations. False only if the machines are broken.
  bool Recover(const std::vector<Token>& surface, std::size_t best, Runner::Candidates* candidates);
  // See Runner::AllowOnly.
  void AllowOnly(const WordGraph& words, std::vector<std::string>* left_out);
  // By composition: no list is made.
  bool IsCandidate(const std::vector<LetterClasses::Parts>& underlying, const std::vector<Token>& surface);

 private:
  struct Impl;
  std::unique_ptr<Impl> impl_;
};

}  // namespace tiersmith
