// Text as the reader compares it: decomposed, with the equated signs made one (g ɡ, : ː, ' ʼ ’, U+035C
// U+0361, ʦ t͡s).
//
// Example: "tã" and "tã" (one code point or two) give the same three code points. Offsets lead back to the
// text as typed. Does not handle: which symbols there are (symbol_trie.h). Tested by
// tests/unit/model/text_test.cc.
#pragma once

#include <cstddef>
#include <cstdint>
#include <string>
#include <string_view>
#include <vector>

namespace tiersmith {

struct NormalText {
  struct Unit {
    char32_t code = 0;
    std::uint32_t begin = 0, end = 0;  // bytes of the text it came from
  };
  std::vector<Unit> units;

  // Replaces the content; keeps the memory.
  void Assign(std::string_view text);
};

std::u32string Normalise(std::string_view text);
std::string ToUtf8(std::u32string_view text);

// A sign that leans on a letter: a combining mark or a modifier letter, but not ː and the stress marks.
bool IsLeaning(char32_t code);
inline constexpr char32_t kLengthSign = 0x2D0;
inline constexpr char32_t kTie = 0x361;

}  // namespace tiersmith
