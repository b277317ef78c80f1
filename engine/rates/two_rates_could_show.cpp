// engine/rates/two_rates_could_show.cpp -- which ratios would this test have shown?
//
// The reference's count keeps its law whatever the ratio, and for each of its values the test rejects from
// some count of group 1 on; so the power is a sum over the one count of tails of the other, and rises as the
// ratio moves away from 1. The bounds do not depend on the ratio: they are found once, and what is left for
// each ratio tried is one walk over both counts.
#include <algorithm>
#include <array>
#include <cmath>
#include <functional>
#include <limits>
#include <vector>

#include "engine/numbers/distributions.hpp"
#include "engine/numbers/roots.hpp"
#include "engine/rates/checks.hpp"
#include "engine/rates/two_rates_parts.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr double nan = std::numeric_limits<double>::quiet_NaN();
constexpr double often_enough = 0.8;
constexpr double e_test_summed = 150;  // expected events of both up to which the E-test draws its own region
constexpr double never = 1e17;         // no count of group 1 that rejects up to here: none is taken to
constexpr int most_steps = 40;         // from the bound given the sum to the E-test's own
constexpr double reach = 8;            // standard deviations of a count that are looked at
constexpr double most_bounds =
    20000;  // of the reference's counts; beyond that every so many'th stands for its like
constexpr double all_bounds = 100;    // expected events up to which each bound is found for itself
constexpr double fine_lattice = 1e6;  // expected events from which whole numbers may be taken for a continuum

enum class Towards { larger, smaller };

struct Question {
  TestMethod method;
  Towards towards;
  double level;  // of the one side
  bool either;   // the E-test's two-sided value adds unequal tails and is held against twice the level
  Share share;   // under ratio 1
  TwoRates exposures;
  double mean1, mean0;

  bool larger() const { return towards == Towards::larger; }
  bool own_e_test() const { return method == TestMethod::e_test && mean1 + mean0 <= e_test_summed; }
  // How far, in logarithms, the p-value of counts i and j is below the level: 0 or more is a rejection.
  double margin(double i, double j) const {
    if (method == TestMethod::e_test && either) {
      const double excess = above_expected(i, j, share);
      const bool right_side = larger() ? excess > 0 : excess < 0;
      return std::log(2 * level / (right_side ? e_test_given_sum(i, j, share, ETestStatistic::unpooled) : 1));
    }
    return std::log(level /
                    (larger() ? p_above(method, i, j, share) : p_above(method, j, i, share.turned())));
  }
  bool e_test_rejects(double i, double j) const {
    const double sign = larger() ? 1 : -1;
    if (i + j == 0 || !(sign * score_deviate(i, j, share) > 0)) return false;
    const Direction direction = either ? Direction::either : (larger() ? Direction::above : Direction::below);
    const TwoRates counts{i, exposures.exposure1, j, exposures.exposure0};
    return e_test(counts, ETestStatistic::unpooled, direction) <= (either ? 2 * level : level);
  }
};

// Where the increasing f turns positive, from 0 on; NaN where it is so at 0 already, infinity where it never
// is (the E-test's two-sided value need not fall to 0: with very unequal exposures the far tail stays).
double crossing(const Function& f, double guess, double spread) {
  if (f(0) > 0) return nan;
  double low = std::max(0.0, guess - spread), high = std::max(guess, 0.0) + spread;
  while (low > 0 && f(low) > 0) low = std::max(0.0, low - (spread *= 2));
  while (f(high) <= 0)
    if ((high += (spread *= 2)) > never) return infinity;
  return bracketed_root(f, low, high);
}
// A first guess at the bound: where the score deviate takes its one-sided quantile z, from
// i - m p = z sqrt(m p q) with m = i + j.
double guess_of(const Question& question, double j) {
  const double p = question.share.chance(), q = question.share.other();
  const double z = normal_upper_quantile(question.level), s = (question.larger() ? z : -z) * std::sqrt(p * q);
  const double root = (s + std::sqrt(s * s + 4 * q * j)) / (2 * q);
  return std::max(0.0, root * root - j);
}

// The real count of group 1 at which the p-value is the level; NaN where it is already so at 0.
double real_bound(const Question& question, double j) {
  const double guess = guess_of(question, j), sign = question.larger() ? 1 : -1;
  return crossing([&](double i) { return sign * question.margin(i, j); }, guess, 0.2 * std::sqrt(guess) + 1);
}

