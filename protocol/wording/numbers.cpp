// protocol/wording/numbers.cpp -- rounding by the width of the limits.
#include "protocol/wording/numbers.hpp"

#include <algorithm>
#include <array>
#include <charconv>
#include <cmath>

namespace countsel {
namespace {

std::string with_commas(std::string digits) {
  auto point = std::min(digits.find('.'), digits.size());
  const std::size_t first = digits[0] == '-' ? 1 : 0;
  for (auto at = point; at > first + 3; at -= 3) digits.insert(at - 3, ",");
  return digits;
}

int exponent_of(double value) { return static_cast<int>(std::floor(std::log10(std::abs(value)))); }

std::string unusual(double value) {
  if (std::isnan(value)) return "?";
  return value > 0 ? "no limit" : "no limit";
}

}  // namespace

std::string fixed_text(double value, int decimals) {
  if (!std::isfinite(value)) return unusual(value);
  if (std::abs(value) >= 1e15) return significant_text(value, 4);
  std::array<char, 64> buffer{};
  const auto end = std::to_chars(buffer.data(), buffer.data() + buffer.size(), value,
                                 std::chars_format::fixed, std::max(0, decimals));
  std::string text(buffer.data(), end.ptr);
  // A negative number that rounds to zero has no sign left.
  if (text[0] == '-' && text.find_first_not_of("-0.") == std::string::npos) text.erase(0, 1);
  return with_commas(text);
}

std::string significant_text(double value, int digits) {
  if (!std::isfinite(value)) return unusual(value);
  if (value == 0) return "0";
  // Rounding first: 9.96 with two digits is 10, which has another exponent.
  std::array<char, 64> buffer{};
  const auto end = std::to_chars(buffer.data(), buffer.data() + buffer.size(), value,
                                 std::chars_format::scientific, std::max(0, digits - 1));
  const std::string text(buffer.data(), end.ptr);
  double rounded = 0;
  std::from_chars(text.data(), text.data() + text.size(), rounded);
  const int exponent = exponent_of(rounded);
  if (exponent < -6 || exponent >= 15) {
    const auto e = text.find('e');
    int power = std::atoi(text.c_str() + e + 1);
    return text.substr(0, e) + "e" + std::to_string(power);
  }
  return fixed_text(rounded, std::max(0, digits - 1 - exponent));
}

std::string given_text(double value) {
  if (!std::isfinite(value)) return unusual(value);
  if (value != 0 && (std::abs(value) < 1e-6 || std::abs(value) >= 1e15)) return significant_text(value, 6);
  std::string text = fixed_text(value, 6);
  if (std::abs(value) < 1) {
    // Small ones keep six significant digits.
    text = value == 0 ? "0" : significant_text(value, 6);
  }
  if (text.find('.') != std::string::npos && text.find('e') == std::string::npos) {
    while (text.back() == '0') text.pop_back();
    if (text.back() == '.') text.pop_back();
  }
  return text;
}

std::string percent_text(double share) { return given_text(std::round(share * 1e8) / 1e6) + "%"; }

std::string p_text(double p) {
  if (std::isnan(p)) return "?";
  if (p < 0.0001) return "less than 0.0001";
  if (p > 0.99) return "more than 0.99";
  return p < 0.001 ? fixed_text(p, 4) : p < 0.1 ? fixed_text(p, 3) : fixed_text(p, 2);
}

std::string p_said(double p) { return "p " + std::string(p < 0.0001 || p > 0.99 ? "" : "= ") + p_text(p); }

RoundedLimits round_limits(double value, double low, double high) {
  const bool both = std::isfinite(low) && std::isfinite(high) && high > low;
  const double width = both ? high - low : 0;
  const auto one = [&](double v) -> std::string {
    if (!std::isfinite(v)) return unusual(v);
    if (v == 0) return "0";
    if (!both) return significant_text(v, 2);
    const int decimals = 1 - exponent_of(width);
    // A number far smaller than the width keeps two digits of its own, or it would read as nothing.
    if (exponent_of(v) - 1 < -decimals) return significant_text(v, 2);
    if (decimals > 9) return significant_text(v, std::clamp(exponent_of(v) + decimals + 1, 2, 12));
    return fixed_text(v, decimals);
  };
  return {one(value), one(low), one(high)};
}

std::string shown_limits(double value, double low, double high) {
  const auto text = round_limits(value, low, high);
  return text.value + " (" + text.low + " to " + text.high + ")";
}

}  // namespace countsel
