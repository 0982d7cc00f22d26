// Runs one compiled segment over a string of letters.
//
// The machine is non-deterministic but unambiguous: for each input exactly one path is accepted. The walker keeps the
// few states that are possible after each letter, and at the end follows the accepted one back.
#pragma once

#include <cstdint>
#include <vector>

#include "compile/cascade_data.h"

namespace tiersmith {

class Walker {
 public:
  explicit Walker(const Segment& segment);

  // `letters` is replaced by what comes out; false if the string is not in the machine's domain. `flags`: those of
  // compile/rule_machine.h that the path carries (only in machines compiled for testing).
  bool Run(std::vector<LetterClasses::Parts>* letters, std::int32_t* flags);

 private:
  struct Step {
    std::int32_t state;
    std::int32_t previous;  // index into the column before
    std::int32_t out;
  };

  const Segment& segment_;
  int classes_ = 0;
  std::vector<std::int32_t> first_;  // by state * classes_ + class: first arc, one past the last at the next index
  std::vector<TapeArc> arcs_;
  std::vector<Step> steps_;
  std::vector<std::size_t> columns_;
  std::vector<LetterClasses::Parts> written_;
};

}  // namespace tiersmith
