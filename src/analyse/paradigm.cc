// See paradigm.h.
#include "analyse/paradigm.h"

#include <algorithm>

#include "model/content.h"

namespace tiersmith {
namespace {

// One affix as it stands in a cell.
struct Affix {
  const SlotValue* value = nullptr;  // the value, or the cell with a form of its own
  std::vector<std::string> tags;
};

// A part of the word, from left to right.
struct Part {
  const Morph* form = nullptr;
  Morpheme morpheme;
};

class CellMaker {
 public:
  CellMaker(const FormReader& reader, const Grammar& grammar, const Paradigm& paradigm, const LexiconEntry& stem,
            Diagnostics& diagnostics)
      : reader_(reader), grammar_(grammar), paradigm_(paradigm), stem_(stem), diagnostics_(diagnostics) {}

  ParadigmCell Make(const std::vector<std::size_t>& choice) {
    ParadigmCell cell;
    for (std::size_t slot = 0; slot < choice.size(); ++slot) {
      cell.values.push_back(paradigm_.slots[slot].values[choice[slot]].name);
      cell.name += (slot == 0 ? "" : " ") + cell.values.back();
    }
    std::vector<Part> parts;
    if (Assemble(AffixesOf(choice), cell, &parts)) cell.form = Joined(parts);
    return cell;
  }

 private:
  // The affixes of a cell in the order of the slots.
  std::vector<Affix> AffixesOf(const std::vector<std::size_t>& choice) const {
    std::vector<const CellOverride*> taken(choice.size(), nullptr);
    for (const CellOverride& cell : paradigm_.overrides) {
      bool fits = true;
      for (std::size_t slot = 0; slot < choice.size(); ++slot) {
        if (cell.values[slot] < 0) continue;
        fits = fits && cell.values[slot] == static_cast<int>(choice[slot]) && taken[slot] == nullptr;
      }
      for (std::size_t slot = 0; fits && slot < choice.size(); ++slot) {
        if (cell.values[slot] >= 0) taken[slot] = &cell;
      }
    }
    std::vector<Affix> affixes;
    for (std::size_t slot = 0; slot < choice.size(); ++slot) {
      const SlotValue& value = paradigm_.slots[slot].values[choice[slot]];
      const bool again = std::find(taken.begin(), taken.begin() + static_cast<std::ptrdiff_t>(slot), taken[slot]) !=
                         taken.begin() + static_cast<std::ptrdiff_t>(slot);
      if (taken[slot] == nullptr) {
        affixes.push_back({&value, {value.name}});
      } else if (!again) {
        affixes.push_back({&taken[slot]->form, {value.name}});
      } else {
        for (Affix& affix : affixes) {
          if (affix.value == &taken[slot]->form) affix.tags.push_back(value.name);
        }
      }
    }
    return affixes;
  }

  const Morph& StemForm(const ParadigmCell& cell) const {
    for (const Suppletion& other : stem_.suppletive) {
      const bool fits = std::all_of(other.in.begin(), other.in.end(), [&](const std::string& value) {
        return std::find(cell.values.begin(), cell.values.end(), value) != cell.values.end();
      });
      if (fits) return other.form;
    }
    return stem_.form;
  }

  // Prefixes are the allomorphs that end with a boundary: which one fits is decided from left to right, so an affix of
  // which some allomorphs are prefixes is tried before the stem first.
  bool Assemble(const std::vector<Affix>& affixes, const ParadigmCell& cell, std::vector<Part>* parts) {
    std::vector<bool> placed(affixes.size(), false);
    for (std::size_t i = 0; i < affixes.size(); ++i) {
      if (!IsPrefix(*affixes[i].value)) continue;
      placed[i] = true;
      if (!Place(affixes[i], cell, parts)) return false;
    }
    parts->push_back({&StemForm(cell), {"", MorphemeKind::kStem, stem_.tags, stem_.gloss}});
    for (std::size_t i = 0; i < affixes.size(); ++i) {
      if (!placed[i] && !Place(affixes[i], cell, parts)) return false;
    }
    return true;
  }

  static bool IsPrefix(const SlotValue& value) {
    return std::any_of(value.allomorphs.begin(), value.allomorphs.end(),
                       [](const Allomorph& a) { return a.form.after != Boundary::kNone; });
  }

  bool Place(const Affix& affix, const ParadigmCell& cell, std::vector<Part>* parts) {
    const int before = LastSymbol(*parts);
    for (const Allomorph& allomorph : affix.value->allomorphs) {
      if (allomorph.after && !Passes(*allomorph.after, before)) continue;
      if (allomorph.form.tokens.empty()) return true;
      Morpheme morpheme{"", allomorph.kind, affix.tags, affix.value->name};
      AddListedTags(allomorph, &morpheme);
      parts->push_back({&allomorph.form, std::move(morpheme)});
      return true;
    }
    const std::string where = before < 0 ? "at the beginning of the word"
                                         : "after " + grammar_.inventory.symbols[static_cast<std::size_t>(before)].text;
    diagnostics_.Error(
        Kind::kBadParadigm, affix.value->span,
        "no form of '" + affix.value->name + "' fits " + where + ": cell '" + cell.name + "' of " + stem_.form.text,
        "put one without a condition last: /-tA/ after C, /-sA/");
    return false;
  }

