// The compiled grammar: ordered rules as weighted transducers, composed.
//
// Compile() is the only way from rules to machines; src/run/ runs the result forward and
// inverted. Method: grammar -> letters (letters/), one rule machine a rule (compile/rule_machine.h),
// composition with budgets (this file). OpenFst is not visible from here.
#pragma once

#include <cstddef>
#include <memory>
#include <string>
#include <vector>

#include "base/limits.h"
#include "model/grammar.h"

namespace tiersmith {

struct SegmentStats {
  std::vector<std::string> rules;
  std::size_t states = 0, arcs = 0, classes = 0, letters = 0;
  std::size_t bytes = 0;
  double seconds = 0;
};

struct CascadeData;  // compile/cascade_data.h

class Cascade {
 public:
  explicit Cascade(std::unique_ptr<CascadeData> data);
  ~Cascade();
  Cascade(Cascade&&) noexcept;
  const CascadeData& data() const { return *data_; }
  std::vector<SegmentStats> Stats() const;

 private:
  std::unique_ptr<CascadeData> data_;
};

// Fails (null, with errors naming the rule and the shortest form) for ambiguous rules, changes that reach another root,
// trees without a symbol that the data reach, and budgets. Warns of rules that can never apply and of trees without a symbol
// that no datum reaches. `grammar` must outlive the result.
std::unique_ptr<Cascade> Compile(const Grammar& grammar, const Limits& limits, Diagnostics& diagnostics);

}  // namespace tiersmith
