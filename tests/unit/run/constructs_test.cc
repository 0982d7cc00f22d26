// Constructs of the notation, one grammar each: what comes out of the machine and of the interpreter. Forms are derived by hand from
// grammar/notation.md and the rule beside them; the words are invented.
#include "support/compiled_case.h"

namespace tiersmith::testing {
namespace {

void CheckRows(const std::string& rules, const std::vector<DerivedRow>& rows) {
  CheckByBoth(kSmallInventory + rules, rows);
}

}  // namespace

TEST_CASE("constructs: a variable for a class node in set and fill", "[unit]") {
  CheckRows(R"(rule "r" { where N:[+nasal αPlace] X:[-son Place]   set X [αPlace] })",
            {{"ampa", "ampa"},    // it has that Place already
             {"anka", "anta"},    // all of n's Place, and nothing of the Dorsal that was there
             {"amtːa", "ampːa"},  // both halves are one root
             {"antka", "antka"},  // no nasal stands before k
             {"nka", "nta"}});
  CheckRows(R"(
    archisegments { T = t [no Place] }
    rule "r" { where X:[-son +cons] N:[+nasal αPlace]   fill X [αPlace] }
    rule "default" { where X:[+cons no Place]   fill X [Coronal] })",
            {{"aTma", "apma"}, {"aTna", "atna"}, {"aTa", "ata"}, {"akma", "akma"}});
  // h has no Place, so there is nothing for α to stand for.
  CheckRows(R"(rule "r" { where X:[-voice Place] Y:[-syll αPlace]   set X [αPlace] })",
            {{"akha", "akha"}, {"akpa", "appa"}});
}

TEST_CASE("constructs: agreement with what bars a rule", "[unit]") {
  // Shared with the `where`: nothing goes behind an obstruent with its own voicing.
  CheckRows(R"(rule "r" { where C:[-son αvoice] [-syll]   delete C   unless [-son αvoice] C })",
            {{"akta", "ata"},     // no obstruent stands before k
             {"apkta", "akta"},   // p goes and bars k
             {"abkta", "ata"}});  // b goes and, being voiced, does not bar k
  // Only in the `unless`: of any value, but the vowels have the same.
  CheckRows(R"(rule "r" { where N:[+nasal] [-syll]   delete N   unless [+syll αlow] N [-syll] [+syll αlow] })",
            {{"anta", "anta"}, {"inti", "inti"}, {"inta", "ita"}, {"anti", "ati"}, {"nta", "ta"}});
  // A class node, on the far side of a stretch of any length.
  CheckRows(R"(rule "r" { where N:[+nasal αPlace]   delete N   unless N [+syll]₁ [-syll αPlace] })",
            {{"anaita", "anaita"}, {"anaika", "aaika"}, {"amapa", "amapa"}, {"ama", "aa"}, {"anta", "ata"}});
}

TEST_CASE("constructs: a boundary at an end of the pattern, deleted", "[unit]") {
  // A space is printed for #; what is left of a deleted one parts morphemes, which a second rule shows.
  const std::string show = R"( rule "show" { where X:/d/ -   set X /n/ within phrase })";
  CheckRows(R"(rule "r" { where X:/d/ B:#   delete B })" + show,
            {{"ad ta", "anta"},  // # goes, and a morpheme ends behind d still
             {"ad", "an"},       // the form's edge stays; it ends a morpheme too
             {"ad-ta", "anta"},  // no word ends
             {"ad ta da", "anta da"},
             {"ad=ta", "anta"}});
  CheckRows(R"(rule "r" { where B:- X:/d/   delete B })"
            R"( rule "show" { where X:/d/ & [+syll]   set X /n/ })",
            {{"ta-da", "tana"}, {"ta da", "tana"}, {"da", "na"}});
  // A weaker boundary of the run stays where its strongest goes.
  CheckRows(R"(rule "r" { where X:/d/ B:-   delete B })"
            R"( rule "show" { where X:/d/ -   set X /n/ })",
            {{"ad-ta", "adta"}, {"adta", "adta"}, {"ad ta", "anta"}, {"ad", "an"}});
  // The boundary is in the morpheme behind it: a suffix's goes, a prefix's does not, and none is at the form's end.
  CheckRows(R"(
    lexicon { suffix /-ta/   prefix /bad-/ }
    rule "r" { where X:/d/ B:-   delete B   only suffix }
    rule "show" { where X:/d/ -   set X /n/ })",
            {{"pad-ta", "padta"}, {"bad-pi", "banpi"}, {"pad", "pan"}});
}

TEST_CASE("constructs: fusing in a pattern", "[unit]") {
  // Which neighbours became one is shown by a rule that deletes nasals with a shared Place.
  const std::string show = R"( rule "show" { where X:[+nasal shared Place]   delete X })";
  CheckRows("fuse Place within morpheme in [+nasal] [-syll]\n" + show,
            {{"anta", "ata"},    // n and t stand in one match
             {"anka", "anka"},   // unequal
             {"an-ta", "anta"},  // two morphemes
             {"atna", "atna"},   // no match: the nasal is second
             {"ntna", "tna"},    // the first two alone
             {"ahnta", "ahta"}});
  // h has no Place and a vowel has its own; the match reaches further than the two.
  CheckRows("fuse Place within morpheme in /p/ [] /m/ [+syll]\n" + show,
            {{"phmi", "phi"}, {"phm", "phm"}, {"pami", "pami"}, {"thni", "thni"}});
}

}  // namespace tiersmith::testing
