// engine/models/levels.cpp -- one look at each row finds the levels; a table or a hash joins several.
#include "engine/models/levels.hpp"

#include <unordered_map>

#include "engine/refusal.hpp"

namespace countsel {

ObservedLevels observe_levels(const SourceColumn& column, std::span<const double> exposure) {
  const std::size_t levels = column.levels->size();
  ObservedLevels seen{{}, std::vector<double>(levels, 0.0)};
  std::vector<char> known(levels, 0);
  for (std::size_t i = 0; i < column.codes.size(); ++i) {
    const auto code = static_cast<std::size_t>(column.codes[i]);
    if (code >= levels) throw Refusal(Code::internal, "A level code of " + column.name + " has no level.");
    if (!known[code]) {
      known[code] = 1;
      seen.order.push_back(column.codes[i]);
    }
    seen.exposure[code] += exposure.empty() ? 1.0 : exposure[i];
  }
  return seen;
}

JointLevels join_levels(std::span<const SourceColumn> columns, const std::vector<std::size_t>& factors,
                        std::size_t rows) {
  JointLevels joint;
  joint.codes.resize(rows);
  std::uint64_t combinations = 1;
  for (const std::size_t f : factors) {
    const std::uint64_t levels = columns[f].levels->size();
    if (combinations > (std::uint64_t{1} << 62) / levels)
      throw Refusal(Code::too_large,
                    "The cross of " + std::to_string(factors.size()) + " columns has too many levels.");
    combinations *= levels;
  }
  const auto note = [&](std::size_t row) {
    std::vector<std::int32_t> tuple;
    for (const std::size_t f : factors) tuple.push_back(columns[f].codes[row]);
    joint.tuples.push_back(std::move(tuple));
    return static_cast<std::int32_t>(joint.tuples.size() - 1);
  };
  const auto key = [&](std::size_t row) {
    std::uint64_t k = 0;
    for (const std::size_t f : factors) k = k * columns[f].levels->size() + columns[f].codes[row];
    return k;
  };
  // A table costs its size to clear, so it must be small beside the rows or small outright.
  if (combinations <= 65536 || combinations <= rows / 4) {
    std::vector<std::int32_t> code_of(combinations, -1);
    for (std::size_t i = 0; i < rows; ++i) {
      std::int32_t& code = code_of[key(i)];
      if (code < 0) code = note(i);
      joint.codes[i] = code;
    }
  } else {
    std::unordered_map<std::uint64_t, std::int32_t> code_of;
    for (std::size_t i = 0; i < rows; ++i) {
      const auto [at, fresh] = code_of.try_emplace(key(i), 0);
      if (fresh) at->second = note(i);
      joint.codes[i] = at->second;
    }
  }
  return joint;
}

}  // namespace countsel
