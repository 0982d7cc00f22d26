#include "compile/pattern.h"

#include "compile/requests.h"

#include <algorithm>
#include <set>
#include <unordered_map>

namespace tiersmith {
namespace {

// ---- the pattern as a program -----------------------------------------------------------------
struct Instruction {
  enum class Op { kSlot, kBoundary, kGap, kSplit, kAccept };
  Op op = Op::kAccept;
  int test = -1;  // kSlot: index into the list of tests
  int mark = -1;  // kSlot: label, or the number of an unlabelled end of a gap
  Boundary boundary = Boundary::kNone;
  int gap = -1;               // kGap: index into the list of gaps
  int next = 0;               // all but kSplit and kAccept
  std::vector<int> branches;  // kSplit
};

struct GapInfo {
  std::vector<NodeId> nodes;  // no slot between may bear one of them
  int left_mark = -1, right_mark = -1;
  bool nearest_left = false;  // the left end is changed: no nearer slot would do
  bool nearest_right = false;
};

struct Program {
  std::vector<Instruction> code;
  int start = 0;
  bool sees_empty = false;
  bool too_long = false;
};

// Quantities are unrolled, and may be nested: a program longer than this is refused, not built.
constexpr std::size_t kMostInstructions = 20'000;

// ---- configurations ---------------------------------------------------------------------------
// Zones of a spread (all as seen walking from the source to the target).
enum Zone : std::int32_t {
  kBefore = 0,      // neither end met yet
  kSourceZone = 1,  // every mother since the source is the source's own
  kLineZone = 2,    // past it; the only node met is the one that spreads
  kTargetZone = 3,  // another node met: its mother must be the target's own
  kDone = 4,
};

// [pc, phase, need, seen, mask, zone of spread 0, ...]; two states that loop have a pc of their own.
enum Field { kPc, kPhase, kNeed, kSeen, kMask, kZones };
constexpr std::int32_t kPrefix = -1, kSuffix = -2;

// Profile layout: kind, then one field each.
constexpr int kProfileKind = 0;
constexpr int kSlotKind = 0, kEmptyKind = 1, kBoundaryKind = 10;

struct MarkedArc {
  int profile = 0;
  int mark = -1;
  int role = -1;
  int next = 0;
};

struct MarkedMachine {
  std::vector<int> initial;
  std::vector<char> final;
  std::vector<std::vector<MarkedArc>> arcs;
  std::vector<std::int32_t> underway;  // PatternMachine::underway
  bool over_budget = false;
};

MarkedMachine OverBudget() {
  MarkedMachine machine;
  machine.over_budget = true;
  return machine;
}

// Drops states that no accepting run visits.
MarkedMachine Trim(const MarkedMachine& machine) {
  const int n = static_cast<int>(machine.arcs.size());
  const std::vector<char> keep = CanEnd(machine.arcs, machine.final);
  std::vector<int> number(n, -1);
  MarkedMachine result;
  for (int s = 0; s < n; ++s) {
    if (keep[s]) {
      number[s] = static_cast<int>(result.arcs.size());
      result.arcs.emplace_back();
      result.final.push_back(machine.final[s]);
      result.underway.push_back(machine.underway[s]);
    }
  }
  for (int s = 0; s < n; ++s) {
    if (!keep[s]) continue;
    for (MarkedArc arc : machine.arcs[s]) {
      if (!keep[arc.next]) continue;
      arc.next = number[arc.next];
      result.arcs[number[s]].push_back(arc);
    }
  }
  for (int s : machine.initial) {
    if (keep[s]) result.initial.push_back(number[s]);
  }
  return result;
}

// A deterministic view of a non-deterministic relation over (profile, mark), built as it is asked.
class Subsets {
 public:
  using Step = std::function<void(int state, int profile, int mark, std::vector<int>* next)>;
  Subsets(std::vector<int> initial, std::vector<char> final, Step step)
      : final_(std::move(final)), step_(std::move(step)) {
    start_ = Intern(std::move(initial));
  }
  int start() const { return start_; }
  int Next(int subset, int profile, int mark) {
    const auto key = std::make_tuple(subset, profile, mark);
    const auto it = memo_.find(key);
    if (it != memo_.end()) return it->second;
    std::vector<int> next;
    for (std::int32_t state : Key(sets_[subset])) step_(state, profile, mark, &next);
    const int id = Intern(std::move(next));
    memo_.emplace(key, id);
    return id;
  }
  bool Accepts(int subset) const {
    const Key& set = sets_[subset];
    return std::any_of(set.begin(), set.end(), [this](std::int32_t s) { return final_[s] != 0; });
  }

