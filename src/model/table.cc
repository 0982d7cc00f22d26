// See table.h.
#include "model/table.h"

#include <algorithm>

#include "model/names.h"

namespace tiersmith {
namespace {

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

// False, after saying so, if two columns have one name.
bool NamedOnce(const Table& table, Diagnostics& diagnostics) {
  for (std::size_t i = 0; i < table.heading.size(); ++i) {
    const Cell& name = table.heading[i];
    if (name.text.empty() || *table.ColumnOf(name.text) == i) continue;
    diagnostics.Error(Kind::kDuplicate, name.span, "two columns are called '" + name.text + "'", "rename one");
    return false;
  }
  return true;
}

void NumberColumns(std::size_t count, Span span, Table* table) {
  for (std::size_t i = 1; i <= count; ++i) table->heading.push_back({std::to_string(i), span});
  table->heading_span = span;
}

}  // namespace

std::optional<std::size_t> Table::ColumnOf(std::string_view name) const {
  for (std::size_t i = 0; i < heading.size(); ++i) {
    if (heading[i].text == name) return i;
  }
  return std::nullopt;
}

std::optional<Table> ReadTable(std::uint32_t file, const SourceMap& sources, bool has_heading, const char* columns,
                               Diagnostics& diagnostics) {
  Table table;
  const std::string_view text = sources.text(file);
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
    const Span span{file, static_cast<std::uint32_t>(offset), static_cast<std::uint32_t>(offset + line.size())};
    std::vector<Cell> cells = CellsOf(line, file, offset);
    if (table.heading.empty() && has_heading) {
      table.heading = std::move(cells);
      table.heading_span = span;
      if (!NamedOnce(table, diagnostics)) return std::nullopt;
      continue;
    }
    if (table.heading.empty()) NumberColumns(cells.size(), span, &table);
    if (cells.size() == table.heading.size()) {
      table.lines.push_back({std::move(cells), number, span});
      continue;
    }
    diagnostics.Error(Kind::kBadData, span,
                      "line " + std::to_string(number) + " has " + std::to_string(cells.size()) +
                          (cells.size() == 1 ? " cell" : " cells") + ", the " +
                          (has_heading ? "heading" : "first line") + " has " + std::to_string(table.heading.size()),
                      std::string("give every line as many cells as the ") + (has_heading ? "heading" : "first") +
                          ", parted by single tabs");
  }
  if (!table.heading.empty()) return table;
  diagnostics.Error(Kind::kBadData, Span{file, 0, 0}, "the table is empty",
                    has_heading ? std::string("its first line names the columns: ") + columns : "give it a line");
  return std::nullopt;
}

void WarnOfMisspelledColumns(const Table& table, const std::vector<std::string>& fields, Diagnostics& diagnostics) {
  std::vector<std::string> lacking;
  for (const std::string& field : fields) {
    if (!table.ColumnOf(field)) lacking.push_back(field);
  }
  for (const Cell& name : table.heading) {
    if (std::find(fields.begin(), fields.end(), name.text) != fields.end()) continue;
    const std::string hint = DidYouMean(name.text, lacking);
    if (!hint.empty())
      diagnostics.Warning(Kind::kBadData, name.span, "nothing reads the column '" + name.text + "'",
                          hint + "otherwise leave it as it is");
  }
}

}  // namespace tiersmith
