// protocol/data/csv.cpp -- fields by libcsv, cells by what they look like.
#include "protocol/data/csv.hpp"

#include <csv.h>

#include <charconv>
#include <cmath>
#include <memory>

#include "engine/refusal.hpp"
#include "protocol/data/cells.hpp"
#include "protocol/data/utf8.hpp"
#include "protocol/wire/large_counts.hpp"
#include "protocol/wire/limits.hpp"

namespace countsel {
namespace {

struct CsvColumn {
  ColumnBuilder cells = {};
  bool points = false;       // some number has a point
  bool sure_points = false;  // … which can be no thousands mark
};

struct Reading {
  bool header;
  bool decimal_point;
  std::vector<std::string> names = {};
  std::vector<CsvColumn> columns = {};
  std::size_t row = 0, cell = 0, width = 0;
  std::int64_t uneven_row = 0;
  std::size_t uneven_cells = 0;
};

/// A number as JSON writes one; "007", "+3" and "1,200" stay texts, so that no level loses its zeros.
bool json_number(std::string_view text, double& value) {
  std::size_t i = !text.empty() && text[0] == '-' ? 1 : 0;
  if (i >= text.size() || text[i] < '0' || text[i] > '9') return false;
  if (text[i] == '0' && i + 1 < text.size() && text[i + 1] >= '0' && text[i + 1] <= '9') return false;
  const auto [end, error] = std::from_chars(text.data(), text.data() + text.size(), value);
  return error == std::errc() && end == text.data() + text.size() && std::isfinite(value) &&
         text.back() != '.';
}

void take_field(void* field, std::size_t length, void* into) {
  auto& reading = *static_cast<Reading*>(into);
  const std::string_view text(static_cast<const char*>(field), length);
  const std::size_t cell = reading.cell++;
  // The first row makes the columns; what a later row has beyond them is counted, not kept.
  if (reading.row == 0 && cell < limits::most_columns) reading.columns.emplace_back();
  if (reading.header && reading.row == 0) {
    reading.names.emplace_back(text);
    return;
  }
  if (cell >= reading.columns.size()) return;
  auto& column = reading.columns[cell];
  double value = 0;
  const bool point = text.find('.') != std::string_view::npos;
  if ((point && !reading.decimal_point) || !json_number(text, value)) {
    column.cells.text(text);
    return;
  }
  column.points |= point;
  column.sure_points |= point && !could_be_thousands(text.substr(text[0] == '-' ? 1 : 0), '.');
  column.cells.number(beyond_largest_count(value, text));
}

void take_row(int, void* into) {
  auto& reading = *static_cast<Reading*>(into);
  if (reading.row == 0) reading.width = reading.cell;
  if (reading.cell != reading.width && reading.uneven_row == 0) {
    reading.uneven_row = static_cast<std::int64_t>(reading.row) + (reading.header ? 0 : 1);
    reading.uneven_cells = reading.cell;
  }
  ++reading.row;
  reading.cell = 0;
}

}  // namespace

std::string numbered_name(std::size_t index) { return std::to_string(index + 1); }

Table read_delimited(std::string_view text, char delimiter, bool header, const CellRules& rules) {
  if (text.substr(0, 3) == "\xEF\xBB\xBF") text.remove_prefix(3);
  if (!valid_utf8(text)) {
    throw Refusal(Code::bad_json, "The table is not valid UTF-8.", {}, "Save it again as UTF-8.");
  }
  Reading reading{.header = header, .decimal_point = marks_of(rules).decimal == '.'};
  csv_parser parser;
  if (csv_init(&parser, CSV_STRICT | CSV_STRICT_FINI) != 0) throw std::bad_alloc();
  const std::unique_ptr<csv_parser, decltype(&csv_free)> freed(&parser, &csv_free);
  csv_set_delim(&parser, static_cast<unsigned char>(delimiter));
  // Spaces belong to a cell here; what is only spaces is a blank later.
  csv_set_space_func(&parser, [](unsigned char) { return 0; });
  if (csv_parse(&parser, text.data(), text.size(), take_field, take_row, &reading) != text.size() ||
      csv_fini(&parser, take_field, take_row, &reading) != 0) {
    if (csv_error(&parser) == CSV_ENOMEM) throw std::bad_alloc();
    throw Refusal(Code::bad_value,
                  "The table has a quote out of place in line " + std::to_string(reading.row + 1) + ".", {},
                  "In CSV a cell with quotes is quoted as a whole and its quotes are doubled (RFC 4180).");
  }
  if (reading.width > limits::most_columns) {
    throw Refusal(Code::too_large,
                  "The table has more than " + std::to_string(limits::most_columns) + " columns.");
  }
  Table table;
  table.header = header;
  table.row_wise = true;
  table.uneven_row = reading.uneven_row;
  table.uneven_cells = reading.uneven_cells;
  for (std::size_t i = 0; i < reading.columns.size(); ++i) {
    auto& column = reading.columns[i];
    const bool named = header && !reading.names[i].empty();
    auto cells = std::make_shared<Column>(column.cells.take(named ? reading.names[i] : numbered_name(i)));
    cells->doubtful_point = column.points && !column.sure_points && !marks_of(rules).settled;
    table.columns.push_back(std::move(cells));
  }
  return table;
}

}  // namespace countsel
