// Longest match of symbols over normalised code points.
//
// Example: with t, t͡ʃ and ʃ listed, "t͡ʃʃ" is t͡ʃ and ʃ. Diacritics are a set: every order of those at a
// symbol's end is added, so tʰ̪ and t̪ʰ are one symbol. Does not handle: boundaries and length (text.cc).
// Tested by tests/unit/model/text_test.cc.
#pragma once

#include <cstdint>
#include <string>
#include <string_view>
#include <vector>

#include "model/normal_text.h"

namespace tiersmith {

class SymbolTrie {
 public:
  SymbolTrie();
  // Adds a symbol as it is written; earlier ones win. All orders of its last leaning signs are added.
  void Add(std::string_view text, int symbol);

  struct Match {
    int symbol = -1;
    std::size_t end = 0;  // index of the unit after the match
  };
  Match Longest(const NormalText::Unit* units, std::size_t begin, std::size_t size) const {
    Match match;
    std::uint32_t node = 0;
    for (std::size_t i = begin; i < size; ++i) {
      node = Step(node, units[i].code);
      if (node == 0) break;
      if (symbols_[node] >= 0) match = {symbols_[node], i + 1};
    }
    return match;
  }

 private:
  struct Cell {
    std::uint64_t key = 0;  // 0: free
    std::uint32_t next = 0;
  };
  static std::uint64_t Key(std::uint32_t node, char32_t code) {
    return (static_cast<std::uint64_t>(node) << 21 | code) + 1;
  }
  std::size_t Home(std::uint64_t key) const { return (key * 0x9E3779B97F4A7C15ull) >> shift_; }
  // The node after `code`, or 0.
  std::uint32_t Step(std::uint32_t node, char32_t code) const {
    const std::uint64_t key = Key(node, code);
    for (std::size_t i = Home(key);; i = (i + 1) & (cells_.size() - 1)) {
      if (cells_[i].key == key) return cells_[i].next;
      if (cells_[i].key == 0) return 0;
    }
  }
  void AddExactly(std::u32string_view text, int symbol);
  void Place(std::uint64_t key, std::uint32_t next);
  void Grow();

  std::vector<Cell> cells_;
  std::vector<int> symbols_;  // per node
  std::size_t used_ = 0;
  int shift_ = 0;
};

}  // namespace tiersmith
