// engine/table/column.cpp -- filling a column and reading its cells back.
#include "engine/table/column.hpp"

#define XXH_INLINE_ALL
#include <xxhash.h>

#include <algorithm>
#include <charconv>
#include <cmath>
#include <limits>

namespace countsel {
namespace {

constexpr double nan = std::numeric_limits<double>::quiet_NaN();

bool only_spaces(std::string_view text) {
  // A no-break space is what a sheet pasted from a page holds in an empty cell.
  while (!text.empty()) {
    if (text.front() == ' ' || text.front() == '\t' || text.front() == '\r' || text.front() == '\n') {
      text.remove_prefix(1);
    } else if (text.substr(0, 2) == "\xC2\xA0") {
      text.remove_prefix(2);
    } else {
      return false;
    }
  }
  return true;
}

}  // namespace

void ColumnBuilder::start_tags() {
  tagged_ = true;
  column_.tags.assign(column_.numbers.size(), tag::number);
}

void ColumnBuilder::tagged_number(double value) {
  if (column_.numbers.empty()) column_.numbers.assign(column_.tags.size(), nan);
  column_.numbers.push_back(value);
  column_.tags.push_back(tag::number);
}

void ColumnBuilder::text(std::string_view text) {
  if (only_spaces(text)) return other(tag::blank);
  if (!tagged_) start_tags();
  column_.tags.push_back(index_.find_or_add(text, column_.texts));
  if (!column_.numbers.empty()) column_.numbers.push_back(nan);
}

void ColumnBuilder::other(std::int32_t tag) {
  if (!tagged_) start_tags();
  column_.tags.push_back(tag);
  ++column_.others;
  if (!column_.numbers.empty()) column_.numbers.push_back(nan);
}

void ColumnBuilder::packed(std::vector<double>&& values) {
  column_.numbers = std::move(values);
  const auto blanks =
      std::count_if(column_.numbers.begin(), column_.numbers.end(), [](double v) { return v != v; });
  column_.infinite =
      std::any_of(column_.numbers.begin(), column_.numbers.end(), [](double v) { return std::isinf(v); });
  if (blanks == 0) return;
  start_tags();
  column_.others = static_cast<std::size_t>(blanks);
  for (std::size_t i = 0; i < column_.numbers.size(); ++i) {
    if (column_.numbers[i] != column_.numbers[i]) column_.tags[i] = tag::blank;
  }
}

void ColumnBuilder::packed(std::vector<std::string>&& levels, std::vector<std::int32_t>&& codes) {
  // Levels are taken in order of first appearance in the cells, as if the texts had been sent: how a
  // column was packed must not show in an answer. A level of spaces is a blank, a level given twice one.
  tagged_ = true;
  column_.levels_only = true;
  std::vector<std::int32_t> renumbered(levels.size(), std::numeric_limits<std::int32_t>::min());
  for (auto& code : codes) {
    if (code >= 0) {
      auto& target = renumbered[static_cast<std::size_t>(code)];
      if (target == std::numeric_limits<std::int32_t>::min()) {
        const std::string& level = levels[static_cast<std::size_t>(code)];
        if (only_spaces(level)) {
          target = tag::blank;
        } else {
          target = index_.find_or_add(level, column_.texts);
        }
      }
      code = target;
    } else {
      code = tag::blank;
    }
    if (code == tag::blank) ++column_.others;
  }
  column_.tags = std::move(codes);
}

Column ColumnBuilder::take(std::string name) {
  column_.name = std::move(name);
  column_.digest = column_digest(column_);
  index_ = TextIndex();
  return std::move(column_);
}

std::uint64_t column_digest(const Column& column) {
  // Numbers by their bits, other cells by their tags, texts by their bytes, each with its length.
  XXH3_state_t state;
  XXH3_64bits_reset(&state);
  const std::uint64_t cells = column.size();
  XXH3_64bits_update(&state, &cells, sizeof cells);
  if (column.all_numbers()) {
    XXH3_64bits_update(&state, column.numbers.data(), column.numbers.size() * sizeof(double));
  } else {
    XXH3_64bits_update(&state, column.tags.data(), column.tags.size() * sizeof(std::int32_t));
    for (std::size_t i = 0; i < column.numbers.size(); ++i) {
      if (column.tags[i] == tag::number) XXH3_64bits_update(&state, &column.numbers[i], sizeof(double));
    }
    for (const auto& text : column.texts) {
      const std::uint64_t length = text.size();
      XXH3_64bits_update(&state, &length, sizeof length);
      XXH3_64bits_update(&state, text.data(), text.size());
    }
  }
  return XXH3_64bits_digest(&state);
}

std::string number_text(double value) {
  if (value == 0) return "0";
  char buffer[32];
  const auto end = std::abs(value) < 1e15 && value == std::trunc(value)
                       ? std::to_chars(buffer, buffer + sizeof buffer, static_cast<std::int64_t>(value))
                       : std::to_chars(buffer, buffer + sizeof buffer, value);
  return std::string(buffer, end.ptr);
}

std::string level_text(const Column& column, std::size_t row) {
  switch (const auto tag = column.tag_at(row); tag) {
    case tag::number:
      return number_text(column.numbers[row]);
    case tag::no:
      return "false";
    case tag::yes:
      return "true";
    case tag::blank:
    case tag::nested:
      return "";
    default:
      return column.texts[static_cast<std::size_t>(tag)];
  }
}

}  // namespace countsel
