// The library behind `segments from "ipa"`: what each symbol bears, by feature name, before any tree has a
// say.
//
// Example: ŋ is "+cons +son -syll +nasal .. Dorsal +high -low +back"; in a tree without `low` that name is
// passed over. The files are described in rulesets/ipa/README.md. Tested by tests/unit/model/library_test.cc.
#pragma once

#include <map>
#include <string>
#include <string_view>
#include <vector>

#include "base/diagnostics.h"
#include "base/source_map.h"
#include "model/feature_tree.h"
#include "model/tree.h"

namespace tiersmith {

class Library {
 public:
  struct Feature {
    std::string name;
    std::string values;  // "+", "-", "-+" (a contour); "" for a bare feature or a class node
  };
  struct Segment {
    std::string symbol;  // as SymbolKey() gives it
    std::string name;    // "voiceless bilabial stop"
    std::vector<Feature> features;
  };

  // Reads segments.tsv, diacritics.tsv and features.tsv of the library `name` as parts of the grammar; on failure adds
  // an error at `from`.
  bool Load(const std::string& name, Span from, SourceMap& sources, Diagnostics& diagnostics);

  // The segment a symbol stands for, the library's own diacritics applied; null if it is none of the
  // library's.
  const Segment* Find(std::string_view symbol);
  bool KnowsFeature(std::string_view name) const { return bare_.count(std::string(name)) != 0; }
  std::vector<std::string> Symbols() const;
  std::vector<std::string> Features() const;

  // The content of a segment in this tree (grammar/notation.md §3, "Library values"). Contours the tree has no room for
  // keep their first value; their names are added to `cut`.
  FeatureTree ContentOf(const Segment& segment, const Tree& tree, std::vector<std::string>* cut) const;

 private:
  struct Diacritic {
    std::u32string sign;
    bool before = false;
    std::vector<Feature> features;
  };
  const Segment* Compose(std::string_view symbol);

  std::map<std::string, Segment> segments_;
  std::vector<Diacritic> diacritics_;
  std::map<std::string, bool> bare_;  // feature -> is it bare in the library (class nodes are not)
};

// The one way a symbol is written in tables: normalised, equated signs made one, NFC.
std::string SymbolKey(std::string_view text);
// The same whatever order its last diacritics are written in: the key of Inventory::by_text.
std::string SymbolSetKey(std::string_view text);

}  // namespace tiersmith
