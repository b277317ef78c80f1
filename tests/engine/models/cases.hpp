// tests/engine/models/cases.hpp -- reads reference cases: tables, models and expected figures.
#pragma once

#include <algorithm>
#include <cmath>
#include <cstdlib>
#include <fstream>
#include <map>
#include <nlohmann/json.hpp>
#include <sstream>
#include <string>
#include <thread>
#include <vector>

#include "engine/models/glm.hpp"

namespace countsel::cases {

using Json = nlohmann::ordered_json;

inline Json read_json(const std::string& name) {
  std::ifstream file(std::string(REFERENCE_DIR) + "/models/" + name);
  return Json::parse(file);
}

using Table = std::map<std::string, std::vector<std::string>>;

inline Table read_table(const std::string& name) {
  std::ifstream file(std::string(REFERENCE_DIR) + "/models/data/" + name);
  std::string line, cell;
  std::vector<std::string> heads;
  Table table;
  while (std::getline(file, line)) {
    if (!line.empty() && line.back() == '\r') line.pop_back();
    std::stringstream cells(line);
    std::size_t at = 0;
    const bool head = heads.empty();
    while (std::getline(cells, cell, ',')) {
      if (cell.size() >= 2 && cell.front() == '"') cell = cell.substr(1, cell.size() - 2);
      if (head)
        heads.push_back(cell);
      else
        table[heads[at++]].push_back(cell);
    }
  }
  return table;
}

inline double number(const std::string& text) { return std::strtod(text.c_str(), nullptr); }
inline double number(const Json& value) {
  return value.is_string() ? number(value.get<std::string>()) : value.get<double>();
}
inline std::vector<double> numbers(const std::vector<std::string>& texts) {
  std::vector<double> values;
  for (const auto& text : texts) values.push_back(number(text));
  return values;
}
inline std::vector<double> numbers(const Json& list) {
  std::vector<double> values;
  for (const auto& value : list) values.push_back(number(value));
  return values;
}

/// A level column by first appearance.
struct Levels {
  std::vector<std::string> names;
  std::vector<std::int32_t> codes;
  explicit Levels(const std::vector<std::string>& texts) {
    std::map<std::string, std::int32_t> code_of;
    for (const auto& text : texts) {
      const auto [at, fresh] = code_of.try_emplace(text, static_cast<std::int32_t>(names.size()));
      if (fresh) names.push_back(text);
      codes.push_back(at->second);
    }
  }
  /// The cases' reference: first sorted, as numbers if all are.
  std::string first_sorted() const {
    std::vector<std::string> sorted = names;
    bool numeric = true;
    for (const auto& name : names) {
      char* end = nullptr;
      std::strtod(name.c_str(), &end);
      numeric &= *end == 0 && !name.empty();
    }
    std::sort(sorted.begin(), sorted.end(), [&](const std::string& a, const std::string& b) {
      return numeric ? number(a) < number(b) : a < b;
    });
    return sorted.front();
  }
};

/// A case made ready: columns, design and data, with the storage they point at.
struct Ready {
  Table table;
  std::map<std::string, std::vector<double>> number_store;
  std::map<std::string, Levels> level_store;
  std::vector<SourceColumn> columns;
  std::map<std::string, std::size_t> column_of;
  std::vector<Term> terms;
  Design design;
  std::vector<double> count, exposure, log_exposure, weight;
  std::vector<std::int32_t> cluster;
  GlmData data;
  std::map<std::string, std::size_t> coefficient_of;  ///< by the cases' names

