// protocol/session/memory.hpp -- is there room for an answer, before it is worked out?
//
// A machine that runs out of memory ends the program, and every other request with it.
#pragma once

#include <cstddef>

namespace countsel {

/// Bytes that this process may still take, by the machine, its control group and its own limit.
std::size_t memory_left();

/// Refuses out_of_memory where `rows` rows of `columns` columns could not be answered in what is left.
void check_room(std::size_t rows, std::size_t columns);

}  // namespace countsel
