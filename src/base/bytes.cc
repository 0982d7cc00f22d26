#include "base/bytes.h"

#include <cstring>

namespace tiersmith {

void ByteWriter::Put(std::uint64_t value, int width) {
  for (int i = 0; i < width; ++i) bytes_ += static_cast<char>(value >> (8 * i) & 0xFF);
}

void ByteWriter::Real(float value) {
  static_assert(sizeof(float) == 4, "single precision, IEEE 754");
  std::uint32_t bits = 0;
  std::memcpy(&bits, &value, sizeof bits);
  Put(bits, 4);
}

void ByteWriter::Text(std::string_view text) {
  Size(text.size());
  bytes_ += text;
}

std::uint64_t ByteReader::Take(int width) {
  Require(bytes_.size() >= static_cast<std::size_t>(width));
  if (!good_) return 0;
  std::uint64_t value = 0;
  for (int i = 0; i < width; ++i) value |= static_cast<std::uint64_t>(static_cast<unsigned char>(bytes_[i])) << (8 * i);
  bytes_.remove_prefix(width);
  return value;
}

void ByteReader::Real(float& value) {
  const auto bits = static_cast<std::uint32_t>(Take(4));
  std::memcpy(&value, &bits, sizeof bits);
}

void ByteReader::Text(std::string& text) {
  std::size_t size = 0;
  Size(size);
  text = bytes_.substr(0, size);
  bytes_.remove_prefix(size);
}

void ByteReader::Size(std::size_t& size) {
  const std::uint64_t said = Take(8);
  Require(said <= bytes_.size());
  size = good_ ? static_cast<std::size_t>(said) : 0;
}

}  // namespace tiersmith
