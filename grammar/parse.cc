// The notation in Spirit X3, over code points. `where N:[+nasal] C:[+cons]  spread C.Place to N` becomes a
// syntax::Rule; names are not looked up here, that is the checker's work.
//
// The outline (outline.h) has cut the file into entries; each is parsed alone by one of the grammars below.
// Alternatives are told apart by their first token, and after it everything is an expectation: a failure is
// caught in Reader::Run and becomes one diagnostic at the token where parsing stopped. Constructs of later
// releases are recognised and reported where they stand; parsing goes on behind them.
// Not here: what sections of later releases say inside their blocks. Tested by tests/unit/grammar/.
#define BOOST_SPIRIT_X3_UNICODE

#include "grammar/parse.h"

#include <boost/regex/pending/unicode_iterator.hpp>
#include <boost/spirit/home/x3.hpp>

#include <algorithm>
#include <charconv>
#include <set>
#include <stdexcept>
#include <string>
#include <utility>
#include <vector>

#include "grammar/outline.h"
#include "grammar/words.h"

namespace tiersmith {
namespace {

namespace x3 = boost::spirit::x3;
using Iterator = boost::u8_to_u32_iterator<const char*>;

// What the parse of one entry shares: where its bytes lie, and the later constructs met on the way.
struct Scene {
  const char* origin = nullptr;
  std::uint32_t file = 0;
  std::vector<syntax::Unsupported> later;
  int later_changes = 0;       // in the clause being read
  std::set<std::string> said;  // modifiers of the rule being read

  Span Between(Iterator begin, Iterator end) const {
    return {file, static_cast<std::uint32_t>(begin.base() - origin), static_cast<std::uint32_t>(end.base() - origin)};
  }
  void Later(std::string construct, Span span) {
    for (const auto& known : later)
      if (known.span.begin == span.begin) return;  // read a second time by another alternative
    later.push_back({std::move(construct), span});
  }
};
struct SceneTag;

template <class Context>
Scene& SceneOf(const Context& context) {
  return x3::get<SceneTag>(context);
}

// A mistake that is seen as one, with words of its own; thrown by actions and caught in Reader::Run.
struct Refusal {
  Span span;
  std::string message;
  std::string remedy;
};

// ---- tokens ---------------------------------------------------------------------------------------
// Small parsers of their own rather than compositions: they keep the messages short and the compile time low.

bool SkipBlank(Iterator& first, const Iterator& last) {
  if (first == last) return false;
  const char32_t c = *first;
  if (c <= U' ' || c == U'\u00A0') {
    ++first;
    return true;
  }
  if (c != U'-') return false;
  Iterator next = first;
  if (++next == last || *next != U'-') return false;
  while (first != last && *first != U'\n') ++first;
  return true;
}

bool MatchText(Iterator& first, const Iterator& last, const char32_t* text) {
  Iterator i = first;
  for (; *text != 0; ++text, ++i)
    if (i == last || *i != *text) return false;
  first = i;
  return true;
}

// The characters from first to last, as bytes.
std::string Bytes(Iterator first, Iterator last) { return std::string(first.base(), last.base()); }

// "..." on one line.
bool MatchString(Iterator& first, const Iterator& last, std::string& text) {
  if (first == last || *first != U'"') return false;
  Iterator i = first;
  const Iterator begin = ++i;
  while (i != last && *i != U'"' && *i != U'\n') ++i;
  if (i == last || *i != U'"') return false;
  text = Bytes(begin, i);
  first = ++i;
  return true;
}

// Letters and digits up to the first other character; a tail such as _0 is left to the quantity.
std::string PeekBare(Iterator first, const Iterator& last) {
  if (first == last || !notation::IsNameStart(*first)) return {};
  const Iterator begin = first;
  while (first != last && notation::IsNameCharacter(*first)) ++first;
  std::string bare = Bytes(begin, first);
  bare.resize(bare.size() - notation::QuantityTail(bare));
  return bare;
}

template <class T>
struct Token : x3::parser<T> {
  static bool const has_attribute = true;
};

struct SkipParser : x3::parser<SkipParser> {
  using attribute_type = x3::unused_type;
  static bool const has_attribute = false;
  template <class Context, class RContext, class Attribute>
  bool parse(Iterator& place, const Iterator& last, const Context&, RContext&, Attribute&) const {
    return SkipBlank(place, last);
  }
};

// A word of the notation, not followed by a character that would make it a longer name.
struct Word : x3::parser<Word> {
  using attribute_type = x3::unused_type;
  static bool const has_attribute = false;
  const char32_t* text;
  explicit constexpr Word(const char32_t* t) : text(t) {}
  template <class Context, class RContext, class Attribute>
  bool parse(Iterator& place, const Iterator& last, const Context& context, RContext&, Attribute&) const {
    Iterator first = place;
    x3::skip_over(first, last, context);
    Iterator i = first;
    if (!MatchText(i, last, text)) return false;
    // `empty_0` is the word with a quantity, `emptying` is a name.
    if (i != last && notation::IsNameCharacter(*i) && PeekBare(first, last) != Bytes(first, i)) return false;
    place = i;
    return true;
  }
};

struct Sign : x3::parser<Sign> {
  using attribute_type = x3::unused_type;
  static bool const has_attribute = false;
  const char32_t* text;
  explicit constexpr Sign(const char32_t* t) : text(t) {}
  template <class Context, class RContext, class Attribute>
  bool parse(Iterator& place, const Iterator& last, const Context& context, RContext&, Attribute&) const {
    Iterator first = place;
    x3::skip_over(first, last, context);
    if (!MatchText(first, last, text)) return false;
    place = first;
    return true;
  }
};

// Never matches: stands last among alternatives and says what all of them together are.
struct Wanted : x3::parser<Wanted> {
  using attribute_type = x3::unused_type;
  static bool const has_attribute = false;
  const char* what;
  explicit constexpr Wanted(const char* w) : what(w) {}
  template <class Context, class RContext, class Attribute>
  bool parse(Iterator& place, const Iterator&, const Context&, RContext&, Attribute&) const {
    boost::throw_exception(x3::expectation_failure<Iterator>(place, what));
  }
};

// The end of the entry; `what` lists all that could have stood there.
struct End : x3::parser<End> {
  using attribute_type = x3::unused_type;
  static bool const has_attribute = false;
  const char* what;
  explicit constexpr End(const char* w) : what(w) {}
  template <class Context, class RContext, class Attribute>
  bool parse(Iterator& place, const Iterator& last, const Context& context, RContext&, Attribute&) const {
    Iterator first = place;
    x3::skip_over(first, last, context);
    return first == last;
  }
};

// A bare or quoted name. Words beginning "@" in `what` mean that a name could stand at the place of the
// error.
struct NameToken : Token<NameToken> {
  using attribute_type = syntax::Name;
  const char* what;
  bool in_bundle;
  explicit constexpr NameToken(const char* w, bool bundle = false) : what(w), in_bundle(bundle) {}
  template <class Context, class RContext, class Attribute>
  bool parse(Iterator& place, const Iterator& last, const Context& context, RContext&, Attribute& attribute) const {
    Iterator first = place;
    x3::skip_over(first, last, context);
    Iterator i = first;
    syntax::Name name;
    if (!MatchString(i, last, name.text)) {
      name.text = PeekBare(i, last);
      if (notation::IsReserved(name.text) || (in_bundle && notation::IsBundleWord(name.text))) return false;
      while (i.base() != first.base() + name.text.size()) ++i;
    }
    if (name.text.empty()) return false;
    name.span = SceneOf(context).Between(first, i);
    place = i;
    x3::traits::move_to(std::move(name), attribute);
    return true;
  }
};

struct StringToken : Token<StringToken> {
  using attribute_type = syntax::Name;
  const char* what;
  explicit constexpr StringToken(const char* w) : what(w) {}
  template <class Context, class RContext, class Attribute>
  bool parse(Iterator& place, const Iterator& last, const Context& context, RContext&, Attribute& attribute) const {
    Iterator first = place;
    x3::skip_over(first, last, context);
    Iterator i = first;
    syntax::Name name;
    if (!MatchString(i, last, name.text)) return false;
    name.span = SceneOf(context).Between(first, i);
    place = i;
    x3::traits::move_to(std::move(name), attribute);
    return true;
  }
};

// A symbol of segments and diacritics: anything up to white space or one of { } [ ] = ; "
struct SymbolToken : Token<SymbolToken> {
  using attribute_type = syntax::Name;
  template <class Context, class RContext, class Attribute>
  bool parse(Iterator& place, const Iterator& last, const Context& context, RContext&, Attribute& attribute) const {
    Iterator first = place;
    x3::skip_over(first, last, context);
    Iterator i = first;
    syntax::Name name;
    if (!MatchString(i, last, name.text)) {
      while (i != last && !Ends(i, last)) ++i;
      name.text = Bytes(first, i);
      if (name.text.empty() || name.text == "surface" || notation::IsReserved(name.text)) return false;
      for (Iterator c = first; c != i; ++c) Refuse(context, c);
    }
    name.span = SceneOf(context).Between(first, i);
    place = i;
    x3::traits::move_to(std::move(name), attribute);
    return true;
  }
  // Signs that mean something in forms or patterns.
  template <class Context>
  static void Refuse(const Context& context, Iterator c) {
    if (!notation::IsBarredFromSymbols(*c)) return;
    Iterator next = c;
    const Span span = SceneOf(context).Between(c, ++next);
    throw Refusal{span, "a symbol cannot hold '" + Bytes(c, next) + "'",
                  "symbols are letters with marks, parted by blanks"};
  }
  static bool Ends(Iterator i, const Iterator& last) {
    const char32_t c = *i;
    return c == U'{' || c == U'}' || c == U'[' || c == U']' || c == U'=' || c == U';' || c == U'"' ||
           SkipBlank(i, last);
  }
};

// Looks ahead: the name just read is not the beginning of a longer symbol (`ⁿ` of `ⁿ◌`).
struct SymbolEnd : x3::parser<SymbolEnd> {
  using attribute_type = x3::unused_type;
  static bool const has_attribute = false;
  template <class Context, class RContext, class Attribute>
  bool parse(Iterator& place, const Iterator& last, const Context&, RContext&, Attribute&) const {
    return place == last || SymbolToken::Ends(place, last);
  }
};

// Raw text between two signs on one line: /k/, ⟨k⟩, [k].
struct RawToken : Token<RawToken> {
  using attribute_type = syntax::FormText;
  char32_t open;
  char32_t close;
  const char* what;
  constexpr RawToken(char32_t o, char32_t c, const char* w) : open(o), close(c), what(w) {}
  template <class Context, class RContext, class Attribute>
  bool parse(Iterator& place, const Iterator& last, const Context& context, RContext&, Attribute& attribute) const {
    Iterator first = place;
    x3::skip_over(first, last, context);
    if (first == last || *first != open) return false;
    Iterator i = first;
    const Iterator begin = ++i;
    while (i != last && *i != close && *i != U'\n') ++i;
    if (i == last || *i != close) return false;
    syntax::FormText form{Bytes(begin, i), open != U'/' && open != U'[', SceneOf(context).Between(begin, i)};
    place = ++i;
    x3::traits::move_to(std::move(form), attribute);
    return true;
  }
};

// 'the dog''s': two apostrophes are one, and the closing one has no letter behind it.
struct GlossToken : Token<GlossToken> {
  using attribute_type = syntax::Name;
  template <class Context, class RContext, class Attribute>
  bool parse(Iterator& place, const Iterator& last, const Context& context, RContext&, Attribute& attribute) const {
    Iterator first = place;
    x3::skip_over(first, last, context);
    if (first == last || *first != U'\'') return false;
    Iterator i = first;
    syntax::Name gloss;
    for (++i; i != last && *i != U'\n'; ++i) {
      Iterator next = i;
      ++next;
      if (*i == U'\'') {
        if (next == last || (*next != U'\'' && !notation::IsNameStart(*next))) {
          gloss.span = SceneOf(context).Between(first, next);
          place = next;
          x3::traits::move_to(std::move(gloss), attribute);
          return true;
        }
        if (*next == U'\'') i = next;
      }
      Iterator after = i;
      gloss.text += Bytes(i, ++after);
    }
    return false;
  }
};

struct BoundaryToken : Token<BoundaryToken> {
  using attribute_type = syntax::Item::Boundary;
  template <class Context, class RContext, class Attribute>
  bool parse(Iterator& place, const Iterator& last, const Context& context, RContext&, Attribute& attribute) const {
    using Boundary = syntax::Item::Boundary;
    static constexpr std::pair<const char32_t*, Boundary> kSigns[] = {
        {U"-", Boundary::kMorpheme}, {U"\u2212", Boundary::kMorpheme}, {U"\u2013", Boundary::kMorpheme},
        {U"=", Boundary::kClitic},   {U"#", Boundary::kWord},          {U"\u2016", Boundary::kPhrase},
        {U"||", Boundary::kPhrase}};
    Iterator first = place;
    x3::skip_over(first, last, context);
    for (const auto& [sign, boundary] : kSigns) {
      if (!MatchText(first, last, sign)) continue;
      place = first;
      x3::traits::move_to(Boundary(boundary), attribute);
      return true;
    }
    return false;
  }
};

struct Quantity {
  int min = 1;
  int max = 1;
};

// ₀ ₁ ₀² _0 _1^2, glued to what it counts.
struct QuantityToken : Token<QuantityToken> {
  using attribute_type = Quantity;
  template <class Context, class RContext, class Attribute>
  bool parse(Iterator& place, const Iterator& last, const Context& context, RContext&, Attribute& attribute) const {
    Iterator i = place;
    Quantity quantity;
    const bool ascii = i != last && *i == U'_';
    if (ascii ? !Number(++i, last, U'0', quantity.min) : !Number(i, last, U'\u2080', quantity.min)) return false;
    quantity.max = -1;
    if (ascii) {
      Iterator caret = i;
      if (MatchText(caret, last, U"^") && Number(caret, last, U'0', quantity.max)) i = caret;
    } else {
      Superscript(i, last, quantity.max);
    }
    const Span span = SceneOf(context).Between(place, i);
    if (quantity.max == 0 || (quantity.max > 0 && quantity.max < quantity.min))
      throw Refusal{span, "this quantity allows nothing",
                    "write the smaller number below and the larger above: X₀², X_0^2"};
    if (quantity.min > kMost || quantity.max > kMost)
      throw Refusal{span, "a quantity goes up to 99", "leave the upper number away: X₀ is any number of X"};
    place = i;
    x3::traits::move_to(Quantity(quantity), attribute);
    return true;
  }

