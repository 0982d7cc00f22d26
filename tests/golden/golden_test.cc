// Every kind of message, as it is printed. A golden file holds its input and what is expected of it:
//   # what it shows
//   === file g.tier        a file (\xF1 is a raw byte); g.tier is loaded and compiled
//   === damage             g.tier is compiled into the machine file m, which is damaged so and opened in its place:
//                          cut 100 (bytes are left), flip 200 (a bit of that byte), format 1 (higher), layout 0
//   === limits             budgets, one a line: states 2
//   === derive             forms to derive, one a line; === recover likewise
//   === expected           the diagnostics, rendered
// UPDATE_GOLDEN=1 rewrites the expected parts; read the difference before committing it.
#include <unistd.h>

#include <algorithm>
#include <catch2/catch.hpp>
#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <iterator>
#include <map>
#include <sstream>

#include "base/render_diagnostics.h"
#include "compile/cascade.h"
#include "model/grammar.h"
#include "run/machine_file.h"
#include "run/run.h"

using namespace tiersmith;
namespace fs = std::filesystem;

namespace {

struct Section {
  std::string head;  // "file g.tier"
  std::string body;
};

std::string ReadFile(const fs::path& path) {
  std::ifstream in(path, std::ios::binary);
  return {std::istreambuf_iterator<char>(in), {}};
}

std::vector<Section> SectionsOf(const std::string& text) {
  std::vector<Section> sections(1);
  std::istringstream lines(text);
  for (std::string line; std::getline(lines, line);) {
    if (line.compare(0, 4, "=== ") == 0) {
      sections.push_back({line.substr(4), ""});
    } else {
      sections.back().body += line + "\n";
    }
  }
  return sections;
}

std::vector<std::string> LinesOf(const std::string& text) {
  std::vector<std::string> lines;
  std::istringstream in(text);
  for (std::string line; std::getline(in, line);) lines.push_back(line);
  return lines;
}

// \xF1 becomes the byte F1.
std::string WithRawBytes(const std::string& text) {
  std::string raw;
  for (std::size_t i = 0; i < text.size(); ++i) {
    if (text.compare(i, 2, "\\x") == 0 && i + 3 < text.size()) {
      raw += static_cast<char>(std::stoi(text.substr(i + 2, 2), nullptr, 16));
      i += 3;
    } else {
      raw += text[i];
    }
  }
  return raw;
}

// A folder of its own that is the current one while it lives, so that messages hold no machine's paths.
class Workplace {
 public:
  Workplace() : before_(fs::current_path()), here_(fs::temp_directory_path() / ("golden-" + std::to_string(getpid()))) {
    fs::create_directories(here_);
    fs::current_path(here_);
  }
  ~Workplace() {
    fs::current_path(before_);
    fs::remove_all(here_);
  }

