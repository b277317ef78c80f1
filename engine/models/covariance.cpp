// engine/models/covariance.cpp -- sandwiches, in the working columns, mapped back.
#include "engine/models/covariance.hpp"

#include <cmath>
#include <limits>
#include <mutex>

#include "engine/models/fitted.hpp"
#include "engine/refusal.hpp"

namespace countsel {
namespace {

using Eigen::Index;
using Eigen::MatrixXd;
using Eigen::VectorXd;

constexpr double nan = std::numeric_limits<double>::quiet_NaN();
constexpr double full_leverage = 1 - 1e-9;

void refuse_too_many(const GlmFit& fit) {
  if (fit.covariance.size() == 0)
    throw Refusal(Code::too_large,
                  "These standard errors need the whole covariance, which is kept up to 2,000 "
                  "coefficients; the model has " +
                      std::to_string(fit.coefficients.size()) + ".");
}

/// Marks what has no value and takes the square roots.
Covariance finished(const GlmFit& fit, MatrixXd matrix, double factor) {
  Covariance result;
  result.factor = factor;
  result.matrix = std::move(matrix) * factor;
  for (Index k = 0; k < result.matrix.rows(); ++k)
    if (fit.status[k] != CoefficientStatus::finite) {
      result.matrix.row(k).setConstant(nan);
      result.matrix.col(k).setConstant(nan);
    }
  result.errors = result.matrix.diagonal().cwiseSqrt();
  return result;
}

Covariance nothing(const GlmFit& fit) {
  const Index p = fit.coefficients.size();
  return finished(fit, MatrixXd::Constant(p, p, nan), nan);
}

/// The entries of a row of working columns that are not 0: coefficient and value.
struct RowEntries {
  explicit RowEntries(const FittedModel& model) : layout(model.layout), basis(model.basis) {
    for (std::size_t k = 0; k < layout.coefficients; ++k)
      if (const auto d = dense_place(layout, basis, k); d && basis.active[k]) dense.emplace_back(k, *d);
  }
  template <class Use>
  void each(const BlockReader& block, std::size_t r, Use&& use) const {
    const double* z = block.z.data() + r * block.stride;
    for (const auto& [k, d] : dense) use(k, z[d]);
    for (const Block& levels : layout.blocks) {
      const std::int32_t level = levels.level_of[layout.groups[levels.group].codes[block.start + r]];
      if (level < 0) continue;
      const std::size_t k = levels.coefficients[level];
      if (basis.active[k] && basis.combined_of[k] < 0) use(k, z[levels.multiplier]);
    }
  }
  const Layout& layout;
  const Basis& basis;
  std::vector<std::pair<std::size_t, std::size_t>> dense;
};

/// x' C x of a row.
double quadratic(const RowEntries& entries, const BlockReader& block, std::size_t r, const MatrixXd& c,
                 std::vector<std::pair<std::size_t, double>>& row) {
  row.clear();
  entries.each(block, r, [&](std::size_t k, double value) { row.emplace_back(k, value); });
  double sum = 0;
  for (std::size_t i = 0; i < row.size(); ++i) {
    const double* column = c.data() + static_cast<Index>(row[i].first) * c.rows();
    double inner = column[row[i].first] * row[i].second / 2;
    for (std::size_t j = 0; j < i; ++j) inner += column[row[j].first] * row[j].second;
    sum += 2 * inner * row[i].second;
  }
  return sum;
}

MatrixXd dense_matrix(const Information& information, Index coefficients) {
  MatrixXd all = MatrixXd::Zero(coefficients, coefficients);
  for (std::size_t i = 0; i < information.rest.size(); ++i) {
    for (std::size_t j = 0; j < information.rest.size(); ++j)
      all(information.rest[i], information.rest[j]) = information.full(i, j);
    for (std::size_t j = 0; j < information.absorbed.size(); ++j)
      all(information.rest[i], information.absorbed[j]) = all(information.absorbed[j], information.rest[i]) =
          information.border(i, j);
  }
  for (std::size_t j = 0; j < information.absorbed.size(); ++j)
    all(information.absorbed[j], information.absorbed[j]) = information.diagonal[j];
  return all;
}

}  // namespace

Covariance robust_covariance(const GlmFit& fit, RobustKind kind, const Work& work) {
  refuse_too_many(fit);
  const FittedModel& model = *fit.model;
  if (model.gamma.size() == 0) return nothing(fit);
  const MatrixXd bread = inverse(model.factor);
  const bool frequency = model.source.weights_are == WeightsAre::frequency;
  const bool by_leverage = kind == RobustKind::hc2 || kind == RobustKind::hc3;
  const RowEntries entries(model);
  std::size_t undefined = 0;
  std::mutex counting;  // the count does not depend on the order
  PassRequest request;
  request.rewrite = [&](const BlockReader& block, const double* mean, double* score, double* information) {
    std::vector<std::pair<std::size_t, double>> row;
    std::size_t without = 0;
    for (std::size_t r = 0; r < block.size; ++r) {
      const double w = block.weight ? block.weight[r] : 1;
      double square = w > 0 ? score[r] * score[r] / (frequency ? w : 1) : 0;
      if (by_leverage && w > 0) {
        const double own = frequency ? mean[r] : information[r];
        const double leverage = own * quadratic(entries, block, r, bread, row);
        if (leverage > full_leverage) ++without;
        square /= kind == RobustKind::hc2 ? 1 - leverage : (1 - leverage) * (1 - leverage);
      }
      information[r] = square;
    }
    if (without > 0) {
      const std::lock_guard lock(counting);
      undefined += without;
    }
  };
  const Sums sums =
      run_pass(model.layout, model.basis, model.data, *model.family, model.gamma, request, work);
  Covariance result = nothing(fit);
  const double p = static_cast<double>(fit.rank);
  if (undefined == 0 && (kind != RobustKind::hc1 || fit.rows > p)) {
    const MatrixXd meat = dense_matrix(assemble(model.layout, model.basis, sums), bread.rows());
    const MatrixXd half = design_map(model.layout, model.basis) * bread;
    result = finished(fit, half * meat * half.transpose(),
                      kind == RobustKind::hc1 ? fit.rows / (fit.rows - p) : 1);
  }
  result.undefined_rows = undefined;
  return result;
}

Covariance clustered_covariance(const GlmFit& fit, std::span<const std::int32_t> cluster, ClusterKind kind,
                                const Work& work) {
  refuse_too_many(fit);
  const FittedModel& model = *fit.model;
  if (cluster.size() != model.data.rows)
    throw Refusal(Code::length_mismatch, "cluster has " + std::to_string(cluster.size()) +
                                             " rows, count has " + std::to_string(model.data.rows) + ".");
  std::int32_t largest = -1;
  for (const std::int32_t code : cluster) largest = std::max(largest, code);
  std::vector<char> present(static_cast<std::size_t>(largest) + 1, 0);
  for (std::size_t i = 0; i < cluster.size(); ++i) {
    if (cluster[i] < 0) throw Refusal(Code::internal, "A cluster code is below 0.");
    if (model.source.weight.empty() || model.source.weight[i] > 0) present[cluster[i]] = 1;
  }
  const auto clusters = static_cast<std::size_t>(std::count(present.begin(), present.end(), 1));
  Covariance result = nothing(fit);
  result.clusters = clusters;
  if (model.gamma.size() == 0 || (kind == ClusterKind::cr1 && clusters < 2)) return result;

  // Scores are summed by cluster, a slab of clusters at a time so that memory stays bounded.
  const Index p = fit.coefficients.size();
  const std::size_t slab = std::max<std::size_t>(1, (std::size_t{16} << 20) / static_cast<std::size_t>(p));
  const RowEntries entries(model);
  MatrixXd meat = MatrixXd::Zero(p, p);
  std::vector<double> mean(block_rows), score(block_rows), information(block_rows);
  for (std::size_t from = 0; from < present.size(); from += slab) {
    const std::size_t to = std::min(present.size(), from + slab);
    MatrixXd sums = MatrixXd::Zero(p, static_cast<Index>(to - from));
    BlockReader block(model.layout, model.basis, model.data);
    block.set(model.gamma);
    for (std::size_t b = 0; b < block.block_count(); ++b) {
      if (b % 16 == 0) work.progress.check();
      block.read(b);
      model.family->step(block.padded, block.eta.data(), block.count, block.exposure, block.weight,
                         mean.data(), score.data(), information.data());
      for (std::size_t r = 0; r < block.size; ++r) {
        const auto code = static_cast<std::size_t>(cluster[block.start + r]);
        if (code < from || code >= to) continue;
        double* own = sums.data() + static_cast<Index>(code - from) * p;
        entries.each(block, r, [&](std::size_t k, double value) { own[k] += score[r] * value; });
      }
    }
    meat.selfadjointView<Eigen::Lower>().rankUpdate(sums);
  }
  meat = meat.selfadjointView<Eigen::Lower>();
  const MatrixXd half = design_map(model.layout, model.basis) * inverse(model.factor);
  const double count = static_cast<double>(clusters);
  result = finished(fit, half * meat * half.transpose(), kind == ClusterKind::cr1 ? count / (count - 1) : 1);
  result.clusters = clusters;
  return result;
}

Covariance scaled_covariance(const GlmFit& fit, double dispersion) {
  if (fit.covariance.size() > 0) return finished(fit, fit.covariance, dispersion);
  Covariance result;
  result.factor = dispersion;
  result.errors = fit.errors * std::sqrt(dispersion);
  return result;
}

Covariance scaled_covariance(const GlmFit& fit) { return scaled_covariance(fit, fit.dispersion); }

}  // namespace countsel
