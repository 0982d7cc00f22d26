#include "compile/pattern.h"

#include <algorithm>
#include <set>
#include <unordered_map>

#include "compile/flatten.h"
#include "compile/plan.h"
#include "compile/requests.h"

namespace tiersmith {
namespace {

// ---- the pattern as a program -----------------------------------------------------------------
struct Instruction {
  enum class Op { kSlot, kBoundary, kSameMorpheme, kGap, kSplit, kAccept };
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

// [pc, phase, need, label of the boundary needed (+1), seen, mask, zone of spread 0, ..., variable 0, ..., condition 0, ...]; two states that loop have a pc of
// their own. A variable: 1 + its value once it is met. A condition: what its first item told (ConditionState). Last, for
// each merge, 1 + the content of its left item while that is the last one, and for each watch its WatchState. The mask says which spreads have a source that
// bears the node, and which merges make one of two.
enum Field { kPc, kPhase, kNeed, kNeedLabel, kSeen, kMask, kZones };
constexpr std::int32_t kPrefix = -1, kSuffix = -2;

// A watched instance. Before the item: does the one that goes on have holders outside the match, and are they all within the
// instance of the free node that goes on? Behind the item, while it goes on: may holders outside follow, being free?
enum WatchState : std::int32_t { kUnheld = 0, kFreelyHeld = 1, kHeldOutside = 2, kOwed = 3, kFreelyOwed = 4 };

// In the last entry of a role, beside the merges: whether the change crosses a line is not known.
constexpr std::int32_t kDoubtful = 1 << 30;

// Needs of a boundary: of a strength, none at all (`&`), or the form's own edge.
constexpr std::int32_t kNoBoundary = -1;
constexpr std::int32_t kFormEdge = static_cast<std::int32_t>(Boundary::kPhrase) + 1;

// A condition that asks for the very instance, between its two items; one that compares contents keeps 1 + the content.
enum ConditionState : std::int32_t { kLacks = -1, kNotMet = 0, kStillHeld = 1, kLost = 2 };

// Profile layout: kind, then one field each.
constexpr int kProfileKind = 0;
constexpr int kSlotKind = 0, kEmptyKind = 1, kBoundaryKind = 10;
constexpr int kOutsideStem = 8;  // added to the kind of a boundary across which no stem goes on

struct MarkedArc {
  int profile = 0;
  int mark = -1;
  int role = -1;
  int next = 0;
  bool first = false;  // it consumes the first slot of the match
  bool last = false;   // its last one
  int bound = -1;      // index into Pools::bindings, where an unless-pattern shares variables
};

// What the arcs of where-patterns refer to.
struct Pools {
  KeyPool roles;     // Impl::RoleOf reads them
  KeyPool bindings;  // by variable of the rule: 1 + its value where it is known
};

// By variable of the where-pattern: 1 + the value that a run of an unless-pattern takes it to have.
using Given = std::map<int, std::int32_t>;

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
  using Step = std::function<void(int state, const MarkedArc& arc, std::vector<int>* next)>;
  Subsets(std::vector<int> initial, std::vector<char> final, Step step)
      : final_(std::move(final)), step_(std::move(step)) {
    start_ = Intern(std::move(initial));
  }
  // The strings that have no such run.
  Subsets Others() && {
    others_ = true;
    return std::move(*this);
  }
  int start() const { return start_; }
  int Next(int subset, const MarkedArc& arc) {
    const auto key = std::make_tuple(subset, arc.profile, arc.mark, arc.role, arc.first, arc.bound);
    const auto it = memo_.find(key);
    if (it != memo_.end()) return it->second;
    std::vector<int> next;
    for (std::int32_t state : Key(sets_[subset])) step_(state, arc, &next);
    const int id = Intern(std::move(next));
    memo_.emplace(key, id);
    return id;
  }
  bool Accepts(int subset) const {
    const Key& set = sets_[subset];
    return std::any_of(set.begin(), set.end(), [this](std::int32_t s) { return final_[s] != 0; }) != others_;
  }

 private:
  int Intern(std::vector<int> set) {
    std::sort(set.begin(), set.end());
    set.erase(std::unique(set.begin(), set.end()), set.end());
    return sets_.Intern(Key(set.begin(), set.end()));
  }
  std::vector<char> final_;
  Step step_;
  bool others_ = false;
  KeyPool sets_;
  std::map<std::tuple<int, int, int, int, bool, int>, int> memo_;
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
      arc.next = intern(arc.next, banned.Next(subset, arc));
      result.arcs.back().push_back(arc);
    }
  }
  return Trim(result);
}

bool Uses(const SlotTest& test, SlotTest::Op op) {
  return test.op == op ||
         std::any_of(test.args.begin(), test.args.end(), [op](const SlotTest& t) { return Uses(t, op); });
}

// The tests of agreement in a test, all of which must hold.
void CollectAgreeing(const SlotTest& test, std::vector<const FeatureTest*>* agreeing) {
  for (const FeatureTest& feature : test.bundle) {
    if (feature.variable >= 0) agreeing->push_back(&feature);
  }
  for (const SlotTest& inner : test.args) CollectAgreeing(inner, agreeing);
}

