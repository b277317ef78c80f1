// protocol/data/column_reader.cpp -- the rules about single cells.
#include "protocol/data/column_reader.hpp"

#include <algorithm>
#include <cmath>
#include <unordered_map>

#include "protocol/data/cells.hpp"
#include "protocol/wire/brief.hpp"
#include "protocol/wire/large_counts.hpp"
#include "protocol/wording/words.hpp"

namespace countsel {
namespace {

constexpr double nan = std::numeric_limits<double>::quiet_NaN();

bool holds_numbers(Holds holds) {
  return holds != Holds::levels && holds != Holds::label && holds != Holds::order;
}

constexpr std::size_t most_places = 20;

/// Collects the places of one trouble, then refuses with all of them.
struct Trouble {
  std::vector<Place> places;  ///< the first few
  std::size_t cells = 0;
  void add(const std::string& column, std::size_t row) {
    if (++cells <= most_places) places.push_back({column, static_cast<std::int64_t>(row) + 1});
  }
  bool any() const { return cells > 0; }
  std::size_t first_row() const { return static_cast<std::size_t>(places.front().row - 1); }
  [[noreturn]] void refuse(Code code, const Places& where, const std::string& what,
                           const std::string& hint) const {
    std::string text = where.say(places.front()) + " " + what;
    if (cells > 1) text += " There are " + std::to_string(cells) + " such cells.";
    throw Refusal(code, text, places, hint);
  }
};

const char* wanted(Holds holds) {
  switch (holds) {
    case Holds::count:
      return "a count is a whole number, 0 or more";
    case Holds::exposure:
    case Holds::exposure_or_0:
      return "an exposure is a number above 0";
    default:
      return "a number belongs there";
  }
}

}  // namespace

void RowsLeftOut::leave_out(std::size_t row, const std::string& why, const std::string& column) {
  if (keep_.empty()) keep_.assign(rows_, 1);
  if (!keep_[row]) return;
  keep_[row] = 0;
  auto at = std::find_if(reasons_.begin(), reasons_.end(), [&](const auto& reason) {
    return std::get<0>(reason) == why && std::get<1>(reason) == column;
  });
  if (at == reasons_.end()) {
    reasons_.emplace_back(why, column, std::vector<std::int64_t>{});
    at = reasons_.end() - 1;
  }
  std::get<2>(*at).push_back(static_cast<std::int64_t>(row) + 1);
}

std::size_t RowsLeftOut::kept() const {
  return keep_.empty() ? rows_ : static_cast<std::size_t>(std::count(keep_.begin(), keep_.end(), 1));
}

double RowsLeftOut::sum_of_left_out(std::span<const double> values) const {
  double sum = 0;
  for (const auto& [why, column, rows] : reasons_) {
    for (const auto row : rows) {
      const double value = values[static_cast<std::size_t>(row - 1)];
      if (!std::isnan(value)) sum += value;
    }
  }
  return sum;
}

std::vector<std::uint32_t> RowsLeftOut::indices() const {
  std::vector<std::uint32_t> indices;
  if (keep_.empty() || kept() == rows_) return indices;
  for (std::size_t i = 0; i < rows_; ++i) {
    if (keep_[i]) indices.push_back(static_cast<std::uint32_t>(i));
  }
  return indices;
}

void RowsLeftOut::tell(std::vector<Note>& notes, const Places& places) const {
  for (const auto& [why, column, rows] : reasons_) {
    Note note{why, "", {}};
    for (const auto row : rows) {
      if (note.where.size() < most_places) note.where.push_back({column, row});
    }
    const std::string at = places.list(note.where, rows.size());
    note.text =
        std::to_string(rows.size()) + (rows.size() == 1 ? " row was left out: " : " rows were left out: ");
    if (why == "blank") {
      note.text += column + " is blank in " + at + ". A blank is never taken as zero.";
    } else if (why == "error_cell") {
      note.text += column + " holds an error in " + at + ".";
    } else if (why == "zero_exposure") {
      note.text += column + " is 0 and nothing was counted in " + at + ".";
    } else {
      note.text += column + " is the total of the other rows in " + at + ".";
    }
    notes.push_back(std::move(note));
  }
}

/// An infinity can only have been packed; no column may hold one.
void ColumnReader::check_infinities(const Column& column) {
  if (!column.infinite) return;
  Trouble trouble;
  for (std::size_t row = 0; row < column.numbers.size(); ++row) {
    if (std::isinf(column.numbers[row]) && left_out_.in(row)) trouble.add(column.name, row);
  }
  if (trouble.any()) {
    trouble.refuse(Code::bad_value, places_, "is infinite, which no cell may be.",
                   "A blank is packed as NaN.");
  }
}

void ColumnReader::check_error_cells(const Column& column) {
  std::vector<char> bad(column.texts.size(), 0);
  bool any = false;
  for (std::size_t i = 0; i < bad.size(); ++i) any |= (bad[i] = error_text(column.texts[i]) ? 1 : 0) != 0;
  if (!any) return;
  Trouble trouble;
  std::string first;
  for (std::size_t row = 0; row < column.size(); ++row) {
    const auto tag = column.tags[row];
    if (tag < 0 || !bad[static_cast<std::size_t>(tag)] || !left_out_.in(row)) continue;
    if (rules_.error_cells == ErrorCells::skip) {
      left_out_.leave_out(row, "error_cell", column.name);
    } else {
      if (first.empty()) first = column.texts[static_cast<std::size_t>(tag)];
      trouble.add(column.name, row);
    }
  }
  if (trouble.any()) {
    trouble.refuse(Code::error_cell, places_, "is an error, " + brief(first) + ".",
                   R"(Mend the sheet, or leave such rows out with "error_cells":"skip".)");
  }
}

void ColumnReader::convert_texts(ReadColumn& read) {
  // Each distinct text is read once.
  const Column& column = *read.column;
  std::vector<CellNumber> read_texts;
  read_texts.reserve(column.texts.size());
  for (const auto& text : column.texts) read_texts.push_back(read_number(text, rules_));
  read.numbers = column.numbers.empty() ? std::vector<double>(column.size(), nan) : column.numbers;
  std::size_t converted = 0;
  Trouble astray;
  for (std::size_t row = 0; row < column.size(); ++row) {
    const auto tag = column.tags[row];
    if (tag < 0 || !left_out_.in(row)) continue;
    const auto& cell = read_texts[static_cast<std::size_t>(tag)];
    if (cell.reads == Reads::number) {
      read.numbers[row] = cell.value;
      ++converted;
    } else {
      astray.add(column.name, row);
    }
  }
  if (astray.any()) {
    const auto& text = column.texts[static_cast<std::size_t>(column.tags[astray.first_row()])];
    const auto reads = read_number(text, rules_).reads;
    const std::string is = "is the text \"" + brief(text) + "\"";
    switch (reads) {
      case Reads::decimal_comma:
        astray.refuse(Code::bad_value, places_, is + "; it looks like a decimal comma.",
                      R"(If it is one, say "decimal":",".)");
      case Reads::ambiguous:
        astray.refuse(Code::bad_value, places_, is + ", which could be read in two ways.",
                      R"(Say which mark is which: "thousands":"," or "decimal":",".)");
      case Reads::bad_grouping:
        astray.refuse(Code::bad_value, places_, is + ", whose thousands marks stand at odd places.",
                      "Write it without thousands marks.");
      default:
        astray.refuse(Code::bad_type, places_, is + "; " + wanted(read.holds) + ".",
                      "A column of numbers and texts cannot be used as numbers.");
    }
  }
  if (converted > 0 && !column.levels_only) {
    notes_.push_back({"text_numbers",
                      std::to_string(converted) + (converted == 1 ? " cell of " : " cells of ") +
                          column.name + " came as text and " + (converted == 1 ? "was" : "were") +
                          " read as numbers.",
                      {{column.name, 0}}});
  }
}

/// A file that was held was read before anybody could say which mark is which.
void ColumnReader::check_doubtful_point(const Column& column) {
  const Marks marks = marks_of(rules_);
  if (!column.doubtful_point || (marks.settled && marks.decimal == '.')) return;
  if (marks.settled) {
    throw Refusal(Code::bad_value,
                  column.name + " was read with a decimal point when it was held; it cannot be read anew.",
                  {{column.name, 0}},
                  "Ask about the file itself, or write the numbers without thousands marks.");
  }
  notes_.push_back({"decimal_point",
                    "The points in " + column.name +
                        " were read as decimal points, though each could be a thousands mark; if so, say "
                        R"("decimal":",".)",
                    {{column.name, 0}}});
}

void ColumnReader::read_numbers(ReadColumn& read) {
  const Column& column = *read.column;
  if (column.levels_only) {
    throw Refusal(Code::bad_type,
                  "Column " + column.name + " was sent as levels; " + wanted(read.holds) + ".",
                  {{column.name, 0}}, "Send it as numbers.");
  }
  check_doubtful_point(column);
  if (column.all_numbers()) return judge(read);
  Trouble booleans, nested;
  for (std::size_t row = 0; row < column.size(); ++row) {
    if (!left_out_.in(row)) continue;
    const auto tag = column.tags[row];
    if (tag == tag::blank) left_out_.leave_out(row, "blank", column.name);
    if (tag == tag::yes || tag == tag::no) booleans.add(column.name, row);
    if (tag == tag::nested) nested.add(column.name, row);
  }
  if (nested.any()) {
    nested.refuse(Code::bad_type, places_,
                  "is a list or an object; a cell is a number, a text, true, false or null.",
                  "Send one flat list for each column.");
  }
  if (booleans.any()) {
    booleans.refuse(
        Code::bad_type, places_,
        "is true or false, which is a level and not a number; " + std::string(wanted(read.holds)) + ".",
        "Send 1 and 0 if numbers are meant.");
  }
  if (!column.texts.empty()) {
    convert_texts(read);
  } else if (column.numbers.empty()) {
    read.numbers.assign(column.size(), nan);
  }
  judge(read);
}

void ColumnReader::judge(const ReadColumn& read) {
  if (read.holds == Holds::number) return;
  const auto values = read.values();
  const auto right = [holds = read.holds](double v) {
    switch (holds) {
      case Holds::count:
        return v >= 0 && v <= largest_count && v == std::trunc(v);
      case Holds::exposure:
      case Holds::exposure_or_0:
      case Holds::not_below_0:
        return v >= 0;
      case Holds::above_0:
        return v > 0;
      default:
        return true;
    }
  };
  Trouble trouble;
  for (std::size_t row = 0; row < values.size(); ++row) {
    if (right(values[row]) || !left_out_.in(row)) continue;
    trouble.add(read.column->name, row);
  }
  if (!trouble.any()) return;
  const double first = values[trouble.first_row()];
  const std::string is = "is " + number_text(first) + "; ";
  switch (read.holds) {
    case Holds::count:
      if (first > largest_count) {
        trouble.refuse(Code::bad_count, places_, is + "a count is a whole number up to 2^53.",
                       "Count in larger units.");
      }
      trouble.refuse(Code::bad_count, places_, is + "a count is a whole number, 0 or more.",
                     first < 0 ? "Look for a correction booked as a negative count."
                               : "If it is a rate, give the count and the exposure instead.");
    case Holds::exposure:
    case Holds::exposure_or_0:
      trouble.refuse(Code::bad_exposure, places_, is + "an exposure is above 0.",
                     "Give how much was observed, never its logarithm.");
    case Holds::above_0:
      trouble.refuse(Code::bad_value, places_, is + "it should be above 0.", "");
    default:
      trouble.refuse(Code::bad_value, places_, is + "it should be 0 or more.", "");
  }
}

ReadColumn ColumnReader::read(const Column& column, Holds holds) {
  ReadColumn read{.column = &column, .holds = holds, .numbers = {}};
  check_infinities(column);
  check_error_cells(column);
  if (holds_numbers(holds)) {
    read_numbers(read);
    return read;
  }
  if (column.all_numbers() || column.all_texts()) return read;
  Trouble nested;
  for (std::size_t row = 0; row < column.size(); ++row) {
    if (!left_out_.in(row)) continue;
    if (column.tags[row] == tag::nested) nested.add(column.name, row);
    if (column.tags[row] == tag::blank && holds != Holds::label)
      left_out_.leave_out(row, "blank", column.name);
  }
  if (nested.any()) {
    nested.refuse(Code::bad_type, places_,
                  "is a list or an object; a cell is a number, a text, true, false or null.",
                  "Send one flat list for each column.");
  }
  return read;
}

void ColumnReader::settle_zero_exposures(const ReadColumn& exposure, const ReadColumn* count,
                                         bool leave_out) {
  Trouble trouble;
  const auto values = exposure.values();
  double first = 0;
  for (std::size_t row = 0; row < values.size(); ++row) {
    if (values[row] != 0 || !left_out_.in(row)) continue;
    const double counted = count ? count->values()[row] : 0;
    if (counted > 0) {
      if (!trouble.any()) first = counted;
      trouble.add(exposure.column->name, row);
    } else if (leave_out) {
      left_out_.leave_out(row, "zero_exposure", exposure.column->name);
    }
  }
  if (trouble.any()) {
    trouble.refuse(Code::bad_exposure, places_, "is 0, yet the count there is " + number_text(first) + ".",
                   "Where something was counted, something was observed: mend the exposure.");
  }
}

void fill_role(ReadColumn& read, const std::vector<std::uint32_t>& kept, std::shared_ptr<const Column> source,
               Role& role) {
  const Column& column = *read.column;
  role.given = true;
  role.column = column.name;
  role.source = std::move(source);
  if (holds_numbers(read.holds) || (read.holds == Holds::order && column.all_numbers())) {
    if (!kept.empty()) {
      const auto values = read.values();
      role.own_numbers.reserve(kept.size());
      for (const auto row : kept) role.own_numbers.push_back(values[row]);
    } else if (!read.numbers.empty()) {
      role.own_numbers = std::move(read.numbers);
    }
    role.numbers = kept.empty() && role.own_numbers.empty() ? std::span<const double>(column.numbers)
                                                            : std::span<const double>(role.own_numbers);
    if (read.holds != Holds::order) return;
  }
  if (column.all_texts() && kept.empty()) {
    role.levels = column.texts;
    role.codes = column.tags;
    return;
  }
  // Levels in the order in which the kept rows bring them.
  const std::size_t rows = kept.empty() ? column.size() : kept.size();
  std::unordered_map<std::string, std::int32_t> seen;
  std::unordered_map<double, std::int32_t> seen_numbers;
  std::vector<std::int32_t> seen_texts(column.texts.size(), -1);
  role.own_codes.reserve(rows);
  const auto code_of = [&](std::string text) {
    const auto [at, fresh] = seen.try_emplace(text, static_cast<std::int32_t>(role.levels.size()));
    if (fresh) role.levels.push_back(std::move(text));
    return at->second;
  };
  for (std::size_t i = 0; i < rows; ++i) {
    const std::size_t row = kept.empty() ? i : kept[i];
    const auto tag = column.tag_at(row);
    if (tag == tag::number) {
      auto [at, fresh] = seen_numbers.try_emplace(column.numbers[row], 0);
      if (fresh) at->second = code_of(number_text(column.numbers[row]));
      role.own_codes.push_back(at->second);
    } else if (tag >= 0) {
      auto& code = seen_texts[static_cast<std::size_t>(tag)];
      if (code < 0) code = code_of(column.texts[static_cast<std::size_t>(tag)]);
      role.own_codes.push_back(code);
    } else {
      role.own_codes.push_back(code_of(level_text(column, row)));
    }
  }
  role.codes = role.own_codes;
}

}  // namespace countsel
