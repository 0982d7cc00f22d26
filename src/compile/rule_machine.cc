#include "compile/rule_machine.h"

#include <algorithm>

#include "compile/build_letter.h"
#include "compile/find.h"
#include "compile/flatten.h"
#include "compile/pattern.h"
#include "compile/repair.h"
#include "compile/requests.h"

namespace tiersmith {
namespace {

// The last pass, from right to left: requests that come along shared mothers from the right, contents from the right, the
// letter after the change, its link bits, and then the same bits once more after deletions.
class ApplyPass {
 public:
  ApplyPass(const Rule& rule, const RequestSpace& requests, ContentPool& pool, const std::vector<char>& all_links,
            const std::vector<char>& kept_links)
      : rule_(rule),
        requests_(requests),
        space_(requests.space()),
        builder_(requests, pool),
        at_once_(rule.mode == Rule::Mode::kAtOnce),
        deletes_(
            std::any_of(rule.changes.begin(), rule.changes.end(),
                        [](const Change& c) { return c.op == Change::Op::kDelete || c.op == Change::Op::kShorten; })),
        draw_(space_, deletes_ ? all_links : kept_links, rule.mode == Rule::Mode::kLeftward),
        erase_(space_, kept_links, false),
        carrier_(requests, /*rightward=*/false) {
    for (std::size_t i = 0; i < requests.nodes().size(); ++i) {
      offsets_.push_back(size_);
      size_ += carrier_.StateSize(i) + 2;
    }
    Letter empty;
    no_letter_.assign(space_.AnnotatedSize(), 0);
    no_letter_[0] = space_.classes().Classify(empty).class_id;
    for (const Change& change : rule.changes) {
      Letter inserted;
      if (change.op == Change::Op::kInsert) inserted.part.daughters.push_back(PartOf(change.inserted));
      rest_inserted_.push_back(space_.classes().Classify(inserted).rest);
    }
    draw_at_ = size_;
    erase_at_ = draw_at_ + Repair::kEntries * space_.live().size();
    objects_at_ = erase_at_ + Repair::kEntries * space_.live().size();
    joined_at_ = objects_at_ + space_.live().size();
    longer_at_ = joined_at_ + 1;
    size_ = longer_at_ + 1;
  }

  // With nothing to the right, all is as if an unlinked bearer stood there: memories that no change stirs stay as they are.
  Key Start() const {
    Key start(size_, 0);
    for (std::size_t i = draw_at_; i < objects_at_; ++i) start[i] = Repair::kStart[(i - draw_at_) % Repair::kEntries];
    return start;
  }

