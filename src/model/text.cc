// Reading and writing forms. See text.h.
//
// Example: "ba:t-a" over p t b a is b, a, length, t, boundary, a; its form has one root on the second and
// third slot. Does not handle: floats, marks of prosody and tone, spelling rules (speller.h).
// Tested by tests/unit/model/text_test.cc.
#include "model/text.h"

#include <algorithm>
#include <cstdio>
#include <memory>
#include <set>
#include <sstream>
#include <unordered_map>
#include <utility>

#include "base/utf8.h"
#include "grammar/words.h"
#include "model/character_names.h"
#include "model/library.h"
#include "model/normal_text.h"
#include "model/symbol_trie.h"

namespace tiersmith {
namespace {

// The words of a character's name that tell it from others: T and STROKE of LATIN CAPITAL LETTER T WITH
// STROKE.
std::set<std::string> TellingWords(const std::string& name) {
  static const std::set<std::string> common = {"LATIN",   "GREEK",  "CYRILLIC", "MODIFIER", "SMALL",
                                               "CAPITAL", "LETTER", "WITH",     "AND"};
  std::istringstream stream(name);
  std::set<std::string> words;
  for (std::string word; stream >> word;) {
    if (common.count(word) == 0) words.insert(word);
  }
  return words;
}

// Does the last word of a character's name hold this letter of the alphabet (ENG holds n)?
bool NameHolds(const std::string& name, char32_t letter) {
  if (letter < U'a' || letter > U'z') return false;
  const std::size_t space = name.rfind(' ');
  return name.find(static_cast<char>(letter - U'a' + U'A'), space == std::string::npos ? 0 : space) !=
         std::string::npos;
}

// How far two segments are apart: each node that only one of them bears, or with another value, counts; what hangs
// under such a node does not.
int Distance(const Tree& tree, const FeatureTree& a, const FeatureTree& b) {
  const auto first = [](const FeatureTree& content, NodeId node) -> const FeatureTree* {
    for (const FeatureTree& daughter : content.daughters) {
      if (daughter.node == node) return &daughter;
    }
    return nullptr;
  };
  int distance = 0;
  for (const NodeId node : tree[a.node].daughters) {
    const FeatureTree *one = first(a, node), *other = first(b, node);
    if (one == nullptr && other == nullptr) continue;
    const bool manner = a.node == kRootNode && tree[node].type != TreeNode::Type::kClass;
    if (one == nullptr || other == nullptr || one->value != other->value) {
      distance += manner ? 3 : 1;
    } else {
      distance += Distance(tree, *one, *other);
    }
  }
  return distance;
}

}  // namespace

Boundary BoundaryOf(char32_t code) {
  switch (code) {
    case U'-':
      return Boundary::kMorpheme;
    case U'=':
      return Boundary::kClitic;
    case U'#':
    case U' ':
      return Boundary::kWord;
    case U'\u2016':
      return Boundary::kPhrase;
    default:
      return Boundary::kNone;
  }
}

struct Reader::Impl {
  const Grammar* grammar = nullptr;
  SymbolTrie trie;
  mutable NormalText text;                            // kept between calls: no allocation on the good path
  std::vector<std::pair<std::u32string, int>> marks;  // declared diacritics that follow their base
  std::vector<Form> underlying, surface;              // the pool of one slot, per symbol

  const Inventory& inventory() const { return grammar->inventory; }
  const Symbol& symbol(int id) const { return grammar->inventory.symbols[static_cast<std::size_t>(id)]; }

  bool Read(std::string_view typed, Side side, std::vector<Token>* tokens, TextError* error,
            std::vector<TypedTag>* tags) const;
  void AddSymbol(int symbol, std::vector<Token>* tokens) const;
  bool AddTag(std::string_view typed, std::size_t* unit, const std::vector<Token>& tokens, std::vector<TypedTag>* tags,
              TextError* error) const;
  bool Allowed(int symbol, Side side) const;
  int WithMarksAfterLength(int symbol, std::size_t* position) const;
  const std::pair<std::u32string, int>* MarkAt(std::size_t position) const;

