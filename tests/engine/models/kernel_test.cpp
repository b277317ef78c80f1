// tests/engine/models/kernel_test.cpp -- the loops of both builds against plain sums, exponentials and
// logarithms.
#include "engine/models/kernel.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <random>
#include <vector>

using namespace countsel;

namespace {

std::vector<const Kernel*> builds() {
  std::vector<const Kernel*> all = {&generic_kernel()};
  if (&kernel() != &generic_kernel()) all.push_back(&kernel());
  return all;
}

std::vector<double> drawn(std::size_t n, double low, double high, unsigned seed) {
  std::mt19937_64 random(seed);
  std::uniform_real_distribution<double> uniform(low, high);
  std::vector<double> values(n);
  for (double& v : values) v = uniform(random);
  return values;
}

}  // namespace

TEST_CASE("the exponential is right to two units in the last place") {
  for (const Kernel* loops : builds()) {
    CAPTURE(loops->name);
    std::vector<double> x = drawn(4000, -700, 700, 1);
    const std::vector<double> near = drawn(4000, -2, 2, 2);
    x.insert(x.end(), near.begin(), near.end());
    std::vector<double> y(x.size());
    loops->exponential(x.size(), x.data(), y.data());
    for (std::size_t i = 0; i < x.size(); ++i) CHECK(std::fabs(y[i] / std::exp(x[i]) - 1) < 4.5e-16);
  }
}

TEST_CASE("unit deviances near and far from the mean") {
  for (const Kernel* loops : builds()) {
    CAPTURE(loops->name);
    for (const double y : {0.0, 1.0, 7.0, 1e3, 1e9, 0x1p53})
      for (const double ratio : {1e-12, 0.3, 0.71, 0.9, 1.0, 1.0001, 1.4, 1.42, 3.0, 1e12}) {
        const double mu = y == 0 ? ratio : y * ratio;
        const double count[4] = {y, y, y, y}, mean[4] = {mu, mu, mu, mu}, weight[4] = {1, 0, 2, 0};
        double sums[2] = {0, 0};
        loops->poisson_fit(4, count, mean, weight, sums);
        const long double gap = (static_cast<long double>(mu) - y) / (y == 0 ? 1 : y);
        const long double log =
            std::fabs(gap) < 0.5 ? std::log1p(gap) : std::log(static_cast<long double>(mu) / y);
        const long double unit = y == 0 ? mu : y * (gap - log);
        CAPTURE(y);
        CAPTURE(ratio);
        CHECK(sums[0] == doctest::Approx(static_cast<double>(6 * unit)).epsilon(1e-9));
        CHECK(sums[1] == doctest::Approx(3 * (mu - y) * (mu - y) / mu).epsilon(1e-12));
      }
  }
}

