#include "model/names.h"

#include <algorithm>

#include "base/utf8.h"

namespace tiersmith {
namespace {

std::u32string CodePoints(std::string_view text) {
  std::u32string result;
  for (std::size_t i = 0; i < text.size();) result += NextCodePoint(text, &i);
  return result;
}

// Insertions, deletions, replacements and swaps of neighbours (optimal string alignment).
std::size_t Distance(const std::u32string& a, const std::u32string& b) {
  std::vector<std::vector<std::size_t>> d(a.size() + 1, std::vector<std::size_t>(b.size() + 1));
  for (std::size_t i = 0; i <= a.size(); ++i) d[i][0] = i;
  for (std::size_t j = 0; j <= b.size(); ++j) d[0][j] = j;
  for (std::size_t i = 1; i <= a.size(); ++i) {
    for (std::size_t j = 1; j <= b.size(); ++j) {
      d[i][j] = std::min({d[i - 1][j] + 1, d[i][j - 1] + 1, d[i - 1][j - 1] + (a[i - 1] == b[j - 1] ? 0 : 1)});
      if (i > 1 && j > 1 && a[i - 1] == b[j - 2] && a[i - 2] == b[j - 1])
        d[i][j] = std::min(d[i][j], d[i - 2][j - 2] + 1);
    }
  }
  return d[a.size()][b.size()];
}

std::u32string Folded(std::u32string text) {
  for (char32_t& c : text) {
    if (c >= U'A' && c <= U'Z') c += U'a' - U'A';
  }
  return text;
}

}  // namespace

std::string NearestName(std::string_view name, const std::vector<std::string>& candidates) {
  const std::u32string wanted = CodePoints(name);
  if (wanted.size() > 64) return "";
  const std::string* best = nullptr;
  std::size_t best_distance = std::max<std::size_t>(1, wanted.size() / 3) + 1;
  for (const std::string& candidate : candidates) {
    if (candidate == name) continue;
    const std::u32string other = CodePoints(candidate);
    if (other.size() > 64) continue;
    const std::size_t distance = Folded(wanted) == Folded(other) ? 0 : Distance(wanted, other);
    // A name of one letter has nothing left when that letter is replaced.
    if (distance >= best_distance || distance >= wanted.size()) continue;
    best_distance = distance;
    best = &candidate;
  }
  return best == nullptr ? "" : *best;
}

std::string DidYouMean(std::string_view name, const std::vector<std::string>& candidates) {
  const std::string nearest = NearestName(name, candidates);
  return nearest.empty() ? "" : "did you mean '" + nearest + "'? ";
}

std::string Or(const std::string& hint, const std::string& otherwise) {
  return hint.empty() ? otherwise : hint + "or " + otherwise;
}

}  // namespace tiersmith
