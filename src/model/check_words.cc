// Lexicon and paradigms: forms read, kinds and boundaries held against each other, values and cells looked up.
//
// Example: `LOC /-tA/ after C, /-sA/ after V` is a value with two allomorphs; the form's boundary makes them suffixes. A
// table has the columns id, form, gloss, tags, weight by name; there the form's boundaries say the kind.
// Does not handle: infixes, circumfixes, copies and templates (errors say so); choosing allomorphs (analyse/paradigm.h).
// Tested by tests/unit/model/words_test.cc.
#include <algorithm>
#include <filesystem>
#include <sstream>

#include "base/utf8.h"
#include "model/check.h"
#include "model/speller.h"
#include "model/table.h"
#include "model/text.h"

namespace tiersmith {
namespace {

constexpr const char* kColumns = "id, form, gloss, tags, weight";

MorphemeKind KindOf(syntax::LexiconEntry::Kind kind) {
  switch (kind) {
    case syntax::LexiconEntry::Kind::kStem:
      return MorphemeKind::kStem;
    case syntax::LexiconEntry::Kind::kPrefix:
      return MorphemeKind::kPrefix;
    case syntax::LexiconEntry::Kind::kSuffix:
      return MorphemeKind::kSuffix;
    case syntax::LexiconEntry::Kind::kClitic:
      return MorphemeKind::kClitic;
  }
  return MorphemeKind::kStem;
}

// ⟨tingun⟩ or <tingun> in a cell is spelled.
syntax::FormText FormOfCell(const Cell& cell) {
  for (const auto& [open, close] : {std::pair<std::string, std::string>("⟨", "⟩"), {"<", ">"}}) {
    const bool spelled = cell.text.size() >= open.size() + close.size() &&
                         cell.text.compare(0, open.size(), open) == 0 &&
                         cell.text.compare(cell.text.size() - close.size(), close.size(), close) == 0;
    if (!spelled) continue;
    Span span = cell.span;
    span.begin += static_cast<std::uint32_t>(open.size());
    span.end -= static_cast<std::uint32_t>(close.size());
    return {cell.text.substr(open.size(), cell.text.size() - open.size() - close.size()), true, span};
  }
  return {cell.text, false, cell.span};
}

syntax::LexiconEntry::Kind KindOfForm(const std::string& form) {
  using Kind = syntax::LexiconEntry::Kind;
  if (form.empty()) return Kind::kStem;
  if (form.front() == '=' || form.back() == '=') return Kind::kClitic;
  return form.front() == '-' ? Kind::kSuffix : form.back() == '-' ? Kind::kPrefix : Kind::kStem;
}

// Does the test look at anything beyond one segment?
bool LooksBeyond(const SlotTest& test) {
  const bool here = std::any_of(test.bundle.begin(), test.bundle.end(), [](const FeatureTest& feature) {
    switch (feature.kind) {
      case FeatureTest::Kind::kBears:
      case FeatureTest::Kind::kLacks:
      case FeatureTest::Kind::kHasValue:
      case FeatureTest::Kind::kLacksValue:
        return false;
      case FeatureTest::Kind::kAgrees:
      case FeatureTest::Kind::kDiffers:
      case FeatureTest::Kind::kShared:
      case FeatureTest::Kind::kUnshared:
      case FeatureTest::Kind::kLong:
      case FeatureTest::Kind::kShort:
      case FeatureTest::Kind::kHalfFirst:
      case FeatureTest::Kind::kHalfSecond:
        return true;
    }
    return true;
  });
  return here || test.op == SlotTest::Op::kEmpty || std::any_of(test.args.begin(), test.args.end(), LooksBeyond);
}

}  // namespace

const Reader& Checker::FormTexts() {
  if (reader_ == nullptr) reader_ = std::make_unique<Reader>(grammar_);
  return *reader_;
}

const Speller& Checker::Letters() {
  if (speller_ == nullptr) speller_ = std::make_unique<Speller>(grammar_);
  return *speller_;
}

std::optional<SlotTest> Checker::ResolveContext(const syntax::Set& set) {
  std::optional<SlotTest> test = ResolveSet(set);
  if (!test || !LooksBeyond(*test)) return test;
  Error(Kind::kBadValue, set.span, "a context here asks what one segment bears, and no more",
        "leave out agreement, sharing, length and `empty`");
  return std::nullopt;
}

// ---- lexicon ----------------------------------------------------------------------------------------

// Tables are read before the inventory is made: what their forms write is among its symbols.
void Checker::LoadLexicons() {
  for (const syntax::Top& top : file_.tops) {
    if (const auto* lexicon = std::get_if<syntax::Lexicon>(&top)) {
      for (const syntax::LexiconEntry& entry : lexicon->entries) written_entries_.push_back({entry, ""});
    } else if (const auto* from = std::get_if<syntax::LexiconFrom>(&top)) {
      std::uint32_t file = 0;
      if (!grammar_.sources->LoadBeside(from->path.text, from->path.span, diagnostics_, &file)) continue;
      LoadLexiconTable(file);
    }
  }
}

void Checker::LoadLexiconTable(std::uint32_t file) {
  const std::optional<Table> table = ReadTable(file, *grammar_.sources, true, kColumns, diagnostics_);
  if (!table) return;
  WarnOfMisspelledColumns(*table, {"id", "form", "gloss", "tags", "weight"}, diagnostics_);
  if (!table->ColumnOf("form")) {
    Error(Kind::kBadLexicon, table->heading_span, "the heading names no column 'form'",
          std::string("name the columns in the first line, parted by tabs: ") + kColumns);
    return;
  }
  for (const Table::Line& line : table->lines) {
    const auto cell = [&](const char* name) -> const Cell* {
      const std::optional<std::size_t> column = table->ColumnOf(name);
      return column ? &line.cells[*column] : nullptr;
    };
    WrittenEntry written;
    written.entry.span = line.span;
    written.entry.form = FormOfCell(*cell("form"));
    written.entry.kind = KindOfForm(written.entry.form.raw);
    if (const Cell* id = cell("id")) written.id = id->text;
    if (const Cell* gloss = cell("gloss")) written.entry.gloss = syntax::Name{gloss->text, gloss->span};
    if (const Cell* tags = cell("tags")) {
      std::istringstream words(tags->text);
      for (std::string tag; words >> tag;) written.entry.tags.push_back({tag, tags->span});
    }
    if (const Cell* weight = cell("weight"); weight != nullptr && !weight->text.empty()) {
      std::istringstream number(weight->text);
      double value = 0;
      if (!(number >> value) || !number.eof()) {
        Error(Kind::kBadLexicon, weight->span, "'" + weight->text + "' is no weight", "write a number, as in 3 or 0.5");
        continue;
      }
      written.entry.weight = value;
    }
    written_entries_.push_back(std::move(written));
  }
}

// Does a morph's form have the boundaries of its kind?
bool Checker::CheckBoundaries(const Morph& morph, MorphemeKind kind) {
  const bool before = morph.before != Boundary::kNone, after = morph.after != Boundary::kNone;
  if (before && after) {
    Error(Kind::kNotSupportedYet, morph.span, "infixes and circumfixes are not supported by this release",
          "write a prefix /mu-/ or a suffix /-ki/");
    return false;
  }
  const auto wrong = [&](const char* what, const char* remedy) {
    Error(Kind::kBadLexicon, morph.span, what, remedy);
    return false;
  };
  switch (kind) {
    case MorphemeKind::kStem:
      return !before && !after ? true : wrong("a stem has no boundary", "write the stem alone: stem /tilun/");
    case MorphemeKind::kPrefix:
      return morph.after == Boundary::kMorpheme
                 ? true
                 : wrong("a prefix ends with a boundary", "write it as in: prefix /mu-/");
    case MorphemeKind::kSuffix:
      return morph.before == Boundary::kMorpheme
                 ? true
                 : wrong("a suffix begins with a boundary", "write it as in: suffix /-ki/");
    case MorphemeKind::kClitic:
      return morph.before == Boundary::kClitic || morph.after == Boundary::kClitic
                 ? true
                 : wrong("a clitic begins or ends with `=`", "write it as in: clitic /=wa/");
  }
  return true;
}

void Checker::ReportForm(Span span, const TextError& error, bool whole) {
  Span place = span;
  if (!whole) {
    place.begin += static_cast<std::uint32_t>(error.offset);
    place.end = place.begin + static_cast<std::uint32_t>(error.length);
  }
  Error(error.kind, place, error.message, error.remedy);
}

// The morphs a form stands for, several only if it is spelled and they are wanted; none after an error.
std::vector<Morph> Checker::MorphsOf(const syntax::FormText& form, bool several) {
  std::vector<std::string> texts = {form.raw};
  TextError error;
  if (form.spelled) {
    if (!Letters().Read(form.raw, Reader::Side::kUnderlying, &texts, &error)) {
      ReportForm(form.span, error, false);
      return {};
    }
    if (texts.size() > 1 && !SayReadings(form, texts, several)) return {};
  }
  std::vector<Morph> morphs;
  for (const std::string& text : texts) {
    Morph morph;
    morph.span = form.span;
    if (!FormTexts().Read(text, Reader::Side::kUnderlying, &morph.tokens, &error)) {
      ReportForm(form.span, error, form.spelled);
      return {};
    }
    const auto is_boundary = [](const Token& token) { return token.kind == Token::Kind::kBoundary; };
    std::vector<Token>& tokens = morph.tokens;
    if (!tokens.empty() && is_boundary(tokens.back())) {
      morph.after = tokens.back().boundary;
      tokens.pop_back();
    }
    if (!tokens.empty() && is_boundary(tokens.front())) {
      morph.before = tokens.front().boundary;
      tokens.erase(tokens.begin());
    }
    if (std::any_of(tokens.begin(), tokens.end(), is_boundary)) {
      Error(Kind::kBadLexicon, form.span, "a boundary stands inside this morpheme",
            "list its morphemes as entries of their own");
      return {};
    }
    if (tokens.empty() && (morph.before != Boundary::kNone || morph.after != Boundary::kNone)) {
      Error(Kind::kBadLexicon, form.span, "a boundary alone is no form", "write //, or a form with its boundary");
      return {};
    }
    morph.text = TextOf(grammar_, tokens);
    morphs.push_back(std::move(morph));
  }
  return morphs;
}

// False if only one was wanted.
bool Checker::SayReadings(const syntax::FormText& form, const std::vector<std::string>& texts, bool several) {
  std::string listed;
  for (const std::string& text : texts) listed += (listed.empty() ? "/" : " or /") + text + "/";
  diagnostics_.Add(
      {Kind::kSeveralReadings,
       several ? Severity::kWarning : Severity::kError,
       form.span,
       "the spelling leaves open what ⟨" + form.raw + "⟩ is: " + listed + (several ? "; each is taken" : ""),
       "write the form in symbols, between slashes",
       {}});
  return several;
}

void Checker::AddLexiconEntry(const WrittenEntry& written) {
  const syntax::LexiconEntry& entry = written.entry;
  LexiconEntry made;
  made.kind = KindOf(entry.kind);
  made.id = written.id;
  made.span = entry.span;
  if (entry.gloss) made.gloss = entry.gloss->text;
  if (entry.at) made.at = entry.at->text;
  for (const syntax::Name& tag : entry.tags) {
    if (std::find(made.tags.begin(), made.tags.end(), tag.text) == made.tags.end()) made.tags.push_back(tag.text);
  }
  made.weight = entry.weight.value_or(1);
  if (made.weight <= 0) {
    Error(Kind::kBadLexicon, entry.form.span, "a weight is greater than nothing",
          "write how often the entry is chosen, against 1 for the others; leave out entries that never are");
    return;
  }
  if (!entry.suppletive.empty() && made.kind != MorphemeKind::kStem) {
    Error(Kind::kBadLexicon, entry.suppletive[0].form.span, "only a stem has other forms in cells of its paradigm",
          "list the allomorphs of an affix in its paradigm");
    return;
  }
  for (const syntax::Suppletion& other : entry.suppletive) {
    std::vector<Morph> forms = MorphsOf(other.form, false);
    if (forms.empty() || !CheckBoundaries(forms[0], made.kind)) return;
    Suppletion made_other;
    for (const syntax::Name& tag : other.in) made_other.in.push_back(tag.text);
    made_other.form = std::move(forms[0]);
    made.suppletive.push_back(std::move(made_other));
  }
  for (Morph& form : MorphsOf(entry.form, true)) {
    if (form.tokens.empty()) {
      Error(Kind::kBadLexicon, entry.form.span, "an entry has a form", "write its form, as in: stem /tilun/");
      return;
    }
    if (!CheckBoundaries(form, made.kind)) return;
    LexiconEntry copy = made;
    copy.form = std::move(form);
    grammar_.lexicon.entries.push_back(std::move(copy));
  }
}

// ---- paradigms --------------------------------------------------------------------------------------

// The kind of affix a form is, by its boundary; none after an error.
std::optional<MorphemeKind> Checker::AffixKind(const Morph& morph) {
  if (morph.tokens.empty()) return MorphemeKind::kSuffix;  // nothing is added
  if (morph.before == Boundary::kNone && morph.after == Boundary::kNone) {
    Error(Kind::kBadParadigm, morph.span, "an affix begins or ends with a boundary",
          "write a suffix as /-lAn/, a prefix as /mu-/, a clitic as /=wa/, no affix as //");
    return std::nullopt;
  }
  const Boundary boundary = std::max(morph.before, morph.after);
  if (boundary >= Boundary::kWord) {
    Error(Kind::kBadParadigm, morph.span, "an affix belongs to its word", "join it by `-` or `=`");
    return std::nullopt;
  }
  const MorphemeKind kind = boundary == Boundary::kClitic                                       ? MorphemeKind::kClitic
                            : morph.after != Boundary::kNone && morph.before == Boundary::kNone ? MorphemeKind::kPrefix
                                                                                                : MorphemeKind::kSuffix;
  return CheckBoundaries(morph, kind) ? std::optional(kind) : std::nullopt;
}

bool Checker::CheckAllomorphs(const std::vector<syntax::Allomorph>& written, SlotValue* value) {
  for (std::size_t i = 0; i < written.size(); ++i) {
    Allomorph made;
    std::vector<Morph> forms = MorphsOf(written[i].form, false);
    if (forms.empty()) return false;
    const std::optional<MorphemeKind> kind = AffixKind(forms[0]);
    if (!kind) return false;
    made.form = std::move(forms[0]);
    made.kind = *kind;
    if (written[i].at) made.at = written[i].at->text;
    if (written[i].after) {
      made.after = ResolveContext(*written[i].after);
      if (!made.after) return false;
    } else if (i + 1 < written.size()) {
      Error(Kind::kBadParadigm, written[i].form.span,
            "this form of '" + value->name + "' fits everywhere, so that no later one is ever chosen",
            "put it last, or give it a condition: /-tA/ after C, /-sA/");
      return false;
    }
    value->allomorphs.push_back(std::move(made));
  }
  return true;
}

bool Checker::CheckSlots(const syntax::Paradigm& written, Paradigm* paradigm) {
  std::map<std::string, Span> slots, values;
  const auto fresh = [&](std::map<std::string, Span>* known, const syntax::Name& name, const char* what) {
    const auto [place, is_new] = known->emplace(name.text, name.span);
    if (is_new) return true;
    diagnostics_.Add({Kind::kDuplicate,
                      Severity::kError,
                      name.span,
                      std::string(what) + " '" + name.text + "' stands twice in this paradigm",
                      "rename one of the two",
                      {{place->second, "first here"}}});
    return false;
  };
  bool good = true;
  for (const syntax::ParadigmSlot& slot : written.slots) {
    ParadigmSlot made;
    made.name = slot.name.text;
    good = fresh(&slots, slot.name, "slot") && good;
    for (const syntax::SlotValue& value : slot.values) {
      good = fresh(&values, value.name, "value") && good;
      SlotValue made_value;
      made_value.name = value.name.text;
      made_value.span = value.span;
      good = CheckAllomorphs(value.allomorphs, &made_value) && good;
      made.values.push_back(std::move(made_value));
    }
    paradigm->slots.push_back(std::move(made));
  }
  return good;
}

bool Checker::CheckOverride(const syntax::CellOverride& written, Paradigm* paradigm) {
  CellOverride made;
  made.values.assign(paradigm->slots.size(), -1);
  made.form.span = written.span;
  std::vector<std::string> names;
  for (const ParadigmSlot& slot : paradigm->slots) {
    for (const SlotValue& value : slot.values) names.push_back(value.name);
  }
  for (const syntax::Name& name : written.values) {
    bool known = false;
    for (std::size_t s = 0; s < paradigm->slots.size(); ++s) {
      for (std::size_t v = 0; v < paradigm->slots[s].values.size(); ++v) {
        if (paradigm->slots[s].values[v].name != name.text) continue;
        known = true;
        if (made.values[s] >= 0) {
          Error(Kind::kBadParadigm, name.span, "a cell has one value of '" + paradigm->slots[s].name + "'",
                "name values of different slots");
          return false;
        }
        made.values[s] = static_cast<int>(v);
      }
    }
    if (!known) {
      Error(Kind::kBadParadigm, name.span, "no slot of this paradigm has the value '" + name.text + "'",
            Or(DidYouMean(name.text, names), "a cell names values that stand in the slots above it"));
      return false;
    }
    made.form.name += (made.form.name.empty() ? "" : " ") + name.text;
  }
  for (const CellOverride& other : paradigm->overrides) {
    if (other.values != made.values) continue;
    diagnostics_.Add({Kind::kDuplicate,
                      Severity::kError,
                      written.span,
                      "the cell '" + made.form.name + "' stands twice in this paradigm",
                      "keep one of the two",
                      {{other.form.span, "first here"}}});
    return false;
  }
  if (!CheckAllomorphs(written.allomorphs, &made.form)) return false;
  paradigm->overrides.push_back(std::move(made));
  return true;
}

void Checker::CheckParadigm(const syntax::Paradigm& written) {
  Paradigm paradigm;
  paradigm.name = written.name.text;
  paradigm.span = written.name.span;
  for (const Paradigm& other : grammar_.paradigms) {
    if (other.name != paradigm.name) continue;
    diagnostics_.Add({Kind::kDuplicate,
                      Severity::kError,
                      written.name.span,
                      "paradigm '" + paradigm.name + "' is declared twice",
                      "rename one of the two",
                      {{other.span, "first declared here"}}});
    return;
  }
  std::vector<std::string> stem_tags;
  for (const LexiconEntry& entry : grammar_.lexicon.entries) {
    if (entry.kind == MorphemeKind::kStem) stem_tags.insert(stem_tags.end(), entry.tags.begin(), entry.tags.end());
  }
  for (const syntax::Name& tag : written.stems) {
    paradigm.stems.push_back(tag.text);
    if (!grammar_.lexicon.has_stems()) continue;
    if (std::find(stem_tags.begin(), stem_tags.end(), tag.text) != stem_tags.end()) continue;
    diagnostics_.Warning(Kind::kUnknownTag, tag.span, "no stem of the lexicon has the tag '" + tag.text + "'",
                         Or(DidYouMean(tag.text, stem_tags), "give it to the stems of this paradigm"));
  }
  bool good = CheckSlots(written, &paradigm);
  for (const syntax::CellOverride& cell : written.overrides) good = CheckOverride(cell, &paradigm) && good;
  if (paradigm.slots.empty() && good) {
    Error(Kind::kBadParadigm, written.name.span, "this paradigm has no slot",
          "write one, as in: number : SG // PL /-lAn/");
    good = false;
  }
  if (!good) return;
  const auto named = [](const CellOverride& cell) {
    return std::count_if(cell.values.begin(), cell.values.end(), [](int value) { return value >= 0; });
  };
  std::stable_sort(paradigm.overrides.begin(), paradigm.overrides.end(),
                   [&](const CellOverride& a, const CellOverride& b) { return named(a) > named(b); });
  grammar_.paradigms.push_back(std::move(paradigm));
}

// ---- tags -------------------------------------------------------------------------------------------

// Forms bear tags where rules ask for them. A tag that only typed forms could bear is perhaps misspelled.
void Checker::CheckTags() {
  for (const Rule& rule : grammar_.rules) {
    grammar_.tagged = grammar_.tagged || rule.within == Domain::kStem || !rule.tags.empty() ||
                      std::any_of(rule.otherwise.begin(), rule.otherwise.end(),
                                  [](const Clause& clause) { return !clause.tags.empty(); });
  }
  if (diagnostics_.HasErrors()) return;  // an entry may be missing for one
  std::vector<std::string> given(grammar_.tags.begin(), grammar_.tags.begin() + 4);
  for (const LexiconEntry& entry : grammar_.lexicon.entries)
    given.insert(given.end(), entry.tags.begin(), entry.tags.end());
  for (const Paradigm& paradigm : grammar_.paradigms) {
    for (const ParadigmSlot& slot : paradigm.slots) {
      for (const SlotValue& value : slot.values) given.push_back(value.name);
    }
  }
  for (const DataRow& row : grammar_.data) {
    given.insert(given.end(), row.tags.begin(), row.tags.end());
    for (std::size_t i = 0; i < row.underlying.size(); ++i) {
      TypedTag tag;
      TextError error;
      if (row.underlying[i] == '@' && ReadTag(row.underlying, &i, &tag, &error)) given.push_back(tag.name);
    }
  }
  if (given.size() == 4) return;  // all tags are typed
  std::set<int> said;
  const auto visit = [&](const Clause& clause) {
    for (const TagTest& test : clause.tags) {
      const std::string& tag = grammar_.tags[static_cast<std::size_t>(test.tag)];
      if (std::find(given.begin(), given.end(), tag) != given.end() || !said.insert(test.tag).second) continue;
      diagnostics_.Warning(
          Kind::kUnknownTag, test.span,
          "no entry and no row of the data has the tag '" + tag + "': only forms typed with @" + tag + " would bear it",
          Or(DidYouMean(tag, given), "give it to the entries that are meant"));
    }
  };
  for (const Rule& rule : grammar_.rules) {
    visit(rule);
    for (const Clause& clause : rule.otherwise) visit(clause);
  }
}

void Checker::CheckWords() {
  for (const WrittenEntry& written : written_entries_) AddLexiconEntry(written);
  for (const syntax::Top& top : file_.tops) {
    if (const auto* paradigm = std::get_if<syntax::Paradigm>(&top)) CheckParadigm(*paradigm);
  }
  if (!grammar_.paradigms.empty() && !diagnostics_.HasErrors()) CheckSuppletion();
}

// A form for a cell that no paradigm has would never be chosen.
void Checker::CheckSuppletion() {
  std::vector<std::string> values;
  for (const Paradigm& paradigm : grammar_.paradigms) {
    for (const ParadigmSlot& slot : paradigm.slots) {
      for (const SlotValue& value : slot.values) values.push_back(value.name);
    }
  }
  for (const WrittenEntry& written : written_entries_) {
    for (const syntax::Suppletion& other : written.entry.suppletive) {
      for (const syntax::Name& value : other.in) {
        if (std::find(values.begin(), values.end(), value.text) != values.end()) continue;
        diagnostics_.Warning(Kind::kUnknownTag, value.span,
                             "no paradigm has the value '" + value.text + "': this form is never chosen",
                             Or(DidYouMean(value.text, values), "name values of one cell"));
      }
    }
  }
}

}  // namespace tiersmith
