// engine/models/glm.cpp -- the stages of a fit, and its figures.
//
// 1. What the columns can tell: aliased ones, and rows that are separated. Where the rows with events already
// give
//    every column its own direction, neither can be, and a sample of them shows it.
// 2. Newton's method on the rows that are left.
// 3. Back to the design's coefficients.
#include "engine/models/glm.hpp"

#include <algorithm>
#include <cmath>
#include <limits>

#include "engine/models/fitted.hpp"
#include "engine/models/newton.hpp"
#include "engine/models/separation.hpp"
#include "engine/models/totals.hpp"
#include "engine/refusal.hpp"

namespace countsel {
namespace {

using Eigen::Index;
using Eigen::MatrixXd;
using Eigen::VectorXd;

constexpr double nan = std::numeric_limits<double>::quiet_NaN();
constexpr double infinity = std::numeric_limits<double>::infinity();
constexpr std::size_t most_covariance = 2000;

/// True where rows with events, or a sample of them, determine every coefficient.
bool events_determine_all(const FittedModel& model, const Work& work) {
  PassRequest request;
  request.aim = Aim::event_rows;
  const VectorXd gamma = VectorXd::Zero(static_cast<Index>(model.layout.coefficients));
  for (const std::size_t every : {std::max<std::size_t>(1, model.data.rows / 32768), std::size_t{1}}) {
    request.every = every;
    const Sums sums = run_pass(model.layout, model.basis, model.data, *model.family, gamma, request, work);
    const Factor factor =
        factorise(assemble(model.layout, model.basis, sums), model.layout.coefficients, doubtful_share);
    if (factor.dependent.empty()) return true;
    if (every == 1) break;
  }
  return false;
}

void mark(FittedModel& model, const std::vector<LeftOut>& left_out) {
  for (const LeftOut& one : left_out)
    for (const auto& [k, multiple] : one.combination) model.entangled[k] = 1;
}

/// Finds aliased columns and separated rows; the basis keeps what can be estimated.
void look_at_columns(FittedModel& model, GlmFit& fit, double& condition, const Work& work) {
  if (events_determine_all(model, work)) return;
  VectorXd gamma = VectorXd::Zero(static_cast<Index>(model.layout.coefficients));
  PassRequest request;
  request.aim = Aim::all_rows;
  const Settled all = settle(model.layout, model.basis, model.data, *model.family, gamma, request, work);
  condition = std::max(condition, all.condition);
  mark(model, all.left_out);
  for (const LeftOut& one : all.left_out) {
    fit.status[one.coefficient] = CoefficientStatus::aliased;
    Alias alias{one.coefficient, {}};
    for (std::size_t i = 1; i < one.combination.size(); ++i)
      alias.combination.emplace_back(one.combination[i].first, -one.combination[i].second.value());
    fit.aliases.push_back(std::move(alias));
  }
  std::sort(fit.aliases.begin(), fit.aliases.end(),
            [](const Alias& a, const Alias& b) { return a.coefficient < b.coefficient; });

  Basis events = model.basis;
  request.aim = Aim::event_rows;
  const Settled seen = settle(model.layout, events, model.data, *model.family, gamma, request, work);
  if (seen.left_out.empty()) return;
  fit.separated_rows = separated_rows(model.layout, model.basis, model.data, seen.left_out, work);
  if (fit.separated_rows.empty()) return;

  const GlmData& source = model.source;
  model.owned_weight.assign(model.data.rows, 1.0);
  if (!source.weight.empty())
    std::copy(source.weight.begin(), source.weight.end(), model.owned_weight.begin());
  for (const std::size_t row : fit.separated_rows) model.owned_weight[row] = 0;
  model.data.weight = model.owned_weight.data();
  request.aim = Aim::all_rows;
  const Settled rest = settle(model.layout, model.basis, model.data, *model.family, gamma, request, work);
  mark(model, rest.left_out);
  const auto status =
      infinite_coefficients(model.layout, model.basis, fit.separated_rows, rest.left_out, work);
  for (std::size_t k = 0; k < status.size(); ++k)
    if (status[k] != CoefficientStatus::finite) fit.status[k] = status[k];
}

/// Terms without which the working columns would be others.
void mark_shifts(FittedModel& model) {
  for (const Combined& combined : model.basis.combined)
    for (const auto& [k, multiple] : combined.combination) model.entangled[k] = 1;
  for (const Block& block : model.layout.blocks)
    if (block.base && model.basis.centre[block.multiplier] != 0)
      for (const std::size_t k : model.layout.blocks[*block.base].coefficients) model.entangled[k] = 1;
}

/// What the separated rows, at rate 0 in the model, add to the deviance of the baseline alone.
double null_deviance_apart(const FittedModel& model, const std::vector<std::size_t>& separated) {
  double deviance = 0;
  for (const std::size_t i : separated) {
    const double weight = model.source.weight.empty() ? 1 : model.source.weight[i];
    const double exposure = model.data.exposure ? model.data.exposure[i] : 1;
    const double log_exposure = model.data.log_exposure ? model.data.log_exposure[i] : 0;
    deviance += 2 * weight * exposure * std::exp(log_exposure + model.null_log_rate);
  }
  return deviance;
}

void set_no_events(FittedModel& model, GlmFit& fit, const Totals& totals) {
  fit.separated_rows.clear();
  for (std::size_t i = 0; i < model.data.rows; ++i)
    if (!model.data.weight || model.data.weight[i] > 0) fit.separated_rows.push_back(i);
  fit.coefficients.setConstant(nan);
  fit.errors.setConstant(nan);
  fit.covariance.setConstant(nan);
  for (auto& status : fit.status)
    if (status == CoefficientStatus::finite) status = CoefficientStatus::undetermined;
  fit.status[0] = CoefficientStatus::minus_infinity;
  fit.coefficients[0] = -infinity;
  fit.loglik = fit.null_loglik = totals.saturated;
  fit.converged = true;
  std::fill(model.entangled.begin(), model.entangled.end(), 1);
}

void set_coefficients(const FittedModel& model, GlmFit& fit) {
  const std::size_t p = model.layout.coefficients;
  fit.coefficients = to_design(model.layout, model.basis, model.gamma);
  if (p <= most_covariance) {
    const MatrixXd map = design_map(model.layout, model.basis);
    fit.covariance = map * inverse(model.factor) * map.transpose();
    fit.errors = fit.covariance.diagonal().cwiseSqrt();
  } else {
    fit.errors = design_errors(model.layout, model.basis, model.factor);
  }
  for (std::size_t k = 0; k < p; ++k) {
    if (fit.status[k] == CoefficientStatus::finite) continue;
    fit.errors[k] = nan;
    if (fit.covariance.size() > 0) {
      fit.covariance.row(k).setConstant(nan);
      fit.covariance.col(k).setConstant(nan);
    }
    fit.coefficients[k] = fit.status[k] == CoefficientStatus::minus_infinity  ? -infinity
                          : fit.status[k] == CoefficientStatus::plus_infinity ? infinity
                                                                              : nan;
  }
}

}  // namespace

double GlmFit::bic() const { return static_cast<double>(rank) * std::log(rows) - 2 * loglik; }

GlmFit fit_poisson(const Design& design, const GlmData& data, const Work& work) {
  const Family& family = poisson_log_family();
  if (design.rows != data.count.size())
    throw Refusal(Code::length_mismatch, "count has " + std::to_string(data.count.size()) +
                                             " rows, the terms have " + std::to_string(design.rows) + ".");
  const Totals totals = add_up(data, family, work);
  auto model = std::make_shared<FittedModel>();
  model->design = design;
  model->layout = lay_out(model->design);
  model->source = data;
  model->family = &family;
  model->null_log_rate = totals.log_rate;
  const auto pointer = [](std::span<const double> s) { return s.empty() ? nullptr : s.data(); };
  model->data = {data.count.size(), data.count.data(), pointer(data.exposure), pointer(data.log_exposure),
                 pointer(data.weight)};
  model->basis = first_basis(model->layout, work);
  model->entangled.assign(design.coefficients, 0);

  GlmFit fit;
  const Index p = static_cast<Index>(design.coefficients);
  fit.status.assign(design.coefficients, CoefficientStatus::finite);
  fit.coefficients = fit.errors = VectorXd::Zero(p);
  if (design.coefficients <= most_covariance) fit.covariance = MatrixXd::Zero(p, p);
  fit.rows = totals.rows;
  fit.model = model;

  look_at_columns(*model, fit, fit.condition, work);
  const auto aliased = std::count(fit.status.begin(), fit.status.end(), CoefficientStatus::aliased);
  fit.rank = design.coefficients - static_cast<std::size_t>(aliased);
  fit.df = fit.rows - static_cast<double>(fit.rank);
  fit.dispersion = nan;
  if (totals.events == 0) {
    set_no_events(*model, fit, totals);
    return fit;
  }

  NewtonResult result = newton(model->layout, model->basis, model->data, family, totals, work);
  if (!result.gamma.allFinite()) refuse_not_finite(model->layout);
  model->gamma = std::move(result.gamma);
  model->information = std::move(result.last.information);
  model->factor = std::move(result.last.factor);
  if (model->factor.coefficients == 0) {
    fit.coefficients.setConstant(nan);
    fit.errors.setConstant(nan);
    fit.covariance.setConstant(nan);
    fit.loglik = fit.deviance = fit.pearson = fit.null_deviance = fit.null_loglik = nan;
    model->gamma.resize(0);
    return fit;
  }
  mark_shifts(*model);
  const Sums& sums = result.last.sums;
  fit.deviance = sums.deviance;
  fit.pearson = sums.pearson;
  fit.loglik = totals.saturated - fit.deviance / 2;
  fit.null_deviance = sums.null_deviance + null_deviance_apart(*model, fit.separated_rows);
  fit.null_loglik = totals.saturated - fit.null_deviance / 2;
  fit.iterations = result.passes;
  fit.converged = result.converged;
  fit.last_step = result.last_step;
  fit.worst = result.worst;
  fit.condition = std::max(fit.condition, result.last.condition);
  if (fit.df > 0) fit.dispersion = fit.pearson / fit.df;
  set_coefficients(*model, fit);
  return fit;
}

}  // namespace countsel
