#include "analyse/word_graph.h"

#include <algorithm>
#include <map>
#include <utility>

#include "analyse/words.h"

namespace tiersmith {
namespace {

bool SameForm(const Morph& a, const Morph& b) { return a.text == b.text && a.before == b.before && a.after == b.after; }

bool InParadigm(const Grammar& grammar, const LexiconEntry& affix) {
  const auto is = [&](const SlotValue& value) {
    return std::any_of(value.allomorphs.begin(), value.allomorphs.end(), [&](const Allomorph& allomorph) {
      return allomorph.kind == affix.kind && SameForm(allomorph.form, affix.form);
    });
  };
  for (const Paradigm& paradigm : grammar.paradigms) {
    for (const ParadigmSlot& slot : paradigm.slots) {
      if (std::any_of(slot.values.begin(), slot.values.end(), is)) return true;
    }
    for (const CellOverride& cell : paradigm.overrides) {
      if (is(cell.form)) return true;
    }
  }
  return false;
}

class Builder {
 public:
  Builder(const FormReader& reader, const Grammar& grammar, Diagnostics& diagnostics) {
    std::vector<Word> words;
    WordList(reader, grammar).First(0, &words, diagnostics);
    for (Word& word : words) {
      cores_.push_back(graph_.pieces.size());
      graph_.pieces.push_back({std::move(word.form.form), std::move(word.form.text), std::move(word.gloss)});
    }
    for (const LexiconEntry& entry : grammar.lexicon.entries) {
      if (entry.kind == MorphemeKind::kStem || InParadigm(grammar, entry)) continue;
      const bool clitic = entry.kind == MorphemeKind::kClitic;
      const bool before = entry.form.after != Boundary::kNone;
      (before   ? clitic ? proclitics_ : prefixes_
       : clitic ? enclitics_
                : suffixes_)
          .push_back({&entry.form, graph_.pieces.size()});
      Reading reading = reader.Join(entry.form.text, {{entry.form.text, entry.kind, entry.tags, entry.gloss}});
      graph_.pieces.push_back({std::move(reading.form), std::move(reading.text), entry.gloss});
    }
  }

  WordGraph Build() {
    At(Phase::kProclitics, Boundary::kNone);  // the start
    graph_.again = At(Phase::kProclitics, Boundary::kWord);
    suffixes_from_ = nodes_++;
    enclitics_from_ = nodes_++;
    graph_.ends = {suffixes_from_, enclitics_from_};
    while (!open_.empty()) {
      const auto [phase, boundary] = open_.back();
      open_.pop_back();
      AddBefore(phase, boundary);
    }
    for (const Affix& suffix : suffixes_) Add(suffixes_from_, suffix.form->before, suffix, suffixes_from_);
    for (const Affix& enclitic : enclitics_) {
      Add(suffixes_from_, enclitic.form->before, enclitic, enclitics_from_);
      Add(enclitics_from_, enclitic.form->before, enclitic, enclitics_from_);
    }
    return std::move(graph_);
  }

 private:
  struct Affix {
    const Morph* form;
    std::size_t piece;
  };
  enum class Phase { kProclitics, kPrefixes };  // what may still come before the core

  // The node where that may come, behind that boundary.
  int At(Phase phase, Boundary boundary) {
    const auto [it, added] = before_.emplace(std::make_pair(phase, boundary), nodes_);
    if (added) {
      ++nodes_;
      open_.emplace_back(phase, boundary);
    }
    return it->second;
  }

  void AddBefore(Phase phase, Boundary boundary) {
    const int from = At(phase, boundary);
    if (phase == Phase::kProclitics) {
      for (const Affix& proclitic : proclitics_)
        Add(from, boundary, proclitic, At(Phase::kProclitics, proclitic.form->after));
    }
    for (const Affix& prefix : prefixes_) Add(from, boundary, prefix, At(Phase::kPrefixes, prefix.form->after));
    for (std::size_t core : cores_) graph_.arcs.push_back({from, suffixes_from_, core, boundary});
  }

  void Add(int from, Boundary boundary, const Affix& affix, int to) {
    graph_.arcs.push_back({from, to, affix.piece, boundary});
  }

  std::vector<std::size_t> cores_;
  std::vector<Affix> proclitics_, prefixes_, suffixes_, enclitics_;
  WordGraph graph_;
  int nodes_ = 0, suffixes_from_ = 0, enclitics_from_ = 0;
  std::map<std::pair<Phase, Boundary>, int> before_;
  std::vector<std::pair<Phase, Boundary>> open_;
};

}  // namespace

WordGraph WordsAllowed(const FormReader& reader, const Grammar& grammar, Diagnostics& diagnostics) {
  return Builder(reader, grammar, diagnostics).Build();
}

}  // namespace tiersmith
