// tests/protocol/wording/words_test.cpp -- singular, plural, units.
#include "protocol/wording/words.hpp"

#include <doctest/doctest.h>

#include <cmath>

namespace countsel {
namespace {

TEST_CASE("singulars") {
  for (const auto& [plural, one] : {std::pair<std::string, std::string>{"km-years", "km-year"},
                                    {"policies", "policy"},
                                    {"bursts", "burst"},
                                    {"crashes", "crash"},
                                    {"losses", "loss"},
                                    {"boxes", "box"},
                                    {"branches", "branch"},
                                    {"series", "series"},
                                    {"loss", "loss"},
                                    {"buses", "bus"},
                                    {"sheep", "sheep"},
                                    {"hours worked", "hour worked"},
                                    {"vehicle hours", "vehicle hour"},
                                    {"km", "km"},
                                    {"analysis", "analysis"},
                                    {"days", "day"},
                                    {"cases", "case"},
                                    {"ties", "tie"},
                                    {"houses", "house"},
                                    {"accidents", "accident"},
                                    {"virus", "virus"}}) {
    CAPTURE(plural);
    CHECK(singular(plural) == one);
  }
}

Wording wording(Words words, double per, bool exposure_given = true) {
  return Wording(words, {.per = per, .confidence = 0.95, .exposure_given = exposure_given});
}

TEST_CASE("the asker's own words") {
  const Wording own =
      wording({.event = "", .events = "falls", .exposure = "bed-days", .period = "2024"}, 1000);
  CHECK(own.event() == "fall");
  CHECK(own.counted(1) == "1 fall");
  CHECK(own.counted(0) == "no falls");
  CHECK(own.counted(1204) == "1,204 falls");
  CHECK(own.observed(3400) == "3,400 bed-days");
  CHECK(own.observed(1) == "1 bed-day");
  CHECK(own.per() == "per 1,000 bed-days");
  CHECK(own.rate_unit() == "falls per 1,000 bed-days");
  CHECK(own.period() == " in 2024");
  CHECK(wording({.event = "", .events = "", .exposure = "km-years", .period = ""}, 1).per() == "per km-year");
}

TEST_CASE("words that stand in for missing ones") {
  const Wording none = wording({}, 1);
  CHECK(none.rate_unit() == "events per unit of exposure");
  CHECK(none.counted(1) == "1 event");
  CHECK(wording({}, 1, false).per() == "per row");
  CHECK(wording({.event = "burst", .events = "", .exposure = "", .period = ""}, 10).rate_unit() ==
        "bursts per 10 units of exposure");
}

TEST_CASE("limits in words") {
  const Wording any = wording({}, 1);
  const double inf = INFINITY;
  CHECK(any.limits(5.8, 2.345, 12.02) == "between 2.3 and 12.0");
  CHECK(any.limits(0, 0, 4.611) == "at most 4.6");
  CHECK(any.limits(3, 1.2, inf) == "at least 1.2");
  CHECK(any.limits(3, 0, inf) == "anywhere from 0 upwards");
}

TEST_CASE("lists") {
  CHECK(listed({}) == "");
  CHECK(listed({"A"}) == "A");
  CHECK(listed({"A", "B"}) == "A and B");
  CHECK(listed({"A", "B", "C"}) == "A, B and C");
  CHECK(listed({"A", "B", "C", "D"}, 2) == "A, B and 2 more");
  CHECK(capital("no falls") == "No falls");
  CHECK(capital("") == "");
  CHECK(capital("é") == "é");
}

}  // namespace
}  // namespace countsel
