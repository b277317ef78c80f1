// tests/engine/rates/comparison_coverage_test.cpp -- how often do the comparisons' methods keep their word?
//
// Sizes of tests and coverage of limits, summed over all counts that matter, beside the committed table
// tests/reference/rates/comparison_coverage.tsv. Run with COUNTSEL_WRITE_REFERENCE=1 to write it anew.
#include <doctest/doctest.h>

#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <fstream>
#include <initializer_list>
#include <string>
#include <vector>

#include "engine/numbers/distributions.hpp"
#include "engine/rates/expected_ratio.hpp"
#include "engine/rates/many_rates.hpp"
#include "engine/rates/standardise.hpp"
#include "engine/rates/strata.hpp"

namespace countsel {
namespace {

struct Kept {
  std::string what, method, setting;
  double share;
};

double reach(double mean) { return std::ceil(mean + 9 * std::sqrt(mean) + 25); }

// Chance that a true null hypothesis is rejected at 5 % when `mean` events were rightly expected.
void expected_sizes(std::vector<Kept>& table) {
  const std::pair<TestMethod, const char*> methods[] = {{TestMethod::exact, "exact"},
                                                        {TestMethod::mid_p, "mid-p"},
                                                        {TestMethod::score, "score"},
                                                        {TestMethod::likelihood, "likelihood"}};
  for (const auto& [method, name] : methods)
    for (const double mean : {0.5, 1.0, 2.0, 5.0, 10.0, 20.0, 50.0, 200.0}) {
      double size = 0;
      for (double k = 0; k < reach(mean); ++k)
        if (expected_test(k, mean, method, Direction::either) <= 0.05) size += poisson_exactly(k, mean);
      table.push_back(
          {"size of on_target at 0.05", name, "expected " + std::to_string(mean).substr(0, 5), size});
    }
}

// Three groups of equal exposure, each with this mean; also the test given the sum.
void many_sizes(std::vector<Kept>& table) {
  const std::vector<double> exposures = {1, 1, 1};
  for (const double mean : {0.5, 1.0, 2.0, 5.0, 10.0}) {
    double likelihood = 0, pearson = 0, conditional = 0;
    const double most = std::min(reach(mean), 40.0);
    for (double a = 0; a < most; ++a)
      for (double b = 0; b <= a; ++b)
        for (double c = 0; c <= b; ++c) {
          // Sorted counts stand for all their orders.
          const double orders = a == b && b == c ? 1 : a == b || b == c ? 3 : 6;
          const double chance =
              orders * poisson_exactly(a, mean) * poisson_exactly(b, mean) * poisson_exactly(c, mean);
          if (chance < 1e-9) continue;
          const std::vector<double> counts = {a, b, c};
          if (many_rates_test(counts, exposures, Distance::likelihood).p_value <= 0.05) likelihood += chance;
          if (many_rates_test(counts, exposures, Distance::pearson).p_value <= 0.05) pearson += chance;
          if (conditional_rates_test(counts, exposures, {}, {}).p_value <= 0.05) conditional += chance;
        }
    const std::string setting = "3 groups, mean " + std::to_string(mean).substr(0, 4);
    table.push_back({"size of do_they_differ at 0.05", "likelihood", setting, likelihood});
    table.push_back({"size of do_they_differ at 0.05", "pearson", setting, pearson});
    table.push_back({"size of do_they_differ at 0.05", "conditional", setting, conditional});
  }
}

// Two strata with weights 4 to 1 per event; 95 % limits of the standardised rate.
void direct_coverage(std::vector<Kept>& table) {
  const std::pair<DirectMethod, const char*> methods[] = {{DirectMethod::gamma, "gamma"},
                                                          {DirectMethod::mid_p, "mid-p"},
                                                          {DirectMethod::dobson, "dobson"},
                                                          {DirectMethod::normal, "normal"}};
  const std::vector<double> weights = {4, 1};
  for (const auto& [method, name] : methods)
    for (const double mean : {1.0, 3.0, 10.0, 30.0}) {
      DirectSpec spec;
      spec.method = method;
      double covered = 0;
      const double truth = mean;  // each stratum has exposure 1 and this mean
      for (double x = 0; x < reach(mean); ++x)
        for (double y = 0; y < reach(mean); ++y) {
          const double chance = poisson_exactly(x, mean) * poisson_exactly(y, mean);
          if (chance < 1e-9) continue;
          const auto rate = direct_rates({1, 2, {x, y}, {1, 1}}, weights, spec).at(0);
          if (rate.low <= truth && truth <= rate.high) covered += chance;
        }
      table.push_back({"coverage of same_mix at 0.95", name,
                       "2 strata, weights 4:1, mean " + std::to_string(mean).substr(0, 4), covered});
    }
}

// Two strata of two groups, ratio 2 in both; 95 % limits of the common ratio.
void strata_coverage(std::vector<Kept>& table) {
  const std::pair<StrataMethod, const char*> methods[] = {{StrataMethod::mantel_haenszel, "mantel-haenszel"},
                                                          {StrataMethod::exact, "exact"},
                                                          {StrataMethod::mid_p, "mid-p"},
                                                          {StrataMethod::likelihood, "likelihood"}};
  for (const double mean : {0.5, 2.0, 5.0}) {
    double covered[4] = {};
    const double most = std::min(reach(2 * mean), 30.0);
    for (double a = 0; a < most; ++a)
      for (double b = 0; b < most; ++b)
        for (double c = 0; c < most; ++c)
          for (double d = 0; d < most; ++d) {
            const double chance = poisson_exactly(a, 2 * mean) * poisson_exactly(b, mean) *
                                  poisson_exactly(c, mean) * poisson_exactly(d, mean / 2);
            if (chance < 2e-7) continue;
            const std::vector<TwoRates> strata = {{a, 1, b, 1}, {c, 1, d, 1}};
            for (std::size_t i = 0; i < 4; ++i) {
              Limits limits{};
              if (methods[i].first == StrataMethod::mantel_haenszel) {
                const auto mh = mantel_haenszel(strata, 0.95);
                limits = {mh.ratio_low, mh.ratio_high};
              } else {
                const auto method = methods[i].first == StrataMethod::exact   ? RatioMethod::exact
                                    : methods[i].first == StrataMethod::mid_p ? RatioMethod::mid_p
                                                                              : RatioMethod::likelihood;
                const auto common = common_ratio(strata, method, 0.95);
                limits = {common.low, common.high};
              }
              if (limits.low <= 2 && 2 <= limits.high) covered[i] += chance;
            }
          }
    for (std::size_t i = 0; i < 4; ++i)
      table.push_back(
          {"coverage of within_strata at 0.95", methods[i].second,
           "2 strata, ratio 2, reference means " + std::to_string(mean).substr(0, 3) + " and half",
           covered[i]});
  }
}

TEST_CASE("sizes and coverage are those of the committed table") {
  std::vector<Kept> table;
  expected_sizes(table);
  many_sizes(table);
  direct_coverage(table);
  strata_coverage(table);
  const std::string path = std::string(REFERENCE_DIR) + "/rates/comparison_coverage.tsv";
  if (std::getenv("COUNTSEL_WRITE_REFERENCE") != nullptr) {
    std::ofstream file(path);
    file << "# Enumerated by tests/engine/rates/comparison_coverage_test.cpp over all counts that matter "
            "(error below\n"
            "# 0.0005). A share: of true hypotheses rejected (size) or of true values inside the limits "
            "(coverage; a\n"
            "# method without a value counts as not covering).\nwhat\tmethod\tsetting\tshare\n";
    for (const auto& row : table) {
      char share[16];
      std::snprintf(share, sizeof share, "%.4f", row.share);
      file << row.what << '\t' << row.method << '\t' << row.setting << '\t' << share << '\n';
    }
  }
  std::ifstream file(path);
  REQUIRE(file);
  std::string line;
  std::size_t row = 0;
  while (std::getline(file, line)) {
    if (line[0] == '#' || line.rfind("what", 0) == 0) continue;
    REQUIRE(row < table.size());
    const auto tab = line.rfind('\t');
    CAPTURE(line);
    CHECK(line.substr(0, tab) == table[row].what + '\t' + table[row].method + '\t' + table[row].setting);
    CHECK(std::abs(std::stod(line.substr(tab + 1)) - table[row].share) < 0.0002);
    ++row;
  }
  CHECK(row == table.size());
  // What the methods promise.
  for (const auto& kept : table) {
    CAPTURE(kept.what);
    CAPTURE(kept.method);
    CAPTURE(kept.setting);
    if (kept.what.find("on_target") != std::string::npos && kept.method == "exact") CHECK(kept.share <= 0.05);
    if (kept.method == "conditional") CHECK(kept.share <= 0.05);
    if (kept.method == "gamma") CHECK(kept.share >= 0.95);
    if (kept.what.find("within_strata") != std::string::npos && kept.method == "exact")
      CHECK(kept.share >= 0.9495);
  }
}

}  // namespace
}  // namespace countsel
