// engine/rates/standardise_table.cpp -- rows into cells, and what the cells lack.
#include "engine/rates/checks.hpp"
#include "engine/rates/standardise.hpp"
#include "engine/refusal.hpp"

namespace countsel {

StrataTable tabulate(std::span<const double> counts, std::span<const double> exposures,
                     std::span<const std::int32_t> group_codes, std::span<const std::int32_t> stratum_codes,
                     std::size_t groups, std::size_t strata) {
  if (counts.size() != exposures.size() || counts.size() != group_codes.size() ||
      counts.size() != stratum_codes.size())
    throw Refusal(Code::length_mismatch, "count, exposure, group and stratum differ in length.");
  if (static_cast<double>(groups) * static_cast<double>(strata) > 5e7)
    throw Refusal(Code::too_large, "There are more than 50 million pairs of group and stratum.");
  StrataTable table{groups, strata, std::vector<double>(groups * strata),
                    std::vector<double>(groups * strata)};
  for (std::size_t i = 0; i < counts.size(); ++i) {
    if (group_codes[i] < 0 || stratum_codes[i] < 0) continue;
    require_count(counts[i], "count", i + 1);
    if (exposures[i] != 0 || counts[i] > 0) require_exposure(exposures[i], "exposure", i + 1);
    const std::size_t cell =
        table.at(static_cast<std::size_t>(group_codes[i]), static_cast<std::size_t>(stratum_codes[i]));
    table.counts[cell] += counts[i];
    table.exposures[cell] += exposures[i];
  }
  return table;
}

std::vector<double> exposure_weights(const StrataTable& table) {
  std::vector<double> weights(table.strata);
  for (std::size_t g = 0; g < table.groups; ++g)
    for (std::size_t s = 0; s < table.strata; ++s) weights[s] += table.exposures[table.at(g, s)];
  return weights;
}

std::vector<Cell> missing_cells(const StrataTable& table, std::span<const double> weights) {
  std::vector<Cell> missing;
  for (std::size_t g = 0; g < table.groups; ++g)
    for (std::size_t s = 0; s < table.strata; ++s)
      if (weights[s] > 0 && !(table.exposures[table.at(g, s)] > 0)) missing.push_back({g, s});
  return missing;
}

}  // namespace countsel
