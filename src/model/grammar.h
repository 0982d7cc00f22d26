// The checked grammar: every name looked up, every rule's pattern a small tree of tests.
// The graph interpreter and the compiler share this and nothing past it.
#pragma once

#include <memory>
#include <optional>
#include <string>
#include <vector>

#include "base/diagnostics.h"
#include "base/source_map.h"
#include "model/form.h"
#include "model/inventory.h"
#include "model/lexicon.h"
#include "model/paradigm.h"
#include "model/spelling.h"
#include "model/tree.h"

namespace tiersmith {

// ---- patterns -------------------------------------------------------------------------------------
struct Pattern;
struct PatternItem {
  enum class Kind { kSlot, kBoundary, kGap, kGroup, kSameMorpheme };  // the last: &, no boundary stands here
  Kind kind = Kind::kSlot;
  SlotTest test;                        // kSlot: exactly one slot
  int label = -1;                       // kSlot, kBoundary: index into Clause::labels, or -1
  Boundary boundary = Boundary::kNone;  // kBoundary
  std::optional<NodeId> tier;           // kGap: `...Place`
  std::vector<Pattern> alternatives;    // kGroup: quantities, options, alternatives; no labels inside
                                        // a group whose quantity is not exactly one
  int min = 1;                          // kGroup
  int max = 1;                          // kGroup; -1: no bound
  Span span;
};
struct Pattern {
  std::vector<PatternItem> items;
  bool names_empty = false;  // some item mentions `empty`: empty slots are seen by this pattern
  Span span;
};

// ---- conditions -----------------------------------------------------------------------------------
// Which of the instances of a node that one mother bears: all or the facing one, or one member of a contour.
struct Member {
  enum class Which { kWhole, kValue, kFirst, kLast };
  Which which = Which::kWhole;
  Value value = 0;  // kValue
};

// if A.N = B.N. Equal: same content (false if either lacks it; unequal is its opposite). Same: the very instance.
// `unless` with such a test is kept as its opposite.
struct Condition {
  enum class Test { kEqual, kUnequal, kSame, kNotSame };
  Test test = Test::kEqual;
  int left = -1, right = -1;  // labels of slots
  NodeId node = 0;
  Member left_member, right_member;
  Span span;
};

// only TAG, except TAG: of the morphemes of all changed items, of one item, or of some morpheme of the word.
struct TagTest {
  enum class Scope { kChanged, kLabel, kWord };
  bool only = true;
  Scope scope = Scope::kChanged;
  int label = -1;  // kLabel
  int tag = 0;     // index into Grammar::tags
  Span span;
};

// ---- changes --------------------------------------------------------------------------------------
// Contents asked for by set and fill: the new list of instances of `node` (bare: one 0; several are a contour;
// none: taken away). Class nodes above it come along where they are missing.
struct Setting {
  NodeId node = 0;
  std::vector<Value> values;
  // αf, -αf: `values` is empty and the content is that of the variable (kDiffers: the other value).
  int variable = -1;
  bool differs = false;
};

struct Change {
  enum class Op {
    kSpread,
    kDelink,
    kSet,
    kFill,
    kSetAs,       // an equal node of its own; where the source bears none, its own goes
    kFillAs,      // the same, only where it has none and the source has one
    kSetLiteral,  // a new root of content `inserted` on this slot
    kInsert,
    kDelete,  // of a slot, or of a boundary (the label says which)
    kLengthen,
    kShorten,
    kMerge  // source's N and target's N, equal neighbours, become one instance
  };
  Op op = Op::kSpread;
  int source = -1;                // kSpread, kSetAs, kFillAs, kMerge: label of the other item
  int target = -1;                // label of the changed item; kInsert: of the host
  NodeId node = 0;                // kSpread, kDelink, kSetAs, kFillAs, kMerge (root: the whole segment)
  Member member;                  // kDelink: which go; kSpread, kSetAs, kFillAs: which of the source's
  std::vector<Setting> settings;  // kSet, kFill
  FeatureTree inserted;           // kInsert, kSetLiteral: the root and all under it
  bool is_long = false;           // kInsert, kSetLiteral: on two slots (/aː/)
  bool before = true;             // kInsert
  int inserted_label = -1;        // kInsert: what the other changes call it, or -1
  Span span;
};

// ---- rules ----------------------------------------------------------------------------------------
struct Clause {
  enum class LabelKind : char { kSlot, kBoundary, kInserted };
  std::vector<std::string> labels;
  std::vector<LabelKind> label_kinds;  // beside labels; shorter: the rest are slots
  int variables = 0;                   // α, β ..: how many of them the clause uses
  Pattern where;
  std::vector<Condition> conditions;
  std::vector<Pattern> unless;  // labels index Clause::labels
  std::vector<TagTest> tags;
  std::vector<Change> changes;

