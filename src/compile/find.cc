#include "compile/find.h"

#include <algorithm>

#include "compile/choose.h"
#include "compile/flatten.h"
#include "compile/plan.h"
#include "compile/sides.h"

namespace tiersmith {
namespace {

// Whether a content that travels is still to be met, walking from the letter that asks towards its source.
enum Need : std::int32_t {
  kNotNeeded = 0,
  kInMother = 1,  // still inside the span of the asking letter's own mother
  kBeyond = 2,
};

// One step of Need at a letter: is its N the source? `towards` is the mark of the mother's line on the asking side.
bool MeetsSource(std::int32_t* need, const Key& letter, NodeId node, std::int32_t towards, const RuleSpace& space) {
  if (*need == kNotNeeded) return false;
  const RuleSpace::Bearing& bearing = space.Of(letter[0], node);
  const bool same = *need == kInMother && bearing.mother && (space.Marks(letter, space.tree()[node].mother) & towards);
  if (same) return false;
  if (bearing.count > 0) {
    *need = kNotNeeded;
    return true;
  }
  if (bearing.mother) *need = kBeyond;
  return false;
}

void Ask(std::int32_t* need, const Key& letter, NodeId node, const RuleSpace& space) {
  *need = space.Of(letter[0], node).mother ? kInMother : kBeyond;
}

std::vector<const Role*> RolesBetween(const PatternMachine& machine, const std::vector<RoleArc>& arcs,
                                      const std::vector<char>& before, const std::vector<char>& after) {
  std::vector<char> found(machine.roles.size(), 0);
  for (const RoleArc& arc : arcs) {
    if (before[arc.from] && after[arc.to]) found[arc.role] = 1;
  }
  std::vector<const Role*> roles;
  for (std::size_t i = 0; i < found.size(); ++i) {
    if (found[i]) roles.push_back(&machine.roles[i]);
  }
  return roles;
}

Key Annotated(const Key& symbol, const RuleSpace& space) {
  return Key(symbol.begin(), symbol.begin() + static_cast<std::ptrdiff_t>(space.AnnotatedSize()));
}

void Append(Key* key, const Key& more) { key->insert(key->end(), more.begin(), more.end()); }

// Is every root that this role alone changes or brings in spelled by a symbol of `segments` afterwards?
bool Preserves(const Role& role, const Key& annotated, const RequestSpace& requests, const PatternCompiler& pattern,
               ContentPool& pool) {
  const RuleSpace& space = requests.space();
  const Inventory& inventory = space.classes().grammar().inventory;
  const auto spelled = [&inventory](const FeatureTree& root) {
    const int symbol = inventory.Spell(root).symbol;
    return symbol >= 0 && inventory.symbols[static_cast<std::size_t>(symbol)].kind == Symbol::Kind::kSegment;
  };
  const std::vector<Change>& changes = requests.rule().changes;
  Key left(requests.contents_size(), -1), right = left;
  for (std::size_t i = 0; i < changes.size(); ++i) {
    if (changes[i].op != Change::Op::kSpread || HostOf(requests.rule(), changes[i].target) != role.label) continue;
    const Content& content = pattern.ContentOf(role.values[pattern.VariableOf(i)]);
    if (content.empty()) continue;
    const int insertion = InsertionOf(requests.rule(), changes[i].target);
    const std::size_t block = insertion < 0 ? 0 : requests.BlockOf(static_cast<std::size_t>(insertion));
    const auto at = block * requests.nodes().size() + static_cast<std::size_t>(requests.IndexOf(changes[i].node));
    left[at] = right[at] = pool.Intern(FreshPart(content.front()));
  }
  if (!space.IsSlot(annotated[0])) return true;
  const Key request = requests.Of({&role}, annotated);
  const LetterBuilder builder(requests, pool);
  LetterBuilder::Lines lines;
  lines.left = left.data();
  lines.right = right.data();
  const auto root_of = [](const BuiltLetter& built) {
    Letter after;
    after.part = LetterBuilder::Plain(built.slot, /*links=*/false);
    return RootContent(after);
  };
  for (std::size_t i = 0; i < changes.size(); ++i) {
    if (changes[i].op != Change::Op::kInsert || changes[i].target != role.label) continue;
    const std::optional<FeatureTree> root =
        root_of(builder.BuildInserted(i, space.Inserted(changes[i], annotated), request, lines));
    if (root.has_value() && !spelled(*root)) return false;
  }
  if ((request[0] & kDeleteSlot) && !(space.Marks(annotated, kRootNode) & (kFromLeft | kToRight))) return true;
  const std::optional<FeatureTree> root = root_of(builder.Build(annotated, &request[1], lines));
  return !root.has_value() || root == RootContent(space.classes()[annotated[0]].visible) || spelled(*root);
}

PatternCompiler::Judge JudgeOf(const RequestSpace& requests, const PatternCompiler& pattern, ContentPool& pool) {
  PatternCompiler::Judge judge;
  judge.conflict = [&requests](const Role& a, const Role& b, const Key& annotated) {
    return requests.InConflict(a, b, annotated);
  };
  judge.preserves = [&requests, &pattern, &pool](const Role& role, const Key& annotated) {
    return Preserves(role, annotated, requests, pattern, pool);
  };
  return judge;
}

// ---- at once ------------------------------------------------------------------------------------

// Carries requests on shared mothers to the right, and contents from the left. State, by request node: the request
// carried for each proper ancestor below the slot, the last content (+1), the content left of the mother's span (+1), Need to the right.
class SpanPass {
 public:
  SpanPass(const RequestSpace& requests, const LetterBuilder& builder)
      : requests_(requests), builder_(builder), carrier_(requests, /*rightward=*/true) {
    for (std::size_t i = 0; i < requests.nodes().size(); ++i) {
      offsets_.push_back(size_);
      size_ += carrier_.StateSize(i) + 3;
    }
    root_at_ = size_;
    size_ += 2;
  }

  Key Start() const { return Key(size_, 0); }

