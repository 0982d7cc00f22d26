// Tapes: passes in both directions, composition over written strings, merging of states. The machines are small enough to
// be worked out by hand.
#include "compile/tape.h"

#include <catch2/catch.hpp>

#include "compile/compose.h"

using namespace tiersmith;

namespace {

// Reads and writes each class, with a weight.
Tape Copying(const std::vector<int>& classes, float weight) {
  Tape tape;
  tape.arcs.resize(1);
  tape.starts = {0};
  tape.ends = {1};
  for (int c : classes) tape.arcs[0].push_back({c, tape.symbols.Intern(Key{0, c, -1}), 0, weight});
  return tape;
}

}  // namespace

TEST_CASE("tape: a rightward pass knows what came, a leftward pass what comes", "[unit]") {
  Tape letters;
  letters.arcs.resize(1);
  letters.starts = {0};
  letters.ends = {1};
  for (int c : {1, 2}) letters.arcs[0].push_back({c, letters.symbols.Intern(Key{c}), 0});
  const PassFunction neighbour = [](const Key& state, const Key& symbol) {
    return PassStep{symbol, Key{symbol[0], state[0]}};  // each letter with the one before (in the direction of the pass)
  };
  const Tape right = PassRightward(letters, Key{0}, neighbour, 100);
  CHECK(right.arcs.size() == 3);  // nothing, 1 or 2 came before
  CHECK(right.starts.size() == 1);
  const Tape left = PassLeftward(letters, Key{0}, neighbour, 100);
  CHECK(left.arcs.size() == 3);
  CHECK(left.starts.size() == 3);  // read forward, what comes is a guess
  // Only the state with nothing to its right is an end.
  CHECK(std::count(left.ends.begin(), left.ends.end(), 1) == 1);
  CHECK(PassRightward(letters, Key{0}, neighbour, 2).starts.empty());  // past the limit
}

TEST_CASE("tape: composition runs over written strings, keeps rests and adds weights", "[unit]") {
  // 1 is written as "2 1", the 2 inserted with rest 7; then 2 is deleted and 1 stays.
  Tape insert;
  insert.arcs.resize(1);
  insert.starts = {0};
  insert.ends = {1};
  insert.arcs[0].push_back({1, insert.symbols.Intern(Key{0, 2, 7, 1, -1}), 0, 0.5F});
  Tape erase = Copying({1}, 0.25F);
  erase.arcs[0].push_back({2, erase.symbols.Intern(Key{1}), 0, 2.0F});
  bool over = false;
  const Tape both = Compose(insert, erase, 10, 10, &over);
  REQUIRE_FALSE(over);
  REQUIRE(both.ArcCount() == 1);
  CHECK(both.symbols[both.arcs[0][0].out] == Key{1, 1, -1});  // the flag of the deletion, the letter, its own rest
  CHECK(both.arcs[0][0].weight == 2.75F);
  const Tape kept = Compose(insert, Copying({1, 2}, 0), 10, 10, &over);
  REQUIRE(kept.ArcCount() == 1);
  CHECK(kept.symbols[kept.arcs[0][0].out] == Key{0, 2, 7, 1, -1});
}

TEST_CASE("tape: merging states keeps what is read, written and weighed apart", "[unit]") {
  // Two states with equal futures become one; with another weight on one arc they stay two.
  for (float weight : {0.0F, 1.0F}) {
    Tape tape;
    tape.arcs.resize(3);
    tape.starts = {0};
    tape.ends = {0, 1, 1};
    const int out = tape.symbols.Intern(Key{0, 1, -1});
    tape.arcs[0] = {{1, out, 1}, {2, out, 2}};
    tape.arcs[1] = {{1, out, 1}};
    tape.arcs[2] = {{1, out, 2, weight}};
    const Tape small = Reduce(std::move(tape));
    CHECK(small.arcs.size() == (weight == 0 ? 2U : 3U));
  }
}
