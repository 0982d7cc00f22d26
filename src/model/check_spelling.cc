// `spelling` and `length doubled`: what their lines mean in symbols. `ng = ŋ` is the letters ng and one token.
// Tested by tests/unit/model/spelling_test.cc.
#include "model/check.h"
#include "model/text.h"

namespace tiersmith {

// The right side of a line; `ː` may stand first or alone.
std::optional<std::vector<Token>> Checker::MeaningOf(const syntax::Name& means) {
  std::vector<Token> tokens, rest;
  std::string_view text = means.text;
  for (const std::string_view sign : {std::string_view("ː"), std::string_view(":")}) {
    if (text.substr(0, sign.size()) != sign) continue;
    tokens.push_back({Token::Kind::kLength, -1, Boundary::kNone});
    text.remove_prefix(sign.size());
    break;
  }
  TextError error;
  for (const Reader::Side side : {Reader::Side::kUnderlying, Reader::Side::kSurface}) {
    if (!FormTexts().Read(text, side, &rest, &error)) continue;
    tokens.insert(tokens.end(), rest.begin(), rest.end());
    return tokens;
  }
  error.message = "the right side of this line cannot be read: " + error.message;
  ReportForm(means.span, error, true);
  return std::nullopt;
}

void Checker::CheckSpellingLine(const syntax::SpellingLine& written) {
  SpellingLine line;
  line.letters = written.letters.text;
  line.span = written.span;
  line.reads = written.use != syntax::SpellingLine::Use::kWrite;
  line.writes = written.use != syntax::SpellingLine::Use::kRead;
  if (line.letters.empty() && line.reads) {
    Error(Kind::kBadSpelling, written.letters.span, "no letters cannot be read as something",
          "write letters on the left, or for a sound that is not written: \"\" > ʔ");
    return;
  }
  std::optional<std::vector<Token>> means = MeaningOf(written.means);
  if (!means) return;
  line.means = std::move(*means);
  bool good = true;
  const auto context = [&](const std::optional<syntax::Set>& set, std::optional<SlotTest>* test) {
    if (!set) return;
    *test = ResolveContext(*set);
    good = good && *test;
  };
  context(written.before, &line.before);
  context(written.after, &line.after);
  context(written.between, &line.between);
  if (!good) return;
  if (line.means.empty() && line.writes && !line.before && !line.after && !line.between) {
    Error(Kind::kBadSpelling, written.span, "'" + line.letters + "' would be written everywhere",
          "say where it stands for nothing (between V), or only read it: " + line.letters + " < nothing");
    return;
  }
  grammar_.spelling.lines.push_back(std::move(line));
}

void Checker::CheckSpelling() {
  const syntax::LengthDoubled* doubled = nullptr;
  for (const syntax::Top& top : file_.tops) {
    if (const auto* length = std::get_if<syntax::LengthDoubled>(&top)) {
      if (doubled != nullptr) {
        diagnostics_.Add({Kind::kDuplicate,
                          Severity::kError,
                          length->span,
                          "`length doubled` stands twice",
                          "join the two: length doubled in A or B",
                          {{doubled->span, "first here"}}});
        continue;
      }
      doubled = length;
      CheckDoubled(*length);
    }
  }
  for (const syntax::Top& top : file_.tops) {
    const auto* spelling = std::get_if<syntax::Spelling>(&top);
    if (spelling == nullptr) continue;
    for (const syntax::SpellingLine& line : spelling->lines) CheckSpellingLine(line);
  }
}

void Checker::CheckDoubled(const syntax::LengthDoubled& written) {
  std::optional<SlotTest> test;
  if (written.in) {
    test = ResolveContext(*written.in);
    if (!test) return;
  }
  for (std::size_t symbol = 0; symbol < grammar_.inventory.symbols.size(); ++symbol)
    grammar_.doubled.push_back(!test || SymbolPasses(*test, static_cast<int>(symbol)));
}

}  // namespace tiersmith
