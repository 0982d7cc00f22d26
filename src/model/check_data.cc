// Rows of data, in the grammar and from tables.
//
// Example: the row `/in-bata/ [imbata] 'x'`; a table has the columns id, underlying, surface, gloss, tags, source, comment by
// name, in any order, or as `data from` maps them; in a cell, `a ~ b * c` lists variants and what must not come out.
// Does not handle: tables parted by commas (an error says so). Tested by tests/unit/model/data_test.cc.
#include <algorithm>
#include <filesystem>
#include <sstream>

#include "model/check.h"
#include "model/readings.h"
#include "model/table.h"

namespace tiersmith {
namespace {

constexpr const char* kColumns = "id, underlying, surface, gloss, tags, source, comment";
const std::vector<std::string>& Fields() {
  static const std::vector<std::string> fields = {"id", "underlying", "surface", "gloss", "tags", "source", "comment"};
  return fields;
}

// One of the forms a surface cell lists: `a ~ b * c`.
struct Listed {
  Cell cell;
  bool starred = false;
};

std::vector<Listed> FormsListed(const Cell& cell) {
  std::vector<Listed> listed;
  const std::string& text = cell.text;
  bool starred = false;
  for (std::size_t begin = 0; begin <= text.size();) {
    if (begin < text.size() && text[begin] == '*') {
      starred = true;
      ++begin;
    }
    while (begin < text.size() && text[begin] == ' ') ++begin;
    const std::size_t variant = text.find(" ~ ", begin), star = text.find(" *", begin);
    const std::size_t end = std::min({variant, star, text.size()});
    std::size_t last = end;
    while (last > begin && text[last - 1] == ' ') --last;
    listed.push_back({{text.substr(begin, last - begin),
                       {cell.span.file, cell.span.begin + static_cast<std::uint32_t>(begin),
                        cell.span.begin + static_cast<std::uint32_t>(last)}},
                      starred});
    if (end == text.size()) break;
    starred = false;
    begin = end + (end == variant ? 3 : 1);
  }
  return listed;
}

// Which column holds what.
struct Columns {
  std::map<std::string, std::size_t> of;  // by field
  bool underlying_spelled = false, surface_spelled = false;
};

Columns ByName(const Table& table) {
  Columns columns;
  for (const std::string& field : Fields()) {
    if (const auto column = table.ColumnOf(field)) columns.of[field] = *column;
  }
  return columns;
}

// One row, or nothing after an error.
std::optional<DataRow> RowOf(const Columns& columns, const Table::Line& line, Diagnostics& diagnostics) {
  const auto cell = [&](const char* field) -> const Cell* {
    const auto column = columns.of.find(field);
    return column == columns.of.end() ? nullptr : &line.cells[column->second];
  };
  const auto text = [&](const char* field) { return cell(field) == nullptr ? std::string() : cell(field)->text; };
  for (const char* name : {"underlying", "surface"}) {
    if (!text(name).empty()) continue;
    diagnostics.Error(Kind::kBadData, line.span, "line " + std::to_string(line.number) + " has no " + name + " form",
                      "fill the cell in, or take the line out");
    return std::nullopt;
  }
  DataRow row;
  row.id = text("id");
  row.underlying = text("underlying");
  row.span = cell("underlying")->span;
  row.underlying_spelled = columns.underlying_spelled;
  row.surface_spelled = columns.surface_spelled;
  for (Listed& form : FormsListed(*cell("surface"))) {
    const std::string beside = " " + form.cell.text + " ";
    if (form.cell.text.empty() || beside.compare(0, 3, " ~ ") == 0 ||
        beside.compare(beside.size() - 3, 3, " ~ ") == 0) {
      diagnostics.Error(Kind::kBadData, cell("surface")->span, "beside ~ or * a surface form is missing",
                        "list them as in: b ~ c *d");
      return std::nullopt;
    }
    (form.starred ? row.starred : row.surfaces).push_back(std::move(form.cell.text));
    (form.starred ? row.starred_spans : row.surface_spans).push_back(form.cell.span);
  }
  row.gloss = text("gloss");
  std::istringstream tags(text("tags"));
  for (std::string tag; tags >> tag;) row.tags.push_back(tag);
  row.source = text("source");
  row.comment = text("comment");
  return row;
}

// True, or false after saying which column is missing.
bool HasForms(const Columns& columns, Span heading, Diagnostics& diagnostics) {
  for (const char* wanted : {"underlying", "surface"}) {
    if (columns.of.count(wanted) != 0) continue;
    diagnostics.Error(Kind::kBadData, heading, std::string("the heading names no column '") + wanted + "'",
                      std::string("name the columns in the first line, parted by tabs: ") + kColumns +
                          "; or map them in the grammar: { surface = Phonetic_Form }");
    return false;
  }
  return true;
}

void AddRows(const Table& table, const Columns& columns, bool comparing_length, std::vector<DataRow>* rows,
             Diagnostics& diagnostics) {
  for (const Table::Line& line : table.lines) {
    std::optional<DataRow> row = RowOf(columns, line, diagnostics);
    if (!row) continue;
    row->comparing_length = comparing_length;
    rows->push_back(std::move(*row));
  }
}

// The columns that the grammar names in braces; nothing after an error.
std::optional<Columns> ByBraces(const syntax::DataFrom& from, const Table& table, Diagnostics& diagnostics) {
  Columns columns = from.columns.front().number ? Columns() : ByName(table);
  std::set<std::string> said;
  for (const syntax::Column& column : from.columns) {
    const std::string& field = column.field.text;
    if (std::find(Fields().begin(), Fields().end(), field) == Fields().end()) {
      diagnostics.Error(Kind::kBadData, column.field.span, "rows of data have no '" + field + "'",
                        Or(DidYouMean(field, Fields()), std::string("they have ") + kColumns));
      return std::nullopt;
    }
    if (!said.insert(field).second) {
      diagnostics.Error(Kind::kDuplicate, column.field.span, "'" + field + "' is given two columns",
                        "keep one of them");
      return std::nullopt;
    }
    if (column.number.has_value() != from.columns.front().number.has_value()) {
      diagnostics.Error(Kind::kBadData, column.span, "columns are called by number or by heading, not by both",
                        "numbers are for a table without a heading");
      return std::nullopt;
    }
    const std::string name = column.number ? std::to_string(*column.number) : column.heading.text;
    const std::optional<std::size_t> place = table.ColumnOf(name);
    if (!place) {
      std::vector<std::string> names;
      for (const Cell& heading : table.heading) names.push_back(heading.text);
      diagnostics.Error(Kind::kBadData, column.span, "the table has no column '" + name + "'",
                        column.number ? "number the columns from 1 to " + std::to_string(table.heading.size())
                                      : Or(DidYouMean(name, names), "its first line names the columns"));
      return std::nullopt;
    }
    if (column.spelled && field != "underlying" && field != "surface") {
      diagnostics.Error(Kind::kBadData, column.span, "only forms are spelled", "leave `spelled` out here");
      return std::nullopt;
    }
    columns.of[field] = *place;
    if (field == "underlying") columns.underlying_spelled = column.spelled;
    if (field == "surface") columns.surface_spelled = column.spelled;
  }
  return columns;
}

DataRow RowOf(const syntax::Datum& datum, bool comparing_length) {
  DataRow row;
  row.underlying = datum.underlying.raw;
  row.span = datum.underlying.span;
  row.underlying_spelled = row.surface_spelled = datum.underlying.spelled;
  row.comparing_length = comparing_length;
  if (datum.gloss) row.gloss = datum.gloss->text;
  for (const syntax::FormText& surface : datum.surfaces) {
    row.surfaces.push_back(surface.raw);
    row.surface_spans.push_back(surface.span);
  }
  for (const syntax::FormText& form : datum.starred) {
    row.starred.push_back(form.raw);
    row.starred_spans.push_back(form.span);
  }
  return row;
}

}  // namespace

std::vector<DataRow> LoadData(const std::string& path, SourceMap& sources, Span from, Diagnostics& diagnostics) {
  std::uint32_t file = 0;
  std::vector<DataRow> rows;
  if (!sources.Load(path, from, diagnostics, &file)) return rows;
  const std::optional<Table> table = ReadTable(file, sources, true, kColumns, diagnostics);
  if (!table) return rows;
  WarnOfMisspelledColumns(*table, Fields(), diagnostics);
  const Columns columns = ByName(*table);
  if (HasForms(columns, table->heading_span, diagnostics)) AddRows(*table, columns, false, &rows, diagnostics);
  return rows;
}

void ReadSpelled(const Speller& speller, std::vector<DataRow>* rows, Diagnostics& diagnostics) {
  const auto read = [&](const std::string& text, Span span, Reader::Side side) {
    std::vector<std::string> readings;
    TextError error;
    if (speller.Read(text, side, &readings, &error)) return readings;
    const std::uint32_t begin = span.begin + static_cast<std::uint32_t>(error.offset);
    diagnostics.Error(error.kind, {span.file, begin, begin + static_cast<std::uint32_t>(error.length)}, error.message,
                      error.remedy);
    return std::vector<std::string>();
  };
  const auto read_all = [&](std::vector<std::string>* forms, std::vector<Span>* spans) {
    std::vector<std::string> symbols;
    std::vector<Span> places;
    bool good = true;
    for (std::size_t i = 0; i < forms->size(); ++i) {
      const std::vector<std::string> readings = read((*forms)[i], (*spans)[i], Reader::Side::kSurface);
      good = good && !readings.empty();
      symbols.insert(symbols.end(), readings.begin(), readings.end());
      places.insert(places.end(), readings.size(), (*spans)[i]);
    }
    *forms = std::move(symbols);
    *spans = std::move(places);
    return good;
  };
  std::vector<DataRow> kept;
  for (DataRow& row : *rows) {
    bool good = true;
    if (row.underlying_spelled) {
      row.also = read(row.underlying, row.span, Reader::Side::kUnderlying);
      good = !row.also.empty();
      if (good) {
        row.underlying = row.also.front();
        row.also.erase(row.also.begin());
      }
    }
    if (row.surface_spelled) {
      good = read_all(&row.surfaces, &row.surface_spans) && good;
      good = read_all(&row.starred, &row.starred_spans) && good;
    }
    row.underlying_spelled = row.surface_spelled = false;
    if (good) kept.push_back(std::move(row));
  }
  *rows = std::move(kept);
}

void Checker::LoadDataTable(const syntax::DataFrom& from, std::uint32_t file) {
  const bool numbers = !from.columns.empty() && from.columns.front().number;
  const std::optional<Table> table = ReadTable(file, *grammar_.sources, !numbers, kColumns, diagnostics_);
  if (!table) return;
  if (from.columns.empty()) WarnOfMisspelledColumns(*table, Fields(), diagnostics_);
  const std::optional<Columns> columns = from.columns.empty() ? ByName(*table) : ByBraces(from, *table, diagnostics_);
  if (!columns || !HasForms(*columns, from.columns.empty() ? table->heading_span : from.path.span, diagnostics_))
    return;
  AddRows(*table, *columns, from.comparing_length, &grammar_.data, diagnostics_);
}

void Checker::LoadDataFiles() {
  for (const syntax::Top& top : file_.tops) {
    if (const auto* data = std::get_if<syntax::Data>(&top)) {
      for (const syntax::Datum& datum : data->rows) grammar_.data.push_back(RowOf(datum, data->comparing_length));
    } else if (const auto* from = std::get_if<syntax::DataFrom>(&top)) {
      const std::filesystem::path path(from->path.text);
      if (path.extension() == ".csv") {
        Error(Kind::kNotSupportedYet, from->path.span, "tables parted by commas are not supported by this release",
              "give a table parted by tabs (.tsv)");
        continue;
      }
      std::uint32_t table = 0;
      if (!grammar_.sources->LoadBeside(path.string(), from->path.span, diagnostics_, &table)) continue;
      LoadDataTable(*from, table);
    }
  }
}

void Checker::NoteUnread(const TextError& error, Span span, std::vector<Unread>* unread) {
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
  const auto spelled = [](const DataRow& row) { return row.underlying_spelled || row.surface_spelled; };
  if (std::any_of(grammar_.data.begin(), grammar_.data.end(), spelled))
    ReadSpelled(Letters(), &grammar_.data, diagnostics_);
  const FormReader forms(grammar_);
  std::vector<Unread> unread;
  TextError error;
  std::vector<Token> tokens;
  for (const DataRow& row : grammar_.data) {
    std::vector<Reading> readings;
    if (!forms.Read(row.underlying, row.tags, &readings, &error)) {
      NoteUnread(error, row.span, &unread);
    } else if (readings.front().morphemes.empty()) {
      Error(Kind::kBadForm, row.span, "the form has no segment", "write at least one symbol");
    }
    const auto check = [&](const std::vector<std::string>& surfaces, const std::vector<Span>& spans) {
      for (std::size_t i = 0; i < surfaces.size(); ++i) {
        if (!forms.reader().Read(surfaces[i], Reader::Side::kSurface, &tokens, &error))
          NoteUnread(error, spans[i], &unread);
      }
    };
    check(row.surfaces, row.surface_spans);
    check(row.starred, row.starred_spans);
    for (const std::string& tag : row.tags) {
      const std::vector<std::string>& known = forms.known_tags();
      if (std::find(known.begin(), known.end(), tag) != known.end()) continue;
      NoteUnread({Kind::kUnknownTag, 0, row.underlying.size(),
                  "no rule asks for the tag '" + tag + "' of this row, and no entry has it",
                  Or(DidYouMean(tag, known), "leave it out, or give it to an entry of the lexicon")},
                 row.span, &unread);
    }
  }
  for (Unread& u : unread) {
    if (u.further > 0)
      u.diagnostic.message += " (" + std::to_string(u.further) +
                              (u.further == 1 ? " further form has the same)" : " further forms have the same)");
    diagnostics_.Add(std::move(u.diagnostic));
  }
}

}  // namespace tiersmith
