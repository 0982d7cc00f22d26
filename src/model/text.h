// Text <-> forms: reading /in-paɾable/ into slots and boundaries, writing a form with symbols.
//
// Input is compared after normalisation (NFD, equated signs: g ɡ, : ː, ' ʼ ’, U+035C U+0361, ʦ t͡s); symbols are
// matched longest first. `ː` is a second slot for the same root.
#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "model/grammar.h"

namespace tiersmith {

struct TextError {
  Kind kind = Kind::kUnknownCharacter;
  std::size_t offset = 0;  // byte offset into the text
  std::size_t length = 1;
  std::string message;  // names code point, Unicode name and nearest symbol for an unknown character
  std::string remedy;
};

struct Token {
  enum class Kind : std::uint8_t { kSymbol, kLength, kBoundary };
  Kind kind = Kind::kSymbol;
  int symbol = -1;
  Boundary boundary = Boundary::kNone;
  friend bool operator==(const Token& a, const Token& b) {
    return a.kind == b.kind && a.symbol == b.symbol && a.boundary == b.boundary;
  }
};

// Reads forms over one inventory. Building it costs time; keep it. Not thread-safe.
class Reader {
 public:
  explicit Reader(const Grammar& grammar);
  ~Reader();
  Reader(const Reader&) = delete;
  Reader& operator=(const Reader&) = delete;

  // Underlying: segments, archisegments, boundaries; else surface: segments and allophones.
  enum class Side { kUnderlying, kSurface };
  // Fills `tokens`, or returns false and `error`. Fast: no allocation on the good path beyond `tokens`.
  bool Read(std::string_view text, Side side, std::vector<Token>* tokens, TextError* error) const;
  // Tokens -> the form they stand for (underlying trees; a long one is one root on two slots).
  Form FormOf(const std::vector<Token>& tokens, Side side) const;

 private:
  struct Impl;
  Impl* impl_;
};

// Spells a form (boundaries `-` and `=` not written, `#` as a space, `‖` kept; empty slots and floats not written).
// False if some root has no symbol; then `no_symbol` is its content.
bool WriteForm(const Grammar& grammar, const Form& form, std::string* text, FeatureTree* no_symbol);
// The same with boundaries written and unspellable roots described ("i{+back}"), for traces.
std::string DescribeForm(const Grammar& grammar, const Form& form);

// Two surface forms that differ only as Xː against XX, or in normalisation, are the same for `check`.
std::string ComparisonKey(std::string_view surface);

}  // namespace tiersmith
