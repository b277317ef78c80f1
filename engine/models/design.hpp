// engine/models/design.hpp -- what a model is made of: source columns, terms, and named coefficients.
//
// A term says how source columns become design columns: a number as a slope, a text as levels against
// a reference, a product of these. Levels are never expanded to columns of 0 and 1; a design only says
// which level has which coefficient, and points at the caller's columns, which must outlive it.
// Checked by: tests/engine/models/design_test.cpp.
#pragma once

#include <cstddef>
#include <cstdint>
#include <optional>
#include <span>
#include <string>
#include <vector>

#include "engine/work.hpp"

namespace countsel {

/// A source column as the caller holds it; nothing is owned or copied. Exactly one of `numbers` (n finite
/// doubles) and `codes` (n, each an index into `levels`) is filled.
struct SourceColumn {
  std::string name;
  std::span<const double> numbers;
  std::span<const std::int32_t> codes;
  const std::vector<std::string>* levels = nullptr;
  /// The level the others are compared with; by default the one with most exposure, the first to appear
  /// among equals.
  std::optional<std::string> reference;
};

/// How source columns become design columns.
struct Term {
  enum class Kind {
    slope,   ///< the number itself
    log,     ///< log(number + plus)
    power,   ///< number to the power `to`
    levels,  ///< one coefficient a level but the reference
    cross    ///< the product of `parts`; main terms are given beside it
  };
  Kind kind = Kind::slope;
  std::size_t column = 0;  ///< index into the source columns; unused by cross
  double plus = 0;
  double to = 1;
  std::vector<Term> parts;
};

Term slope_of(std::size_t column);
Term log_of(std::size_t column, double plus = 0);
Term power_of(std::size_t column, double to);
Term levels_of(std::size_t column);
Term cross_of(std::vector<Term> parts);

/// A function of one number: the elementary piece of a dense column.
struct Feature {
  enum class Kind { identity, log, power };
  Kind kind = Kind::identity;
  std::size_t column = 0;
  double plus = 0;
  double to = 1;
  double at(double x) const;
  bool operator==(const Feature&) const = default;
};

/// A dense column: the product of its features; none at all is the constant 1.
using Product = std::vector<Feature>;

/// The design columns of one term: for each observed combination of non-reference levels of `factors`, one
/// column a product. Without factors there is a single, unnamed combination.
struct TermColumns {
  std::string name;                  ///< "age", "log pressure", "age^3", "material x soil"
  std::vector<std::size_t> factors;  ///< source columns with levels
  std::vector<Product> products;     ///< at least one; the constant for a term of levels alone
  /// Combinations in order of first appearance; level codes, one a factor.
  std::vector<std::vector<std::int32_t>> combinations;
  std::vector<std::string> level_names;  ///< of the combinations: "iron", "iron x clay"
  std::size_t reference_place = 0;       ///< where the reference stands among the levels (one factor)
  std::size_t first = 0;                 ///< index of its first coefficient
  /// Coefficient of combination c and product k.
  std::size_t coefficient(std::size_t c, std::size_t k) const { return first + c * products.size() + k; }
  std::size_t size() const { return (factors.empty() ? 1 : combinations.size()) * products.size(); }
};

/// A line of the table of ratios. Coefficient 0 is the baseline; references have none.
struct CoefficientRow {
  std::optional<std::size_t> term;  ///< index into Design::terms; none for the baseline
  std::string name;                 ///< of the term, "baseline" for the baseline
  std::optional<std::string> level;
  std::optional<std::size_t> coefficient;  ///< none: a reference, log ratio 0
};

struct Design {
  std::size_t rows = 0;
  std::span<const SourceColumn> columns;
  std::vector<TermColumns> terms;
  std::vector<std::int32_t> references;  ///< of each source column; -1 where it has no levels in use
  std::size_t coefficients = 1;          ///< baseline included
  std::vector<CoefficientRow> table;     ///< baseline, then term by term, references in their place

  /// "baseline", "age", "material[iron]", "material x soil[iron x clay]": to name a coefficient in a note.
  std::string coefficient_name(std::size_t coefficient) const;
};

/// Makes the design.
///   columns   source columns, all of `rows` rows, outliving the design
///   terms     any number; none leaves the baseline alone
///   exposure  of each row (or empty: 1 each), times any frequency weight: chooses default references
/// Levels and combinations without a row get no coefficient; levels come in order of first appearance.
/// A cross has a coefficient a combination in which no part is at its reference: the product of its parts'
/// columns. A levels term whose column has one level only has none.
/// Refuses: no rows (too_few), columns of different lengths (length_mismatch), a slope of levels or levels of
/// a number (bad_type), a reference that is no level of a row (bad_value), a logarithm or power that is not
/// finite in some row (bad_value). That plain numbers are finite is seen when the model is fitted.
Design make_design(std::span<const SourceColumn> columns, std::span<const Term> terms, std::size_t rows,
                   std::span<const double> exposure = {}, const Work& work = {});

/// The same design without one term; coefficients after it move up.
Design without_term(const Design& design, std::size_t term);

}  // namespace countsel