  // An affix that the lexicon lists too has the tags of its entry; of several entries, of those with the value as a tag.
  void AddListedTags(const Allomorph& allomorph, Morpheme* morpheme) const {
    std::vector<const LexiconEntry*> listed, of_value;
    for (const LexiconEntry* entry : reader_.affixes()) {
      if (entry->kind != allomorph.kind || entry->form.text != allomorph.form.text ||
          entry->form.before != allomorph.form.before || entry->form.after != allomorph.form.after)
        continue;
      listed.push_back(entry);
      const bool named = std::any_of(entry->tags.begin(), entry->tags.end(), [&](const std::string& tag) {
        return std::find(morpheme->tags.begin(), morpheme->tags.end(), tag) != morpheme->tags.end();
      });
      if (named) of_value.push_back(entry);
    }
    for (const LexiconEntry* entry : listed.size() == 1 ? listed : of_value) {
      for (const std::string& tag : entry->tags) {
        if (std::find(morpheme->tags.begin(), morpheme->tags.end(), tag) == morpheme->tags.end())
          morpheme->tags.push_back(tag);
      }
    }
  }

  static int LastSymbol(const std::vector<Part>& parts) {
    int last = -1;
    for (const Part& part : parts) {
      for (const Token& token : part.form->tokens) {
        if (token.kind == Token::Kind::kSymbol) last = token.symbol;
      }
    }
    return last;
  }

  bool Passes(const SlotTest& test, int symbol) const {
    if (symbol < 0) return false;
    const FeatureTree& content = grammar_.inventory.symbols[static_cast<std::size_t>(symbol)].underlying;
    return tiersmith::Passes(test, content,
                             [&](int literal) { return grammar_.inventory.LiteralMatches(literal, content); });
  }

  Reading Joined(const std::vector<Part>& parts) const {
    std::string text;
    std::vector<Morpheme> morphemes;
    for (const Part& part : parts) {
      text += BoundarySign(part.form->before) + part.form->text + BoundarySign(part.form->after);
      morphemes.push_back(part.morpheme);
      morphemes.back().text = part.form->text;
    }
    return reader_.Join(text, std::move(morphemes));
  }

  const FormReader& reader_;
  const Grammar& grammar_;
  const Paradigm& paradigm_;
  const LexiconEntry& stem_;
  Diagnostics& diagnostics_;
};

}  // namespace

std::vector<ParadigmCell> CellsOf(const FormReader& reader, const Grammar& grammar, const Paradigm& paradigm,
                                  const LexiconEntry& stem, Diagnostics& diagnostics) {
  std::vector<ParadigmCell> cells;
  CellMaker maker(reader, grammar, paradigm, stem, diagnostics);
  std::vector<std::size_t> choice(paradigm.slots.size(), 0);
  for (;;) {
    cells.push_back(maker.Make(choice));
    std::size_t slot = choice.size();
    while (slot > 0 && ++choice[slot - 1] == paradigm.slots[slot - 1].values.size()) choice[--slot] = 0;
    if (slot == 0) return cells;
  }
}

bool Takes(const Paradigm& paradigm, const LexiconEntry& stem) {
  if (stem.kind != MorphemeKind::kStem) return false;
  return paradigm.stems.empty() ||
         std::any_of(paradigm.stems.begin(), paradigm.stems.end(), [&](const std::string& tag) {
           return std::find(stem.tags.begin(), stem.tags.end(), tag) != stem.tags.end();
         });
}

bool StemsNamed(const FormReader& reader, const Grammar& grammar, const std::string& name,
                std::vector<LexiconEntry>* stems, TextError* error) {
  std::vector<Token> tokens;
  std::vector<TypedTag> tags;
  TextError unread;
  const bool is_form = reader.reader().Read(name, Reader::Side::kUnderlying, &tokens, &unread, &tags);
  const std::string text = is_form ? TextOf(grammar, tokens) : "";
  bool found = false;
  for (const LexiconEntry& entry : grammar.lexicon.entries) {
    const bool named = (is_form && tags.empty() && entry.form.text == text) || entry.id == name;
    if (entry.kind != MorphemeKind::kStem || !named) continue;
    stems->push_back(entry);
    found = true;
  }
  if (found) return true;
  std::vector<Reading> readings;
  if (!reader.Read(name, {}, &readings, error)) return false;
  if (readings[0].morphemes.size() != 1) {
    *error = {Kind::kBadForm, 0, name.size(), "a stem is one morpheme", "give the stem without its affixes"};
    return false;
  }
  LexiconEntry stem;
  stem.form.tokens = tokens;
  stem.form.text = text;
  stem.tags = readings[0].morphemes[0].tags;
  stems->push_back(std::move(stem));
  return true;
}

Outputs OutputsOf(const Grammar& grammar, const Form& form) { return OutputsOf(grammar, Derive(grammar, form)); }

Outputs OutputsOf(const Grammar& grammar, const Derivation& derivation) {
  Outputs outputs;
  if (!derivation.problem.empty()) {
    outputs.problem = derivation.problem;
    outputs.too_many = derivation.too_many;
    return outputs;
  }
  for (const Outcome& outcome : derivation.outcomes) {
    std::string surface;
    FeatureTree no_symbol;
    if (!WriteForm(grammar, outcome.form, &surface, &no_symbol)) {
      outputs.problem = "no symbol spells " + grammar.inventory.Describe(no_symbol, grammar.tree) + " at the end";
      continue;
    }
    const auto same = std::find_if(outputs.all.begin(), outputs.all.end(),
                                   [&](const Runner::Output& output) { return output.surface == surface; });
    if (same != outputs.all.end()) {
      same->probability += outcome.probability;
    } else {
      outputs.all.push_back({surface, outcome.probability});
    }
  }
  std::stable_sort(outputs.all.begin(), outputs.all.end(),
                   [](const auto& a, const auto& b) { return a.probability > b.probability; });
  return outputs;
}

}  // namespace tiersmith
