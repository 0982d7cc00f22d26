// What --spelled does to the forms a verb reads and writes; without it they pass as they are.
// Tested by tests/cli/spelled.sh.
#pragma once

#include <memory>
#include <string>
#include <string_view>
#include <vector>

#include "cli/command.h"
#include "model/speller.h"

namespace tiersmith::cli {

// Adds --spelled.
void AddSpelledOption(CLI::App& verb, CommonOptions& options);
// True, after saying so, if --spelled is asked of a grammar that has no spelling.
bool SpellsNothing(const CommonOptions& options, const Grammar& grammar);

class Lettering {
 public:
  Lettering(const Grammar& grammar, bool spelled) {
    if (spelled) speller_ = std::make_unique<Speller>(grammar);
  }
  bool spelled() const { return speller_ != nullptr; }

  // The form in symbols: each reading. Said on standard error if there are several.
  bool Read(const std::string& form, Reader::Side side, std::vector<std::string>* readings, TextError* error) const;
  // The form as it is shown; ∅ stays.
  std::string Write(const std::string& form, Reader::Side side) const {
    return speller_ == nullptr ? form : speller_->Write(form, side);
  }

 private:
  std::unique_ptr<Speller> speller_;
};

}  // namespace tiersmith::cli
