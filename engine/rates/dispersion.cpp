// engine/rates/dispersion.cpp -- Pearson's statistic of rows round their group's rate.
#include "engine/rates/dispersion.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <vector>

#include "engine/numbers/distributions.hpp"
#include "engine/numbers/exact.hpp"
#include "engine/numbers/sums.hpp"
#include "engine/refusal.hpp"

namespace countsel {

Dispersion pooled_dispersion(std::span<const double> counts, std::span<const double> exposures,
                             std::span<const std::int32_t> group_codes, std::size_t groups) {
  if (exposures.size() != counts.size() || group_codes.size() != counts.size())
    throw Refusal(Code::length_mismatch, "Counts, exposures and groups differ in length.");
  struct Group {
    Sum count, exposure;
    double rows = 0;
  };
  std::vector<Group> all(groups);
  const auto group_of = [&](std::size_t row) {
    const std::int32_t code = group_codes[row];
    return code >= 0 && static_cast<std::size_t>(code) < groups ? &all[static_cast<std::size_t>(code)]
                                                                : nullptr;
  };
  for (std::size_t row = 0; row < counts.size(); ++row)
    if (Group* group = group_of(row)) {
      group->count.add(counts[row]);
      group->exposure.add(exposures[row]);
      ++group->rows;
    }
  Sum pearson;
  for (std::size_t row = 0; row < counts.size(); ++row) {
    const Group* group = group_of(row);
    if (group == nullptr || !(group->count.value() > 0)) continue;
    const double count = group->count.value(), exposure = group->exposure.value();
    // (count - expected)^2 / expected with expected = group count * share, over a common divisor.
    const double gap = product_difference(counts[row], exposure, count, exposures[row]);
    pearson.add(gap / exposure * (gap / exposures[row]) / count);
  }
  double df = 0;
  for (const Group& group : all)
    if (group.count.value() > 0) df += group.rows - 1;
  const double statistic = pearson.value();
  return {statistic, df, df > 0 ? statistic / df : std::numeric_limits<double>::quiet_NaN()};
}

double dispersion_p(const Dispersion& dispersion) {
  return dispersion.df > 0 ? chi_square_above(dispersion.pearson, dispersion.df)
                           : std::numeric_limits<double>::quiet_NaN();
}

double at_least_one(double phi) { return std::isnan(phi) ? phi : std::max(phi, 1.0); }

}  // namespace countsel
