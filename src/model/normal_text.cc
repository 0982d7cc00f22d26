// Normalisation of forms. See normal_text.h.
#include "model/normal_text.h"

#include <utf8proc.h>

#include <array>

#include "base/utf8.h"

namespace tiersmith {
namespace {

constexpr char32_t kTableSize = 0x3000;
constexpr std::uint8_t kSpecial = 255;  // decomposes, or is equated with another sign

struct Equation {
  char32_t from;
  const char32_t* to;
};
// Signs that stand for one another on input.
constexpr Equation kEquations[] = {
    {U'g', U"\u0261"},         {U':', U"\u02D0"},         {U'\'', U"\u02BC"},        {0x2019, U"\u02BC"},
    {0x35C, U"\u0361"},        {0x2A6, U"t\u0361s"},      {0x2A3, U"d\u0361z"},      {0x2A7, U"t\u0361\u0283"},
    {0x2A4, U"d\u0361\u0292"}, {0x2A8, U"t\u0361\u0255"}, {0x2A5, U"d\u0361\u0291"},
};

// Combining class of each code point, or kSpecial. 254 distinct classes would not fit beside it, but Unicode
// uses none above 240.
const std::array<std::uint8_t, kTableSize>& Table() {
  static const std::array<std::uint8_t, kTableSize> table = [] {
    std::array<std::uint8_t, kTableSize> t{};
    for (char32_t code = 0; code < kTableSize; ++code) {
      const utf8proc_property_t* property = utf8proc_get_property(static_cast<utf8proc_int32_t>(code));
      utf8proc_int32_t buffer[8];
      int boundary = 0;
      const utf8proc_ssize_t n =
          utf8proc_decompose_char(static_cast<utf8proc_int32_t>(code), buffer, 8,
                                  static_cast<utf8proc_option_t>(UTF8PROC_STABLE | UTF8PROC_DECOMPOSE), &boundary);
      const bool decomposes = n != 1 || buffer[0] != static_cast<utf8proc_int32_t>(code);
      t[code] = decomposes ? kSpecial : static_cast<std::uint8_t>(property->combining_class);
    }
    for (const Equation& equation : kEquations) t[equation.from] = kSpecial;
    return t;
  }();
  return table;
}

std::uint8_t CombiningClass(char32_t code) {
  if (code < kTableSize && Table()[code] != kSpecial) return Table()[code];
  return static_cast<std::uint8_t>(utf8proc_get_property(static_cast<utf8proc_int32_t>(code))->combining_class);
}

// Appends in canonical order: a mark moves before marks of a higher class.
void Append(std::vector<NormalText::Unit>& units, NormalText::Unit unit, std::uint8_t combining_class) {
  units.push_back(unit);
  if (combining_class == 0) return;
  std::size_t i = units.size() - 1;
  while (i > 0 && CombiningClass(units[i - 1].code) > combining_class) {
    units[i] = units[i - 1];
    --i;
  }
  units[i] = unit;
}

void AppendSpecial(std::vector<NormalText::Unit>& units, NormalText::Unit unit) {
  for (const Equation& equation : kEquations) {
    if (equation.from != unit.code) continue;
    for (const char32_t* to = equation.to; *to != 0; ++to) {
      unit.code = *to;
      Append(units, unit, CombiningClass(*to));
    }
    return;
  }
  utf8proc_int32_t buffer[32];
  int boundary = 0;
  const utf8proc_ssize_t n =
      utf8proc_decompose_char(static_cast<utf8proc_int32_t>(unit.code), buffer, 32,
                              static_cast<utf8proc_option_t>(UTF8PROC_STABLE | UTF8PROC_DECOMPOSE), &boundary);
  if (n <= 0) {
    Append(units, unit, 0);
    return;
  }
  for (utf8proc_ssize_t i = 0; i < n && i < 32; ++i) {
    unit.code = static_cast<char32_t>(buffer[i]);
    Append(units, unit, CombiningClass(unit.code));
  }
}

}  // namespace

void NormalText::Assign(std::string_view text) {
  static const std::array<std::uint8_t, kTableSize>& table = Table();
  units.clear();
  std::size_t position = 0;
  while (position < text.size()) {
    Unit unit;
    unit.begin = static_cast<std::uint32_t>(position);
    const unsigned char first = static_cast<unsigned char>(text[position]);
    if (first < 0x80) {
      unit.code = first;
      ++position;
    } else if (first >= 0xC2 && first < 0xE0 && position + 1 < text.size() &&
               (static_cast<unsigned char>(text[position + 1]) & 0xC0) == 0x80) {
      unit.code = (static_cast<char32_t>(first & 0x1F) << 6) | (static_cast<unsigned char>(text[position + 1]) & 0x3F);
      position += 2;
    } else {
      unit.code = NextCodePoint(text, &position);
    }
    unit.end = static_cast<std::uint32_t>(position);
    const std::uint8_t entry = unit.code < kTableSize ? table[unit.code] : kSpecial;
    if (entry == 0) {
      units.push_back(unit);
    } else if (entry == kSpecial) {
      AppendSpecial(units, unit);
    } else {
      Append(units, unit, entry);
    }
  }
}

std::u32string Normalise(std::string_view text) {
  NormalText normal;
  normal.Assign(text);
  std::u32string result;
  for (const NormalText::Unit& unit : normal.units) result += unit.code;
  return result;
}

std::string ToUtf8(std::u32string_view text) {
  std::string result;
  for (const char32_t code : text) AppendCodePoint(result, code);
  return result;
}

bool IsLeaning(char32_t code) {
  if (code < 0x80 || code == kLengthSign || code == 0x2D1 || code == 0x2C8 || code == 0x2CC) return false;
  switch (utf8proc_category(static_cast<utf8proc_int32_t>(code))) {
    case UTF8PROC_CATEGORY_MN:
    case UTF8PROC_CATEGORY_MC:
    case UTF8PROC_CATEGORY_ME:
    case UTF8PROC_CATEGORY_LM:
    case UTF8PROC_CATEGORY_SK:
      return true;
    default:
      return false;
  }
}

}  // namespace tiersmith
