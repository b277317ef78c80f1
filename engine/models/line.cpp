// engine/models/line.cpp -- bisection on the score along a step.
#include "engine/models/line.hpp"

#include <algorithm>
#include <cmath>

namespace countsel {
namespace {

/// The rows of a piece, padded block by block.
struct Lines {
  std::vector<double> eta, change, count, exposure, weight;
};

double slope_at(const std::vector<Lines>& pieces, const Family& family, double share, const Work& work) {
  std::vector<double> slopes(pieces.size(), 0.0);
  work.workers.run(pieces.size(), [&](std::size_t p) {
    const Lines& lines = pieces[p];
    work.progress.check();
    std::vector<double> eta(block_rows), mean(block_rows), score(block_rows), information(block_rows);
    for (std::size_t at = 0; at < lines.eta.size(); at += block_rows) {
      for (std::size_t r = 0; r < block_rows; ++r) eta[r] = lines.eta[at + r] + share * lines.change[at + r];
      family.step(block_rows, eta.data(), lines.count.data() + at, lines.exposure.data() + at,
                  lines.weight.data() + at, mean.data(), score.data(), information.data());
      for (std::size_t r = 0; r < block_rows; ++r)
        if (lines.weight[at + r] > 0) slopes[p] += score[r] * lines.change[at + r];
    }
  });
  double slope = 0;
  for (const double s : slopes) slope += s;
  // Means beyond a double: as far down as can be.
  return std::isnan(slope) ? -INFINITY : slope;
}

}  // namespace

double line_share(const Layout& layout, const Basis& basis, const RowData& data, const Family& family,
                  const Eigen::VectorXd& gamma, const Eigen::VectorXd& step, std::size_t every,
                  const Work& work) {
  const std::size_t blocks = ((data.rows + block_rows - 1) / block_rows + every - 1) / every;
  const std::size_t count = piece_count(blocks, 1);
  std::vector<Lines> pieces(count);
  RowData bare = data;
  bare.log_exposure = nullptr;
  work.workers.run(count, [&](std::size_t p) {
    Lines& lines = pieces[p];
    BlockReader block(layout, basis, data), along(layout, basis, bare);
    block.set(gamma);
    along.set(step);
    for (std::size_t b = p * blocks / count; b < (p + 1) * blocks / count; ++b) {
      if (b % 16 == 0) work.progress.check();
      block.read(b * every);
      along.read(b * every);
      const std::size_t at = lines.eta.size();
      for (std::vector<double>* to : {&lines.eta, &lines.change, &lines.count, &lines.weight})
        to->resize(at + block_rows, 0.0);
      lines.exposure.resize(at + block_rows, 1.0);
      for (std::size_t r = 0; r < block.size; ++r) {
        lines.eta[at + r] = block.eta[r];
        lines.change[at + r] = along.eta[r];
        lines.count[at + r] = block.count[r];
        lines.exposure[at + r] = block.exposure[r];
        lines.weight[at + r] = block.weight ? block.weight[r] : 1.0;
      }
    }
  });
  const double rise = slope_at(pieces, family, 0, work);
  if (!(rise > 0)) return 0;
  if (slope_at(pieces, family, 1, work) >= -0.5 * rise) return 1;
  double low = 0, high = 1;
  for (int round = 0; round < 60; ++round) {
    const double middle = low > 0 && high > 4 * low ? std::sqrt(low * high)
                          : low > 0                 ? (low + high) / 2
                                                    : high / 8;
    const double slope = slope_at(pieces, family, middle, work);
    if (std::fabs(slope) < 0.1 * rise) return middle;
    (slope > 0 ? low : high) = middle;
  }
  return low > 0 ? low : high;
}

}  // namespace countsel