  PassStep Step(const Key& state, const Key& symbol) const {
    const RuleSpace& space = requests_.space();
    PassStep step{state, symbol};
    if (!space.IsSlot(symbol[0])) return step;
    const std::size_t request_at = space.AnnotatedSize();
    CarryLength(Annotated(symbol, space), &step.symbol[request_at], &step.state[root_at_]);
    const std::size_t left_at = request_at + requests_.size();
    const std::size_t right_at = left_at + requests_.contents_size();
    Key lefts(requests_.contents_size(), -1);
    bool unsure = false;
    for (std::size_t i = 0; i < requests_.nodes().size(); ++i) {
      const NodeId node = requests_.nodes()[i];
      std::int32_t* carried = &step.state[offsets_[i]];
      std::int32_t* need = carried + carrier_.StateSize(i) + 2;
      std::int32_t& request = step.symbol[request_at + 1 + i];
      if (requests_.SpreadsFrom(false, i)) {
        if (requests_.AsksBeside(&symbol[request_at], /*before=*/true, i, kLineRight)) *need = kBeyond;
        step.symbol[right_at + i] = MeetsSource(need, symbol, node, kFromLeft, space);
        if (request & kLineRight) Ask(need, symbol, node, space);
        if (requests_.AsksBeside(&symbol[request_at], /*before=*/false, i, kLineRight)) *need = kBeyond;
      }
      carrier_.Step(symbol, i, carried, &request);
    }
    for (std::size_t i = 0; i < requests_.nodes().size(); ++i) {
      if (!requests_.SpreadsFrom(true, i)) continue;
      std::int32_t* contents = &step.state[offsets_[i] + carrier_.StateSize(i)];
      const bool needed = symbol[left_at + i] != 0;
      requests_.GiveBeside(&symbol[request_at], /*before=*/true, i, kLineLeft, contents[0] - 1, &lefts);
      lefts[i] = builder_.CarryContent(Annotated(symbol, space), requests_.nodes()[i], /*rightward=*/true, needed,
                                       &step.symbol[request_at + 1], contents, &unsure);
      requests_.GiveBeside(&symbol[request_at], /*before=*/false, i, kLineLeft, contents[0] - 1, &lefts);
    }
    if (unsure) step.symbol[request_at] |= kUnsure;
    std::copy(lefts.begin(), lefts.end(), step.symbol.begin() + static_cast<std::ptrdiff_t>(left_at));
    return step;
  }

 private:
  // What is asked of the length of a root is done at its last slot; new roots of one old root are joined if they are equal.
  void CarryLength(const Key& letter, std::int32_t* request, std::int32_t* state) const {
    const RuleSpace& space = requests_.space();
    if (space.Of(letter[0], kRootNode).count == 0) return;
    const std::int32_t marks = space.Marks(letter, kRootNode);
    const int index = requests_.IndexOf(kRootNode);
    const std::int32_t content = index < 0 ? 0 : request[1 + index] >> kValuesShift;
    if (marks & kFromLeft) {
      request[0] |= state[0];
      if (content != 0 && content == state[1]) request[0] |= kJoined;
    }
    state[0] = marks & kToRight ? request[0] & kLength : 0;
    state[1] = marks & kToRight ? content : 0;
    if (marks & kToRight) request[0] &= ~kLength;
  }

  const RequestSpace& requests_;
  const LetterBuilder& builder_;
  RequestCarrier carrier_;
  std::vector<std::size_t> offsets_;
  std::size_t root_at_ = 0;  // of the root that goes on: asked of its length, and its new content
  std::size_t size_ = 0;
};

}  // namespace

Found FindAtOnce(const Tape& annotated, PatternCompiler& pattern, const RequestSpace& requests, ContentPool& pool,
                 const Limits& limits) {
  const std::size_t max_states = limits.step_states;
  const RuleSpace& space = requests.space();
  std::vector<int> profile_of(annotated.symbols.size());
  for (int i = 0; i < annotated.symbols.size(); ++i) profile_of[i] = pattern.Profile(annotated.symbols[i]);
  const int profiles = pattern.profiles();
  const PatternMachine machine = pattern.Build(limits.side_states, JudgeOf(requests, pattern, pool));
  const Side left = SubsetsOf(machine, profiles, limits.side_states);
  const Side right = SubsetsOf(Reversed(machine), profiles, limits.side_states);
  if (machine.over_budget || left.next.empty() || right.next.empty()) return {Tape{}, true};
  const std::vector<std::vector<RoleArc>> arcs = RoleArcs(machine, profiles);
  const bool optional = requests.rule().probability < 1;

  Tape tape = PassRightward(
      annotated, Key{left.start},
      [&](const Key& state, const Key& symbol) {
        PassStep step{Key{left.next[state[0]][pattern.Profile(symbol)]}, symbol};
        step.symbol.push_back(state[0]);
        return step;
      },
      max_states);
  const std::size_t nodes = requests.nodes().size();
  Key right_start(1 + nodes, kNotNeeded);
  right_start[0] = right.start;
  tape = PassLeftward(
      tape, right_start,
      [&](const Key& state, const Key& symbol) {
        PassStep step;
        step.state = state;
        const Key letter = Annotated(symbol, space);
        const int profile = pattern.Profile(letter);
        step.state[0] = right.next[state[0]][profile];
        step.symbol = letter;
        const Key request = requests.Of(
            RolesBetween(machine, arcs[profile], left.members[symbol.back()], right.members[state[0]]), letter);
        Append(&step.symbol, request);
        Key needs(2 * requests.contents_size(), 0);
        if (space.IsSlot(letter[0])) {
          for (std::size_t i = 0; i < nodes; ++i) {
            if (!requests.SpreadsFrom(true, i)) continue;
            std::int32_t* need = &step.state[1 + i];
            if (requests.AsksBeside(&request[0], /*before=*/false, i, kLineLeft)) *need = kBeyond;
            needs[i] = MeetsSource(need, letter, requests.nodes()[i], kToRight, space);
            if (request[1 + i] & kLineLeft) Ask(need, letter, requests.nodes()[i], space);
            if (requests.AsksBeside(&request[0], /*before=*/true, i, kLineLeft)) *need = kBeyond;
          }
        }
        Append(&step.symbol, needs);
        if (optional) Append(&step.symbol, {profile, symbol.back(), state[0]});
        return step;
      },
      max_states);
  if (optional) tape = Choose(tape, {machine, arcs, left, right}, requests, max_states);
  const LetterBuilder builder(requests, pool);
  const SpanPass spans(requests, builder);
  tape = PassRightward(
      tape, spans.Start(), [&spans](const Key& state, const Key& symbol) { return spans.Step(state, symbol); },
      max_states);
  const bool over_budget = tape.starts.empty() && !annotated.starts.empty();
  return {std::move(tape), over_budget};
}

// ---- complete ---------------------------------------------------------------------------------
namespace {

class Completing {
 public:
  explicit Completing(const RequestSpace& requests) : requests_(requests), space_(requests.space()) {}

  Key Of(const Key& letter) const {
    Key request = requests_.None();
    if (!space_.IsSlot(letter[0])) return request;
    const std::optional<FeatureTree> root = RootContent(space_.classes()[letter[0]].visible);
    if (!root.has_value()) return request;
    const Inventory& inventory = space_.classes().grammar().inventory;
    const int symbol = inventory.Spell(*root).symbol;
    if (symbol < 0) return request;
    const FeatureTree& full = inventory.symbols[static_cast<std::size_t>(symbol)].full;
    if (!Ask(*root, full, letter, &request)) return requests_.None();
    if (requests_.ReachesFurther(request, letter)) request[0] |= kUnsure;
    return request;
  }

 private:
  // Asks for the kinds of daughters that `full` has and `there` has not. False: one would cross a line.
  bool Ask(const FeatureTree& there, const FeatureTree& full, const Key& letter, Key* request) const {
    for (NodeId kind : space_.tree()[full.node].daughters) {
      const Content wanted = OfKind(full, kind), borne = OfKind(there, kind);
      if (wanted.empty()) continue;
      if (borne.empty()) {
        const bool fits =
            std::all_of(wanted.begin(), wanted.end(), [&](const FeatureTree& tree) { return Fits(tree, letter); });
        if (!fits) return false;
        (*request)[static_cast<std::size_t>(1 + requests_.IndexOf(kind))] = requests_.AskFor(wanted);
      } else if (borne.size() == 1 && wanted.size() == 1) {
        if (!Ask(borne.front(), wanted.front(), letter, request)) return false;
      }
    }
    return true;
  }

