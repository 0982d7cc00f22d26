// See speller.h.
#include "model/speller.h"

#include <algorithm>
#include <array>
#include <set>
#include <unordered_map>
#include <utility>

#include "base/utf8.h"
#include "model/content.h"
#include "model/normal_text.h"
#include "model/symbol_trie.h"

namespace tiersmith {
namespace {

// How many places are visited for one form before it is given up.
constexpr int kMostSteps = 200000;

bool EndsWord(const Token& token) { return token.kind == Token::Kind::kBoundary && token.boundary >= Boundary::kWord; }

// The letters as they are compared with what is written: without tags, # as a space.
std::u32string Bare(std::string_view letters) {
  std::string bare;
  for (std::size_t i = 0; i < letters.size();) {
    TypedTag tag;
    TextError error;
    if (ReadTag(letters, &i, &tag, &error)) continue;
    bare += letters[i] == '#' ? ' ' : letters[i];
    ++i;
  }
  return Normalise(bare);
}

}  // namespace

struct Speller::Impl {
  explicit Impl(const Grammar& g) : grammar(g), reader(g) {
    for (std::size_t i = 0; i < g.inventory.symbols.size(); ++i)
      symbols.Add(g.inventory.symbols[i].text, static_cast<int>(i));
    for (const SpellingLine& line : g.spelling.lines) letters.push_back(Normalise(line.letters));
    for (std::size_t i = 0; i < letters.size(); ++i) {
      for (const Reader::Side side : {Reader::Side::kUnderlying, Reader::Side::kSurface}) {
        if (Reads(Line(i), side)) by_letter[static_cast<int>(side)][letters[i].front()].push_back(static_cast<int>(i));
      }
      if (!Line(i).writes) continue;
      if (Line(i).means.empty()) {
        inserting.push_back(static_cast<int>(i));
      } else {
        by_token[KeyOf(Line(i).means.front())].push_back(static_cast<int>(i));
      }
    }
    const auto longer = [&](int a, int b) { return letters[Index(a)].size() > letters[Index(b)].size(); };
    for (auto& side : by_letter) {
      for (auto& [letter, lines] : side) std::stable_sort(lines.begin(), lines.end(), longer);
    }
    // A line with a context is there for just this place.
    const auto rank = [&](int line) {
      return std::make_pair(Line(Index(line)).means.size(), HasContext(Line(Index(line))));
    };
    for (auto& [token, lines] : by_token)
      std::stable_sort(lines.begin(), lines.end(), [&](int a, int b) { return rank(a) > rank(b); });
    for (std::size_t i = 0; i < g.inventory.symbols.size(); ++i)
      otherwise.push_back(WrittenOtherwise(static_cast<int>(i)));
  }

  const Grammar& grammar;
  Reader reader;
  std::vector<std::u32string> letters;  // beside Spelling::lines
  SymbolTrie symbols;
  std::array<std::unordered_map<char32_t, std::vector<int>>, 2> by_letter;  // by side: lines read, longest first
  std::unordered_map<int, std::vector<int>> by_token;                       // by KeyOf their first: in the order tried
  std::vector<int> inserting;                                               // lines that write letters for nothing
  std::vector<char> otherwise;                                              // by symbol: never written as itself

  static std::size_t Index(int line) { return static_cast<std::size_t>(line); }
  const SpellingLine& Line(std::size_t line) const { return grammar.spelling.lines[line]; }
  static int KeyOf(const Token& token) {
    return token.kind == Token::Kind::kSymbol
               ? token.symbol
               : -1 - 8 * static_cast<int>(token.kind) - static_cast<int>(token.boundary);
  }
  static bool HasContext(const SpellingLine& line) { return line.before || line.after || line.between; }