 private:
  int Intern(std::vector<int> set) {
    std::sort(set.begin(), set.end());
    set.erase(std::unique(set.begin(), set.end()), set.end());
    return sets_.Intern(Key(set.begin(), set.end()));
  }
  std::vector<char> final_;
  Step step_;
  KeyPool sets_;
  std::map<std::tuple<int, int, int>, int> memo_;
  int start_ = 0;
};

// The strings of `machine` on which `banned` does not accept.
MarkedMachine Minus(const MarkedMachine& machine, Subsets banned, std::size_t max_states) {
  if (machine.over_budget) return machine;
  MarkedMachine result;
  std::map<std::pair<int, int>, int> ids;
  std::vector<std::pair<int, int>> pairs;
  const auto intern = [&](int state, int subset) {
    const auto [it, added] = ids.emplace(std::make_pair(state, subset), static_cast<int>(pairs.size()));
    if (added) pairs.emplace_back(state, subset);
    return it->second;
  };
  for (int s : machine.initial) result.initial.push_back(intern(s, banned.start()));
  for (std::size_t at = 0; at < pairs.size(); ++at) {
    if (pairs.size() > max_states) return OverBudget();
    const auto [state, subset] = pairs[at];
    result.arcs.emplace_back();
    result.final.push_back(machine.final[state] && !banned.Accepts(subset));
    result.underway.push_back(machine.underway[state]);
    for (MarkedArc arc : machine.arcs[state]) {
      arc.next = intern(arc.next, banned.Next(subset, arc.profile, arc.mark));
      result.arcs.back().push_back(arc);
    }
  }
  return Trim(result);
}

bool Uses(const SlotTest& test, SlotTest::Op op) {
  return test.op == op ||
         std::any_of(test.args.begin(), test.args.end(), [op](const SlotTest& t) { return Uses(t, op); });
}

bool Contains(const FeatureTree& tree, NodeId node) {
  return tree.node == node || std::any_of(tree.daughters.begin(), tree.daughters.end(),
                                          [node](const FeatureTree& d) { return Contains(d, node); });
}

void KindsIn(const FeatureTree& tree, std::set<NodeId>* kinds) {
  kinds->insert(tree.node);
  for (const FeatureTree& daughter : tree.daughters) KindsIn(daughter, kinds);
}

}  // namespace

struct PatternCompiler::Impl {
  const Rule& rule;
  const RuleSpace& space;
  std::vector<const SlotTest*> tests;
  std::vector<GapInfo> gaps;
  std::vector<Spread> spreads;
  std::vector<char> changed;                  // by label
  std::vector<std::vector<NodeId>> inserted;  // by change: kinds that an insertion brings
  Program where;
  std::vector<Program> unless;
  int mark_count = 0;
  std::vector<int> where_order;  // labels in the order of the pattern
  KeyPool profile_keys;
  std::unordered_map<Key, int, KeyHash> profile_of;

  Impl(const Rule& r, const RuleSpace& s) : rule(r), space(s) {
    mark_count = static_cast<int>(rule.labels.size());
    Order(rule.where);
    changed.assign(rule.labels.size(), 0);
    for (const Change& change : rule.changes) {
      if (change.target >= 0) changed[change.target] = 1;
    }
    CollectSpreads();
    where = Compile(rule.where, /*main=*/true);
    for (const Pattern& pattern : rule.unless) unless.push_back(Compile(pattern, /*main=*/false));
  }

  void Order(const Pattern& pattern) {
    for (const PatternItem& item : pattern.items) {
      if (item.kind == PatternItem::Kind::kSlot && item.label >= 0) where_order.push_back(item.label);
      for (const Pattern& alternative : item.alternatives) Order(alternative);
    }
  }
  int Position(int label) const {
    return static_cast<int>(std::find(where_order.begin(), where_order.end(), label) - where_order.begin());
  }

  void CollectSpreads() {
    inserted.resize(rule.changes.size());
    for (std::size_t i = 0; i < rule.changes.size(); ++i) {
      const Change& change = rule.changes[i];
      if (change.op == Change::Op::kInsert) {
        std::set<NodeId> kinds;
        KindsIn(change.inserted, &kinds);
        inserted[i].assign(kinds.begin(), kinds.end());
      }
    }
    for (std::size_t i = 0; i < rule.changes.size(); ++i) {
      const Change& change = rule.changes[i];
      if (change.op != Change::Op::kSpread) continue;
      Spread spread;
      spread.change = static_cast<int>(i);
      spread.source = change.source;
      spread.target = change.target;
      spread.node = change.node;
      spread.mother = space.tree()[change.node].mother;
      spread.from_left = Position(change.source) < Position(change.target);
      for (std::size_t j = 0; j < rule.changes.size(); ++j) {
        const Change& other = rule.changes[j];
        if (other.op == Change::Op::kDelink && other.target == spread.target && other.node == spread.node) {
          spread.delinks = true;
        }
        if (other.op == Change::Op::kInsert && Contains(other.inserted, spread.node)) {
          // The place of an insertion among the labels: half a step before or after its host.
          const int place = 2 * Position(other.target) + (other.before ? -1 : 1);
          const int source = 2 * Position(spread.source), target = 2 * Position(spread.target);
          if ((source < place && place < target) || (target < place && place < source)) spread.inserts_between = true;
        }
      }
      spreads.push_back(spread);
    }
  }