 private:
  static constexpr int kMost = 99;
  static bool Number(Iterator& i, const Iterator& last, char32_t zero, int& number) {
    const Iterator begin = i;
    int value = 0;
    for (; i != last && *i >= zero && *i < zero + 10; ++i)
      value = std::min(value * 10 + static_cast<int>(*i - zero), 1000);
    if (i == begin) return false;
    number = value;
    return true;
  }
  // ¹ ² ³ stand apart from the other superscripts in Unicode.
  static void Superscript(Iterator& i, const Iterator& last, int& number) {
    int value = 0;
    const Iterator begin = i;
    for (; i != last; ++i) {
      const char32_t c = *i;
      const int digit = c == U'\u00B9'                                         ? 1
                        : c == U'\u00B2'                                       ? 2
                        : c == U'\u00B3'                                       ? 3
                        : c == U'\u2070' || (c >= U'\u2074' && c <= U'\u2079') ? static_cast<int>(c - U'\u2070')
                                                                               : -1;
      if (digit < 0) break;
      value = std::min(value * 10 + digit, 1000);
    }
    if (i != begin) number = value;
  }
};

struct NumberToken : Token<NumberToken> {
  using attribute_type = int;
  template <class Context, class RContext, class Attribute>
  bool parse(Iterator& place, const Iterator& last, const Context& context, RContext&, Attribute& attribute) const {
    Iterator first = place;
    x3::skip_over(first, last, context);
    Iterator i = first;
    int value = 0;
    for (; i != last && *i >= U'0' && *i <= U'9'; ++i)
      value = std::min(value * 10 + static_cast<int>(*i - U'0'), 10000);
    if (i == first) return false;
    place = i;
    x3::traits::move_to(int(value), attribute);
    return true;
  }
};

// 3, 0.25
struct DecimalToken : Token<DecimalToken> {
  using attribute_type = double;
  template <class Context, class RContext, class Attribute>
  bool parse(Iterator& place, const Iterator& last, const Context& context, RContext&, Attribute& attribute) const {
    Iterator first = place;
    x3::skip_over(first, last, context);
    Iterator i = first;
    const auto digits = [&] {
      const Iterator begin = i;
      while (i != last && *i >= U'0' && *i <= U'9') ++i;
      return i != begin;
    };
    if (!digits()) return false;
    const Iterator whole = i;
    if (!MatchText(i, last, U".") || !digits()) i = whole;
    place = i;
    const std::string digits_read = Bytes(first, i);
    double value = 0;
    if (std::from_chars(digits_read.data(), digits_read.data() + digits_read.size(), value).ec != std::errc())
      throw Refusal{SceneOf(context).Between(first, i), "this number is too large or too small",
                    "write a number with fewer digits"};
    x3::traits::move_to(double(value), attribute);
    return true;
  }
};

// The letters on the left of a line of `spelling`, or what they stand for on its right: anything up to white space
// or a sign of the line. On the right `=` is the boundary of clitics.
struct LettersToken : Token<LettersToken> {
  using attribute_type = syntax::Name;
  const char* what;
  bool right;
  constexpr LettersToken(const char* w, bool r) : what(w), right(r) {}
  template <class Context, class RContext, class Attribute>
  bool parse(Iterator& place, const Iterator& last, const Context& context, RContext&, Attribute& attribute) const {
    Iterator first = place;
    x3::skip_over(first, last, context);
    Iterator i = first;
    syntax::Name letters;
    if (!MatchString(i, last, letters.text)) {
      while (i != last && !Ends(i, last)) ++i;
      letters.text = Bytes(first, i);
      if (letters.text.empty() || notation::IsReserved(letters.text)) return false;
    }
    letters.span = SceneOf(context).Between(first, i);
    place = i;
    x3::traits::move_to(std::move(letters), attribute);
    return true;
  }

 private:
  bool Ends(Iterator i, const Iterator& last) const {
    const char32_t c = *i;
    if (c == U';' || c == U'"' || c == U'{' || c == U'}' || SkipBlank(i, last)) return true;
    return !right && (c == U'=' || c == U'<' || c == U'>');
  }
};

// ×2, x2: how many of a node one mother may hold.
struct TimesToken : Token<TimesToken> {
  using attribute_type = int;
  template <class Context, class RContext, class Attribute>
  bool parse(Iterator& place, const Iterator& last, const Context& context, RContext&, Attribute& attribute) const {
    Iterator first = place;
    x3::skip_over(first, last, context);
    Iterator i = first;
    const bool sign = MatchText(i, last, U"×");
    if (!sign && !MatchText(i, last, U"x")) return false;
    if (sign)
      while (SkipBlank(i, last)) {
      }
    int value = 0;
    const Iterator digits = i;
    for (; i != last && *i >= U'0' && *i <= U'9'; ++i) value = std::min(value * 10 + static_cast<int>(*i - U'0'), 1000);
    if (i == digits || (i != last && notation::IsNameCharacter(*i))) return false;
    if (value < 1 || value > 9)
      throw Refusal{SceneOf(context).Between(first, i), "a mother may hold 1 to 9 of a node",
                    "write ×2 for a contour of two"};
    place = i;
    x3::traits::move_to(int(value), attribute);
    return true;
  }
};

// A variable of agreement, the letter before αback.
struct VariableToken : Token<VariableToken> {
  using attribute_type = syntax::Name;
  template <class Context, class RContext, class Attribute>
  bool parse(Iterator& place, const Iterator& last, const Context& context, RContext&, Attribute& attribute) const {
    Iterator first = place;
    x3::skip_over(first, last, context);
    if (first == last || !notation::IsGreekVariable(*first)) return false;
    Iterator i = first;
    ++i;
    syntax::Name variable{Bytes(first, i), SceneOf(context).Between(first, i)};
    place = i;
    x3::traits::move_to(std::move(variable), attribute);
    return true;
  }
};

// Looks ahead: does something other than a blank or a further dot stand here, so that the dot before it is a
// path's.
struct PathAhead : x3::parser<PathAhead> {
  using attribute_type = x3::unused_type;
  static bool const has_attribute = false;
  template <class Context, class RContext, class Attribute>
  bool parse(Iterator& place, const Iterator& last, const Context&, RContext&, Attribute&) const {
    Iterator i = place;
    return place != last && *place != U'.' && !SkipBlank(i, last);
  }
};

// The stretch a parser matches, without the blanks before it (and, unlike x3::raw, none skipped when it
// fails: the spans of what stands before must not reach over them).
template <class Subject>
struct RawDirective : x3::unary_parser<Subject, RawDirective<Subject>> {
  using attribute_type = x3::raw_attribute_type;
  static bool const has_attribute = true;
  static bool const handles_container = false;
  explicit constexpr RawDirective(const Subject& inner) : x3::unary_parser<Subject, RawDirective<Subject>>(inner) {}
  template <class Context, class RContext, class Attribute>
  bool parse(Iterator& place, const Iterator& last, const Context& context, RContext& rcontext,
             Attribute& attribute) const {
    Iterator first = place;
    x3::skip_over(first, last, context);
    Iterator i = first;
    if (!this->subject.parse(i, last, context, rcontext, x3::unused)) return false;
    x3::traits::move_to(first, i, attribute);
    place = i;
    return true;
  }
  template <class Context, class RContext>
  bool parse(Iterator& place, const Iterator& last, const Context& context, RContext& rcontext, x3::unused_type) const {
    return this->subject.parse(place, last, context, rcontext, x3::unused);
  }
};
struct RawMaker {
  template <class Subject>
  constexpr auto operator[](const Subject& inner) const {
    return RawDirective<typename x3::extension::as_parser<Subject>::value_type>(x3::as_parser(inner));
  }
};
constexpr RawMaker raw{};

}  // namespace
}  // namespace tiersmith

namespace boost::spirit::x3 {
// How a token is called in "expected ...".
template <>
struct get_info<tiersmith::Word> {
  using result_type = std::string;
  std::string operator()(const tiersmith::Word& word) const { return "'" + to_utf8(std::u32string(word.text)) + "'"; }
  static std::string to_utf8(const std::u32string& text) {
    using Encoder = boost::u32_to_u8_iterator<std::u32string::const_iterator>;
    return std::string(Encoder(text.begin()), Encoder(text.end()));
  }
};
template <>
struct get_info<tiersmith::Sign> {
  using result_type = std::string;
  std::string operator()(const tiersmith::Sign& sign) const {
    return "'" + get_info<tiersmith::Word>::to_utf8(std::u32string(sign.text)) + "'";
  }
};
template <>
struct get_info<tiersmith::NameToken> {
  using result_type = std::string;
  std::string operator()(const tiersmith::NameToken& token) const { return token.what; }
};
template <>
struct get_info<tiersmith::StringToken> {
  using result_type = std::string;
  std::string operator()(const tiersmith::StringToken& token) const { return token.what; }
};
template <>
struct get_info<tiersmith::RawToken> {
  using result_type = std::string;
  std::string operator()(const tiersmith::RawToken& token) const { return token.what; }
};
template <>
struct get_info<tiersmith::SymbolToken> {
  using result_type = std::string;
  std::string operator()(const tiersmith::SymbolToken&) const { return "a symbol"; }
};
template <>
struct get_info<tiersmith::NumberToken> {
  using result_type = std::string;
  std::string operator()(const tiersmith::NumberToken&) const { return "a number"; }
};
template <>
struct get_info<tiersmith::DecimalToken> {
  using result_type = std::string;
  std::string operator()(const tiersmith::DecimalToken&) const { return "a number"; }
};
template <>
struct get_info<tiersmith::LettersToken> {
  using result_type = std::string;
  std::string operator()(const tiersmith::LettersToken& token) const { return token.what; }
};
template <class Subject, class Action>
struct get_info<action<Subject, Action>> {
  using result_type = std::string;
  std::string operator()(const action<Subject, Action>& parser) const { return what(parser.subject); }
};
template <class Subject>
struct get_info<plus<Subject>> {
  using result_type = std::string;
  std::string operator()(const plus<Subject>& parser) const { return what(parser.subject); }
};
template <class Subject>
struct get_info<tiersmith::RawDirective<Subject>> {
  using result_type = std::string;
  std::string operator()(const tiersmith::RawDirective<Subject>& parser) const { return what(parser.subject); }
};
template <class Subject>
struct get_info<no_skip_directive<Subject>> {
  using result_type = std::string;
  std::string operator()(const no_skip_directive<Subject>& parser) const { return what(parser.subject); }
};
// "a or b"; the "@" of either stands first.
inline std::string either(std::string one, std::string other) {
  const bool name_fits = one.substr(0, 1) == "@" || other.substr(0, 1) == "@";
  if (one.substr(0, 1) == "@") one.erase(0, 1);
  if (other.substr(0, 1) == "@") other.erase(0, 1);
  return (name_fits ? "@" : "") + (one == other ? one : one + " or " + other);
}
template <class Left, class Right>
struct get_info<alternative<Left, Right>> {
  using result_type = std::string;
  std::string operator()(const alternative<Left, Right>& parser) const {
    return either(what(parser.left), what(parser.right));
  }
};
// A sequence is called what it begins with: its first part, and the next one too where the first may be missing.
template <class Left, class Right>
struct get_info<sequence<Left, Right>> {
  using result_type = std::string;
  std::string operator()(const sequence<Left, Right>& parser) const { return beginning(parser.left, parser.right); }