  // A line may be read, and all it means may stand on this side.
  bool Reads(const SpellingLine& line, Reader::Side side) const {
    return line.reads && std::all_of(line.means.begin(), line.means.end(), [&](const Token& token) {
             return token.kind != Token::Kind::kSymbol || Stands(token.symbol, side);
           });
  }
  bool Stands(int symbol, Reader::Side side) const {
    const Symbol& s = grammar.inventory.symbols[static_cast<std::size_t>(symbol)];
    return side == Reader::Side::kUnderlying ? s.in_underlying : s.completes;
  }
  // Some line writes it wherever it stands, and none as what it is itself or together with others.
  bool WrittenOtherwise(int symbol) const {
    bool always = false;
    for (const SpellingLine& line : grammar.spelling.lines) {
      const auto is = [&](const Token& token) { return token.kind == Token::Kind::kSymbol && token.symbol == symbol; };
      if (!line.writes || std::none_of(line.means.begin(), line.means.end(), is)) continue;
      if (line.means.size() > 1 || line.letters == grammar.inventory.symbols[Index(symbol)].text) return false;
      always = always || !HasContext(line);
    }
    return always;
  }

  // ---- contexts
  // The symbol of the segment before (after) a place, or -1 at the edge of the word.
  static int Before(const std::vector<Token>& tokens, std::size_t place) {
    for (std::size_t i = place; i-- > 0 && !EndsWord(tokens[i]);) {
      if (tokens[i].kind == Token::Kind::kSymbol) return tokens[i].symbol;
    }
    return -1;
  }
  static int After(const std::vector<Token>& tokens, std::size_t place) {
    for (std::size_t i = place; i < tokens.size() && !EndsWord(tokens[i]); ++i) {
      if (tokens[i].kind == Token::Kind::kSymbol) return tokens[i].symbol;
    }
    return -1;
  }
  bool Passes(const SlotTest& test, int symbol) const {
    if (symbol < 0) return false;
    return tiersmith::Passes(test, grammar.inventory.symbols[static_cast<std::size_t>(symbol)].full, [&](int literal) {
      return grammar.inventory.literals[static_cast<std::size_t>(literal)].symbol == symbol;
    });
  }
  // Tokens [begin, end) are what the line means.
  bool Holds(const SpellingLine& line, const std::vector<Token>& tokens, std::size_t begin, std::size_t end) const {
    if (line.after && !Passes(*line.after, Before(tokens, begin))) return false;
    if (line.before && !Passes(*line.before, After(tokens, end))) return false;
    return !line.between || (Passes(*line.between, Before(tokens, begin)) && Passes(*line.between, After(tokens, end)));
  }

  // ---- writing
  const SpellingLine* LineFor(const std::vector<Token>& tokens, std::size_t place) const {
    const auto lines = by_token.find(KeyOf(tokens[place]));
    if (lines == by_token.end()) return nullptr;
    for (const int i : lines->second) {
      const SpellingLine& line = Line(Index(i));
      const std::size_t size = line.means.size();
      if (size > tokens.size() - place) continue;
      if (!std::equal(line.means.begin(), line.means.end(), tokens.begin() + static_cast<std::ptrdiff_t>(place)))
        continue;
      if (Holds(line, tokens, place, place + size)) return &line;
    }
    return nullptr;
  }

  std::string_view Itself(const Token& token, std::string_view last, int last_symbol, bool boundaries) const {
    switch (token.kind) {
      case Token::Kind::kSymbol:
        return grammar.inventory.symbols[Index(token.symbol)].text;
      case Token::Kind::kLength:
        return grammar.Doubles(last_symbol) ? last : "ː";
      case Token::Kind::kBoundary:
        if (token.boundary == Boundary::kWord) return " ";
        return token.boundary == Boundary::kPhrase || boundaries ? BoundarySign(token.boundary) : "";
    }
    return "";
  }

