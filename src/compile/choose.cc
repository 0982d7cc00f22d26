#include "compile/choose.h"

#include <algorithm>
#include <cmath>
#include <map>
#include <set>

namespace tiersmith {
namespace {

enum Choice : std::int32_t { kOpen = 0, kApply = 1, kLeave = 2 };

constexpr int kNoSite = -1;

// One thing asked in a letter: the place in its request key, and one bit there, or a content.
using Ask = std::pair<std::size_t, std::int32_t>;

// To make a root shorter is to delete its last slot.
std::int32_t AtLastSlot(std::int32_t asked) { return asked & kShorten ? (asked & ~kShorten) | kDeleteSlot : asked; }

std::vector<Ask> AsksIn(const Key& request, bool last_slot) {
  std::vector<Ask> asks;
  for (std::size_t at = 0; at < request.size(); ++at) {
    const std::int32_t content = at == 0 ? 0 : request[at] >> kValuesShift << kValuesShift;
    std::int32_t bits = request[at] & ~content;
    if (at == 0) bits = (last_slot ? AtLastSlot(bits) : bits) & ~(kReaches | kUnsure);
    if (content != 0) asks.push_back({at, content});
    for (; bits != 0; bits &= bits - 1) asks.push_back({at, bits & -bits});
  }
  return asks;
}

// Numbers put together into blocks.
class Blocks {
 public:
  explicit Blocks(std::size_t size) {
    while (above_.size() < size) Add();
  }
  int Add() {
    above_.push_back(static_cast<int>(above_.size()));
    return above_.back();
  }
  int Of(int member) const {
    while (above_[static_cast<std::size_t>(member)] != member) member = above_[static_cast<std::size_t>(member)];
    return member;
  }
  void Unite(int a, int b) { above_[static_cast<std::size_t>(Of(a))] = Of(b); }
  int size() const { return static_cast<int>(above_.size()); }

 private:
  std::vector<int> above_;
};

// A symbol, taken apart: without its request, which is made anew of what applies.
struct Parts {
  Key letter, added;
  std::int32_t profile, left, right;
  std::vector<int>
      asking;  // in order: states after the letter, between two roles, from which a match goes on to ask something
};

// The role arcs that stand at a letter, and what each role asks there.
struct Standing {
  std::vector<RoleArc> arcs;
  std::map<int, std::vector<Ask>> asks;  // by role
};

// Which runs of the pattern stand at a letter, and what they ask.
class Matching {
 public:
  Matching(const TwoSides& sides, const RequestSpace& requests)
      : machine_(sides.machine), sides_(sides), requests_(requests), between_(sides.arcs.size()) {
    if (requests.rule().by_word) return;  // the word holds a match together
    std::vector<std::vector<PatternArc>> back(machine_.arcs.size());
    std::vector<char> before_role(machine_.states, 0), behind_role = before_role;
    for (int s = 0; s < machine_.states; ++s) {
      for (const PatternArc& arc : machine_.arcs[s]) {
        back[arc.next].push_back({arc.profile, arc.role, s});
        if (arc.role >= 0) before_role[s] = behind_role[arc.next] = 1;
      }
    }
    before_role = CanEnd(machine_.arcs, before_role);
    behind_role = CanEnd(back, behind_role);
    for (int s = 0; s < machine_.states; ++s) {
      if (!before_role[s] || !behind_role[s]) continue;
      for (const PatternArc& arc : machine_.arcs[s]) between_[arc.profile].push_back({s, arc.role, arc.next});
    }
  }

  Parts TakeApart(const Key& symbol) const {
    const RuleSpace& space = requests_.space();
    const auto letter_end = symbol.begin() + static_cast<std::ptrdiff_t>(space.AnnotatedSize());
    const auto request_end = letter_end + static_cast<std::ptrdiff_t>(requests_.size());
    const auto added_end = request_end + static_cast<std::ptrdiff_t>(2 * requests_.contents_size());
    return {Key(symbol.begin(), letter_end),
            Key(request_end, added_end),
            added_end[0],
            added_end[1],
            added_end[2],
            std::vector<int>(added_end + 3, symbol.end())};
  }

  Standing At(const Parts& parts) const {
    Standing standing;
    for (const RoleArc& arc : sides_.arcs[static_cast<std::size_t>(parts.profile)]) {
      if (!Stands(arc, parts)) continue;
      standing.arcs.push_back(arc);
      if (standing.asks.count(arc.role) > 0) continue;
      standing.asks[arc.role] = AsksOf(arc.role, parts.letter);
    }
    return standing;
  }