  static Content OfKind(const FeatureTree& mother, NodeId kind) {
    Content content;
    for (const FeatureTree& daughter : mother.daughters) {
      if (daughter.node == kind) content.push_back(daughter);
    }
    return content;
  }

  bool Fits(const FeatureTree& tree, const Key& letter) const {
    if (space_.Marks(letter, tree.node) & kOver) return false;
    return std::all_of(tree.daughters.begin(), tree.daughters.end(),
                       [&](const FeatureTree& daughter) { return Fits(daughter, letter); });
  }

  const RequestSpace& requests_;
  const RuleSpace& space_;
};

}  // namespace

Found FindIncomplete(const Tape& annotated, const RequestSpace& requests, const Limits& limits) {
  const Completing completing(requests);
  const std::size_t nodes = requests.nodes().size();
  Tape tape = PassRightward(
      annotated, Key{},
      [&](const Key& state, const Key& symbol) {
        PassStep step{state, symbol};
        Append(&step.symbol, completing.Of(symbol));
        Append(&step.symbol, Key(nodes, -1));
        Append(&step.symbol, Key(nodes, 0));
        return step;
      },
      limits.step_states);
  const bool over_budget = tape.starts.empty() && !annotated.starts.empty();
  return {std::move(tape), over_budget};
}

// ---- iterating ------------------------------------------------------------------------------------
namespace {

// The sweep goes from `near` (what it leaves behind) to `far` (what is ahead). Rightward: near is left.
struct Direction {
  bool rightward = true;
  std::int32_t near_line() const { return rightward ? kFromLeft : kToRight; }
  std::int32_t near_object() const { return rightward ? kObjectLeft : kObjectRight; }
  std::int32_t far_line() const { return rightward ? kToRight : kFromLeft; }
  std::int32_t far_object() const { return rightward ? kObjectRight : kObjectLeft; }
};

// What the letters behind say to the next: by live node, is the last bearer linked ahead (1), and its near object mark (2).
constexpr std::int32_t kLinkedAhead = 1, kNearObject = 2;

// Before the contents in the state of the pass against the sweep.
constexpr std::size_t kFarState = 4;

// What a draw said.
constexpr std::int32_t kDrawnApply = 1, kDrawnLeave = 2;
constexpr std::int32_t kDrawnBefore = 4;  // in the word before, where the root we are in begins

void DropLinks(WorkPart* part) {
  part->links = 0;
  for (WorkPart& daughter : part->daughters) DropLinks(&daughter);
}

// Everything a sweep carries.
struct SweepState {
  std::int32_t near = 0;    // subset behind, of the output
  std::int32_t visit = -1;  // subset behind of the form at the visit of the root we are in, or -1
  std::int32_t drawn =
      0;  // optional: what the draw of this visit said (of this word, if it draws by word); 0: none yet
  std::int32_t length = 0;   // what that visit asks of the length of the root
  Key requests;              // of that visit, on the root and below
  Key behind, behind_visit;  // what the letters behind say
  Key contents;              // by request node: content behind (+1)
  Key visit_contents;        // the same as it was at the visit

  Key Pack() const {
    Key key{near, visit, drawn, length};
    for (const Key* part : {&requests, &behind, &behind_visit, &contents, &visit_contents}) Append(&key, *part);
    return key;
  }
};

class Sweep {
 public:
  Sweep(const RequestSpace& requests, PatternCompiler& pattern, const PatternMachine& machine, ContentPool& pool,
        Direction direction, int known_profiles, std::size_t max_states)
      : requests_(requests),
        space_(requests.space()),
        pattern_(pattern),
        direction_(direction),
        builder_(requests, pool),
        pool_(pool),
        draw_(requests.rule().probability),
        machine_(direction.rightward ? machine : Reversed(machine)),
        known_profiles_(known_profiles),
        near_(SubsetsOf(machine_, known_profiles, max_states)),
        far_(SubsetsOf(Reversed(machine_), known_profiles, max_states)) {
    by_profile_.resize(known_profiles);
    for (int s = 0; s < machine_.states; ++s) {
      for (const PatternArc& arc : machine_.arcs[s]) by_profile_[arc.profile].push_back({s, arc.role, arc.next});
    }
    contents_ = Deciding();
    if (pattern_.AsksOfSlotsBehind(direction.rightward)) deciding_ = contents_;
    asked_ = LinksAsked(requests.rule(), space_.tree());
    const std::vector<Change>& changes = requests.rule().changes;
    shortens_ =
        std::any_of(changes.begin(), changes.end(), [](const Change& c) { return c.op == Change::Op::kShorten; });
  }

  bool over_budget() const { return near_.next.empty() || far_.next.empty(); }

  std::size_t nodes() const { return requests_.nodes().size(); }
  bool saw_new_profile() const { return saw_new_profile_; }

  // First pass, against the sweep. State: [far subset, ahead, last slot ahead, ahead if freed, content ahead (+1) and ahead of the mother (+1)
  // by node].
  Key FarStart() const {
    Key state(kFarState + 2 * nodes(), 0);
    state[0] = far_.start;
    state[1] = state[2] = state[3] = -1;
    return state;
  }
  PassStep Far(const Key& state, const Key& symbol) {
    PassStep step{state, symbol};
    step.symbol.push_back(state[0]);
    step.symbol.push_back(state[1]);
    step.symbol.push_back(state[2]);
    step.symbol.push_back(state[3]);
    const int profile = pattern_.Profile(symbol);
    step.state[0] = far_.next[state[0]][profile];
    step.state[1] = AheadBefore(state[0], state[1], symbol, profile);
    step.state[3] = AheadBefore(state[0], state[3], symbol, Known(Freed(symbol)));
    step.state[2] = LastSlotBefore(state[2], symbol);
    for (std::size_t i = 0; i < nodes(); ++i) {
      std::int32_t* contents = &step.state[kFarState + 2 * i];
      std::int32_t content = -1;
      if (requests_.SpreadsFrom(!direction_.rightward, i) && space_.IsSlot(symbol[0])) {
        content = builder_.CarryContent(symbol, requests_.nodes()[i], !direction_.rightward, /*needed=*/true, nullptr,
                                        contents, nullptr);
      }
      // Another slot of the same root may be the target: a content is dropped only where a root ends.
      const bool root_ends =
          space_.IsSlot(symbol[0]) && !(space_.Marks(symbol, kRootNode) & (direction_.near_line() | kOver));
      if (root_ends && !Underway(far_, step.state[0], i)) contents[0] = 0;
      step.symbol.push_back(content);
    }
    return step;
  }

  // Second pass, with the sweep.
  Key NearStart() const {
    SweepState state;
    state.near = near_.start;
    state.requests = Key(nodes(), 0);
    state.behind = state.behind_visit = Key(space_.live().size(), 0);
    state.contents = state.visit_contents = Key(nodes(), 0);
    return state.Pack();
  }

