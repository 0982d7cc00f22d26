// Symbols and the trees they stand for; Completion: which symbol spells a tree.
#pragma once

#include <map>
#include <optional>
#include <string>
#include <string_view>
#include <unordered_map>
#include <vector>

#include "base/diagnostics.h"
#include "model/feature_tree.h"
#include "model/tree.h"

namespace tiersmith {

struct Symbol {
  enum class Kind { kSegment, kArchisegment, kAllophone, kComposite };  // kComposite: base with diacritics
  std::string text;                                                     // NFC
  Kind kind = Kind::kSegment;
  FeatureTree full;           // as declared
  FeatureTree underlying;     // full, less what `omit` takes: what the symbol means in a form
  bool in_underlying = true;  // may stand in underlying forms
  int diacritics = 0;         // how many beyond the base
  bool completes = true;      // may be chosen by Completion: not archisegments and what bears an abstract node
  int base = -1;              // kComposite: the listed symbol under the diacritics
  std::vector<int> marks;     // kComposite: indices into Inventory::marks, ascending
  std::vector<FeatureTree> slot_borne;  // instances on the slot (tones), written by diacritics
  Span span;
};

// A declared diacritic.
struct Mark {
  std::string text;     // NFC, without ◌
  bool before = false;  // written before its base: ⁿ◌
  bool surface = false;
  Span span;
};

// What one `/../` in a pattern accepts: spelled so by Completion, or equal to the symbol as declared.
struct Literal {
  int symbol = -1;
};

class Inventory {
 public:
  // Listed symbols first (segments, archisegments, allophones in order of declaration), then composites.
  std::vector<Symbol> symbols;
  std::vector<Literal> literals;
  std::vector<Mark> marks;  // in order of declaration

  // What a tree is spelled by. Exactly one symbol: `symbol`; otherwise -1 with the candidates (none: no symbol;
  // several: undecided).
  struct Spelling {
    int symbol = -1;
    std::vector<int> candidates;
  };
  // Completion (grammar/notation.md §4). Memoised; not thread-safe.
  const Spelling& Spell(const FeatureTree& root) const;
  bool LiteralMatches(int literal, const FeatureTree& root) const;

  // Nearest listed symbols to a tree and their differences, for messages and traces: "i{+back}".
  std::string Describe(const FeatureTree& root, const Tree& tree) const;
  // The right side of an entry that declares a symbol for a tree, from the nearest segment: "i [+back]".
  std::string Declaration(const FeatureTree& root, const Tree& tree) const;
  std::optional<int> Find(std::string_view text) const;

  // The symbols that may stand in underlying forms, each once, with at most `diacritics` diacritics on one base.
  std::vector<int> UnderlyingSymbols(int diacritics = 2) const;

  // Filled by the checker (model/check_inventory.cc); see there.
  std::unordered_map<std::string, int> by_text;  // by SymbolSetKey (model/library.h); ask through Find
  struct OmitEntry {
    NodeId node = 0;
    Value value = 0;
    std::vector<bool> takes;  // per symbol: does `omit` list this value for it
  };
  std::vector<OmitEntry> omitted;
  std::vector<bool> standing;  // per node of the tree: a class node that is not pruned when bare

 private:
  struct TreeHash {
    std::size_t operator()(const FeatureTree& t) const { return Hash(t); }
  };
  Spelling Complete(const FeatureTree& root) const;
  mutable std::unordered_map<FeatureTree, Spelling, TreeHash> spellings_;
  mutable std::vector<std::vector<int>> tiers_;  // symbols that complete, by number of diacritics; filled by Spell
  mutable std::size_t tiered_ = 0;
};

}  // namespace tiersmith
