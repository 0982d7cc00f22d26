// Bundles, sets, classes and literals -> tests of one slot; bundles that give content -> settings.
//
// Example: `[Coronal +strident]` is two tests, "bears Coronal" and "bears strident with value +"; as content
// it is a Coronal and one +strident. Does not handle: αf, shared, long and other parts of bundles that the
// parser keeps as not supported. Tested by tests/unit/model/check_test.cc.
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

std::optional<FeatureTest> Checker::ResolveFeature(const syntax::Feat& feat) {
  const std::optional<NodeId> node = NodeOf(feat.name, Kind::kUnknownFeature);
  if (!node) return std::nullopt;
  const TreeNode& kind = grammar_.tree[*node];
  switch (feat.kind) {
    case syntax::Feat::Kind::kPlus:
    case syntax::Feat::Kind::kMinus:
      if (kind.type != TreeNode::Type::kBinary) {
        Error(Kind::kBadValue, feat.span, "'" + kind.name + "' cannot be " + Signed(feat), HowToWrite(kind));
        return std::nullopt;
      }
      return FeatureTest{FeatureTest::Kind::kHasValue, *node,
                         static_cast<Value>(feat.kind == syntax::Feat::Kind::kPlus)};
    case syntax::Feat::Kind::kBears:
      return FeatureTest{FeatureTest::Kind::kBears, *node, 0};
    case syntax::Feat::Kind::kNo:
      if (feat.values.empty()) return FeatureTest{FeatureTest::Kind::kLacks, *node, 0};
      [[fallthrough]];
    case syntax::Feat::Kind::kValue: {
      if (kind.type != TreeNode::Type::kMany) {
        Error(Kind::kBadValue, feat.span, "'" + kind.name + "' has no values to name after a colon", HowToWrite(kind));
        return std::nullopt;
      }
      if (feat.values.size() != 1) {
        Error(Kind::kNotSupportedYet, feat.span, "a list of values in a test is not supported by this release",
              "name one value: `" + kind.name + ":" + kind.values[0] + "`");
        return std::nullopt;
      }
      const std::optional<Value> value = ValueOf(kind, feat.values[0]);
      if (!value) return std::nullopt;
      const bool has = feat.kind == syntax::Feat::Kind::kValue;
      return FeatureTest{has ? FeatureTest::Kind::kHasValue : FeatureTest::Kind::kLacksValue, *node, *value};
    }
  }
  return std::nullopt;
}

std::optional<SlotTest> Checker::ResolveBundle(const syntax::Bundle& bundle) {
  SlotTest test;
  if (bundle.feats.empty()) return test;
  test.op = SlotTest::Op::kBundle;
  bool good = true;
  for (const syntax::Feat& feat : bundle.feats) {
    const std::optional<FeatureTest> feature = ResolveFeature(feat);
    if (feature) {
      test.bundle.push_back(*feature);
    } else {
      good = false;
    }
  }
  if (!good) return std::nullopt;
  WarnContradictions(test.bundle, bundle.span);
  return test;
}

void Checker::WarnContradictions(const std::vector<FeatureTest>& tests, Span span) {
  const Tree& tree = grammar_.tree;
  const auto positive = [](const FeatureTest& t) {
    return t.kind == FeatureTest::Kind::kBears || t.kind == FeatureTest::Kind::kHasValue;
  };
  const auto name = [&](const FeatureTest& t) {
    return t.kind == FeatureTest::Kind::kHasValue ? tree.ValueName(t.node, t.value) : tree[t.node].name;
  };
  for (const FeatureTest& a : tests) {
    if (!positive(a)) continue;
    for (const FeatureTest& b : tests) {
      std::string why;
      if (b.kind == FeatureTest::Kind::kLacks && tree.Dominates(b.node, a.node)) {
        why = "'" + name(a) + "' and 'no " + tree[b.node].name + "'";
      } else if (b.kind == FeatureTest::Kind::kLacksValue && a.kind == FeatureTest::Kind::kHasValue &&
                 a.node == b.node && a.value == b.value) {
        why = "'" + name(a) + "' and 'no " + name(a) + "'";
      } else if (&a < &b && a.kind == FeatureTest::Kind::kHasValue && b.kind == FeatureTest::Kind::kHasValue &&
                 a.node == b.node && a.value != b.value) {
        // Two values are a contour where one mother, or one of several mothers, has the room.
        bool room = false;
        for (NodeId above = a.node; above > kRootNode; above = tree[above].mother) room = room || tree[above].max > 1;
        if (!room) why = "'" + name(a) + "' and '" + name(b) + "'";
      }
      if (why.empty()) continue;
      diagnostics_.Warning(Kind::kNeverApplies, span, "no segment matches this bundle: it asks for " + why,
                           "take one of the two out");
      return;
    }
  }
}

// ---- content ----------------------------------------------------------------------------------------

bool Checker::AddSetting(const syntax::Feat& feat, bool continues, std::vector<Setting>* settings) {
  const std::optional<NodeId> node = NodeOf(feat.name, Kind::kUnknownFeature);
  if (!node) return false;
  const TreeNode& kind = grammar_.tree[*node];
  if (*node <= kRootNode) {
    Error(Kind::kBadValue, feat.span, "'" + kind.name + "' is no content to give", "name the features under it");
    return false;
  }
  if (IsSlotBorne(*node)) {
    Error(Kind::kNotSupportedYet, feat.span,
          "'" + kind.name + "' hangs from the slot; giving it to a slot is not supported by this release",
          "hang it under root, or leave it out");
    return false;
  }
  std::vector<Value> values;
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
  }
  auto place = std::find_if(settings->begin(), settings->end(), [&](const Setting& s) { return s.node == *node; });
  if (place == settings->end()) {
    place = settings->insert(place, {*node, std::move(values)});
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

bool Checker::ResolveSettings(const syntax::Bundle& bundle, std::vector<Setting>* settings) {
  bool good = true;
  for (std::size_t i = 0; i < bundle.feats.size(); ++i) {
    const bool continues = i > 0 && bundle.feats[i - 1].name.text == bundle.feats[i].name.text;
    good = AddSetting(bundle.feats[i], continues, settings) && good;
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

std::optional<std::vector<int>> Checker::SymbolsOf(const syntax::FormText& literal) {
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
    Span span = literal.span;
    span.begin += unit.begin;
    span.end = literal.span.begin + unit.end;
    const std::string shown = literal.raw.substr(unit.begin, unit.end - unit.begin);
    if (unit.code == kLengthSign && !symbols.empty()) {
      Error(Kind::kBadRule, span, "a literal stands for one slot each symbol; ː writes a second slot of the same root",
            "write two items, or test length with other means; a literal accepts a root however long it is");
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

std::optional<SlotTest> Checker::ResolveSet(const syntax::Set& set) {
  switch (set.kind) {
    case syntax::Set::Kind::kBundle:
      return ResolveBundle(set.bundle);
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
    std::optional<SlotTest> test = ResolveSet(arg);
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