 private:
  template <class First>
  static std::string beginning(const First& first, const Right&) {
    return what(first);
  }
  template <class Subject>
  static std::string beginning(const not_predicate<Subject>&, const Right& next) {
    return what(next);
  }
  template <class Subject>
  static std::string beginning(const optional<Subject>& first, const Right& next) {
    return either(what(first.subject), what(next));
  }
  template <class Subject>
  static std::string beginning(const kleene<Subject>& first, const Right& next) {
    return either(what(first.subject), what(next));
  }
};
template <class Subject>
struct get_info<and_predicate<Subject>> {
  using result_type = std::string;
  std::string operator()(const and_predicate<Subject>& parser) const { return what(parser.subject); }
};
template <>
struct get_info<tiersmith::Wanted> {
  using result_type = std::string;
  std::string operator()(const tiersmith::Wanted& wanted) const { return wanted.what; }
};
template <>
struct get_info<tiersmith::End> {
  using result_type = std::string;
  std::string operator()(const tiersmith::End& end) const { return end.what; }
};
}  // namespace boost::spirit::x3

namespace tiersmith {
namespace {

// ---- actions --------------------------------------------------------------------------------------

// Stores the attribute in a member of what the rule builds.
template <class M>
auto To(M member) {
  return [member](auto& context) { x3::_val(context).*member = std::move(x3::_attr(context)); };
}
template <class M>
auto Push(M member) {
  return [member](auto& context) { (x3::_val(context).*member).push_back(std::move(x3::_attr(context))); };
}
template <class M, class V>
auto Let(M member, V value) {
  return [member, value](auto& context) { x3::_val(context).*member = value; };
}
// The word a stretch begins with, or all of it if it begins with a sign.
std::string FirstWord(Iterator begin, const Iterator& end) {
  Iterator word = begin;
  while (word != end && notation::IsNameCharacter(*word)) ++word;
  return Bytes(begin, word == begin ? end : word);
}
// Notes a construct of a later release; used on raw[..].
auto NotYet(const char* construct) {
  return [construct](auto& context) {
    Scene& scene = SceneOf(context);
    scene.Later(construct, scene.Between(x3::_attr(context).begin(), x3::_attr(context).end()));
  };
}
// The same for a construct that is known by its first word.
const auto kNotYetWord = [](auto& context) {
  Scene& scene = SceneOf(context);
  const Iterator begin = x3::_attr(context).begin(), end = x3::_attr(context).end();
  scene.Later(FirstWord(begin, end), scene.Between(begin, end));
};
const auto kWhole = [](auto& context) { x3::_val(context) = std::move(x3::_attr(context)); };

const auto kSpan = [](auto& context) {
  x3::_val(context).span = SceneOf(context).Between(x3::_attr(context).begin(), x3::_attr(context).end());
};
// The definition of a rule whose value has a span.
template <class Parser>
auto Spanned(const Parser& parser) {
  return raw[parser][kSpan];
}

const SkipParser kSkip{};

// ---- bundles and sets -----------------------------------------------------------------------------
// Set operators are read from left to right: `A or B and C` is (A or B) and C.

struct SetTail {
  syntax::Set::Kind kind = syntax::Set::Kind::kOr;
  syntax::Set arg;
};

Span Join(Span a, Span b) { return {a.file, a.begin, b.end}; }

syntax::Set Fold(syntax::Set set, std::vector<SetTail> tails) {
  bool open = false;  // the set was made here, not in braces: `A or B or C` is one set of three
  for (SetTail& tail : tails) {
    if (!open || set.kind != tail.kind) {
      syntax::Set outer;
      outer.kind = tail.kind;
      outer.span = set.span;
      outer.args.push_back(std::move(set));
      set = std::move(outer);
      open = true;
    }
    set.span = Join(set.span, tail.arg.span);
    set.args.push_back(std::move(tail.arg));
  }
  return set;
}

using Tails = std::vector<SetTail>;

struct FeatRule;
struct BundleRule;
struct SetRule;
struct AtomRule;
const x3::rule<FeatRule, syntax::Feat> feat("@a feature");
const x3::rule<struct LaterFeatRule> later_feat("@a feature");
const x3::rule<BundleRule, syntax::Bundle> bundle("a bundle such as [+nasal]");
const x3::rule<SetRule, syntax::Set> set("@a set: a bundle, a literal or a class");
const x3::rule<AtomRule, syntax::Set> atom("@a set: a bundle, a literal or a class");
const x3::rule<struct TailRule, SetTail> set_tail("or, and, but not");

const Word kOr(U"or"), kAnd(U"and"), kBut(U"but"), kNot(U"not");
const NameToken name("@a name"), label("@a label"), node("@the name of a node"), feature("@a feature");
const NameToken bundle_name("@a feature", true);
const RawToken literal(U'/', U'/', "a literal such as /k/"), spelled(U'⟨', U'⟩', "a form"),
    spelled_ascii(U'<', U'>', "a form"), surface(U'[', U']', "a surface form in [ ]"),
    form(U'/', U'/', "a form such as /kat/");
const QuantityToken quantity{};
const SymbolToken symbol{};
const NumberToken number{};

template <class Parser>
auto Glued(const Parser& parser) {
  return x3::no_skip[parser];
}
const auto minus_sign = Sign(U"-") | Sign(U"\u2212") | Sign(U"\u2013");
const auto plus_minus = Sign(U"±") | Sign(U"+/-");
const auto value = name | (Sign(U"(") > +name > Sign(U")"));

const auto prosodic_word = Word(U"onset") | Word(U"peak") | Word(U"coda") | Word(U"appendix") | Word(U"stray") |
                           Word(U"open") | Word(U"closed") | Word(U"light") | Word(U"heavy") | Word(U"main");
const auto prosodic_word_2 =
    Word(U"stressed") | Word(U"unstressed") | Word(U"head") | Word(U"footed") | Word(U"unfooted");
constexpr const char* kDomains = "a domain: syllable, foot, morpheme, stem, host, word or phrase";
const auto a_domain = Word(U"morpheme") | Word(U"stem") | Word(U"host") | Word(U"word") | Word(U"phrase") |
                      Word(U"syllable") | Word(U"foot") | Wanted(kDomains);

const auto later_feat_def = raw[Word(U"floating")][NotYet("a floating item")] | raw[Word(U"linked")][kNotYetWord] |
                            (raw[Word(U"held") > Word(U"by")][kNotYetWord] > set) |
                            raw[(Word(U"first") | Word(U"last")) > Word(U"in") > a_domain][kNotYetWord] |
                            raw[prosodic_word | prosodic_word_2][kNotYetWord];

auto IsKind(syntax::Feat::Kind kind) { return Let(&syntax::Feat::kind, kind); }
auto Named(syntax::Feat::Kind kind) {
  return [kind](auto& context) {
    x3::_val(context).kind = kind;
    x3::_val(context).name = std::move(x3::_attr(context));
  };
}
const auto kFeatName = To(&syntax::Feat::name);
const auto a_value = name[Push(&syntax::Feat::values)] |
                     (Sign(U"(") > +name[Push(&syntax::Feat::values)] > Sign(U")")) |
                     Wanted("@a value, or several in ( )");
// What `begins` and `ends` may ask of one edge, and any bundle of the whole.
const auto borne =
    (Sign(U"+") > feature[Named(syntax::Feat::Kind::kPlus)]) |
    (minus_sign > feature[Named(syntax::Feat::Kind::kMinus)]) |
    (bundle_name[Named(syntax::Feat::Kind::kBears)] >> -(Sign(U":")[IsKind(syntax::Feat::Kind::kValue)] > a_value));
const auto one_edge = Word(U"begins")[Let(&syntax::Feat::edge, syntax::Feat::Edge::kBegins)] |
                      Word(U"ends")[Let(&syntax::Feat::edge, syntax::Feat::Edge::kEnds)];

const auto kAlpha = [](auto& context) {
  x3::_val(context).variable = {"α", SceneOf(context).Between(x3::_attr(context).begin(), x3::_attr(context).end())};
};
const auto agreeing = (VariableToken{}[To(&syntax::Feat::variable)] >
                       (Glued(name)[kFeatName] | Wanted("@a feature right after its variable"))) |
                      (raw[Word(U"alpha")][kAlpha] > feature[kFeatName]);
const auto agreement = (x3::eps[IsKind(syntax::Feat::Kind::kAgrees)] >> agreeing) |
                       (minus_sign[IsKind(syntax::Feat::Kind::kDiffers)] >> agreeing);

const auto shared_node = (Word(U"shared")[IsKind(syntax::Feat::Kind::kShared)] |
                          Word(U"unshared")[IsKind(syntax::Feat::Kind::kUnshared)]) >
                         (feature[kFeatName] | Wanted("@the node that is shared")) >>
                         -(Word(U"rightward")[Let(&syntax::Feat::side, syntax::Feat::Side::kRightward)] |
                           Word(U"leftward")[Let(&syntax::Feat::side, syntax::Feat::Side::kLeftward)]);
const auto root_length =
    Word(U"long")[IsKind(syntax::Feat::Kind::kLong)] | Word(U"short")[IsKind(syntax::Feat::Kind::kShort)] |
    (Word(U"half") > (Word(U"first")[IsKind(syntax::Feat::Kind::kHalfFirst)] |
                      Word(U"second")[IsKind(syntax::Feat::Kind::kHalfSecond)] | Wanted("first or second")));
const auto feat_def = Spanned(
    (one_edge > (borne | Wanted("what an edge bears: +f, -f, a feature or a value"))) | agreement | shared_node |
    root_length |
    (Word(U"no") > feature[Named(syntax::Feat::Kind::kNo)] >> -(raw[Sign(U":") > value][NotYet("'no' with a value")])) |
    borne);

const auto bundle_def = Spanned(Sign(U"[") > *(-Sign(U",") >> (later_feat | feat[Push(&syntax::Bundle::feats)])) >
                                (Sign(U"]") | Wanted("@a feature or ']'")));

const auto kKeepSet = [](auto& context) { x3::_val(context) = std::move(x3::_attr(context)); };
auto MakeSet(syntax::Set::Kind kind) { return Let(&syntax::Set::kind, kind); }
// The first of alternatives in braces, or all of them as one set.
const auto kAlternative = [](auto& context) {
  syntax::Set& all = x3::_val(context);
  all.args.push_back(std::move(x3::_attr(context)));
};
const auto kCloseAlternatives = [](auto& context) {
  syntax::Set& all = x3::_val(context);
  if (all.args.size() == 1) {
    syntax::Set only = std::move(all.args.front());
    all = std::move(only);
  } else {
    all.kind = syntax::Set::Kind::kOr;
  }
};
// `not not not A`: counted rather than nested, so that a long row of them cannot exhaust the stack.
const auto kNegate = [](auto& context) {
  syntax::Set outer;
  outer.kind = syntax::Set::Kind::kNot;
  outer.args.push_back(std::move(x3::_attr(context)));
  x3::_val(context) = std::move(outer);
};
// Neither a path (`X.N`) nor a label (`X:`).
const auto name_alone = name >> !Glued(Sign(U".") >> !Sign(U".")) >> !Glued(Sign(U":"));

const auto atom_def = Spanned((kNot > ((!Word(U"not")) | Wanted("a set after one 'not'")) > atom[kNegate]) |
                              Word(U"empty")[MakeSet(syntax::Set::Kind::kEmpty)] | bundle[([](auto& context) {
                                x3::_val(context).kind = syntax::Set::Kind::kBundle;
                                x3::_val(context).bundle = std::move(x3::_attr(context));
                              })] |
                              literal[([](auto& context) {
                                x3::_val(context).kind = syntax::Set::Kind::kLiteral;
                                x3::_val(context).literal = std::move(x3::_attr(context));
                              })] |
                              raw[spelled][NotYet("⟨ ⟩ in a pattern")] |
                              (Sign(U"{") > set[kAlternative] > *(!Sign(U"||") >> Sign(U"|") > set[kAlternative]) >
                               (Sign(U"}")[kCloseAlternatives] | Wanted("'|' or '}'"))) |
                              name_alone[([](auto& context) {
                                x3::_val(context).kind = syntax::Set::Kind::kClass;
                                x3::_val(context).name = std::move(x3::_attr(context));
                              })]);

const auto kTailArg = [](auto& context) { x3::_val(context).arg = std::move(x3::_attr(context)); };
const auto set_tail_def = (kOr[Let(&SetTail::kind, syntax::Set::Kind::kOr)] > atom[kTailArg]) |
                          (kAnd[Let(&SetTail::kind, syntax::Set::Kind::kAnd)] > atom[kTailArg]) |
                          (kBut > kNot[Let(&SetTail::kind, syntax::Set::Kind::kButNot)] > atom[kTailArg]);

// Tails are folded as they come; `args` of an operator made here grow while the operator stays the same.
struct OpenSet {
  syntax::Set set;
  Tails tails;
};
const x3::rule<struct OpenSetRule, OpenSet> open_set("@a set: a bundle, a literal or a class");
const auto open_set_def = atom[To(&OpenSet::set)] >> *set_tail[Push(&OpenSet::tails)];
const auto kFoldSet = [](auto& context) {
  OpenSet& open = x3::_attr(context);
  x3::_val(context) = Fold(std::move(open.set), std::move(open.tails));
};
const auto set_def = open_set[kFoldSet];

BOOST_SPIRIT_DEFINE(feat, later_feat, bundle, set, atom, set_tail, open_set)

// ---- patterns -------------------------------------------------------------------------------------

struct ItemRule;
struct PatternRule;
const x3::rule<ItemRule, syntax::Item> item("@an item");
const x3::rule<struct SameMorphemeRule, syntax::Item> same_morpheme("'&'");
const x3::rule<struct LaterItemRule> later_item("an item");
const x3::rule<PatternRule, syntax::Pattern> pattern("@a pattern");
const x3::rule<struct LabelledRule, syntax::Item> labelled("a labelled item");
const x3::rule<struct BracedRule, syntax::Item> braced("a group in { }");
const x3::rule<struct OptionalRule, syntax::Item> bracketed("a group in ( )");
const x3::rule<struct GapRule, syntax::Item> gap("a gap");

// One unlabelled slot item, so that `{A | B}` is a set and not a group.
bool IsSingle(const syntax::Pattern& alternative) {
  if (alternative.items.size() != 1) return false;
  const syntax::Item& only = alternative.items.front();
  // Items of later releases have left no trace but the length of the pattern.
  if (only.span.begin != alternative.span.begin || only.span.end != alternative.span.end) return false;
  const bool slot = only.kind == syntax::Item::Kind::kSet || only.kind == syntax::Item::Kind::kName;
  return slot && !only.label && only.min == 1 && only.max == 1;
}

syntax::Set AsSet(syntax::Item single) {
  if (single.kind == syntax::Item::Kind::kSet) return std::move(single.set);
  syntax::Set named;
  named.kind = syntax::Set::Kind::kClass;
  named.name = std::move(single.name);
  named.span = single.span;
  return named;
}

// Turns a group all of whose alternatives are single into an item with a set.
void JoinSingles(syntax::Item& group) {
  if (!std::all_of(group.alternatives.begin(), group.alternatives.end(), IsSingle)) return;
  syntax::Set all;
  all.kind = syntax::Set::Kind::kOr;
  for (syntax::Pattern& alternative : group.alternatives)
    all.args.push_back(AsSet(std::move(alternative.items.front())));
  group.alternatives.clear();
  group.kind = syntax::Item::Kind::kSet;
  group.set = all.args.size() == 1 ? syntax::Set(std::move(all.args.front())) : std::move(all);
}

const auto kQuantify = [](auto& context) {
  x3::_val(context).min = x3::_attr(context).min;
  x3::_val(context).max = x3::_attr(context).max;
};
const auto kItemBoundary = [](auto& context) {
  x3::_val(context).kind = syntax::Item::Kind::kBoundary;
  x3::_val(context).boundary = x3::_attr(context);
};
const auto kItemSet = [](auto& context) {
  x3::_val(context).kind = syntax::Item::Kind::kSet;
  x3::_val(context).set = std::move(x3::_attr(context));
};
const auto kPlainItem = [](auto& context) {
  syntax::Item& it = x3::_val(context);
  OpenSet& open = x3::_attr(context);
  const bool bare = open.tails.empty() && open.set.kind == syntax::Set::Kind::kClass;
  if (bare) {
    it.kind = syntax::Item::Kind::kName;
    it.name = std::move(open.set.name);
  } else {
    it.kind = syntax::Item::Kind::kSet;
    it.set = Fold(std::move(open.set), std::move(open.tails));
  }
};
const auto kJoin = [](auto& context) {
  syntax::Item& it = x3::_val(context);
  it = std::move(x3::_attr(context));
  it.kind = syntax::Item::Kind::kGroup;
  JoinSingles(it);
  it.set.span = it.span;
};
const auto kIsSet = [](auto& context) { x3::_pass(context) = x3::_val(context).kind == syntax::Item::Kind::kSet; };
const auto kMoreSet = [](auto& context) {
  syntax::Item& it = x3::_val(context);
  it.set = Fold(std::move(it.set), std::move(x3::_attr(context).tails));
};
const auto kLabelCount = [](auto& context) {
  const Scene& scene = SceneOf(context);
  throw Refusal{scene.Between(x3::_attr(context).begin(), x3::_attr(context).end()),
                "a labelled item takes no quantity",
                "take the label or the quantity away: a label stands for one slot"};
};

const auto gap_sign = Sign(U"...") | Sign(U"…");
const auto gap_def = gap_sign[Let(&syntax::Item::kind, syntax::Item::Kind::kGap)] >>
                     -Glued(name[To(&syntax::Item::tier)]);

const auto labelled_def = &(name >> Glued(Sign(U":"))) >> name[To(&syntax::Item::label)] >> Glued(Sign(U":")) >>
                          (BoundaryToken{}[kItemBoundary] | set[kItemSet] |
                           Wanted("@a set: a bundle, a literal or a class")) >>
                          -Glued(raw[quantity][kLabelCount]);

const auto bracketed_def = Sign(U"(")[([](auto& context) {
                             x3::_val(context).kind = syntax::Item::Kind::kGroup;
                             x3::_val(context).min = 0;
                           })] > pattern[Push(&syntax::Item::alternatives)] >
                           (Sign(U")") | Wanted("@an item or ')'")) >> -Glued(quantity[kQuantify]);

const x3::rule<struct BraceBodyRule, syntax::Item> brace_body("a group in { }");
const x3::rule<struct MoreSetRule, OpenSet> more_set("or, and, but not");
const auto more_set_def = +set_tail[Push(&OpenSet::tails)];
const auto brace_body_def = Spanned(Sign(U"{") > pattern[Push(&syntax::Item::alternatives)] >
                                    *(!Sign(U"||") >> Sign(U"|") > pattern[Push(&syntax::Item::alternatives)]) >
                                    (Sign(U"}") | Wanted("@an item, '|' or '}'")));
const auto braced_def = brace_body[kJoin] >> -(x3::eps[kIsSet] >> more_set[kMoreSet]) >> -Glued(quantity[kQuantify]);

const auto same_morpheme_def = Spanned(Sign(U"&")[Let(&syntax::Item::kind, syntax::Item::Kind::kSameMorpheme)]);
const auto later_item_def = (!gap_sign) >> raw[Sign(U".") >> !Glued(PathAhead{})][NotYet("'.' in a pattern")];

const auto item_def = Spanned(BoundaryToken{}[kItemBoundary] | gap[kWhole] | bracketed[kWhole] | braced[kWhole] |
                              labelled[kWhole] | (open_set[kPlainItem] >> -Glued(quantity[kQuantify])));

const auto one_item = item[Push(&syntax::Pattern::items)] | later_item;
const auto pattern_def = Spanned(one_item >> *((same_morpheme[Push(&syntax::Pattern::items)] > one_item) | one_item));

BOOST_SPIRIT_DEFINE(item, same_morpheme, later_item, pattern, labelled, braced, brace_body, more_set, bracketed, gap)

// ---- rules ----------------------------------------------------------------------------------------

struct PathRule;
struct ChangeRule;
const x3::rule<PathRule, syntax::Path> path("@a path such as X.Place");
const x3::rule<struct TestRule, syntax::Condition> test("@a path such as X.Place");
const x3::rule<struct TagTestRule, syntax::TagTest> tag_test("only or except");
const x3::rule<ChangeRule, syntax::Change> change("a change");
const x3::rule<struct LaterChangeRule> later_change("a change");
const x3::rule<struct LaterModifierRule> later_modifier("a modifier");
const x3::rule<struct BodyRule, syntax::Rule> body("a rule");
const x3::rule<struct ChangeSpreadRule, syntax::Change> spread("spread");
const x3::rule<struct ChangeDelinkRule, syntax::Change> delink("delink");
const x3::rule<struct ChangeSetRule, syntax::Change> set_fill("set or fill");
const x3::rule<struct ChangeDeleteRule, syntax::Change> delete_("delete");
const x3::rule<struct ChangeInsertRule, syntax::Change> insert("insert");
const x3::rule<struct ChangeLengthRule, syntax::Change> lengthen("lengthen or shorten");
const x3::rule<struct ChangeMergeRule, syntax::Change> merge("merge");

const Sign kDot(U".");
const auto path_ahead = &(name >> Glued(kDot >> !kDot));
// A label where no path can stand, so that `delete X.N` is told from `delete X`.
const auto label_alone = label >> !Glued(kDot >> PathAhead{});
auto Narrowed(syntax::Path::Member member) { return Let(&syntax::Path::member, member); }
const auto path_def =
    Spanned(path_ahead >> label[To(&syntax::Path::label)] >> Glued(kDot) >>
            ((Glued(Sign(U"+")[Narrowed(syntax::Path::Member::kPlus)] |
                    minus_sign[Narrowed(syntax::Path::Member::kMinus)]) > Glued(node)[To(&syntax::Path::node)]) |
             (Glued(node)[To(&syntax::Path::node)] >>
              -Glued(raw[+(kDot >> name)][NotYet("a path through more than one node")]) >>
              -((Glued(Sign(U":"))[Narrowed(syntax::Path::Member::kValue)] > name[To(&syntax::Path::value)]) |
                (Word(U"first")[Narrowed(syntax::Path::Member::kFirst)] >> !Glued(kDot)) |
                (Word(U"last")[Narrowed(syntax::Path::Member::kLast)] >> !Glued(kDot)))) |
             Wanted("@the name of a node")));

auto IsTest(syntax::Condition::Test kind) { return Let(&syntax::Condition::test, kind); }
const auto test_sign =
    Sign(U"=")[IsTest(syntax::Condition::Test::kEqual)] |
    (Sign(U"≠") | Sign(U"!="))[IsTest(syntax::Condition::Test::kUnequal)] |
    (Word(U"is")[IsTest(syntax::Condition::Test::kIs)] >> -Word(U"not")[IsTest(syntax::Condition::Test::kIsNot)]) |
    Wanted("=, ≠, is or is not");
const auto test_def = Spanned(path[To(&syntax::Condition::left)] > test_sign > path[To(&syntax::Condition::right)]);

// A tag is any name, and `stem` without quotes.
const auto kStem = [](auto& context) {
  x3::_val(context).tag = {"stem", SceneOf(context).Between(x3::_attr(context).begin(), x3::_attr(context).end())};
};
const auto named_tag = name[To(&syntax::TagTest::tag)];
const auto other_tag = raw[Word(U"stem")][kStem] | Wanted("@a tag");
const auto asked_tag = named_tag | other_tag;
const auto kTagOfLabel = [](auto& context) {
  syntax::TagTest& it = x3::_val(context);
  it.scope = syntax::TagTest::Scope::kLabel;
  it.label = std::move(it.tag);
};
const auto tag_test_def =
    Spanned((Word(U"only") | Word(U"except")[Let(&syntax::TagTest::only, false)]) >
            ((Word(U"word")[Let(&syntax::TagTest::scope, syntax::TagTest::Scope::kWord)] > asked_tag) |
             (named_tag >> -(Word(U"in")[kTagOfLabel] > asked_tag)) | other_tag));

auto IsChange(syntax::Change::Kind kind) { return Let(&syntax::Change::kind, kind); }
const auto kChangeLabel = To(&syntax::Change::label);
const auto a_path = path[Push(&syntax::Change::paths)];
const auto kPaths = a_path > *(Sign(U",") > a_path);
const auto spread_def = Word(U"spread")[IsChange(syntax::Change::Kind::kSpread)] >
                        ((path_ahead >> kPaths > Word(U"to") > label_alone[kChangeLabel]) |
                         (label >> raw[Word(U"rightward") | Word(U"leftward")][NotYet("'spread' along a tier")]) |
                         Wanted("@a path such as X.Place"));
const auto delink_def = Word(U"delink")[IsChange(syntax::Change::Kind::kDelink)] >
                        ((path_ahead >> kPaths) |
                         (label >> raw[Word(U"first") | Word(U"last") | Word(U"all")][NotYet("'delink' on a tier")]) |
                         Wanted("@a path such as X.Place"));

const auto kWholeItem = [](auto& context) {
  syntax::Path whole;
  whole.label = std::move(x3::_attr(context));
  whole.span = whole.label.span;
  x3::_val(context).paths.push_back(std::move(whole));
};
// An equal node of its own, X.N as Y.N, or a whole equal item, X as Y.
auto As(syntax::Change::Kind kind) {
  const auto as = Word(U"as")[IsChange(kind)];
  return (path_ahead >> a_path > as > a_path) |
         (&(label >> Word(U"as")) >> label[kWholeItem] >> as > (label_alone[kWholeItem] | Wanted("@a label")));
}
const auto kContentSet = [](auto& context) {
  x3::_val(context).content.kind = syntax::Set::Kind::kBundle;
  x3::_val(context).content.bundle = std::move(x3::_attr(context));
  x3::_val(context).content.span = x3::_val(context).content.bundle.span;
};
const auto kContentLiteral = [](auto& context) {
  x3::_val(context).content.kind = syntax::Set::Kind::kLiteral;
  x3::_val(context).content.literal = std::move(x3::_attr(context));
  x3::_val(context).content.span = x3::_val(context).content.literal.span;
};
const auto kSetLiteral = [](auto& context) {
  x3::_val(context).kind = syntax::Change::Kind::kSetLiteral;
  kContentLiteral(context);
};
const auto a_bundle = bundle[To(&syntax::Change::bundle)];
const auto set_fill_def =
    (Word(U"set")[IsChange(syntax::Change::Kind::kSet)] >
     (As(syntax::Change::Kind::kSetAs) |
      (label[kChangeLabel] > (a_bundle | literal[kSetLiteral] | Wanted("a bundle, a literal or 'as'"))) |
      Wanted("@a label"))) |
    (Word(U"fill")[IsChange(syntax::Change::Kind::kFill)] >
     (As(syntax::Change::Kind::kFillAs) | (label[kChangeLabel] > (a_bundle | Wanted("a bundle or 'as'"))) |
      Wanted("@a label")));
const auto delete__def = Word(U"delete")[IsChange(syntax::Change::Kind::kDelete)] >
                         ((path_ahead >> raw[path][NotYet("'delete' of a node")]) |
                          (label[kChangeLabel] > -raw[Word(U"wholly")][kNotYetWord]) | Wanted("@a label"));
const auto floating_value = Sign(U"{") > -(Sign(U"+") | minus_sign) > name > -(Sign(U":") > name) > Sign(U"}");
const auto insert_def = Word(U"insert")[IsChange(syntax::Change::Kind::kInsert)] >
                        ((&(name >> Glued(Sign(U":"))) >> label[To(&syntax::Change::inserted)] >> Glued(Sign(U":")) >>
                          (literal[kContentLiteral] | bundle[kContentSet] |
                           raw[floating_value][NotYet("'insert' of a floating instance")] |
                           Wanted("a literal or a bundle"))) |
                         raw[bundle][NotYet("'insert' on a tier")] | Wanted("@a label and what it stands for, E:/i/")) >
                        (Word(U"before") | Word(U"after")[Let(&syntax::Change::before, false)] |
                         Wanted("before or after")) > label_alone[kChangeLabel];
const auto lengthen_def = (Word(U"lengthen")[IsChange(syntax::Change::Kind::kLengthen)] |
                           Word(U"shorten")[IsChange(syntax::Change::Kind::kShorten)]) > label_alone[kChangeLabel];
const auto merge_def = Word(U"merge")[IsChange(syntax::Change::Kind::kMerge)] >
                       ((path_ahead >> a_path > a_path) | raw[label > label][NotYet("'merge' on a tier")] |
                        Wanted("@a path such as X.Place"));
const auto change_def = Spanned(spread[kWhole] | delink[kWhole] | set_fill[kWhole] | delete_[kWhole] | insert[kWhole] |
                                lengthen[kWhole] | merge[kWhole]);

const auto later_change_def = (raw[Word(U"swap")][kNotYetWord] > label > label) |
                              (raw[Word(U"link")][kNotYetWord] > label > Word(U"to") > label) |
                              (raw[Word(U"copy")][kNotYetWord] > pattern >
                               (Word(U"before") | Word(U"after") | Wanted("before or after")) > label);

// What is said of the rule as a whole, each once.
const auto kOnce = [](auto& context) {
  Scene& scene = SceneOf(context);
  const Iterator begin = x3::_attr(context).begin(), end = x3::_attr(context).end();
  const std::string word = FirstWord(begin, end);
  if (!scene.said.insert(word).second)
    throw Refusal{scene.Between(begin, end), "'" + word + "' stands twice in this rule", "keep one of them"};
};
const auto kProbability = [](auto& context) {
  const double probability = *x3::_val(context).probability;
  if (probability > 0 && probability <= 1) return;
  throw Refusal{SceneOf(context).Between(x3::_attr(context).begin(), x3::_attr(context).end()),
                "a rule applies with a probability above 0 and at most 1",
                "write the share of the cases in which it applies: optional 0.3"};
};
auto Within(syntax::Domain domain) { return Let(&syntax::Rule::within, domain); }
const auto modifier =
    raw[(Word(U"iterate") > (Word(U"rightward")[Let(&syntax::Rule::mode, syntax::Rule::Mode::kRightward)] |
                             Word(U"leftward")[Let(&syntax::Rule::mode, syntax::Rule::Mode::kLeftward)] |
                             Wanted("rightward or leftward"))) |
        (Word(U"within") >
         (Word(U"morpheme")[Within(syntax::Domain::kMorpheme)] | Word(U"stem")[Within(syntax::Domain::kStem)] |
          Word(U"host")[Within(syntax::Domain::kHost)] | Word(U"word")[Within(syntax::Domain::kWord)] |
          Word(U"phrase")[Within(syntax::Domain::kPhrase)] |
          raw[Word(U"syllable") | Word(U"foot")][NotYet("'within' of a syllable or foot")] | Wanted(kDomains))) |
        (Word(U"sharing") >
         (Word(U"blocked")[Let(&syntax::Rule::sharing, syntax::Rule::Sharing::kBlocked)] |
          Word(U"free")[Let(&syntax::Rule::sharing, syntax::Rule::Sharing::kFree)] | Wanted("blocked or free"))) |
        (Word(U"prefer") >
         (Word(U"left")[Let(&syntax::Rule::prefer, syntax::Rule::Prefer::kLeft)] |
          Word(U"right")[Let(&syntax::Rule::prefer, syntax::Rule::Prefer::kRight)] | Wanted("left or right"))) |
        (Word(U"optional") > (raw[DecimalToken{}[To(&syntax::Rule::probability)]][kProbability] |
                              Wanted("the probability with which it applies")) >
         -(Word(U"by")[Let(&syntax::Rule::by_word, true)] > Word(U"word"))) |
        Word(U"preserving")[Let(&syntax::Rule::preserving, true)]][kOnce];
const auto tier_or_level =
    name | Word(U"syllable") | Word(U"foot") | Word(U"mora") | Wanted("@a node, syllable or foot");
const auto later_modifier_def = (raw[Word(U"on") > tier_or_level][kNotYetWord] >> -(Word(U"over") > set)) |
                                raw[Word(U"repeat") > number][kNotYetWord] | raw[Word(U"cutting")][kNotYetWord] |
                                raw[Word(U"derived")][kNotYetWord];

// The clause being read: the rule's own, or the last one behind an `otherwise`.
syntax::Clause& Current(syntax::Rule& rule) { return rule.otherwise.empty() ? rule : rule.otherwise.back(); }
template <class M>
auto PushIn(M member) {
  return [member](auto& context) { (Current(x3::_val(context)).*member).push_back(std::move(x3::_attr(context))); };
}
const auto kWhere = [](auto& context) { Current(x3::_val(context)).where = std::move(x3::_attr(context)); };
const auto kOtherwise = [](auto& context) { x3::_val(context).otherwise.emplace_back(); };
const auto kCountChange = [](auto& context) { ++SceneOf(context).later_changes; };
const auto kHasChange = [](auto& context) {
  int& later_changes = SceneOf(context).later_changes;
  x3::_pass(context) = !Current(x3::_val(context)).changes.empty() || later_changes > 0;
  later_changes = 0;
};
const auto clause =
    Word(U"where") > pattern[kWhere] >
    *(change[PushIn(&syntax::Clause::changes)] | later_change[kCountChange] |
      (Word(U"if") > test[PushIn(&syntax::Clause::conditions)]) |
      (Word(U"unless") >
       ((path_ahead >> test[PushIn(&syntax::Clause::unless_conditions)]) | pattern[PushIn(&syntax::Clause::unless)])) |
      tag_test[PushIn(&syntax::Clause::tags)] | modifier | later_modifier) >
    (x3::eps[kHasChange] | (&Word(U"otherwise") >> Wanted("a change before 'otherwise'")) |
     Wanted("@an item or a change: spread, delink, set, fill, insert, delete, lengthen, shorten or merge"));
const auto body_def = *(modifier | later_modifier) >> (clause | Wanted("'where'")) >
                      *(Word(U"otherwise")[kOtherwise] > clause) > End("@an item, a condition, a change or a modifier");

BOOST_SPIRIT_DEFINE(path, test, tag_test, change, later_change, later_modifier, body, spread, delink, set_fill, delete_,
                    insert, lengthen, merge)

// ---- declarations ---------------------------------------------------------------------------------

struct DaughterRule;
struct TreeLineRule;
struct SegmentRule;
struct ValuesRule;
struct DiacriticRule;
const x3::rule<DaughterRule, syntax::Daughter> daughter("@a feature or node");
const x3::rule<TreeLineRule, syntax::TreeLine> tree_line("@a mother");
const x3::rule<struct TreeEntryRule, syntax::Tree> tree_entry("a line of the tree");
const x3::rule<struct ValueRefRule, syntax::ValueRef> value_ref("@a feature");
const x3::rule<SegmentRule, syntax::SegmentEntry> segment("a symbol");
const x3::rule<struct WithoutRule, syntax::ValuesIn> without("without");
const x3::rule<ValuesRule, syntax::ValuesIn> omit_value("@a feature");
const x3::rule<DiacriticRule, syntax::Diacritic> diacritic("a diacritic");
const x3::rule<struct SegmentsHeadRule, syntax::Segments> segments_head("segments");
const x3::rule<struct SegmentsEntryRule, syntax::Segments> segments_entry("a symbol");
const x3::rule<struct DiacriticsEntryRule, syntax::Diacritics> diacritics_entry("a diacritic");
const x3::rule<struct OmitEntryRule, syntax::Omit> omit_entry("@a feature");
const x3::rule<struct ClassRule, syntax::Class> class_("@a name");
const x3::rule<struct NamedPatternRule, syntax::NamedPattern> named_pattern("@a name");
const x3::rule<struct LanguageRule, syntax::Language> language("the language's name in double quotes");
const x3::rule<struct IncludeRule, syntax::Include> include("the name of a file in double quotes");
const x3::rule<struct SharingRule, syntax::Sharing> sharing("blocked or free");
const x3::rule<struct FuseRule, syntax::Fuse> fuse("@the name of a node");
const x3::rule<struct WordAloneRule> word_alone("nothing more");
const x3::rule<struct RuleHeadRule, syntax::Rule> rule_head("the rule's name in double quotes");
const x3::rule<struct TreeHeadRule> tree_head("tree");
const x3::rule<struct EmptyHeadRule> empty_head("'{'");

const auto kNameDaughter = To(&syntax::Daughter::name);
const auto attribute = TimesToken{}[To(&syntax::Daughter::max)] >> -(Word(U"in") > set[To(&syntax::Daughter::room)]) |
                       Word(U"floating")[Let(&syntax::Daughter::floating, true)] |
                       Word(U"abstract")[Let(&syntax::Daughter::abstract_, true)];
const auto many_value = !TimesToken{} >> name[Push(&syntax::Daughter::values)];
const auto daughter_def =
    Spanned(((plus_minus[Let(&syntax::Daughter::kind, syntax::Daughter::Kind::kBinary)] > feature[kNameDaughter]) |
             ((Sign(U"•") | Sign(U"*"))[Let(&syntax::Daughter::kind, syntax::Daughter::Kind::kStanding)] >
              node[kNameDaughter]) |
             (!TimesToken{} >> name[kNameDaughter] >>
              -(Sign(U":")[Let(&syntax::Daughter::kind, syntax::Daughter::Kind::kMany)] > +many_value))) >>
            *attribute);
const auto mother = name[Push(&syntax::TreeLine::mothers)] >> Sign(U">");
const auto kLastDaughter = [](auto& context) {
  auto& line = x3::_val(context);
  if (!line.daughters.empty() && line.daughters.back().kind == syntax::Daughter::Kind::kMany)
    throw Refusal{x3::_attr(context).span, "nothing may follow a node with values on its line",
                  "put what follows on a line of its own: Mother > " + x3::_attr(context).name.text};
  line.daughters.push_back(std::move(x3::_attr(context)));
};
const auto tree_line_def =
    Spanned(name[Push(&syntax::TreeLine::mothers)] > Sign(U">") > *(&(name >> Sign(U">")) >> mother) >
            +daughter[kLastDaughter] > End("@a daughter, ×2, in, floating, abstract or the end of the line"));
const auto tree_entry_def =
    (Word(U"one") >> raw[Word(U"tier") > name][NotYet("'one tier'")] > End("the end of the line")) |
    tree_line[Push(&syntax::Tree::lines)] | Wanted("@a mother, as in: root > ±son");
const auto tree_head_def =
    -raw[Word(U"from") > StringToken("the name of a tree in double quotes")][NotYet("'tree from'")] > End("'{'");

auto Reference(syntax::ValueRef::Kind kind) { return Let(&syntax::ValueRef::kind, kind); }
const auto kNameRef = To(&syntax::ValueRef::name);
const auto whole_name = name >> Glued(SymbolEnd{});
const x3::rule<struct WholeNameRule, syntax::Name> listed_name("@a feature");
const auto listed_name_def = whole_name[kWhole];
const auto value_ref_def = (plus_minus[Reference(syntax::ValueRef::Kind::kBoth)] > listed_name[kNameRef]) |
                           (Sign(U"+")[Reference(syntax::ValueRef::Kind::kPlus)] > listed_name[kNameRef]) |
                           (minus_sign[Reference(syntax::ValueRef::Kind::kMinus)] > listed_name[kNameRef]) |
                           (listed_name >> !(Sign(U"=") | Sign(U"[")))[([](auto& context) {
                             x3::_val(context).kind = syntax::ValueRef::Kind::kBare;
                             x3::_val(context).name = std::move(x3::_attr(context));
                           })];
const auto in_set = Word(U"in") > set[To(&syntax::ValuesIn::in)];
const auto without_def = Word(U"without") > +value_ref[Push(&syntax::ValuesIn::values)] >
                         -(Word(U"everywhere") | in_set);
const auto omit_value_def = Spanned(+value_ref[Push(&syntax::ValuesIn::values)] >
                                    (Word(U"everywhere") | in_set | Wanted("@a feature, 'everywhere' or 'in'")));
const auto segment_def =
    Spanned(symbol[To(&syntax::SegmentEntry::symbol)] >> -(Sign(U"=") > symbol[To(&syntax::SegmentEntry::like)]) >>
            -bundle[To(&syntax::SegmentEntry::bundle)]);
const auto segments_entry_def = *(without[Push(&syntax::Segments::without)] |
                                  segment[Push(&syntax::Segments::entries)]) >
                                End("a symbol, '=', a bundle or 'without'");
const auto segments_head_def =
    -(Word(U"from") > StringToken("the name of an inventory in double quotes")[To(&syntax::Segments::from)]) >
    -bundle[To(&syntax::Segments::added)] > End("'from', a bundle or '{'");
const auto diacritic_def =
    Spanned(symbol[To(&syntax::Diacritic::symbol)] >>
            ((bundle[To(&syntax::Diacritic::bundle)] >> *((Word(U"on") > set[To(&syntax::Diacritic::on)]) |
                                                          Word(U"surface")[Let(&syntax::Diacritic::surface, true)])) |
             (raw[Sign(U"{") > name > -(Sign(U":") > name) > Sign(U"}")][NotYet("a sign for a floating instance")] >>
              -((Word(U"before") | Word(U"after")) > (Word(U"syllable") | set | Wanted("@a set")))) |
             Wanted("a bundle such as [+nasal]")));
const auto kPushDiacritic = [](auto& context) {
  if (x3::_attr(context).bundle.span.end > 0) x3::_val(context).entries.push_back(std::move(x3::_attr(context)));
};
const auto diacritics_entry_def = *diacritic[kPushDiacritic] > End("'on', 'surface' or a diacritic with ◌");
const auto omit_entry_def = *omit_value[Push(&syntax::Omit::entries)] > End("@a feature, 'everywhere' or 'in'");

const auto class__def = name[To(&syntax::Class::name)] > Sign(U"=") > set[To(&syntax::Class::set)] >
                        End("or, and, but not, or the end of the class");
const auto named_pattern_def = name[To(&syntax::NamedPattern::name)] >
                               Sign(U"=") > pattern[To(&syntax::NamedPattern::pattern)] >
                               End("@an item or the end of the pattern");
const auto language_def = StringToken("the language's name in double quotes")[To(&syntax::Language::name)] >
                          End("nothing more");
const auto include_def = StringToken("the name of a file in double quotes")[To(&syntax::Include::path)] >
                         End("nothing more");
const auto sharing_def = (Word(U"blocked") | Word(U"free")[Let(&syntax::Sharing::blocked, false)] |
                          Wanted("blocked or free")) > End("nothing more");
const auto fuse_def = node[To(&syntax::Fuse::node)] > Word(U"within") > Word(U"morpheme") >
                      -(Word(U"in") > pattern[To(&syntax::Fuse::in)]) > End("@an item or the end of the line");
const auto word_alone_def = x3::eps > End("nothing more");
const auto rule_head_def = StringToken("the rule's name in double quotes")[To(&syntax::Rule::name)] > End("'{'");
const auto empty_head_def = x3::eps > End("'{'");

BOOST_SPIRIT_DEFINE(daughter, tree_line, tree_entry, tree_head, value_ref, listed_name, segment, without, omit_value,
                    diacritic, segments_head, segments_entry, diacritics_entry, omit_entry, class_, named_pattern,
                    language, include, sharing, fuse, word_alone, rule_head, empty_head)

// ---- words ----------------------------------------------------------------------------------------

const x3::rule<struct SuppletionRule, syntax::Suppletion> suppletion("in");
const x3::rule<struct LexiconEntryRule, syntax::LexiconEntry> lexicon_entry("stem, prefix, suffix or clitic");
const x3::rule<struct LexiconEntriesRule, syntax::Lexicon> lexicon_entries("stem, prefix, suffix or clitic");
const x3::rule<struct LexiconHeadRule, syntax::LexiconFrom> lexicon_head("'from' or '{'");
const x3::rule<struct AllomorphRule, syntax::Allomorph> allomorph("a form such as /-lAn/");
const x3::rule<struct SlotValueRule, syntax::SlotValue> slot_value("@a value and its form");
const x3::rule<struct SlotRule, syntax::ParadigmSlot> paradigm_slot("@a slot");
const x3::rule<struct OverrideRule, syntax::CellOverride> cell_override("@a cell");
const x3::rule<struct ParadigmEntryRule, syntax::Paradigm> paradigm_entry("@a slot");
const x3::rule<struct ParadigmHeadRule, syntax::Paradigm> paradigm_head("@the paradigm's name");
const x3::rule<struct SpellingLineRule, syntax::SpellingLine> spelling_line("letters");
const x3::rule<struct SpellingEntryRule, syntax::Spelling> spelling_entry("letters");
const x3::rule<struct LengthRule, syntax::LengthDoubled> length_doubled("doubled");
const x3::rule<struct DatumRule, syntax::Datum> datum("a row of data");
const x3::rule<struct DataEntryRule, syntax::Data> data_entry("a row of data");
const x3::rule<struct ColumnRule, syntax::Column> column("@a column");
const x3::rule<struct ColumnEntryRule, syntax::DataFrom> column_entry("@a column");
const x3::rule<struct DataHeadRule, syntax::DataFrom> data_head("data");
const x3::rule<struct WrittenFormRule, syntax::FormText> written_form("a form such as /kat/");
const x3::rule<struct PlaceRule, syntax::Name> attach_place("@where it attaches");

const auto written_form_def = form[kWhole] | spelled[kWhole] | spelled_ascii[kWhole];
// `at word`: where an affix attaches; some of the places are words of the notation.
const auto kWordAsName = [](auto& context) {
  const Iterator begin = x3::_attr(context).begin(), end = x3::_attr(context).end();
  x3::_val(context) = {Bytes(begin, end), SceneOf(context).Between(begin, end)};
};
const auto attach_place_def =
    name[kWhole] | raw[Word(U"stem") | Word(U"host") | Word(U"word") | Word(U"phrase")][kWordAsName];

using LexiconKind = syntax::LexiconEntry::Kind;
const auto affix_word = Word(U"prefix") | Word(U"suffix") | Word(U"clitic");
// Words that are no bare tags: they go on with the entry, or begin the next.
const auto tag = !(affix_word | Word(U"weight")) >> name;
const auto kWeight = [](auto& context) {
  if (x3::_val(context).weight)
    throw Refusal{x3::_val(context).form.span, "'weight' stands twice in the entry of this form",
                  "keep one of the two"};
  x3::_val(context).weight = x3::_attr(context);
};
const auto kAttach = [](auto& context) {
  if (x3::_val(context).at)
    throw Refusal{x3::_attr(context).span, "'at' stands twice in this entry", "keep one of the two"};
  x3::_val(context).at = std::move(x3::_attr(context));
};
const auto suppletion_def = Word(U"in") > +name[Push(&syntax::Suppletion::in)] >
                            (written_form[To(&syntax::Suppletion::form)] |
                             Wanted("@a tag or the form that stands there"));
const auto lexicon_entry_def =
    Spanned((Word(U"stem")[Let(&syntax::LexiconEntry::kind, LexiconKind::kStem)] |
             Word(U"prefix")[Let(&syntax::LexiconEntry::kind, LexiconKind::kPrefix)] |
             Word(U"suffix")[Let(&syntax::LexiconEntry::kind, LexiconKind::kSuffix)] |
             Word(U"clitic")[Let(&syntax::LexiconEntry::kind, LexiconKind::kClitic)]) >
            written_form[To(&syntax::LexiconEntry::form)] > -GlossToken{}[To(&syntax::LexiconEntry::gloss)] >
            *(raw[tag >> Sign(U":") > value][NotYet("a melody of a morpheme")] |
              tag[Push(&syntax::LexiconEntry::tags)] | (Word(U"weight") > DecimalToken{}[kWeight]) |
              (Word(U"at") > attach_place[kAttach]) | suppletion[Push(&syntax::LexiconEntry::suppletive)]));
const auto lexicon_entries_def = (+lexicon_entry[Push(&syntax::Lexicon::entries)] |
                                  Wanted("stem, prefix, suffix or clitic")) >
                                 End("@a tag, 'weight', 'at', 'in', stem, prefix, suffix or clitic");
const auto lexicon_head_def = -(Word(U"from") >
                                StringToken("the name of a file in double quotes")[To(&syntax::LexiconFrom::path)]) >
                              End("'from' or '{'");

const auto allomorph_def = written_form[To(&syntax::Allomorph::form)] >>
                           -((Word(U"after") > -raw[+BoundaryToken{}][NotYet("an infix")] >
                              set[To(&syntax::Allomorph::after)]) |
                             raw[Word(U"over") > set][NotYet("a template")]) >>
                           -(Word(U"at") > attach_place[To(&syntax::Allomorph::at)]);
const auto later_exponent = raw[(Word(U"copy") >> (Word(U"first") | Word(U"last")) >> pattern) |
                                (Word(U"copy") > pattern)][NotYet("'copy' in a paradigm")];
const auto slot_value_def =
    Spanned(name[To(&syntax::SlotValue::name)] >> ((allomorph[Push(&syntax::SlotValue::allomorphs)] >>
                                                    *(Sign(U",") > allomorph[Push(&syntax::SlotValue::allomorphs)])) |
                                                   later_exponent | Wanted("a form such as /-lAn/, or //")));
const auto paradigm_slot_def =
    Spanned(name[To(&syntax::ParadigmSlot::name)] >> Sign(U":") >> +slot_value[Push(&syntax::ParadigmSlot::values)]);
const auto cell_override_def = Spanned(+name[Push(&syntax::CellOverride::values)] > Sign(U":") >
                                       allomorph[Push(&syntax::CellOverride::allomorphs)] >>
                                       *(Sign(U",") > allomorph[Push(&syntax::CellOverride::allomorphs)]));
const auto paradigm_entry_def = ((Word(U"stem") > name[Push(&syntax::Paradigm::stems)]) |
                                 (&(name >> Sign(U":") >> name) >> paradigm_slot[Push(&syntax::Paradigm::slots)]) |
                                 (&name >> cell_override[Push(&syntax::Paradigm::overrides)]) |
                                 Wanted("@a slot, a cell or 'stem', as in: number : SG // PL /-lAn/")) >
                                End("@a value, a comma, 'after', 'at' or the end of the line");
const auto paradigm_head_def = name[To(&syntax::Paradigm::name)] > End("'{'");

const LettersToken letters("letters, as in: ng = ŋ", false), means("symbols, a boundary or nothing", true);
const auto kNothing = [](auto& context) {
  const Iterator begin = x3::_attr(context).begin(), end = x3::_attr(context).end();
  x3::_val(context).means = {"", SceneOf(context).Between(begin, end)};
};
const auto spelling_line_def =
    Spanned(letters[To(&syntax::SpellingLine::letters)] >
            (Sign(U"=") | Sign(U"<")[Let(&syntax::SpellingLine::use, syntax::SpellingLine::Use::kRead)] |
             Sign(U">")[Let(&syntax::SpellingLine::use, syntax::SpellingLine::Use::kWrite)] | Wanted("=, < or >")) >
            (raw[Word(U"nothing")][kNothing] | means[To(&syntax::SpellingLine::means)] |
             Wanted("symbols, a boundary or nothing")) > -(Word(U"before") > set[To(&syntax::SpellingLine::before)]) >
            -(Word(U"after") > set[To(&syntax::SpellingLine::after)]) >
            -(Word(U"between") > set[To(&syntax::SpellingLine::between)]));
const auto spelling_entry_def = (+spelling_line[Push(&syntax::Spelling::lines)] | Wanted("letters, as in: ng = ŋ")) >
                                End("letters, before, after or between");

const auto length_doubled_def = Word(U"doubled") > -(Word(U"in") > set[To(&syntax::LengthDoubled::in)]) >
                                End("'in' or the end of the line");
const auto star = Sign(U"*") > surface[Push(&syntax::Datum::starred)];
const auto datum_def = Spanned(
    written_form[To(&syntax::Datum::underlying)] >
    ((surface[Push(&syntax::Datum::surfaces)] > *(Sign(U"~") > surface[Push(&syntax::Datum::surfaces)]) > *star) |
     +star | Wanted("a surface form in [ ]")) > -GlossToken{}[To(&syntax::Datum::gloss)]);
const auto data_entry_def = (+datum[Push(&syntax::Data::rows)] | Wanted("a form such as /kat/")) >
                            End("a form, ~, * or a gloss in ' '");
const auto column_def = Spanned(name[To(&syntax::Column::field)] > Sign(U"=") >
                                (number[To(&syntax::Column::number)] | name[To(&syntax::Column::heading)] |
                                 Wanted("@the heading or the number of a column")) >
                                -Word(U"spelled")[Let(&syntax::Column::spelled, true)]);
const auto column_entry_def = (raw[Word(U"where") > name > Sign(U"=") > (name | Wanted("@a value"))]
                                  [NotYet("'where' in the columns of a table")] |
                               column[Push(&syntax::DataFrom::columns)] | Wanted("@a column, as in: surface = 2")) >
                              End("'spelled' or the end of the column");
const auto data_head_def = -(Word(U"comparing") > Word(U"length")[Let(&syntax::DataFrom::comparing_length, true)]) >
                           -(Word(U"from") >
                             StringToken("the name of a file in double quotes")[To(&syntax::DataFrom::path)]) >
                           End("'from', 'comparing' or '{'");

BOOST_SPIRIT_DEFINE(written_form, attach_place, suppletion, lexicon_entry, lexicon_entries, lexicon_head, allomorph,
                    slot_value, paradigm_slot, cell_override, paradigm_entry, paradigm_head, spelling_line,
                    spelling_entry, length_doubled, datum, data_entry, column, column_entry, data_head)

// ---- reading --------------------------------------------------------------------------------------

class Reader {
 public:
  Reader(std::string_view text, std::uint32_t file, Diagnostics& diagnostics)
      : text_(text), file_(file), diagnostics_(diagnostics) {}

