#include "letters/classes.h"

#include <algorithm>

namespace tiersmith {
namespace {

// A rest keeps the class nodes that have something hidden under them; `value` then numbers the
// node among its sisters of the same kind, so that a contour finds its parts again.
void Cut(const LetterPart& part, const NodeSet& visible, const Tree& tree, LetterPart* seen, LetterPart* rest) {
  seen->node = part.node;
  seen->value = part.value;
  seen->links = part.links;
  rest->node = part.node;
  int sister = 0;
  NodeId previous = 0;
  bool hides = false;
  for (const LetterPart& daughter : part.daughters) {
    sister = daughter.node == previous ? sister + 1 : 0;
    previous = daughter.node;
    if (!visible[daughter.node]) {
      rest->daughters.push_back(daughter);
      hides = true;
      continue;
    }
    LetterPart seen_daughter, rest_daughter;
    Cut(daughter, visible, tree, &seen_daughter, &rest_daughter);
    seen->daughters.push_back(std::move(seen_daughter));
    if (rest_daughter.daughters.empty()) continue;
    rest_daughter.value = static_cast<Value>(sister);
    rest->daughters.push_back(std::move(rest_daughter));
  }
  if (hides && tree[part.node].type == TreeNode::Type::kClass) seen->value = 1;
}

void JoinInto(const LetterPart& seen, const LetterPart* rest, const NodeSet& visible, const Tree& tree,
              LetterPart* whole) {
  whole->node = seen.node;
  whole->value = tree[seen.node].type == TreeNode::Type::kClass ? Value{0} : seen.value;
  whole->links = seen.links;
  for (NodeId kind : tree[seen.node].daughters) {
    if (!visible[kind]) {
      if (rest == nullptr) continue;
      for (const LetterPart& hidden : rest->daughters) {
        if (hidden.node == kind) whole->daughters.push_back(hidden);
      }
      continue;
    }
    int sister = 0;
    for (const LetterPart& daughter : seen.daughters) {
      if (daughter.node != kind) continue;
      const LetterPart* under = nullptr;
      if (rest != nullptr) {
        for (const LetterPart& candidate : rest->daughters) {
          if (candidate.node == kind && candidate.value == sister) under = &candidate;
        }
      }
      LetterPart joined;
      JoinInto(daughter, under, visible, tree, &joined);
      whole->daughters.push_back(std::move(joined));
      ++sister;
    }
  }
}

// True if everything in `a` is also in `b` (contours compared as wholes).
bool Within(const LetterPart& a, const LetterPart& b) {
  std::size_t i = 0;
  for (const LetterPart& daughter : a.daughters) {
    while (i < b.daughters.size() && (b.daughters[i].node != daughter.node || b.daughters[i].value != daughter.value)) {
      ++i;
    }
    if (i == b.daughters.size() || !Within(daughter, b.daughters[i])) return false;
    ++i;
  }
  return true;
}

bool Bears(const LetterPart& part, NodeId node) {
  return std::any_of(part.daughters.begin(), part.daughters.end(),
                     [node](const LetterPart& d) { return d.node == node || Bears(d, node); });
}

// The values of `node`, left to right.
void CollectValues(const LetterPart& part, NodeId node, std::vector<Value>* values) {
  for (const LetterPart& daughter : part.daughters) {
    if (daughter.node == node) values->push_back(daughter.value);
    CollectValues(daughter, node, values);
  }
}

bool HasValue(const LetterPart& slot, const FeatureTest& test) {
  const std::vector<Value> values = ValuesFacing(slot, test.node, test.part);
  return std::find(values.begin(), values.end(), test.value) != values.end();
}

bool Passes(const LetterPart& slot, const FeatureTest& test) {
  switch (test.kind) {
    case FeatureTest::Kind::kBears:
      return Bears(slot, test.node);
    case FeatureTest::Kind::kLacks:
      return !Bears(slot, test.node);
    case FeatureTest::Kind::kHasValue:
      return HasValue(slot, test);
    case FeatureTest::Kind::kLacksValue:
      return !HasValue(slot, test);
    case FeatureTest::Kind::kAgrees:
    case FeatureTest::Kind::kDiffers:
    case FeatureTest::Kind::kShared:
    case FeatureTest::Kind::kUnshared:
    case FeatureTest::Kind::kLong:
    case FeatureTest::Kind::kShort:
    case FeatureTest::Kind::kHalfFirst:
    case FeatureTest::Kind::kHalfSecond:
      return true;  // no question to one letter: RuleSpace::Matches and the pattern ask further
  }
  return false;
}

}  // namespace

std::vector<Value> ValuesOf(const LetterPart& part, NodeId node) {
  std::vector<Value> values;
  CollectValues(part, node, &values);
  return values;
}

std::vector<Value> ValuesFacing(const LetterPart& part, NodeId node, FeatureTest::Part which) {
  std::vector<Value> values = ValuesOf(part, node);
  if (values.empty() || which == FeatureTest::Part::kAny) return values;
  return {which == FeatureTest::Part::kFirst ? values.front() : values.back()};
}

LetterClasses::LetterClasses(const Grammar& grammar, NodeSet visible, std::set<int> literals)
    : grammar_(grammar), visible_(std::move(visible)), literals_(std::move(literals)) {
  for (int literal : literals_) {
    const Symbol& symbol = grammar.inventory.symbols[grammar.inventory.literals[literal].symbol];
    for (const FeatureTree* content : {&symbol.full, &symbol.underlying}) {
      LetterPart slot, seen, rest;
      slot.daughters.push_back(PartOf(*content));
      Cut(slot, visible_, grammar.tree, &seen, &rest);
      literal_rests_.push_back(std::move(rest));
    }
  }
}

LetterClasses::Contents LetterClasses::Save() const {
  Contents contents{{}, {literals_.begin(), literals_.end()}, rests_, classes_};
  for (std::size_t node = 0; node < visible_.size(); ++node) {
    if (visible_[node]) contents.visible.push_back(static_cast<NodeId>(node));
  }
  return contents;
}

std::unique_ptr<LetterClasses> LetterClasses::Restore(const Grammar& grammar, const Contents& contents) {
  NodeSet visible(grammar.tree.nodes.size(), false);
  for (NodeId node : contents.visible) visible[node] = true;
  auto classes = std::make_unique<LetterClasses>(grammar, std::move(visible),
                                                 std::set<int>(contents.literals.begin(), contents.literals.end()));
  for (const LetterPart& rest : contents.rests) classes->InternRest(rest);
  for (const ClassLetter& letter : contents.classes) classes->InternClass(letter.visible, letter.rest);
  const bool whole =
      classes->rests_.size() == contents.rests.size() && classes->classes_.size() == contents.classes.size();
  return whole ? std::move(classes) : nullptr;
}

bool LetterClasses::SomeLiteralMayMatch(const LetterPart& rest) const {
  return std::any_of(literal_rests_.begin(), literal_rests_.end(),
                     [&rest](const LetterPart& literal) { return Within(rest, literal); });
}

int LetterClasses::InternRest(const LetterPart& rest) {
  Letter key;
  key.part = rest;
  const int id = rest_ids_.Intern(key);
  if (id == static_cast<int>(rests_.size())) {
    rests_.push_back(rest);
    literal_compatible_.push_back(SomeLiteralMayMatch(rest));
  }
  return id;
}

int LetterClasses::InternClass(const Letter& visible, int rest_key) {
  const int letter = letters_.Intern(visible);
  if (letter == static_cast<int>(by_letter_.size())) by_letter_.emplace_back();
  const auto [it, added] = by_letter_[letter].emplace(rest_key, size());
  if (added) classes_.push_back({visible, rest_key});
  return it->second;
}

LetterClasses::Parts LetterClasses::Classify(const Letter& letter) {
  Parts parts;
  if (letter.kind == FormItem::Kind::kBoundary) {
    parts.rest = InternRest(LetterPart{});
    parts.class_id = InternClass(letter, -1);
    return parts;
  }
  Letter visible = letter;
  LetterPart seen, rest;
  Cut(letter.part, visible_, grammar_.tree, &seen, &rest);
  visible.part = std::move(seen);
  parts.rest = InternRest(rest);
  parts.class_id = InternClass(visible, literal_compatible_[parts.rest] ? parts.rest : -1);
  return parts;
}

Letter LetterClasses::Join(int class_id, int rest) const {
  Letter letter = classes_[class_id].visible;
  if (letter.kind == FormItem::Kind::kBoundary) return letter;
  LetterPart whole;
  JoinInto(classes_[class_id].visible.part, &rests_[rest], visible_, grammar_.tree, &whole);
  letter.part = std::move(whole);
  return letter;
}

int LetterClasses::ClassWithRestOf(int like, const Letter& visible) {
  return InternClass(visible, classes_[like].rest);
}

bool LetterClasses::Matches(int class_id, const SlotTest& test) const {
  const ClassLetter& letter = classes_[class_id];
  if (letter.visible.kind != FormItem::Kind::kSlot) return false;
  const bool empty = !Bears(letter.visible.part, kRootNode);
  switch (test.op) {
    case SlotTest::Op::kEmpty:
      return empty;
    case SlotTest::Op::kAny:
      return !empty;
    case SlotTest::Op::kBundle:
      return !empty && std::all_of(test.bundle.begin(), test.bundle.end(),
                                   [&letter](const FeatureTest& t) { return Passes(letter.visible.part, t); });
    case SlotTest::Op::kLiteral: {
      if (empty || letter.rest < 0) return false;
      return grammar_.inventory.LiteralMatches(test.literal, *RootContent(Join(class_id, letter.rest)));
    }
    case SlotTest::Op::kAnd:
      return std::all_of(test.args.begin(), test.args.end(), [&](const SlotTest& t) { return Matches(class_id, t); });
    case SlotTest::Op::kOr:
      return std::any_of(test.args.begin(), test.args.end(), [&](const SlotTest& t) { return Matches(class_id, t); });
    case SlotTest::Op::kNot:
      return !empty && !Matches(class_id, test.args[0]);
  }
  return false;
}

}  // namespace tiersmith
