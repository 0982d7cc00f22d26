// Forms for the agreement tests (generate.h), random and exhaustive.
#include <algorithm>
#include <functional>

#include "model/content.h"
#include "support/generate.h"

namespace tiersmith::testing {
namespace {

// Every instance of the kind that bears `node`, in tier order, each once; a place where a float of `node` stands, or
// (for roots) a slot without one, is marked by kBreak.
constexpr InstanceId kBreak = static_cast<InstanceId>(-1);

class Mothers {
 public:
  Mothers(const Form& form, const Tree& tree, NodeId node)
      : form_(form), node_(node), kind_(tree[node].mother), seen_(form.instances.size(), false) {
    for (const FormItem& item : form.items) {
      if (item.kind == FormItem::Kind::kBoundary) continue;
      if (item.kind == FormItem::Kind::kFloat && form.instances[item.instance].node == node) {
        found_.push_back(kBreak);
      }
      Visit(item.instance);
      if (node == kRootNode && item.kind == FormItem::Kind::kSlot && RootOf(form, item) < 0) found_.push_back(kBreak);
    }
  }
  const std::vector<InstanceId>& found() const { return found_; }

 private:
  void Visit(InstanceId id) {
    if (seen_[id]) return;
    seen_[id] = true;
    if (form_.instances[id].node == kind_) found_.push_back(id);
    for (InstanceId daughter : form_.instances[id].daughters) Visit(daughter);
  }

