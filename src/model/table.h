// Tables parted by tabs: a heading and lines of cells, each with its place. Tested by tests/unit/model/data_test.cc.
#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "base/source_map.h"

namespace tiersmith {

struct Cell {
  std::string text;  // without blanks around it
  Span span;
};

struct Table {
  std::vector<Cell> heading;
  Span heading_span;
  struct Line {
    std::vector<Cell> cells;  // as many as the heading
    std::size_t number = 0;   // from 1, in the file
    Span span;
  };
  std::vector<Line> lines;

  std::optional<std::size_t> ColumnOf(std::string_view name) const;
};

// Reads a table that is in `sources`; lines with more or fewer cells than the heading are errors and left out. Without a
// heading the columns are called 1, 2 ... . Nothing after an error in the heading. `columns`: what the heading may
// name, for messages.
std::optional<Table> ReadTable(std::uint32_t file, const SourceMap& sources, bool has_heading, const char* columns,
                               Diagnostics& diagnostics);

// Warns of a column that nothing reads and whose name is nearly one of `fields` that the heading lacks.
void WarnOfMisspelledColumns(const Table& table, const std::vector<std::string>& fields, Diagnostics& diagnostics);

}  // namespace tiersmith