// The count of group 1 from which on (larger) or up to which (smaller; -1 for none) it is rejected against j.
double whole_bound(const Question& question, double j) {
  const double real = real_bound(question, j);
  if (question.larger()) {
    if (std::isnan(real)) return 0;
    const double whole = std::ceil(real);
    return whole > 0 && question.margin(whole - 1, j) >= 0 ? whole - 1 : whole;
  }
  if (std::isnan(real)) return -1;
  const double whole = std::floor(real);
  return question.margin(whole + 1, j) >= 0 ? whole + 1 : whole;
}

// The E-test's own bound, by steps from the one given the sum, which is not far.
double e_test_bound(const Question& question, double j) {
  const double inward = question.larger() ? -1 : 1, start = whole_bound(question, j);
  if (std::isinf(start)) return start;
  double bound = std::max(0.0, start);
  int steps = 0;
  while (!question.e_test_rejects(bound, j)) {
    bound -= inward;
    if (bound < 0) return -1;
    if (++steps > most_steps) return infinity;
  }
  while (bound + inward >= 0 && ++steps <= most_steps && question.e_test_rejects(bound + inward, j))
    bound += inward;
  return bound;
}

double stretch_from(double mean) { return std::max(0.0, std::floor(mean - reach * std::sqrt(mean))); }
double stretch_to(double mean) { return std::ceil(mean + reach * std::sqrt(mean) + 20); }

struct Node {
  double weight, j, bound;
};

// Bounds rise with j: between two nodes that share one, all do.
void fill_between(const Question& question, std::vector<Node>& nodes, std::size_t from, std::size_t to) {
  if (to - from < 2) return;
  const std::size_t middle = from + (to - from) / 2;
  nodes[middle].bound =
      nodes[from].bound == nodes[to].bound ? nodes[from].bound : whole_bound(question, nodes[middle].j);
  fill_between(question, nodes, from, middle);
  fill_between(question, nodes, middle, to);
}

// With many events in both groups the real bound is smooth in sqrt(j): interpolated, then made whole. False
// where a bound does not exist.
bool interpolate(const Question& question, std::vector<Node>& nodes) {
  constexpr int points = 20;
  const double from = std::sqrt(nodes.front().j), to = std::sqrt(nodes.back().j);
  std::array<double, points> place, value, weight;
  for (int k = 0; k < points; ++k) {  // barycentric form at Chebyshev's points
    const double angle = 3.14159265358979323846 * (k + 0.5) / points;
    place[k] = (from + to) / 2 + (to - from) / 2 * std::cos(angle);
    value[k] = real_bound(question, place[k] * place[k]);
    weight[k] = (k % 2 == 0 ? 1 : -1) * std::sin(angle);
    if (!std::isfinite(value[k])) return false;
  }
  for (Node& node : nodes) {
    const double at = std::sqrt(node.j);
    double above = 0, below = 0;
    for (int k = 0; k < points; ++k) {
      const double part = weight[k] / (at - place[k]);
      above += part * value[k];
      below += part;
    }
    if (!std::isfinite(below)) return false;  // a node on a point
    node.bound = question.larger() ? std::ceil(above / below) : std::floor(above / below);
  }
  return true;
}

std::vector<Node> nodes_of(const Question& question) {
  const double first = stretch_from(question.mean0), last = stretch_to(question.mean0);
  const double stride = std::ceil((last - first) / most_bounds);
  std::vector<Node> nodes;
  for (double j = first; j <= last; j += stride) {
    const double weight = stride * poisson_exactly(j, question.mean0);
    if (weight > 1e-14) nodes.push_back({weight, j, 0});
  }
  if (question.own_e_test()) {
    for (Node& node : nodes) node.bound = e_test_bound(question, node.j);
  } else if (std::min(question.mean1, question.mean0) < all_bounds || !interpolate(question, nodes)) {
    nodes.front().bound = whole_bound(question, nodes.front().j);
    nodes.back().bound = whole_bound(question, nodes.back().j);
    fill_between(question, nodes, 0, nodes.size() - 1);
  }
  return nodes;
}

