// tests/engine/rates/funnel_deviate_test.cpp -- doubled p-values and mid-p deviates against mpmath.
#include "engine/rates/funnel_deviate.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <limits>

#include "engine/numbers/distributions.hpp"
#include "tests/engine/rates/reference_rows.hpp"

namespace countsel {
namespace {

TEST_CASE("p-values and deviates agree with sums of chances") {
  for (const ReferenceRow& row : reference_rows("funnel.tsv", "deviate-")) {
    const CountDeviate deviate = count_deviate(row.in("count"), row.in("shape"), row.in("mean"));
    row.check("p_value", deviate.p_value);
    row.check("z", deviate.z);
  }
}

TEST_CASE("a tail too small for a double still has its deviate, and joins the others smoothly") {
  const double infinity = std::numeric_limits<double>::infinity();
  double before = 0;
  for (double count = 100; count < 2000; ++count) {
    const double z = count_deviate(count, infinity, 100).z;
    CHECK(z > before);
    if (before > 1) CHECK(z - before < 0.11);
    before = z;
  }
  CHECK(count_deviate(2000, infinity, 100).p_value == 0);
  CHECK(std::isfinite(before));
}

TEST_CASE("the deviate of a log tail undoes the normal tail") {
  for (const double z : {0.5, 3.0, 20.0, 34.0, 37.0})
    CHECK(normal_deviate_of_log_tail(std::log(normal_above(z))) == doctest::Approx(z).epsilon(1e-12));
  // log P(Z > 40), from the asymptotic series at 50 digits (mpmath: log(erfc(40/sqrt 2)/2)).
  CHECK(normal_deviate_of_log_tail(-804.60844201375) == doctest::Approx(40).epsilon(1e-12));
}

TEST_CASE("a mean of 0 leaves only a count of 0") {
  const double infinity = std::numeric_limits<double>::infinity();
  CHECK(count_deviate(0, infinity, 0).p_value == 1);
  CHECK(count_deviate(0, infinity, 0).z == 0);
  CHECK(count_deviate(2, infinity, 0).p_value == 0);
}

}  // namespace
}  // namespace countsel
