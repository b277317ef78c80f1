// tests/engine/models/synthetic.hpp -- tables drawn with a fixed seed, for properties and large fits.
#pragma once

#include <random>

#include "cases.hpp"

namespace countsel::cases {

/// Numbers, levels and a cross with moderate effects.
struct Synthetic {
  std::vector<double> count, exposure, age, pressure, load;
  std::vector<std::string> material_names = {"iron", "pvc", "steel", "clay"},
                           soil_names = {"clay", "sand", "loam"};
  std::vector<std::int32_t> material, soil;
  std::vector<SourceColumn> columns;
  std::vector<Term> terms;
  Design design;

  explicit Synthetic(std::size_t rows, bool with_cross = true, unsigned seed = 7) {
    std::mt19937_64 random(seed);
    std::normal_distribution<double> normal;
    std::uniform_real_distribution<double> uniform;
    for (std::size_t i = 0; i < rows; ++i) {
      age.push_back(std::floor(80 * uniform(random)));
      pressure.push_back(3 + normal(random) * normal(random));
      load.push_back(1 + 5 * uniform(random));
      material.push_back(static_cast<std::int32_t>(4 * uniform(random) * uniform(random)));
      soil.push_back(static_cast<std::int32_t>(3 * uniform(random)));
      exposure.push_back(0.2 + 2 * uniform(random));
      const double eta = -0.5 + 0.02 * age[i] - 0.1 * pressure[i] + 0.3 * std::log(load[i]) +
                         0.2 * material[i] - 0.3 * soil[i] + 0.1 * material[i] * soil[i];
      count.push_back(std::poisson_distribution<int>(exposure[i] * std::exp(eta))(random));
    }
    make(with_cross);
  }
  Synthetic(const Synthetic&) = delete;

  void make(bool with_cross) {
    columns = {{"age", age, {}, nullptr, std::nullopt},
               {"pressure", pressure, {}, nullptr, std::nullopt},
               {"load", load, {}, nullptr, std::nullopt},
               {"material", {}, material, &material_names, std::nullopt},
               {"soil", {}, soil, &soil_names, std::nullopt}};
    terms = {slope_of(0), slope_of(1), log_of(2), levels_of(3), levels_of(4)};
    if (with_cross) {
      terms.push_back(cross_of({levels_of(3), levels_of(4)}));
      terms.push_back(cross_of({levels_of(4), slope_of(0)}));
    }
    design = make_design(columns, terms, count.size(), exposure);
  }
  GlmData data() const { return {count, exposure, {}, {}, WeightsAre::frequency}; }
  GlmFit fit(const Work& work = {}) const { return fit_poisson(design, data(), work); }
};

}  // namespace countsel::cases
