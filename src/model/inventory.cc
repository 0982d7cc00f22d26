// Completion: which symbol spells a tree.
//
// Example: where `omit { -voice in [-son] }`, the tree of d without its Laryngeal node has all that t has but
// -voice, which omit lists for t: it is spelled t. Listed symbols go before symbols with diacritics, fewest
// diacritics first. Does not handle: tones and other marks of the slot (they are no part of a root), spelling
// rules. Tested by tests/unit/model/inventory_test.cc.
#include "model/inventory.h"

#include <algorithm>

#include "model/content.h"
#include "model/library.h"

namespace tiersmith {
namespace {

// Walks a full tree beside a tree that may lack values.
class Completer {
 public:
  Completer(const Inventory& inventory, int symbol)
      : inventory_(inventory), symbol_(static_cast<std::size_t>(symbol)) {}

  // All of `part` is in `full`, and what is more there is listed by omit.
  bool Fits(const FeatureTree& full, const FeatureTree& part) const {
    if (full.value != part.value) return false;
    std::size_t p = 0;
    for (std::size_t f = 0; f < full.daughters.size();) {
      const NodeId node = full.daughters[f].node;
      const std::size_t f_end = EndOf(full, f);
      if (p < part.daughters.size() && part.daughters[p].node == node) {
        const std::size_t p_end = EndOf(part, p);
        if (p_end - p != f_end - f) return false;  // a contour is never completed in part
        for (; f < f_end; ++f, ++p) {
          if (!Fits(full.daughters[f], part.daughters[p])) return false;
        }
      } else {
        if (f_end - f > 1 || !AllOmitted(full.daughters[f])) return false;
        f = f_end;
      }
    }
    return p == part.daughters.size();
  }

 private:
  static std::size_t EndOf(const FeatureTree& tree, std::size_t begin) {
    std::size_t end = begin;
    while (end < tree.daughters.size() && tree.daughters[end].node == tree.daughters[begin].node) ++end;
    return end;
  }
  // A value that omit lists for the symbol, or a class node with nothing but such values under it.
  bool AllOmitted(const FeatureTree& full) const {
    if (!full.daughters.empty()) {
      if (full.node < inventory_.standing.size() && inventory_.standing[full.node]) return false;
      for (std::size_t f = 0; f < full.daughters.size(); ++f) {
        if (EndOf(full, f) - f > 1 || !AllOmitted(full.daughters[f])) return false;
      }
      return true;
    }
    return std::any_of(inventory_.omitted.begin(), inventory_.omitted.end(), [&](const Inventory::OmitEntry& entry) {
      return entry.node == full.node && entry.value == full.value && symbol_ < entry.takes.size() &&
             entry.takes[symbol_];
    });
  }

  const Inventory& inventory_;
  std::size_t symbol_;
};

}  // namespace

const Inventory::Spelling& Inventory::Spell(const FeatureTree& root) const {
  const auto found = spellings_.find(root);
  if (found != spellings_.end()) return found->second;
  return spellings_.emplace(root, Complete(root)).first->second;
}

Inventory::Spelling Inventory::Complete(const FeatureTree& root) const {
  for (; tiered_ < symbols.size(); ++tiered_) {
    const Symbol& symbol = symbols[tiered_];
    if (!symbol.completes) continue;
    const std::size_t tier = symbol.kind == Symbol::Kind::kComposite ? static_cast<std::size_t>(symbol.diacritics) : 0;
    if (tiers_.size() <= tier) tiers_.resize(tier + 1);
    tiers_[tier].push_back(static_cast<int>(tiered_));
  }
  Spelling spelling;
  for (const std::vector<int>& tier : tiers_) {
    for (const int symbol : tier) {
      const FeatureTree& full = symbols[static_cast<std::size_t>(symbol)].full;
      const bool fits = omitted.empty() ? full == root : Completer(*this, symbol).Fits(full, root);
      if (fits) spelling.candidates.push_back(symbol);
    }
    if (!spelling.candidates.empty()) break;
  }
  if (spelling.candidates.size() == 1) spelling.symbol = spelling.candidates[0];
  return spelling;
}

bool Inventory::LiteralMatches(int literal, const FeatureTree& root) const {
  const int symbol = literals[static_cast<std::size_t>(literal)].symbol;
  const Symbol& declared = symbols[static_cast<std::size_t>(symbol)];
  if (root == declared.full || root == declared.underlying) return true;
  return declared.completes && Spell(root).symbol == symbol;
}

std::string Inventory::Describe(const FeatureTree& root, const Tree& tree) const {
  const int spelled = Spell(root).symbol;
  if (spelled >= 0) return symbols[static_cast<std::size_t>(spelled)].text;
  const Symbol* nearest = nullptr;
  std::string difference;
  int fewest = 0;
  for (const Symbol& symbol : symbols) {
    if (symbol.kind == Symbol::Kind::kComposite) continue;
    for (const FeatureTree* content : {&symbol.full, &symbol.underlying}) {
      int steps = 0;
      std::string text = Difference(tree, *content, root, &steps);
      if (nearest != nullptr && steps >= fewest) continue;
      nearest = &symbol;
      fewest = steps;
      difference = std::move(text);
    }
  }
  if (nearest == nullptr) return "?";
  return difference.empty() ? nearest->text : nearest->text + "{" + difference + "}";
}

std::string Inventory::Declaration(const FeatureTree& root, const Tree& tree) const {
  std::string declaration;
  int fewest = 0;
  for (const Symbol& symbol : symbols) {
    if (symbol.kind != Symbol::Kind::kSegment) continue;
    int steps = 0;
    const std::string difference = Difference(tree, symbol.full, root, &steps);
    if (!declaration.empty() && steps >= fewest) continue;
    declaration = symbol.text + " [" + difference + "]";
    fewest = steps;
  }
  return declaration;
}

std::optional<int> Inventory::Find(std::string_view text) const {
  auto found = by_text.find(std::string(text));
  if (found == by_text.end()) found = by_text.find(SymbolSetKey(text));
  if (found == by_text.end()) return std::nullopt;
  return found->second;
}

std::vector<int> Inventory::UnderlyingSymbols(int diacritics) const {
  std::vector<int> result;
  for (std::size_t i = 0; i < symbols.size(); ++i) {
    const bool few = symbols[i].kind != Symbol::Kind::kComposite || symbols[i].diacritics <= diacritics;
    if (symbols[i].in_underlying && few) result.push_back(static_cast<int>(i));
  }
  return result;
}

}  // namespace tiersmith
