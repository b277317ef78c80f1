// tests/engine/models/design_test.cpp -- names, references, crosses and refusals of a design; patterns of its
// rows.
#include "engine/models/design.hpp"

#include <doctest/doctest.h>

#include <cmath>

#include "engine/models/patterns.hpp"
#include "synthetic.hpp"

using namespace countsel;

namespace {

const std::vector<std::string> metals = {"iron", "pvc", "steel", "lead"}, soils = {"clay", "sand"};
const std::vector<std::int32_t> metal = {1, 0, 2, 0, 1, 2}, soil = {0, 1, 0, 0, 1, 1};
const std::vector<double> age = {1, 2, 3, 4, 5, 6}, exposure = {1, 4, 1, 1, 2, 1};
const std::vector<SourceColumn> columns = {{"metal", {}, metal, &metals, std::nullopt},
                                           {"soil", {}, soil, &soils, "clay"},
                                           {"age", age, {}, nullptr, std::nullopt}};

Code refused(std::span<const SourceColumn> given, std::vector<Term> terms, std::size_t rows = 6) {
  try {
    make_design(given, terms, rows);
  } catch (const Refusal& refusal) {
    return refusal.code;
  }
  return Code::internal;
}

}  // namespace

TEST_CASE("levels in order of appearance, the reference in its place") {
  const std::vector<Term> terms = {levels_of(0), slope_of(2), log_of(2), log_of(2, 10), power_of(2, 3)};
  const Design design = make_design(columns, terms, 6, exposure);
  std::vector<std::string> lines;
  for (const CoefficientRow& row : design.table)
    lines.push_back(row.name + (row.level ? "/" + *row.level : "") + (row.coefficient ? "" : " *"));
  CHECK(lines == std::vector<std::string>{"baseline", "metal/pvc", "metal/iron *", "metal/steel", "age",
                                          "log age", "log (age + 10)", "age^3"});
  CHECK(design.coefficients == 7);
  CHECK(design.coefficient_name(1) == "metal[pvc]");
  CHECK(design.coefficient_name(0) == "baseline");
  // Without exposures pvc, iron and steel have two rows each: the first to appear is the reference.
  const Design even = make_design(columns, terms, 6);
  CHECK(even.references[0] == 1);
}

TEST_CASE("a cross has the observed combinations off the references") {
  const std::vector<Term> terms = {cross_of({levels_of(0), levels_of(1)}),
                                   cross_of({levels_of(1), slope_of(2)}),
                                   cross_of({slope_of(2), slope_of(2)})};
  const Design design = make_design(columns, terms, 6, exposure);
  CHECK(design.terms[0].name == "metal x soil");
  CHECK(design.terms[0].level_names == std::vector<std::string>{"pvc x sand", "steel x sand"});
  CHECK(design.terms[1].name == "soil x age");
  CHECK(design.terms[1].level_names == std::vector<std::string>{"sand"});
  CHECK(design.terms[2].size() == 1);
  CHECK(design.coefficients == 5);
  const Design smaller = without_term(design, 0);
  CHECK(smaller.coefficients == 3);
  CHECK(smaller.terms[0].first == 1);
}

TEST_CASE("no terms: the baseline alone; one level: no coefficient") {
  CHECK(make_design({}, {}, 3).coefficients == 1);
  const std::vector<std::string> one = {"all"};
  const std::vector<std::int32_t> same = {0, 0, 0, 0, 0, 0};
  const std::vector<SourceColumn> single = {{"g", {}, same, &one, std::nullopt}};
  const std::vector<Term> terms = {levels_of(0)};
  const Design design = make_design(single, terms, 6);
  CHECK(design.coefficients == 1);
  CHECK(design.table.size() == 2);
}

TEST_CASE("refusals") {
  CHECK(refused(columns, {slope_of(0)}) == Code::bad_type);
  CHECK(refused(columns, {levels_of(2)}) == Code::bad_type);
  CHECK(refused(columns, {slope_of(2)}, 5) == Code::length_mismatch);
  CHECK(refused({}, {}, 0) == Code::too_few);
  CHECK(refused(columns, {log_of(2, -1)}) == Code::bad_value);
  CHECK(refused(columns, {power_of(2, 1e6)}) == Code::bad_value);
  std::vector<SourceColumn> wrong = columns;
  wrong[1].reference = "gravel";
  CHECK(refused(wrong, {levels_of(1)}) == Code::bad_value);
  wrong[0].reference = "lead";  // a level, but of no row
  CHECK(refused(wrong, {levels_of(0)}) == Code::bad_value);
}

TEST_CASE("patterns are counted over the terms' columns") {
  const std::vector<Term> terms = {levels_of(0), levels_of(1)};
  CHECK(count_patterns(make_design(columns, terms, 6)) == 6);
  const std::vector<Term> one = {levels_of(1)};
  CHECK(count_patterns(make_design(columns, one, 6)) == 2);
  CHECK(count_patterns(make_design(columns, {}, 6)) == 1);
  const std::vector<double> signs = {0.0, -0.0, 1, 1, 2, 2};
  const std::vector<SourceColumn> number = {{"x", signs, {}, nullptr, std::nullopt}};
  const std::vector<Term> slope = {slope_of(0)};
  CHECK(count_patterns(make_design(number, slope, 6)) == 3);
  // A known number among many rows, with any number of workers.
  std::vector<double> many;
  for (int i = 0; i < 200000; ++i) many.push_back(i % 70001 * 0.25);
  const std::vector<SourceColumn> wide = {{"x", many, {}, nullptr, std::nullopt}};
  Work work;
  work.workers = cases::threads(3);
  CHECK(count_patterns(make_design(wide, slope, many.size()), work) == 70001);
}
