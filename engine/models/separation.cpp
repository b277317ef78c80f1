// engine/models/separation.cpp -- search for recession directions of the likelihood.
#include "engine/models/separation.hpp"

#include <Eigen/QR>
#include <algorithm>
#include <cmath>
#include <map>

namespace countsel {
namespace {

using Eigen::Index;
using Eigen::MatrixXd;
using Eigen::VectorXd;

constexpr double negligible = 1e-11;

/// A row's values in the vanishing combinations, largest scaled to 1, rounded so that equal rows are equal.
using Pattern = std::vector<std::pair<std::size_t, double>>;

Pattern pattern_of(const Layout& layout, const std::vector<RawForm>& forms, const std::vector<double>& floors,
                   std::size_t row) {
  Pattern pattern;
  double largest = 0;
  for (std::size_t j = 0; j < forms.size(); ++j) {
    const FormValue value = evaluate(layout, forms[j], row);
    if (std::fabs(value.value) <= negligible * value.magnitude + floors[j]) continue;
    pattern.emplace_back(j, value.value);
    largest = std::max(largest, std::fabs(value.value));
  }
  for (auto& [j, value] : pattern) value = std::ldexp(std::round(std::ldexp(value / largest, 40)), -40);
  std::erase_if(pattern, [](const auto& entry) { return entry.second == 0; });
  return pattern;
}

struct Patterns {
  std::vector<Pattern> distinct;
  std::vector<std::ptrdiff_t> of_row;  ///< of the rows asked about; -1: all zero
};

Patterns find_patterns(const Layout& layout, const Basis& basis, const std::vector<LeftOut>& vanishing,
                       const std::vector<std::size_t>& rows, const Work& work) {
  std::vector<RawForm> forms;
  std::vector<double> floors;
  for (const LeftOut& v : vanishing) {
    forms.push_back(make_form(layout, v.combination));
    floors.push_back(1e-12 * column_size(layout, basis, v.coefficient));
  }
  Patterns patterns;
  std::map<Pattern, std::ptrdiff_t> known;
  for (std::size_t i = 0; i < rows.size(); ++i) {
    if (i % 1024 == 0) work.progress.check();
    Pattern pattern = pattern_of(layout, forms, floors, rows[i]);
    if (pattern.empty()) {
      patterns.of_row.push_back(-1);
      continue;
    }
    const auto [at, fresh] =
        known.try_emplace(pattern, static_cast<std::ptrdiff_t>(patterns.distinct.size()));
    if (fresh) patterns.distinct.push_back(std::move(pattern));
    patterns.of_row.push_back(at->second);
  }
  return patterns;
}

MatrixXd as_columns(const std::vector<Pattern>& patterns, const std::vector<std::size_t>& which,
                    std::size_t size) {
  MatrixXd columns = MatrixXd::Zero(static_cast<Index>(size), static_cast<Index>(which.size()));
  for (std::size_t i = 0; i < which.size(); ++i)
    for (const auto& [j, value] : patterns[which[i]]) columns(j, i) = value;
  return columns;
}

}  // namespace

VectorXd nonnegative_remainder(const MatrixXd& columns, const VectorXd& target, const Work& work) {
  std::vector<Index> passive;
  VectorXd x = VectorXd::Zero(columns.cols());
  VectorXd left = target;
  const double tolerance = 1e-12 * target.norm();
  const Index most = 20 * columns.rows() + 100;
  for (Index round = 0; round < most; ++round) {
    work.progress.check();
    const VectorXd gain = columns.transpose() * left;
    Index best = -1;
    for (Index i = 0; i < gain.size(); ++i)
      if (x[i] == 0 && gain[i] > tolerance * columns.col(i).norm() && (best < 0 || gain[i] > gain[best]))
        best = i;
    if (best < 0 || left.norm() <= tolerance) break;
    passive.push_back(best);
    for (;;) {
      MatrixXd chosen(columns.rows(), static_cast<Index>(passive.size()));
      for (std::size_t i = 0; i < passive.size(); ++i) chosen.col(i) = columns.col(passive[i]);
      const VectorXd trial = chosen.colPivHouseholderQr().solve(target);
      if (trial.minCoeff() > 0) {
        x.setZero();
        for (std::size_t i = 0; i < passive.size(); ++i) x[passive[i]] = trial[i];
        break;
      }
      double step = 1;
      for (std::size_t i = 0; i < passive.size(); ++i)
        if (trial[i] <= 0) step = std::min(step, x[passive[i]] / (x[passive[i]] - trial[i]));
      if (!(step >= 0)) step = 0;
      std::vector<Index> still;
      for (std::size_t i = 0; i < passive.size(); ++i) {
        double& value = x[passive[i]];
        value += step * (trial[i] - value);
        if (value > 1e-15 && !(trial[i] <= 0 && step == 0))
          still.push_back(passive[i]);
        else
          value = 0;
      }
      if (still.size() == passive.size()) still.pop_back();
      passive = std::move(still);
      if (passive.empty()) break;
    }
    left = target;
    for (const Index i : passive) left -= x[i] * columns.col(i);
    if (passive.empty()) break;
  }
  return left;
}

std::vector<std::size_t> separated_rows(const Layout& layout, const Basis& basis, const RowData& data,
                                        const std::vector<LeftOut>& vanishing, const Work& work) {
  std::vector<std::size_t> rows;
  for (std::size_t i = 0; i < data.rows; ++i)
    if (data.count[i] == 0 && (!data.weight || data.weight[i] > 0)) rows.push_back(i);
  const Patterns patterns = find_patterns(layout, basis, vanishing, rows, work);
  const std::size_t size = vanishing.size();
  std::vector<char> gone(patterns.distinct.size(), 0);
  for (;;) {
    // A combination of one sign in every row still there is a direction by itself: levels without events.
    bool changed = true;
    while (changed) {
      changed = false;
      std::vector<char> up(size, 0), down(size, 0);
      for (std::size_t p = 0; p < gone.size(); ++p)
        if (!gone[p])
          for (const auto& [j, value] : patterns.distinct[p]) (value > 0 ? up : down)[j] = 1;
      for (std::size_t p = 0; p < gone.size(); ++p) {
        if (gone[p]) continue;
        for (const auto& [j, value] : patterns.distinct[p])
          if (up[j] != down[j]) gone[p] = 1;
        changed |= gone[p];
      }
    }
    std::vector<std::size_t> live;
    for (std::size_t p = 0; p < gone.size(); ++p)
      if (!gone[p]) live.push_back(p);
    if (live.empty()) break;
    const MatrixXd columns = as_columns(patterns.distinct, live, size);
    const VectorXd sum = columns.rowwise().mean();
    // Either the columns add up to 0 with all weights positive, and nothing is separated, or what is left
    // of the attempt points where no row rises and some fall.
    const VectorXd left = nonnegative_remainder(columns, -sum, work);
    if (left.norm() <= 1e-9 * std::max(1e-3, sum.norm())) break;
    const VectorXd fall = columns.transpose() * left;
    bool any = false;
    for (std::size_t i = 0; i < live.size(); ++i)
      if (fall[i] < -1e-9 * left.norm() * columns.col(i).norm()) gone[live[i]] = 1, any = true;
    if (!any) break;
  }
  std::vector<std::size_t> separated;
  for (std::size_t i = 0; i < rows.size(); ++i)
    if (patterns.of_row[i] >= 0 && gone[patterns.of_row[i]]) separated.push_back(rows[i]);
  return separated;
}

std::vector<CoefficientStatus> infinite_coefficients(const Layout& layout, const Basis& basis,
                                                     const std::vector<std::size_t>& separated,
                                                     const std::vector<LeftOut>& vanishing,
                                                     const Work& work) {
  const Patterns patterns = find_patterns(layout, basis, vanishing, separated, work);
  const std::size_t size = vanishing.size();
  std::vector<std::size_t> all(patterns.distinct.size());
  for (std::size_t p = 0; p < all.size(); ++p) all[p] = p;
  // A row that involves one combination alone fixes its sign: it must not rise.
  std::vector<int> only(size, 0);
  for (const Pattern& pattern : patterns.distinct)
    if (pattern.size() == 1) only[pattern[0].first] = pattern[0].second > 0 ? -1 : 1;

  std::vector<CoefficientStatus> status(layout.coefficients, CoefficientStatus::finite);
  const bool searchable = size * all.size() <= 2000000 && size <= 400;
  MatrixXd columns;
  if (searchable) columns = as_columns(patterns.distinct, all, size);
  std::vector<VectorXd> parts(layout.coefficients);
  for (std::size_t j = 0; j < size; ++j)
    for (const auto& [k, multiple] : vanishing[j].combination) {
      if (parts[k].size() == 0) parts[k] = VectorXd::Zero(static_cast<Index>(size));
      parts[k][j] = multiple.value();
    }
  for (std::size_t k = 0; k < layout.coefficients; ++k) {
    if (parts[k].size() == 0) continue;
    const Index involved = (parts[k].array() != 0).count();
    Index j = 0;
    parts[k].cwiseAbs().maxCoeff(&j);
    if (involved == 1 && only[j] != 0) {
      const bool rises = only[j] * parts[k][j] > 0;
      status[k] = rises ? CoefficientStatus::plus_infinity : CoefficientStatus::minus_infinity;
      continue;
    }
    status[k] = CoefficientStatus::undetermined;
    if (!searchable) continue;
    // The coefficient can rise along some direction unless it is a nonnegative sum of the rows (Farkas).
    const bool can_rise = nonnegative_remainder(columns, parts[k], work).norm() > 1e-9 * parts[k].norm();
    const bool can_fall = nonnegative_remainder(columns, -parts[k], work).norm() > 1e-9 * parts[k].norm();
    if (can_rise != can_fall)
      status[k] = can_rise ? CoefficientStatus::plus_infinity : CoefficientStatus::minus_infinity;
  }
  return status;
}

}  // namespace countsel
