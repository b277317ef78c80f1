// engine/table/audit_jumps.cpp -- exposures out of line with their neighbours, and exposures that change
// level.
#include <algorithm>
#include <cmath>
#include <limits>
#include <map>

#include "engine/table/audit.hpp"

namespace countsel {
namespace {

constexpr std::size_t reach = 3;  // neighbours on each side
// Periods of one record rarely differ by this factor; other units often do, so that it must be much larger.
constexpr double period_factor = 2.5, unit_factor = 8;
constexpr double deviations = 5;  // robust deviations beyond the usual

double median(std::vector<double> values) {
  std::sort(values.begin(), values.end());
  const std::size_t half = values.size() / 2;
  return values.size() % 2 == 1 ? values[half] : (values[half - 1] + values[half]) / 2;
}

struct Series {
  std::vector<std::size_t> rows;
  std::vector<double> logs;
};

// Each value's distance, in logs, from the median of its neighbours; and how large that usually is.
void find_jumps(const Series& series, double least_factor, bool periods, std::vector<Finding>& findings) {
  const std::size_t n = series.logs.size();
  if (n < 5) return;
  std::vector<double> off(n), usual(n), sizes;
  for (std::size_t i = 0; i < n; ++i) {
    // At the ends the window leans inwards, so that there are always as many neighbours.
    const std::size_t width = std::min(2 * reach, n - 1);
    std::size_t begin = i > width / 2 ? i - width / 2 : 0;
    begin = std::min(begin, n - 1 - width);
    std::vector<double> neighbours;
    for (std::size_t k = begin; k <= begin + width; ++k)
      if (k != i) neighbours.push_back(series.logs[k]);
    usual[i] = median(neighbours);
    off[i] = series.logs[i] - usual[i];
    sizes.push_back(std::abs(off[i]));
  }
  const double scale = 1.4826 * median(sizes);
  for (std::size_t i = 0; i < n; ++i) {
    if (std::abs(off[i]) < std::log(least_factor) || std::abs(off[i]) < deviations * scale) continue;
    findings.push_back({FindingKind::exposure_jump, AuditColumn::exposure,
                        static_cast<std::int64_t>(series.rows[i] + 1), 0, std::exp(series.logs[i]),
                        std::exp(usual[i]), std::exp(off[i]), periods});
  }
}

struct Step {
  std::size_t at;  ///< first of the new level
  double before, after;
};

// Steps between two calm stretches of at least three rows, large against both.
std::vector<Step> steps_in(const Series& series) {
  const std::size_t n = series.logs.size();
  std::vector<Step> steps;
  for (std::size_t i = reach; i + reach <= n; ++i) {
    const auto here = series.logs.begin() + static_cast<std::ptrdiff_t>(i);
    const std::vector<double> before(here - reach, here), after(here, here + reach);
    const auto range = [](const std::vector<double>& values) {
      const auto [least, greatest] = std::minmax_element(values.begin(), values.end());
      return *greatest - *least;
    };
    const double size = std::abs(median(after) - median(before));
    if (size >= std::log(period_factor) && std::max(range(before), range(after)) < size / 3)
      steps.push_back({i, median(before), median(after)});
  }
  return steps;
}

}  // namespace

std::vector<Finding> exposure_jumps(const AuditTable& table) {
  const bool periods = are_periods(table.labels);
  std::map<std::int32_t, Series> all;
  for (std::size_t i = 0; i < table.exposures.size(); ++i) {
    if (!(table.exposures[i] > 0 && std::isfinite(table.exposures[i]))) continue;
    // A totals row is out of line, but that is another finding.
    if (!table.labels.empty() && says_total(table.labels[i])) continue;
    Series& series = all[table.series.empty() ? 0 : table.series[i]];
    series.rows.push_back(i);
    series.logs.push_back(std::log(table.exposures[i]));
  }
  std::vector<Finding> findings;
  for (const auto& each : all) {
    const Series& series = each.second;
    const std::vector<Step> steps = steps_in(series);
    std::vector<Finding> jumps;
    find_jumps(series, periods ? period_factor : unit_factor, periods, jumps);
    // Beside a step neighbours are of two levels, and no one row is out of line.
    for (const Finding& jump : jumps) {
      const auto near = [&](const Step& step) {
        const std::int64_t first = static_cast<std::int64_t>(series.rows[step.at - reach]) + 1;
        const std::int64_t last = static_cast<std::int64_t>(series.rows[step.at + reach - 1]) + 1;
        return jump.row >= first && jump.row <= last;
      };
      if (std::none_of(steps.begin(), steps.end(), near)) findings.push_back(jump);
    }
    // Units in their own order may well come in groups; only a record over time has a level to keep.
    if (!periods) continue;
    for (const Step& step : steps)
      findings.push_back({FindingKind::exposure_shift, AuditColumn::exposure,
                          static_cast<std::int64_t>(series.rows[step.at] + 1), 0, std::exp(step.after),
                          std::exp(step.before), std::exp(step.after - step.before), true});
  }
  return findings;
}

}  // namespace countsel
