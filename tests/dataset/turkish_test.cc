// rulesets/turkish against an outside judge: Debian's spelling dictionary of Turkish (package hunspell-tr, asked with hunspell -l).
//
// A pair is a stem and a suffix. It counts if the dictionary accepts the stem, or one of its alternants, with the suffix in any of
// its consonants and with any of the eight vowels; it is right if the derived form is accepted. Stems are the lines of
// the dictionary in small letters that it gives endings to. Once nothing is known of a stem; once its lexical marks are learned from the
// accusative alone, which is not judged.
//
// Suffixes are those that no other suffix is like but for its vowels: with -DA any verb in -DI would count, with -lA any -lI, with
// the dative the accusative.
//
// The dictionary is a list of words with endings to be added as they stand, so all it accepts can be listed; that list only says what is
// worth asking, and is itself held against the answers. Misses by class: turkish-misses.tsv beside the tests.
#include <algorithm>
#include <array>
#include <catch2/catch.hpp>
#include <cstdio>
#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <iostream>
#include <map>
#include <set>
#include <unordered_map>
#include <unordered_set>

#include <unistd.h>

#include "base/utf8.h"
#include "model/readings.h"
#include "model/speller.h"
#include "support/compiled_case.h"

namespace tiersmith::testing {
namespace {

namespace fs = std::filesystem;
using Words = std::unordered_set<std::string>;

const std::vector<std::string> kVowels = {"a", "e", "ı", "i", "o", "ö", "u", "ü"};
const std::string kLetters = "a b c ç d e f g ğ h ı i j k l m n o ö p r s ş t u ü v y z ";

std::vector<std::string> Letters(const std::string& word) {
  std::vector<std::string> letters;
  for (std::size_t i = 0; i < word.size();) {
    const std::size_t begin = i;
    NextCodePoint(word, &i);
    letters.push_back(word.substr(begin, i - begin));
  }
  return letters;
}

std::string Joined(const std::vector<std::string>& letters) {
  std::string word;
  for (const std::string& letter : letters) word += letter;
  return word;
}

bool IsVowel(const std::string& letter) { return std::find(kVowels.begin(), kVowels.end(), letter) != kVowels.end(); }

// ---- the dictionary ------------------------------------------------------------------------------

struct Dictionary {
  std::vector<std::string> stems;  // lines with endings, in small letters of the alphabet
  Words listed;                    // all that it accepts, as far as its files say
};

Dictionary ReadDictionary() {
  const fs::path folder = "/usr/share/hunspell";
  std::ifstream endings(folder / "tr_TR.aff"), lines(folder / "tr_TR.dic");
  if (!endings || !lines) FAIL("the package hunspell-tr is not installed");
  std::unordered_map<std::string, std::vector<std::string>> by_flag;
  for (std::string line; std::getline(endings, line);) {
    std::istringstream words(line);
    std::string kind, flag, strip, ending, condition;
    if (!(words >> kind >> flag >> strip >> ending >> condition) || kind != "SFX") continue;
    REQUIRE(strip == "0");  // endings are added as they stand
    REQUIRE(condition == ".");
    by_flag[flag].push_back(ending == "0" ? "" : ending);
  }
  Dictionary dictionary;
  std::set<std::string> stems;
  std::string line;
  std::getline(lines, line);  // how many there are
  while (std::getline(lines, line)) {
    const std::size_t slash = line.find('/');
    const std::string word = line.substr(0, slash);
    dictionary.listed.insert(word);
    if (slash == std::string::npos) continue;
    std::istringstream flags(line.substr(slash + 1));
    for (std::string flag; std::getline(flags, flag, ',');) {
      for (const std::string& ending : by_flag[flag]) dictionary.listed.insert(word + ending);
    }
    const std::vector<std::string> letters = Letters(word);
    if (std::all_of(letters.begin(), letters.end(),
                    [](const std::string& l) { return kLetters.find(l + " ") != std::string::npos; }))
      stems.insert(word);
  }
  dictionary.stems.assign(stems.begin(), stems.end());
  return dictionary;
}

// Which of these words the dictionary rejects.
Words Rejected(const std::set<std::string>& asked) {
  const fs::path file = fs::temp_directory_path() / ("turkish-asked-" + std::to_string(getpid()));
  std::ofstream out(file);
  for (const std::string& word : asked) out << word << "\n";
  out.close();
  FILE* pipe = popen(("hunspell -d tr_TR -i utf-8 -l < " + file.string()).c_str(), "r");
  REQUIRE(pipe != nullptr);
  Words rejected;
  std::array<char, 4096> line;
  while (std::fgets(line.data(), line.size(), pipe) != nullptr) {
    std::string word = line.data();
    while (!word.empty() && word.back() == '\n') word.pop_back();
    rejected.insert(word);
  }
  const int code = pclose(pipe);
  fs::remove(file);
  REQUIRE(code == 0);
  return rejected;
}

// ---- what counts ---------------------------------------------------------------------------------

struct Suffix {
  const char* name;
  const char* form;                    // as in rulesets/turkish
  std::vector<const char*> spellings;  // %: any vowel
  bool vowel = false;                  // it may begin with one, so stems alternate before it
};

const Suffix kAccusative = {"accusative", "-YI", {"%", "y%"}, true};
const std::vector<Suffix> kJudged = {
    {"plural", "-lAr", {"l%r"}},
    {"genitive plural", "-lAr-NIn", {"l%r%n"}},
    {"our, plural", "-lAr-ImIz", {"l%r%m%z"}},
    {"my", "-Im", {"%m", "m"}, true},
    {"without", "-sIz", {"s%z"}},
    {"-ness", "-lIk", {"l%k"}},
    {"that is at", "-DA-ki", {"d%ki", "t%ki"}},
    {"it is said to be", "-mIʃ", {"m%ş"}},
    {"infinitive", "-mAk", {"m%k"}},
};

// All that `spelling` may stand for.
std::vector<std::string> Variants(const std::string& spelling, const std::vector<std::string>& vowels) {
  const std::size_t place = spelling.find('%');
  if (place == std::string::npos) return {spelling};
  std::vector<std::string> all;
  for (const std::string& vowel : vowels) {
    for (const std::string& rest : Variants(spelling.substr(place + 1), vowels))
      all.push_back(spelling.substr(0, place) + vowel + rest);
  }
  return all;
}

// The stem as it may be before a vowel: softened, without its last vowel, doubled.
std::vector<std::string> Alternants(const std::string& stem) {
  std::vector<std::string> all{stem};
  const std::vector<std::string> letters = Letters(stem);
  const auto ending_in = [](std::vector<std::string> some, const std::string& last) {
    some.back() = last;
    return Joined(some);
  };
  const std::map<std::string, std::vector<std::string>> soft = {
      {"p", {"b"}}, {"ç", {"c"}}, {"t", {"d"}}, {"k", {"ğ", "g"}}, {"g", {"ğ"}}};
  const auto softened = [&](const std::vector<std::string>& some) {
    const auto found = soft.find(some.back());
    if (found == soft.end()) return;
    for (const std::string& last : found->second) all.push_back(ending_in(some, last));
  };
  if (letters.empty() || IsVowel(letters.back())) return all;
  softened(letters);
  const std::vector<std::string> plain = all;
  for (const std::string& form : plain) all.push_back(form + Letters(form).back());
  if (letters.size() < 3 || !IsVowel(letters[letters.size() - 2])) return all;
  std::vector<std::string> shorter = letters;
  shorter.erase(shorter.end() - 2);
  all.push_back(Joined(shorter));
  softened(shorter);
  return all;
}

// The suffix as it may be spelled, with any of these vowels.
std::vector<std::string> Spellings(const Suffix& suffix, const std::vector<std::string>& vowels) {
  std::vector<std::string> all;
  for (const char* spelling : suffix.spellings) {
    for (const std::string& variant : Variants(spelling, vowels)) all.push_back(variant);
  }
  return all;
}

std::vector<std::string> Accepted(const std::string& stem, const Suffix& suffix,
                                  const std::vector<std::string>& spellings, const Words& words) {
  std::vector<std::string> found;
  for (const std::string& form : suffix.vowel ? Alternants(stem) : std::vector<std::string>{stem}) {
    for (const std::string& spelling : spellings) {
      if (words.count(form + spelling) > 0) found.push_back(form + spelling);
    }
  }
  return found;
}

// The suffix of a derived form in the other harmony: from where the form leaves the stem's letters, and its last vowel.
std::string OtherHarmony(const std::string& form, std::size_t from) {
  const std::map<std::string, std::string> other = {{"a", "e"}, {"e", "a"}, {"ı", "i"}, {"i", "ı"},
                                                    {"o", "ö"}, {"ö", "o"}, {"u", "ü"}, {"ü", "u"}};
  std::vector<std::string> letters = Letters(form);
  for (std::size_t i = std::min(from, letters.size()); i < letters.size(); ++i) {
    const auto found = other.find(letters[i]);
    if (found != other.end()) letters[i] = found->second;
  }
  return Joined(letters);
}

// ---- the grammar ---------------------------------------------------------------------------------

using Tags = std::vector<std::string>;

struct Turkish {
  Compiled compiled = CompileRuleset("turkish");
  FormReader reader{compiled.grammar()};
  Speller speller{compiled.grammar()};

