// tests/bench/glm_bench.cpp -- what a fit of many rows costs, part by part, on columns in memory.
//
//   glm_bench FILE HANDS REPEATS     prints one JSON line: seconds of each part (best of REPEATS), peak
//   memory
//
// FILE, written by glm.py: "rows numbers levels" as three little-endian 64-bit whole numbers, then count,
// exposure and the number columns as doubles, then each level column as its number of levels (64 bits) and
// codes (32 bits).
#include <sys/resource.h>

#include <atomic>
#include <chrono>
#include <cstdio>
#include <cstdlib>
#include <fstream>
#include <string>
#include <thread>
#include <vector>

#include "engine/models/covariance.hpp"
#include "engine/models/patterns.hpp"
#include "engine/models/term_tests.hpp"

using namespace countsel;

namespace {

double now() {
  return std::chrono::duration<double>(std::chrono::steady_clock::now().time_since_epoch()).count();
}

/// Processor time of all threads: what the wall clock would show, times the hands, on a machine left alone.
double processor() {
  struct timespec t;
  clock_gettime(CLOCK_PROCESS_CPUTIME_ID, &t);
  return static_cast<double>(t.tv_sec) + 1e-9 * static_cast<double>(t.tv_nsec);
}

template <class T>
std::vector<T> take(std::ifstream& file, std::size_t n) {
  std::vector<T> values(n);
  file.read(reinterpret_cast<char*>(values.data()), static_cast<std::streamsize>(n * sizeof(T)));
  return values;
}

Workers team(std::size_t hands) {
  return {hands, [hands](std::size_t tasks, const std::function<void(std::size_t)>& piece) {
            std::atomic<std::size_t> next{0};
            const auto serve = [&] {
              for (std::size_t i; (i = next++) < tasks;) piece(i);
            };
            std::vector<std::thread> others;
            for (std::size_t h = 1; h < hands; ++h) others.emplace_back(serve);
            serve();
            for (auto& other : others) other.join();
          }};
}

}  // namespace

int main(int argc, char** argv) {
  if (argc < 4) return 2;
  std::ifstream file(argv[1], std::ios::binary);
  const auto head = take<std::uint64_t>(file, 3);
  const std::size_t rows = head[0];
  const std::vector<double> count = take<double>(file, rows), exposure = take<double>(file, rows);
  std::vector<std::vector<double>> numbers;
  for (std::size_t j = 0; j < head[1]; ++j) numbers.push_back(take<double>(file, rows));
  std::vector<std::vector<std::string>> names;
  std::vector<std::vector<std::int32_t>> codes;
  for (std::size_t j = 0; j < head[2]; ++j) {
    const std::uint64_t levels = take<std::uint64_t>(file, 1)[0];
    names.emplace_back();
    for (std::uint64_t l = 0; l < levels; ++l) names.back().push_back(std::to_string(l));
    codes.push_back(take<std::int32_t>(file, rows));
  }
  std::vector<SourceColumn> columns;
  std::vector<Term> terms;
  for (std::size_t j = 0; j < numbers.size(); ++j) {
    columns.push_back({"x" + std::to_string(j), numbers[j], {}, nullptr, std::nullopt});
    terms.push_back(slope_of(columns.size() - 1));
  }
  for (std::size_t j = 0; j < names.size(); ++j) {
    columns.push_back({"g" + std::to_string(j), {}, codes[j], &names[j], std::nullopt});
    terms.push_back(levels_of(columns.size() - 1));
  }
  Work work;
  work.workers = team(static_cast<std::size_t>(std::atoi(argv[2])));
  double best[5] = {1e9, 1e9, 1e9, 1e9, 1e9}, least[5] = {1e9, 1e9, 1e9, 1e9, 1e9};
  GlmFit fit;
  std::size_t patterns = 0;
  struct rusage before;
  getrusage(RUSAGE_SELF, &before);
  for (int repeat = 0; repeat < std::atoi(argv[3]); ++repeat) {
    double t[5] = {now()}, c[5] = {processor()};
    const Design design = make_design(columns, terms, rows, exposure, work);
    t[1] = now();
    c[1] = processor();
    fit = fit_poisson(design, {count, exposure, {}, {}, WeightsAre::frequency}, work);
    t[2] = now();
    c[2] = processor();
    const auto tests = likelihood_term_tests(fit, work);
    t[3] = now();
    c[3] = processor();
    patterns = count_patterns(design, work);
    t[4] = now();
    c[4] = processor();
    for (int part = 0; part < 4; ++part) best[part] = std::min(best[part], t[part + 1] - t[part]);
    best[4] = std::min(best[4], t[4] - t[0]);
    for (int part = 0; part < 4; ++part) least[part] = std::min(least[part], c[part + 1] - c[part]);
    least[4] = std::min(least[4], c[4] - c[0]);
  }
  struct rusage usage;
  getrusage(RUSAGE_SELF, &usage);
  std::printf(
      "{\"design\": %.4f, \"fit\": %.4f, \"terms\": %.4f, \"patterns\": %.4f, \"all\": %.4f, "
      "\"cpu\": [%.4f, %.4f, %.4f, %.4f, %.4f], \"passes\": %d, \"data_mb\": %.1f, \"peak_mb\": %.1f, "
      "\"distinct\": %zu, \"deviance\": %.17g, "
      "\"baseline\": %.17g, \"baseline_error\": %.17g}\n",
      best[0], best[1], best[2], best[3], best[4], least[0], least[1], least[2], least[3], least[4],
      fit.iterations, static_cast<double>(before.ru_maxrss) / 1024,
      static_cast<double>(usage.ru_maxrss) / 1024, patterns, fit.deviance, fit.coefficients[0],
      fit.errors[0]);
}
