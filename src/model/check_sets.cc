// Bundles, sets, classes and literals -> tests of one slot; bundles that give content -> settings.
//
// Example: `[Coronal +strident]` is two tests, "bears Coronal" and "bears strident with value +"; as content
// it is a Coronal and one +strident. Does not handle: which edge of a contour a neighbour of the changed item is
// matched by (check_rules.cc). Tested by tests/unit/model/check_test.cc.
#include <algorithm>

#include "model/check.h"
#include "model/normal_text.h"

namespace tiersmith {

std::vector<std::string> Checker::ClassNames() const {
  std::vector<std::string> names;
  for (const auto& [name, declared] : classes_) names.push_back(name);
  return names;
}

// ---- features ---------------------------------------------------------------------------------------

std::optional<Value> Checker::ValueOf(const TreeNode& node, const syntax::Name& value) {
  const auto found = std::find(node.values.begin(), node.values.end(), value.text);
  if (found != node.values.end()) return static_cast<Value>(found - node.values.begin());
  std::string all;
  for (const std::string& v : node.values) all += (all.empty() ? "" : " ") + v;
  Error(Kind::kBadValue, value.span, "'" + node.name + "' has no value '" + value.text + "'", "its values are: " + all);
  return std::nullopt;
}

namespace {

std::string Signed(const syntax::Feat& feat) {
  return (feat.kind == syntax::Feat::Kind::kPlus ? "+" : "-") + feat.name.text;
}

// How a value of this node is written.
std::string HowToWrite(const TreeNode& node) {
  switch (node.type) {
    case TreeNode::Type::kClass:
      return "it is a class node: write `" + node.name + "` or `no " + node.name + "`";
    case TreeNode::Type::kBare:
      return "it is there or not: write `" + node.name + "` or `no " + node.name + "`";
    case TreeNode::Type::kBinary:
      return "it has two values: write `+" + node.name + "` or `-" + node.name + "`";
    case TreeNode::Type::kMany:
      return "write `" + node.name + ":" + (node.values.empty() ? "x" : node.values[0]) + "`";
  }
  return "";
}

}  // namespace

bool Checker::MayBeContour(NodeId node) const {
  for (; node > kRootNode; node = grammar_.tree[node].mother) {
    if (grammar_.tree[node].max > 1) return true;
  }
  return false;
}

bool Checker::AddTests(const syntax::Feat& feat, RuleContext* context, std::vector<FeatureTest>* tests) {
  using Feat = syntax::Feat;
  const auto of_length = [&](FeatureTest::Kind kind) {
    tests->push_back({kind, kRootNode});
    return true;
  };
  if (feat.kind == Feat::Kind::kLong) return of_length(FeatureTest::Kind::kLong);
  if (feat.kind == Feat::Kind::kShort) return of_length(FeatureTest::Kind::kShort);
  if (feat.kind == Feat::Kind::kHalfFirst) return of_length(FeatureTest::Kind::kHalfFirst);
  if (feat.kind == Feat::Kind::kHalfSecond) return of_length(FeatureTest::Kind::kHalfSecond);

  const std::optional<NodeId> node = NodeOf(feat.name, Kind::kUnknownFeature);
  if (!node) return false;
  switch (feat.kind) {
    case Feat::Kind::kBears:
      if (feat.edge != Feat::Edge::kUnsaid) {
        Error(Kind::kBadValue, feat.span, "'" + feat.name.text + "' names no value to begin or end with",
              HowToWrite(grammar_.tree[*node]));
        return false;
      }
      tests->push_back({FeatureTest::Kind::kBears, *node});
      return true;
    case Feat::Kind::kNo:
      if (!feat.values.empty()) return AddValueTest(feat, *node, tests);
      tests->push_back({FeatureTest::Kind::kLacks, *node});
      return true;
    case Feat::Kind::kPlus:
    case Feat::Kind::kMinus:
    case Feat::Kind::kValue:
      return AddValueTest(feat, *node, tests);
    case Feat::Kind::kAgrees:
    case Feat::Kind::kDiffers: {
      const std::optional<int> variable = VariableOf(feat, *node, context);
      if (!variable) return false;
      FeatureTest test;
      test.kind = feat.kind == Feat::Kind::kAgrees ? FeatureTest::Kind::kAgrees : FeatureTest::Kind::kDiffers;
      test.node = *node;
      test.variable = *variable;
      tests->push_back(test);
      return true;
    }
    case Feat::Kind::kShared:
    case Feat::Kind::kUnshared: {
      if (*node == kSlotNode) {
        Error(Kind::kBadValue, feat.span, "a slot is borne by nothing, so it is never shared",
              "name root or a node under it");
        return false;
      }
      FeatureTest test;
      test.kind = feat.kind == Feat::Kind::kShared ? FeatureTest::Kind::kShared : FeatureTest::Kind::kUnshared;
      test.node = *node;
      if (feat.side == Feat::Side::kLeftward) test.side = FeatureTest::Side::kLeft;
      if (feat.side == Feat::Side::kRightward) test.side = FeatureTest::Side::kRight;
      tests->push_back(test);
      return true;
    }
    case Feat::Kind::kLong:
    case Feat::Kind::kShort:
    case Feat::Kind::kHalfFirst:
    case Feat::Kind::kHalfSecond:
      break;
  }
  return false;
}

// +f, -f, Node:value, no Node:value
bool Checker::AddValueTest(const syntax::Feat& feat, NodeId node, std::vector<FeatureTest>* tests) {
  const TreeNode& kind = grammar_.tree[node];
  FeatureTest test;
  test.kind = feat.kind == syntax::Feat::Kind::kNo ? FeatureTest::Kind::kLacksValue : FeatureTest::Kind::kHasValue;
  test.node = node;
  if (MayBeContour(node) && feat.edge != syntax::Feat::Edge::kUnsaid) {
    const bool first = feat.edge == syntax::Feat::Edge::kBegins;
    test.part = first ? FeatureTest::Part::kFirst : FeatureTest::Part::kLast;
  }
  if (feat.kind == syntax::Feat::Kind::kPlus || feat.kind == syntax::Feat::Kind::kMinus) {
    if (kind.type != TreeNode::Type::kBinary) {
      Error(Kind::kBadValue, feat.span, "'" + kind.name + "' cannot be " + Signed(feat), HowToWrite(kind));
      return false;
    }
    test.value = static_cast<Value>(feat.kind == syntax::Feat::Kind::kPlus);
    tests->push_back(test);
    return true;
  }
  if (kind.type != TreeNode::Type::kMany) {
    Error(Kind::kBadValue, feat.span, "'" + kind.name + "' has no values to name after a colon", HowToWrite(kind));
    return false;
  }
  if (feat.values.size() != 1) return AddListTest(feat, node, tests);
  const std::optional<Value> value = ValueOf(kind, feat.values[0]);
  if (!value) return false;
  test.value = *value;
  tests->push_back(test);
  return true;
}

// Tone:(H L): just these, in this order. Told by the first, the last and which values are there; where that does not
// tell (longer contours), it is refused.
bool Checker::AddListTest(const syntax::Feat& feat, NodeId node, std::vector<FeatureTest>* tests) {
  const TreeNode& kind = grammar_.tree[node];
  if (feat.kind == syntax::Feat::Kind::kNo || feat.edge != syntax::Feat::Edge::kUnsaid) {
    Error(Kind::kBadValue, feat.span, "a list of values is all that '" + kind.name + "' has there",
          "name one value: `" + kind.name + ":" + kind.values[0] + "`, or write `not [" + kind.name + ":(..)]`");
    return false;
  }
  std::vector<Value> values;
  for (const syntax::Name& name : feat.values) {
    const std::optional<Value> value = ValueOf(kind, name);
    if (!value) return false;
    values.push_back(*value);
  }
  const auto most = static_cast<std::size_t>(kind.max);
  if (std::adjacent_find(values.begin(), values.end()) != values.end()) {
    Error(Kind::kBadValue, feat.span, "a contour cannot have one value twice side by side", "take one out");
    return false;
  }
  if (values.size() > most) {
    Error(Kind::kBadValue, feat.span, "one mother holds at most " + std::to_string(most) + " of '" + kind.name + "'",
          "name no more values than that");
    return false;
  }
  if (most > 3) {
    Error(Kind::kNotSupportedYet, feat.span,
          "a list of values of '" + kind.name + "', of which one mother may hold " + std::to_string(most) +
              ", is not supported by this release",
          "say how it begins and ends: `begins " + kind.name + ":" + kind.values[values.front()] + " ends " +
              kind.name + ":" + kind.values[values.back()] + "`");
    return false;
  }
  const auto add = [&](FeatureTest::Kind test, Value value, FeatureTest::Part part) {
    tests->push_back({test, node, value, part});
  };
  add(FeatureTest::Kind::kHasValue, values.front(), FeatureTest::Part::kFirst);
  for (std::size_t i = 1; i + 1 < values.size(); ++i)
    add(FeatureTest::Kind::kHasValue, values[i], FeatureTest::Part::kAny);
  add(FeatureTest::Kind::kHasValue, values.back(), FeatureTest::Part::kLast);
  for (std::size_t v = 0; v < kind.values.size() && values.size() < most; ++v) {
    const Value value = static_cast<Value>(v);
    if (std::find(values.begin(), values.end(), value) == values.end())
      add(FeatureTest::Kind::kLacksValue, value, FeatureTest::Part::kAny);
  }
  return true;
}

// ---- variables --------------------------------------------------------------------------------------

namespace {

// May one variable hold a value of either? + is there, - is not there.
bool SameValues(const Tree& tree, NodeId a, NodeId b) {
  const auto two_ways = [&](NodeId node) {
    return tree[node].type == TreeNode::Type::kBinary || tree[node].type == TreeNode::Type::kBare;
  };
  if (a == b || (two_ways(a) && two_ways(b))) return true;
  return tree[a].type == TreeNode::Type::kMany && tree[b].type == TreeNode::Type::kMany &&
         tree[a].values == tree[b].values;
}

}  // namespace

// The variable whose value `set` and `fill` give: the `where` must say what it is.
std::optional<int> Checker::GivenVariable(const syntax::Feat& feat, NodeId node, RuleContext* context) {
  const std::string& name = feat.variable.text;
  if (context == nullptr) {
    Error(Kind::kBadValue, feat.span, "'" + name + "' gives no content here",
          "say the value; in a rule, `set` may give it afterwards: set X [" + name + grammar_.tree[node].name + "]");
    return std::nullopt;
  }
  if (context->broken) return std::nullopt;
  const std::vector<Variable>& variables = *context->variables;
  const auto known =
      std::find_if(variables.begin(), variables.end(), [&](const Variable& variable) { return variable.name == name; });
  if (known == variables.end() || !known->bound) {
    Error(Kind::kBadRule, feat.span,
          known == variables.end() ? "'" + name + "' has no value: it stands nowhere in the `where`"
                                   : "'" + name +
                                         "' may have no value: it stands only in `unless` or in a part of the "
                                         "`where` that may be left out or repeated",
          "write it in the bundle of an item that every match has: [" + name + grammar_.tree[node].name + "]");
    return std::nullopt;
  }
  return VariableOf(feat, node, context);
}

std::optional<int> Checker::VariableOf(const syntax::Feat& feat, NodeId node, RuleContext* context) {
  const TreeNode& kind = grammar_.tree[node];
  const std::string& name = feat.variable.text;
  const auto bad = [&](Kind what, const std::string& message, const std::string& remedy) {
    Error(what, feat.span, message, remedy);
    return std::nullopt;
  };
  if (context == nullptr || context->variables == nullptr || context->alternative) {
    return bad(Kind::kBadRule, "'" + name + "' means nothing here: by it the items of a rule agree",
               "write it in a bundle of the rule that is not under `or`, `not` or alternatives");
  }
  if (node == kSlotNode)
    return bad(Kind::kBadValue, "slots have no content of their own", "name root or a node under it");
  if (feat.kind == syntax::Feat::Kind::kDiffers && kind.type != TreeNode::Type::kBinary) {
    return bad(Kind::kBadValue, "'" + kind.name + "' has no opposite: only what is + or - has one",
               "write " + name + kind.name + ", or say the value");
  }
  std::vector<Variable>& variables = *context->variables;
  auto found =
      std::find_if(variables.begin(), variables.end(), [&](const Variable& variable) { return variable.name == name; });
  if (found == variables.end()) {
    Variable variable;
    variable.name = name;
    variable.node = node;
    variable.span = feat.span;
    found = variables.insert(found, variable);
  }
  if (!SameValues(grammar_.tree, found->node, node)) {
    diagnostics_.Add(
        {Kind::kBadValue,
         Severity::kError,
         feat.span,
         "'" + name + "' cannot be a value of both '" + grammar_.tree[found->node].name + "' and '" + kind.name + "'",
         "use another of α β γ δ for one of them",
         {{found->span, "it is a value of '" + grammar_.tree[found->node].name + "' here"}}});
    return std::nullopt;
  }
  ++found->places;
  if (context->repeated) found->several = true;
  if (!context->repeated && !context->in_unless) found->bound = true;
  return static_cast<int>(found - variables.begin());
}

// ---- bundles ----------------------------------------------------------------------------------------

std::optional<SlotTest> Checker::ResolveBundle(const syntax::Bundle& bundle, RuleContext* context) {
  SlotTest test;
  if (bundle.feats.empty()) return test;
  test.op = SlotTest::Op::kBundle;
  bool good = true;
  for (const syntax::Feat& feat : bundle.feats) good = AddTests(feat, context, &test.bundle) && good;
  if (!good) return std::nullopt;
  WarnContradictions(test.bundle, bundle.span);
  return test;
}

namespace {

using Test = FeatureTest::Kind;

// What a test asks for, as it is written.
std::string Said(const Tree& tree, const FeatureTest& test) {
  const std::string& name = tree[test.node].name;
  const auto on_side = [&](const std::string& word) {
    switch (test.side) {
      case FeatureTest::Side::kEither:
        return word + " " + name;
      case FeatureTest::Side::kLeft:
        return word + " " + name + " leftward";
      case FeatureTest::Side::kRight:
        return word + " " + name + " rightward";
    }
    return word;
  };
  switch (test.kind) {
    case Test::kBears:
      return name;
    case Test::kLacks:
      return "no " + name;
    case Test::kHasValue:
      return tree.ValueName(test.node, test.value);
    case Test::kLacksValue:
      return "no " + tree.ValueName(test.node, test.value);
    case Test::kAgrees:
      return "agreement in " + name;
    case Test::kDiffers:
      return "difference in " + name;
    case Test::kShared:
      return on_side("shared");
    case Test::kUnshared:
      return on_side("unshared");
    case Test::kLong:
      return "long";
    case Test::kShort:
      return "short";
    case Test::kHalfFirst:
      return "half first";
    case Test::kHalfSecond:
      return "half second";
  }
  return "";
}

// Only a slot that bears the node passes.
bool AsksFor(const Tree& tree, const FeatureTest& test) {
  switch (test.kind) {
    case Test::kBears:
    case Test::kHasValue:
    case Test::kDiffers:
    case Test::kShared:
    case Test::kUnshared:
      return true;
    case Test::kAgrees:  // a bare feature agrees in not being there, too
      return tree[test.node].type != TreeNode::Type::kBare;
    case Test::kLacks:
    case Test::kLacksValue:
    case Test::kLong:
    case Test::kShort:
    case Test::kHalfFirst:
    case Test::kHalfSecond:
      return false;
  }
  return false;
}

// Can no slot pass both? Where `contour`, a slot may bear two values of their node.
bool Exclude(const Tree& tree, const FeatureTest& a, const FeatureTest& b, bool contour) {
  const bool same_part = !contour || (a.part == b.part && a.part != FeatureTest::Part::kAny);
  const bool same_node = a.node == b.node;
  switch (a.kind) {
    case Test::kLacks:
      return AsksFor(tree, b) && tree.Dominates(a.node, b.node);
    case Test::kHasValue:
      if (b.kind == Test::kLacksValue) {
        return same_node && a.value == b.value && (b.part == FeatureTest::Part::kAny || b.part == a.part);
      }
      return b.kind == Test::kHasValue && same_node && a.value != b.value && same_part;
    case Test::kAgrees:
      return b.kind == Test::kDiffers && same_node && a.variable == b.variable && same_part;
    case Test::kUnshared:
      return b.kind == Test::kShared && same_node && (a.side == FeatureTest::Side::kEither || a.side == b.side);
    case Test::kShort:
      return b.kind == Test::kLong || b.kind == Test::kHalfFirst || b.kind == Test::kHalfSecond;
    case Test::kHalfFirst:
      return b.kind == Test::kHalfSecond;
    case Test::kBears:
    case Test::kLacksValue:
    case Test::kDiffers:
    case Test::kShared:
    case Test::kLong:
    case Test::kHalfSecond:
      return false;
  }
  return false;
}

}  // namespace

void Checker::WarnContradictions(const std::vector<FeatureTest>& tests, Span span) {
  for (const FeatureTest& a : tests) {
    for (const FeatureTest& b : tests) {
      if (!Exclude(grammar_.tree, a, b, MayBeContour(a.node))) continue;
      const bool in_order = &a < &b;
      diagnostics_.Warning(Kind::kNeverApplies, span,
                           "no segment matches this bundle: it asks for '" + Said(grammar_.tree, in_order ? a : b) +
                               "' and '" + Said(grammar_.tree, in_order ? b : a) + "'",
                           "take one of the two out");
      return;
    }
  }
}

// ---- content ----------------------------------------------------------------------------------------

bool Checker::AddSetting(const syntax::Feat& feat, bool continues, RuleContext* context,
                         std::vector<Setting>* settings) {
  using Feat = syntax::Feat;
  const bool of_form =
      feat.kind != Feat::Kind::kAgrees && feat.kind != Feat::Kind::kDiffers && feat.kind > Feat::Kind::kValue;
  if (of_form || feat.edge != Feat::Edge::kUnsaid) {
    Error(Kind::kBadValue, feat.span, "this asks something of a slot; it is no content to give",
          of_form ? "length and sharing are made by `lengthen`, `shorten`, `spread` and `delink`"
                  : "write the values of a contour side by side: [-f +f]");
    return false;
  }
  const std::optional<NodeId> node = NodeOf(feat.name, Kind::kUnknownFeature);
  if (!node) return false;
  const TreeNode& kind = grammar_.tree[*node];
  if (*node <= kRootNode) {
    Error(Kind::kBadValue, feat.span, "'" + kind.name + "' is no content to give", "name the features under it");
    return false;
  }
  if (IsSlotBorne(*node) && context == nullptr) {
    Error(Kind::kNotSupportedYet, feat.span,
          "'" + kind.name + "' hangs from the slot; giving it to a slot is not supported by this release",
          "hang it under root, or leave it out");
    return false;
  }
  Setting asked;
  asked.node = *node;
  std::vector<Value>& values = asked.values;
  switch (feat.kind) {
    case syntax::Feat::Kind::kPlus:
    case syntax::Feat::Kind::kMinus:
      if (kind.type != TreeNode::Type::kBinary) {
        Error(Kind::kBadValue, feat.span, "'" + kind.name + "' cannot be " + Signed(feat), HowToWrite(kind));
        return false;
      }
      values = {static_cast<Value>(feat.kind == syntax::Feat::Kind::kPlus)};
      break;
    case syntax::Feat::Kind::kBears:
      if (kind.type == TreeNode::Type::kBinary || kind.type == TreeNode::Type::kMany) {
        Error(Kind::kBadValue, feat.span, "'" + kind.name + "' needs a value", HowToWrite(kind));
        return false;
      }
      values = {0};
      break;
    case syntax::Feat::Kind::kNo:
      if (!feat.values.empty()) {
        Error(Kind::kBadValue, feat.span, "`no` takes a node away with all its values", "write `no " + kind.name + "`");
        return false;
      }
      break;
    case syntax::Feat::Kind::kValue:
      if (kind.type != TreeNode::Type::kMany) {
        Error(Kind::kBadValue, feat.span, "'" + kind.name + "' has no values to name after a colon", HowToWrite(kind));
        return false;
      }
      for (const syntax::Name& name : feat.values) {
        const std::optional<Value> value = ValueOf(kind, name);
        if (!value) return false;
        values.push_back(*value);
      }
      break;
    case syntax::Feat::Kind::kAgrees:
    case syntax::Feat::Kind::kDiffers: {
      const std::optional<int> variable = GivenVariable(feat, *node, context);
      if (!variable) return false;
      asked.variable = *variable;
      asked.differs = feat.kind == syntax::Feat::Kind::kDiffers;
      break;
    }
    case syntax::Feat::Kind::kShared:
    case syntax::Feat::Kind::kUnshared:
    case syntax::Feat::Kind::kLong:
    case syntax::Feat::Kind::kShort:
    case syntax::Feat::Kind::kHalfFirst:
    case syntax::Feat::Kind::kHalfSecond:
      return false;  // said above
  }
  auto place = std::find_if(settings->begin(), settings->end(), [&](const Setting& s) { return s.node == *node; });
  if (place == settings->end()) {
    place = settings->insert(place, std::move(asked));
  } else if (!continues || values.empty() || place->values.empty() || kind.type == TreeNode::Type::kClass) {
    Error(Kind::kBadValue, feat.span, "'" + kind.name + "' is given twice in one bundle",
          "take one out; the values of a contour stand side by side");
    return false;
  } else {
    place->values.insert(place->values.end(), values.begin(), values.end());
  }
  const Setting& now = *place;
  for (std::size_t i = 1; i < now.values.size(); ++i) {
    if (now.values[i] != now.values[i - 1]) continue;
    Error(Kind::kBadValue, feat.span,
          "a contour cannot have '" + grammar_.tree.ValueName(*node, now.values[i]) + "' twice side by side",
          "take one out");
    return false;
  }
  if (static_cast<int>(now.values.size()) > kind.max) {
    Error(Kind::kBadValue, feat.span,
          "one mother holds at most " + std::to_string(kind.max) + " of '" + kind.name + "'",
          "write ×" + std::to_string(now.values.size()) + " after " + kind.name + " in `tree`, or take a value out");
    return false;
  }
  return true;
}

bool Checker::ResolveSettings(const syntax::Bundle& bundle, RuleContext* context, std::vector<Setting>* settings) {
  bool good = true;
  for (std::size_t i = 0; i < bundle.feats.size(); ++i) {
    const bool continues = i > 0 && bundle.feats[i - 1].name.text == bundle.feats[i].name.text;
    good = AddSetting(bundle.feats[i], continues, context, settings) && good;
  }
  return good;
}

// ---- sets -------------------------------------------------------------------------------------------

SlotTest Checker::LiteralTest(int symbol) {
  std::vector<Literal>& literals = grammar_.inventory.literals;
  const auto found =
      std::find_if(literals.begin(), literals.end(), [&](const Literal& l) { return l.symbol == symbol; });
  SlotTest test;
  test.op = SlotTest::Op::kLiteral;
  test.literal = static_cast<int>(found - literals.begin());
  if (found == literals.end()) literals.push_back({symbol});
  return test;
}

std::optional<std::vector<int>> Checker::SymbolsOf(const syntax::FormText& literal, bool* is_long) {
  if (literal.spelled) {
    Error(Kind::kNotSupportedYet, literal.span, "spelled forms ⟨..⟩ are not supported by this release",
          "write the symbols: /../");
    return std::nullopt;
  }
  NormalText text;
  text.Assign(literal.raw);
  std::vector<int> symbols;
  for (std::size_t i = 0; i < text.units.size();) {
    const SymbolTrie::Match match = trie_.Longest(text.units.data(), i, text.units.size());
    if (match.symbol >= 0) {
      symbols.push_back(match.symbol);
      i = match.end;
      continue;
    }
    const NormalText::Unit& unit = text.units[i];
    if (is_long != nullptr && !*is_long && unit.code == kLengthSign && symbols.size() == 1) {
      *is_long = true;
      ++i;
      continue;
    }
    Span span = literal.span;
    span.begin += unit.begin;
    span.end = literal.span.begin + unit.end;
    const std::string shown = literal.raw.substr(unit.begin, unit.end - unit.begin);
    if (unit.code == kLengthSign && !symbols.empty()) {
      Error(Kind::kBadRule, span, "a literal stands for one slot each symbol; ː writes a second slot of the same root",
            "ask for length in a bundle: {/a/ and [long]}; a literal accepts a root however long it is");
    } else if (shown == "-" || shown == "=" || shown == "#" || shown == " " || shown == "‖") {
      Error(Kind::kBadRule, span, "a boundary does not stand inside a literal",
            "write it as an item of its own: /a/ - /b/");
    } else if (!SaidOften("symbol " + shown)) {
      Error(Kind::kUnknownSymbol, span, "'" + shown + "' is no symbol of the grammar",
            Or(DidYouMean(literal.raw, SymbolNames()), "list it in `segments`"));
    }
    return std::nullopt;
  }
  if (symbols.empty()) {
    Error(Kind::kBadRule, literal.span, "an empty literal matches nothing",
          "write a symbol, or `empty` for a slot without a root");
    return std::nullopt;
  }
  return symbols;
}

std::optional<SlotTest> Checker::ResolveClass(const syntax::Name& name) {
  const auto done = resolved_classes_.find(name.text);
  if (done != resolved_classes_.end()) return done->second;
  if (failed_classes_.count(name.text) != 0) return std::nullopt;  // said already
  const auto found = classes_.find(name.text);
  if (found == classes_.end()) {
    if (SaidOften("class " + name.text)) return std::nullopt;
    std::string remedy = DidYouMean(name.text, ClassNames());
    if (patterns_.count(name.text) != 0) remedy = "it is a named pattern, which stands only as an item of its own; ";
    if (grammar_.tree.Find(name.text)) remedy = "a feature stands in brackets: [" + name.text + "]; ";
    if (grammar_.inventory.Find(name.text)) remedy = "a symbol stands between slashes: /" + name.text + "/; ";
    Error(Kind::kUnknownClass, name.span, "there is no class '" + name.text + "'",
          Or(remedy, "declare it: `class " + name.text + " = [..]`"));
    return std::nullopt;
  }
  if (std::find(resolving_.begin(), resolving_.end(), name.text) != resolving_.end()) {
    Error(Kind::kBadRule, name.span, "class '" + name.text + "' is told by itself", "say it by features");
    failed_classes_.insert(name.text);
    return std::nullopt;
  }
  resolving_.push_back(name.text);
  const std::optional<SlotTest> test = ResolveSet(found->second->set);
  resolving_.pop_back();
  if (test) {
    resolved_classes_[name.text] = *test;
  } else {
    failed_classes_.insert(name.text);
  }
  return test;
}

namespace {

// Does it ask what only a slot of a form can answer?
bool AsksForm(const SlotTest& test) {
  return std::any_of(test.args.begin(), test.args.end(), AsksForm) ||
         std::any_of(test.bundle.begin(), test.bundle.end(), [](const FeatureTest& feature) {
           switch (feature.kind) {
             case Test::kBears:
             case Test::kLacks:
             case Test::kHasValue:
             case Test::kLacksValue:
               return feature.part != FeatureTest::Part::kAny;
             case Test::kAgrees:
             case Test::kDiffers:
             case Test::kShared:
             case Test::kUnshared:
             case Test::kLong:
             case Test::kShort:
             case Test::kHalfFirst:
             case Test::kHalfSecond:
               return true;
           }
           return false;
         });
}

}  // namespace

std::optional<SlotTest> Checker::ResolveSymbolSet(const syntax::Set& set) {
  std::optional<SlotTest> test = ResolveSet(set);
  if (!test || !AsksForm(*test)) return test;
  Error(Kind::kBadValue, set.span,
        "a symbol is neither long nor shared, and is told by all of a contour: only rules can ask this",
        "name features that it bears or lacks");
  return std::nullopt;
}

std::optional<SlotTest> Checker::ResolveSet(const syntax::Set& set, RuleContext* context) {
  switch (set.kind) {
    case syntax::Set::Kind::kBundle:
      return ResolveBundle(set.bundle, context);
    case syntax::Set::Kind::kLiteral: {
      const std::optional<std::vector<int>> symbols = SymbolsOf(set.literal);
      if (!symbols) return std::nullopt;
      if (symbols->size() != 1) {
        Error(Kind::kBadRule, set.literal.span,
              "/" + set.literal.raw + "/ is " + std::to_string(symbols->size()) + " symbols; one is wanted here",
              "list it as one symbol in `segments`, or write the symbols one by one");
        return std::nullopt;
      }
      return LiteralTest((*symbols)[0]);
    }
    case syntax::Set::Kind::kClass:
      return ResolveClass(set.name);
    case syntax::Set::Kind::kEmpty: {
      SlotTest test;
      test.op = SlotTest::Op::kEmpty;
      return test;
    }
    case syntax::Set::Kind::kOr:
    case syntax::Set::Kind::kAnd:
    case syntax::Set::Kind::kButNot:
    case syntax::Set::Kind::kNot:
      break;
  }
  std::vector<SlotTest> args;
  bool good = true;
  for (const syntax::Set& arg : set.args) {
    // `A and B`, `A but not B`: all of A must hold.
    const bool must_hold =
        set.kind == syntax::Set::Kind::kAnd || (set.kind == syntax::Set::Kind::kButNot && &arg == &set.args.front());
    std::optional<SlotTest> test = ResolveSet(arg, must_hold ? context : nullptr);
    good = good && test;
    if (test) args.push_back(std::move(*test));
  }
  if (!good || args.empty()) return std::nullopt;
  const auto negated = [](SlotTest inner) {
    SlotTest outer;
    outer.op = SlotTest::Op::kNot;
    outer.args.push_back(std::move(inner));
    return outer;
  };
  SlotTest test;
  if (set.kind == syntax::Set::Kind::kNot) return negated(std::move(args[0]));
  test.op = set.kind == syntax::Set::Kind::kOr ? SlotTest::Op::kOr : SlotTest::Op::kAnd;
  for (std::size_t i = 0; i < args.size(); ++i) {
    const bool barred = set.kind == syntax::Set::Kind::kButNot && i > 0;
    test.args.push_back(barred ? negated(std::move(args[i])) : std::move(args[i]));
  }
  return test;
}

void Checker::CheckClasses() {
  for (const auto& [name, declared] : classes_) ResolveClass(syntax::Name{name, declared->name.span});
}

}  // namespace tiersmith