  std::vector<PassStep> Near(const Key& packed, const Key& symbol) {
    SweepState state = Unpack(packed);
    const Key input = Annotated(symbol, space_);
    const std::int32_t far = symbol[space_.AnnotatedSize()];
    if (!space_.IsSlot(input[0])) {
      const int profile = Known(input);
      if (state.visit >= 0) state.visit = StepOn(state.visit, profile);
      state.near = StepOn(state.near, profile);
      if (EndsDraw(input[0])) state.drawn = state.visit < 0 ? 0 : state.drawn | kDrawnBefore;
      return {{state.Pack(), Written(input, requests_.None(), Key(nodes(), 0), Key(nodes(), -1).data())}};
    }
    if (state.visit >= 0 && space_.Of(input[0], kRootNode).count == 0) return {PastHole(std::move(state), symbol)};
    const bool first = state.visit < 0;
    if (first) {
      state.visit = state.near;
      state.behind_visit = state.behind;
      state.visit_contents = state.contents;
    }
    const Key at_visit = Current(input, state.behind_visit);
    const bool as_read = SameCrossings(at_visit, input);
    const bool freed = SameCrossings(at_visit, Freed(input));
    const std::int32_t ahead = symbol[space_.AnnotatedSize() + (as_read ? 1 : 3)];
    Key request = Decide(&state, at_visit, far, ahead, first);
    const bool alike = symbol[space_.AnnotatedSize() + 1] == symbol[space_.AnnotatedSize() + 3];
    if (first && !alike && !as_read && !freed) request[0] |= kUnsure;
    const bool asked = std::any_of(request.begin(), request.end(), [](std::int32_t ask) { return ask != 0; });
    if (!asked || requests_.rule().probability >= 1) return {Went(std::move(state), symbol, at_visit, request)};
    std::vector<PassStep> steps;
    const std::int32_t known = state.drawn & (kDrawnApply | kDrawnLeave);
    for (std::int32_t drawn : {kDrawnApply, kDrawnLeave}) {
      if (known != 0 && known != drawn) continue;
      SweepState after = state;
      after.drawn = drawn | (state.drawn & kDrawnBefore);
      if (drawn == kDrawnLeave) {
        after.requests.assign(nodes(), 0);
        after.length = 0;
      }
      steps.push_back(Went(std::move(after), symbol, at_visit, drawn == kDrawnLeave ? requests_.None() : request));
      if (known == 0) steps.back().weight = drawn == kDrawnApply ? draw_.apply : draw_.leave;
    }
    return steps;
  }

 private:
  struct Arc {
    int from, role, to;
  };

  // Past a slot of which this is asked.
  PassStep Went(SweepState state, const Key& symbol, const Key& at_visit, Key request) {
    const Key input = Annotated(symbol, space_);
    const std::int32_t* far_contents = &symbol[space_.AnnotatedSize() + kFarState];
    Key now = Current(input, state.behind);
    if (request[0] & kLength) SettleLength(input, symbol[space_.AnnotatedSize() + 2], &request, &now);
    const bool asked = std::any_of(request.begin(), request.end(), [](std::int32_t ask) { return ask != 0; });
    if (!asked) {
      const Key written = Written(InputWithOver(input, now), request, state.visit_contents, far_contents);
      VisitOn(&state, input, at_visit);
      LeaveAlone(&state, now);
      Forget(&state);
      return {state.Pack(), written};
    }
    const BuiltLetter built = Built(now, request, state, far_contents);
    Key with_flags = request;
    if (Reaches(now, built)) with_flags[0] |= kReaches;
    const SweepState before = state;
    VisitOn(&state, input, at_visit);
    const bool relinked = Leave(&state, now, request, built);
    Forget(&state);
    if (FreesBehind(now, request, built) || HalvesRoot(at_visit, request) || LeavesRoot(request, built) ||
        ChangesBehind(input, now, built) || relinked) {
      with_flags[0] |= kUnsure;
    }
    return {state.Pack(), Written(InputWithOver(input, now), with_flags, before.visit_contents, far_contents)};
  }

  // Past a slot without a root inside the root that is being visited. It has a visit of its own when all that is asked of that
  // root is done, also ahead of it: what is there then is not known here.
  PassStep PastHole(SweepState state, const Key& symbol) {
    const Key input = Annotated(symbol, space_);
    const Key now = Current(input, state.behind);
    Key request = requests_.Of(Chosen(RolesAt(state.near, now, symbol[space_.AnnotatedSize()])), now);
    const bool asked = std::any_of(request.begin(), request.end(), [](std::int32_t ask) { return ask != 0; });
    request = requests_.None();
    if (asked) request[0] |= kUnsure;
    state.visit = StepOn(state.visit, Known(Current(input, state.behind_visit)));
    LeaveAlone(&state, now);
    Forget(&state);
    return {state.Pack(), Written(InputWithOver(input, now), request, Key(nodes(), 0), Key(nodes(), -1).data())};
  }

  // What is asked of the length of a root is done at its last slot. The slot before one that goes rightward ends the root, and
  // stands on its far side as that one did. (`last`: Far; what a slot without a root between the two becomes is not followed.)
  void SettleLength(const Key& input, std::int32_t last, Key* request, Key* now) const {
    std::int32_t& asked = (*request)[0];
    const std::int32_t marks = space_.Marks(input, kRootNode);
    if (space_.Of(input[0], kRootNode).count == 0) {
      asked = (asked & ~kLength) | (asked & kShorten ? kUnsure : 0);
    } else if (!(marks & kToRight)) {
      if (asked & kShorten) asked |= kDeleteSlot;
      if ((asked & kLengthen) && (asked & kDeleteSlot))
        asked = (asked & ~kLengthen) | (marks & kFromLeft ? kUnsure : 0);
    } else {
      if ((asked & kShorten) && last >= 0) {
        const std::int32_t far = direction_.far_line() | direction_.far_object();
        for (std::size_t i = 0; i < space_.live().size(); ++i) {
          if (InRoot(space_.live()[i])) (*now)[1 + i] = ((*now)[1 + i] & ~far) | last_slots_[last][i];
        }
      }
      asked &= ~kLength;
    }
  }

  bool InRoot(NodeId node) const { return node == kRootNode || space_.tree().Dominates(kRootNode, node); }

  // Does the last slot of a root that gets one more behind it give that root up?
  bool LeavesRoot(const Key& request, const BuiltLetter& built) const {
    if (!(request[0] & kLengthen)) return false;
    const WorkPart* root = FindPart(built.slot, kRootNode, /*last=*/true);
    return root == nullptr || root->origin != Origin::kOwn;
  }

  // Does something under this slot's root change that the sweep has already given to a slot behind?
  bool ChangesBehind(const Key& input, const Key& now, const BuiltLetter& built) const {
    if (!(space_.Marks(now, kRootNode) & ~space_.Marks(input, kRootNode) & direction_.near_line())) return false;
    for (std::size_t i = 0; i < nodes(); ++i) {
      if (built.effective[i] && requests_.nodes()[i] != kRootNode) return true;
    }
    return false;
  }

