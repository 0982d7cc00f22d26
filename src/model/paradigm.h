// Paradigms, checked: slots with values, each with its listed allomorphs; cells that have a form of their own.
#pragma once

#include <optional>
#include <string>
#include <vector>

#include "base/diagnostics.h"
#include "model/lexicon.h"
#include "model/slot_test.h"

namespace tiersmith {

// /-tA/ after C: chosen where the last segment before it, in the underlying form, passes `after`.
struct Allomorph {
  Morph form;  // without tokens: nothing is added
  MorphemeKind kind = MorphemeKind::kSuffix;
  std::optional<SlotTest> after;
  std::string at;
};

struct SlotValue {
  std::string name;
  std::vector<Allomorph> allomorphs;  // the first that fits; at most the last is without a condition
  Span span;
};

struct ParadigmSlot {
  std::string name;
  std::vector<SlotValue> values;
};

// PL LOC : /-lessA/ stands for the forms of both values, in the place of the first.
struct CellOverride {
  std::vector<int> values;  // beside Paradigm::slots: index of the value, or -1
  SlotValue form;           // named after the cell
};

struct Paradigm {
  std::string name;
  std::vector<std::string> stems;  // the stems with any of these tags; none: all
  std::vector<ParadigmSlot> slots;
  std::vector<CellOverride> overrides;  // those that name more values first
  Span span;
};

}  // namespace tiersmith
