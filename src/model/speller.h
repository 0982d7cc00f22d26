// The spelling of a language: letters <-> symbols, by the lines of `spelling`.
//
// With `ng = ŋ; c = k; n = ŋ before /k/` the letters "canku" are kaŋku or kanku: both are written so, both are given.
// Reading: at each place the longest letters that some line names (or that are a symbol themselves) and with which the
// rest can be read; of equally long ones each, but a symbol that is always written otherwise gives way to a line. So "ng" is ŋ and never n with ɡ, unless a line parts the two (`n'g = nɡ`). Of
// several readings those that would not be written as typed are left out, but for lines that are read only.
// Writing: the longest right side that fits; of equally long ones one with a context goes first, then the first written;
// what no line writes stands for itself. Contexts look at the neighbouring segments inside the word, over `-` and `=`.
//
// Not here: `length doubled`, which holds for symbols too (text.h). Tested by tests/unit/model/spelling_test.cc.
#pragma once

#include <memory>
#include <string>
#include <string_view>
#include <vector>

#include "model/grammar.h"
#include "model/text.h"

namespace tiersmith {

// Not thread-safe.
class Speller {
 public:
  explicit Speller(const Grammar& grammar);
  ~Speller();

  // Letters -> the same form in symbols, tags and boundaries as they stand. Several if the spelling leaves it open. At
  // most `kMostReadings`, further ones are an error.
  static constexpr std::size_t kMostReadings = 16;
  bool Read(std::string_view letters, Reader::Side side, std::vector<std::string>* readings, TextError* error) const;
  // A form in symbols -> letters. In surface forms `-` and `=` are not written unless a line says so; underlying forms keep
  // them, since they would fall together without. Text that cannot be read (∅) stays.
  std::string Write(std::string_view text, Reader::Side side) const;

 private:
  struct Impl;
  std::unique_ptr<Impl> impl_;
};

// Rows of which a side is spelled, in symbols from now on: underlying forms with all their readings, surfaces as so many
// that pass. A row that cannot be read is an error and left out.
void ReadSpelled(const Speller& speller, std::vector<DataRow>* rows, Diagnostics& diagnostics);

}  // namespace tiersmith
