// See lettering.h.
#include "cli/lettering.h"

#include <fmt/format.h>

namespace tiersmith::cli {

void AddSpelledOption(CLI::App& verb, CommonOptions& options) {
  verb.add_flag("--spelled", options.spelled, "read and write forms by the grammar's spelling");
}

bool SpellsNothing(const CommonOptions& options, const Grammar& grammar) {
  if (!options.spelled || !grammar.spelling.lines.empty() || !grammar.doubled.empty()) return false;
  PrintError("--spelled: the grammar has no `spelling`");
  PrintHelp("give it one, as in: spelling { ng = ŋ; c = k }");
  return true;
}

bool Lettering::Read(const std::string& form, Reader::Side side, std::vector<std::string>* readings,
                     TextError* error) const {
  if (speller_ == nullptr) {
    readings->assign(1, form);
    return true;
  }
  if (!speller_->Read(form, side, readings, error)) return false;
  if (readings->size() > 1) PrintNote(fmt::format("⟨{}⟩ may be read {}", form, fmt::join(*readings, " or ")));
  return true;
}

}  // namespace tiersmith::cli
