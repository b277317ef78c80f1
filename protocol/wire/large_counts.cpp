// protocol/wire/large_counts.cpp -- only the digits tell 2^53 from 2^53 + 1.
#include "protocol/wire/large_counts.hpp"

#include <algorithm>

namespace countsel {

double beyond_largest_count(double value, std::string_view written) {
  if (value != largest_count) return value;
  constexpr std::string_view digits = "0123456789", largest = "9007199254740992";
  written = written.substr(0, written.find('.'));
  written.remove_prefix(std::min(written.find_first_not_of("+-0"), written.size()));
  const bool plain = written.find_first_not_of(digits) == std::string_view::npos;
  return plain && written.size() == largest.size() && written > largest ? largest_count + 2 : value;
}

double beyond_largest_count(std::uint64_t value) {
  const auto number = static_cast<double>(value);
  return value > (std::uint64_t{1} << 53) && number <= largest_count ? largest_count + 2 : number;
}

}  // namespace countsel
