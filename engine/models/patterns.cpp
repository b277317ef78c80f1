// engine/models/patterns.cpp -- hash every row, then count different hashes part by part.
#include "engine/models/patterns.hpp"

#include <algorithm>
#include <array>
#include <bit>
#include <cstdint>

namespace countsel {
namespace {

/// One step of a 64-bit mixer (the finaliser of Steele, Lea and Flood's SplitMix, 2014).
std::uint64_t mix(std::uint64_t x) {
  x ^= x >> 30;
  x *= 0xbf58476d1ce4e5b9u;
  x ^= x >> 27;
  x *= 0x94d049bb133111ebu;
  return x ^ (x >> 31);
}

}  // namespace

std::size_t count_patterns(const Design& design, const Work& work) {
  std::vector<std::size_t> used;
  for (const TermColumns& term : design.terms) {
    used.insert(used.end(), term.factors.begin(), term.factors.end());
    for (const Product& product : term.products)
      for (const Feature& feature : product) used.push_back(feature.column);
  }
  std::sort(used.begin(), used.end());
  used.erase(std::unique(used.begin(), used.end()), used.end());
  if (used.empty()) return 1;

  constexpr std::size_t chunk = 1024;
  constexpr std::size_t buckets = 256;
  const std::size_t n = design.rows;
  const std::size_t pieces = std::clamp<std::size_t>(n / 32768, 1, 16);
  // Hashes are dealt into buckets by their first byte, piece by piece; a bucket then fits a cache.
  std::vector<std::array<std::vector<std::uint64_t>, buckets>> dealt(pieces);
  work.workers.run(pieces, [&](std::size_t piece) {
    const std::size_t first = piece * n / pieces, last = (piece + 1) * n / pieces;
    for (auto& bucket : dealt[piece]) bucket.reserve((last - first) / buckets * 9 / 8 + 16);
    std::array<std::uint64_t, chunk> hash;
    for (std::size_t start = first; start < last; start += chunk) {
      work.progress.check();
      const std::size_t size = std::min(chunk, last - start);
      hash.fill(0x9e3779b97f4a7c15u);
      for (const std::size_t c : used) {
        const SourceColumn& column = design.columns[c];
        if (column.levels)
          for (std::size_t r = 0; r < size; ++r)
            hash[r] = (hash[r] ^ static_cast<std::uint64_t>(column.codes[start + r])) * 0xff51afd7ed558ccdu,
            hash[r] ^= hash[r] >> 32;
        else
          for (std::size_t r = 0; r < size; ++r)
            hash[r] = (hash[r] ^ std::bit_cast<std::uint64_t>(column.numbers[start + r] + 0.0)) *
                      0xff51afd7ed558ccdu,
            hash[r] ^= hash[r] >> 32;
      }
      for (std::size_t r = 0; r < size; ++r) {
        const std::uint64_t mixed = mix(hash[r]);
        dealt[piece][mixed >> 56].push_back(mixed);
      }
    }
  });
  std::vector<std::size_t> distinct(buckets, 0);
  constexpr std::size_t tasks = 16;
  work.workers.run(tasks, [&](std::size_t task) {
    std::vector<std::uint64_t> table;
    for (std::size_t b = task; b < buckets; b += tasks) {
      work.progress.check();
      std::size_t total = 0;
      for (const auto& piece : dealt) total += piece[b].size();
      const std::size_t size = std::bit_ceil(2 * total + 2);
      table.assign(size, 0);
      for (const auto& piece : dealt)
        for (const std::uint64_t h : piece[b]) {
          const std::uint64_t key = h | 1;  // 0 marks an empty place
          std::size_t at = (h >> 8) & (size - 1);
          while (table[at] != 0 && table[at] != key) at = (at + 1) & (size - 1);
          if (table[at] == 0) {
            table[at] = key;
            ++distinct[b];
          }
        }
    }
  });
  std::size_t sum = 0;
  for (const std::size_t d : distinct) sum += d;
  return sum;
}

}  // namespace countsel