  // Arcs on this letter's profile that lead on from a state between two roles, and may be part of a match.
  std::vector<RoleArc> Onward(const Parts& parts) const {
    std::vector<RoleArc> onward;
    for (const RoleArc& arc : between_[static_cast<std::size_t>(parts.profile)]) {
      if (arc.role < 0 || sides_.right.members[static_cast<std::size_t>(parts.right)][arc.to]) onward.push_back(arc);
    }
    return onward;
  }

  // The first pass, leftward.
  PassStep NoteAsking(const Key& asking_after, const Key& symbol) const {
    PassStep step{{}, symbol};
    step.symbol.insert(step.symbol.end(), asking_after.begin(), asking_after.end());
    const Parts parts = TakeApart(symbol);
    std::set<int> asking;
    for (const RoleArc& arc : Onward(parts)) {
      const bool later = std::binary_search(asking_after.begin(), asking_after.end(), arc.to);
      if (later || (arc.role >= 0 && !AsksOf(arc.role, parts.letter).empty())) asking.insert(arc.from);
    }
    step.state.assign(asking.begin(), asking.end());
    return step;
  }

 private:
  bool Stands(const RoleArc& arc, const Parts& parts) const {
    return sides_.left.members[static_cast<std::size_t>(parts.left)][arc.from] &&
           sides_.right.members[static_cast<std::size_t>(parts.right)][arc.to];
  }
  std::vector<Ask> AsksOf(int role, const Key& letter) const {
    const Key request = requests_.Of({&machine_.roles[static_cast<std::size_t>(role)]}, letter);
    return AsksIn(request, !(requests_.space().Marks(letter, kRootNode) & kToRight));
  }

  const PatternMachine& machine_;
  const TwoSides& sides_;
  const RequestSpace& requests_;
  std::vector<std::vector<RoleArc>> between_;  // by profile: from a state behind a role and before one; no role: -1
};

// State: the sites of the runs that go on to ask, of what objects that go on were asked, of the word; then the choice of
// each site.
class ChoosePass {
 public:
  ChoosePass(const TwoSides& sides, const RequestSpace& requests)
      : machine_(sides.machine), requests_(requests), matching_(sides, requests), draw_(requests.rule().probability) {
    const Tree& tree = requests.space().tree();
    for (std::size_t i = 0; i < requests.nodes().size(); ++i) {
      const NodeId node = requests.nodes()[i];
      for (NodeId at = tree[node].mother; at != kSlotNode; at = tree[at].mother)
        objects_.push_back({at, 1 + i, ~kMergeLeft, node});
      objects_.push_back({node, 1 + i, kMergeLeft, node});
    }
    objects_.push_back({kRootNode, 0, kLength, kRootNode});
  }

  const Matching& matching() const { return matching_; }

  Key Start() const { return Pack(State{{}, std::vector<Asked>(objects_.size()), kNoSite, {}}); }

  std::vector<PassStep> Step(const Key& state, const Key& symbol) const {
    const State before = Unpack(state);
    const Parts parts = matching_.TakeApart(symbol);
    const Standing standing = matching_.At(parts);
    Blocks blocks(before.choices.size());
    std::map<Ask, int> asked;     // what is asked here, and its place in a block
    std::map<int, int> role_at;   // the same of the roles that ask something
    std::map<int, int> underway;  // the same of the runs that go on to ask, by state
    Unite(before, parts, standing, &blocks, &asked, &role_at);
    const auto go_on = [&](int to, int member) {
      if (!std::binary_search(parts.asking.begin(), parts.asking.end(), to)) return;
      blocks.Unite(member, underway.emplace(to, member).first->second);
    };
    for (const RoleArc& arc : matching_.Onward(parts)) {
      const auto run = before.underway.find(arc.from);
      if (run != before.underway.end()) go_on(arc.to, run->second);
    }
    for (const RoleArc& arc : standing.arcs) {
      const auto at = role_at.find(arc.role);
      if (at != role_at.end()) go_on(arc.to, at->second);
    }
    std::vector<PassStep> steps;
    for (const Drawn& drawn : Draws(before, blocks)) {
      State after{underway, Objects(before, parts.letter, blocks, asked), kNoSite, drawn.choices};
      for (auto& run : after.underway) run.second = blocks.Of(run.second);
      if (!EndsWord(parts.letter)) {
        const bool joins = requests_.rule().by_word && !asked.empty();
        const int member = joins ? asked.begin()->second : before.word;
        after.word = member == kNoSite ? kNoSite : blocks.Of(member);
      }
      steps.push_back({Pack(after), Written(parts, standing, role_at, blocks, drawn.choices), drawn.weight});
    }
    return steps;
  }

