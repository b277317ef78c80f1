// engine/models/basis.hpp -- the columns a fit works in, and the way back to the design's own coefficients.
//
// A dense column is centred and scaled; a column that nearly depends on earlier ones is replaced by
// what is left of it once they are taken away, worked out in double-double so that nothing is lost.
// Each working column belongs to the coefficient of the same index; the coefficients asked for are a
// linear map of the working ones.
#pragma once

#include <Eigen/Core>
#include <vector>

#include "engine/models/double_double.hpp"
#include "engine/models/layout.hpp"
#include "engine/work.hpp"

namespace countsel {

/// A combination of raw design columns: coefficient index, multiple.
using Combination = std::vector<std::pair<std::size_t, DoubleDouble>>;

/// The same, laid out to be evaluated in a row.
struct RawForm {
  struct Table {
    std::size_t group = 0;
    std::size_t multiplier = 0;
    std::vector<DoubleDouble> value;  ///< by group code
  };
  std::vector<std::pair<std::size_t, DoubleDouble>> dense;  ///< dense column, multiple
  std::vector<Table> tables;
};

RawForm make_form(const Layout& layout, const Combination& combination);
struct FormValue {
  double value = 0;      ///< of the combination
  double magnitude = 0;  ///< sum of the sizes of its parts: what rounding is measured against
};
FormValue evaluate(const Layout& layout, const RawForm& form, std::size_t row);

struct Combined {
  std::size_t coefficient = 0;
  Combination combination;
  RawForm form;
  double scale = 1;
};

struct Basis {
  std::vector<double> centre, scale;        ///< of the dense columns
  std::vector<Combined> combined;           ///< further dense columns, after those
  std::vector<char> active;                 ///< of each coefficient: it is estimated
  std::vector<std::ptrdiff_t> combined_of;  ///< of each coefficient: its place in `combined`, or -1
  /// Aliased coefficients' raw columns as combinations of kept ones: where a working column is stated with
  /// one.
  std::vector<std::pair<std::size_t, Combination>> aliases;
  std::size_t columns() const { return centre.size() + combined.size(); }
  std::size_t stride() const { return (columns() + 3) / 4 * 4; }
};

/// Centres and scales from a spread-out sample of the rows; scales are powers of 2. Refuses numbers that are
/// not finite, where the sample shows one (bad_value).
Basis first_basis(const Layout& layout, const Work& work);

/// The dense column of the blocks that a coefficient's working column is, if it is one.
std::optional<std::size_t> dense_place(const Layout& layout, const Basis& basis, std::size_t coefficient);

/// About the largest size of a coefficient's raw column in a row.
double column_size(const Layout& layout, const Basis& basis, std::size_t coefficient);

/// A working column as a combination of raw design columns.
Combination working_column(const Layout& layout, const Basis& basis, std::size_t coefficient);

/// Design coefficients from working ones: value = map * working.
Eigen::VectorXd to_design(const Layout& layout, const Basis& basis, const Eigen::VectorXd& working);
/// The same map as a matrix (coefficients x coefficients; inactive columns are 0).
Eigen::MatrixXd design_map(const Layout& layout, const Basis& basis);

/// Throws bad_value naming the first number that is not finite, if there is one.
void refuse_not_finite(const Layout& layout);

}  // namespace countsel
