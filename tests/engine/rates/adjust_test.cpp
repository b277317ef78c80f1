// tests/engine/rates/adjust_test.cpp -- adjusted p-values against the published example and their rules.
#include "engine/rates/adjust.hpp"

#include <doctest/doctest.h>

#include <algorithm>
#include <initializer_list>
#include <limits>

#include "reference_rows.hpp"

namespace countsel {
namespace {

TEST_CASE("adjusted p-values agree with the published and recomputed ones") {
  for (const auto& row : reference_rows("comparisons_published.tsv", "adjust")) {
    const auto& p = row.list("p");
    const auto bh = adjust_p_values(p, Adjust::bh), holm = adjust_p_values(p, Adjust::holm);
    for (std::size_t i = 0; i < p.size(); ++i) {
      row.check("bh", bh[i], i);
      row.check("holm", holm[i], i);
    }
  }
}

TEST_CASE("adjustment keeps order, ties and missing values") {
  const double nan = std::numeric_limits<double>::quiet_NaN();
  const std::vector<double> p = {0.2, nan, 0.01, 0.01, 0.9, 0.05};
  for (const auto adjust : {Adjust::holm, Adjust::bh}) {
    const auto adjusted = adjust_p_values(p, adjust);
    CHECK(std::isnan(adjusted[1]));
    CHECK(adjusted[2] == adjusted[3]);
    for (const std::size_t i : {0u, 2u, 3u, 4u, 5u}) {
      CHECK(adjusted[i] >= p[i]);
      CHECK(adjusted[i] <= 1);
    }
    CHECK(adjusted[2] <= adjusted[5]);
    CHECK(adjusted[5] <= adjusted[0]);
  }
  CHECK(adjust_p_values(p, Adjust::holm)[2] == doctest::Approx(0.05));  // five values count, not six
  CHECK(adjust_p_values(p, Adjust::none)[0] == 0.2);
  CHECK(adjust_p_values({}, Adjust::bh).empty());
}

}  // namespace
}  // namespace countsel
