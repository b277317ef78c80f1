// engine/rates/chance.cpp -- chances, ranges and lists for a count still to come.
#include "engine/rates/chance.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

#include "engine/numbers/negative_binomial.hpp"
#include "engine/numbers/sums.hpp"
#include "engine/refusal.hpp"

namespace countsel {
namespace {

// The mixture's value of f(shape, mean).
template <typename F>
double mixed(const CountToCome& to_come, F f) {
  if (to_come.means.size() == 1) return f(to_come.shape, to_come.means[0]);
  Sum total;
  for (std::size_t i = 0; i < to_come.means.size(); ++i)
    total.add(std::exp(to_come.log_weights[i]) * f(to_come.shape, to_come.means[i]));
  return total.value();
}

// The least whole k >= 0 where `reached` holds from there on; `guess` is a place to start.
template <typename Reached>
double least_whole(double guess, Reached reached) {
  double low = -1, high = std::max(0.0, std::floor(guess));
  for (double stride = 1; !reached(high); stride *= 2) {
    low = high;
    high += stride;
  }
  for (double stride = 1; low < 0 && high > 0; stride *= 2) {
    const double next = std::max(0.0, high - stride);
    if (!reached(next)) {
      low = next;
    } else {
      high = next;
    }
  }
  while (high - low > 1) {
    const double middle = std::floor(low + (high - low) / 2);
    if (middle == low || middle == high) break;
    (reached(middle) ? high : low) = middle;
  }
  return high;
}

}  // namespace

double chance_at_most(const CountToCome& to_come, double k) {
  return mixed(to_come, [k](double shape, double mean) {
    return negative_binomial_at_most(std::floor(k), shape, mean);
  });
}
double chance_at_least(const CountToCome& to_come, double k) {
  return mixed(to_come, [k](double shape, double mean) {
    return negative_binomial_at_least(std::ceil(k), shape, mean);
  });
}
double chance_exactly(const CountToCome& to_come, double k) {
  if (k != std::floor(k)) return 0;
  return mixed(to_come, [k](double shape, double mean) { return negative_binomial_exactly(k, shape, mean); });
}

double chance_between(const CountToCome& to_come, double low, double high) {
  low = std::max(0.0, std::ceil(low));
  high = std::floor(high);
  if (!(low <= high)) return 0;
  if (low == 0) return chance_at_most(to_come, high);
  if (high - low < 1000) {
    Sum total;
    for (double k = low; k <= high; ++k) total.add(chance_exactly(to_come, k));
    return std::min(1.0, total.value());
  }
  if (low > to_come.mean) return chance_at_least(to_come, low) - chance_at_least(to_come, high + 1);
  if (high < to_come.mean) return chance_at_most(to_come, high) - chance_at_most(to_come, low - 1);
  return 1 - chance_at_most(to_come, low - 1) - chance_at_least(to_come, high + 1);
}

LikelyRange likely_range(const CountToCome& to_come, double confidence) {
  if (!(confidence > 0 && confidence < 1))
    throw Refusal(Code::bad_value, "The confidence must lie between 0 and 1.");
  const double tail = (1 - confidence) / 2;
  if (to_come.means.size() == 1) {
    const double shape = to_come.shape, mean = to_come.means[0];
    return {negative_binomial_quantile(tail, shape, mean),
            negative_binomial_upper_quantile(tail, shape, mean)};
  }
  return {least_whole(to_come.mean, [&](double k) { return chance_at_most(to_come, k) >= tail; }),
          least_whole(to_come.mean, [&](double k) { return chance_at_least(to_come, k + 1) <= tail; })};
}

CountChances list_chances(const CountToCome& all, double from, double to, std::size_t most) {
  // Listed values lie where the chance is: means that carry less than e^-60 of it do not show.
  CountToCome to_come{all.shape, {}, {}, all.mean, all.sd};
  for (std::size_t i = 0; i < all.means.size(); ++i) {
    if (all.log_weights[i] < -60) continue;
    to_come.means.push_back(all.means[i]);
    to_come.log_weights.push_back(all.log_weights[i]);
  }
  const LikelyRange nearly_all = likely_range(to_come, 1 - 2e-4);
  const double first =
      std::isnan(from) ? nearly_all.low : std::min(nearly_all.low, std::max(0.0, std::floor(from)));
  const double last = std::isnan(to) ? nearly_all.high : std::max(nearly_all.high, std::ceil(to));
  CountChances list;
  list.step =
      std::max(1.0, std::ceil((last - first + 1) / static_cast<double>(std::max<std::size_t>(most, 1))));
  const auto values = static_cast<std::size_t>(std::floor((last - first) / list.step)) + 1;
  for (std::size_t i = 0; i < values; ++i) {
    const double k = first + list.step * static_cast<double>(i);
    list.value.push_back(k);
    list.chance.push_back(chance_exactly(to_come, k));
    list.at_most.push_back(chance_at_most(to_come, k));
  }
  return list;
}

}  // namespace countsel
