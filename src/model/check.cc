// Loading a grammar: read, parse, check. See check.h for the order of the checks.
#include "model/check.h"

#include <algorithm>
#include <filesystem>

#include "base/utf8.h"
#include "model/includes.h"

namespace tiersmith {

Checker::Checker(const syntax::File& file, std::uint32_t file_id, Reach reach, Grammar& grammar,
                 Diagnostics& diagnostics)
    : file_(file), whole_{file_id, 0, 0}, reach_(reach), grammar_(grammar), diagnostics_(diagnostics) {}

void Checker::Run() {
  const syntax::Language* language = nullptr;
  const syntax::Sharing* sharing = nullptr;
  for (const syntax::Top& top : file_.tops) {
    const auto twice = [&](const syntax::Name& name, Span first, const std::string& what) {
      diagnostics_.Add({Kind::kDuplicate,
                        Severity::kError,
                        name.span,
                        what + " '" + name.text + "' is declared twice",
                        "keep one of the two",
                        {{first, "first declared here"}}});
    };
    if (const auto* named = std::get_if<syntax::Language>(&top)) {
      if (language != nullptr) twice(named->name, language->name.span, "language");
      language = named;
      grammar_.language = named->name.text;
    } else if (const auto* declared = std::get_if<syntax::Class>(&top)) {
      const auto [place, fresh] = classes_.emplace(declared->name.text, declared);
      if (!fresh) twice(declared->name, place->second->name.span, "class");
    } else if (const auto* pattern = std::get_if<syntax::NamedPattern>(&top)) {
      const auto [place, fresh] = patterns_.emplace(pattern->name.text, pattern);
      if (!fresh) twice(pattern->name, place->second->name.span, "pattern");
      if (classes_.count(pattern->name.text) != 0)
        twice(pattern->name, classes_[pattern->name.text]->name.span, "name");
    } else if (std::holds_alternative<syntax::Strict>(top)) {
      grammar_.strict = true;
    } else if (const auto* said = std::get_if<syntax::Sharing>(&top)) {
      if (sharing != nullptr) twice({"sharing", said->span}, sharing->span, "default");
      sharing = said;
      sharing_blocked_ = said->blocked;
    }
  }
  if (file_.tops.empty() && file_.unsupported.empty()) {
    Error(Kind::kBadTree, whole_, "the grammar is empty", "it needs at least a `tree`, `segments` and a `rule`");
    return;
  }
  CheckTree();
  if (grammar_.tree.nodes.size() <= kRootNode + 1) return;  // said; everything else would be unknown
  LoadDataFiles();
  LoadLexicons();
  CheckRooms();
  CheckInventory();
  // Symbols missing for an error above would be unknown in every row.
  const bool readable = !diagnostics_.HasErrors() && !grammar_.inventory.symbols.empty();
  CheckClasses();
  if (readable) CheckSpelling();
  if (readable) CheckWords();
  CheckRules();
  CheckTags();
  if (readable) CheckData();
}

namespace {

// The parser keeps what this release does not run; each is an error unless it was reported where it was
// parsed.
void PassOnUnsupported(const syntax::File& file, Diagnostics& diagnostics) {
  const auto pass = [&](const syntax::Unsupported& construct) {
    for (const Diagnostic& said : diagnostics.all()) {
      if (said.kind != Kind::kNotSupportedYet || said.span.file != construct.span.file) continue;
      if (said.span.begin <= construct.span.end && construct.span.begin <= said.span.end) return;
    }
    diagnostics.Error(Kind::kNotSupportedYet, construct.span,
                      "`" + construct.construct + "` is not supported by this release",
                      "take it out, or state the analysis without it");
  };
  for (const syntax::Top& top : file.tops) {
    if (const auto* construct = std::get_if<syntax::Unsupported>(&top)) pass(*construct);
  }
  for (const syntax::Unsupported& construct : file.unsupported) pass(construct);
}

std::unique_ptr<Grammar> Load(std::uint32_t file, const std::shared_ptr<SourceMap>& sources, Diagnostics& diagnostics,
                              Reach reach) {
  const auto errors = [&] {
    int count = 0;
    for (const Diagnostic& d : diagnostics.all()) count += d.severity == Severity::kError ? 1 : 0;
    return count;
  };
  const auto hard = [&] {
    int count = 0;
    for (const Diagnostic& d : diagnostics.all())
      count += d.severity == Severity::kError && d.kind != Kind::kNotSupportedYet ? 1 : 0;
    return count;
  };
  const int before = errors(), hard_before = hard();
  const syntax::File parsed = ParseWithIncludes(file, *sources, diagnostics);
  PassOnUnsupported(parsed, diagnostics);
  // Names declared in what did not parse would all be unknown: such a file is checked no further.
  if (hard() > hard_before) return nullptr;
  auto grammar = std::make_unique<Grammar>();
  grammar->sources = sources;
  Checker(parsed, file, reach, *grammar, diagnostics).Run();
  if (errors() > before) return nullptr;
  return grammar;
}

std::string NameOf(const std::string& path) {
  return path == "-" ? "<stdin>" : std::filesystem::path(path).filename().string();
}

}  // namespace

bool LeaveOutRule(const std::string& name, Grammar* grammar) {
  const auto first = std::remove_if(grammar->rules.begin(), grammar->rules.end(),
                                    [&](const Rule& rule) { return ToNfc(rule.name) == ToNfc(name); });
  const bool found = first != grammar->rules.end();
  grammar->rules.erase(first, grammar->rules.end());
  return found;
}

std::unique_ptr<Grammar> LoadGrammar(const std::string& path, const std::shared_ptr<SourceMap>& sources,
                                     Diagnostics& diagnostics, Reach reach) {
  std::uint32_t file = 0;
  if (!sources->LoadPart(path, NameOf(path), Span{kNoFile, 0, 0}, diagnostics, &file)) return nullptr;
  return Load(file, sources, diagnostics, reach);
}

std::unique_ptr<Grammar> LoadGrammarText(const std::string& path, const std::string& text,
                                         const std::shared_ptr<SourceMap>& sources, Diagnostics& diagnostics,
                                         Reach reach) {
  std::uint32_t file = 0;
  if (!sources->AddBytes(path, text, Span{kNoFile, 0, 0}, diagnostics, &file)) return nullptr;
  sources->NamePart(file, NameOf(path));
  return Load(file, sources, diagnostics, reach);
}

}  // namespace tiersmith
