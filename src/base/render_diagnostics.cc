// Rendering of diagnostics. See render_diagnostics.h. The caret stands under the character even where combining
// marks, wide characters or tabs come before it. Tested by tests/unit/base/render_diagnostics_test.cc.
#include "base/render_diagnostics.h"

#include <algorithm>
#include <nlohmann/json.hpp>

#include "base/utf8.h"

namespace tiersmith {
namespace {

using nlohmann::json;

const char* ColorOf(Severity severity) {
  switch (severity) {
    case Severity::kError:
      return "\033[1;31m";
    case Severity::kWarning:
      return "\033[1;33m";
    case Severity::kNote:
      return "\033[1;36m";
  }
  return "";
}

std::string Painted(const std::string& text, const char* code, bool color) {
  return color ? code + text + "\033[0m" : text;
}

// Control characters other than the tab would move the cursor: shown as U+FFFD, one cell.
std::string Printable(std::string_view line) {
  std::string shown;
  for (std::size_t position = 0; position < line.size();) {
    const char32_t c = NextCodePoint(line, &position);
    AppendCodePoint(shown, (c < 0x20 && c != '\t') || (c >= 0x7F && c < 0xA0) ? 0xFFFD : c);
  }
  return shown;
}

// Blanks as wide as the first column - 1 characters of the line, tabs kept.
std::string BlanksBefore(const SourceMap::Place& place) {
  std::string blanks;
  std::size_t position = 0;
  for (int i = 1; i < place.column && position < place.line_text.size(); ++i) {
    const char32_t c = NextCodePoint(place.line_text, &position);
    if (c == '\t') {
      blanks += '\t';
    } else {
      blanks.append(static_cast<std::size_t>(CellWidth(c)), ' ');
    }
  }
  return blanks;
}

std::string Excerpt(const SourceMap::Place& place, const char* paint, bool color) {
  const std::string number = std::to_string(place.line);
  const std::string caret = "^" + std::string(static_cast<std::size_t>(place.caret_width - 1), '~');
  return " " + number + " | " + Printable(place.line_text) + "\n " + std::string(number.size(), ' ') + " | " +
         BlanksBefore(place) + Painted(caret, paint, color) + "\n";
}

std::string Head(const SourceMap::Place& place) {
  if (place.path.empty()) return "tiersmith: ";
  return place.path + ":" + std::to_string(place.line) + ":" + std::to_string(place.column) + ": ";
}

std::string RenderAlso(Span span, const std::string& text, const SourceMap& sources, bool color) {
  const SourceMap::Place place = sources.Find(span);
  const char* paint = ColorOf(Severity::kNote);
  std::string out = Head(place) + Painted("note: ", paint, color) + text + "\n";
  if (!place.path.empty()) out += Excerpt(place, paint, color);
  return out;
}

json PlaceJson(Span span, const SourceMap& sources) {
  const SourceMap::Place begin = sources.Find(span);
  if (begin.path.empty()) return json::object({{"file", nullptr}});
  const SourceMap::Place end = sources.Find({span.file, std::max(span.begin, span.end), span.end});
  return {{"file", begin.path},
          {"line", begin.line},
          {"column", begin.column},
          {"end_line", end.line},
          {"end_column", end.column}};
}

}  // namespace

std::string RenderDiagnostic(const Diagnostic& diagnostic, const SourceMap& sources, bool color) {
  const SourceMap::Place place = sources.Find(diagnostic.span);
  const char* paint = ColorOf(diagnostic.severity);
  std::string out = Head(place) + Painted(std::string(SeverityName(diagnostic.severity)) + ": ", paint, color) +
                    Painted(diagnostic.message, "\033[1m", color) + " [" + KindName(diagnostic.kind) + "]\n";
  if (!place.path.empty()) out += Excerpt(place, paint, color);
  for (const auto& [span, text] : diagnostic.also) out += RenderAlso(span, text, sources, color);
  if (!diagnostic.remedy.empty()) out += "  " + Painted("help: ", "\033[1;32m", color) + diagnostic.remedy + "\n";
  return out;
}

std::string RenderDiagnostics(const Diagnostics& diagnostics, const SourceMap& sources, bool color) {
  std::string out;
  for (const Diagnostic& diagnostic : diagnostics.all()) out += RenderDiagnostic(diagnostic, sources, color);
  return out;
}

std::string RenderDiagnosticsJson(const Diagnostics& diagnostics, const SourceMap& sources) {
  json all = json::array();
  for (const Diagnostic& diagnostic : diagnostics.all()) {
    json one = PlaceJson(diagnostic.span, sources);
    one["kind"] = KindName(diagnostic.kind);
    one["severity"] = SeverityName(diagnostic.severity);
    one["message"] = diagnostic.message;
    one["help"] = diagnostic.remedy;
    one["also"] = json::array();
    for (const auto& [span, text] : diagnostic.also) {
      json note = PlaceJson(span, sources);
      note["message"] = text;
      one["also"].push_back(std::move(note));
    }
    all.push_back(std::move(one));
  }
  return all.dump(2, ' ', false, json::error_handler_t::replace) + "\n";
}

}  // namespace tiersmith
