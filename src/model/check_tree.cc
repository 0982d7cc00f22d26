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
  std::string mother;                          // "": hangs from nothing yet
  Span span;
  std::vector<std::string> daughters;
};

constexpr int kMostOnOneMother = 8;
constexpr std::size_t kMostNodes = 1000;
constexpr std::size_t kMostValues = 250;

// Lines in the order written -> nodes in tree order.
class TreeBuilder {
 public:
  using Rooms = std::vector<std::pair<NodeId, const syntax::Set*>>;

  TreeBuilder(std::vector<const syntax::TreeLine*> lines, Tree* tree, Rooms* rooms, Diagnostics* diagnostics)
      : lines_(std::move(lines)), tree_(*tree), rooms_(*rooms), diagnostics_(*diagnostics) {
    declared_["slot"].daughters = {"root"};
    declared_["root"].mother = "slot";
  }

  void Run() {
    for (const syntax::TreeLine* line : lines_) HangLine(*line);
    HangUnknownMothers();
    AddNode("slot", kSlotNode);  // root is the first daughter of slot, so it is node 1
    ReportRing();
  }

 private:
  void Add(Kind kind, Span span, std::string message, std::string remedy,
           std::vector<std::pair<Span, std::string>> also = {}) {
    diagnostics_.Add({kind, Severity::kError, span, std::move(message), std::move(remedy), std::move(also)});
  }

  void HangLine(const syntax::TreeLine& line) {
    for (std::size_t i = 1; i < line.mothers.size(); ++i) {
      Hang(line.mothers[i - 1].text, line.mothers[i], nullptr);
    }
    if (line.mothers.empty()) return;
    for (const syntax::Daughter& daughter : line.daughters) {
      Hang(line.mothers.back().text, daughter.name, &daughter);
    }
  }

  void Hang(const std::string& mother, const syntax::Name& name, const syntax::Daughter* daughter) {
    if (name.text == "slot" || name.text == "root") {
      if (mother == "slot" && name.text == "root" && daughter == nullptr) return;
      Add(Kind::kBadTree, name.span, "'" + name.text + "' hangs from nothing: slot stands above root in every tree",
          "give the node another name");
      return;
    }
    Declared& node = declared_[name.text];
    if (!node.mother.empty()) {
      HangAgain(mother, name, daughter, &node);
      return;
    }
    node.mother = mother;
    node.daughter = daughter;
    node.span = name.span;
    declared_[mother].daughters.push_back(name.text);
  }

  void HangAgain(const std::string& mother, const syntax::Name& name, const syntax::Daughter* daughter,
                 Declared* node) {
    if (node->mother != mother) {
      Add(Kind::kNotSupportedYet, name.span, "'" + name.text + "' has two mothers, " + node->mother + " and " + mother,
          "this release takes one mother a node: give the two nodes different names",
          {{node->span, "first hung here"}});
    } else if (daughter != nullptr && node->daughter != nullptr) {
      Add(Kind::kDuplicate, name.span, "'" + name.text + "' is declared twice under " + mother,
          "take one of the two away", {{node->span, "first declared here"}});
    } else if (daughter != nullptr) {
      node->daughter = daughter;
      node->span = name.span;
    }
  }

  // Mothers that nothing was hung above: an error each; they go to root, so that what hangs from them is
  // known.
  void HangUnknownMothers() {
    std::vector<std::string> names;
    for (const auto& [name, node] : declared_) {
      if (!node.mother.empty() || name == "slot") names.push_back(name);
    }
    for (const syntax::TreeLine* line : lines_) {
      if (line->mothers.empty()) continue;
      const syntax::Name& top = line->mothers[0];
      Declared& node = declared_[top.text];
      if (top.text == "slot" || !node.mother.empty()) continue;
      Add(Kind::kUnknownNode, top.span, "'" + top.text + "' hangs from no node of the tree",
          Or(DidYouMean(top.text, names), "hang it: `root > " + top.text + "`"));
      node.mother = "root";
      declared_["root"].daughters.push_back(top.text);
    }
  }

  // Depth first: mothers before daughters, sisters in the order written.
  void AddNode(const std::string& name, NodeId mother) {
    const Declared& node = declared_[name];
    if (tree_.nodes.size() == kMostNodes) {
      if (!too_many_) {
        Add(Kind::kLimit, node.span, "a tree has at most " + std::to_string(kMostNodes) + " nodes", "leave some out");
      }
      too_many_ = true;
      return;
    }
    const NodeId id = static_cast<NodeId>(tree_.nodes.size());
    TreeNode made;
    made.name = name;
    made.mother = mother;
    made.span = node.span;
    made.standing = id <= kRootNode;
    if (node.daughter != nullptr) Describe(node, id, &made);
    if (!node.daughters.empty() && made.type != TreeNode::Type::kClass) {
      Add(Kind::kBadTree, node.span, "'" + name + "' has values, so nothing can hang from it",
          "hang the daughters from a class node");
    }
    tree_.nodes.push_back(made);
    if (id != kSlotNode) tree_.nodes[mother].daughters.push_back(id);
    for (const std::string& daughter : node.daughters) AddNode(daughter, id);
  }

