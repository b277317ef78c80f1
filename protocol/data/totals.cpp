// protocol/data/totals.cpp -- recognising a totals row.
#include "protocol/data/totals.hpp"

#include <algorithm>
#include <array>
#include <cctype>
#include <cmath>

namespace countsel {
namespace {

bool says_total(std::string text) {
  std::transform(text.begin(), text.end(), text.begin(),
                 [](unsigned char c) { return static_cast<char>(std::tolower(c)); });
  const auto letter = [](char c) { return std::isalpha(static_cast<unsigned char>(c)) != 0; };
  while (!text.empty() && !letter(text.back())) text.pop_back();
  while (!text.empty() && !letter(text.front())) text.erase(text.begin());
  static constexpr std::array words = {
      "total",    "totals",     "all",    "sum",       "sums",      "overall",      "subtotal",
      "combined", "everything", "totale", "totaal",    "summe",     "all together", "together",
      "gesamt",   "insgesamt",  "somme",  "ensemble",  "suma",      "razem",        "totalt",
      "in all",   "altogether", "soma",   "all units", "all areas", "all sites",    "all rows"};
  if (std::find(words.begin(), words.end(), text) != words.end()) return true;
  return text.rfind("total ", 0) == 0 || (text.size() > 6 && text.compare(text.size() - 6, 6, " total") == 0);
}

}  // namespace

void settle_totals(const Question& question, const std::vector<ReadColumn>& roles, const Places& places,
                   Totals rule, RowsLeftOut& left_out) {
  if (rule == Totals::keep) return;
  const ReadColumn* count = nullptr;
  const ReadColumn* exposure = nullptr;
  std::vector<const Column*> labels;
  for (std::size_t i = 0; i < roles.size(); ++i) {
    if (!roles[i].column) continue;
    const Holds holds = question.roles[i].holds;
    if (holds == Holds::count && !count) count = &roles[i];
    if (holds == Holds::exposure && !exposure) exposure = &roles[i];
    if (holds == Holds::label || holds == Holds::levels || holds == Holds::order)
      labels.push_back(roles[i].column);
  }
  if (!count) return;
  const auto counts = count->values();
  double sum = 0, exposure_sum = 0;
  std::size_t rows = 0, last = 0;
  for (std::size_t i = 0; i < counts.size(); ++i) {
    if (!left_out.in(i)) continue;
    sum += counts[i];
    if (exposure) exposure_sum += exposure->values()[i];
    last = i;
    ++rows;
  }
  if (rows < 2) return;
  // The sheet's total also counts the rows that have been left out here.
  const double passed_over = left_out.sum_of_left_out(counts);
  const auto is_sum = [&](std::size_t row) {
    const double others = sum - counts[row];
    return counts[row] == others || counts[row] == others + passed_over;
  };
  const auto exposure_is_sum = [&](std::size_t row) {
    const double own = exposure->values()[row];
    return std::abs(own - (exposure_sum - own)) <= 1e-9 * exposure_sum;
  };
  std::size_t found = counts.size();
  for (const auto* column : labels) {
    if (column->texts.empty()) continue;
    std::vector<char> total(column->texts.size());
    for (std::size_t i = 0; i < total.size(); ++i) total[i] = says_total(column->texts[i]) ? 1 : 0;
    if (std::count(total.begin(), total.end(), 1) == 0) continue;
    for (std::size_t i = 0; i < counts.size() && found == counts.size(); ++i) {
      const auto tag = column->tag_at(i);
      if (tag >= 0 && total[static_cast<std::size_t>(tag)] && left_out.in(i) && is_sum(i)) found = i;
    }
  }
  if (found == counts.size() && sum > 0 && is_sum(last)) {
    // A label that only the last row lacks gives it away. Where no row has one, the exposures must add up
    // as well: among rare events a count is soon the sum of the others.
    const auto bare = [&](std::size_t row) {
      return std::all_of(labels.begin(), labels.end(),
                         [&](const Column* column) { return column->tag_at(row) == tag::blank; });
    };
    bool others_labelled = false;
    for (std::size_t i = 0; i < last && !others_labelled; ++i) others_labelled = left_out.in(i) && !bare(i);
    if (bare(last) && (others_labelled || (exposure && rows > 2 && exposure_is_sum(last)))) found = last;
  }
  if (found == counts.size()) return;
  const Place place{count->column->name, static_cast<std::int64_t>(found) + 1};
  if (rule == Totals::skip) {
    left_out.leave_out(found, "totals_row", count->column->name);
    return;
  }
  throw Refusal(
      Code::totals_row, places.say(place) + " is the sum of the other rows: a totals row among the data.",
      {place},
      R"(Leave it out of the selection, or say "totals":"skip" (or "keep" if it is a row like the others).)");
}

}  // namespace countsel
