// Forms as plain values: canonical numbering, content, and the promises a form keeps.
//
// Example: /anta/ with one Place under n and t. Canonical() numbers slot, root and all under it as they are
// first mentioned, so the second mention of Place is a number already given, and two ways of building the
// graph come out as the same numbers. Does not handle: rules (graph/, compile/), symbols (text.h). Tested by
// tests/unit/model/form_test.cc.
#include "model/form.h"

#include <algorithm>
#include <map>
#include <set>
#include <utility>

namespace tiersmith {
namespace {

constexpr InstanceId kUnnumbered = ~InstanceId{0};

// Renumbers depth first. Daughter lists are built in place in the result, so a short form costs one
// allocation for each instance that has daughters and four besides.
class Renumberer {
 public:
  explicit Renumberer(const Form& from) : from_(from), number_(from.instances.size(), kUnnumbered) {
    to_.instances.reserve(from.instances.size());
    to_.items.reserve(from.items.size());
  }

  Form Run() {
    for (const FormItem& item : from_.items) {
      FormItem copy = item;
      if (item.kind == FormItem::Kind::kBoundary) {
        copy.instance = 0;
      } else {
        copy.boundary = Boundary::kNone;
        copy.instance = Visit(item.instance);
      }
      to_.items.push_back(copy);
    }
    return std::move(to_);
  }

 private:
  InstanceId Visit(InstanceId old) {
    if (number_[old] != kUnnumbered) return number_[old];
    const InstanceId id = static_cast<InstanceId>(to_.instances.size());
    number_[old] = id;
    const Instance& source = from_.instances[old];
    to_.instances.push_back(Instance{source.node, source.value, {}});
    if (source.daughters.empty()) return id;
    std::vector<InstanceId> daughters;
    daughters.reserve(source.daughters.size());
    for (InstanceId daughter : source.daughters) daughters.push_back(Visit(daughter));
    to_.instances[id].daughters = std::move(daughters);
    return id;
  }

  const Form& from_;
  Form to_;
  std::vector<InstanceId> number_;
};

}  // namespace

const char* BoundarySign(Boundary boundary) {
  switch (boundary) {
    case Boundary::kNone:
      return "";
    case Boundary::kMorpheme:
      return "-";
    case Boundary::kClitic:
      return "=";
    case Boundary::kWord:
      return "#";
    case Boundary::kPhrase:
      return "‖";
  }
  return "";
}

Form Canonical(const Form& form) { return Renumberer(form).Run(); }

std::int64_t RootOf(const Form& form, const FormItem& item) {
  if (item.kind != FormItem::Kind::kSlot) return -1;
  for (InstanceId daughter : form.instances[item.instance].daughters) {
    if (form.instances[daughter].node == kRootNode) return daughter;
  }
  return -1;
}

FeatureTree ContentOf(const Form& form, InstanceId instance) {
  const Instance& source = form.instances[instance];
  FeatureTree tree{source.node, source.value, {}};
  tree.daughters.reserve(source.daughters.size());
  for (InstanceId daughter : source.daughters) tree.daughters.push_back(ContentOf(form, daughter));
  return tree;
}

InstanceId AddContent(Form& form, const FeatureTree& content) {
  const InstanceId id = static_cast<InstanceId>(form.instances.size());
  form.instances.push_back(Instance{content.node, content.value, {}});
  std::vector<InstanceId> daughters;
  daughters.reserve(content.daughters.size());
  for (const FeatureTree& daughter : content.daughters) daughters.push_back(AddContent(form, daughter));
  form.instances[id].daughters = std::move(daughters);
  return id;
}

// ---- defects ----------------------------------------------------------------------------------------
namespace {

class DefectFinder {
 public:
  DefectFinder(const Form& form, const Tree& tree) : form_(form), tree_(tree) {}

  std::string Run() {
    if (!References()) return text_;  // nothing further can be read safely
    for (std::size_t i = 0; i < form_.instances.size(); ++i) {
      if (reached_[i]) CheckInstance(static_cast<InstanceId>(i));
    }
    CheckRoom();
    CheckTiers();
    CheckFloats();
    CheckRoots();
    return text_;
  }

 private:
  void Say(const std::string& what) {
    if (!text_.empty()) text_ += "; ";
    text_ += what;
  }
  std::string NameOf(InstanceId id) const {
    const Instance& instance = form_.instances[id];
    return tree_.ValueName(instance.node, instance.value) + " (instance " + std::to_string(id) + ")";
  }