  // ---- compiling ------------------------------------------------------------------------------
  Program Compile(const Pattern& pattern, bool main) {
    Program program;
    program.sees_empty = pattern.names_empty;
    program.code.push_back({});  // 0: accept
    program.start = CompileSequence(pattern, 0, main, &program);
    return program;
  }

  int Emit(Program* program, Instruction instruction) {
    program->code.push_back(std::move(instruction));
    return static_cast<int>(program->code.size()) - 1;
  }

  // Returns the entry of code that matches `pattern` and goes on at `next`.
  int CompileSequence(const Pattern& pattern, int next, bool main, Program* program) {
    if (program->code.size() > kMostInstructions) program->too_long = true;
    if (program->too_long) return next;
    for (std::size_t i = pattern.items.size(); i-- > 0;) {
      const PatternItem& item = pattern.items[i];
      Instruction instruction;
      instruction.next = next;
      switch (item.kind) {
        case PatternItem::Kind::kSlot: {
          instruction.op = Instruction::Op::kSlot;
          instruction.test = static_cast<int>(tests.size());
          tests.push_back(&item.test);
          instruction.mark = item.label;
          // An end of a gap is marked even without a label.
          if (main && instruction.mark < 0) {
            const bool before_gap =
                i + 1 < pattern.items.size() && pattern.items[i + 1].kind == PatternItem::Kind::kGap;
            const bool after_gap = i > 0 && pattern.items[i - 1].kind == PatternItem::Kind::kGap;
            if (before_gap || after_gap) instruction.mark = mark_count++;
          }
          if (main && instruction.mark >= 0 && i + 1 < pattern.items.size() &&
              pattern.items[i + 1].kind == PatternItem::Kind::kGap) {
            gaps[program->code[next].gap].left_mark = instruction.mark;
          }
          next = Emit(program, instruction);
          break;
        }
        case PatternItem::Kind::kBoundary:
          instruction.op = Instruction::Op::kBoundary;
          instruction.boundary = item.boundary;
          next = Emit(program, instruction);
          break;
        case PatternItem::Kind::kGap:
          instruction.op = Instruction::Op::kGap;
          instruction.gap = static_cast<int>(gaps.size());
          gaps.emplace_back();
          if (item.tier.has_value()) gaps.back().nodes.push_back(*item.tier);
          if (main) {
            gaps.back().right_mark = program->code[next].mark;
            if (!item.tier.has_value()) DescribeGap(pattern, i, &gaps.back());
          }
          next = Emit(program, instruction);
          break;
        case PatternItem::Kind::kGroup:
          next = CompileGroup(item, next, main, program);
          break;
      }
    }
    return next;
  }

  int CompileGroup(const PatternItem& item, int next, bool main, Program* program) {
    const auto one = [&](int after) {
      Instruction split;
      split.op = Instruction::Op::kSplit;
      for (const Pattern& alternative : item.alternatives) {
        split.branches.push_back(CompileSequence(alternative, after, main, program));
      }
      return split.branches.size() == 1 ? split.branches[0] : Emit(program, split);
    };
    int entry = next;
    if (item.max < 0) {
      Instruction loop;
      loop.op = Instruction::Op::kSplit;
      const int at = Emit(program, loop);
      const int body = one(at);
      program->code[at].branches = {body, next};
      entry = at;
    } else {
      for (int i = item.min; i < item.max; ++i) {
        Instruction option;
        option.op = Instruction::Op::kSplit;
        const int body = one(entry);
        option.branches = {body, next};
        entry = Emit(program, option);
      }
    }
    for (int i = 0; i < item.min; ++i) entry = one(entry);
    return entry;
  }

  static int LabelOf(const Pattern& pattern, std::size_t i) {
    return pattern.items[i].kind == PatternItem::Kind::kSlot ? pattern.items[i].label : -1;
  }

  void DescribeGap(const Pattern& pattern, std::size_t i, GapInfo* gap) {
    const int left = LabelOf(pattern, i - 1), right = LabelOf(pattern, i + 1);
    std::set<NodeId> across, at_ends;
    const std::size_t split = LabelsBefore(pattern, i);
    for (const Change& change : rule.changes) {
      const bool at_end = change.target >= 0 && (change.target == left || change.target == right);
      switch (change.op) {
        case Change::Op::kSpread: {
          const bool source_left = static_cast<std::size_t>(Position(change.source)) < split;
          const bool target_left = static_cast<std::size_t>(Position(change.target)) < split;
          if (source_left != target_left) across.insert(change.node);
          break;
        }
        case Change::Op::kDelink:
          if (at_end) at_ends.insert(change.node);
          break;
        case Change::Op::kSet:
        case Change::Op::kFill:
          for (const Setting& setting : change.settings) {
            if (at_end) at_ends.insert(setting.node);
          }
          break;
        case Change::Op::kInsert:
        case Change::Op::kDelete:
          break;
      }
    }
    std::set<NodeId>& nodes = across.empty() ? at_ends : across;
    nodes.erase(kRootNode);
    nodes.erase(kSlotNode);
    gap->nodes.assign(nodes.begin(), nodes.end());
    gap->nearest_left = left >= 0 && changed[left];
    gap->nearest_right = right >= 0 && changed[right];
  }

