// engine/rates/dispersion.hpp -- do the rows of a group vary more than Poisson counts would?
//
// Pearson's statistic of each row round its group's rate, over its degrees of freedom.
// Source: Fisher, Thornton and Mackenzie 1922 (index of dispersion); McCullagh and Nelder 1989, ch. 6.
// Checked by: tests/engine/rates/dispersion_test.cpp.
#pragma once

#include <cstddef>
#include <cstdint>
#include <span>

namespace countsel {

/// phi = pearson / df; NaN where df is 0.
struct Dispersion {
  double pearson, df, phi;
};

/// Pearson's dispersion of rows round their own group's rate.
///   counts, exposures  n rows
///   group_codes        n rows, 0 to groups - 1; a negative code leaves the row out
/// df is rows less groups. A group without events says nothing about spread: its rows count neither in
/// the statistic nor in df. Refuses length_mismatch.
Dispersion pooled_dispersion(std::span<const double> counts, std::span<const double> exposures,
                             std::span<const std::int32_t> group_codes, std::size_t groups);

/// Upper tail of chi-square at the statistic: the chance of so much spread from Poisson counts. NaN where df
/// is 0.
double dispersion_p(const Dispersion& dispersion);

/// The dispersion that `scaled` spread uses: phi, never below 1; NaN stays NaN.
double at_least_one(double phi);

}  // namespace countsel
