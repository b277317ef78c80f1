// protocol/data/places.cpp -- column letters and row numbers of a sheet.
#include "protocol/data/places.hpp"

#include <algorithm>
#include <cctype>

#include "protocol/declare/spec.hpp"
#include "protocol/wire/brief.hpp"

namespace countsel {
namespace {

std::string letters(std::int64_t column) {
  std::string text;
  for (auto rest = column; rest > 0; rest = (rest - 1) / 26) {
    text.insert(text.begin(), static_cast<char>('A' + (rest - 1) % 26));
  }
  return text;
}

}  // namespace

std::optional<std::string> origin_of(const Json& rest) {
  const auto given = rest.find("origin");
  if (given == rest.end() || given->is_null()) return std::nullopt;
  if (!given->is_string()) bind::wrong_type("of.origin", "the address of a cell", *given);
  return given->get<std::string>();
}

Places::Places(const Table& table, const std::string& origin) : table_(&table) {
  if (origin.empty()) return;
  // From the end: digits, perhaps "$", letters, perhaps "$"; what is before is the sheet, kept as it is.
  std::size_t at = origin.size();
  while (at > 0 && std::isdigit(static_cast<unsigned char>(origin[at - 1]))) --at;
  const std::string digits = origin.substr(at);
  if (at > 0 && origin[at - 1] == '$') --at;
  const std::size_t letters_end = at;
  while (at > 0 && std::isalpha(static_cast<unsigned char>(origin[at - 1]))) --at;
  const std::string column = origin.substr(at, letters_end - at);
  if (at > 0 && origin[at - 1] == '$') --at;
  const bool sheet_ends = at == 0 || origin[at - 1] == '.' || origin[at - 1] == '!';
  if (digits.empty() || digits.size() > 9 || column.empty() || column.size() > 3 || !sheet_ends ||
      std::stoll(digits) == 0) {
    throw Refusal(Code::bad_value,
                  "of.origin is \"" + brief(origin) + "\"; it should be the address of a cell.", {},
                  "For example \"Falls.B4\".");
  }
  prefix_ = origin.substr(0, at);
  first_row_ = std::stoll(digits);
  for (const char c : column) {
    first_column_ = first_column_ * 26 + (std::toupper(static_cast<unsigned char>(c)) - 'A' + 1);
  }
  known_ = true;
}

std::optional<std::string> Places::cell(const Place& place) const {
  if (!known_) return std::nullopt;
  for (std::size_t i = 0; i < table_->columns.size(); ++i) {
    if (table_->columns[i]->name != place.column) continue;
    const std::int64_t header = table_->header ? 1 : 0;
    const std::int64_t row = place.row > 0 ? first_row_ + header + place.row - 1 : first_row_;
    return prefix_ + letters(first_column_ + static_cast<std::int64_t>(i)) + std::to_string(row);
  }
  return std::nullopt;
}

std::string Places::say(const Place& place) const {
  const auto address = cell(place);
  if (place.row == 0)
    return address ? "Column " + place.column + " (at " + *address + ")" : "Column " + place.column;
  if (address) return *address + " (row " + std::to_string(place.row) + " of " + place.column + ")";
  return "Row " + std::to_string(place.row) + " of " + place.column;
}

std::string Places::list(const std::vector<Place>& places, std::size_t total, std::size_t most) const {
  const bool addresses = !places.empty() && cell(places.front());
  std::string text = addresses ? "" : total == 1 ? "row " : "rows ";
  const std::size_t named = std::min(most, places.size());
  for (std::size_t i = 0; i < named; ++i) {
    if (i > 0) text += i + 1 == total ? " and " : ", ";
    text += addresses ? *cell(places[i]) : std::to_string(places[i].row);
  }
  if (total > named) text += " and " + std::to_string(total - named) + " more";
  return text;
}

}  // namespace countsel
