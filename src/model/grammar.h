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
#include "model/tree.h"

namespace tiersmith {

// ---- patterns -------------------------------------------------------------------------------------
struct Pattern;
struct PatternItem {
  enum class Kind { kSlot, kBoundary, kGap, kGroup };
  Kind kind = Kind::kSlot;
  SlotTest test;                        // kSlot: exactly one slot
  int label = -1;                       // kSlot: index into Rule::labels, or -1
  Boundary boundary = Boundary::kNone;  // kBoundary
  std::optional<NodeId> tier;           // kGap: `...Place`
  std::vector<Pattern> alternatives;    // kGroup: quantities, options, alternatives; no labels inside
                                        // a group whose quantity is not exactly one
  int min = 1;                          // kGroup
  int max = 1;                          // kGroup; -1: no bound
};
struct Pattern {
  std::vector<PatternItem> items;
  bool names_empty = false;  // some item mentions `empty`: empty slots are seen by this pattern
  Span span;
};

// ---- changes --------------------------------------------------------------------------------------
// Contents asked for by set and fill: the new list of instances of `node` (bare: one 0; several are a contour;
// none: taken away). Class nodes above it come along where they are missing.
struct Setting {
  NodeId node = 0;
  std::vector<Value> values;
};

struct Change {
  enum class Op { kSpread, kDelink, kSet, kFill, kInsert, kDelete };
  Op op = Op::kSpread;
  int source = -1;                // kSpread: label whose instance spreads
  int target = -1;                // label of the changed item; kInsert: of the host
  NodeId node = 0;                // kSpread, kDelink
  std::vector<Setting> settings;  // kSet, kFill
  FeatureTree inserted;           // kInsert: the root and all under it
  bool before = true;             // kInsert
  Span span;
};

struct Rule {
  enum class Mode { kAtOnce, kRightward, kLeftward };
  std::string name;
  std::vector<std::string> labels;
  Pattern where;
  std::vector<Pattern> unless;  // labels index Rule::labels
  std::vector<Change> changes;
  Mode mode = Mode::kAtOnce;
  Span span;
};

// ---- data -----------------------------------------------------------------------------------------
struct DataRow {
  std::string underlying;
  std::vector<std::string> surfaces;  // any one passes
  std::string gloss;
  std::string source;
  Span span;                        // of the underlying form, in the grammar or the TSV
  std::vector<Span> surface_spans;  // beside surfaces
};

struct Grammar {
  std::string language;
  Tree tree;
  Inventory inventory;
  std::vector<Rule> rules;  // in order
  std::vector<DataRow> data;
  std::shared_ptr<SourceMap> sources;  // what the spans point into
};

// Finds the files of a library ("ipa"): the folder that holds `ipa/`, from $TIERSMITH_RULESETS, else relative to the
// executable (../rulesets, ../share/tiersmith/rulesets). Empty if there is none.
std::string FindLibrary();

// Reads, parses and checks a grammar file. Returns null (and errors) if any error was found; warnings do not stop it.
std::unique_ptr<Grammar> LoadGrammar(const std::string& path, const std::shared_ptr<SourceMap>& sources,
                                     Diagnostics& diagnostics);
// The same for a grammar held in memory under the name `path` (relative files are sought beside it).
std::unique_ptr<Grammar> LoadGrammarText(const std::string& path, const std::string& text,
                                         const std::shared_ptr<SourceMap>& sources, Diagnostics& diagnostics);
// Reads rows of a TSV with heading (columns underlying, surface, gloss, source by name, any order).
std::vector<DataRow> LoadData(const std::string& path, SourceMap& sources, Span from, Diagnostics& diagnostics);

}  // namespace tiersmith
