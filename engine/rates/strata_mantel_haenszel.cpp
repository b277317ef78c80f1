// engine/rates/strata_mantel_haenszel.cpp -- Mantel and Haenszel's ratio, difference and test.
#include <cmath>
#include <limits>

#include "engine/numbers/distributions.hpp"
#include "engine/numbers/sums.hpp"
#include "engine/rates/checks.hpp"
#include "engine/rates/strata.hpp"
#include "engine/rates/strata_checks.hpp"
#include "engine/refusal.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double no_value = std::numeric_limits<double>::quiet_NaN();

// A side without exposure is allowed if it has no events either.
void require_side(double count, double exposure, std::size_t row) {
  require_count(count, "count", row);
  if (exposure != 0 || count > 0) require_exposure(exposure, "exposure", row);
}

}  // namespace

void require_strata(std::span<const TwoRates> strata, double confidence) {
  if (strata.empty()) throw Refusal(Code::too_few, "There are no strata.", {{"stratum"}});
  for (std::size_t i = 0; i < strata.size(); ++i) {
    require_side(strata[i].count1, strata[i].exposure1, i + 1);
    require_side(strata[i].count0, strata[i].exposure0, i + 1);
  }
  require_probability(confidence, "confidence");
}

double limit_deviate(double confidence, Side side) {
  return normal_upper_quantile(side == Side::both ? (1 - confidence) / 2 : 1 - confidence);
}

double deviate_p(double z, Direction direction) {
  if (direction == Direction::above) return normal_above(z);
  if (direction == Direction::below) return normal_below(z);
  return 2 * normal_above(std::abs(z));
}

MantelHaenszel mantel_haenszel(std::span<const TwoRates> strata, double confidence, Side side,
                               Direction direction) {
  require_strata(strata, confidence);
  // All sums carry the weight exposure1 exposure0 / exposure, so that no product of two exposures, which
  // could overflow, is ever made.
  Sum up, down, log_variance, difference, difference_variance, weights;
  for (const auto& s : strata) {
    if (!two_sided(s)) continue;
    const double exposure = s.exposure1 + s.exposure0;
    const double share1 = s.exposure1 / exposure, share0 = s.exposure0 / exposure;
    const double weight = s.exposure1 * share0;
    up.add(s.count1 * share0);
    down.add(s.count0 * share1);
    log_variance.add((s.count1 + s.count0) * share1 * share0);
    difference.add(s.count1 * share0 - s.count0 * share1);
    difference_variance.add(s.count1 * share0 * share0 + s.count0 * share1 * share1);
    weights.add(weight);
  }
  MantelHaenszel mh{};
  if (!(weights.value() > 0)) {
    mh.ratio = mh.ratio_low = mh.ratio_high = mh.log_variance = no_value;
    mh.difference = mh.difference_low = mh.difference_high = mh.difference_variance = no_value;
    mh.signed_root = mh.statistic = mh.p_value = no_value;
    return mh;
  }
  const double z = limit_deviate(confidence, side);
  const double r = up.value(), s = down.value(), w = weights.value();
  mh.ratio = s > 0 ? r / s : r > 0 ? infinity : no_value;
  mh.log_variance = r > 0 && s > 0 ? log_variance.value() / r / s : no_value;
  mh.ratio_low = side == Side::upper ? 0 : mh.ratio * std::exp(-z * std::sqrt(mh.log_variance));
  mh.ratio_high = side == Side::lower ? infinity : mh.ratio * std::exp(z * std::sqrt(mh.log_variance));
  mh.difference = difference.value() / w;
  mh.difference_variance = log_variance.value() > 0 ? difference_variance.value() / w / w : no_value;
  const double error = std::sqrt(mh.difference_variance);
  mh.difference_low = side == Side::upper ? -infinity : mh.difference - z * error;
  mh.difference_high = side == Side::lower ? infinity : mh.difference + z * error;
  const double null_variance = log_variance.value();
  mh.signed_root = null_variance > 0 ? difference.value() / std::sqrt(null_variance) : 0;
  mh.statistic = mh.signed_root * mh.signed_root;
  mh.p_value = null_variance > 0 ? deviate_p(mh.signed_root, direction) : 1;
  return mh;
}

}  // namespace countsel
