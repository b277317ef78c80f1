// engine/models/newton.cpp -- a rough fit on a spread-out sample, then Newton on all rows.
//
// The length of a step is judged by the score along it, not by the log-likelihood: near the maximum the
// latter's change is lost in rounding where counts are large, the score's is not.
#include "engine/models/newton.hpp"

#include <algorithm>
#include <cmath>

namespace countsel {
namespace {

using Eigen::Index;
using Eigen::VectorXd;

constexpr int most_passes = 80;
constexpr std::size_t cheap_rows = 20000;

/// A pull towards 0, worth one event a coefficient: in a sample, levels may have no events.
void add_pull(Information& information) {
  for (std::size_t k = 0; k < information.rest.size(); ++k)
    if (information.rest[k] != 0) information.full(k, k) += 1;
  information.diagonal.array() += 1;
}

/// How far apart the blocks of a sample lie: about `share` of the rows, and never few.
std::size_t sampling_step(std::size_t rows, std::size_t parts) {
  constexpr std::size_t least_rows = 8192;
  if (rows < 4 * least_rows) return 1;
  return rows / std::max(least_rows, rows / parts);
}

struct SampleFit {
  VectorXd gamma;
  Factor factor;     ///< of the last sample's information
  double share = 1;  ///< of the rows
};

/// Newton on a fortieth of the rows, then on more; on few rows one step from the counts themselves. What the
/// last sample costs saves a pass over all rows.
SampleFit sample_fit(const Layout& layout, const Basis& basis, const RowData& data, const Family& family,
                     PassRequest request, const Work& work) {
  SampleFit fit{VectorXd::Zero(static_cast<Index>(layout.coefficients)), {}, 1};
  const std::size_t coarse = sampling_step(data.rows, 40), fine = sampling_step(data.rows, 10),
                    finest = sampling_step(data.rows, 5);
  std::vector<std::size_t> rounds{coarse};
  if (coarse > 1) rounds = {coarse, coarse, coarse, fine, finest};
  for (std::size_t round = 0; round < rounds.size(); ++round) {
    request.aim = round == 0 ? Aim::start : Aim::step;
    request.every = rounds[round];
    const Sums sums = run_pass(layout, basis, data, family, fit.gamma, request, work);
    Information information = assemble(layout, basis, sums);
    VectorXd score = assemble_score(layout, basis, sums);
    if (request.every > 1) {
      add_pull(information);
      score.tail(score.size() - 1) -= fit.gamma.tail(fit.gamma.size() - 1);
    }
    fit.factor = factorise(information, layout.coefficients, doubtful_share);
    fit.share = 1.0 / static_cast<double>(request.every);
    const VectorXd step = solve(fit.factor, score);
    if (!step.allFinite()) break;
    fit.gamma += step;
  }
  return fit;
}

/// The coefficient that a step moves most, in its own standard errors.
std::size_t most_moved(const Factor& factor, const VectorXd& step) {
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
                    double null_log_rate, const Work& work) {
  NewtonResult result;

  PassRequest request;
  request.null_log_rate = null_log_rate;
  const SampleFit sample = sample_fit(layout, basis, data, family, request, work);
  result.gamma = sample.gamma;
  int passes_before = 0;
  if (sample.share < 1) {
    // The sample's information is good enough for a first step on all rows, which then needs scores alone.
    request.cross = false;
    const Sums sums = run_pass(layout, basis, data, family, result.gamma, request, work);
    const VectorXd first = solve(sample.factor, assemble_score(layout, basis, sums)) * sample.share;
    if (first.allFinite()) result.gamma += first;
    request.cross = true;
    passes_before = 1;
  }

  VectorXd start = result.gamma, step;
  double rise_before = 0, share = 0, step_before = 0;
  bool whole_before = false;
  for (result.passes = 1; result.passes <= most_passes; ++result.passes) {
    // The fit is measured where this pass is likely to be the last that matters.
    request.fit = data.rows >= cheap_rows && whole_before && (result.passes >= 2 || step_before < 1e-2);
    const std::size_t combined_before = basis.combined.size();
    result.last = settle(layout, basis, data, family, result.gamma, request, work);
    const VectorXd score = assemble_score(layout, basis, result.last.sums);
    const bool usable = score.allFinite() && !result.last.factor.rest.empty();
    if (!usable && step.size() == 0) break;
    const bool changed = basis.combined.size() != combined_before || !result.last.left_out.empty();
    if (changed) {
      // The working columns are others now: the step behind means nothing.
      step.resize(0);
      whole_before = false;
    }
    if (step.size() > 0) {
      const double rise = score.dot(step);
      if (!usable || !std::isfinite(rise) || rise < -rise_before) {
        const double cut =
            std::isfinite(rise) ? std::clamp(rise_before / (rise_before - rise), 0.1, 0.5) : 0.1;
        share *= cut;
        if (share < 1e-12) break;
        result.gamma = start + share * step;
        whole_before = false;
        continue;
      }
    }
    start = result.gamma;
    step = solve(result.last.factor, score);
    const double rise = score.dot(step);  // squared length in standard errors
    const double length = std::sqrt(std::max(0.0, rise));
    work.progress.tell(std::min(0.95, 1 - 0.5 / (1 + result.passes)), "fitting");
    result.last_step = length;
    share = 1;
    result.gamma = start + step;
    rise_before = rise;
    // A whole step leaves about bend * length^2: known once two whole steps in a row have been seen.
    const double bend =
        whole_before && step_before > 0 ? std::max(1e-3 * length, length / (step_before * step_before)) : 1;
    const bool small_rest = bend * length * length < 1e-11 && bend * length < 1e-7;
    const bool stalled = whole_before && length < 1e-7 && length > 0.3 * step_before;
    if (small_rest || length < 1e-10 || stalled) {
      result.converged = true;
      break;
    }
    step_before = length;
    whole_before = true;
  }
  result.passes += passes_before;
  if (!result.converged && step.size() > 0 && result.last.factor.coefficients > 0)
    result.worst = most_moved(result.last.factor, step);
  // Errors and fit at the estimate itself: on few rows always, else where the last pass was not near enough.
  if (data.rows < cheap_rows || !request.fit || !result.converged || result.last_step > 1e-3) {
    request.fit = true;
    result.last = settle(layout, basis, data, family, result.gamma, request, work);
    ++result.passes;
  }
  return result;
}

}  // namespace countsel
