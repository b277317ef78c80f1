// protocol/wording/mix.hpp -- what is said of rates made comparable: one mix for all, or rate and mix apart.
#pragma once

#include <string>
#include <vector>

#include "engine/rates/kitagawa.hpp"
#include "engine/rates/standardise.hpp"
#include "protocol/declare/answer.hpp"
#include "protocol/wording/words.hpp"

namespace countsel {

/// "the mix of age", or "the mix" where the strata's column has no name of its own.
std::string the_mix(const std::string& column);

struct SaidMix {
  std::vector<std::string> groups;
  std::vector<AdjustedRate> rates;  ///< rates per unit of exposure; crude and adjusted are said per `per`
  std::size_t reference = 0;        ///< of direct ratios, where there are several groups
  bool direct = true;
  std::string stratum;  ///< the strata's column
  std::string limits;   ///< name of the method
  Side side = Side::both;
  double per = 1;
};

/// The adjusted rate or ratio beside the crude one.
std::string say_mix(const Wording& wording, const SaidMix& said);
/// Fewer than ten events; crude and adjusted on opposite sides; indirect ratios that are not to be divided.
void note_mix(const Wording& wording, const SaidMix& said, std::vector<Note>& notes);

/// The difference, and how much of it is rate and how much mix; parts per `per`.
std::string say_parts(const Wording& wording, const std::string& first, const std::string& reference,
                      double rate1, double rate0, const RateOrMix& parts, const std::string& stratum,
                      const std::string& method);

}  // namespace countsel
