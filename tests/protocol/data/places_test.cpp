// tests/protocol/data/places_test.cpp -- addresses of cells.
#include "protocol/data/places.hpp"

#include <doctest/doctest.h>

namespace countsel {
namespace {

Table table_of(std::initializer_list<const char*> names, bool header = true) {
  Table table;
  table.header = header;
  for (const char* name : names)
    table.columns.push_back(std::make_shared<const Column>(ColumnBuilder().take(name)));
  return table;
}

TEST_CASE("cells count from the origin, below its header") {
  const Table table = table_of({"a", "b", "c"});
  const Places places(table, "Falls.B4");
  CHECK(*places.cell({"a", 1}) == "Falls.B5");
  CHECK(*places.cell({"c", 10}) == "Falls.D14");
  CHECK(*places.cell({"c", 0}) == "Falls.D4");
  CHECK(!places.cell({"z", 1}));
  const Table bare = table_of({"a"}, false);
  CHECK(*Places(bare, "B4").cell({"a", 1}) == "B4");
}

TEST_CASE("letters beyond Z") {
  const Table table = table_of({"a", "b"});
  for (const auto& [origin, cell] :
       {std::pair{"Z1", "AA2"}, {"AZ1", "BA2"}, {"ZZ1", "AAA2"}, {"XFC1", "XFD2"}, {"a1", "B2"}})
    CHECK(*Places(table, origin).cell({"b", 1}) == cell);
}

TEST_CASE("sheets keep their own spelling") {
  const Table table = table_of({"a"});
  CHECK(*Places(table, "'My sheet'!$B$4").cell({"a", 1}) == "'My sheet'!B5");
  CHECK(*Places(table, "Q1.2024.C9").cell({"a", 1}) == "Q1.2024.C10");
}

TEST_CASE("what is no address is refused") {
  const Table table = table_of({"a"});
  for (const char* origin :
       {"B", "4", "4B", "Falls.", "B4:C9", "ABCD4", "B0", "B1234567890", "Falls B4", "B-4", "$$B4", "B$$4"}) {
    CAPTURE(origin);
    CHECK_THROWS_AS(Places(table, origin), Refusal);
  }
}

TEST_CASE("places in words") {
  const Table table = table_of({"count"});
  const Places plain(table, ""), sheet(table, "B4");
  CHECK(plain.say({"count", 3}) == "Row 3 of count");
  CHECK(plain.say({"count", 0}) == "Column count");
  CHECK(sheet.say({"count", 3}) == "B7 (row 3 of count)");
  CHECK(plain.list({{"count", 2}}, 1) == "row 2");
  CHECK(plain.list({{"count", 2}, {"count", 5}}, 2) == "rows 2 and 5");
  CHECK(plain.list({{"count", 2}, {"count", 5}, {"count", 9}}, 3) == "rows 2, 5 and 9");
  CHECK(plain.list({{"count", 2}, {"count", 5}, {"count", 9}}, 30, 2) == "rows 2, 5 and 28 more");
  CHECK(sheet.list({{"count", 2}, {"count", 5}}, 2) == "B6 and B9");
}

}  // namespace
}  // namespace countsel
