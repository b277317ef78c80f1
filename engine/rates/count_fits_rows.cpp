// engine/rates/count_fits_rows.cpp -- checks and totals of rows of counts.
#include "engine/rates/count_fits_rows.hpp"

#include <algorithm>
#include <cmath>
#include <cstdint>
#include <numeric>
#include <string>

#include "engine/numbers/sums.hpp"
#include "engine/refusal.hpp"

namespace countsel {
namespace {

Place at(const char* role, std::size_t i) { return {role, static_cast<std::int64_t>(i + 1)}; }

bool whole(double value) { return value >= 0 && std::isfinite(value) && value == std::floor(value); }

void require_length(std::span<const double> column, std::size_t rows, const char* role) {
  if (!column.empty() && column.size() != rows)
    throw Refusal(Code::length_mismatch,
                  "count has " + std::to_string(rows) + " rows, " + role + " has " +
                      std::to_string(column.size()) + ".",
                  {{"count", 0}, {role, 0}});
}

}  // namespace

void require_count_rows(const CountRows& rows) {
  require_length(rows.exposures, rows.size(), "exposure");
  require_length(rows.times, rows.size(), "times");
  bool any = false;
  for (std::size_t i = 0; i < rows.size(); ++i) {
    const std::string row = "Row " + std::to_string(i + 1) + " of ";
    if (!whole(rows.counts[i]))
      throw Refusal(Code::bad_count, row + "count is not a whole number, 0 or more.", {at("count", i)});
    if (!(rows.exposure(i) > 0 && std::isfinite(rows.exposure(i))))
      throw Refusal(Code::bad_exposure, row + "exposure is not above 0.", {at("exposure", i)});
    if (!whole(rows.seen(i)))
      throw Refusal(Code::bad_count, row + "times is not a whole number, 0 or more.", {at("times", i)});
    any = any || rows.seen(i) > 0;
  }
  if (!any) throw Refusal(Code::too_few, "There are no rows to count in.", {{"count", 0}});
}

CountTotals count_totals(const CountRows& rows) {
  Sum seen, events, exposure, zeros;
  double most = 0;
  for (std::size_t i = 0; i < rows.size(); ++i) {
    const double times = rows.seen(i);
    if (times == 0) continue;
    seen.add(times);
    events.add(times * rows.counts[i]);
    exposure.add(times * rows.exposure(i));
    if (rows.counts[i] == 0) zeros.add(times);
    most = std::max(most, rows.counts[i]);
  }
  return {seen.value(), events.value(), exposure.value(), zeros.value(), most};
}

CountPatterns condense_count_rows(const CountRows& rows) {
  std::vector<std::size_t> order(rows.size());
  std::iota(order.begin(), order.end(), std::size_t{0});
  std::sort(order.begin(), order.end(), [&](std::size_t a, std::size_t b) {
    const double first = rows.exposure(a), second = rows.exposure(b);
    return first != second ? first < second : rows.counts[a] < rows.counts[b];
  });
  CountPatterns patterns;
  for (const std::size_t i : order) {
    if (rows.seen(i) == 0) continue;
    if (!patterns.counts.empty() && patterns.counts.back() == rows.counts[i] &&
        patterns.exposures.back() == rows.exposure(i)) {
      patterns.times.back() += rows.seen(i);
      continue;
    }
    patterns.counts.push_back(rows.counts[i]);
    patterns.exposures.push_back(rows.exposure(i));
    patterns.times.push_back(rows.seen(i));
  }
  return patterns;
}

}  // namespace countsel
