// UTF-8 helpers, on utf8proc. See utf8.h. Tested by tests/unit/base/utf8_test.cc.
#include "base/utf8.h"

#include <utf8proc.h>

#include <cstdio>
#include <cstdlib>

namespace tiersmith {
namespace {

const utf8proc_uint8_t* Bytes(std::string_view text) { return reinterpret_cast<const utf8proc_uint8_t*>(text.data()); }

std::string Normalise(std::string_view text, utf8proc_option_t options) {
  utf8proc_uint8_t* result = nullptr;
  const utf8proc_ssize_t size = utf8proc_map(Bytes(text), static_cast<utf8proc_ssize_t>(text.size()), &result,
                                             static_cast<utf8proc_option_t>(UTF8PROC_STABLE | options));
  if (size < 0) return std::string(text);
  std::string normal(reinterpret_cast<const char*>(result), static_cast<std::size_t>(size));
  std::free(result);
  return normal;
}

bool IsAscii(std::string_view text) {
  for (const char c : text) {
    if (static_cast<unsigned char>(c) >= 0x80) return false;
  }
  return true;
}

}  // namespace

std::size_t FirstBadByte(std::string_view text) {
  std::size_t position = 0;
  while (position < text.size()) {
    utf8proc_int32_t code_point = 0;
    const utf8proc_ssize_t length =
        utf8proc_iterate(Bytes(text) + position, static_cast<utf8proc_ssize_t>(text.size() - position), &code_point);
    if (length <= 0) return position;
    position += static_cast<std::size_t>(length);
  }
  return std::string_view::npos;
}

char32_t NextCodePoint(std::string_view text, std::size_t* position) {
  utf8proc_int32_t code_point = 0;
  const utf8proc_ssize_t length =
      utf8proc_iterate(Bytes(text) + *position, static_cast<utf8proc_ssize_t>(text.size() - *position), &code_point);
  if (length <= 0) {
    ++*position;
    return 0xFFFD;
  }
  *position += static_cast<std::size_t>(length);
  return static_cast<char32_t>(code_point);
}

void AppendCodePoint(std::string& text, char32_t code_point) {
  utf8proc_uint8_t buffer[4];
  const utf8proc_ssize_t length = utf8proc_encode_char(static_cast<utf8proc_int32_t>(code_point), buffer);
  text.append(reinterpret_cast<const char*>(buffer), static_cast<std::size_t>(length));
}

std::string ToNfc(std::string_view text) {
  return IsAscii(text) ? std::string(text) : Normalise(text, UTF8PROC_COMPOSE);
}

std::string ToNfd(std::string_view text) {
  return IsAscii(text) ? std::string(text) : Normalise(text, UTF8PROC_DECOMPOSE);
}

bool IsMark(char32_t code_point) {
  const utf8proc_category_t category = utf8proc_category(static_cast<utf8proc_int32_t>(code_point));
  return category == UTF8PROC_CATEGORY_MN || category == UTF8PROC_CATEGORY_MC || category == UTF8PROC_CATEGORY_ME;
}

int CellWidth(char32_t code_point) {
  const auto c = static_cast<utf8proc_int32_t>(code_point);
  if (utf8proc_category(c) == UTF8PROC_CATEGORY_CC) return 1;
  if (IsMark(code_point)) return 0;
  return utf8proc_charwidth(c);
}

int DisplayWidth(std::string_view text) {
  int width = 0;
  for (std::size_t position = 0; position < text.size();) width += CellWidth(NextCodePoint(text, &position));
  return width;
}

std::size_t CountCodePoints(std::string_view text) {
  std::size_t count = 0;
  for (std::size_t position = 0; position < text.size(); ++count) NextCodePoint(text, &position);
  return count;
}

std::string CodePointName(char32_t code_point) {
  char buffer[16];
  std::snprintf(buffer, sizeof buffer, "U+%04X", static_cast<unsigned>(code_point));
  return buffer;
}

}  // namespace tiersmith
