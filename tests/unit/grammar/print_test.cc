// What a text prints as, and round trips: Parse(Print(x)) == x on the example grammars and on random syntax
// trees.
// `+/-voice` prints as `±voice`.
#include <algorithm>
#include <catch2/catch.hpp>
#include <filesystem>
#include <fstream>
#include <random>
#include <sstream>

#include "grammar/parse.h"
#include "unit/grammar/shape.h"

namespace tiersmith {
namespace {

struct Parsed {
  syntax::File file;
  std::string messages;
};

Parsed ParseText(const std::string& text) {
  SourceMap sources;
  Diagnostics diagnostics;
  Parsed parsed;
  parsed.file = Parse(sources, sources.Add("test.tier", text), diagnostics);
  for (const Diagnostic& d : diagnostics.all()) parsed.messages += d.message + "\n";
  return parsed;
}

// ---- random syntax trees, of the forms the parser makes ------------------------------------------

class Maker {
 public:
  explicit Maker(unsigned seed) : random_(seed) {}

  syntax::File File() {
    syntax::File file;
    if (Chance(10)) file.tops.push_back(syntax::Include{{"base.tier", {}}, {}});  // at the top only
    const int tops = 1 + Below(4);
    for (int i = 0; i < tops; ++i) file.tops.push_back(Top());
    return file;
  }

 private:
  int Below(int n) { return static_cast<int>(random_() % static_cast<unsigned>(n)); }
  bool Chance(int percent) { return Below(100) < percent; }
  template <class F>
  auto Several(int least, int most, F make) {
    std::vector<decltype(make())> list;
    const int count = least + Below(most - least + 1);
    for (int i = 0; i < count; ++i) list.push_back(make());
    return list;
  }
  template <class F>
  auto Perhaps(F make) {
    std::optional<decltype(make())> maybe;
    if (Chance(50)) maybe = make();
    return maybe;
  }

