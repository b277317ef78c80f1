// engine/models/reduced.cpp -- shared passes, one quasi-Newton iteration a pass for every model still moving.
#include "engine/models/reduced.hpp"

#include <cmath>

namespace countsel {
namespace {

using Eigen::Index;
using Eigen::VectorXd;

constexpr int most_passes = 12;

struct Smaller {
  Factor factor;
  VectorXd change;      ///< working coefficients less the full model's
  VectorXd from, step;  ///< the change before the last step, and that step
  double share = 1;
  double loss = 0, loss_before = 0;
  VectorXd gradient, gradient_before;
  std::vector<std::pair<VectorXd, VectorXd>> history;  ///< steps and falls of the gradient
  std::optional<double> answer;
  bool moving = true;
};

/// Sums of a shared pass: of each model in turn.
struct SharedSums {
  std::vector<double> loss;                              ///< width
  std::vector<double> gradient;                          ///< stride x width
  std::vector<std::vector<std::vector<double>>> levels;  ///< group, multiplier: code x width
};

SharedSums empty_sums(const FittedModel& model, std::size_t width) {
  SharedSums sums;
  sums.loss.assign(width, 0.0);
  sums.gradient.assign(model.basis.stride() * width, 0.0);
  for (const Group& group : model.layout.groups)
    sums.levels.emplace_back(group.multipliers.size(), std::vector<double>(group.size() * width, 0.0));
  return sums;
}

/// The changes of several models laid out for a block: dense stride x width, levels code x width.
SharedSums spread(const FittedModel& model, const std::vector<Smaller*>& moving, std::size_t width) {
  SharedSums table = empty_sums(model, width);
  for (std::size_t m = 0; m < moving.size(); ++m) {
    const VectorXd& change = moving[m]->change;
    for (std::size_t k = 0; k < model.layout.coefficients; ++k)
      if (const auto d = dense_place(model.layout, model.basis, k); d && model.basis.active[k])
        table.gradient[*d * width + m] = change[k];
    for (const Block& block : model.layout.blocks) {
      auto& levels = table.levels[block.group][model.layout.groups[block.group].slot(block.multiplier)];
      for (std::size_t code = 0; code < block.level_of.size(); ++code) {
        if (block.level_of[code] < 0) continue;
        const std::size_t k = block.coefficients[block.level_of[code]];
        if (model.basis.active[k] && model.basis.combined_of[k] < 0) levels[code * width + m] += change[k];
      }
    }
  }
  return table;
}

void add(std::vector<double>& to, const std::vector<double>& from) {
  for (std::size_t i = 0; i < to.size(); ++i) to[i] += from[i];
}

void shared_pass(const FittedModel& model, std::vector<Smaller*>& moving, std::size_t every,
                 const Work& work) {
  const std::size_t width = (moving.size() + 3) / 4 * 4;
  const SharedSums change = spread(model, moving, width);
  const std::size_t all_blocks = (model.data.rows + block_rows - 1) / block_rows;
  const std::size_t blocks = (all_blocks + every - 1) / every;
  const std::size_t pieces = piece_count(blocks, change.gradient.size() * 4);
  std::vector<SharedSums> parts(pieces);
  work.workers.run(pieces, [&](std::size_t piece) {
    SharedSums sums = empty_sums(model, width);
    BlockReader block(model.layout, model.basis, model.data);
    block.set(model.gamma);
    std::vector<double> mean(block_rows), score(block_rows), information(block_rows), e(block_rows * width);
    std::vector<double> multiplier(block_rows);
    const std::size_t first = piece * blocks / pieces, last = (piece + 1) * blocks / pieces;
    for (std::size_t b = first; b < last; ++b) {
      if ((b - first) % 8 == 0) work.progress.check();
      block.read(b * every);
      model.family->step(block.padded, block.eta.data(), block.count, block.exposure, block.weight,
                         mean.data(), score.data(), information.data());
      for (std::size_t r = block.size; r < block.padded; ++r) information[r] = 0;
      std::fill(e.begin(), e.end(), 0.0);
      block.loops.multiply(block.padded, block.stride, block.z.data(), width, change.gradient.data(),
                           e.data());
      const auto each_level = [&](auto&& use) {
        for (std::size_t g = 0; g < model.layout.groups.size(); ++g) {
          const Group& group = model.layout.groups[g];
          for (std::size_t m = 0; m < group.multipliers.size(); ++m) {
            const std::size_t column = group.multipliers[m];
            for (std::size_t r = 0; column != 0 && r < block.size; ++r)
              multiplier[r] = block.z[r * block.stride + column];
            use(group.codes.data() + block.start, column == 0 ? nullptr : multiplier.data(),
                change.levels[g][m].data(), sums.levels[g][m].data());
          }
        }
      };
      each_level([&](const std::int32_t* code, const double* by, const double* from, double*) {
        block.loops.add_levels(block.size, width, code, by, from, e.data());
      });
      block.loops.excess(block.padded, width, information.data(), e.data(), sums.loss.data());
      block.loops.multiply_back(block.padded, block.stride, block.z.data(), width, e.data(),
                                sums.gradient.data());
      each_level([&](const std::int32_t* code, const double* by, const double*, double* to) {
        block.loops.scatter_levels(block.size, width, code, by, e.data(), to);
      });
    }
    parts[piece] = std::move(sums);
  });
  SharedSums total = empty_sums(model, width);
  for (const SharedSums& part : parts) {
    add(total.loss, part.loss);
    add(total.gradient, part.gradient);
    for (std::size_t g = 0; g < total.levels.size(); ++g)
      for (std::size_t s = 0; s < total.levels[g].size(); ++s) add(total.levels[g][s], part.levels[g][s]);
  }
  for (std::size_t m = 0; m < moving.size(); ++m) {
    Sums own;
    own.stride = model.basis.stride();
    for (std::size_t d = 0; d < own.stride; ++d) own.gradient.push_back(-total.gradient[d * width + m]);
    for (std::size_t g = 0; g < total.levels.size(); ++g) {
      own.groups.emplace_back();
      for (const auto& levels : total.levels[g]) {
        own.groups[g].score.emplace_back();
        for (std::size_t at = m; at < levels.size(); at += width)
          own.groups[g].score.back().push_back(-levels[at]);
      }
    }
    moving[m]->loss = 2 * total.loss[m];
    moving[m]->gradient = assemble_score(model.layout, model.basis, own);
  }
}

/// The step uphill from the gradient: limited-memory quasi-Newton around the full model's information.
VectorXd direction(const Smaller& model) {
  VectorXd q = model.gradient;
  std::vector<double> along(model.history.size());
  for (std::size_t i = model.history.size(); i-- > 0;) {
    const auto& [step, fall] = model.history[i];
    along[i] = step.dot(q) / step.dot(fall);
    q -= along[i] * fall;
  }
  VectorXd x = solve(model.factor, q);
  for (std::size_t i = 0; i < model.history.size(); ++i) {
    const auto& [step, fall] = model.history[i];
    x += (along[i] - fall.dot(x) / step.dot(fall)) * step;
  }
  return x;
}

void advance(Smaller& model, double accuracy, bool first) {
  if (!std::isfinite(model.loss) || !model.gradient.allFinite() ||
      (!first && model.loss > model.loss_before * (1 + 1e-12))) {
    model.share /= 4;
    if (model.share < 1e-4 || first) {
      model.moving = false;
      return;
    }
    model.change = model.from + model.share * model.step;
    return;
  }
  if (!first) {
    const VectorXd step = model.share * model.step, fall = model.gradient_before - model.gradient;
    if (step.dot(fall) > 1e-14 * step.norm() * fall.norm()) model.history.emplace_back(step, fall);
  }
  model.from = model.change;
  model.gradient_before = model.gradient;
  model.loss_before = model.loss;
  model.share = 1;
  model.step = direction(model);
  const double rest = model.gradient.dot(model.step);
  model.change += model.step;
  if (rest > accuracy * model.loss + 1e-13) return;
  // What the last step gains is known to within the information's own error, a tenth of it or so.
  model.answer = std::max(0.0, model.loss - rest);
  model.moving = false;
}

/// Where the quadratic at the full fit has its maximum without the dropped coefficients.
void start(const FittedModel& model, const Information& information, const std::vector<char>& dropped,
           Smaller& smaller) {
  smaller.factor = factorise(without(information, dropped), model.layout.coefficients, doubtful_share);
  VectorXd gone = VectorXd::Zero(model.gamma.size());
  for (Index k = 0; k < gone.size(); ++k)
    if (dropped[k] && model.basis.active[k]) gone[k] = model.gamma[k];
  smaller.change = solve(smaller.factor, times(information, gone)) - gone;
}

/// Passes over each `every`-th block until all models are settled or left moving.
void maximise(const FittedModel& model, const std::vector<std::vector<char>>& dropped,
              std::vector<Smaller>& all, std::size_t every, double accuracy, const Work& work) {
  for (int pass = 0; pass < most_passes; ++pass) {
    std::vector<Smaller*> moving;
    for (Smaller& one : all)
      if (one.moving) moving.push_back(&one);
    if (moving.empty()) break;
    work.progress.tell(0.95 + 0.05 * pass / most_passes, "weighing the terms");
    shared_pass(model, moving, every, work);

    for (std::size_t m = 0; m < all.size(); ++m) {
      if (!all[m].moving) continue;
      // The gradient by a dropped coefficient means nothing.
      for (Index k = 0; k < all[m].gradient.size(); ++k)
        if (dropped[m][k]) all[m].gradient[k] = 0;
      advance(all[m], accuracy, pass == 0);
    }
  }
}

}  // namespace

std::vector<std::optional<double>> deviance_lost(const FittedModel& model,
                                                 const std::vector<std::vector<char>>& dropped,
                                                 double accuracy, const Work& work) {
  std::vector<Smaller> all(dropped.size());
  for (std::size_t m = 0; m < dropped.size(); ++m) start(model, model.information, dropped[m], all[m]);

  // How far each maximum lies from the quadratic's is nearly the same in a sample of the rows, which is cheap
  // to maximise; with that correction one pass over all rows mostly settles every model.
  constexpr std::size_t sample_rows = 25000;
  if (const std::size_t every = model.data.rows / sample_rows; every >= 8 && !dropped.empty()) {
    PassRequest request;
    request.every = every;
    const Information information =
        assemble(model.layout, model.basis,
                 run_pass(model.layout, model.basis, model.data, *model.family, model.gamma, request, work));
    std::vector<Smaller> sampled(dropped.size());
    std::vector<VectorXd> quadratic;
    for (std::size_t m = 0; m < dropped.size(); ++m) {
      start(model, information, dropped[m], sampled[m]);
      quadratic.push_back(sampled[m].change);
    }
    maximise(model, dropped, sampled, every, 1e-5, work);
    for (std::size_t m = 0; m < dropped.size(); ++m) {
      if (!sampled[m].answer) continue;
      all[m].change += sampled[m].change - quadratic[m];
      all[m].history = std::move(sampled[m].history);
      for (auto& [step, fall] : all[m].history) fall *= static_cast<double>(every);
    }
  }
  maximise(model, dropped, all, 1, accuracy, work);
  std::vector<std::optional<double>> answers;
  for (const Smaller& one : all) answers.push_back(one.answer);
  return answers;
}

}  // namespace countsel