  void Describe(const Declared& node, NodeId id, TreeNode* made) {
    const syntax::Daughter& daughter = *node.daughter;
    made->max = daughter.max;
    made->floating = daughter.floating;
    made->abstract_ = daughter.abstract_;
    if (daughter.room) rooms_.emplace_back(id, &*daughter.room);
    if (daughter.max < 1 || daughter.max > kMostOnOneMother) {
      Add(Kind::kBadTree, node.span,
          "'" + made->name + "' may stand 1 to " + std::to_string(kMostOnOneMother) + " times on one mother",
          "write ×2 for a contour of two");
    }
    switch (daughter.kind) {
      case syntax::Daughter::Kind::kBinary:
        made->type = TreeNode::Type::kBinary;
        break;
      case syntax::Daughter::Kind::kPlain:
        made->type = node.daughters.empty() ? TreeNode::Type::kBare : TreeNode::Type::kClass;
        break;
      case syntax::Daughter::Kind::kMany:
        made->type = TreeNode::Type::kMany;
        TakeValues(daughter, node.span, made);
        break;
      case syntax::Daughter::Kind::kStanding:
        made->standing = true;
        break;
    }
  }

  void TakeValues(const syntax::Daughter& daughter, Span span, TreeNode* made) {
    std::set<std::string> seen;
    for (const syntax::Name& value : daughter.values) {
      if (!seen.insert(value.text).second) {
        Add(Kind::kDuplicate, value.span, "'" + value.text + "' stands twice among the values of " + made->name,
            "take one away");
      }
      made->values.push_back(value.text);
    }
    if (made->values.empty() || made->values.size() > kMostValues) {
      Add(Kind::kBadTree, span, "'" + made->name + "' needs 1 to " + std::to_string(kMostValues) + " values",
          "write them after the colon: `" + made->name + ": a b`");
    }
  }

  // All that hangs from root or from an unknown mother was reached; what was not hangs from itself.
  void ReportRing() {
    const auto ring = std::find_if(lines_.begin(), lines_.end(), [&](const syntax::TreeLine* line) {
      return !line->mothers.empty() && !tree_.Find(line->mothers.back().text);
    });
    if (ring == lines_.end() || too_many_) return;
    const syntax::Name& name = (*ring)->mothers.back();
    Add(Kind::kBadTree, name.span, "'" + name.text + "' hangs from itself",
        "hang one of the nodes of this ring from root");
  }

  std::vector<const syntax::TreeLine*> lines_;
  Tree& tree_;
  Rooms& rooms_;
  Diagnostics& diagnostics_;
  std::map<std::string, Declared> declared_;
  bool too_many_ = false;
};

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
      if (value == name.text) remedy = "it is a value of " + node.name + ": write " + node.name + ":" + value + "; ";
    }
  }
  if (classes_.count(name.text) != 0) remedy = "it is a class, which stands without brackets; ";
  Error(kind, name.span,
        "the tree has no " + std::string(kind == Kind::kUnknownFeature ? "feature" : "node") + " '" + name.text + "'",
        Or(remedy, "declare it in `tree`"));
  return std::nullopt;
}

void Checker::CheckTree() {
  bool any = false;
  std::vector<const syntax::TreeLine*> lines;
  for (const syntax::Top& top : file_.tops) {
    const auto* block = std::get_if<syntax::Tree>(&top);
    if (block == nullptr) continue;
    any = true;
    for (const syntax::TreeLine& line : block->lines) lines.push_back(&line);
  }
  TreeBuilder(std::move(lines), &grammar_.tree, &rooms_, &diagnostics_).Run();
  if (any) return;
  Error(Kind::kBadTree, whole_, "the grammar has no `tree`",
        "say which features there are: `tree { root > ±cons ±son ±syll }`");
}

// Symbols are made after the tree, so who has the room cannot be told by them.
bool Checker::SaysLiteral(const syntax::Set& set, std::size_t depth) const {
  if (set.kind == syntax::Set::Kind::kLiteral) return true;
  if (set.kind == syntax::Set::Kind::kClass) {
    const auto found = classes_.find(set.name.text);
    return found != classes_.end() && depth <= classes_.size() && SaysLiteral(found->second->set, depth + 1);
  }
  return std::any_of(set.args.begin(), set.args.end(), [&](const syntax::Set& arg) { return SaysLiteral(arg, depth); });
}

// After the tree stands, so that the `in [..]` of one node may speak of all others.
void Checker::CheckRooms() {
  for (const auto& [node, set] : rooms_) {
    if (SaysLiteral(*set, 0)) {
      Error(Kind::kBadTree, set->span, "who has the room is told by features, not by symbols",
            "write a bundle: `in [-son]`");
      continue;
    }
    const std::optional<SlotTest> test = ResolveSymbolSet(*set);
    if (!test) continue;
    grammar_.tree.nodes[node].room = test;
  }
}

}  // namespace tiersmith