  syntax::Name Name() {
    static const std::vector<std::string> names = {
        "V",  "Place", "back", "N1", "Tóne", "stem",   "where", "long", "x2",  "C_0", "a b",   "αx", "low_",
        "by", "one",   "on",   "ŋã", "V1α",  "\u00A0", "first", "-",    "a.b", "x",   "empty", "a{", "leftward"};
    return {names[static_cast<std::size_t>(Below(static_cast<int>(names.size())))], {}};
  }
  syntax::Name Symbol() {
    static const std::vector<std::string> names = {"p",  "t͡s",  "kʷ",      "◌̃", "ⁿ◌",  "without",
                                                   "in", "a-b", "surface", "A", "a b", "ǃ"};
    return {names[static_cast<std::size_t>(Below(static_cast<int>(names.size())))], {}};
  }
  syntax::FormText Form() {
    static const std::vector<std::string> forms = {"", "k", "pul-lAr", "a{H} -- b", "t'l; }", "[x]", "\""};
    return {forms[static_cast<std::size_t>(Below(static_cast<int>(forms.size())))], false, {}};
  }
  syntax::Feat Feat() {
    using Kind = syntax::Feat::Kind;
    syntax::Feat feat;
    feat.kind = static_cast<Kind>(Below(13));
    if (feat.kind < Kind::kLong) feat.name = Name();
    if (feat.kind == Kind::kValue) feat.values = Several(1, 3, [&] { return Name(); });
    if (feat.kind == Kind::kAgrees || feat.kind == Kind::kDiffers)
      feat.variable.text = std::vector<std::string>{"α", "β", "γ", "δ"}[static_cast<std::size_t>(Below(4))];
    if (feat.kind == Kind::kShared || feat.kind == Kind::kUnshared)
      feat.side = static_cast<syntax::Feat::Side>(Below(3));
    if (feat.kind < Kind::kNo || feat.kind == Kind::kValue) feat.edge = static_cast<syntax::Feat::Edge>(Below(3));
    return feat;
  }
  syntax::Bundle Bundle() {
    return {Several(0, 3, [&] { return Feat(); }), {}};
  }
  syntax::Set Set(int depth) {
    syntax::Set set;
    set.kind = static_cast<syntax::Set::Kind>(Below(depth > 0 ? 8 : 4));
    switch (set.kind) {
      case syntax::Set::Kind::kBundle:
        set.bundle = Bundle();
        break;
      case syntax::Set::Kind::kLiteral:
        set.literal = Form();
        break;
      case syntax::Set::Kind::kClass:
        set.name = Name();
        break;
      case syntax::Set::Kind::kEmpty:
        break;
      case syntax::Set::Kind::kOr:
      case syntax::Set::Kind::kAnd:
      case syntax::Set::Kind::kButNot:
        set.args = Several(2, 3, [&] { return Set(depth - 1); });
        break;
      case syntax::Set::Kind::kNot:
        set.args.push_back(Set(depth - 1));
        break;
    }
    return set;
  }
  void Quantify(syntax::Item& item) {
    if (Chance(60)) return;
    item.min = Below(13);
    item.max = Chance(50) ? -1 : item.min + 1 + Below(3);
  }
  static bool Single(const syntax::Pattern& pattern) {
    const syntax::Item& item = pattern.items.front();
    const bool slot = item.kind == syntax::Item::Kind::kSet || item.kind == syntax::Item::Kind::kName;
    return pattern.items.size() == 1 && slot && !item.label && item.min == 1 && item.max == 1;
  }
  syntax::Item Item(int depth) {
    syntax::Item item;
    item.kind = static_cast<syntax::Item::Kind>(Below(depth > 0 ? 5 : 4));
    switch (item.kind) {
      case syntax::Item::Kind::kSet:
        item.set = Set(2);
        if (Chance(40)) {
          item.label = Name();
        } else {
          Quantify(item);
        }
        break;
      case syntax::Item::Kind::kName:
        item.name = Name();
        Quantify(item);
        break;
      case syntax::Item::Kind::kBoundary:
        item.boundary = static_cast<syntax::Item::Boundary>(Below(4));
        item.label = Perhaps([&] { return Name(); });
        break;
      case syntax::Item::Kind::kGap:
        item.tier = Perhaps([&] { return Name(); });
        break;
      case syntax::Item::Kind::kGroup: {
        item.alternatives = Several(1, 3, [&] { return Pattern(depth - 1); });
        if (Chance(30)) {
          item.min = 0;
        } else {
          Quantify(item);
        }
        bool singles = true;
        for (const auto& alternative : item.alternatives) singles = singles && Single(alternative);
        const bool brackets = item.alternatives.size() == 1 && (item.min != 1 || item.max != 1);
        if (singles && !brackets) {  // these would be a set
          syntax::Item boundary;
          boundary.kind = syntax::Item::Kind::kBoundary;
          item.alternatives.front().items.push_back(boundary);
        }
        break;
      }
      case syntax::Item::Kind::kSameMorpheme:  // stands between items
        break;
    }
    return item;
  }
  syntax::Pattern Pattern(int depth) {
    syntax::Pattern pattern;
    const int items = 1 + Below(4);
    for (int i = 0; i < items; ++i) {
      if (i > 0 && Chance(20)) {
        pattern.items.emplace_back();
        pattern.items.back().kind = syntax::Item::Kind::kSameMorpheme;
      }
      pattern.items.push_back(Item(depth));
    }
    return pattern;
  }
  syntax::Path Path() {
    syntax::Path path;
    path.label = Name();
    path.node = Name();
    path.member = static_cast<syntax::Path::Member>(Below(6));
    if (path.member == syntax::Path::Member::kValue) path.value = Name();
    return path;
  }
  syntax::Path WholeItem() {
    syntax::Path path;
    path.label = Name();
    return path;
  }
  syntax::Condition Condition() { return {Path(), static_cast<syntax::Condition::Test>(Below(4)), Path(), {}}; }
  syntax::TagTest TagTest() {
    syntax::TagTest test;
    test.only = Chance(50);
    test.scope = static_cast<syntax::TagTest::Scope>(Below(3));
    if (test.scope == syntax::TagTest::Scope::kLabel) test.label = Name();
    test.tag = Name();
    return test;
  }
  void Literal(syntax::Set* content) {
    content->kind = syntax::Set::Kind::kLiteral;
    content->literal = Form();
  }
  syntax::Change Change() {
    syntax::Change change;
    change.kind = static_cast<syntax::Change::Kind>(Below(12));
    switch (change.kind) {
      case syntax::Change::Kind::kSpread:
        change.paths = Several(1, 3, [&] { return Path(); });
        change.label = Name();
        break;
      case syntax::Change::Kind::kDelink:
        change.paths = Several(1, 3, [&] { return Path(); });
        break;
      case syntax::Change::Kind::kSet:
      case syntax::Change::Kind::kFill:
        change.label = Name();
        change.bundle = Bundle();
        break;
      case syntax::Change::Kind::kSetLiteral:
        change.label = Name();
        Literal(&change.content);
        break;
      case syntax::Change::Kind::kSetAs:
      case syntax::Change::Kind::kFillAs: {
        const bool whole = Chance(50);
        change.paths = Several(2, 2, [&] { return whole ? WholeItem() : Path(); });
        break;
      }
      case syntax::Change::Kind::kMerge:
        change.paths = Several(2, 2, [&] { return Path(); });
        break;
      case syntax::Change::Kind::kDelete:
      case syntax::Change::Kind::kLengthen:
      case syntax::Change::Kind::kShorten:
        change.label = Name();
        break;
      case syntax::Change::Kind::kInsert:
        change.label = Name();
        change.inserted = Name();
        if (Chance(50)) {
          change.content.bundle = Bundle();
        } else {
          Literal(&change.content);
        }
        change.before = Chance(50);
        break;
    }
    return change;
  }
  syntax::Daughter Daughter(bool last) {
    syntax::Daughter daughter;
    daughter.kind = static_cast<syntax::Daughter::Kind>(Below(4));
    if (daughter.kind == syntax::Daughter::Kind::kMany && !last) daughter.kind = syntax::Daughter::Kind::kBinary;
    daughter.name = Name();
    if (daughter.kind == syntax::Daughter::Kind::kMany) daughter.values = Several(1, 3, [&] { return Name(); });
    if (Chance(40)) {
      daughter.max = 1 + Below(4);
      daughter.room = Perhaps([&] { return Set(1); });
    }
    daughter.floating = Chance(30);
    daughter.abstract_ = Chance(30);
    return daughter;
  }
  syntax::TreeLine TreeLine() {
    syntax::TreeLine line;
    line.mothers = Several(1, 3, [&] { return Name(); });
    line.daughters = Several(0, 3, [&] { return Daughter(false); });
    line.daughters.push_back(Daughter(true));
    return line;
  }
  syntax::ValuesIn Values() {
    return {Several(1, 3,
                    [&] {
                      return syntax::ValueRef{static_cast<syntax::ValueRef::Kind>(Below(4)), Name()};
                    }),
            Perhaps([&] { return Set(2); }),
            {}};
  }
  syntax::Segments Segments() {
    syntax::Segments segments;
    segments.kind = static_cast<syntax::Segments::Kind>(Below(3));
    segments.from = Perhaps([&] { return syntax::Name{"ipa", {}}; });
    segments.added = Perhaps([&] { return Bundle(); });
    segments.entries = Several(0, 4, [&] {
      return syntax::SegmentEntry{Symbol(), Perhaps([&] { return Symbol(); }), Perhaps([&] { return Bundle(); }), {}};
    });
    segments.without = Several(0, 2, [&] { return Values(); });
    return segments;
  }
  syntax::Clause Clause() {
    syntax::Clause clause;
    clause.where = Pattern(2);
    clause.conditions = Several(0, 2, [&] { return Condition(); });
    clause.unless = Several(0, 2, [&] { return Pattern(2); });
    clause.unless_conditions = Several(0, 2, [&] { return Condition(); });
    clause.tags = Several(0, 2, [&] { return TagTest(); });
    clause.changes = Several(1, 3, [&] { return Change(); });
    return clause;
  }
  syntax::Rule Rule() {
    syntax::Rule rule;
    static_cast<syntax::Clause&>(rule) = Clause();
    rule.name = {"spread -- it {", {}};
    rule.otherwise = Several(0, 2, [&] { return Clause(); });
    rule.mode = static_cast<syntax::Rule::Mode>(Below(3));
    rule.within = static_cast<syntax::Domain>(Below(5));
    rule.prefer = static_cast<syntax::Rule::Prefer>(Below(3));
    rule.sharing = static_cast<syntax::Rule::Sharing>(Below(3));
    rule.preserving = Chance(30);
    if (Chance(40)) {
      rule.probability = (1 + Below(1000)) / 1000.0;
      rule.by_word = Chance(50);
    }
    return rule;
  }
  syntax::FormText Surface() { return {Chance(50) ? "" : "pul{H} 'lar", false, {}}; }
  syntax::LexiconEntry LexiconEntry() {
    syntax::LexiconEntry entry;
    entry.kind = static_cast<syntax::LexiconEntry::Kind>(Below(4));
    entry.form = Form();
    entry.gloss = Perhaps([&] { return syntax::Name{"the dog's", {}}; });
    entry.tags = Several(0, 3, [&] { return Name(); });
    if (Chance(20)) entry.tags.push_back({"weight", {}});
    if (Chance(50)) entry.weight = 0.25;
    entry.at = Perhaps([&] { return Name(); });
    entry.suppletive = Several(0, 2, [&] { return syntax::Suppletion{Several(1, 2, [&] { return Name(); }), Form()}; });
    return entry;
  }
  syntax::Allomorph Allomorph() {
    return {Form(), Perhaps([&] { return Set(2); }), Perhaps([&] { return Name(); })};
  }
  syntax::Paradigm Paradigm() {
    syntax::Paradigm paradigm;
    paradigm.name = Name();
    const auto allomorphs = [&] { return Several(1, 3, [&] { return Allomorph(); }); };
    paradigm.stems = Several(0, 2, [&] { return Name(); });
    paradigm.slots = Several(0, 3, [&] {
      return syntax::ParadigmSlot{Name(),
                                  Several(1, 3,
                                          [&] {
                                            return syntax::SlotValue{Name(), allomorphs(), {}};
                                          }),
                                  {}};
    });
    paradigm.overrides = Several(0, 2, [&] {
      return syntax::CellOverride{Several(1, 2, [&] { return Name(); }), allomorphs(), {}};
    });
    return paradigm;
  }
  syntax::SpellingLine SpellingLine() {
    static const std::vector<std::string> letters = {"ng", "k'", "+", "-", "before", "a b"};
    static const std::vector<std::string> means = {"ŋ", "aː", "", "-", "=", "k s"};
    const auto named = [&] {
      syntax::Set set;
      set.kind = syntax::Set::Kind::kClass;
      set.name = Name();
      return set;
    };
    syntax::SpellingLine line;
    line.letters = {letters[static_cast<std::size_t>(Below(static_cast<int>(letters.size())))], {}};
    line.use = static_cast<syntax::SpellingLine::Use>(Below(3));
    line.means = {means[static_cast<std::size_t>(Below(static_cast<int>(means.size())))], {}};
    line.before = Perhaps(named);
    line.after = Perhaps(named);
    line.between = Perhaps(named);
    return line;
  }
  syntax::DataFrom DataFrom() {
    syntax::DataFrom from;
    from.comparing_length = Chance(30);
    from.path = {"forms.tsv", {}};
    from.columns = Several(0, 3, [&] {
      syntax::Column column;
      column.field = Name();
      if (Chance(50)) column.number = 1 + Below(12);
      if (!column.number) column.heading = Name();
      column.spelled = Chance(30);
      return column;
    });
    return from;
  }
  syntax::Datum Datum() {
    static const std::vector<std::string> glosses = {"rope", "the dog's", "dogs'", "'", "a } -- ; b", "x'y'"};
    syntax::Datum datum;
    datum.underlying = Form();
    datum.underlying.spelled = Chance(30);
    if (datum.underlying.spelled) datum.underlying.raw = "tingun-lar";
    datum.surfaces = Several(0, 2, [&] { return Surface(); });
    datum.starred = Several(datum.surfaces.empty() ? 1 : 0, 2, [&] { return Surface(); });
    if (Chance(60))
      datum.gloss = syntax::Name{glosses[static_cast<std::size_t>(Below(static_cast<int>(glosses.size())))], {}};
    return datum;
  }
  syntax::Top Top() {
    switch (Below(19)) {
      case 0:
        return syntax::Language{{"Velmari -- north", {}}, {}};
      case 1:
        return syntax::Tree{Several(0, 4, [&] { return TreeLine(); }), {}};
      case 2:
        return Segments();
      case 3:
        return syntax::Diacritics{
            Several(0, 3,
                    [&] {
                      return syntax::Diacritic{Symbol(), Bundle(), Perhaps([&] { return Set(2); }), Chance(50), {}};
                    }),
            {}};
      case 4:
        return syntax::Omit{Several(0, 3, [&] { return Values(); }), {}};
      case 5:
        return syntax::Class{Name(), Set(3), {}};
      case 6:
        return syntax::NamedPattern{Name(), Pattern(2), {}};
      case 7:
        return syntax::Data{Chance(30), Several(0, 4, [&] { return Datum(); }), {}};
      case 8:
        return DataFrom();
      case 9:
        return syntax::Lexicon{Several(0, 4, [&] { return LexiconEntry(); }), {}};
      case 10:
        return Chance(50) ? syntax::Top(syntax::LexiconFrom{{"lex.tsv", {}}, {}}) : syntax::Top(syntax::Print{});
      case 11:
        return Paradigm();
      case 12:
        return syntax::Spelling{Several(0, 4, [&] { return SpellingLine(); }), {}};
      case 13:
        return syntax::LengthDoubled{Perhaps([&] { return Set(2); }), {}};
      case 14:
        return syntax::Strict{};
      case 15:
        return syntax::Complete{};
      case 16:
        return syntax::Sharing{Chance(50), {}};
      case 17:
        return syntax::Fuse{Name(), Perhaps([&] { return Pattern(2); }), {}};
      default:
        return Rule();
    }
  }