 private:
  using Asked = std::map<std::int32_t, int>;  // what, in which site
  struct State {
    std::map<int, int> underway;  // by state of the pattern: the site of the runs that stand there
    std::vector<Asked> objects;
    int word = kNoSite;
    std::vector<Choice> choices;  // by site
  };
  // An object that may go on from letter to letter, and the part of a request that is made of it.
  struct Object {
    NodeId kind;
    std::size_t at;  // in the request key
    std::int32_t mask;
    NodeId asked;  // the node that the request is about: below `kind`, or `kind` itself
  };
  struct Drawn {
    std::vector<Choice> choices;  // by block
    float weight;
  };

  bool EndsWord(const Key& letter) const {
    const Boundary end = requests_.rule().within == Domain::kPhrase ? Boundary::kPhrase : Boundary::kWord;
    return !requests_.space().IsSlot(letter[0]) && requests_.space().classes()[letter[0]].visible.boundary >= end;
  }

  // Puts together what is one site because of this letter: what a match asks, what is asked of one object, and of one word.
  void Unite(const State& before, const Parts& parts, const Standing& standing, Blocks* blocks,
             std::map<Ask, int>* asked, std::map<int, int>* role_at) const {
    for (const auto& [role, asks] : standing.asks) {
      for (const Ask& ask : asks) {
        const auto [at, added] = asked->emplace(ask, blocks->size());
        if (added) blocks->Add();
        blocks->Unite(at->second, role_at->emplace(role, at->second).first->second);
      }
    }
    for (const RoleArc& arc : standing.arcs) {
      const auto at = role_at->find(arc.role);
      const auto run = before.underway.find(arc.from);
      if (at != role_at->end() && run != before.underway.end()) blocks->Unite(at->second, run->second);
    }
    for (std::size_t i = 0; i < objects_.size(); ++i) {
      const std::int32_t marks = MarksOf(objects_[i], parts.letter);
      if (!(marks & kFromLeft)) continue;
      for (const auto& [ask, site] : before.objects[i]) {
        const bool shortened = objects_[i].at == 0 && !(marks & kToRight);
        const auto at = asked->find({objects_[i].at, shortened ? AtLastSlot(ask) : ask});
        if (at != asked->end()) blocks->Unite(at->second, site);
      }
    }
    if (!requests_.rule().by_word) return;
    for (const auto& ask : *asked) {
      blocks->Unite(ask.second, asked->begin()->second);
      if (before.word != kNoSite) blocks->Unite(ask.second, before.word);
    }
  }

  // 0 as well where the letter's requests are not made of this object.
  std::int32_t MarksOf(const Object& object, const Key& letter) const {
    const RuleSpace& space = requests_.space();
    if (space.Of(letter[0], object.kind).count == 0) return 0;
    if (object.kind != object.asked && space.LowestAncestor(letter[0], object.asked) != object.kind) return 0;
    return space.Marks(letter, object.kind);
  }

  std::vector<Asked> Objects(const State& before, const Key& letter, const Blocks& blocks,
                             const std::map<Ask, int>& asked) const {
    std::vector<Asked> after(objects_.size());
    for (std::size_t i = 0; i < objects_.size(); ++i) {
      const Object& object = objects_[i];
      const int count = requests_.space().Of(letter[0], object.kind).count;
      const std::int32_t marks = MarksOf(object, letter);
      // What is asked of the first of several goes no further than its letter.
      const bool goes_on = (marks & kToRight) && (object.kind != object.asked || count == 1);
      if (count == 0 || (goes_on && (marks & kFromLeft))) {
        for (const auto& [ask, site] : before.objects[i]) after[i][ask] = blocks.Of(site);
      }
      if (!goes_on) continue;
      for (const auto& [ask, member] : asked) {
        if (ask.first == object.at && (ask.second & object.mask) != 0) after[i][ask.second] = blocks.Of(member);
      }
    }
    return after;
  }

