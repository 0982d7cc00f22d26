// grammar/notation.ebnf against the parser. The file is read as a grammar; a generator makes random sentences
// of it, a recogniser that knows nothing of the parser says of spoiled sentences whether they are still in
// the language, and the parser must agree both times. /pul-lAr/ in `data { /pul-lAr/ [pullɑr] }` is one token
// here.
#include <array>
#include <catch2/catch.hpp>
#include <fstream>
#include <functional>
#include <map>
#include <random>
#include <set>
#include <sstream>

#include "grammar/parse.h"
#include "grammar/words.h"

namespace tiersmith {
namespace {

// ---- the EBNF, read -------------------------------------------------------------------------------

struct Expression {
  enum class Kind { kSequence, kChoice, kOptional, kRepeat, kRepeatOnce, kLiteral, kWords, kName };
  Kind kind = Kind::kSequence;
  std::string text;
  std::vector<Expression> parts;
};

class EbnfReader {
 public:
  explicit EbnfReader(std::string text) : text_(std::move(text)) { Next(); }

  std::map<std::string, Expression> Read() {
    std::map<std::string, Expression> productions;
    while (token_ != "") {
      const std::string name = Take();
      Expect("=");
      REQUIRE(productions.count(name) == 0);
      productions[name] = Choice();
      Expect(";");
    }
    return productions;
  }

 private:
  void Expect(const std::string& sign) {
    CAPTURE(sign, token_, position_);
    REQUIRE(token_ == sign);
    Next();
  }
  std::string Take() {
    std::string taken = token_;
    Next();
    return taken;
  }
  void Next() {
    for (;;) {
      while (position_ < text_.size() && isspace(static_cast<unsigned char>(text_[position_]))) ++position_;
      if (text_.compare(position_, 2, "(*") != 0) break;
      SkipComment();
    }
    if (position_ >= text_.size()) {
      token_.clear();
      return;
    }
    const std::size_t begin = position_;
    const char c = text_[position_];
    if (c == '"' || c == '?') {
      position_ = text_.find(c, position_ + 1) + 1;
    } else if (isalpha(static_cast<unsigned char>(c))) {
      while (isalnum(static_cast<unsigned char>(text_[position_])) || text_[position_] == '_') ++position_;
    } else {
      position_ += text_.compare(position_, 2, "}-") == 0 ? 2 : 1;
    }
    token_ = text_.substr(begin, position_ - begin);
  }
  // Comments nest.
  void SkipComment() {
    int depth = 0;
    do {
      const bool open = text_.compare(position_, 2, "(*") == 0, close = text_.compare(position_, 2, "*)") == 0;
      depth += open - close;
      position_ += open || close ? 2 : 1;
    } while (depth > 0 && position_ < text_.size());
  }
  Expression Choice() {
    Expression choice{Expression::Kind::kChoice, "", {Sequence()}};
    while (token_ == "|") {
      Next();
      choice.parts.push_back(Sequence());
    }
    return choice.parts.size() == 1 ? choice.parts.front() : choice;
  }
  Expression Sequence() {
    Expression sequence;
    while (token_ != "" && token_ != "|" && token_ != ";" && token_ != "]" && token_ != "}" && token_ != "}-" &&
           token_ != ")")
      sequence.parts.push_back(Part());
    return sequence;
  }
  Expression Part() {
    const std::string token = Take();
    if (token == "(") {
      Expression inside = Choice();
      Expect(")");
      return inside;
    }
    if (token == "[") {
      Expression inside{Expression::Kind::kOptional, "", {Choice()}};
      Expect("]");
      return inside;
    }
    if (token == "{") {
      Expression inside{Expression::Kind::kRepeat, "", {Choice()}};
      if (token_ == "}-") inside.kind = Expression::Kind::kRepeatOnce;
      Next();
      return inside;
    }
    if (token[0] == '"') return {Expression::Kind::kLiteral, token.substr(1, token.size() - 2), {}};
    if (token[0] == '?') return {Expression::Kind::kWords, token.substr(2, token.size() - 4), {}};
    return {Expression::Kind::kName, token, {}};
  }

