// Rows of data in the grammar and from tables. Expected rows and places are written by hand.
#include <filesystem>
#include <fstream>

#include <unistd.h>

#include "support/model_case.h"

namespace tiersmith::testing {
namespace {

namespace fs = std::filesystem;

// A folder that is there while the test runs.
class Folder {
 public:
  Folder() : path_(fs::temp_directory_path() / ("model-data-" + std::to_string(getpid()))) {
    fs::create_directories(path_);
  }
  ~Folder() { fs::remove_all(path_); }
  std::string Write(const std::string& name, const std::string& text) const {
    std::ofstream(path_ / name, std::ios::binary) << text;
    return (path_ / name).string();
  }
  std::string path(const std::string& name) const { return (path_ / name).string(); }

 private:
  fs::path path_;
};

const std::string kHead = std::string(kSmallTree) + "segments from \"ipa\" { t n a }\n";

TEST_CASE("data: rows in the grammar", "[unit]") {
  const Loaded loaded = LoadOrFail(kHead + "data { /ta-n/ [tan] 'a thing'  /nat/ [nata] }");
  const std::vector<DataRow>& rows = loaded.grammar->data;
  REQUIRE(rows.size() == 2);
  CHECK(rows[0].underlying == "ta-n");
  CHECK(rows[0].surfaces == std::vector<std::string>{"tan"});
  CHECK(rows[0].gloss == "a thing");
  CHECK(rows[1].surfaces == std::vector<std::string>{"nata"});
  const std::string_view text = loaded.sources->text(rows[1].span.file);
  CHECK(text.substr(rows[1].span.begin, rows[1].span.end - rows[1].span.begin) == "nat");
}

TEST_CASE("data: tables", "[unit]") {
  const Folder folder;
  struct Row {
    const char* table;
    const char* expected;
  };
  const Row rows[] = {
      {"underlying\tsurface\tgloss\tsource\nta\tta\tx\ty\n", "ta>ta 'x' y;"},
      {"source\tsurface\tnote\tunderlying\ny\tta\tz\tat\n", "at>ta '' y;"},  // by name, any order
      {"\xEF\xBB\xBFunderlying\tsurface\r\nta\tta\r\n\r\nna\tna\r\n",
       "ta>ta '' ;na>na '' ;"},  // byte order mark, CRLF, blank line
      {"underlying\tsurface\nta\tta ~ tat\n", "ta>ta|tat '' ;"},
      {"underlying\tsurface\nta\tta", "ta>ta '' ;"},  // no last line end
      {"underlying\tsurface\tgloss\nta\tta\n", "error 2: line 2 has 2 cells, the heading has 3 @ ta\tta"},
      {"underlying\tsurface\nta\tta\tx\n", "error 2: line 2 has 3 cells, the heading has 2 @ ta\tta\tx"},
      {"underlying\tsurface\nta\t\n", "error 2: line 2 has no surface form @ ta\t"},
      {"form\tsurface\nta\tta\n", "error 1: the heading names no column 'underlying' @ form\tsurface"},
      {"underlying\tsurface\tsurface\n", "error 1: two columns are called 'surface' @ surface"},
      {"", "error 1: the table is empty @ "},
      {"underlying\tsurface\nta\t*na\n", "ta>*na '' ;"},
      {"underlying\tsurface\nta\tta ~ tat * na *nat\n", "ta>ta|tat*na*nat '' ;"},
      {"id\tunderlying\tsurface\ttags\tcomment\n7\tta\tta\tloan  new\tas heard\n", "ta>ta '' ; 7 loan+new+ as heard"},
      {"underlying\tsurface\tglos\tnote\nta\tta\tx\ty\n", "ta>ta '' ;error 1: nothing reads the column 'glos' @ glos"},
  };
  for (const Row& row : rows) {
    CAPTURE(row.table);
    SourceMap sources;
    Diagnostics diagnostics;
    const std::vector<DataRow> data = LoadData(folder.Write("t.tsv", row.table), sources, Span{}, diagnostics);
    std::string got;
    for (const DataRow& r : data) {
      got += r.underlying + ">";
      for (std::size_t i = 0; i < r.surfaces.size(); ++i) got += (i > 0 ? "|" : "") + r.surfaces[i];
      for (const std::string& starred : r.starred) got += "*" + starred;
      got += " '" + r.gloss + "' " + r.source + ";";
      if (!r.id.empty()) got += " " + r.id + " ";
      for (const std::string& tag : r.tags) got += tag + "+";
      if (!r.comment.empty()) got += " " + r.comment;
    }
    for (const Diagnostic& d : diagnostics.all()) {
      const SourceMap::Place place = sources.Find(d.span);
      got += "error " + std::to_string(place.line) + ": " + d.message + " @ " +
             std::string(sources.text(d.span.file).substr(d.span.begin, d.span.end - d.span.begin));
    }
    CHECK(got == row.expected);
  }
}

TEST_CASE("data: forms of tables are read, and files sought beside the grammar", "[unit]") {
  const Folder folder;
  folder.Write("rows.tsv", "underlying\tsurface\nta-na\ttaŋa\nta\tta\n");
  const std::string path = folder.Write("g.tier", kHead + "data from \"rows.tsv\"");
  auto sources = std::make_shared<SourceMap>();
  Diagnostics diagnostics;
  CHECK(LoadGrammar(path, sources, diagnostics) == nullptr);
  REQUIRE(diagnostics.all().size() == 1);
  const Diagnostic& d = diagnostics.all()[0];
  CHECK(d.kind == Kind::kUnknownCharacter);
  const SourceMap::Place place = sources->Find(d.span);
  CHECK(place.path == folder.path("rows.tsv"));
  CHECK(place.line == 2);
  CHECK(sources->text(d.span.file).substr(d.span.begin, d.span.end - d.span.begin) == "ŋ");

  folder.Write("rows.tsv", "underlying\tsurface\nta-na\ttana\n");
  Diagnostics fine;
  const auto grammar = LoadGrammar(path, std::make_shared<SourceMap>(), fine);
  REQUIRE(grammar != nullptr);
  CHECK(grammar->data.size() == 1);
}

TEST_CASE("data: files that are not there or not UTF-8", "[unit]") {
  const Folder folder;
  const auto kind = [&](const std::string& text) {
    auto sources = std::make_shared<SourceMap>();
    Diagnostics diagnostics;
    CHECK(LoadGrammar(folder.Write("g.tier", text), sources, diagnostics) == nullptr);
    REQUIRE(diagnostics.all().size() == 1);
    return diagnostics.all()[0].kind;
  };
  CHECK(kind(kHead + "data from \"none.tsv\"") == Kind::kMissingFile);
  folder.Write("bad.tsv", "underlying\tsurface\nt\xFF\tta\n");
  CHECK(kind(kHead + "data from \"bad.tsv\"") == Kind::kNotUtf8);
  CHECK(kind(kHead + "data from \"x.csv\"") == Kind::kNotSupportedYet);
  auto sources = std::make_shared<SourceMap>();
  Diagnostics diagnostics;
  CHECK(LoadGrammar(folder.path("no.tier"), sources, diagnostics) == nullptr);
  REQUIRE(diagnostics.all().size() == 1);
  CHECK(diagnostics.all()[0].kind == Kind::kMissingFile);
}

TEST_CASE("data: the five published rulesets load, each row with its source", "[unit]") {
  // Rows as they were published; whether the rules derive them is tested in tests/published/.
  for (const auto& [name, rows] :
       {std::pair("spanish-nasal-place", 25), std::pair("sanskrit-nati", 25), std::pair("turkish-vowel-harmony", 25),
        std::pair("finnish-vowel-harmony", 25), std::pair("english-plural", 20)}) {
    CAPTURE(name);
    const std::string folder = FindLibrary() + "/" + name + "/";
    auto sources = std::make_shared<SourceMap>();
    Diagnostics diagnostics;
    const auto grammar = LoadGrammar(folder + name + ".tier", sources, diagnostics);
    REQUIRE(grammar != nullptr);
    CHECK(diagnostics.all().empty());
    int sourced = 0;
    for (const DataRow& row : grammar->data) sourced += row.source.empty() ? 0 : 1;
    CHECK(sourced == rows);
  }
}

}  // namespace
}  // namespace tiersmith::testing
