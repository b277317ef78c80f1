// protocol/services/look_over_cells.hpp -- what single cells and the header give to think about.
#pragma once

#include <string>
#include <vector>

#include "engine/table/audit.hpp"
#include "protocol/data/cell_kinds.hpp"
#include "protocol/data/places.hpp"
#include "protocol/wording/findings.hpp"

namespace countsel {

enum class ColumnPart { count, exposure, label, other };

/// Column names that are numbers: the first row of data may have been taken for a header.
std::vector<SaidFinding> header_findings(const Table& table);
/// One finding for each kind of cell that a question would stumble over, with the first few rows named.
std::vector<SaidFinding> cell_findings(const std::string& column, const CellKinds& cells, ColumnPart part,
                                       const Places& places);
/// What the columns say together; of one kind at most 20, then how many more there are.
void add_findings(const std::vector<Finding>& found, const LookedAt& at, const Places& places,
                  std::vector<SaidFinding>& findings);

}  // namespace countsel