  syntax::File Read() {
    for (const outline::Section& section : outline::Cut(text_, file_, diagnostics_)) ReadSection(section);
    return std::move(result_);
  }

 private:
  // Parses one slice. True if it parsed whole and held nothing of a later release.
  template <class Rule, class Built>
  bool Run(const outline::Entry& entry, const Rule& rule, Built& built, const char* remedy) {
    if (entry.broken) return false;
    Scene scene;
    scene.origin = text_.data();
    scene.file = file_;
    const char* begin = text_.data() + entry.span.begin;
    const char* end = text_.data() + entry.span.end;
    bool parsed = false;
    try {
      Iterator first(begin, begin, end);
      const Iterator last(end, begin, end);
      parsed = x3::phrase_parse(first, last, x3::with<SceneTag>(scene)[rule], kSkip, built);
      if (!parsed) Expected(scene, first, last, x3::what(rule), remedy);
    } catch (const x3::expectation_failure<Iterator>& failure) {
      Expected(scene, failure.where(), Iterator(end, begin, end), failure.which(), remedy);
      parsed = false;
    } catch (const Refusal& refusal) {
      diagnostics_.Error(Kind::kSyntax, refusal.span, refusal.message, refusal.remedy);
      parsed = false;
    } catch (const std::out_of_range&) {  // the iterator met bytes that are no code point
      diagnostics_.Error(Kind::kNotUtf8, entry.span, "these bytes are not UTF-8", "save the file as UTF-8");
      parsed = false;
    }
    for (const auto& later : scene.later) Later(later.construct, later.span);
    return parsed && scene.later.empty();
  }

