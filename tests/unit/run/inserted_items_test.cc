// What a rule does to the item it inserts, run by machines: copied vowels by a line, by content, whole; what stops a line.
// Winnebago words after Miner 1979 and Hale and White Eagle 1980 (Dorsey's law), Barra Gaelic ones after Clements 1986, both
// from memory; the other forms are derived by hand from the rules beside them and grammar/notation.md §7.
#include "support/compiled_case.h"

#include <algorithm>

namespace tiersmith::testing {
namespace {

// Vowels have a tier of their own; j is a consonant on it.
const char* const kVowelTier = R"(
tree {
  root    > ±son ±syll ±nasal ±lat ±cont
  root    > Place > •Labial •Coronal •Dorsal
  Coronal > ±ant
  root    > Vplace > ±high ±low ±back
}
segments {
  p [-son -syll -nasal -lat -cont Labial]         k [-son -syll -nasal -lat -cont Dorsal]
  s [-son -syll -nasal -lat +cont Coronal +ant]   ʃ [-son -syll -nasal -lat +cont Coronal -ant]
  x [-son -syll -nasal -lat +cont Dorsal]         h [-son -syll -nasal -lat +cont]
  m [+son -syll +nasal -lat -cont Labial]         r [+son -syll -nasal -lat +cont Coronal +ant]
  l [+son -syll -nasal +lat +cont Coronal +ant]   w [+son -syll -nasal -lat +cont Labial]
  j [+son -syll -nasal -lat +cont +high -low -back]
  i [+son +syll -nasal -lat +cont +high -low -back]   e [+son +syll -nasal -lat +cont -high -low -back]
  a [+son +syll -nasal -lat +cont -high +low +back]   o [+son +syll -nasal -lat +cont -high -low +back]
  u [+son +syll -nasal -lat +cont +high -low +back]
}
)";

const std::string kBareVowel = "E:[+son +syll -nasal -lat +cont]";

void CheckRows(const std::string& rules, const std::vector<DerivedRow>& rows) {
  CheckRecovered(CheckByBoth(kVowelTier + rules, rows), rows);
}

}  // namespace

TEST_CASE("inserted items: the vowel that follows, copied by a line", "[unit]") {
  const std::string dorsey = "rule \"Dorsey\" { where C:[-son] R:[+son -syll] V:[+syll]  insert " + kBareVowel +
                             " before R  spread V.Vplace to E }\n";
  CheckRows(dorsey, {{"kre", "kere"},
                     {"hipres", "hiperes"},
                     {"ʃwapox", "ʃawapox"},
                     {"ʃruxuk", "ʃuruxuk"},
                     {"ʃ-ruxuk", "ʃuruxuk"},
                     {"kreːs", "kereːs"},
                     {"prekro", "perekoro"},
                     {"kere", "kere"},
                     // The line would pass over what j has on the tier.
                     {"kje", "kje"}});
  // A line leaves one Vplace on both vowels: what raises the second raises the first. An equal one of its own does not.
  const std::string raising = "rule \"raising\" { where V:[+syll -high -low] #  set V [+high] }\n";
  CheckRows(dorsey + raising, {{"kre", "kiri"}, {"kro", "kuru"}, {"kra", "kara"}, {"hipres", "hiperes"}});
  const std::string copy = "rule \"copy\" { where C:[-son] R:[+son -syll] V:[+syll]  insert " + kBareVowel +
                           " before R  set E.Vplace as V.Vplace }\n";
  CheckRows(copy + raising, {{"kre", "keri"}, {"kro", "koru"}, {"kra", "kara"}, {"kje", "keji"}});

  Compiled grammar = CompileText(kVowelTier + dorsey);
  // Nothing is lost on the way, so both come before forms with boundaries.
  const Runner::Candidates candidates = grammar.Recover("kere", 2);
  std::vector<std::string> forms;
  for (const Runner::Candidate& candidate : candidates.best) forms.push_back(candidate.form);
  std::sort(forms.begin(), forms.end());
  CHECK(forms == std::vector<std::string>{"kere", "kre"});
  CHECK_FALSE(grammar.IsCandidate("kre", "kre"));
  CHECK_FALSE(grammar.IsCandidate("kre", "kore"));
}

