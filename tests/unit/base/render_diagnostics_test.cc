// The caret stands under the character meant: after combining marks, wide characters and tabs; and the JSON form.
#include "base/render_diagnostics.h"

#include <catch2/catch.hpp>
#include <nlohmann/json.hpp>
#include <set>
#include <string>

using namespace tiersmith;

namespace {

Span Of(const SourceMap& sources, std::uint32_t file, const std::string& part) {
  const auto begin = static_cast<std::uint32_t>(sources.text(file).find(part));
  return {file, begin, begin + static_cast<std::uint32_t>(part.size())};
}

}  // namespace

TEST_CASE("caret after marks, tabs and wide characters", "[base]") {
  SourceMap sources;
  const std::uint32_t file = sources.Add("g.tier", "\tŋ̊語 nasl\n");
  Diagnostics diagnostics;
  diagnostics.Error(Kind::kUnknownFeature, Of(sources, file, "nasl"), "no feature 'nasl'", "did you mean 'nasal'?");
  CHECK(RenderDiagnostics(diagnostics, sources, false) ==
        "g.tier:1:6: error: no feature 'nasl' [unknown-feature]\n"
        " 1 | \tŋ̊語 nasl\n"
        "   | \t    ^~~~\n"
        "  help: did you mean 'nasal'?\n");
}

TEST_CASE("further places, no place, control characters, colour", "[base]") {
  SourceMap sources;
  const std::uint32_t file = sources.Add("g.tier", "p\np \x1B[31m\n");
  Diagnostic twice;
  twice.kind = Kind::kDuplicate;
  twice.severity = Severity::kWarning;
  twice.span = {file, 2, 3};
  twice.message = "'p' is listed twice";
  twice.also.push_back({Span{file, 0, 1}, "first listed here"});
  CHECK(RenderDiagnostic(twice, sources, false) ==
        "g.tier:2:1: warning: 'p' is listed twice [duplicate]\n"
        " 2 | p \uFFFD[31m\n"
        "   | ^\n"
        "g.tier:1:1: note: first listed here\n"
        " 1 | p\n"
        "   | ^\n");
  CHECK(RenderDiagnostic(twice, sources, true).find("\033[1;33mwarning: \033[0m") != std::string::npos);
  Diagnostic nowhere;
  nowhere.kind = Kind::kMissingFile;
  nowhere.span = {kNoFile, 0, 0};
  nowhere.message = "cannot read 'x'";
  CHECK(RenderDiagnostic(nowhere, sources, false) == "tiersmith: error: cannot read 'x' [missing-file]\n");
}

TEST_CASE("JSON for editors", "[base]") {
  SourceMap sources;
  const std::uint32_t file = sources.Add("g.tier", "a\nbé d\n");
  Diagnostics diagnostics;
  diagnostics.Error(Kind::kSyntax, Of(sources, file, "d"), "m", "h");
  const auto json = nlohmann::json::parse(RenderDiagnosticsJson(diagnostics, sources));
  REQUIRE(json.size() == 1);
  CHECK(json[0]["file"] == "g.tier");
  CHECK(json[0]["line"] == 2);
  CHECK(json[0]["column"] == 4);
  CHECK(json[0]["end_column"] == 5);
  CHECK(json[0]["kind"] == "syntax");
  CHECK(json[0]["severity"] == "error");
  CHECK(json[0]["help"] == "h");
}

TEST_CASE("every kind has a name of its own", "[base]") {
  std::set<std::string> names;
  for (const Kind kind : AllKinds()) names.insert(KindName(kind));
  CHECK(names.size() == AllKinds().size());
  CHECK(names.count("") == 0);
}
