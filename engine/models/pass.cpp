// engine/models/pass.cpp -- sums by piece, added in order.
#include "engine/models/pass.hpp"

#include <algorithm>
#include <cmath>

namespace countsel {
namespace {

Sums empty_sums(const Layout& layout, const Basis& basis, bool cross) {
  Sums sums;
  sums.stride = basis.stride();
  sums.gradient.assign(sums.stride, 0.0);
  if (cross) sums.cross.assign(sums.stride * sums.stride, 0.0);
  for (const Group& group : layout.groups) {
    const std::size_t multipliers = group.multipliers.size();
    Sums::ByGroup by;
    by.score.assign(multipliers, std::vector<double>(group.size(), 0.0));
    if (cross) by.table.assign(multipliers, std::vector<double>(group.size() * sums.stride, 0.0));
    sums.groups.push_back(std::move(by));
  }
  for (const GroupPair& pair : layout.pairs)
    sums.pairs.emplace_back(cross ? layout.groups[pair.first].multipliers.size() *
                                        layout.groups[pair.second].multipliers.size() * pair.size
                                  : 0,
                            0.0);
  return sums;
}

std::size_t weight_of(const Sums& sums) {
  std::size_t weight = sums.cross.size();
  for (const Sums::ByGroup& by : sums.groups) {
    for (const auto& table : by.table) weight += table.size();
    for (const auto& score : by.score) weight += score.size();
  }
  for (const auto& pair : sums.pairs) weight += pair.size();
  return weight;
}

void add(std::vector<double>& to, const std::vector<double>& from) {
  for (std::size_t i = 0; i < to.size(); ++i) to[i] += from[i];
}

void add(Sums& to, const Sums& from) {
  add(to.cross, from.cross);
  add(to.gradient, from.gradient);
  for (std::size_t g = 0; g < to.groups.size(); ++g)
    for (std::size_t m = 0; m < to.groups[g].score.size(); ++m) {
      add(to.groups[g].score[m], from.groups[g].score[m]);
      if (!to.groups[g].table.empty()) add(to.groups[g].table[m], from.groups[g].table[m]);
    }
  for (std::size_t p = 0; p < to.pairs.size(); ++p) add(to.pairs[p], from.pairs[p]);
  to.deviance += from.deviance;
  to.pearson += from.pearson;
  to.null_deviance += from.null_deviance;
  to.null_pearson += from.null_pearson;
}

struct Scratch {
  std::vector<double> mean, score, information, product, both;
  Scratch()
      : mean(block_rows), score(block_rows), information(block_rows), product(block_rows), both(block_rows) {}
};

/// Score and information of the block's rows, as the request wants them.
void weigh(const BlockReader& block, const Family& family, const PassRequest& request, Scratch& s) {
  switch (request.aim) {
    case Aim::step:
      family.step(block.padded, block.eta.data(), block.count, block.exposure, block.weight, s.mean.data(),
                  s.score.data(), s.information.data());
      break;
    case Aim::start:
      // Halfway between each count and the overall rate: above 0 and near every count, so that one weighted
      // least-squares step lands close however far the counts range.
      for (std::size_t r = 0; r < block.padded; ++r) {
        const double plain = block.exposure[r] * std::exp(block.eta[r] + request.null_log_rate);
        const double mean = (block.count[r] + plain) / 2;
        const double target = std::log(mean / plain) + request.null_log_rate + (block.count[r] - mean) / mean;
        const double w = block.weight ? block.weight[r] : 1.0;
        s.mean[r] = mean;
        s.information[r] = w * mean;
        s.score[r] = w * mean * target;
      }
      break;
    case Aim::all_rows:
    case Aim::event_rows:
      for (std::size_t r = 0; r < block.padded; ++r) {
        const bool in =
            (!block.weight || block.weight[r] > 0) && (request.aim == Aim::all_rows || block.count[r] > 0);
        s.information[r] = in ? 1.0 : 0.0;
        s.score[r] = 0;
      }
      break;
  }
  if (request.rewrite) request.rewrite(block, s.mean.data(), s.score.data(), s.information.data());
  for (std::size_t r = block.size; r < block.padded; ++r) s.score[r] = s.information[r] = 0;
}

void measure_fit(const BlockReader& block, const Family& family, const PassRequest& request, Scratch& s,
                 Sums& sums) {
  double fit[2] = {0, 0}, null[2] = {0, 0};
  // Padding rows carry weight only where there is a weight column: give them a perfect fit instead.
  std::copy(block.count, block.count + block.padded, s.product.begin());
  for (std::size_t r = block.size; r < block.padded; ++r) s.product[r] = s.mean[r] = 1;
  family.fit(block.padded, s.product.data(), s.mean.data(), block.weight, fit);
  for (std::size_t r = 0; r < block.size; ++r) {
    const double log_exposure = block.data.log_exposure ? block.data.log_exposure[block.start + r] : 0.0;
    s.both[r] = request.null_log_rate + log_exposure;
  }
  for (std::size_t r = block.size; r < block.padded; ++r) s.both[r] = 0;
  block.loops.exponential(block.padded, s.both.data(), s.mean.data());
  for (std::size_t r = 0; r < block.size; ++r) s.mean[r] *= block.exposure[r];
  family.fit(block.padded, s.product.data(), s.mean.data(), block.weight, null);
  sums.deviance += fit[0];
  sums.pearson += fit[1];
  sums.null_deviance += null[0];
  sums.null_pearson += null[1];
}

void add_block(const BlockReader& block, const PassRequest& request, Scratch& s, Sums& sums) {
  const Layout& layout = block.layout;
  const double *z = block.z.data(), *information = s.information.data();
  block.loops.gradient(block.padded, block.stride, z, s.score.data(), sums.gradient.data());
  if (request.cross) block.loops.cross(block.padded, block.stride, z, information, sums.cross.data());
  for (std::size_t g = 0; g < layout.groups.size(); ++g) {
    const std::int32_t* code = layout.groups[g].codes.data() + block.start;
    for (std::size_t m = 0; m < layout.groups[g].multipliers.size(); ++m) {
      const std::size_t multiplier = layout.groups[g].multipliers[m];
      const double* scores = block.times(multiplier, s.score.data(), s.product.data());
      double* by_code = sums.groups[g].score[m].data();
      for (std::size_t r = 0; r < block.size; ++r) by_code[code[r]] += scores[r];
      if (!request.cross) continue;
      const double* weights = block.times(multiplier, information, s.product.data());
      block.loops.scatter(block.size, block.stride, code, z, weights, sums.groups[g].table[m].data());
    }
  }
  if (!request.cross) return;
  for (std::size_t p = 0; p < layout.pairs.size(); ++p) {
    const GroupPair& pair = layout.pairs[p];
    const Group &a = layout.groups[pair.first], &b = layout.groups[pair.second];
    const std::int32_t *code_a = a.codes.data() + block.start, *code_b = b.codes.data() + block.start;
    const auto code = [&](std::size_t r) -> std::size_t {
      if (!pair.codes.empty()) return static_cast<std::size_t>(pair.codes[block.start + r]);
      return static_cast<std::size_t>(code_a[r]) * b.size() + static_cast<std::size_t>(code_b[r]);
    };
    double* table = sums.pairs[p].data();
    for (const std::size_t multiplier_a : a.multipliers)
      for (const std::size_t multiplier_b : b.multipliers) {
        const double* first = block.times(multiplier_a, information, s.product.data());
        const double* weights = block.times(multiplier_b, first, s.both.data());
        for (std::size_t r = 0; r < block.size; ++r) table[code(r)] += weights[r];
        table += pair.size;
      }
  }
}

}  // namespace

std::size_t piece_count(std::size_t blocks, std::size_t weight) {
  constexpr std::size_t most_doubles = 1u << 20;  // all pieces' sums together: 8 MB
  const std::size_t by_rows = std::clamp<std::size_t>(blocks / 32, 1, 32);
  return std::min(by_rows, std::max<std::size_t>(2, most_doubles / std::max<std::size_t>(1, weight)));
}

Sums run_pass(const Layout& layout, const Basis& basis, const RowData& data, const Family& family,
              const Eigen::VectorXd& gamma, const PassRequest& request, const Work& work) {
  Sums total = empty_sums(layout, basis, request.cross);
  const std::size_t all = (data.rows + block_rows - 1) / block_rows;
  const std::size_t read = (all + request.every - 1) / request.every;
  const std::size_t pieces = piece_count(read, weight_of(total));
  std::vector<Sums> parts(pieces);
  work.workers.run(pieces, [&](std::size_t piece) {
    Sums sums = empty_sums(layout, basis, request.cross);
    BlockReader block(layout, basis, data);
    block.set(gamma);
    Scratch scratch;
    const std::size_t first = piece * read / pieces, last = (piece + 1) * read / pieces;
    for (std::size_t b = first; b < last; ++b) {
      if ((b - first) % 16 == 0) work.progress.check();
      block.read(b * request.every);
      weigh(block, family, request, scratch);
      add_block(block, request, scratch, sums);
      if (request.fit) measure_fit(block, family, request, scratch, sums);
    }
    parts[piece] = std::move(sums);
  });
  for (const Sums& part : parts) add(total, part);
  return total;
}

}  // namespace countsel
