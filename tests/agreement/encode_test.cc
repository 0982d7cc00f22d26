// Decode(Encode(form)) is the form again, for any form the model allows: class contours, floats with all under
// them, instances borne by slots, boundaries, sharing on every tier.
#include <catch2/catch.hpp>

#include <iostream>

#include "letters/letter.h"
#include "support/agree.h"
#include "support/generate.h"
#include "support/small_grammar.h"

using namespace tiersmith;
using namespace tiersmith::testing;

TEST_CASE("encoding is injective: decoding gives the form again", "[agreement]") {
  const std::uint64_t seed = SeedOr(20261201);
  std::cout << "encode: seed " << seed << "\n";
  Rng rng(seed);
  const Grammar grammar = WideGrammar();
  std::size_t with_floats = 0, with_contours = 0;
  for (int i = 0; i < 120'000; ++i) {
    const Form form = Canonical(RandomWideForm(rng, grammar, 7));
    for (const FormItem& item : form.items) with_floats += item.kind == FormItem::Kind::kFloat;
    for (const Instance& instance : form.instances) {
      for (std::size_t d = 1; d < instance.daughters.size(); ++d) {
        with_contours += form.instances[instance.daughters[d]].node == form.instances[instance.daughters[d - 1]].node;
      }
    }
    const std::optional<Form> again = Decode(Encode(form, grammar.tree), grammar.tree);
    if (!again.has_value() || !(*again == form)) {
      FAIL("form " << i << " of seed " << seed << ": " << Dump(form, grammar.tree) << "\ncomes back as "
                   << (again.has_value() ? Dump(*again, grammar.tree) : "nothing"));
    }
  }
  std::cout << "encode: 120000 forms, " << with_floats << " floats, " << with_contours << " contours\n";
  CHECK(with_floats > 10'000);
  CHECK(with_contours > 10'000);
}

TEST_CASE("ill-formed strings of letters have no form", "[agreement]") {
  const Grammar grammar = SmallGrammar();
  std::vector<Letter> letters = Encode(FormOf(grammar, "t{Place:1} d{Place:1}"), grammar.tree);
  REQUIRE(Decode(letters, grammar.tree).has_value());
  SECTION("a link with no next bearer") {
    letters.pop_back();
    CHECK_FALSE(Decode(letters, grammar.tree).has_value());
  }
  SECTION("a link between unequal contents") {
    letters[1] = Encode(FormOf(grammar, "k"), grammar.tree)[0];
    CHECK_FALSE(Decode(letters, grammar.tree).has_value());
  }
}
