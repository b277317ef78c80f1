// protocol/wording/findings.hpp -- what an audit found, as it is said: where, what, and what to do.
//
// Checked by: tests/protocol/look_over_test.py.
#pragma once

#include <functional>
#include <span>
#include <string>
#include <vector>

#include "engine/refusal.hpp"
#include "engine/table/audit.hpp"

namespace countsel {

/// The names of the columns that were looked at, their labels, and the table's row of each row looked at.
struct LookedAt {
  std::string count, exposure, label;
  std::span<const std::string> labels;
  std::function<std::int64_t(std::int64_t row)> table_row;
};

struct SaidFinding {
  std::string kind;
  Place place;
  std::string text, to_do;
};

/// Name of a kind of finding on the wire.
std::string finding_name(FindingKind kind);
/// `place` says where, in the host's own words ("Falls.C7 (row 3 of count)").
SaidFinding say_finding(const Finding& finding, const LookedAt& at,
                        const std::function<std::string(const Place&)>& place);

}  // namespace countsel
