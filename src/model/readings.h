// Typed forms with the kinds and tags of their morphemes.
//
// With `stem /tal/ noun  suffix /-ki/ strong  clitic /=ki/` the form "tal-ki" is tal@stem@noun-ki@suffix@strong. A morpheme
// has the kind and tags of the entries with its form: a prefix entry stands before a boundary, a suffix behind one, a
// clitic at `=`; several such entries are as many readings. Typed tags choose among entries that have them, else are
// added; a typed kind (√ is @stem) stands. In a word without a stem by entry or √, the first morpheme without an entry
// is the stem; before a stem, morphemes without an entry are prefixes, after one suffixes.
//
// Tags reach a form as bits, and only those that rules ask for (Grammar::tags). Where none asks there is one reading.
// Tested by tests/unit/model/readings_test.cc.
#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <string_view>
#include <unordered_map>
#include <vector>

#include "model/grammar.h"
#include "model/text.h"

namespace tiersmith {

struct Morpheme {
  std::string text;  // in symbols, without boundaries
  MorphemeKind kind = MorphemeKind::kStem;
  std::vector<std::string> tags;  // without the kind; each once
  std::string gloss;
};

struct Reading {
  std::string text;  // as typed, without tags
  std::vector<Token> tokens;
  std::vector<Morpheme> morphemes;  // in order
  std::vector<std::uint64_t> tags;  // of each morpheme, those that rules ask for
};

// "tal@stem@noun-ki@suffix@strong"
std::string Described(const Reading& reading);

// Not thread-safe.
class FormReader {
 public:
  explicit FormReader(const Grammar& grammar);

  // The readings of a typed underlying form that rules can tell apart, at least one; or false and `error`. `stem_tags` are
  // added to its stems.
  static constexpr std::size_t kMostReadings = 16;
  bool Read(std::string_view typed, const std::vector<std::string>& stem_tags, std::vector<Reading>* readings,
            TextError* error) const;
  // The form of morphemes that are known, joined as `text` says (as many morphemes as it has stretches of symbols).
  Reading Join(const std::string& text, std::vector<Morpheme> morphemes) const;
  // The form of a reading, with the tags of its morphemes.
  Form FormOf(const Reading& reading) const;

  const Reader& reader() const { return reader_; }
  // The entries of the lexicon that are no stems.
  const std::vector<const LexiconEntry*>& affixes() const { return affixes_; }
  // All tags that the lexicon, paradigms, rules or kinds know.
  const std::vector<std::string>& known_tags() const { return known_tags_; }

 private:
  struct Known {  // what an entry says of a morpheme of its form
    MorphemeKind kind;
    Boundary before, after;
    std::vector<std::string> tags;
    std::string gloss;
  };
  struct Typed {  // a morpheme as it stands
    std::string text;
    Boundary before = Boundary::kNone, after = Boundary::kNone;  // the nearest boundaries; kNone at the ends
    std::vector<std::string> tags;
    std::optional<MorphemeKind> kind;
    std::size_t word = 0;
  };
  void AddKnown(const Morph& form, MorphemeKind kind, std::vector<std::string> tags, const std::string& gloss);
  bool KnowsTags(const std::vector<TypedTag>& tags, TextError* error) const;
  std::vector<Typed> Split(const std::vector<Token>& tokens, const std::vector<TypedTag>& tags) const;
  std::vector<Morpheme> Options(const Typed& typed) const;
  void SetKinds(const std::vector<Typed>& typed, const std::vector<bool>& has_entry,
                std::vector<Morpheme>* morphemes) const;
  std::uint64_t BitsOf(const Morpheme& morpheme) const;
  static void SetTags(const std::vector<std::uint64_t>& tags, Form* form);

  const Grammar& grammar_;
  Reader reader_;
  std::unordered_map<std::string, std::vector<Known>> known_;  // by text
  std::vector<const LexiconEntry*> affixes_;
  std::vector<std::string> known_tags_;
};

}  // namespace tiersmith