  // Numbers and kinds in range, no loops, slots and floats used once.
  bool References() {
    reached_.assign(form_.instances.size(), false);
    std::set<InstanceId> slots;
    for (const FormItem& item : form_.items) {
      if (item.kind == FormItem::Kind::kBoundary) {
        if (item.boundary == Boundary::kNone) Say("a boundary item without a boundary");
        continue;
      }
      if (!Reach(item.instance)) return false;
      const NodeId node = form_.instances[item.instance].node;
      if (!slots.insert(item.instance).second) Say(NameOf(item.instance) + " is in two items");
      if (item.kind == FormItem::Kind::kSlot && node != kSlotNode) Say(NameOf(item.instance) + " stands as a slot");
      if (item.kind == FormItem::Kind::kFloat && !tree_[node].floating) Say(NameOf(item.instance) + " may not float");
    }
    for (std::size_t i = 0; i < form_.instances.size(); ++i) {
      if (!reached_[i]) continue;
      for (InstanceId daughter : form_.instances[i].daughters) {
        if (slots.count(daughter) != 0) Say(NameOf(daughter) + " is an item and linked as well");
      }
    }
    return true;
  }
  bool Reach(InstanceId id) {
    if (id >= form_.instances.size()) {
      Say("instance " + std::to_string(id) + " does not exist");
      return false;
    }
    if (reached_[id]) return true;
    reached_[id] = true;
    const Instance& instance = form_.instances[id];
    if (instance.node >= tree_.nodes.size()) {
      Say("instance " + std::to_string(id) + " is of no node of the tree");
      return false;
    }
    for (InstanceId daughter : instance.daughters) {
      if (!Reach(daughter)) return false;
      // The kinds descend the tree, so no loop can be followed for ever.
      const NodeId kind = form_.instances[daughter].node;
      if (kind == kSlotNode || tree_[kind].mother != instance.node) {
        Say(NameOf(daughter) + " hangs from " + NameOf(id));
        return false;
      }
    }
    return true;
  }

  std::size_t Rank(NodeId mother, NodeId daughter) const {
    const std::vector<NodeId>& order = tree_[mother].daughters;
    return static_cast<std::size_t>(std::find(order.begin(), order.end(), daughter) - order.begin());
  }

  void CheckInstance(InstanceId id) {
    const Instance& instance = form_.instances[id];
    const TreeNode& kind = tree_[instance.node];
    if (instance.value >= ValueCount(kind))
      Say("instance " + std::to_string(id) + " of " + kind.name + " has no such value");
    for (std::size_t i = 1; i < instance.daughters.size(); ++i) {
      const Instance& left = form_.instances[instance.daughters[i - 1]];
      const Instance& right = form_.instances[instance.daughters[i]];
      if (Rank(instance.node, left.node) > Rank(instance.node, right.node)) {
        Say("daughters of " + NameOf(id) + " stand out of tree order");
      }
      if (left.node == right.node &&
          ContentOf(form_, instance.daughters[i - 1]) == ContentOf(form_, instance.daughters[i])) {
        Say(NameOf(id) + " bears " + tree_.ValueName(left.node, left.value) + " twice side by side");
      }
    }
    const bool leaf_class = kind.type == TreeNode::Type::kClass && instance.daughters.empty();
    if (leaf_class && !kind.standing && instance.node > kRootNode) Say(NameOf(id) + " has nothing under it");
  }
  static std::size_t ValueCount(const TreeNode& kind) {
    switch (kind.type) {
      case TreeNode::Type::kClass:
      case TreeNode::Type::kBare:
        return 1;
      case TreeNode::Type::kBinary:
        return 2;
      case TreeNode::Type::kMany:
        return kind.values.size();
    }
    return 1;
  }

