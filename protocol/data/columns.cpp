// protocol/data/columns.cpp -- what makes columns a table, and finding one.
#include "protocol/data/columns.hpp"

#include <unordered_set>

#include "protocol/declare/nearest.hpp"
#include "protocol/wire/brief.hpp"

namespace countsel {

const Column* Table::find(std::string_view name) const {
  for (const auto& column : columns) {
    if (column->name == name) return column.get();
  }
  return nullptr;
}

const Column& find_column(const Table& table, const std::string& name, const std::string& what) {
  if (const Column* column = table.find(name)) return *column;
  std::vector<std::string> names;
  for (const auto& column : table.columns) names.push_back(column->name);
  const std::string near = nearest(name, names);
  std::string hint = names.empty()  ? ""
                     : near.empty() ? "The columns are: "
                                    : "Did you mean \"" + near + "\"?";
  if (near.empty() && !names.empty()) {
    for (std::size_t i = 0; i < names.size() && i < 20; ++i) hint += (i ? ", " : "") + brief(names[i]);
    hint += names.size() > 20 ? ", …" : ".";
  }
  throw Refusal(Code::not_found, "There is no column \"" + brief(name) + "\"" + what + ".", {}, hint);
}

void check_lengths(const Table& table) {
  if (table.columns.empty()) return;
  const auto& first = *table.columns.front();
  if (table.uneven_row != 0) {
    const auto cells = [](std::size_t count) {
      return std::to_string(count) + (count == 1 ? " cell" : " cells");
    };
    throw Refusal(Code::length_mismatch,
                  "Row " + std::to_string(table.uneven_row) + " has " + cells(table.uneven_cells) +
                      " and the first row has " + cells(table.columns.size()) + "; they should have as many.",
                  {{first.name, table.uneven_row}},
                  "Give every row one cell for each column; a blank cell is null.");
  }
  const auto rows = [](const Column& column) {
    return column.name + " has " + std::to_string(column.size()) + (column.size() == 1 ? " row" : " rows");
  };
  for (const auto& column : table.columns) {
    if (column->size() == first.size()) continue;
    throw Refusal(Code::length_mismatch,
                  rows(first) + " and " + rows(*column) + "; they should have as many.",
                  {{first.name, 0}, {column->name, 0}}, "Select ranges of the same length.");
  }
}

void check_names(const Table& table) {
  std::unordered_set<std::string_view> names;
  for (const auto& column : table.columns) {
    if (names.insert(column->name).second) continue;
    throw Refusal(Code::bad_value, "Two columns are named \"" + brief(column->name) + "\".",
                  {{column->name, 0}}, "Give each column a name of its own.");
  }
}

}  // namespace countsel
