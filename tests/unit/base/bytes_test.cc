// Bytes of machine files: the encoding itself, and readers of bytes that are too few.
#include "base/bytes.h"

#include <catch2/catch.hpp>

using namespace tiersmith;

TEST_CASE("numbers are little-endian and of fixed width, whatever the machine", "[base]") {
  ByteWriter file;
  file.Number(0x01020304);
  file.Number(-1);
  file.Number(true);
  file.Long(0x0102030405060708);
  file.Real(1.0F);
  file.Text("ŋ");
  const unsigned char expected[] = {4, 3, 2, 1, 255, 255,  255,  255, 1, 0, 0, 0, 8, 7, 6, 5,    4,
                                    3, 2, 1, 0, 0,   0x80, 0x3F, 2,   0, 0, 0, 0, 0, 0, 0, 0xC5, 0x8B};
  CHECK(file.bytes() == std::string(expected, expected + sizeof expected));
}

TEST_CASE("what was written is read", "[base]") {
  ByteWriter out;
  out.Number(-7);
  out.Number(std::uint32_t{0xFFFFFFFF});
  out.Real(0.25F);
  out.Text("");
  out.Text(std::string("a\0b", 3));
  ByteReader in(out.bytes());
  int number = 0;
  std::uint32_t large = 0;
  float real = 0;
  std::string empty = "x", text;
  in.Number(number);
  in.Number(large);
  in.Real(real);
  in.Text(empty);
  in.Text(text);
  CHECK(number == -7);
  CHECK(large == 0xFFFFFFFF);
  CHECK(real == 0.25F);
  CHECK(empty.empty());
  CHECK(text == std::string("a\0b", 3));
  CHECK(in.Good());
  CHECK(in.AtEnd());
}

TEST_CASE("a reader past the end reads nothing and says so", "[base]") {
  SECTION("a number") {
    ByteReader in("abc");
    int number = 5;
    in.Number(number);
    CHECK(number == 0);
    CHECK_FALSE(in.Good());
  }
  SECTION("a size larger than what is left") {
    ByteWriter out;
    out.Size(3);
    ByteReader in(out.bytes());
    std::size_t size = 7;
    in.Size(size);
    CHECK(size == 0);
    CHECK_FALSE(in.Good());
  }
  SECTION("what follows is nothing too") {
    ByteWriter out;
    out.Size(2);
    out.Number(9);
    ByteReader in(std::string_view(out.bytes()).substr(0, 9));
    std::string text;
    in.Text(text);
    int number = 5;
    in.Number(number);
    CHECK(number == 0);
    CHECK_FALSE(in.Good());
  }
}
