// protocol/wording/expected.hpp -- what is said of counts against expected numbers.
#pragma once

#include <string>
#include <vector>

#include "engine/rates/expected_ratio.hpp"
#include "protocol/declare/answer.hpp"
#include "protocol/wording/words.hpp"

namespace countsel {

/// Where the expected number came from.
enum class Expectation { number, target, past };

struct SaidExpected {
  ExpectedRatio all;  ///< all rows together
  Expectation from;
  double exposure;
  double rate, target;  ///< per `per`; target NaN where the rows' targets differ
  CouldShow could;
  Side side;
  Direction direction;
  double level;              ///< 1 - confidence
  std::string limits, test;  ///< names of the methods
  bool exposure_given;
};

/// Count and expected number, the ratio with its limits, what chance alone would do.
std::string say_expected(const Wording& wording, const SaidExpected& said);
/// Which rows are beyond chance by themselves; empty where none is.
std::string say_beyond(const std::vector<std::string>& labels, const std::vector<ExpectedRatio>& rows,
                       const std::vector<double>& p_adjusted, double level, bool adjusted);

}  // namespace countsel
