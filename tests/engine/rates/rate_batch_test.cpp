// tests/engine/rates/rate_batch_test.cpp -- a column of limits is the limits of its rows.
#include "engine/rates/rate_batch.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <limits>
#include <string>
#include <vector>

#include "engine/refusal.hpp"

namespace countsel {
namespace {

constexpr RateMethod all_methods[] = {
    RateMethod::exact, RateMethod::mid_p, RateMethod::score,    RateMethod::likelihood,  RateMethod::jeffreys,
    RateMethod::byar,  RateMethod::wald,  RateMethod::log_wald, RateMethod::square_root, RateMethod::bayes};

struct Rows {
  std::vector<double> counts, exposures, low, high;
  void add(double count) {
    counts.push_back(count);
    exposures.push_back(1 + static_cast<double>(counts.size() % 13));
  }
  void answer(const LimitsSpec& spec, const Work& work = {}) {
    low.assign(counts.size(), -1);
    high.assign(counts.size(), -1);
    rate_limits(counts, exposures, spec, low, high, work);
  }
};

bool near(double a, double b) {
  return a == b || (std::isnan(a) && std::isnan(b)) || std::abs(a - b) <= 4e-15 * std::abs(b);
}

// Enough rows in every octave for fits to be made, few in some for them not to be.
Rows mixed() {
  Rows rows;
  for (double c = 0; c < 700; ++c) rows.add(c);
  for (double c = 700; c < 2e15; c = std::floor(c * 1.013) + 1) rows.add(c);
  for (double c = 2e15; c < 1e22; c *= 7) rows.add(c);
  return rows;
}

TEST_CASE("every method, side and level: the column equals its rows to 4e-15") {
  Rows rows = mixed();
  for (const RateMethod method : all_methods)
    for (const double confidence : {0.2, 0.95, 1 - 1e-12})
      for (const Side side : {Side::both, Side::lower, Side::upper}) {
        CAPTURE(static_cast<int>(method));
        CAPTURE(confidence);
        CAPTURE(static_cast<int>(side));
        const LimitsSpec spec{.method = method, .confidence = confidence, .side = side, .prior = {1.5, 4}};
        rows.answer(spec);
        for (std::size_t i = 0; i < rows.counts.size(); i += 3) {
          const Limits one = rate_limits(rows.counts[i], rows.exposures[i], spec);
          if (!near(rows.low[i], one.low) || !near(rows.high[i], one.high)) {
            CAPTURE(rows.counts[i]);
            CHECK(rows.low[i] == one.low);
            CHECK(rows.high[i] == one.high);
          }
        }
      }
}

TEST_CASE("a record that stopped at its last event has a column too") {
  Rows rows = mixed();
  const LimitsSpec spec{.stopped_by = StoppedBy::event};
  rows.answer(spec);
  CHECK(std::isnan(rows.low[0]));
  for (std::size_t i = 1; i < rows.counts.size(); i += 5)
    CHECK(near(rows.high[i], rate_limits(rows.counts[i], rows.exposures[i], spec).high));
}

TEST_CASE("the answer does not depend on how the pieces are run") {
  Rows rows;
  for (int i = 0; i < 200000; ++i) rows.add(std::floor(std::pow(1.0001, i) + i % 9));
  rows.answer({});
  const std::vector<double> low = rows.low, high = rows.high;
  Work backwards;
  backwards.workers.hands = 3;
  backwards.workers.run = [](std::size_t tasks, const auto& piece) {
    for (std::size_t i = tasks; i-- > 0;) piece(i);
  };
  rows.answer({}, backwards);
  CHECK(rows.low == low);
  CHECK(rows.high == high);
}

TEST_CASE("work that is told to stop, stops") {
  Rows rows;
  for (int i = 0; i < 1000; ++i) rows.add(i);
  Work work;
  work.progress.asked = [] { throw Refusal(Code::cancelled, "Stopped."); };
  CHECK_THROWS_AS(rows.answer({}, work), Refusal);
}

TEST_CASE("the first bad row is named") {
  const auto place = [](double count, double exposure) {
    Rows rows;
    for (int i = 0; i < 70000; ++i) rows.add(i);
    rows.counts[66000] = count;
    rows.exposures[66000] = exposure;
    rows.counts[69000] = -7;
    try {
      rows.answer({});
    } catch (const Refusal& refusal) {
      return std::string(code_name(refusal.code)) + " " + refusal.places.at(0).column + " " +
             std::to_string(refusal.places.at(0).row);
    }
    return std::string("answered");
  };
  CHECK(place(2.5, 1) == "bad_count count 66001");
  CHECK(place(-1, 1) == "bad_count count 66001");
  CHECK(place(std::numeric_limits<double>::quiet_NaN(), 1) == "bad_count count 66001");
  CHECK(place(2, 0) == "bad_exposure exposure 66001");
  CHECK(place(2, 1) == "bad_count count 69001");
  Rows rows;
  rows.add(1);
  rows.exposures.push_back(2);
  CHECK_THROWS_AS(rows.answer({}), Refusal);
}

TEST_CASE("no rows, one row") {
  Rows rows;
  rows.answer({});
  CHECK(rows.low.empty());
  rows.add(1e6);
  rows.answer({});
  CHECK(rows.low[0] == rate_limits(1e6, rows.exposures[0], {}).low);
}

}  // namespace
}  // namespace countsel
