// See readings.h.
#include "model/readings.h"

#include <algorithm>

#include "model/names.h"

namespace tiersmith {
namespace {

bool Has(const std::vector<std::string>& tags, const std::string& tag) {
  return std::find(tags.begin(), tags.end(), tag) != tags.end();
}
void AddOnce(const std::string& tag, std::vector<std::string>* tags) {
  if (!Has(*tags, tag)) tags->push_back(tag);
}

constexpr MorphemeKind kKinds[] = {MorphemeKind::kStem, MorphemeKind::kPrefix, MorphemeKind::kSuffix,
                                   MorphemeKind::kClitic};

std::optional<MorphemeKind> KindNamed(const std::string& tag) {
  for (const MorphemeKind kind : kKinds) {
    if (tag == MorphemeKindName(kind)) return kind;
  }
  return std::nullopt;
}

// A name that needs quotes after @ gets them.
std::string TagText(const std::string& tag) {
  return tag.find_first_of(" -=#.\"@/[]{}") == std::string::npos ? "@" + tag : "@\"" + tag + "\"";
}

}  // namespace

const char* MorphemeKindName(MorphemeKind kind) {
  switch (kind) {
    case MorphemeKind::kStem:
      return "stem";
    case MorphemeKind::kPrefix:
      return "prefix";
    case MorphemeKind::kSuffix:
      return "suffix";
    case MorphemeKind::kClitic:
      return "clitic";
  }
  return "";
}

bool Lexicon::has_stems() const {
  return std::any_of(entries.begin(), entries.end(),
                     [](const LexiconEntry& entry) { return entry.kind == MorphemeKind::kStem; });
}

FormReader::FormReader(const Grammar& grammar) : grammar_(grammar), reader_(grammar), known_tags_(grammar.tags) {
  for (const LexiconEntry& entry : grammar.lexicon.entries) {
    if (entry.kind != MorphemeKind::kStem) affixes_.push_back(&entry);
    AddKnown(entry.form, entry.kind, entry.tags, entry.gloss);
    for (const Suppletion& other : entry.suppletive) AddKnown(other.form, entry.kind, entry.tags, entry.gloss);
  }
  for (const Paradigm& paradigm : grammar.paradigms) {
    for (const std::string& tag : paradigm.stems) AddOnce(tag, &known_tags_);
    for (const ParadigmSlot& slot : paradigm.slots) {
      for (const SlotValue& value : slot.values) {
        AddOnce(value.name, &known_tags_);
        for (const Allomorph& a : value.allomorphs) AddKnown(a.form, a.kind, {value.name}, value.name);
      }
    }
    for (const CellOverride& cell : paradigm.overrides) {
      std::vector<std::string> names;
      for (std::size_t i = 0; i < cell.values.size(); ++i) {
        if (cell.values[i] >= 0)
          names.push_back(paradigm.slots[i].values[static_cast<std::size_t>(cell.values[i])].name);
      }
      for (const Allomorph& a : cell.form.allomorphs) AddKnown(a.form, a.kind, names, cell.form.name);
    }
  }
}

// An affix of a paradigm that the lexicon lists too is the same morpheme: its tags join those of the entry.
void FormReader::AddKnown(const Morph& form, MorphemeKind kind, std::vector<std::string> tags,
                          const std::string& gloss) {
  if (form.tokens.empty()) return;
  for (const std::string& tag : tags) AddOnce(tag, &known_tags_);
  std::vector<Known>& same = known_[form.text];
  const auto equal = [&](const Known& known) {
    return known.kind == kind && known.before == form.before && known.after == form.after && known.tags == tags;
  };
  if (std::none_of(same.begin(), same.end(), equal))
    same.push_back({kind, form.before, form.after, std::move(tags), gloss});
}

bool FormReader::KnowsTags(const std::vector<TypedTag>& tags, TextError* error) const {
  for (const TypedTag& tag : tags) {
    if (Has(known_tags_, tag.name)) continue;
    *error = {Kind::kUnknownTag, tag.offset, tag.length,
              "no rule asks for the tag '" + tag.name + "', and no entry has it",
              Or(DidYouMean(tag.name, known_tags_), "leave it out, or give it to an entry of the lexicon")};
    return false;
  }
  return true;
}

std::vector<FormReader::Typed> FormReader::Split(const std::vector<Token>& tokens,
                                                 const std::vector<TypedTag>& tags) const {
  std::vector<Typed> typed;
  Boundary strongest = Boundary::kNone;  // of the run of boundaries just passed
  std::size_t word = 0, next_tag = 0;
  for (std::size_t i = 0; i < tokens.size();) {
    if (tokens[i].kind == Token::Kind::kBoundary) {
      strongest = std::max(strongest, tokens[i++].boundary);
      if (!typed.empty()) typed.back().after = std::max(typed.back().after, tokens[i - 1].boundary);
      continue;
    }
    const std::size_t begin = i;
    while (i < tokens.size() && tokens[i].kind != Token::Kind::kBoundary) ++i;
    Typed morpheme;
    morpheme.text = TextOf(grammar_, {tokens.begin() + static_cast<std::ptrdiff_t>(begin),
                                      tokens.begin() + static_cast<std::ptrdiff_t>(i)});
    morpheme.before = strongest;
    if (strongest >= Boundary::kWord) ++word;
    strongest = Boundary::kNone;
    morpheme.word = word;
    for (; next_tag < tags.size() && tags[next_tag].token <= i; ++next_tag) {
      if (const auto kind = KindNamed(tags[next_tag].name)) {
        morpheme.kind = kind;
      } else {
        AddOnce(tags[next_tag].name, &morpheme.tags);
      }
    }
    typed.push_back(std::move(morpheme));
  }
  return typed;
}

// What the entries make of a morpheme; none: it has no entry.
std::vector<Morpheme> FormReader::Options(const Typed& typed) const {
  std::vector<Morpheme> options;
  const auto found = known_.find(typed.text);
  if (found == known_.end()) return options;
  const auto fits = [&](const Known& known) {
    return (!typed.kind || *typed.kind == known.kind) &&
           (known.before == Boundary::kNone || known.before == typed.before) &&
           (known.after == Boundary::kNone || known.after == typed.after);
  };
  const auto chosen = [&](const Known& known) {
    return std::all_of(typed.tags.begin(), typed.tags.end(),
                       [&](const std::string& tag) { return Has(known.tags, tag); });
  };
  const bool choose = std::any_of(found->second.begin(), found->second.end(),
                                  [&](const Known& known) { return fits(known) && chosen(known); });
  for (const Known& known : found->second) {
    if (!fits(known) || (choose && !chosen(known))) continue;
    Morpheme morpheme{typed.text, known.kind, known.tags, known.gloss};
    for (const std::string& tag : typed.tags) AddOnce(tag, &morpheme.tags);
    options.push_back(std::move(morpheme));
  }
  return options;
}

// The kinds of morphemes without an entry, word by word.
void FormReader::SetKinds(const std::vector<Typed>& typed, const std::vector<bool>& has_entry,
                          std::vector<Morpheme>* morphemes) const {
  for (std::size_t begin = 0; begin < typed.size();) {
    std::size_t end = begin;
    while (end < typed.size() && typed[end].word == typed[begin].word) ++end;
    const auto fixed = [&](std::size_t i) { return has_entry[i] || typed[i].kind.has_value(); };
    bool stem_known = false;
    for (std::size_t i = begin; i < end; ++i)
      stem_known = stem_known || (fixed(i) && (*morphemes)[i].kind == MorphemeKind::kStem);
    bool behind_stem = false;
    for (std::size_t i = begin; i < end; ++i) {
      MorphemeKind& kind = (*morphemes)[i].kind;
      if (!fixed(i)) {
        kind = behind_stem ? MorphemeKind::kSuffix : stem_known ? MorphemeKind::kPrefix : MorphemeKind::kStem;
      }
      behind_stem = behind_stem || kind == MorphemeKind::kStem;
    }
    begin = end;
  }
}

std::uint64_t FormReader::BitsOf(const Morpheme& morpheme) const {
  std::uint64_t bits = std::uint64_t{1} << static_cast<int>(morpheme.kind);
  for (std::size_t tag = std::size(kKinds); tag < grammar_.tags.size(); ++tag) {
    if (Has(morpheme.tags, grammar_.tags[tag])) bits |= std::uint64_t{1} << tag;
  }
  return bits;
}

std::string Described(const Reading& reading) {
  std::string all;
  std::size_t next = 0;
  bool opens = true;
  for (const Token& token : reading.tokens) {
    const bool boundary = token.kind == Token::Kind::kBoundary;
    if (boundary) all += BoundarySign(token.boundary);
    if (opens && !boundary) {
      const Morpheme& morpheme = reading.morphemes[next++];
      all += morpheme.text + "@" + MorphemeKindName(morpheme.kind);
      for (const std::string& tag : morpheme.tags) all += TagText(tag);
    }
    opens = boundary;
  }
  return all;
}

Form FormReader::FormOf(const Reading& reading) const {
  Form form = reader_.FormOf(reading.tokens, Reader::Side::kUnderlying);
  if (grammar_.tagged) SetTags(reading.tags, &form);
  return form;
}

// The last boundary before a morpheme opens it; the first morpheme is opened by the ‖ that is put there for it.
void FormReader::SetTags(const std::vector<std::uint64_t>& tags, Form* form) {
  form->items.insert(form->items.begin(), {FormItem::Kind::kBoundary, Boundary::kPhrase, 0, 0});
  std::size_t next = 0;
  for (std::size_t i = 1; i < form->items.size() && next < tags.size(); ++i) {
    if (form->items[i].kind != FormItem::Kind::kBoundary && form->items[i - 1].kind == FormItem::Kind::kBoundary)
      form->items[i - 1].tags = tags[next++];
  }
}

Reading FormReader::Join(const std::string& text, std::vector<Morpheme> morphemes) const {
  Reading reading;
  TextError error;
  reader_.Read(text, Reader::Side::kUnderlying, &reading.tokens, &error);
  reading.text = TextOf(grammar_, reading.tokens);
  for (const Morpheme& morpheme : morphemes) reading.tags.push_back(BitsOf(morpheme));
  reading.morphemes = std::move(morphemes);
  return reading;
}

bool FormReader::Read(std::string_view typed_text, const std::vector<std::string>& stem_tags,
                      std::vector<Reading>* readings, TextError* error) const {
  readings->clear();
  std::vector<Token> tokens;
  std::vector<TypedTag> tags;
  if (!reader_.Read(typed_text, Reader::Side::kUnderlying, &tokens, error, &tags)) return false;
  if (!KnowsTags(tags, error)) return false;
  const std::vector<Typed> typed = Split(tokens, tags);
  std::vector<std::vector<Morpheme>> options;
  std::vector<bool> has_entry;
  for (const Typed& morpheme : typed) {
    options.push_back(Options(morpheme));
    has_entry.push_back(!options.back().empty());
    if (options.back().empty())
      options.back().push_back({morpheme.text, morpheme.kind.value_or(MorphemeKind::kStem), morpheme.tags, ""});
    if (!grammar_.tagged) options.back().resize(1);
  }
  const std::string text = TextOf(grammar_, tokens);
  std::vector<std::size_t> choice(options.size(), 0);
  for (;;) {
    Reading reading{text, tokens, {}, {}};
    for (std::size_t i = 0; i < options.size(); ++i) reading.morphemes.push_back(options[i][choice[i]]);
    SetKinds(typed, has_entry, &reading.morphemes);
    for (Morpheme& morpheme : reading.morphemes) {
      if (morpheme.kind == MorphemeKind::kStem) {
        for (const std::string& tag : stem_tags) AddOnce(tag, &morpheme.tags);
      }
      reading.tags.push_back(BitsOf(morpheme));
    }
    const bool seen = std::any_of(readings->begin(), readings->end(),
                                  [&](const Reading& other) { return other.tags == reading.tags; });
    if (!seen) readings->push_back(std::move(reading));
    if (readings->size() > kMostReadings) {
      *error = {Kind::kLimit, 0, typed_text.size(),
                "this form has more than " + std::to_string(kMostReadings) + " readings",
                "say which morphemes are meant: tal@stem-ki@suffix"};
      return false;
    }
    std::size_t i = options.size();
    while (i > 0 && ++choice[i - 1] == options[i - 1].size()) choice[--i] = 0;
    if (i == 0) return true;
  }
}

}  // namespace tiersmith