  std::string text_;
  std::size_t position_ = 0;
  std::string token_;
};

std::string ReadFile(const std::string& path) {
  std::ifstream file(path);
  CAPTURE(path);
  REQUIRE(file.good());
  std::stringstream text;
  text << file.rdbuf();
  return text.str();
}

void Literals(const Expression& expression, std::set<std::string>& literals) {
  if (expression.kind == Expression::Kind::kLiteral) literals.insert(expression.text);
  for (const Expression& part : expression.parts) Literals(part, literals);
}

// ---- sentences ------------------------------------------------------------------------------------

struct Piece {
  std::string text;
  bool glued = false;
};
using Sentence = std::vector<Piece>;

std::string Text(const Sentence& sentence) {
  std::string text;
  for (const Piece& piece : sentence) text += (piece.glued ? "" : " ") + piece.text;
  return text;
}

class Ebnf {
 public:
  Ebnf() : productions_(EbnfReader(ReadFile(std::string(TIERSMITH_TEST_SOURCE) + "/grammar/notation.ebnf")).Read()) {
    Literals(productions_.at("reserved"), reserved_);
    Literals(productions_.at("bundle_word"), bundle_words_);
    for (int round = 0; round < 100; ++round)
      for (const auto& [name, expression] : productions_) depth_[name] = Depth(expression) + 1;
  }

  const std::set<std::string>& reserved() const { return reserved_; }
  const std::set<std::string>& bundle_words() const { return bundle_words_; }
  const std::map<std::string, Expression>& productions() const { return productions_; }

  Sentence Generate(const std::string& start, std::mt19937& random, int depth) const {
    Sentence sentence;
    bool glue = false;
    Make(productions_.at(start), random, depth, sentence, glue);
    return sentence;
  }

  bool Recognise(const std::string& start, const Sentence& sentence) const {
    Memo memo;
    const States ends = Ends(productions_.at(start), sentence, 0, memo);
    return ends.count(static_cast<int>(sentence.size()) * 2) > 0;
  }

 private:
  // Twice the position, and one if `? glued ?` has just been passed.
  using States = std::set<int>;
  using Memo = std::map<std::pair<std::string, int>, States>;

  int Depth(const Expression& e) const {
    switch (e.kind) {
      case Expression::Kind::kOptional:
      case Expression::Kind::kRepeat:
      case Expression::Kind::kLiteral:
      case Expression::Kind::kWords:
        return 0;
      case Expression::Kind::kName:
        return depth_.count(e.text) ? depth_.at(e.text) : 1000;
      case Expression::Kind::kSequence:
      case Expression::Kind::kRepeatOnce: {
        int deepest = 0;
        for (const Expression& part : e.parts) deepest = std::max(deepest, Depth(part));
        return deepest;
      }
      case Expression::Kind::kChoice: {
        int least = 1000;
        for (const Expression& part : e.parts) least = std::min(least, Depth(part));
        return least;
      }
    }
    return 0;
  }

  static int Pick(std::mt19937& random, int below) { return static_cast<int>(random() % static_cast<unsigned>(below)); }

  void Make(const Expression& e, std::mt19937& random, int depth, Sentence& out, bool& glue) const {
    switch (e.kind) {
      case Expression::Kind::kLiteral:
        out.push_back({e.text, std::exchange(glue, false)});
        return;
      case Expression::Kind::kWords:
        if (e.text == "glued") {
          glue = true;
        } else {
          out.push_back({Spell(e.text, random), std::exchange(glue, false)});
        }
        return;
      case Expression::Kind::kName:
        return Make(productions_.at(e.text), random, depth - 1, out, glue);
      case Expression::Kind::kSequence:
        for (const Expression& part : e.parts) Make(part, random, depth, out, glue);
        return;
      case Expression::Kind::kOptional:
        if (Pick(random, 2) == 0 && Depth(e.parts[0]) < std::max(depth, 1)) Make(e.parts[0], random, depth, out, glue);
        return;
      case Expression::Kind::kRepeatOnce:
        Make(e.parts[0], random, depth, out, glue);
        [[fallthrough]];
      case Expression::Kind::kRepeat:
        while (Pick(random, 5) < 2 && Depth(e.parts[0]) < std::max(depth, 1))
          Make(e.parts[0], random, depth, out, glue);
        return;
      case Expression::Kind::kChoice: {
        std::vector<const Expression*> open;
        for (const Expression& part : e.parts)
          if (Depth(part) <= std::max(depth, Depth(e))) open.push_back(&part);
        Make(*open[static_cast<std::size_t>(Pick(random, static_cast<int>(open.size())))], random, depth, out, glue);
        return;
      }
    }
  }

