// engine/rates/standardise.hpp -- rates as if every group had the same mix.
//
// Direct: each group's stratum rates are averaged with one set of weights. Indirect: a group's count is
// compared with the number expected had the standard's stratum rates held in it.
// Source: named at each method.
// Checked by: tests/engine/rates/standardise_test.cpp, tests/reference/rates/standardise.tsv.
#pragma once

#include <cstddef>
#include <cstdint>
#include <optional>
#include <span>
#include <vector>

#include "engine/rates/limits.hpp"

namespace countsel {

/// Counts and exposures by group and stratum, row after row of groups; a cell without rows has exposure 0.
struct StrataTable {
  std::size_t groups = 0, strata = 0;
  std::vector<double> counts, exposures;

  std::size_t at(std::size_t group, std::size_t stratum) const { return group * strata + stratum; }
};

/// Adds up rows into cells. Codes from 0; a row with a negative code is left out. Refuses length_mismatch,
/// bad_count, bad_exposure (a row with events and no exposure, a negative exposure), too_large beyond
/// 5e7 cells. Cost: O(rows + cells).
StrataTable tabulate(std::span<const double> counts, std::span<const double> exposures,
                     std::span<const std::int32_t> group_codes, std::span<const std::int32_t> stratum_codes,
                     std::size_t groups, std::size_t strata);

/// The exposures of all groups together, stratum by stratum: the default weights.
std::vector<double> exposure_weights(const StrataTable& table);

struct Cell {
  std::size_t group, stratum;
};

/// Cells that bar a direct rate: a weight above 0, no exposure. In the table's order.
std::vector<Cell> missing_cells(const StrataTable& table, std::span<const double> weights);

/// How a directly standardised rate's limits are found.
///   gamma   Fay and Feuer, Statist. Med. 16 (1997) 791-801; ratio: Fay, Commun. Statist. Theory Meth. 28
///   (1999) mid_p   Fay and Kim, Biometrical J. 59 (2017) 377-387; ratio as engine/rates/weighted_count.hpp
///   dobson  Dobson, Kuulasmaa, Eberle and Scherer, Statist. Med. 10 (1991) 457-462, with exact limits for
///   the
///           sum of the counts, cut at 0
///   normal  rate -+ z standard error, cut at 0 (Breslow and Day 1987, section 2.2)
/// With no events dobson and normal have no value (NaN). Ratios by dobson and normal: normal on the log scale
/// with the sum of both squared relative standard errors (Breslow and Day 1987, section 2.2), NaN where
/// either rate is 0.
enum class DirectMethod { gamma, mid_p, dobson, normal };

struct DirectSpec {
  DirectMethod method = DirectMethod::gamma;
  double confidence = 0.95;
  Side side = Side::both;
  std::optional<std::size_t> reference;  ///< ratios are to this group; NaN without
};

/// One group. count, exposure and crude_rate are of all its strata. Direct: expected is what the weights,
/// read as exposures, would have seen at the group's rates; ratio is to the reference's rate, whose own row
/// has ratio 1 and no limits. Indirect: expected is at the standard's rates, ratio is observed over expected.
struct AdjustedRate {
  double count, exposure, crude_rate, expected, rate, low, high, ratio, ratio_low, ratio_high;
};

/// Directly standardised rates, one to a group.
///   weights  one to a stratum, 0 or more, not all 0; need not add up to 1; a stratum of weight 0 is
///            left out of the rate
/// Refuses length_mismatch, bad_value (weights, confidence, reference), bad_exposure (see missing_cells; the
/// first is named by group and stratum, from 1).
std::vector<AdjustedRate> direct_rates(const StrataTable& table, std::span<const double> weights,
                                       const DirectSpec& spec);

/// Indirectly standardised rates, one to a group.
///   standard_rates      one to a stratum, 0 or more, taken as known without error
///   standard_exposures  one to a stratum, or empty: the mix whose crude rate turns a ratio into an adjusted
///   rate
///                       (without it rate, low and high are NaN)
/// Ratio limits are rate_limits with the expected number as exposure (Breslow and Day 1987, section 2.3). A
/// group with nothing expected has ratio NaN, limits 0 to +infinity; refuses bad_value if it has events all
/// the same.
std::vector<AdjustedRate> indirect_rates(const StrataTable& table, std::span<const double> standard_rates,
                                         std::span<const double> standard_exposures,
                                         const LimitsSpec& limits);

}  // namespace countsel
