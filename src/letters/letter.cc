#include "letters/letter.h"

#include <algorithm>
#include <map>

namespace tiersmith {
namespace {

std::size_t Mix(std::size_t seed, std::size_t value) {
  return seed ^ (value + 0x9e3779b97f4a7c15ULL + (seed << 6) + (seed >> 2));
}

// One occurrence of a node in the string: a part, the object it is, and its daughters' occurrences.
struct Occurrence {
  LetterPart* part;
  InstanceId object;
};

LetterPart BuildPart(const Form& form, InstanceId id) {
  const Instance& instance = form.instances[id];
  LetterPart part;
  part.node = instance.node;
  part.value = instance.value;
  for (InstanceId daughter : instance.daughters) part.daughters.push_back(BuildPart(form, daughter));
  return part;
}

void CollectOccurrences(const Form& form, InstanceId id, LetterPart* part,
                        std::vector<std::vector<Occurrence>>* by_node) {
  (*by_node)[part->node].push_back({part, id});
  const Instance& instance = form.instances[id];
  for (std::size_t i = 0; i < instance.daughters.size(); ++i) {
    CollectOccurrences(form, instance.daughters[i], &part->daughters[i], by_node);
  }
}

// First and last daughter of a kind, by index into `daughters`; false if there is none.
bool DaughterRange(const LetterPart& part, NodeId node, std::size_t* first, std::size_t* last) {
  bool found = false;
  for (std::size_t i = 0; i < part.daughters.size(); ++i) {
    if (part.daughters[i].node != node) continue;
    if (!found) *first = i;
    *last = i;
    found = true;
  }
  return found;
}

// Decoding: parts get objects by union-find over part numbers.
class Decoder {
 public:
  Decoder(const std::vector<Letter>& letters, const Tree& tree) : letters_(letters), tree_(tree) {}

  std::optional<Form> Run() {
    by_node_.resize(tree_.nodes.size());
    for (std::size_t i = 0; i < letters_.size(); ++i) {
      if (letters_[i].kind == FormItem::Kind::kBoundary) continue;
      tops_.push_back(Number(letters_[i].part, letters_[i].kind == FormItem::Kind::kFloat));
    }
    for (NodeId node = kRootNode; node < tree_.nodes.size(); ++node) {
      if (!Identify(node)) return std::nullopt;
    }
    return Build();
  }

 private:
  struct PartInfo {
    const LetterPart* part;
    std::vector<int> daughters;
    int object;  // union-find parent
    bool floating;
  };

  int Number(const LetterPart& part, bool floating) {
    const int id = static_cast<int>(parts_.size());
    parts_.push_back({&part, {}, id, floating});
    by_node_[part.node].push_back(id);
    std::vector<int> daughters;
    for (const LetterPart& daughter : part.daughters) daughters.push_back(Number(daughter, false));
    parts_[id].daughters = std::move(daughters);
    return id;
  }

  int Find(int id) {
    while (parts_[id].object != id) id = parts_[id].object = parts_[parts_[id].object].object;
    return id;
  }

  bool Join(int a, int b) {
    if (ContentOf(*parts_[a].part) != ContentOf(*parts_[b].part)) return false;
    parts_[Find(b)].object = Find(a);
    return true;
  }

  std::vector<int> DaughtersOf(int id, NodeId node) const {
    std::vector<int> result;
    for (int daughter : parts_[id].daughters) {
      if (parts_[daughter].part->node == node) result.push_back(daughter);
    }
    return result;
  }

  // Identifies the instances of one kind, given that their mothers have been identified.
  bool Identify(NodeId node) {
    const NodeId mother = tree_[node].mother;
    const std::uint32_t bit = 1u << LinkBit(tree_, node);
    // Mothers and floats of this kind, in the order of the string.
    std::vector<int> line = by_node_[mother];
    for (int id : by_node_[node]) {
      if (parts_[id].floating) line.push_back(id);
    }
    std::sort(line.begin(), line.end());
    std::map<int, int> first_of;  // by object: its first part
    for (int id : by_node_[mother]) {
      first_of.emplace(Find(id), id);
    }
    int previous = -1;
    for (int id : line) {
      const bool is_float = parts_[id].part->node == node;
      const std::vector<int> own = is_float ? std::vector<int>{id} : DaughtersOf(id, node);
      if (own.empty()) {
        if (parts_[id].part->links & bit) return false;
        continue;
      }
      const int same = is_float ? id : first_of[Find(id)];
      if (same != id) {  // another part of the same mother; a contour held by two slots comes as a b a b
        const std::vector<int> before = DaughtersOf(same, node);
        if (before.size() != own.size()) return false;
        for (std::size_t i = 0; i < own.size(); ++i) {
          if (!Join(before[i], own[i])) return false;
        }
      }
      if (previous >= 0 && parts_[previous].part->node == mother && (parts_[previous].part->links & bit)) {
        if (is_float || !Join(DaughtersOf(previous, node).back(), own.front())) return false;
      }
      previous = id;
    }
    if (previous >= 0 && parts_[previous].part->node == mother && (parts_[previous].part->links & bit)) return false;
    return true;
  }

