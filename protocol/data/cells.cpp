// protocol/data/cells.cpp -- numbers written by people and by hosts.
#include "protocol/data/cells.hpp"

#include <algorithm>
#include <array>
#include <charconv>
#include <cmath>

namespace countsel {
namespace {

bool digits(std::string_view text) {
  return !text.empty() && std::all_of(text.begin(), text.end(), [](char c) { return c >= '0' && c <= '9'; });
}

std::string_view trimmed(std::string_view text) {
  const auto space = [](char c) { return c == ' ' || c == '\t' || c == '\r' || c == '\n'; };
  while (!text.empty() && space(text.front())) text.remove_prefix(1);
  while (!text.empty() && space(text.back())) text.remove_suffix(1);
  return text;
}

/// Takes the thousands marks out of the whole part; false if they stand at the wrong places.
bool ungroup(std::string_view whole, char mark, std::string& out) {
  std::size_t group = 0;
  for (bool first = true;; first = false, ++group) {
    const auto at = whole.find(mark);
    const auto piece = whole.substr(0, at);
    if (!digits(piece) || (first ? at != std::string_view::npos && piece.size() > 3 : piece.size() != 3))
      return false;
    out += piece;
    if (at == std::string_view::npos) return true;
    whole.remove_prefix(at + 1);
  }
}

/// Exactly one `mark`, with digits before it and exactly three after: "1,200", "1.200".
bool could_be_thousands(std::string_view text, char mark) {
  const auto at = text.find(mark);
  return at != std::string_view::npos && at >= 1 && at <= 3 && text[0] != '0' && digits(text.substr(0, at)) &&
         text.size() == at + 4 && digits(text.substr(at + 1));
}

}  // namespace

CellNumber read_number(std::string_view raw, const CellRules& rules) {
  std::string_view text = trimmed(raw);
  double sign = 1;
  if (!text.empty() && (text[0] == '-' || text[0] == '+')) {
    sign = text[0] == '-' ? -1 : 1;
    text.remove_prefix(1);
  } else if (text.substr(0, 3) == "\xE2\x88\x92") {  // the minus sign of typographers
    sign = -1;
    text.remove_prefix(3);
  }
  if (text.empty() || (text[0] != '.' && text[0] != ',' && (text[0] < '0' || text[0] > '9'))) {
    return {Reads::no_number};
  }
  const char decimal = rules.decimal == "," ? ',' : '.';
  const bool settled = !rules.thousands.empty() || rules.decimal == ",";
  const char thousands = !rules.thousands.empty() ? rules.thousands[0] : rules.decimal == "," ? '.' : '\0';
  if (!settled && (could_be_thousands(text, ',') || could_be_thousands(text, '.'))) return {Reads::ambiguous};

  std::string plain;
  const auto exponent = std::min(text.find_first_of("eE"), text.size());
  const auto point = std::min(text.substr(0, exponent).find(decimal), exponent);
  const auto whole = text.substr(0, point);
  if (thousands && thousands != decimal && whole.find(thousands) != std::string_view::npos) {
    if (!ungroup(whole, thousands, plain)) return {Reads::bad_grouping};
  } else {
    plain = whole;
  }
  if (point < exponent) plain += '.' + std::string(text.substr(point + 1, exponent - point - 1));
  plain += text.substr(exponent);
  double value = 0;
  const auto [end, error] = std::from_chars(plain.data(), plain.data() + plain.size(), value);
  if (error != std::errc() || end != plain.data() + plain.size() || !std::isfinite(value)) {
    const bool comma =
        decimal == '.' && std::count(text.begin(), text.end(), ',') == 1 && text.find('.') == text.npos;
    std::string with_point(text);
    if (comma) std::replace(with_point.begin(), with_point.end(), ',', '.');
    const auto [again, bad] =
        std::from_chars(with_point.data(), with_point.data() + with_point.size(), value);
    if (comma && bad == std::errc() && again == with_point.data() + with_point.size())
      return {Reads::decimal_comma};
    // "1,200,300" or "1,200.5": grouped, but nobody said so.
    if (decimal == '.' && text.find(',') != text.npos &&
        text.find_first_not_of("0123456789,.") == std::string_view::npos) {
      return {Reads::ambiguous};
    }
    return {Reads::no_number};
  }
  return {Reads::number, sign * value};
}

bool error_text(std::string_view text) {
  static constexpr std::array known = {"#N/A",   "#DIV/0!", "#REF!",  "#VALUE!", "#NAME?", "#NUM!",
                                       "#NULL!", "#SPILL!", "#CALC!", "#FIELD!", "#BUSY!", "#GETTING_DATA"};
  text = trimmed(text);
  if (std::find(known.begin(), known.end(), text) != known.end()) return true;
  return text.substr(0, 4) == "Err:" && digits(text.substr(4));
}

}  // namespace countsel
