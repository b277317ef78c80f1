// tests/bench/rate_limits_bench.cpp -- how long do limits for a million rows take?
//
//   bench_rate_limits COUNTS.f64 [HANDS]     counts as little-endian doubles; exposure is 1 + row / 8 mod 7
//
// Prints the best of five times in seconds for exact and mid-p limits, then low and high of the first and
// last row, so that a caller can see that both programs answered the same.
#include <algorithm>
#include <chrono>
#include <cstdio>
#include <cstdlib>
#include <fstream>
#include <thread>
#include <vector>

#include "engine/rates/rate_batch.hpp"

int main(int argc, char** argv) {
  using namespace countsel;
  if (argc < 2) return 2;
  std::ifstream file(argv[1], std::ios::binary | std::ios::ate);
  std::vector<double> counts(static_cast<std::size_t>(file.tellg()) / sizeof(double));
  file.seekg(0);
  file.read(reinterpret_cast<char*>(counts.data()),
            static_cast<std::streamsize>(counts.size() * sizeof(double)));
  const std::size_t rows = counts.size();
  std::vector<double> exposures(rows), low(rows), high(rows);
  for (std::size_t i = 0; i < rows; ++i) exposures[i] = 1 + static_cast<double>(i / 8 % 7);

  Work work;
  work.workers.hands = argc > 2 ? static_cast<std::size_t>(std::atoi(argv[2])) : 1;
  if (work.workers.hands > 1)
    work.workers.run = [hands = work.workers.hands](std::size_t tasks, const auto& piece) {
      std::vector<std::thread> threads;
      for (std::size_t hand = 0; hand < hands; ++hand)
        threads.emplace_back([&, hand] {
          for (std::size_t i = hand; i < tasks; i += hands) piece(i);
        });
      for (std::thread& thread : threads) thread.join();
    };
  for (const RateMethod method : {RateMethod::exact, RateMethod::mid_p}) {
    double best = 1e9;
    for (int round = 0; round < 5; ++round) {
      const auto start = std::chrono::steady_clock::now();
      rate_limits(counts, exposures, {.method = method}, low, high, work);
      const std::chrono::duration<double> took = std::chrono::steady_clock::now() - start;
      best = std::min(best, took.count());
    }
    std::printf("%s %.6f %.17g %.17g %.17g %.17g\n", method == RateMethod::exact ? "exact" : "mid-p", best,
                low[0], high[0], low[rows - 1], high[rows - 1]);
  }
}
