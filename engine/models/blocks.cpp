// engine/models/blocks.cpp -- reads a block: sources to rows of working columns, and the linear predictor.
#include "engine/models/blocks.hpp"

#include <algorithm>

namespace countsel {

BlockReader::BlockReader(const Layout& layout_, const Basis& basis_, const RowData& data_)
    : layout(layout_), basis(basis_), data(data_), loops(kernel()), stride(basis_.stride()) {
  z.assign(block_rows * stride, 0.0);
  eta.assign(block_rows, 0.0);
  padding.assign((stride + 4) * block_rows, 0.0);
  ones.assign(block_rows, 1.0);
  sources.assign(stride, padding.data());
  centre.assign(stride, 0.0);
  scale.assign(stride, 1.0);
  for (std::size_t d = 0; d < layout.dense.size(); ++d) {
    centre[d] = basis.centre[d];
    scale[d] = basis.scale[d];
  }
  for (std::size_t c = 0; c < basis.combined.size(); ++c)
    scale[layout.dense.size() + c] = basis.combined[c].scale;
  set(Eigen::VectorXd::Zero(static_cast<Eigen::Index>(layout.coefficients)));
}

void BlockReader::set(const Eigen::VectorXd& gamma) {
  gamma_dense.assign(stride, 0.0);
  gamma_level.assign(layout.groups.size(), {});
  for (std::size_t g = 0; g < layout.groups.size(); ++g)
    gamma_level[g].assign(layout.groups[g].multipliers.size(),
                          std::vector<double>(layout.groups[g].size(), 0.0));
  for (std::size_t k = 0; k < layout.coefficients; ++k)
    if (const auto d = dense_place(layout, basis, k); d && basis.active[k]) gamma_dense[*d] = gamma[k];
  for (const Block& block : layout.blocks) {
    auto& table = gamma_level[block.group][layout.groups[block.group].slot(block.multiplier)];
    for (std::size_t code = 0; code < table.size(); ++code) {
      if (block.level_of[code] < 0) continue;
      const std::size_t k = block.coefficients[block.level_of[code]];
      if (basis.active[k] && basis.combined_of[k] < 0) table[code] += gamma[k];
    }
  }
}

const double* BlockReader::whole_or_padded(const double* from, double pad, std::size_t slot) {
  if (size == block_rows) return from + start;
  double* copy = padding.data() + slot * block_rows;
  std::copy(from + start, from + start + size, copy);
  std::fill(copy + size, copy + block_rows, pad);
  return copy;
}

const double* BlockReader::times(std::size_t multiplier, const double* values, double* scratch) const {
  if (multiplier == 0) return values;
  for (std::size_t r = 0; r < padded; ++r) scratch[r] = values[r] * z[r * stride + multiplier];
  return scratch;
}

void BlockReader::read(std::size_t index) {
  start = index * block_rows;
  size = std::min(block_rows, data.rows - start);
  padded = (size + 3) / 4 * 4;
  count = whole_or_padded(data.count, 0.0, stride);
  exposure = data.exposure ? whole_or_padded(data.exposure, 1.0, stride + 1) : ones.data();
  weight = data.weight ? whole_or_padded(data.weight, 0.0, stride + 2) : nullptr;
  if (data.log_exposure) {
    const double* log_exposure = whole_or_padded(data.log_exposure, 0.0, stride + 3);
    std::copy(log_exposure, log_exposure + padded, eta.begin());
  } else {
    std::fill(eta.begin(), eta.end(), 0.0);
  }

  const std::span<const SourceColumn> columns = layout.design->columns;
  sources[0] = ones.data();
  for (std::size_t d = 1; d < layout.dense.size(); ++d) {
    const Product& product = layout.dense[d].product;
    if (product.size() == 1 && product[0].kind == Feature::Kind::identity) {
      sources[d] = whole_or_padded(columns[product[0].column].numbers.data(), centre[d], d);
      continue;
    }
    double* computed = padding.data() + d * block_rows;
    std::fill(computed, computed + block_rows, size == block_rows ? 1.0 : centre[d]);
    std::fill(computed, computed + size, 1.0);
    for (const Feature& feature : product) {
      const double* x = columns[feature.column].numbers.data() + start;
      for (std::size_t r = 0; r < size; ++r) computed[r] *= feature.at(x[r]);
    }
    sources[d] = computed;
  }
  for (std::size_t c = 0; c < basis.combined.size(); ++c) {
    const std::size_t d = layout.dense.size() + c;
    double* computed = padding.data() + d * block_rows;
    for (std::size_t r = 0; r < size; ++r)
      computed[r] = evaluate(layout, basis.combined[c].form, start + r).value;
    std::fill(computed + size, computed + block_rows, 0.0);
    sources[d] = computed;
  }
  loops.fill(padded, stride, sources.data(), centre.data(), scale.data(), gamma_dense.data(), z.data(),
             eta.data());
  for (std::size_t g = 0; g < layout.groups.size(); ++g) {
    const std::int32_t* code = layout.groups[g].codes.data() + start;
    for (std::size_t m = 0; m < layout.groups[g].multipliers.size(); ++m) {
      const double* table = gamma_level[g][m].data();
      const std::size_t multiplier = layout.groups[g].multipliers[m];
      if (multiplier == 0)
        for (std::size_t r = 0; r < size; ++r) eta[r] += table[code[r]];
      else
        for (std::size_t r = 0; r < size; ++r) eta[r] += table[code[r]] * z[r * stride + multiplier];
    }
  }
}

}  // namespace countsel
