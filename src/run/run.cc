#include "run/run.h"

#include <fmt/format.h>

#include <algorithm>
#include <functional>

#include "compile/cascade_data.h"
#include "compile/rule_machine.h"
#include "run/input_letters.h"
#include "run/lattice.h"
#include "run/recovery.h"
#include "run/walker.h"

namespace tiersmith {

struct Runner::Impl {
  const Grammar& grammar;
  const Cascade& cascade;
  std::unique_ptr<FormReader> forms_made;  // when the first text comes: forms need none
  std::vector<Walker> walkers;
  // What a letter that comes out is written as.
  struct Spelled {
    enum class Kind : std::uint8_t { kUnknown, kNothing, kText, kNoSymbol } kind = Kind::kUnknown;
    bool slot = false;
    bool linked = false;
    std::string text;
    std::string again;  // what the further slots of a long one are written as
  };
  std::vector<std::vector<Spelled>> spellings;  // by class, by rest
  InputLetters inputs;
  std::vector<Token> tokens;
  std::vector<LetterClasses::Parts> letters;
  std::unique_ptr<Recovery> recovery;
  bool weighted = false;
  LetterNumbers numbers;
  std::vector<std::string> texts;  // that labels of a written lattice stand for

  Impl(const Grammar& g, const Cascade& c) : grammar(g), cascade(c), inputs(c.data()) {
    for (const Segment& segment : cascade.data().segments) walkers.emplace_back(segment);
    for (const Rule& rule : g.rules) weighted = weighted || rule.probability < 1;
  }

  const FormReader& forms() {
    if (forms_made == nullptr) forms_made = std::make_unique<FormReader>(grammar);
    return *forms_made;
  }
  const Reader& reader() { return forms().reader(); }

  Recovery& Inverse() {
    if (recovery == nullptr) recovery = std::make_unique<Recovery>(grammar, cascade);
    return *recovery;
  }

  const Spelled& Spell(const LetterClasses::Parts& letter) {
    if (static_cast<int>(spellings.size()) <= letter.class_id) spellings.resize(letter.class_id + 1);
    auto& row = spellings[letter.class_id];
    if (static_cast<int>(row.size()) <= letter.rest) row.resize(letter.rest + 1);
    if (row[letter.rest].kind == Spelled::Kind::kUnknown) row[letter.rest] = MakeSpelled(letter);
    return row[letter.rest];
  }

  Spelled MakeSpelled(const LetterClasses::Parts& parts) const {
    Spelled result;
    result.kind = Spelled::Kind::kNothing;
    const Letter letter = cascade.data().classes->Join(parts.class_id, parts.rest);
    if (letter.kind == FormItem::Kind::kBoundary) {
      if (letter.boundary == Boundary::kWord || letter.boundary == Boundary::kPhrase) {
        result.kind = Spelled::Kind::kText;
        result.text = letter.boundary == Boundary::kWord ? " " : "‖";
      }
      return result;
    }
    const std::optional<FeatureTree> root = RootContent(letter);
    if (!root.has_value()) return result;
    result.slot = true;
    result.linked = RootGoesOn(letter, grammar.tree);
    const int symbol = grammar.inventory.Spell(*root).symbol;
    result.kind = symbol < 0 ? Spelled::Kind::kNoSymbol : Spelled::Kind::kText;
    result.text = symbol < 0 ? grammar.inventory.Describe(*root, grammar.tree) : grammar.inventory.symbols[symbol].text;
    result.again = grammar.Doubles(symbol) ? result.text : "ː";
    return result;
  }

  // A form -> letters; false if it cannot be read, or a symbol is not one that the machine was compiled for.
  bool ToLetters(std::string_view text, TextError* error) {
    if (grammar.tagged) {
      std::vector<Reading> readings;
      return forms().Read(text, {}, &readings, error) && ToLetters(readings.front(), error);
    }
    if (!reader().Read(text, Reader::Side::kUnderlying, &tokens, error)) return false;
    return Good(inputs.Of(tokens, &letters), text, error);
  }
  bool ToLetters(const Reading& reading, TextError* error) {
    const InputLetters::Missing missing = inputs.Of(reading, &letters);
    return missing == InputLetters::Missing::kNothing || Good(missing, Described(reading), error);
  }
  static bool Good(InputLetters::Missing missing, std::string_view underlying, TextError* error) {
    switch (missing) {
      case InputLetters::Missing::kNothing:
        return true;
      case InputLetters::Missing::kSymbol:
        *error = {Kind::kBadForm, 0, underlying.size(),
                  fmt::format("/{}/ has a letter with more diacritics than this grammar was compiled for", underlying),
                  "write the letter in the grammar's data, so that it is compiled in"};
        return false;
      case InputLetters::Missing::kTags:
        *error = {Kind::kBadForm, 0, underlying.size(),
                  fmt::format("/{}/ has tags that this grammar was not compiled for together", underlying),
                  "give them to an entry of the lexicon, so that they are compiled in"};
        return false;
    }
    return false;
  }

