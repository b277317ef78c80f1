// tests/engine/rates/limits_test.cpp -- limits for one rate: references, published values, edges,
// invariances.
#include "engine/rates/limits.hpp"

#include <doctest/doctest.h>

#include <string>

#include "engine/refusal.hpp"
#include "reference_rows.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();

const std::map<std::string, RateMethod> methods = {{"exact", RateMethod::exact},
                                                   {"mid_p", RateMethod::mid_p},
                                                   {"score", RateMethod::score},
                                                   {"likelihood", RateMethod::likelihood},
                                                   {"jeffreys", RateMethod::jeffreys},
                                                   {"byar", RateMethod::byar},
                                                   {"wald", RateMethod::wald},
                                                   {"log_wald", RateMethod::log_wald},
                                                   {"square_root", RateMethod::square_root},
                                                   {"bayes", RateMethod::bayes}};

TEST_CASE("every method agrees with 30-digit arithmetic to 12 digits, counts 0 to 1e9") {
  for (const auto& entry : methods) {
    const auto& name = entry.first;
    const auto& method = entry.second;
    for (const auto& row : reference_rows("limits.tsv", name + "\t")) {
      LimitsSpec spec{.method = method, .confidence = row.in("confidence"), .prior = {2.5, 40}};
      const Limits limits = rate_limits(row.in("count"), method == RateMethod::bayes ? 60 : 1, spec);
      row.check("low", limits.low);
      row.check("high", limits.high);
    }
  }
  for (const auto& row : reference_rows("limits.tsv", "event\t")) {
    const LimitsSpec spec{.confidence = row.in("confidence"), .stopped_by = StoppedBy::event};
    const Limits limits = rate_limits(row.in("count"), 1, spec);
    row.check("low", limits.low);
    row.check("high", limits.high);
  }
}

TEST_CASE("published limits for one rate") {
  for (const auto& entry : methods) {
    const auto& name = entry.first;
    const auto& method = entry.second;
    if (method == RateMethod::bayes || method == RateMethod::jeffreys || method == RateMethod::log_wald ||
        method == RateMethod::square_root || method == RateMethod::likelihood)
      continue;  // no published value at hand
    for (const auto& row : reference_rows("published_limits.tsv", name + " ")) {
      LimitsSpec spec{.method = method, .confidence = row.in("confidence")};
      const double count = row.in("count"), exposure = row.in("exposure");
      if (row.inputs.contains("one_sided")) {
        spec.side = Side::lower;
        row.check("low", rate_limits(count, exposure, spec).low);
        spec.side = Side::upper;
      } else {
        row.check("low", rate_limits(count, exposure, spec).low);
      }
      const double high = rate_limits(count, exposure, spec).high;
      row.check("high", high);
      row.check("every_low", 1 / high);
      if (row.expected.contains("every_high"))
        row.check("every_high", 1 / rate_limits(count, exposure, spec).low);
    }
  }
}

TEST_CASE("one-sided limits spend all of the chance on their side") {
  for (const auto& entry : methods) {
    const auto& name = entry.first;
    const auto& method = entry.second;
    for (const double count : {0., 1., 4., 90., 3000., 1e9}) {
      CAPTURE(name);
      CAPTURE(count);
      LimitsSpec spec{.method = method, .confidence = 0.9, .prior = {1, 2}};
      const Limits both = rate_limits(count, 3, spec);
      spec.confidence = 0.95;
      spec.side = Side::lower;
      const Limits lower = rate_limits(count, 3, spec);
      spec.side = Side::upper;
      const Limits upper = rate_limits(count, 3, spec);
      CHECK(lower.high == infinity);
      CHECK(upper.low == 0);
      if (method == RateMethod::log_wald && count == 0) {
        CHECK(std::isnan(lower.low));
        CHECK(std::isnan(upper.high));
        continue;
      }
      CHECK(lower.low == doctest::Approx(both.low).epsilon(1e-11));
      CHECK(upper.high == doctest::Approx(both.high).epsilon(1e-11));
    }
  }
}

TEST_CASE("limits at count 0") {
  const auto at_zero = [](RateMethod method) { return rate_limits(0, 1, {.method = method}); };
  for (const auto& entry : methods) {
    const auto& name = entry.first;
    const auto& method = entry.second;
    if (method == RateMethod::log_wald || method == RateMethod::bayes) continue;
    CAPTURE(name);
    CHECK(at_zero(method).low == 0);
  }
  CHECK(at_zero(RateMethod::exact).high == doctest::Approx(-std::log(0.025)).epsilon(1e-13));
  CHECK(at_zero(RateMethod::mid_p).high == doctest::Approx(-std::log(0.05)).epsilon(1e-13));
  CHECK(at_zero(RateMethod::wald).high == 0);
  CHECK(std::isnan(at_zero(RateMethod::log_wald).low));
  CHECK(at_zero(RateMethod::bayes).low > 0);  // the posterior's own quantile
  const Limits flat = rate_limits(0, 1, {.method = RateMethod::bayes, .prior = {0, 0}});
  CHECK(std::isnan(flat.low));
  CHECK(std::isnan(flat.high));
  const Limits event = rate_limits(0, 1, {.stopped_by = StoppedBy::event});
  CHECK(std::isnan(event.low));
  CHECK(std::isnan(event.high));
}