  static std::string Spell(const std::string& words, std::mt19937& random) {
    static const std::map<std::string, std::vector<std::string>> kSamples = {
        {"bare name", {"V", "C", "X", "N1", "back", "Place", "Tone", "high_tone", "ŋãsé", "tier"}},
        {"feature name", {"back", "Place", "nasal", "\"long\"", "\"stem\""}},
        {"daughter name", {"back", "Place", "sg", "\"x2\""}},
        {"quoted name", {"\"stem\"", "\"a -- { b\""}},
        {"string", {"\"Velmari\"", "\"\"", "\"a -- { b\""}},
        {"bare symbol", {"p", "t͡s", "kʷ", "◌̃", "◌ʷ", "ǃ", "tʼ", "A"}},
        {"digits", {"1", "2", "3", "9"}},
        {"x with a number glued to it", {"x2", "x3"}},
        {"tag name", {"noun", "loan", "C"}},
        {"letters", {"ng", "aa", "c", "+", "k'"}},
        {"spelled as", {"ŋ", "aː", "-", "="}},
        {"form", {"/k/", "//", "/pul-lAr/", "/a} -- b/", "/felama{HL}/"}},
        {"spelled form", {"⟨ng⟩"}},
        {"surface", {"[]", "[pullɑr]", "[a; b]"}},
        {"gloss", {"'rope'", "'the dog''s'", "'a } b'"}},
        {"subscript digits", {"₀", "₁", "₂"}},
        {"superscript digits", {"²", "³", "⁴"}},
        {"later words", {"Tone", "\"later\""}},
        {"later block", {"peak [+syll] { x } y", "a = b ; c"}},
        {"rest of the line", {"words up to here\n"}}};
    CAPTURE(words);
    const auto found = kSamples.find(words);
    REQUIRE(found != kSamples.end());
    return found->second[static_cast<std::size_t>(Pick(random, static_cast<int>(found->second.size())))];
  }

  bool IsBareName(const std::string& text) const {
    if (reserved_.count(text) || text.empty() || !notation::IsNameStart(notation::CodePointAt(text, 0).value))
      return false;
    for (std::size_t i = 0; i < text.size(); i += notation::CodePointAt(text, i).length)
      if (!notation::IsNameCharacter(notation::CodePointAt(text, i).value)) return false;
    return true;
  }
  static bool IsBareSymbol(const std::string& text) {
    for (const char* barred : {"-", "−", "–", "=", "#", ".", "‖", "|", "@", "/",  "⟨", "⟩",
                               "+", "±", ",", "ː", "{", "}", "[", "]", ";", "\"", " ", "\n"})
      if (text.find(barred) != std::string::npos) return false;
    return text != "surface";
  }
  bool IsLetters(const std::string& text) const {
    return text.find_first_of(" \n;\"{}") == std::string::npos && text.compare(0, 2, "--") != 0 &&
           !reserved_.count(text);
  }
  static bool IsEntryWord(const std::string& text) {
    return text == "prefix" || text == "suffix" || text == "clitic" || text == "weight";
  }
  static bool Digits(const std::string& text) { return text.find_first_not_of("0123456789") == std::string::npos; }
  static bool Between(const std::string& text, const std::string& open, const std::string& close) {
    return text.size() >= open.size() + close.size() && text.compare(0, open.size(), open) == 0 &&
           text.compare(text.size() - close.size(), close.size(), close) == 0;
  }

  bool Fits(const std::string& words, const std::string& text) const {
    const bool quoted = Between(text, "\"", "\""), name = quoted && text != "\"\"";
    const bool times = text.size() > 1 && text[0] == 'x' && Digits(text.substr(1));
    if (words == "bare name") return IsBareName(text);
    if (words == "tag name") return IsBareName(text) && !IsEntryWord(text);
    if (words == "letters") return IsLetters(text) && text.find_first_of("=<>") == std::string::npos;
    if (words == "spelled as") return IsLetters(text);
    if (words == "feature name") return name || (IsBareName(text) && !bundle_words_.count(text));
    if (words == "daughter name") return name || (IsBareName(text) && !times);
    if (words == "string") return quoted;
    if (words == "quoted name") return name;
    if (words == "bare symbol") return IsBareSymbol(text) && !reserved_.count(text);
    if (words == "digits") return Digits(text);
    if (words == "x with a number glued to it") return times;
    if (words == "form") return Between(text, "/", "/");
    if (words == "spelled form") return Between(text, "⟨", "⟩");
    if (words == "surface") return Between(text, "[", "]");
    if (words == "gloss") return Between(text, "'", "'");
    if (words == "subscript digits") return text == "₀" || text == "₁" || text == "₂";
    if (words == "superscript digits") return text == "²" || text == "³" || text == "⁴";
    return false;  // what sections of later releases say is not looked into
  }