  void Expected(const Scene& scene, Iterator where, const Iterator& last, std::string wanted, const char* remedy) {
    while (SkipBlank(where, last)) {
    }
    const bool name_fits = !wanted.empty() && wanted[0] == '@';
    if (name_fits) wanted.erase(0, 1);
    const std::string bare = PeekBare(where, last);
    if (name_fits && notation::IsReserved(bare)) {
      diagnostics_.Error(Kind::kReservedWord, scene.Between(where, TokenEnd(where, last)),
                         "'" + bare + "' is a word of the notation and cannot be a name here",
                         "put it in double quotes: \"" + bare + "\"");
      return;
    }
    const Iterator path_node = PathNode(where, last);
    const Iterator end = TokenEnd(path_node == last ? where : path_node, last);
    const std::string found = where == last ? "the end" : "'" + Bytes(where, end) + "'";
    if (const char* better = BetterRemedy(wanted, where, last)) remedy = better;
    diagnostics_.Error(Kind::kSyntax, scene.Between(where, end), "expected " + wanted + ", found " + found, remedy);
  }

  // Behind the name or the one character that stands here.
  static Iterator TokenEnd(Iterator where, const Iterator& last) {
    const std::string bare = PeekBare(where, last);
    if (bare.empty()) return where == last ? last : ++where;
    Iterator end = where;
    while (end.base() != where.base() + bare.size()) ++end;
    return end;
  }
  // The node of a path that stands here, or the end.
  static Iterator PathNode(Iterator where, const Iterator& last) {
    Iterator i = TokenEnd(where, last);
    const bool named = !PeekBare(where, last).empty();
    return named && MatchText(i, last, U".") && i != last && notation::IsNameStart(*i) ? i : last;
  }

