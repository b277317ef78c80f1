// engine/numbers/random.cpp -- the stream of bits: xoshiro256++ seeded by SplitMix64.
#include "engine/numbers/random.hpp"

#include <bit>

namespace countsel {
namespace {

std::uint64_t mix(std::uint64_t z) {
  z = (z ^ (z >> 30)) * 0xBF58476D1CE4E5B9U;
  z = (z ^ (z >> 27)) * 0x94D049BB133111EBU;
  return z ^ (z >> 31);
}

}  // namespace

RandomStream::RandomStream(std::uint64_t seed, std::uint64_t stream) {
  std::uint64_t z = seed + mix(stream);
  for (auto& word : state_) word = mix(z += 0x9E3779B97F4A7C15U);
}

std::uint64_t RandomStream::next() {
  auto& s = state_;
  const std::uint64_t result = std::rotl(s[0] + s[3], 23) + s[0];
  const std::uint64_t t = s[1] << 17;
  s[2] ^= s[0];
  s[3] ^= s[1];
  s[1] ^= s[2];
  s[0] ^= s[3];
  s[2] ^= t;
  s[3] = std::rotl(s[3], 45);
  return result;
}

double RandomStream::uniform() { return (static_cast<double>(next() >> 12) + 0.5) * 0x1p-52; }

std::uint64_t RandomStream::below(std::uint64_t bound) {
  // The lowest 2^64 mod bound values are dropped, so that what is left divides evenly.
  const std::uint64_t dropped = (0 - bound) % bound;
  std::uint64_t bits = next();
  while (bits < dropped) bits = next();
  return bits % bound;
}

}  // namespace countsel
