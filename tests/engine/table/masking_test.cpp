// tests/engine/table/masking_test.cpp -- attacks what is shown: every table that fits it is tried.
#include "engine/table/masking.hpp"

#include <doctest/doctest.h>

#include <algorithm>
#include <cmath>
#include <limits>
#include <set>
#include <vector>

#include "engine/numbers/random.hpp"
#include "engine/refusal.hpp"

namespace countsel {
namespace {

const double blank = std::numeric_limits<double>::quiet_NaN();

// A reader who knows the rule: what a withheld count may be, given its mark. A count kept back has no upper
// bound, but values within 3 of the true one are enough to show that it is not settled.
std::vector<double> candidates(Shown shown, double value, double threshold) {
  std::vector<double> values;
  if (shown == Shown::plain) return {value};
  if (shown == Shown::small)
    for (double x = 0; x < threshold; ++x) values.push_back(x);
  else
    for (double x = std::max(threshold, value - 3); x <= value + 3; ++x) values.push_back(x);
  return values;
}
bool fits(Shown shown, double value, double truth, double threshold) {
  if (shown == Shown::plain) return value == truth;
  return (shown == Shown::small) == (value < threshold);
}

// Whether every withheld number, cell or margin, takes two values or more over all tables that fit.
class Attack {
 public:
  Attack(const std::vector<double>& truth, std::size_t rows, std::size_t columns, double threshold,
         const MaskedTable& masked)
      : truth_(truth),
        guess_(truth),
        rows_(rows),
        columns_(columns),
        threshold_(threshold),
        masked_(masked),
        seen_((rows + 1) * (columns + 1)) {}

  bool nothing_found() {
    search(0);
    for (std::size_t r = 0; r <= rows_; ++r)
      for (std::size_t c = 0; c <= columns_; ++c)
        if (mark(r, c) != Shown::plain && seen_[r * (columns_ + 1) + c].size() < 2) return false;
    return true;
  }

 private:
  Shown mark(std::size_t r, std::size_t c) const {
    if (r < rows_ && c < columns_) return masked_.cells[r * columns_ + c];
    if (r < rows_) return masked_.row_totals[r];
    return c < columns_ ? masked_.column_totals[c] : masked_.grand_total;
  }
  double total(const std::vector<double>& cells, std::size_t r, std::size_t c) const {
    double sum = 0;
    for (std::size_t i = 0; i < rows_; ++i)
      for (std::size_t j = 0; j < columns_; ++j)
        if ((r == rows_ || i == r) && (c == columns_ || j == c) && !std::isnan(cells[i * columns_ + j]))
          sum += cells[i * columns_ + j];
    return sum;
  }
  void search(std::size_t at) {
    if (done()) return;
    if (at == truth_.size()) {
      for (std::size_t c = 0; c <= columns_; ++c)
        if (!fits(mark(rows_, c), total(guess_, rows_, c), total(truth_, rows_, c), threshold_)) return;
      for (std::size_t r = 0; r <= rows_; ++r)
        for (std::size_t c = 0; c <= columns_; ++c)
          seen_[r * (columns_ + 1) + c].insert(r < rows_ && c < columns_ ? guess_[r * columns_ + c]
                                                                         : total(guess_, r, c));
      return;
    }
    const bool last_in_row = at % columns_ == columns_ - 1;
    for (const double value : candidates(masked_.cells[at], truth_[at], threshold_)) {
      guess_[at] = value;
      const std::size_t r = at / columns_;
      if (last_in_row &&
          !fits(mark(r, columns_), total(guess_, r, columns_), total(truth_, r, columns_), threshold_))
        continue;
      search(at + 1);
    }
    guess_[at] = truth_[at];
  }
  bool done() const {
    for (std::size_t r = 0; r <= rows_; ++r)
      for (std::size_t c = 0; c <= columns_; ++c)
        if (mark(r, c) != Shown::plain && seen_[r * (columns_ + 1) + c].size() < 2) return false;
    return true;
  }