  // How many labels of the where-pattern stand before item i of this (sub)pattern. Gaps stand at the top level or in a
  // group of quantity one; positions are those of where_order.
  std::size_t LabelsBefore(const Pattern& pattern, std::size_t i) const {
    for (std::size_t j = i; j < pattern.items.size(); ++j) {
      const int label = FirstLabel(pattern.items[j]);
      if (label >= 0) return static_cast<std::size_t>(Position(label));
    }
    for (std::size_t j = i; j-- > 0;) {
      const int label = LastLabel(pattern.items[j]);
      if (label >= 0) return static_cast<std::size_t>(Position(label)) + 1;
    }
    return 0;
  }
  static int FirstLabel(const PatternItem& item) {
    if (item.kind == PatternItem::Kind::kSlot) return item.label;
    for (const Pattern& alternative : item.alternatives) {
      for (const PatternItem& inner : alternative.items) {
        const int label = FirstLabel(inner);
        if (label >= 0) return label;
      }
    }
    return -1;
  }
  static int LastLabel(const PatternItem& item) {
    if (item.kind == PatternItem::Kind::kSlot) return item.label;
    int last = -1;
    for (const Pattern& alternative : item.alternatives) {
      for (const PatternItem& inner : alternative.items) {
        const int label = LastLabel(inner);
        if (label >= 0) last = label;
      }
    }
    return last;
  }

  // ---- profiles -------------------------------------------------------------------------------
  int GapField(int gap) const { return 1 + static_cast<int>(tests.size()) + gap; }
  int SpreadField(int spread) const { return GapField(static_cast<int>(gaps.size())) + spread * kSpreadFields; }
  int LabelField(int label) const { return SpreadField(static_cast<int>(spreads.size())) + label; }

  // What a letter says to one spread.
  enum SpreadAnswer {
    kBearsNode,
    kBearsMother,
    kLeftLine,
    kLeftMother,
    kRightLine,
    kRightMother,
    kHeldLeft,
    kHeldRight,
    kHasRoom,
    kSpreadFields
  };

  int Profile(const Key& letter) {
    const auto it = profile_of.find(letter);
    if (it != profile_of.end()) return it->second;
    const int id = profile_keys.Intern(Describe(letter));
    profile_of.emplace(letter, id);
    return id;
  }

  Key Describe(const Key& letter) const {
    const int class_id = letter[0];
    const Letter& visible = space.classes()[class_id].visible;
    if (visible.kind == FormItem::Kind::kBoundary) {
      return Key{kBoundaryKind + static_cast<int>(visible.boundary)};
    }
    Key profile(LabelField(static_cast<int>(rule.labels.size())), 0);
    const bool empty = space.Of(class_id, kRootNode).count == 0;
    profile[kProfileKind] = empty ? kEmptyKind : kSlotKind;
    for (std::size_t i = 0; i < tests.size(); ++i) profile[1 + i] = space.classes().Matches(class_id, *tests[i]);
    for (std::size_t i = 0; i < gaps.size(); ++i) {
      profile[GapField(static_cast<int>(i))] = std::none_of(gaps[i].nodes.begin(), gaps[i].nodes.end(),
                                                            [&](NodeId n) { return space.Of(class_id, n).count > 0; });
    }
    for (std::size_t i = 0; i < spreads.size(); ++i) {
      DescribeSpread(letter, spreads[i], &profile[SpreadField(static_cast<int>(i))]);
    }
    for (std::size_t i = 0; i < rule.labels.size(); ++i) {
      profile[LabelField(static_cast<int>(i))] = changed[i] ? Changeable(letter, static_cast<int>(i)) : 1;
    }
    return profile;
  }

  void DescribeSpread(const Key& letter, const Spread& spread, std::int32_t* answers) const {
    const RuleSpace::Bearing& node = space.Of(letter[0], spread.node);
    const std::int32_t marks = space.Marks(letter, spread.node);
    const std::int32_t mother = space.Marks(letter, spread.mother);
    answers[kBearsNode] = node.count > 0;
    answers[kBearsMother] = node.mother;
    answers[kLeftLine] = (marks & kFromLeft) && node.count == 1;
    answers[kLeftMother] = (mother & kFromLeft) != 0;
    answers[kRightLine] = (marks & kToRight) && node.count == 1;
    answers[kRightMother] = (mother & kToRight) != 0;
    answers[kHeldLeft] = node.count > 0 && (marks & kObjectLeft);
    answers[kHeldRight] = node.count > 0 && (marks & kObjectRight);
    const int own = spread.delinks ? 0 : node.count;
    answers[kHasRoom] = own + 1 <= space.Room(letter[0], spread.node) && MothersFit(letter, spread.node);
  }

