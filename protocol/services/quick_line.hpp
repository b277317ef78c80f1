// protocol/services/quick_line.hpp -- the words and numbers of a spoken line.
//
// line   := pair [("vs"|"versus"|"against") (pair | target)] {"per" base | "at" level} ["is it different?"]
// pair   := count [events] [("in"|"/"|"over"|"out of") exposure [unit]]
// target := rate "per" base
// A comma before three digits is a thousands mark, a comma before a space only a pause.
#pragma once

#include <optional>
#include <string>
#include <string_view>

namespace countsel {

struct SpokenPair {
  double count = 0;
  std::string events;  ///< words after the count, as said
  std::optional<double> exposure;
  std::string unit;  ///< words after the exposure, as said
};

struct SpokenLine {
  SpokenPair first;
  std::optional<SpokenPair> second;
  std::optional<double> target_rate, per, confidence;
  std::string per_unit;  ///< words after the base, as said
};

/// Refuses bad_value, with an example that works.
SpokenLine read_spoken(std::string_view line);

}  // namespace countsel
