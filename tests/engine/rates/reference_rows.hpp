// tests/engine/rates/reference_rows.hpp -- reads tests/reference tables whose inputs and answers have names.
//
// Columns: case, source, inputs, expected, tolerance. Inputs and expected are "name=1,2,3 name=4"; a
// tolerance is "r1e-12" (relative) or "a0.005" (absolute). Lines with # are comments.
#pragma once

#include <doctest/doctest.h>

#include <cmath>
#include <cstdlib>
#include <fstream>
#include <limits>
#include <map>
#include <sstream>
#include <string>
#include <vector>

namespace countsel {

struct ReferenceRow {
  std::string name;
  std::map<std::string, std::vector<double>> inputs, expected;
  double relative = 0, absolute = 0;

  double in(const std::string& key) const { return inputs.at(key).at(0); }
  const std::vector<double>& list(const std::string& key) const { return inputs.at(key); }

  /// Compares with the expected value of that name, where the row has one; infinities must be equal.
  void check(const std::string& key, double value, std::size_t place = 0) const {
    const auto found = expected.find(key);
    if (found == expected.end()) return;
    const double wanted = found->second.at(place);
    CAPTURE(name);
    CAPTURE(key);
    CAPTURE(place);
    CAPTURE(value);
    CAPTURE(wanted);
    if (std::isinf(wanted)) {
      CHECK(value == wanted);
    } else {
      CHECK(std::abs(value - wanted) <= absolute + relative * std::abs(wanted));
    }
  }
};

inline std::map<std::string, std::vector<double>> named_values(const std::string& text) {
  std::map<std::string, std::vector<double>> values;
  std::istringstream words(text);
  std::string word;
  while (words >> word) {
    const auto equals = word.find('=');
    REQUIRE(equals != std::string::npos);
    std::istringstream list(word.substr(equals + 1));
    std::string one;
    auto& into = values[word.substr(0, equals)];
    while (std::getline(list, one, ','))
      into.push_back(std::strtod(one.c_str(), nullptr));  // 1e-310 is a value
  }
  return values;
}

/// Rows of a table whose case begins with `prefix`; there must be some.
inline std::vector<ReferenceRow> reference_rows(const std::string& table, const std::string& prefix) {
  std::ifstream file(std::string(REFERENCE_DIR) + "/rates/" + table);
  REQUIRE(file);
  std::vector<ReferenceRow> rows;
  std::string line;
  while (std::getline(file, line)) {
    if (line.empty() || line[0] == '#' || line.rfind("case\t", 0) == 0 || line.rfind(prefix, 0) != 0)
      continue;
    std::istringstream columns(line);
    std::string name, source, inputs, expected, tolerance;
    std::getline(columns, name, '\t');
    std::getline(columns, source, '\t');
    std::getline(columns, inputs, '\t');
    std::getline(columns, expected, '\t');
    std::getline(columns, tolerance, '\t');
    REQUIRE(tolerance.size() > 1);
    ReferenceRow row{name, named_values(inputs), named_values(expected)};
    (tolerance[0] == 'r' ? row.relative : row.absolute) = std::strtod(tolerance.c_str() + 1, nullptr);
    rows.push_back(row);
  }
  REQUIRE(!rows.empty());
  return rows;
}

}  // namespace countsel
