#include "run/input_letters.h"

namespace tiersmith {

InputLetters::InputLetters(const CascadeData& data)
    : tagged_(data.grammar->tagged),
      tags_read_(data.tags_read),
      of_symbol_(data.grammar->inventory.symbols.size(), {LetterClasses::Parts{-1, 0}, LetterClasses::Parts{-1, 0}}) {
  for (const InputLetter& input : data.inputs) {
    if (input.symbol >= 0) {
      of_symbol_[input.symbol][input.linked] = input.parts;
    } else {
      of_boundary_[static_cast<int>(input.boundary)][input.tags] = input.parts;
    }
  }
}

const LetterClasses::Parts* InputLetters::Bound(Boundary boundary, std::uint64_t tags) const {
  const auto& of_tags = of_boundary_[static_cast<int>(boundary)];
  const auto found = of_tags.find(tags & tags_read_);
  return found == of_tags.end() ? nullptr : &found->second;
}

InputLetters::Missing InputLetters::Of(const std::vector<Token>& tokens,
                                       std::vector<LetterClasses::Parts>* letters) const {
  letters->clear();
  return Add(tokens, {}, letters);
}

InputLetters::Missing InputLetters::Of(const Reading& reading, std::vector<LetterClasses::Parts>* letters) const {
  letters->clear();
  if (!tagged_) return Add(reading.tokens, {}, letters);
  const bool opened = !reading.tokens.empty() && reading.tokens.front().kind != Token::Kind::kBoundary;
  const LetterClasses::Parts* opening = Bound(Boundary::kPhrase, opened ? reading.tags.front() : 0);
  if (opening == nullptr) return Missing::kTags;
  letters->push_back(*opening);
  return Add(reading.tokens, reading.tags, letters);
}

// `tags`: of each morpheme; the last boundary before it bears them.
InputLetters::Missing InputLetters::Add(const std::vector<Token>& tokens, const std::vector<std::uint64_t>& tags,
                                        std::vector<LetterClasses::Parts>* letters) const {
  const auto is_boundary = [&](std::size_t i) { return tokens[i].kind == Token::Kind::kBoundary; };
  std::size_t morpheme = !tokens.empty() && !is_boundary(0) ? 1 : 0;
  int symbol = -1;
  for (std::size_t i = 0; i < tokens.size(); ++i) {
    if (is_boundary(i)) {
      const bool opens = morpheme < tags.size() && i + 1 < tokens.size() && !is_boundary(i + 1);
      const LetterClasses::Parts* boundary = Bound(tokens[i].boundary, opens ? tags[morpheme++] : 0);
      if (boundary == nullptr) return Missing::kTags;
      letters->push_back(*boundary);
      continue;
    }
    if (tokens[i].kind == Token::Kind::kSymbol) symbol = tokens[i].symbol;
    const bool linked = i + 1 < tokens.size() && tokens[i + 1].kind == Token::Kind::kLength;
    if (symbol >= static_cast<int>(of_symbol_.size()) || of_symbol_[symbol][linked].class_id < 0)
      return Missing::kSymbol;
    letters->push_back(of_symbol_[symbol][linked]);
  }
  return Missing::kNothing;
}

}  // namespace tiersmith
