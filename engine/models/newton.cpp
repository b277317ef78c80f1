// engine/models/newton.cpp -- Newton's method on all rows.
//
// The length of a step is judged by the score along it, not by the log-likelihood: near the maximum
// the latter's change is lost in rounding where counts are large, the score's is not.
#include "engine/models/newton.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

#include "engine/models/line.hpp"
#include "engine/models/start.hpp"

namespace countsel {
namespace {

using Eigen::Index;
using Eigen::VectorXd;

constexpr int most_passes = 200;
constexpr std::size_t cheap_rows = 20000;
constexpr double rough_share = 1e-10;

/// The coefficient that a step moves most, in its own standard errors.
std::size_t most_moved(const Factor& factor, const VectorXd& step) {
  if (factor.coefficients == 0) return 0;
  const VectorXd variance = inverse_diagonal(factor);
  std::size_t worst = 0;
  double most = -1;
  for (Index k = 0; k < step.size(); ++k)
    if (variance[k] > 0 && std::fabs(step[k]) / std::sqrt(variance[k]) > most) {
      most = std::fabs(step[k]) / std::sqrt(variance[k]);
      worst = k;
    }
  return worst;
}

}  // namespace

NewtonResult newton(const Layout& layout, Basis& basis, const RowData& data, const Family& family,
                    const Totals& totals, const Work& work) {
  NewtonResult result;
  PassRequest request;
  request.null_log_rate = totals.log_rate;
  request.events = totals.events;
  const Start begin = find_start(layout, basis, data, family, totals, work);
  VectorXd start = begin.gamma, step = begin.step;
  double rise_before = begin.rise, length_before = 0;
  bool whole_before = false;  // the step behind was a whole Newton step
  result.gamma = step.size() > 0 ? VectorXd(start + step) : start;
  bool near = data.rows >= cheap_rows;  // a sample has been fitted
  int pass = 1;
  for (; pass <= most_passes && !result.converged; ++pass) {
    // The fit is measured where this pass is likely to be the last that matters.
    request.fit = data.rows >= cheap_rows && whole_before && (pass >= 2 || length_before < 1e-2);
    const std::size_t combined_before = basis.combined.size();
    if (near) {
      result.last = settle(layout, basis, data, family, result.gamma, request, work);
    } else {
      // Far from the maximum the weights of the moment say little of the columns: a rough factor will do.
      PassRequest rough = request;
      if (family.damp)
        rough.rewrite = [&](const BlockReader& block, const double* mean, double*, double* information) {
          family.damp(block.padded, block.count, mean, block.weight, information);
        };
      result.last.sums = run_pass(layout, basis, data, family, result.gamma, rough, work);
      result.last.information = assemble(layout, basis, result.last.sums);
      result.last.factor = factorise(result.last.information, layout.coefficients, rough_share);
    }
    const VectorXd score = assemble_score(layout, basis, result.last.sums);
    if (near && (basis.combined.size() != combined_before || !result.last.left_out.empty())) {
      step.resize(0);  // the working columns are others now: the step behind means nothing
      whole_before = false;
    }
    if (step.size() > 0 && !(score.dot(step) >= -rise_before - 1e-12)) {
      const double share = line_share(layout, basis, data, family, start, step, 1, work);
      if (share < 1e-12 || share == 1) break;
      step *= share;
      rise_before = std::numeric_limits<double>::infinity();  // this length has been looked at
      result.gamma = start + step;
      whole_before = false;
      continue;
    }
    if (!score.allFinite()) break;
    start = result.gamma;
    step = solve(result.last.factor, score);
    const double length = std::sqrt(std::max(0.0, score.dot(step)));  // in standard errors
    work.progress.tell(std::min(0.9, 1 - 1.0 / (1 + pass)), "fitting");
    result.last_step = length;
    const VectorXd newton_step = step;
    bool changed = shorten_level_steps(layout, basis, step);
    if (changed && !(score.dot(step) > 0.1 * length * length)) step = newton_step;
    rise_before = score.dot(step);
    if (length * length > 0.1 * totals.events) {
      const double share = line_share(layout, basis, data, family, start, step, 1, work);
      step *= share;
      changed |= share < 1;
      rise_before = std::numeric_limits<double>::infinity();
    }
    result.gamma = start + step;
    // A whole step leaves about bend * length^2: known once two whole steps in a row have been seen.
    const double bend = whole_before ? std::max(1e-3 * length, length / (length_before * length_before)) : 1;
    const bool small_rest = bend * length * length < 1e-11 && bend * length < 1e-7;
    const bool stalled = whole_before && length < 1e-7 && length > 0.3 * length_before;
    result.converged = small_rest || length < 1e-10 || stalled;
    if (!near && result.converged) result.converged = false;
    near = length * length < std::max(1e-2, 1e-3 * totals.events) && !changed;
    length_before = length;
    whole_before = !changed;
  }
  result.passes = begin.passes + pass - 1;
  if (!result.converged && step.size() > 0) result.worst = most_moved(result.last.factor, step);
  // Errors and fit at the estimate itself: on few rows always, else where the last pass was not near enough.
  if (data.rows < cheap_rows || !request.fit || !result.converged || result.last_step > 1e-3) {
    request.fit = true;
    result.last = settle(layout, basis, data, family, result.gamma, request, work);
    ++result.passes;
  }
  return result;
}

}  // namespace countsel
