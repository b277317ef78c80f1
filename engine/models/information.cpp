// engine/models/information.cpp -- from sums by code to a matrix by coefficient; Cholesky in order.
#include "engine/models/information.hpp"

#include <Eigen/Cholesky>
#include <cmath>

namespace countsel {
namespace {

using Eigen::Index;
using Eigen::MatrixXd;
using Eigen::VectorXd;

/// A level block this large is absorbed.
constexpr std::size_t large_block = 256;

std::optional<std::size_t> absorbed_block(const Layout& layout) {
  std::optional<std::size_t> largest;
  for (std::size_t b = 0; b < layout.blocks.size(); ++b) {
    const Block& block = layout.blocks[b];
    if (block.multiplier != 0 || block.coefficients.size() < large_block) continue;
    if (!largest || block.coefficients.size() > layout.blocks[*largest].coefficients.size()) largest = b;
  }
  return largest;
}

/// Adds to the matrix by coefficient.
struct Filler {
  Information& information;
  std::vector<std::ptrdiff_t>
      where;  ///< of each coefficient: place in rest, or -2 - place in absorbed; -1 inactive

  void add(std::size_t a, std::size_t b, double value) {
    std::ptrdiff_t i = where[a], j = where[b];
    if (i == -1 || j == -1) return;
    if (i < 0) std::swap(i, j);
    if (i < 0) {  // both absorbed: two levels never meet, so this is one level with itself
      information.diagonal[-2 - i] += value;
    } else if (j < 0) {
      information.border(i, -2 - j) += value;
    } else {
      information.full(i, j) += value;
      if (i != j) information.full(j, i) += value;
    }
  }
};

/// The coefficient of a block at a group code that is still worked with as a level; -1 if none.
std::ptrdiff_t level_coefficient(const Basis& basis, const Block& block, std::size_t code) {
  if (block.level_of[code] < 0) return -1;
  const std::size_t k = block.coefficients[block.level_of[code]];
  return basis.active[k] && basis.combined_of[k] < 0 ? static_cast<std::ptrdiff_t>(k) : -1;
}

}  // namespace

Information assemble(const Layout& layout, const Basis& basis, const Sums& sums) {
  Information information;
  const auto absorbing = absorbed_block(layout);
  std::vector<std::ptrdiff_t> where(layout.coefficients, -1);
  for (std::size_t k = 0; k < layout.coefficients; ++k) {
    if (!basis.active[k]) continue;
    const Layout::Place& place = layout.places[k];
    if (absorbing && !place.dense && place.block == *absorbing && basis.combined_of[k] < 0) {
      where[k] = -2 - static_cast<std::ptrdiff_t>(information.absorbed.size());
      information.absorbed.push_back(k);
    } else {
      where[k] = static_cast<std::ptrdiff_t>(information.rest.size());
      information.rest.push_back(k);
    }
  }
  const Index rest = static_cast<Index>(information.rest.size());
  const Index absorbed = static_cast<Index>(information.absorbed.size());
  information.full = MatrixXd::Zero(rest, rest);
  information.border = MatrixXd::Zero(rest, absorbed);
  information.diagonal = VectorXd::Zero(absorbed);
  Filler filler{information, std::move(where)};

  std::vector<std::ptrdiff_t> at_column(basis.columns(), -1);  // coefficient of each dense column
  for (std::size_t k = 0; k < layout.coefficients; ++k)
    if (const auto d = dense_place(layout, basis, k); d && basis.active[k])
      at_column[*d] = static_cast<std::ptrdiff_t>(k);
  for (std::size_t i = 0; i < at_column.size(); ++i)
    for (std::size_t j = i; j < at_column.size(); ++j)
      if (at_column[i] >= 0 && at_column[j] >= 0)
        filler.add(at_column[i], at_column[j], sums.cross[i * sums.stride + j]);

  for (std::size_t b = 0; b < layout.blocks.size(); ++b) {
    const Block& block = layout.blocks[b];
    const Group& group = layout.groups[block.group];
    const auto& table = sums.groups[block.group].table[group.slot(block.multiplier)];
    for (std::size_t code = 0; code < group.size(); ++code) {
      const std::ptrdiff_t k = level_coefficient(basis, block, code);
      if (k < 0) continue;
      const double* row = table.data() + code * sums.stride;
      for (std::size_t d = 0; d < at_column.size(); ++d)
        if (at_column[d] >= 0) filler.add(k, at_column[d], row[d]);
      // Levels against levels of the same group: the other's multiplier is one of the dense columns.
      for (std::size_t other = b; other < layout.blocks.size(); ++other) {
        if (layout.blocks[other].group != block.group) continue;
        const std::ptrdiff_t l = level_coefficient(basis, layout.blocks[other], code);
        if (l >= 0) filler.add(k, l, row[layout.blocks[other].multiplier]);
      }
    }
  }
  for (std::size_t p = 0; p < layout.pairs.size(); ++p) {
    const GroupPair& pair = layout.pairs[p];
    const Group &first = layout.groups[pair.first], &second = layout.groups[pair.second];
    for (const Block& a : layout.blocks) {
      if (a.group != pair.first) continue;
      for (const Block& b : layout.blocks) {
        if (b.group != pair.second) continue;
        const double* table =
            sums.pairs[p].data() +
            (first.slot(a.multiplier) * second.multipliers.size() + second.slot(b.multiplier)) * pair.size;
        for (std::size_t code = 0; code < pair.size; ++code) {
          if (table[code] == 0) continue;
          const std::size_t code_a = pair.codes.empty() ? code / second.size() : pair.tuples[code].first;
          const std::size_t code_b = pair.codes.empty() ? code % second.size() : pair.tuples[code].second;
          const std::ptrdiff_t k = level_coefficient(basis, a, code_a),
                               l = level_coefficient(basis, b, code_b);
          if (k >= 0 && l >= 0) filler.add(k, l, table[code]);
        }
      }
    }
  }
  return information;
}

VectorXd assemble_score(const Layout& layout, const Basis& basis, const Sums& sums) {
  VectorXd score = VectorXd::Zero(static_cast<Index>(layout.coefficients));
  for (std::size_t k = 0; k < layout.coefficients; ++k)
    if (const auto d = dense_place(layout, basis, k); d && basis.active[k]) score[k] = sums.gradient[*d];
  for (const Block& block : layout.blocks) {
    const Group& group = layout.groups[block.group];
    const auto& by_code = sums.groups[block.group].score[group.slot(block.multiplier)];
    for (std::size_t code = 0; code < group.size(); ++code)
      if (const std::ptrdiff_t k = level_coefficient(basis, block, code); k >= 0) score[k] += by_code[code];
  }
  return score;
}

VectorXd times(const Information& information, const VectorXd& x) {
  VectorXd rest(static_cast<Index>(information.rest.size())),
      absorbed(static_cast<Index>(information.absorbed.size()));
  for (std::size_t i = 0; i < information.rest.size(); ++i) rest[i] = x[information.rest[i]];
  for (std::size_t j = 0; j < information.absorbed.size(); ++j) absorbed[j] = x[information.absorbed[j]];
  const VectorXd rest_out = information.full * rest + information.border * absorbed;
  const VectorXd absorbed_out =
      information.border.transpose() * rest + information.diagonal.cwiseProduct(absorbed);
  VectorXd out = VectorXd::Zero(x.size());
  for (std::size_t i = 0; i < information.rest.size(); ++i) out[information.rest[i]] = rest_out[i];
  for (std::size_t j = 0; j < information.absorbed.size(); ++j)
    out[information.absorbed[j]] = absorbed_out[j];
  return out;
}

Information without(const Information& information, const std::vector<char>& dropped) {
  std::vector<Index> rest, absorbed;
  Information smaller;
  for (std::size_t i = 0; i < information.rest.size(); ++i)
    if (!dropped[information.rest[i]]) {
      rest.push_back(i);
      smaller.rest.push_back(information.rest[i]);
    }
  for (std::size_t j = 0; j < information.absorbed.size(); ++j)
    if (!dropped[information.absorbed[j]]) {
      absorbed.push_back(j);
      smaller.absorbed.push_back(information.absorbed[j]);
    }
  smaller.full = information.full(rest, rest);
  smaller.border = information.border(rest, absorbed);
  smaller.diagonal = information.diagonal(absorbed);
  return smaller;
}

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
