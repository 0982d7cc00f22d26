// Length and merging beside other changes of one match, by both engines. Expected forms are worked out by hand from the
// rulings of grammar/notation.md: all is decided on the form before, inserted items included; a root is made longer behind its last
// slot that stays its own.
#include "support/compiled_case.h"

namespace tiersmith::testing {
namespace {

const std::string kContours = R"(
tree {
  root   > ±cons ±son ±syll ±nasal ±cont ×2 in [-son]
  root   > Laryngeal > ±voice sg
  root   > Place > •Labial •Coronal •Dorsal
  Dorsal > ±high ±low
}
segments from "ipa" { p t k b d m n h a i }
segments { t͡s = t [-cont +cont] }
)";

void CheckRows(const std::string& rules, const std::vector<DerivedRow>& rows) { CheckByBoth(kContours + rules, rows); }

}  // namespace

TEST_CASE("several changes: a root of which one half goes is made longer by what stays", "[unit]") {
  CheckRows("rule \"r\" { where X:[half first] Y:[half second]  delete Y  lengthen X }",
            {{"tːa", "tːa"}, {"ta", "ta"}, {"aːtː", "aːtː"}});
  CheckRows("rule \"r\" { where X:[half first] Y:[half second]  shorten Y  lengthen X }", {{"tːa", "tːa"}});
}

TEST_CASE("several changes: the half that stays itself is made longer, not the new one", "[unit]") {
  CheckRows("rule \"r\" { where X:[half first] Y:[half second]  set Y /p/  lengthen X }", {{"tːa", "tːpa"}});
  CheckRows("rule \"r\" { where X:[half first] Y:[half second]  set X /p/  lengthen Y }", {{"tːa", "ptːa"}});
  // Nothing of the old root stays.
  CheckRows("rule \"r\" { where X:[] Y:[]  set X /p/  lengthen Y }", {{"tːa", "pːaː"}, {"ta", "paː"}});
}

TEST_CASE("several changes: what is inserted between two items parts them", "[unit]") {
  const std::string where = "rule \"r\" { where X:[-syll] Y:[-syll]  ";
  CheckRows(where + "insert E:/i/ after X  merge X.root Y.root }", {{"tta", "tita"}, {"tpa", "tipa"}});
  CheckRows(where + "insert E:/i/ before Y  merge Y.root X.root }", {{"tta", "tita"}});
  CheckRows("rule \"r\" { where X:[-syll] Y:[-syll] [+syll]  insert E:/i/ after Y  merge X.root Y.root }",
            {{"tta", "tːia"}, {"tpa", "tpia"}, {"ptta", "ptːia"}});
  // A vowel before what shares its Place with what follows: h has none, and is no obstacle.
  const std::string mark = "rule \"mark\" { where X:[shared Place rightward]  insert E:/a/ before X }";
  CheckRows(where + "insert E:/h/ after X  merge X.Place Y.Place }" + mark, {{"tdi", "athdi"}, {"tpi", "thpi"}});
  CheckRows(where + "insert E:/n/ after X  merge X.Place Y.Place }" + mark, {{"tdi", "tndi"}, {"tpi", "tnpi"}});
}

TEST_CASE("several changes: a contour held by both halves merges by its facing end", "[unit]") {
  const std::string mark = "rule \"mark\" { where X:[-syll shared cont rightward]  insert E:/a/ before X }";
  CheckRows("rule \"r\" { where X:[] Y:[] Z:[]  merge X.cont Z.cont }" + mark,
            {{"tt͡sːi", "att͡sːi"}, {"pt͡sːi", "apt͡sːi"}, {"it͡sːi", "iat͡sːi"}});
}

TEST_CASE("several changes: what one match merges another may part", "[unit]") {
  // atːtki: a and the second t get new roots, and the first t's root is to be one with that of the third.
  const Compiled grammar = CompileText(
      kContours + "rule \"r\" { where X:{/a/ | [half second]} Y:[] Z:[] W:[]  set X /p/  merge Z.root W.root }");
  CHECK(grammar.runner == nullptr);
  CHECK(grammar.Messages().find("the lines of two changes cross") != std::string::npos);
}

}  // namespace tiersmith::testing
