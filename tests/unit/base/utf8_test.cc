// UTF-8 helpers against The Unicode Standard 15.0, tables 3-6 and 3-7 (byte patterns) and UAX #15 (normal forms).
#include "base/utf8.h"

#include <catch2/catch.hpp>

using namespace tiersmith;

TEST_CASE("well-formed and malformed UTF-8", "[base]") {
  CHECK(FirstBadByte("") == std::string::npos);
  CHECK(FirstBadByte("t͡sɛŋ̊ ‖ 𝼆") == std::string::npos);
  // The Unicode Standard 15.0, table 3-7: no overlong forms, surrogates, or values past U+10FFFF.
  CHECK(FirstBadByte("ab\xC0\xAF") == 2);
  CHECK(FirstBadByte("\xED\xA0\x80") == 0);
  CHECK(FirstBadByte("a\xF4\x90\x80\x80") == 1);
  CHECK(FirstBadByte("\xE2\x82") == 0);
  CHECK(FirstBadByte("\x80") == 0);
  CHECK(FirstBadByte("se\xF1or") == 2);  // Latin-1
}

TEST_CASE("a malformed byte is walked over one at a time", "[base]") {
  const std::string text = "a\xFF\xC3\xA9";
  std::size_t position = 0;
  CHECK(NextCodePoint(text, &position) == U'a');
  CHECK(NextCodePoint(text, &position) == 0xFFFD);
  CHECK(position == 2);
  CHECK(NextCodePoint(text, &position) == 0xE9);
  CHECK(position == text.size());
}

TEST_CASE("normal forms", "[base]") {
  CHECK(ToNfc("e\u0301") == "\u00E9");  // UAX #15, figure 3
  CHECK(ToNfd("\u00E9") == "e\u0301");
  CHECK(ToNfd("\u212B") == "A\u030A");  // ANGSTROM SIGN, a singleton: UAX #15, figure 3
  CHECK(ToNfc("\u212B") == "\u00C5");
  CHECK(ToNfd("q\u0307\u0323") == "q\u0323\u0307");  // canonical order: UAX #15, figure 5
  CHECK(ToNfc("\xFF") == "\xFF");
}

TEST_CASE("cells", "[base]") {
  CHECK(DisplayWidth("ŋ̊a") == 2);
  CHECK(DisplayWidth("t͡s") == 2);
  CHECK(DisplayWidth("ã́") == 1);
  CHECK(DisplayWidth("語") == 2);  // UAX #11: Wide
  CHECK(CodePointName(U'ŋ') == "U+014B");
  CHECK(CountCodePoints("t͡s") == 3);
}