// The strength of boundary from which on a domain ends. (Stems have more to them: Builder::Inside.)
std::int32_t EdgeOf(Domain domain) {
  switch (domain) {
    case Domain::kMorpheme:
      return static_cast<std::int32_t>(Boundary::kMorpheme);
    case Domain::kStem:
    case Domain::kHost:
      return static_cast<std::int32_t>(Boundary::kClitic);
    case Domain::kWord:
      return static_cast<std::int32_t>(Boundary::kWord);
    case Domain::kPhrase:
      return static_cast<std::int32_t>(Boundary::kPhrase);
  }
  return 0;
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
  // A test of a slot: what one letter tells, and where its tests of agreement stand in `agreeing`.
  struct Asked {
    const SlotTest* test;
    std::size_t agreeing_begin, agreeing_end;
  };
  // A condition, its items as they stand.
  struct Compared {
    Condition::Test test;
    NodeId node;
    int left, right;  // labels
    Member left_member, right_member;

    bool OfInstance() const { return test == Condition::Test::kSame || test == Condition::Test::kNotSame; }
  };
  struct ClausePrograms {
    const Clause* clause;
    std::set<int> labels;
    Program where;
    std::vector<Program> unless;
    std::int32_t spreads = 0;  // bits of the mask: spreads of this clause, then its merges
    std::vector<Compared> conditions;
    std::set<int> shared;  // variables of the where-pattern that unless-patterns use as well
  };
  // A change that gives its target what the source bears, or what a variable of the rule stands for.
  struct Copy {
    std::size_t change;
    int source, target;  // labels of the pattern; source: -1 for a variable
    int insertion;       // the target is what this change inserts beside `target`; -1: the item itself
    NodeId node;
    Member member;
    bool fill;
    int variable;
    std::set<std::int32_t> known;  // values met so far: 0 for nothing, else 1 + the content
    bool spreads = false;          // a line is drawn: only what `preserving` asks is judged here
  };
  struct Merge {
    std::size_t change;
    int left, right;  // labels
    NodeId node;
  };
  // `sharing blocked`: an instance of `node` that the item of `label` bears may have no holder outside the match, but one that
  // holds it through a node that the item's bundle says is shared (`free`; -1: none says so).
  struct Watch {
    int label;
    NodeId node;
    int free;
    std::vector<NodeId> mentioned;  // it is about this node if it is the nearest above one of these that the item bears
  };
  // A setting whose content is that of a variable; of a class node it is a Copy.
  struct Borrowed {
    int label;      // of the pattern
    int insertion;  // as of a Copy
    const Setting* setting;
    bool fill;
  };
  std::vector<Asked> tests;
  std::vector<const FeatureTest*> agreeing;
  std::vector<Borrowed> borrowed;
  std::vector<Copy> copies;
  std::vector<Merge> merges;
  std::vector<Watch> watches;
  int variables = 0;  // those of the rule, then one for each copy
  std::vector<GapInfo> gaps;
  std::vector<Spread> spreads;
  std::vector<char> changed;                  // by label
  std::vector<std::vector<NodeId>> inserted;  // by change: kinds that an insertion brings
  std::vector<ClausePrograms> clauses;
  std::optional<Program> inside;  // Rule::inside
  int mark_count = 0;
  std::vector<int> where_order;  // labels in the order of the pattern
  KeyPool profile_keys;
  std::unordered_map<Key, int, KeyHash> profile_of;
  KeyPool value_sets;          // sets of values that a test of agreement allows
  Alphabet contents;           // that are compared or copied
  std::vector<Content> lists;  // by content: the same as trees
  KeyPool letters;             // where what is asked cannot be told before: all of an annotated letter
  const Judge* judge = nullptr;

  Impl(const Rule& r, const RuleSpace& s) : rule(r), space(s) {
    mark_count = static_cast<int>(rule.labels.size());
    for (const Clause* clause : ClausesOf(rule)) Order(clause->where);
    changed.assign(rule.labels.size(), 0);
    for (const Change& change : rule.changes) {
      if (change.target >= 0) changed[static_cast<std::size_t>(HostOf(rule, change.target))] = 1;
    }
    CollectSpreads();
    CollectCopies();
    for (const Clause* clause : ClausesOf(rule)) AddClause(*clause);
    if (rule.inside) inside = Compile(*rule.inside, /*main=*/false);
    if (rule.sharing_blocked) CollectWatches();
    for (const Change& change : rule.changes) {
      for (const Setting& setting : change.settings) {
        if (setting.variable < 0 || IsClassNode(setting.node)) continue;
        borrowed.push_back(
            {HostOf(rule, change.target), InsertionOf(rule, change.target), &setting, change.op == Change::Op::kFill});
      }
    }
  }

  void CollectWatches() {
    for (std::size_t label = 0; label < rule.labels.size(); ++label) {
      if (!changed[label] || rule.KindOf(static_cast<int>(label)) != Clause::LabelKind::kSlot) continue;
      std::vector<NodeId> shared;
      const std::vector<NodeId> mentioned = MentionedFor(rule, static_cast<int>(label), &shared);
      std::set<NodeId> above;
      for (NodeId node : mentioned) {
        for (; node != kSlotNode; node = space.tree()[node].mother) above.insert(node);
      }
      for (NodeId node : above) {
        int free = -1;
        for (NodeId at = node; at != kSlotNode && free < 0; at = space.tree()[at].mother) {
          if (std::find(shared.begin(), shared.end(), at) != shared.end()) free = at;
        }
        watches.push_back({static_cast<int>(label), node, free, mentioned});
      }
    }
  }

  void CollectCopies() {
    variables = rule.variables;
    for (std::size_t i = 0; i < rule.changes.size(); ++i) {
      const Change& change = rule.changes[i];
      for (const Setting& setting : change.settings) {
        if (setting.variable < 0 || !IsClassNode(setting.node)) continue;
        copies.push_back({i,
                          -1,
                          HostOf(rule, change.target),
                          InsertionOf(rule, change.target),
                          setting.node,
                          {},
                          change.op == Change::Op::kFill,
                          setting.variable,
                          {}});
      }
      if (change.op == Change::Op::kSetAs || change.op == Change::Op::kFillAs) {
        copies.push_back({i,
                          change.source,
                          HostOf(rule, change.target),
                          InsertionOf(rule, change.target),
                          change.node,
                          change.member,
                          change.op == Change::Op::kFillAs,
                          variables++,
                          {}});
      } else if (change.op == Change::Op::kSpread && rule.preserving) {
        // What travels must be known where it is judged.
        Member facing = change.member;
        if (facing.which == Member::Which::kWhole) {
          facing.which = Place(change.source) < Place(change.target) ? Member::Which::kLast : Member::Which::kFirst;
        }
        copies.push_back({i,
                          change.source,
                          HostOf(rule, change.target),
                          InsertionOf(rule, change.target),
                          change.node,
                          facing,
                          false,
                          variables++,
                          {},
                          true});
      } else if (change.op == Change::Op::kMerge) {
        changed[static_cast<std::size_t>(change.source)] = 1;
        if (InsertsBetween(change)) continue;  // no neighbours
        const bool forward = Place(change.source) < Place(change.target);
        merges.push_back(
            {i, forward ? change.source : change.target, forward ? change.target : change.source, change.node});
      }
    }
  }

  void AddClause(const Clause& clause) {
    ClausePrograms programs;
    programs.clause = &clause;
    std::set<int>& labels = programs.labels;
    const auto note = [&labels](const auto& self, const Pattern& pattern) -> void {
      for (const PatternItem& item : pattern.items) {
        if (item.label >= 0) labels.insert(item.label);
        for (const Pattern& alternative : item.alternatives) self(self, alternative);
      }
    };
    note(note, clause.where);
    for (std::size_t j = 0; j < spreads.size(); ++j) {
      if (labels.count(spreads[j].target) > 0) programs.spreads |= 1 << j;
    }
    for (std::size_t j = 0; j < merges.size(); ++j) {
      if (labels.count(merges[j].left) > 0) programs.spreads |= 1 << (spreads.size() + j);
    }
    for (const Condition& c : clause.conditions) {
      Compared compared{c.test, c.node, c.left, c.right, c.left_member, c.right_member};
      if (Position(c.left) > Position(c.right)) {
        std::swap(compared.left, compared.right);
        std::swap(compared.left_member, compared.right_member);
      }
      programs.conditions.push_back(compared);
    }
    programs.where = Compile(clause.where, /*main=*/true);
    for (const Pattern& pattern : clause.unless) {
      programs.unless.push_back(Compile(pattern, /*main=*/false));
      for (int variable : SharedVariables(programs.where, programs.unless.back())) programs.shared.insert(variable);
    }
    clauses.push_back(std::move(programs));
  }

  std::set<int> VariablesOf(const Program& program) const {
    std::set<int> used;
    for (const Instruction& instruction : program.code) {
      if (instruction.op != Instruction::Op::kSlot) continue;
      const Asked& asked = tests[static_cast<std::size_t>(instruction.test)];
      for (std::size_t i = asked.agreeing_begin; i < asked.agreeing_end; ++i) used.insert(agreeing[i]->variable);
    }
    return used;
  }
  std::vector<int> SharedVariables(const Program& where, const Program& unless) const {
    const std::set<int> ours = VariablesOf(where), theirs = VariablesOf(unless);
    std::vector<int> shared;
    std::set_intersection(ours.begin(), ours.end(), theirs.begin(), theirs.end(), std::back_inserter(shared));
    return shared;
  }

  // All that the variables which an unless-pattern shares may stand for; just one, empty, where it shares none.
  std::vector<Given> GivensFor(const Program& where, const Program& unless) const {
    std::vector<Given> givens{{}};
    for (int variable : SharedVariables(where, unless)) {
      std::set<std::int32_t> values;
      for (std::size_t i = 0; i < agreeing.size(); ++i) {
        if (agreeing[i]->variable != variable) continue;
        for (int profile = 0; profile < profile_keys.size(); ++profile) {
          if (profile_keys[profile][kProfileKind] >= kBoundaryKind) continue;
          const Key& allowed = value_sets[profile_keys[profile][AgreeingField(i)]];
          values.insert(allowed.begin(), allowed.end());
        }
      }
      std::vector<Given> longer;
      for (const Given& given : givens) {
        for (std::int32_t value : values) {
          longer.push_back(given);
          longer.back()[variable] = 1 + value;
        }
      }
      givens = std::move(longer);
    }
    return givens;
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
  // The same with room for insertions between, those on one side of an item in the order written.
  int Place(int label) const {
    const int insertion = InsertionOf(rule, label);
    return insertion < 0 ? Position(label) * Apart() : PlaceOfInsertion(static_cast<std::size_t>(insertion));
  }
  int PlaceOfInsertion(std::size_t change) const {
    const int written = static_cast<int>(change) + 1;
    const Change& insertion = rule.changes[change];
    return Position(insertion.target) * Apart() + (insertion.before ? written - Apart() / 2 : written);
  }
  int Apart() const { return 2 * (static_cast<int>(rule.changes.size()) + 1); }

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
      spread.target = HostOf(rule, change.target);
      spread.insertion = InsertionOf(rule, change.target);
      spread.node = change.node;
      spread.mother = space.tree()[change.node].mother;
      const int source = Place(change.source), target = Place(change.target);
      spread.from_left = source < target;
      const int host = Place(spread.target);
      spread.past_host = spread.from_left ? source < host && host < target : target < host && host < source;
      for (std::size_t j = 0; j < rule.changes.size(); ++j) {
        const Change& other = rule.changes[j];
        if (other.op == Change::Op::kDelink && other.target == change.target && other.node == spread.node) {
          spread.delinks = true;
          spread.delink = static_cast<int>(j);
        }
      }
      spread.inserts_between = InsertsBetween(change);
      spreads.push_back(spread);
    }
  }

  // Does the rule put a bearer of the node between the two items of a change?
  bool InsertsBetween(const Change& change) const {
    const int source = Place(change.source), target = Place(change.target);
    for (std::size_t j = 0; j < rule.changes.size(); ++j) {
      const Change& other = rule.changes[j];
      if (other.op != Change::Op::kInsert || !Contains(other.inserted, change.node)) continue;
      const int place = PlaceOfInsertion(j);
      if ((source < place && place < target) || (target < place && place < source)) return true;
    }
    return false;
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
          tests.push_back({&item.test, agreeing.size(), 0});
          CollectAgreeing(item.test, &agreeing);
          tests.back().agreeing_end = agreeing.size();
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
          if (main) instruction.mark = item.label;
          next = Emit(program, instruction);
          break;
        case PatternItem::Kind::kSameMorpheme:
          instruction.op = Instruction::Op::kSameMorpheme;
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
          if (InsertionOf(rule, change.target) >= 0) break;  // it is no end of the gap
          const bool source_left = static_cast<std::size_t>(Position(change.source)) < split;
          const bool target_left = static_cast<std::size_t>(Position(change.target)) < split;
          if (source_left != target_left) across.insert(change.node);
          break;
        }
        case Change::Op::kDelink:
          if (at_end) at_ends.insert(change.node);
          break;
        case Change::Op::kMerge: {
          const bool source_left = static_cast<std::size_t>(Position(change.source)) < split;
          const bool target_left = static_cast<std::size_t>(Position(change.target)) < split;
          if (source_left != target_left) across.insert(change.node);
          break;
        }
        case Change::Op::kSetAs:
        case Change::Op::kFillAs:
          if (at_end) at_ends.insert(change.node);
          break;
        case Change::Op::kSet:
        case Change::Op::kFill:
          for (const Setting& setting : change.settings) {
            if (at_end) at_ends.insert(setting.node);
          }
          break;
        case Change::Op::kSetLiteral:
        case Change::Op::kInsert:
        case Change::Op::kDelete:
        case Change::Op::kLengthen:
        case Change::Op::kShorten:
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
  int AgreeingField(std::size_t i) const { return LabelField(static_cast<int>(rule.labels.size() + i)); }
  int BorrowedField(std::size_t i) const { return AgreeingField(agreeing.size() + i); }
  enum ConditionAnswer { kAtLeft, kAtRight, kBetween, kConditionFields };
  int ConditionField(std::size_t clause, std::size_t condition) const {
    std::size_t before = condition;
    for (std::size_t c = 0; c < clause; ++c) before += clauses[c].conditions.size();
    return BorrowedField(borrowed.size() + kConditionFields * before);
  }
  int DomainField() const { return ConditionField(clauses.size(), 0); }
  int CopyField(std::size_t i) const { return DomainField() + 1 + static_cast<int>(i); }  // as its source
  enum MergeAnswer { kLastContent, kFirstContent, kMoreBehind, kFirstIsHeldLeft, kSameMother, kMergeFields };
  int MergeField(std::size_t i) const { return CopyField(copies.size()) + kMergeFields * static_cast<int>(i); }
  enum WatchAnswer { kBears, kHeldFromLeft, kHeldToRight, kSeveral, kFreeBears, kFreeFromLeft, kAsked, kWatchFields };
  int WatchField(std::size_t i) const { return MergeField(merges.size()) + kWatchFields * static_cast<int>(i); }
  int LetterField() const { return WatchField(watches.size()); }  // number of the letter, where copies ask of all of it
  int ProfileSize() const { return LetterField() + 1; }

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

  Key Describe(const Key& letter) {
    const int class_id = letter[0];
    const Letter& visible = space.classes()[class_id].visible;
    if (visible.kind == FormItem::Kind::kBoundary) {
      const bool outside = rule.within == Domain::kStem && !(space.Around(letter) & kInStem);
      return Key{kBoundaryKind + static_cast<int>(visible.boundary) + (outside ? kOutsideStem : 0)};
    }
    Key profile(ProfileSize(), 0);
    const bool empty = space.Of(class_id, kRootNode).count == 0;
    profile[kProfileKind] = empty ? kEmptyKind : kSlotKind;
    for (std::size_t i = 0; i < tests.size(); ++i) profile[1 + i] = space.Matches(letter, *tests[i].test);
    for (std::size_t i = 0; i < gaps.size(); ++i) {
      profile[GapField(static_cast<int>(i))] = std::none_of(gaps[i].nodes.begin(), gaps[i].nodes.end(),
                                                            [&](NodeId n) { return space.Of(class_id, n).count > 0; });
    }
    for (std::size_t i = 0; i < spreads.size(); ++i) {
      DescribeSpread(letter, spreads[i], &profile[SpreadField(static_cast<int>(i))]);
    }
    for (std::size_t i = 0; i < rule.labels.size(); ++i) {
      const int label = static_cast<int>(i);
      profile[LabelField(label)] = !TagsAllow(&letter, label) ? kBarred
                                   : changed[i]               ? Changeable(letter, label)
                                                              : kAllowed;
    }
    for (std::size_t i = 0; i < copies.size(); ++i) {
      const std::int32_t source = ContentNumber(visible.part, copies[i].node, copies[i].member);
      profile[CopyField(i)] = source;
      copies[i].known.insert(source);
    }
    for (std::size_t i = 0; i < watches.size(); ++i) DescribeWatch(letter, watches[i], &profile[WatchField(i)]);
    for (std::size_t i = 0; i < merges.size(); ++i) {
      std::int32_t* answers = &profile[MergeField(i)];
      const NodeId node = merges[i].node;
      answers[kLastContent] = ContentNumber(visible.part, node, {Member::Which::kLast, 0});
      answers[kFirstContent] = ContentNumber(visible.part, node, {Member::Which::kFirst, 0});
      answers[kFirstIsHeldLeft] = (space.Marks(letter, node) & kFromLeft) != 0;
      const std::int32_t mother = space.Marks(letter, space.tree()[node].mother);
      answers[kMoreBehind] = space.Of(letter[0], node).count > 1 && !(mother & kToRight);
      answers[kSameMother] = (mother & kFromLeft) != 0;
    }
    if (!copies.empty() || rule.preserving || rule.prefer != Rule::Prefer::kNone)
      profile[LetterField()] = letters.Intern(letter);
    profile[DomainField()] = rule.within != Domain::kStem || (space.Around(letter) & kInStem);
    for (std::size_t i = 0; i < agreeing.size(); ++i) {
      profile[AgreeingField(i)] = value_sets.Intern(ValuesAllowed(visible.part, *agreeing[i]));
    }
    for (std::size_t i = 0; i < borrowed.size(); ++i) {
      std::int32_t fits = ValuesThatFit(LinedItem(letter, borrowed[i].label, borrowed[i].insertion), borrowed[i]);
      const std::int32_t all = (1 << ValueCount(*borrowed[i].setting)) - 1;
      std::int32_t& allowance = profile[LabelField(borrowed[i].label)];
      if (fits != all && borrowed[i].insertion < 0 && MayFit(letter, borrowed[i].label, borrowed[i].setting->node)) {
        fits = all;
        if (allowance == kAllowed) allowance = kInDoubt;
      }
      profile[BorrowedField(i)] = fits;
    }
    for (std::size_t c = 0; c < clauses.size(); ++c) {
      for (std::size_t i = 0; i < clauses[c].conditions.size(); ++i) {
        std::int32_t* answers = &profile[ConditionField(c, i)];
        answers[kAtLeft] = Answer(letter, clauses[c].conditions[i], /*left=*/true);
        answers[kAtRight] = Answer(letter, clauses[c].conditions[i], /*left=*/false);
        answers[kBetween] = HoldsOn(letter, clauses[c].conditions[i].node);
      }
    }
    return profile;
  }

  // ---- what must agree --------------------------------------------------------------------------
  bool IsClassNode(NodeId node) const { return space.tree()[node].type == TreeNode::Type::kClass; }
  bool IsBare(NodeId node) const { return space.tree()[node].type == TreeNode::Type::kBare; }

  // The number of a list of parts, links aside.
  std::int32_t ContentId(const std::vector<const LetterPart*>& parts) {
    Letter letter;
    Content list;
    for (const LetterPart* part : parts) {
      list.push_back(tiersmith::ContentOf(*part));
      letter.part.daughters.push_back(PartOf(list.back()));
    }
    const int id = contents.Intern(letter);
    if (id == static_cast<int>(lists.size())) lists.push_back(std::move(list));
    return id;
  }

  // 1 + the number of what a letter bears of a node, 0 if it bears none.
  std::int32_t ContentNumber(const LetterPart& slot, NodeId node, const Member& member) {
    std::vector<const LetterPart*> parts = Chosen(slot, node, member);
    return parts.empty() ? 0 : 1 + ContentId(parts);
  }

  static std::vector<const LetterPart*> Chosen(const LetterPart& slot, NodeId node, const Member& member) {
    std::vector<const LetterPart*> parts;
    Parts(slot, node, &parts);
    if (parts.empty()) return parts;
    switch (member.which) {
      case Member::Which::kWhole:
        break;
      case Member::Which::kFirst:
        parts.resize(1);
        break;
      case Member::Which::kLast:
        parts.erase(parts.begin(), parts.end() - 1);
        break;
      case Member::Which::kValue:
        parts.erase(std::remove_if(parts.begin(), parts.end(),
                                   [&](const LetterPart* part) { return part->value != member.value; }),
                    parts.end());
        break;
    }
    return parts;
  }

  static void Parts(const LetterPart& part, NodeId node, std::vector<const LetterPart*>* found) {
    for (const LetterPart& daughter : part.daughters) {
      if (daughter.node == node) found->push_back(&daughter);
      Parts(daughter, node, found);
    }
  }

  // The values of its variable under which the test of agreement holds.
  Key ValuesAllowed(const LetterPart& slot, const FeatureTest& test) {
    const std::vector<Value> values = ValuesFacing(slot, test.node, test.part);
    std::set<std::int32_t> allowed;
    if (IsBare(test.node)) {
      allowed.insert(values.empty() ? 0 : 1);
    } else if (IsClassNode(test.node)) {
      std::vector<const LetterPart*> parts;
      Parts(slot, test.node, &parts);
      if (!parts.empty() && test.part == FeatureTest::Part::kFirst) parts.resize(1);
      if (!parts.empty() && test.part == FeatureTest::Part::kLast) parts.erase(parts.begin(), parts.end() - 1);
      for (const LetterPart* part : parts) allowed.insert(1 + ContentId({part}));
    } else {
      allowed.insert(values.begin(), values.end());
    }
    Key key;
    const bool differs = test.kind == FeatureTest::Kind::kDiffers;
    for (std::int32_t value : allowed) key.push_back(differs ? 1 - value : value);
    std::sort(key.begin(), key.end());
    return key;
  }

  // Bit v: the setting crosses no line if its variable has value v.
  std::int32_t ValuesThatFit(const Key& letter, const Borrowed& setting) const {
    std::int32_t fits = 0;
    for (int value = 0; value < ValueCount(*setting.setting); ++value) {
      Setting with{setting.setting->node, BorrowedValues(space.tree(), *setting.setting, value), -1, false};
      if (SettingFits(letter, with, setting.fill)) fits |= 1 << value;
    }
    return fits;
  }
  int ValueCount(const Setting& setting) const {
    return std::max<int>(2, static_cast<int>(space.tree()[setting.node].values.size()));
  }

  // What a letter says to a condition as its left or its right item: 1 + its content, 0 if it bears none; where the very
  // instance is asked for, the ConditionState after it (left), or whether the instance goes on into it (right).
  std::int32_t Answer(const Key& letter, const Compared& condition, bool left) {
    const LetterPart& slot = space.classes()[letter[0]].visible.part;
    const Member& member = left ? condition.left_member : condition.right_member;
    if (!condition.OfInstance()) return ContentNumber(slot, condition.node, member);
    std::vector<const LetterPart*> all;
    Parts(slot, condition.node, &all);
    const std::vector<const LetterPart*> chosen = Chosen(slot, condition.node, member);
    if (chosen.empty()) return 0;
    if (left) return chosen.back() == all.back() ? kStillHeld : kLost;
    return chosen.front() == all.front() && (space.Marks(letter, condition.node) & kFromLeft);
  }

  // After a letter between, is the N that was the last one still the last one?
  bool HoldsOn(const Key& letter, NodeId node) const {
    const int count = space.Of(letter[0], node).count;
    return count == 0 || (count == 1 && (space.Marks(letter, node) & kFromLeft));
  }

  // What a letter says as the source of a spread: it bears none to spread, one that faces the target, or one that does not.
  enum Carrying : std::int32_t { kNone = 0, kFacing = 1, kHidden = 2 };
  std::int32_t Carries(const Key& letter, const Spread& spread) const {
    const LetterPart& slot = space.classes()[letter[0]].visible.part;
    std::vector<const LetterPart*> all;
    Parts(slot, spread.node, &all);
    const std::vector<const LetterPart*> chosen =
        Chosen(slot, spread.node, rule.changes[static_cast<std::size_t>(spread.change)].member);
    if (chosen.empty()) return kNone;
    const bool faces = spread.from_left ? chosen.back() == all.back() : chosen.front() == all.front();
    return faces ? kFacing : kHidden;
  }

  // How many of the letter's own a delink takes.
  int CutBy(const Change& delink, const Key& letter) const {
    return static_cast<int>(Chosen(space.classes()[letter[0]].visible.part, delink.node, delink.member).size());
  }

  void DescribeSpread(const Key& letter, const Spread& spread, std::int32_t* answers) const {
    const RuleSpace::Bearing& node = space.Of(letter[0], spread.node);
    const std::int32_t marks = space.Marks(letter, spread.node);
    const std::int32_t mother = space.Marks(letter, spread.mother);
    answers[kBearsNode] = Carries(letter, spread);
    answers[kBearsMother] = node.mother;
    answers[kLeftLine] = (marks & kFromLeft) && node.count == 1;
    answers[kLeftMother] = (mother & kFromLeft) != 0;
    answers[kRightLine] = (marks & kToRight) && node.count == 1;
    answers[kRightMother] = (mother & kToRight) != 0;
    answers[kHeldLeft] = node.count > 0 && (marks & kObjectLeft);
    answers[kHeldRight] = node.count > 0 && (marks & kObjectRight);
    const int own =
        node.count - (spread.delinks ? CutBy(rule.changes[static_cast<std::size_t>(spread.delink)], letter) : 0);
    answers[kHasRoom] = own + 1 <= space.Room(letter[0], spread.node) && MothersFit(letter, spread.node);
    if (spread.insertion < 0) return;
    const Key beside = ItemAt(letter, spread.insertion);
    answers[kHasRoom] = !spread.inserts_between && MothersFit(beside, spread.node) &&
                        space.Of(beside[0], spread.node).count + 1 <= space.Room(beside[0], spread.node);
  }

  // The letter, or what a change inserts beside it.
  Key ItemAt(const Key& letter, int insertion) const {
    return insertion < 0 ? letter : space.Inserted(rule.changes[static_cast<std::size_t>(insertion)], letter);
  }

  // The same, with the lines that the match draws from the slot or past it: lines come before contents.
  Key LinedItem(const Key& letter, int label, int insertion) const {
    Key item = ItemAt(letter, insertion);
    for (const Spread& spread : spreads) {
      const bool from_here = spread.source == label && Carries(letter, spread) == kFacing;
      if (insertion >= 0 || (!from_here && !IsBetween(label, spread))) continue;
      const LinkMark onward = spread.from_left ? kObjectRight : kObjectLeft;
      item[static_cast<std::size_t>(1 + space.LiveIndex(spread.node))] |=
          space.Of(letter[0], spread.node).count == 0 ? kOver : onward;
    }
    return item;
  }
  bool IsBetween(int label, const Spread& spread) const {
    const auto [left, right] = std::minmax({Place(spread.source), Place(spread.target)});
    return left < Place(label) && Place(label) < right;
  }

  // The class nodes that would be made above `node` stand in no span of theirs.
  bool MothersFit(const Key& letter, NodeId node) const {
    const NodeId lowest = space.LowestAncestor(letter[0], node);
    for (NodeId at = space.tree()[node].mother; at != lowest; at = space.tree()[at].mother) {
      if (space.Marks(letter, at) & kOver) return false;
    }
    return true;
  }

  void DescribeWatch(const Key& letter, const Watch& watch, std::int32_t* answers) const {
    const int count = space.Of(letter[0], watch.node).count;
    const std::int32_t marks = space.Marks(letter, watch.node);
    answers[kBears] = count > 0;
    answers[kHeldFromLeft] = count > 0 && (marks & kFromLeft);
    answers[kHeldToRight] = count > 0 && (marks & kToRight);
    // Under a mother that goes on all are the same as before.
    answers[kSeveral] = count > 1 && !(space.Marks(letter, space.tree()[watch.node].mother) & kFromLeft);
    if (watch.free >= 0) {
      const auto free = static_cast<NodeId>(watch.free);
      answers[kFreeBears] = space.Of(letter[0], free).count > 0;
      answers[kFreeFromLeft] = answers[kFreeBears] && (space.Marks(letter, free) & kFromLeft);
    }
    answers[kAsked] = std::any_of(watch.mentioned.begin(), watch.mentioned.end(), [&](NodeId node) {
      while (node != kSlotNode && space.Of(letter[0], node).count == 0) node = space.tree()[node].mother;
      return node == watch.node;
    });
  }

  // The tag tests of the label's clause. No letter: the end of the form.
  bool TagsAllow(const Key* letter, int label) const {
    for (const ClausePrograms& programs : clauses) {
      if (programs.labels.count(label) == 0) continue;
      for (const TagTest& test : programs.clause->tags) {
        const bool concerned = test.scope == TagTest::Scope::kLabel ? test.label == label : changed[label] != 0;
        if (concerned && (letter != nullptr ? !space.Allows(*letter, test) : test.only)) return false;
      }
    }
    return true;
  }

  // Do set, fill and insert at this label cross no line? In doubt: see MayFit.
  enum Allowance : std::int32_t { kBarred = 0, kAllowed = 1, kInDoubt = 2 };
  Allowance Changeable(const Key& letter, int label) const {
    Allowance allowed = kAllowed;
    for (std::size_t i = 0; i < rule.changes.size(); ++i) {
      const Change& change = rule.changes[i];
      if (HostOf(rule, change.target) != label) continue;
      if (change.op == Change::Op::kSet || change.op == Change::Op::kFill) {
        const int insertion = InsertionOf(rule, change.target);
        const Key item = LinedItem(letter, label, insertion);
        for (const Setting& setting : change.settings) {
          if (setting.variable >= 0 || SettingFits(item, setting, change.op == Change::Op::kFill)) continue;
          if (insertion >= 0 || !MayFit(letter, label, setting.node)) return kBarred;
          allowed = kInDoubt;
        }
      } else if (change.op == Change::Op::kSetLiteral) {
        if (ContentFits(LinedItem(letter, label, -1), kRootNode, {change.inserted})) continue;
        if (!MayFit(letter, label, kRootNode)) return kBarred;
        allowed = kInDoubt;
      } else if (change.op == Change::Op::kInsert) {
        for (NodeId node : inserted[i]) {
          if (space.PassesOver(letter, node, change.before)) return kBarred;
        }
      }
    }
    return allowed;
  }

  // What seems to cross a line may not do so: where another item of the match is given the same node, the line may be gone by
  // that; none is drawn to an item of the same mother, nor from one that bears nothing.
  bool MayFit(const Key& letter, int label, NodeId node) const {
    return GivenElsewhere(label, node) || std::any_of(spreads.begin(), spreads.end(), [&](const Spread& spread) {
             const bool goes_on = space.Marks(letter, spread.mother) & (spread.from_left ? kToRight : kFromLeft);
             const bool meets = spread.node == node || space.tree().Dominates(node, spread.node);
             return meets && (IsBetween(label, spread) || (spread.source == label && goes_on));
           });
  }

  // Is an item of the same match given contents of this node, or of one above or under it?
  bool GivenElsewhere(int label, NodeId node) const {
    const auto own = std::find_if(clauses.begin(), clauses.end(),
                                  [label](const ClausePrograms& programs) { return programs.labels.count(label) > 0; });
    return std::any_of(rule.changes.begin(), rule.changes.end(), [&](const Change& other) {
      if (other.target == label || own->labels.count(other.target) == 0) return false;
      const auto meets = [&](NodeId given) {
        return given == node || space.tree().Dominates(given, node) || space.tree().Dominates(node, given);
      };
      if (other.op == Change::Op::kSetLiteral) return meets(kRootNode);
      if (other.op == Change::Op::kSetAs || other.op == Change::Op::kFillAs) return meets(other.node);
      return std::any_of(other.settings.begin(), other.settings.end(),
                         [&](const Setting& setting) { return meets(setting.node); });
    });
  }

  bool SettingFits(const Key& letter, const Setting& setting, bool fill) const;
  bool ContentFits(const Key& letter, NodeId node, const Content& content) const;
  bool SubtreeFits(const Key& letter, const FeatureTree& tree, bool held_left, bool held_right) const;

  // ---- the automaton --------------------------------------------------------------------------
  struct Builder;
  MarkedMachine BuildMain(std::size_t clause, std::size_t max_states, Pools* pools) const;
  MarkedMachine BuildUnless(const Program& program, const Given& given, std::size_t max_states) const;
  MarkedMachine BuildInside(std::size_t max_states) const;
  MarkedMachine BuildClause(std::size_t clause, std::size_t max_states, Pools* pools) const;
  std::vector<MarkedMachine> Preferred(const std::vector<MarkedMachine>& standing, const KeyPool& roles,
                                       std::size_t max_states) const;
  Role RoleOf(const Key& key) const;
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