  std::string Write(const std::vector<Token>& tokens, bool boundaries) const {
    std::string out;
    std::string_view last;  // the letters of the last segment, which `length doubled` writes again
    int last_symbol = -1;
    for (std::size_t i = 0; i <= tokens.size();) {
      for (const int nothing : inserting) {
        if (!Holds(Line(Index(nothing)), tokens, i, i)) continue;
        out += Line(Index(nothing)).letters;
        break;
      }
      if (i == tokens.size()) break;
      const SpellingLine* line = LineFor(tokens, i);
      const std::string_view written =
          line != nullptr ? line->letters : Itself(tokens[i], last, last_symbol, boundaries);
      out += written;
      const std::size_t end = i + (line != nullptr ? line->means.size() : 1);
      for (; i < end; ++i) {
        if (tokens[i].kind != Token::Kind::kSymbol) continue;
        last = written;
        last_symbol = tokens[i].symbol;
      }
    }
    return out;
  }

  // ---- reading
  struct Parse {
    std::vector<Token> tokens;
    std::vector<std::pair<std::size_t, std::string>> tags;  // before which token; as typed
    bool read_only = false;                                 // by a line that is never written

    friend bool operator<(const Parse& a, const Parse& b) {
      return std::tie(a.tags, a.read_only) != std::tie(b.tags, b.read_only)
                 ? std::tie(a.tags, a.read_only) < std::tie(b.tags, b.read_only)
                 : Key(a) < Key(b);
    }
    static std::vector<std::pair<int, int>> Key(const Parse& read) {
      std::vector<std::pair<int, int>> key;
      for (const Token& token : read.tokens)
        key.emplace_back(static_cast<int>(token.kind) * 8 + static_cast<int>(token.boundary), token.symbol);
      return key;
    }
  };

  // Leaves those that are written as they were typed, or are read only; all if there is none.
  void DropNotTyped(std::string_view typed_text, std::vector<Parse>* found) const {
    const std::u32string typed = Bare(typed_text);
    const auto middle = std::stable_partition(found->begin(), found->end(), [&](const Parse& read) {
      return read.read_only || Normalise(Write(read.tokens, true)) == typed;
    });
    if (middle != found->begin()) found->erase(middle, found->end());
  }

  class Search;
};

// Goes through the letters from left to right. Lines are tried where their letters stand; whether their contexts hold
// is asked of the whole reading, at its end.
class Speller::Impl::Search {
 public:
  Search(const Impl& impl, std::string_view typed, Reader::Side side) : impl_(impl), typed_(typed), side_(side) {
    text_.Assign(typed);
  }

  bool Run(std::vector<Parse>* found, TextError* error) {
    if (!From(0) && found_.empty()) {
      *error = error_;
      return false;
    }
    found->assign(found_.begin(), found_.end());
    return true;
  }

 private:
  struct Use {  // of a line that has contexts or is never written: where it was read, and the tokens it gave
    std::size_t line, unit, begin, end;
  };
  struct Option {  // what is read next: a line, or -1 for what stands for itself
    std::size_t length;
    int line;
  };

  std::size_t size() const { return text_.units.size(); }

  // True if the rest can be read in some way.
  bool From(std::size_t unit) {
    if (++steps_ > kMostSteps || found_.size() > kMostReadings) return !found_.empty();
    // Of the last lines more is known by now; those before them have been judged.
    for (std::size_t i = uses_.size() - std::min<std::size_t>(uses_.size(), 3); i < uses_.size(); ++i) {
      if (!MayHold(uses_[i])) return OutOfPlace(uses_[i]);
    }
    if (unit == size()) return Take();
    const std::size_t begin = options_.size();
    Token itself;
    FindOptions(unit, &itself);
    const std::size_t end = options_.size();
    if (begin == end) return Tag(unit);
    bool any = false;  // of those as long as the last
    for (std::size_t i = begin; i < end && !(any && options_[i].length < options_[i - 1].length); ++i) {
      const Option option = options_[i];
      const bool read =
          option.line < 0 ? BySelf(itself, unit + option.length) : ByLine(option.line, unit, option.length);
      any = any || read;
    }
    options_.resize(begin);
    return any;
  }

