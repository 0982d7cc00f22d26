// Cuts a .tier file into sections and entries. /n/ in `where N:/n/ # delete N` may hold braces, dashes or
// semicolons of its own, so forms, strings, glosses and comments are stepped over whole.
// Tested by tests/unit/grammar/outline_test.cc.
#include "grammar/outline.h"

#include <algorithm>
#include <utility>

#include "grammar/words.h"

namespace tiersmith::outline {
namespace {

// How deep brackets may stand in one entry; deeper is refused, so that the parser's recursion is bounded.
constexpr int kDeepest = 64;

struct SectionWord {
  std::string_view word;
  SectionKind kind;
  bool block;   // may have a block
  bool joined;  // other sections may follow on its line
};

constexpr SectionWord kSectionWords[] = {
    {"language", SectionKind::kLanguage, false, true},
    {"include", SectionKind::kInclude, false, true},
    {"strict", SectionKind::kStrict, false, true},
    {"tree", SectionKind::kTree, true, true},
    {"segments", SectionKind::kSegments, true, true},
    {"archisegments", SectionKind::kArchisegments, true, true},
    {"allophones", SectionKind::kAllophones, true, true},
    {"diacritics", SectionKind::kDiacritics, true, true},
    {"omit", SectionKind::kOmit, true, true},
    {"class", SectionKind::kClass, false, true},
    {"pattern", SectionKind::kPattern, false, true},
    {"fuse", SectionKind::kFuse, false, true},
    {"sharing", SectionKind::kSharing, false, true},
    {"rule", SectionKind::kRule, true, true},
    {"complete", SectionKind::kComplete, false, true},
    {"data", SectionKind::kData, true, true},
    {"given", SectionKind::kLater, false, false},
    {"print", SectionKind::kPrint, false, false},
    {"length", SectionKind::kLength, false, true},
    {"parse", SectionKind::kLater, false, true},
    {"apply", SectionKind::kLater, false, false},
    {"stratum", SectionKind::kLater, true, false},
    {"syllable", SectionKind::kLater, true, true},
    {"mora", SectionKind::kLater, true, true},
    {"foot", SectionKind::kLater, true, true},
    {"stress", SectionKind::kLater, true, true},
    {"melody", SectionKind::kLater, true, true},
    {"dock", SectionKind::kLater, false, true},
    {"lexicon", SectionKind::kLexicon, true, true},
    {"paradigm", SectionKind::kParadigm, true, true},
    {"spelling", SectionKind::kSpelling, true, true},
};

const SectionWord* FindWord(std::string_view word) {
  const auto* found = std::find_if(std::begin(kSectionWords), std::end(kSectionWords),
                                   [&](const SectionWord& w) { return w.word == word; });
  return found == std::end(kSectionWords) ? nullptr : found;
}

struct Token {
  enum class Kind { kEnd, kWord, kOpen, kClose, kOpenOther, kCloseOther, kSemicolon, kOther };
  Kind kind = Kind::kEnd;
  std::size_t begin = 0;
  std::size_t end = 0;
  int column = 0;  // of its first character
  bool first_on_line = false;
  bool broken = false;  // an unclosed form, string or gloss
};

class Cutter {
 public:
  Cutter(std::string_view text, std::uint32_t file, Diagnostics& diagnostics)
      : text_(text), file_(file), diagnostics_(diagnostics) {
    if (text_.substr(0, 3) == "\xEF\xBB\xBF") position_ = 3;  // a byte order mark
  }

  std::vector<Section> Run() {
    for (Token token = Next(); token.kind != Token::Kind::kEnd; token = Next()) {
      if (token.kind == Token::Kind::kSemicolon) continue;
      if (token.kind == Token::Kind::kClose) {
        diagnostics_.Error(Kind::kSyntax, SpanOf(token), "this '}' closes nothing",
                           "take it away, or open its block with '{'");
        continue;
      }
      const SectionWord* word = token.kind == Token::Kind::kWord ? FindWord(Text(token)) : nullptr;
      if (word == nullptr) {
        diagnostics_.Error(Kind::kSyntax, SpanOf(token),
                           "expected the word that begins a section, found '" + std::string(Text(token)) + "'",
                           "sections begin with words such as tree, segments, class, rule, data");
        SkipToSection();
        continue;
      }
      CutSection(token, *word);
    }
    return std::move(sections_);
  }

