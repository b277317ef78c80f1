// tests/engine/rates/coverage_test.cpp -- how often limits hold the true mean, summed over all counts.
//
// No simulation: the chance of each count times whether its limits hold the mean. The behaviour asserted is
// the published one: exact limits never fall short of their confidence (Garwood 1936); mid-p, score,
// likelihood and Jeffreys' limits keep near it on average and dip below at some means; Wald's are far too
// short at small means (Brown, Cai and DasGupta 2003, Stat. Sinica 13; Barker 2002, Am. Stat. 56; Patil and
// Kulkarni 2012, REVSTAT 10).
#include <doctest/doctest.h>

#include <algorithm>
#include <array>
#include <cmath>
#include <vector>

#include "engine/numbers/distributions.hpp"
#include "engine/rates/limits.hpp"

namespace countsel {
namespace {

class Coverage {
 public:
  Coverage(RateMethod method, double confidence, Side side = Side::both) {
    for (double count = 0; count < 420; ++count)
      limits_.push_back(rate_limits(count, 1, {.method = method, .confidence = confidence, .side = side}));
  }
  double at(double mean) const {
    double total = 0;
    for (std::size_t count = 0; count < limits_.size(); ++count)
      if (limits_[count].low <= mean && mean <= limits_[count].high)
        total += poisson_exactly(static_cast<double>(count), mean);
    return total;
  }
  struct Summary {
    double least, average;
  };
  Summary between(double from, double to) const {
    Summary summary{2, 0};
    constexpr int points = 800;
    for (int i = 0; i < points; ++i) {
      const double here = at(from + (to - from) * (i + 0.5) / points);
      summary.least = std::min(summary.least, here);
      summary.average += here / points;
    }
    return summary;
  }
  /// Just beside every limit, where the coverage jumps.
  double least_at_jumps() const {
    double least = 2;
    for (const Limits& limits : limits_)
      for (const double end : {limits.low, limits.high})
        if (end > 0 && end < 200) least = std::min({least, at(end * (1 - 1e-9)), at(end * (1 + 1e-9))});
    return least;
  }

 private:
  std::vector<Limits> limits_;
};

TEST_CASE("exact limits never fall short, at any mean, level or side") {
  for (const double confidence : {0.5, 0.9, 0.95, 0.998})
    for (const Side side : {Side::both, Side::lower, Side::upper}) {
      CAPTURE(confidence);
      CHECK(Coverage(RateMethod::exact, confidence, side).least_at_jumps() >= confidence - 1e-12);
    }
  const Coverage exact(RateMethod::exact, 0.95);
  CHECK(exact.between(0.05, 5).average > 0.975);  // and are wide for it
  CHECK(exact.between(100, 200).average > 0.953);
}

TEST_CASE("mid-p limits are close to the confidence") {
  const Coverage mid_p(RateMethod::mid_p, 0.95), exact(RateMethod::exact, 0.95);
  for (const auto& entry : {std::array{1., 5., 0.91}, {5., 20., 0.92}, {20., 200., 0.939}}) {
    const auto& from = entry[0];
    const auto& to = entry[1];
    const auto& least = entry[2];
    CAPTURE(from);
    const auto [lowest, average] = mid_p.between(from, to);
    CHECK(lowest > least);
    CHECK(std::abs(average - 0.95) < 0.016);
    CHECK(std::abs(average - 0.95) < std::abs(exact.between(from, to).average - 0.95));
  }
  CHECK(mid_p.between(20, 100).average == doctest::Approx(0.95).epsilon(1e-3));
}

TEST_CASE("score, likelihood, Jeffreys' and square-root limits hold on average and dip in places") {
  for (const RateMethod method :
       {RateMethod::score, RateMethod::likelihood, RateMethod::jeffreys, RateMethod::square_root}) {
    CAPTURE(static_cast<int>(method));
    const Coverage coverage(method, 0.95);
    const auto small = coverage.between(1, 20), large = coverage.between(20, 150);
    CHECK(small.average == doctest::Approx(0.95).epsilon(0.012));
    CHECK(small.least < 0.945);
    CHECK(small.least > 0.83);
    CHECK(large.average == doctest::Approx(0.95).epsilon(1.5e-3));
    CHECK(large.least > 0.93);
  }
}

TEST_CASE("Byar's limits are all but the exact ones") {
  const Coverage byar(RateMethod::byar, 0.95), exact(RateMethod::exact, 0.95);
  for (const double from : {1., 5., 20., 100.}) {
    const auto [least, average] = byar.between(from, 2 * from);
    CHECK(least > 0.949);
    CHECK(average == doctest::Approx(exact.between(from, 2 * from).average).epsilon(5e-4));
  }
}

TEST_CASE("Wald's limits are poor at small means, log-Wald's have none at 0") {
  const Coverage wald(RateMethod::wald, 0.95), log_wald(RateMethod::log_wald, 0.95);
  // At a mean of 1/2 the counts 1 to 4 hold it, 0 and 5 on do not: by hand from count -+ 1.96 sqrt(count).
  CHECK(wald.at(0.5) == doctest::Approx(std::exp(-0.5) * (0.5 + 0.125 + 1. / 48 + 1. / 384)).epsilon(1e-12));
  CHECK(wald.between(0.05, 1).average < 0.5);
  CHECK(wald.between(1, 5).average < 0.88);
  CHECK(wald.between(5, 20).average < 0.94);
  CHECK(wald.between(100, 200).average == doctest::Approx(0.95).epsilon(3e-3));
  CHECK(log_wald.between(0.05, 1).average < 0.5);
  CHECK(log_wald.between(5, 20).average == doctest::Approx(0.95).epsilon(0.01));
}

}  // namespace
}  // namespace countsel
