// engine/rates/standardise_indirect.cpp -- observed over expected at the standard's rates.
#include <cmath>
#include <limits>

#include "engine/numbers/sums.hpp"
#include "engine/rates/standardise.hpp"
#include "engine/refusal.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double no_value = std::numeric_limits<double>::quiet_NaN();

void require_standard(std::span<const double> values, std::size_t strata, const char* role) {
  if (values.size() != strata)
    throw Refusal(Code::length_mismatch, "Each stratum needs one standard value.", {{role}});
  for (std::size_t s = 0; s < values.size(); ++s)
    if (!(values[s] >= 0) || std::isinf(values[s]))
      throw Refusal(Code::bad_value, "A standard rate or exposure is a number, 0 or more.",
                    {{role, static_cast<std::int64_t>(s + 1)}});
}

// The standard's own crude rate: its stratum rates averaged over its own mix.
double crude_standard(std::span<const double> rates, std::span<const double> exposures) {
  if (exposures.empty()) return no_value;
  Sum events;
  for (std::size_t s = 0; s < rates.size(); ++s) events.add(rates[s] * exposures[s]);
  return events.value() / sum(exposures);
}

}  // namespace

std::vector<AdjustedRate> indirect_rates(const StrataTable& table, std::span<const double> standard_rates,
                                         std::span<const double> standard_exposures,
                                         const LimitsSpec& limits) {
  require_standard(standard_rates, table.strata, "standard_rate");
  if (!standard_exposures.empty()) {
    require_standard(standard_exposures, table.strata, "standard_exposure");
    if (!(sum(standard_exposures) > 0))
      throw Refusal(Code::bad_exposure, "The standard has no exposure.", {{"standard_exposure"}});
  }
  const double standard = crude_standard(standard_rates, standard_exposures);
  std::vector<AdjustedRate> rates;
  rates.reserve(table.groups);
  for (std::size_t g = 0; g < table.groups; ++g) {
    Sum count, exposure, expected;
    for (std::size_t s = 0; s < table.strata; ++s) {
      const std::size_t cell = table.at(g, s);
      count.add(table.counts[cell]);
      exposure.add(table.exposures[cell]);
      expected.add(standard_rates[s] * table.exposures[cell]);
    }
    AdjustedRate rate{count.value(),
                      exposure.value(),
                      count.value() / exposure.value(),
                      expected.value(),
                      0,
                      0,
                      0,
                      no_value,
                      0,
                      infinity};
    if (rate.expected > 0) {
      const Limits ratio = rate_limits(rate.count, rate.expected, limits);
      rate.ratio = rate.count / rate.expected;
      rate.ratio_low = ratio.low;
      rate.ratio_high = ratio.high;
    } else if (rate.count > 0) {
      throw Refusal(
          Code::bad_value,
          "Events happened in a group where the standard's rates expect none; their ratio has no value.",
          {{"standard_rate"}});
    }
    rate.rate = rate.ratio * standard;
    rate.low = rate.ratio_low * standard;
    rate.high = rate.ratio_high * standard;
    rates.push_back(rate);
  }
  return rates;
}

}  // namespace countsel
