// engine/rates/rate_batch.cpp -- small counts from a table, large ones from fits, rows in pieces.
//
// A limit for a mean is count + sqrt(count) Y, and Y is a smooth function of 1 / sqrt(count) that tends to
// a normal deviate. Between one power of two and the next a polynomial of low degree gives it to the last
// digits; it is used only where it was checked against the limit itself between its nodes.
#include "engine/rates/rate_batch.hpp"

#include <array>
#include <cmath>
#include <limits>
#include <vector>

#include "engine/rates/checks.hpp"
#include "engine/refusal.hpp"

namespace countsel {
namespace {

constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr int first_octave = 9,
              last_octave = 63;  // counts from 512; below, every count has its place in a table
constexpr std::size_t table_size = std::size_t{1} << first_octave;
constexpr std::size_t piece_rows = 65536;
constexpr std::size_t rows_worth_a_fit = 24;  // a fit costs about as much as this many limits
constexpr int nodes = 14;

// One end of the limits on one octave: Y as a polynomial in t, which runs from -1 to 1 over the octave.
struct Fit {
  bool good = false;
  int degree = 0;
  std::array<double, nodes> power{};

  double at(double t) const {
    double y = power[static_cast<std::size_t>(degree)];
    for (int k = degree; k-- > 0;) y = y * t + power[static_cast<std::size_t>(k)];
    return y;
  }
};

struct Octave {
  double middle = 0, half = 0;  // of 1 / sqrt(count)
  Fit low, high;

  explicit Octave(int exponent) {
    const double from = std::exp2(-0.5 * exponent), to = std::exp2(-0.5 * (exponent + 1));
    middle = (from + to) / 2;
    half = (from - to) / 2;
  }
};

struct Ends {
  double low = 0, high = infinity;
};

struct Problem {
  const LimitsSpec& spec;
  double tail, prior_rate;
  bool wants_low, wants_high;

