// engine/refusal.hpp -- the one exception: what was asked cannot be answered, and why.
//
// Thrown at the edge where bad input is recognised, caught once in the session. Numerical trouble
// (no convergence, an estimate at infinity, an aliased column) is part of a result, never thrown.
#pragma once

#include <cstdint>
#include <exception>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

namespace countsel {

/// The refusal codes of the wire, in the contract's order.
enum class Code {
  bad_json,
  not_an_object,
  unknown_ask,
  unknown_key,
  missing,
  bad_type,
  bad_value,
  bad_count,
  bad_exposure,
  length_mismatch,
  too_few,
  too_large,
  too_deep,
  error_cell,
  no_answer,
  not_found,
  not_allowed,
  cancelled,
  out_of_time,
  out_of_memory,
  totals_row,
  internal
};

std::string_view code_name(Code code);

/// A place in the data: a column (or role) by name and, from 1, a data row; row 0 means all of it.
struct Place {
  std::string column;
  std::int64_t row = 0;
};

struct Refusal : std::exception {
  Refusal(Code why, std::string said, std::vector<Place> where = {}, std::string remedy = {})
      : code(why), text(std::move(said)), places(std::move(where)), hint(std::move(remedy)) {}
  const char* what() const noexcept override { return text.c_str(); }

  Code code;
  std::string text;
  std::vector<Place> places;
  std::string hint;
};

}  // namespace countsel
