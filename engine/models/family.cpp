// engine/models/family.cpp -- the Poisson family with log link.
//
// log P(count | mean) = saturated(count) - unit deviance / 2, with saturated(y) = y log y - y - log
// y!, found as -(log(2 pi y) / 2 + Stirling's remainder): neither part subtracts large numbers.
// Source: Loader, Fast and accurate computation of binomial probabilities (2000).
#include "engine/models/family.hpp"

#include <algorithm>
#include <cmath>

#include "engine/models/kernel.hpp"

namespace countsel {
namespace {

void poisson_step(std::size_t rows, const double* eta, const double* count, const double* exposure,
                  const double* weight, double* mean, double* score, double* information) {
  kernel().poisson_log(rows, eta, count, exposure, weight, mean, score, information);
}

/// The slope of the score's chord from the mean to the count: a row by itself then steps by log(count /
/// mean).
void poisson_damp(std::size_t rows, const double* count, const double* mean, const double* weight,
                  double* information) {
  for (std::size_t r = 0; r < rows; ++r)
    if (count[r] > 1.5 * mean[r] && (!weight || weight[r] > 0)) {
      const double ratio = count[r] / std::max(mean[r], 1e-300);
      information[r] = (weight ? weight[r] : 1.0) * (count[r] - mean[r]) / std::log(ratio);
    }
}

void poisson_fit(std::size_t rows, const double* count, const double* mean, const double* weight,
                 double* sums) {
  kernel().poisson_fit(rows, count, mean, weight, sums);
}

/// log y! - y log y + y, from mpmath at 40 digits.
constexpr double small[16] = {0.0,
                              1.0,
                              1.3068528194400546906,
                              1.4959226032237259266,
                              1.6328763858683831443,
                              1.7403021806115441212,
                              1.8286943966417709902,
                              1.9037903176782211644,
                              1.9690705693065628024,
                              2.0268062840554951661,
                              2.078561643135058455,
                              2.1254598450918098546,
                              2.1683346982058824268,
                              2.2078222061234453169,
                              2.2444185681250608968,
                              2.2785183673077405761};

double poisson_saturated(double y) {
  if (y < 16 && y == std::floor(y)) return -small[static_cast<int>(y)];
  const double v = 1 / (y * y);
  const double remainder =
      (1.0 / 12 -
       v * (1.0 / 360 - v * (1.0 / 1260 - v * (1.0 / 1680 - v * (1.0 / 1188 - v * 691.0 / 360360))))) /
      y;
  return -(0.91893853320467274178 + std::log(y) / 2 + remainder);
}

}  // namespace

const Family& poisson_log_family() {
  static constexpr Family family{"poisson", poisson_step, poisson_damp, poisson_fit, poisson_saturated, true};
  return family;
}

}  // namespace countsel