  Ends direct(double count) const {
    return {wants_low ? mean_limit(count, End::low, tail, spec) : 0,
            wants_high ? mean_limit(count, End::high, tail, spec) : infinity};
  }
};

// Chebyshev interpolation, turned into powers, which is harmless because the coefficients fall off fast.
Fit fitted(const Problem& problem, End end, const Octave& octave) {
  const auto y_at = [&](double t) {
    const double u = octave.middle + octave.half * t, count = 1 / (u * u);
    return (mean_limit(count, end, problem.tail, problem.spec) - count) * u;
  };
  constexpr double pi = 3.14159265358979323846;
  std::array<double, nodes> y, chebyshev{};
  for (int k = 0; k < nodes; ++k) y[k] = y_at(std::cos(pi * (k + 0.5) / nodes));
  for (int order = 0; order < nodes; ++order) {
    for (int k = 0; k < nodes; ++k) chebyshev[order] += y[k] * std::cos(pi * order * (k + 0.5) / nodes);
    chebyshev[order] *= (order == 0 ? 1.0 : 2.0) / nodes;
  }
  Fit fit;
  fit.degree = nodes - 1;
  // What a term moves the limit by, relatively, is its size times u.
  while (fit.degree > 0 && std::abs(chebyshev[fit.degree]) * octave.middle < 1e-16) --fit.degree;
  std::array<double, nodes> before{1}, now{0, 1};  // T0 and T1 as powers
  for (int order = 0; order <= fit.degree; ++order) {
    for (int k = 0; k <= order; ++k) fit.power[k] += chebyshev[order] * before[k];
    std::array<double, nodes> next{};
    for (int k = 0; k + 1 < nodes; ++k) next[k + 1] = 2 * now[k];
    for (int k = 0; k < nodes; ++k) next[k] -= before[k];
    before = now;
    now = next;
  }
  fit.good = true;
  for (const double t : {-1.0, -0.93, -0.41, 0.17, 0.66, 1.0}) {
    const double u = octave.middle + octave.half * t;
    if (!(std::abs(fit.at(t) - y_at(t)) * u < 2e-15)) fit.good = false;
  }
  return fit;
}

// What a first look at the rows finds: which counts and octaves there are, and the first bad row.
struct Seen {
  std::array<bool, table_size> small{};
  std::array<std::size_t, last_octave + 1> rows{};
  std::size_t bad = std::numeric_limits<std::size_t>::max();
};

int octave_of(double count) { return std::ilogb(count); }

Seen look(std::span<const double> counts, std::span<const double> exposures) {
  Seen seen;
  for (std::size_t row = 0; row < counts.size(); ++row) {
    const double count = counts[row];
    if (!is_count(count) || !is_exposure(exposures[row])) {
      seen.bad = row;
      break;
    }
    if (count < static_cast<double>(table_size))
      seen.small[static_cast<std::size_t>(count)] = true;
    else if (const int octave = octave_of(count); octave <= last_octave)
      ++seen.rows[static_cast<std::size_t>(octave)];
  }
  return seen;
}

struct Prepared {
  std::vector<Ends> table;
  std::vector<Octave> octaves;
};

Ends mean_limits(double count, const Problem& problem, const Prepared& prepared) {
  if (count < static_cast<double>(table_size)) return prepared.table[static_cast<std::size_t>(count)];
  const int exponent = octave_of(count);
  if (exponent > last_octave) return problem.direct(count);
  const Octave& octave = prepared.octaves[static_cast<std::size_t>(exponent - first_octave)];
  if (!octave.low.good || !octave.high.good) return problem.direct(count);
  const double root = std::sqrt(count), t = (1 / root - octave.middle) / octave.half;
  return {problem.wants_low ? count + root * octave.low.at(t) : 0,
          problem.wants_high ? count + root * octave.high.at(t) : infinity};
}

void prepare(const Problem& problem, const Seen& seen, const Work& work, Prepared& prepared) {
  prepared.table.resize(table_size);
  for (int exponent = first_octave; exponent <= last_octave; ++exponent)
    prepared.octaves.emplace_back(exponent);
  constexpr std::size_t stretch = 64;  // of the table, a piece each; then a piece for each octave
  work.workers.run(table_size / stretch + prepared.octaves.size(), [&](std::size_t piece) {
    work.progress.check();
    if (piece < table_size / stretch) {
      for (std::size_t count = piece * stretch; count < (piece + 1) * stretch; ++count)
        if (seen.small[count]) prepared.table[count] = problem.direct(static_cast<double>(count));
      return;
    }
    const std::size_t place = piece - table_size / stretch;
    if (seen.rows[place + first_octave] < rows_worth_a_fit) return;
    Octave& octave = prepared.octaves[place];
    if (problem.wants_low) octave.low = fitted(problem, End::low, octave);
    if (problem.wants_high) octave.high = fitted(problem, End::high, octave);
    if (!problem.wants_low) octave.low.good = octave.high.good;
    if (!problem.wants_high) octave.high.good = octave.low.good;
  });
}

}  // namespace

void rate_limits(std::span<const double> counts, std::span<const double> exposures, const LimitsSpec& spec,
                 std::span<double> low, std::span<double> high, const Work& work) {
  const std::size_t rows = counts.size();
  if (exposures.size() != rows || low.size() != rows || high.size() != rows)
    throw Refusal(Code::length_mismatch, "Counts and exposures differ in length.");
  require_limits(spec);
  const std::size_t pieces = (rows + piece_rows - 1) / piece_rows;
  const auto part = [&](std::size_t piece, auto all) {
    return all.subspan(piece * piece_rows, std::min(piece_rows, rows - piece * piece_rows));
  };

  std::vector<Seen> found(pieces);
  work.workers.run(pieces, [&](std::size_t piece) {
    work.progress.check();
    found[piece] = look(part(piece, counts), part(piece, exposures));
  });
  Seen seen;
  for (std::size_t piece = 0; piece < pieces; ++piece) {
    if (found[piece].bad < piece_rows) {
      const std::size_t row = piece * piece_rows + found[piece].bad;
      require_count(counts[row], "count", row + 1);
      require_exposure(exposures[row], "exposure", row + 1);
    }
    for (std::size_t i = 0; i < table_size; ++i) seen.small[i] = seen.small[i] || found[piece].small[i];
    for (std::size_t i = 0; i < seen.rows.size(); ++i) seen.rows[i] += found[piece].rows[i];
  }

  const Problem problem{spec, tail_of(spec.confidence, spec.side),
                        spec.method == RateMethod::bayes ? spec.prior.rate : 0, spec.side != Side::upper,
                        spec.side != Side::lower};
  Prepared prepared;
  prepare(problem, seen, work, prepared);
  work.workers.run(pieces, [&](std::size_t piece) {
    work.progress.check();
    const auto count = part(piece, counts), exposure = part(piece, exposures);
    const auto to_low = part(piece, low), to_high = part(piece, high);
    for (std::size_t row = 0; row < count.size(); ++row) {
      const Ends ends = mean_limits(count[row], problem, prepared);
      const double divisor = exposure[row] + problem.prior_rate;
      to_low[row] = ends.low / divisor;
      to_high[row] = ends.high / divisor;
    }
  });
}

}  // namespace countsel
