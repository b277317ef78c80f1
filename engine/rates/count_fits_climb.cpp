// engine/rates/count_fits_climb.cpp -- uphill in a few unknowns.
#include <Eigen/Dense>
#include <cmath>

#include "engine/rates/count_fits_parts.hpp"

namespace countsel {
namespace {

Eigen::VectorXd vector(const std::vector<double>& values) {
  return Eigen::Map<const Eigen::VectorXd>(values.data(), static_cast<Eigen::Index>(values.size()));
}
std::vector<double> plain(const Eigen::VectorXd& values) {
  return {values.data(), values.data() + values.size()};
}

}  // namespace

Maximum climb(const std::function<ValueGradient(const std::vector<double>&)>& f, std::vector<double> start,
              double slope_tolerance, double edge) {
  constexpr double longest_step = 2;  // unknowns are logarithms: a factor of seven at once is plenty
  Eigen::VectorXd at = vector(start);
  ValueGradient here = f(start);
  Eigen::VectorXd slope = vector(here.gradient);
  Eigen::MatrixXd inverse = Eigen::MatrixXd::Identity(at.size(), at.size()) / std::max(1.0, slope.norm());
  const auto flat = [&] { return slope.lpNorm<Eigen::Infinity>() < slope_tolerance; };
  for (int round = 0; round < 300 && !flat(); ++round) {
    if (at.tail(at.size() - 1).minCoeff() < edge) return {plain(at), here.value, false};
    Eigen::VectorXd step = inverse * slope;
    if (!(step.dot(slope) > 0)) {  // the curvature has gone wrong: start over along the slope
      inverse = Eigen::MatrixXd::Identity(at.size(), at.size()) / std::max(1.0, slope.norm());
      step = inverse * slope;
    }
    const double length = step.lpNorm<Eigen::Infinity>();
    if (length > longest_step) step *= longest_step / length;
    const double promised = step.dot(slope);
    bool gained = false;
    for (int halving = 0; halving < 40; ++halving, step /= 2) {
      const Eigen::VectorXd next = at + step;
      const ValueGradient there = f(plain(next));
      // Near the top the value no longer tells steps apart; there a smaller slope decides.
      const bool better = there.value >= here.value + 1e-4 * promised * std::ldexp(1.0, -halving) ||
                          (there.value > here.value - 1e-13 * std::abs(here.value) &&
                           vector(there.gradient).norm() < slope.norm() / 2);
      if (!better) continue;
      const Eigen::VectorXd turned = slope - vector(there.gradient);
      const double bend = turned.dot(step);
      if (bend > 0) {
        if (round == 0)
          inverse = Eigen::MatrixXd::Identity(at.size(), at.size()) * (bend / turned.squaredNorm());
        const Eigen::VectorXd pulled = inverse * turned;
        inverse += step * step.transpose() * ((bend + turned.dot(pulled)) / (bend * bend)) -
                   (pulled * step.transpose() + step * pulled.transpose()) / bend;
      }
      at = next;
      here = there;
      slope = vector(here.gradient);
      gained = true;
      break;
    }
    if (!gained) break;
  }
  // A step too small to gain, with slopes that are rounding, is a top all the same.
  return {plain(at), here.value, slope.lpNorm<Eigen::Infinity>() < 1e4 * slope_tolerance};
}

}  // namespace countsel
