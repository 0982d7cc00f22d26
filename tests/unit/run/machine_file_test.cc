// Machine files: they answer as their grammar does, and damage of any kind is refused, never followed.
#include "run/machine_file.h"

#include <filesystem>
#include <random>

#include "support/folder.h"
#include "support/compiled_case.h"

using namespace tiersmith;
using namespace tiersmith::testing;
namespace fs = std::filesystem;

namespace {

constexpr std::size_t kHeaderSize = 32;

struct Opened : CompiledGrammar {
  std::shared_ptr<SourceMap> sources = std::make_shared<SourceMap>();
  Diagnostics diagnostics;
  std::string Messages() const { return RenderDiagnostics(diagnostics, *sources, false); }
};

Opened Open(const std::string& path) {
  setenv("TIERSMITH_RULESETS", TIERSMITH_TEST_RULESETS, 1);
  Opened opened;
  static_cast<CompiledGrammar&>(opened) = OpenGrammar(path, opened.sources, opened.diagnostics);
  return opened;
}

std::string MachineOf(const std::string& path) {
  Opened opened = Open(path);
  INFO(opened.Messages());
  REQUIRE(opened.grammar != nullptr);
  opened.cascade = Compile(*opened.grammar, Limits{}, opened.warnings);
  REQUIRE(opened.cascade != nullptr);
  return WriteMachine(opened);
}

const char* const kRules = R"(
rule "place" { where N:[+nasal] T:[+cons Place]  delink N.Place  spread T.Place to N }
rule "h"     { where H:/h/ C  delete H }
rule "idle"  { where X:[+nasal -son]  set X [-voice] }
class C = [-syll]
data from "rows.tsv"
)";

// A grammar of two files, its machine in bytes, and the folder they are in.
struct Case {
  Folder folder;
  std::string grammar, bytes;

  Case() {
    folder.Write("rows.tsv", "underlying\tsurface\nanpa\tampa\nahna\tana\n");
    grammar = folder.Write("g.tier", std::string(kSmallInventory) + kRules);
    bytes = MachineOf(grammar);
  }
  Opened Reopen(const std::string& damaged) const { return Open(folder.Write("m", damaged)); }
  Kind Refused(const std::string& damaged) const {
    const Opened opened = Reopen(damaged);
    INFO(opened.Messages());
    REQUIRE(opened.grammar == nullptr);
    REQUIRE(opened.diagnostics.HasErrors());
    return opened.diagnostics.all().back().kind;
  }
};

std::string Flipped(std::string bytes, std::size_t at, int mask = 0x10) {
  bytes[at] = static_cast<char>(bytes[at] ^ mask);
  return bytes;
}

}  // namespace

TEST_CASE("a machine file answers as its grammar does, with none of its files at hand", "[run]") {
  const Case made;
  const std::string machine = made.folder.Write("m", made.bytes);
  fs::remove(made.grammar);
  fs::remove(made.folder.Path("rows.tsv"));
  Opened opened = Open(machine);
  INFO(opened.Messages());
  REQUIRE(opened.cascade != nullptr);
  CHECK(opened.grammar->data.size() == 2);
  Runner runner(*opened.grammar, *opened.cascade);
  std::string surface;
  TextError error;
  for (const auto& [underlying, expected] :
       {std::pair("anpa", "ampa"), std::pair("ahna", "ana"), std::pair("anːa", "anːa"), std::pair("in-ka", "iŋka")}) {
    INFO(underlying);
    if (std::string(underlying) == "in-ka") {  // k's place under n has no symbol here
      CHECK_FALSE(runner.Derive(underlying, &surface, &error));
      CHECK(error.kind == Kind::kNoSymbol);
      continue;
    }
    REQUIRE(runner.Derive(underlying, &surface, &error));
    CHECK(surface == expected);
  }
  bool candidate = false;
  REQUIRE(runner.IsCandidate("anpa", "ampa", &candidate, &error));
  CHECK(candidate);
  REQUIRE(opened.warnings.all().size() >= 1);
  bool idle = false;
  for (const Diagnostic& warning : opened.warnings.all()) idle = idle || warning.kind == Kind::kNeverApplies;
  CHECK(idle);
}

TEST_CASE("the same grammar makes the same bytes, also from its own machine file and from another folder", "[run]") {
  const Case made;
  CHECK(MachineOf(made.grammar) == made.bytes);
  Opened opened = made.Reopen(made.bytes);
  REQUIRE(opened.cascade != nullptr);
  CHECK(WriteMachine(opened) == made.bytes);
  made.folder.Write("deeper/rows.tsv", "underlying\tsurface\nanpa\tampa\nahna\tana\n");
  CHECK(MachineOf(made.folder.Write("deeper/g.tier", std::string(kSmallInventory) + kRules)) == made.bytes);
  CHECK(made.bytes.find(made.folder.Path("")) == std::string::npos);
}

