// protocol/wording/shown.cpp -- which rounding suits which style.
#include "protocol/wording/shown.hpp"

#include <algorithm>
#include <cmath>

#include "protocol/wording/numbers.hpp"

namespace countsel {
namespace {

const ColumnSpec* find_column(const TableSpec* spec, const std::string& name) {
  if (!spec) return nullptr;
  for (const auto& column : spec->columns) {
    if (column.name == name) return &column;
  }
  return nullptr;
}

const std::vector<double>* numbers_of(const OutTable& table, const std::string& name) {
  for (const auto& [column, cells] : table.columns) {
    if (column == name) return std::get_if<std::vector<double>>(&cells);
  }
  return nullptr;
}

/// The estimate whose limit `name` is, with the spec that says so. Of several estimates with limits of one
/// name, the table (where given) has only one.
const ColumnSpec* limit_of(const TableSpec* spec, const std::string& name, const OutTable* table = nullptr) {
  if (!spec) return nullptr;
  for (const auto& column : spec->columns) {
    if (column.low != name && column.high != name) continue;
    if (!table || numbers_of(*table, column.name)) return &column;
  }
  return nullptr;
}

}  // namespace

std::string column_heading(const TableSpec* spec, const std::string& name, const Wording& wording) {
  const ColumnSpec* column = find_column(spec, name);
  if (!column) return name;
  if (const ColumnSpec* estimate = limit_of(spec, name); estimate && column->heading.empty()) {
    return (estimate->low == name ? "lower " : "upper ") + wording.level() + " limit";
  }
  const std::string heading = wording.heading(column->heading, column->style);
  return heading.empty() ? name : heading;
}

std::string shown_number(double value, Style style) {
  if (std::isnan(value)) return "";
  if (std::isinf(value)) return value > 0 ? "no limit" : "-no limit";
  switch (style) {
    case Style::count:
    case Style::exposure:
    case Style::whole:
      return given_text(value);
    case Style::p_value:
      return value < 0.0001 ? "< 0.0001" : value > 0.99 ? "> 0.99" : p_text(value);
    case Style::share:
      return percent_text(std::round(value * 1000) / 1000);
    case Style::log:
      return fixed_text(value, 3);
    case Style::text:
    case Style::level:
      return number_text(value);  // a year has no thousands mark
    default:
      return significant_text(value, 3);
  }
}

std::vector<std::pair<std::string, std::vector<std::string>>> shown_columns(const TableSpec* spec,
                                                                            const OutTable& table) {
  std::vector<std::pair<std::string, std::vector<std::string>>> shown;
  for (const auto& [name, cells] : table.columns) {
    std::vector<std::string> texts;
    if (const auto* given = std::get_if<std::vector<std::string>>(&cells)) {
      texts = *given;
    } else if (const auto* optional = std::get_if<std::vector<OptionalText>>(&cells)) {
      for (const auto& text : *optional) texts.push_back(text.value_or(""));
    } else if (const auto* mixed = std::get_if<std::vector<Figure>>(&cells)) {
      const ColumnSpec* column = find_column(spec, name);
      for (const auto& figure : *mixed) {
        const auto* number = std::get_if<double>(&figure);
        const auto* text = std::get_if<std::string>(&figure);
        texts.push_back(number ? shown_number(*number, column ? column->style : Style::number)
                        : text ? *text
                               : "");
      }
    } else {
      const auto& numbers = std::get<std::vector<double>>(cells);
      const ColumnSpec* column = find_column(spec, name);
      const Style style = column ? column->style : Style::number;
      const ColumnSpec* estimate = column && !column->low.empty() ? column : limit_of(spec, name, &table);
      const auto* values = estimate ? numbers_of(table, estimate->name) : nullptr;
      const auto* lows = estimate ? numbers_of(table, estimate->low) : nullptr;
      const auto* highs = estimate ? numbers_of(table, estimate->high) : nullptr;
      for (std::size_t i = 0; i < numbers.size(); ++i) {
        if (!values || !lows || !highs) {
          texts.push_back(shown_number(numbers[i], style));
          continue;
        }
        const double low = (*lows)[i], high = (*highs)[i], value = (*values)[i];
        if (std::isnan(value) || (std::isnan(low) && std::isnan(high))) {
          texts.push_back(shown_number(numbers[i], style));
        } else if (estimate == column) {
          texts.push_back(shown_limits(value, low, high));
        } else {
          const auto rounded = round_limits(value, low, high);
          texts.push_back(estimate->low == name ? rounded.low : rounded.high);
        }
      }
    }
    shown.emplace_back(name, std::move(texts));
  }
  return shown;
}

}  // namespace countsel