  std::size_t number_column(const std::string& name) {
    if (!column_of.contains(name)) {
      number_store[name] = numbers(table.at(name));
      column_of[name] = columns.size();
      columns.push_back({name, number_store[name], {}, nullptr, std::nullopt});
    }
    return column_of[name];
  }
  std::size_t level_column(const std::string& name, const Json& model) {
    const std::string key = "levels " + name;
    if (!column_of.contains(key)) {
      const Levels& levels = level_store.try_emplace(name, table.at(name)).first->second;
      std::string reference = levels.first_sorted();
      if (model.contains("reference") && model["reference"].contains(name))
        reference = model["reference"][name];
      column_of[key] = columns.size();
      columns.push_back({name, {}, levels.codes, &levels.names, reference});
    }
    return column_of[key];
  }
  Term term(const Json& given, const Json& model) {
    if (given.is_string()) return slope_of(number_column(given));
    if (given.contains("levels")) return levels_of(level_column(given["levels"], model));
    if (given.contains("log"))
      return log_of(number_column(given["log"]), given.contains("plus") ? given["plus"].get<double>() : 0);
    if (given.contains("power")) return power_of(number_column(given["power"]), given["to"].get<double>());
    std::vector<Term> parts;
    for (const auto& part : given["cross"]) parts.push_back(term(part, model));
    return cross_of(parts);
  }
};

/// The cases write "smoke:age[50]", "wool[B]:tension[H]", "log(dose+10)" for what we call by term and level.
inline std::string case_name(const Ready& ready, const CoefficientRow& row) {
  if (!row.term) return "baseline";
  const TermColumns& columns = ready.design.terms[*row.term];
  std::string name;
  const Term& term = ready.terms[*row.term];
  const std::vector<Term> parts = term.kind == Term::Kind::cross ? term.parts : std::vector<Term>{term};
  std::size_t combination = 0;
  if (!columns.factors.empty()) combination = (*row.coefficient - columns.first) / columns.products.size();
  std::size_t factor = 0;
  for (const Term& part : parts) {
    if (!name.empty()) name += ":";
    const SourceColumn& column = ready.columns[part.column];
    if (part.kind == Term::Kind::levels)
      name += column.name + "[" + (*column.levels)[columns.combinations[combination][factor++]] + "]";
    else if (part.kind == Term::Kind::power)
      name += column.name + "^" + std::to_string(static_cast<int>(part.to));
    else if (part.kind == Term::Kind::log)
      name += "log(" + column.name +
              (part.plus != 0 ? "+" + std::to_string(static_cast<int>(part.plus)) : "") + ")";
    else
      name += column.name;
  }
  return name;
}

inline void make_ready(Ready& ready, const Json& given) {
  const Json& model = given["model"];
  ready.table = read_table(given["data"]);
  for (const auto& term : model["terms"]) ready.terms.push_back(ready.term(term, model));
  ready.count = numbers(ready.table.at(model["count"]));
  if (model.contains("exposure")) ready.exposure = numbers(ready.table.at(model["exposure"]));
  if (model.contains("log_exposure_column"))
    ready.log_exposure = numbers(ready.table.at(model["log_exposure_column"]));
  if (model.contains("weights")) ready.weight = numbers(ready.table.at(model["weights"]));
  if (model.contains("cluster")) ready.cluster = Levels(ready.table.at(model["cluster"])).codes;
  ready.design = make_design(ready.columns, ready.terms, ready.count.size(), ready.exposure);
  ready.data = {ready.count, ready.exposure, ready.log_exposure, ready.weight, WeightsAre::frequency};
  for (const auto& row : ready.design.table)
    if (row.coefficient) ready.coefficient_of[case_name(ready, row)] = *row.coefficient;
}

/// Digits that agree: -log10 of the relative error, at most 16.
inline double digits(double got, double expected, double floor = 0) {
  if (got == expected) return 16;
  const double scale = std::max(std::fabs(expected), floor);
  const double error = std::fabs(got - expected) / scale;
  return std::isnan(error) ? -1 : std::min(16.0, -std::log10(error));
}

/// Workers with real threads, to see that answers do not depend on them.
inline Workers threads(std::size_t hands) {
  return {hands, [hands](std::size_t tasks, const std::function<void(std::size_t)>& piece) {
            std::vector<std::thread> team;
            for (std::size_t h = 0; h < hands; ++h)
              team.emplace_back([&, h] {
                for (std::size_t i = h; i < tasks; i += hands) piece(i);
              });
            for (auto& one : team) one.join();
          }};
}

}  // namespace countsel::cases