 private:
  std::string_view Text(const Token& token) const { return text_.substr(token.begin, token.end - token.begin); }
  Span MakeSpan(std::size_t begin, std::size_t end) const {
    return {file_, static_cast<std::uint32_t>(begin), static_cast<std::uint32_t>(std::max(begin, end))};
  }
  Span SpanOf(const Token& token) const { return MakeSpan(token.begin, token.end); }
  bool At(std::string_view sign) const { return text_.substr(position_, sign.size()) == sign; }

  // ---- tokens -------------------------------------------------------------------------------
  void SkipBlanks() {
    while (position_ < text_.size()) {
      const char c = text_[position_];
      if (c == '\n') {
        line_start_ = ++position_;
        fresh_line_ = true;
      } else if (c == ' ' || c == '\t' || c == '\r' || c == '\f' || c == '\v') {
        ++position_;
      } else if (At("\xC2\xA0")) {  // a no-break space
        position_ += 2;
      } else if (At("--")) {
        position_ = LineEnd(position_);
      } else {
        return;
      }
    }
  }

  std::size_t LineEnd(std::size_t from) const { return std::min(text_.find('\n', from), text_.size()); }

  // Counted on from where it was last asked for, so that long lines cost no more than short ones.
  int Column() {
    if (counted_to_ < line_start_ || counted_to_ > position_) {
      counted_to_ = line_start_;
      column_ = 0;
    }
    while (counted_to_ < position_) {
      column_ = text_[counted_to_] == '\t' ? (column_ / 8 + 1) * 8 : column_ + 1;
      counted_to_ += notation::CodePointAt(text_, counted_to_).length;
    }
    return column_;
  }

  Token Next() {
    SkipBlanks();
    Token token;
    token.begin = position_;
    token.first_on_line = std::exchange(fresh_line_, false);
    if (position_ >= text_.size()) {
      token.end = position_;
      return token;
    }
    token.column = Column();
    token.kind = Step(token);
    token.end = position_;
    set_follows_ = SetFollows(token);
    return token;
  }

  // In `spelling` a slash is a letter, but for literals in a context: `n = ŋ before /k/ or {/ɡ/ | /x/}`.
  bool SetFollows(const Token& token) const {
    static constexpr std::string_view kBeforeSets[] = {"before", "after", "between", "or", "and", "not", "|"};
    const std::string_view text = Text(token);
    return std::find(std::begin(kBeforeSets), std::end(kBeforeSets), text) != std::end(kBeforeSets) ||
           (text == "{" && set_follows_);
  }

  void Back(const Token& token) {
    position_ = token.begin;
    fresh_line_ = token.first_on_line;
    line_start_ = text_.rfind('\n', token.begin == 0 ? 0 : token.begin - 1);
    line_start_ = line_start_ == std::string_view::npos || token.begin == 0 ? 0 : line_start_ + 1;
  }

  Token::Kind Step(Token& token) {
    const char c = text_[position_];
    switch (c) {
      case '{':
        ++position_;
        return Token::Kind::kOpen;
      case '}':
        ++position_;
        return Token::Kind::kClose;
      case '(':
        ++position_;
        return Token::Kind::kOpenOther;
      case ')':
      case ']':
        ++position_;
        return Token::Kind::kCloseOther;
      case ';':
        ++position_;
        return Token::Kind::kSemicolon;
      case '"':
        return Enclosed(token, "\"", "string");
      case '[':
        if (section_ == "data") return Enclosed(token, "]", "surface form");
        ++position_;
        return Token::Kind::kOpenOther;
      case '/':
        if (section_ != "spelling" || set_follows_) return Enclosed(token, "/", "form");
        break;
      case '<':
        if (section_ == "data" || section_ == "lexicon" || section_ == "paradigm") return Enclosed(token, ">", "form");
        break;
      case '\'':
        if (section_ == "data" || section_ == "lexicon") return Gloss(token);
        break;
      default:
        break;
    }
    if (At("+/-")) {
      position_ += 3;
      return Token::Kind::kOther;
    }
    if (At("⟨")) return Enclosed(token, "⟩", "form");
    return Plain();
  }

  // A word, or one code point of anything else.
  Token::Kind Plain() {
    notation::CodePoint c = notation::CodePointAt(text_, position_);
    const bool word = notation::IsNameStart(c.value);
    do {
      position_ += c.length;
      if (position_ >= text_.size()) break;
      c = notation::CodePointAt(text_, position_);
    } while (word && notation::IsNameCharacter(c.value));
    return word ? Token::Kind::kWord : Token::Kind::kOther;
  }

