#include "compile/build_letter.h"

#include <algorithm>

namespace tiersmith {
namespace {

bool SameContent(const LetterPart& a, const WorkPart& b) {
  if (a.node != b.node || a.value != b.value || a.daughters.size() != b.daughters.size()) return false;
  for (std::size_t i = 0; i < a.daughters.size(); ++i) {
    if (!SameContent(a.daughters[i], b.daughters[i])) return false;
  }
  return true;
}

WorkPart Work(const LetterPart& part, Origin origin, int old_index) {
  WorkPart work;
  work.node = part.node;
  work.value = part.value;
  work.origin = origin;
  work.old_index = old_index;
  work.links = part.links;
  int sister = 0;
  for (std::size_t i = 0; i < part.daughters.size(); ++i) {
    sister = i > 0 && part.daughters[i - 1].node == part.daughters[i].node ? sister + 1 : 0;
    work.daughters.push_back(Work(part.daughters[i], Origin::kOwn, sister));
  }
  return work;
}

// Replaces stored bits by the object-level marks of the annotation, for nodes with bits in force.
void MarkLinks(WorkPart* part, const Key& annotated, const RuleSpace& space) {
  const std::vector<NodeId>& kinds = space.tree()[part->node].daughters;
  part->links = 0;
  for (std::size_t i = 0; i < kinds.size(); ++i) {
    if (space.LiveIndex(kinds[i]) >= 0 && (space.Marks(annotated, kinds[i]) & kObjectRight)) part->links |= 1u << i;
  }
  for (WorkPart& daughter : part->daughters) MarkLinks(&daughter, annotated, space);
}

}  // namespace

void Freshen(WorkPart* part) {
  if (part->origin != Origin::kOwn) return;
  part->origin = Origin::kFresh;
  for (WorkPart& daughter : part->daughters) Freshen(&daughter);
}

WorkPart FreshPart(const FeatureTree& content) {
  WorkPart part = Work(PartOf(content), Origin::kOwn, -1);
  Freshen(&part);
  return part;
}

const WorkPart* FindPart(const WorkPart& part, NodeId node, bool last) {
  const WorkPart* found = nullptr;
  for (const WorkPart& daughter : part.daughters) {
    const WorkPart* here = daughter.node == node ? &daughter : FindPart(daughter, node, last);
    if (here == nullptr) continue;
    found = here;
    if (!last) return found;
  }
  return found;
}

int ContentPool::Intern(const WorkPart& part) {
  Letter letter;
  letter.part = LetterBuilder::Plain(part, /*links=*/true);
  return parts_.Intern(letter);
}

WorkPart ContentPool::Get(int id, Origin origin) const { return Work(parts_[id].part, origin, -1); }

bool ContentPool::Equal(int id, const WorkPart& part) const { return SameContent(parts_[id].part, part); }

LetterPart LetterBuilder::Plain(const WorkPart& part, bool links) {
  LetterPart plain;
  plain.node = part.node;
  plain.value = part.value;
  if (links) plain.links = part.links;
  for (const WorkPart& daughter : part.daughters) plain.daughters.push_back(Plain(daughter, links));
  return plain;
}

WorkPart LetterBuilder::Before(const Key& annotated) const {
  const RuleSpace& space = requests_.space();
  WorkPart work = Work(space.classes()[annotated[0]].visible.part, Origin::kOwn, 0);
  MarkLinks(&work, annotated, space);
  return work;
}

int LetterBuilder::ContentOf(const Key& annotated, NodeId node, bool last, const std::int32_t* asks,
                             bool* unsure) const {
  const RuleSpace& space = requests_.space();
  BuiltLetter built;
  built.slot = Before(annotated);
  built.effective.assign(requests_.nodes().size(), 0);
  for (std::size_t i = 0; asks != nullptr && i < requests_.nodes().size(); ++i) {
    const NodeId under = requests_.nodes()[i];
    if (asks[i] == 0 || under == node || !space.tree().Dominates(node, under)) continue;
    // Lines there, or what gives way to the new content, may go on in other letters.
    if ((asks[i] & (kLineLeft | kLineRight | kMergeLeft)) ||
        (space.Marks(annotated, under) & (kObjectLeft | kObjectRight)))
      *unsure = true;
    Answer(i, annotated, asks, {}, &built);
  }
  const WorkPart* part = FindPart(built.slot, node, last);
  return part == nullptr ? -1 : pool_.Intern(*part);
}

std::int32_t LetterBuilder::CarryContent(const Key& annotated, NodeId node, bool rightward, bool needed,
                                         const std::int32_t* asks, std::int32_t* state, bool* unsure) const {
  const RuleSpace& space = requests_.space();
  const RuleSpace::Bearing& bearing = space.Of(annotated[0], node);
  const std::int32_t mother = bearing.mother ? space.Marks(annotated, space.tree()[node].mother) : 0;
  if (bearing.mother && !(mother & (rightward ? kFromLeft : kToRight))) state[1] = state[0];
  const std::int32_t content = (bearing.mother ? state[1] : state[0]) - 1;
  if (bearing.mother && !(mother & (rightward ? kToRight : kFromLeft))) state[1] = 0;
  if (bearing.count > 0) state[0] = needed ? ContentOf(annotated, node, rightward, asks, unsure) + 1 : 0;
  return content;
}

int LetterBuilder::ClassOf(const WorkPart& slot, int like) const {
  Letter letter = requests_.space().classes()[like].visible;
  letter.part = Plain(slot, /*links=*/false);
  return requests_.space().classes().ClassWithRestOf(like, letter);
}

// The part that bears (or would bear) `node`; with `make`, class nodes on the way are made fresh.
WorkPart* LetterBuilder::MotherFor(WorkPart* slot, NodeId node, bool make) const {
  const Tree& tree = requests_.space().tree();
  std::vector<NodeId> path;
  for (NodeId at = tree[node].mother; at != kSlotNode; at = tree[at].mother) path.push_back(at);
  WorkPart* part = slot;
  for (std::size_t i = path.size(); i-- > 0;) {
    const NodeId kind = path[i];
    auto it = std::find_if(part->daughters.begin(), part->daughters.end(),
                           [kind](const WorkPart& d) { return d.node == kind; });
    if (it == part->daughters.end()) {
      if (!make) return nullptr;
      WorkPart fresh;
      fresh.node = kind;
      fresh.origin = Origin::kFresh;
      // Daughters stand in tree order of their kinds.
      const std::vector<NodeId>& order = tree[part->node].daughters;
      const auto rank = [&order](NodeId n) { return std::find(order.begin(), order.end(), n) - order.begin(); };
      it = std::find_if(part->daughters.begin(), part->daughters.end(),
                        [&](const WorkPart& d) { return rank(d.node) > rank(kind); });
      it = part->daughters.insert(it, fresh);
    }
    part = &*it;
  }
  return part;
}

BuiltLetter LetterBuilder::Build(const Key& annotated, const std::int32_t* asks, const Lines& lines) const {
  const RuleSpace& space = requests_.space();
  BuiltLetter built;
  built.slot = Before(annotated);
  built.effective.assign(requests_.nodes().size(), 0);
  const int root = requests_.IndexOf(kRootNode);
  const bool new_root = root >= 0 && asks[root] >> kValuesShift != 0;
  // What is asked of nodes under one that is cut or given way is asked of those that were there.
  for (const bool above_relinked : {true, false}) {
    for (std::size_t i = 0; i < requests_.nodes().size(); ++i) {
      const NodeId node = requests_.nodes()[i];
      if (asks[i] == 0) continue;
      // What is asked of nodes under the root was asked of the old one; its other slots see to that.
      if (new_root && node != kRootNode) continue;
      if (asks[i] & kClash) built.clash = true;
      const NodeId relinked = RelinkedAbove(node, asks);
      if ((relinked != kSlotNode) != above_relinked) continue;
      if (relinked != kSlotNode && space.Of(annotated[0], relinked).count == 0) continue;
      const NodeId mother = space.LowestAncestor(annotated[0], node);
      // What moves here may hold that mother too.
      if (relinked != kSlotNode && mother != relinked && (space.Marks(annotated, mother) & (kFromLeft | kToRight)))
        built.unsure = true;
      Answer(i, annotated, asks, lines, &built);
    }
  }
  if (std::find(built.effective.begin(), built.effective.end(), 1) != built.effective.end()) {
    for (WorkPart& top : built.slot.daughters) Prune(&top);
  }
  return built;
}

// Does the letter get something new by this?
bool LetterBuilder::Gives(std::int32_t ask) const {
  const std::int32_t values = ask >> kValuesShift;
  return (ask & (kLineLeft | kLineRight)) || (values > 0 && !requests_.contents()[values - 1].empty());
}

// The highest node above this one of which a line is drawn or cut; none: the slot.
NodeId LetterBuilder::RelinkedAbove(NodeId node, const std::int32_t* asks) const {
  for (std::size_t i = 0; i < requests_.nodes().size(); ++i) {
    const NodeId above = requests_.nodes()[i];
    if (above == node || !(asks[i] & (kCutAll | kLineLeft | kLineRight))) continue;
    if (requests_.space().tree().Dominates(above, node)) return above;
  }
  return kSlotNode;
}

void LetterBuilder::Answer(std::size_t index, const Key& annotated, const std::int32_t* asks, const Lines& lines,
                           BuiltLetter* built) const {
  const NodeId node = requests_.nodes()[index];
  WorkPart* mother = MotherFor(&built->slot, node, Gives(asks[index]));
  if (mother != nullptr) Relist(mother, node, asks[index], index, annotated, lines, built);
}

BuiltLetter LetterBuilder::BuildInserted(std::size_t change, const Key& plain, const Key& request, Lines lines) const {
  const std::size_t block = requests_.BlockOf(change);
  BuiltLetter built;
  if (block == 0) {
    built.slot = Before(plain);
  } else {
    const std::size_t at = block * requests_.nodes().size();
    if (lines.left != nullptr) lines.left += at;
    if (lines.right != nullptr) lines.right += at;
    built = Build(plain, &request[1 + at], lines);
  }
  Freshen(&built.slot);
  built.slot.origin = Origin::kOwn;
  return built;
}

// Gives `mother` its new list of `node`: left line, own, right line; or fresh values.
void LetterBuilder::Relist(WorkPart* mother, NodeId node, std::int32_t request, std::size_t index, const Key& annotated,
                           const Lines& lines, BuiltLetter* built) const {
  const RuleSpace& space = requests_.space();
  std::vector<WorkPart> old, others;
  for (WorkPart& daughter : mother->daughters) (daughter.node == node ? old : others).push_back(std::move(daughter));
  std::vector<WorkPart> list;
  for (std::size_t i = 0; i < old.size(); ++i) {
    const std::int32_t cut = i == 0 ? kCutFirst : i + 1 == old.size() ? kCutLast : kCutMiddle;
    if (!(request & cut)) list.push_back(old[i]);
  }
  bool effective = list.size() != old.size();
  const bool lines_asked = request & (kLineLeft | kLineRight);
  if (lines_asked && DrawLines(node, request, index, annotated, lines, &list, &built->clash)) effective = true;
  const std::int32_t values = request >> kValuesShift;
  if (values > 0) {
    if (effective) built->clash = true;  // a line and a content
    effective = true;
    list.clear();
    for (const FeatureTree& content : requests_.contents()[values - 1]) list.push_back(FreshPart(content));
  }
  built->effective[index] = effective || (request & kMergeLeft);
  const std::vector<NodeId>& order = space.tree()[mother->node].daughters;
  const auto rank = [&order](NodeId n) { return std::find(order.begin(), order.end(), n) - order.begin(); };
  mother->daughters = std::move(others);
  const auto at = std::find_if(mother->daughters.begin(), mother->daughters.end(),
                               [&](const WorkPart& d) { return rank(d.node) > rank(node); });
  mother->daughters.insert(at, list.begin(), list.end());
}

// Adds the lines asked for at both ends of what the mother keeps; true if any is new.
bool LetterBuilder::DrawLines(NodeId node, std::int32_t request, std::size_t index, const Key& annotated,
                              const Lines& lines, std::vector<WorkPart>* list, bool* clash) const {
  const std::int32_t left = (request & kLineLeft) && lines.left != nullptr ? lines.left[index] : -1;
  const std::int32_t right = (request & kLineRight) && lines.right != nullptr ? lines.right[index] : -1;
  bool add_left = left >= 0, add_right = right >= 0;
  if (((request & kLineLeft) && !add_left) || ((request & kLineRight) && !add_right)) {
    *clash = true;  // no such bearer: no form reads so
  }
  if (list->empty() && add_left && add_right) {
    if (requests_.space().Marks(annotated, node) & kOver) {
      add_left = false;  // one instance, whose span passes over this mother
    } else if (pool_.Equal(left, pool_.Get(right, Origin::kOwn))) {
      *clash = true;
    }
  } else if (!list->empty()) {
    if (add_left && pool_.Equal(left, list->front())) add_left = false;
    if (add_right && pool_.Equal(right, list->back())) add_right = false;
  }
  if (add_left) list->insert(list->begin(), pool_.Get(left, lines.left_origin));
  if (add_right) list->push_back(pool_.Get(right, lines.right_origin));
  if (!add_left && !add_right) return false;
  if (static_cast<int>(list->size()) > requests_.space().Room(annotated[0], node)) *clash = true;
  return true;
}

// Removes class nodes with nothing under them; true if `part` itself is such a node.
bool LetterBuilder::Prune(WorkPart* part) const {
  const TreeNode& kind = requests_.space().tree()[part->node];
  part->daughters.erase(
      std::remove_if(part->daughters.begin(), part->daughters.end(), [this](WorkPart& d) { return Prune(&d); }),
      part->daughters.end());
  const bool is_class = kind.type == TreeNode::Type::kClass && part->node != kSlotNode && part->node != kRootNode;
  const bool hides = part->value != 0;  // LetterClasses: something hidden stands under it
  return is_class && !kind.standing && part->daughters.empty() && !hides;
}

}  // namespace tiersmith
