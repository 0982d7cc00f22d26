#include "run/run.h"

#include <fmt/format.h>

#include <array>

#include "compile/cascade_data.h"
#include "compile/rule_machine.h"
#include "run/recovery.h"
#include "run/walker.h"

namespace tiersmith {

struct Runner::Impl {
  const Grammar& grammar;
  const Cascade& cascade;
  std::unique_ptr<Reader> reader_made;  // when the first text comes: forms need none
  std::vector<Walker> walkers;
  // What a letter that comes out is written as.
  struct Spelled {
    enum class Kind : std::uint8_t { kUnknown, kNothing, kText, kNoSymbol } kind = Kind::kUnknown;
    bool slot = false;
    bool linked = false;
    std::string text;
  };
  std::vector<std::vector<Spelled>> spelled;  // by class, by rest
  // The letters of tokens: by symbol, [not linked, linked]; by boundary.
  std::vector<std::array<LetterClasses::Parts, 2>> of_symbol;
  std::array<LetterClasses::Parts, 5> of_boundary;
  std::vector<Token> tokens;
  std::vector<LetterClasses::Parts> letters;
  std::unique_ptr<Recovery> recovery;

  Impl(const Grammar& g, const Cascade& c) : grammar(g), cascade(c) {
    for (const Segment& segment : cascade.data().segments) walkers.emplace_back(segment);
    of_symbol.assign(g.inventory.symbols.size(), {LetterClasses::Parts{-1, 0}, LetterClasses::Parts{-1, 0}});
    for (const InputLetter& input : cascade.data().inputs) {
      if (input.symbol >= 0) {
        of_symbol[input.symbol][input.linked] = input.parts;
      } else {
        of_boundary[static_cast<int>(input.boundary)] = input.parts;
      }
    }
  }

  const Reader& reader() {
    if (reader_made == nullptr) reader_made = std::make_unique<Reader>(grammar);
    return *reader_made;
  }

  const Spelled& Spell(const LetterClasses::Parts& letter) {
    if (static_cast<int>(spelled.size()) <= letter.class_id) spelled.resize(letter.class_id + 1);
    auto& row = spelled[letter.class_id];
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
    return result;
  }

  // Tokens -> letters; false if a symbol is not one that the machine was compiled for.
  bool ToLetters(std::string_view text, TextError* error) {
    if (!reader().Read(text, Reader::Side::kUnderlying, &tokens, error)) return false;
    letters.clear();
    for (std::size_t i = 0; i < tokens.size(); ++i) {
      const Token& token = tokens[i];
      if (token.kind == Token::Kind::kBoundary) {
        letters.push_back(of_boundary[static_cast<int>(token.boundary)]);
        continue;
      }
      const bool linked = i + 1 < tokens.size() && tokens[i + 1].kind == Token::Kind::kLength;
      if (token.kind == Token::Kind::kSymbol) last_symbol_ = token.symbol;
      const bool known =
          last_symbol_ < static_cast<int>(of_symbol.size()) && of_symbol[last_symbol_][linked].class_id >= 0;
      if (!known) {
        *error = {Kind::kBadForm, 0, text.size(),
                  fmt::format("/{}/ has a letter with more diacritics than this grammar was compiled for", text),
                  "write the letter in the grammar's data, so that it is compiled in"};
        return false;
      }
      letters.push_back(of_symbol[last_symbol_][linked]);
    }
    return true;
  }
  int last_symbol_ = -1;
};

Runner::Runner(const Grammar& grammar, const Cascade& cascade) : impl_(std::make_unique<Impl>(grammar, cascade)) {}
Runner::~Runner() = default;

bool Runner::Derive(std::string_view underlying, std::string* surface, TextError* error) {
  if (!impl_->ToLetters(underlying, error)) return false;
  std::int32_t flags = 0;
  for (Walker& walker : impl_->walkers) {
    if (walker.Run(&impl_->letters, &flags)) continue;
    *error = {Kind::kBadForm, 0, underlying.size(), fmt::format("the grammar has no derivation for /{}/", underlying),
              "see `derive --trace` for what happens to it"};
    return false;
  }
  surface->clear();
  bool linked = false;
  for (const LetterClasses::Parts& letter : impl_->letters) {
    const Impl::Spelled& spelled = impl_->Spell(letter);
    switch (spelled.kind) {
      case Impl::Spelled::Kind::kUnknown:
      case Impl::Spelled::Kind::kNothing:
        break;
      case Impl::Spelled::Kind::kText:
        *surface += spelled.slot && linked ? "ː" : spelled.text;
        if (spelled.slot) linked = spelled.linked;
        break;
      case Impl::Spelled::Kind::kNoSymbol:
        *error = {Kind::kNoSymbol, 0, underlying.size(),
                  fmt::format("/{}/ comes to a tree that no symbol spells: {}", underlying, spelled.text),
                  "declare it, let `omit` restore what is missing, or add a rule that sets it; `derive --trace` shows "
                  "how it came about"};
        return false;
    }
  }
  return true;
}

Runner::Answer Runner::Apply(const Form& underlying) {
  Answer answer;
  const CascadeData& data = impl_->cascade.data();
  std::vector<LetterClasses::Parts> letters;
  for (const Letter& letter : Encode(underlying, impl_->grammar.tree))
    letters.push_back(data.classes->Classify(letter));
  std::int32_t flags = 0;
  for (Walker& walker : impl_->walkers) {
    if (!walker.Run(&letters, &flags)) return answer;
  }
  answer.ambiguous = flags & kFlagAmbiguous;
  answer.reaches = flags & kFlagReaches;
  answer.unsure = flags & kFlagUnsure;
  if (answer.ambiguous || answer.reaches) return answer;
  std::vector<Letter> written;
  for (const LetterClasses::Parts& letter : letters)
    written.push_back(data.classes->Join(letter.class_id, letter.rest));
  answer.form = Decode(written, impl_->grammar.tree);
  return answer;
}

bool Runner::Recover(std::string_view surface, std::size_t best, Candidates* candidates, TextError* error) {
  if (impl_->recovery == nullptr) impl_->recovery = std::make_unique<Recovery>(impl_->grammar, impl_->cascade);
  if (!impl_->reader().Read(surface, Reader::Side::kSurface, &impl_->tokens, error)) return false;
  return impl_->recovery->Recover(impl_->tokens, best, candidates);
}

bool Runner::IsCandidate(std::string_view underlying, std::string_view surface, bool* answer, TextError* error) {
  if (impl_->recovery == nullptr) impl_->recovery = std::make_unique<Recovery>(impl_->grammar, impl_->cascade);
  if (!impl_->ToLetters(underlying, error)) return false;
  if (!impl_->reader().Read(surface, Reader::Side::kSurface, &impl_->tokens, error)) return false;
  *answer = impl_->recovery->IsCandidate(impl_->letters, impl_->tokens);
  return true;
}

}  // namespace tiersmith