  // A mother with more than one of a kind needs `x n`, and one slot above it that passes the `in` test.
  void CheckRoom() {
    std::map<InstanceId, std::vector<InstanceId>> slots_of;
    for (const FormItem& item : form_.items) {
      if (item.kind == FormItem::Kind::kSlot) Hold(item.instance, item.instance, slots_of);
    }
    for (std::size_t i = 0; i < form_.instances.size(); ++i) {
      if (!reached_[i]) continue;
      std::map<NodeId, int> count;
      for (InstanceId daughter : form_.instances[i].daughters) ++count[form_.instances[daughter].node];
      for (const auto& [node, n] : count) {
        const TreeNode& kind = tree_[node];
        bool has_room = !kind.room;
        if (kind.room) {
          for (InstanceId slot : slots_of[static_cast<InstanceId>(i)]) has_room |= Passes(*kind.room, slot);
        }
        if (n > (has_room ? kind.max : 1)) {
          Say(NameOf(static_cast<InstanceId>(i)) + " holds " + std::to_string(n) + " of " + kind.name);
        }
      }
    }
  }
  void Hold(InstanceId id, InstanceId slot, std::map<InstanceId, std::vector<InstanceId>>& slots_of) const {
    std::vector<InstanceId>& slots = slots_of[id];
    if (!slots.empty() && slots.back() == slot) return;
    slots.push_back(slot);
    for (InstanceId daughter : form_.instances[id].daughters) Hold(daughter, slot, slots_of);
  }
  // Literals need symbols, which a form does not know: they count as passed.
  bool Passes(const SlotTest& test, InstanceId slot) const {
    switch (test.op) {
      case SlotTest::Op::kAny:
      case SlotTest::Op::kLiteral:
        return true;
      case SlotTest::Op::kEmpty:
        return form_.instances[slot].daughters.empty();
      case SlotTest::Op::kBundle:
        return std::all_of(test.bundle.begin(), test.bundle.end(),
                           [&](const FeatureTest& feature) { return PassesFeature(feature, slot); });
      case SlotTest::Op::kAnd:
        return std::all_of(test.args.begin(), test.args.end(), [&](const SlotTest& t) { return Passes(t, slot); });
      case SlotTest::Op::kOr:
        return std::any_of(test.args.begin(), test.args.end(), [&](const SlotTest& t) { return Passes(t, slot); });
      case SlotTest::Op::kNot:
        return !Passes(test.args[0], slot);
    }
    return true;
  }
  bool PassesFeature(const FeatureTest& feature, InstanceId slot) const {
    switch (feature.kind) {
      case FeatureTest::Kind::kBears:
        return Bears(slot, feature.node, nullptr);
      case FeatureTest::Kind::kLacks:
        return !Bears(slot, feature.node, nullptr);
      case FeatureTest::Kind::kHasValue:
        return Bears(slot, feature.node, &feature.value);
      case FeatureTest::Kind::kLacksValue:
        return !Bears(slot, feature.node, &feature.value);
      case FeatureTest::Kind::kAgrees:
      case FeatureTest::Kind::kDiffers:
      case FeatureTest::Kind::kShared:
      case FeatureTest::Kind::kUnshared:
      case FeatureTest::Kind::kLong:
      case FeatureTest::Kind::kShort:
      case FeatureTest::Kind::kHalfFirst:
      case FeatureTest::Kind::kHalfSecond:
        break;  // who has the room is never told by these
    }
    return true;
  }
  bool Bears(InstanceId id, NodeId node, const Value* value) const {
    const Instance& instance = form_.instances[id];
    if (instance.node == node) return value == nullptr || instance.value == *value;
    return std::any_of(instance.daughters.begin(), instance.daughters.end(),
                       [&](InstanceId daughter) { return Bears(daughter, node, value); });
  }

  // Lines cross unless every instance stands in one unbroken stretch when the lists of all mothers of its
  // kind are written in order, each mother once.
  void CheckTiers() {
    std::vector<std::vector<InstanceId>> tiers(tree_.nodes.size());
    std::vector<bool> written(form_.instances.size(), false);
    for (const FormItem& item : form_.items) {
      if (item.kind == FormItem::Kind::kBoundary) continue;
      if (item.kind == FormItem::Kind::kFloat) tiers[form_.instances[item.instance].node].push_back(item.instance);
      Write(item.instance, tiers, written);
    }
    for (std::size_t node = 1; node < tiers.size(); ++node) {
      std::set<InstanceId> closed;
      for (std::size_t i = 0; i < tiers[node].size(); ++i) {
        const InstanceId id = tiers[node][i];
        if (i > 0 && tiers[node][i - 1] == id) continue;
        if (!closed.insert(id).second)
          Say("lines of " + tree_[static_cast<NodeId>(node)].name + " cross at " + NameOf(id));
      }
    }
  }
  void Write(InstanceId id, std::vector<std::vector<InstanceId>>& tiers, std::vector<bool>& written) const {
    if (written[id]) return;
    written[id] = true;
    for (InstanceId daughter : form_.instances[id].daughters) {
      tiers[form_.instances[daughter].node].push_back(daughter);
      Write(daughter, tiers, written);
    }
  }

