// Values as bytes, little-endian and of fixed width, and back: the alphabet of machine files.
//
// The two classes have the same members, so that one list of fields serves to write and to read (run/machine_file.cc). A
// reader trusts nothing: what would lie past the end is read as 0 or nothing, and Good() is false from then on. Whether
// numbers make sense is for the caller to say (Require). Tested by tests/unit/base/bytes_test.cc.
#pragma once

#include <cstddef>
#include <cstdint>
#include <string>
#include <string_view>

namespace tiersmith {

class ByteWriter {
 public:
  static constexpr bool kWrites = true;

  // Integers and enumerations of up to 32 bits, as four bytes.
  template <class T>
  void Number(T value) {
    Put(static_cast<std::uint32_t>(static_cast<std::int32_t>(value)), 4);
  }
  void Long(std::uint64_t value) { Put(value, 8); }
  void Real(float value);
  void Text(std::string_view text);
  // Of a list that follows, item by item.
  void Size(std::size_t size) { Long(size); }
  void Require(bool) {}

  const std::string& bytes() const { return bytes_; }

 private:
  void Put(std::uint64_t value, int width);

  std::string bytes_;
};

class ByteReader {
 public:
  static constexpr bool kWrites = false;

  explicit ByteReader(std::string_view bytes) : bytes_(bytes) {}

  template <class T>
  void Number(T& value) {
    value = static_cast<T>(static_cast<std::int32_t>(static_cast<std::uint32_t>(Take(4))));
  }
  void Long(std::uint64_t& value) { value = Take(8); }
  void Real(float& value);
  void Text(std::string& text);
  // Never more than the bytes that are left: an item takes at least one.
  void Size(std::size_t& size);
  void Require(bool condition) { good_ = good_ && condition; }

  bool Good() const { return good_; }
  bool AtEnd() const { return bytes_.empty(); }

 private:
  std::uint64_t Take(int width);

  std::string_view bytes_;
  bool good_ = true;
};

}  // namespace tiersmith
