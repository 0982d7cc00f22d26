// The syntax tree: a .tier file as it is written, names not yet looked up.
//
// Every construct of grammar/notation.md is either a member of `Top` or, where a later release
// brings it, an `Unsupported` node that keeps its place, so that nothing is ever passed over.
// Tested by tests/unit/grammar/.
#pragma once

#include <optional>
#include <string>
#include <variant>
#include <vector>

#include "base/diagnostics.h"

namespace tiersmith::syntax {

struct Name {
  std::string text;  // quotes removed
  Span span;
};

// /.../ or ⟨...⟩, the raw text between the signs; `span` covers the raw text only.
struct FormText {
  std::string raw;
  bool spelled = false;  // ⟨...⟩
  Span span;
};

// ---- bundles, sets, patterns ----------------------------------------------------------------
struct Feat {
  enum class Kind {
    kPlus,       // +f
    kMinus,      // -f
    kBears,      // f
    kNo,         // no f
    kValue,      // Node:value, Node:(value value)
    kAgrees,     // αf, αPlace
    kDiffers,    // -αf
    kShared,     // shared N, shared N rightward
    kUnshared,   // unshared N
    kLong,       // long
    kShort,      // short
    kHalfFirst,  // half first
    kHalfSecond  // half second
  };
  enum class Edge { kUnsaid, kBegins, kEnds };  // begins -f, ends -f; with kPlus, kMinus, kValue, kBears
  enum class Side { kEither, kLeftward, kRightward };
  Kind kind = Kind::kBears;
  Name name;
  std::vector<Name> values;  // kValue: one, or several for Tone:(H L)
  Name variable;             // kAgrees, kDiffers: α, β, γ or δ (`alpha` is α)
  Edge edge = Edge::kUnsaid;
  Side side = Side::kEither;  // kShared, kUnshared
  Span span;
};
struct Bundle {
  std::vector<Feat> feats;  // in the order written: [-cont +cont] is a contour
  Span span;
};

struct Set {
  enum class Kind { kBundle, kLiteral, kClass, kEmpty, kOr, kAnd, kButNot, kNot };
  Kind kind = Kind::kBundle;
  Bundle bundle;          // kBundle; [] has no feats
  FormText literal;       // kLiteral; may hold several symbols only as a whole pattern item
  Name name;              // kClass
  std::vector<Set> args;  // kOr, kAnd, kButNot: 2 or more, left to right; kNot: 1
  Span span;
};

struct Pattern;
struct Item {
  enum class Kind { kSet, kName, kBoundary, kGap, kGroup, kSameMorpheme };  // the last: &
  enum class Boundary { kMorpheme, kClitic, kWord, kPhrase };
  Kind kind = Kind::kSet;
  std::optional<Name> label;  // X: before a set or a boundary
  Set set;                    // kSet
  Name name;                  // kName: a class, a named pattern, or (in unless) a label
  Boundary boundary = Boundary::kMorpheme;
  std::optional<Name> tier;           // kGap: ...Place
  std::vector<Pattern> alternatives;  // kGroup: ( ) has one, { | } several
  int min = 1;                        // kSet, kName, kGroup: the quantity; ( ) alone is 0..1
  int max = 1;                        // -1: no bound
  Span span;
};
struct Pattern {
  std::vector<Item> items;
  Span span;
};

// ---- rules --------------------------------------------------------------------------------------
struct Path {                                                           // X.Place, X.-cont, X.Tone:H, X.Tone first
  enum class Member { kFacing, kPlus, kMinus, kValue, kFirst, kLast };  // kFacing: not narrowed
  Name label;
  Name node;
  Member member = Member::kFacing;
  Name value;  // kValue
  Span span;
};
struct Condition {  // A.Place = B.Place
  enum class Test { kEqual, kUnequal, kIs, kIsNot };
  Path left;
  Test test = Test::kEqual;
  Path right;
  Span span;
};
struct TagTest {  // only loan, except X in loan, only word loan
  enum class Scope { kChanged, kLabel, kWord };
  bool only = true;  // else except
  Scope scope = Scope::kChanged;
  Name label;  // kLabel
  Name tag;
  Span span;
};
struct Change {
  enum class Kind {
    kSpread,
    kDelink,
    kSet,         // set X [..]
    kFill,        // fill X [..]
    kSetLiteral,  // set X /k/
    kSetAs,       // set X.N as Y.N, set X as Y
    kFillAs,      // fill X.N as Y.N, fill X as Y
    kDelete,      // of a slot or a labelled boundary
    kInsert,
    kLengthen,
    kShorten,
    kMerge  // merge X.N Y.N
  };
  Kind kind = Kind::kSpread;
  std::vector<Path> paths;  // kSpread, kDelink; kSetAs, kFillAs, kMerge: two (`set X as Y`: without node)
  Name label;               // the label after `to`; of set, fill, delete, lengthen, shorten; the host of insert
  Bundle bundle;            // kSet, kFill
  Name inserted;            // kInsert: its label
  Set content;              // kInsert: a literal or a bundle; kSetLiteral: a literal
  bool before = true;       // kInsert
  Span span;
};
enum class Domain { kMorpheme, kStem, kHost, kWord, kPhrase };
struct Clause {  // what stands between `where` and the next `otherwise where`
  Pattern where;
  std::vector<Condition> conditions;         // if
  std::vector<Pattern> unless;               // unless PATTERN
  std::vector<Condition> unless_conditions;  // unless A.N = B.N
  std::vector<TagTest> tags;                 // only, except
  std::vector<Change> changes;
};
struct Rule : Clause {  // its first clause, and what is said of the rule as a whole
  enum class Mode { kAtOnce, kRightward, kLeftward };
  enum class Prefer { kNone, kLeft, kRight };
  enum class Sharing { kUnsaid, kFree, kBlocked };
  Name name;
  std::vector<Clause> otherwise;
  Mode mode = Mode::kAtOnce;
  Domain within = Domain::kWord;
  Prefer prefer = Prefer::kNone;
  Sharing sharing = Sharing::kUnsaid;
  bool preserving = false;
  std::optional<double> probability;  // optional 0.3
  bool by_word = false;
  Span span;
};

// ---- declarations -------------------------------------------------------------------------------
struct Daughter {
  enum class Kind { kBinary, kPlain, kMany, kStanding };  // ±f, f or Name, Name: a b, •Name
  Kind kind = Kind::kPlain;
  Name name;
  std::vector<Name> values;  // kMany
  int max = 1;               // ×n
  std::optional<Set> room;   // in [..] after ×n
  bool floating = false;
  bool abstract_ = false;
  Span span;
};
struct TreeLine {  // a > b > daughters: the last of `mothers` bears the daughters
  std::vector<Name> mothers;
  std::vector<Daughter> daughters;
  Span span;
};
struct Tree {
  std::vector<TreeLine> lines;
  Span span;
};

struct SegmentEntry {
  Name symbol;
  std::optional<Name> like;  // x = y
  std::optional<Bundle> bundle;
  Span span;
};
// What `without` and `omit` list: ±f, +f, -f, f.
struct ValueRef {
  enum class Kind { kBoth, kPlus, kMinus, kBare } kind = Kind::kBoth;
  Name name;
};
struct ValuesIn {
  std::vector<ValueRef> values;
  std::optional<Set> in;  // none: everywhere
  Span span;
};
struct Segments {
  enum class Kind { kSegments, kArchisegments, kAllophones } kind = Kind::kSegments;
  std::optional<Name> from;     // segments from "ipa"
  std::optional<Bundle> added;  // segments from "ipa" [Coronal] { ... }
  std::vector<SegmentEntry> entries;
  std::vector<ValuesIn> without;
  Span span;
};
struct Diacritic {
  Name symbol;  // with ◌
  Bundle bundle;
  std::optional<Set> on;
  bool surface = false;
  Span span;
};
struct Diacritics {
  std::vector<Diacritic> entries;
  Span span;
};
struct Omit {
  std::vector<ValuesIn> entries;
  Span span;
};
struct Class {
  Name name;
  Set set;
  Span span;
};
struct NamedPattern {
  Name name;
  Pattern pattern;
  Span span;
};
struct Language {
  Name name;
  Span span;
};

struct Include {
  Name path;
  Span span;
};
struct Strict {
  Span span;
};
struct Complete {  // a step among the rules
  Span span;
};
struct Sharing {  // sharing blocked, for the whole grammar
  bool blocked = true;
  Span span;
};
struct Fuse {  // fuse Place within morpheme [in PATTERN]
  Name node;
  std::optional<Pattern> in;
  Span span;
};

// ---- words --------------------------------------------------------------------------------------
struct Suppletion {  // in PST /wen/
  std::vector<Name> in;
  FormText form;
};
struct LexiconEntry {
  enum class Kind { kStem, kPrefix, kSuffix, kClitic };
  Kind kind = Kind::kStem;
  FormText form;
  std::optional<Name> gloss;
  std::vector<Name> tags;
  std::optional<double> weight;
  std::optional<Name> at;  // at word
  std::vector<Suppletion> suppletive;
  Span span;
};
struct Lexicon {
  std::vector<LexiconEntry> entries;
  Span span;
};
struct LexiconFrom {
  Name path;
  Span span;
};

struct Allomorph {  // /-tA/ after C at word
  FormText form;
  std::optional<Set> after;
  std::optional<Name> at;
};
struct SlotValue {  // LOC /-tA/ after C, /-sA/ after V
  Name name;
  std::vector<Allomorph> allomorphs;
  Span span;
};
struct ParadigmSlot {  // case : NOM // LOC /-tA/
  Name name;
  std::vector<SlotValue> values;
  Span span;
};
struct CellOverride {  // PL LOC : /-lessA/
  std::vector<Name> values;
  std::vector<Allomorph> allomorphs;
  Span span;
};
struct Paradigm {
  Name name;
  std::vector<Name> stems;  // stem TAG, each time it stands
  std::vector<ParadigmSlot> slots;
  std::vector<CellOverride> overrides;
  Span span;
};

struct SpellingLine {  // ng = ŋ, D < T, pp > pː, n = ŋ before /k/
  enum class Use { kBoth, kRead, kWrite };
  Name letters;
  Use use = Use::kBoth;
  Name means;  // symbols, ː, boundaries, or empty text for `nothing`
  std::optional<Set> before, after, between;
  Span span;
};
struct Spelling {
  std::vector<SpellingLine> lines;
  Span span;
};
struct LengthDoubled {  // length doubled in C
  std::optional<Set> in;
  Span span;
};
struct Print {  // print: the words without marks of prosody
  Span span;
};

struct Datum {
  FormText underlying;
  std::vector<FormText> surfaces;  // any one passes
  std::vector<FormText> starred;   // * [d]: none may come out
  std::optional<Name> gloss;
  Span span;
};
struct Data {
  bool comparing_length = false;
  std::vector<Datum> rows;
  Span span;
};
struct Column {  // surface = 2 spelled, comment = Remarks
  Name field;
  std::optional<int> number;
  Name heading;  // without a number
  bool spelled = false;
  Span span;
};
struct DataFrom {
  bool comparing_length = false;
  Name path;
  std::vector<Column> columns;
  Span span;
};

// A construct of the notation that this release does not run.
struct Unsupported {
  std::string construct;
  Span span;
};

using Top =
    std::variant<Language, Include, Strict, Tree, Segments, Diacritics, Omit, Class, NamedPattern, Fuse, Sharing, Rule,
                 Complete, Lexicon, LexiconFrom, Paradigm, Spelling, LengthDoubled, Print, Data, DataFrom, Unsupported>;
struct File {
  std::vector<Top> tops;
  // Constructs found inside rules and blocks that this release does not run.
  std::vector<Unsupported> unsupported;
};

}  // namespace tiersmith::syntax
