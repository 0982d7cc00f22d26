#include "compile/choose.h"

#include <algorithm>
#include <cmath>
#include <map>

#include "compile/flatten.h"

namespace tiersmith {
namespace {

enum Choice : std::int32_t { kOpen = 0, kApply = 1, kLeave = 2 };

// What is asked of the whole root, at whichever of its slots.
constexpr std::int32_t kLength = kLengthen | kShorten;

// What an object that goes on was asked: [ask, site]; site 0: nothing.
struct Carried {
  std::int32_t ask = 0;
  std::int32_t site = 0;
};

// State: by request node, for each of its ancestors below the slot, [ask, site]; the same of the root's length; then the
// choice of each site; last the choice of the word.
class ChoosePass {
 public:
  explicit ChoosePass(const RequestSpace& requests) : requests_(requests), draw_(requests.rule().probability) {
    const Tree& tree = requests.space().tree();
    for (NodeId node : requests.nodes()) {
      std::vector<NodeId> ancestors;
      for (NodeId at = tree[node].mother; at != kSlotNode; at = tree[at].mother) ancestors.push_back(at);
      entries_ += ancestors.size();
      ancestors_.push_back(std::move(ancestors));
    }
    ++entries_;  // the length of the root
  }

  Key Start() const { return Pack(std::vector<Carried>(entries_), {kOpen}, kOpen); }

  std::vector<PassStep> Step(const Key& state, const Key& symbol) const {
    const RuleSpace& space = requests_.space();
    std::vector<Carried> carried;
    std::vector<std::int32_t> choices;
    std::int32_t word = kOpen;
    Unpack(state, &carried, &choices, &word);
    if (!space.IsSlot(symbol[0])) {
      const Boundary end = requests_.rule().within == Domain::kPhrase ? Boundary::kPhrase : Boundary::kWord;
      if (space.classes()[symbol[0]].visible.boundary >= end) word = kOpen;
      return {{Pack(carried, choices, word), symbol}};
    }
    const auto request = symbol.begin() + static_cast<std::ptrdiff_t>(space.AnnotatedSize());
    const bool asked = std::any_of(request, request + static_cast<std::ptrdiff_t>(requests_.size()),
                                   [](std::int32_t ask) { return ask != 0; });
    std::vector<PassStep> steps;
    if (!asked) {
      Go(symbol, false, 0, carried, choices, word, &steps);
      return steps;
    }
    if (requests_.rule().by_word) {
      for (std::int32_t choice : {kApply, kLeave}) {
        if (word != kOpen && word != choice) continue;
        const bool drawn = word != kOpen;
        Go(symbol, true, choice, carried, choices, choice, &steps);
        if (!drawn) steps.back().weight = choice == kApply ? draw_.apply : draw_.leave;
      }
      return steps;
    }
    // Sites that this letter is part of already: it asks the same of an object that one of them goes on to.
    std::map<std::int32_t, std::int32_t> sites;  // number -> choice
    std::size_t at = 0;
    for (std::size_t i = 0; i < ancestors_.size(); ++i) {
      const NodeId anchor = space.LowestAncestor(symbol[0], requests_.nodes()[i]);
      const Key letter(symbol.begin(), request);
      for (NodeId ancestor : ancestors_[i]) {
        const Carried& on = carried[at++];
        const bool same = ancestor == anchor && (space.Marks(letter, ancestor) & kFromLeft) && on.site > 0 &&
                          on.ask != 0 && on.ask == request[static_cast<std::ptrdiff_t>(1 + i)];
        if (same) sites.emplace(on.site, choices[static_cast<std::size_t>(on.site)]);
      }
    }
    const Carried& length = carried.back();
    if (length.site > 0 && length.ask == (*request & kLength) && length.ask != 0 &&
        (space.Marks(Key(symbol.begin(), request), kRootNode) & kFromLeft)) {
      sites.emplace(length.site, choices[static_cast<std::size_t>(length.site)]);
    }
    for (std::int32_t choice : {kApply, kLeave}) {
      const bool fits = std::all_of(sites.begin(), sites.end(), [&](const auto& s) { return s.second == choice; });
      if (!fits) continue;
      Go(symbol, true, choice, carried, choices, word, &steps);
      // One draw for all of them: two that turn out to be one were drawn twice.
      const float weight = choice == kApply ? draw_.apply : draw_.leave;
      steps.back().weight = weight * (1 - static_cast<float>(sites.size()));
    }
    return steps;
  }