  // What to write where this was wanted, if there is more to say than how the section reads.
  static const char* BetterRemedy(const std::string& wanted, Iterator where, const Iterator& last) {
    static constexpr std::pair<std::string_view, const char*> kRemedies[] = {
        {"'where'", "a clause begins with its pattern, where X:[+voice] Y:[-son]; conditions and changes follow"},
        {"a path such as X.Place", "write an item's label and a node, glued: X.Place; the whole segment is X.root"},
        {"=, ≠, is or is not", "a test reads: if X.Place = Y.Place, or with ≠, is, is not"},
        {"a tag", "write: only loan, only X in loan or only word loan"},
        {"a feature right after its variable", "glue the two, αback, or write alpha back"},
        {"what an edge bears: +f, -f, a feature or a value", "write: begins -cont"},
        {"first or second", "write: half first"},
        {"left or right", "write: prefer left"},
        {"rightward or leftward", "write: iterate rightward"},
        {"the probability with which it applies", "write: optional 0.3, and by word behind it for one draw a word"},
        {"a label and what it stands for, E:/i/", "write: insert E:/i/ before X"},
        {"the node that is shared", "write its name alone: shared voice"},
        {"blocked or free", "write: sharing blocked"},
        {kDomains, "write: within phrase"},
        {"'as'", "write: set X.Place as Y.Place; values are given to an item, set X [+round]"},
        {"a bundle or 'as'", "write: fill X [-back], fill X as Y or fill X.Place as Y.Place"},
        {"a bundle, a literal or 'as'", "write: set X [-back], set X /k/, set X as Y or set X.Place as Y.Place"},
        {"a change before 'otherwise'", "say what the clause does, for instance: set X [-voice]"}};
    for (const auto& [what, remedy] : kRemedies)
      if (what == wanted) return remedy;
    Iterator next = where;
    const bool change_wanted = wanted.find("a change") != std::string::npos;  // of `->` the - was read as a boundary
    if (change_wanted && (MatchText(next, last, U"→") || MatchText(next, last, U">")))
      return "changes are said in words, set X [+voice], delete X, insert E:/i/ before X, and where in the pattern";
    if (MatchText(next, last, U"±")) return "write + or -; a feature that has either value is named alone: voice";
    if (wanted == "a label" && MatchText(next, last, U"#"))
      return "label the boundary in the pattern, B:#, and name it: delete B";
    if (PathNode(where, last) != last)
      return wanted == "a label"
                 ? "this speaks of the whole item: write its label alone"
                 : "a path such as X.Place follows spread or delink: is the word before it one of these?";
    if (where != last && notation::IsGreekVariable(*where))
      return "a variable stands right before its feature, αback, and -αback asks for the other value";
    return nullptr;
  }

