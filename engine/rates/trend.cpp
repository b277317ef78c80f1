// engine/rates/trend.cpp -- the conditional log-linear climb: one slope, nothing else.
#include "engine/rates/trend.hpp"

#include <algorithm>
#include <cmath>
#include <functional>
#include <limits>

#include "engine/numbers/distributions.hpp"
#include "engine/numbers/poisson_deviance.hpp"
#include "engine/numbers/roots.hpp"
#include "engine/numbers/sums.hpp"
#include "engine/rates/checks.hpp"
#include "engine/rates/strata_checks.hpp"
#include "engine/refusal.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double no_value = std::numeric_limits<double>::quiet_NaN();

void require(std::span<const double> counts, std::span<const double> exposures, std::span<const double> order,
             double confidence) {
  if (counts.size() != exposures.size() || counts.size() != order.size())
    throw Refusal(Code::length_mismatch, "count, exposure and order differ in length.");
  if (counts.size() < 2) throw Refusal(Code::too_few, "A trend needs two steps or more.", {{"order"}});
  for (std::size_t i = 0; i < counts.size(); ++i) {
    require_count(counts[i], "count", i + 1);
    require_exposure(exposures[i], "exposure", i + 1);
    if (!std::isfinite(order[i]) || (i > 0 && !(order[i] > order[i - 1])))
      throw Refusal(Code::bad_value, "The steps' order does not increase.",
                    {{"order", static_cast<std::int64_t>(i + 1)}});
  }
  require_probability(confidence, "confidence");
}

// The shares of the events under a slope (steps scaled to a range of 1), their mean step and its variance.
struct Shares {
  std::vector<double> share;
  double mean = 0, variance = 0;
};

struct Climb {
  std::vector<double> steps;  // order, moved and scaled to 0 ... 1
  std::span<const double> exposures;
  double events = 0, seen = 0;  // seen: sum of count x step

  Shares at(double slope) const {
    Shares s;
    double total = 0;
    const double most = slope > 0 ? slope : 0;
    for (std::size_t i = 0; i < steps.size(); ++i) {
      s.share.push_back(exposures[i] * std::exp(slope * steps[i] - most));
      total += s.share.back();
    }
    for (double& share : s.share) share /= total;
    for (std::size_t i = 0; i < steps.size(); ++i) s.mean += s.share[i] * steps[i];
    for (std::size_t i = 0; i < steps.size(); ++i)
      s.variance += s.share[i] * (steps[i] - s.mean) * (steps[i] - s.mean);
    return s;
  }
  /// The score's signed root at a slope: positive where the slope is too small.
  double score(double slope) const {
    const Shares s = at(slope);
    return (seen - events * s.mean) / std::sqrt(events * s.variance);
  }
};

// e^x - 1 - x.
double exp_less_line(double x) {
  if (std::abs(x) > 0.5) return std::expm1(x) - x;
  double term = x * x / 2, total = term;
  for (int n = 3; n < 20; ++n) total += term *= x / n;
  return total;
}

double fit(const Climb& climb) {
  const auto score = [&](double slope) {
    const Shares s = climb.at(slope);
    return ValueSlope{climb.seen - climb.events * s.mean, -climb.events * s.variance};
  };
  double reach = 1;
  while (score(reach).value > 0 && reach < 1e5) reach *= 2;
  double fall = -1;
  while (score(fall).value < 0 && fall > -1e5) fall *= 2;
  return newton_root(score, 0, fall, reach);
}

// The signed root of the likelihood ratio between the fit and a slope: positive where the slope is too small.
std::function<double(double)> likelihood_root(const Climb& climb, double slope) {
  if (std::isfinite(slope)) {
    return [&climb, slope, fitted = climb.at(slope)](double other) {
      const double move = other - slope;
      double excess = 0;  // log of the mean of e^(move (step - mean)), the step's mean being the fitted one
      for (std::size_t i = 0; i < climb.steps.size(); ++i)
        excess += fitted.share[i] * exp_less_line(move * (climb.steps[i] - fitted.mean));
      // What rounding left of the score at the fit.
      const double rest = (climb.seen - climb.events * fitted.mean) * move;
      const double lost = climb.events * std::log1p(excess) - rest;
      return std::copysign(std::sqrt(2 * std::max(0.0, lost)), -move);
    };
  }
  // All events at one end: the likelihood is that step's share to the power of the events.
  const std::size_t end = slope > 0 ? climb.steps.size() - 1 : 0;
  return [&climb, slope, end](double other) {
    const Shares s = climb.at(other);
    double rest = 0;
    for (std::size_t i = 0; i < s.share.size(); ++i)
      if (i != end) rest += s.share[i];
    const double log_share = s.share[end] > 0.5 ? std::log1p(-rest) : std::log(s.share[end]);
    return std::copysign(std::sqrt(-2 * climb.events * log_share), slope);
  };
}

