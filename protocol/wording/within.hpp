// protocol/wording/within.hpp -- what is said of two groups compared inside strata.
#pragma once

#include <string>
#include <vector>

#include "engine/rates/strata.hpp"
#include "protocol/declare/answer.hpp"
#include "protocol/wording/words.hpp"

namespace countsel {

struct SaidWithin {
  std::string first, reference;  ///< names of the groups
  std::string column;            ///< of the strata
  std::vector<std::string> names;
  WithinStrata result;  ///< differences per unit of exposure; said per `per`
  bool of_ratio = true;
  std::string limits;  ///< name of the method
  Side side = Side::both;
  Direction direction = Direction::either;
  double per = 1, level = 0.05;  ///< level: 1 - confidence
};

/// Adjusted beside crude, what chance would do, and where strata disagree.
std::string say_within(const Wording& wording, const SaidWithin& said);
/// Crude and adjusted on opposite sides, strata that differ, a test and limits that do not agree.
void note_within(const SaidWithin& said, std::vector<Note>& notes);

}  // namespace countsel
