// UTF-8 helpers over utf8proc: validation, walking, normalisation, display width. "ɑ̃" is one cell wide.
// Tested by tests/unit/base/.
#pragma once

#include <cstddef>
#include <string>
#include <string_view>

namespace tiersmith {

// Offset of the first byte that is not part of well-formed UTF-8, or npos.
std::size_t FirstBadByte(std::string_view text);
inline bool IsUtf8(std::string_view text) { return FirstBadByte(text) == std::string_view::npos; }

// Reads the code point at *position and moves past it. A malformed byte is read as U+FFFD, one byte long.
// Requires *position < text.size().
char32_t NextCodePoint(std::string_view text, std::size_t* position);
void AppendCodePoint(std::string& text, char32_t code_point);

// Normal forms of Unicode. Text that is not UTF-8 comes back unchanged.
std::string ToNfc(std::string_view text);
std::string ToNfd(std::string_view text);

// True of combining marks (general categories Mn, Mc, Me).
bool IsMark(char32_t code_point);
// Terminal cells: 0 for combining and other zero-width characters, 2 for wide ones; a control character counts 1.
int CellWidth(char32_t code_point);
int DisplayWidth(std::string_view text);
std::size_t CountCodePoints(std::string_view text);

// "U+014B".
std::string CodePointName(char32_t code_point);

}  // namespace tiersmith
