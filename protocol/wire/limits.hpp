// protocol/wire/limits.hpp -- how much one line may hold beside the cells of its columns.
//
// Cells take at most a few times the bytes they are written with. A key, a column or a value of the small
// parts takes a hundred times as many, so that a line within --max-line could still ask for all memory.
#pragma once

#include <cstddef>

namespace countsel::limits {

constexpr std::size_t deepest = 64;             ///< levels of nesting
constexpr std::size_t most_columns = 16'384;    ///< as many as a sheet has
constexpr std::size_t most_keys = 100'000;      ///< keys of all objects together
constexpr std::size_t most_values = 1'000'000;  ///< in options, words, roles, only

}  // namespace countsel::limits
