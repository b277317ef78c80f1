// engine/table/audit_labels.cpp -- labels: words for totals, periods, repeats.
#include <algorithm>
#include <array>
#include <cctype>
#include <limits>
#include <map>
#include <string>
#include <tuple>

#include "engine/table/audit.hpp"

namespace countsel {
namespace {

constexpr double nan = std::numeric_limits<double>::quiet_NaN();

// Lower case (of plain letters), spaces and underscores at the ends off and in runs as one.
std::string plain_text(std::string_view label) {
  std::string text;
  for (const char c : label) {
    const auto letter = static_cast<unsigned char>(c);
    if (std::isspace(letter) || c == '_') {
      if (!text.empty() && text.back() != ' ') text += ' ';
    } else {
      text += static_cast<char>(letter < 128 ? std::tolower(letter) : letter);
    }
  }
  if (!text.empty() && text.back() == ' ') text.pop_back();
  return text;
}

bool is_month(const std::string& word) {
  static constexpr std::array names = {"january", "february", "march",     "april",   "may",      "june",
                                       "july",    "august",   "september", "october", "november", "december"};
  return std::any_of(names.begin(), names.end(), [&](std::string_view name) {
    return word == name || (word.size() >= 3 && name.substr(0, word.size()) == word);
  });
}

// Runs of letters and runs of digits.
std::vector<std::string> words_and_numbers(const std::string& text) {
  std::vector<std::string> words;
  int before = 0;
  for (const char c : text) {
    const auto letter = static_cast<unsigned char>(c);
    const int kind = std::isdigit(letter) ? 1 : (std::isalpha(letter) || letter >= 128) ? 2 : 0;
    if (kind != 0 && kind != before) words.emplace_back();
    if (kind != 0) words.back() += c;
    before = kind;
  }
  return words;
}

bool is_period(const std::string& label) {
  bool known = false;
  for (const std::string& word : words_and_numbers(plain_text(label))) {
    if (std::isdigit(static_cast<unsigned char>(word[0]))) {
      if (word.size() == 4 && (word[0] == '1' || word[0] == '2')) known = true;
      if (word.size() > 4) return false;
    } else if (is_month(word) || word == "q" || word == "w" || word == "quarter" || word == "week" ||
               word == "month" || word == "year" || word == "fy") {
      known = true;
    } else {
      return false;
    }
  }
  return known;
}

}  // namespace

bool says_total(std::string_view label) {
  static constexpr std::array words = {"total",    "totals",   "all",      "sum",    "overall",
                                       "combined", "together", "subtotal", "gesamt", "insgesamt",
                                       "summe",    "totale",   "totaal",   "suma",   "ensemble"};
  const std::vector<std::string> parts = words_and_numbers(plain_text(label));
  if (parts.empty() || parts.size() > 4) return false;
  const auto is_word = [&](const std::string& part) {
    return std::find(words.begin(), words.end(), part) != words.end();
  };
  // At either end: "all wards", "grand total"; not in the middle of a name.
  return is_word(parts.front()) || is_word(parts.back());
}

bool are_periods(std::span<const std::string> labels) {
  bool some = false;
  for (const std::string& label : labels) {
    if (plain_text(label).empty() || says_total(label)) continue;
    if (!is_period(label)) return false;
    some = true;
  }
  return some;
}

std::vector<Finding> repeated_labels(const AuditTable& table) {
  const bool periods = are_periods(table.labels);
  std::map<std::pair<std::int32_t, std::string>, std::pair<std::int64_t, std::string>> first;
  std::map<std::tuple<std::int32_t, std::string>, std::int64_t> exact;
  std::vector<Finding> findings;
  for (std::size_t i = 0; i < table.labels.size(); ++i) {
    const std::int32_t series = table.series.empty() ? 0 : table.series[i];
    const std::string plain = plain_text(table.labels[i]);
    if (plain.empty()) continue;
    const auto row = static_cast<std::int64_t>(i + 1);
    const auto [same, is_new] = exact.try_emplace({series, table.labels[i]}, row);
    const auto [near, is_first] = first.try_emplace({series, plain}, row, table.labels[i]);
    if (!is_new) {
      findings.push_back({periods ? FindingKind::repeated_period : FindingKind::repeated_label,
                          AuditColumn::label, row, same->second, nan, nan, nan, periods});
    } else if (!is_first) {
      findings.push_back(
          {FindingKind::nearly_repeated, AuditColumn::label, row, near->second.first, nan, nan, nan, true});
    }
  }
  return findings;
}

}  // namespace countsel
