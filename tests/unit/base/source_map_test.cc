// Places in source texts: lines, columns in code points, carets in cells; loading files that are missing or not UTF-8.
#include "base/source_map.h"

#include <catch2/catch.hpp>
#include <filesystem>

#include "support/folder.h"

using namespace tiersmith;

TEST_CASE("lines and columns", "[base]") {
  SourceMap sources;
  const std::string text = "first\r\nŋ̊a x\n";
  const std::uint32_t file = sources.Add("a.tier", text);
  const auto x = static_cast<std::uint32_t>(text.find('x'));
  const SourceMap::Place place = sources.Find({file, x, x + 1});
  CHECK(place.path == "a.tier");
  CHECK(place.line == 2);
  CHECK(place.column == 5);        // ŋ, ring, a, blank
  CHECK(place.caret_column == 3);  // the ring takes no cell
  CHECK(place.caret_width == 1);
  CHECK(place.line_text == "ŋ̊a x");
  CHECK(sources.Find({file, 0, 5}).line_text == "first");
}

TEST_CASE("spans at and past the ends", "[base]") {
  SourceMap sources;
  const std::uint32_t file = sources.Add("a", "one\ntwo");
  CHECK(sources.Find({file, 3, 3}).column == 4);
  CHECK(sources.Find({file, 1, 6}).caret_width == 2);  // stops at the line's end
  CHECK(sources.Find({file, 7, 7}).line == 2);
  CHECK(sources.Find({file, 900, 901}).column == 4);
  CHECK(sources.Find({kNoFile, 0, 0}).path.empty());
  const std::uint32_t empty = sources.Add("b", "");
  CHECK(sources.Find({empty, 0, 0}).line == 1);
}

TEST_CASE("loading", "[base]") {
  const testing::Folder folder;
  SourceMap sources;
  Diagnostics diagnostics;
  std::uint32_t id = 99;
  SECTION("a byte order mark is dropped") {
    const std::string path = folder.Write("t", "\xEF\xBB\xBFtree");
    REQUIRE(sources.Load(path, {kNoFile, 0, 0}, diagnostics, &id));
    CHECK(sources.text(id) == "tree");
    CHECK_FALSE(diagnostics.HasErrors());
  }
  SECTION("Latin-1 is refused where it stands") {
    const std::string path = folder.Write("t", "a\nse\xF1or\n");
    REQUIRE_FALSE(sources.Load(path, {kNoFile, 0, 0}, diagnostics, &id));
    REQUIRE(diagnostics.all().size() == 1);
    CHECK(diagnostics.all()[0].kind == Kind::kNotUtf8);
    const SourceMap::Place place = sources.Find(diagnostics.all()[0].span);
    CHECK(place.line == 2);
    CHECK(place.column == 3);
    CHECK(diagnostics.all()[0].message.find("0xF1") != std::string::npos);
  }
  SECTION("missing files and folders") {
    CHECK_FALSE(sources.Load("/nowhere/at/all.tier", {kNoFile, 0, 0}, diagnostics, &id));
    CHECK_FALSE(sources.Load(std::filesystem::temp_directory_path().string(), {kNoFile, 0, 0}, diagnostics, &id));
    REQUIRE(diagnostics.all().size() == 2);
    CHECK(diagnostics.all()[0].kind == Kind::kMissingFile);
    CHECK(diagnostics.all()[1].message.find("folder") != std::string::npos);
  }
}

TEST_CASE("parts of a grammar: named by where they lie beside it, read once", "[base]") {
  const testing::Folder folder;
  folder.Write("g.tier", "main");
  folder.Write("data/a.tsv", "rows");
  SourceMap sources;
  Diagnostics diagnostics;
  std::uint32_t main = 0, table = 0, again = 0;
  REQUIRE(sources.LoadPart(folder.Path("g.tier"), "g.tier", {kNoFile, 0, 0}, diagnostics, &main));
  REQUIRE(sources.LoadBeside("data/a.tsv", {main, 0, 0}, diagnostics, &table));
  CHECK(sources.name(table) == "data/a.tsv");
  CHECK(sources.path(table) == folder.Path("data/a.tsv"));
  REQUIRE(sources.LoadBeside("../g.tier", {table, 0, 0}, diagnostics, &again));
  CHECK(again == main);
  CHECK_FALSE(sources.LoadBeside("b.tsv", {table, 0, 0}, diagnostics, &again));
  REQUIRE(diagnostics.all().size() == 1);
  CHECK(diagnostics.all()[0].span.file == table);
}

TEST_CASE("a sealed map reads no file", "[base]") {
  SourceMap sources;
  Diagnostics diagnostics;
  std::uint32_t main = 0, table = 0;
  sources.Seal({{"g.tier", "main"}, {"a.tsv", "rows"}});
  REQUIRE(sources.LoadPart("g.tier", "g.tier", {kNoFile, 0, 0}, diagnostics, &main));
  REQUIRE(sources.LoadBeside("a.tsv", {main, 0, 0}, diagnostics, &table));
  CHECK(sources.text(table) == "rows");
  CHECK(sources.path(table) == "a.tsv");
  CHECK_FALSE(sources.LoadBeside("/etc/hostname", {main, 0, 0}, diagnostics, &table));
  REQUIRE(diagnostics.all().size() == 1);
  CHECK(diagnostics.all()[0].kind == Kind::kMissingFile);
}
