// Letter classes: what of a letter the rules can see or change, and the rest that rides along.
//
// Every letter is cut in two: its *visible* part, the nodes that some rule tests or changes (with
// their mothers, and all under a node that spreads or is cut), and its *rest*. Machines are built
// over classes of letters; two letters are in one class if their visible parts are equal and no literal
// of the rules can tell their rests apart. In a vowel-harmony grammar /p t k s/ are one class.
// A rest never changes: an output letter has the visible part of the output class and the rest of
// the input letter (an inserted letter brings its own).
//
// Tested by tests/agreement/random_test.cc (grammars compiled as users compile them) and tests/published/.
#pragma once

#include <map>
#include <memory>
#include <set>
#include <unordered_map>
#include <vector>

#include "letters/letter.h"
#include "model/grammar.h"

namespace tiersmith {

// The nodes that rules test or change, closed upward; true at index NodeId.
using NodeSet = std::vector<bool>;

struct ClassLetter {
  Letter visible;  // class nodes with hidden daughters have value 1
  int rest = -1;   // the rest itself where some literal may match it, else -1
};

// The values of `node` in a letter's part, left to right; those of the part of a contour that a test asks for.
std::vector<Value> ValuesOf(const LetterPart& part, NodeId node);
std::vector<Value> ValuesFacing(const LetterPart& part, NodeId node, FeatureTest::Part which);

class LetterClasses {
 public:
  struct Parts {
    int class_id = 0;
    int rest = 0;
  };

  LetterClasses(const Grammar& grammar, NodeSet visible, std::set<int> literals);

  // All there is to know of the classes besides the grammar, as a plain value; classes and rests by their numbers.
  struct Contents {
    std::vector<NodeId> visible;
    std::vector<int> literals;
    std::vector<LetterPart> rests;
    std::vector<ClassLetter> classes;
  };
  Contents Save() const;
  // Null if some class or rest is there twice.
  static std::unique_ptr<LetterClasses> Restore(const Grammar& grammar, const Contents& contents);

  // Cuts a letter; interns what is new.
  Parts Classify(const Letter& letter);
  // The letter again.
  Letter Join(int class_id, int rest) const;
  // The class of a visible part that keeps the rest key of `like`.
  int ClassWithRestOf(int like, const Letter& visible);

  const ClassLetter& operator[](int class_id) const { return classes_[class_id]; }
  int size() const { return static_cast<int>(classes_.size()); }
  // Does the letter pass, as far as it alone can tell: tests of sharing, length and agreement count as passed.
  bool Matches(int class_id, const SlotTest& test) const;
  const Grammar& grammar() const { return grammar_; }

 private:
  int InternClass(const Letter& visible, int rest_key);
  int InternRest(const LetterPart& rest);
  bool SomeLiteralMayMatch(const LetterPart& rest) const;

  const Grammar& grammar_;
  NodeSet visible_;
  std::set<int> literals_;
  std::vector<LetterPart> literal_rests_;
  std::vector<ClassLetter> classes_;
  std::vector<std::unordered_map<int, int>> by_letter_;  // letter id -> rest key -> class
  Alphabet letters_;
  std::vector<LetterPart> rests_;
  std::vector<bool> literal_compatible_;
  Alphabet rest_ids_;
};

}  // namespace tiersmith
