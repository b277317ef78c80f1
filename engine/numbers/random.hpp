// engine/numbers/random.hpp -- random numbers that come out the same on every machine.
//
// A stream is known by a seed and a number, so that independent pieces of one simulation can each have
// their own and the answer does not depend on who computes which. Only whole-number arithmetic and the
// four operations and square root of IEEE doubles are used (logarithms and exponentials are our own),
// so the bytes agree wherever doubles do and products are not fused with sums.
// Source: Blackman and Vigna, ACM Trans. Math. Softw. 47 (2021) 36, generator xoshiro256++, seeded by
// SplitMix64 (Steele, Lea and Flood, OOPSLA 2014).
// Checked by: tests/engine/numbers/random_test.cpp, tests/reference/numbers/random_bits.tsv.
#pragma once

#include <array>
#include <cstdint>
#include <span>
#include <vector>

namespace countsel {

/// The seed used where nobody gave one.
inline constexpr std::uint64_t default_seed = 20240229;

/// A stream of random bits. Stream 0 of a seed is xoshiro256++ with its state filled by four outputs of
/// SplitMix64 started at the seed; stream k starts SplitMix64 at seed + mix(k), mix being SplitMix64's
/// finaliser.
class RandomStream {
 public:
  explicit RandomStream(std::uint64_t seed, std::uint64_t stream = 0);

  std::uint64_t next();
  /// Inside (0, 1), never at an edge: (the upper 52 bits of next() + 1/2) / 2^52.
  double uniform();
  /// Whole, 0 <= value < bound, each equally likely; bound > 0.
  std::uint64_t below(std::uint64_t bound);

 private:
  std::array<std::uint64_t, 4> state_;
};

/// Standard normal, by the polar method (Marsaglia and Bray 1964).
double draw_normal(RandomStream& stream);

/// Gamma with this shape (> 0) and scale 1 (Marsaglia and Tsang 2000). May underflow to 0 at shapes far
/// below 0.01.
double draw_gamma(RandomStream& stream, double shape);

/// Poisson with mean 0 <= mean <= 1e12: sequential search below 25, above it transformed rejection
/// (Hoermann, Insurance: Math. Econ. 12 (1993) 39-45, PTRS).
double draw_poisson(RandomStream& stream, double mean);

/// Binomial of `trials` (whole, 0 to 1e12) with chance in [0, 1]: sequential search while the smaller of
/// the expected successes and failures is below 25, else transformed rejection (Hoermann, J. Stat.
/// Comput. Simul. 46 (1993) 101-110, BTRS).
double draw_binomial(RandomStream& stream, double trials, double chance);

/// For each cell the chance that an event lands there, given that it did not land in an earlier one:
/// what draw_multinomial needs, computed once. Weights >= 0, not all 0; they need not add up to 1.
std::vector<double> conditional_chances(std::span<const double> weights);

/// Shares `events` out over the cells into `counts` (same length as `conditional`); the sum is `events`.
void draw_multinomial(RandomStream& stream, double events, std::span<const double> conditional,
                      std::span<double> counts);

}  // namespace countsel
