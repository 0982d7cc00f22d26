// Reading the segment library and hanging its features in a grammar's tree. See library.h.
#include "model/library.h"

#include <algorithm>
#include <cstdlib>
#include <filesystem>
#include <optional>

#include "base/utf8.h"
#include "model/content.h"
#include "model/grammar.h"
#include "model/normal_text.h"

namespace tiersmith {
namespace {

std::vector<std::string> Split(std::string_view text, char separator) {
  std::vector<std::string> parts;
  std::size_t begin = 0;
  while (true) {
    const std::size_t end = text.find(separator, begin);
    parts.emplace_back(text.substr(begin, end - begin));
    if (end == std::string_view::npos) return parts;
    begin = end + 1;
  }
}

// "+cons -cont +cont Labial" -> features in the order written; values of one feature side by side are a
// contour.
std::vector<Library::Feature> ParseFeatures(std::string_view text) {
  std::vector<Library::Feature> features;
  for (const std::string& word : Split(text, ' ')) {
    if (word.empty()) continue;
    const bool valued = word[0] == '+' || word[0] == '-';
    const std::string name = valued ? word.substr(1) : word;
    if (features.empty() || features.back().name != name) features.push_back({name, ""});
    if (valued) features.back().values += word[0];
  }
  return features;
}

// Rows of a table of three columns below its heading.
bool LoadTable(const std::string& folder, const std::string& table, Span from, SourceMap& sources,
               Diagnostics& diagnostics, std::vector<std::vector<std::string>>* rows) {
  const std::string path = folder + "/" + table;
  std::uint32_t file = 0;
  // The library's own files are no concern of the grammar's author: errors stay at `from`.
  Diagnostics own;
  if (!sources.LoadPart(path, "<library>/" + table, from, own, &file)) {
    diagnostics.Error(Kind::kMissingFile, from, "the segment library's file " + path + " cannot be read",
                      "check the name in `from`, and that $TIERSMITH_RULESETS, if set, names the folder that holds it");
    return false;
  }
  const std::vector<std::string> lines = Split(sources.text(file), '\n');
  for (std::size_t i = 1; i < lines.size(); ++i) {
    if (lines[i].empty()) continue;
    std::vector<std::string> cells = Split(lines[i], '\t');
    if (cells.size() != 3) {
      diagnostics.Error(Kind::kBadData, from, path + ":" + std::to_string(i + 1) + ": three columns are wanted",
                        "part the columns with single tabs");
      return false;
    }
    rows->push_back(std::move(cells));
  }
  return true;
}

}  // namespace

std::string SymbolKey(std::string_view text) { return ToNfc(ToUtf8(Normalise(text))); }

std::string SymbolSetKey(std::string_view text) {
  std::u32string normal = Normalise(text);
  std::size_t tail = normal.size();
  while (tail > 1 && IsLeaning(normal[tail - 1]) && normal[tail - 1] != kTie) --tail;
  std::sort(normal.begin() + static_cast<std::ptrdiff_t>(tail), normal.end());
  return ToNfc(ToUtf8(normal));
}

std::string FindLibrary() {
  namespace fs = std::filesystem;
  std::error_code error;
  if (const char* folder = std::getenv("TIERSMITH_RULESETS")) {
    return fs::is_directory(fs::path(folder) / "ipa", error) ? std::string(folder) : std::string();
  }
  const fs::path self = fs::read_symlink("/proc/self/exe", error);
  if (error) return "";
  for (const char* relative : {"../rulesets", "../share/tiersmith/rulesets", "rulesets", "../../rulesets"}) {
    const fs::path candidate = (self.parent_path() / relative).lexically_normal();
    if (fs::is_directory(candidate / "ipa", error)) return candidate.string();
  }
#ifdef TIERSMITH_INSTALLED_RULESETS  // for programs elsewhere that use the installed library
  if (fs::is_directory(fs::path(TIERSMITH_INSTALLED_RULESETS) / "ipa", error)) return TIERSMITH_INSTALLED_RULESETS;
#endif
  return "";
}

bool Library::Load(const std::string& name, Span from, SourceMap& sources, Diagnostics& diagnostics) {
  const std::string folder = FindLibrary();
  if (folder.empty() && !sources.sealed()) {
    diagnostics.Error(
        Kind::kMissingFile, from, "the segment library \"" + name + "\" was not found",
        "set TIERSMITH_RULESETS to the folder that holds ipa/, or install the rulesets beside the program");
    return false;
  }
  std::vector<std::vector<std::string>> segments, diacritics, features;
  if (!LoadTable(folder, name + "/segments.tsv", from, sources, diagnostics, &segments) ||
      !LoadTable(folder, name + "/diacritics.tsv", from, sources, diagnostics, &diacritics) ||
      !LoadTable(folder, name + "/features.tsv", from, sources, diagnostics, &features)) {
    return false;
  }
  for (const auto& row : segments) {
    const std::string key = SymbolKey(row[0]);
    segments_[key] = Segment{key, row[1], ParseFeatures(row[2])};
  }
  for (const auto& row : diacritics) {
    std::u32string sign = Normalise(row[0]);
    const std::size_t circle = sign.find(U'\u25CC');
    if (circle == std::u32string::npos) continue;
    sign.erase(circle, 1);
    diacritics_.push_back({sign, circle > 0, ParseFeatures(row[2])});
  }
  for (const auto& row : features) bare_[row[0]] = row[1] == "bare";
  return true;
}

const Library::Segment* Library::Find(std::string_view symbol) {
  const auto found = segments_.find(SymbolKey(symbol));
  return found != segments_.end() ? &found->second : Compose(symbol);
}

// A listed base with signs of the library around it, outermost last.
const Library::Segment* Library::Compose(std::string_view symbol) {
  const std::u32string text = Normalise(symbol);
  for (const Diacritic& diacritic : diacritics_) {
    const std::size_t n = diacritic.sign.size();
    if (text.size() <= n) continue;
    // A mark written before the base's other marks is found by taking it out wherever it stands.
    const std::size_t at = diacritic.before ? (text.compare(0, n, diacritic.sign) == 0 ? 0 : std::u32string::npos)
                                            : text.find(diacritic.sign, 1);
    if (at == std::u32string::npos) continue;
    std::u32string rest = text;
    rest.erase(at, n);
    const Segment* base = Find(ToUtf8(rest));
    if (base == nullptr) continue;
    Segment made{SymbolKey(symbol), base->name, base->features};
    for (const Feature& feature : diacritic.features) {
      const auto old = std::find_if(made.features.begin(), made.features.end(),
                                    [&](const Feature& f) { return f.name == feature.name; });
      if (old != made.features.end()) {
        *old = feature;
      } else {
        made.features.push_back(feature);
      }
    }
    const std::string key = made.symbol;
    return &segments_.emplace(key, std::move(made)).first->second;
  }
  return nullptr;
}

std::vector<std::string> Library::Symbols() const {
  std::vector<std::string> symbols;
  for (const auto& [symbol, segment] : segments_) symbols.push_back(symbol);
  return symbols;
}

std::vector<std::string> Library::Features() const {
  std::vector<std::string> features;
  for (const auto& [name, bare] : bare_) features.push_back(name);
  return features;
}

FeatureTree Library::ContentOf(const Segment& segment, const Tree& tree, std::vector<std::string>* cut) const {
  FeatureTree root{kRootNode, 0, {}};
  std::vector<NodeId> contours;
  for (const Feature& feature : segment.features) {
    const std::optional<NodeId> node = tree.Find(feature.name);
    if (!node || !tree.Dominates(kRootNode, *node) || *node == kRootNode) continue;
    switch (tree[*node].type) {
      case TreeNode::Type::kClass:
        if (feature.values.empty()) Ensure(tree, &root, *node);
        break;
      case TreeNode::Type::kBare:
        if (feature.values != "-") SetValues(tree, &root, *node, {0});
        break;
      case TreeNode::Type::kBinary: {
        std::vector<Value> values;
        for (const char sign : feature.values) values.push_back(sign == '+' ? 1 : 0);
        if (values.empty()) values.push_back(1);
        SetValues(tree, &root, *node, values);
        if (values.size() > 1) contours.push_back(*node);
        break;
      }
      case TreeNode::Type::kMany:
        break;
    }
  }
  // Bare in the library and binary here: minus on every other segment that bears the node it hangs from.
  std::vector<NodeId> minus;
  for (const auto& [name, bare] : bare_) {
    const std::optional<NodeId> node = bare ? tree.Find(name) : std::nullopt;
    if (!node || tree[*node].type != TreeNode::Type::kBinary || !tree.Dominates(kRootNode, *node)) continue;
    if (!tiersmith::Bears(root, *node) && tiersmith::Bears(root, tree[*node].mother)) minus.push_back(*node);
  }
  for (const NodeId node : minus) SetValues(tree, &root, node, {0});
  for (const NodeId node : contours) {
    const TreeNode& kind = tree[node];
    const int n = CountOf(root, node);
    const bool room = n <= kind.max && (!kind.room || Passes(*kind.room, root, [](int) { return false; }));
    if (room) continue;
    Value first = 0;
    for (const Feature& feature : segment.features) {
      if (feature.name == kind.name) first = feature.values[0] == '+' ? 1 : 0;
    }
    SetValues(tree, &root, node, {first});
    if (cut != nullptr) cut->push_back(kind.name);
  }
  Prune(tree, &root);
  return root;
}

}  // namespace tiersmith