  // The class nodes that would be made above `node` stand in no span of theirs.
  bool MothersFit(const Key& letter, NodeId node) const {
    const NodeId lowest = space.LowestAncestor(letter[0], node);
    for (NodeId at = space.tree()[node].mother; at != lowest; at = space.tree()[at].mother) {
      if (space.Marks(letter, at) & kOver) return false;
    }
    return true;
  }

  // Set, fill and insert at this label cross no line.
  bool Changeable(const Key& letter, int label) const {
    for (std::size_t i = 0; i < rule.changes.size(); ++i) {
      const Change& change = rule.changes[i];
      if (change.target != label) continue;
      if (change.op == Change::Op::kSet || change.op == Change::Op::kFill) {
        for (const Setting& setting : change.settings) {
          if (!SettingFits(letter, setting, change.op == Change::Op::kFill)) return false;
        }
      } else if (change.op == Change::Op::kInsert) {
        for (NodeId node : inserted[i]) {
          const std::int32_t marks = space.Marks(letter, node);
          const std::int32_t side = change.before ? kFromLeft : kToRight;
          if (marks & (space.Of(letter[0], node).count > 0 ? side : kOver)) return false;
        }
      }
    }
    return true;
  }

  bool SettingFits(const Key& letter, const Setting& setting, bool fill) const;

  // ---- the automaton --------------------------------------------------------------------------
  struct Builder;
  MarkedMachine BuildMain(std::size_t max_states, KeyPool* roles) const;
  MarkedMachine BuildUnless(const Program& program, std::size_t max_states) const;
};

bool PatternCompiler::Impl::SettingFits(const Key& letter, const Setting& setting, bool fill) const {
  const RuleSpace::Bearing& bearing = space.Of(letter[0], setting.node);
  if (setting.values.empty() || (fill && bearing.count > 0)) return true;
  const std::int32_t marks = space.Marks(letter, setting.node);
  const bool is_class = space.tree()[setting.node].type == TreeNode::Type::kClass;
  if (bearing.count > 0 &&
      (is_class || ValuesOf(space.classes()[letter[0]].visible.part, setting.node) == setting.values)) {
    return true;  // asks nothing
  }
  if (setting.values.size() > 1 && static_cast<int>(setting.values.size()) > space.Room(letter[0], setting.node))
    return false;
  if (bearing.count == 0) return !(marks & kOver) && MothersFit(letter, setting.node);
  return !(bearing.count == 1 && (marks & kObjectLeft) && (marks & kObjectRight));
}

// Explores the configurations of one program.
struct PatternCompiler::Impl::Builder {
  const Impl& impl;
  const Program& program;
  bool main;
  std::set<int> own_marks;  // unless: the labels it shares
  KeyPool configs;
  KeyPool* roles;
  MarkedMachine machine;

  Builder(const Impl& i, const Program& p, bool is_main, KeyPool* role_pool)
      : impl(i), program(p), main(is_main), roles(role_pool) {
    for (const Instruction& instruction : program.code) {
      if (instruction.op == Instruction::Op::kSlot && instruction.mark >= 0) own_marks.insert(instruction.mark);
    }
  }

  std::size_t SpreadCount() const { return main ? impl.spreads.size() : 0; }

  Key Start(std::int32_t mask) const {
    Key config(kZones + SpreadCount(), 0);
    config[kPc] = kPrefix;
    config[kMask] = mask;
    return config;
  }

  // Where the program can stand before its next slot, gap or end, and the strongest boundary named on the way.
  void Close(int pc, std::int32_t need, std::set<std::pair<int, int>>* seen,
             std::vector<std::pair<int, int>>* result) const {
    if (!seen->emplace(pc, need).second) return;
    const Instruction& at = program.code[pc];
    switch (at.op) {
      case Instruction::Op::kSlot:
      case Instruction::Op::kGap:
      case Instruction::Op::kAccept:
        result->emplace_back(pc, need);
        break;
      case Instruction::Op::kBoundary:
        Close(at.next, std::max(need, static_cast<std::int32_t>(at.boundary)), seen, result);
        break;
      case Instruction::Op::kSplit:
        for (int branch : at.branches) Close(branch, need, seen, result);
        break;
    }
  }
  std::vector<std::pair<int, int>> Close(int pc) const {
    std::set<std::pair<int, int>> seen;
    std::vector<std::pair<int, int>> result;
    Close(pc, 0, &seen, &result);
    return result;
  }

  int Intern(const Key& config) {
    const int id = configs.Intern(config);
    if (id == static_cast<int>(machine.arcs.size())) {
      machine.arcs.emplace_back();
      machine.final.push_back(IsFinal(config));
      std::int32_t underway = 0;
      for (std::size_t j = 0; j < SpreadCount(); ++j) {
        if (config[kZones + j] != kBefore && config[kZones + j] != kDone) underway |= 1 << j;
      }
      machine.underway.push_back(underway);
    }
    return id;
  }

  bool IsFinal(const Key& config) const {
    if (config[kPc] == kSuffix) return true;
    if (config[kPc] == kPrefix) return false;
    return program.code[config[kPc]].op == Instruction::Op::kAccept;  // the end of the form is a boundary
  }

