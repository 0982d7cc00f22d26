// Unicode names of characters. The table is made by make_character_names.py.
#include "model/character_names.h"

#include <utf8proc.h>

#include <algorithm>
#include <iterator>

namespace tiersmith {
namespace {

struct NamedCharacter {
  char32_t code;
  const char* name;
};
constexpr NamedCharacter kNames[] = {
#include "model/character_names.inc"
};

const char* CategoryName(char32_t code) {
  switch (utf8proc_category(static_cast<utf8proc_int32_t>(code))) {
    case UTF8PROC_CATEGORY_LU:
      return "capital letter";
    case UTF8PROC_CATEGORY_LL:
      return "small letter";
    case UTF8PROC_CATEGORY_LT:
    case UTF8PROC_CATEGORY_LO:
      return "letter";
    case UTF8PROC_CATEGORY_LM:
      return "modifier letter";
    case UTF8PROC_CATEGORY_MN:
    case UTF8PROC_CATEGORY_MC:
    case UTF8PROC_CATEGORY_ME:
      return "combining mark";
    case UTF8PROC_CATEGORY_ND:
    case UTF8PROC_CATEGORY_NL:
    case UTF8PROC_CATEGORY_NO:
      return "digit or number";
    case UTF8PROC_CATEGORY_PC:
    case UTF8PROC_CATEGORY_PD:
    case UTF8PROC_CATEGORY_PS:
    case UTF8PROC_CATEGORY_PE:
    case UTF8PROC_CATEGORY_PI:
    case UTF8PROC_CATEGORY_PF:
    case UTF8PROC_CATEGORY_PO:
      return "punctuation";
    case UTF8PROC_CATEGORY_SM:
    case UTF8PROC_CATEGORY_SC:
    case UTF8PROC_CATEGORY_SK:
    case UTF8PROC_CATEGORY_SO:
      return "sign";
    case UTF8PROC_CATEGORY_ZS:
    case UTF8PROC_CATEGORY_ZL:
    case UTF8PROC_CATEGORY_ZP:
      return "space";
    case UTF8PROC_CATEGORY_CC:
    case UTF8PROC_CATEGORY_CF:
      return "invisible control character";
    default:
      return "character without a name";
  }
}

}  // namespace

std::string CharacterName(char32_t code) {
  const auto found = std::lower_bound(std::begin(kNames), std::end(kNames), code,
                                      [](const NamedCharacter& named, char32_t c) { return named.code < c; });
  if (found != std::end(kNames) && found->code == code) return found->name;
  return CategoryName(code);
}

}  // namespace tiersmith
