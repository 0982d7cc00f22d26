// The feature tree: lines of `tree` -> nodes with their mothers before them.
//
// Example: `root > Place > •Labial` and `Labial > round` give root, Place, Labial, round; the lines may stand
// in any order. Does not handle: nodes with two mothers, trees from a library (errors say so). Tested by
// tests/unit/model/check_test.cc.
#include <algorithm>

#include "model/check.h"

namespace tiersmith {
namespace {

struct Declared {
  const syntax::Daughter* daughter = nullptr;  // null: named only in a chain of mothers
  std::string mother;
  Span span;
  std::vector<std::string> daughters;
  Span line;  // of the first line that gives it daughters
};

constexpr int kMostOnOneMother = 8;

}  // namespace

std::vector<std::string> Checker::NodeNames() const {
  std::vector<std::string> names;
  for (std::size_t i = 1; i < grammar_.tree.nodes.size(); ++i) names.push_back(grammar_.tree.nodes[i].name);
  return names;
}

std::optional<NodeId> Checker::NodeOf(const syntax::Name& name, Kind kind) {
  if (const std::optional<NodeId> node = grammar_.tree.Find(name.text)) return node;
  if (SaidOften("node " + name.text)) return std::nullopt;
  std::string remedy = DidYouMean(name.text, NodeNames());
  for (const TreeNode& node : grammar_.tree.nodes) {
    for (const std::string& value : node.values) {
      if (value == name.text)
        remedy = "it is a value of " + node.name + ": write " + node.name + ":" + value + "; ";
    }
  }
  if (classes_.count(name.text) != 0) remedy = "it is a class, which stands without brackets; ";
  Error(kind, name.span,
        "the tree has no " + std::string(kind == Kind::kUnknownFeature ? "feature" : "node") + " '" +
            name.text + "'",
        Or(remedy, "declare it in `tree`"));
  return std::nullopt;
}

void Checker::CheckTree() {
  Tree& tree = grammar_.tree;
  const std::size_t errors_before = diagnostics_.all().size();
  std::map<std::string, Declared> declared;
  std::vector<const syntax::TreeLine*> lines;
  const syntax::Tree* first = nullptr;
  for (const syntax::Top& top : file_.tops) {
    if (const auto* block = std::get_if<syntax::Tree>(&top)) {
      if (first == nullptr) first = block;
      for (const syntax::TreeLine& line : block->lines) lines.push_back(&line);
    }
  }
  declared["slot"].daughters = {"root"};
  declared["root"].mother = "slot";

  const auto hang = [&](const std::string& mother, const syntax::Name& name,
                        const syntax::Daughter* daughter) {
    if (name.text == "slot" || name.text == "root") {
      if (mother == "slot" && name.text == "root" && daughter == nullptr) return;
      Error(Kind::kBadTree, name.span,
            "'" + name.text + "' hangs from nothing: slot stands above root in every tree",
            "give the node another name");
      return;
    }
    const auto [place, fresh] = declared.emplace(name.text, Declared{});
    Declared& node = place->second;
    if (!fresh && !node.mother.empty()) {
      if (node.mother != mother) {
        diagnostics_.Add({Kind::kNotSupportedYet,
                          Severity::kError,
                          name.span,
                          "'" + name.text + "' has two mothers, " + node.mother + " and " + mother,
                          "this release takes one mother a node: give the two nodes different names",
                          {{node.span, "first hung here"}}});
      } else if (daughter != nullptr && node.daughter != nullptr) {
        diagnostics_.Add({Kind::kDuplicate,
                          Severity::kError,
                          name.span,
                          "'" + name.text + "' is declared twice under " + mother,
                          "take one of the two away",
                          {{node.span, "first declared here"}}});
      } else if (daughter != nullptr) {
        node.daughter = daughter;
        node.span = name.span;
      }
      return;
    }
    node.mother = mother;
    node.daughter = daughter;
    node.span = name.span;
    declared[mother].daughters.push_back(name.text);
  };
  for (const syntax::TreeLine* line : lines) {
    for (std::size_t i = 1; i < line->mothers.size(); ++i)
      hang(line->mothers[i - 1].text, line->mothers[i], nullptr);
    if (line->mothers.empty()) continue;
    const std::string& mother = line->mothers.back().text;
    for (const syntax::Daughter& daughter : line->daughters) hang(mother, daughter.name, &daughter);
  }

  std::vector<std::string> names;
  for (const auto& [name, node] : declared) {
    if (!node.mother.empty() || name == "slot") names.push_back(name);
  }
  std::set<std::string> reported;
  for (const syntax::TreeLine* line : lines) {
    if (line->mothers.empty()) continue;
    const syntax::Name& top = line->mothers[0];
    if (top.text == "slot" || !declared[top.text].mother.empty() || !reported.insert(top.text).second)
      continue;
    std::vector<std::string> others;
    for (const std::string& name : names) {
      if (name != top.text) others.push_back(name);
    }
    Error(Kind::kUnknownNode, top.span, "'" + top.text + "' hangs from no node of the tree",
          Or(DidYouMean(top.text, others), "hang it: `root > " + top.text + "`"));
    declared[top.text].mother = "root";  // so that what hangs from it is known further on
    declared["root"].daughters.push_back(top.text);
  }

  // Depth first from slot: mothers before daughters, sisters in the order written.
  const auto add = [&](const auto& self, const std::string& name, NodeId mother) -> void {
    if (tree.nodes.size() >= 1000) return;
    const Declared& node = declared[name];
    const NodeId id = static_cast<NodeId>(tree.nodes.size());
    TreeNode made;
    made.name = name;
    made.mother = mother;
    made.span = node.span;
    made.standing = id <= kRootNode;
    if (node.daughter != nullptr) {
      const syntax::Daughter& daughter = *node.daughter;
      made.max = daughter.max;
      made.floating = daughter.floating;
      made.abstract_ = daughter.abstract_;
      if (daughter.max < 1 || daughter.max > kMostOnOneMother) {
        Error(Kind::kBadTree, node.span,
              "'" + name + "' may stand 1 to " + std::to_string(kMostOnOneMother) + " times on one mother",
              "write ×2 for a contour of two");
      }
      if (daughter.room) rooms_.emplace_back(id, &*daughter.room);
      switch (daughter.kind) {
        case syntax::Daughter::Kind::kBinary:
          made.type = TreeNode::Type::kBinary;
          break;
        case syntax::Daughter::Kind::kPlain:
          made.type = node.daughters.empty() ? TreeNode::Type::kBare : TreeNode::Type::kClass;
          break;
        case syntax::Daughter::Kind::kMany:
          made.type = TreeNode::Type::kMany;
          break;
        case syntax::Daughter::Kind::kStanding:
          made.standing = true;
          break;
      }
      std::set<std::string> seen;
      for (const syntax::Name& value : daughter.values) {
        if (!seen.insert(value.text).second) {
          Error(Kind::kDuplicate, value.span, "'" + value.text + "' stands twice among the values of " + name,
                "take one away");
        }
        made.values.push_back(value.text);
      }
      if (made.type == TreeNode::Type::kMany && (made.values.empty() || made.values.size() > 250)) {
        Error(Kind::kBadTree, node.span, "'" + name + "' needs 1 to 250 values",
              "write them after the colon: `" + name + ": a b`");
      }
    }
    if (!node.daughters.empty() && made.type != TreeNode::Type::kClass) {
      Error(Kind::kBadTree, node.span, "'" + name + "' has values, so nothing can hang from it",
            "hang the daughters from a class node");
    }
    tree.nodes.push_back(made);
    if (id != kSlotNode) tree.nodes[mother].daughters.push_back(id);
    for (const std::string& daughter : node.daughters) self(self, daughter, id);
  };
  // `root` first among the daughters of slot, so that it is node 1.
  add(add, "slot", kSlotNode);

  // All that hangs from root or from an unknown mother was reached; what was not hangs from itself.
  const auto ring = std::find_if(lines.begin(), lines.end(), [&](const syntax::TreeLine* line) {
    return !line->mothers.empty() && !tree.Find(line->mothers.back().text);
  });
  if (ring != lines.end()) {
    const syntax::Name& name = (*ring)->mothers.back();
    Error(Kind::kBadTree, name.span, "'" + name.text + "' hangs from itself",
          "hang one of the nodes of this ring from root");
  }
  if (first == nullptr && diagnostics_.all().size() == errors_before) {
    Error(Kind::kBadTree, whole_, "the grammar has no `tree`",
          "say which features there are: `tree { root > ±cons ±son ±syll }`");
  }
}

// Symbols are made after the tree, so who has the room cannot be told by them.
bool Checker::SaysLiteral(const syntax::Set& set, std::size_t depth) const {
  if (set.kind == syntax::Set::Kind::kLiteral) return true;
  if (set.kind == syntax::Set::Kind::kClass) {
    const auto found = classes_.find(set.name.text);
    return found != classes_.end() && depth <= classes_.size() && SaysLiteral(found->second->set, depth + 1);
  }
  return std::any_of(set.args.begin(), set.args.end(),
                     [&](const syntax::Set& arg) { return SaysLiteral(arg, depth); });
}

// After the tree stands, so that the `in [..]` of one node may speak of all others.
void Checker::CheckRooms() {
  for (const auto& [node, set] : rooms_) {
    if (SaysLiteral(*set, 0)) {
      Error(Kind::kBadTree, set->span, "who has the room is told by features, not by symbols",
            "write a bundle: `in [-son]`");
      continue;
    }
    const std::optional<SlotTest> test = ResolveSet(*set);
    if (!test) continue;
    grammar_.tree.nodes[node].room = test;
  }
}

}  // namespace tiersmith
