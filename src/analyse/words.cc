// See words.h.
#include "analyse/words.h"

#include <map>
#include <random>

namespace tiersmith {

WordList::WordList(const FormReader& reader, const Grammar& grammar) : reader_(reader), grammar_(grammar) {
  for (const LexiconEntry& entry : grammar.lexicon.entries) {
    if (entry.kind == MorphemeKind::kStem) stems_.push_back(&entry);
  }
}

std::vector<Word> WordList::WordsOf(const LexiconEntry& stem, Diagnostics& diagnostics) const {
  std::vector<Word> words;
  bool taken = false;
  for (const Paradigm& paradigm : grammar_.paradigms) {
    if (!Takes(paradigm, stem)) continue;
    taken = true;
    for (ParadigmCell& cell : CellsOf(reader_, grammar_, paradigm, stem, diagnostics)) {
      if (!cell.form) continue;
      words.push_back({std::move(*cell.form), stem.gloss + (stem.gloss.empty() ? "" : " ") + cell.name, cell.name});
    }
  }
  if (!taken)
    words.push_back(
        {reader_.Join(stem.form.text, {{stem.form.text, stem.kind, stem.tags, stem.gloss}}), stem.gloss, ""});
  return words;
}

bool WordList::First(std::size_t limit, std::vector<Word>* words, Diagnostics& diagnostics) const {
  for (const LexiconEntry* stem : stems_) {
    for (Word& word : WordsOf(*stem, diagnostics)) {
      if (limit != 0 && words->size() == limit) return false;
      words->push_back(std::move(word));
    }
  }
  return true;
}

std::vector<Word> WordList::Sample(std::size_t count, std::uint64_t seed, Diagnostics& diagnostics) const {
  std::mt19937_64 random(seed);
  // The library's distributions differ between systems; this does not.
  const auto below_one = [&] { return static_cast<double>(random() >> 11) / 9007199254740992.0; };
  double all = 0;
  for (const LexiconEntry* stem : stems_) all += stem->weight;
  std::map<const LexiconEntry*, std::vector<Word>> known;
  std::vector<Word> words;
  while (!stems_.empty() && words.size() < count) {
    double left = below_one() * all;
    std::size_t stem = 0;
    while (stem + 1 < stems_.size() && left >= stems_[stem]->weight) left -= stems_[stem++]->weight;
    const auto [place, fresh] = known.try_emplace(stems_[stem]);
    if (fresh) place->second = WordsOf(*stems_[stem], diagnostics);
    if (place->second.empty()) break;  // said: no cell has a form
    const auto one = static_cast<std::size_t>(below_one() * static_cast<double>(place->second.size()));
    words.push_back(place->second[one]);
  }
  return words;
}

}  // namespace tiersmith
