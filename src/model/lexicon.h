// Entries of the lexicon, checked: `suffix /-ki/ 'PL' strong at word` is a morph of two tokens behind a boundary,
// of kind suffix, with the tag `strong`.
#pragma once

#include <cstdint>
#include <string>
#include <vector>

#include "base/diagnostics.h"
#include "model/token.h"

namespace tiersmith {

// The first four of Grammar::tags, in this order.
enum class MorphemeKind : std::uint8_t { kStem, kPrefix, kSuffix, kClitic };

// "stem", "prefix", "suffix", "clitic".
const char* MorphemeKindName(MorphemeKind kind);

// The form of one morpheme, apart from the boundary that joins it to its word.
struct Morph {
  std::vector<Token> tokens;  // symbols and ː; none: //
  std::string text;           // the same in symbols: two morphs are alike if their texts are
  Boundary before = Boundary::kNone, after = Boundary::kNone;
  Span span;
};

struct Suppletion {
  std::vector<std::string> in;  // all of them must be values of the cell
  Morph form;
};

struct LexiconEntry {
  MorphemeKind kind = MorphemeKind::kStem;
  std::string id;
  Morph form;
  std::string gloss;
  std::vector<std::string> tags;
  double weight = 1;  // how often, against the other stems
  std::string at;     // where it attaches; "" if unsaid
  std::vector<Suppletion> suppletive;
  Span span;
};

struct Lexicon {
  std::vector<LexiconEntry> entries;  // in the order of the file
  bool has_stems() const;
};

}  // namespace tiersmith
