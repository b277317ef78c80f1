// tests/protocol/data/cells_test.cpp -- numbers as people and hosts write them.
#include "protocol/data/cells.hpp"

#include <doctest/doctest.h>

#include "protocol/wire/large_counts.hpp"

namespace countsel {
namespace {

CellRules rules(const std::string& decimal, const std::string& thousands) {
  CellRules made;
  if (!decimal.empty()) made.decimal = decimal;
  made.decimal_given = !decimal.empty();
  made.thousands = thousands;
  return made;
}

double number(const char* text, const CellRules& marks = {}) {
  CAPTURE(text);
  const auto cell = read_number(text, marks);
  CHECK(cell.reads == Reads::number);
  return cell.value;
}
Reads reads(const char* text, const CellRules& marks = {}) { return read_number(text, marks).reads; }

TEST_CASE("numbers that leave no doubt") {
  CHECK(number("12") == 12);
  CHECK(number(" 12 ") == 12);
  CHECK(number("-0.5") == -0.5);
  CHECK(number("+3") == 3);
  CHECK(number("\xE2\x88\x92"
               "3") == -3);
  CHECK(number(".5") == 0.5);
  CHECK(number("5.") == 5);
  CHECK(number("1e3") == 1000);
  CHECK(number("1.5E-3") == 0.0015);
  CHECK(number("007") == 7);
  CHECK(number("0.125") == 0.125);
  CHECK(number("1234.567") == 1234.567);
  CHECK(number("1.23") == 1.23);
  CHECK(number("1.2345") == 1.2345);
}

TEST_CASE("marks that could be either") {
  for (const char* text :
       {"1,200", "1.200", "12.345", "999,999", "-1.200", "1,200,300", "1.200.300", "1,200.5", "1.200,5"})
    CHECK(reads(text) == Reads::ambiguous);
  for (const char* text : {"3,5", "0,125", "1234,5", ",5", "12,3456"})
    CHECK(reads(text) == Reads::decimal_comma);
}

TEST_CASE("one mark that is named settles both") {
  CHECK(number("1,200", rules(".", "")) == 1200);
  CHECK(number("1.200", rules(".", "")) == 1.2);
  CHECK(number("1,200", rules(",", "")) == 1.2);
  CHECK(number("1.200,5", rules(",", "")) == 1200.5);
  CHECK(number("1.200", rules("", ".")) == 1200);
  CHECK(number("1.200,5", rules("", ".")) == 1200.5);
  CHECK(number("1,200.5", rules("", ",")) == 1200.5);
  CHECK(number("1 200.5", rules("", " ")) == 1200.5);
  CHECK(number("1\xC2\xA0"
               "200,5",
               rules(",", " ")) == 1200.5);
  CHECK(number("1\xE2\x80\x99"
               "200",
               rules("", "'")) == 1200);
  CHECK(number("-1,234,567.25", rules("", ",")) == -1234567.25);
  CHECK(number("1,200e2", rules("", ",")) == 120000);
}

TEST_CASE("thousands marks at odd places") {
  for (const char* text : {"12,00", "1,2,3", "1200,300", ",200", "1,,200", "1,200,"}) {
    CAPTURE(text);
    CHECK(reads(text, rules("", ",")) == Reads::bad_grouping);
  }
}

TEST_CASE("texts that are no numbers") {
  for (const char* text : {"", " ", "x", "12a", "1 2", "--1", "+-1", "1e", "1e999", "0x10", "inf", "nan",
                           "NA", "5%", ".", ",", "..", "-", "1-2"}) {
    CAPTURE(text);
    CHECK(reads(text) == Reads::no_number);
  }
}

TEST_CASE("what is beyond 2^53 stays beyond") {
  constexpr double largest = largest_count;
  CHECK(number("9007199254740992") == largest);
  CHECK(number("9007199254740992.4") == largest);
  CHECK(number("9007199254740993") > largest);
  CHECK(number("+09007199254740993.5") > largest);
  CHECK(number("-9007199254740993") < -largest);
  CHECK(beyond_largest_count(5, "9007199254740993") == 5);
  CHECK(beyond_largest_count(largest, "9.007199254740992e15") == largest);
}

TEST_CASE("error texts of hosts") {
  for (const char* text : {"#N/A", "#DIV/0!", "#REF!", "#VALUE!", "#NAME?", "#NUM!", "#NULL!", "#SPILL!",
                           "#NV", "#BEZUG!", "#GETTING_DATA", "Err:502", " #N/A ", "#\xC2\xA1VALOR!"}) {
    CAPTURE(text);
    CHECK(error_text(text));
  }
  for (const char* text :
       {"", "#", "#!", "#5", "#hash!", "#Big Deal!", "Err:", "Err:x", "N/A", "#N", "#NAME"}) {
    CAPTURE(text);
    CHECK(!error_text(text));
  }
}

}  // namespace
}  // namespace countsel
