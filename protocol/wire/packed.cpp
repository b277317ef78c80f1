// protocol/wire/packed.cpp -- what a packed column may hold, and what is said when it does not.
#include "protocol/wire/packed.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

#include "protocol/wire/base64.hpp"

namespace countsel {

void Packed::text(const std::string& key, const std::string& value) {
  if (key == "f64") {
    auto doubles = unpack_doubles(value);
    if (!doubles) {
      bad_base64_ = true;
      return;
    }
    doubles_ = std::move(*doubles);
    infinite_ = std::any_of(doubles_.begin(), doubles_.end(), [](double v) { return std::isinf(v); });
  } else if (key == "levels") {
    levels_.push_back(value);
  } else {
    astray_ = true;
  }
}

void Packed::number(const std::string& key, double value) {
  if (key != "codes" || value != std::trunc(value) || value < -1 ||
      value > std::numeric_limits<std::int32_t>::max()) {
    astray_ = true;
    return;
  }
  worst_code_ = std::max(worst_code_, value);
  codes_.push_back(static_cast<std::int32_t>(value));
}

bool Packed::list(const std::string& key) {
  if (key == "levels" || key == "codes") return true;
  astray_ = true;
  return false;
}

std::string Packed::finish(ColumnBuilder& into) {
  const bool doubles = keys_ == std::set<std::string>{"f64"};
  const bool levels = keys_ == std::set<std::string>{"levels", "codes"};
  if (bad_base64_) return "is not base64 of little-endian doubles.";
  if (astray_ || !(doubles || levels)) {
    return R"(is packed neither as {"f64":"base64"} nor as {"levels":[texts],"codes":[whole numbers]}.)";
  }
  if (infinite_) return "holds an infinite number; a blank is packed as NaN.";
  if (levels && worst_code_ >= static_cast<double>(levels_.size())) {
    return "has a code beyond its levels; codes start from 0, and -1 is a blank.";
  }
  if (doubles) {
    into.packed(std::move(doubles_));
  } else {
    into.packed(std::move(levels_), std::move(codes_));
  }
  return {};
}

}  // namespace countsel