  // A float of N between two slots that hold one bearer of N: neither comes first on the tier.
  void CheckFloats() {
    std::vector<std::pair<std::size_t, std::size_t>> spans(form_.instances.size(), {form_.items.size(), 0});
    for (std::size_t i = 0; i < form_.items.size(); ++i) {
      if (form_.items[i].kind != FormItem::Kind::kBoundary) Stretch(form_.items[i].instance, i, spans);
    }
    for (std::size_t i = 0; i < form_.items.size(); ++i) {
      if (form_.items[i].kind != FormItem::Kind::kFloat) continue;
      const NodeId node = form_.instances[form_.items[i].instance].node;
      for (std::size_t m = 0; m < spans.size(); ++m) {
        if (spans[m].first >= i || spans[m].second <= i || form_.instances[m].node != tree_[node].mother) continue;
        for (InstanceId daughter : form_.instances[m].daughters) {
          if (form_.instances[daughter].node != node) continue;
          Say("a floating " + tree_[node].name + " stands inside " + NameOf(static_cast<InstanceId>(m)));
          break;
        }
      }
    }
  }
  void Stretch(InstanceId id, std::size_t item, std::vector<std::pair<std::size_t, std::size_t>>& spans) {
    spans[id].first = std::min(spans[id].first, item);
    spans[id].second = std::max(spans[id].second, item);
    for (InstanceId daughter : form_.instances[id].daughters) Stretch(daughter, item, spans);
  }
  void CheckRoots() {
    std::map<std::int64_t, std::size_t> last;
    std::size_t slot = 0;
    for (const FormItem& item : form_.items) {
      if (item.kind != FormItem::Kind::kSlot) continue;
      ++slot;
      const std::int64_t root = RootOf(form_, item);
      if (root < 0) continue;
      const auto found = last.find(root);
      if (found != last.end() && found->second + 1 != slot) {
        Say(NameOf(static_cast<InstanceId>(root)) + " is held by slots that are not neighbours");
      }
      last[root] = slot;
    }
  }

  const Form& form_;
  const Tree& tree_;
  std::vector<bool> reached_;
  std::string text_;
};

}  // namespace

std::string Defects(const Form& form, const Tree& tree) { return DefectFinder(form, tree).Run(); }

// ---- dump -------------------------------------------------------------------------------------------
namespace {

class Dumper {
 public:
  Dumper(const Form& form, const Tree& tree) : form_(form), tree_(tree), holders_(form.instances.size(), 0) {
    std::vector<bool> seen(form.instances.size(), false);
    for (const FormItem& item : form.items) {
      if (item.kind != FormItem::Kind::kBoundary) Count(item.instance, seen);
    }
  }

  std::string Run() {
    std::string text;
    int slot = 0;
    for (const FormItem& item : form_.items) {
      if (!text.empty()) text += ' ';
      switch (item.kind) {
        case FormItem::Kind::kBoundary:
          text += BoundarySign(item.boundary);
          break;
        case FormItem::Kind::kSlot:
          text += "s" + std::to_string(++slot) + Under(item.instance);
          break;
        case FormItem::Kind::kFloat:
          text += "{" + Node(item.instance) + "}";
          break;
      }
    }
    return text;
  }

 private:
  void Count(InstanceId id, std::vector<bool>& seen) {
    ++holders_[id];
    if (seen[id]) return;
    seen[id] = true;
    for (InstanceId daughter : form_.instances[id].daughters) Count(daughter, seen);
  }
  // Only shared instances carry a number; the content stands at the first mention.
  std::string Node(InstanceId id) {
    const Instance& instance = form_.instances[id];
    std::string text = tree_[instance.node].standing && instance.node > kRootNode ? "•" : "";
    text += tree_.ValueName(instance.node, instance.value);
    if (holders_[id] > 1) {
      const auto [place, fresh] = numbers_.emplace(id, static_cast<int>(numbers_.size()) + 1);
      text += std::to_string(place->second);
      if (!fresh) return text;
    }
    return text + Under(id);
  }
  std::string Under(InstanceId id) {
    const std::vector<InstanceId>& daughters = form_.instances[id].daughters;
    if (daughters.empty()) return form_.instances[id].node == kSlotNode ? "[]" : "";
    std::string text = "[";
    for (std::size_t i = 0; i < daughters.size(); ++i) {
      if (i > 0) text += ' ';
      text += Node(daughters[i]);
    }
    return text + "]";
  }

  const Form& form_;
  const Tree& tree_;
  std::vector<int> holders_;
  std::map<InstanceId, int> numbers_;
};

}  // namespace

std::string Dump(const Form& form, const Tree& tree) { return Dumper(form, tree).Run(); }

}  // namespace tiersmith
