// tests/engine/table/group_test.cpp -- sums within groups.
#include "engine/table/group.hpp"

#include <doctest/doctest.h>

namespace countsel {
namespace {

TEST_CASE("rows are added up within their groups") {
  const std::vector<double> counts = {1, 2, 4, 8}, exposures = {0.5, 1, 2, 4};
  const std::vector<std::int32_t> codes = {1, 0, 1, 3};
  const auto totals = add_up(counts, exposures, codes, 4);
  CHECK(totals.count == std::vector<double>{2, 5, 0, 8});
  CHECK(totals.exposure == std::vector<double>{1, 2.5, 0, 4});
  CHECK(totals.rows == std::vector<double>{1, 2, 0, 1});
}

TEST_CASE("without codes there is one group") {
  const std::vector<double> counts = {1, 2, 4}, exposures = {1, 1, 1};
  const auto totals = add_up(counts, exposures, {}, 0);
  CHECK(totals.count == std::vector<double>{7});
  CHECK(totals.rows == std::vector<double>{3});
}

TEST_CASE("no row, no group") {
  const auto totals = add_up({}, {}, {}, 1);
  CHECK(totals.count == std::vector<double>{0});
  CHECK(totals.rows == std::vector<double>{0});
}

TEST_CASE("what a plain sum would lose is kept") {
  std::vector<double> counts(10'001, 1.0), exposures(10'001, 0.1);
  counts[0] = exposures[0] = 1e16;
  const std::vector<std::int32_t> codes(10'001, 0);
  const auto totals = add_up(counts, exposures, codes, 1);
  CHECK(totals.count[0] == 1e16 + 10'000);
  CHECK(totals.exposure[0] == 1e16 + 1'000);
}

}  // namespace
}  // namespace countsel