  // Is a new root asked for at one slot of a long one? Whether the other gets the same is decided there.
  bool HalvesRoot(const Key& at_visit, const Key& request) const {
    const int index = requests_.IndexOf(kRootNode);
    return index >= 0 && request[static_cast<std::size_t>(1 + index)] >> kValuesShift != 0 &&
           (space_.Marks(at_visit, kRootNode) & (kFromLeft | kToRight));
  }

  // Is a boundary the end of what one draw is for?
  bool EndsDraw(int boundary_class) const {
    const Boundary end = requests_.rule().within == Domain::kPhrase ? Boundary::kPhrase : Boundary::kWord;
    return requests_.rule().by_word && space_.classes()[boundary_class].visible.boundary >= end;
  }

  SweepState Unpack(const Key& key) const {
    SweepState state;
    state.near = key[0];
    state.visit = key[1];
    state.drawn = key[2];
    state.length = key[3];
    auto at = key.begin() + 4;
    const auto take = [&at](std::size_t n) {
      Key part(at, at + static_cast<std::ptrdiff_t>(n));
      at += static_cast<std::ptrdiff_t>(n);
      return part;
    };
    state.requests = take(nodes());
    state.behind = take(space_.live().size());
    state.behind_visit = take(space_.live().size());
    state.contents = take(nodes());
    state.visit_contents = take(nodes());
    return state;
  }

  // Profiles that the machine was not built for stop the sweep; it is then built again with them.
  int Known(const Key& letter) {
    const int profile = pattern_.Profile(letter);
    if (profile < known_profiles_) return profile;
    saw_new_profile_ = true;
    return 0;
  }

  int StepOn(int near, int profile) const { return near_.next[near][profile]; }

  // Is a spread of this node between its ends?
  bool Underway(const Side& side, int state, std::size_t node_index) const {
    const std::vector<Spread>& spreads = pattern_.spreads();
    for (std::size_t j = 0; j < spreads.size(); ++j) {
      if (spreads[j].node == requests_.nodes()[node_index] && (side.underway[state] >> j & 1)) return true;
    }
    return false;
  }

  // Pairs (state before the rest of this root, role that one of its further slots then gets), as numbers; -1: none.
  int AheadBefore(std::int32_t far, std::int32_t ahead, const Key& symbol, int profile) {
    const bool slot = space_.IsSlot(symbol[0]) && space_.Of(symbol[0], kRootNode).count > 0;
    if (slot && !(space_.Marks(symbol, kRootNode) & direction_.near_line())) return -1;
    std::vector<std::int32_t> pairs;
    const int roles = static_cast<int>(machine_.roles.size());
    for (const Arc& arc : by_profile_[profile]) {
      if (slot && arc.role >= 0 && far_.members[far][arc.to]) pairs.push_back(arc.from * roles + arc.role);
      if (ahead < 0) continue;
      for (std::int32_t pair : aheads_[ahead]) {
        if (pair / roles == arc.to) pairs.push_back(arc.from * roles + pair % roles);
      }
    }
    if (pairs.empty()) return -1;
    std::sort(pairs.begin(), pairs.end());
    pairs.erase(std::unique(pairs.begin(), pairs.end()), pairs.end());
    return aheads_.Intern(pairs);
  }

  bool GoesOn(const Key& letter) const {
    return space_.Of(letter[0], kRootNode).count > 0 && (space_.Marks(letter, kRootNode) & direction_.far_line());
  }

  // What further slots of a root ask depends on what is held behind it when it is visited: a slot as if nothing were that the
  // rule gives contents of.
  Key Freed(Key letter) const {
    if (!space_.IsSlot(letter[0])) return letter;
    for (std::size_t i = 0; i < space_.live().size(); ++i) {
      if (contents_[space_.live()[i]] && space_.live()[i] != kRootNode)
        letter[1 + i] &= ~(kOver | direction_.near_object());
    }
    return letter;
  }

  // Would contents that the rule gives cross the same lines in both?
  bool SameCrossings(const Key& a, const Key& b) const {
    const auto crosses = [&](const Key& letter, NodeId node) {
      const std::int32_t marks = space_.Marks(letter, node);
      const int count = space_.Of(letter[0], node).count;
      return count == 0 ? (marks & kOver) != 0 : count == 1 && (marks & kObjectLeft) && (marks & kObjectRight);
    };
    return std::all_of(space_.live().begin(), space_.live().end(), [&](NodeId node) {
      return !contents_[node] || node == kRootNode || crosses(a, node) == crosses(b, node);
    });
  }

  // In a sweep to the right: what the last slot of the root has on its far side, for the slot before it; -1: none, or another
  // slot of the root comes first.
  std::int32_t LastSlotBefore(std::int32_t last, const Key& symbol) {
    if (!shortens_ || !direction_.rightward) return -1;
    if (!space_.IsSlot(symbol[0]) || space_.Of(symbol[0], kRootNode).count == 0) return last;
    if ((space_.Marks(symbol, kRootNode) & (kFromLeft | kToRight)) != kFromLeft) return -1;
    Key far;
    for (std::size_t i = 0; i < space_.live().size(); ++i) {
      far.push_back(symbol[1 + i] & (direction_.far_line() | direction_.far_object()));
    }
    return last_slots_.Intern(far);
  }

  // On to the next letter: a visit lasts while the root does.
  void VisitOn(SweepState* state, const Key& input, const Key& at_visit) {
    if (GoesOn(input)) {
      state->visit = StepOn(state->visit, Known(at_visit));
      Pass(&state->behind_visit, at_visit);
      return;
    }
    state->visit = -1;
    if (!requests_.rule().by_word || (state->drawn & kDrawnBefore)) state->drawn = 0;
    state->length = 0;
    state->requests.assign(nodes(), 0);
    state->behind_visit.assign(space_.live().size(), 0);
    state->visit_contents.assign(nodes(), 0);
  }

  // A slot that nothing is asked of stays as it is.
  void LeaveAlone(SweepState* state, const Key& now) {
    Pass(&state->behind, now);
    for (std::size_t i = 0; i < nodes(); ++i) {
      if (!requests_.SpreadsFrom(direction_.rightward, i)) continue;
      const WorkPart before = builder_.Before(now);
      const WorkPart* part = FindPart(before, requests_.nodes()[i], direction_.rightward);
      if (part != nullptr) Remember(state, i, *part);
    }
    state->near = StepOn(state->near, Known(now));
  }

  void Remember(SweepState* state, std::size_t node_index, WorkPart content) {
    if (!direction_.rightward) DropLinks(&content);  // its right end is behind
    state->contents[node_index] = pool_.Intern(content) + 1;
  }

  // Contents are kept only while a spread is between its ends.
  void Forget(SweepState* state) const {
    for (std::size_t i = 0; i < nodes(); ++i) {
      if (!Underway(near_, state->near, i)) state->contents[i] = 0;
    }
  }

