// A small tree and inventory, and short notations for forms and rules, so that tests need no .tier file.
//
// Forms: symbols between spaces, boundaries `- = # ‖`, `_` an empty slot. In braces what differs from the symbol:
//   "a n{Place:1} - t{Place:1} a"    n and t hold one Place (the content is that of the first; the others lose theirs)
//   "a n{no Place} p"   "d{-voice}"   "k{+round}"   "i{root:1} i{root:1}" one root on two slots
//   "t{cont:1} c{cont/2:1}"          the second cont of c is the cont of t
//   "‖@stem a -@suffix@strong t"     the tags of the morphemes that boundaries open
// Patterns: "A:[+nasal Place] - [no voice] ... B:[] ...Place C:[]", groups "( [+syll] )" with a quantity: "( [] )0-9",
//   "A" alone is a label without a test (in unless), "empty" a slot without a root, "not[..]" what is not so,
//   "[..]|[..]" either, "B:#" a labelled boundary, "&".
// Bundles: besides values and nodes "αback -αback βhigh", "shared Place", "shared> Place" (with a slot to the right),
//   "unshared< Place", "long short half1 half2", "begins -cont", "ends +cont". Members: "A.-cont", "A.cont/first", "A.cont/last".
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
// As above, as a test of a slot; "" is any slot.
SlotTest BundleOf(const Grammar& grammar, const std::string& text);
std::vector<Setting> SettingsOf(const Grammar& grammar, const std::string& text);
FeatureTree ContentOfSymbol(const Grammar& grammar, const std::string& symbol);

Form FormOf(const Grammar& grammar, const std::string& text);

// Changes, conditions and tags are those of the clause begun last.
class RuleBuilder {
 public:
  RuleBuilder(const Grammar& grammar, const std::string& where);
  RuleBuilder& Otherwise(const std::string& where);
  RuleBuilder& Unless(const std::string& pattern);
  RuleBuilder& If(const std::string& condition);  // "A.Place = B.Place", "A.Place ≠ B.Place", "is", "isnot"
  RuleBuilder& Only(const std::string& tag);      // "stem", "A in stem", "word stem"
  RuleBuilder& Except(const std::string& tag);
  RuleBuilder& Spread(const std::string& path, const std::string& target);  // "A.Place", "B"
  RuleBuilder& Delink(const std::string& path);
  RuleBuilder& Set(const std::string& label, const std::string& bundle);
  RuleBuilder& Fill(const std::string& label, const std::string& bundle);
  RuleBuilder& SetAs(const std::string& target, const std::string& source);  // "A.Place", "B.Place"
  RuleBuilder& FillAs(const std::string& target, const std::string& source);
  RuleBuilder& SetLiteral(const std::string& label, const std::string& symbol);  // "a", "aː"
  RuleBuilder& Insert(const std::string& symbol, bool before, const std::string& host, const std::string& label = "");
  RuleBuilder& Delete(const std::string& label);
  RuleBuilder& Lengthen(const std::string& label);
  RuleBuilder& Shorten(const std::string& label);
  RuleBuilder& Merge(const std::string& source, const std::string& target);  // "A.Place", "B.Place"
  RuleBuilder& Mode(Rule::Mode mode);
  RuleBuilder& Within(Domain domain);
  RuleBuilder& Prefer(Rule::Prefer side);
  RuleBuilder& Preserving();
  RuleBuilder& SharingBlocked();
  RuleBuilder& Optional(double probability, bool by_word = false);
  operator const Rule&() const { return rule_; }  // NOLINT: reads as the rule
  const Rule& rule() const { return rule_; }

 private:
  struct Path {
    int label;
    NodeId node;
    Member member;
  };
  Clause& clause() { return rule_.otherwise.empty() ? rule_ : rule_.otherwise.back(); }
  Pattern PatternOf(const std::string& text);
  int LabelOf(const std::string& name, Clause::LabelKind kind = Clause::LabelKind::kSlot);
  Path PathOf(const std::string& text);
  void AddTag(const std::string& text, bool only);
  void Literal(const std::string& symbol, Change* change);
  Change& Add(Change::Op op, const std::string& target);

  const Grammar& grammar_;
  Rule rule_;
};

}  // namespace tiersmith::testing
