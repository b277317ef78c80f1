// protocol/data/cells.cpp -- numbers written by people and by hosts.
#include "protocol/data/cells.hpp"

#include <algorithm>
#include <array>
#include <charconv>
#include <cmath>

#include "protocol/wire/large_counts.hpp"

namespace countsel {
namespace {

bool digits(std::string_view text) {
  return !text.empty() && std::all_of(text.begin(), text.end(), [](char c) { return c >= '0' && c <= '9'; });
}

/// ASCII for the signs that typographers and sheets prefer: minus, no-break spaces, apostrophe.
std::string plain_signs(std::string_view text) {
  static constexpr std::array<std::pair<std::string_view, char>, 5> signs = {{{"\xE2\x88\x92", '-'},
                                                                              {"\xC2\xA0", ' '},
                                                                              {"\xE2\x80\xAF", ' '},
                                                                              {"\xE2\x80\x89", ' '},
                                                                              {"\xE2\x80\x99", '\''}}};
  std::string plain;
  while (!text.empty()) {
    const auto* sign = std::find_if(signs.begin(), signs.end(),
                                    [&](const auto& s) { return text.substr(0, s.first.size()) == s.first; });
    plain += sign == signs.end() ? text.front() : sign->second;
    text.remove_prefix(sign == signs.end() ? 1 : sign->first.size());
  }
  return plain;
}

std::string_view trimmed(std::string_view text) {
  const auto space = [](char c) { return c == ' ' || c == '\t' || c == '\r' || c == '\n'; };
  while (!text.empty() && space(text.front())) text.remove_prefix(1);
  while (!text.empty() && space(text.back())) text.remove_suffix(1);
  return text;
}

/// Takes the thousands marks out of the whole part; false if they stand at the wrong places.
bool ungroup(std::string_view whole, char mark, std::string& out) {
  for (bool first = true;; first = false) {
    const auto at = whole.find(mark);
    const auto piece = whole.substr(0, at);
    const bool alone = first && at == std::string_view::npos;
    if (!digits(piece) || (first ? !alone && piece.size() > 3 : piece.size() != 3)) return false;
    out += piece;
    if (at == std::string_view::npos) return true;
    whole.remove_prefix(at + 1);
  }
}

bool whole_number(std::string_view text, double& value) {
  const auto [end, error] = std::from_chars(text.data(), text.data() + text.size(), value);
  return error == std::errc() && end == text.data() + text.size() && std::isfinite(value);
}

/// What is wrong with a text of digits and marks that is no number as it stands.
Reads why_no_number(std::string_view text, const Marks& marks) {
  if (text.find_first_not_of("0123456789,.") != std::string_view::npos ||
      text.find_first_not_of(",.") == std::string_view::npos) {
    return Reads::no_number;
  }
  if (marks.settled) return Reads::bad_grouping;
  const auto commas = std::count(text.begin(), text.end(), ',');
  const auto points = std::count(text.begin(), text.end(), '.');
  return commas == 1 && points == 0 ? Reads::decimal_comma : Reads::ambiguous;
}

}  // namespace

Marks marks_of(const CellRules& rules) {
  const bool comma = rules.decimal == "," || (!rules.decimal_given && rules.thousands == ".");
  Marks marks{comma ? ',' : '.', '\0', rules.decimal_given || !rules.thousands.empty()};
  if (!rules.thousands.empty()) {
    marks.thousands = rules.thousands[0];
  } else if (marks.settled) {
    marks.thousands = comma ? '.' : ',';
  }
  return marks;
}

bool could_be_thousands(std::string_view text, char mark) {
  const auto at = text.find(mark);
  return at != std::string_view::npos && at >= 1 && at <= 3 && text[0] != '0' && digits(text.substr(0, at)) &&
         text.size() == at + 4 && digits(text.substr(at + 1));
}

CellNumber read_number(std::string_view raw, const CellRules& rules) {
  const std::string plain = plain_signs(raw);
  std::string_view text = trimmed(plain);
  const double sign = !text.empty() && text[0] == '-' ? -1 : 1;
  if (!text.empty() && (text[0] == '-' || text[0] == '+')) text.remove_prefix(1);
  if (text.empty() || (text[0] != '.' && text[0] != ',' && !digits(text.substr(0, 1)))) {
    return {Reads::no_number};
  }
  const Marks marks = marks_of(rules);
  if (!marks.settled && (could_be_thousands(text, ',') || could_be_thousands(text, '.')))
    return {Reads::ambiguous};

  std::string number;
  const auto exponent = std::min(text.find_first_of("eE"), text.size());
  const auto point = std::min(text.substr(0, exponent).find(marks.decimal), exponent);
  const auto whole = text.substr(0, point);
  if (marks.thousands && whole.find(marks.thousands) != std::string_view::npos) {
    if (!ungroup(whole, marks.thousands, number)) return {Reads::bad_grouping};
  } else {
    number = whole;
  }
  if (point < exponent) {
    number += '.';
    number += text.substr(point + 1, exponent - point - 1);
  }
  number += text.substr(exponent);
  double value = 0;
  if (!whole_number(number, value)) return {why_no_number(text, marks)};
  return {Reads::number, sign * beyond_largest_count(value, number)};
}

bool error_text(std::string_view text) {
  text = trimmed(text);
  if (text.substr(0, 4) == "Err:") return digits(text.substr(4));
  if (text.size() < 3 || text[0] != '#') return false;
  static constexpr std::array whole = {"#N/A", "#NV", "#GETTING_DATA"};
  if (std::find(whole.begin(), whole.end(), text) != whole.end()) return true;
  // Every other one, in every language of a host: #REF!, #BEZUG!, #NAME?, #¡VALOR!.
  const auto inside = text.substr(1, text.size() - 2);
  return (text.back() == '!' || text.back() == '?') && std::all_of(inside.begin(), inside.end(), [](char c) {
           return (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9') || c == '/' || c == '_' ||
                  (static_cast<unsigned char>(c) & 0x80U);
         });
}

}  // namespace countsel