  std::vector<double> truth_, guess_;
  std::size_t rows_, columns_;
  double threshold_;
  MaskedTable masked_;
  std::vector<std::set<double>> seen_;
};

TEST_CASE("no withheld count of a table can be worked out from cells, margins and marks") {
  RandomStream stream(3);
  int withheld = 0, small = 0;
  for (int trial = 0; trial < 3000; ++trial) {
    const std::size_t rows = 1 + stream.below(3), columns = 1 + stream.below(3);
    const double threshold = 3 + static_cast<double>(stream.below(3)),
                 mean = std::exp(0.5 + 2.5 * stream.uniform());
    std::vector<double> counts;
    for (std::size_t i = 0; i < rows * columns; ++i)
      counts.push_back(draw_poisson(stream, mean * 2 * stream.uniform()));
    const MaskedTable masked = mask_table(counts, rows, columns, threshold);
    for (std::size_t i = 0; i < counts.size(); ++i) {
      CHECK((masked.cells[i] == Shown::small) == (counts[i] < threshold));
      small += masked.cells[i] == Shown::small;
      withheld += masked.cells[i] == Shown::kept_back;
    }
    CAPTURE(counts);
    CAPTURE(rows);
    CAPTURE(threshold);
    CHECK(masked.safe);
    CHECK(Attack(counts, rows, columns, threshold, masked).nothing_found());
  }
  CHECK(small > 1000);
  CHECK(withheld < 2 * small);
}

TEST_CASE("the attack itself finds what a careless table gives away") {
  const std::vector<double> counts{2, 20, 30, 40};
  MaskedTable careless{{Shown::small, Shown::plain, Shown::plain, Shown::plain},
                       {Shown::plain, Shown::plain},
                       {Shown::plain, Shown::plain},
                       Shown::plain,
                       true};
  CHECK(Attack(counts, 2, 2, 5, careless).nothing_found() == false);
  careless.cells[1] = Shown::kept_back;  // the columns still tell
  CHECK(Attack(counts, 2, 2, 5, careless).nothing_found() == false);
  careless.cells = {Shown::small, Shown::kept_back, Shown::kept_back, Shown::kept_back};
  CHECK(Attack(counts, 2, 2, 5, careless).nothing_found());
}

TEST_CASE("a table masked as one would by hand") {
  // One small count in a corner of three by three: three others make the square, the smallest that will do.
  const std::vector<double> counts{2, 40, 12, 30, 90, 80, 11, 70, 10};
  const MaskedTable masked = mask_table(counts, 3, 3, 5);
  CHECK(masked.cells == std::vector<Shown>{Shown::small, Shown::plain, Shown::kept_back, Shown::plain,
                                           Shown::plain, Shown::plain, Shown::kept_back, Shown::plain,
                                           Shown::kept_back});
  CHECK(masked.grand_total == Shown::plain);
  const std::vector<double> large{20, 30, 40, 50};
  for (const Shown shown : mask_table(large, 2, 2, 5).cells) CHECK(shown == Shown::plain);
}

TEST_CASE("cells that do not exist protect nothing and are left alone") {
  const std::vector<double> counts{2, 40, blank, 30, 90, 80, 11, 70, 10};
  const MaskedTable masked = mask_table(counts, 3, 3, 5);
  CHECK(masked.cells[2] == Shown::plain);
  CHECK(masked.safe);
  CHECK(Attack(counts, 3, 3, 5, masked).nothing_found());
}

TEST_CASE("no withheld count of a list can be worked out from the rest, the total and the rule") {
  RandomStream stream(8);
  for (int trial = 0; trial < 5000; ++trial) {
    const std::size_t n = 1 + stream.below(6);
    const double threshold = 3 + static_cast<double>(stream.below(4)), mean = std::exp(3 * stream.uniform());
    std::vector<double> counts;
    for (std::size_t i = 0; i < n; ++i) counts.push_back(draw_poisson(stream, mean));
    const MaskedList masked = mask_list(counts, threshold, true);
    double truth = 0, least_shown = std::numeric_limits<double>::infinity();
    for (std::size_t i = 0; i < n; ++i) {
      truth += counts[i];
      CHECK((masked.counts[i] == Shown::small) == (counts[i] < threshold));
      if (masked.counts[i] == Shown::plain) least_shown = std::min(least_shown, counts[i]);
    }
    std::vector<std::set<double>> seen(n);
    std::vector<double> guess(n);
    const auto search = [&](const auto& self, std::size_t at, double total) -> void {
      if (at == n) {
        if (fits(masked.total, total, truth, threshold))
          for (std::size_t i = 0; i < n; ++i) seen[i].insert(guess[i]);
        return;
      }
      for (const double value : candidates(masked.counts[at], counts[at], threshold)) {
        if (masked.counts[at] == Shown::kept_back && value > least_shown) continue;  // the smallest go first
        guess[at] = value;
        self(self, at + 1, total + value);
      }
    };
    search(search, 0, 0);
    CAPTURE(counts);
    CAPTURE(threshold);
    CHECK(masked.safe);
    for (std::size_t i = 0; i < n; ++i)
      if (masked.counts[i] != Shown::plain) CHECK(seen[i].size() >= 2);
  }
}

TEST_CASE("a list with nothing small, without a total, or too small as a whole") {
  const std::vector<double> large{9, 12}, mixed{2, 9, 12}, tiny{1, 0, 1}, near{2, 9, 9, 30};
  CHECK(mask_list(large, 5, true).counts == std::vector<Shown>(2, Shown::plain));
  CHECK(mask_list(mixed, 5, false).counts == std::vector<Shown>{Shown::small, Shown::plain, Shown::plain});
  CHECK(mask_list(mixed, 5, true).counts == std::vector<Shown>{Shown::small, Shown::kept_back, Shown::plain});
  CHECK(mask_list(tiny, 5, true).total == Shown::small);
  // Two small ones whose sum says both: 4 and 4 under 5.
  const std::vector<double> both{4, 4, 20};
  CHECK(mask_list(both, 5, true).counts[2] == Shown::kept_back);
  const std::vector<double> only{4, 4};
  CHECK(mask_list(only, 5, true).total == Shown::kept_back);
  CHECK_THROWS_AS(mask_list(large, 2, true), Refusal);
  CHECK_THROWS_AS(mask_list(large, 4.5, true), Refusal);
  CHECK_THROWS_AS(mask_table(large, 2, 2, 5), Refusal);
}

TEST_CASE("a table of a thousand rows is masked, safely and in time") {
  RandomStream stream(6);
  std::vector<double> counts;
  for (int i = 0; i < 10000; ++i) counts.push_back(draw_poisson(stream, 20 * draw_gamma(stream, 1)));
  const MaskedTable masked = mask_table(counts, 1000, 10, 5);
  CHECK(masked.safe);
  CHECK(std::count(masked.cells.begin(), masked.cells.end(), Shown::kept_back) < 2500);
}

}  // namespace
}  // namespace countsel
