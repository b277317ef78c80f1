// protocol/masking/counts_shown.cpp -- recognising rows, groups and groups within strata.
#include "protocol/masking/counts_shown.hpp"

#include <algorithm>
#include <cmath>
#include <map>
#include <optional>
#include <unordered_map>

namespace countsel {
namespace {

constexpr std::size_t most_levels_within = 50;

/// Where each level of a role stands in a table: the table's row by code; nothing if no column lists them.
std::optional<std::vector<std::size_t>> rows_of_levels(const OutTable& table, const Role& role) {
  std::unordered_map<std::string, std::size_t> codes;
  for (std::size_t i = 0; i < role.levels.size(); ++i) codes.emplace(role.levels[i], i);
  for (const auto& [name, cells] : table.columns) {
    std::vector<std::string> texts;
    if (const auto* given = std::get_if<std::vector<std::string>>(&cells)) {
      texts = *given;
    } else if (const auto* numbers = std::get_if<std::vector<double>>(&cells)) {
      for (const double number : *numbers) texts.push_back(number_text(number));
    }
    if (texts.size() != role.levels.size()) continue;
    std::vector<std::size_t> rows(texts.size(), texts.size());
    std::size_t met = 0;
    for (std::size_t row = 0; row < texts.size(); ++row) {
      const auto at = codes.find(texts[row]);
      if (at == codes.end() || rows[at->second] != texts.size()) break;
      rows[at->second] = row;
      ++met;
    }
    if (met == texts.size()) return rows;
  }
  return std::nullopt;
}

bool agree(const std::vector<double>& shown, const std::vector<double>& sums) {
  for (std::size_t i = 0; i < shown.size(); ++i)
    if (shown[i] != sums[i] && !(std::isnan(shown[i]) && sums[i] == 0)) return false;
  return true;
}

class Recognising {
 public:
  Recognising(const Question& question, Asked& asked) : counts_(count_role(question, asked)) {
    for (const auto& spec : question.roles) {
      const Role& role = spec.at(asked);
      if (role.given && (spec.holds == Holds::levels || spec.holds == Holds::order) && !role.codes.empty())
        sets_.push_back(&role);
    }
  }

  std::optional<std::vector<std::vector<std::uint32_t>>> rows_behind(const OutTable& table,
                                                                     const std::vector<double>& shown) const {
    if (!counts_) return std::nullopt;
    const auto numbers = counts_->numbers;
    if (shown.size() == numbers.size() && std::equal(shown.begin(), shown.end(), numbers.begin())) {
      std::vector<std::vector<std::uint32_t>> rows;
      for (std::uint32_t i = 0; i < numbers.size(); ++i) rows.push_back({i});
      return rows;
    }
    for (const Role* set : sets_) {
      const auto at = rows_of_levels(table, *set);
      if (!at) continue;
      if (auto rows = sums_by(*set, *at, nullptr, 0, shown)) return rows;
      for (const Role* other : sets_) {
        if (other == set || other->levels.size() > most_levels_within) continue;
        for (std::size_t level = 0; level < other->levels.size(); ++level)
          if (auto rows = sums_by(*set, *at, other, level, shown)) return rows;
      }
    }
    return std::nullopt;
  }

 private:
  std::optional<std::vector<std::vector<std::uint32_t>>> sums_by(const Role& set,
                                                                 const std::vector<std::size_t>& at,
                                                                 const Role* within, std::size_t level,
                                                                 const std::vector<double>& shown) const {
    std::vector<std::vector<std::uint32_t>> rows(shown.size());
    std::vector<double> sums(shown.size(), 0);
    for (std::uint32_t i = 0; i < counts_->numbers.size(); ++i) {
      if (within && within->codes[i] != static_cast<std::int32_t>(level)) continue;
      const std::size_t row = at[static_cast<std::size_t>(set.codes[i])];
      rows[row].push_back(i);
      sums[row] += counts_->numbers[i];
    }
    if (!agree(shown, sums)) return std::nullopt;
    return rows;
  }

  const Role* counts_;
  std::vector<const Role*> sets_;
};

/// The counts behind rates alone: those of each group by the other sets' levels, so that groups keep their
/// sums.
std::vector<CountList> counts_behind(const Question& question, Asked& asked) {
  const Role* counts = count_role(question, asked);
  std::map<std::string, std::map<std::string, std::vector<std::uint32_t>>> groups;
  for (std::uint32_t i = 0; counts && i < counts->numbers.size(); ++i) {
    std::string group, cell;
    for (const auto& spec : question.roles) {
      const Role& role = spec.at(asked);
      if (!role.given || spec.holds != Holds::levels) continue;
      (spec.name == "group" ? group : cell) += std::to_string(role.codes[i]) + ' ';
    }
    groups[group][cell].push_back(i);
  }
  std::vector<CountList> lists;
  for (const auto& [group, cells] : groups) {
    lists.push_back({CountList::nowhere, CountList::nowhere, {}, {}});
    for (const auto& [cell, rows] : cells) {
      double sum = 0;
      for (const auto row : rows) sum += counts->numbers[row];
      lists.back().counts.push_back(sum);
      lists.back().rows.push_back(rows);
    }
  }
  return lists;
}

}  // namespace

Role* count_role(const Question& question, Asked& asked) {
  for (const auto& spec : question.roles) {
    if (spec.name != "count" || spec.holds != Holds::count) continue;
    Role& role = spec.at(asked);
    return role.given ? &role : nullptr;
  }
  return nullptr;
}

Style style_of(const Question& question, const std::string& table, const std::string& column) {
  for (const auto& spec : question.tables) {
    if (spec.name != table) continue;
    for (const auto& one : spec.columns)
      if (one.name == column) return one.style;
  }
  return Style::number;
}

CountsShown counts_shown(const Question& question, Asked& asked, const Answer& answer) {
  CountsShown shown;
  if (!has_count_columns(question.tables)) {
    shown.lists = counts_behind(question, asked);
    return shown;
  }
  const Recognising recognising(question, asked);
  for (std::size_t t = 0; t < answer.tables.size(); ++t) {
    const OutTable& table = answer.tables[t];
    for (std::size_t c = 0; c < table.columns.size(); ++c) {
      const auto& [name, cells] = table.columns[c];
      const auto* numbers = std::get_if<std::vector<double>>(&cells);
      if (!numbers || style_of(question, table.name, name) != Style::count) continue;
      if (auto rows = recognising.rows_behind(table, *numbers)) {
        shown.lists.push_back({t, c, *numbers, std::move(*rows)});
      } else {
        shown.all_known = false;
      }
    }
  }
  return shown;
}

}  // namespace countsel
