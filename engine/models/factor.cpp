// engine/models/factor.cpp -- Cholesky in the coefficients' order, the large level column eliminated first.
#include "engine/models/factor.hpp"

#include <Eigen/Cholesky>
#include <algorithm>
#include <cmath>
#include <limits>

namespace countsel {

using Eigen::Index;
using Eigen::MatrixXd;
using Eigen::VectorXd;

Factor factorise(const Information& information, std::size_t coefficients, double least) {
  Factor factor;
  factor.rest = information.rest;
  factor.absorbed = information.absorbed;
  factor.coefficients = coefficients;
  factor.border = information.border;
  factor.diagonal = information.diagonal;
  MatrixXd schur = information.full;
  for (Index j = 0; j < factor.diagonal.size(); ++j) {
    if (factor.diagonal[j] > 0) continue;
    factor.diagonal[j] = std::numeric_limits<double>::infinity();
    factor.dependent.push_back(factor.absorbed[j]);
  }
  if (factor.absorbed.size() > 0)
    schur.noalias() -=
        factor.border * factor.diagonal.cwiseInverse().asDiagonal() * factor.border.transpose();

  const Index n = schur.rows();
  factor.kept.assign(n, 1);
  const VectorXd own = information.full.diagonal();
  const Eigen::LLT<MatrixXd> quick(schur);
  bool clean = quick.info() == Eigen::Success;
  if (clean) {
    factor.lower = quick.matrixL();
    const Eigen::ArrayXd share = factor.lower.diagonal().array().square() / own.array();
    clean = n == 0 || share.minCoeff() > least;
    if (clean && n > 0) factor.least_pivot = share.minCoeff();
  }
  if (clean) return factor;

  // Column by column, leaving out what is explained.
  factor.lower = MatrixXd::Zero(n, n);
  factor.least_pivot = 1;
  for (Index k = 0; k < n; ++k) {
    VectorXd row = schur.row(k).head(k).transpose();
    for (Index j = 0; j < k; ++j) {
      if (!factor.kept[j]) {
        row[j] = 0;
        continue;
      }
      row[j] = (row[j] - factor.lower.row(j).head(j).dot(row.head(j))) / factor.lower(j, j);
    }
    const double pivot = schur(k, k) - row.squaredNorm();
    const double share = own[k] > 0 ? pivot / own[k] : 0;
    if (!(share > least)) {
      factor.kept[k] = 0;
      factor.lower(k, k) = 1;
      factor.border.row(k).setZero();
      factor.dependent.push_back(factor.rest[k]);
      continue;
    }
    factor.least_pivot = std::min(factor.least_pivot, share);
    factor.lower.row(k).head(k) = row.transpose();
    factor.lower(k, k) = std::sqrt(pivot);
  }
  return factor;
}

namespace {

VectorXd schur_solve(const Factor& factor, VectorXd x) {
  for (Index k = 0; k < x.size(); ++k)
    if (!factor.kept[k]) x[k] = 0;
  factor.lower.triangularView<Eigen::Lower>().solveInPlace(x);
  factor.lower.transpose().triangularView<Eigen::Upper>().solveInPlace(x);
  return x;
}

VectorXd arrow_solve(const Factor& factor, VectorXd rest, const VectorXd& absorbed, VectorXd& absorbed_out) {
  const VectorXd scaled = absorbed.cwiseQuotient(factor.diagonal);
  if (absorbed.size() > 0) rest -= factor.border * scaled;
  rest = schur_solve(factor, std::move(rest));
  absorbed_out = scaled;
  if (absorbed.size() > 0) absorbed_out -= (factor.border.transpose() * rest).cwiseQuotient(factor.diagonal);
  return rest;
}

}  // namespace

VectorXd solve(const Factor& factor, const VectorXd& score) {
  VectorXd rest(static_cast<Index>(factor.rest.size())), absorbed(static_cast<Index>(factor.absorbed.size()));
  for (std::size_t i = 0; i < factor.rest.size(); ++i) rest[i] = score[factor.rest[i]];
  for (std::size_t j = 0; j < factor.absorbed.size(); ++j) absorbed[j] = score[factor.absorbed[j]];
  VectorXd absorbed_out;
  rest = arrow_solve(factor, std::move(rest), absorbed, absorbed_out);
  VectorXd x = VectorXd::Zero(static_cast<Index>(factor.coefficients));
  for (std::size_t i = 0; i < factor.rest.size(); ++i) x[factor.rest[i]] = rest[i];
  for (std::size_t j = 0; j < factor.absorbed.size(); ++j) x[factor.absorbed[j]] = absorbed_out[j];
  return x;
}

namespace {

/// Inverse of the Schur complement, zero rows where left out.
MatrixXd schur_inverse(const Factor& factor) {
  const Index n = static_cast<Index>(factor.rest.size());
  MatrixXd root = MatrixXd::Identity(n, n);
  factor.lower.triangularView<Eigen::Lower>().solveInPlace(root);
  for (Index k = 0; k < n; ++k)
    if (!factor.kept[k]) root(k, k) = 0;
  return root.transpose() * root;
}

}  // namespace

VectorXd inverse_diagonal(const Factor& factor) {
  VectorXd x = VectorXd::Zero(static_cast<Index>(factor.coefficients));
  const MatrixXd rest = schur_inverse(factor);
  for (std::size_t i = 0; i < factor.rest.size(); ++i) x[factor.rest[i]] = rest(i, i);
  for (std::size_t j = 0; j < factor.absorbed.size(); ++j) {
    const VectorXd b = factor.border.col(j) / factor.diagonal[j];
    x[factor.absorbed[j]] = 1 / factor.diagonal[j] + b.dot(rest * b);
  }
  return x;
}

MatrixXd inverse(const Factor& factor) {
  const Index p = static_cast<Index>(factor.coefficients);
  const MatrixXd rest = schur_inverse(factor);
  const MatrixXd side = factor.border * factor.diagonal.cwiseInverse().asDiagonal();  // rest x absorbed
  const MatrixXd between = -rest * side;
  MatrixXd corner = -side.transpose() * between;
  corner.diagonal() += factor.diagonal.cwiseInverse();
  MatrixXd all = MatrixXd::Zero(p, p);
  for (std::size_t i = 0; i < factor.rest.size(); ++i)
    for (std::size_t j = 0; j < factor.rest.size(); ++j) all(factor.rest[i], factor.rest[j]) = rest(i, j);
  for (std::size_t i = 0; i < factor.rest.size(); ++i)
    for (std::size_t j = 0; j < factor.absorbed.size(); ++j)
      all(factor.rest[i], factor.absorbed[j]) = all(factor.absorbed[j], factor.rest[i]) = between(i, j);
  for (std::size_t i = 0; i < factor.absorbed.size(); ++i)
    for (std::size_t j = 0; j < factor.absorbed.size(); ++j)
      all(factor.absorbed[i], factor.absorbed[j]) = corner(i, j);
  return all;
}

VectorXd design_errors(const Layout& layout, const Basis& basis, const Factor& factor) {
  // Row by row of the map to design coefficients; nearly all rows have one entry.
  std::vector<Combination> rows(layout.coefficients);
  for (std::size_t k = 0; k < layout.coefficients; ++k)
    if (basis.active[k])
      for (const auto& [j, multiple] : working_column(layout, basis, k)) rows[j].emplace_back(k, multiple);
  const VectorXd own = inverse_diagonal(factor);
  VectorXd errors = VectorXd::Zero(static_cast<Index>(layout.coefficients));
  for (std::size_t j = 0; j < layout.coefficients; ++j) {
    if (rows[j].size() == 1) {
      errors[j] = std::fabs(rows[j][0].second.value()) * std::sqrt(own[rows[j][0].first]);
      continue;
    }
    VectorXd row = VectorXd::Zero(static_cast<Index>(layout.coefficients));
    for (const auto& [k, multiple] : rows[j]) row[k] += multiple.value();
    errors[j] = std::sqrt(row.dot(solve(factor, row)));
  }
  return errors;
}

VectorXd regress(const Factor& factor, const Information& information, std::size_t coefficient) {
  VectorXd column = VectorXd::Zero(static_cast<Index>(factor.coefficients));
  for (std::size_t k = 0; k < information.rest.size(); ++k) {
    if (information.rest[k] != coefficient) continue;
    for (std::size_t i = 0; i < information.rest.size(); ++i)
      column[information.rest[i]] = information.full(k, i);
    for (std::size_t j = 0; j < information.absorbed.size(); ++j)
      column[information.absorbed[j]] = information.border(k, j);
  }
  column[coefficient] = 0;
  VectorXd x = solve(factor, column);
  return x;
}

}  // namespace countsel