  // In letters; with just these tags, whatever the lexicon says of the stem.
  std::string Derive(const std::string& stem, const Tags& tags, const Suffix& suffix) {
    std::vector<std::string> symbols;
    TextError error;
    INFO(stem << suffix.form);
    REQUIRE(speller.Read(stem, Reader::Side::kUnderlying, &symbols, &error));
    std::vector<Morpheme> morphemes{{symbols.front(), MorphemeKind::kStem, tags, ""}};
    for (const char* c = suffix.form; *c != '\0'; ++c) {
      if (*c == '-') morphemes.push_back({"", MorphemeKind::kSuffix, {}, ""});
    }
    std::vector<Runner::Output> outputs;
    bool more = false;
    if (!compiled.runner->DeriveAll(reader.Join(symbols.front() + suffix.form, morphemes), 1, &outputs, &more, &error))
      FAIL(error.message);
    return speller.Write(outputs.front().surface, Reader::Side::kSurface);
  }
};

// Learned from the accusative: the first marks with which it comes out as the dictionary has it; none if nothing fits.
std::map<std::string, Tags> LearnMarks(const Dictionary& dictionary, Turkish* turkish) {
  const std::vector<Tags> marks = {{},
                                   {"front"},
                                   {"hard"},
                                   {"soft"},
                                   {"front", "soft"},
                                   {"front", "hard"},
                                   {"fleeting"},
                                   {"fleeting", "soft"},
                                   {"geminate"},
                                   {"geminate", "soft"},
                                   {"geminate", "front"}};
  std::map<std::string, Tags> learned;
  const std::vector<std::string> spellings = Spellings(kAccusative, {"ı", "i", "u", "ü"});
  for (const std::string& stem : dictionary.stems) {
    const std::vector<std::string> accepted = Accepted(stem, kAccusative, spellings, dictionary.listed);
    if (accepted.empty()) continue;
    for (const Tags& tags : marks) {
      const std::string form = turkish->Derive(stem, tags, kAccusative);
      if (std::find(accepted.begin(), accepted.end(), form) == accepted.end()) continue;
      if (!tags.empty()) learned[stem] = tags;
      break;
    }
  }
  return learned;
}

struct Pair {
  std::string stem;
  const Suffix* suffix;
  std::vector<std::string> accepted;
  std::string plain, marked;  // derived without, and with, marks
};

// What a wrong form is due to.
std::string ClassOf(const Pair& pair, const std::set<std::string>& others) {
  const std::size_t letters = Letters(pair.stem).size();
  const auto any = [&](const auto& is) { return std::any_of(pair.accepted.begin(), pair.accepted.end(), is); };
  if (any([&](const std::string& form) { return form == OtherHarmony(pair.plain, letters); })) return "front loan";
  if (any([&](const std::string& form) { return others.count(form) > 0; })) return "another stem's form";
  const bool own = any([&](const std::string& form) { return form.compare(0, pair.stem.size(), pair.stem) == 0; });
  if (!own) return "alternation of the stem, or past tense of a verb in -t";
  if (pair.suffix->vowel) return "stem that does not alternate, or doubles";
  return "another suffix";
}

}  // namespace

TEST_CASE("dataset: Turkish against a dictionary", "[dataset]") {
  const Dictionary dictionary = ReadDictionary();
  Turkish turkish;
  const std::map<std::string, Tags> marks = LearnMarks(dictionary, &turkish);
  std::vector<Pair> pairs;
  std::set<std::string> asked;
  std::map<const Suffix*, std::set<std::string>> derived;
  for (const Suffix& suffix : kJudged) {
    const std::vector<std::string> spellings = Spellings(suffix, kVowels);
    for (const std::string& stem : dictionary.stems) {
      Pair pair{stem, &suffix, Accepted(stem, suffix, spellings, dictionary.listed), "", ""};
      if (pair.accepted.empty()) continue;
      pair.plain = pair.marked = turkish.Derive(stem, {}, suffix);
      const auto known = marks.find(stem);
      if (known != marks.end()) pair.marked = turkish.Derive(stem, known->second, suffix);
      asked.insert(pair.accepted.begin(), pair.accepted.end());
      asked.insert({pair.plain, pair.marked, OtherHarmony(pair.plain, Letters(stem).size())});
      derived[&suffix].insert(pair.plain);
      pairs.push_back(std::move(pair));
    }
  }
  const Words rejected = Rejected(asked);
  // The list that said what to ask is the dictionary's own.
  std::size_t differ = 0;
  for (const std::string& word : asked) differ += (dictionary.listed.count(word) == 0) != (rejected.count(word) > 0);
  CHECK(differ == 0);

  const fs::path folder = std::getenv("TIERSMITH_BUILD") != nullptr ? std::getenv("TIERSMITH_BUILD") : ".";
  std::ofstream misses(folder / "turkish-misses.tsv");
  misses << "stem\tsuffix\tderived\twith marks\taccepted\tclass\n";
  std::map<std::string, std::array<std::size_t, 3>> by_suffix;  // pairs, right without marks, with
  std::map<std::string, std::array<std::size_t, 2>> by_class;   // misses without marks, with
  std::array<std::size_t, 3> all{};
  std::size_t opposite = 0, opposite_accepted = 0;
  for (const Pair& pair : pairs) {
    const std::array<bool, 3> counts = {true, rejected.count(pair.plain) == 0, rejected.count(pair.marked) == 0};
    for (std::size_t i = 0; i < 3; ++i) {
      by_suffix[pair.suffix->name][i] += counts[i];
      all[i] += counts[i];
    }
    const std::string other = OtherHarmony(pair.plain, Letters(pair.stem).size());
    if (counts[1] && other != pair.plain) {
      ++opposite;
      opposite_accepted += rejected.count(other) == 0;
    }
    if (counts[1] && counts[2]) continue;
    std::set<std::string> others = derived[pair.suffix];
    others.erase(pair.plain);
    const std::string why = ClassOf(pair, others);
    by_class[why][0] += !counts[1];
    by_class[why][1] += !counts[2];
    misses << pair.stem << "\t" << pair.suffix->name << "\t" << pair.plain << "\t" << pair.marked << "\t";
    for (const std::string& form : pair.accepted) misses << form << " ";
    misses << "\t" << why << "\n";
  }
  const auto share = [](std::size_t part, std::size_t of) {
    return 100.0 * static_cast<double>(part) / static_cast<double>(of);
  };
  const auto print = [&](const std::string& name, const std::array<std::size_t, 3>& counts) {
    std::printf("%-18s %7zu pairs  %6.2f %% right, %6.2f %% with marks\n", name.c_str(), counts[0],
                share(counts[1], counts[0]), share(counts[2], counts[0]));
  };
  for (const auto& [name, counts] : by_suffix) print(name, counts);
  print("all", all);
  for (const auto& [name, counts] : by_class)
    std::printf("misses: %-58s %5zu, with marks %5zu\n", name.c_str(), counts[0], counts[1]);
  std::printf("opposite harmony: %zu of %zu accepted (%.2f %%); stems with marks: %zu\n", opposite_accepted, opposite,
              share(opposite_accepted, opposite), marks.size());
  CHECK(all[0] >= 20'000);
  CHECK(share(all[1], all[0]) >= 98);
  CHECK(share(all[2], all[0]) >= 99);
  CHECK(share(opposite_accepted, opposite) < 1);
}

}  // namespace tiersmith::testing
