// protocol/wire/packed.hpp -- a column packed by a program: {"f64": …} or {"levels": …, "codes": …}.
//
// Checked by: tests/protocol/wire/packed_test.cpp.
#pragma once

#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "engine/refusal.hpp"
#include "engine/table/column.hpp"

namespace countsel {

class Packed {
 public:
  void key(const std::string& name);
  /// What stands under a key itself, or in the list that stands there.
  void text(std::string_view value, bool in_list);
  void number(double value, bool in_list);
  void other(std::int32_t tag, bool in_list);
  void nested() { shapeless_ = true; }
  /// A list begins; false if none belongs there.
  bool list();
  /// Fills `into` with the column; returns what is wrong with it, if anything is.
  std::optional<Refusal> finish(const std::string& column, ColumnBuilder& into);

 private:
  enum class Under { nothing, f64, levels, codes };

  Under under_ = Under::nothing;
  bool has_f64_ = false, has_levels_ = false, has_codes_ = false;
  bool shapeless_ = false, bad_base64_ = false;
  std::optional<std::string> unknown_key_;
  std::vector<double> doubles_;
  std::vector<std::string> levels_;
  std::vector<std::int32_t> codes_;
  std::size_t bad_code_ = 0;  ///< row, from 1, of the first that is no whole number from -1
};

}  // namespace countsel
