// engine/table/audit.cpp -- checks on counts and exposures, and all checks together.
#include "engine/table/audit.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <limits>

#include "engine/numbers/poisson_deviance.hpp"
#include "engine/numbers/sums.hpp"
#include "engine/refusal.hpp"

namespace countsel {
namespace {

constexpr double nan = std::numeric_limits<double>::quiet_NaN();

bool whole(double value) { return value == std::floor(value); }

double median(std::vector<double> values) {
  const auto middle = values.begin() + static_cast<std::ptrdiff_t>(values.size() / 2);
  std::nth_element(values.begin(), middle, values.end());
  if (values.size() % 2 == 1) return *middle;
  return (*middle + *std::max_element(values.begin(), middle)) / 2;
}

// Decimals a number was written with, at most 9.
int decimals(double value) {
  double scaled = std::abs(value);
  for (int d = 0; d < 9; ++d, scaled *= 10)
    if (std::abs(scaled - std::round(scaled)) <= 1e-9 * std::max(1.0, scaled)) return d;
  return 9;
}

std::vector<double> numbers_in(std::span<const double> column) {
  std::vector<double> numbers;
  for (const double value : column)
    if (std::isfinite(value)) numbers.push_back(value);
  return numbers;
}

}  // namespace

std::vector<Finding> exposure_logarithms(const AuditTable& table) {
  const std::vector<double> all = numbers_in(table.exposures);
  if (all.size() < 3) return {};
  const auto [least, greatest] = std::minmax_element(all.begin(), all.end());
  const auto with_decimals = std::count_if(all.begin(), all.end(), [](double x) { return decimals(x) >= 1; });
  if (*least < -7 || *greatest > 25 || with_decimals * 5 < static_cast<std::ptrdiff_t>(all.size()) * 4)
    return {};
  const Finding doubt{
      FindingKind::exposure_logarithm, AuditColumn::exposure, 0, 0, *least, *greatest, nan, false};
  Finding certain = doubt;
  certain.sure = true;
  // Below 0 no exposure can be; a logarithm can.
  if (*least < 0) return {certain};

  // Undone, most come out whole, though their rounding would let few do so by chance.
  std::size_t told = 0, whole_again = 0;
  for (const double x : all) {
    const double exposure = std::exp(x),
                 loose = 0.51 * std::pow(10.0, -decimals(x)) * exposure + 1e-9 * exposure;
    if (loose > 0.1 || exposure < 2) continue;
    ++told;
    whole_again += std::abs(exposure - std::round(exposure)) <= loose;
  }
  if (told >= 3 && whole_again * 10 >= told * 9) return {certain};

  // The counts follow exp(x) far better than x.
  if (table.counts.size() == table.exposures.size()) {
    Sum events, plain, undone;
    for (std::size_t i = 0; i < table.counts.size(); ++i) {
      if (!(std::isfinite(table.counts[i]) && table.counts[i] >= 0 && std::isfinite(table.exposures[i])))
        continue;
      events.add(table.counts[i]);
      plain.add(table.exposures[i]);
      undone.add(std::exp(table.exposures[i]));
    }
    if (events.value() > 0 && plain.value() > 0) {
      Sum gain;
      for (std::size_t i = 0; i < table.counts.size(); ++i) {
        if (!(std::isfinite(table.counts[i]) && table.counts[i] >= 0 && std::isfinite(table.exposures[i])))
          continue;
        gain.add(half_deviance(table.counts[i], events.value() / plain.value() * table.exposures[i]));
        gain.add(
            -half_deviance(table.counts[i], events.value() / undone.value() * std::exp(table.exposures[i])));
      }
      if (gain.value() > 10) return {certain};
    }
  }
  // Numbers from 2 to 15, all with two decimals or more and within a third of their middle, are what
  // logarithms of ordinary exposures look like, and little else.
  const double middle = median(all);
  const bool fine =
      std::all_of(all.begin(), all.end(), [](double x) { return decimals(x) >= 2 || decimals(x) == 0; });
  if (fine && *least >= 2 && *greatest <= 15 && *greatest - *least < middle * 2 / 3) return {doubt};
  return {};
}

std::vector<Finding> rates_for_counts(const AuditTable& table) {
  std::int64_t first = 0;
  std::size_t broken = 0, numbers = 0;
  for (std::size_t i = 0; i < table.counts.size(); ++i) {
    if (!std::isfinite(table.counts[i])) continue;
    ++numbers;
    if (whole(table.counts[i])) continue;
    ++broken;
    if (first == 0) first = static_cast<std::int64_t>(i + 1);
  }
  if (broken == 0) return {};
  Finding finding{FindingKind::rate_for_count,
                  AuditColumn::count,
                  first,
                  0,
                  static_cast<double>(broken),
                  nan,
                  nan,
                  false};
  if (table.exposures.size() == table.counts.size()) {
    // Times exposure and over the right `per`, rates are whole again, as nearly as their decimals let them.
    for (const double per : {1.0, 10.0, 100.0, 1000.0, 1e4, 1e5, 2e5, 1e6, 1e7, 1e8, 1e9}) {
      std::size_t told = 0, fits = 0;
      double largest = 0;
      for (std::size_t i = 0; i < table.counts.size(); ++i) {
        const double rate = table.counts[i], exposure = table.exposures[i];
        if (!(std::isfinite(rate) && rate >= 0 && exposure > 0 && std::isfinite(exposure)) || rate == 0)
          continue;
        const double count = rate * exposure / per;
        const double loose = 0.51 * std::pow(10.0, -decimals(rate)) * exposure / per + 1e-9 * count;
        if (loose > 0.2) continue;
        ++told;
        fits += count > 0.5 && std::abs(count - std::round(count)) <= loose;
        largest = std::max(largest, count);
      }
      if (told >= 3 && fits == told) {
        finding.factor = per;
        finding.sure = true;
        break;
      }
    }
  }
  if (!finding.sure) finding.sure = broken * 2 > numbers && numbers >= 3;
  return {finding};
}

std::vector<Finding> totals_rows(const AuditTable& table) {
  const std::size_t n = table.counts.size();
  if (n < 2) return {};
  std::vector<Finding> findings;
  const auto found = [&](std::size_t row, double total) {
    findings.push_back({FindingKind::totals_row, AuditColumn::count, static_cast<std::int64_t>(row + 1), 0,
                        total, nan, nan, true});
  };
  Sum all;
  for (const double count : numbers_in(table.counts)) all.add(count);
  if (!table.labels.empty()) {
    // A row that says total: the sum of all others, or of those since the last such row.
    double since = 0;
    std::size_t rows_since = 0;
    for (std::size_t i = 0; i < n; ++i) {
      if (!std::isfinite(table.counts[i])) continue;
      if (!says_total(table.labels[i])) {
        since += table.counts[i];
        ++rows_since;
        continue;
      }
      const double count = table.counts[i];
      if (2 * count == all.value() || (rows_since > 0 && count == since)) {
        found(i, count);
        since = 0;
        rows_since = 0;
        continue;
      }
      // The grand total below subtotals already found counts every row twice.
      double plain = 0;
      for (std::size_t k = 0; k < i; ++k)
        if (std::isfinite(table.counts[k]) && !says_total(table.labels[k])) plain += table.counts[k];
      if (count == plain) found(i, count);
    }
    if (!findings.empty()) return findings;
  }
  // Without a word: only the last row, with no label, and where chance would hardly make it a sum.
  const std::size_t last = n - 1;
  const double count = table.counts[last];
  if (!(std::isfinite(count) && count > 0 && 2 * count == all.value())) return {};
  if (!table.labels.empty() && !table.labels[last].empty()) return {};
  if (table.exposures.size() == n && std::isfinite(table.exposures[last])) {
    Sum exposure;
    for (const double value : numbers_in(table.exposures)) exposure.add(value);
    if (std::abs(2 * table.exposures[last] - exposure.value()) <= 1e-9 * exposure.value() && n >= 3)
      found(last, count);
  } else if (n >= 4 && (count >= 10 || !table.labels.empty())) {
    found(last, count);
  }
  return findings;
}

NumberSummary summarise_numbers(std::span<const double> numbers) {
  NumberSummary summary{numbers.size(), 0, 0, 0, 0, nan, nan};
  for (const double value : numbers) {
    if (std::isnan(value)) {
      ++summary.blanks;
      continue;
    }
    summary.zeros += value == 0;
    summary.negative += value < 0;
    summary.not_whole += !whole(value);
    summary.least = std::isnan(summary.least) ? value : std::min(summary.least, value);
    summary.greatest = std::isnan(summary.greatest) ? value : std::max(summary.greatest, value);
  }
  return summary;
}

std::vector<Finding> audit_table(const AuditTable& table) {
  const std::size_t rows = std::max({table.counts.size(), table.exposures.size(), table.labels.size()});
  for (const std::size_t length :
       {table.counts.size(), table.exposures.size(), table.labels.size(), table.series.size()})
    if (length != 0 && length != rows)
      throw Refusal(Code::length_mismatch, "The table's columns differ in length.");
  std::vector<Finding> findings;
  for (const auto check :
       {exposure_jumps, exposure_logarithms, rates_for_counts, totals_rows, repeated_labels})
    for (const Finding& finding : check(table)) findings.push_back(finding);
  std::stable_sort(findings.begin(), findings.end(), [](const Finding& a, const Finding& b) {
    return a.kind != b.kind ? a.kind < b.kind : a.row < b.row;
  });
  return findings;
}

}  // namespace countsel