  bool Fail(std::size_t unit, Kind kind, std::string message, std::string remedy, TextError* error) const;
  bool FailSymbol(int id, std::size_t unit, std::size_t end, Side side, TextError* error) const;
  bool FailBytes(std::size_t unit, std::string_view typed, TextError* error) const;
  bool FailUnknown(std::size_t unit, TextError* error) const;
  std::string Nearest(std::size_t unit) const;
  std::string NearestByFeatures(char32_t code) const;
  std::string NearestByShape(char32_t code) const;
  mutable std::unique_ptr<Library> library;  // read when the first unknown character comes
};

Reader::Reader(const Grammar& grammar) : impl_(new Impl) {
  impl_->grammar = &grammar;
  const Inventory& inventory = grammar.inventory;
  for (std::size_t i = 0; i < inventory.symbols.size(); ++i) {
    const Symbol& symbol = inventory.symbols[i];
    impl_->trie.Add(symbol.text, static_cast<int>(i));
    for (const bool is_underlying : {true, false}) {
      Form form;
      AddContent(form, is_underlying ? symbol.underlying : symbol.full);
      (is_underlying ? impl_->underlying : impl_->surface).push_back(std::move(form));
    }
  }
  for (std::size_t i = 0; i < inventory.marks.size(); ++i) {
    if (!inventory.marks[i].before) impl_->marks.emplace_back(Normalise(inventory.marks[i].text), static_cast<int>(i));
  }
}

Reader::~Reader() { delete impl_; }

bool Reader::Read(std::string_view text, Side side, std::vector<Token>* tokens, TextError* error,
                  std::vector<TypedTag>* tags) const {
  return impl_->Read(text, side, tokens, error, tags);
}

bool Reader::Impl::Allowed(int id, Side side) const {
  const Symbol& s = symbol(id);
  return side == Side::kUnderlying ? s.in_underlying : s.completes;
}

// The same letter twice is long where `length doubled` says so; a third begins anew.
void Reader::Impl::AddSymbol(int id, std::vector<Token>* tokens) const {
  const bool doubles = grammar->Doubles(id) && !tokens->empty() && tokens->back().kind == Token::Kind::kSymbol &&
                       tokens->back().symbol == id;
  tokens->push_back(doubles ? Token{Token::Kind::kLength, -1, Boundary::kNone}
                            : Token{Token::Kind::kSymbol, id, Boundary::kNone});
}

bool Reader::Impl::AddTag(std::string_view typed, std::size_t* unit, const std::vector<Token>& tokens,
                          std::vector<TypedTag>* tags, TextError* error) const {
  TypedTag tag;
  std::size_t position = text.units[*unit].begin;
  if (!ReadTag(typed, &position, &tag, error)) return false;
  const bool opens = tokens.empty() || tokens.back().kind == Token::Kind::kBoundary;
  if (opens != (typed[tag.offset] != '@')) {
    return opens ? Fail(*unit, Kind::kBadForm, "no morpheme stands before this tag",
                        "write a tag behind its morpheme: sake@noun", error)
                 : Fail(*unit, Kind::kBadForm, "√ stands inside a morpheme", "write it before the morpheme: √sake",
                        error);
  }
  tag.token = tokens.size();
  tags->push_back(std::move(tag));
  while (*unit < text.units.size() && text.units[*unit].begin < position) ++*unit;
  return true;
}

bool Reader::Impl::Read(std::string_view typed, Side side, std::vector<Token>* tokens, TextError* error,
                        std::vector<TypedTag>* tags) const {
  tokens->clear();
  if (tags != nullptr) tags->clear();
  text.Assign(typed);
  const NormalText::Unit* units = text.units.data();
  const std::size_t size = text.units.size();
  std::size_t i = 0;
  while (i < size) {
    const SymbolTrie::Match match = trie.Longest(units, i, size);
    if (match.symbol >= 0) {
      if (!Allowed(match.symbol, side)) return FailSymbol(match.symbol, i, match.end, side, error);
      if (tags != nullptr && !tags->empty() && tags->back().token == tokens->size() &&
          tags->back().name != MorphemeKindName(MorphemeKind::kStem)) {
        return Fail(i, Kind::kBadForm, "a symbol stands behind the tag of its morpheme",
                    "write tags behind the whole morpheme, or a boundary between: sake@noun-lAn", error);
      }
      AddSymbol(match.symbol, tokens);
      i = match.end;
      continue;
    }
    const char32_t code = units[i].code;
    if (tags != nullptr && (code == U'@' || code == U'\u221A')) {
      if (!AddTag(typed, &i, *tokens, tags, error)) return false;
      continue;
    }
    if (code == kLengthSign) {
      if (tokens->empty() || tokens->back().kind == Token::Kind::kBoundary) {
        return Fail(i, Kind::kBadForm, "ː lengthens nothing here", "write it after the symbol that is long", error);
      }
      ++i;
      // Marks may stand behind the length sign: aː̃ is ãː.
      std::size_t owner = tokens->size();
      while ((*tokens)[owner - 1].kind == Token::Kind::kLength) --owner;
      const int marked = WithMarksAfterLength((*tokens)[owner - 1].symbol, &i);
      if (!Allowed(marked, side)) return FailSymbol(marked, i - 1, i, side, error);
      (*tokens)[owner - 1].symbol = marked;
      tokens->push_back({Token::Kind::kLength, -1, Boundary::kNone});
      continue;
    }
    Boundary boundary = BoundaryOf(code);
    std::size_t end = i + 1;
    if (code == U'|' && end < size && units[end].code == U'|') {
      boundary = Boundary::kPhrase;
      ++end;
    }
    if (boundary == Boundary::kNone) {
      // A byte that is no UTF-8 was read as U+FFFD, one byte long; U+FFFD itself is three.
      const bool malformed = code == 0xFFFD && units[i].end - units[i].begin == 1;
      return malformed ? FailBytes(i, typed, error) : FailUnknown(i, error);
    }
    while (code == U' ' && end < size && units[end].code == U' ') ++end;
    tokens->push_back({Token::Kind::kBoundary, -1, boundary});
    i = end;
  }
  return true;
}

const std::pair<std::u32string, int>* Reader::Impl::MarkAt(std::size_t position) const {
  for (const auto& mark : marks) {
    if (mark.first.size() > text.units.size() - position) continue;
    bool same = true;
    for (std::size_t k = 0; k < mark.first.size(); ++k) same = same && text.units[position + k].code == mark.first[k];
    if (same) return &mark;
  }
  return nullptr;
}

int Reader::Impl::WithMarksAfterLength(int id, std::size_t* position) const {
  if (marks.empty()) return id;
  std::string written = symbol(id).text;
  std::size_t end = *position;
  while (end < text.units.size()) {
    const auto* mark = MarkAt(end);
    if (mark == nullptr) break;
    written += ToUtf8(mark->first);
    end += mark->first.size();
  }
  if (end == *position) return id;
  NormalText cluster;
  cluster.Assign(written);
  const SymbolTrie::Match match = trie.Longest(cluster.units.data(), 0, cluster.units.size());
  if (match.symbol < 0 || match.end != cluster.units.size()) return id;  // the mark is then reported where it stands
  *position = end;
  return match.symbol;
}

// ---- errors -----------------------------------------------------------------------------------------

bool Reader::Impl::Fail(std::size_t unit, Kind kind, std::string message, std::string remedy, TextError* error) const {
  error->kind = kind;
  error->offset = text.units[unit].begin;
  error->length = text.units[unit].end - text.units[unit].begin;
  error->message = std::move(message);
  error->remedy = std::move(remedy);
  return false;
}

bool Reader::Impl::FailSymbol(int id, std::size_t unit, std::size_t end, Side side, TextError* error) const {
  const Symbol& s = symbol(id);
  const std::string text_of = s.text;
  if (side == Side::kUnderlying) {
    Fail(unit, Kind::kBadForm, "'" + text_of + "' does not stand in underlying forms: it is surface only",
         "write the segment it is made from, or list " + text_of + " in `segments`", error);
  } else {
    Fail(unit, Kind::kBadForm, "'" + text_of + "' does not stand in surface forms: it is an archisegment",
         "write the segment it comes out as", error);
  }
  error->length = text.units[end - 1].end - error->offset;
  return false;
}

bool Reader::Impl::FailBytes(std::size_t unit, std::string_view typed, TextError* error) const {
  const std::string_view mark = typed.substr(0, 2);
  const bool utf16 = mark == "\xFF\xFE" || mark == "\xFE\xFF";
  char byte[8];
  std::snprintf(byte, sizeof byte, "0x%02X",
                static_cast<unsigned>(static_cast<unsigned char>(typed[text.units[unit].begin])));
  return Fail(
      unit, Kind::kNotUtf8,
      std::string("this form is not UTF-8: byte ") + byte + (utf16 ? " begins UTF-16 text" : " cannot stand here"),
      utf16 ? "give forms as UTF-8; to convert them: iconv -f UTF-16 -t UTF-8"
            : "give forms as UTF-8, or convert them from what they are, for example: iconv -f LATIN1 -t UTF-8",
      error);
}

bool Reader::Impl::FailUnknown(std::size_t unit, TextError* error) const {
  const char32_t code = text.units[unit].code;
  switch (code) {
    case U'.':
    case U'\u02C8':
    case U'\u02CC':
      return Fail(unit, Kind::kNotSupportedYet, "marks of stress and syllables (ˈ ˌ .) are not read by this release",
                  "leave them out", error);
    case U'{':
      return Fail(unit, Kind::kNotSupportedYet, "floating instances {..} are not read by this release",
                  "leave the float out", error);
    case U'@':
    case U'\u221A':
      return Fail(unit, Kind::kBadForm, "a tag stands in underlying forms that are typed or listed as data",
                  "leave the tag out here", error);
    default:
      break;
  }
  // A declared diacritic that this base may not bear is no unknown character, though the pair is no symbol.
  if (const auto* mark = MarkAt(unit); mark != nullptr && unit > 0) {
    std::size_t base = unit;
    while (base > 0 && (IsLeaning(text.units[base].code) || text.units[base].code == kLengthSign)) --base;
    std::u32string written;
    int count = 0;
    for (std::size_t i = base; i < text.units.size() && (i == base || MarkAt(i) != nullptr); ++i) {
      written += text.units[i].code;
      count += i > base ? 1 : 0;
    }
    const std::string shown = SymbolKey(ToUtf8(written));
    if (count > 2) {
      return Fail(unit, Kind::kBadForm, "'" + shown + "' carries more than two diacritics",
                  "list " + shown + " in `segments`, or use it in the grammar's data or rules", error);
    }
    return Fail(unit, Kind::kBadForm,
                "'" + shown + "' is no symbol: ◌" + ToUtf8(mark->first) + " may not stand on that base",
                "change the diacritic's `on`, or list " + shown + " in `segments`", error);
  }
  const std::string shown = IsMark(code) ? "◌" + ToUtf8(std::u32string(1, code)) : ToUtf8(std::u32string(1, code));
  const std::string nearest = Nearest(unit);
  std::string remedy = nearest.empty() ? "" : "did you mean '" + nearest + "'? ";
  remedy += IsLeaning(code) ? "declare it in `diacritics`, or list the symbol it is part of in `segments`"
                            : "or list it in `segments` or `allophones`";
  if (nearest.empty() && !IsLeaning(code)) remedy = "list it in `segments` or `allophones`";
  return Fail(
      unit, Kind::kUnknownCharacter,
      "'" + shown + "' (" + CodePointName(code) + ", " + CharacterName(code) + ") is in no symbol of the grammar",
      remedy, error);
}

// What is meant by a character that is in no symbol: the listed symbol nearest to what the library says of it, else
// the one that looks most like it.
std::string Reader::Impl::Nearest(std::size_t unit) const {
  const char32_t code = text.units[unit].code;
  if (IsMark(code)) {
    // Base and mark: perhaps a symbol with another mark on the same base.
    for (const Symbol& s : inventory().symbols) {
      const std::u32string normal = Normalise(s.text);
      if (unit > 0 && normal.size() > 1 && normal[0] == text.units[unit - 1].code && IsMark(normal[1])) return s.text;
    }
    return "";
  }
  const std::string by_features = NearestByFeatures(code);
  return by_features.empty() ? NearestByShape(code) : by_features;
}

// ŋ is n before ɡ: manner, borne by the root itself, counts three times what hangs deeper.
std::string Reader::Impl::NearestByFeatures(char32_t code) const {
  if (library == nullptr) {
    library = std::make_unique<Library>();
    // A copy: what is read for a hint becomes no part of the grammar. Without the library there are fewer hints.
    SourceMap sources = grammar->sources != nullptr ? *grammar->sources : SourceMap();
    Diagnostics unread;
    if (!library->Load("ipa", Span{}, sources, unread)) *library = Library();
  }
  const Library::Segment* segment = library->Find(ToUtf8(std::u32string(1, code)));
  if (segment == nullptr) return "";
  const FeatureTree wanted = library->ContentOf(*segment, grammar->tree, nullptr);
  const std::string name = CharacterName(code);
  constexpr int kTooFar = 9;  // three of manner
  std::string best;
  std::pair<int, bool> best_score = {kTooFar, false};
  for (const Symbol& s : inventory().symbols) {
    if (s.kind == Symbol::Kind::kComposite || s.kind == Symbol::Kind::kArchisegment) continue;
    // Of two as near, the one whose letter is in the character's name: n in ENG, before m.
    const std::pair<int, bool> score = {Distance(grammar->tree, s.full, wanted),
                                        !NameHolds(name, Normalise(s.text)[0])};
    if (score.first >= kTooFar || score >= best_score) continue;
    best_score = score;
    best = s.text;
  }
  return best;
}

// The same letter in another case or with other marks, else the symbol whose Unicode name shares most telling words.
std::string Reader::Impl::NearestByShape(char32_t code) const {
  const std::set<std::string> wanted = TellingWords(CharacterName(code));
  std::string best;
  double best_score = 0.3;
  for (const Symbol& s : inventory().symbols) {
    if (s.kind == Symbol::Kind::kComposite) continue;
    const std::u32string normal = Normalise(s.text);
    const std::set<std::string> words = TellingWords(CharacterName(normal[0]));
    std::size_t common = 0;
    for (const std::string& word : words) common += wanted.count(word);
    const double all = static_cast<double>(words.size() + wanted.size()) - static_cast<double>(common);
    const double score = static_cast<double>(common) / all - (normal.size() > 1 ? 0.01 : 0);
    if (score <= best_score) continue;
    best_score = score;
    best = s.text;
  }
  return best;
}

// ---- tags -------------------------------------------------------------------------------------------

bool ReadTag(std::string_view text, std::size_t* position, TypedTag* tag, TextError* error) {
  tag->offset = *position;
  const std::string_view root = "√";
  if (text.substr(*position, root.size()) == root) {
    tag->name = MorphemeKindName(MorphemeKind::kStem);
    *position += root.size();
    tag->length = root.size();
    return true;
  }
  if (*position >= text.size() || text[*position] != '@') return false;
  std::size_t end = *position + 1;
  if (end < text.size() && text[end] == '"') {
    const std::size_t close = text.find('"', end + 1);
    tag->name = close == std::string_view::npos ? "" : std::string(text.substr(end + 1, close - end - 1));
    end = close == std::string_view::npos ? end : close + 1;
  } else {
    const std::size_t begin = end;
    while (end < text.size()) {
      const notation::CodePoint c = notation::CodePointAt(text, end);
      if (!notation::IsNameCharacter(c.value)) break;
      end += c.length;
    }
    tag->name = std::string(text.substr(begin, end - begin));
  }
  tag->length = end - tag->offset;
  if (!tag->name.empty()) {
    *position = end;
    return true;
  }
  *error = {Kind::kBadForm, tag->offset, 1, "a tag has no name here",
            "write it behind its morpheme, as in sake@noun, or sake@\"loan word\""};
  return false;
}

// ---- tokens to forms --------------------------------------------------------------------------------

Form Reader::FormOf(const std::vector<Token>& tokens, Side side) const {
  const std::vector<Form>& pools = side == Side::kUnderlying ? impl_->underlying : impl_->surface;
  std::size_t size = tokens.size();
  for (const Token& token : tokens) {
    if (token.kind == Token::Kind::kSymbol) size += pools[static_cast<std::size_t>(token.symbol)].instances.size();
  }
  Form form;
  form.instances.reserve(size);
  form.items.reserve(tokens.size());
  InstanceId root = 0;
  for (const Token& token : tokens) {
    if (token.kind == Token::Kind::kBoundary) {
      form.items.push_back({FormItem::Kind::kBoundary, token.boundary, 0});
      continue;
    }
    const InstanceId slot = static_cast<InstanceId>(form.instances.size());
    form.instances.push_back({kSlotNode, 0, {}});
    form.items.push_back({FormItem::Kind::kSlot, Boundary::kNone, slot});
    if (token.kind == Token::Kind::kSymbol) {
      root = static_cast<InstanceId>(form.instances.size());
      for (const Instance& instance : pools[static_cast<std::size_t>(token.symbol)].instances) {
        form.instances.push_back(instance);
        for (InstanceId& daughter : form.instances.back().daughters) daughter += root;
      }
    }
    form.instances[slot].daughters.assign(1, root);
  }
  return form;
}

// ---- forms to text ----------------------------------------------------------------------------------
namespace {

// What stands for the second slot of a long one.
std::string_view LengthOf(const Grammar& grammar, int symbol) {
  return grammar.Doubles(symbol) ? std::string_view(grammar.inventory.symbols[static_cast<std::size_t>(symbol)].text)
                                 : std::string_view("ː");
}

// Writes symbols, ː for further slots of a root that stand directly after it. `boundaries`: those with a sign
// of their own in `sign`. `tagged`: the ‖ that a form begins with is there for its tags alone. Returns false at the first root `spell` gives nothing for.
template <typename Spell, typename Length, typename Sign>
bool Write(const Form& form, bool tagged, Spell spell, Length length, Sign sign, std::string* text) {
  std::int64_t before = -1;
  for (const FormItem& item : form.items) {
    if (tagged && &item == form.items.data() && item.kind == FormItem::Kind::kBoundary) continue;
    switch (item.kind) {
      case FormItem::Kind::kFloat:
        break;
      case FormItem::Kind::kBoundary: {
        const char* written = sign(item.boundary);
        if (*written != '\0') before = -1;
        *text += written;
        break;
      }
      case FormItem::Kind::kSlot: {
        const std::int64_t root = RootOf(form, item);
        if (root < 0) break;
        if (root == before) {
          *text += length(static_cast<InstanceId>(root));
        } else if (!spell(static_cast<InstanceId>(root))) {
          return false;
        }
        before = root;
        break;
      }
    }
  }
  return true;
}

const char* SurfaceSign(Boundary boundary) {
  switch (boundary) {
    case Boundary::kNone:
    case Boundary::kMorpheme:
    case Boundary::kClitic:
      return "";
    case Boundary::kWord:
      return " ";
    case Boundary::kPhrase:
      return "‖";
  }
  return "";
}

}  // namespace

bool WriteForm(const Grammar& grammar, const Form& form, std::string* text, FeatureTree* no_symbol) {
  text->clear();
  const auto length = [&](InstanceId root) {
    return LengthOf(grammar, grammar.inventory.Spell(ContentOf(form, root)).symbol);
  };
  const auto spell = [&](InstanceId root) {
    FeatureTree content = ContentOf(form, root);
    const int symbol = grammar.inventory.Spell(content).symbol;
    if (symbol < 0) {
      if (no_symbol != nullptr) *no_symbol = std::move(content);
      return false;
    }
    *text += grammar.inventory.symbols[static_cast<std::size_t>(symbol)].text;
    return true;
  };
  return Write(form, grammar.tagged, spell, length, SurfaceSign, text);
}

std::string DescribeForm(const Grammar& grammar, const Form& form) {
  std::string text;
  const auto describe = [&](InstanceId root) {
    text += grammar.inventory.Describe(ContentOf(form, root), grammar.tree);
    return true;
  };
  const auto length = [&](InstanceId root) {
    return LengthOf(grammar, grammar.inventory.Spell(ContentOf(form, root)).symbol);
  };
  Write(form, grammar.tagged, describe, length, BoundarySign, &text);
  return text;
}

std::string TextOf(const Grammar& grammar, const std::vector<Token>& tokens) {
  std::string text;
  int last = -1;
  for (const Token& token : tokens) {
    switch (token.kind) {
      case Token::Kind::kSymbol:
        last = token.symbol;
        text += grammar.inventory.symbols[static_cast<std::size_t>(last)].text;
        break;
      case Token::Kind::kLength:
        text += LengthOf(grammar, last);
        break;
      case Token::Kind::kBoundary:
        text += BoundarySign(token.boundary);
        break;
    }
  }
  return text;
}

// ---- comparison -------------------------------------------------------------------------------------

std::string ComparisonKey(std::string_view surface, bool comparing_length) {
  NormalText text;
  text.Assign(surface);
  std::u32string result, cluster;
  const auto flush = [&] {
    // Diacritics are a set.
    std::size_t tail = cluster.size();
    while (tail > 1 && IsLeaning(cluster[tail - 1]) && cluster[tail - 1] != kTie) --tail;
    std::sort(cluster.begin() + static_cast<std::ptrdiff_t>(tail), cluster.end());
    result += cluster;
  };
  int length = 0;
  const auto close = [&] {
    if (cluster.empty()) return;
    flush();
    for (; length > 0; --length) result += comparing_length ? std::u32string(1, kLengthSign) : cluster;
    cluster.clear();
  };
  const auto is_prefix = [](char32_t code) { return code == 0x207F || code == 0x1D50 || code == 0x1D51; };  // ⁿ ᵐ ᵑ
  for (std::size_t i = 0; i < text.units.size(); ++i) {
    const char32_t code = text.units[i].code;
    if (BoundaryOf(code) != Boundary::kNone || code == U'|') {
      close();
    } else if (code == kLengthSign) {
      ++length;
    } else if (is_prefix(code) && i + 1 < text.units.size() && !IsLeaning(text.units[i + 1].code)) {
      close();
      cluster = code;
    } else if (!cluster.empty() &&
               (IsLeaning(code) || cluster.back() == kTie || (cluster.size() == 1 && is_prefix(cluster[0])))) {
      cluster += code;
    } else {
      close();
      cluster = code;
    }
  }
  close();
  return ToUtf8(result);
}

}  // namespace tiersmith
