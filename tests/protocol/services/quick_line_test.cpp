// tests/protocol/services/quick_line_test.cpp -- the grammar of spoken lines.
#include "protocol/services/quick_line.hpp"

#include <doctest/doctest.h>

#include "engine/refusal.hpp"

namespace countsel {
namespace {

TEST_CASE("one pair") {
  const auto line = read_spoken("12 falls in 3,400 bed-days per 1,000 at 90%");
  CHECK(line.first.count == 12);
  CHECK(line.first.events == "falls");
  CHECK(line.first.exposure == 3400);
  CHECK(line.first.unit == "bed-days");
  CHECK(line.per == 1000);
  CHECK(*line.confidence == doctest::Approx(0.9));
  CHECK(!line.second);
  CHECK(!read_spoken("7").first.exposure);
}

TEST_CASE("two pairs, by every word for it") {
  for (const char* between : {" vs ", " versus ", " v ", " against ", " VS ", ", vs "}) {
    const auto line = read_spoken(std::string("14 in 2300") + between + "5 in 2100");
    REQUIRE(line.second);
    CHECK(line.second->count == 5);
    CHECK(line.second->exposure == 2100);
  }
}

TEST_CASE("a rate to be held against") {
  const auto line = read_spoken("7 in 1200 against 2.5 per 1000");
  CHECK(!line.second);
  CHECK(line.target_rate == 2.5);
  CHECK(line.per == 1000);
  CHECK(read_spoken("7 falls in 1200 bed-days against 2.5 falls per 1000 bed-days").per_unit == "bed-days");
}

TEST_CASE("numbers") {
  CHECK(read_spoken("1,234,567").first.count == 1234567);
  CHECK(read_spoken("7 in 1,234.5").first.exposure == 1234.5);
  CHECK(read_spoken("7 in .5").first.exposure == 0.5);
  CHECK(read_spoken("7 in 1e6").first.exposure == 1e6);
  CHECK(read_spoken("7 in 2.5E-3").first.exposure == 0.0025);
  CHECK(read_spoken("7, in 1200").first.count == 7);
  CHECK(read_spoken("7 in 1200.").first.exposure == 1200);
}

TEST_CASE("a closing question") {
  for (const char* end :
       {"?", " ?", " is it different?", ", is it different?", " is that more", "; are they different ?"}) {
    const std::string line = std::string("14 in 2300 vs 5 in 2100") + end;
    CAPTURE(line);
    CHECK(read_spoken(line).second);
  }
}

TEST_CASE("what cannot be read") {
  for (const std::string line : {"",
                                 " ",
                                 "falls",
                                 "7 in",
                                 "in 7",
                                 "7 in x",
                                 "3,5 in 7",
                                 "12,34",
                                 "1,2345",
                                 "1234,567",
                                 "1.5,200",
                                 "7 per 0",
                                 "7 at 90",
                                 "7 at 0%",
                                 "7 at 100%",
                                 "7 in 5 in 5",
                                 "7 in 5 vs",
                                 "7 vs 5 in 3",
                                 "7 in 3 vs 5",
                                 "-7",
                                 "7 in -5",
                                 "1 in 2 vs 3 in 4 vs 5 in 6",
                                 "7 per 5 per 6",
                                 "7 + 5",
                                 "7 in 1e999",
                                 "7 out 5",
                                 "7 is 5",
                                 "7 in 5 6"}) {
    CAPTURE(line);
    CHECK_THROWS_AS(read_spoken(line), Refusal);
  }
}

}  // namespace
}  // namespace countsel
