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
#include "model/token.h"

namespace tiersmith {

struct TextError {
  Kind kind = Kind::kUnknownCharacter;
  std::size_t offset = 0;  // byte offset into the text
  std::size_t length = 1;
  std::string message;  // names code point, Unicode name and nearest symbol for an unknown character
  std::string remedy;
};

// `@loan` or √ in a typed form.
struct TypedTag {
  std::size_t token = 0;  // how many tokens stand before it
  std::string name;       // √: "stem"
  std::size_t offset = 0, length = 1;
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
  // Fills `tokens`, or returns false and `error`. Fast: no allocation on the good path beyond `tokens`. `@tag` and √ are
  // errors unless `tags` takes them. Where the grammar says `length doubled`, a letter twice is read as long.
  bool Read(std::string_view text, Side side, std::vector<Token>* tokens, TextError* error,
            std::vector<TypedTag>* tags = nullptr) const;
  // Tokens -> the form they stand for (underlying trees; a long one is one root on two slots).
  Form FormOf(const std::vector<Token>& tokens, Side side) const;

 private:
  struct Impl;
  Impl* impl_;
};

// Tokens as they are typed. With `length doubled` a long letter is written twice.
std::string TextOf(const Grammar& grammar, const std::vector<Token>& tokens);
// The boundary that a character is typed for, or kNone. (The ‖ typed || is two characters.)
Boundary BoundaryOf(char32_t code);
// `√` or `@tag` at `position`; moves past it. False if there is none, or if the tag is written wrong (then `error`).
bool ReadTag(std::string_view text, std::size_t* position, TypedTag* tag, TextError* error);

// Spells a form (boundaries `-` and `=` not written, `#` as a space, `‖` kept; empty slots and floats not written).
// False if some root has no symbol; then `no_symbol` is its content.
bool WriteForm(const Grammar& grammar, const Form& form, std::string* text, FeatureTree* no_symbol);
// The same with boundaries written and unspellable roots described ("i{+back}"), for traces.
std::string DescribeForm(const Grammar& grammar, const Form& form);

// Two surface forms that differ only as Xː against XX (unless length is compared), in boundaries or in normalisation,
// are the same for `check`.
std::string ComparisonKey(std::string_view surface, bool comparing_length = false);

}  // namespace tiersmith
