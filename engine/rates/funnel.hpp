// engine/rates/funnel.hpp -- many units: which lie further from the benchmark than chance would put them?
//
// Each count is held against the count distribution it would have at the benchmark: Poisson, or a negative
// binomial wide enough for the spread between units that chance does not explain. P-values, deviates, limits
// and standings all come from that one distribution, so they cannot contradict each other.
// Source: Spiegelhalter 2005, Stat. Med. 24, 1185-1202 (funnel, winsorised over-dispersion);
// DerSimonian and Laird 1986, Control. Clin. Trials 7 (moment estimator of the between-unit variance).
// Checked by: tests/engine/rates/funnel_test.cpp, tests/reference/rates/funnel.tsv.
#pragma once

#include <cstddef>
#include <limits>
#include <span>
#include <vector>

namespace countsel {

/// What widens the distribution beyond Poisson.
///   none    nothing
///   scaled  variance = dispersion x mean, at every size of unit
///   added   the rate itself varies between units with `between_sd` on the log scale:
///           variance = mean + between_sd^2 mean^2
/// A widened count is negative binomial with that mean and variance; its shape is mean / (dispersion - 1)
/// or 1 / between_sd^2, and no spread found leaves it Poisson.
enum class Widening { none, scaled, added };

/// Spread between units beyond chance. Deviates are winsorised first: the lowest and the highest
/// `winsorise` of them (whole number of units, rounded down) are set to the nearest one that remains.
///   dispersion  mean square of the deviates (count - expected) / sqrt(expected); about 1 for Poisson counts
///   between_sd  on the log scale, 0 where no more spread than chance is found: with z the winsorised
///               log(count / expected) sqrt(expected), w = expected and n units, the square root of
///               (sum z^2 - (n - 1)) / (sum w - sum w^2 / sum w)
///   on_log_scale  false where units without events are too many for the winsorising to reach past them:
///               a count of 0 has no logarithm, so z is then (count - expected) / sqrt(expected), to first
///               order the same
/// Both NaN with fewer than two units of expected above 0.
struct UnitSpread {
  double dispersion, between_sd;
  bool on_log_scale;
};

/// Refuses bad_value (winsorise outside [0, 0.5)), length_mismatch.
UnitSpread spread_between_units(std::span<const double> counts, std::span<const double> expected,
                                double winsorise);

/// The distribution of a unit's count at the benchmark.
struct FunnelModel {
  double benchmark = 0;  ///< events per unit of exposure
  Widening widening = Widening::none;
  double dispersion = 1;  ///< heeded by scaled; taken as 1 where below
  double between_sd = 0;  ///< heeded by added

  double shape(double mean) const;
};

struct FunnelSpec {
  double benchmark = std::numeric_limits<double>::quiet_NaN();  ///< NaN: all counts over all exposures
  Widening widening = Widening::none;
  double winsorise = 0.1;              ///< at each end
  double inner = 0.95, outer = 0.998;  ///< bands, 0 < inner < outer < 1
};

/// Standing by the bands: outside the inner one low or high, outside the outer one far low or far high.
enum class Standing { within, low, high, far_low, far_high };

/// One entry per unit, in the order given; `ratio` is count over expected, NaN where expected is 0.
struct Funnel {
  FunnelModel model;
  UnitSpread spread;  ///< as found, whether or not it widens the model
  std::vector<double> expected, ratio, z, p_value;
  std::vector<Standing> standing;
  std::size_t beyond_inner = 0, beyond_outer = 0;  ///< units outside each band
};

/// Holds every unit against the benchmark.
///   counts     n units, whole, 0 or more
///   exposures  n units, above 0; for ratios to an expected number, the expected numbers
/// A unit is outside a band exactly when its p-value is below 1 - band, which is exactly when its rate
/// lies outside funnel_limits at its exposure.
/// Refuses bad_count, bad_exposure, length_mismatch, bad_value (bands, winsorise, benchmark), too_few (no
/// unit). Cost: O(n log n); 10,000 units in some tens of milliseconds.
Funnel funnel(std::span<const double> counts, std::span<const double> exposures, const FunnelSpec& spec);

/// Limits as rates per unit of exposure, one entry per exposure: a rate inside them, ends included, is
/// within the band. They are the exact steps of a whole count over its exposure.
struct FunnelLimits {
  std::vector<double> exposure, low_inner, high_inner, low_outer, high_outer;
};
FunnelLimits funnel_limits(std::span<const double> exposures, const FunnelModel& model, double inner,
                           double outer);

/// Exposures to draw the funnel at: up to `points` of them, evenly spaced in their logarithm from the least
/// to the greatest given; a single one where all are alike.
std::vector<double> funnel_exposures(std::span<const double> exposures, std::size_t points);

}  // namespace countsel
