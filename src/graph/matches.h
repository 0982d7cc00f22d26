// The matches of a rule on one form, judged: which stand, which fail and why, which give way to another.
//
// In /k...k/ with `sharing blocked`, a match on one half of a long /kː/ fails, for its root is held outside the match
// (the Linking Constraint: Hayes 1986). A match of an `otherwise` clause gives way to one of an earlier clause that
// changes the same item; with `prefer left`, one of two that cannot both be met gives way to the one further left.
// Tested by tests/unit/graph/graph_rulings_test.cc, graph_rules_test.cc.
#pragma once

#include <functional>
#include <string>
#include <vector>

#include "graph/matching.h"
#include "graph/requests.h"

namespace tiersmith::graph {

enum class Failure { kStands, kCapacity, kCrossing, kSharing, kPreserving, kPreferred };
const char* NameOf(Failure failure);

class Matches {
 public:
  Matches(const View& view, const Rule& rule);

  std::size_t size() const { return candidates_.size(); }
  const Match& operator[](std::size_t i) const { return candidates_[i].match; }
  // Alone, does it change anything? Requires: it stands.
  bool Changes(std::size_t i) const { return candidates_[i].changes; }
  // The slot of its first item (with `prefer right`, of several ways the rightmost). Requires: AsksForSlots(rule).
  int FirstSlot(std::size_t i) const { return candidates_[i].first; }

  // Those of the matches `among` that apply, in order; `failed` hears of the others but for those that give way to an
  // earlier clause.
  std::vector<std::size_t> Standing(const std::vector<std::size_t>& among,
                                    const std::function<void(std::size_t, Failure)>& failed);

 private:
  // Ways with the same labels and variables are one match.
  struct Candidate {
    Match match;
    int clause = 0;  // 0: the rule's own, then those after `otherwise`
    int first = -1;
    bool shared_outside = false;  // in every way of matching
    bool judged = false;          // the rest is known; judging costs, and a sweep asks for few
    Failure failure = Failure::kStands;
    bool changes = false;
  };
  using Ways = std::vector<Way>;
  using MatchOf = boost::container::small_vector<int, 16>;

  void AddClause(const Clause& clause, int number);
  const Candidate& Judged(std::size_t i);
  void Judge(Candidate* candidate) const;
  bool HasNearer(const Ways& ways, const MatchOf& match_of, const Way& way);
  static bool IsNearer(const Way::Gap& other, const Way::Gap& gap);
  void NoteSlots(const Way& way, bool is_first, Candidate* candidate) const;
  bool SharedOutside(const Way& way) const;
  bool Preserves(const Requests& alone) const;
  bool Changed(std::size_t earlier, std::size_t i) const;
  bool Beats(std::size_t other, std::size_t i) const;
  bool InConflict(std::size_t a, std::size_t b) const;
  int FirstSource(const Match& match) const;
  std::vector<int> ChangedItems(const Match& match) const;

  const View& view_;
  const Rule& rule_;
  std::vector<Candidate> candidates_;
};

}  // namespace tiersmith::graph
