// engine/rates/funnel.cpp -- units against the benchmark's distribution, and its limits.
#include "engine/rates/funnel.hpp"

#include <algorithm>
#include <cmath>
#include <string>

#include "engine/numbers/negative_binomial.hpp"
#include "engine/numbers/sums.hpp"
#include "engine/rates/count_fits_rows.hpp"
#include "engine/rates/funnel_deviate.hpp"
#include "engine/refusal.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double nan = std::numeric_limits<double>::quiet_NaN();

void require_bands(double inner, double outer) {
  if (!(inner > 0 && inner < outer && outer < 1))
    throw Refusal(Code::bad_value, "The two bands must lie between 0 and 1, the inner one below the outer.",
                  {}, "Give for example [0.95, 0.998].");
}

Standing standing_of(double p_value, double z, double inner, double outer) {
  const bool high = z > 0;
  if (p_value < 1 - outer) return high ? Standing::far_high : Standing::far_low;
  if (p_value < 1 - inner) return high ? Standing::high : Standing::low;
  return Standing::within;
}

}  // namespace

double FunnelModel::shape(double mean) const {
  if (widening == Widening::scaled && dispersion > 1) return mean / (dispersion - 1);
  if (widening == Widening::added && between_sd > 0) return 1 / (between_sd * between_sd);
  return infinity;
}

Funnel funnel(std::span<const double> counts, std::span<const double> exposures, const FunnelSpec& spec) {
  require_count_rows({counts, exposures, {}});
  require_bands(spec.inner, spec.outer);
  const bool overall = std::isnan(spec.benchmark);
  if (!overall && !(spec.benchmark > 0 && std::isfinite(spec.benchmark)))
    throw Refusal(Code::bad_value, "The benchmark must be a rate above 0.");

  Funnel result;
  result.model.benchmark = overall ? sum(counts) / sum(exposures) : spec.benchmark;
  const std::size_t n = counts.size();
  result.expected.resize(n);
  for (std::size_t i = 0; i < n; ++i) result.expected[i] = exposures[i] * result.model.benchmark;
  result.spread = spread_between_units(counts, result.expected, spec.winsorise);
  result.model.widening = spec.widening;
  if (result.spread.dispersion > 1) result.model.dispersion = result.spread.dispersion;
  if (result.spread.between_sd > 0) result.model.between_sd = result.spread.between_sd;

  result.ratio.resize(n);
  result.z.resize(n);
  result.p_value.resize(n);
  result.standing.resize(n);
  for (std::size_t i = 0; i < n; ++i) {
    const double mean = result.expected[i];
    const CountDeviate deviate = count_deviate(counts[i], result.model.shape(mean), mean);
    result.ratio[i] = mean > 0 ? counts[i] / mean : nan;
    result.z[i] = deviate.z;
    result.p_value[i] = deviate.p_value;
    // The side is that of the smaller exact tail, which is the one the p-value doubles.
    const double side = deviate.upper < deviate.lower ? 1 : -1;
    result.standing[i] = standing_of(deviate.p_value, side, spec.inner, spec.outer);
    result.beyond_inner += result.standing[i] != Standing::within;
    result.beyond_outer +=
        result.standing[i] == Standing::far_low || result.standing[i] == Standing::far_high;
  }
  return result;
}

FunnelLimits funnel_limits(std::span<const double> exposures, const FunnelModel& model, double inner,
                           double outer) {
  require_bands(inner, outer);
  FunnelLimits limits;
  for (const double exposure : exposures) {
    if (!(exposure > 0 && std::isfinite(exposure)))
      throw Refusal(Code::bad_exposure, "The funnel's exposures must be above 0.");
    const double mean = exposure * model.benchmark, shape = model.shape(mean);
    const auto low = [&](double band) {
      return mean > 0 ? negative_binomial_quantile((1 - band) / 2, shape, mean) / exposure : 0;
    };
    const auto high = [&](double band) {
      return mean > 0 ? negative_binomial_upper_quantile((1 - band) / 2, shape, mean) / exposure : 0;
    };
    limits.exposure.push_back(exposure);
    limits.low_inner.push_back(low(inner));
    limits.high_inner.push_back(high(inner));
    limits.low_outer.push_back(low(outer));
    limits.high_outer.push_back(high(outer));
  }
  return limits;
}

std::vector<double> funnel_exposures(std::span<const double> exposures, std::size_t points) {
  if (exposures.empty() || points == 0) return {};
  const auto [least, greatest] = std::minmax_element(exposures.begin(), exposures.end());
  if (points == 1 || *least == *greatest) return {*greatest};
  const double low = std::log(*least), step = (std::log(*greatest) - low) / static_cast<double>(points - 1);
  std::vector<double> grid(points);
  for (std::size_t i = 0; i < points; ++i) grid[i] = std::exp(low + step * static_cast<double>(i));
  grid.front() = *least;
  grid.back() = *greatest;
  return grid;
}

}  // namespace countsel
