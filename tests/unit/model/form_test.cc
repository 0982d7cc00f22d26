// Feature trees and forms as plain values. The graphs are written down by hand from grammar/notation.md §2, §8.
#include "model/form.h"

#include "support/model_case.h"

namespace tiersmith::testing {
namespace {

// slot > root > ±cons ±cont×2 Place > •Coronal > ±ant ; slot > Tone: H L floating
Tree SampleTree() {
  Tree tree;
  const auto add = [&](const char* name, TreeNode::Type type, NodeId mother, bool standing = false) {
    TreeNode node;
    node.name = name;
    node.type = type;
    node.mother = mother;
    node.standing = standing;
    const NodeId id = static_cast<NodeId>(tree.nodes.size());
    tree.nodes.push_back(node);
    if (id > 0) tree.nodes[mother].daughters.push_back(id);
  };
  add("slot", TreeNode::Type::kClass, 0, true);
  add("root", TreeNode::Type::kClass, 0, true);
  add("cons", TreeNode::Type::kBinary, 1);
  add("cont", TreeNode::Type::kBinary, 1);
  add("Place", TreeNode::Type::kClass, 1);
  add("Coronal", TreeNode::Type::kClass, 4, true);
  add("ant", TreeNode::Type::kBinary, 5);
  add("Tone", TreeNode::Type::kMany, 0);
  tree.nodes[3].max = 2;
  tree.nodes[7].values = {"H", "L"};
  tree.nodes[7].floating = true;
  return tree;
}

InstanceId Add(Form& form, NodeId node, Value value, std::vector<InstanceId> daughters) {
  form.instances.push_back({node, value, std::move(daughters)});
  return static_cast<InstanceId>(form.instances.size() - 1);
}
void AddSlot(Form& form, std::vector<InstanceId> daughters) {
  const InstanceId slot = Add(form, kSlotNode, 0, std::move(daughters));
  form.items.push_back({FormItem::Kind::kSlot, Boundary::kNone, slot});
}
InstanceId Place(Form& form) { return Add(form, 4, 0, {Add(form, 5, 0, {Add(form, 6, 1, {})})}); }

TEST_CASE("model: order and hash of contents", "[unit]") {
  const FeatureTree flat{1, 0, {{2, 1, {}}, {3, 0, {}}}};
  const FeatureTree nested{1, 0, {{2, 1, {{3, 0, {}}}}}};
  const FeatureTree other{1, 0, {{2, 0, {}}, {3, 0, {}}}};
  CHECK(flat == FeatureTree{1, 0, {{2, 1, {}}, {3, 0, {}}}});
  CHECK(flat != nested);
  CHECK(Hash(flat) != Hash(nested));
  CHECK(Hash(flat) != Hash(other));
  CHECK(other < flat);
  CHECK_FALSE(flat < other);
  CHECK((flat < nested) != (nested < flat));
}

TEST_CASE("model: names and dominance in the tree", "[unit]") {
  const Tree tree = SampleTree();
  CHECK(tree.Find("Place") == NodeId{4});
  CHECK_FALSE(tree.Find("place").has_value());
  CHECK(tree.Dominates(1, 6));
  CHECK(tree.Dominates(6, 6));
  CHECK_FALSE(tree.Dominates(6, 4));
  CHECK_FALSE(tree.Dominates(1, 7));
  CHECK(tree.ValueName(2, 0) == "-cons");
  CHECK(tree.ValueName(4, 0) == "Place");
  CHECK(tree.ValueName(7, 1) == "Tone:L");
}

TEST_CASE("model: two ways of building one graph have one canonical form", "[unit]") {
  // nt with one Place, built from the left and from the right, the second with waste in the pool.
  Form left;
  InstanceId place = Place(left);
  AddSlot(left, {Add(left, 1, 0, {Add(left, 2, 1, {}), place})});
  left.items.push_back({FormItem::Kind::kBoundary, Boundary::kMorpheme, 0});
  AddSlot(left, {Add(left, 1, 0, {Add(left, 2, 1, {}), place})});
  Form right;
  Place(right);  // reached from nowhere
  const InstanceId second = Add(right, 1, 0, {Add(right, 2, 1, {}), Place(right)});
  const InstanceId first = Add(right, 1, 0, {Add(right, 2, 1, {}), right.instances[second].daughters[1]});
  AddSlot(right, {first});
  right.items.push_back({FormItem::Kind::kBoundary, Boundary::kMorpheme, 77});  // numbers on boundaries mean nothing
  AddSlot(right, {second});
  CHECK_FALSE(left == right);
  CHECK(Canonical(left) == Canonical(right));
  CHECK(Canonical(Canonical(left)) == Canonical(left));
  CHECK(Canonical(left).instances.size() == 9);
  CHECK(Dump(left, SampleTree()) == "s1[root[+cons Place1[•Coronal[+ant]]]] - s2[root[+cons Place1]]");
  CHECK(Dump(left, SampleTree()) == Dump(right, SampleTree()));

  // Equal contents that are not shared are another graph.
  Form apart;
  AddSlot(apart, {Add(apart, 1, 0, {Add(apart, 2, 1, {}), Place(apart)})});
  apart.items.push_back({FormItem::Kind::kBoundary, Boundary::kMorpheme, 0});
  AddSlot(apart, {Add(apart, 1, 0, {Add(apart, 2, 1, {}), Place(apart)})});
  CHECK_FALSE(Canonical(apart) == Canonical(left));
}

TEST_CASE("model: content comes back as it was added", "[unit]") {
  const FeatureTree content{1, 0, {{2, 1, {}}, {3, 0, {}}, {3, 1, {}}, {4, 0, {{5, 0, {}}}}}};
  Form form;
  AddContent(form, FeatureTree{6, 1, {}});
  const InstanceId root = AddContent(form, content);
  CHECK(ContentOf(form, root) == content);
  AddSlot(form, {root});
  AddSlot(form, {});
  CHECK(RootOf(form, form.items[0]) == root);
  CHECK(RootOf(form, form.items[1]) == -1);
  CHECK(Dump(form, SampleTree()) == "s1[root[+cons -cont +cont Place[•Coronal]]] s2[]");
}

TEST_CASE("model: broken promises of the graph are named", "[unit]") {
  const Tree tree = SampleTree();
  const auto defects = [&](const Form& form) { return Defects(form, tree); };
  SECTION("none") {
    Form form;
    const InstanceId root = Add(form, 1, 0, {Add(form, 3, 0, {}), Add(form, 3, 1, {}), Place(form)});
    AddSlot(form, {root});
    AddSlot(form, {root});
    AddSlot(form, {});
    form.items.push_back({FormItem::Kind::kFloat, Boundary::kNone, Add(form, 7, 0, {})});
    CHECK(defects(form) == "");
  }
  SECTION("room") {
    Form form;
    AddSlot(form, {Add(form, 1, 0, {Add(form, 2, 0, {}), Add(form, 2, 1, {})})});
    CHECK(defects(form) == "root (instance 2) holds 2 of cons");
  }
  SECTION("room by a test") {
    Tree narrow = SampleTree();
    SlotTest plus_cons;
    plus_cons.op = SlotTest::Op::kBundle;
    plus_cons.bundle = {{FeatureTest::Kind::kHasValue, 2, 1}};
    narrow.nodes[3].room = plus_cons;
    for (const Value cons : {Value{0}, Value{1}}) {
      Form form;
      AddSlot(form, {Add(form, 1, 0, {Add(form, 2, cons, {}), Add(form, 3, 0, {}), Add(form, 3, 1, {})})});
      CHECK(Defects(form, narrow) == (cons == 1 ? "" : "root (instance 3) holds 2 of cont"));
    }
  }
  SECTION("crossing") {
    Form form;
    const InstanceId outer = Place(form);
    const InstanceId inner = Place(form);
    AddSlot(form, {Add(form, 1, 0, {outer})});
    AddSlot(form, {Add(form, 1, 0, {inner})});
    AddSlot(form, {Add(form, 1, 0, {outer})});
    CHECK(defects(form) == "lines of Place cross at Place (instance 2)");
  }
  SECTION("a bearer of nothing is passed over") {
    Form form;
    const InstanceId outer = Place(form);
    AddSlot(form, {Add(form, 1, 0, {outer})});
    AddSlot(form, {Add(form, 1, 0, {})});
    AddSlot(form, {Add(form, 1, 0, {outer})});
    CHECK(defects(form) == "");
  }
  SECTION("a float in the middle of a span") {
    Form form;
    const InstanceId tone = Add(form, 7, 0, {});
    AddSlot(form, {Add(form, 1, 0, {}), tone});
    form.items.push_back({FormItem::Kind::kFloat, Boundary::kNone, Add(form, 7, 1, {})});
    AddSlot(form, {Add(form, 1, 0, {}), tone});
    CHECK(defects(form) == "lines of Tone cross at Tone:H (instance 0)");
  }
  SECTION("the wrong mother") {
    Form form;
    AddSlot(form, {Add(form, 1, 0, {Add(form, 5, 0, {})})});
    CHECK(defects(form) == "Coronal (instance 0) hangs from root (instance 1)");
  }
  SECTION("roots of slots that are not neighbours") {
    Form form;
    const InstanceId root = Add(form, 1, 0, {});
    AddSlot(form, {root});
    AddSlot(form, {});
    AddSlot(form, {root});
    CHECK(defects(form) == "root (instance 0) is held by slots that are not neighbours");
  }
  SECTION("equal values side by side, order, bare class nodes, values") {
    Form form;
    AddSlot(form, {Add(form, 1, 0, {Add(form, 4, 0, {}), Add(form, 3, 1, {}), Add(form, 3, 1, {})})});
    CHECK(defects(form) ==
          "Place (instance 0) has nothing under it; daughters of root (instance 3) stand out of tree order; "
          "root (instance 3) bears +cont twice side by side");
    Form many;
    AddSlot(many, {Add(many, 1, 0, {}), Add(many, 7, 2, {})});
    CHECK(defects(many) == "instance 1 of Tone has no such value");
  }
  SECTION("numbers out of range") {
    Form form;
    AddSlot(form, {5});
    CHECK(defects(form) == "instance 5 does not exist");
  }
}

}  // namespace
}  // namespace tiersmith::testing