 private:
  // On to the next letter, with the choice of this one. A choice of 0: nothing was asked.
  void Go(const Key& symbol, bool asked, std::int32_t choice, std::vector<Carried> carried,
          std::vector<std::int32_t> choices, std::int32_t word, std::vector<PassStep>* steps) const {
    const RuleSpace& space = requests_.space();
    const std::size_t request_at = space.AnnotatedSize();
    const Key letter(symbol.begin(), symbol.begin() + static_cast<std::ptrdiff_t>(request_at));
    const std::int32_t site = static_cast<std::int32_t>(choices.size());
    choices.push_back(choice);
    std::size_t at = 0;
    for (std::size_t i = 0; i < ancestors_.size(); ++i) {
      const NodeId anchor = space.LowestAncestor(letter[0], requests_.nodes()[i]);
      for (NodeId ancestor : ancestors_[i]) {
        Carried& on = carried[at++];
        if (space.Of(letter[0], ancestor).count == 0) continue;  // goes by
        const std::int32_t marks = ancestor == anchor ? space.Marks(letter, ancestor) : 0;
        if (!(marks & kFromLeft)) on = Carried();
        if (asked && symbol[request_at + 1 + i] != 0) on = {symbol[request_at + 1 + i], site};
        if (!(marks & kToRight)) on = Carried();
      }
    }
    if (space.Of(letter[0], kRootNode).count > 0) {
      Carried& length = carried.back();
      const std::int32_t marks = space.Marks(letter, kRootNode);
      if (!(marks & kFromLeft)) length = Carried();
      if (asked && (symbol[request_at] & kLength)) length = {symbol[request_at] & kLength, site};
      if (!(marks & kToRight)) length = Carried();
    }
    PassStep step{Pack(carried, choices, word), symbol};
    if (asked && choice == kLeave) {
      std::fill_n(step.symbol.begin() + static_cast<std::ptrdiff_t>(request_at), requests_.size(), 0);
    }
    steps->push_back(std::move(step));
  }

  // Sites numbered in order of mention, those that nothing mentions forgotten.
  Key Pack(const std::vector<Carried>& carried, const std::vector<std::int32_t>& choices, std::int32_t word) const {
    Key key;
    std::map<std::int32_t, std::int32_t> number;
    Key kept;
    for (const Carried& on : carried) {
      std::int32_t site = 0;
      if (on.site > 0) {
        const auto [it, added] = number.emplace(on.site, static_cast<std::int32_t>(number.size()) + 1);
        site = it->second;
        if (added) kept.push_back(choices[static_cast<std::size_t>(on.site)]);
      }
      key.push_back(on.ask);
      key.push_back(site);
    }
    key.insert(key.end(), kept.begin(), kept.end());
    key.push_back(word);
    return key;
  }

  void Unpack(const Key& key, std::vector<Carried>* carried, std::vector<std::int32_t>* choices,
              std::int32_t* word) const {
    for (std::size_t i = 0; i < entries_; ++i) carried->push_back({key[2 * i], key[2 * i + 1]});
    choices->push_back(kOpen);
    choices->insert(choices->end(), key.begin() + static_cast<std::ptrdiff_t>(2 * entries_), key.end() - 1);
    *word = key.back();
  }

  const RequestSpace& requests_;
  Draw draw_;
  std::vector<std::vector<NodeId>> ancestors_;  // by request node
  std::size_t entries_ = 0;
};

}  // namespace

Draw::Draw(double probability)
    : apply(static_cast<float>(-std::log(probability))), leave(static_cast<float>(-std::log1p(-probability))) {}

bool DrawsLocally(const Rule& rule) {
  if (rule.mode != Rule::Mode::kAtOnce || rule.by_word) return true;
  const std::vector<const Clause*> clauses = ClausesOf(rule);
  return std::all_of(clauses.begin(), clauses.end(), [](const Clause* clause) {
    return std::all_of(clause->changes.begin(), clause->changes.end(),
                       [&](const Change& change) { return change.target == clause->changes.front().target; });
  });
}

Found Choose(const Found& found, const RequestSpace& requests, std::size_t max_states) {
  const ChoosePass pass(requests);
  Tape tape = ChooseRightward(
      found.tape, pass.Start(), [&pass](const Key& state, const Key& symbol) { return pass.Step(state, symbol); },
      max_states);
  const bool over_budget = tape.starts.empty() && !found.tape.starts.empty();
  return {std::move(tape), over_budget};
}

}  // namespace tiersmith
