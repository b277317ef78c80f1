// tests/engine/models/dependence_test.cpp -- columns that others explain: aliased exactly, or kept and
// straightened.
#include "engine/models/dependence.hpp"

#include <doctest/doctest.h>

#include "synthetic.hpp"

using namespace countsel;
using namespace countsel::cases;

namespace {

struct Columns {
  std::vector<std::vector<double>> store;
  std::vector<SourceColumn> columns;
  std::vector<Term> terms;
  Design design;
  GlmFit fit(std::vector<std::vector<double>> values, std::span<const double> count) {
    store = std::move(values);
    columns.clear();
    terms.clear();
    for (std::size_t j = 0; j < store.size(); ++j) {
      columns.push_back({"x" + std::to_string(j), store[j], {}, nullptr, std::nullopt});
      terms.push_back(slope_of(j));
    }
    design = make_design(columns, terms, count.size());
    return fit_poisson(design, {count, {}, {}, {}, WeightsAre::frequency});
  }
};

}  // namespace

TEST_CASE("a rounded sum of columns is aliased and named") {
  const Synthetic table(500);
  std::vector<double> total, share, constant(500, 3.7);
  for (std::size_t i = 0; i < 500; ++i) {
    total.push_back(0.1 * table.pressure[i] + 0.3 * table.load[i]);  // rounded twice in each row
    share.push_back(table.age[i] / 3);
  }
  Columns one;
  const GlmFit fit = one.fit({table.pressure, table.load, total, table.age, share, constant}, table.count);
  REQUIRE(fit.aliases.size() == 3);
  CHECK(fit.aliases[0].coefficient == 3);
  std::map<std::size_t, double> parts(fit.aliases[0].combination.begin(), fit.aliases[0].combination.end());
  CHECK(parts.size() == 2);
  CHECK(parts[1] == doctest::Approx(0.1).epsilon(1e-12));
  CHECK(parts[2] == doctest::Approx(0.3).epsilon(1e-12));
  CHECK(fit.aliases[1].coefficient == 5);
  CHECK(fit.aliases[2].coefficient == 6);
  CHECK(fit.aliases[2].combination[0].first == 0);  // a constant column is the baseline's
  CHECK(fit.aliases[2].combination[0].second == doctest::Approx(3.7).epsilon(1e-15));
  CHECK(fit.rank == 4);
}

TEST_CASE("the smallest difference that is not rounding is kept") {
  const Synthetic table(500);
  std::vector<double> near = table.load;
  near[7] += 1e-10;
  Columns one;
  const GlmFit fit = one.fit({table.load, near}, table.count);
  CHECK(fit.aliases.empty());
  CHECK(fit.condition > 1e10);
  CHECK(fit.converged);
  // Seen from the row that differs, the model without it plus a column for that row alone: the same
  // likelihood.
  std::vector<double> only(500, 0.0);
  only[7] = 1;
  Columns other;
  const GlmFit same = other.fit({table.load, only}, table.count);
  CHECK(fit.deviance == doctest::Approx(same.deviance).epsilon(1e-10));
}

TEST_CASE("nested levels and a term given twice are aliased without harm to the rest") {
  const Synthetic table(3000, false);
  const std::vector<std::string> region_names = {"north", "south"};
  std::vector<std::int32_t> region;
  for (const std::int32_t m : table.material) region.push_back(m / 2);
  std::vector<SourceColumn> columns = table.columns;
  columns.push_back({"region", {}, region, &region_names, std::nullopt});
  const std::vector<Term> terms = {levels_of(3), levels_of(5), slope_of(0), slope_of(0), levels_of(3)};
  const Design design = make_design(columns, terms, table.count.size(), table.exposure);
  const GlmFit fit = fit_poisson(design, table.data());
  CHECK(fit.rank == 5);
  CHECK(fit.aliases.size() == 5);
  const std::vector<Term> plain = {levels_of(3), slope_of(0)};
  const Design small = make_design(columns, plain, table.count.size(), table.exposure);
  const GlmFit expected = fit_poisson(small, table.data());
  CHECK(fit.deviance == doctest::Approx(expected.deviance).epsilon(1e-12));
  for (Eigen::Index k = 0; k < 4; ++k)
    CHECK(fit.coefficients[k] == doctest::Approx(expected.coefficients[k]).epsilon(1e-11));
  CHECK(fit.coefficients[5] == doctest::Approx(expected.coefficients[4]).epsilon(1e-11));
}

TEST_CASE("more coefficients than rows: what can be estimated is") {
  const Synthetic table(4);
  const GlmFit fit = table.fit();
  CHECK(fit.converged);
  CHECK(fit.rank <= 4);
  CHECK(fit.df == 4 - static_cast<double>(fit.rank));
}
