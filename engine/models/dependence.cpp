// engine/models/dependence.cpp -- remainders of nearly explained columns, row by row.
#include "engine/models/dependence.hpp"

#include <algorithm>
#include <cmath>

namespace countsel {
namespace {

/// Below this share of its parts in every row, a remainder is rounding.
constexpr double rounding_share = 16 * 2.3e-16;

void add_to(Combination& combination, const Combination& more, double multiple) {
  for (const auto& [k, share] : more) {
    const DoubleDouble change = share * DoubleDouble(multiple);
    auto at = combination.begin();
    while (at != combination.end() && at->first != k) ++at;
    if (at == combination.end())
      combination.emplace_back(k, change);
    else
      at->second = at->second + change;
  }
}

struct Remainder {
  double worst = 0;   ///< largest share of its parts in a row
  double square = 0;  ///< weighted sum of squares
  double weight = 0;  ///< sum of weights
};

/// One pass: how large the remainder is, and its weighted products with the working columns.
Remainder measure(const Layout& layout, const Basis& basis, const RowData& data, const Family& family,
                  const Eigen::VectorXd& gamma, PassRequest request, const RawForm& form, double floor,
                  Eigen::VectorXd& products, const Work& work) {
  const std::size_t blocks = (data.rows + block_rows - 1) / block_rows;
  std::vector<Remainder> by_block(blocks);
  request.cross = request.fit = false;
  request.rewrite = [&](const BlockReader& block, const double*, double* score, double* information) {
    Remainder& own = by_block[block.start / block_rows];
    for (std::size_t r = 0; r < block.size; ++r) {
      if (!(information[r] > 0)) {
        score[r] = 0;
        continue;
      }
      const FormValue value = evaluate(layout, form, block.start + r);
      if (value.value != 0)
        own.worst = std::max(own.worst, std::fabs(value.value) / (value.magnitude + floor));
      own.square += information[r] * value.value * value.value;
      own.weight += information[r];
      score[r] = information[r] * value.value;
    }
  };
  products = assemble_score(layout, basis, run_pass(layout, basis, data, family, gamma, request, work));
  Remainder all;
  for (const Remainder& own : by_block) {
    all.worst = std::max(all.worst, own.worst);
    all.square += own.square;
    all.weight += own.weight;
  }
  return all;
}

double own_information(const Information& information, std::size_t coefficient) {
  for (std::size_t k = 0; k < information.rest.size(); ++k)
    if (information.rest[k] == coefficient) return information.full(k, k);
  for (std::size_t k = 0; k < information.absorbed.size(); ++k)
    if (information.absorbed[k] == coefficient) return information.diagonal[k];
  return 0;
}

/// Nested level columns, the commonest aliases, need no pass: with multiples rounded to whole numbers the
/// remainder is 0 at every code that has a row.
bool vanishes_by_code(const Layout& layout, const Sums& sums, Combination& remainder) {
  Combination whole;
  for (const auto& [k, multiple] : remainder) {
    const double rounded = std::round(multiple.value());
    if (std::fabs(rounded - multiple.value()) > 1e-6) return false;
    if (rounded != 0) whole.emplace_back(k, DoubleDouble(rounded));
  }
  const RawForm form = make_form(layout, whole);
  double constant = 0;
  for (const auto& [dense, multiple] : form.dense) {
    if (dense != 0) return false;
    constant = multiple.value();
  }
  if (form.tables.size() != 1 || form.tables[0].multiplier != 0) return false;
  const RawForm::Table& table = form.tables[0];
  const Group& group = layout.groups[table.group];
  const auto& information = sums.groups[table.group].table[group.slot(0)];
  for (std::size_t code = 0; code < group.size(); ++code)
    if (information[code * sums.stride] > 0 && table.value[code].value() + constant != 0) return false;
  remainder = std::move(whole);
  return true;
}

/// Multiples too small to matter in any row are rounding left by the steps towards the combination.
void drop_rounding(const Layout& layout, const Basis& basis, Combination& combination) {
  const double own =
      std::fabs(combination[0].second.value()) * column_size(layout, basis, combination[0].first);
  std::erase_if(combination, [&](const auto& part) {
    return std::fabs(part.second.value()) * column_size(layout, basis, part.first) < 1e-11 * own;
  });
}

}  // namespace

bool wild(const Sums& sums, const PassRequest& request) {
  // The constant's score is the counts' sum less the means'.
  return request.aim == Aim::step && !(sums.gradient[0] > -4 * request.events);
}

namespace {

/// A doubtful column with what the others explain taken away.
struct Examined {
  std::size_t coefficient = 0;
  Combination remainder;  ///< in raw columns, the coefficient's own first
  Eigen::VectorXd taken;  ///< of the working columns
  double before = 0;      ///< weighted sum of squares of the column itself
  Remainder size;
  bool vanishes = false;
};

Examined examine(const Layout& layout, const Basis& basis, const RowData& data, const Family& family,
                 const Eigen::VectorXd& gamma, const PassRequest& request, const Settled& now, std::size_t j,
                 const Work& work) {
  Examined one{j,
               working_column(layout, basis, j),
               Eigen::VectorXd::Zero(gamma.size()),
               own_information(now.information, j),
               {},
               false};
  if (one.before == 0) {
    one.vanishes = true;
    return one;
  }
  const auto take_away = [&](const Eigen::VectorXd& share) {
    one.taken += share;
    for (std::size_t k = 0; k < layout.coefficients; ++k)
      if (share[k] != 0) add_to(one.remainder, working_column(layout, basis, k), -share[k]);
  };
  take_away(regress(now.factor, now.information, j));
  one.vanishes = vanishes_by_code(layout, now.sums, one.remainder);
  // Where the column itself is 0, what is left of other rows' rounding counts against its usual size.
  const double floor = std::fabs(one.remainder.front().second.value()) * column_size(layout, basis, j);
  // Two corrections bring the remainder from the factor's digits to those of double-double.
  Eigen::VectorXd products;
  for (int round = 0; round < 3 && !one.vanishes; ++round) {
    one.size = measure(layout, basis, data, family, gamma, request, make_form(layout, one.remainder), floor,
                       products, work);
    if (round < 2) take_away(solve(now.factor, products));
  }
  one.vanishes = one.vanishes || one.size.worst <= rounding_share || one.size.square == 0;
  return one;
}

void leave_out(const Layout& layout, Basis& basis, Combination remainder, std::size_t j,
               std::vector<LeftOut>& left_out) {
  drop_rounding(layout, basis, remainder);
  const double own = remainder.front().second.value();
  for (auto& [k, multiple] : remainder) multiple = DoubleDouble(multiple.value() / own);
  basis.active[j] = 0;
  Combination onto;
  for (std::size_t i = 1; i < remainder.size(); ++i)
    onto.emplace_back(remainder[i].first, -remainder[i].second);
  basis.aliases.emplace_back(j, std::move(onto));
  left_out.push_back({j, std::move(remainder)});
}

void straighten(const Layout& layout, Basis& basis, const Examined& one) {
  const std::size_t j = one.coefficient;
  const double spread = std::sqrt(one.size.square / one.size.weight);
  Combined column{j, one.remainder, make_form(layout, one.remainder), std::ldexp(1.0, -std::ilogb(spread))};
  if (basis.combined_of[j] >= 0) {
    basis.combined[basis.combined_of[j]] = std::move(column);
  } else {
    basis.combined_of[j] = static_cast<std::ptrdiff_t>(basis.combined.size());
    basis.combined.push_back(std::move(column));
  }
}

}  // namespace

Settled settle(const Layout& layout, Basis& basis, const RowData& data, const Family& family,
               Eigen::VectorXd& gamma, const PassRequest& request, const Work& work) {
  Settled settled;
  for (;;) {
    settled.sums = run_pass(layout, basis, data, family, gamma, request, work);
    settled.information = assemble(layout, basis, settled.sums);
    if (!settled.information.full.allFinite() || !settled.information.diagonal.allFinite()) return settled;
    settled.factor = factorise(settled.information, layout.coefficients, doubtful_share);
    std::vector<std::size_t> doubtful = settled.factor.dependent;
    settled.condition = std::max(settled.condition, 1 / std::sqrt(settled.factor.least_pivot));
    if (doubtful.empty() || wild(settled.sums, request)) return settled;
    std::sort(doubtful.begin(), doubtful.end());
    // All are examined in the basis as it is, and only then is it changed.
    std::vector<Examined> examined;
    for (const std::size_t j : doubtful)
      examined.push_back(examine(layout, basis, data, family, gamma, request, settled, j, work));
    for (Examined& one : examined) {
      const std::size_t j = one.coefficient;
      // The predictors stay what they were: what the column held goes to those it is made of.
      gamma += gamma[j] * one.taken;
      if (one.vanishes) {
        gamma[j] = 0;
        leave_out(layout, basis, std::move(one.remainder), j, settled.left_out);
        continue;
      }
      settled.condition = std::max(settled.condition, std::sqrt(one.before / one.size.square));
      straighten(layout, basis, one);
      gamma[j] /= basis.combined[basis.combined_of[j]].scale;
    }
  }
}

}  // namespace countsel