  // Forms, surfaces and strings never span lines.
  Token::Kind Enclosed(Token& token, std::string_view closer, const char* what) {
    const std::size_t inside = position_ + notation::CodePointAt(text_, position_).length;
    const std::size_t close = text_.find(closer, inside);
    if (close != std::string_view::npos && close < LineEnd(inside)) {
      position_ = close + closer.size();
    } else {
      Unclosed(token, inside, std::string(closer), what);
    }
    return Token::Kind::kOther;
  }

  Token::Kind Gloss(Token& token) {
    const std::size_t end = LineEnd(position_);
    for (std::size_t i = position_ + 1; i < end; ++i) {
      if (text_[i] != '\'') continue;
      if (i + 1 < end && text_[i + 1] == '\'') {
        ++i;
      } else if (i + 1 >= end || !notation::IsNameStart(notation::CodePointAt(text_, i + 1).value)) {
        position_ = i + 1;
        return Token::Kind::kOther;
      }
    }
    Unclosed(token, position_ + 1, "'", "gloss");
    return Token::Kind::kOther;
  }

  // In sections of later releases only the braces matter, and their signs may mean something else.
  void Unclosed(Token& token, std::size_t inside, const std::string& closer, const char* what) {
    if (later_) {
      position_ = inside;
      return;
    }
    std::size_t end = LineEnd(inside);
    while (end > inside && (text_[end - 1] == ' ' || text_[end - 1] == '\r' || text_[end - 1] == '\t')) --end;
    position_ = end;
    token.broken = true;
    std::string remedy = "close it with " + closer + " before the end of the line";
    if (section_ == "rule" && closer == "/")
      remedy += "; where a rule applies is said in its pattern: where X:[+voice] #";
    diagnostics_.Error(Kind::kUnclosedForm, MakeSpan(token.begin, end),
                       std::string("this ") + what + " is not closed on its line", remedy);
  }

  // ---- sections -----------------------------------------------------------------------------
  void SkipToSection() {
    while (position_ < text_.size()) {
      position_ = LineEnd(position_);
      SkipBlanks();
      const std::size_t begin = position_;
      if (begin >= text_.size()) return;
      const Token::Kind kind = Plain();
      const bool section = kind == Token::Kind::kWord && FindWord(text_.substr(begin, position_ - begin)) != nullptr;
      position_ = begin;
      if (section) return;
      fresh_line_ = false;
    }
  }

  static void Extend(Entry& entry, const Token& token) {
    if (entry.span.end == entry.span.begin) entry.span.begin = static_cast<std::uint32_t>(token.begin);
    entry.span.end = static_cast<std::uint32_t>(token.end);
    entry.broken = entry.broken || token.broken;
  }

  void CutSection(const Token& keyword, const SectionWord& word) {
    section_ = word.word;
    later_ = word.kind == SectionKind::kLater;
    Section section;
    section.kind = word.kind;
    section.word = std::string(word.word);
    section.keyword = SpanOf(keyword);
    section.head.span = MakeSpan(keyword.end, keyword.end);
    section.whole = section.keyword;
    CutHead(keyword, word, section);
    section.whole.end = std::max({section.whole.end, section.head.span.end, section.body.span.end});
    section_ = {};
    later_ = false;
    sections_.push_back(std::move(section));
  }

  void CutHead(const Token& keyword, const SectionWord& word, Section& section) {
    int depth = 0;
    bool after_comparing = false;  // `data comparing length`: here `length` begins nothing
    for (;;) {
      const Token token = Next();
      const bool opens = token.kind == Token::Kind::kOpen && word.block && depth == 0;
      const bool outside = token.first_on_line && token.column <= keyword.column && !opens;
      const bool own_name = (word.kind == SectionKind::kClass || word.kind == SectionKind::kPattern) &&
                            section.head.span.end == section.head.span.begin && !token.first_on_line;
      const bool other = token.kind == Token::Kind::kWord && FindWord(Text(token)) != nullptr && !after_comparing &&
                         !own_name && (token.first_on_line || (word.joined && depth <= 0));
      if (token.kind == Token::Kind::kEnd || outside || other) {
        Back(token);
        return;
      }
      if (token.kind == Token::Kind::kSemicolon && depth <= 0) return;
      if (opens) {
        section.has_block = true;
        CutBlock(keyword, token, section);
        return;
      }
      if (IsOpen(token)) ++depth;
      if (IsClose(token)) {
        if (depth == 0 && token.kind == Token::Kind::kClose) {  // closes something further out
          Back(token);
          return;
        }
        --depth;
      }
      after_comparing = Text(token) == "comparing";
      Deep(depth, token, section.head);
      Extend(section.head, token);
    }
  }

