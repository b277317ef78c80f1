// protocol/data/places.hpp -- where a cell is, in the host's own words.
//
// Checked by: tests/protocol/data/places_test.cpp.
#pragma once

#include <optional>
#include <string>

#include "engine/refusal.hpp"
#include "protocol/wire/request.hpp"

namespace countsel {

/// `of.origin` as it was given, if it was. Refuses bad_type.
std::optional<std::string> origin_of(const Json& rest);

/// Turns columns and rows into cell addresses where the asker said where the table lies.
class Places {
 public:
  Places() = default;
  /// `origin` as in "Falls.B4": the address of the table's top left cell. Refuses bad_value.
  Places(const Table& table, const std::string& origin);

  /// "Falls.C7", or nothing where no origin was given or the column is none of the table's.
  std::optional<std::string> cell(const Place& place) const;
  /// "Falls.C7 (column count, row 3)" or "Row 3 of count".
  std::string say(const Place& place) const;
  /// Places of one column for people: "rows 3, 7 and 9", "Falls.C4 and Falls.C9"; at most `most` named.
  /// `total` is how many there are when `places` holds only the first of them.
  std::string list(const std::vector<Place>& places, std::size_t total, std::size_t most = 5) const;

 private:
  const Table* table_ = nullptr;
  std::string prefix_;
  std::int64_t first_column_ = 0, first_row_ = 0;
  bool known_ = false;
};

}  // namespace countsel
