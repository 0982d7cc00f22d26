// The insides of a Cascade, for src/run/ and tests.
#pragma once

#include <memory>
#include <string>
#include <vector>

#include "compile/cascade.h"
#include "compile/tape.h"
#include "letters/classes.h"

namespace tiersmith {

// Consecutive rules composed into one machine. Its symbols are strings of letters, [flags, class, rest, ...] as in
// compile/rule_machine.h; one start.
struct Segment {
  std::vector<int> rules;  // indexes into Grammar::rules
  Tape machine;
  std::size_t classes = 0, letters = 0;
  double seconds = 0;
  bool exact = true;  // false: what comes in was not followed letter by letter from the start
};

// A letter of an underlying form, and the symbol it was written with.
struct InputLetter {
  LetterClasses::Parts parts;
  int symbol = -1;  // -1: a boundary
  Boundary boundary = Boundary::kNone;
  std::uint64_t tags = 0;  // of a boundary
  bool linked = false;     // its root goes on to the next slot
};

struct CascadeData {
  const Grammar* grammar = nullptr;
  std::unique_ptr<LetterClasses> classes;
  std::vector<InputLetter> inputs;
  std::vector<Segment> segments;
  std::uint64_t tags_read = 0;  // those of FormItem::tags that some rule asks for; the letters have no others
};

// The letters of a form as a cascade reads them.
std::vector<Letter> LettersOf(const Form& form, const CascadeData& data);

// The form these letters spell, with tags; null: a letter that no underlying form has ("?").
std::string WriteInputs(const Grammar& grammar, const std::vector<const InputLetter*>& letters);

// For agreement tests: compiles over given letters (any sharing), keeps all link bits, and leaves ambiguous and far-reaching
// changes in the machine as flags instead of refusing the grammar.
std::unique_ptr<Cascade> CompileForTesting(const Grammar& grammar, const std::vector<Letter>& letters,
                                           const Limits& limits, Diagnostics& diagnostics);

}  // namespace tiersmith
