// The letters of a form that was read, looked up: a symbol, long or not, and a boundary with its tags have one letter each
// (CascadeData::inputs). /tan-ki/ is t a n -@suffix k i, behind a ‖ with the tags of its first morpheme where rules ask for tags.
// Nothing is built and nothing is added to the classes. Tested by tests/unit/run/runner_test.cc, tests/published/.
#pragma once

#include <array>
#include <cstdint>
#include <unordered_map>
#include <vector>

#include "compile/cascade_data.h"
#include "model/readings.h"

namespace tiersmith {

class InputLetters {
 public:
  explicit InputLetters(const CascadeData& data);

  // What the cascade was not compiled for, if anything: a symbol, or the tags of a morpheme together.
  enum class Missing { kNothing, kSymbol, kTags };
  // The tokens of a reading of an untagged grammar are all there is to it.
  Missing Of(const std::vector<Token>& tokens, std::vector<LetterClasses::Parts>* letters) const;
  Missing Of(const Reading& reading, std::vector<LetterClasses::Parts>* letters) const;
  // Null: the cascade does not read it.
  const LetterClasses::Parts* Bound(Boundary boundary, std::uint64_t tags) const;

 private:
  Missing Add(const std::vector<Token>& tokens, const std::vector<std::uint64_t>& tags,
              std::vector<LetterClasses::Parts>* letters) const;

  const bool tagged_;
  const std::uint64_t tags_read_;
  std::vector<std::array<LetterClasses::Parts, 2>> of_symbol_;  // by symbol, [not linked, linked]; class -1: none
  std::array<std::unordered_map<std::uint64_t, LetterClasses::Parts>, 5> of_boundary_;  // by boundary, tags
};

}  // namespace tiersmith
