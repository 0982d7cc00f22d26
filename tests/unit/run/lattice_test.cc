// Lattices: ways that write the same are summed before they are ranked, and nothing is counted twice. Sums by hand.
#include "run/lattice.h"

#include <algorithm>
#include <catch2/catch.hpp>
#include <cmath>
#include <map>
#include <set>
#include <string>

namespace tiersmith::testing {
namespace {

constexpr int kNothing = Lattice::kNothing;

bool Near(double a, double b) { return std::abs(a - b) < 1e-12; }

// The likeliest strings, all of them, are these in this order.
void CheckStrings(const Lattice& lattice, const std::vector<Likely>& expected) {
  bool more = true;
  const std::vector<Likely> found = Likeliest(lattice, 100, &more);
  CHECK_FALSE(more);
  REQUIRE(found.size() == expected.size());
  for (std::size_t i = 0; i < expected.size(); ++i) {
    CAPTURE(i, found[i].labels, found[i].probability);
    CHECK(found[i].labels == expected[i].labels);
    CHECK(Near(found[i].probability, expected[i].probability));
  }
}

// Machine of one state, which reads letters of the classes given and writes what is said, each with its probability.
struct Writing {
  int reads;
  Key writes;  // [flags, class, rest, ..]; rest -1: of the letter read
  double probability;
};
Segment SegmentOf(const std::vector<Writing>& writings) {
  Segment segment;
  segment.machine.starts = {0};
  segment.machine.ends = {1};
  segment.machine.arcs.resize(1);
  for (const Writing& writing : writings) {
    const int symbol = segment.machine.symbols.Intern(writing.writes);
    segment.machine.arcs[0].push_back({writing.reads, symbol, 0, static_cast<float>(-std::log(writing.probability))});
  }
  return segment;
}

// Strings of letters, "class:rest class:rest", with their probabilities in thousandths.
using Strings = std::map<std::string, long>;
Strings Written(const Lattice& lattice, const LetterNumbers& letters) {
  bool more = false;
  Strings strings;
  for (const Likely& likely : Likeliest(lattice, 100, &more)) {
    std::string text;
    for (int label : likely.labels)
      text += (text.empty() ? "" : " ") + std::to_string(letters[label].class_id) + ":" +
              std::to_string(letters[label].rest);
    CHECK(strings.emplace(text, std::lround(likely.probability * 1000)).second);
  }
  return strings;
}

}  // namespace

TEST_CASE("lattice: ways that write the same are summed before they are ranked", "[unit]") {
  // Two ways of .3 are more than one of .4.
  CheckStrings({{{{1, .3, 1}, {2, .4, 2}, {1, .3, 3}}, {}, {}, {}}, {0, 1, 1, 1}}, {{{1}, .6}, {{2}, .4}});
  // The likelier beginning is not that of the likeliest string: 1 stands for .6, but goes on in two ways.
  CheckStrings({{{{1, .6, 1}, {2, .4, 3}}, {{3, .5, 2}, {4, .5, 2}}, {}, {}}, {0, 0, 1, 1}},
               {{{2}, .4}, {{1, 3}, .3}, {{1, 4}, .3}});
  // Ways that part and meet again count once each: .5 × .5 + .5 × .5 for 1 2, and so on.
  CheckStrings({{{{1, .5, 1}, {1, .5, 2}}, {{2, .75, 3}, {3, .25, 3}}, {{2, .25, 3}, {3, .75, 3}}, {}}, {0, 0, 0, 1}},
               {{{1, 2}, .5}, {{1, 3}, .5}});
  // Nodes need not be numbered in order.
  CheckStrings({{{{1, 1, 2}}, {{3, .5, 3}, {4, .5, 3}}, {{2, 1, 1}}, {}}, {0, 0, 0, 1}},
               {{{1, 2, 3}, .5}, {{1, 2, 4}, .5}});
}

TEST_CASE("lattice: strings that are empty, or that begin others", "[unit]") {
  CheckStrings(Lattice{}, {});
  CheckStrings(Lattice::Of({}), {{{}, 1}});
  CheckStrings(Lattice::Of({7, 7, 5}), {{{7, 7, 5}, 1}});
  // The empty string, 1, and 1 2, whichever is the likeliest.
  CheckStrings({{{{kNothing, .2, 2}, {1, .5, 2}, {1, .3, 1}}, {{2, 1, 2}}, {}}, {0, 0, 1}},
               {{{1}, .5}, {{1, 2}, .3}, {{}, .2}});
  CheckStrings({{{{kNothing, .5, 2}, {1, .2, 2}, {1, .3, 1}}, {{2, 1, 2}}, {}}, {0, 0, 1}},
               {{{}, .5}, {{1, 2}, .3}, {{1}, .2}});
}

TEST_CASE("lattice: arcs that write nothing", "[unit]") {
  // Before, between and behind; several in a row; two ways to one node.
  CheckStrings({{{{kNothing, 1, 1}},
                 {{kNothing, .5, 2}, {kNothing, .25, 3}, {1, .25, 3}},
                 {{kNothing, 1, 3}},
                 {{2, 1, 4}},
                 {{kNothing, .5, 5}, {3, .5, 5}},
                 {}},
                {0, 0, 0, 0, 0, 1}},
               {{{2}, .375}, {{2, 3}, .375}, {{1, 2}, .125}, {{1, 2, 3}, .125}});
  // 1 then nothing, or nothing then 1: the same.
  CheckStrings({{{{1, .5, 1}, {kNothing, .5, 2}}, {{kNothing, 1, 3}}, {{1, 1, 3}}, {}}, {0, 0, 0, 1}}, {{{1}, 1}});
}

TEST_CASE("lattice: how many there are", "[unit]") {
  // Equally likely strings stand in the order of their labels, a beginning first.
  const Lattice four{{{{2, .5, 1}, {1, .5, 1}}, {{1, .5, 2}, {kNothing, .5, 2}}, {}}, {0, 0, 1}};
  const std::vector<std::vector<int>> order{{1}, {1, 1}, {2}, {2, 1}};
  for (std::size_t most = 0; most <= 5; ++most) {
    CAPTURE(most);
    bool more = false;
    const std::vector<Likely> found = Likeliest(four, most, &more);
    CHECK(more == (most < 4));
    REQUIRE(found.size() == std::min<std::size_t>(most, 4));
    for (std::size_t i = 0; i < found.size(); ++i) {
      CHECK(found[i].labels == order[i]);
      CHECK(Near(found[i].probability, .25));
    }
  }
  // 2 to the 40th strings, found best first without making them all.
  Lattice many;
  many.arcs.resize(41);
  many.ends.assign(41, 0);
  many.ends.back() = 1;
  for (int i = 0; i < 40; ++i) many.arcs[static_cast<std::size_t>(i)] = {{1, .75, i + 1}, {2, .25, i + 1}};
  bool more = false;
  const std::vector<Likely> best = Likeliest(many, 2, &more);
  CHECK(more);
  REQUIRE(best.size() == 2);
  CHECK(best[0].labels == std::vector<int>(40, 1));
  CHECK(Near(best[0].probability, std::pow(.75, 40)));
  CHECK(Near(best[1].probability, std::pow(.75, 39) * .25));
}

TEST_CASE("lattice: other labels for the same", "[unit]") {
  const auto same = [](int state, int label) { return std::make_pair(state, label); };
  CheckStrings(Relabelled(Lattice{}, same), {});
  CheckStrings(Relabelled(Lattice::Of({}), same), {{{}, 1}});
  const Lattice lattice{{{{1, .3, 1}, {2, .4, 1}, {3, .3, 1}}, {{1, 1, 2}}, {}}, {0, 0, 1}};
  CheckStrings(Relabelled(lattice, same), {{{2, 1}, .4}, {{1, 1}, .3}, {{3, 1}, .3}});
  // 3 is written as 1: what was told apart is summed.
  CheckStrings(Relabelled(lattice, [](int state, int label) { return std::make_pair(state, label == 3 ? 1 : label); }),
               {{{1, 1}, .6}, {{2, 1}, .4}});
  // 2 is not written.
  CheckStrings(Relabelled(lattice, [](int s, int label) { return std::make_pair(s, label == 2 ? kNothing : label); }),
               {{{1}, .4}, {{1, 1}, .3}, {{3, 1}, .3}});
  // By what came before: the same label again is written 9. The two ways into the second node are told apart for it, and an
  // arc that writes nothing leaves the state as it was.
  const Lattice again{{{{1, .5, 1}, {2, .5, 1}}, {{kNothing, 1, 2}}, {{1, 1, 3}}, {}}, {0, 0, 0, 1}};
  CheckStrings(Relabelled(again, [](int s, int label) { return std::make_pair(label, s == label ? 9 : label); }),
               {{{1, 9}, .5}, {{2, 1}, .5}});
}

TEST_CASE("lattice: through a machine", "[unit]") {
  LetterNumbers letters;
  const auto of = [&letters](const std::vector<LetterClasses::Parts>& form) {
    std::vector<int> labels;
    for (const LetterClasses::Parts& letter : form) labels.push_back(letters.Number(letter));
    return Lattice::Of(labels);
  };
  const auto through = [&](const Lattice& in, const std::vector<Writing>& writings, std::int32_t* flags) {
    return Through(in, SegmentOf(writings), &letters, flags);
  };
  std::int32_t flags = 0;
  // Class 1 becomes 2 with .25; the rest of the letter rides along, or is told.
  const std::vector<Writing> change{{1, {0, 1, -1}, .75}, {1, {0, 2, -1}, .25}, {3, {0, 3, 8}, 1}};
  const Lattice once = through(of({{1, 5}, {3, 6}}), change, &flags);
  CHECK(Written(once, letters) == Strings{{"1:5 3:8", 750}, {"2:5 3:8", 250}});
  // Deletion and insertion, then back: 1 stays a 1 (.5), goes (.3), is two (.2); then all of class 1 are 4.
  const Lattice lengths =
      through(of({{1, 5}, {1, 6}}), {{1, {0, 1, -1}, .5}, {1, {0}, .3}, {1, {0, 1, -1, 7, 0}, .2}}, &flags);
  CHECK(Written(lengths, letters) == Strings{{"1:5 1:6", 250},
                                             {"1:5", 150},
                                             {"1:6", 150},
                                             {"1:5 7:0 1:6", 100},
                                             {"1:5 1:6 7:0", 100},
                                             {"", 90},
                                             {"1:5 7:0", 60},
                                             {"1:6 7:0", 60},
                                             {"1:5 7:0 1:6 7:0", 40}});
  const Lattice alike = through(lengths, {{1, {0, 4, 0}, 1}, {7, {0, 4, 0}, 1}}, &flags);
  // One letter is left: .15 + .15; two: .25 + .06 + .06; three: .1 + .1.
  CHECK(Written(alike, letters) ==
        Strings{{"4:0 4:0", 370}, {"4:0", 300}, {"4:0 4:0 4:0", 200}, {"", 90}, {"4:0 4:0 4:0 4:0", 40}});
  CHECK(flags == 0);
  // What the machine does not read ends a way; nothing is left if all end so.
  CHECK(Written(through(once, {{1, {0, 1, -1}, 1}, {3, {0, 3, -1}, 1}}, &flags), letters) == Strings{{"1:5 3:8", 750}});
  CHECK(through(once, {{1, {0, 1, -1}, 1}, {2, {0, 2, -1}, 1}}, &flags).arcs.empty());
  // Flags count where a whole way has them: class 2 is read, and what follows it is or is not.
  CHECK(through(once, {{1, {0, 1, -1}, 1}, {2, {4, 2, -1}, 1}}, &flags).arcs.empty());
  CHECK(flags == 0);
  through(once, {{1, {0, 1, -1}, 1}, {2, {4, 2, -1}, 1}, {3, {0, 3, -1}, 1}}, &flags);
  CHECK(flags == 4);
}

TEST_CASE("lattice: the probability of what an automaton accepts, all ways summed", "[unit]") {
  // 0 -1 .5-> 1, 0 -2 .3-> 1, 0 -nothing .2-> 1; 1 -3-> 2.
  Lattice lattice;
  lattice.arcs = {{{1, .5, 1}, {2, .3, 1}, {Lattice::kNothing, .2, 1}}, {{3, 1, 2}}, {}};
  lattice.ends = {0, 0, 1};
  const auto accepting = [&](const std::set<int>& labels, int length) {
    return Probability(
        lattice, [&](int state, int label) { return labels.count(label) > 0 ? state + 1 : -1; },
        [&](int state) { return state == length; });
  };
  CHECK(accepting({1, 2, 3}, 2) == Approx(.8));  // 13, 23
  CHECK(accepting({1, 3}, 2) == Approx(.5));
  CHECK(accepting({1, 2, 3}, 1) == Approx(.2));  // 3
  CHECK(accepting({1, 2}, 1) == 0);
  CHECK(Probability(
            Lattice{}, [](int, int) { return 0; }, [](int) { return true; }) == 0);
}

}  // namespace tiersmith::testing
