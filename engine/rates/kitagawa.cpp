// engine/rates/kitagawa.cpp -- the two parts as weighted sums of counts, with limits.
#include "engine/rates/kitagawa.hpp"

#include <cmath>
#include <limits>

#include "engine/numbers/sums.hpp"
#include "engine/rates/strata_checks.hpp"
#include "engine/rates/weighted_count.hpp"
#include "engine/refusal.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double no_value = std::numeric_limits<double>::quiet_NaN();

// A sum of coefficient x count, split by the coefficients' sign.
struct Signed {
  WeightedCount up, down;
  void add(double coefficient, double count) {
    countsel::add(coefficient > 0 ? up : down, std::abs(coefficient), count);
  }
};

Part with_limits(double value, const Signed& terms, PartMethod method, double confidence, Side side) {
  Part part{value, -infinity, infinity};
  double below = no_value, above = no_value;
  if (method == PartMethod::normal) {
    const double variance = terms.up.variance + terms.down.variance;
    if (variance > 0) below = above = limit_deviate(confidence, side) * std::sqrt(variance);
  } else {
    // A one-sided limit of the whole joins opposite sides of the two sums, each at the same level.
    const auto sided = [&](const WeightedCount& sum) {
      if (side == Side::both) return gamma_limits(sum, false, confidence, side);
      return Limits{gamma_limits(sum, false, confidence, Side::lower).low,
                    gamma_limits(sum, false, confidence, Side::upper).high};
    };
    const Limits up = sided(terms.up), down = sided(terms.down);
    below = std::hypot(terms.up.value - up.low, down.high - terms.down.value);
    above = std::hypot(up.high - terms.up.value, terms.down.value - down.low);
  }
  if (side != Side::upper) part.low = value - below;
  if (side != Side::lower) part.high = value + above;
  return part;
}

}  // namespace

RateOrMix rate_or_mix(std::span<const TwoRates> strata, PartMethod method, double confidence, Side side) {
  require_strata(strata, confidence);
  Sum count1, exposure1, count0, exposure0;
  for (const auto& s : strata) {
    count1.add(s.count1);
    exposure1.add(s.exposure1);
    count0.add(s.count0);
    exposure0.add(s.exposure0);
  }
  const double total1 = exposure1.value(), total0 = exposure0.value();
  if (!(total1 > 0 && total0 > 0))
    throw Refusal(Code::bad_exposure, "One of the two groups has no exposure.", {{"exposure"}});
  const double mean_crude = (count1.value() / total1 + count0.value() / total0) / 2;
  RateOrMix result{};
  Sum rate_sum, mix_sum;
  Signed rate_terms, mix_terms, all_terms;
  for (std::size_t i = 0; i < strata.size(); ++i) {
    const auto& s = strata[i];
    const double share1 = s.exposure1 / total1, share0 = s.exposure0 / total0;
    const double gain = share1 - share0, mean_share = (share1 + share0) / 2;
    all_terms.add(1 / total1, s.count1);
    all_terms.add(-1 / total0, s.count0);
    StratumParts parts{0, 0};
    if (two_sided(s)) {
      const double rate1 = s.count1 / s.exposure1, rate0 = s.count0 / s.exposure0;
      parts = {(rate1 - rate0) * mean_share, gain * ((rate1 + rate0) / 2 - mean_crude)};
      rate_terms.add(mean_share / s.exposure1, s.count1);
      rate_terms.add(-mean_share / s.exposure0, s.count0);
      mix_terms.add(gain / 2 / s.exposure1, s.count1);
      mix_terms.add(gain / 2 / s.exposure0, s.count0);
    } else if (s.exposure1 > 0 || s.exposure0 > 0) {
      const double count = s.count1 + s.count0, exposure = s.exposure1 + s.exposure0;
      parts.mix_part = gain * (count / exposure - mean_crude);
      mix_terms.add(gain / exposure, count);
      result.absent.push_back(i);
    }
    rate_sum.add(parts.rate_part);
    mix_sum.add(parts.mix_part);
    result.strata.push_back(parts);
  }
  const double difference = count1.value() / total1 - count0.value() / total0;
  result.difference = with_limits(difference, all_terms, method, confidence, side);
  result.rate = with_limits(rate_sum.value(), rate_terms, method, confidence, side);
  result.mix = with_limits(mix_sum.value(), mix_terms, method, confidence, side);
  return result;
}

}  // namespace countsel