// New instances of a node in place of what the letter bears: is there room, and would no line to what is held on both
// sides cross theirs?
bool PatternCompiler::Impl::ContentFits(const Key& letter, NodeId node, const Content& content) const {
  if (content.empty() || ContentUnder(space.classes()[letter[0]].visible.part, node) == content) return true;
  if (content.size() > 1 && static_cast<int>(content.size()) > space.Room(letter[0], node)) return false;
  if (space.Of(letter[0], node).count == 0 && !MothersFit(letter, node)) return false;
  return std::all_of(content.begin(), content.end(),
                     [&](const FeatureTree& tree) { return SubtreeFits(letter, tree, false, false); });
}

// `held_left`: the mother is held on the left as well, so what hangs from it is too.
bool PatternCompiler::Impl::SubtreeFits(const Key& letter, const FeatureTree& tree, bool held_left,
                                        bool held_right) const {
  const int count = space.Of(letter[0], tree.node).count;
  const std::int32_t marks = space.Marks(letter, tree.node);
  if (count == 0) {
    if (marks & kOver) return false;
  } else {
    const bool one_held = count == 1 || held_left || held_right;  // of a contour by itself each end is held on its side
    held_left = held_left || (marks & kObjectLeft);
    held_right = held_right || (marks & kObjectRight);
    if (one_held && held_left && held_right) return false;
  }
  return std::all_of(tree.daughters.begin(), tree.daughters.end(),
                     [&](const FeatureTree& daughter) { return SubtreeFits(letter, daughter, held_left, held_right); });
}

