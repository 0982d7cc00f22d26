// The syntax tree in the notation again: the dump of this stage. [+nasal -cont] prints as `[+nasal -cont]`.
// What a later release brings prints as a comment. Tested by tests/unit/grammar/print_test.cc (round trips).
#include <array>
#include <charconv>
#include <sstream>

#include "grammar/parse.h"
#include "grammar/words.h"

namespace tiersmith {
namespace {

using syntax::Item;
using syntax::Set;

template <class List, class F>
std::string Joined(const List& list, const char* between, const F& print) {
  std::string out;
  for (const auto& one : list) {
    if (!out.empty()) out += between;
    out += print(one);
  }
  return out;
}

std::string Quoted(const std::string& text) { return "\"" + text + "\""; }
std::string PrintName(const syntax::Name& name) {
  return notation::IsPlainName(name.text) ? name.text : Quoted(name.text);
}
std::string PrintSymbol(const syntax::Name& name) {
  return notation::IsPlainSymbol(name.text) ? name.text : Quoted(name.text);
}
std::string PrintForm(const syntax::FormText& form) {
  return form.spelled ? "⟨" + form.raw + "⟩" : "/" + form.raw + "/";
}

std::string PrintSide(syntax::Feat::Side side) {
  switch (side) {
    case syntax::Feat::Side::kEither:
      return {};
    case syntax::Feat::Side::kLeftward:
      return " leftward";
    case syntax::Feat::Side::kRightward:
      return " rightward";
  }
  return {};
}

std::string PrintEdge(syntax::Feat::Edge edge) {
  switch (edge) {
    case syntax::Feat::Edge::kUnsaid:
      return {};
    case syntax::Feat::Edge::kBegins:
      return "begins ";
    case syntax::Feat::Edge::kEnds:
      return "ends ";
  }
  return {};
}

std::string PrintValue(const syntax::Feat& feat) {
  if (feat.values.size() == 1) return ":" + PrintName(feat.values.front());
  return ":(" + Joined(feat.values, " ", PrintName) + ")";
}

std::string PrintFeat(const syntax::Feat& feat) {
  const std::string name = PrintName(feat.name), edge = PrintEdge(feat.edge);
  switch (feat.kind) {
    case syntax::Feat::Kind::kPlus:
      return edge + "+" + name;
    case syntax::Feat::Kind::kMinus:
      return edge + "-" + name;
    case syntax::Feat::Kind::kBears:
      return edge + name;
    case syntax::Feat::Kind::kNo:
      return "no " + name;
    case syntax::Feat::Kind::kValue:
      return edge + name + PrintValue(feat);
    case syntax::Feat::Kind::kAgrees:
      return feat.variable.text + name;
    case syntax::Feat::Kind::kDiffers:
      return "-" + feat.variable.text + name;
    case syntax::Feat::Kind::kShared:
      return "shared " + name + PrintSide(feat.side);
    case syntax::Feat::Kind::kUnshared:
      return "unshared " + name + PrintSide(feat.side);
    case syntax::Feat::Kind::kLong:
      return "long";
    case syntax::Feat::Kind::kShort:
      return "short";
    case syntax::Feat::Kind::kHalfFirst:
      return "half first";
    case syntax::Feat::Kind::kHalfSecond:
      return "half second";
  }
  return {};
}

std::string PrintBundle(const syntax::Bundle& bundle) { return "[" + Joined(bundle.feats, " ", PrintFeat) + "]"; }

bool IsOperator(const Set& set) {
  return set.kind == Set::Kind::kOr || set.kind == Set::Kind::kAnd || set.kind == Set::Kind::kButNot;
}

std::string PrintSet(const Set& set);
std::string PrintArgument(const Set& set) { return IsOperator(set) ? "{" + PrintSet(set) + "}" : PrintSet(set); }

std::string PrintSet(const Set& set) {
  switch (set.kind) {
    case Set::Kind::kBundle:
      return PrintBundle(set.bundle);
    case Set::Kind::kLiteral:
      return PrintForm(set.literal);
    case Set::Kind::kClass:
      return PrintName(set.name);
    case Set::Kind::kEmpty:
      return "empty";
    case Set::Kind::kOr:
      return Joined(set.args, " or ", PrintArgument);
    case Set::Kind::kAnd:
      return Joined(set.args, " and ", PrintArgument);
    case Set::Kind::kButNot:
      return Joined(set.args, " but not ", PrintArgument);
    case Set::Kind::kNot: {
      const Set& inner = set.args.front();
      return "not " + (inner.kind == Set::Kind::kNot ? "{" + PrintSet(inner) + "}" : PrintArgument(inner));
    }
  }
  return {};
}

std::string Digits(int number, const std::vector<const char*>& signs) {
  std::string out;
  for (const char c : std::to_string(number)) out += signs[static_cast<std::size_t>(c - '0')];
  return out;
}

// `once` is what stands without a quantity: 1..1, of ( ) 0..1.
std::string PrintQuantity(const Item& item, int once_min) {
  static const std::vector<const char*> below = {"₀", "₁", "₂", "₃", "₄", "₅", "₆", "₇", "₈", "₉"};
  static const std::vector<const char*> above = {"⁰", "¹", "²", "³", "⁴", "⁵", "⁶", "⁷", "⁸", "⁹"};
  if (item.min == once_min && item.max == 1) return {};
  return Digits(item.min, below) + (item.max < 0 ? std::string() : Digits(item.max, above));
}

std::string PrintPattern(const syntax::Pattern& pattern);

std::string PrintGroup(const Item& item) {
  const std::string inside = Joined(item.alternatives, " | ", PrintPattern);
  if (item.alternatives.size() == 1 && (item.min != 1 || item.max != 1))
    return "(" + inside + ")" + PrintQuantity(item, 0);
  return "{" + inside + "}" + PrintQuantity(item, 1);
}

std::string PrintLabel(const Item& item) { return item.label ? PrintName(*item.label) + ":" : std::string(); }

std::string PrintItemSet(const Item& item) {
  const std::string quantity = PrintQuantity(item, 1);
  const bool braces = IsOperator(item.set) ? !quantity.empty() : !item.label && item.set.kind == Set::Kind::kClass;
  const std::string set = PrintSet(item.set);
  return PrintLabel(item) + (braces ? "{" + set + "}" : set) + quantity;
}

std::string PrintBoundary(Item::Boundary boundary) {
  switch (boundary) {
    case Item::Boundary::kMorpheme:
      return "-";
    case Item::Boundary::kClitic:
      return "=";
    case Item::Boundary::kWord:
      return "#";
    case Item::Boundary::kPhrase:
      return "‖";
  }
  return {};
}

std::string PrintItem(const Item& item) {
  switch (item.kind) {
    case Item::Kind::kSet:
      return PrintItemSet(item);
    case Item::Kind::kName:
      return PrintName(item.name) + PrintQuantity(item, 1);
    case Item::Kind::kBoundary:
      return PrintLabel(item) + PrintBoundary(item.boundary);
    case Item::Kind::kGap:
      return "..." + (item.tier ? PrintName(*item.tier) : std::string());
    case Item::Kind::kGroup:
      return PrintGroup(item);
    case Item::Kind::kSameMorpheme:
      return "&";
  }
  return {};
}

std::string PrintPattern(const syntax::Pattern& pattern) { return Joined(pattern.items, " ", PrintItem); }

std::string PrintPath(const syntax::Path& path) {
  const std::string item = PrintName(path.label), node = PrintName(path.node);
  if (path.node.text.empty()) return item;  // `set X as Y`
  switch (path.member) {
    case syntax::Path::Member::kFacing:
      return item + "." + node;
    case syntax::Path::Member::kPlus:
      return item + ".+" + node;
    case syntax::Path::Member::kMinus:
      return item + ".-" + node;
    case syntax::Path::Member::kValue:
      return item + "." + node + ":" + PrintName(path.value);
    case syntax::Path::Member::kFirst:
      return item + "." + node + " first";
    case syntax::Path::Member::kLast:
      return item + "." + node + " last";
  }
  return {};
}

std::string PrintCondition(const syntax::Condition& condition) {
  const auto sign = [&] {
    switch (condition.test) {
      case syntax::Condition::Test::kEqual:
        return " = ";
      case syntax::Condition::Test::kUnequal:
        return " ≠ ";
      case syntax::Condition::Test::kIs:
        return " is ";
      case syntax::Condition::Test::kIsNot:
        return " is not ";
    }
    return "";
  };
  return PrintPath(condition.left) + sign() + PrintPath(condition.right);
}

std::string PrintTagTest(const syntax::TagTest& test) {
  const auto scope = [&]() -> std::string {
    switch (test.scope) {
      case syntax::TagTest::Scope::kChanged:
        return {};
      case syntax::TagTest::Scope::kLabel:
        return PrintName(test.label) + " in ";
      case syntax::TagTest::Scope::kWord:
        return "word ";
    }
    return {};
  };
  // `stem` is a tag like any other, though a word of the notation elsewhere.
  return (test.only ? "only " : "except ") + scope() + (test.tag.text == "stem" ? "stem" : PrintName(test.tag));
}

std::string PrintChange(const syntax::Change& change) {
  const std::string label = PrintName(change.label);
  switch (change.kind) {
    case syntax::Change::Kind::kSpread:
      return "spread " + Joined(change.paths, ", ", PrintPath) + " to " + label;
    case syntax::Change::Kind::kDelink:
      return "delink " + Joined(change.paths, ", ", PrintPath);
    case syntax::Change::Kind::kSet:
      return "set " + label + " " + PrintBundle(change.bundle);
    case syntax::Change::Kind::kFill:
      return "fill " + label + " " + PrintBundle(change.bundle);
    case syntax::Change::Kind::kSetLiteral:
      return "set " + label + " " + PrintSet(change.content);
    case syntax::Change::Kind::kSetAs:
      return "set " + Joined(change.paths, " as ", PrintPath);
    case syntax::Change::Kind::kFillAs:
      return "fill " + Joined(change.paths, " as ", PrintPath);
    case syntax::Change::Kind::kDelete:
      return "delete " + label;
    case syntax::Change::Kind::kInsert:
      return "insert " + PrintName(change.inserted) + ":" + PrintSet(change.content) +
             (change.before ? " before " : " after ") + label;
    case syntax::Change::Kind::kLengthen:
      return "lengthen " + label;
    case syntax::Change::Kind::kShorten:
      return "shorten " + label;
    case syntax::Change::Kind::kMerge:
      return "merge " + Joined(change.paths, " ", PrintPath);
  }
  return {};
}

std::string Line(const std::string& text) { return text.empty() ? text : "  " + text + "\n"; }

std::string PrintClause(const char* where, const syntax::Clause& clause) {
  const auto each = [](const char* word, const auto& list, const auto& print) {
    return Joined(list, "", [&](const auto& one) { return Line(word + print(one)); });
  };
  return Line(where + PrintPattern(clause.where)) + each("if ", clause.conditions, PrintCondition) +
         each("unless ", clause.unless, PrintPattern) + each("unless ", clause.unless_conditions, PrintCondition) +
         each("", clause.tags, PrintTagTest) + each("", clause.changes, PrintChange);
}

std::string PrintDomain(syntax::Domain domain) {
  switch (domain) {
    case syntax::Domain::kMorpheme:
      return "within morpheme";
    case syntax::Domain::kStem:
      return "within stem";
    case syntax::Domain::kHost:
      return "within host";
    case syntax::Domain::kWord:
      return {};
    case syntax::Domain::kPhrase:
      return "within phrase";
  }
  return {};
}

std::string PrintMode(syntax::Rule::Mode mode) {
  switch (mode) {
    case syntax::Rule::Mode::kAtOnce:
      return {};
    case syntax::Rule::Mode::kRightward:
      return "iterate rightward";
    case syntax::Rule::Mode::kLeftward:
      return "iterate leftward";
  }
  return {};
}

std::string PrintPrefer(syntax::Rule::Prefer prefer) {
  switch (prefer) {
    case syntax::Rule::Prefer::kNone:
      return {};
    case syntax::Rule::Prefer::kLeft:
      return "prefer left";
    case syntax::Rule::Prefer::kRight:
      return "prefer right";
  }
  return {};
}

std::string PrintSharing(syntax::Rule::Sharing sharing) {
  switch (sharing) {
    case syntax::Rule::Sharing::kUnsaid:
      return {};
    case syntax::Rule::Sharing::kFree:
      return "sharing free";
    case syntax::Rule::Sharing::kBlocked:
      return "sharing blocked";
  }
  return {};
}

// The shortest decimal fraction that reads as this number.
std::string PrintOptional(const syntax::Rule& rule) {
  if (!rule.probability) return {};
  std::array<char, 400> digits{};
  const auto end =
      std::to_chars(digits.data(), digits.data() + digits.size(), *rule.probability, std::chars_format::fixed);
  return "optional " + std::string(digits.data(), end.ptr) + (rule.by_word ? " by word" : "");
}

std::string PrintRule(const syntax::Rule& rule) {
  std::string out =
      "rule " + Quoted(rule.name.text) + " {\n" + Line(PrintDomain(rule.within)) + PrintClause("where ", rule);
  for (const syntax::Clause& clause : rule.otherwise) out += PrintClause("otherwise where ", clause);
  for (const std::string& said : {PrintMode(rule.mode), PrintPrefer(rule.prefer), PrintSharing(rule.sharing),
                                  std::string(rule.preserving ? "preserving" : ""), PrintOptional(rule)})
    out += Line(said);
  return out + "}\n";
}

std::string PrintDaughter(const syntax::Daughter& daughter) {
  std::string out;
  switch (daughter.kind) {
    case syntax::Daughter::Kind::kBinary:
      out = "±";
      break;
    case syntax::Daughter::Kind::kStanding:
      out = "•";
      break;
    case syntax::Daughter::Kind::kPlain:
    case syntax::Daughter::Kind::kMany:
      break;
  }
  out += PrintName(daughter.name);
  if (!daughter.values.empty()) out += ": " + Joined(daughter.values, " ", PrintName);
  if (daughter.max != 1) out += " ×" + std::to_string(daughter.max);
  if (daughter.room) out += (daughter.max == 1 ? " ×1 in " : " in ") + PrintSet(*daughter.room);
  if (daughter.floating) out += " floating";
  if (daughter.abstract_) out += " abstract";
  return out;
}

std::string PrintValueRef(const syntax::ValueRef& value) {
  const std::string name = PrintName(value.name);
  switch (value.kind) {
    case syntax::ValueRef::Kind::kBoth:
      return "±" + name;
    case syntax::ValueRef::Kind::kPlus:
      return "+" + name;
    case syntax::ValueRef::Kind::kMinus:
      return "-" + name;
    case syntax::ValueRef::Kind::kBare:
      return name;
  }
  return {};
}

std::string PrintValues(const syntax::ValuesIn& values) {
  return Joined(values.values, " ", PrintValueRef) + (values.in ? " in " + PrintSet(*values.in) : " everywhere");
}

std::string PrintSegment(const syntax::SegmentEntry& entry) {
  return PrintSymbol(entry.symbol) + (entry.like ? " = " + PrintSymbol(*entry.like) : "") +
         (entry.bundle ? " " + PrintBundle(*entry.bundle) : "");
}

// ---- words ----------------------------------------------------------------------------------------

std::string PrintGloss(const std::string& gloss) {
  std::string out = "'";
  for (const char c : gloss) out += c == '\'' ? "''" : std::string(1, c);
  return out + "'";
}

std::string PrintEntryKind(syntax::LexiconEntry::Kind kind) {
  switch (kind) {
    case syntax::LexiconEntry::Kind::kStem:
      return "stem";
    case syntax::LexiconEntry::Kind::kPrefix:
      return "prefix";
    case syntax::LexiconEntry::Kind::kSuffix:
      return "suffix";
    case syntax::LexiconEntry::Kind::kClitic:
      return "clitic";
  }
  return {};
}

// Quoted where bare it would begin or go on with an entry.
std::string PrintTag(const syntax::Name& tag) {
  const bool word = tag.text == "prefix" || tag.text == "suffix" || tag.text == "clitic" || tag.text == "weight";
  return word ? Quoted(tag.text) : PrintName(tag);
}

std::string PrintLexiconEntry(const syntax::LexiconEntry& entry) {
  std::string out = PrintEntryKind(entry.kind) + " " + PrintForm(entry.form);
  if (entry.gloss) out += " " + PrintGloss(entry.gloss->text);
  for (const syntax::Name& tag : entry.tags) out += " " + PrintTag(tag);
  if (entry.weight) {
    std::ostringstream weight;
    weight << *entry.weight;
    out += " weight " + weight.str();
  }
  if (entry.at) out += " at " + PrintName(*entry.at);
  for (const syntax::Suppletion& other : entry.suppletive)
    out += " in " + Joined(other.in, " ", PrintName) + " " + PrintForm(other.form);
  return out;
}

std::string PrintAllomorph(const syntax::Allomorph& allomorph) {
  return PrintForm(allomorph.form) + (allomorph.after ? " after " + PrintSet(*allomorph.after) : "") +
         (allomorph.at ? " at " + PrintName(*allomorph.at) : "");
}

std::string PrintSlotValue(const syntax::SlotValue& value) {
  return PrintName(value.name) + " " + Joined(value.allomorphs, ", ", PrintAllomorph);
}

std::string PrintLetters(const syntax::Name& letters) {
  return notation::IsPlainSymbol(letters.text) ? letters.text : Quoted(letters.text);
}

std::string PrintSpellingLine(const syntax::SpellingLine& line) {
  std::string out = PrintLetters(line.letters);
  switch (line.use) {
    case syntax::SpellingLine::Use::kBoth:
      out += " = ";
      break;
    case syntax::SpellingLine::Use::kRead:
      out += " < ";
      break;
    case syntax::SpellingLine::Use::kWrite:
      out += " > ";
      break;
  }
  out += line.means.text.empty() ? "nothing" : PrintLetters(line.means);
  if (line.before) out += " before " + PrintSet(*line.before);
  if (line.after) out += " after " + PrintSet(*line.after);
  if (line.between) out += " between " + PrintSet(*line.between);
  return out;
}

std::string PrintColumn(const syntax::Column& column) {
  return PrintName(column.field) + " = " +
         (column.number ? std::to_string(*column.number) : PrintName(column.heading)) +
         (column.spelled ? " spelled" : "");
}

std::string PrintSurface(const syntax::FormText& form) { return "[" + form.raw + "]"; }

std::string PrintDatum(const syntax::Datum& row) {
  std::string out = PrintForm(row.underlying);
  if (!row.surfaces.empty()) out += " " + Joined(row.surfaces, " ~ ", PrintSurface);
  for (const syntax::FormText& form : row.starred) out += " * " + PrintSurface(form);
  return row.gloss ? out + " " + PrintGloss(row.gloss->text) : out;
}

template <class List, class F>
std::string Block(const std::string& head, const List& entries, const F& print) {
  std::string out = head + " {\n";
  for (const auto& entry : entries) out += "  " + print(entry) + "\n";
  return out + "}\n";
}

struct TopPrinter {
  std::string operator()(const syntax::Language& top) const { return "language " + Quoted(top.name.text) + "\n"; }
  std::string operator()(const syntax::Tree& top) const {
    return Block("tree", top.lines, [](const syntax::TreeLine& line) {
      return Joined(line.mothers, " > ", PrintName) + " > " + Joined(line.daughters, " ", PrintDaughter);
    });
  }
  std::string operator()(const syntax::Segments& top) const {
    std::string head;
    switch (top.kind) {
      case syntax::Segments::Kind::kSegments:
        head = "segments";
        break;
      case syntax::Segments::Kind::kArchisegments:
        head = "archisegments";
        break;
      case syntax::Segments::Kind::kAllophones:
        head = "allophones";
        break;
    }
    if (top.from) head += " from " + Quoted(top.from->text);
    if (top.added) head += " " + PrintBundle(*top.added);
    std::string out = Block(head, top.entries, PrintSegment);
    out.resize(out.size() - 2);  // the values of `without` follow in the same block
    for (const auto& values : top.without) out += "  without " + PrintValues(values) + "\n";
    return out + "}\n";
  }
  std::string operator()(const syntax::Diacritics& top) const {
    return Block("diacritics", top.entries, [](const syntax::Diacritic& entry) {
      return PrintSymbol(entry.symbol) + " " + PrintBundle(entry.bundle) +
             (entry.on ? " on " + PrintSet(*entry.on) : "") + (entry.surface ? " surface" : "");
    });
  }
  std::string operator()(const syntax::Omit& top) const { return Block("omit", top.entries, PrintValues); }
  std::string operator()(const syntax::Class& top) const {
    return "class " + PrintName(top.name) + " = " + PrintSet(top.set) + "\n";
  }
  std::string operator()(const syntax::NamedPattern& top) const {
    return "pattern " + PrintName(top.name) + " = " + PrintPattern(top.pattern) + "\n";
  }
  std::string operator()(const syntax::Rule& top) const { return PrintRule(top); }
  std::string operator()(const syntax::Lexicon& top) const { return Block("lexicon", top.entries, PrintLexiconEntry); }
  std::string operator()(const syntax::LexiconFrom& top) const {
    return "lexicon from " + Quoted(top.path.text) + "\n";
  }
  std::string operator()(const syntax::Paradigm& top) const {
    std::string out = "paradigm " + PrintName(top.name) + " {\n";
    for (const syntax::Name& tag : top.stems) out += "  stem " + PrintName(tag) + "\n";
    for (const syntax::ParadigmSlot& slot : top.slots)
      out += "  " + PrintName(slot.name) + " : " + Joined(slot.values, "  ", PrintSlotValue) + "\n";
    for (const syntax::CellOverride& cell : top.overrides) {
      out += "  " + Joined(cell.values, " ", PrintName) + " : " + Joined(cell.allomorphs, ", ", PrintAllomorph) + "\n";
    }
    return out + "}\n";
  }
  std::string operator()(const syntax::Spelling& top) const { return Block("spelling", top.lines, PrintSpellingLine); }
  std::string operator()(const syntax::LengthDoubled& top) const {
    return "length doubled" + (top.in ? " in " + PrintSet(*top.in) : "") + "\n";
  }
  std::string operator()(const syntax::Print&) const { return "print\n"; }
  std::string operator()(const syntax::Data& top) const {
    return Block(top.comparing_length ? "data comparing length" : "data", top.rows, PrintDatum);
  }
  std::string operator()(const syntax::DataFrom& top) const {
    const std::string head =
        std::string(top.comparing_length ? "data comparing length" : "data") + " from " + Quoted(top.path.text);
    return top.columns.empty() ? head + "\n" : Block(head, top.columns, PrintColumn);
  }
  std::string operator()(const syntax::Include& top) const { return "include " + Quoted(top.path.text) + "\n"; }
  std::string operator()(const syntax::Strict&) const { return "strict\n"; }
  std::string operator()(const syntax::Complete&) const { return "complete\n"; }
  std::string operator()(const syntax::Sharing& top) const {
    return std::string("sharing ") + (top.blocked ? "blocked" : "free") + "\n";
  }
  std::string operator()(const syntax::Fuse& top) const {
    return "fuse " + PrintName(top.node) + " within morpheme" + (top.in ? " in " + PrintPattern(*top.in) : "") + "\n";
  }
  std::string operator()(const syntax::Unsupported& top) const {
    return "-- not supported yet: " + top.construct + "\n";
  }
};

}  // namespace

std::string Print(const syntax::File& file) {
  return Joined(file.tops, "", [](const syntax::Top& top) { return std::visit(TopPrinter(), top); });
}

}  // namespace tiersmith