TEST_CASE("limits scale with the exposure, rise with the count and contain the estimate") {
  for (const auto& entry : methods) {
    const auto& name = entry.first;
    const auto& method = entry.second;
    CAPTURE(name);
    Limits last{-1, 0};
    for (const double count : {0., 1., 2., 3., 10., 99., 100., 498., 499., 500., 501., 1e5, 1e9, 9e15}) {
      CAPTURE(count);
      const LimitsSpec spec{.method = method};
      const Limits one = rate_limits(count, 1, spec), seven = rate_limits(count, 7, spec);
      if (std::isnan(one.low)) continue;
      CHECK(seven.low == doctest::Approx(one.low / 7).epsilon(1e-15));
      CHECK(seven.high == doctest::Approx(one.high / 7).epsilon(1e-15));
      CHECK(one.low >= last.low);
      CHECK(one.high > last.high - 1e-300);
      if (method != RateMethod::bayes) CHECK(one.low <= count);
      CHECK(one.high >= count);
      last = one;
    }
  }
}

TEST_CASE("tiny and huge exposures overflow to infinity and underflow to 0, never to nonsense") {
  CHECK(rate_limits(1e9, 1e-300, {}).high == infinity);
  CHECK(rate_limits(3, 1e300, {}).low > 0);
  const Limits tiny = rate_limits(3, 5e-320, {});
  CHECK(tiny.low == infinity);
  CHECK(rate_limits(0, 1e-320, {}).low == 0);
}

TEST_CASE("a confidence below one half one-sided puts the limit beyond the estimate") {
  for (const RateMethod method :
       {RateMethod::exact, RateMethod::mid_p, RateMethod::score, RateMethod::likelihood, RateMethod::jeffreys,
        RateMethod::wald, RateMethod::square_root}) {
    CAPTURE(static_cast<int>(method));
    LimitsSpec spec{.method = method, .confidence = 0.05, .side = Side::lower};
    CHECK(rate_limits(50, 1, spec).low > 50);
    spec.side = Side::upper;
    CHECK(rate_limits(50, 1, spec).high < 50);
  }
}

TEST_CASE("scaled limits are on the log scale with Student's quantile") {
  const Limits limits = scaled_rate_limits(40, 10, 2.5, 12, 0.95, Side::both);
  const double t = 2.1788128296672284;  // printed in every table of t as 2.179
  CHECK(limits.low == doctest::Approx(4 * std::exp(-t * std::sqrt(2.5 / 40))).epsilon(1e-12));
  CHECK(limits.high == doctest::Approx(4 * std::exp(t * std::sqrt(2.5 / 40))).epsilon(1e-12));
  CHECK(std::isnan(scaled_rate_limits(0, 10, 2, 5, 0.95, Side::both).high));
  CHECK(scaled_rate_limits(0, 10, 2, 5, 0.95, Side::upper).low == 0);
  CHECK(std::isnan(scaled_rate_limits(4, 10, 2, 0, 0.95, Side::both).low));
}

TEST_CASE("what is no count, exposure, confidence or prior is refused") {
  const auto code = [](double count, double exposure, const LimitsSpec& spec) {
    try {
      rate_limits(count, exposure, spec);
    } catch (const Refusal& refusal) {
      return std::string(code_name(refusal.code));
    }
    return std::string("answered");
  };
  CHECK(code(-1, 1, {}) == "bad_count");
  CHECK(code(3.5, 1, {}) == "bad_count");
  CHECK(code(NAN, 1, {}) == "bad_count");
  CHECK(code(infinity, 1, {}) == "bad_count");
  CHECK(code(3, 0, {}) == "bad_exposure");
  CHECK(code(3, -2, {}) == "bad_exposure");
  CHECK(code(3, NAN, {}) == "bad_exposure");
  CHECK(code(3, 1, {.confidence = 1}) == "bad_value");
  CHECK(code(3, 1, {.confidence = 0}) == "bad_value");
  CHECK(code(3, 1, {.confidence = NAN}) == "bad_value");
  CHECK(code(3, 1, {.method = RateMethod::bayes, .prior = {-1, 0}}) == "bad_value");
  CHECK(code(3, 1, {.prior = {-1, 0}}) == "answered");  // only bayes heeds the prior
}

}  // namespace
}  // namespace countsel