  // What can be read at a place, longest first: lines in their order, and what stands for itself.
  void FindOptions(std::size_t unit, Token* itself) {
    const std::size_t begin = options_.size();
    const auto& by_letter = impl_.by_letter[static_cast<std::size_t>(side_)];
    const auto lines = by_letter.find(text_.units[unit].code);
    if (lines != by_letter.end()) {
      for (const int line : lines->second) {
        if (StandsAt(impl_.letters[Index(line)], unit)) options_.push_back({impl_.letters[Index(line)].size(), line});
      }
    }
    const std::size_t own = Itself(unit, itself);
    if (own == 0) return;
    const bool gives_way = itself->kind == Token::Kind::kSymbol && impl_.otherwise[Index(itself->symbol)] != 0;
    auto place = options_.begin() + static_cast<std::ptrdiff_t>(begin);
    for (; place != options_.end() && place->length >= own; ++place) {
      if (gives_way && place->length == own && !HasContext(impl_.Line(Index(place->line)))) return;
    }
    options_.insert(place, {own, -1});
  }
  bool StandsAt(const std::u32string& letters, std::size_t unit) const {
    if (letters.size() > size() - unit) return false;
    for (std::size_t k = 0; k < letters.size(); ++k) {
      if (text_.units[unit + k].code != letters[k]) return false;
    }
    return true;
  }

  bool BySelf(const Token& token, std::size_t next) {
    read_.tokens.push_back(token);
    const bool read = From(next);
    read_.tokens.pop_back();
    return read;
  }

  bool ByLine(int line, std::size_t unit, std::size_t length) {
    const SpellingLine& written = impl_.Line(static_cast<std::size_t>(line));
    const std::size_t begin = read_.tokens.size();
    read_.tokens.insert(read_.tokens.end(), written.means.begin(), written.means.end());
    const std::size_t uses = uses_.size();
    if (HasContext(written) || !written.writes)
      uses_.push_back({static_cast<std::size_t>(line), unit, begin, read_.tokens.size()});
    const bool read = From(unit + length);
    uses_.resize(uses);
    read_.tokens.resize(begin);
    return read;
  }

  // A symbol, ː or a boundary that is typed as it is; how many units it takes.
  std::size_t Itself(std::size_t unit, Token* token) const {
    const SymbolTrie::Match match = impl_.symbols.Longest(text_.units.data(), unit, size());
    if (match.symbol >= 0 && impl_.Stands(match.symbol, side_)) {
      *token = {Token::Kind::kSymbol, match.symbol, Boundary::kNone};
      return match.end - unit;
    }
    const char32_t code = text_.units[unit].code;
    if (code == kLengthSign) {
      *token = {Token::Kind::kLength, -1, Boundary::kNone};
      return 1;
    }
    const bool doubled = code == U'|' && unit + 1 < size() && text_.units[unit + 1].code == U'|';
    const Boundary boundary = doubled ? Boundary::kPhrase : BoundaryOf(code);
    if (boundary == Boundary::kNone) return 0;
    *token = {Token::Kind::kBoundary, -1, boundary};
    return doubled ? 2 : 1;
  }

  bool Tag(std::size_t unit) {
    TypedTag tag;
    TextError error;
    std::size_t position = text_.units[unit].begin;
    if (side_ != Reader::Side::kUnderlying || !ReadTag(typed_, &position, &tag, &error)) return Unreadable(unit);
    read_.tags.emplace_back(read_.tokens.size(), std::string(typed_.substr(tag.offset, tag.length)));
    std::size_t next = unit;
    while (next < size() && text_.units[next].begin < position) ++next;
    const bool read = From(next);
    read_.tags.pop_back();
    return read;
  }