  States Ends(const Expression& e, const Sentence& s, int state, Memo& memo) const {
    const auto position = static_cast<std::size_t>(state / 2);
    const bool glue = state % 2 == 1;
    switch (e.kind) {
      case Expression::Kind::kLiteral:
      case Expression::Kind::kWords: {
        if (e.kind == Expression::Kind::kWords && e.text == "glued") return {static_cast<int>(position) * 2 + 1};
        if (position >= s.size() || s[position].glued != glue) return {};
        const bool fits =
            e.kind == Expression::Kind::kLiteral ? s[position].text == e.text : Fits(e.text, s[position].text);
        return fits ? States{(static_cast<int>(position) + 1) * 2} : States{};
      }
      case Expression::Kind::kName: {
        const auto key = std::make_pair(e.text, state);
        const auto known = memo.find(key);
        if (known != memo.end()) return known->second;
        return memo[key] = Ends(productions_.at(e.text), s, state, memo);
      }
      case Expression::Kind::kSequence: {
        States states = {state};
        for (const Expression& part : e.parts) states = All(part, s, states, memo);
        return states;
      }
      case Expression::Kind::kChoice: {
        States states;
        for (const Expression& part : e.parts) states.merge(Ends(part, s, state, memo));
        return states;
      }
      case Expression::Kind::kOptional: {
        States states = Ends(e.parts[0], s, state, memo);
        states.insert(state);
        return states;
      }
      case Expression::Kind::kRepeat:
      case Expression::Kind::kRepeatOnce: {
        States all;
        if (e.kind == Expression::Kind::kRepeat) all.insert(state);
        States fresh = Ends(e.parts[0], s, state, memo);
        while (!fresh.empty()) {
          States next;
          for (const int f : fresh)
            if (all.insert(f).second) next.merge(Ends(e.parts[0], s, f, memo));
          fresh = std::move(next);
        }
        return all;
      }
    }
    return {};
  }
  States All(const Expression& e, const Sentence& s, const States& states, Memo& memo) const {
    States all;
    for (const int state : states) all.merge(Ends(e, s, state, memo));
    return all;
  }