  // `name`: what messages call the form; asked for only where there is one.
  using Name = std::function<std::string()>;
  bool Outputs(const Name& name, std::size_t best, std::vector<Output>* outputs, bool* more, TextError* error);
  bool Only(const Name& name, std::string* surface, TextError* error);
  void TakeOpening(std::string* surface) const;

  // All ways through the grammar.
  Lattice Ways(const std::vector<LetterClasses::Parts>& in, std::int32_t* flags) {
    std::vector<int> labels;
    for (const LetterClasses::Parts& letter : in) labels.push_back(numbers.Number(letter));
    Lattice lattice = Lattice::Of(labels);
    for (const Segment& segment : cascade.data().segments) lattice = Through(lattice, segment, &numbers, flags);
    return lattice;
  }

  // The letters of a lattice as text. State: does the last root go on. False if one has no symbol; it is then `unspelled`.
  bool Written(const Lattice& lattice, Lattice* written, std::string* unspelled) {
    bool good = true;
    *written = Relabelled(lattice, [&](int linked, int label) {
      const Spelled& spelled = Spell(numbers[label]);
      if (spelled.kind == Spelled::Kind::kNoSymbol) {
        good = false;
        *unspelled = spelled.text;
      }
      if (spelled.kind != Spelled::Kind::kText) return std::make_pair(linked, Lattice::kNothing);
      const int text = Text(spelled.slot && linked != 0 ? spelled.again : spelled.text);
      return std::make_pair(spelled.slot ? static_cast<int>(spelled.linked) : linked, text);
    });
    return good;
  }

  int Text(const std::string& text) {
    const auto found = std::find(texts.begin(), texts.end(), text);
    if (found != texts.end()) return static_cast<int>(found - texts.begin());
    texts.push_back(text);
    return static_cast<int>(texts.size()) - 1;
  }

  static TextError Unspelled(std::string_view underlying, const std::string& tree) {
    return {Kind::kNoSymbol, 0, underlying.size(),
            fmt::format("/{}/ comes to a tree that no symbol spells: {}", underlying, tree),
            "declare it, let `omit` restore what is missing, or add a rule that sets it; `derive --trace` shows how it "
            "came about"};
  }

