// engine/rates/strata_within.cpp -- the whole stratified comparison: common, crude and stratum by stratum.
#include <cmath>
#include <limits>

#include "engine/numbers/sums.hpp"
#include "engine/rates/strata.hpp"
#include "engine/rates/strata_checks.hpp"
#include "engine/refusal.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double no_value = std::numeric_limits<double>::quiet_NaN();

double ratio_of(const TwoRates& s) {
  const double rate0 = s.count0 / s.exposure0;
  return rate0 > 0 ? s.count1 / s.exposure1 / rate0 : s.count1 > 0 ? infinity : no_value;
}

double difference_of(const TwoRates& s) { return s.count1 / s.exposure1 - s.count0 / s.exposure0; }

RatioMethod ratio_method(StrataMethod method) {
  if (method == StrataMethod::mid_p) return RatioMethod::mid_p;
  return method == StrataMethod::likelihood ? RatioMethod::likelihood : RatioMethod::exact;
}

StratumResult one_stratum(const TwoRates& s, const StrataSpec& spec) {
  if (!two_sided(s)) return {no_value, no_value, no_value, no_value, no_value, 0};
  const double exposure = s.exposure1 + s.exposure0;
  StratumResult result{};
  Limits limits{};
  if (spec.measure == Measure::ratio) {
    const RatioMethod method = ratio_method(spec.method);
    const TestMethod test = method == RatioMethod::exact   ? TestMethod::exact
                            : method == RatioMethod::mid_p ? TestMethod::mid_p
                                                           : TestMethod::likelihood;
    result.estimate = ratio_of(s);
    result.weight = s.count0 * (s.exposure1 / exposure);
    limits = ratio_limits(s, method, spec.confidence, spec.side);
    result.p_value = ratio_test(s, test, spec.direction);
  } else {
    const RatioMethod method =
        spec.method == StrataMethod::likelihood ? RatioMethod::likelihood : RatioMethod::score;
    result.estimate = difference_of(s);
    result.weight = s.exposure1 * (s.exposure0 / exposure);
    limits = difference_limits(s, method, spec.confidence, spec.side);
    result.p_value = difference_test(s, method, spec.direction);
  }
  result.low = limits.low;
  result.high = limits.high;
  return result;
}

void finish(std::vector<StratumResult>& strata, Adjust adjust) {
  Sum weights;
  std::vector<double> p_values;
  for (const auto& s : strata) {
    weights.add(s.weight);
    p_values.push_back(s.p_value);
  }
  const auto adjusted = adjust_p_values(p_values, adjust);
  for (std::size_t i = 0; i < strata.size(); ++i) {
    strata[i].p_adjusted = adjusted[i];
    strata[i].weight = weights.value() > 0 ? strata[i].weight / weights.value() : no_value;
  }
}

double crude(std::span<const TwoRates> strata, Measure measure) {
  Sum count1, exposure1, count0, exposure0;
  for (const auto& s : strata) {
    count1.add(s.count1);
    exposure1.add(s.exposure1);
    count0.add(s.count0);
    exposure0.add(s.exposure0);
  }
  const TwoRates all{count1.value(), exposure1.value(), count0.value(), exposure0.value()};
  if (!two_sided(all)) return no_value;
  return measure == Measure::ratio ? ratio_of(all) : difference_of(all);
}

}  // namespace

WithinStrata within_strata(std::span<const TwoRates> strata, const StrataSpec& spec) {
  const bool of_ratio = spec.measure == Measure::ratio;
  if (!of_ratio && (spec.method == StrataMethod::exact || spec.method == StrataMethod::mid_p))
    throw Refusal(Code::bad_value, "A difference over strata has no exact limits.", {},
                  "Take mantel-haenszel or likelihood, or the ratio.");
  const MantelHaenszel mh = mantel_haenszel(strata, spec.confidence, spec.side, spec.direction);
  WithinStrata all{};
  all.statistic = mh.statistic;
  all.p_value = mh.p_value;
  if (spec.method == StrataMethod::mantel_haenszel) {
    all.estimate = of_ratio ? mh.ratio : mh.difference;
    all.low = of_ratio ? mh.ratio_low : mh.difference_low;
    all.high = of_ratio ? mh.ratio_high : mh.difference_high;
    const double z = of_ratio ? std::log(mh.ratio) / std::sqrt(mh.log_variance)
                              : mh.difference / std::sqrt(mh.difference_variance);
    all.method_p = deviate_p(z, spec.direction);
  } else if (of_ratio) {
    const CommonRatio common =
        common_ratio(strata, ratio_method(spec.method), spec.confidence, spec.side, spec.direction);
    all.estimate = common.ratio;
    all.low = common.low;
    all.high = common.high;
    all.method_p = common.p_value;
  } else {
    const CommonDifference common = common_difference(strata, spec.confidence, spec.side, spec.direction);
    all.estimate = common.difference;
    all.low = common.low;
    all.high = common.high;
    all.method_p = common.p_value;
  }
  all.crude = crude(strata, spec.measure);
  all.homogeneity = of_ratio ? ratio_homogeneity(strata) : difference_homogeneity(strata);
  all.strata.reserve(strata.size());
  for (const auto& s : strata) all.strata.push_back(one_stratum(s, spec));
  finish(all.strata, spec.adjust);
  const double none = of_ratio ? 1 : 0;
  bool above = false, below = false;
  for (const auto& s : all.strata) {
    above = above || s.low > none;
    below = below || s.high < none;
  }
  all.directions_differ = above && below;
  return all;
}

}  // namespace countsel