  PassStep Step(const Key& state, const Key& symbol) const {
    PassStep step;
    step.state = state;
    if (!space_.IsSlot(symbol[0])) {
      step.symbol = BoundaryAfter(symbol[0], symbol[space_.AnnotatedSize()] & kDeleteSlot);
      return step;
    }
    const Key letter(symbol.begin(), symbol.begin() + static_cast<std::ptrdiff_t>(space_.AnnotatedSize()));
    const std::size_t request_at = space_.AnnotatedSize();
    Key request(symbol.begin() + static_cast<std::ptrdiff_t>(request_at),
                symbol.begin() + static_cast<std::ptrdiff_t>(request_at + requests_.size()));
    const std::int32_t* left = &symbol[request_at + requests_.size()];
    const std::int32_t* right = left + requests_.contents_size();
    Key contents(requests_.contents_size(), -1);
    bool unsure = false;
    if (at_once_) {
      for (std::size_t i = 0; i < requests_.nodes().size(); ++i)
        carrier_.Step(letter, i, &step.state[offsets_[i]], &request[1 + i]);
      for (std::size_t i = 0; i < requests_.nodes().size(); ++i) {
        if (!requests_.SpreadsFrom(false, i)) continue;
        std::int32_t* carried = &step.state[offsets_[i] + carrier_.StateSize(i)];
        requests_.GiveBeside(&request[0], /*before=*/false, i, kLineRight, carried[0] - 1, &contents);
        contents[i] = builder_.CarryContent(letter, requests_.nodes()[i], /*rightward=*/false, right[i] != 0,
                                            &request[1], carried, &unsure);
        requests_.GiveBeside(&request[0], /*before=*/true, i, kLineRight, carried[0] - 1, &contents);
      }
      right = contents.data();
    }
    if ((request[0] & kShorten) && (space_.Marks(letter, kRootNode) & kFromLeft)) request[0] |= kDeleteSlot;
    LetterBuilder::Lines lines;
    lines.left = left;
    lines.right = right;
    lines.left_origin = rule_.mode == Rule::Mode::kRightward ? Origin::kNewLeft : Origin::kOldLeft;
    lines.right_origin = rule_.mode == Rule::Mode::kLeftward ? Origin::kNewRight : Origin::kOldRight;
    BuiltLetter built = builder_.Build(letter, &request[1], lines);
    LengthenWhatStays(letter, built, &request, &step.state);
    bool ambiguous = built.clash;
    if (step.state[joined_at_] != 0) Join(&built.slot);

    std::vector<std::pair<int, int>> output;  // from right to left
    Insert(letter, request, lines, /*before=*/false, &step.state, &output, &ambiguous);
    Slot(letter, request, &built, &step.state, &output, &ambiguous);
    Insert(letter, request, lines, /*before=*/true, &step.state, &output, &ambiguous);

    const bool changed = std::find(built.effective.begin(), built.effective.end(), 1) != built.effective.end() ||
                         (request[0] & (kDeleteSlot | kLengthen)) || (request[0] >> kInsertShift) != 0;
    step.symbol.push_back((changed ? kFlagChanged : 0) | (ambiguous ? kFlagAmbiguous : 0) |
                          (request[0] & kReaches ? kFlagReaches : 0) |
                          (unsure || built.unsure || (request[0] & kUnsure) ? kFlagUnsure : 0));
    for (std::size_t k = output.size(); k-- > 0;) {
      step.symbol.push_back(output[k].first);
      step.symbol.push_back(output[k].second);
    }
    return step;
  }

 private:
  // A boundary after the rule; a deleted one that parts words leaves their morphemes apart.
  Key BoundaryAfter(int class_id, bool deleted) const {
    if (!deleted) return Key{0, class_id, -1};
    tiersmith::Letter letter = space_.classes()[class_id].visible;
    if (letter.boundary == Boundary::kMorpheme) return Key{kFlagChanged};
    letter.boundary = Boundary::kMorpheme;
    return Key{kFlagChanged, space_.classes().ClassWithRestOf(class_id, letter), -1};
  }

  // A root is made longer at its last slot that stays its own.
  void LengthenWhatStays(const Key& letter, const BuiltLetter& built, Key* request, Key* state) const {
    if (space_.Of(letter[0], kRootNode).count == 0) return;
    std::int32_t& waiting = (*state)[longer_at_];
    if (waiting != 0) (*request)[0] |= kLengthen;
    const WorkPart* root = FindPart(built.slot, kRootNode, false);
    const bool stays = !((*request)[0] & kDeleteSlot) && root != nullptr && root->origin == Origin::kOwn;
    const bool goes_on = space_.Marks(letter, kRootNode) & kFromLeft;
    waiting = !stays && goes_on && ((*request)[0] & kLengthen) ? 1 : 0;
    if (!stays) (*request)[0] &= ~kLengthen;
  }

  // The slot's new root is that of the next slot.
  static void Join(WorkPart* slot) {
    for (WorkPart& daughter : slot->daughters) {
      if (daughter.node == kRootNode && daughter.origin == Origin::kFresh) daughter.origin = Origin::kFreshJoined;
    }
  }

