// tests/protocol/declare/nearest_test.cpp -- the name that was meant.
#include "protocol/declare/nearest.hpp"

#include <doctest/doctest.h>

namespace countsel {
namespace {

TEST_CASE("distances by hand") {
  CHECK(edit_distance("", "") == 0);
  CHECK(edit_distance("abc", "") == 3);
  CHECK(edit_distance("kitten", "sitting") == 3);
  CHECK(edit_distance("count", "cuont") == 1);
  CHECK(edit_distance("count", "counts") == 1);
  CHECK(edit_distance("ca", "abc") == 3);  // the restricted form: no edit inside a swap
  CHECK(edit_distance("ab", "ba") == edit_distance("ba", "ab"));
}

TEST_CASE("the nearest name, if one is near enough") {
  const std::vector<std::string> known = {"confidence", "per", "limits", "side", "pipe_material"};
  CHECK(nearest("confidnce", known) == "confidence");
  CHECK(nearest("CONFIDENCE", known) == "confidence");
  CHECK(nearest("limit", known) == "limits");
  CHECK(nearest("material", known) == "pipe_material");
  CHECK(nearest("zzzzzz", known).empty());
  CHECK(nearest("", {"abcdef"}).empty());
  CHECK(nearest("x", {}).empty());
  CHECK(nearest("sdie", known) == "side");
}

TEST_CASE("of two equally near the first is taken") { CHECK(nearest("bat", {"cat", "hat"}) == "cat"); }

TEST_CASE("an endless name takes no time") {
  CHECK(nearest(std::string(10'000'000, 'x'), {"count", "exposure"}).empty());
}

}  // namespace
}  // namespace countsel
