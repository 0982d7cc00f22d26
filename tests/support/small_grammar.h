// A small tree and inventory, and short notations for forms and rules, so that tests need no .tier file.
//
// Forms: symbols between spaces, boundaries `- = # ‖`, `_` an empty slot. In braces what differs from the symbol:
//   "a n{Place:1} - t{Place:1} a"    n and t hold one Place (the content is that of the first; the others lose theirs)
//   "a n{no Place} p"   "d{-voice}"   "k{+round}"   "i{root:1} i{root:1}" one root on two slots
//   "t{cont:1} c{cont/2:1}"          the second cont of c is the cont of t
// Patterns: "A:[+nasal Place] - [no voice] ... B:[] ...Place C:[]", groups "( [+syll] )" with a quantity: "( [] )0-9",
//   "A" alone is a label without a test (in unless), "empty" a slot without a root, "not[..]" what is not so,
//   "[..]|[..]" either.
// Everything is invented for the tests.
#pragma once

#include <string>
#include <vector>

#include "model/grammar.h"

namespace tiersmith::testing {

// root > ±cons ±son ±syll ±nasal ±cont ×2 in [-son], Laryngeal > ±voice,
// Place > •Labial > round, •Coronal > ±ant, •Dorsal > ±high ±back; p t k b d g m n ŋ s z c(-cont +cont)
// i u a E(a vowel without Place), archisegments N(no Place) T(t, no voice) I A(i, a, no back). Nothing is omitted.
Grammar SmallGrammar();
// The same and more: slot > Tone: H L M ×3 floating, and a class node that may be a contour and may float,
// root > Cplace ×2 floating > ±grave, •Lip > lip2. For forms, not for rules.
Grammar WideGrammar();

NodeId NodeOf(const Grammar& grammar, const std::string& name);
// "+f -f f no f", between spaces, as a test of a slot; "" is any slot.
SlotTest BundleOf(const Grammar& grammar, const std::string& text);
std::vector<Setting> SettingsOf(const Grammar& grammar, const std::string& text);
FeatureTree ContentOfSymbol(const Grammar& grammar, const std::string& symbol);

Form FormOf(const Grammar& grammar, const std::string& text);

class RuleBuilder {
 public:
  RuleBuilder(const Grammar& grammar, const std::string& where);
  RuleBuilder& Unless(const std::string& pattern);
  RuleBuilder& Spread(const std::string& path, const std::string& target);  // "A.Place", "B"
  RuleBuilder& Delink(const std::string& path);
  RuleBuilder& Set(const std::string& label, const std::string& bundle);
  RuleBuilder& Fill(const std::string& label, const std::string& bundle);
  RuleBuilder& Insert(const std::string& symbol, bool before, const std::string& host);
  RuleBuilder& Delete(const std::string& label);
  RuleBuilder& Mode(Rule::Mode mode);
  operator const Rule&() const { return rule_; }  // NOLINT: reads as the rule
  const Rule& rule() const { return rule_; }

 private:
  Pattern PatternOf(const std::string& text);
  int LabelOf(const std::string& name);
  Change& Add(Change::Op op, const std::string& target);

  const Grammar& grammar_;
  Rule rule_;
};

}  // namespace tiersmith::testing