  // Configurations after the program consumed a slot (or, with `first`, before its first one).
  void After(const Key& base, int pc, bool first, std::vector<Key>* result) const {
    for (const auto& [at, need] : Close(pc)) {
      Key config = base;
      config[kPc] = at;
      config[kNeed] = need;
      config[kSeen] = first;
      const bool accept = program.code[at].op == Instruction::Op::kAccept;
      config[kPhase] = accept ? 2 : first ? 0 : 1;
      if (accept) {
        if (first || !Complete(config)) continue;
        if (need == 0) config = Suffix();
      }
      result->push_back(std::move(config));
    }
  }

  Key Suffix() const {
    Key config(kZones + SpreadCount(), 0);
    config[kPc] = kSuffix;
    return config;
  }

  bool Complete(const Key& config) const {
    for (std::size_t j = 0; j < SpreadCount(); ++j) {
      if ((config[kMask] >> j & 1) && config[kZones + j] != kDone) return false;
    }
    return true;
  }

  bool MarkAllowed(int mark) const { return main || own_marks.count(mark) == 0; }

  // The main machine emits marks itself; an unless machine reads them.
  void Add(int from, int profile, int mark, int role, const Key& to) {
    const int next = Intern(to);  // may add a state
    machine.arcs[from].push_back({profile, mark, role, next});
  }

  MarkedMachine Run(std::size_t max_states) {
    if (program.too_long) return OverBudget();
    const std::int32_t masks = 1 << SpreadCount();
    for (std::int32_t mask = 0; mask < masks; ++mask) {
      machine.initial.push_back(Intern(Start(mask)));
      std::vector<Key> starts;
      After(Start(mask), program.start, /*first=*/true, &starts);
      for (const Key& config : starts) machine.initial.push_back(Intern(config));
    }
    for (int at = 0; at < configs.size(); ++at) {
      if (static_cast<std::size_t>(configs.size()) > max_states) return OverBudget();
      const Key config = configs[at];
      for (int profile = 0; profile < impl.profile_keys.size(); ++profile) {
        Expand(at, config, profile, impl.profile_keys[profile]);
      }
    }
    return Trim(machine);
  }

  void Expand(int at, const Key& config, int profile, const Key& letter) {
    const std::int32_t kind = letter[kProfileKind];
    const std::int32_t boundary = kind >= kBoundaryKind ? kind - kBoundaryKind : 0;
    if (config[kPc] == kSuffix) {
      Add(at, profile, -1, -1, config);
      return;
    }
    if (config[kPc] == kPrefix) {
      Add(at, profile, -1, -1, config);
      std::vector<Key> starts;
      After(config, program.start, /*first=*/true, &starts);
      for (const Key& start : starts) {
        if (start[kNeed] == 0 || boundary >= start[kNeed]) Add(at, profile, -1, -1, start);
      }
      return;
    }
    const Instruction& instruction = program.code[config[kPc]];
    if (boundary > 0) {
      SkipBoundary(at, config, profile, boundary, instruction);
      return;
    }
    const bool visible = kind == kSlotKind || program.sees_empty;
    const bool through = visible && instruction.op == Instruction::Op::kGap && letter[impl.GapField(instruction.gap)];
    const bool before_first = config[kPhase] == 0 && config[kNeed] == 0;
    if (!before_first && (!visible || through)) {
      for (const Key& next : Walk(config, letter)) Add(at, profile, -1, -1, next);
    }
    if (!visible) return;
    if (instruction.op == Instruction::Op::kSlot) {
      Consume(at, config, profile, letter, config[kPc]);
    } else if (instruction.op == Instruction::Op::kGap) {
      for (const auto& [pc, need] : Close(instruction.next)) {
        if (need == 0 && program.code[pc].op == Instruction::Op::kSlot) Consume(at, config, profile, letter, pc);
      }
    }
  }

  void SkipBoundary(int at, const Key& config, int profile, std::int32_t boundary, const Instruction& instruction) {
    Key next = config;
    if (config[kPhase] == 0) {
      if (config[kNeed] > 0) Add(at, profile, -1, -1, next);  // more of the leading run
      return;
    }
    if (instruction.op == Instruction::Op::kAccept) {
      if (boundary >= config[kNeed]) next = Suffix();
      Add(at, profile, -1, -1, next);
      return;
    }
    if (boundary >= static_cast<std::int32_t>(Boundary::kWord)) return;
    if (config[kNeed] > 0) {
      if (boundary > config[kNeed]) return;
      if (boundary == config[kNeed]) next[kSeen] = 1;
    }
    Add(at, profile, -1, -1, next);
  }

  const std::int32_t* Answers(const Key& letter, std::size_t spread) const {
    return &letter[impl.SpreadField(static_cast<int>(spread))];
  }

