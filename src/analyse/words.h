// The words of a lexicon: every stem in every cell of every paradigm that takes it; a stem that none takes is a word alone.
// Tested by tests/unit/analyse/paradigm_test.cc.
#pragma once

#include <cstdint>
#include <string>
#include <vector>

#include "analyse/paradigm.h"

namespace tiersmith {

struct Word {
  Reading form;
  std::string gloss;  // "rope PL LOC"
  std::string cell;   // "PL LOC"; "" of a word alone
};

class WordList {
 public:
  // Words that a paradigm has no form for are left out, with an error in `diagnostics` that says so.
  WordList(const FormReader& reader, const Grammar& grammar);

  // The first words in the order of the lexicon, at most `limit` (0: all). True if that was all.
  bool First(std::size_t limit, std::vector<Word>* words, Diagnostics& diagnostics) const;
  // Words at random: a stem by its weight, then one of its words, each as likely. The same seed gives the same words.
  std::vector<Word> Sample(std::size_t count, std::uint64_t seed, Diagnostics& diagnostics) const;

 private:
  std::vector<Word> WordsOf(const LexiconEntry& stem, Diagnostics& diagnostics) const;

  const FormReader& reader_;
  const Grammar& grammar_;
  std::vector<const LexiconEntry*> stems_;
};

}  // namespace tiersmith