// Explores the configurations of one program.
struct PatternCompiler::Impl::Builder {
  const Impl& impl;
  const Program& program;
  const ClausePrograms* clause;  // null: an unless-pattern
  std::size_t clause_number;
  bool main;
  std::int32_t edge;
  std::set<int> own_marks;  // unless: the labels it shares
  Given given;              // unless: what it takes the variables to stand for that it shares
  KeyPool configs;
  Pools* pools;
  MarkedMachine machine;

  Builder(const Impl& i, const Program& p, const ClausePrograms* of_clause, std::size_t number, Pools* of_arcs)
      : impl(i),
        program(p),
        clause(of_clause),
        clause_number(number),
        main(of_clause != nullptr),
        edge(EdgeOf(i.rule.within)),
        pools(of_arcs) {
    for (const Instruction& instruction : program.code) {
      if (instruction.op == Instruction::Op::kSlot && instruction.mark >= 0) own_marks.insert(instruction.mark);
    }
  }

  std::size_t SpreadCount() const { return main ? impl.spreads.size() : 0; }
  std::size_t VariableAt(int variable) const { return kZones + SpreadCount() + static_cast<std::size_t>(variable); }
  int VariableCount() const { return main ? impl.variables : impl.rule.variables; }
  std::size_t ConditionAt(std::size_t i) const { return VariableAt(VariableCount()) + i; }
  std::size_t MergeAt(std::size_t i) const { return ConditionAt(ConditionCount()) + i; }
  std::size_t WatchAt(std::size_t i) const { return MergeAt(MergeCount()) + i; }
  std::size_t WatchCount() const { return main ? impl.watches.size() : 0; }
  std::size_t ConfigSize() const { return WatchAt(WatchCount()); }
  std::size_t MergeCount() const { return main ? impl.merges.size() : 0; }
  bool Merges(const Key& config, std::size_t i) const { return config[kMask] >> (SpreadCount() + i) & 1; }