  InstanceId Emit(Form* form, int id) {
    const int object = Find(id);
    if (emitted_[object] >= 0) return static_cast<InstanceId>(emitted_[object]);
    const InstanceId instance = static_cast<InstanceId>(form->instances.size());
    emitted_[object] = instance;
    form->instances.push_back({parts_[id].part->node, parts_[id].part->value, {}});
    std::vector<InstanceId> daughters;
    for (int daughter : parts_[id].daughters) daughters.push_back(Emit(form, daughter));
    form->instances[instance].daughters = std::move(daughters);
    return instance;
  }

  Form Build() {
    Form form;
    emitted_.assign(parts_.size(), -1);
    std::size_t top = 0;
    for (const Letter& letter : letters_) {
      FormItem item;
      item.kind = letter.kind;
      item.boundary = letter.boundary;
      item.tags = letter.tags;
      if (letter.kind != FormItem::Kind::kBoundary) item.instance = Emit(&form, tops_[top++]);
      form.items.push_back(item);
    }
    return Canonical(form);
  }

  const std::vector<Letter>& letters_;
  const Tree& tree_;
  std::vector<PartInfo> parts_;
  std::vector<std::vector<int>> by_node_;
  std::vector<int> tops_;
  std::vector<std::int64_t> emitted_;
};

}  // namespace

std::size_t Hash(const LetterPart& part) {
  std::size_t hash = Mix(Mix(part.node, part.value), part.links);
  for (const LetterPart& daughter : part.daughters) hash = Mix(hash, Hash(daughter));
  return Mix(hash, part.daughters.size());
}

std::size_t Hash(const Letter& letter) {
  const std::size_t kind = Mix(static_cast<std::size_t>(letter.kind), static_cast<std::size_t>(letter.boundary));
  return Mix(Mix(kind, static_cast<std::size_t>(letter.tags)), Hash(letter.part));
}

int LinkBit(const Tree& tree, NodeId node) {
  const std::vector<NodeId>& daughters = tree[tree[node].mother].daughters;
  for (std::size_t i = 0; i < daughters.size(); ++i) {
    if (daughters[i] == node) return static_cast<int>(i);
  }
  return 0;
}

std::vector<Letter> Encode(const Form& form, const Tree& tree) {
  std::vector<Letter> letters;
  letters.reserve(form.items.size());
  for (const FormItem& item : form.items) {
    Letter letter;
    letter.kind = item.kind;
    letter.boundary = item.boundary;
    letter.tags = item.tags;
    if (item.kind != FormItem::Kind::kBoundary) letter.part = BuildPart(form, item.instance);
    letters.push_back(std::move(letter));
  }
  std::vector<std::vector<Occurrence>> by_node(tree.nodes.size());
  for (std::size_t i = 0; i < form.items.size(); ++i) {
    if (form.items[i].kind == FormItem::Kind::kBoundary) continue;
    CollectOccurrences(form, form.items[i].instance, &letters[i].part, &by_node);
  }
  for (NodeId node = kRootNode; node < tree.nodes.size(); ++node) {
    const std::uint32_t bit = 1u << LinkBit(tree, node);
    const Occurrence* previous = nullptr;
    std::size_t previous_last = 0;
    for (const Occurrence& mother : by_node[tree[node].mother]) {
      std::size_t first = 0, last = 0;
      if (!DaughterRange(*mother.part, node, &first, &last)) continue;
      if (previous != nullptr && previous->object != mother.object) {
        const InstanceId a = form.instances[previous->object].daughters[previous_last];
        const InstanceId b = form.instances[mother.object].daughters[first];
        if (a == b) previous->part->links |= bit;
      }
      previous = &mother;
      previous_last = last;
    }
  }
  return letters;
}

std::optional<Form> Decode(const std::vector<Letter>& letters, const Tree& tree) {
  return Decoder(letters, tree).Run();
}

std::optional<FeatureTree> RootContent(const Letter& letter) {
  for (const LetterPart& daughter : letter.part.daughters) {
    if (daughter.node == kRootNode) return ContentOf(daughter);
  }
  return std::nullopt;
}

LetterPart PartOf(const FeatureTree& content) {
  LetterPart part;
  part.node = content.node;
  part.value = content.value;
  for (const FeatureTree& daughter : content.daughters) part.daughters.push_back(PartOf(daughter));
  return part;
}

FeatureTree ContentOf(const LetterPart& part) {
  FeatureTree content;
  content.node = part.node;
  content.value = part.value;
  for (const LetterPart& daughter : part.daughters) content.daughters.push_back(ContentOf(daughter));
  return content;
}

bool RootGoesOn(const Letter& letter, const Tree& tree) {
  return letter.kind == FormItem::Kind::kSlot && (letter.part.links >> LinkBit(tree, kRootNode) & 1u) != 0;
}

int Alphabet::Intern(const Letter& letter) {
  const auto [it, added] = ids_.emplace(letter, static_cast<int>(letters_.size()));
  if (added) letters_.push_back(letter);
  return it->second;
}

int Alphabet::Find(const Letter& letter) const {
  const auto it = ids_.find(letter);
  return it == ids_.end() ? -1 : it->second;
}

}  // namespace tiersmith