// Tails of a Poisson count at many bounds at once: chances from the likeliest outward, summed from the far
// end.
class TailTable {
 public:
  TailTable(double mean, bool upper) : first_(stretch_from(mean)), upper_(upper) {
    const auto size = static_cast<std::size_t>(stretch_to(mean) - first_) + 1;
    const auto mode = static_cast<std::size_t>(std::floor(mean) - first_);
    tail_.resize(size);
    tail_[mode] = poisson_exactly(std::floor(mean), mean);
    for (std::size_t k = mode; k > 0; --k) tail_[k - 1] = tail_[k] * (first_ + static_cast<double>(k)) / mean;
    for (std::size_t k = mode + 1; k < size; ++k)
      tail_[k] = tail_[k - 1] * mean / (first_ + static_cast<double>(k));
    if (upper)
      for (std::size_t k = size - 1; k > 0; --k) tail_[k - 1] += tail_[k];
    else
      for (std::size_t k = 1; k < size; ++k) tail_[k] += tail_[k - 1];
  }
  double at(double bound) const {
    if (bound < first_) return upper_ ? 1 : 0;
    const double place = bound - first_;
    if (place >= static_cast<double>(tail_.size())) return upper_ ? 0 : 1;
    return tail_[static_cast<std::size_t>(place)];
  }

 private:
  double first_;
  bool upper_;
  std::vector<double> tail_;
};

using Power = std::function<double(double ratio)>;

Power power_over_counts(const Question& question) {
  std::vector<Node> nodes = nodes_of(question);
  std::erase_if(nodes, [](const Node& node) { return std::isinf(node.bound) || node.bound < 0; });
  return [nodes = std::move(nodes), larger = question.larger(), mean1 = question.mean1](double ratio) {
    const double mean = ratio * mean1;
    double power = 0;
    if (mean < 2 * fine_lattice) {
      const TailTable tails(mean, larger);
      for (const Node& node : nodes) power += node.weight * tails.at(node.bound);
    } else {
      for (const Node& node : nodes)
        power +=
            node.weight * (larger ? poisson_at_least(node.bound, mean) : poisson_at_most(node.bound, mean));
    }
    return power;
  };
}

// With group 1's counts a continuum: a grid of the reference's counts, half a standard deviation apart, and
// real bounds. A whole bound lies past the real one by half a step on average.
Power power_over_grid(const Question& question) {
  std::vector<Node> nodes;
  double total = 0;
  for (double step = -7; step <= 7; step += 0.5) {
    const double j = std::floor(question.mean0 + step * std::sqrt(question.mean0));
    nodes.push_back({poisson_exactly(j, question.mean0), j, real_bound(question, j)});
    total += nodes.back().weight;
  }
  return [nodes, total, larger = question.larger(), mean1 = question.mean1](double ratio) {
    double power = 0;
    for (const auto& [weight, j, bound] : nodes) {
      if (!std::isfinite(bound)) continue;
      power += weight / total *
               (larger ? gamma_below(bound + 0.5, ratio * mean1) : gamma_above(bound + 0.5, ratio * mean1));
    }
    return power;
  };
}

// The ratio nearest to 1 with power enough; NaN where even the farthest has not.
double nearest(const Question& question) {
  const bool continuum = question.mean1 > fine_lattice && question.mean0 > all_bounds;
  const Power power = continuum ? power_over_grid(question) : power_over_counts(question);
  const auto lack = [&](double log_ratio) { return power(std::exp(log_ratio)) - often_enough; };
  if (lack(0) >= 0) return 1;
  if (!question.larger() && !(power(0) >= often_enough)) return nan;
  const double way = question.larger() ? 1 : -1, farthest = 690;
  double near = 0, step = 2 / std::sqrt(std::min(question.mean1, question.mean0) + 4), far = way * step;
  while (lack(far) < 0) {
    if (std::abs(far) == farthest) return nan;
    near = far;
    far = way * std::min(farthest, std::abs(far) + (step *= 2));
  }
  return std::exp(bracketed_root(lack, std::min(near, far), std::max(near, far)));
}

}  // namespace

CouldShow could_show(const TwoRates& data, TestMethod method, double confidence, Direction direction) {
  require_two_rates(data);
  require_probability(confidence, "confidence");
  const double n = data.count1 + data.count0;
  if (n == 0) return {nan, nan};
  const bool either = direction == Direction::either;
  const Share share = share_under(data, 1);
  const auto towards = [&](Towards way) {
    return nearest({method, way, either ? (1 - confidence) / 2 : 1 - confidence, either, share, data,
                    n * share.chance(), n * share.other()});
  };
  return {direction == Direction::below ? nan : towards(Towards::larger),
          direction == Direction::above ? nan : towards(Towards::smaller)};
}

}  // namespace countsel
