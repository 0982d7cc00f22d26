#include "analyse/word_graph.h"

#include <algorithm>
#include <map>
#include <type_traits>
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
    for (const Word& word : words) AddWord(grammar, word);
    for (const LexiconEntry& entry : grammar.lexicon.entries) {
      if (entry.kind == MorphemeKind::kStem || InParadigm(grammar, entry)) continue;
      const bool clitic = entry.kind == MorphemeKind::kClitic;
      const bool before = entry.form.after != Boundary::kNone;
      (before   ? clitic ? proclitics_ : prefixes_
       : clitic ? enclitics_
                : suffixes_)
          .push_back({&entry.form, graph_.pieces.size()});
      graph_.pieces.push_back(
          {reader.Join(entry.form.text, {{entry.form.text, entry.kind, entry.tags, entry.gloss}}), entry.gloss, false});
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
  // A word up to its stem, and what may follow in its cells.
  struct Core {
    std::size_t piece;
    std::vector<std::size_t> rests;
  };

  // The stems of a lexicon have few different sets of cells behind them, so a word is cut behind its stem.
  void AddWord(const Grammar& grammar, const Word& word) {
    std::size_t stem = 0;
    while (word.form.morphemes[stem].kind != MorphemeKind::kStem) ++stem;
    std::size_t cut = 0;
    const std::vector<Token>& tokens = word.form.tokens;
    for (std::size_t left = stem + 1; cut < tokens.size() && left > 0; ++cut) {
      const bool ends = cut + 1 == tokens.size() || tokens[cut + 1].kind == Token::Kind::kBoundary;
      if (ends && tokens[cut].kind != Token::Kind::kBoundary) --left;
    }
    const std::string& gloss = word.form.morphemes[stem].gloss;
    const Reading head = PartOf(grammar, word.form, 0, cut, 0, stem + 1);
    const auto [core, added] = core_of_.emplace(Described(head) + "\t" + gloss, cores_.size());
    if (added) {
      cores_.push_back({graph_.pieces.size(), {}});
      graph_.pieces.push_back({head, gloss, false});
    }
    Reading rest = PartOf(grammar, word.form, cut, tokens.size(), stem + 1, word.form.morphemes.size());
    const auto [known, fresh] = rest_of_.emplace(Described(rest) + "\t" + word.cell, graph_.pieces.size());
    if (fresh) graph_.pieces.push_back({std::move(rest), word.cell, true});
    cores_[core->second].rests.push_back(known->second);
  }

  static Reading PartOf(const Grammar& grammar, const Reading& whole, std::size_t begin, std::size_t end,
                        std::size_t first_morpheme, std::size_t last_morpheme) {
    const auto cut = [](const auto& all, std::size_t from, std::size_t to) {
      return std::decay_t<decltype(all)>(all.begin() + static_cast<std::ptrdiff_t>(from),
                                         all.begin() + static_cast<std::ptrdiff_t>(to));
    };
    Reading part{"", cut(whole.tokens, begin, end), cut(whole.morphemes, first_morpheme, last_morpheme),
                 cut(whole.tags, first_morpheme, last_morpheme)};
    part.text = TextOf(grammar, part.tokens);
    return part;
  }

  int Behind(const std::vector<std::size_t>& rests) {
    const auto [it, added] = behind_cores_.emplace(rests, nodes_);
    if (added) {
      ++nodes_;
      for (std::size_t rest : rests) graph_.arcs.push_back({it->second, suffixes_from_, rest, Boundary::kNone});
    }
    return it->second;
  }

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
    for (const Core& core : cores_) graph_.arcs.push_back({from, Behind(core.rests), core.piece, boundary});
  }

  void Add(int from, Boundary boundary, const Affix& affix, int to) {
    graph_.arcs.push_back({from, to, affix.piece, boundary});
  }

  std::vector<Core> cores_;
  std::map<std::string, std::size_t> core_of_;            // by what it is
  std::map<std::string, std::size_t> rest_of_;            // by what it is: its piece
  std::map<std::vector<std::size_t>, int> behind_cores_;  // by rests: the node they begin at
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