  void Later(const std::string& construct, Span span) {
    const bool word = construct.find_first_of(" '") == std::string::npos;
    const std::string quoted = word ? "'" + construct + "'" : construct;
    diagnostics_.Error(Kind::kNotSupportedYet, span, quoted + " is not supported yet",
                       "leave it out: grammar/notation.md lists what works in this release");
    result_.unsupported.push_back({construct, span});
  }

  bool NeedsBlock(const outline::Section& section, const char* remedy) {
    if (section.has_block) return true;
    const Span end{file_, section.whole.end, section.whole.end};
    if (!section.head.broken)
      diagnostics_.Error(Kind::kSyntax, end, "expected '{' after '" + section.word + "'", remedy);
    return false;
  }

  template <class Built, class Rule>
  void ReadEntries(const outline::Section& section, const Rule& rule, Built& built, const char* remedy) {
    for (const outline::Entry& entry : section.entries) Run(entry, rule, built, remedy);
  }

  void ReadSection(const outline::Section& section) {
    switch (section.kind) {
      case outline::SectionKind::kLanguage:
        return ReadLine(section, language, syntax::Language(), "write: language \"Velmari\"");
      case outline::SectionKind::kInclude:
        return ReadInclude(section);
      case outline::SectionKind::kStrict:
        return ReadWord<syntax::Strict>(section);
      case outline::SectionKind::kTree:
        return ReadTree(section);
      case outline::SectionKind::kSegments:
        return ReadSegments(section, syntax::Segments::Kind::kSegments);
      case outline::SectionKind::kArchisegments:
        return ReadSegments(section, syntax::Segments::Kind::kArchisegments);
      case outline::SectionKind::kAllophones:
        return ReadSegments(section, syntax::Segments::Kind::kAllophones);
      case outline::SectionKind::kDiacritics:
        return ReadBlock(section, diacritics_entry, syntax::Diacritics(), "an entry reads: ◌̃ [+nasal] on [+syll]");
      case outline::SectionKind::kOmit:
        return ReadBlock(section, omit_entry, syntax::Omit(), "an entry reads: -voice in [-son]");
      case outline::SectionKind::kClass:
        return ReadLine(section, class_, syntax::Class(), "write: class V = [+syll]");
      case outline::SectionKind::kPattern:
        return ReadLine(section, named_pattern, syntax::NamedPattern(), "write: pattern Coda = [-syll] #");
      case outline::SectionKind::kFuse:
        return ReadLine(section, fuse, syntax::Fuse(), "write: fuse Place within morpheme");
      case outline::SectionKind::kSharing:
        return ReadLine(section, sharing, syntax::Sharing(), "write: sharing blocked");
      case outline::SectionKind::kRule:
        return ReadRule(section);
      case outline::SectionKind::kComplete:
        return ReadWord<syntax::Complete>(section);
      case outline::SectionKind::kLexicon:
        return ReadLexicon(section);
      case outline::SectionKind::kParadigm:
        return ReadParadigm(section);
      case outline::SectionKind::kSpelling:
        return ReadBlock(section, spelling_entry, syntax::Spelling(), "a line reads: ng = ŋ");
      case outline::SectionKind::kLength:
        return ReadLine(section, length_doubled, syntax::LengthDoubled(), "write: length doubled in [-syll]");
      case outline::SectionKind::kPrint:
        return ReadPrint(section);
      case outline::SectionKind::kData:
        return ReadData(section);
      case outline::SectionKind::kLater:
        Later(section.word, section.keyword);
        result_.unsupported.back().span = section.keyword;
        result_.tops.push_back(syntax::Unsupported{section.word, section.whole});
        return;
    }
  }