  // What is inserted on one side of the slot, with what other changes do to it.
  void Insert(const Key& host, const Key& request, const LetterBuilder::Lines& lines, bool before, Key* state,
              std::vector<std::pair<int, int>>* output, bool* ambiguous) const {
    for (std::size_t i = rule_.changes.size(); i-- > 0;) {
      if (rule_.changes[i].op != Change::Op::kInsert || rule_.changes[i].before != before) continue;
      if (!(request[0] >> (kInsertShift + i) & 1)) continue;
      const Key plain = space_.Inserted(rule_.changes[i], host);
      BuiltLetter built = builder_.BuildInserted(i, plain, request, lines);
      Key place = plain;  // nothing stood there
      place[0] = no_letter_[0];
      if (!draw_.Letter(place, &built.slot, &(*state)[draw_at_]) || built.clash) *ambiguous = true;
      output->emplace_back(AfterDeletions(built.slot, plain[0], state), rest_inserted_[i]);
      if (rule_.changes[i].is_long) output->emplace_back(SlotBefore(built.slot, plain[0], state), rest_inserted_[i]);
    }
  }

  // One more slot of the same root, on the left of one: only the root's line leads on, all others lead from the last slot.
  int SlotBefore(WorkPart slot, int like, Key* state) const {
    const auto drop = [](const auto& self, WorkPart* part) -> void {
      part->links = 0;
      for (WorkPart& daughter : part->daughters) self(self, &daughter);
    };
    drop(drop, &slot);
    slot.links = 1u << LinkBit(space_.tree(), kRootNode);
    return AfterDeletions(slot, like, state);
  }

  void Slot(const Key& letter, const Key& request, BuiltLetter* built, Key* state,
            std::vector<std::pair<int, int>>* output, bool* ambiguous) const {
    NodeSet merges;
    for (std::size_t i = 0; i < requests_.nodes().size(); ++i) {
      if (!(request[1 + i] & kMergeLeft)) continue;
      merges.resize(space_.tree().nodes.size(), false);
      merges[requests_.nodes()[i]] = true;
    }
    if (!draw_.Letter(letter, &built->slot, &(*state)[draw_at_], merges.empty() ? nullptr : &merges)) *ambiguous = true;
    const bool joined_right = (*state)[joined_at_] != 0;
    (*state)[joined_at_] = request[0] & kJoined ? 1 : 0;
    if (!(request[0] & kDeleteSlot)) {
      output->emplace_back(AfterDeletions(built->slot, letter[0], state), -1);
      const bool joined = joined_right || (request[0] & kJoined);
      if ((request[0] & kLengthen) || (requests_.GivesLong(request) && !joined))
        output->emplace_back(SlotBefore(built->slot, letter[0], state), -1);
      return;
    }
    const Key between = Between(ClassWithLinks(built->slot, letter[0]), state);
    erase_.Letter(between, nullptr, &(*state)[erase_at_]);
  }

  int ClassWithLinks(const WorkPart& slot, int like) const {
    tiersmith::Letter letter = space_.classes()[like].visible;
    letter.part = LetterBuilder::Plain(slot, /*links=*/true);
    return space_.classes().ClassWithRestOf(like, letter);
  }

  // The letter between lines and deletions, annotated on its right side.
  Key Between(int class_id, Key* state) const {
    Key annotated = no_letter_;
    annotated[0] = class_id;
    const Key objects(state->begin() + static_cast<std::ptrdiff_t>(objects_at_),
                      state->begin() + static_cast<std::ptrdiff_t>(joined_at_));
    const Key marks = space_.RightMarks(objects, annotated);
    for (std::size_t i = 0; i < space_.live().size(); ++i) {
      annotated[1 + i] = marks[i];
      if (space_.Of(class_id, space_.live()[i]).count > 0) (*state)[objects_at_ + i] = marks[i] & kObjectRight;
    }
    return annotated;
  }

  int AfterDeletions(const WorkPart& slot, int like, Key* state) const {
    const int class_id = ClassWithLinks(slot, like);
    if (!deletes_) return class_id;
    const Key between = Between(class_id, state);
    WorkPart work = builder_.Before(between);
    erase_.Letter(between, &work, &(*state)[erase_at_]);
    return ClassWithLinks(work, like);
  }