  static bool IsOpen(const Token& token) {
    return token.kind == Token::Kind::kOpen || token.kind == Token::Kind::kOpenOther;
  }
  static bool IsClose(const Token& token) {
    return token.kind == Token::Kind::kClose || token.kind == Token::Kind::kCloseOther;
  }

  void Deep(int depth, const Token& token, Entry& entry) {
    if (depth <= kDeepest || entry.broken || later_) return;
    diagnostics_.Error(Kind::kLimit, SpanOf(token), "brackets stand more than " + std::to_string(kDeepest) + " deep",
                       "name the inner parts with class or pattern");
    entry.broken = true;
  }

  void CutBlock(const Token& keyword, const Token& brace, Section& section) {
    const bool whole = section.kind == SectionKind::kRule || section.kind == SectionKind::kLater;
    Entry entry;
    int entry_column = 0;
    int braces = 0;
    int others = 0;
    const auto finish = [&] {
      if (entry.span.end > entry.span.begin && !whole) section.entries.push_back(entry);
      entry = Entry();
      entry.span.file = file_;
      braces = others = 0;
    };
    finish();
    section.body.span = MakeSpan(brace.end, brace.end);
    for (;;) {
      const Token token = Next();
      if (token.kind == Token::Kind::kEnd || (token.first_on_line && BeginsSection(keyword, token, section))) {
        Back(token);
        finish();
        section.closed = false;
        if (!section.body.broken) ReportUnclosed(brace, section);
        return;
      }
      const bool started = entry.span.end > entry.span.begin;
      const bool shallow = token.first_on_line && started && token.column <= entry_column;
      if (shallow && !whole) finish();
      if (token.kind == Token::Kind::kClose && braces == 0) {
        finish();
        section.body.span.end = static_cast<std::uint32_t>(token.begin);
        section.body.span.begin = std::min(section.body.span.begin, section.body.span.end);
        section.whole.end = static_cast<std::uint32_t>(token.end);
        return;
      }
      if (token.kind == Token::Kind::kSemicolon && !whole && braces == 0) {
        finish();
        continue;
      }
      if (token.kind == Token::Kind::kOpen) ++braces;
      if (token.kind == Token::Kind::kClose) --braces;
      if (token.kind == Token::Kind::kOpenOther) ++others;
      if (token.kind == Token::Kind::kCloseOther) --others;
      if (entry.span.end == entry.span.begin) entry_column = token.column;
      Deep(braces + others, token, whole ? section.body : entry);
      Extend(entry, token);
      section.body.broken = section.body.broken || token.broken;
      section.body.span.end = static_cast<std::uint32_t>(token.end);
    }
  }

  // A block whose brace is missing ends where a line no deeper than its keyword begins a section.
  bool BeginsSection(const Token& keyword, const Token& token, const Section& section) const {
    return token.kind == Token::Kind::kWord && token.column <= keyword.column && section.word != "stratum" &&
           FindWord(Text(token)) != nullptr;
  }

  void ReportUnclosed(const Token& brace, const Section& section) {
    diagnostics_.Error(Kind::kUnclosedBlock, SpanOf(brace), "the block of this '" + section.word + "' is not closed",
                       "add '}' where it ends");
  }

  std::string_view text_;
  std::uint32_t file_;
  Diagnostics& diagnostics_;
  std::vector<Section> sections_;
  std::string_view section_;  // the word of the section being cut: what its signs mean depends on it
  bool later_ = false;
  bool set_follows_ = false;  // the last token is one that a set may follow
  std::size_t position_ = 0;
  std::size_t line_start_ = 0;
  std::size_t counted_to_ = 0;
  int column_ = 0;
  bool fresh_line_ = true;
};

}  // namespace

std::optional<SectionKind> FindSection(std::string_view word) {
  const SectionWord* found = FindWord(word);
  return found == nullptr ? std::nullopt : std::optional<SectionKind>(found->kind);
}

std::vector<Section> Cut(std::string_view text, std::uint32_t file, Diagnostics& diagnostics) {
  return Cutter(text, file, diagnostics).Run();
}

}  // namespace tiersmith::outline