TEST_CASE("a block's columns, sums and cross-products") {
  constexpr std::size_t columns = 8, rows = block_rows, levels = 3, width = 4;
  const std::vector<double> flat = drawn(columns * rows, -1, 1, 3), h = drawn(rows, 0, 2, 4),
                            s = drawn(rows, -1, 1, 5);
  std::vector<const double*> source;
  for (std::size_t j = 0; j < columns; ++j) source.push_back(flat.data() + j * rows);
  const std::vector<double> centre = drawn(columns, -1, 1, 6), scale = drawn(columns, 1, 2, 7);
  const std::vector<double> gamma = drawn(columns, -1, 1, 8), many = drawn(columns * width, -0.5, 0.5, 9);
  std::vector<std::int32_t> code(rows);
  for (std::size_t r = 0; r < rows; ++r) code[r] = static_cast<std::int32_t>(r * r % levels);
  for (const Kernel* loops : builds()) {
    CAPTURE(loops->name);
    std::vector<double> z(columns * rows), eta(rows, 0.5), gradient(columns, 0.0),
        cross(columns * columns, 0.0);
    std::vector<double> table(levels * columns, 0.0), e(rows * width, 0.1), back(columns * width, 0.0),
        excess(width, 0.0);
    std::vector<double> level_table(levels * width, 0.0), added(rows * width, 0.0);
    loops->fill(rows, columns, source.data(), centre.data(), scale.data(), gamma.data(), z.data(),
                eta.data());
    loops->gradient(rows, columns, z.data(), s.data(), gradient.data());
    loops->cross(rows, columns, z.data(), h.data(), cross.data());
    loops->scatter(rows, columns, code.data(), z.data(), h.data(), table.data());
    loops->multiply(rows, columns, z.data(), width, many.data(), e.data());
    const std::vector<double> before = e;
    loops->excess(rows, width, h.data(), e.data(), excess.data());
    loops->multiply_back(rows, columns, z.data(), width, e.data(), back.data());
    loops->scatter_levels(rows, width, code.data(), s.data(), e.data(), level_table.data());
    loops->add_levels(rows, width, code.data(), h.data(), level_table.data(), added.data());
    const auto zat = [&](std::size_t r, std::size_t j) {
      return (flat[j * rows + r] - centre[j]) * scale[j];
    };
    for (std::size_t i = 0; i < columns; ++i) {
      double g = 0;
      for (std::size_t r = 0; r < rows; ++r) {
        CHECK(z[r * columns + i] == doctest::Approx(zat(r, i)).epsilon(1e-15));
        g += s[r] * zat(r, i);
      }
      CHECK(gradient[i] == doctest::Approx(g).epsilon(1e-12));
      for (std::size_t j = i; j < columns; ++j) {
        double sum = 0;
        for (std::size_t r = 0; r < rows; ++r) sum += h[r] * zat(r, i) * zat(r, j);
        CHECK(cross[i * columns + j] == doctest::Approx(sum).epsilon(1e-12));
      }
      for (std::size_t l = 0; l < levels; ++l) {
        double sum = 0;
        for (std::size_t r = 0; r < rows; ++r)
          if (code[r] == static_cast<std::int32_t>(l)) sum += h[r] * zat(r, i);
        CHECK(table[l * columns + i] == doctest::Approx(sum).epsilon(1e-12));
      }
    }
    for (std::size_t m = 0; m < width; ++m) {
      double total = 0;
      for (std::size_t r = 0; r < rows; ++r) {
        double x = 0.1;
        for (std::size_t j = 0; j < columns; ++j) x += zat(r, j) * many[j * width + m];
        CHECK(before[r * width + m] == doctest::Approx(x).epsilon(1e-13));
        total += h[r] * (std::expm1(x) - x);
        CHECK(e[r * width + m] == doctest::Approx(h[r] * std::expm1(x)).epsilon(1e-12));
        CHECK(added[r * width + m] ==
              doctest::Approx(h[r] * level_table[static_cast<std::size_t>(code[r]) * width + m])
                  .epsilon(1e-14));
      }
      CHECK(excess[m] == doctest::Approx(total).epsilon(1e-12));
      for (std::size_t j = 0; j < columns; ++j) {
        double sum = 0;
        for (std::size_t r = 0; r < rows; ++r) sum += zat(r, j) * e[r * width + m];
        CHECK(back[j * width + m] == doctest::Approx(sum).epsilon(1e-12));
      }
    }
    double eta_0 = 0.5;
    for (std::size_t j = 0; j < columns; ++j) eta_0 += zat(0, j) * gamma[j];
    CHECK(eta[0] == doctest::Approx(eta_0).epsilon(1e-14));
  }
}

TEST_CASE("small differences of predictors keep their digits") {
  for (const Kernel* loops : builds()) {
    std::vector<double> e(4, 1e-9), sums(4, 0.0);
    const std::vector<double> h(1, 1.0);
    loops->excess(1, 4, h.data(), e.data(), sums.data());
    CHECK(sums[0] == doctest::Approx(0.5e-18 + 1e-27 / 6).epsilon(1e-14));
    CHECK(e[0] == doctest::Approx(1e-9 + 0.5e-18).epsilon(1e-15));
  }
}