  LabelKind KindOf(int label) const {
    return static_cast<std::size_t>(label) < label_kinds.size() ? label_kinds[static_cast<std::size_t>(label)]
                                                                : LabelKind::kSlot;
  }
};

// A slot's surroundings that a rule stays within.
enum class Domain : std::uint8_t { kMorpheme, kStem, kHost, kWord, kPhrase };

// A step of the derivation: a rule (its first clause, those after `otherwise`, and what is said of it as a whole), or
// `complete`.
struct Rule : Clause {
  enum class Kind { kRule, kComplete };
  enum class Mode { kAtOnce, kRightward, kLeftward };
  enum class Prefer { kNone, kLeft, kRight };
  Kind kind = Kind::kRule;
  std::string name;
  std::vector<Clause> otherwise;  // in order: for sites where no earlier clause matched
  Mode mode = Mode::kAtOnce;
  Domain within = Domain::kWord;
  Prefer prefer = Prefer::kNone;
  bool sharing_blocked = false;   // the Linking Constraint (Hayes 1986)
  bool preserving = false;        // only where the result is spelled by a symbol of `segments`
  double probability = 1;         // below 1: optional, one draw a site
  bool by_word = false;           // one draw a word
  std::optional<Pattern> inside;  // of a fusion as a rule: some match of this in the word reaches over the match
  Span span;
};

// `fuse N within morpheme`: how typed forms are read, before the first rule.
struct Fusion {
  NodeId node = 0;
  std::optional<Pattern> in;  // only neighbours inside a match
  Span span;
};

// ---- data -----------------------------------------------------------------------------------------
struct DataRow {
  std::string id;
  std::string underlying;             // may hold tags: sake@noun-lAn
  std::vector<std::string> also;      // other readings of an underlying form that was spelled
  std::vector<std::string> surfaces;  // any one passes
  std::vector<std::string> starred;   // none may come out
  std::string gloss;
  std::vector<std::string> tags;  // of its stem
  std::string source;
  std::string comment;
  bool comparing_length = false;    // Xː is not XX
  bool underlying_spelled = false;  // in letters of the spelling, until ReadSpelled
  bool surface_spelled = false;
  Span span;                        // of the underlying form, in the grammar or the TSV
  std::vector<Span> surface_spans;  // beside surfaces
  std::vector<Span> starred_spans;  // beside starred
};

struct Grammar {
  std::string language;
  bool strict = false;  // a tree without a symbol at the end is an error wherever it can arise
  Tree tree;
  Inventory inventory;
  std::vector<Fusion> fusions;
  // Tags of morphemes that some rule asks for; FormItem::tags has a bit for each. The four kinds come first.
  std::vector<std::string> tags = {"stem", "prefix", "suffix", "clitic"};
  // Some rule asks for tags or for the stem: forms begin with a ‖ that opens the first morpheme.
  bool tagged = false;
  std::vector<Rule> rules;  // in order
  Lexicon lexicon;
  std::vector<Paradigm> paradigms;
  Spelling spelling;
  std::vector<bool> doubled;  // `length doubled`, per symbol; none without it
  std::vector<DataRow> data;

  bool Doubles(int symbol) const {
    return symbol >= 0 && !doubled.empty() && doubled[static_cast<std::size_t>(symbol)];
  }
  std::shared_ptr<SourceMap> sources;  // what the spans point into
};

// Takes the rules of this name out (as if the file did not have them); false if there is none.
bool LeaveOutRule(const std::string& name, Grammar* grammar);

// Finds the files of a library ("ipa"): the folder that holds `ipa/`, from $TIERSMITH_RULESETS, else relative to the
// executable (../rulesets, ../share/tiersmith/rulesets). Empty if there is none.
std::string FindLibrary();

// How much of the notation a loaded grammar may use. kWhole is for tests of the checker and the interpreter: what the
// compiler does not run yet (model/not_run_yet.h) is an error otherwise.
enum class Reach { kRunnable, kWhole };

// Reads, parses and checks a grammar file. Returns null (and errors) if any error was found; warnings do not stop it.
std::unique_ptr<Grammar> LoadGrammar(const std::string& path, const std::shared_ptr<SourceMap>& sources,
                                     Diagnostics& diagnostics, Reach reach = Reach::kRunnable);
// The same for a grammar held in memory under the name `path` (relative files are sought beside it).
std::unique_ptr<Grammar> LoadGrammarText(const std::string& path, const std::string& text,
                                         const std::shared_ptr<SourceMap>& sources, Diagnostics& diagnostics,
                                         Reach reach = Reach::kRunnable);
// Reads rows of a TSV with heading (columns id, underlying, surface, gloss, tags, source, comment by name, any order).
std::vector<DataRow> LoadData(const std::string& path, SourceMap& sources, Span from, Diagnostics& diagnostics);

}  // namespace tiersmith
