// tests/protocol/data/csv_test.cpp -- RFC 4180 by its own examples, and cells by what they look like.
#include "protocol/data/csv.hpp"

#include <doctest/doctest.h>

#include "protocol/data/utf8.hpp"

namespace countsel {
namespace {

std::vector<std::string> cells(const Table& table, std::size_t column) {
  std::vector<std::string> texts;
  for (std::size_t i = 0; i < table.columns[column]->size(); ++i)
    texts.push_back(level_text(*table.columns[column], i));
  return texts;
}
using Texts = std::vector<std::string>;

TEST_CASE("the examples of RFC 4180, section 2") {
  for (const char* text : {"aaa,bbb,ccc\r\nzzz,yyy,xxx\r\n", "aaa,bbb,ccc\r\nzzz,yyy,xxx",
                           "aaa,bbb,ccc\nzzz,yyy,xxx\n", "\"aaa\",\"bbb\",\"ccc\"\r\nzzz,yyy,xxx"}) {
    const Table table = read_delimited(text, ',', false);
    REQUIRE(table.columns.size() == 3);
    CHECK(table.columns[1]->name == "2");
    CHECK(cells(table, 1) == Texts{"bbb", "yyy"});
  }
  const Table broken = read_delimited("\"aaa\",\"b\r\nbb\",\"ccc\"\r\nzzz,yyy,xxx", ',', false);
  CHECK(cells(broken, 1) == Texts{"b\r\nbb", "yyy"});
  const Table quoted = read_delimited("\"aaa\",\"b\"\"bb\",\"ccc\"", ',', false);
  CHECK(cells(quoted, 1) == Texts{"b\"bb"});
  const Table header = read_delimited("field_name,field_name2\r\naaa,bbb\r\n", ',', true);
  CHECK(header.columns[1]->name == "field_name2");
  CHECK(cells(header, 0) == Texts{"aaa"});
}

TEST_CASE("numbers as JSON writes them are numbers, other cells stay texts") {
  const Table table = read_delimited("a\n1\n-2.5\n1e3\n007\n+3\n 4\n1,5\n0x1\n.5\n5.\nnan\n\n", '\t', true);
  const Column& column = *table.columns[0];
  CHECK(column.numbers[0] == 1);
  CHECK(column.numbers[1] == -2.5);
  CHECK(column.numbers[2] == 1000);
  CHECK(column.texts == Texts{"007", "+3", " 4", "1,5", "0x1", ".5", "5.", "nan"});
}

TEST_CASE("blanks") {
  const Table table = read_delimited("a,b\n1,\n\"\",2\n  ,3\n", ',', true);
  CHECK(table.columns[0]->tags == std::vector<std::int32_t>{tag::number, tag::blank, tag::blank});
  CHECK(table.columns[1]->tag_at(0) == tag::blank);
}

TEST_CASE("uneven rows are found, surplus cells are not kept") {
  const Table table = read_delimited("a,b\n1,2\n3\n4,5,6\n", ',', true);
  CHECK(table.uneven_row == 2);
  CHECK(table.uneven_cells == 1);
  CHECK(table.columns.size() == 2);
  CHECK(read_delimited("1,2\n3\n", ',', false).uneven_row == 2);
}

TEST_CASE("columns without a name are numbered") {
  const Table table = read_delimited(",b,\n1,2,3\n", ',', true);
  CHECK(table.columns[0]->name == "1");
  CHECK(table.columns[2]->name == "3");
}

TEST_CASE("points are numbers' points only where they may be") {
  const char* text = "a,b,c\n1.200,1.200,7\n3,0.5,8\n";
  const Table open = read_delimited(text, ',', true);
  CHECK(open.columns[0]->doubtful_point);
  CHECK(!open.columns[1]->doubtful_point);
  CHECK(!open.columns[2]->doubtful_point);
  CHECK(open.columns[0]->numbers[0] == 1.2);
  CellRules comma;
  comma.decimal = ",";
  comma.decimal_given = true;
  const Table settled = read_delimited(text, ',', true, comma);
  CHECK(!settled.columns[0]->doubtful_point);
  CHECK(settled.columns[0]->texts == Texts{"1.200"});
  CHECK(settled.columns[0]->numbers[1] == 3);
}

TEST_CASE("what cannot be read") {
  CHECK_THROWS_AS(read_delimited("a\n\"b\n", ',', true), Refusal);
  CHECK_THROWS_AS(read_delimited("a\nb\"c\n", ',', true), Refusal);
  CHECK_THROWS_AS(read_delimited("a\n\"b\"c\n", ',', true), Refusal);
  CHECK_THROWS_AS(read_delimited("a\n\xff\n", ',', true), Refusal);
  CHECK_THROWS_AS(read_delimited(std::string_view("a\n\0\n", 4), ',', true), Refusal);
  CHECK(read_delimited("", ',', true).columns.empty());
  CHECK(read_delimited("\xEF\xBB\xBF"
                       "a\n1\n",
                       ',', true)
            .columns[0]
            ->name == "a");
}

TEST_CASE("UTF-8 by the byte ranges of RFC 3629") {
  for (const char* good : {"", "a", "\xC2\x80", "\xDF\xBF", "\xE0\xA0\x80", "\xED\x9F\xBF", "\xEE\x80\x80",
                           "\xEF\xBF\xBF", "\xF0\x90\x80\x80", "\xF4\x8F\xBF\xBF", "a\xC3\xA9"}) {
    CAPTURE(good);
    CHECK(valid_utf8(good));
  }
  for (const char* bad : {"\x80", "\xC0\x80", "\xC1\xBF", "\xC2",
                          "\xC2"
                          "a",
                          "\xE0\x9F\xBF", "\xE0\xA0", "\xED\xA0\x80", "\xF0\x8F\xBF\xBF", "\xF4\x90\x80\x80",
                          "\xF5\x80\x80\x80", "\xFF", "a\xE2\x82"}) {
    CAPTURE(bad);
    CHECK(!valid_utf8(bad));
  }
  CHECK(!valid_utf8(std::string_view("a\0b", 3)));
}

}  // namespace
}  // namespace countsel