  Key Start(std::int32_t mask) const {
    Key config(ConfigSize(), 0);
    config[kPc] = kPrefix;
    config[kMask] = mask;
    for (const auto& [variable, value] : given) config[VariableAt(variable)] = value;
    return config;
  }

  // Where the program can stand before its next slot, gap or end, with the strongest boundary named on the way and the
  // label of one (+1).
  struct Stand {
    int pc;
    std::int32_t need, label;
    friend bool operator<(const Stand& a, const Stand& b) {
      return std::tie(a.pc, a.need, a.label) < std::tie(b.pc, b.need, b.label);
    }
  };
  void Close(const Stand& from, std::set<Stand>* seen, std::vector<Stand>* result) const {
    if (!seen->insert(from).second) return;
    const Instruction& at = program.code[from.pc];
    switch (at.op) {
      case Instruction::Op::kSlot:
      case Instruction::Op::kGap:
      case Instruction::Op::kAccept:
        result->push_back(from);
        break;
      case Instruction::Op::kBoundary:
        if (from.need == kNoBoundary) break;
        Close({at.next, std::max(from.need, static_cast<std::int32_t>(at.boundary)),
               at.mark >= 0 ? at.mark + 1 : from.label},
              seen, result);
        break;
      case Instruction::Op::kSameMorpheme:
        if (from.need <= 0) Close({at.next, kNoBoundary, from.label}, seen, result);
        break;
      case Instruction::Op::kSplit:
        for (int branch : at.branches) Close({branch, from.need, from.label}, seen, result);
        break;
    }
  }
  std::vector<Stand> Close(int pc) const {
    std::set<Stand> seen;
    std::vector<Stand> result;
    Close({pc, 0, 0}, &seen, &result);
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
    return program.code[config[kPc]].op == Instruction::Op::kAccept && Settled(config) && EndsForm(config);
  }

  // The end of the form is a boundary, in no morpheme.
  bool EndsForm(const Key& config) const {
    return !Labelled(config) || (config[kNeed] == kFormEdge && impl.TagsAllow(nullptr, config[kNeedLabel] - 1));
  }

  // Is the boundary needed one with a label?
  bool Labelled(const Key& config) const { return config[kNeed] > 0 && config[kNeedLabel] > 0; }

  // The slot behind a labelled boundary, whose morpheme is that of the boundary.
  bool LabelAllowed(const Key& config, const Key& letter) const {
    return !Labelled(config) || letter[impl.LabelField(config[kNeedLabel] - 1)] != kBarred;
  }

  // At an end of the match a labelled run may be stronger than named, or the form's edge, which stays: each guess.
  void GuessRun(Key config, std::vector<Key>* result) const {
    for (; config[kNeed] <= kFormEdge; ++config[kNeed]) {
      config[kSeen] = config[kNeed] == kFormEdge;
      result->push_back(config);
    }
  }

  // Configurations after the program consumed a slot (or, with `first`, before its first one).
  void After(const Key& base, int pc, bool first, std::vector<Key>* result) const {
    for (const auto& [at, need, label] : Close(pc)) {
      Key config = base;
      config[kPc] = at;
      config[kNeed] = need;
      config[kNeedLabel] = label;
      config[kSeen] = first;
      const bool accept = program.code[at].op == Instruction::Op::kAccept;
      config[kPhase] = accept ? 2 : first ? 0 : 1;
      if (accept) {
        if (first || !Complete(config)) continue;
        if (need == 0) config = Done(config);
      }
      if ((first || accept) && Labelled(config)) {
        GuessRun(config, result);
      } else {
        result->push_back(std::move(config));
      }
    }
  }

  // The pattern is met: what is left is to see that watched instances have no further holders.
  Key Done(Key config) const {
    if (Settled(config)) return Suffix();
    config[kPhase] = 3;
    config[kNeed] = config[kNeedLabel] = config[kSeen] = 0;
    return config;
  }

