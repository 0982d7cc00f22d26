// Longest match of symbols. See symbol_trie.h.
#include "model/symbol_trie.h"

#include <algorithm>

namespace tiersmith {

SymbolTrie::SymbolTrie() : cells_(256), symbols_(1, -1), shift_(64 - 8) {}

void SymbolTrie::Add(std::string_view text, int symbol) {
  const std::u32string normal = Normalise(text);
  if (normal.empty()) return;
  std::size_t tail = normal.size();
  while (tail > 1 && IsLeaning(normal[tail - 1]) && normal[tail - 1] != kTie && normal[tail - 1] != 0x35C) --tail;
  constexpr std::size_t kMostReordered = 5;  // beyond that only the order as written is read
  if (normal.size() - tail < 2 || normal.size() - tail > kMostReordered) {
    AddExactly(normal, symbol);
    return;
  }
  std::u32string order = normal;
  std::sort(order.begin() + static_cast<std::ptrdiff_t>(tail), order.end());
  do {
    // The reader normalises before it looks, so an order that normalisation changes is never asked for.
    AddExactly(Normalise(ToUtf8(order)), symbol);
  } while (std::next_permutation(order.begin() + static_cast<std::ptrdiff_t>(tail), order.end()));
}

void SymbolTrie::AddExactly(std::u32string_view text, int symbol) {
  std::uint32_t node = 0;
  for (const char32_t code : text) {
    std::uint32_t next = Step(node, code);
    if (next == 0) {
      next = static_cast<std::uint32_t>(symbols_.size());
      symbols_.push_back(-1);
      if (2 * (used_ + 1) > cells_.size()) Grow();
      Place(Key(node, code), next);
    }
    node = next;
  }
  if (symbols_[node] < 0) symbols_[node] = symbol;
}

void SymbolTrie::Place(std::uint64_t key, std::uint32_t next) {
  std::size_t i = Home(key);
  while (cells_[i].key != 0) i = (i + 1) & (cells_.size() - 1);
  cells_[i] = {key, next};
  ++used_;
}

void SymbolTrie::Grow() {
  std::vector<Cell> old(cells_.size() * 2);
  old.swap(cells_);
  --shift_;
  used_ = 0;
  for (const Cell& cell : old) {
    if (cell.key != 0) Place(cell.key, cell.next);
  }
}

}  // namespace tiersmith