// The slope at which a falling function is `wanted`, searched outwards from `start`; infinite if none.
double crossing(const std::function<double(double)>& f, double start, double wanted) {
  const auto excess = [&](double slope) { return f(slope) - wanted; };
  const double here = excess(start);
  if (here == 0) return start;
  const double sign = here > 0 ? 1 : -1;
  double step = 0.1;
  while ((excess(start + sign * step) > 0) == (here > 0)) {
    step *= 2;
    if (step > 1e5) return sign * infinity;
  }
  return bracketed_root(excess, std::min(start, start + sign * step), std::max(start, start + sign * step));
}

Limits slope_limits(const Climb& climb, double slope, double error, const TrendSpec& spec) {
  const double z = limit_deviate(spec.confidence, spec.side);
  Limits limits{-infinity, infinity};
  const bool finite = std::isfinite(slope);
  if (spec.method == TrendMethod::wald) {
    limits = {finite ? slope - z * error : no_value, finite ? slope + z * error : no_value};
  } else {
    const auto root = spec.method == TrendMethod::likelihood
                          ? likelihood_root(climb, slope)
                          : std::function<double(double)>([&](double b) { return climb.score(b); });
    const double start = finite ? slope : 0;
    if (slope > -infinity) limits.low = crossing(root, start, z);
    if (slope < infinity) limits.high = crossing(root, start, -z);
  }
  if (slope == infinity) limits.high = infinity;
  if (slope == -infinity) limits.low = -infinity;
  if (spec.side == Side::upper) limits.low = -infinity;
  if (spec.side == Side::lower) limits.high = infinity;
  return limits;
}

}  // namespace

Trend climb(std::span<const double> counts, std::span<const double> exposures, std::span<const double> order,
            const TrendSpec& spec) {
  require(counts, exposures, order, spec.confidence);
  const std::size_t n = counts.size();
  const double range = order[n - 1] - order[0];
  Climb data{{}, exposures, sum(counts), 0};
  Sum seen;
  for (std::size_t i = 0; i < n; ++i) {
    data.steps.push_back((order[i] - order[0]) / range);
    seen.add(counts[i] * data.steps[i]);
  }
  data.seen = seen.value();
  const auto df = static_cast<double>(n) - 2;
  if (data.events == 0)
    return {no_value,
            -infinity,
            infinity,
            no_value,
            0,
            0,
            1,
            0,
            df,
            df > 0 ? 1 : no_value,
            std::vector<double>(n)};
  const double slope = counts[n - 1] == data.events ? infinity
                       : counts[0] == data.events   ? -infinity
                                                    : fit(data);
  Trend trend{};
  trend.signed_root = data.score(0);
  trend.statistic = trend.signed_root * trend.signed_root;
  trend.p_value = deviate_p(trend.signed_root, spec.direction);
  trend.departure_df = df;
  double error = no_value;
  if (std::isfinite(slope)) {
    const Shares shares = data.at(slope);
    error = 1 / std::sqrt(data.events * shares.variance);
    Sum departure;
    for (std::size_t i = 0; i < n; ++i) {
      departure.add(2 * half_deviance(counts[i], data.events * shares.share[i]));
      trend.fitted.push_back(data.events * shares.share[i] / exposures[i]);
    }
    trend.departure_statistic = departure.value();
  } else {
    for (std::size_t i = 0; i < n; ++i) trend.fitted.push_back(counts[i] / exposures[i]);
  }
  trend.departure_p = df > 0 ? chi_square_above(trend.departure_statistic, df) : no_value;
  const Limits limits = slope_limits(data, slope, error, spec);
  trend.log_ratio = slope / range;
  trend.log_error = error / range;
  trend.low = limits.low / range;
  trend.high = limits.high / range;
  return trend;
}

}  // namespace countsel