  // One step of a zone away from the source; -1 if the line would cross.
  static std::int32_t Away(std::int32_t zone, const std::int32_t* answers, bool rightward) {
    if (!answers[kBearsMother]) return zone;
    const bool same_mother = answers[rightward ? kLeftMother : kRightMother];
    const bool on_line = answers[rightward ? kLeftLine : kRightLine];
    if (zone == kTargetZone) return same_mother ? kTargetZone : -1;
    if (zone == kSourceZone && same_mother) return kSourceZone;
    if (!answers[kBearsNode] || on_line) return kLineZone;
    return kTargetZone;
  }

  // All zones after a letter that stands between (or outside) the ends of the spreads.
  std::vector<Key> Walk(const Key& config, const Key& letter) const {
    std::vector<Key> result{config};
    for (std::size_t j = 0; j < SpreadCount(); ++j) {
      const std::int32_t zone = config[kZones + j];
      if (zone == kBefore || zone == kDone) continue;
      std::vector<Key> next;
      for (const Key& key : result) StepZone(key, j, Answers(letter, j), &next);
      result = std::move(next);
    }
    return result;
  }

  void StepZone(const Key& key, std::size_t j, const std::int32_t* answers, std::vector<Key>* next) const {
    const std::int32_t zone = key[kZones + j];
    if (impl.spreads[j].from_left) {
      const std::int32_t after = Away(zone, answers, true);
      if (after < 0) return;
      next->push_back(key);
      next->back()[kZones + j] = after;
      return;
    }
    // Reading towards the source: guess the zone from which this letter leads to the one we are in.
    for (std::int32_t guess : {kSourceZone, kLineZone, kTargetZone}) {
      if (Away(guess, answers, false) != zone) continue;
      next->push_back(key);
      next->back()[kZones + j] = guess;
    }
  }

  void Consume(int at, const Key& config, int profile, const Key& letter, int pc) {
    const Instruction& slot = program.code[pc];
    if (config[kNeed] > 0 && !config[kSeen]) return;
    if (!letter[1 + slot.test]) return;
    const int label = main && slot.mark >= 0 && slot.mark < static_cast<int>(impl.rule.labels.size()) ? slot.mark : -1;
    if (label >= 0 && !letter[impl.LabelField(label)]) return;
    std::vector<std::pair<Key, Key>> ways;  // configuration, role
    Key role;
    if (label >= 0 && impl.changed[label]) {
      role.assign(1 + SpreadCount(), 0);
      role[0] = label;
    }
    ways.emplace_back(config, role);
    for (std::size_t j = 0; j < SpreadCount(); ++j) {
      std::vector<std::pair<Key, Key>> next;
      for (const auto& [key, asks] : ways) MeetSpread(key, asks, j, label, Answers(letter, j), &next);
      ways = std::move(next);
    }
    for (const auto& [key, asks] : ways) {
      std::vector<Key> after;
      After(key, slot.next, /*first=*/false, &after);
      const int role_id = asks.empty() ? -1 : roles->Intern(asks);
      for (const Key& next : after) Add(at, profile, slot.mark, role_id, next);
    }
  }