  // A site that goes on was drawn for; of several that turn out to be one, all but one were drawn for too often.
  std::vector<Drawn> Draws(const State& before, const Blocks& blocks) const {
    std::vector<Drawn> all{{std::vector<Choice>(static_cast<std::size_t>(blocks.size()), kOpen), 0}};
    for (int block = 0; block < blocks.size(); ++block) {
      if (blocks.Of(block) != block) continue;
      std::set<Choice> chosen;
      int sites = 0;
      for (std::size_t site = 0; site < before.choices.size(); ++site) {
        if (blocks.Of(static_cast<int>(site)) != block) continue;
        chosen.insert(before.choices[site]);
        ++sites;
      }
      if (chosen.size() > 1) return {};
      std::vector<Drawn> further;
      for (const Drawn& drawn : all) {
        for (Choice choice : {kApply, kLeave}) {
          if (sites > 0 && chosen.count(choice) == 0) continue;
          further.push_back(drawn);
          further.back().choices[static_cast<std::size_t>(block)] = choice;
          further.back().weight += (choice == kApply ? draw_.apply : draw_.leave) * static_cast<float>(1 - sites);
        }
      }
      all = std::move(further);
    }
    return all;
  }

  // The letter with what is asked by the roles whose sites apply, and by those that ask nothing of their own.
  Key Written(const Parts& parts, const Standing& standing, const std::map<int, int>& role_at, const Blocks& blocks,
              const std::vector<Choice>& choices) const {
    std::vector<const Role*> applying;
    for (const auto& entry : standing.asks) {
      const auto at = role_at.find(entry.first);
      if (at == role_at.end() || choices[static_cast<std::size_t>(blocks.Of(at->second))] == kApply)
        applying.push_back(&machine_.roles[static_cast<std::size_t>(entry.first)]);
    }
    Key written = parts.letter;
    const Key request = requests_.Of(applying, parts.letter);
    written.insert(written.end(), request.begin(), request.end());
    written.insert(written.end(), parts.added.begin(), parts.added.end());
    return written;
  }

  // Sites numbered in order of mention, those that nothing mentions forgotten.
  static Key Pack(const State& state) {
    Key key, choices;
    std::map<int, std::int32_t> number;
    const auto mention = [&](int site) {
      if (site == kNoSite) {
        key.push_back(kNoSite);
        return;
      }
      const auto [it, added] = number.emplace(site, static_cast<std::int32_t>(number.size()));
      key.push_back(it->second);
      if (added) choices.push_back(state.choices[static_cast<std::size_t>(site)]);
    };
    const auto list = [&](const std::map<std::int32_t, int>& sites) {
      key.push_back(static_cast<std::int32_t>(sites.size()));
      for (const auto& [what, site] : sites) {
        key.push_back(what);
        mention(site);
      }
    };
    list(state.underway);
    for (const Asked& object : state.objects) list(object);
    mention(state.word);
    key.insert(key.end(), choices.begin(), choices.end());
    return key;
  }

  State Unpack(const Key& key) const {
    State state;
    std::size_t at = 0;
    const auto list = [&](std::map<std::int32_t, int>* sites) {
      for (std::int32_t left = key[at++]; left > 0; --left, at += 2) (*sites)[key[at]] = key[at + 1];
    };
    list(&state.underway);
    state.objects.resize(objects_.size());
    for (Asked& object : state.objects) list(&object);
    state.word = key[at++];
    for (; at < key.size(); ++at) state.choices.push_back(static_cast<Choice>(key[at]));
    return state;
  }

  const PatternMachine& machine_;
  const RequestSpace& requests_;
  Matching matching_;
  Draw draw_;
  std::vector<Object> objects_;
};

}  // namespace

Draw::Draw(double probability)
    : apply(static_cast<float>(-std::log(probability))), leave(static_cast<float>(-std::log1p(-probability))) {}

Tape Choose(const Tape& found, const TwoSides& sides, const RequestSpace& requests, std::size_t max_states) {
  const ChoosePass pass(sides, requests);
  const Tape noted = PassLeftward(
      found, Key{}, [&pass](const Key& state, const Key& symbol) { return pass.matching().NoteAsking(state, symbol); },
      max_states);
  return ChooseRightward(
      noted, pass.Start(), [&pass](const Key& state, const Key& symbol) { return pass.Step(state, symbol); },
      max_states);
}

}  // namespace tiersmith
