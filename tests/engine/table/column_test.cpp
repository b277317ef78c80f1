// tests/engine/table/column_test.cpp -- cells of every kind in, the same cells out.
#include "engine/table/column.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <limits>

namespace countsel {
namespace {

const double nan = std::numeric_limits<double>::quiet_NaN();

TEST_CASE("numbers alone need no tags") {
  ColumnBuilder cells;
  for (const double value : {1.0, 2.5, -3.0}) cells.number(value);
  CHECK(cells.size() == 3);
  const Column column = cells.take("a");
  CHECK(column.name == "a");
  CHECK(column.all_numbers());
  CHECK(column.numbers == std::vector<double>{1, 2.5, -3});
  CHECK(column.tags.empty());
}

TEST_CASE("texts alone need no numbers") {
  ColumnBuilder cells;
  for (const char* text : {"b", "a", "b"}) cells.text(text);
  const Column column = cells.take("a");
  CHECK(column.all_texts());
  CHECK(column.numbers.empty());
  CHECK(column.texts == std::vector<std::string>{"b", "a"});
  CHECK(column.tags == std::vector<std::int32_t>{0, 1, 0});
}

TEST_CASE("every order of kinds keeps every cell") {
  // All sequences of four cells of five kinds.
  for (int code = 0; code < 5 * 5 * 5 * 5; ++code) {
    ColumnBuilder cells;
    std::vector<std::int32_t> tags;
    int kinds = code;
    for (int i = 0; i < 4; ++i, kinds /= 5) {
      switch (kinds % 5) {
        case 0:
          cells.number(i);
          tags.push_back(tag::number);
          break;
        case 1:
          cells.text("x");
          tags.push_back(0);
          break;
        case 2:
          cells.text(" ");
          tags.push_back(tag::blank);
          break;
        case 3:
          cells.other(tag::yes);
          tags.push_back(tag::yes);
          break;
        default:
          cells.other(tag::nested);
          tags.push_back(tag::nested);
      }
    }
    CHECK(cells.size() == 4);
    const Column column = cells.take("a");
    REQUIRE(column.size() == 4);
    for (std::size_t i = 0; i < 4; ++i) {
      REQUIRE(column.tag_at(i) == tags[i]);
      if (tags[i] == tag::number) {
        REQUIRE(column.numbers[i] == static_cast<double>(i));
      } else if (!column.numbers.empty()) {
        REQUIRE(std::isnan(column.numbers[i]));
      }
    }
  }
}

TEST_CASE("spaces of every kind are a blank") {
  for (const char* text : {"", " ", "\t", " \r\n ", "\xC2\xA0", " \xC2\xA0 "}) {
    ColumnBuilder cells;
    cells.text(text);
    CHECK(cells.take("a").tag_at(0) == tag::blank);
  }
}

TEST_CASE("levels as text") {
  ColumnBuilder cells;
  for (const double value : {95.0, 0.5, -0.0, 1e21, 123456789012345.0, 1e15, 0.1 + 0.2}) cells.number(value);
  cells.other(tag::yes);
  cells.other(tag::no);
  cells.other(tag::blank);
  cells.text("iron");
  const Column column = cells.take("a");
  const char* texts[] = {"95",   "0.5",   "0", "1e+21", "123456789012345", "1e+15", "0.30000000000000004",
                         "true", "false", "",  "iron"};
  for (std::size_t i = 0; i < column.size(); ++i) CHECK(level_text(column, i) == texts[i]);
}

TEST_CASE("packed doubles: NaN is a blank, an infinity is marked") {
  ColumnBuilder plain;
  plain.packed({1, 2});
  CHECK(plain.take("a").all_numbers());
  ColumnBuilder blank;
  blank.packed({1, nan, 3});
  const Column column = blank.take("a");
  CHECK(column.tags == std::vector<std::int32_t>{tag::number, tag::blank, tag::number});
  CHECK(!column.infinite);
  ColumnBuilder infinite;
  infinite.packed({1, -std::numeric_limits<double>::infinity()});
  CHECK(infinite.take("a").infinite);
}

TEST_CASE("the digest follows the cells, not the way in which they came") {
  const auto digest = [](auto fill) {
    ColumnBuilder cells;
    fill(cells);
    return cells.take("any").digest;
  };
  const auto numbers = digest([](auto& c) { c.number(1), c.number(2); });
  CHECK(numbers == digest([](auto& c) { c.packed({1, 2}); }));
  CHECK(numbers != digest([](auto& c) { c.number(2), c.number(1); }));
  CHECK(numbers != digest([](auto& c) { c.text("1"), c.text("2"); }));
  const auto blanks = digest([](auto& c) { c.number(1), c.other(tag::blank); });
  CHECK(blanks == digest([](auto& c) { c.number(1), c.text(" "); }));
  CHECK(blanks == digest([](auto& c) { c.packed({1, nan}); }));
  const auto texts = digest([](auto& c) { c.text("b"), c.text("a"), c.text("b"); });
  CHECK(texts == digest([](auto& c) { c.packed({"a", "b", "c"}, {1, 0, 1}); }));
  CHECK(texts != digest([](auto& c) { c.text("b"), c.text("a"), c.text("a"); }));
  CHECK(digest([](auto& c) { c.text("ab"), c.text("c"); }) !=
        digest([](auto& c) { c.text("a"), c.text("bc"); }));
}

TEST_CASE("a taken column leaves a builder that can be used again") {
  ColumnBuilder cells;
  cells.text("x");
  cells.take("a");
  cells = ColumnBuilder();
  cells.text("y");
  CHECK(cells.take("b").texts == std::vector<std::string>{"y"});
}

}  // namespace
}  // namespace countsel
