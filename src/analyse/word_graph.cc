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

// The form behind a boundary. Where rules ask for tags it begins with a ‖ that bears those of its first morpheme, and
// that one becomes the boundary.
Form Behind(Boundary boundary, Form form, bool tagged) {
  if (boundary == Boundary::kNone) return form;
  if (!tagged) form.items.insert(form.items.begin(), FormItem{FormItem::Kind::kBoundary, Boundary::kNone, 0, 0});
  form.items.front().boundary = boundary;
  return form;
}

class Builder {
 public:
  Builder(const FormReader& reader, const Grammar& grammar, Diagnostics& diagnostics) : tagged_(grammar.tagged) {
    WordList(reader, grammar).First(0, &cores_, diagnostics);
    for (const LexiconEntry& entry : grammar.lexicon.entries) {
      if (entry.kind == MorphemeKind::kStem || InParadigm(grammar, entry)) continue;
      Affix affix{&entry, reader.Join(entry.form.text, {{entry.form.text, entry.kind, entry.tags, entry.gloss}})};
      const bool clitic = entry.kind == MorphemeKind::kClitic;
      const bool before = entry.form.after != Boundary::kNone;
      (before ? clitic ? proclitics_ : prefixes_ : clitic ? enclitics_ : suffixes_).push_back(std::move(affix));
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
    for (const Affix& suffix : suffixes_) Add(suffixes_from_, suffix.entry->form.before, suffix, suffixes_from_);
    for (const Affix& enclitic : enclitics_) {
      Add(suffixes_from_, enclitic.entry->form.before, enclitic, enclitics_from_);
      Add(enclitics_from_, enclitic.entry->form.before, enclitic, enclitics_from_);
    }
    return std::move(graph_);
  }

 private:
  struct Affix {
    const LexiconEntry* entry;
    Reading reading;
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
        Add(from, boundary, proclitic, At(Phase::kProclitics, proclitic.entry->form.after));
    }
    for (const Affix& prefix : prefixes_) Add(from, boundary, prefix, At(Phase::kPrefixes, prefix.entry->form.after));
    for (const Word& core : cores_)
      graph_.arcs.push_back(
          {from, suffixes_from_, Behind(boundary, core.form.form, tagged_), core.form.text, core.gloss});
  }

  void Add(int from, Boundary boundary, const Affix& affix, int to) {
    graph_.arcs.push_back(
        {from, to, Behind(boundary, affix.reading.form, tagged_), affix.reading.text, affix.entry->gloss});
  }

  const bool tagged_;
  std::vector<Word> cores_;
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
