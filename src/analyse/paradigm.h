// The cells of a paradigm for a stem, as underlying forms with their morphemes.
//
// `number : SG // PL /-lAn/` and `case : NOM // LOC /-tA/ after C, /-sA/ after V` give tilun four cells, of which PL LOC is
// tilun-lAn-tA: each affix stands in the order of the slots, prefixes before the stem, suffixes and clitics behind; an
// allomorph is the first whose `after` holds of the last segment before it, in the underlying form, before any rule. Cells
// with a form of their own take the place of the values they name, those that name most values first; a stem has its
// other form where all of its `in` are values of the cell.
//
// Not here: what the cells come out as; see OutputsOf. Tested by tests/unit/analyse/paradigm_test.cc.
#pragma once

#include <optional>
#include <string>
#include <vector>

#include "base/diagnostics.h"
#include "graph/interpreter.h"
#include "model/grammar.h"
#include "model/readings.h"
#include "run/run.h"

namespace tiersmith {

struct ParadigmCell {
  std::vector<std::string> values;  // beside Paradigm::slots
  std::string name;                 // "PL LOC"
  std::optional<Reading> form;      // none if no allomorph fits somewhere; an error says where
};

// All cells, the last slot's values changing fastest. An error at the value for each cell in which no allomorph fits.
std::vector<ParadigmCell> CellsOf(const FormReader& reader, const Grammar& grammar, const Paradigm& paradigm,
                                  const LexiconEntry& stem, Diagnostics& diagnostics);

// Does the paradigm take this stem?
bool Takes(const Paradigm& paradigm, const LexiconEntry& stem);

// The stems of the lexicon that are named by form or by id; one that is not listed is made of the form as typed, with its
// tags. False, with the error, if it cannot be read or is more than one morpheme.
bool StemsNamed(const FormReader& reader, const Grammar& grammar, const std::string& name,
                std::vector<LexiconEntry>* stems, TextError* error);

// What a form comes out as: several where rules are optional.
struct Outputs {
  std::vector<Runner::Output> all;  // each surface once, likeliest first
  std::string problem;              // why there is none, or why some ways have none
  bool too_many = false;            // that is the problem: more ways than Limits::outcomes
};
Outputs OutputsOf(const Grammar& grammar, const Form& form);
Outputs OutputsOf(const Grammar& grammar, const Derivation& derivation);

}  // namespace tiersmith