TEST_CASE("inserted items: the vowel that precedes", "[unit]") {
  const std::string where = "where V:[+syll] R:[+son -syll] C:[-syll]  ";
  const std::vector<DerivedRow> gaelic = {{"arm", "aram"},   {"orm", "orom"},   {"ʃalk", "ʃalak"},
                                          {"oːrm", "oːrom"}, {"arma", "arama"}, {"ram", "ram"}};
  CheckRows("rule \"echo\" { " + where + "insert " + kBareVowel + " after R  spread V.Vplace to E }", gaelic);
  CheckRows("rule \"echo\" { " + where + "insert " + kBareVowel + " before C  spread V.Vplace to E }", gaelic);
  CheckRows("rule \"echo\" { " + where + "insert " + kBareVowel + " after R  fill E.Vplace as V.Vplace }", gaelic);
  // The whole vowel in place of what was inserted.
  CheckRows("rule \"echo\" { " + where + "insert E:/i/ after R  set E as V }", gaelic);
  CheckRows("rule \"echo\" { " + where + "insert E:/iː/ after R  set E as V }", {{"arm", "araːm"}, {"orka", "oroːka"}});
  // Two lists of one rule: height from the left; backness stays as inserted.
  CheckRows("rule \"echo\" { " + where + "insert E:/u/ after R  set E.high as V.high }",
            {{"arm", "arom"}, {"irm", "irum"}});
  CheckRows("rule \"echo\" { " + where + "insert E:/i/ after R  set E [+back]  fill E [-high] }", {{"arm", "arum"}});
  // Past j no line can be drawn.
  CheckRows("rule \"echo\" { " + where + "insert " + kBareVowel + " after R  spread V.Vplace to E }",
            {{"ajm", "ajm"}, {"arm", "aram"}});
}

TEST_CASE("inserted items: in a sweep the copy is there for the next", "[unit]") {
  const std::string plain =
      "where V:[+syll] A:[-syll] B:[-syll]  insert " + kBareVowel + " before B  fill E.Vplace as V.Vplace  ";
  // At once k has no vowel before it; rightward it has the one that was just inserted. Leftward p is met first.
  CheckRows("rule \"r\" { " + plain + "}", {{"orkp", "orokp"}, {"ark", "arak"}});
  CheckRows("rule \"r\" { " + plain + "iterate rightward }",
            {{"orkp", "orokop"}, {"ark", "arak"}, {"arkipsk", "arakipisik"}});
  CheckRows("rule \"r\" { " + plain + "iterate leftward }", {{"orkp", "orokp"}, {"arkipsk", "arakipisk"}});
  // Two things are done to it.
  CheckRows(
      "allophones { ã [+son +syll +nasal -lat +cont -high +low +back] }\nrule \"r\" { where V:/a/ A:[-syll] B:[-syll]  "
      "insert " +
          kBareVowel + " before B  set E.Vplace as V.Vplace  set E [+nasal]  iterate rightward }",
      {{"arkp", "arãkp"}, {"ark", "arãk"}});
}

TEST_CASE("inserted items: what is not run", "[unit]") {
  for (const auto& [rule, message] : std::vector<std::pair<std::string, std::string>>{
           {"where V:[+syll] C:[-syll] insert " + kBareVowel + " after C spread V.Vplace to E iterate rightward",
            "in a rule that iterates"},
           {"where V:[+syll] C:[-syll] insert " + kBareVowel + " after C spread V.Vplace to E spread V.Vplace to C",
            "another item"}}) {
    CAPTURE(rule);
    const Loaded loaded = Load(kVowelTier + ("rule \"r\" { " + rule + " }"));
    CHECK(loaded.grammar == nullptr);
    CHECK(loaded.Messages().find(message) != std::string::npos);
  }
}

}  // namespace tiersmith::testing
