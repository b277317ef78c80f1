// tests/engine/table/audit_test.cpp -- each mistake is found where it is, and honest tables are left alone.
#include "engine/table/audit.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <limits>
#include <string>
#include <vector>

#include "engine/numbers/random.hpp"
#include "engine/refusal.hpp"

namespace countsel {
namespace {

const double blank = std::numeric_limits<double>::quiet_NaN();

std::vector<std::string> months(std::size_t n) {
  std::vector<std::string> labels;
  for (std::size_t i = 0; i < n; ++i)
    labels.push_back(std::to_string(2021 + i / 12) + (i % 12 < 9 ? "-0" : "-") + std::to_string(i % 12 + 1));
  return labels;
}

TEST_CASE("one month's line-days tripled") {
  std::vector<double> exposures{310, 295, 322, 301, 918, 288, 305, 330, 299, 312, 280, 307};
  const auto labels = months(12);
  const auto findings = exposure_jumps({{}, exposures, labels, {}});
  REQUIRE(findings.size() == 1);
  CHECK(findings[0].kind == FindingKind::exposure_jump);
  CHECK(findings[0].row == 5);
  CHECK(findings[0].factor == doctest::Approx(3).epsilon(0.03));
  CHECK(findings[0].sure);
  exposures[4] = 318;
  CHECK(exposure_jumps({{}, exposures, labels, {}}).empty());
  exposures[11] = 31;  // the last month booked in other units
  const auto last = exposure_jumps({{}, exposures, labels, {}});
  REQUIRE(last.size() == 1);
  CHECK(last[0].row == 12);
  CHECK(last[0].factor < 0.11);
}

TEST_CASE("a change of unit half way is a shift, once, at its first row") {
  const auto labels = months(16);
  std::vector<double> exposures;
  for (int i = 0; i < 16; ++i) exposures.push_back((i < 7 ? 1.0 : 1000.0) * (20 + i % 3));
  const auto findings = exposure_jumps({{}, exposures, labels, {}});
  REQUIRE(findings.size() == 1);
  CHECK(findings[0].kind == FindingKind::exposure_shift);
  CHECK(findings[0].row == 8);
  CHECK(findings[0].factor == doctest::Approx(1000).epsilon(0.1));
  CHECK(exposure_jumps({{}, exposures, {}, {}}).empty());
}

TEST_CASE("series are looked at one by one") {
  std::vector<double> exposures;
  std::vector<std::string> labels;
  std::vector<std::int32_t> series;
  const auto periods = months(8);
  for (std::size_t i = 0; i < 8; ++i)
    for (std::int32_t ward = 0; ward < 3; ++ward) {
      exposures.push_back(std::vector<double>{30, 900, 12000}[static_cast<std::size_t>(ward)] *
                          (1 + 0.05 * static_cast<double>(i % 3)));
      labels.push_back(periods[i]);
      series.push_back(ward);
    }
  CHECK(audit_table({{}, exposures, labels, series}).empty());
  exposures[10] *= 4;
  const auto findings = audit_table({{}, exposures, labels, series});
  REQUIRE(findings.size() == 1);
  CHECK(findings[0].row == 11);
}

TEST_CASE("units of very different size are nobody's mistake") {
  RandomStream stream(1);
  std::size_t wrong = 0;
  for (int trial = 0; trial < 200; ++trial) {
    std::vector<double> counts, exposures;
    std::vector<std::string> labels;
    for (int i = 0; i < 30; ++i) {
      exposures.push_back(std::floor(10 + std::exp(1 + 6 * stream.uniform())));
      counts.push_back(draw_poisson(stream, 0.05 * exposures.back()));
      labels.push_back("ward " + std::to_string(i));
    }
    wrong += audit_table({counts, exposures, labels, {}}).size();
  }
  CHECK(wrong <= 2);
}

TEST_CASE("exposures that are logarithms") {
  const std::vector<double> counts{3, 0, 5, 2}, days{1200, 800, 1500, 950};
  std::vector<double> logs, rounded;
  for (const double day : days) {
    logs.push_back(std::log(day));
    rounded.push_back(std::round(100 * std::log(day)) / 100);
  }
  const auto full = exposure_logarithms({counts, logs, {}, {}});
  REQUIRE(full.size() == 1);
  CHECK(full[0].sure);
  CHECK(full[0].row == 0);
  const auto doubt = exposure_logarithms({counts, rounded, {}, {}});
  REQUIRE(doubt.size() == 1);
  CHECK(doubt[0].sure == false);
  // Counts that rise as exp(exposure) does settle it.
  const std::vector<double> steep{2.1, 4.4, 6.9, 8.3}, many{1, 9, 100, 400};
  const auto settled = exposure_logarithms({many, steep, {}, {}});
  REQUIRE(settled.size() == 1);
  CHECK(settled[0].sure);
  // Below 0: km in service cannot be.
  const std::vector<double> below{-0.51, 1.2, 0.33};
  CHECK(exposure_logarithms({{}, below, {}, {}}).size() == 1);
  // Ordinary lengths in km, hours, whole days: nothing to say.
  const std::vector<double> km{3.2, 12.1, 5.65, 0.8, 9.9}, hours{7.5, 8, 7.75, 8, 6.5}, whole{12, 9, 14, 3};
  CHECK(exposure_logarithms({counts, whole, {}, {}}).empty());
  CHECK(exposure_logarithms({{}, km, {}, {}}).empty());
  CHECK(exposure_logarithms({{}, hours, {}, {}}).empty());
}

TEST_CASE("rates where counts belong, and what they were stated per") {
  const std::vector<double> exposures{1200, 800, 1500, 950}, counts{3, 0, 5, 2};
  std::vector<double> rates;
  for (std::size_t i = 0; i < 4; ++i)
    rates.push_back(std::round(1e4 * counts[i] / exposures[i] * 1000) / 1e4);
  const auto found = rates_for_counts({rates, exposures, {}, {}});
  REQUIRE(found.size() == 1);
  CHECK(found[0].row == 1);
  CHECK(found[0].factor == 1000);
  CHECK(found[0].value == 3);
  CHECK(found[0].sure);
  CHECK(rates_for_counts({counts, exposures, {}, {}}).empty());
  const std::vector<double> slip{3, 0.5, 5, 2};
  const auto doubt = rates_for_counts({slip, exposures, {}, {}});
  REQUIRE(doubt.size() == 1);
  CHECK(doubt[0].row == 2);
  CHECK(doubt[0].sure == false);
  CHECK(std::isnan(doubt[0].factor));
}

TEST_CASE("totals rows, with and without a word") {
  const std::vector<double> counts{3, 0, 5, 8}, exposures{1200, 800, 1500, 3500},
      blanks{1200, 800, 1500, blank};
  const std::vector<std::string> named{"North", "East", "South", "Total"},
      silent{"North", "East", "South", ""}, other{"North", "East", "South", "West"};
  REQUIRE(totals_rows({counts, exposures, named, {}}).size() == 1);
  CHECK(totals_rows({counts, exposures, named, {}})[0].row == 4);
  CHECK(totals_rows({counts, exposures, named, {}})[0].value == 8);
  CHECK(totals_rows({counts, blanks, named, {}}).size() == 1);
  CHECK(totals_rows({counts, exposures, silent, {}}).size() == 1);
  CHECK(totals_rows({counts, exposures, {}, {}}).size() == 1);
  CHECK(totals_rows({counts, exposures, other, {}}).empty());
  // Chance makes sums too: two alike, three in a row, an exposure that is no sum.
  const std::vector<double> pair{5, 5}, row{1, 2, 3}, uneven{1200, 800, 1500, 700};
  CHECK(totals_rows({pair, {}, {}, {}}).empty());
  CHECK(totals_rows({row, {}, {}, {}}).empty());
  CHECK(totals_rows({counts, uneven, {}, {}}).empty());
  // A total first, and one that is no total.
  const std::vector<double> ahead{8, 3, 0, 5}, not_sum{3, 0, 5, 7};
  const std::vector<std::string> all_first{"All wards", "North", "East", "South"};
  REQUIRE(totals_rows({ahead, {}, all_first, {}}).size() == 1);
  CHECK(totals_rows({ahead, {}, all_first, {}})[0].row == 1);
  CHECK(totals_rows({not_sum, exposures, named, {}}).empty());
  // Subtotals and the grand total below them.
  const std::vector<double> nested{1, 2, 3, 4, 5, 9, 12};
  const std::vector<std::string> parts{"a", "b", "subtotal", "c", "d", "subtotal", "grand total"};
  const auto found = totals_rows({nested, {}, parts, {}});
  REQUIRE(found.size() == 3);
  CHECK(found[2].row == 7);
}

TEST_CASE("words for totals") {
  for (const char* word :
       {"Total", " TOTAL ", "all", "All wards", "grand total", "Sum", "overall", "Sub-total"})
    CHECK(says_total(word));
  for (const char* word : {"", "Allston", "Summer", "Totalling Road", "north", "2024"})
    CHECK(says_total(word) == false);
}

TEST_CASE("labels twice") {
  const std::vector<std::string> labels{"North", "South", "north ", "South", "", ""};
  const auto found = repeated_labels({{}, {}, labels, {}});
  REQUIRE(found.size() == 2);
  CHECK(found[0].kind == FindingKind::nearly_repeated);
  CHECK(found[0].row == 3);
  CHECK(found[0].other_row == 1);
  CHECK(found[1].kind == FindingKind::repeated_label);
  CHECK(found[1].other_row == 2);
  std::vector<std::string> periods{"2024-01", "2024-02", "2024-02", "2024-04"};
  REQUIRE(repeated_labels({{}, {}, periods, {}}).size() == 1);
  CHECK(repeated_labels({{}, {}, periods, {}})[0].kind == FindingKind::repeated_period);
  const std::vector<std::int32_t> apart{0, 0, 1, 1};
  CHECK(repeated_labels({{}, {}, periods, apart}).empty());
}

TEST_CASE("what is a period") {
  for (const auto& labels : {std::vector<std::string>{"2019", "2020"},
                             {"Jan 2024", "Feb 2024", "Total"},
                             {"2024Q1", "2024 Q2"},
                             {"2024-W05"},
                             {"Sept", "October"},
                             {"2024-03-01", ""}})
    CHECK(are_periods(labels));
  for (const auto& labels :
       {std::vector<std::string>{"North"}, {""}, {"12", "13"}, {"2024", "Marching Lane"}, {"48213"}})
    CHECK(are_periods(labels) == false);
}

TEST_CASE("blanks and zeros are counted apart") {
  const std::vector<double> numbers{0, blank, 3, 0, -1, 2.5};
  const NumberSummary summary = summarise_numbers(numbers);
  CHECK(summary.rows == 6);
  CHECK(summary.blanks == 1);
  CHECK(summary.zeros == 2);
  CHECK(summary.negative == 1);
  CHECK(summary.not_whole == 1);
  CHECK(summary.least == -1);
  CHECK(summary.greatest == 3);
  const std::vector<double> short_one{1};
  CHECK_THROWS_AS(audit_table({numbers, short_one, {}, {}}), Refusal);
}

}  // namespace
}  // namespace countsel