  // False once the segment that follows shows that the line's contexts do not hold, or what stands before it does.
  bool MayHold(const Use& use) const {
    const SpellingLine& line = impl_.Line(use.line);
    const std::vector<Token>& tokens = read_.tokens;
    const bool follows = std::any_of(tokens.begin() + static_cast<std::ptrdiff_t>(use.end), tokens.end(),
                                     [](const Token& t) { return t.kind == Token::Kind::kSymbol || EndsWord(t); });
    if (follows) return impl_.Holds(line, tokens, use.begin, use.end);
    const int before = Before(tokens, use.begin);
    return (!line.after || impl_.Passes(*line.after, before)) && (!line.between || impl_.Passes(*line.between, before));
  }

  // The furthest place is the one reported.
  bool OutOfPlace(const Use& use) {
    if (use.unit < furthest_) return false;
    furthest_ = use.unit;
    const std::string& letters = impl_.Line(use.line).letters;
    const std::size_t begin = text_.units[use.unit].begin;
    const std::size_t end = text_.units[use.unit + impl_.letters[use.line].size() - 1].end;
    error_ = {Kind::kBadForm, begin, end - begin, "'" + letters + "' stands where no line of `spelling` has it",
              "see the contexts of its lines, or write the sound otherwise"};
    return false;
  }
  bool Unreadable(std::size_t unit) {
    if (unit < furthest_) return false;
    furthest_ = unit;
    std::vector<Token> tokens;
    const std::string_view rest = typed_.substr(text_.units[unit].begin);
    if (impl_.reader.Read(rest, side_, &tokens, &error_)) return false;
    error_.offset += text_.units[unit].begin;
    error_.remedy += ", or give it a line in `spelling`";
    return false;
  }

  bool Take() {
    Parse read = read_;
    for (const Use& use : uses_) {
      const SpellingLine& line = impl_.Line(use.line);
      if (!impl_.Holds(line, read.tokens, use.begin, use.end)) return OutOfPlace(use);
      read.read_only = read.read_only || !line.writes;
    }
    found_.insert(std::move(read));
    return true;
  }

  const Impl& impl_;
  const std::string_view typed_;
  const Reader::Side side_;
  NormalText text_;
  Parse read_;
  std::vector<Use> uses_;
  std::vector<Option> options_;  // of all places up to the one at hand
  std::set<Parse> found_;
  std::size_t furthest_ = 0;
  TextError error_;
  int steps_ = 0;
};

Speller::Speller(const Grammar& grammar) : impl_(std::make_unique<Impl>(grammar)) {}
Speller::~Speller() = default;

bool Speller::Read(std::string_view letters, Reader::Side side, std::vector<std::string>* readings,
                   TextError* error) const {
  readings->clear();
  std::vector<Impl::Parse> found;
  if (!Impl::Search(*impl_, letters, side).Run(&found, error)) return false;
  if (found.size() > kMostReadings) {
    *error = {Kind::kLimit, 0, letters.size(),
              "these letters can be read in more than " + std::to_string(kMostReadings) + " ways",
              "write the form in symbols, or make the lines of `spelling` less open"};
    return false;
  }
  if (found.size() > 1) impl_->DropNotTyped(letters, &found);
  for (const Impl::Parse& read : found) {
    std::string text;
    std::size_t from = 0;
    const auto write_to = [&](std::size_t to) {
      text += TextOf(impl_->grammar, {read.tokens.begin() + static_cast<std::ptrdiff_t>(from),
                                      read.tokens.begin() + static_cast<std::ptrdiff_t>(to)});
      from = to;
    };
    for (const auto& [place, tag] : read.tags) {
      write_to(place);
      text += tag;
    }
    write_to(read.tokens.size());
    if (std::find(readings->begin(), readings->end(), text) == readings->end()) readings->push_back(text);
  }
  return true;
}

std::string Speller::Write(std::string_view text, Reader::Side side) const {
  std::vector<Token> tokens;
  TextError error;
  if (!impl_->reader.Read(text, side, &tokens, &error)) return std::string(text);
  return impl_->Write(tokens, side == Reader::Side::kUnderlying);
}

}  // namespace tiersmith
