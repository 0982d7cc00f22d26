#include "compile/requests.h"

#include <algorithm>
#include <set>

#include "compile/flatten.h"

namespace tiersmith {

Content ContentUnder(const LetterPart& part, NodeId node) {
  Content content;
  for (const LetterPart& daughter : part.daughters) {
    if (daughter.node == node) content.push_back(ContentOf(daughter));
    const Content below = ContentUnder(daughter, node);
    content.insert(content.end(), below.begin(), below.end());
  }
  return content;
}

std::vector<Value> BorrowedValues(const Tree& tree, const Setting& setting, int value) {
  if (setting.differs) value = 1 - value;
  if (tree[setting.node].type == TreeNode::Type::kBare) return std::vector<Value>(value == 0 ? 0 : 1, Value{0});
  return {static_cast<Value>(value)};
}

RequestSpace::RequestSpace(const Rule& rule, const RuleSpace& space, const PatternCompiler& pattern)
    : rule_(rule), space_(space), pattern_(pattern), spreads_(pattern.spreads()) {
  std::set<NodeId> nodes;  // mothers have smaller numbers
  if (rule.kind == Rule::Kind::kComplete) {
    for (std::size_t node = kRootNode + 1; node < space.tree().nodes.size(); ++node) {
      if (space.tree().Dominates(kRootNode, static_cast<NodeId>(node))) nodes.insert(static_cast<NodeId>(node));
    }
  }
  for (const Change& change : rule.changes) {
    for (const Setting& setting : change.settings) nodes.insert(setting.node);
    switch (change.op) {
      case Change::Op::kSpread:
      case Change::Op::kDelink:
      case Change::Op::kSetAs:
      case Change::Op::kFillAs:
      case Change::Op::kMerge:
        nodes.insert(change.node);
        break;
      case Change::Op::kSetLiteral:
        nodes.insert(kRootNode);
        break;
      case Change::Op::kSet:
      case Change::Op::kFill:
      case Change::Op::kInsert:
      case Change::Op::kDelete:
      case Change::Op::kLengthen:
      case Change::Op::kShorten:
        break;
    }
  }
  nodes_.assign(nodes.begin(), nodes.end());
  for (std::size_t i = 0; i < rule.changes.size(); ++i) {
    if (rule.changes[i].op == Change::Op::kInsert && rule.changes[i].inserted_label >= 0) grown_.push_back(i);
  }
}

std::size_t RequestSpace::BlockOf(std::size_t change) const {
  const auto found = std::find(grown_.begin(), grown_.end(), change);
  return found == grown_.end() ? 0 : 1 + static_cast<std::size_t>(found - grown_.begin());
}

bool RequestSpace::AsksBeside(const std::int32_t* request, bool before, std::size_t node_index,
                              std::int32_t line) const {
  return std::any_of(grown_.begin(), grown_.end(), [&](std::size_t i) {
    return rule_.changes[i].before == before && (request[1 + BlockOf(i) * nodes_.size() + node_index] & line);
  });
}

void RequestSpace::GiveBeside(const std::int32_t* request, bool before, std::size_t node_index, std::int32_t line,
                              std::int32_t content, Key* contents) const {
  for (std::size_t i : grown_) {
    const std::size_t at = BlockOf(i) * nodes_.size() + node_index;
    if (rule_.changes[i].before == before && (request[1 + at] & line)) (*contents)[at] = content;
  }
}

int RequestSpace::IndexOf(NodeId node) const {
  const auto it = std::find(nodes_.begin(), nodes_.end(), node);
  return it == nodes_.end() ? -1 : static_cast<int>(it - nodes_.begin());
}

int RequestSpace::ContentIndex(const Content& content, bool is_long) const {
  std::size_t at = 0;
  while (at < contents_.size() && !(contents_[at] == content && (long_[at] != 0) == is_long)) ++at;
  if (at == contents_.size()) {
    contents_.push_back(content);
    long_.push_back(is_long);
  }
  return static_cast<int>(at);
}

bool RequestSpace::SpreadsFrom(bool left, std::size_t node_index) const {
  return std::any_of(spreads_.begin(), spreads_.end(),
                     [&](const Spread& s) { return s.from_left == left && s.node == nodes_[node_index]; });
}

Key RequestSpace::Of(const std::vector<const Role*>& roles, const Key& annotated) const {
  Key request = None();
  for (const Role* role : roles) {
    if (role->doubtful) request[0] |= kUnsure;
    for (std::size_t i = 0; i < rule_.changes.size(); ++i) {
      const Change& change = rule_.changes[i];
      if (role->merges >> i & 1) request[1 + IndexOf(change.node)] |= kMergeLeft;
      const int insertion = InsertionOf(rule_, change.target);
      if (HostOf(rule_, change.target) != role->label) continue;
      if (insertion >= 0) {
        const auto at = static_cast<std::size_t>(insertion);
        AskOf(i, *role, {space_.Inserted(rule_.changes[at], annotated), &request[1 + BlockOf(at) * nodes_.size()]});
        continue;
      }
      AskOf(i, *role, {annotated, &request[1]});
      switch (change.op) {
        case Change::Op::kSetLiteral:
          if (change.is_long &&
              ContentUnder(space_.classes()[annotated[0]].visible.part, kRootNode) == Content{change.inserted} &&
              !(space_.Marks(annotated, kRootNode) & (kFromLeft | kToRight))) {
            request[0] |= kLengthen;
          }
          break;
        case Change::Op::kLengthen:
          if (space_.Of(annotated[0], kRootNode).count > 0) request[0] |= kLengthen;
          break;
        case Change::Op::kShorten:
          if (space_.Marks(annotated, kRootNode) & (kFromLeft | kToRight)) request[0] |= kShorten;
          break;
        case Change::Op::kInsert:
          request[0] |= 1 << (kInsertShift + i);
          break;
        case Change::Op::kDelete:
          request[0] |= kDeleteSlot;
          break;
        case Change::Op::kSpread:
        case Change::Op::kDelink:
        case Change::Op::kSet:
        case Change::Op::kFill:
        case Change::Op::kSetAs:
        case Change::Op::kFillAs:
        case Change::Op::kMerge:
          break;  // of nodes
      }
    }
  }
  if (rule_.preserving && ReachesFurther(request, annotated)) request[0] |= kUnsure;
  return request;
}

// What a change asks of the nodes of its item.
void RequestSpace::AskOf(std::size_t i, const Role& role, const Item& item) const {
  const Change& change = rule_.changes[i];
  switch (change.op) {
    case Change::Op::kSpread:
      for (std::size_t j = 0; j < spreads_.size(); ++j) {
        std::int32_t held = 0;
        if (spreads_[j].change == static_cast<int>(i))
          item.asks[IndexOf(change.node)] |= AskSpread(role, j, item.letter, &held);
      }
      break;
    case Change::Op::kDelink:
      item.asks[IndexOf(change.node)] |= CutOf(change, role, item.letter);
      break;
    case Change::Op::kSet:
    case Change::Op::kFill:
      AskSettings(change, role, item);
      break;
    case Change::Op::kSetAs:
    case Change::Op::kFillAs:
      AskCopy(change.node, change.op == Change::Op::kFillAs, pattern_.ContentOf(role.values[pattern_.VariableOf(i)]),
              item);
      break;
    case Change::Op::kSetLiteral:
      AskContent(kRootNode, {change.inserted}, item, change.is_long);
      break;
    case Change::Op::kMerge:  // it depends on both items
    case Change::Op::kLengthen:
    case Change::Op::kShorten:
    case Change::Op::kInsert:
    case Change::Op::kDelete:
      break;
  }
}

bool RequestSpace::ReachesFurther(const Key& request, const Key& annotated) const {
  for (std::size_t i = 0; i < nodes_.size(); ++i) {
    if (request[1 + i] != 0 && space_.MotherElsewhere(annotated, nodes_[i])) return true;
  }
  return false;
}

bool RequestSpace::GivesLong(const Key& request) const {
  const int index = IndexOf(kRootNode);
  const std::int32_t content = index < 0 ? 0 : request[1 + index] >> kValuesShift;
  return content != 0 && long_[static_cast<std::size_t>(content) - 1] != 0;
}

bool RequestSpace::InConflict(const Role& a, const Role& b, const Key& annotated) const {
  return Clashes(Of({&a, &b}, annotated), annotated) && !Clashes(Of({&a}, annotated), annotated) &&
         !Clashes(Of({&b}, annotated), annotated);
}

bool RequestSpace::Clashes(const Key& request, const Key& annotated) const {
  return Clash(annotated, &request[1]) || std::any_of(grown_.begin(), grown_.end(), [&](std::size_t i) {
           return Clash(space_.Inserted(rule_.changes[i], annotated), &request[1 + BlockOf(i) * nodes_.size()]);
         });
}

// Two contents, more lines than there is room for, or a line and a content of one node.
bool RequestSpace::Clash(const Key& annotated, const std::int32_t* asks) const {
  for (std::size_t i = 0; i < nodes_.size(); ++i) {
    const std::int32_t ask = asks[i];
    if (ask & kClash) return true;
    const int count = space_.Of(annotated[0], nodes_[i]).count;
    const int cut = (ask & kCutFirst ? 1 : 0) + (ask & kCutLast ? 1 : 0) + (ask & kCutMiddle ? count - 2 : 0);
    const bool over = space_.Marks(annotated, nodes_[i]) & kOver;  // one instance on both sides
    const bool both = (ask & kLineLeft) && (ask & kLineRight) && !over;
    const int lines = both ? 2 : (ask & (kLineLeft | kLineRight)) ? 1 : 0;
    if (lines > 0 && count - cut + lines > space_.Room(annotated[0], nodes_[i])) return true;
    if ((ask >> kValuesShift) != 0 && (lines > 0 || cut > 0)) return true;
  }
  return false;
}

// The line that a spread draws, or none if the mother holds that very instance; then `held` gets its place.
std::int32_t RequestSpace::AskSpread(const Role& role, std::size_t j, const Key& annotated, std::int32_t* held) const {
  const Spread& spread = spreads_[j];
  if (role.asks[j] == Role::kNothing) return 0;
  const int count = space_.Of(annotated[0], spread.node).count;
  const bool object_line =
      count > 0 && (space_.Marks(annotated, spread.node) & (spread.from_left ? kObjectLeft : kObjectRight));
  if (role.asks[j] != Role::kAskOwnMother && !object_line) return spread.from_left ? kLineLeft : kLineRight;
  // Of a mother shared with the source, the instance that faces the target; else the one its own line leads to.
  const bool last = (role.asks[j] == Role::kAskOwnMother) == spread.from_left;
  *held |= last && count > 1 ? kCutLast : kCutFirst;
  return 0;
}

// What a delink cuts: all but what the same match spreads to the same mother.
std::int32_t RequestSpace::CutOf(const Change& change, const Role& role, const Key& annotated) const {
  const int count = space_.Of(annotated[0], change.node).count;
  std::int32_t held = 0;
  for (std::size_t j = 0; j < role.asks.size(); ++j) {
    const bool same = spreads_[j].target == role.label && spreads_[j].insertion < 0 && spreads_[j].node == change.node;
    if (same) AskSpread(role, j, annotated, &held);
  }
  std::int32_t all = 0;
  const std::vector<Value> values = ValuesOf(space_.classes()[annotated[0]].visible.part, change.node);
  for (int i = 0; i < count; ++i) {
    const bool first = i == 0, last = i + 1 == count;
    bool chosen = true;
    switch (change.member.which) {
      case Member::Which::kWhole:
        break;
      case Member::Which::kFirst:
        chosen = first;
        break;
      case Member::Which::kLast:
        chosen = last;
        break;
      case Member::Which::kValue:
        chosen = values[static_cast<std::size_t>(i)] == change.member.value;
        break;
    }
    if (chosen) all |= first ? kCutFirst : last ? kCutLast : kCutMiddle;
  }
  return all & ~held;
}

void RequestSpace::AskSettings(const Change& change, const Role& role, const Item& item) const {
  for (const Setting& setting : change.settings) {
    const bool is_class = space_.tree()[setting.node].type == TreeNode::Type::kClass;
    if (setting.variable >= 0 && is_class) {
      const int value = role.values[static_cast<std::size_t>(setting.variable)];
      AskCopy(setting.node, change.op == Change::Op::kFill, pattern_.ContentOf(value), item);
      continue;
    }
    const std::vector<Value> values =
        setting.variable < 0
            ? setting.values
            : BorrowedValues(space_.tree(), setting, role.values[static_cast<std::size_t>(setting.variable)] - 1);
    const int count = space_.Of(item.letter[0], setting.node).count;
    if (change.op == Change::Op::kFill && count > 0) continue;
    if (count > 0 && !values.empty() && is_class) continue;
    Content content;
    for (Value value : values) content.push_back({setting.node, value, {}});
    AskContent(setting.node, content, item);
  }
}

// The content that another item bears, or a variable stands for.
void RequestSpace::AskCopy(NodeId node, bool fill, const Content& content, const Item& item) const {
  if (fill && (content.empty() || space_.Of(item.letter[0], node).count > 0)) return;
  AskContent(node, content, item);
}

// Asks for nothing if just this is there.
void RequestSpace::AskContent(NodeId node, const Content& content, const Item& item, bool is_long) const {
  if (ContentUnder(space_.classes()[item.letter[0]].visible.part, node) == content) return;
  std::int32_t& at = item.asks[IndexOf(node)];
  at = Combine(at, AskFor(content, is_long));
}

std::int32_t RequestSpace::Combine(std::int32_t a, std::int32_t b) {
  const std::int32_t values_a = a >> kValuesShift, values_b = b >> kValuesShift;
  std::int32_t combined = (a | b) & ((1 << kValuesShift) - 1);
  if (values_a != 0 && values_b != 0 && values_a != values_b) combined |= kClash;
  return combined | (values_a != 0 ? values_a : values_b) << kValuesShift;
}

RequestCarrier::RequestCarrier(const RequestSpace& requests, bool rightward)
    : requests_(requests), from_(rightward ? kFromLeft : kToRight), onward_(rightward ? kToRight : kFromLeft) {
  const Tree& tree = requests.space().tree();
  for (NodeId node : requests.nodes()) {
    std::vector<NodeId> ancestors;
    for (NodeId at = tree[node].mother; at != kSlotNode; at = tree[at].mother) ancestors.push_back(at);
    ancestors_.push_back(std::move(ancestors));
  }
}

void RequestCarrier::Step(const Key& annotated, std::size_t node_index, std::int32_t* state,
                          std::int32_t* request) const {
  const RuleSpace& space = requests_.space();
  const NodeId anchor = space.LowestAncestor(annotated[0], requests_.nodes()[node_index]);
  for (std::size_t k = 0; k < ancestors_[node_index].size(); ++k) {
    const NodeId ancestor = ancestors_[node_index][k];
    if (space.Of(annotated[0], ancestor).count == 0) continue;  // goes by
    const std::int32_t marks = ancestor == anchor ? space.Marks(annotated, ancestor) : 0;
    if (marks & from_) *request = RequestSpace::Combine(*request, state[k]);
    state[k] = marks & onward_ ? *request : 0;
  }
}

}  // namespace tiersmith