  static TextError NoDerivation(std::string_view underlying) {
    return {Kind::kBadForm, 0, underlying.size(), fmt::format("the grammar has no derivation for /{}/", underlying),
            "see `derive --trace` for what happens to it"};
  }
};

Runner::Runner(const Grammar& grammar, const Cascade& cascade) : impl_(std::make_unique<Impl>(grammar, cascade)) {}
Runner::~Runner() = default;

bool Runner::weighted() const { return impl_->weighted; }

bool Runner::DeriveAll(std::string_view underlying, std::size_t best, std::vector<Output>* outputs, bool* more,
                       TextError* error) {
  const auto name = [&] { return std::string(underlying); };
  return impl_->ToLetters(underlying, error) && impl_->Outputs(name, best, outputs, more, error);
}

bool Runner::DeriveAll(const Reading& underlying, std::size_t best, std::vector<Output>* outputs, bool* more,
                       TextError* error) {
  if (!impl_->grammar.tagged) return DeriveAll(underlying.text, best, outputs, more, error);
  const auto name = [&] { return Described(underlying); };
  return impl_->ToLetters(underlying, error) && impl_->Outputs(name, best, outputs, more, error);
}

bool Runner::Impl::Outputs(const Name& name, std::size_t best, std::vector<Output>* outputs, bool* more,
                           TextError* error) {
  outputs->clear();
  *more = false;
  if (!weighted) {
    outputs->emplace_back();
    if (!Only(name, &outputs->back().surface, error)) return false;
    TakeOpening(&outputs->back().surface);
    return true;
  }
  std::int32_t flags = 0;
  const Lattice ways = Ways(letters, &flags);
  if (ways.arcs.empty()) {
    *error = NoDerivation(name());
    return false;
  }
  Lattice written;
  std::string unspelled;
  if (!Written(ways, &written, &unspelled)) {
    *error = Unspelled(name(), unspelled);
    return false;
  }
  for (const Likely& likely : Likeliest(written, best, more)) {
    Output output;
    for (int label : likely.labels) output.surface += texts[static_cast<std::size_t>(label)];
    output.probability = likely.probability;
    TakeOpening(&output.surface);
    outputs->push_back(std::move(output));
  }
  return true;
}

bool Runner::Derive(std::string_view underlying, std::string* surface, TextError* error) {
  std::vector<Output> outputs;
  bool more = false;
  if (!DeriveAll(underlying, 1, &outputs, &more, error)) return false;
  *surface = std::move(outputs.front().surface);
  return true;
}

// The ‖ that opens the first morpheme is there for its tags and not written.
void Runner::Impl::TakeOpening(std::string* surface) const {
  const std::string_view sign = BoundarySign(Boundary::kPhrase);
  if (grammar.tagged && surface->compare(0, sign.size(), sign) == 0) surface->erase(0, sign.size());
}

// The one surface of the letters, where no rule is optional.
bool Runner::Impl::Only(const Name& name, std::string* surface, TextError* error) {
  std::int32_t flags = 0;
  for (Walker& walker : walkers) {
    if (walker.Run(&letters, &flags)) continue;
    *error = NoDerivation(name());
    return false;
  }
  surface->clear();
  bool linked = false;
  for (const LetterClasses::Parts& letter : letters) {
    const Spelled& spelled = Spell(letter);
    switch (spelled.kind) {
      case Spelled::Kind::kUnknown:
      case Spelled::Kind::kNothing:
        break;
      case Spelled::Kind::kText:
        *surface += spelled.slot && linked ? spelled.again : spelled.text;
        if (spelled.slot) linked = spelled.linked;
        break;
      case Spelled::Kind::kNoSymbol:
        *error = Unspelled(name(), spelled.text);
        return false;
    }
  }
  return true;
}

Runner::Answer Runner::Apply(const Form& underlying) {
  Answer answer;
  const CascadeData& data = impl_->cascade.data();
  std::vector<LetterClasses::Parts> letters;
  for (const Letter& letter : LettersOf(underlying, data)) letters.push_back(data.classes->Classify(letter));
  std::int32_t flags = 0;
  std::vector<Likely> all;
  if (impl_->weighted) {
    bool more = false;
    all = Likeliest(impl_->Ways(letters, &flags), static_cast<std::size_t>(-1), &more);
  } else {
    for (Walker& walker : impl_->walkers) {
      if (!walker.Run(&letters, &flags)) return answer;
    }
    all.emplace_back();
    for (const LetterClasses::Parts& letter : letters) all.back().labels.push_back(impl_->numbers.Number(letter));
  }
  answer.ambiguous = flags & kFlagAmbiguous;
  answer.reaches = flags & kFlagReaches;
  answer.unsure = flags & kFlagUnsure;
  if (answer.ambiguous || answer.reaches) return answer;
  for (const Likely& likely : all) {
    std::vector<Letter> written;
    for (int label : likely.labels) {
      const LetterClasses::Parts& letter = impl_->numbers[label];
      written.push_back(data.classes->Join(letter.class_id, letter.rest));
    }
    const std::optional<Form> form = Decode(written, impl_->grammar.tree);
    if (!form.has_value()) {
      answer.outcomes.clear();
      return answer;
    }
    answer.outcomes.emplace_back(*form, likely.probability);
  }
  if (!answer.outcomes.empty()) answer.form = answer.outcomes.front().first;
  return answer;
}

bool Runner::Recover(std::string_view surface, std::size_t best, Candidates* candidates, TextError* error) {
  if (!impl_->reader().Read(surface, Reader::Side::kSurface, &impl_->tokens, error)) return false;
  return impl_->Inverse().Recover(impl_->tokens, best, candidates);
}

void Runner::AllowOnly(const WordGraph& words, std::vector<std::string>* left_out) {
  impl_->Inverse().AllowOnly(words, left_out);
}

bool Runner::IsCandidate(std::string_view underlying, std::string_view surface, bool* answer, TextError* error) {
  if (!impl_->ToLetters(underlying, error)) return false;
  if (!impl_->reader().Read(surface, Reader::Side::kSurface, &impl_->tokens, error)) return false;
  *answer = impl_->Inverse().IsCandidate(impl_->letters, impl_->tokens);
  return true;
}

}  // namespace tiersmith
