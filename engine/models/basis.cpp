// engine/models/basis.cpp -- centring, scaling, combined columns, and the map back.
#include "engine/models/basis.hpp"

#include <cmath>

#include "engine/models/kernel.hpp"
#include "engine/refusal.hpp"

namespace countsel {

RawForm make_form(const Layout& layout, const Combination& combination) {
  RawForm form;
  for (const auto& [coefficient, multiple] : combination) {
    const Layout::Place& place = layout.places[coefficient];
    if (place.dense) {
      form.dense.emplace_back(*place.dense, multiple);
      continue;
    }
    const Block& block = layout.blocks[place.block];
    RawForm::Table* table = nullptr;
    for (RawForm::Table& t : form.tables)
      if (t.group == block.group && t.multiplier == block.multiplier) table = &t;
    if (!table) {
      form.tables.push_back({block.group, block.multiplier, {}});
      table = &form.tables.back();
      table->value.resize(layout.groups[block.group].size());
    }
    for (std::size_t code = 0; code < block.level_of.size(); ++code)
      if (block.level_of[code] == static_cast<std::int32_t>(place.level))
        table->value[code] = table->value[code] + multiple;
  }
  return form;
}

FormValue evaluate(const Layout& layout, const RawForm& form, std::size_t row) {
  DoubleDouble sum;
  FormValue result;
  const auto add = [&](std::size_t dense, const DoubleDouble& multiple) {
    const double raw = dense == 0 ? 1.0 : raw_value(*layout.design, layout.dense[dense].product, row);
    sum = sum + multiple * DoubleDouble(raw);
    result.magnitude += std::fabs(multiple.high * raw);
  };
  for (const auto& [dense, multiple] : form.dense) add(dense, multiple);
  for (const RawForm::Table& table : form.tables)
    add(table.multiplier, table.value[layout.groups[table.group].codes[row]]);
  result.value = sum.value();
  return result;
}

void refuse_not_finite(const Layout& layout) {
  for (const DenseColumn& dense : layout.dense)
    for (const Feature& feature : dense.product) {
      const SourceColumn& column = layout.design->columns[feature.column];
      for (std::size_t i = 0; i < column.numbers.size(); ++i)
        if (!std::isfinite(column.numbers[i]) || !std::isfinite(feature.at(column.numbers[i])))
          throw Refusal(Code::bad_value,
                        "Row " + std::to_string(i + 1) + " of " + column.name + " is not a finite number.",
                        {{column.name, static_cast<std::int64_t>(i + 1)}});
    }
}

Basis first_basis(const Layout& layout, const Work& work) {
  constexpr std::size_t sample_rows = 4096;
  Basis basis;
  basis.centre.assign(layout.dense.size(), 0.0);
  basis.scale.assign(layout.dense.size(), 1.0);
  basis.active.assign(layout.coefficients, 1);
  basis.combined_of.assign(layout.coefficients, -1);
  // Runs of neighbouring rows, spread over the table: cheap to read, and fair to a sorted one.
  constexpr std::size_t run = 64;
  const std::size_t step = std::max<std::size_t>(1, layout.rows / sample_rows) * run;
  for (std::size_t d = 1; d < layout.dense.size(); ++d) {
    work.progress.check();
    const DenseColumn& column = layout.dense[d];
    double mean = 0, square = 0;
    std::size_t count = 0;
    const auto each = [&](auto&& use) {
      for (std::size_t start = 0; start < layout.rows; start += step)
        for (std::size_t i = start; i < std::min(layout.rows, start + run); ++i)
          use(raw_value(*layout.design, column.product, i));
    };
    if (column.centred) each([&](double x) { mean += (x - mean) / static_cast<double>(++count); });
    count = 0;
    each([&](double x) { square += ((x - mean) * (x - mean) - square) / static_cast<double>(++count); });
    if (!std::isfinite(mean) || !std::isfinite(square)) {
      refuse_not_finite(layout);
      throw Refusal(Code::bad_value, "A column's numbers are too large to be squared.");
    }
    basis.centre[d] = mean;
    const double spread = square > 0 ? std::sqrt(square) : std::fabs(mean);
    // A power of 2 scales without rounding.
    if (spread > 0) basis.scale[d] = std::ldexp(1.0, -std::ilogb(spread));
    if (!std::isfinite(basis.scale[d])) basis.scale[d] = 1;
  }
  return basis;
}

std::optional<std::size_t> dense_place(const Layout& layout, const Basis& basis, std::size_t coefficient) {
  if (basis.combined_of[coefficient] >= 0)
    return layout.dense.size() + static_cast<std::size_t>(basis.combined_of[coefficient]);
  return layout.places[coefficient].dense;
}

double column_size(const Layout& layout, const Basis& basis, std::size_t coefficient) {
  const Layout::Place& place = layout.places[coefficient];
  const std::size_t dense = place.dense ? *place.dense : layout.blocks[place.block].multiplier;
  return dense == 0 ? 1 : std::fabs(basis.centre[dense]) + 1 / basis.scale[dense];
}

Combination working_column(const Layout& layout, const Basis& basis, std::size_t coefficient) {
  if (basis.combined_of[coefficient] >= 0) {
    const Combined& combined = basis.combined[static_cast<std::size_t>(basis.combined_of[coefficient])];
    Combination scaled = combined.combination;
    for (auto& [k, multiple] : scaled) multiple = multiple * DoubleDouble(combined.scale);
    return scaled;
  }
  const Layout::Place& place = layout.places[coefficient];
  Combination column;
  const auto shifted = [&](std::size_t dense, std::size_t onto) {
    const DoubleDouble scale(basis.scale[dense]);
    column.emplace_back(coefficient, scale);
    if (basis.centre[dense] != 0) column.emplace_back(onto, -(scale * DoubleDouble(basis.centre[dense])));
  };
  if (place.dense) {
    shifted(*place.dense, 0);
  } else {
    const Block& block = layout.blocks[place.block];
    shifted(block.multiplier, block.base ? layout.blocks[*block.base].coefficients[place.level] : 0);
  }
  // A shift may have been put on levels that turned out aliased: hand it on to the columns they are made of.
  for (const auto& [aliased, combination] : basis.aliases)
    if (column.size() == 2 && column[1].first == aliased) {
      const DoubleDouble multiple = column[1].second;
      column.pop_back();
      for (const auto& [k, share] : combination) column.emplace_back(k, share * multiple);
    }
  return column;
}

Eigen::VectorXd to_design(const Layout& layout, const Basis& basis, const Eigen::VectorXd& working) {
  std::vector<DoubleDouble> total(layout.coefficients);
  for (std::size_t k = 0; k < layout.coefficients; ++k) {
    if (!basis.active[k] || working[k] == 0) continue;
    for (const auto& [j, multiple] : working_column(layout, basis, k))
      total[j] = total[j] + multiple * DoubleDouble(working[k]);
  }
  Eigen::VectorXd design(working.size());
  for (std::size_t k = 0; k < layout.coefficients; ++k) design[k] = total[k].value();
  return design;
}

Eigen::MatrixXd design_map(const Layout& layout, const Basis& basis) {
  Eigen::MatrixXd map = Eigen::MatrixXd::Zero(layout.coefficients, layout.coefficients);
  for (std::size_t k = 0; k < layout.coefficients; ++k)
    if (basis.active[k])
      for (const auto& [j, multiple] : working_column(layout, basis, k)) map(j, k) += multiple.value();
  return map;
}

}  // namespace countsel
