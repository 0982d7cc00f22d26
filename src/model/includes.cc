#include "model/includes.h"

#include <algorithm>
#include <iterator>
#include <set>
#include <vector>

#include "grammar/parse.h"

namespace tiersmith {
namespace {

class Includer {
 public:
  Includer(SourceMap& sources, Diagnostics& diagnostics) : sources_(sources), diagnostics_(diagnostics) {}

  void Add(std::uint32_t file) {
    if (!seen_.insert(file).second) return;
    open_.push_back(file);
    syntax::File parsed = Parse(sources_, file, diagnostics_);
    for (const syntax::Top& top : parsed.tops) {
      if (const auto* include = std::get_if<syntax::Include>(&top)) Follow(*include);
    }
    const auto is_include = [](const syntax::Top& top) { return std::holds_alternative<syntax::Include>(top); };
    std::remove_copy_if(std::make_move_iterator(parsed.tops.begin()), std::make_move_iterator(parsed.tops.end()),
                        std::back_inserter(whole_.tops), is_include);
    std::move(parsed.unsupported.begin(), parsed.unsupported.end(), std::back_inserter(whole_.unsupported));
    open_.pop_back();
  }

  syntax::File Take() { return std::move(whole_); }

 private:
  void Follow(const syntax::Include& include) {
    std::uint32_t file = 0;
    if (!sources_.LoadBeside(include.path.text, include.path.span, diagnostics_, &file)) return;
    if (std::find(open_.begin(), open_.end(), file) == open_.end()) {
      Add(file);
      return;
    }
    diagnostics_.Error(Kind::kIncludeCircle, include.path.span,
                       file == open_.back()
                           ? "this file includes itself"
                           : "'" + include.path.text + "' includes this file, directly or through others",
                       "take one of the includes out; what both need goes into a file that both include");
  }

  SourceMap& sources_;
  Diagnostics& diagnostics_;
  std::set<std::uint32_t> seen_;
  std::vector<std::uint32_t> open_;  // the file being added, and those that include it
  syntax::File whole_;
};

}  // namespace

syntax::File ParseWithIncludes(std::uint32_t file, SourceMap& sources, Diagnostics& diagnostics) {
  Includer includer(sources, diagnostics);
  includer.Add(file);
  return includer.Take();
}

}  // namespace tiersmith
