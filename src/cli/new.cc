// tiersmith new: a starter grammar, every section with a comment, to be edited. Its language is invented. It checks
// and derives its data as it stands. Tested by tests/cli/new.sh.
#include <fmt/format.h>

#include <filesystem>

#include "cli/command.h"

namespace tiersmith::cli {
namespace {

constexpr const char* kStarter =
    R"tier(-- A grammar to begin with: change what is different in your language, and try it after every change.
--   tiersmith check FILE                    derives the data at the end of this file
--   tiersmith derive FILE --trace aN-pika   shows a derivation rule by rule
--   tiersmith recover FILE tat              asks what a surface form may stand for
-- Olmet is an invented language, and so are its words. Two dashes begin a comment.
language "Olmet"

-- The feature tree: who dominates whom. ±voice has two values; Labial is there or not; a name with daughters is a class
-- node; • marks one that stays when nothing is left under it.
tree {
  root   > ±cons ±son ±syll ±nasal ±cont
  root   > Laryngeal > ±voice
  root   > Place > •Labial •Coronal •Dorsal
  Dorsal > ±high ±low ±back
}

-- The segments, with the values that the library "ipa" gives them in this tree. `x = y [..]` makes one like another, but for
-- what the bundle says; `no N` takes a node away. Archisegments stand in underlying forms only, allophones in surface forms only.
segments from "ipa" { p t k b d ɡ m n s l i u a }
archisegments { N = n [no Place] }
allophones { ŋ }

-- Values that are no part of underlying forms, and come back when the result is spelled.
omit { +voice in [+son] }

-- Names for sets of segments, to be used in rules.
class C   = [-syll]
class Obs = [-son]

-- The rules, in the order in which they apply: `where` gives the pattern, with labels on what changes.
-- This one draws a line: a nasal without a place shares that of the consonant behind it.
rule "nasal place"     { where N:[+nasal, no Place] T:[+cons Place]   spread T.Place to N }
-- This one fills in what is missing.
rule "default place"   { where N:[+nasal, no Place]   fill N [Coronal] }
-- This one inserts a vowel; # is the edge of a word.
rule "epenthesis"      { where C X:C #   insert E:/i/ before X }
-- This one changes a value, and must come after "epenthesis": see /lamb/.
rule "final devoicing" { where X:Obs #   set X [-voice] }

-- The words: underlying form, gloss, tags to choose them by. Entries of longer lists: lexicon from "lexicon.tsv".
lexicon {
  stem /pika/ 'house' noun   stem /ɡulu/ 'field' noun   stem /isu/ 'water' noun   stem /tad/ 'stone' noun
  stem /kisl/ 'bird' noun    stem /lamb/ 'river' noun   prefix /aN-/ 'in'         suffix /-u/ 'plural'
}
-- The forms each of them has: one of the affixes of each line; // is none.
paradigm noun {
  stem noun
  place  : BARE //   IN /aN-/
  number : SG //   PL /-u/
}

-- What the rules should derive: underlying form, surface form, gloss. Tables may be read too: data from "words.tsv".
data {
  /aN-pika/ [ampika] 'in the house'    /aN-ɡulu/ [aŋɡulu] 'in the field'    /aN-isu/ [anisu] 'in the water'
  /tad/     [tat]    'stone'           /tad-u/   [tadu]   'stones'
  /kisl/    [kisil]  'bird'            /kisl-u/  [kislu]  'birds'
  /lamb/    [lamip]  'river'           /lamb-u/  [lambu]  'rivers'
}
)tier";

struct NewOptions {
  std::string output;
  bool overwrite = false;
};

int RunNew(const NewOptions& options) {
  std::error_code error;
  if (!options.overwrite && options.output != "-" && std::filesystem::exists(options.output, error)) {
    PrintError(fmt::format("'{}' is there already and was left as it is", options.output));
    PrintHelp("give another name, or --overwrite to lose what is in it");
    return kFiles;
  }
  Output output(options.output);
  if (!output.good()) return kFiles;
  output.Write(kStarter);
  return output.Finish();
}

}  // namespace

void AddNew(CLI::App& app, int& code) {
  auto options = std::make_shared<NewOptions>();
  CLI::App* verb = app.add_subcommand("new", "a commented starter grammar to edit");
  verb->add_option("FILE,-o,--output", options->output, "where to write it; none: standard output")->type_name("FILE");
  verb->add_flag("--overwrite", options->overwrite, "even if the file is there already");
  verb->footer("\nExample:\n  tiersmith new olmet.tier\n  tiersmith check olmet.tier");
  verb->callback([options, &code] { code = RunNew(*options); });
}

}  // namespace tiersmith::cli
