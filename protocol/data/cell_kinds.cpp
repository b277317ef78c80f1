// protocol/data/cell_kinds.cpp -- one pass over the cells; each distinct text is read once.
#include "protocol/data/cell_kinds.hpp"

#include <algorithm>
#include <limits>

#include "protocol/data/cells.hpp"

namespace countsel {
namespace {

constexpr double nan = std::numeric_limits<double>::quiet_NaN();
constexpr std::size_t most_rows = 20;

void add(CellsOfKind& kind, std::size_t row, const std::string& text = {}) {
  if (kind.cells++ == 0) kind.first = text;
  if (kind.rows.size() < most_rows) kind.rows.push_back(static_cast<std::int64_t>(row) + 1);
}

struct ReadText {
  CellsOfKind CellKinds::*kind;
  double value;
};

ReadText read_text(const std::string& text, const CellRules& rules) {
  if (error_text(text)) return {&CellKinds::error, nan};
  const CellNumber number = read_number(text, rules);
  switch (number.reads) {
    case Reads::number:
      return {&CellKinds::text_number, number.value};
    case Reads::decimal_comma:
      return {&CellKinds::decimal_comma, nan};
    case Reads::ambiguous:
      return {&CellKinds::ambiguous, nan};
    case Reads::bad_grouping:
      return {&CellKinds::bad_grouping, nan};
    default:
      return {&CellKinds::word, nan};
  }
}

}  // namespace

bool CellKinds::numeric() const {
  const std::size_t like_numbers = numbers + text_number.cells + decimal_comma.cells + ambiguous.cells;
  return like_numbers > 0 && like_numbers >= word.cells;
}

std::string CellKinds::kind() const {
  const bool some_numbers = numbers > 0, some_texts = word.cells + boolean.cells + text_number.cells > 0;
  return some_numbers && some_texts ? "numbers and texts"
         : some_numbers             ? "numbers"
         : some_texts               ? "levels"
                                    : "blank";
}

CellKinds kinds_of_cells(const Column& column, const CellRules& rules, const std::vector<char>& kept) {
  CellKinds kinds;
  kinds.least = kinds.greatest = nan;
  std::vector<ReadText> texts;
  for (const auto& text : column.texts) texts.push_back(read_text(text, rules));
  std::vector<char> met(column.texts.size(), 0);
  for (std::size_t row = 0; row < column.size(); ++row) {
    if (!kept.empty() && !kept[row]) continue;
    ++kinds.rows;
    if (!kept.empty()) kinds.kept.push_back(static_cast<std::int64_t>(row) + 1);
    const auto tag = column.tag_at(row);
    double value = nan;
    if (tag == tag::number) {
      value = column.numbers[row];
      ++kinds.numbers;
    } else if (tag == tag::blank) {
      add(kinds.blank, row);
    } else if (tag == tag::nested) {
      add(kinds.nested, row);
    } else if (tag < 0) {
      add(kinds.boolean, row, tag == tag::yes ? "true" : "false");
    } else {
      const auto which = static_cast<std::size_t>(tag);
      const ReadText& read = texts[which];
      add(kinds.*read.kind, row, column.texts[which]);
      value = read.value;
      if (read.kind == &CellKinds::word && !met[which]) {
        met[which] = 1;
        ++kinds.levels;
      }
    }
    kinds.zeros += value == 0;
    if (value == value) {
      kinds.least = kinds.least < value ? kinds.least : value;
      kinds.greatest = kinds.greatest > value ? kinds.greatest : value;
    }
    kinds.values.push_back(value);
  }
  return kinds;
}

}  // namespace countsel
