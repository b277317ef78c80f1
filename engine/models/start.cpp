// engine/models/start.cpp -- samples, and what keeps a start within reach.
#include "engine/models/start.hpp"

#include <algorithm>
#include <cmath>

#include "engine/models/line.hpp"

namespace countsel {
namespace {

using Eigen::Index;
using Eigen::VectorXd;

/// A pull towards 0, worth one event a coefficient: in a sample, levels may have no events.
void add_pull(Information& information) {
  for (std::size_t k = 0; k < information.rest.size(); ++k)
    if (information.rest[k] != 0) information.full(k, k) += 1;
  information.diagonal.array() += 1;
}

/// Every how many blocks are read for about one in `parts` of the rows; 1 where a sample would be too small.
std::size_t sampling_step(std::size_t rows, std::size_t parts) {
  constexpr std::size_t least_rows = 8192;
  if (rows < 4 * least_rows) return 1;
  return rows / std::max(least_rows, rows / parts);
}

}  // namespace

VectorXd home(const Layout& layout, double log_rate) {
  VectorXd gamma = VectorXd::Zero(static_cast<Index>(layout.coefficients));
  gamma[0] = log_rate;
  return gamma;
}

bool shorten_level_steps(const Layout& layout, const Basis& basis, VectorXd& step) {
  bool shortened = false;
  for (const Block& block : layout.blocks)
    if (block.multiplier == 0)
      for (const std::size_t k : block.coefficients)
        if (step[k] > 1 && basis.combined_of[k] < 0) {
          step[k] = std::log1p(step[k]);
          shortened = true;
        }
  return shortened;
}

Start find_start(const Layout& layout, const Basis& basis, const RowData& data, const Family& family,
                 const Totals& totals, const Work& work) {
  Start start;
  start.gamma = home(layout, totals.log_rate);
  PassRequest request;
  request.null_log_rate = totals.log_rate;

  const std::size_t coarse = sampling_step(data.rows, 40);
  const bool sampled = coarse > 1 && data.rows / coarse >= 100 * layout.coefficients;
  std::vector<std::size_t> rounds{1};
  // What the last and largest sample costs saves a pass over all rows.
  if (sampled) rounds = {coarse, coarse, coarse, sampling_step(data.rows, 10), sampling_step(data.rows, 5)};
  Factor factor;
  for (std::size_t round = 0; round < rounds.size(); ++round) {
    request.aim = round == 0 ? Aim::start : Aim::step;
    request.every = rounds[round];
    const VectorXd from = round == 0 ? VectorXd::Zero(start.gamma.size()) : start.gamma;
    const Sums sums = run_pass(layout, basis, data, family, from, request, work);
    Information information = assemble(layout, basis, sums);
    VectorXd score = assemble_score(layout, basis, sums);
    if (sampled) {
      add_pull(information);
      score.tail(score.size() - 1) -= from.tail(from.size() - 1);
    }
    factor = factorise(information, layout.coefficients, doubtful_share);
    VectorXd step = solve(factor, score);
    if (!step.allFinite()) continue;
    if (round == 0) step -= start.gamma;  // least squares gives coefficients, not a step
    if (round > 0) shorten_level_steps(layout, basis, step);
    start.gamma += line_share(layout, basis, data, family, start.gamma, step, request.every, work) * step;
  }
  if (!sampled) return start;

  // The sample's information is good enough for a first step on all rows, which then needs scores alone.
  request.aim = Aim::step;
  const double share_read = 1.0 / static_cast<double>(request.every);
  request.every = 1;
  request.cross = false;
  request.events = totals.events;
  Sums sums = run_pass(layout, basis, data, family, start.gamma, request, work);
  start.passes = 1;
  if (wild(sums, request)) {
    // The sample missed rows that matter: go towards it only as far as all rows allow.
    const VectorXd from = home(layout, totals.log_rate), towards = start.gamma - from;
    start.gamma = from + line_share(layout, basis, data, family, from, towards, 1, work) * towards;
    return start;
  }
  const VectorXd score = assemble_score(layout, basis, sums);
  start.step = solve(factor, score) * share_read;
  shorten_level_steps(layout, basis, start.step);
  start.rise = score.dot(start.step);
  return start;
}

}  // namespace countsel
