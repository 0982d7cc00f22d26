#include "compile/choose.h"

#include <algorithm>
#include <cmath>
#include <map>
#include <set>

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

// State: by request node, for each of its ancestors below the slot, [ask, site]; the same of the root's length; the site of
// the word we are in, if it draws by word; then the choice of each site.
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
    length_at_ = entries_++;
    word_at_ = entries_++;
  }

  Key Start() const { return Pack(std::vector<Carried>(entries_), {kOpen}); }

  std::vector<PassStep> Step(const Key& state, const Key& symbol) const {
    const RuleSpace& space = requests_.space();
    std::vector<Carried> carried;
    std::vector<std::int32_t> choices;
    Unpack(state, &carried, &choices);
    if (!space.IsSlot(symbol[0])) {
      const Boundary end = requests_.rule().within == Domain::kPhrase ? Boundary::kPhrase : Boundary::kWord;
      if (space.classes()[symbol[0]].visible.boundary >= end) carried[word_at_] = Carried();
      return {{Pack(carried, choices), symbol}};
    }
    const auto request = symbol.begin() + static_cast<std::ptrdiff_t>(space.AnnotatedSize());
    const bool asked = std::any_of(request, request + static_cast<std::ptrdiff_t>(requests_.size()),
                                   [](std::int32_t ask) { return ask != 0; });
    if (!asked) return {Went(symbol, kOpen, {}, carried, choices)};
    // Sites that this letter is part of already: it asks the same of an object that one of them goes on to; and its word's.
    std::set<std::int32_t> sites;
    const Key letter(symbol.begin(), request);
    std::size_t at = 0;
    for (std::size_t i = 0; i < ancestors_.size(); ++i) {
      const NodeId anchor = space.LowestAncestor(symbol[0], requests_.nodes()[i]);
      for (NodeId ancestor : ancestors_[i]) {
        const Carried& on = carried[at++];
        const bool same = ancestor == anchor && (space.Marks(letter, ancestor) & kFromLeft) && on.ask != 0 &&
                          on.ask == request[static_cast<std::ptrdiff_t>(1 + i)];
        if (same) sites.insert(on.site);
      }
    }
    const Carried& length = carried[length_at_];
    if (length.ask != 0 && length.ask == (*request & kLength) && (space.Marks(letter, kRootNode) & kFromLeft))
      sites.insert(length.site);
    if (carried[word_at_].site > 0) sites.insert(carried[word_at_].site);
    std::vector<PassStep> steps;
    for (std::int32_t choice : {kApply, kLeave}) {
      const bool fits = std::all_of(sites.begin(), sites.end(), [&](std::int32_t site) {
        return choices[static_cast<std::size_t>(site)] == choice;
      });
      if (!fits) continue;
      steps.push_back(Went(symbol, choice, sites, carried, choices));
      // One draw for all of them: two that turn out to be one were drawn twice.
      const float weight = choice == kApply ? draw_.apply : draw_.leave;
      steps.back().weight = weight * (1 - static_cast<float>(sites.size()));
    }
    return steps;
  }

 private:
  // On to the next letter. With a choice: the sites that the letter is part of are one from here on.
  PassStep Went(const Key& symbol, std::int32_t choice, const std::set<std::int32_t>& sites,
                std::vector<Carried> carried, std::vector<std::int32_t> choices) const {
    const RuleSpace& space = requests_.space();
    const std::size_t request_at = space.AnnotatedSize();
    const Key letter(symbol.begin(), symbol.begin() + static_cast<std::ptrdiff_t>(request_at));
    const bool asked = choice != kOpen;
    const std::int32_t site = static_cast<std::int32_t>(choices.size());
    choices.push_back(choice);
    for (Carried& on : carried) {
      if (sites.count(on.site) > 0) on.site = site;
    }
    if (asked && requests_.rule().by_word) carried[word_at_].site = site;
    const auto carry = [&](NodeId holder, bool own, std::int32_t ask, Carried* on) {
      if (space.Of(letter[0], holder).count == 0) return;  // goes by
      const std::int32_t marks = own ? space.Marks(letter, holder) : 0;
      if (!(marks & kFromLeft)) *on = Carried();
      if (asked && ask != 0) *on = {ask, site};
      if (!(marks & kToRight)) *on = Carried();
    };
    std::size_t at = 0;
    for (std::size_t i = 0; i < ancestors_.size(); ++i) {
      const NodeId anchor = space.LowestAncestor(letter[0], requests_.nodes()[i]);
      for (NodeId ancestor : ancestors_[i])
        carry(ancestor, ancestor == anchor, symbol[request_at + 1 + i], &carried[at++]);
    }
    carry(kRootNode, true, symbol[request_at] & kLength, &carried[length_at_]);
    PassStep step{Pack(carried, choices), symbol};
    if (choice == kLeave)
      std::fill_n(step.symbol.begin() + static_cast<std::ptrdiff_t>(request_at), requests_.size(), 0);
    return step;
  }

  // Sites numbered in order of mention, those that nothing mentions forgotten.
  static Key Pack(const std::vector<Carried>& carried, const std::vector<std::int32_t>& choices) {
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
    return key;
  }

  void Unpack(const Key& key, std::vector<Carried>* carried, std::vector<std::int32_t>* choices) const {
    for (std::size_t i = 0; i < entries_; ++i) carried->push_back({key[2 * i], key[2 * i + 1]});
    choices->push_back(kOpen);
    choices->insert(choices->end(), key.begin() + static_cast<std::ptrdiff_t>(2 * entries_), key.end());
  }

  const RequestSpace& requests_;
  Draw draw_;
  std::vector<std::vector<NodeId>> ancestors_;  // by request node
  std::size_t entries_ = 0, length_at_ = 0, word_at_ = 0;
};

}  // namespace

Draw::Draw(double probability)
    : apply(static_cast<float>(-std::log(probability))), leave(static_cast<float>(-std::log1p(-probability))) {}

bool DrawsLocally(const Rule& rule) {
  if (rule.mode != Rule::Mode::kAtOnce || rule.by_word) return true;
  const std::vector<const Clause*> clauses = ClausesOf(rule);
  return std::all_of(clauses.begin(), clauses.end(), [](const Clause* clause) {
    const int host = HostOf(*clause, clause->changes.front().target);
    return std::all_of(clause->changes.begin(), clause->changes.end(),
                       [&](const Change& change) { return HostOf(*clause, change.target) == host; });
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