  // The letter with what the letters behind say on its near side; its far side as in the input.
  Key Current(const Key& input, const Key& behind) const {
    Key letter = input;
    for (std::size_t i = 0; i < space_.live().size(); ++i) {
      const NodeId node = space_.live()[i];
      std::int32_t& marks = letter[1 + i];
      marks &= direction_.far_line() | direction_.far_object();
      if (!space_.Watched(i)) continue;
      const bool linked = behind[i] & kLinkedAhead;
      if (space_.Of(input[0], node).count == 0) {
        if (linked) marks |= kOver;
        continue;
      }
      const int mother = space_.LiveIndex(space_.tree()[node].mother);
      const bool same_mother = mother >= 0 && (letter[1 + mother] & direction_.near_line());
      if (linked) marks |= direction_.near_line();
      if (same_mother ? (behind[i] & kNearObject) != 0 : linked) marks |= direction_.near_object();
    }
    return letter;
  }

  // What the last pass reads: links as they were in the input, spans over the letter as they are now.
  Key InputWithOver(const Key& input, const Key& now) const {
    Key letter = input;
    for (std::size_t i = 1; i <= space_.live().size(); ++i) letter[i] = (letter[i] & ~kOver) | (now[i] & kOver);
    return letter;
  }

  // An unchanged letter goes by.
  void Pass(Key* behind, const Key& letter) const {
    for (std::size_t i = 0; i < space_.live().size(); ++i) {
      if (space_.Of(letter[0], space_.live()[i]).count == 0 || !space_.Watched(i)) continue;
      (*behind)[i] = Behind(letter, i);
    }
  }

  // What a letter leaves behind; its object mark only where the mother goes on.
  std::int32_t Behind(const Key& letter, std::size_t live) const {
    const int mother = space_.LiveIndex(space_.tree()[space_.live()[live]].mother);
    const bool mother_goes_on = mother >= 0 && (letter[1 + mother] & direction_.far_line());
    return (letter[1 + live] & direction_.far_line() ? kLinkedAhead : 0) |
           (mother_goes_on && (letter[1 + live] & direction_.near_object()) ? kNearObject : 0);
  }

  // What is asked of this slot: its own roles, and on the root and below also those of its further slots.
  Key Decide(SweepState* state, const Key& at_visit, std::int32_t far, std::int32_t ahead, bool first) {
    const int roles = static_cast<int>(machine_.roles.size());
    std::vector<char> later(machine_.roles.size(), 0);
    for (const Arc& arc : by_profile_[Known(at_visit)]) {
      if (!first || ahead < 0 || !near_.members[state->visit][arc.from]) continue;
      for (std::int32_t pair : aheads_[ahead]) {
        if (pair / roles == arc.to) later[pair % roles] = 1;
      }
    }
    Key request = requests_.Of(Chosen(RolesAt(state->visit, at_visit, far)), at_visit);
    const Key of_later = requests_.Of(Chosen(later), at_visit);
    if (first) state->length = (request[0] | of_later[0]) & kLength;
    request[0] = (request[0] & ~kLength) | state->length;
    for (std::size_t i = 0; i < nodes(); ++i) {
      if (requests_.nodes()[i] == kRootNode) continue;
      std::int32_t& carried = state->requests[i];
      if (first) carried = RequestSpace::Combine(request[1 + i], of_later[1 + i]);
      request[1 + i] = carried;
    }
    return request;
  }

  // The roles of a letter between what is behind and what is ahead.
  std::vector<char> RolesAt(std::int32_t near, const Key& letter, std::int32_t far) {
    std::vector<char> found(machine_.roles.size(), 0);
    for (const Arc& arc : by_profile_[Known(letter)]) {
      if (arc.role >= 0 && near_.members[near][arc.from] && far_.members[far][arc.to]) found[arc.role] = 1;
    }
    return found;
  }

  std::vector<const Role*> Chosen(const std::vector<char>& found) const {
    std::vector<const Role*> chosen;
    for (std::size_t i = 0; i < found.size(); ++i) {
      if (found[i]) chosen.push_back(&machine_.roles[i]);
    }
    return chosen;
  }

  BuiltLetter Built(const Key& now, const Key& request, const SweepState& state,
                    const std::int32_t* far_contents) const {
    Key near_contents = state.visit_contents;
    for (std::int32_t& content : near_contents) --content;
    LetterBuilder::Lines lines;
    lines.left = direction_.rightward ? near_contents.data() : far_contents;
    lines.right = direction_.rightward ? far_contents : near_contents.data();
    lines.left_origin = direction_.rightward ? Origin::kNewLeft : Origin::kOldLeft;
    lines.right_origin = direction_.rightward ? Origin::kOldRight : Origin::kNewRight;
    return builder_.Build(now, &request[1], lines);
  }

  Key Written(const Key& letter, const Key& request, const Key& near_plus_one, const std::int32_t* far_contents) const {
    Key near = near_plus_one;
    for (std::int32_t& content : near) --content;
    Key far(far_contents, far_contents + nodes());
    for (std::size_t i = 0; i < nodes(); ++i) {  // what is not asked for need not be told apart
      const std::int32_t near_ask = direction_.rightward ? kLineLeft : kLineRight;
      const std::int32_t far_ask = direction_.rightward ? kLineRight : kLineLeft;
      if (!(request[1 + i] & near_ask)) near[i] = -1;
      if (!(request[1 + i] & far_ask)) far[i] = -1;
    }
    near.resize(requests_.contents_size(), -1);
    far.resize(requests_.contents_size(), -1);
    Key symbol = letter;
    Append(&symbol, request);
    Append(&symbol, direction_.rightward ? near : far);
    Append(&symbol, direction_.rightward ? far : near);
    return symbol;
  }

  // Does an effective change touch an object that another root holds as well?
  bool Reaches(const Key& now, const BuiltLetter& built) const {
    for (std::size_t i = 0; i < nodes(); ++i) {
      if (built.effective[i] && space_.MotherElsewhere(now, requests_.nodes()[i])) return true;
    }
    return false;
  }

  // Is a line cut that led here from behind, of a node whose lines decide whether a slot may change?
  bool FreesBehind(const Key& now, const Key& request, const BuiltLetter& built) const {
    if (deciding_.empty()) return false;
    for (std::size_t i = 0; i < space_.live().size(); ++i) {
      const NodeId node = space_.live()[i];
      if (!deciding_[node] || !(now[1 + i] & direction_.near_line()) || LinkGoesOn(now, i)) continue;
      if (InRoot(node) && DeletesOne(now, request)) continue;
      const WorkPart* first = FindPart(built.slot, node, !direction_.rightward);
      const int near_index = direction_.rightward ? 0 : space_.Of(now[0], node).count - 1;
      const bool stays = !(request[0] & kDeleteSlot) && first != nullptr && first->origin == Origin::kOwn &&
                         first->old_index == near_index;
      if (!stays) return true;
    }
    return false;
  }

