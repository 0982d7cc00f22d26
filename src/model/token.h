// What a form is made of as it is read: symbols, ː, boundaries. /ba:t-a/ is b a ː t - a.
#pragma once

#include <cstdint>

#include "model/form.h"

namespace tiersmith {

struct Token {
  enum class Kind : std::uint8_t { kSymbol, kLength, kBoundary };
  Kind kind = Kind::kSymbol;
  int symbol = -1;
  Boundary boundary = Boundary::kNone;
  friend bool operator==(const Token& a, const Token& b) {
    return a.kind == b.kind && a.symbol == b.symbol && a.boundary == b.boundary;
  }
};

}  // namespace tiersmith
