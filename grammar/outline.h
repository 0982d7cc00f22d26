// The outline of a .tier file: where its sections begin and end, and the entries inside their blocks.
//
// Example: `segments { t̪ = t [+distributed] }` is one section with one entry; the parser proper then
// reads each entry by itself, so an error in one never hides the next, and indentation needs no grammar.
// Not here: what an entry says (parse.cc). Tested by tests/unit/grammar/outline_test.cc.
#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "base/diagnostics.h"

namespace tiersmith::outline {

enum class SectionKind {
  kLanguage,
  kInclude,
  kStrict,
  kTree,
  kSegments,
  kArchisegments,
  kAllophones,
  kDiacritics,
  kOmit,
  kClass,
  kPattern,
  kFuse,
  kSharing,
  kRule,
  kComplete,
  kLexicon,
  kParadigm,
  kSpelling,
  kLength,
  kPrint,
  kData,
  kLater,  // a word of the notation whose section this release does not run
};

// The kind of section a word begins, if it begins one.
std::optional<SectionKind> FindSection(std::string_view word);

struct Entry {
  Span span;
  bool broken = false;  // an unclosed form or string in it has been reported: not worth parsing
};

struct Section {
  SectionKind kind = SectionKind::kLater;
  std::string word;
  Span whole;
  Span keyword;
  Entry head;  // from after the word to the block, or to the end
  bool has_block = false;
  Entry body;  // what stands between the braces
  bool closed = true;
  std::vector<Entry> entries;  // of the block; a rule is not cut
};

// Requires: text is the text of `file`.
// Ensures:  every byte that is not blank, comment or reported lies in one section.
std::vector<Section> Cut(std::string_view text, std::uint32_t file, Diagnostics& diagnostics);

}  // namespace tiersmith::outline
