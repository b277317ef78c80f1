// tests/engine/numbers/random_test.cpp -- the stream's bits, and the draws against their laws.
#include "engine/numbers/random.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <fstream>
#include <functional>
#include <map>
#include <numeric>
#include <string>

#include "engine/numbers/distributions.hpp"

namespace countsel {
namespace {

TEST_CASE("the stream gives the bits of the published generator") {
  std::ifstream file(REFERENCE_DIR "/numbers/random_bits.tsv");
  REQUIRE(file);
  std::string line;
  std::getline(file, line);
  std::getline(file, line);
  std::uint64_t seed = 0, number = 0, index = 0, bits = 0;
  int read = 0;
  RandomStream stream(0);
  while (file >> seed >> number >> index >> bits) {
    if (index == 0) stream = RandomStream(seed, number);
    CHECK(stream.next() == bits);
    ++read;
  }
  CHECK(read == 35);
}

TEST_CASE("uniform stays inside its open interval and below() is even") {
  RandomStream stream(1);
  std::vector<double> seen(7);
  double sum = 0;
  for (int i = 0; i < 70000; ++i) {
    const double u = stream.uniform();
    REQUIRE((u > 0 && u < 1));
    sum += u;
    ++seen[stream.below(7)];
  }
  CHECK(sum / 70000 == doctest::Approx(0.5).epsilon(0.01));
  double pearson = 0;
  for (const double s : seen) pearson += (s - 10000) * (s - 10000) / 10000;
  CHECK(chi_square_above(pearson, 6) > 1e-4);
}

// Pearson's fit of 200,000 draws to a discrete law, cells with fewer than 20 expected left to the rest.
double fit(const std::function<double()>& draw, const std::function<double(double)>& chance) {
  const double draws = 200000;
  std::map<double, double> seen;
  for (int i = 0; i < draws; ++i) ++seen[draw()];
  double statistic = 0, cells = 0, rest_seen = draws, rest = draws;
  for (const auto& [value, times] : seen) {
    const double expected = draws * chance(value);
    if (expected < 20) continue;
    statistic += (times - expected) * (times - expected) / expected;
    rest_seen -= times;
    rest -= expected;
    ++cells;
  }
  if (rest > 20) {
    statistic += (rest_seen - rest) * (rest_seen - rest) / rest;
    ++cells;
  }
  return chi_square_above(statistic, cells - 1);
}

TEST_CASE("Poisson draws follow the Poisson law") {
  for (const double mean : {0.003, 0.7, 9.99, 24.9, 25.0, 37.5, 900.0}) {
    CAPTURE(mean);
    RandomStream stream(7);
    CHECK(fit([&] { return draw_poisson(stream, mean); },
              [&](double k) { return poisson_exactly(k, mean); }) > 1e-4);
  }
  RandomStream stream(7);
  CHECK(draw_poisson(stream, 0) == 0);
}

TEST_CASE("binomial draws follow the binomial law") {
  for (const double trials : {1.0, 5.0, 40.0, 300.0, 20000.0, 1e5, 3e5}) {
    for (const double chance : {0.0004, 0.09, 0.26, 0.5, 0.83}) {
      CAPTURE(trials);
      CAPTURE(chance);
      RandomStream stream(11);
      CHECK(fit([&] { return draw_binomial(stream, trials, chance); },
                [&](double k) { return binomial_exactly(k, trials, chance); }) > 1e-4);
    }
  }
  RandomStream stream(11);
  CHECK(draw_binomial(stream, 5, 0) == 0);
  CHECK(draw_binomial(stream, 5, 1) == 5);
  CHECK(draw_binomial(stream, 0, 0.5) == 0);
}

TEST_CASE("gamma and normal draws follow their laws") {
  // Each value's own tail chance is uniform if the law is right: 20 equal cells.
  const auto flat = [](const std::function<double()>& tail) {
    std::vector<double> cells(20);
    for (int i = 0; i < 100000; ++i)
      ++cells[std::min<std::size_t>(19, static_cast<std::size_t>(20 * tail()))];
    double statistic = 0;
    for (const double c : cells) statistic += (c - 5000) * (c - 5000) / 5000;
    return chi_square_above(statistic, 19);
  };
  RandomStream stream(3);
  CHECK(flat([&] { return normal_below(draw_normal(stream)); }) > 1e-4);
  for (const double shape : {0.05, 0.5, 1.0, 2.5, 80.0, 1e6}) {
    CAPTURE(shape);
    CHECK(flat([&] { return gamma_below(shape, draw_gamma(stream, shape)); }) > 1e-4);
  }
}

TEST_CASE("draws with huge means keep mean and spread") {
  RandomStream stream(5);
  const double n = 20000;
  double poisson = 0, poisson2 = 0, binomial = 0, binomial2 = 0;
  for (int i = 0; i < n; ++i) {
    const double x = (draw_poisson(stream, 1e9) - 1e9) / std::sqrt(1e9);
    const double y = (draw_binomial(stream, 4e9, 0.3) - 1.2e9) / std::sqrt(0.84e9);
    poisson += x;
    poisson2 += x * x;
    binomial += y;
    binomial2 += y * y;
  }
  CHECK(std::abs(poisson / n) < 4 / std::sqrt(n));
  CHECK(std::abs(binomial / n) < 4 / std::sqrt(n));
  CHECK(poisson2 / n == doctest::Approx(1).epsilon(0.04));
  CHECK(binomial2 / n == doctest::Approx(1).epsilon(0.04));
}

TEST_CASE("multinomial draws add up, skip weightless cells and have the right means") {
  const std::vector<double> weights = {3, 0, 1, 6, 0};
  const auto chances = conditional_chances(weights);
  RandomStream stream(2);
  std::vector<double> counts(5), sums(5);
  for (int i = 0; i < 10000; ++i) {
    draw_multinomial(stream, 25, chances, counts);
    REQUIRE(std::accumulate(counts.begin(), counts.end(), 0.0) == 25);
    for (std::size_t j = 0; j < 5; ++j) sums[j] += counts[j];
  }
  CHECK(sums[1] == 0);
  CHECK(sums[4] == 0);
  CHECK(sums[0] / 250000 == doctest::Approx(0.3).epsilon(0.01));
  CHECK(sums[2] / 250000 == doctest::Approx(0.1).epsilon(0.02));
}

TEST_CASE("the same seed gives the same draws") {
  // Recorded once; a change here changes every simulated answer and must be meant.
  RandomStream stream(default_seed);
  std::uint64_t digest = 0;
  for (int i = 0; i < 2000; ++i) {
    const double draws[] = {draw_poisson(stream, 3.5),
                            draw_poisson(stream, 77),
                            draw_binomial(stream, 90, 0.4),
                            draw_binomial(stream, 9, 0.8),
                            std::floor(1e9 * draw_gamma(stream, 1.7)),
                            std::floor(1e9 * draw_normal(stream))};
    for (const double d : draws)
      digest = digest * 0x100000001B3U + static_cast<std::uint64_t>(static_cast<std::int64_t>(d));
  }
  CHECK(digest == 4929710218200343019U);
}

}  // namespace
}  // namespace countsel
