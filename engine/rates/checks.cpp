// engine/rates/checks.cpp -- refusals of what is no count, no exposure, no confidence.
#include "engine/rates/checks.hpp"

#include <charconv>
#include <string>

#include "engine/refusal.hpp"

namespace countsel {
namespace {

std::string shown(double value) {
  char text[32];
  return {text, std::to_chars(text, text + sizeof text, value).ptr};
}

std::string whose(std::string_view name, std::size_t row) {
  return row == 0 ? std::string(name) : "Row " + std::to_string(row) + " of " + std::string(name);
}

[[noreturn]] void refuse(Code code, std::string_view name, std::size_t row, double value, const char* rule) {
  throw Refusal(code, whose(name, row) + " is " + shown(value) + "; " + rule,
                {{std::string(name), static_cast<std::int64_t>(row)}});
}

}  // namespace

void require_count(double count, std::string_view name, std::size_t row) {
  if (!is_count(count)) refuse(Code::bad_count, name, row, count, "a count is a whole number, 0 or more.");
}
void require_exposure(double exposure, std::string_view name, std::size_t row) {
  if (!is_exposure(exposure)) refuse(Code::bad_exposure, name, row, exposure, "an exposure is above 0.");
}
void require_probability(double value, std::string_view name) {
  if (!(value > 0 && value < 1)) refuse(Code::bad_value, name, 0, value, "it must lie between 0 and 1.");
}
void require_positive(double value, std::string_view name) {
  if (!is_exposure(value)) refuse(Code::bad_value, name, 0, value, "it must be above 0.");
}

}  // namespace countsel
