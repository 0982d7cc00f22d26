// Word lists and letter classes of the notation.
// Tested by tests/unit/grammar/ebnf_test.cc and parse_test.cc.
#include "grammar/words.h"

#include <utf8proc.h>

#include <algorithm>

namespace tiersmith::notation {

const std::vector<std::string_view>& ReservedWords() {
  static const std::vector<std::string_view> words = {
      // what begins a section or a step among the rules
      "language", "include", "strict", "given", "print", "tree", "segments", "archisegments", "allophones",
      "diacritics", "omit", "class", "pattern", "fuse", "sharing", "length", "rule", "complete", "parse", "apply",
      "stratum", "cyclic", "syllable", "mora", "foot", "stress", "melody", "dock", "lexicon", "paradigm", "data",
      "spelling", "from", "at",
      // clauses, conditions and modifiers
      "where", "otherwise", "on", "over", "within", "if", "unless", "only", "except", "derived", "preserving",
      "cutting", "prefer", "iterate", "repeat", "optional",
      // changes
      "spread", "delink", "set", "fill", "delete", "lengthen", "shorten", "insert", "merge", "swap", "link", "copy",
      // what joins them
      "to", "before", "after", "between", "in", "is", "or", "but", "not", "no", "and", "everywhere", "alpha", "shared",
      "unshared", "begins", "ends", "empty", "floating", "abstract", "without", "linked", "held",
      // domains
      "morpheme", "stem", "host", "word", "phrase"};
  return words;
}

bool IsReserved(std::string_view word) {
  const auto& words = ReservedWords();
  return std::find(words.begin(), words.end(), word) != words.end();
}

const std::vector<std::string_view>& BundleWords() {
  static const std::vector<std::string_view> words = {
      "long",       "short", "half",   "first",    "last",      "onset",   "peak", "coda",
      "appendix",   "stray", "open",   "closed",   "light",     "heavy",   "main", "stressed",
      "unstressed", "head",  "footed", "unfooted", "rightward", "leftward"};
  return words;
}

bool IsBundleWord(std::string_view word) {
  const auto& words = BundleWords();
  return std::find(words.begin(), words.end(), word) != words.end();
}

bool IsGreekVariable(char32_t c) { return c >= U'α' && c <= U'δ'; }

bool IsNameStart(char32_t c) {
  switch (utf8proc_category(static_cast<utf8proc_int32_t>(c))) {
    case UTF8PROC_CATEGORY_LU:
    case UTF8PROC_CATEGORY_LL:
    case UTF8PROC_CATEGORY_LT:
    case UTF8PROC_CATEGORY_LM:
    case UTF8PROC_CATEGORY_LO:
      return !IsGreekVariable(c);
    default:
      return false;
  }
}

bool IsNameCharacter(char32_t c) {
  if ((c >= U'0' && c <= U'9') || c == U'_' || IsGreekVariable(c)) return true;
  switch (utf8proc_category(static_cast<utf8proc_int32_t>(c))) {
    case UTF8PROC_CATEGORY_MN:
    case UTF8PROC_CATEGORY_MC:
    case UTF8PROC_CATEGORY_ME:
      return true;
    default:
      return IsNameStart(c);
  }
}

std::size_t QuantityTail(std::string_view name) {
  std::size_t digits = 0;
  while (digits < name.size() && name[name.size() - 1 - digits] >= '0' && name[name.size() - 1 - digits] <= '9')
    ++digits;
  const bool tail = digits > 0 && digits + 1 < name.size() && name[name.size() - 1 - digits] == '_';
  return tail ? digits + 1 : 0;
}

namespace {

// `x2` after the name of a node is the ASCII form of ×2.
bool LooksLikeTimes(std::string_view name) {
  return name.size() > 1 && name[0] == 'x' &&
         std::all_of(name.begin() + 1, name.end(), [](char c) { return c >= '0' && c <= '9'; });
}

}  // namespace

bool IsPlainName(std::string_view name) {
  if (name.empty() || IsReserved(name) || IsBundleWord(name) || LooksLikeTimes(name) || QuantityTail(name) > 0)
    return false;
  bool first = true;
  for (std::size_t i = 0; i < name.size();) {
    const CodePoint c = CodePointAt(name, i);
    if (first ? !IsNameStart(c.value) : !IsNameCharacter(c.value)) return false;
    first = false;
    i += c.length;
  }
  return true;
}

bool IsBarredFromSymbols(char32_t c) {
  constexpr std::u32string_view kBarred = U"-\u2212\u2013=#.\u2016|@/⟨⟩+±,ː{}[];\"";
  return kBarred.find(c) != std::u32string_view::npos;
}

bool IsPlainSymbol(std::string_view symbol) {
  if (symbol.empty() || symbol == "surface" || IsReserved(symbol)) return false;
  for (std::size_t i = 0; i < symbol.size();) {
    const CodePoint c = CodePointAt(symbol, i);
    if (c.value <= U' ' || c.value == U'\u00A0' || IsBarredFromSymbols(c.value)) return false;
    i += c.length;
  }
  return true;
}

CodePoint CodePointAt(std::string_view text, std::size_t position) {
  utf8proc_int32_t value = 0;
  const auto* bytes = reinterpret_cast<const utf8proc_uint8_t*>(text.data()) + position;
  const auto length = utf8proc_iterate(bytes, static_cast<utf8proc_ssize_t>(text.size() - position), &value);
  if (length <= 0) return {U'\uFFFD', 1};
  return {static_cast<char32_t>(value), static_cast<std::size_t>(length)};
}

}  // namespace tiersmith::notation