  const Form& form_;
  const NodeId node_;
  const NodeId kind_;
  std::vector<bool> seen_;
  std::vector<InstanceId> found_;
};

void ShareTier(Form* form, const Tree& tree, NodeId node, const std::function<bool()>& yes) {
  InstanceId last = kBreak;  // the last instance of the tier so far
  const Mothers mothers(*form, tree, node);
  for (InstanceId mother : mothers.found()) {
    if (mother == kBreak) {
      last = kBreak;
      continue;
    }
    bool first = true;
    for (InstanceId& daughter : form->instances[mother].daughters) {
      if (form->instances[daughter].node != node) continue;
      if (first && last != kBreak && last != daughter && ContentOf(*form, last) == ContentOf(*form, daughter) &&
          yes()) {
        daughter = last;
      }
      first = false;
      last = daughter;
    }
  }
}

std::vector<NodeId> AllNodes(const Tree& tree) {
  std::vector<NodeId> nodes;
  for (std::size_t node = 1; node < tree.nodes.size(); ++node) nodes.push_back(static_cast<NodeId>(node));
  return nodes;
}

void AddSlot(Form* form, const FeatureTree* root) {
  const InstanceId slot = static_cast<InstanceId>(form->instances.size());
  form->instances.push_back({kSlotNode, 0, {}});
  form->items.push_back({FormItem::Kind::kSlot, Boundary::kNone, slot});
  if (root == nullptr) return;
  const InstanceId id = AddContent(*form, *root);
  form->instances[slot].daughters.push_back(id);
}

void AddBoundary(Form* form, Boundary boundary) { form->items.push_back({FormItem::Kind::kBoundary, boundary, 0}); }

Boundary RandomBoundary(Rng& rng) {
  const Boundary all[] = {Boundary::kMorpheme, Boundary::kMorpheme, Boundary::kMorpheme,
                          Boundary::kClitic,   Boundary::kWord,     Boundary::kPhrase};
  return all[Below(rng, 6)];
}

// ---- content made up node by node ------------------------------------------------------------------

int ValueCount(const TreeNode& kind) {
  switch (kind.type) {
    case TreeNode::Type::kClass:
    case TreeNode::Type::kBare:
      return 1;
    case TreeNode::Type::kBinary:
      return 2;
    case TreeNode::Type::kMany:
      return static_cast<int>(kind.values.size());
  }
  return 1;
}

FeatureTree RandomContent(Rng& rng, const Tree& tree, NodeId node, double density);

bool IsBare(const Tree& tree, const FeatureTree& content) {
  const TreeNode& kind = tree[content.node];
  return kind.type == TreeNode::Type::kClass && content.node > kRootNode && !kind.standing && content.daughters.empty();
}

void AddDaughters(Rng& rng, const Tree& tree, NodeId daughter, double density, FeatureTree* mother) {
  const TreeNode& kind = tree[daughter];
  int count = Chance(rng, density) ? 1 : 0;
  while (count > 0 && count < kind.max && Chance(rng, 0.4)) ++count;
  for (int i = 0; i < count; ++i) {
    FeatureTree added = RandomContent(rng, tree, daughter, density);
    const bool equal = !mother->daughters.empty() && mother->daughters.back() == added;
    if (!equal && !IsBare(tree, added)) mother->daughters.push_back(added);
  }
}

FeatureTree RandomContent(Rng& rng, const Tree& tree, NodeId node, double density) {
  FeatureTree content;
  content.node = node;
  content.value = static_cast<Value>(Below(rng, ValueCount(tree[node])));
  for (NodeId daughter : tree[node].daughters) AddDaughters(rng, tree, daughter, density, &content);
  return content;
}

// Contours that the tree gives no room for in such a segment are cut to their first member.
void FitRoom(const Tree& tree, const FeatureTree& root, FeatureTree* at) {
  std::vector<FeatureTree> kept;
  for (FeatureTree& daughter : at->daughters) {
    FitRoom(tree, root, &daughter);
    const TreeNode& kind = tree[daughter.node];
    const bool room = !kind.room || Passes(*kind.room, root, [](int) { return false; });
    if (!kept.empty() && kept.back().node == daughter.node && !room) continue;
    kept.push_back(daughter);
  }
  at->daughters = kept;
}

}  // namespace

std::vector<FeatureTree> LettersOf(const Grammar& grammar) {
  std::vector<FeatureTree> letters;
  for (const Symbol& symbol : grammar.inventory.symbols) {
    if (symbol.in_underlying) letters.push_back(symbol.underlying);
  }
  return letters;
}

Form Shared(const Form& form, const Tree& tree, const std::vector<NodeId>& nodes, const std::function<bool()>& yes) {
  Form shared = form;
  std::vector<NodeId> in_order = nodes;
  std::sort(in_order.begin(), in_order.end());  // mothers come before daughters
  for (NodeId node : in_order) ShareTier(&shared, tree, node, yes);
  return Canonical(shared);
}

Form RandomForm(Rng& rng, const Grammar& grammar, const std::vector<FeatureTree>& letters, const FormOptions& options) {
  Form form;
  const int items = options.min_items + Below(rng, options.max_items - options.min_items + 1);
  const FeatureTree* before = nullptr;
  for (int i = 0; i < items; ++i) {
    if (Chance(rng, options.boundary)) {
      AddBoundary(&form, RandomBoundary(rng));
    } else if (Chance(rng, options.empty)) {
      AddSlot(&form, nullptr);
    } else {
      if (before == nullptr || !Chance(rng, options.again))
        before = &letters[Below(rng, static_cast<int>(letters.size()))];
      AddSlot(&form, before);
    }
  }
  const std::vector<NodeId> nodes = options.sharing.empty() ? AllNodes(grammar.tree) : options.sharing;
  const bool roots = std::find(nodes.begin(), nodes.end(), kRootNode) != nodes.end();
  std::vector<NodeId> others;
  std::copy_if(nodes.begin(), nodes.end(), std::back_inserter(others), [](NodeId node) { return node != kRootNode; });
  if (roots) form = Shared(form, grammar.tree, {kRootNode}, [&] { return Chance(rng, options.geminate); });
  return Shared(form, grammar.tree, others, [&] { return Chance(rng, options.share); });
}

std::vector<Form> TypedForms(Rng& rng, const Grammar& grammar, std::size_t count) {
  const std::vector<FeatureTree> letters = LettersOf(grammar);
  FormOptions options;
  options.max_items = 7;
  options.share = 0;
  std::vector<Form> forms;
  while (forms.size() < count) {
    Form form = Canonical(RandomForm(rng, grammar, letters, options));
    if (!PrintForm(grammar, form).empty()) forms.push_back(std::move(form));
  }
  return forms;
}

Form RandomWideForm(Rng& rng, const Grammar& grammar, int max_items) {
  const Tree& tree = grammar.tree;
  std::vector<NodeId> floating;
  for (NodeId node : AllNodes(tree)) {
    if (tree[node].floating) floating.push_back(node);
  }
  Form form;
  const int items = Below(rng, max_items + 1);
  const double density = 0.15 + 0.7 * std::uniform_real_distribution<double>(0, 1)(rng);
  FeatureTree before;
  for (int i = 0; i < items; ++i) {
    if (Chance(rng, 0.12)) {
      AddBoundary(&form, RandomBoundary(rng));
      continue;
    }
    if (!floating.empty() && Chance(rng, 0.15)) {
      const NodeId node = floating[Below(rng, static_cast<int>(floating.size()))];
      const FeatureTree content = RandomContent(rng, tree, node, density);
      if (IsBare(tree, content)) continue;
      const InstanceId id = AddContent(form, content);
      form.items.push_back({FormItem::Kind::kFloat, Boundary::kNone, id});
      continue;
    }
    FeatureTree slot = RandomContent(rng, tree, kSlotNode, density);
    if (before.node == kSlotNode && Chance(rng, 0.35)) slot = before;
    before = slot;
    for (FeatureTree& daughter : slot.daughters) {
      if (daughter.node == kRootNode) FitRoom(tree, FeatureTree(daughter), &daughter);
    }
    const InstanceId id = AddContent(form, slot);
    form.items.push_back({FormItem::Kind::kSlot, Boundary::kNone, id});
  }
  const double share = Chance(rng, 0.2) ? 0.0 : std::uniform_real_distribution<double>(0, 1)(rng);
  Form shared = Shared(form, tree, AllNodes(tree), [&] { return Chance(rng, share); });
  // A root may have come to be shared across a float of a tier that it bears: no form has that.
  return Defects(shared, tree).empty() ? shared : RandomWideForm(rng, grammar, max_items);
}

void ForEachForm(const Grammar& grammar, const std::vector<FeatureTree>& letters, const AllFormsOptions& options,
                 const std::function<bool(const Form&)>& callback) {
  // Every way of answering yes or no: a run takes the answers so far, and `no` beyond them; then the last no
  // becomes a yes and what follows it is forgotten.
  const auto all_sharings = [&](const Form& form) {
    if (options.sharing.empty()) return callback(Canonical(form));
    std::vector<bool> answers;
    for (;;) {
      std::size_t asked = 0;
      const Form shared = Shared(form, grammar.tree, options.sharing, [&] {
        if (asked == answers.size()) answers.push_back(false);
        return bool(answers[asked++]);
      });
      if (!callback(shared)) return false;
      while (!answers.empty() && answers.back()) answers.pop_back();
      if (answers.empty()) return true;
      answers.back() = true;
    }
  };
  const int slots = static_cast<int>(letters.size()) + (options.with_empty ? 1 : 0);
  const int kinds = slots + static_cast<int>(options.boundaries.size());
  std::vector<int> word;
  const std::function<bool(std::size_t)> fill = [&](std::size_t length) {
    if (word.size() == length) {
      Form form;
      for (int kind : word) {
        if (kind >= slots) {
          AddBoundary(&form, options.boundaries[kind - slots]);
        } else {
          AddSlot(&form, kind < static_cast<int>(letters.size()) ? &letters[kind] : nullptr);
        }
      }
      return all_sharings(form);
    }
    for (int kind = 0; kind < kinds; ++kind) {
      const bool edge = word.empty() || word.size() + 1 == length || word.back() >= slots;
      if (kind >= slots && edge) continue;
      word.push_back(kind);
      const bool go_on = fill(length);
      word.pop_back();
      if (!go_on) return false;
    }
    return true;
  };
  for (int length = 1; length <= options.max_items; ++length) {
    if (!fill(length)) return;
  }
}

}  // namespace tiersmith::testing
