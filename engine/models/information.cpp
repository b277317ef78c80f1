// engine/models/information.cpp -- from sums by code to a matrix by coefficient.
#include "engine/models/information.hpp"

#include <optional>

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

}  // namespace countsel