  Key Suffix() const {
    Key config(ConfigSize(), 0);
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
  void Add(int from, int profile, int mark, int role, const Key& to, bool first = false, bool last = false,
           int bound = -1) {
    const int next = Intern(to);  // may add a state
    machine.arcs[from].push_back({profile, mark, role, next, first, last, bound});
  }

  // What the variables are known to stand for, if an unless-pattern asks.
  int Bound(const Key& config) const {
    if (!main || clause->shared.empty()) return -1;
    const auto first = config.begin() + static_cast<std::ptrdiff_t>(VariableAt(0));
    return pools->bindings.Intern(Key(first, first + impl.rule.variables));
  }

  MarkedMachine Run(std::size_t max_states) {
    if (program.too_long) return OverBudget();
    const std::int32_t masks = 1 << (SpreadCount() + MergeCount());
    for (std::int32_t mask = 0; mask < masks; ++mask) {
      if (main && (mask & ~clause->spreads)) continue;
      machine.initial.push_back(Intern(Start(mask)));
      std::vector<Key> starts;
      After(Start(mask), program.start, /*first=*/true, &starts);
      for (const Key& config : starts) {
        if (!Labelled(config) || config[kNeed] == kFormEdge) machine.initial.push_back(Intern(config));
      }
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
    const std::int32_t boundary = kind >= kBoundaryKind ? (kind - kBoundaryKind) % kOutsideStem : 0;
    const bool outside = kind >= kBoundaryKind + kOutsideStem;
    const bool visible = kind == kSlotKind || (kind == kEmptyKind && program.sees_empty);
    if (config[kPc] == kSuffix) {
      Add(at, profile, -1, -1, config);
      return;
    }
    if (config[kPhase] == 3) {
      Key next = config;
      if (boundary == 0 && !PassWatches(letter, -1, /*matched=*/false, &next)) return;
      Add(at, profile, -1, -1, Done(next));
      return;
    }
    if (config[kPc] == kPrefix) {
      Key base = config;
      if (boundary == 0 && !PassWatches(letter, -1, /*matched=*/false, &base)) return;
      Add(at, profile, -1, -1, base);
      std::vector<Key> starts;
      After(base, program.start, /*first=*/true, &starts);
      for (const Key& start : starts) {
        const bool begins =
            Labelled(start) ? visible && start[kNeed] != kFormEdge : start[kNeed] <= 0 || boundary >= start[kNeed];
        if (begins) Add(at, profile, -1, -1, start);
      }
      return;
    }
    const Instruction& instruction = program.code[config[kPc]];
    if (boundary > 0) {
      SkipBoundary(at, config, profile, boundary, outside || boundary >= edge, instruction);
      return;
    }
    const bool through = visible && instruction.op == Instruction::Op::kGap && letter[impl.GapField(instruction.gap)];
    const bool before_first = config[kPhase] == 0 && config[kNeed] == 0;
    if (!before_first && (!visible || through)) {
      std::int32_t merging = 0;
      for (const Key& next : Walk(config, letter, &merging)) Add(at, profile, -1, MergingRole(merging), next);
    }
    if (!visible) return;
    if (instruction.op == Instruction::Op::kAccept) {
      Key next = config;
      const bool met = Labelled(config) && config[kSeen] && config[kNeed] != kFormEdge;
      if (met && LabelAllowed(config, letter) && PassWatches(letter, -1, /*matched=*/false, &next))
        Add(at, profile, -1, -1, Done(next));
    } else if (instruction.op == Instruction::Op::kSlot) {
      Consume(at, config, profile, letter, config[kPc]);
    } else if (instruction.op == Instruction::Op::kGap) {
      for (const auto& [pc, need, named] : Close(instruction.next)) {
        if (need == 0 && program.code[pc].op == Instruction::Op::kSlot) Consume(at, config, profile, letter, pc);
      }
    }
  }

  // The role of a slot that is no changed item, but the first holder of what is merged.
  int MergingRole(std::int32_t merging) const {
    if (merging == 0) return -1;
    Key role(2 + SpreadCount() + static_cast<std::size_t>(impl.variables), 0);
    role[0] = -1;
    role.back() = merging;
    return pools->roles.Intern(role);
  }

  // The role of a boundary that is deleted.
  int DeletingRole(int label) const {
    Key role(2 + SpreadCount() + static_cast<std::size_t>(impl.variables), 0);
    role[0] = label;
    return pools->roles.Intern(role);
  }

  void SkipBoundary(int at, const Key& config, int profile, std::int32_t boundary, bool outside,
                    const Instruction& instruction) {
    Key next = config;
    const bool leading = config[kPhase] == 0, trailing = instruction.op == Instruction::Op::kAccept;
    if (leading && !Labelled(config)) {
      if (config[kNeed] > 0) Add(at, profile, -1, -1, next);  // more of the leading run
      return;
    }
    if (trailing && !Labelled(config)) {
      if (boundary >= config[kNeed]) next = Done(config);
      Add(at, profile, -1, -1, next);
      return;
    }
    if ((outside && !leading && !trailing) || config[kNeed] == kNoBoundary) return;
    if (config[kNeed] > 0) {
      if (boundary > config[kNeed]) return;
      if (boundary == config[kNeed]) next[kSeen] = 1;
    }
    const int label = config[kNeedLabel] - 1;
    const bool labelled = main && label >= 0 && boundary == config[kNeed];
    Add(at, profile, labelled ? label : -1, labelled && impl.changed[label] ? DeletingRole(label) : -1, next);
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
  std::vector<Key> Walk(const Key& config, const Key& letter, std::int32_t* merging) const {
    std::vector<Key> result{config};
    PassConditions(letter, &result[0]);
    if (!PassMerges(letter, -1, &result[0], merging) || !PassWatches(letter, -1, /*matched=*/false, &result[0]))
      return {};
    for (std::size_t j = 0; j < SpreadCount(); ++j) {
      const std::int32_t zone = config[kZones + j];
      if (zone == kBefore || zone == kDone) continue;
      std::vector<Key> next;
      for (const Key& key : result) StepZone(key, j, Answers(letter, j), &next);
      result = std::move(next);
    }
    return result;
  }

  const std::int32_t* ConditionAnswers(const Key& letter, std::size_t i) const {
    return &letter[impl.ConditionField(clause_number, i)];
  }
  std::size_t ConditionCount() const { return main ? clause->conditions.size() : 0; }

  // A letter that is not an item of a condition that asks for the very instance: is the last one still the same?
  void PassConditions(const Key& letter, Key* config) const {
    for (std::size_t i = 0; i < ConditionCount(); ++i) {
      std::int32_t& state = (*config)[ConditionAt(i)];
      if (!clause->conditions[i].OfInstance() || state != kStillHeld) continue;
      if (!ConditionAnswers(letter, i)[kBetween]) state = kLost;
    }
  }

  // Watched instances past one letter. False: one has a holder outside the match.
  bool PassWatches(const Key& letter, int label, bool matched, Key* config) const {
    for (std::size_t i = 0; i < WatchCount(); ++i) {
      const Watch& watch = impl.watches[i];
      if (clause->labels.count(watch.label) == 0) continue;
      const std::int32_t* answers = &letter[impl.WatchField(i)];
      std::int32_t& state = (*config)[WatchAt(i)];
      const bool free = watch.free >= 0;
      if (free && answers[kFreeBears] && !answers[kFreeFromLeft]) {  // another free node from here on
        if (state == kFreelyHeld) state = kHeldOutside;
        if (state == kFreelyOwed) state = kOwed;
      }
      if (label == watch.label) {
        if (answers[kAsked] && answers[kHeldFromLeft] && state == kHeldOutside) return false;
        const bool owes = answers[kAsked] && answers[kHeldToRight];
        state = owes ? (free && answers[kFreeBears] ? kFreelyOwed : kOwed) : kUnheld;
        continue;
      }
      if (!answers[kBears]) continue;
      if (state == kOwed || state == kFreelyOwed) {
        if (!answers[kHeldFromLeft]) {
          state = kUnheld;
        } else if (!matched && state == kOwed) {
          return false;
        } else if (answers[kSeveral] || !answers[kHeldToRight]) {
          state = kUnheld;
        }
        continue;
      }
      if (!answers[kHeldFromLeft] || answers[kSeveral]) state = kUnheld;
      if (!matched) state = std::max<std::int32_t>(state, free && answers[kFreeBears] ? kFreelyHeld : kHeldOutside);
      if (!answers[kHeldToRight]) state = kUnheld;
    }
    return true;
  }

  // Are all watched instances behind their items done with?
  bool Settled(const Key& config) const {
    for (std::size_t i = 0; i < WatchCount(); ++i) {
      if (config[WatchAt(i)] >= kOwed) return false;
    }
    return true;
  }

  // Merges under way: nothing but the left item's N may stand before the right item's, whose first holder is told that it
  // merges. False: it does not.
  bool PassMerges(const Key& letter, int label, Key* config, std::int32_t* merging) const {
    for (std::size_t i = 0; i < MergeCount(); ++i) {
      const Merge& merge = impl.merges[i];
      if (!Merges(*config, i)) continue;
      const std::int32_t* answers = &letter[impl.MergeField(i)];
      std::int32_t& state = (*config)[MergeAt(i)];
      if (label == merge.left) {
        state = answers[kLastContent];
        if (state == 0) return false;
        continue;
      }
      if (state == 0) continue;  // before the left item, or behind the right one
      const bool bears = answers[kFirstContent] != 0;
      if (bears && !answers[kFirstIsHeldLeft] && !answers[kSameMother]) {  // another one: it must be the right item's
        if (answers[kFirstContent] != state) return false;
        *merging |= 1 << merge.change;
        state = -state;
      }
      if (label == merge.right) {
        if (state > 0 || !bears) return false;  // one with the left item's, or none
        state = 0;
      } else if (answers[kMoreBehind] && !(state > 0 && answers[kSameMother])) {
        return false;
      }
    }
    return true;
  }

  // The slot under `label`: conditions begin or are settled. False: one does not hold.
  bool MeetConditions(const Key& letter, int label, Key* config) const {
    Key after = *config;
    PassConditions(letter, &after);
    for (std::size_t i = 0; i < ConditionCount(); ++i) {
      const Compared& condition = clause->conditions[i];
      const std::int32_t* answers = ConditionAnswers(letter, i);
      const std::int32_t state = (*config)[ConditionAt(i)];
      std::int32_t& next = after[ConditionAt(i)];
      if (label == condition.left) {
        next = condition.OfInstance() || answers[kAtLeft] != 0 ? answers[kAtLeft] : kLacks;
        if (condition.OfInstance() && next == kNotMet) next = kLost;
      } else if (label == condition.right) {
        bool holds = false;
        switch (condition.test) {
          case Condition::Test::kEqual:
            holds = state > 0 && state == answers[kAtRight];
            break;
          case Condition::Test::kUnequal:
            holds = state != answers[kAtRight] || state <= 0;
            break;
          case Condition::Test::kSame:
            holds = state == kStillHeld && answers[kAtRight];
            break;
          case Condition::Test::kNotSame:
            holds = !(state == kStillHeld && answers[kAtRight]);
            break;
        }
        if (!holds) return false;
        next = kNotMet;
      }
    }
    *config = std::move(after);
    return true;
  }

  // All ways to meet the tests of agreement of a slot, and to tell a role the values that its changes borrow.
  void MeetVariables(const Key& letter, int test, int label, std::vector<std::pair<Key, Key>>* ways) const {
    if (VariableCount() == 0) return;
    const Asked& asked = impl.tests[static_cast<std::size_t>(test)];
    for (std::size_t i = asked.agreeing_begin; i < asked.agreeing_end; ++i) {
      const std::size_t at = VariableAt(impl.agreeing[i]->variable);
      const Key& allowed = impl.value_sets[letter[impl.AgreeingField(i)]];
      Bind(at, allowed, ways, [](std::int32_t, Key*) { return true; });
    }
    for (std::size_t i = 0; i < impl.borrowed.size(); ++i) {
      if (label < 0 || impl.borrowed[i].label != label) continue;
      const int variable = impl.borrowed[i].setting->variable;
      Key all;
      for (int value = 0; value < impl.ValueCount(*impl.borrowed[i].setting); ++value) all.push_back(value);
      Bind(VariableAt(variable), all, ways, [&](std::int32_t value, Key* role) {
        (*role)[1 + SpreadCount() + static_cast<std::size_t>(variable)] = 1 + value;
        return (letter[impl.BorrowedField(i)] >> value & 1) != 0;
      });
    }
    for (std::size_t i = 0; label >= 0 && i < impl.copies.size(); ++i) {
      const Copy& copy = impl.copies[i];
      const std::size_t at = VariableAt(copy.variable);
      if (copy.source == label) {
        Bind(at, Key{letter[impl.CopyField(i)]}, ways, [](std::int32_t, Key*) { return true; });
      }
      if (copy.target == label) {
        Bind(at, Key(copy.known.begin(), copy.known.end()), ways, [&](std::int32_t value, Key* role) {
          (*role)[1 + SpreadCount() + static_cast<std::size_t>(copy.variable)] = 1 + value;
          if (copy.spreads) return true;
          const Key& slot = impl.letters[letter[impl.LetterField()]];
          const Key annotated = impl.LinedItem(slot, label, copy.insertion);
          if (copy.fill && (value == 0 || impl.space.Of(annotated[0], copy.node).count > 0)) return true;
          const bool fits =
              value == 0 || impl.ContentFits(annotated, copy.node, impl.lists[static_cast<std::size_t>(value - 1)]);
          if (!fits && copy.insertion < 0 && impl.MayFit(slot, label, copy.node)) role->back() |= kDoubtful;
          return fits || (role->back() & kDoubtful) != 0;
        });
      }
    }
  }

  template <class Accept>
  static void Bind(std::size_t at, const Key& allowed, std::vector<std::pair<Key, Key>>* ways, const Accept& accept) {
    std::vector<std::pair<Key, Key>> next;
    for (const auto& [config, role] : *ways) {
      for (std::int32_t value : allowed) {
        if (config[at] != 0 && config[at] != 1 + value) continue;
        std::pair<Key, Key> way{config, role};
        way.first[at] = 1 + value;
        if (accept(value, &way.second)) next.push_back(std::move(way));
      }
    }
    *ways = std::move(next);
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
    if (!LabelAllowed(config, letter)) return;
    if (!letter[1 + slot.test] || !letter[impl.DomainField()]) return;
    const int label = main && slot.mark >= 0 && slot.mark < static_cast<int>(impl.rule.labels.size()) ? slot.mark : -1;
    if (label >= 0 && !letter[impl.LabelField(label)]) return;
    std::vector<std::pair<Key, Key>> ways;  // configuration, role
    Key role, start = config;
    if (label >= 0 && impl.changed[label]) {
      role.assign(2 + SpreadCount() + static_cast<std::size_t>(impl.variables), 0);
      role[0] = label;
      if (letter[impl.LabelField(label)] == kInDoubt) role.back() = kDoubtful;
    }
    std::int32_t merging = 0;
    if (!MeetConditions(letter, label, &start) || !PassMerges(letter, label, &start, &merging)) return;
    if (!PassWatches(letter, label, /*matched=*/true, &start)) return;
    if (!role.empty()) role.back() |= merging;
    ways.emplace_back(std::move(start), role);
    MeetVariables(letter, slot.test, label, &ways);
    for (std::size_t j = 0; j < SpreadCount(); ++j) {
      std::vector<std::pair<Key, Key>> next;
      for (const auto& [key, asks] : ways) MeetSpread(key, asks, j, label, Answers(letter, j), &next);
      ways = std::move(next);
    }
    for (const auto& [key, asks] : ways) {
      if (impl.rule.preserving && !asks.empty() &&
          !impl.judge->preserves(impl.RoleOf(asks), impl.letters[letter[impl.LetterField()]])) {
        continue;
      }
      std::vector<Key> after;
      After(key, slot.next, /*first=*/false, &after);
      const int role_id = asks.empty() ? MergingRole(merging) : pools->roles.Intern(asks);
      for (const Key& next : after) {
        const bool last = next[kPc] == kSuffix || program.code[next[kPc]].op == Instruction::Op::kAccept;
        Add(at, profile, slot.mark, role_id, next, config[kPhase] == 0, last, Bound(key));
      }
    }
  }

  // The slot that spread j's target is inserted beside. Its mother there is its own, and no line leads to it yet: between it and
  // the source there may only be what spreads.
  void MeetPlace(const Key& key, const Key& role, std::size_t j, int label, const std::int32_t* answers,
                 std::vector<std::pair<Key, Key>>* next) const {
    const Spread& spread = impl.spreads[j];
    const bool asked = key[kMask] >> j & 1;
    const bool at_source = label == spread.source;
    if (at_source && (answers[kBearsNode] == kHidden || asked != (answers[kBearsNode] != 0))) return;
    if (!asked) {
      next->emplace_back(key, role);
      return;
    }
    if (!answers[kHasRoom]) return;
    const std::int32_t zone = key[kZones + j];
    const auto go = [&](std::int32_t to) {
      next->emplace_back(key, role);
      next->back().first[kZones + j] = to;
      next->back().second[1 + j] = Role::kAsk;
    };
    if (at_source) {
      go(kDone);
    } else if (spread.from_left) {
      if (zone == kBefore || zone == kDone) return;
      const std::int32_t there = spread.past_host ? Away(zone, answers, true) : zone;
      if (there == kSourceZone || there == kLineZone) go(kDone);
    } else if (zone == kBefore) {
      for (std::int32_t there : {kSourceZone, kLineZone}) {
        if (!spread.past_host) go(there);
        for (std::int32_t from : {kSourceZone, kLineZone, kTargetZone}) {
          if (spread.past_host && Away(from, answers, false) == there) go(from);
        }
      }
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
    if (spread.insertion >= 0 && label == spread.target) {
      MeetPlace(key, role, j, label, answers, next);
      return;
    }
    if (label == spread.source) {
      if (answers[kBearsNode] == kHidden || asked != (answers[kBearsNode] != 0)) return;  // a hidden one would cross
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

MarkedMachine PatternCompiler::Impl::BuildMain(std::size_t clause, std::size_t max_states, Pools* pools) const {
  return Builder(*this, clauses[clause].where, &clauses[clause], clause, pools).Run(max_states);
}

MarkedMachine PatternCompiler::Impl::BuildUnless(const Program& program, const Given& given,
                                                 std::size_t max_states) const {
  Builder builder(*this, program, nullptr, 0, nullptr);
  builder.given = given;
  return builder.Run(max_states);
}

MarkedMachine PatternCompiler::Impl::BuildInside(std::size_t max_states) const {
  Builder builder(*this, *inside, nullptr, 0, nullptr);
  builder.edge = EdgeOf(Domain::kWord);
  return builder.Run(max_states);
}

PatternCompiler::PatternCompiler(const Rule& rule, const RuleSpace& space) : impl_(new Impl(rule, space)) {}
PatternCompiler::~PatternCompiler() = default;
int PatternCompiler::Profile(const Key& annotated) { return impl_->Profile(annotated); }
int PatternCompiler::profiles() const { return impl_->profile_keys.size(); }
const std::vector<Spread>& PatternCompiler::spreads() const { return impl_->spreads; }
std::size_t PatternCompiler::VariableOf(std::size_t change) const {
  const auto copy = std::find_if(impl_->copies.begin(), impl_->copies.end(),
                                 [change](const Impl::Copy& c) { return c.change == change; });
  return static_cast<std::size_t>(copy->variable);
}
const Content& PatternCompiler::ContentOf(int value) const {
  static const Content kNone;
  return value <= 1 ? kNone : impl_->lists[static_cast<std::size_t>(value - 2)];
}
bool PatternCompiler::AsksOfSlotsBehind(bool rightward) const {
  return std::any_of(impl_->gaps.begin(), impl_->gaps.end(), [rightward](const GapInfo& gap) {
    return rightward ? gap.nearest_right : gap.nearest_left;  // the changed end is met last
  });
}

namespace {

// Strings marked as a match of the rule on which an unless-pattern matches the same labelled slots, while the variables
// that both use stand for what is `given`.
Subsets UnlessBan(const MarkedMachine& unless, const std::set<int>& labels, const Given& given,
                  const KeyPool& bindings) {
  return Subsets(unless.initial, unless.final,
                 [unless, labels, given, &bindings](int state, const MarkedArc& read, std::vector<int>* next) {
                   const bool agrees = std::all_of(given.begin(), given.end(), [&](const auto& taken) {
                     const std::int32_t value =
                         read.bound < 0 ? 0 : bindings[read.bound][static_cast<std::size_t>(taken.first)];
                     return value == 0 || value == taken.second;
                   });
                   if (!agrees) return;
                   const bool bound = labels.count(read.mark) > 0;
                   for (const MarkedArc& arc : unless.arcs[state]) {
                     if (arc.profile != read.profile) continue;
                     if (bound ? arc.mark == read.mark : arc.mark < 0) next->push_back(arc.next);
                   }
                 });
}

// Strings marked as a match over which no match of another pattern reaches, from its first labelled slot (or further left)
// to its last (or further right). State: 4 * run + progress.
Subsets OutsideBan(const MarkedMachine& inside, int left, int right) {
  enum Progress { kNotBegun, kBegun, kAtLeft, kOver };
  std::vector<int> initial;
  std::vector<char> final(inside.arcs.size() * 4, 0);
  for (int s : inside.initial) initial.push_back(4 * s);
  for (std::size_t s = 0; s < inside.arcs.size(); ++s) final[4 * s + kOver] = inside.final[s];
  return Subsets(initial, final,
                 [inside, left, right](int state, const MarkedArc& read, std::vector<int>* next) {
                   for (const MarkedArc& arc : inside.arcs[state / 4]) {
                     if (arc.profile != read.profile) continue;
                     int progress = arc.first ? kBegun : state % 4;
                     if (read.mark == left && progress++ != kBegun) continue;
                     if (read.mark == right && progress++ != kAtLeft) continue;
                     if (arc.last && progress != kOver) continue;
                     next->push_back(4 * arc.next + progress);
                   }
                 })
      .Others();
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
                 [machine, left, right, left_moves, moved](int state, const MarkedArc& read, std::vector<int>* next) {
                   const int progress = state % 4, mark = read.mark;
                   for (const MarkedArc& arc : machine.arcs[state / 4]) {
                     if (arc.profile != read.profile) continue;
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

// Strings marked as a match of a later clause that changes a slot which a match of an earlier one changes as well. State:
// 2 * run of the earlier one + has it met such a slot.
Subsets ForestalledBan(const MarkedMachine& earlier, const std::vector<char>& changed) {
  std::vector<int> initial;
  std::vector<char> final(earlier.arcs.size() * 2, 0);
  for (int s : earlier.initial) initial.push_back(2 * s);
  for (std::size_t s = 0; s < earlier.arcs.size(); ++s) final[2 * s + 1] = earlier.final[s];
  return Subsets(initial, final, [earlier, changed](int state, const MarkedArc& read, std::vector<int>* next) {
    const bool changes =
        read.mark >= 0 && read.mark < static_cast<int>(changed.size()) && changed[static_cast<std::size_t>(read.mark)];
    for (const MarkedArc& arc : earlier.arcs[state / 2]) {
      if (arc.profile != read.profile) continue;
      const bool theirs = arc.mark >= 0 && arc.role >= 0;  // a role without a label changes no item
      next->push_back(2 * arc.next + (state % 2 == 1 || (changes && theirs) ? 1 : 0));
    }
  });
}

// Strings marked as a match that gives way to another: one in conflict with it whose first slot, or if that is the same
// whose source, stands further the preferred way. State of the other run: where the first slots stand to each other, where
// the sources do, and whether both asked one letter for what cannot be met.
enum Order : int { kNeither = 0, kTheirsFirst = 1, kOursFirst = 2, kTogether = 3 };

int OrderAfter(int order, bool theirs, bool ours) {
  if (order != kNeither) return order;
  return theirs ? (ours ? kTogether : kTheirsFirst) : ours ? kOursFirst : kNeither;
}

struct PreferredBan {
  const MarkedMachine& theirs;
  bool left;                     // prefer left, else right
  int our_source, their_source;  // labels, or -1
  std::function<bool(int our_role, int their_role, int profile)> conflict;

  bool Beaten(int firsts, int sources) const {
    if (firsts != kTogether) return firsts == (left ? kTheirsFirst : kOursFirst);
    // A match without a source counts as standing before all others.
    if (their_source < 0) return left && our_source >= 0;
    if (our_source < 0) return !left;
    return sources == (left ? kTheirsFirst : kOursFirst);
  }

  Subsets Build() const {
    constexpr int kStates = 32;  // 4 orders of first slots, 4 of sources, conflict or not
    std::vector<int> initial;
    std::vector<char> final(theirs.arcs.size() * kStates, 0);
    for (int s : theirs.initial) initial.push_back(s * kStates);
    for (std::size_t s = 0; s < theirs.arcs.size(); ++s) {
      for (int rest = 0; rest < kStates; ++rest)
        final[s * kStates + static_cast<std::size_t>(rest)] =
            theirs.final[s] && (rest & 1) && Beaten(rest / 2 % 4, rest / 8);
    }
    const PreferredBan ban = *this;
    return Subsets(initial, final, [ban](int state, const MarkedArc& ours, std::vector<int>* next) {
      const int rest = state % kStates;
      for (const MarkedArc& arc : ban.theirs.arcs[static_cast<std::size_t>(state / kStates)]) {
        if (arc.profile != ours.profile) continue;
        const bool at_theirs = ban.their_source >= 0 && arc.mark == ban.their_source;
        const bool at_ours = ban.our_source >= 0 && ours.mark == ban.our_source;
        const int firsts = OrderAfter(rest / 2 % 4, arc.first, ours.first);
        const int sources = OrderAfter(rest / 8, at_theirs, at_ours);
        const bool contend =
            (rest & 1) || (arc.role >= 0 && ours.role >= 0 && ban.conflict(ours.role, arc.role, ours.profile));
        next->push_back(arc.next * kStates + sources * 8 + firsts * 2 + (contend ? 1 : 0));
      }
    });
  }
};

// The source in the first change that has one, as a slot of the pattern.
int FirstSource(const Rule& rule, const std::set<int>& labels) {
  for (const Change& change : rule.changes) {
    if (change.source >= 0 && labels.count(change.source) > 0) return change.source;
  }
  return -1;
}

}  // namespace

// One clause: its pattern, less what `unless` and nearer slots bar.
MarkedMachine PatternCompiler::Impl::BuildClause(std::size_t clause, std::size_t max_states, Pools* pools) const {
  MarkedMachine machine = BuildMain(clause, max_states, pools);
  for (const Program& program : clauses[clause].unless) {
    std::set<int> labels;
    for (const Instruction& instruction : program.code) {
      if (instruction.op == Instruction::Op::kSlot && instruction.mark >= 0) labels.insert(instruction.mark);
    }
    for (const Given& given : GivensFor(clauses[clause].where, program)) {
      const MarkedMachine unless = BuildUnless(program, given, max_states);
      if (unless.over_budget) machine = unless;
      machine = Minus(machine, UnlessBan(unless, labels, given, pools->bindings), max_states);
    }
  }
  if (inside) {
    const MarkedMachine reaching = BuildInside(max_states);
    if (reaching.over_budget) machine = reaching;
    machine = Minus(machine, OutsideBan(reaching, where_order.front(), where_order.back()), max_states);
  }
  const MarkedMachine whole = machine;
  std::set<int> own;
  for (const Instruction& instruction : clauses[clause].where.code) {
    if (instruction.op == Instruction::Op::kGap) own.insert(instruction.gap);
  }
  for (int i : own) {
    const GapInfo& gap = gaps[static_cast<std::size_t>(i)];
    if (gap.nearest_left) machine = Minus(machine, NearerBan(whole, gap.left_mark, gap.right_mark, true), max_states);
    if (gap.nearest_right) machine = Minus(machine, NearerBan(whole, gap.left_mark, gap.right_mark, false), max_states);
  }
  return machine;
}

PatternMachine PatternCompiler::Build(std::size_t max_states, const Judge& judge) const {
  impl_->judge = &judge;
  Pools pools;
  const KeyPool& roles = pools.roles;
  std::vector<MarkedMachine> able, machines;
  for (std::size_t c = 0; c < impl_->clauses.size(); ++c) {
    MarkedMachine machine = impl_->BuildClause(c, max_states, &pools);
    able.push_back(machine);
    for (std::size_t earlier = 0; earlier < c; ++earlier) {
      if (able[earlier].over_budget) machine = OverBudget();
      if (able[earlier].initial.empty()) continue;
      machine = Minus(machine, ForestalledBan(able[earlier], impl_->changed), max_states);
    }
    machines.push_back(std::move(machine));
  }
  if (impl_->rule.prefer != Rule::Prefer::kNone) machines = impl_->Preferred(machines, roles, max_states);
  PatternMachine result;
  for (const MarkedMachine& machine : machines) {
    const int first = result.states;
    result.over_budget = result.over_budget || machine.over_budget;
    result.states += static_cast<int>(machine.arcs.size());
    for (int state : machine.initial) result.initial.push_back(first + state);
    result.final.insert(result.final.end(), machine.final.begin(), machine.final.end());
    result.underway.insert(result.underway.end(), machine.underway.begin(), machine.underway.end());
    for (const auto& arcs : machine.arcs) {
      result.arcs.emplace_back();
      for (const MarkedArc& arc : arcs) result.arcs.back().push_back({arc.profile, arc.role, first + arc.next});
    }
  }
  for (int i = 0; i < roles.size(); ++i) result.roles.push_back(impl_->RoleOf(roles[i]));
  return result;
}

Role PatternCompiler::Impl::RoleOf(const Key& key) const {
  Role role;
  role.label = key[0];
  for (std::size_t j = 0; j < spreads.size(); ++j) role.asks.push_back(static_cast<Role::Ask>(key[1 + j]));
  role.values.assign(key.begin() + 1 + static_cast<std::ptrdiff_t>(spreads.size()), key.end() - 1);
  role.merges = key.back() & ~kDoubtful;
  role.doubtful = key.back() & kDoubtful;
  return role;
}

// Each clause without the matches that give way to a preferred one. One that is beaten still beats others.
std::vector<MarkedMachine> PatternCompiler::Impl::Preferred(const std::vector<MarkedMachine>& standing,
                                                            const KeyPool& roles, std::size_t max_states) const {
  std::vector<Role> by_number;
  for (int i = 0; i < roles.size(); ++i) by_number.push_back(RoleOf(roles[i]));
  std::vector<MarkedMachine> result;
  for (std::size_t c = 0; c < standing.size(); ++c) {
    MarkedMachine machine = standing[c];
    for (std::size_t other = 0; other < standing.size(); ++other) {
      if (standing[other].over_budget) machine = OverBudget();
      if (standing[other].initial.empty() || machine.over_budget) continue;
      const PreferredBan ban{standing[other], rule.prefer == Rule::Prefer::kLeft, FirstSource(rule, clauses[c].labels),
                             FirstSource(rule, clauses[other].labels), [&](int ours, int theirs, int profile) {
                               const Key& described = profile_keys[profile];
                               if (described[kProfileKind] >= kBoundaryKind) return false;
                               return judge->conflict(by_number[static_cast<std::size_t>(ours)],
                                                      by_number[static_cast<std::size_t>(theirs)],
                                                      letters[described[LetterField()]]);
                             }};
      machine = Minus(machine, ban.Build(), max_states);
    }
    result.push_back(std::move(machine));
  }
  return result;
}

}  // namespace tiersmith