 private:
  fs::path before_, here_;
};

std::string RenderTextError(const std::string& form, const TextError& error) {
  SourceMap sources;
  const std::uint32_t file = sources.Add("form", form);
  Diagnostics diagnostics;
  const auto begin = static_cast<std::uint32_t>(error.offset);
  diagnostics.Error(error.kind, {file, begin, begin + static_cast<std::uint32_t>(error.length)}, error.message,
                    error.remedy);
  return RenderDiagnostics(diagnostics, sources, false);
}

std::string RunForms(const std::vector<Section>& sections, Runner& runner) {
  std::string out;
  for (const Section& section : sections) {
    for (const std::string& form :
         section.head == "derive" || section.head == "recover" ? LinesOf(section.body) : std::vector<std::string>{}) {
      TextError error;
      std::string surface;
      Runner::Candidates candidates;
      const bool fine = section.head == "derive" ? runner.Derive(form, &surface, &error)
                                                 : runner.Recover(form, 1, &candidates, &error);
      out += fine ? form + ": no message\n" : RenderTextError(form, error);
    }
  }
  return out;
}

Limits LimitsOf(const std::vector<Section>& sections) {
  Limits limits;
  for (const Section& section : sections) {
    if (section.head != "limits") continue;
    std::istringstream in(section.body);
    std::string name;
    for (std::size_t value = 0; in >> name >> value;) {
      if (name == "states") limits.states = value;
      if (name == "arcs") limits.arcs = value;
      if (name == "side_states") limits.side_states = value;
    }
  }
  return limits;
}

std::string MachineOf(const std::string& path) {
  Diagnostics diagnostics;
  CompiledGrammar made = OpenGrammar(path, std::make_shared<SourceMap>(), diagnostics);
  REQUIRE(made.grammar != nullptr);
  made.cascade = Compile(*made.grammar, Limits{}, made.warnings);
  REQUIRE(made.cascade != nullptr);
  return WriteMachine(made);
}

// One line of `=== damage`.
std::string Damaged(std::string machine, const std::string& line) {
  std::istringstream in(line);
  std::string what;
  std::size_t number = 0;
  in >> what >> number;
  const std::string body = machine.substr(32);
  if (what == "cut") machine.resize(number);
  if (what == "flip") machine[number] = static_cast<char>(machine[number] ^ 1);
  if (what == "format") machine = WithHeader(body, kMachineFormat + static_cast<std::uint32_t>(number), 0);
  if (what == "layout") machine = WithHeader(body, kMachineFormat, 0);
  return machine;
}

std::string RefusalOf(const std::string& machine) {
  std::ofstream("m", std::ios::binary) << machine;
  const auto sources = std::make_shared<SourceMap>();
  Diagnostics diagnostics;
  return OpenGrammar("m", sources, diagnostics).grammar == nullptr ? RenderDiagnostics(diagnostics, *sources, false)
                                                                   : "opened\n";
}

std::string Produce(const std::vector<Section>& sections) {
  const Workplace workplace;
  for (const Section& section : sections) {
    if (section.head.compare(0, 5, "file ") != 0) continue;
    std::ofstream(section.head.substr(5), std::ios::binary) << WithRawBytes(section.body);
  }
  for (const Section& section : sections) {
    if (section.head == "damage") return RefusalOf(Damaged(MachineOf("g.tier"), section.body));
  }
  const auto sources = std::make_shared<SourceMap>();
  Diagnostics diagnostics;
  const std::unique_ptr<Grammar> grammar = OpenGrammar("g.tier", sources, diagnostics).grammar;
  if (grammar == nullptr) return RenderDiagnostics(diagnostics, *sources, false);
  const std::unique_ptr<Cascade> cascade = Compile(*grammar, LimitsOf(sections), diagnostics);
  const std::string out = RenderDiagnostics(diagnostics, *sources, false);
  if (cascade == nullptr) return out;
  Runner runner(*grammar, *cascade);
  return out + RunForms(sections, runner);
}

std::map<std::string, fs::path> GoldenFiles() {
  std::map<std::string, fs::path> files;
  for (const auto& entry : fs::directory_iterator(fs::path(TIERSMITH_TEST_SOURCE) / "tests/golden")) {
    if (entry.path().extension() == ".txt") files[entry.path().stem().string()] = entry.path();
  }
  return files;
}

void Rewrite(const fs::path& path, const std::vector<Section>& sections, const std::string& expected) {
  std::string text = sections[0].body;
  for (std::size_t i = 1; i < sections.size(); ++i) {
    text += "=== " + sections[i].head + "\n" + (sections[i].head == "expected" ? expected : sections[i].body);
  }
  std::ofstream(path, std::ios::binary) << text;
}

// Said of a file that is no text: there is no line to show.
bool IsOfBinaryFile(Kind kind) {
  return kind == Kind::kForeignFile || kind == Kind::kTruncatedFile || kind == Kind::kAlteredFile ||
         kind == Kind::kNewerFile || kind == Kind::kOtherLayout;
}

}  // namespace

TEST_CASE("messages are as the golden files have them", "[golden]") {
  setenv("TIERSMITH_RULESETS", TIERSMITH_TEST_RULESETS, 1);
  const char* update = std::getenv("UPDATE_GOLDEN");
  for (const auto& [name, path] : GoldenFiles()) {
    const std::vector<Section> sections = SectionsOf(ReadFile(path));
    REQUIRE(sections.back().head == "expected");
    INFO(path.filename().string());
    const std::string produced = Produce(sections);
    if (update != nullptr && *update == '1') {
      Rewrite(path, sections, produced);
      continue;
    }
    CHECK(produced == sections.back().body);
  }
}

TEST_CASE("every kind of message has a golden file that shows it, with a place and a remedy", "[golden]") {
  const auto files = GoldenFiles();
  for (const Kind kind : AllKinds()) {
    INFO(KindName(kind));
    const auto file = files.find(KindName(kind));
    REQUIRE(file != files.end());
    const std::string expected = SectionsOf(ReadFile(file->second)).back().body;
    CHECK(expected.find("[" + std::string(KindName(kind)) + "]\n") != std::string::npos);
    CHECK(expected.find("\n  help: ") != std::string::npos);
    if (!IsOfBinaryFile(kind)) CHECK(expected.find("| ") != std::string::npos);
  }
}
