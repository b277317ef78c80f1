// protocol/wire/packed.cpp -- what a packed column may hold, and what is said when it does not.
#include "protocol/wire/packed.hpp"

#include <cmath>
#include <limits>

#include "protocol/wire/base64.hpp"

namespace countsel {

void Packed::key(const std::string& name) {
  under_ = name == "f64"      ? Under::f64
           : name == "levels" ? Under::levels
           : name == "codes"  ? Under::codes
                              : Under::nothing;
  has_f64_ |= under_ == Under::f64;
  has_levels_ |= under_ == Under::levels;
  has_codes_ |= under_ == Under::codes;
  if (under_ == Under::nothing && !unknown_key_) unknown_key_ = name;
}

void Packed::text(std::string_view value, bool in_list) {
  if (under_ == Under::levels && in_list) {
    levels_.emplace_back(value);
  } else if (under_ == Under::f64 && !in_list) {
    auto doubles = unpack_doubles(value);
    bad_base64_ = !doubles;
    if (doubles) doubles_ = std::move(*doubles);
  } else {
    shapeless_ = true;
  }
}

void Packed::number(double value, bool in_list) {
  if (under_ == Under::levels && in_list) {
    levels_.push_back(number_text(value));
  } else if (under_ == Under::codes && in_list) {
    const bool right =
        value == std::trunc(value) && value >= -1 && value <= std::numeric_limits<std::int32_t>::max();
    codes_.push_back(right ? static_cast<std::int32_t>(value) : -1);
    if (!right && bad_code_ == 0) bad_code_ = codes_.size();
  } else {
    shapeless_ = true;
  }
}

void Packed::other(std::int32_t tag, bool in_list) {
  if (under_ == Under::levels && in_list && tag != tag::blank) {
    levels_.emplace_back(tag == tag::yes ? "true" : "false");
  } else {
    shapeless_ = true;
  }
}

bool Packed::list() {
  if (under_ == Under::levels || under_ == Under::codes) return true;
  shapeless_ = true;
  return false;
}

std::optional<Refusal> Packed::finish(const std::string& column, ColumnBuilder& into) {
  const auto refusal = [&column](Code code, const std::string& what, std::size_t row = 0,
                                 std::string hint = {}) {
    return Refusal(code, "Column " + column + " " + what, {{column, static_cast<std::int64_t>(row)}},
                   std::move(hint));
  };
  const char* shape =
      R"(A column is a list, {"f64":"base64"} or {"levels":[texts],"codes":[whole numbers]}.)";
  if (unknown_key_) {
    return refusal(Code::unknown_key, "is packed with the key \"" + *unknown_key_ + "\", which is not known.",
                   0, shape);
  }
  const bool doubles = has_f64_ && !has_levels_ && !has_codes_;
  const bool levels = !has_f64_ && has_levels_ && has_codes_;
  if (shapeless_ || !(doubles || levels)) {
    return refusal(Code::bad_type, "is packed in a shape that cannot be read.", 0, shape);
  }
  if (bad_base64_) {
    return refusal(Code::bad_value, "is not base64 of little-endian doubles.", 0,
                   "Eight bytes for each cell, padded with = (RFC 4648).");
  }
  if (doubles) {
    into.packed(std::move(doubles_));
    return std::nullopt;
  }
  const auto beyond = static_cast<std::int64_t>(levels_.size());
  for (std::size_t i = 0; i < codes_.size() && bad_code_ == 0; ++i) {
    if (codes_[i] >= beyond) bad_code_ = i + 1;
  }
  if (bad_code_ != 0) {
    return refusal(Code::bad_value,
                   "has a code in row " + std::to_string(bad_code_) + " that is none of its levels.",
                   bad_code_, "Codes count the levels from 0; -1 is a blank.");
  }
  into.packed(std::move(levels_), std::move(codes_));
  return std::nullopt;
}

}  // namespace countsel