  template <class Rule, class Built>
  void ReadLine(const outline::Section& section, const Rule& rule, Built built, const char* remedy) {
    // A declaration that holds something of a later release is kept, so that uses of its name are not errors
    // too.
    const std::size_t before = result_.unsupported.size();
    const bool whole = Run(section.head, rule, built, remedy);
    if (!whole && result_.unsupported.size() == before) return;
    built.span = section.whole;
    result_.tops.push_back(std::move(built));
  }

  // A declaration that is one word.
  template <class Built>
  void ReadWord(const outline::Section& section) {
    x3::unused_type nothing;
    const std::string remedy = "'" + section.word + "' stands alone; what follows begins a line of its own";
    if (Run(section.head, word_alone, nothing, remedy.c_str())) result_.tops.push_back(Built{section.whole});
  }

  // Names of the other file stand before those of this one.
  void ReadInclude(const outline::Section& section) {
    const auto may_precede = [](const syntax::Top& top) {
      return std::holds_alternative<syntax::Language>(top) || std::holds_alternative<syntax::Include>(top) ||
             std::holds_alternative<syntax::Strict>(top);
    };
    if (!std::all_of(result_.tops.begin(), result_.tops.end(), may_precede))
      diagnostics_.Error(Kind::kSyntax, section.keyword, "'include' stands at the top of a file",
                         "move it up, before the first section other than 'language'");
    ReadLine(section, include, syntax::Include(), "write: include \"base.tier\"");
  }

  template <class Rule, class Built>
  void ReadBlock(const outline::Section& section, const Rule& rule, Built built, const char* remedy) {
    x3::unused_type nothing;
    Run(section.head, empty_head, nothing, "the block begins right after the word");
    if (!NeedsBlock(section, remedy)) return;
    ReadEntries(section, rule, built, remedy);
    built.span = section.whole;
    result_.tops.push_back(std::move(built));
  }

  void ReadTree(const outline::Section& section) {
    x3::unused_type nothing;
    const char* remedy = "a line reads: root > Place > •Labial •Coronal";
    const bool plain = Run(section.head, tree_head, nothing, remedy);
    if (!section.has_block && !plain) return;
    if (!NeedsBlock(section, remedy)) return;
    syntax::Tree tree;
    ReadEntries(section, tree_entry, tree, remedy);
    tree.span = section.whole;
    result_.tops.push_back(std::move(tree));
  }

  void ReadSegments(const outline::Section& section, syntax::Segments::Kind kind) {
    const char* remedy = "an entry reads: t̪ = t [+distributed]";
    syntax::Segments segments;
    Run(section.head, segments_head, segments, "write: segments from \"ipa\" { p t k }");
    if (!NeedsBlock(section, remedy)) return;
    segments.kind = kind;
    ReadEntries(section, segments_entry, segments, remedy);
    segments.span = section.whole;
    result_.tops.push_back(std::move(segments));
  }

  void ReadRule(const outline::Section& section) {
    const char* remedy = "write: rule \"voicing\" { where X:[+voice] Y:[-son]  spread X.voice to Y }";
    syntax::Rule head, rule;
    const std::size_t before = result_.unsupported.size();
    const bool named = Run(section.head, rule_head, head, remedy);
    if (!section.has_block) {
      if (named) NeedsBlock(section, remedy);
      return;
    }
    if (!section.closed && !section.body.broken) return;  // its end is not known: reported by the outline
    if (!Run(section.body, body, rule, remedy) || !named) {
      if (result_.unsupported.size() > before)
        result_.tops.push_back(syntax::Unsupported{"rule \"" + head.name.text + "\"", section.whole});
      return;
    }
    rule.name = std::move(head.name);
    rule.span = section.whole;
    result_.tops.push_back(std::move(rule));
  }

  void ReadLexicon(const outline::Section& section) {
    const char* remedy = "an entry reads: stem /tilun/ 'rope' noun";
    syntax::LexiconFrom from;
    if (!Run(section.head, lexicon_head, from, "write: lexicon from \"lex.tsv\", or lexicon { stem /a/ }")) return;
    if (from.path.span.end > 0) {
      if (section.has_block) return NoBlock(section);
      from.span = section.whole;
      result_.tops.push_back(std::move(from));
      return;
    }
    if (!NeedsBlock(section, remedy)) return;
    syntax::Lexicon lexicon;
    ReadEntries(section, lexicon_entries, lexicon, remedy);
    lexicon.span = section.whole;
    result_.tops.push_back(std::move(lexicon));
  }

  void ReadParadigm(const outline::Section& section) {
    const char* remedy = "a paradigm reads: paradigm noun { stem noun; number : SG // PL /-lAn/ }";
    syntax::Paradigm paradigm;
    const bool named = Run(section.head, paradigm_head, paradigm, remedy);
    if (!section.has_block) {
      if (named) NeedsBlock(section, remedy);
      return;
    }
    ReadEntries(section, paradigm_entry, paradigm, remedy);
    if (!named) return;
    paradigm.span = section.whole;
    result_.tops.push_back(std::move(paradigm));
  }

  void ReadPrint(const outline::Section& section) {
    if (section.head.span.end > section.head.span.begin) return Later("marks in 'print'", section.head.span);
    result_.tops.push_back(syntax::Print{section.whole});
  }

  void ReadData(const outline::Section& section) {
    const char* remedy = "a row reads: /tilun-pa/ [tilumpa] 'on the rope'";
    syntax::DataFrom from;
    if (!Run(section.head, data_head, from, "write: data from \"forms.tsv\", or data { /a/ [b] }") &&
        !section.has_block)
      return;
    if (from.path.span.end > 0) {
      ReadEntries(section, column_entry, from, "a column reads: surface = 2, or surface = Phonetic_Form");
      from.span = section.whole;
      result_.tops.push_back(std::move(from));
      return;
    }
    if (!NeedsBlock(section, remedy)) return;
    syntax::Data data;
    data.comparing_length = from.comparing_length;
    ReadEntries(section, data_entry, data, remedy);
    data.span = section.whole;
    result_.tops.push_back(std::move(data));
  }

  // A table is named, and a block stands beside it.
  void NoBlock(const outline::Section& section) {
    diagnostics_.Error(Kind::kSyntax, section.body.span, "'" + section.word + " from' takes no block",
                       "write a second '" + section.word + " { }' for what is not in the table");
  }

  std::string_view text_;
  std::uint32_t file_;
  Diagnostics& diagnostics_;
  syntax::File result_;
};

}  // namespace

syntax::File Parse(const SourceMap& sources, std::uint32_t file, Diagnostics& diagnostics) {
  Diagnostics found;
  syntax::File result = Reader(sources.text(file), file, found).Read();
  // The outline speaks before the entries do: bring the messages into the order of the file.
  std::vector<Diagnostic> sorted = found.all();
  std::stable_sort(sorted.begin(), sorted.end(),
                   [](const Diagnostic& a, const Diagnostic& b) { return a.span.begin < b.span.begin; });
  for (Diagnostic& diagnostic : sorted) diagnostics.Add(std::move(diagnostic));
  return result;
}

}  // namespace tiersmith
