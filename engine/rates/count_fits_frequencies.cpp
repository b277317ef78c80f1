// engine/rates/count_fits_frequencies.cpp -- expected frequencies over unequal exposures, and the test of
// fit.
#include "engine/rates/count_fits_frequencies.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

#include "engine/numbers/distributions.hpp"
#include "engine/numbers/negative_binomial.hpp"
#include "engine/numbers/sums.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double nan = std::numeric_limits<double>::quiet_NaN();
constexpr double most_values = 400;
constexpr std::size_t most_exposures = 2000;
constexpr double always_from_zero = 30;

struct Exposures {
  std::vector<double> exposure, times;
};

// The different exposures; beyond most_exposures, neighbours become one with their mean.
Exposures different_exposures(const CountRows& sorted) {
  Exposures all;
  for (std::size_t i = 0; i < sorted.size(); ++i) {
    if (!all.exposure.empty() && all.exposure.back() == sorted.exposure(i)) {
      all.times.back() += sorted.seen(i);
    } else {
      all.exposure.push_back(sorted.exposure(i));
      all.times.push_back(sorted.seen(i));
    }
  }
  const std::size_t n = all.exposure.size();
  if (n <= most_exposures) return all;
  Exposures fewer;
  for (std::size_t k = 0; k < most_exposures; ++k) {
    Sum times, exposure;
    for (std::size_t i = k * n / most_exposures; i < (k + 1) * n / most_exposures; ++i) {
      times.add(all.times[i]);
      exposure.add(all.times[i] * all.exposure[i]);
    }
    fewer.exposure.push_back(exposure.value() / times.value());
    fewer.times.push_back(times.value());
  }
  return fewer;
}

// Chances of the classes that begin at these values, the first open below and one more, open above, at the
// end. Tails are taken outwards from the mean, each class as the difference of two tails of its own side;
// beyond a tail of `nothing` no more are asked for.
std::vector<double> class_chances(const std::vector<double>& starts, double shape, double mean) {
  constexpr double nothing = 1e-25;
  const std::size_t n = starts.size();
  const auto middle =
      static_cast<std::size_t>(std::upper_bound(starts.begin(), starts.end(), mean) - starts.begin());
  std::vector<double> chances(n + 1, 0.0);  // chances[k]: from starts[k - 1] to below starts[k]
  double inner_above = 0, inner_below = 0;
  double tail = 0;
  for (std::size_t k = middle; k < n; ++k) {
    const double above = negative_binomial_at_least(starts[k], shape, mean);
    if (k == middle) {
      inner_above = above;
    } else {
      chances[k] = tail - above;
    }
    tail = above;
    if (above < nothing) break;
  }
  chances[n] += tail < nothing ? 0 : tail;
  tail = 0;
  for (std::size_t k = middle; k-- > 0;) {
    const double below = negative_binomial_at_most(starts[k] - 1, shape, mean);
    if (k + 1 == middle) {
      inner_below = below;
    } else {
      chances[k + 1] = tail - below;
    }
    tail = below;
    if (below < nothing) break;
  }
  chances[0] += tail < nothing ? 0 : tail;
  chances[middle] += 1 - inner_above - inner_below;
  return chances;
}

// Expected rows in [value, value + width) for each value, then below the first and above the last.
std::vector<double> expected_rows(const Exposures& exposures, const std::vector<double>& values, double width,
                                  double rate, double spread, const Work& work) {
  const double shape = 1 / spread;
  std::vector<double> starts = values;
  starts.push_back(values.back() + width);
  std::vector<Sum> sums(values.size() + 2);
  for (std::size_t i = 0; i < exposures.exposure.size(); ++i) {
    work.progress.check();
    const double mean = rate * exposures.exposure[i], times = exposures.times[i];
    if (width == 1) {
      for (std::size_t k = 0; k < values.size(); ++k)
        sums[k].add(times * negative_binomial_exactly(values[k], shape, mean));
      sums[values.size()].add(times * negative_binomial_at_most(starts.front() - 1, shape, mean));
      sums[values.size() + 1].add(times * negative_binomial_at_least(starts.back(), shape, mean));
      continue;
    }
    const std::vector<double> chances = class_chances(starts, shape, mean);
    for (std::size_t k = 0; k < values.size(); ++k) sums[k].add(times * chances[k + 1]);
    sums[values.size()].add(times * chances.front());
    sums[values.size() + 1].add(times * chances.back());
  }
  std::vector<double> expected;
  for (const Sum& sum : sums) expected.push_back(sum.value());
  return expected;
}

}  // namespace

FrequencyTable frequency_table(const CountRows& rows, const CountFit& poisson,
                               const CountFit& negative_binomial, const Work& work) {
  require_count_rows(rows);
  const CountPatterns patterns = condense_count_rows(rows);
  double least = infinity, most = 0;
  for (const double count : patterns.counts) {
    least = std::min(least, count);
    most = std::max(most, count);
  }
  const double first = least <= always_from_zero ? 0 : least;
  const double range = most - first + 1;
  FrequencyTable table;
  table.width = range <= most_values ? 1 : std::ceil(range / 100);
  const auto classes = static_cast<std::size_t>(std::floor((most - first) / table.width)) + 1;
  for (std::size_t k = 0; k < classes; ++k)
    table.value.push_back(first + table.width * static_cast<double>(k));
  table.observed.assign(classes, 0);
  for (std::size_t i = 0; i < patterns.counts.size(); ++i)
    table.observed[static_cast<std::size_t>((patterns.counts[i] - first) / table.width)] += patterns.times[i];

  const Exposures exposures = different_exposures(patterns.rows());
  const auto fill = [&](const CountFit& fit, std::vector<double>& inside, double& below, double& above) {
    std::vector<double> expected =
        expected_rows(exposures, table.value, table.width, fit.rate, fit.spread, work);
    above = expected.back();
    expected.pop_back();
    below = expected.back();
    expected.pop_back();
    inside = std::move(expected);
  };
  CountFit plain = poisson;
  plain.spread = 0;
  fill(plain, table.poisson, table.poisson_below, table.poisson_above);
  fill(negative_binomial, table.negative_binomial, table.negative_binomial_below,
       table.negative_binomial_above);
  return table;
}

GoodnessOfFit poisson_fit(const FrequencyTable& table) {
  constexpr double inner = 5, end = 1;
  std::vector<FitClass> pooled;
  FitClass open{0, infinity, 0, 0};
  const auto close = [&](double next) {
    open.to = next - 1;
    pooled.push_back(open);
    open = {next, infinity, 0, 0};
  };
  open.expected = table.poisson_below;
  if (table.poisson_below >= end) close(table.value.front());
  for (std::size_t k = 0; k < table.value.size(); ++k) {
    open.observed += table.observed[k];
    open.expected += table.poisson[k];
    if (open.expected >= (pooled.empty() ? end : inner)) close(table.value[k] + table.width);
  }
  open.expected += table.poisson_above;
  if (open.expected >= end || pooled.empty()) {
    pooled.push_back(open);
  } else {
    pooled.back().to = infinity;
    pooled.back().observed += open.observed;
    pooled.back().expected += open.expected;
  }
  GoodnessOfFit fit{nan, nan, nan, pooled};
  if (pooled.size() < 3) return fit;
  Sum statistic;
  for (const FitClass& one : pooled) {
    const double off = one.observed - one.expected;
    statistic.add(off * (off / one.expected));
  }
  fit.df = static_cast<double>(pooled.size()) - 2;
  fit.statistic = statistic.value();
  fit.p_value = chi_square_above(fit.statistic, fit.df);
  return fit;
}

}  // namespace countsel