  // Nodes whose lines decide whether the rule may change a slot.
  NodeSet Deciding() const {
    NodeSet nodes(space_.tree().nodes.size(), false);
    const auto above = [&](NodeId node) {
      for (NodeId at = space_.tree()[node].mother; at != kSlotNode && at != kRootNode; at = space_.tree()[at].mother)
        nodes[at] = true;
    };
    for (const Change& change : requests_.rule().changes) {
      if (change.op == Change::Op::kInsert) {
        const auto all = [&](const auto& self, const FeatureTree& content) -> void {
          nodes[content.node] = true;
          for (const FeatureTree& daughter : content.daughters) self(self, daughter);
        };
        all(all, change.inserted);
      }
      const auto whole = [&](NodeId top) {
        for (std::size_t node = top; node < nodes.size(); ++node) {
          if (node == top || space_.tree().Dominates(top, static_cast<NodeId>(node))) nodes[node] = true;
        }
        above(top);
      };
      for (const Setting& setting : change.settings) {
        if (setting.variable >= 0) {
          whole(setting.node);  // of a class node all under it comes along
          continue;
        }
        nodes[setting.node] = true;
        above(setting.node);
      }
      const bool given =
          change.op == Change::Op::kSetAs || change.op == Change::Op::kFillAs || change.op == Change::Op::kSetLiteral;
      if (given) whole(change.op == Change::Op::kSetLiteral ? kRootNode : change.node);
    }
    for (const Spread& spread : pattern_.spreads()) {
      above(spread.node);
      if (spread.from_left != direction_.rightward) nodes[spread.node] = true;
    }
    return nodes;
  }

  // Steps over what the visit made of this slot: insertions, and the slot unless it went. True: a line between it and what
  // is behind came or went of which the pattern asks; what was read there would read otherwise now.
  bool Leave(SweepState* state, const Key& now, const Key& request, const BuiltLetter& built) {
    const Key behind_before = state->behind;
    bool relinked = false;
    const std::vector<Change>& changes = requests_.rule().changes;
    const auto insertions = [&](bool before) {
      for (std::size_t k = 0; k < changes.size(); ++k) {
        const std::size_t i = direction_.rightward ? k : changes.size() - 1 - k;
        if (changes[i].op != Change::Op::kInsert || changes[i].before != before) continue;
        if (!(request[0] >> (kInsertShift + i) & 1)) continue;
        LeaveInserted(state, now, request, i);
      }
    };
    insertions(direction_.rightward);
    if (request[0] & kDeleteSlot) {
      for (std::size_t i = 0; i < space_.live().size(); ++i) {
        if (space_.Of(now[0], space_.live()[i]).count == 0 || LinkGoesOn(now, i)) continue;
        if (InRoot(space_.live()[i]) && DeletesOne(now, request)) continue;
        relinked = relinked || (asked_[space_.live()[i]] && (behind_before[i] & kLinkedAhead));
        state->behind[i] &= ~kLinkedAhead;
      }
    } else {
      const bool twice = (request[0] & kLengthen) || requests_.GivesLong(request);
      const Key after = LeaveSlot(state, now, built, twice);
      for (std::size_t i = 0; i < space_.live().size(); ++i) {
        const std::int32_t lines = direction_.near_line() | kOver;
        relinked = relinked || (asked_[space_.live()[i]] && ((now[1 + i] ^ after[1 + i]) & lines));
      }
    }
    insertions(!direction_.rightward);
    return relinked;
  }

  // Is this slot deleted, and what its root bears on both sides told by another slot of the root?
  bool DeletesOne(const Key& now, const Key& request) const {
    return (request[0] & kDeleteSlot) &&
           ((request[0] & kShorten) || (space_.Marks(now, kRootNode) & direction_.far_line()));
  }

  // With this letter's own N gone: is the N behind linked to the next one ahead?
  bool LinkGoesOn(const Key& now, std::size_t live) const {
    const std::int32_t marks = now[1 + live];
    return (marks & direction_.near_line()) && (marks & direction_.far_line()) &&
           space_.Of(now[0], space_.live()[live]).count == 1;
  }

  void LeaveInserted(SweepState* state, const Key& host, const Key& request, std::size_t change) {
    const Change& insertion = requests_.rule().changes[change];
    const Key plain = space_.Inserted(insertion, host);
    const BuiltLetter built = builder_.BuildInserted(change, plain, request, {});  // no line leads to it in a sweep
    Key annotated(space_.AnnotatedSize(), 0);
    annotated[0] = builder_.ClassOf(built.slot, plain[0]);
    space_.SetAround(&annotated, space_.Around(host));
    for (std::size_t i = 0; i < space_.live().size(); ++i) {
      if (space_.Of(annotated[0], space_.live()[i]).count > 0) {
        state->behind[i] = 0;
      } else if (state->behind[i] & kLinkedAhead) {
        annotated[1 + i] = kOver;
      }
    }
    for (std::size_t i = 0; i < nodes(); ++i) {
      if (space_.Of(annotated[0], requests_.nodes()[i]).count > 0) {
        const NodeId node = requests_.nodes()[i];
        state->contents[i] = builder_.ContentOf(annotated, node, direction_.rightward, nullptr, nullptr) + 1;
      }
    }
    StepOver(state, annotated, insertion.is_long);
  }

  // On over a slot as it is now, or over two of its root: all under it goes on from the one to the other.
  void StepOver(SweepState* state, const Key& letter, bool twice) {
    if (!twice) {
      state->near = StepOn(state->near, Known(letter));
      return;
    }
    for (const bool first : {true, false}) {
      Key half = letter;
      for (std::size_t i = 0; i < space_.live().size(); ++i) {
        const NodeId node = space_.live()[i];
        if (!InRoot(node) || space_.Of(half[0], node).count == 0) continue;
        half[1 + i] |= first ? direction_.far_line() : direction_.near_line();
        if (node == kRootNode) half[1 + i] |= first ? direction_.far_object() : direction_.near_object();
      }
      state->near = StepOn(state->near, Known(half));
    }
  }

  // The letter as it is now; there are two if its root gets a slot behind it.
  Key LeaveSlot(SweepState* state, const Key& now, const BuiltLetter& built, bool twice) {
    Key letter(space_.AnnotatedSize(), 0);
    letter[0] = builder_.ClassOf(built.slot, now[0]);
    space_.SetAround(&letter, space_.Around(now));
    for (std::size_t i = 0; i < space_.live().size(); ++i) {
      if (space_.Watched(i)) LeaveNode(state, now, built.slot, i, &letter);
    }
    for (std::size_t i = 0; i < nodes(); ++i) {
      if (!requests_.SpreadsFrom(direction_.rightward, i)) continue;
      const WorkPart* part = FindPart(built.slot, requests_.nodes()[i], direction_.rightward);
      if (part == nullptr) continue;
      WorkPart content = *part;
      if (part->origin == Origin::kNewLeft) BreakLinks(&content, now);
      Remember(state, i, std::move(content));
    }
    StepOver(state, AsRead(letter), twice);
    return letter;
  }

  // What is new under a mother that goes on goes on as well; to the next slot that is told only when it is built.
  Key AsRead(Key letter) const {
    for (std::size_t i = 0; i < space_.live().size(); ++i) {
      const int mother = space_.LiveIndex(space_.tree()[space_.live()[i]].mother);
      const bool goes_on = mother >= 0 && (letter[static_cast<std::size_t>(1 + mother)] & direction_.far_line());
      if (goes_on && space_.Of(letter[0], space_.live()[i]).count > 0) letter[1 + i] |= direction_.far_line();
    }
    return letter;
  }

