// The outline alone: which bytes are which section and entry. In `data { /a } b/ [c] }` the first brace
// closes nothing.
#include "grammar/outline.h"

#include <catch2/catch.hpp>

namespace tiersmith {
namespace {

// Sections as `word(head){entry|entry}`.
std::string Outline(const std::string& text) {
  Diagnostics diagnostics;
  std::string out;
  const auto covered = [&](Span span) { return text.substr(span.begin, span.end - span.begin); };
  for (const outline::Section& section : outline::Cut(text, 0, diagnostics)) {
    CHECK(covered(section.keyword) == section.word);
    out += section.word + "(" + covered(section.head.span) + ")";
    if (section.has_block) {
      out += "{";
      for (const outline::Entry& entry : section.entries) out += covered(entry.span) + "|";
      out += "}";
    }
  }
  for (const Diagnostic& d : diagnostics.all()) out += " !" + covered(d.span);
  return out;
}

}  // namespace

TEST_CASE("outline: sections and entries", "[unit]") {
  struct Row {
    const char* text;
    const char* outline;
  };
  const Row rows[] = {
      {"", ""},
      {"-- only a comment { \"", ""},
      {"\xEF\xBB\xBFlanguage \"V\"", "language(\"V\")"},
      {"tree { a > b; c > d }", "tree(){a > b|c > d|}"},
      {"tree {\n  a > b\n  c > d\n    e\n}", "tree(){a > b|c > d\n    e|}"},
      {"tree\n{\n  a > b }", "tree(){a > b|}"},
      {"omit { -a in {X |\n Y} }", "omit(){-a in {X ||Y|} !}"},  // Y steps back: a new entry, its brace the block's
      {"omit { -a in {X |\n         Y}\n     -b everywhere }", "omit(){-a in {X |\n         Y}|-b everywhere|}"},
      {"segments { a\tb }", "segments(){a\tb|}"},
      {"segments from \"ipa\" [C] { a }", "segments(from \"ipa\" [C]){a|}"},
      {"class V = [a] class C = {b|c}", "class(V = [a])class(C = {b|c})"},
      {"class V = [a]\n  or [b]\nclass C = [c]", "class(V = [a]\n  or [b])class(C = [c])"},
      {"class V = [a] ; class C = [c]", "class(V = [a])class(C = [c])"},
      {"rule \"a { b\" { where /x } y/ -- }\n }", "rule(\"a { b\"){}"},
      {"data { /a } b/ [c } d] 'e } f''g' ; /h/ [i] }", "data(){/a } b/ [c } d] 'e } f''g'|/h/ [i]|}"},
      {"data from \"a.tsv\" data { /a/ [b] }", "data(from \"a.tsv\")data(){/a/ [b]|}"},
      {"print syllables stress\nclass V = [a]", "print(syllables stress)class(V = [a])"},
      {"spelling { ng = ŋ; \"}\" = x; / = y }\nclass V = [a]", "spelling(){ng = ŋ|\"}\" = x|/ = y|}class(V = [a])"},
      {"lexicon { stem /a/ 'it''s }' noun }", "lexicon(){stem /a/ 'it''s }' noun|}"},
      {"stratum word {\nrule \"r\" { where }\n}\nclass V = [a]", "stratum(word){}class(V = [a])"},
      {"segments { a b\nclass V = [a]", "segments(){a b|}class(V = [a]) !{"},
      {"foo { a\nclass V = [a]", "class(V = [a]) !foo"},
      {"} class V = [a]", "class(V = [a]) !}"},
  };
  for (const Row& row : rows) {
    CAPTURE(row.text);
    CHECK(Outline(row.text) == row.outline);
  }
}

}  // namespace tiersmith
