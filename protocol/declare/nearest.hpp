// protocol/declare/nearest.hpp -- the known name nearest to an unknown one, for a hint.
#pragma once

#include <string>
#include <string_view>
#include <vector>

namespace countsel {

/// The nearest of `known` by edit distance, if it is near enough to be meant; else empty.
std::string nearest(std::string_view unknown, const std::vector<std::string>& known);
/// Number of single-character insertions, deletions, replacements and swaps from one to the other.
std::size_t edit_distance(std::string_view from, std::string_view to);

}  // namespace countsel
