// tests/protocol/wire/packed_test.cpp -- base64 of doubles, levels and codes.
#include "protocol/wire/packed.hpp"

#include <doctest/doctest.h>

#include <cmath>

#include "protocol/wire/base64.hpp"

namespace countsel {
namespace {

TEST_CASE("base64 of doubles") {
  // 1.0, and 1.0 with -2.5: bytes by hand, little-endian.
  CHECK(unpack_doubles("AAAAAAAA8D8=") == std::vector<double>{1.0});
  CHECK(unpack_doubles("AAAAAAAA8D8AAAAAAAAEwA==") == std::vector<double>{1.0, -2.5});
  CHECK(unpack_doubles("AAAAAAAA8D8AAAAAAAAEwAAAAAAAAPg/") == std::vector<double>{1.0, -2.5, 1.5});
  CHECK(unpack_doubles("")->empty());
  const auto nan = unpack_doubles("AAAAAAAA+H8=");
  REQUIRE(nan);
  CHECK(std::isnan(nan->front()));
}

TEST_CASE("what is no base64 of doubles") {
  for (const char* text : {"A", "AAAA", "AAAAAAAA8D8", "AAAAAAAA8D8=A", "AAAAAAAA8D8==", "AAAAAAAA8D-=",
                           "AAAA AAA8D8=", "=AAAAAAA8D8=", "====", "AAAAAAAA8===", "AAAA=AAA8D8=",
                           "\xC3\xA9"
                           "AAAAAA8D8="}) {
    CAPTURE(text);
    CHECK(!unpack_doubles(text));
  }
}

Column filled(Packed& packed) {
  ColumnBuilder cells;
  CHECK(!packed.finish("a", cells));
  return cells.take("a");
}

TEST_CASE("doubles become numbers, NaN a blank, an infinity is remembered") {
  Packed packed;
  packed.key("f64");
  packed.text("AAAAAAAA8D8AAAAAAAD4fwAAAAAAAPB/", false);
  const Column column = filled(packed);
  CHECK(column.numbers[0] == 1);
  CHECK(column.tags == std::vector<std::int32_t>{tag::number, tag::blank, tag::number});
  CHECK(column.infinite);
}

TEST_CASE("levels come in the order in which the codes bring them") {
  Packed packed;
  packed.key("codes");
  CHECK(packed.list());
  for (const double code : {2.0, -1.0, 0.0, 2.0}) packed.number(code, true);
  packed.key("levels");
  CHECK(packed.list());
  for (const char* level : {"iron", "pvc", "steel"}) packed.text(level, true);
  const Column column = filled(packed);
  CHECK(column.texts == std::vector<std::string>{"steel", "iron"});
  CHECK(column.tags == std::vector<std::int32_t>{0, tag::blank, 1, 0});
  CHECK(column.levels_only);
}

TEST_CASE("levels that are one level") {
  Packed packed;
  packed.key("levels");
  for (const char* level : {"a", "a", " "}) packed.text(level, true);
  packed.key("codes");
  for (const double code : {0.0, 1.0, 2.0}) packed.number(code, true);
  const Column column = filled(packed);
  CHECK(column.texts == std::vector<std::string>{"a"});
  CHECK(column.tags == std::vector<std::int32_t>{0, 0, tag::blank});
}

TEST_CASE("codes that are none of the levels are refused with their row") {
  for (const double bad : {1.0, -2.0, 0.5, 1e12}) {
    Packed packed;
    packed.key("levels");
    packed.text("a", true);
    packed.key("codes");
    for (const double code : {0.0, bad, 7.0}) packed.number(code, true);
    ColumnBuilder cells;
    const auto refusal = packed.finish("zone", cells);
    REQUIRE(refusal);
    CHECK(refusal->code == Code::bad_value);
    CHECK(refusal->places.front().row == 2);
  }
}

}  // namespace
}  // namespace countsel