  const Rule& rule_;
  const RequestSpace& requests_;
  const RuleSpace& space_;
  LetterBuilder builder_;
  bool at_once_;
  bool deletes_;
  Repair draw_, erase_;
  RequestCarrier carrier_;
  std::vector<std::size_t> offsets_;
  std::size_t size_ = 0, draw_at_ = 0, erase_at_ = 0, objects_at_ = 0, joined_at_ = 0, longer_at_ = 0;
  Key no_letter_;
  std::vector<int> rest_inserted_;  // by change
};

// The tape of all strings over some classes in which a root that goes on does go on: after a slot whose root is linked, the
// next slot with a root has the same one. (Links of lower nodes are left to the composition: few letters have them.)
Tape FormsOver(const std::vector<int>& classes, const LetterClasses& letters, const Tree& tree) {
  Tape tape;
  tape.starts = {0};
  tape.arcs.resize(1);
  tape.ends = {1};
  std::vector<std::pair<FeatureTree, int>> waiting;  // a content, and the state that waits for it
  const auto content_of = [&](int c) { return RootContent(letters[c].visible); };
  const auto linked = [&](int c) { return RootGoesOn(letters[c].visible, tree); };
  for (int c : classes) {
    if (!linked(c)) continue;
    const FeatureTree content = *content_of(c);
    const bool known = std::any_of(waiting.begin(), waiting.end(), [&](const auto& w) { return w.first == content; });
    if (known) continue;
    waiting.emplace_back(content, static_cast<int>(tape.arcs.size()));
    tape.arcs.emplace_back();
    tape.ends.push_back(0);
  }
  for (int c : classes) {
    const int symbol = tape.symbols.Intern(Key{c});
    const std::optional<FeatureTree> content = content_of(c);
    int after = 0, own = -1;
    for (const auto& [held, state] : waiting) {
      if (!content.has_value()) tape.arcs[state].push_back({c, symbol, state});
      if (content.has_value() && held == *content) own = state;
    }
    if (linked(c)) after = own;
    tape.arcs[0].push_back({c, symbol, after});
    if (own >= 0) tape.arcs[own].push_back({c, symbol, after});
  }
  return tape;
}

}  // namespace

RuleMachine CompileRule(const Rule& written, LetterClasses& classes, const std::vector<int>& classes_in,
                        const std::vector<NodeId>& live_in, const std::vector<NodeId>& live_out, const Limits& limits) {
  const Rule rule = Flattened(written);
  const RuleSpace space(classes, rule, live_in);
  PatternCompiler pattern(rule, space);
  const RequestSpace requests(rule, space, pattern);
  ContentPool pool;
  const std::size_t most = limits.step_states;
  const Tape annotated = space.Annotate(FormsOver(classes_in, classes, space.tree()), most);
  if (annotated.starts.empty()) return {Tape{}, true};
  Found found = rule.kind == Rule::Kind::kComplete ? FindIncomplete(annotated, requests, limits)
                : rule.mode == Rule::Mode::kAtOnce ? FindAtOnce(annotated, pattern, requests, pool, limits)
                                                   : FindIterating(annotated, pattern, requests, pool, limits);
  if (found.over_budget) return {Tape{}, true};
  std::vector<char> all(live_in.size(), 1), kept(live_in.size(), 0);
  for (std::size_t i = 0; i < live_in.size(); ++i) {
    kept[i] = std::find(live_out.begin(), live_out.end(), live_in[i]) != live_out.end();
  }
  const ApplyPass apply(rule, requests, pool, all, kept);
  Tape tape = PassLeftward(
      found.tape, apply.Start(), [&apply](const Key& state, const Key& symbol) { return apply.Step(state, symbol); },
      most);
  const bool over_budget = tape.starts.empty() && !found.tape.starts.empty();
  return {std::move(tape), over_budget};
}

}  // namespace tiersmith
