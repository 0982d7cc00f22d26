// include: what is taken in, from where, how often; where messages point.
#include "model/includes.h"

#include "support/folder.h"
#include "support/model_case.h"

using namespace tiersmith;
using namespace tiersmith::testing;

namespace {

Loaded LoadFile(const std::string& path) {
  setenv("TIERSMITH_RULESETS", TIERSMITH_TEST_RULESETS, 1);
  Loaded loaded;
  loaded.grammar = LoadGrammar(path, loaded.sources, loaded.diagnostics);
  return loaded;
}

const char* const kTree = R"(tree {
  root   > ±cons ±son ±syll ±nasal
  root   > Place > •Labial •Coronal •Dorsal
}
)";

}  // namespace

TEST_CASE("what is included stands first, relative to the file that names it, once", "[model]") {
  const Folder folder;
  folder.Write("common/tree.tier", kTree);
  folder.Write("common/base.tier",
               "include \"tree.tier\"\nsegments from \"ipa\" { p t k a }\ndata from \"rows.tsv\"\n"
               "rule \"first\" { where X:/k/ # delete X }\n");
  folder.Write("common/rows.tsv", "underlying\tsurface\npak\tpa\n");
  folder.Write(
      "g.tier",
      "include \"common/base.tier\"\ninclude \"common/tree.tier\"\nrule \"second\" { where X:/t/ # delete X }\n");
  const Loaded loaded = LoadFile(folder.Path("g.tier"));
  INFO(loaded.Messages());
  REQUIRE(loaded.grammar != nullptr);
  REQUIRE(loaded.grammar->rules.size() == 2);
  CHECK(loaded.grammar->rules[0].name == "first");
  CHECK(loaded.grammar->rules[1].name == "second");
  CHECK(loaded.grammar->data.size() == 1);
  CHECK(loaded.sources->Find(loaded.grammar->rules[0].span).path == folder.Path("common/base.tier"));
  CHECK(loaded.sources->Find(loaded.grammar->rules[0].span).line == 4);
}

TEST_CASE("errors in an included file point into it", "[model]") {
  const Folder folder;
  folder.Write("base.tier", std::string(kTree) + "segments from \"ipa\" { p t k a }\nclass Bad = [+nosuch]\n");
  folder.Write("g.tier", "include \"base.tier\"\nrule \"r\" { where X:Bad # delete X }\n");
  const Loaded loaded = LoadFile(folder.Path("g.tier"));
  CHECK(loaded.grammar == nullptr);
  REQUIRE(loaded.diagnostics.HasErrors());
  const SourceMap::Place place = loaded.sources->Find(loaded.diagnostics.all()[0].span);
  CHECK(place.path == folder.Path("base.tier"));
  CHECK(place.line == 6);
}

TEST_CASE("includes that lead nowhere or in a circle are errors at their place", "[model]") {
  const Folder folder;
  const auto only_error = [&](const std::string& text) {
    folder.Write("g.tier", text);
    const Loaded loaded = LoadFile(folder.Path("g.tier"));
    INFO(loaded.Messages());
    CHECK(loaded.grammar == nullptr);
    REQUIRE(loaded.diagnostics.all().size() == 1);
    return loaded.diagnostics.all()[0];
  };
  const std::string rest = std::string(kTree) + "segments from \"ipa\" { p t k a }\n";
  SECTION("a file that is not there") {
    const Diagnostic error = only_error("include \"nowhere.tier\"\n" + rest);
    CHECK(error.kind == Kind::kMissingFile);
    CHECK(error.span.begin == 8);
  }
  SECTION("itself") {
    const Diagnostic error = only_error("include \"g.tier\"\n" + rest);
    CHECK(error.kind == Kind::kIncludeCircle);
    CHECK(error.message.find("includes itself") != std::string::npos);
  }
  SECTION("through another") {
    folder.Write("common/a.tier", "include \"../g.tier\"\n");
    CHECK(only_error("include \"common/a.tier\"\n" + rest).kind == Kind::kIncludeCircle);
  }
  SECTION("below a declaration") {
    folder.Write("common/a.tier", "class C = [-syll]\n");
    CHECK(only_error(rest + "include \"common/a.tier\"\n").kind == Kind::kSyntax);
  }
}
