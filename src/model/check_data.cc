// Rows of data, in the grammar and from tables.
//
// Example: the row `/in-bata/ [imbata] 'x'`; a table has the columns underlying, surface, gloss, source by
// name, in any order. Does not handle: starred surfaces, spelled forms, tags, CSV (errors say so). Tested by
// tests/unit/model/data_test.cc.
#include <algorithm>
#include <filesystem>

#include "model/check.h"
#include "model/text.h"

namespace tiersmith {
namespace {

struct Cell {
  std::string text;
  Span span;
};

std::vector<Cell> CellsOf(std::string_view line, std::uint32_t file, std::size_t offset) {
  std::vector<Cell> cells;
  std::size_t begin = 0;
  while (true) {
    std::size_t end = line.find('\t', begin);
    const std::size_t stop = end == std::string_view::npos ? line.size() : end;
    std::size_t first = begin, last = stop;
    while (first < last && line[first] == ' ') ++first;
    while (last > first && line[last - 1] == ' ') --last;
    cells.push_back({std::string(line.substr(first, last - first)),
                     {file, static_cast<std::uint32_t>(offset + first), static_cast<std::uint32_t>(offset + last)}});
    if (end == std::string_view::npos) return cells;
    begin = end + 1;
  }
}

// "a ~ b" -> a, b with their places.
std::vector<Cell> Alternatives(const Cell& cell) {
  std::vector<Cell> result;
  std::size_t begin = 0;
  while (true) {
    const std::size_t end = cell.text.find(" ~ ", begin);
    const std::size_t stop = end == std::string::npos ? cell.text.size() : end;
    Cell part;
    part.text = cell.text.substr(begin, stop - begin);
    part.span = {cell.span.file, cell.span.begin + static_cast<std::uint32_t>(begin),
                 cell.span.begin + static_cast<std::uint32_t>(stop)};
    result.push_back(part);
    if (end == std::string::npos) return result;
    begin = end + 3;
  }
}

std::optional<std::size_t> ColumnOf(const std::vector<Cell>& heading, std::string_view name) {
  for (std::size_t i = 0; i < heading.size(); ++i) {
    if (heading[i].text == name) return i;
  }
  return std::nullopt;
}

// One row, or nothing after an error.
std::optional<DataRow> RowOf(const std::vector<Cell>& heading, const std::vector<Cell>& cells, std::size_t line,
                             Span line_span, Diagnostics& diagnostics) {
  if (cells.size() != heading.size()) {
    diagnostics.Error(Kind::kBadData, line_span,
                      "line " + std::to_string(line) + " has " + std::to_string(cells.size()) +
                          (cells.size() == 1 ? " cell" : " cells") + ", the heading has " +
                          std::to_string(heading.size()),
                      "give every line as many cells as the heading, parted by single tabs");
    return std::nullopt;
  }
  const Cell& underlying = cells[*ColumnOf(heading, "underlying")];
  const Cell& surface = cells[*ColumnOf(heading, "surface")];
  for (const auto& [cell, name] : {std::pair(&underlying, "underlying"), std::pair(&surface, "surface")}) {
    if (!cell->text.empty()) continue;
    diagnostics.Error(Kind::kBadData, line_span, "line " + std::to_string(line) + " has no " + name + " form",
                      "fill the cell in, or take the line out");
    return std::nullopt;
  }
  if (surface.text[0] == '*') {
    diagnostics.Error(Kind::kNotSupportedYet, surface.span, "starred surface forms are not supported by this release",
                      "take the row out");
    return std::nullopt;
  }
  DataRow row;
  row.underlying = underlying.text;
  row.span = underlying.span;
  for (Cell& alternative : Alternatives(surface)) {
    row.surfaces.push_back(std::move(alternative.text));
    row.surface_spans.push_back(alternative.span);
  }
  if (const auto gloss = ColumnOf(heading, "gloss")) row.gloss = cells[*gloss].text;
  if (const auto source = ColumnOf(heading, "source")) row.source = cells[*source].text;
  return row;
}

// The rows of a table that was read.
std::vector<DataRow> RowsOf(std::uint32_t file, const SourceMap& sources, Diagnostics& diagnostics) {
  std::vector<DataRow> rows;
  const std::string_view text = sources.text(file);
  std::vector<Cell> heading;
  std::size_t number = 0;
  for (std::size_t begin = text.substr(0, 3) == "\xEF\xBB\xBF" ? 3 : 0; begin < text.size();) {
    std::size_t end = text.find('\n', begin);
    if (end == std::string_view::npos) end = text.size();
    std::string_view line = text.substr(begin, end - begin);
    if (!line.empty() && line.back() == '\r') line.remove_suffix(1);
    const std::size_t offset = begin;
    begin = end + 1;
    ++number;
    if (line.empty()) continue;
    const Span line_span{file, static_cast<std::uint32_t>(offset), static_cast<std::uint32_t>(offset + line.size())};
    std::vector<Cell> cells = CellsOf(line, file, offset);
    if (!heading.empty()) {
      if (std::optional<DataRow> row = RowOf(heading, cells, number, line_span, diagnostics))
        rows.push_back(std::move(*row));
      continue;
    }
    heading = std::move(cells);
    for (std::size_t i = 0; i < heading.size(); ++i) {
      if (heading[i].text.empty() || *ColumnOf(heading, heading[i].text) == i) continue;
      diagnostics.Error(Kind::kDuplicate, heading[i].span, "two columns are called '" + heading[i].text + "'",
                        "rename one");
      return rows;
    }
    for (const char* wanted : {"underlying", "surface"}) {
      if (ColumnOf(heading, wanted)) continue;
      diagnostics.Error(Kind::kBadData, line_span, std::string("the heading names no column '") + wanted + "'",
                        "name the columns in the first line, parted by tabs: underlying, surface, gloss, source");
      return rows;
    }
  }
  if (heading.empty()) {
    diagnostics.Error(Kind::kBadData, Span{file, 0, 0}, "the table is empty",
                      "its first line names the columns: underlying, surface, gloss, source");
  }
  return rows;
}

}  // namespace

std::vector<DataRow> LoadData(const std::string& path, SourceMap& sources, Span from, Diagnostics& diagnostics) {
  std::uint32_t file = 0;
  if (!sources.Load(path, from, diagnostics, &file)) return {};
  return RowsOf(file, sources, diagnostics);
}

void Checker::LoadDataFiles() {
  for (const syntax::Top& top : file_.tops) {
    if (const auto* data = std::get_if<syntax::Data>(&top)) {
      for (const syntax::Datum& datum : data->rows) {
        DataRow row;
        row.underlying = datum.underlying.raw;
        row.span = datum.underlying.span;
        if (datum.gloss) row.gloss = datum.gloss->text;
        bool spelled = datum.underlying.spelled;
        for (const syntax::FormText& surface : datum.surfaces) {
          row.surfaces.push_back(surface.raw);
          row.surface_spans.push_back(surface.span);
          spelled = spelled || surface.spelled;
        }
        if (spelled) {
          Error(Kind::kNotSupportedYet, datum.span, "spelled forms ⟨..⟩ are not supported by this release",
                "write the symbols: /../ and [..]");
          continue;
        }
        grammar_.data.push_back(std::move(row));
      }
    } else if (const auto* from = std::get_if<syntax::DataFrom>(&top)) {
      const std::filesystem::path path(from->path.text);
      if (path.extension() == ".csv") {
        Error(Kind::kNotSupportedYet, from->path.span, "tables parted by commas are not supported by this release",
              "give a table parted by tabs (.tsv)");
        continue;
      }
      std::uint32_t table = 0;
      if (!grammar_.sources->LoadBeside(path.string(), from->path.span, diagnostics_, &table)) continue;
      for (DataRow& row : RowsOf(table, *grammar_.sources, diagnostics_)) grammar_.data.push_back(std::move(row));
    }
  }
}

void Checker::CheckForm(std::string_view text, Span span, bool underlying, const Reader& reader,
                        std::vector<Unread>* unread) {
  std::vector<Token> tokens;
  TextError error;
  if (reader.Read(text, underlying ? Reader::Side::kUnderlying : Reader::Side::kSurface, &tokens, &error)) {
    const bool any = std::any_of(tokens.begin(), tokens.end(),
                                 [](const Token& token) { return token.kind == Token::Kind::kSymbol; });
    if (!any && underlying) Error(Kind::kBadForm, span, "the form has no segment", "write at least one symbol");
    return;
  }
  const auto same = std::find_if(unread->begin(), unread->end(),
                                 [&](const Unread& u) { return u.diagnostic.message == error.message; });
  if (same != unread->end()) {
    ++same->further;
    return;
  }
  const std::uint32_t begin = span.begin + static_cast<std::uint32_t>(error.offset);
  const Span place{span.file, begin, begin + static_cast<std::uint32_t>(error.length)};
  unread->push_back({{error.kind, Severity::kError, place, error.message, error.remedy, {}}, 0});
}

// One character that is not in the inventory may stand in every row: it is said where it stands first, with
// the number of the others.
void Checker::CheckData() {
  const Reader reader(grammar_);
  std::vector<Unread> unread;
  for (const DataRow& row : grammar_.data) {
    CheckForm(row.underlying, row.span, true, reader, &unread);
    for (std::size_t i = 0; i < row.surfaces.size(); ++i)
      CheckForm(row.surfaces[i], row.surface_spans[i], false, reader, &unread);
  }
  for (Unread& u : unread) {
    if (u.further > 0)
      u.diagnostic.message += " (" + std::to_string(u.further) +
                              (u.further == 1 ? " further form has the same)" : " further forms have the same)");
    diagnostics_.Add(std::move(u.diagnostic));
  }
}

}  // namespace tiersmith
