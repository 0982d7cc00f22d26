// The words and letters of the notation, shared by the outline, the parser and the printer.
// Tested by tests/unit/grammar/ebnf_test.cc, which holds the lists against grammar/notation.ebnf.
#pragma once

#include <string_view>
#include <vector>

namespace tiersmith::notation {

// May follow a pattern, a set or a list of names, and so can be names only in double quotes.
const std::vector<std::string_view>& ReservedWords();
bool IsReserved(std::string_view word);

// Have a meaning of their own when they stand bare in a bundle (`heavy`, `long`); names elsewhere.
const std::vector<std::string_view>& BundleWords();
bool IsBundleWord(std::string_view word);

// Letters with their marks, ASCII digits, `_`. Subscripts and superscripts are quantities, never part of a
// name, although Unicode's own rule for names takes them in.
bool IsNameStart(char32_t c);
bool IsNameCharacter(char32_t c);
bool IsGreekVariable(char32_t c);  // α β γ δ

// How many of the last characters of an ASCII-tailed name are a quantity: 2 for `C_0`, 0 for `V1`.
std::size_t QuantityTail(std::string_view name);

// Can be written without quotes, in every place where a name may stand.
bool IsPlainName(std::string_view name);
// Signs no bare symbol may hold: forms and patterns give them a meaning of their own.
bool IsBarredFromSymbols(char32_t c);
// Whether a symbol of `segments` and `diacritics` can be written without quotes.
bool IsPlainSymbol(std::string_view symbol);

// The code point at `position` of valid UTF-8, and its length in bytes. A broken byte is U+FFFD of length 1.
struct CodePoint {
  char32_t value = 0;
  std::size_t length = 1;
};
CodePoint CodePointAt(std::string_view text, std::size_t position);

}  // namespace tiersmith::notation