  // What consuming a slot under `label` means to spread j.
  void MeetSpread(const Key& key, const Key& role, std::size_t j, int label, const std::int32_t* answers,
                  std::vector<std::pair<Key, Key>>* next) const {
    const Spread& spread = impl.spreads[j];
    const bool asked = key[kMask] >> j & 1;
    const std::int32_t zone = key[kZones + j];
    const auto go = [&](std::int32_t to, const Key& with) {
      Key after = key;
      after[kZones + j] = to;
      next->emplace_back(std::move(after), with);
    };
    if (label == spread.source) {
      if (asked != (answers[kBearsNode] != 0)) return;
      if (!asked) {
        next->emplace_back(key, role);
      } else if (spread.from_left) {
        go(kSourceZone, role);
      } else if (zone == kSourceZone) {
        go(kDone, role);
      }
      return;
    }
    if (label == spread.target) {
      if (!asked) {
        next->emplace_back(key, role);
        return;
      }
      for (std::int32_t from : {kSourceZone, kLineZone, kTargetZone}) {
        if (spread.from_left ? zone != from : zone != kBefore) continue;
        const bool same_mother = answers[kBearsMother] && answers[spread.from_left ? kLeftMother : kRightMother];
        if (from == kTargetZone && !same_mother) continue;
        const bool own = from == kSourceZone && same_mother;
        const bool held = own || answers[spread.from_left ? kHeldLeft : kHeldRight];
        if (!held && (!answers[kHasRoom] || spread.inserts_between)) continue;
        Key asks = role;
        asks[1 + j] = own ? Role::kAskOwnMother : Role::kAsk;
        go(spread.from_left ? kDone : from, asks);
      }
      return;
    }
    if (!asked || zone == kBefore || zone == kDone) {
      next->emplace_back(key, role);
      return;
    }
    std::vector<Key> walked;
    StepZone(key, j, answers, &walked);
    for (Key& after : walked) next->emplace_back(std::move(after), role);
  }
};

MarkedMachine PatternCompiler::Impl::BuildMain(std::size_t max_states, KeyPool* roles) const {
  return Builder(*this, where, /*is_main=*/true, roles).Run(max_states);
}

MarkedMachine PatternCompiler::Impl::BuildUnless(const Program& program, std::size_t max_states) const {
  return Builder(*this, program, /*is_main=*/false, nullptr).Run(max_states);
}

PatternCompiler::PatternCompiler(const Rule& rule, const RuleSpace& space) : impl_(new Impl(rule, space)) {}
PatternCompiler::~PatternCompiler() = default;
int PatternCompiler::Profile(const Key& annotated) { return impl_->Profile(annotated); }
int PatternCompiler::profiles() const { return impl_->profile_keys.size(); }
const std::vector<Spread>& PatternCompiler::spreads() const { return impl_->spreads; }
bool PatternCompiler::AsksOfSlotsBehind(bool rightward) const {
  return std::any_of(impl_->gaps.begin(), impl_->gaps.end(), [rightward](const GapInfo& gap) {
    return rightward ? gap.nearest_right : gap.nearest_left;  // the changed end is met last
  });
}

namespace {

// Strings marked as a match of the rule on which an unless-pattern matches the same labelled slots.
Subsets UnlessBan(const MarkedMachine& unless, std::set<int> labels) {
  return Subsets(unless.initial, unless.final,
                 [unless, labels](int state, int profile, int mark, std::vector<int>* next) {
                   const bool bound = labels.count(mark) > 0;
                   for (const MarkedArc& arc : unless.arcs[state]) {
                     if (arc.profile != profile) continue;
                     if (bound ? arc.mark == mark : arc.mark < 0) next->push_back(arc.next);
                   }
                 });
}

// Strings marked as a match in which the changed end of a gap could stand nearer: a run of the same machine that
// takes the other end where it is marked, and the changed end strictly between. State: 4 * run + progress.
Subsets NearerBan(const MarkedMachine& machine, int left, int right, bool left_moves) {
  std::vector<int> initial;
  std::vector<char> final(machine.arcs.size() * 4, 0);
  for (int s : machine.initial) initial.push_back(4 * s);
  for (std::size_t s = 0; s < machine.arcs.size(); ++s) final[4 * s + 3] = machine.final[s];
  const int moved = left_moves ? left : right;
  return Subsets(initial, final,
                 [machine, left, right, left_moves, moved](int state, int profile, int mark, std::vector<int>* next) {
                   const int progress = state % 4;
                   for (const MarkedArc& arc : machine.arcs[state / 4]) {
                     if (arc.profile != profile) continue;
                     int after = progress;
                     if (mark == left) {
                       if (progress != 0 || (left_moves ? arc.mark == left || arc.mark == right : arc.mark != left))
                         continue;
                       after = 1;
                     } else if (mark == right) {
                       if (progress != 2 || (left_moves ? arc.mark != right : arc.mark == left || arc.mark == right))
                         continue;
                       after = 3;
                     } else if (arc.mark == moved) {
                       if (progress != 1) continue;
                       after = 2;
                     } else if (arc.mark == left || arc.mark == right) {
                       continue;
                     }
                     next->push_back(4 * arc.next + after);
                   }
                 });
}

}  // namespace

PatternMachine PatternCompiler::Build(std::size_t max_states) const {
  KeyPool roles;
  MarkedMachine machine = impl_->BuildMain(max_states, &roles);
  for (const Program& program : impl_->unless) {
    std::set<int> labels;
    for (const Instruction& instruction : program.code) {
      if (instruction.op == Instruction::Op::kSlot && instruction.mark >= 0) labels.insert(instruction.mark);
    }
    const MarkedMachine unless = impl_->BuildUnless(program, max_states);
    if (unless.over_budget) machine = unless;
    machine = Minus(machine, UnlessBan(unless, labels), max_states);
  }
  const MarkedMachine whole = machine;
  for (const GapInfo& gap : impl_->gaps) {
    if (gap.nearest_left) machine = Minus(machine, NearerBan(whole, gap.left_mark, gap.right_mark, true), max_states);
    if (gap.nearest_right) machine = Minus(machine, NearerBan(whole, gap.left_mark, gap.right_mark, false), max_states);
  }
  PatternMachine result;
  result.over_budget = machine.over_budget;
  result.states = static_cast<int>(machine.arcs.size());
  result.initial = machine.initial;
  result.final = machine.final;
  result.underway = machine.underway;
  result.arcs.resize(machine.arcs.size());
  for (std::size_t s = 0; s < machine.arcs.size(); ++s) {
    for (const MarkedArc& arc : machine.arcs[s]) result.arcs[s].push_back({arc.profile, arc.role, arc.next});
  }
  for (int i = 0; i < roles.size(); ++i) {
    Role role;
    role.label = roles[i][0];
    for (std::size_t j = 1; j < roles[i].size(); ++j) role.asks.push_back(static_cast<Role::Ask>(roles[i][j]));
    result.roles.push_back(std::move(role));
  }
  return result;
}

}  // namespace tiersmith
