// Asking and changing feature trees. See content.h.
// Example: SetValues(tree, t, cont, {-, +}) makes the content of t that of an affricate.
#include "model/content.h"

#include <algorithm>

namespace tiersmith {

bool Bears(const FeatureTree& content, NodeId node) {
  if (content.node == node) return true;
  return std::any_of(content.daughters.begin(), content.daughters.end(),
                     [&](const FeatureTree& daughter) { return Bears(daughter, node); });
}

bool BearsValue(const FeatureTree& content, NodeId node, Value value) {
  if (content.node == node) return content.value == value;
  return std::any_of(content.daughters.begin(), content.daughters.end(),
                     [&](const FeatureTree& daughter) { return BearsValue(daughter, node, value); });
}

int CountOf(const FeatureTree& content, NodeId node) {
  if (content.node == node) return 1;
  int count = 0;
  for (const FeatureTree& daughter : content.daughters) count += CountOf(daughter, node);
  return count;
}

namespace {

std::size_t Rank(const Tree& tree, NodeId mother, NodeId daughter) {
  const std::vector<NodeId>& order = tree[mother].daughters;
  return static_cast<std::size_t>(std::find(order.begin(), order.end(), daughter) - order.begin());
}

// The place among the daughters of `mother` where instances of `node` stand or would stand.
std::vector<FeatureTree>::iterator PlaceFor(const Tree& tree, FeatureTree* mother, NodeId node) {
  const std::size_t rank = Rank(tree, mother->node, node);
  return std::find_if(mother->daughters.begin(), mother->daughters.end(),
                      [&](const FeatureTree& daughter) { return Rank(tree, mother->node, daughter.node) >= rank; });
}

}  // namespace

FeatureTree* Ensure(const Tree& tree, FeatureTree* content, NodeId node) {
  if (content->node == node) return content;
  FeatureTree* mother = Ensure(tree, content, tree[node].mother);
  auto place = PlaceFor(tree, mother, node);
  if (place == mother->daughters.end() || place->node != node) {
    place = mother->daughters.insert(place, FeatureTree{node, 0, {}});
  }
  return &*place;
}

void SetValues(const Tree& tree, FeatureTree* content, NodeId node, const std::vector<Value>& values) {
  if (values.empty()) {
    Remove(content, node);
    return;
  }
  if (tree[node].type == TreeNode::Type::kClass) {
    Ensure(tree, content, node);
    return;
  }
  FeatureTree* mother = Ensure(tree, content, tree[node].mother);
  Remove(mother, node);
  auto place = PlaceFor(tree, mother, node);
  for (const Value value : values) place = std::next(mother->daughters.insert(place, FeatureTree{node, value, {}}));
}

void Remove(FeatureTree* content, NodeId node) {
  std::vector<FeatureTree>& daughters = content->daughters;
  daughters.erase(std::remove_if(daughters.begin(), daughters.end(),
                                 [&](const FeatureTree& daughter) { return daughter.node == node; }),
                  daughters.end());
  for (FeatureTree& daughter : daughters) Remove(&daughter, node);
}

void Prune(const Tree& tree, FeatureTree* content) {
  std::vector<FeatureTree>& daughters = content->daughters;
  for (FeatureTree& daughter : daughters) Prune(tree, &daughter);
  daughters.erase(std::remove_if(daughters.begin(), daughters.end(),
                                 [&](const FeatureTree& daughter) {
                                   const TreeNode& kind = tree[daughter.node];
                                   return kind.type == TreeNode::Type::kClass && !kind.standing &&
                                          daughter.daughters.empty();
                                 }),
                  daughters.end());
}

bool Passes(const SlotTest& test, const FeatureTree& root, const std::function<bool(int)>& literal) {
  const auto passes = [&](const SlotTest& part) { return Passes(part, root, literal); };
  switch (test.op) {
    case SlotTest::Op::kAny:
      return true;
    case SlotTest::Op::kEmpty:
      return false;
    case SlotTest::Op::kBundle:
      return std::all_of(test.bundle.begin(), test.bundle.end(), [&](const FeatureTest& feature) {
        switch (feature.kind) {
          case FeatureTest::Kind::kBears:
            return Bears(root, feature.node);
          case FeatureTest::Kind::kLacks:
            return !Bears(root, feature.node);
          case FeatureTest::Kind::kHasValue:
            return BearsValue(root, feature.node, feature.value);
          case FeatureTest::Kind::kLacksValue:
            return !BearsValue(root, feature.node, feature.value);
          case FeatureTest::Kind::kAgrees:
          case FeatureTest::Kind::kDiffers:
          case FeatureTest::Kind::kShared:
          case FeatureTest::Kind::kUnshared:
          case FeatureTest::Kind::kLong:
          case FeatureTest::Kind::kShort:
          case FeatureTest::Kind::kHalfFirst:
          case FeatureTest::Kind::kHalfSecond:
            break;  // asked only of slots of a form
        }
        return false;
      });
    case SlotTest::Op::kLiteral:
      return literal(test.literal);
    case SlotTest::Op::kAnd:
      return std::all_of(test.args.begin(), test.args.end(), passes);
    case SlotTest::Op::kOr:
      return std::any_of(test.args.begin(), test.args.end(), passes);
    case SlotTest::Op::kNot:
      return !passes(test.args[0]);
  }
  return false;
}

namespace {

std::vector<const FeatureTree*> Of(const FeatureTree& content, NodeId node) {
  std::vector<const FeatureTree*> found;
  for (const FeatureTree& daughter : content.daughters) {
    if (daughter.node == node) found.push_back(&daughter);
  }
  return found;
}

class DifferenceWriter {
 public:
  explicit DifferenceWriter(const Tree& tree) : tree_(tree) {}

  void Compare(const FeatureTree& from, const FeatureTree& to) {
    for (const NodeId node : tree_[to.node].daughters) {
      const std::vector<const FeatureTree*> old = Of(from, node), now = Of(to, node);
      if (now.empty()) {
        if (!old.empty()) Step("no " + tree_[node].name);
      } else if (tree_[node].type == TreeNode::Type::kClass) {
        CompareClass(node, old, now);
      } else if (old.size() != now.size() ||
                 !std::equal(old.begin(), old.end(), now.begin(), [](auto* a, auto* b) { return *a == *b; })) {
        for (const FeatureTree* value : now) Step(tree_.ValueName(node, value->value));
      }
    }
  }

  std::string text;
  int steps = 0;

 private:
  void CompareClass(NodeId node, const std::vector<const FeatureTree*>& old,
                    const std::vector<const FeatureTree*>& now) {
    if (old.empty() && (tree_[node].standing || now[0]->daughters.empty())) Step(tree_[node].name);
    Compare(old.empty() ? FeatureTree{node, 0, {}} : *old[0], *now[0]);
  }
  void Step(const std::string& what) {
    if (!text.empty()) text += ' ';
    text += what;
    ++steps;
  }
  const Tree& tree_;
};

}  // namespace

std::string Difference(const Tree& tree, const FeatureTree& from, const FeatureTree& to, int* steps) {
  DifferenceWriter writer(tree);
  writer.Compare(from, to);
  if (steps != nullptr) *steps = writer.steps;
  return writer.text;
}

}  // namespace tiersmith
