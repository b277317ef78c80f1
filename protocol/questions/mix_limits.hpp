// protocol/questions/mix_limits.hpp -- the ways to limits of standardised rates: names, methods, sources.
#pragma once

#include "engine/rates/standardise.hpp"
#include "protocol/declare/shared_options.hpp"

namespace countsel {

/// One list of names for both ways; `unset` stands for gamma (direct) or exact (indirect).
enum class MixLimits {
  unset,
  gamma,
  mid_p,
  dobson,
  normal,
  exact,
  score,
  likelihood,
  jeffreys,
  byar,
  wald,
  log_wald,
  square_root
};

const std::vector<std::pair<std::string, MixLimits>>& mix_limit_names();
/// The engine's method of that name; refuses bad_value for a name of the other way.
DirectMethod direct_method(MixLimits limits);
RateMethod indirect_method(MixLimits limits);

/// Where limits of a directly standardised rate come from, and with several groups those of the ratio of two.
std::vector<Source> direct_sources(DirectMethod method, bool several);
std::vector<Source> indirect_sources(RateMethod method);
std::vector<Source> mix_sources();

}  // namespace countsel