  std::mt19937 random_;
};

}  // namespace

TEST_CASE("print: rows", "[unit]") {
  struct Row {
    const char* text;
    const char* printed;
  };
  const Row rows[] = {
      {"class V=[ +syll ,-cons]", "class V = [+syll -cons]\n"},
      {"class \"stem\" = V", "class \"stem\" = V\n"},
      {"class V = {A | B}", "class V = A or B\n"},
      {"class V = A or B and C but not D", "class V = {{A or B} and C} but not D\n"},
      {"class V = A or {B or C}", "class V = A or {B or C}\n"},
      {"class V = not {[a] | empty}", "class V = not {[a] or empty}\n"},
      {"class V = [Tone:H Tone:(H L) no Place −back]", "class V = [Tone:H Tone:(H L) no Place -back]\n"},
      {"class A = B class D = E -- two on a line", "class A = B\nclass D = E\n"},
      {"class A = B\n   or C", "class A = B or C\n"},
      {"pattern P = C₁ [+syll] C_0 #", "pattern P = C₁ [+syll] C₀ #\n"},
      {"pattern P = C_0^2 C₀² V1_0", "pattern P = C₀² C₀² V1₀\n"},
      {"pattern P = {A | B}_1 {A B | C} (A B) (A)₀ {A}", "pattern P = {A or B}₁ {A B | C} (A B) (A)₀ {A}\n"},
      {"pattern P = - − = # || ‖", "pattern P = - - = # ‖ ‖\n"},
      {"pattern P = A ... B ...Place C … D", "pattern P = A ... B ...Place C ... D\n"},
      {"pattern P = {A | B} but not C", "pattern P = {A or B} but not C\n"},
      {"pattern P = X:{A | B} /tl/ \"on\"", "pattern P = X:A or B /tl/ \"on\"\n"},
      {"tree { root > +/-cons x2 in [-son] *Labial\n slot > Tone: H L ×2 floating abstract }",
       "tree {\n  root > ±cons ×2 in [-son] •Labial\n  slot > Tone: H L ×2 floating abstract\n}\n"},
      {"tree { root > a > b; c > d }", "tree {\n  root > a > b\n  c > d\n}\n"},
      {"segments from \"ipa\" [Coronal] { i e=ø [a] without ±back round in C }",
       "segments from \"ipa\" [Coronal] {\n  i\n  e = ø [a]\n  without ±back round in C\n}\n"},
      {"diacritics { ◌̃ [+nasal] on [-cons] surface ◌ʷ [Labial round] }",
       "diacritics {\n  ◌̃ [+nasal] on [-cons] surface\n  ◌ʷ [Labial round]\n}\n"},
      {"omit { -nasal everywhere ±voice in [+son] }", "omit {\n  -nasal everywhere\n  ±voice in [+son]\n}\n"},
      {"rule \"r\" { iterate rightward within word where A:V ... B:V unless A # spread A.round, A.back to B "
       "delink B.\"on\" }",
       "rule \"r\" {\n  where A:V ... B:V\n  unless A #\n  spread A.round, A.back to B\n  delink B.\"on\"\n  "
       "iterate rightward\n}\n"},
      {"rule \"r\" { where A:V insert E:/i/ before A insert D:[+syll] after A delete A set A [-a] fill A [b] "
       "}",
       "rule \"r\" {\n  where A:V\n  insert E:/i/ before A\n  insert D:[+syll] after A\n  delete A\n  set A "
       "[-a]\n  fill A [b]\n}\n"},
      {"class V = [-αback, alpha Place βhigh −αlow]", "class V = [-αback αPlace βhigh -αlow]\n"},
      {"class V = [shared Place unshared Place, shared root rightward]",
       "class V = [shared Place unshared Place shared root rightward]\n"},
      {"class V = [begins -cont, ends +cont ends Tone:H begins round]",
       "class V = [begins -cont ends +cont ends Tone:H begins round]\n"},
      {"class V = [long short half first, half second]", "class V = [long short half first half second]\n"},
      {"pattern P = B:# X:-Y:[] A&B", "pattern P = B:# X:- Y:[] A & B\n"},
      {"rule \"r\" { within phrase where A:V B:V if A.Place=B.Place if A.x != B.x unless A.Tone is not B.Tone:H "
       "unless A.y is B.y last only loan except B in \"stem\" only word stem delete A }",
       "rule \"r\" {\n  within phrase\n  where A:V B:V\n  if A.Place = B.Place\n  if A.x ≠ B.x\n  unless A.Tone is "
       "not B.Tone:H\n  unless A.y is B.y last\n  only loan\n  except B in stem\n  only word stem\n  delete A\n}\n"},
      {"rule \"r\" { optional 0.30 by word where A:V set A /k/ set A as B set A.N as B.N fill A as B fill A.N as B.N "
       "lengthen A shorten B merge A.Place B.Place delink A.-cont, A.+cont, A.Tone first spread A.Tone:H, A.root to B}",
       "rule \"r\" {\n  where A:V\n  set A /k/\n  set A as B\n  set A.N as B.N\n  fill A as B\n  fill A.N as B.N\n  "
       "lengthen A\n  shorten B\n  merge A.Place B.Place\n  delink A.-cont, A.+cont, A.Tone first\n  spread A.Tone:H, "
       "A.root to B\n  optional 0.3 by word\n}\n"},
      {"rule \"r\" { where A:V # delete A prefer left otherwise where A:V if A.x = A.y delete A preserving otherwise "
       "where A delete A only loan sharing free optional 1 }",
       "rule \"r\" {\n  where A:V #\n  delete A\n  otherwise where A:V\n  if A.x = A.y\n  delete A\n  otherwise where "
       "A\n  only loan\n  delete A\n  prefer left\n  sharing free\n  preserving\n  optional 1\n}\n"},
      {"language \"V\" include \"base.tier\" strict complete sharing blocked sharing free",
       "language \"V\"\ninclude \"base.tier\"\nstrict\ncomplete\nsharing blocked\nsharing free\n"},
      {"fuse Place within morpheme in A:[-son] {/a/ | /b/}; fuse root within morpheme",
       "fuse Place within morpheme in A:[-son] /a/ or /b/\nfuse root within morpheme\n"},
      {"data { /a -- b/ [c}] 'the dog''s' // []; /x/ [y] }",
       "data {\n  /a -- b/ [c}] 'the dog''s'\n  // []\n  /x/ [y]\n}\n"},
      {"data from \"forms.tsv\"", "data from \"forms.tsv\"\n"},
      {"data comparing length { ⟨tingun⟩ [tiŋun] ~ [tiŋːun] * [tinun] 'knot' /a/ * [b] <ab> [a] }",
       "data comparing length {\n  ⟨tingun⟩ [tiŋun] ~ [tiŋːun] * [tinun] 'knot'\n  /a/ * [b]\n  ⟨ab⟩ [a]\n}\n"},
      {"data from \"x.tsv\" { underlying = 1 spelled; surface = Phonetic_Form\n comment = 4 }",
       "data from \"x.tsv\" {\n  underlying = 1 spelled\n  surface = Phonetic_Form\n  comment = 4\n}\n"},
      {"lexicon { stem /mo/ 'go' verb in PST /wen/ stem ⟨tingun⟩ 'knot' noun loan weight 2.5 prefix /mu-/ class1\n"
       " suffix /-ki/ strong at word clitic /=wa/ }",
       "lexicon {\n  stem /mo/ 'go' verb in PST /wen/\n  stem ⟨tingun⟩ 'knot' noun loan weight 2.5\n  prefix /mu-/ "
       "class1\n  suffix /-ki/ strong at \"word\"\n  clitic /=wa/\n}\n"},
      {"lexicon from \"lex.tsv\"", "lexicon from \"lex.tsv\"\n"},
      {"paradigm noun { stem noun; number : SG // PL /-lAn/\n case: NOM // LOC /-tA/ after C, /-sA/ after V ABL /-tAr/ "
       "at word\n PL LOC : /-lessA/ }",
       "paradigm noun {\n  stem noun\n  number : SG //  PL /-lAn/\n  case : NOM //  LOC /-tA/ after C, /-sA/ after "
       "V  ABL /-tAr/ at \"word\"\n  PL LOC : /-lessA/\n}\n"},
      {"spelling { ng = ŋ; aa = aː; n = ŋ before /k/; D < T; pp > pː; \"-\" = ʔ; + < -\n h > nothing between V & < = }",
       "spelling {\n  ng = ŋ\n  aa = \"aː\"\n  n = ŋ before /k/\n  D < T\n  pp > \"pː\"\n  \"-\" = ʔ\n  \"+\" < "
       "\"-\"\n  h > nothing between V\n  & < \"=\"\n}\n"},
      {"length doubled in C", "length doubled in C\n"},
      {"print", "print\n"},
      {"language \"Velmari\" -- north", "language \"Velmari\"\n"},
  };
  for (const Row& row : rows) {
    CAPTURE(row.text);
    const Parsed parsed = ParseText(row.text);
    CHECK(parsed.messages == "");
    CHECK(Print(parsed.file) == row.printed);
  }
}

TEST_CASE("print: entries end at line ends that step back", "[unit]") {
  const Parsed parsed =
      ParseText("omit {\n  -nasal\n    in V\n  ±back in\n    {/i/ |\n     /e/}\n  round everywhere\n}\n");
  CHECK(parsed.messages == "");
  CHECK(Print(parsed.file) == "omit {\n  -nasal in V\n  ±back in /i/ or /e/\n  round everywhere\n}\n");
}

TEST_CASE("print: the example grammars come back the same", "[unit]") {
  int grammars = 0;
  for (const char* folder : {"/rulesets", "/demo"}) {
    const std::filesystem::path path = std::string(TIERSMITH_TEST_SOURCE) + folder;
    if (!std::filesystem::exists(path)) continue;
    for (const auto& entry : std::filesystem::recursive_directory_iterator(path)) {
      if (entry.path().extension() != ".tier") continue;
      std::ifstream stream(entry.path());
      std::stringstream text;
      text << stream.rdbuf();
      CAPTURE(entry.path());
      const Parsed parsed = ParseText(text.str());
      CHECK(parsed.messages == "");
      const std::string printed = Print(parsed.file);
      CHECK(Shape(ParseText(printed).file) == Shape(parsed.file));
      CHECK(printed.size() > 50);
      ++grammars;
    }
  }
  CHECK(grammars >= 5);
}

TEST_CASE("the examples of notation.md parse and come back the same", "[unit]") {
  std::ifstream page(std::string(TIERSMITH_TEST_SOURCE) + "/grammar/notation.md");
  REQUIRE(page.good());
  int examples = 0;
  bool inside = false;
  std::string line, example;
  while (std::getline(page, line)) {
    if (line == "```tier") {
      inside = true;
      example.clear();
    } else if (line == "```" && inside) {
      inside = false;
      CAPTURE(example);
      const Parsed parsed = ParseText(example);
      CHECK(parsed.messages == "");
      CHECK(!parsed.file.tops.empty());
      CHECK(Shape(ParseText(Print(parsed.file)).file) == Shape(parsed.file));
      ++examples;
    } else if (inside) {
      example += line + "\n";
    }
  }
  CHECK(examples >= 7);
}

TEST_CASE("print: random syntax trees come back the same", "[unit]") {
  for (unsigned seed = 0; seed < 5000; ++seed) {
    const syntax::File file = Maker(seed).File();
    const std::string printed = Print(file);
    const Parsed again = ParseText(printed);
    INFO("seed " << seed << "\n" << printed << again.messages);
    REQUIRE(again.messages == "");
    const std::string made = Shape(file), read = Shape(again.file);
    const auto differ = std::mismatch(made.begin(), made.end(), read.begin(), read.end()).first - made.begin();
    INFO("they differ where the tree made reads "
         << made.substr(static_cast<std::size_t>(std::max<std::ptrdiff_t>(differ - 60, 0)), 120));
    REQUIRE((made == read));
    REQUIRE(Print(again.file) == printed);
  }
}

}  // namespace tiersmith