TEST_CASE("rules left out stay out of the machine file", "[run]") {
  const Case made;
  Opened opened = Open(made.grammar);
  REQUIRE(LeaveOutRule("place", opened.grammar.get()));
  opened.left_out = {"place"};
  opened.cascade = Compile(*opened.grammar, Limits{}, opened.warnings);
  REQUIRE(opened.cascade != nullptr);
  Opened again = made.Reopen(WriteMachine(opened));
  REQUIRE(again.cascade != nullptr);
  CHECK(again.left_out == std::vector<std::string>{"place"});
  Runner runner(*again.grammar, *again.cascade);
  std::string surface;
  TextError error;
  REQUIRE(runner.Derive("anpa", &surface, &error));
  CHECK(surface == "anpa");
}

TEST_CASE("each kind of damage has its own refusal", "[run]") {
  const Case made;
  const std::string body = made.bytes.substr(kHeaderSize);
  const std::uint32_t layout = LayoutOf(*Open(made.grammar).grammar);
  REQUIRE(WithHeader(body, kMachineFormat, layout) == made.bytes);
  CHECK(made.Refused(made.bytes.substr(0, 3)) == Kind::kTruncatedFile);
  CHECK(made.Refused(made.bytes.substr(0, kHeaderSize - 1)) == Kind::kTruncatedFile);
  CHECK(made.Refused(made.bytes.substr(0, made.bytes.size() - 1)) == Kind::kTruncatedFile);
  CHECK(made.Refused(Flipped(made.bytes, 8)) == Kind::kAlteredFile);
  CHECK(made.Refused(Flipped(made.bytes, made.bytes.size() / 2)) == Kind::kAlteredFile);
  CHECK(made.Refused(made.bytes + "x") == Kind::kAlteredFile);
  CHECK(made.Refused("\x7F"
                     "ELF" +
                     std::string(60, '\0')) == Kind::kForeignFile);
  CHECK(made.Refused(Flipped(made.bytes, 0)) == Kind::kForeignFile);
  CHECK(made.Refused(WithHeader(body, kMachineFormat + 1, layout)) == Kind::kNewerFile);
  CHECK(made.Refused(WithHeader(body, kMachineFormat - 1, layout)) == Kind::kOtherLayout);
  CHECK(made.Refused(WithHeader(body, kMachineFormat, layout + 1)) == Kind::kOtherLayout);
  CHECK(made.Refused(WithHeader("", kMachineFormat, layout)) == Kind::kOtherLayout);
}

TEST_CASE("damage anywhere is refused", "[run]") {
  const Case made;
  std::mt19937 random(20);
  for (int i = 0; i < 400; ++i) {
    const std::size_t at = i < 40 ? static_cast<std::size_t>(i) : random() % made.bytes.size();
    CAPTURE(at);
    REQUIRE(made.Reopen(Flipped(made.bytes, at, 1 << (i % 8))).grammar == nullptr);
    REQUIRE(made.Reopen(made.bytes.substr(0, at)).grammar == nullptr);
  }
}

// With checksums that fit, as if another program had written the file: nothing may be read or followed past an end. What is
// still a machine is run.
TEST_CASE("contents that make no sense are refused or harmless", "[run]") {
  const Case made;
  const std::uint32_t layout = LayoutOf(*Open(made.grammar).grammar);
  const std::string body = made.bytes.substr(kHeaderSize);
  std::mt19937 random(21);
  int refused = 0, kept = 0;
  for (int i = 0; i < 600; ++i) {
    std::string damaged = body;
    // Most of the body is text: half of the flips go to the machines behind it.
    const std::size_t at = i % 2 == 0 ? random() % body.size() : body.size() - 1 - random() % (body.size() / 4);
    damaged[at] = static_cast<char>(random());
    if (i % 5 == 0) damaged.resize(random() % damaged.size());
    Opened opened = made.Reopen(WithHeader(damaged, kMachineFormat, layout));
    if (opened.cascade == nullptr) {
      ++refused;
      continue;
    }
    ++kept;
    Runner runner(*opened.grammar, *opened.cascade);
    std::string surface;
    TextError error;
    for (const char* form : {"anpa", "ahna", "anːa-pa"}) runner.Derive(form, &surface, &error);
    Runner::Candidates candidates;
    runner.Recover("ampa", 3, &candidates, &error);
  }
  CHECK(refused > 100);
  CHECK(kept > 10);
}