  // A content that moves past this slot loses the links that led to what the slot gave up.
  void BreakLinks(WorkPart* content, const Key& now) const {
    const std::vector<NodeId>& kinds = space_.tree()[content->node].daughters;
    for (std::size_t k = 0; k < kinds.size(); ++k) {
      const RuleSpace::Bearing& bearing = space_.Of(now[0], kinds[k]);
      if (bearing.count > 0 && !(bearing.count == 1 && (space_.Marks(now, kinds[k]) & kObjectRight)))
        content->links &= ~(1u << k);
    }
    for (WorkPart& daughter : content->daughters) BreakLinks(&daughter, now);
  }

  // One live node of the letter as it is now: its marks, and what it says to the next.
  void LeaveNode(SweepState* state, const Key& now, const WorkPart& slot, std::size_t live, Key* letter) const {
    const NodeId node = space_.live()[live];
    const int old_count = space_.Of(now[0], node).count;
    const std::int32_t old_marks = now[1 + live];
    std::int32_t& behind = state->behind[live];
    const bool linked = behind & kLinkedAhead;
    const bool goes_on = old_count == 0 ? linked : LinkGoesOn(now, live);
    const WorkPart* first = FindPart(slot, node, !direction_.rightward);  // nearest to what is behind
    if (first == nullptr) {
      if (!goes_on) behind &= ~kLinkedAhead;
      if (goes_on) (*letter)[1 + live] = kOver;
      return;
    }
    const WorkPart* last = FindPart(slot, node, direction_.rightward);
    const Origin near_origin = direction_.rightward ? Origin::kNewLeft : Origin::kNewRight;
    const Origin far_origin = direction_.rightward ? Origin::kOldRight : Origin::kOldLeft;
    const Moved moved = MovedWith(slot, node, near_origin, far_origin);
    const int near_index = direction_.rightward ? 0 : old_count - 1,
              far_index = direction_.rightward ? old_count - 1 : 0;
    bool near_line = false, far_line = false;
    if (moved.near) {
      near_line = true;
      const int mother = space_.LiveIndex(space_.tree()[node].mother);
      far_line = mother >= 0 && ((*letter)[1 + mother] & direction_.far_line());
      if (!far_line)
        far_line = direction_.rightward ? (moved.mother->links >> LinkBit(space_.tree(), node) & 1) != 0 : goes_on;
    } else if (moved.far) {
      near_line = goes_on;
      far_line = true;
    } else {
      near_line = first->origin == near_origin || (first->origin == far_origin && goes_on) ||
                  (first->origin == Origin::kOwn && first->old_index == near_index && linked);
      far_line = last->origin == far_origin || (last->origin == near_origin && old_count == 0 && linked) ||
                 (last->origin == Origin::kOwn && last->old_index == far_index && (old_marks & direction_.far_line()));
    }
    // Under a mother that is one object with the one behind all is shared, new or old.
    const int mother = space_.LiveIndex(space_.tree()[node].mother);
    const bool same_mother = mother >= 0 && ((*letter)[1 + mother] & direction_.near_line());
    near_line = near_line || same_mother;
    const bool near_object = same_mother ? (behind & kNearObject) != 0 : near_line;
    const bool far_object = last->origin == Origin::kOwn && !moved.near && !moved.far
                                ? (old_marks & direction_.far_object()) != 0 && last->old_index == far_index
                                : far_line;
    (*letter)[1 + live] = (near_line ? direction_.near_line() : 0) | (near_object ? direction_.near_object() : 0) |
                          (far_line ? direction_.far_line() : 0) | (far_object ? direction_.far_object() : 0);
    behind = Behind(*letter, live);
  }

  // Is the bearer of `node` in this letter part of something that moved here?
  struct Moved {
    bool near = false, far = false;
    const WorkPart* mother = nullptr;
  };
  static Moved MovedWith(const WorkPart& slot, NodeId node, Origin near_origin, Origin far_origin) {
    Moved moved;
    Search(slot, node, near_origin, far_origin, moved, &moved);
    return moved;
  }
  static bool Search(const WorkPart& part, NodeId node, Origin near_origin, Origin far_origin, Moved on_path,
                     Moved* result) {
    for (const WorkPart& daughter : part.daughters) {
      if (daughter.node == node) {
        *result = on_path;
        result->mother = &part;
        return true;
      }
      Moved below = on_path;
      below.near = below.near || daughter.origin == near_origin;
      below.far = below.far || daughter.origin == far_origin;
      if (Search(daughter, node, near_origin, far_origin, below, result)) return true;
    }
    return false;
  }

  const RequestSpace& requests_;
  const RuleSpace& space_;
  PatternCompiler& pattern_;
  Direction direction_;
  LetterBuilder builder_;
  ContentPool& pool_;
  Draw draw_;
  PatternMachine machine_;
  int known_profiles_;
  std::vector<std::vector<Arc>> by_profile_;
  Side near_, far_;
  NodeSet contents_;  // whose lines decide whether the rule may change a slot
  NodeSet deciding_;  // the same, if a gap asks of slots behind
  NodeSet asked_;     // nodes of whose lines the pattern asks
  KeyPool aheads_;
  KeyPool last_slots_;
  bool shortens_ = false;
  bool saw_new_profile_ = false;
};

}  // namespace

Found FindIterating(const Tape& annotated, PatternCompiler& pattern, const RequestSpace& requests, ContentPool& pool,
                    const Limits& limits) {
  const std::size_t max_states = limits.step_states;
  const Direction direction{requests.rule().mode == Rule::Mode::kRightward};
  for (int i = 0; i < annotated.symbols.size(); ++i) pattern.Profile(annotated.symbols[i]);
  while (true) {
    const int profiles = pattern.profiles();
    const PatternMachine machine = pattern.Build(limits.side_states, JudgeOf(requests, pattern, pool));
    Sweep sweep(requests, pattern, machine, pool, direction, profiles, limits.side_states);
    if (machine.over_budget || sweep.over_budget()) return {Tape{}, true};
    const PassFunction far = [&sweep](const Key& state, const Key& symbol) { return sweep.Far(state, symbol); };
    const PassChoice near = [&sweep](const Key& state, const Key& symbol) { return sweep.Near(state, symbol); };
    Tape tape = direction.rightward ? PassLeftward(annotated, sweep.FarStart(), far, max_states)
                                    : PassRightward(annotated, sweep.FarStart(), far, max_states);
    if (tape.starts.empty()) return {Tape{}, true};
    tape = direction.rightward ? ChooseRightward(tape, sweep.NearStart(), near, max_states)
                               : ChooseLeftward(tape, sweep.NearStart(), near, max_states);
    // Letters that only the changes make ask things of the pattern that it was not built for: once more with them.
    if (sweep.saw_new_profile()) continue;
    const bool over_budget = tape.starts.empty();
    return {std::move(tape), over_budget};
  }
}

}  // namespace tiersmith