  std::map<std::string, Expression> productions_;
  std::set<std::string> reserved_, bundle_words_;
  std::map<std::string, int> depth_;
};

// What the parser says: nothing but constructs of later releases is no error here.
struct Verdict {
  bool accepted = true;
  bool by_hand = true;         // rejected only by one of the checks the EBNF names as made behind the grammar
  bool later_section = false;  // holds a section of a later release, which may say anything
  std::string message;
};

Verdict Judge(const std::string& text) {
  SourceMap sources;
  Diagnostics diagnostics;
  const syntax::File file = Parse(sources, sources.Add("sentence.tier", text), diagnostics);
  Verdict verdict;
  for (const syntax::Top& top : file.tops) {
    const auto* later = std::get_if<syntax::Unsupported>(&top);
    verdict.later_section = verdict.later_section || (later != nullptr && later->construct.find("rule ") != 0);
  }
  for (const Diagnostic& d : diagnostics.all()) {
    if (d.kind == Kind::kNotSupportedYet) continue;
    verdict.accepted = false;
    verdict.message += d.message + "; ";
    bool known = false;
    for (const char* check :
         {"stands twice", "stands at the top", "a probability above 0", "allows nothing", "goes up to 99", "1 to 9"})
      known = known || d.message.find(check) != std::string::npos;
    verdict.by_hand = verdict.by_hand && known;
  }
  return verdict;
}

constexpr unsigned kSeed = 20261;

}  // namespace

TEST_CASE("sentences of the EBNF parse", "[unit]") {
  const Ebnf ebnf;
  INFO("seed " << kSeed);
  std::mt19937 random(kSeed);
  std::map<std::string, int> made;
  for (const char* start : {"file", "tree", "segments", "diacritics", "omit", "class", "named_pattern", "rule",
                            "lexicon", "paradigm", "spelling", "length", "data", "language"}) {
    for (int i = 0; i < 2000; ++i) {
      const Sentence sentence = ebnf.Generate(start, random, 4 + i % 12);
      const std::string text = Text(sentence);
      const Verdict verdict = Judge(text);
      INFO(start << ": " << text << "\n" << verdict.message);
      REQUIRE((verdict.accepted || verdict.by_hand));
      made[start] += verdict.accepted;
    }
    CHECK(made[start] > 1200);
  }
}

TEST_CASE("spoiled sentences: parser and EBNF agree", "[unit]") {
  const Ebnf ebnf;
  INFO("seed " << kSeed + 1);
  std::mt19937 random(kSeed + 1);
  int refused = 0, accepted = 0;
  for (const char* start : {"tree", "segments", "diacritics", "omit", "class", "named_pattern", "rule", "lexicon",
                            "paradigm", "spelling", "length", "data"}) {
    for (int i = 0; i < 4000; ++i) {
      Sentence sentence = ebnf.Generate(start, random, 4 + i % 10);
      if (sentence.size() < 3) continue;
      const std::size_t at = 1 + random() % (sentence.size() - 1);
      const std::size_t other = 1 + random() % (sentence.size() - 1);
      switch (random() % 4) {
        case 0:
          sentence.erase(sentence.begin() + static_cast<std::ptrdiff_t>(at));
          break;
        case 1:
          sentence.insert(sentence.begin() + static_cast<std::ptrdiff_t>(at), {sentence[other].text, false});
          break;
        case 2:
          std::swap(sentence[at].text, sentence[other].text);
          break;
        default:
          sentence[at].text = sentence[other].text;
          break;
      }
      if (at < sentence.size()) sentence[at].glued = false;
      if (at + 1 < sentence.size()) sentence[at + 1].glued = false;
      if (other < sentence.size()) sentence[other].glued = false;
      if (other + 1 < sentence.size()) sentence[other + 1].glued = false;
      bool other_text = false;  // a later block may hold anything; in `spelling` / begins no form
      for (const Piece& piece : sentence)
        other_text = other_text || piece.text.find("peak") == 0 || piece.text.find("a = b") == 0 ||
                     (start == std::string("spelling") && piece.text.find("/a}") == 0);
      for (std::size_t k = 0; k < sentence.size(); ++k)  // `C_` without its number is a name of its own
        other_text = other_text || (sentence[k].text == "_" && !(k + 1 < sentence.size() && sentence[k + 1].glued));
      if (other_text) continue;
      const std::string text = Text(sentence);
      const Verdict verdict = Judge(text);
      const bool expected = ebnf.Recognise("file", sentence);
      if (verdict.later_section || (expected && verdict.by_hand && !verdict.accepted)) continue;
      INFO(start << ": " << text << "\n" << verdict.message);
      REQUIRE(verdict.accepted == expected);
      ++(expected ? accepted : refused);
    }
  }
  CHECK(refused > 5000);
  CHECK(accepted > 2000);
}

TEST_CASE("words of the EBNF are reserved in the parser, and no others", "[unit]") {
  const Ebnf ebnf;
  std::set<std::string> words;
  for (const auto& [name, expression] : ebnf.productions()) Literals(expression, words);
  int names = 0;
  for (const std::string& word : words) {
    if (!isalpha(static_cast<unsigned char>(word[0])) || static_cast<unsigned char>(word[0]) > 127) continue;
    SourceMap sources;
    Diagnostics diagnostics;
    Parse(sources, sources.Add("word.tier", "class " + word + " = [+syll]"), diagnostics);
    CAPTURE(word);
    if (ebnf.reserved().count(word)) {
      REQUIRE(!diagnostics.all().empty());
      CHECK(diagnostics.all()[0].kind == Kind::kReservedWord);
      CHECK(diagnostics.all()[0].span.begin == 6);
      CHECK(diagnostics.all()[0].span.end == 6 + word.size());
    } else {
      CHECK(diagnostics.all().empty());
      ++names;
    }
    Diagnostics quoted;
    Parse(sources, sources.Add("quoted.tier", "class \"" + word + "\" = [+syll]"), quoted);
    CHECK(quoted.all().empty());
  }
  CHECK(names > 30);
  std::set<std::string> parser_words(notation::ReservedWords().begin(), notation::ReservedWords().end());
  CHECK(parser_words == ebnf.reserved());
  std::set<std::string> parser_bundle_words(notation::BundleWords().begin(), notation::BundleWords().end());
  CHECK(parser_bundle_words == ebnf.bundle_words());
}

TEST_CASE("bundle words have a meaning of their own in a bundle and are names elsewhere", "[unit]") {
  const Ebnf ebnf;
  for (const std::string& word : ebnf.bundle_words()) {
    CAPTURE(word);
    SourceMap sources;
    Diagnostics bare, quoted;
    const syntax::File file = Parse(sources, sources.Add("bare.tier", "class V = [" + word + "]"), bare);
    if (bare.all().empty()) {  // `long` and `short` stand alone
      CHECK(std::get<syntax::Class>(file.tops.at(0)).set.bundle.feats.at(0).kind >= syntax::Feat::Kind::kLong);
    }
    Parse(sources, sources.Add("quoted.tier", "class V = [\"" + word + "\" +" + word + "]"), quoted);
    CHECK(quoted.all().empty());
  }
}

}  // namespace tiersmith
