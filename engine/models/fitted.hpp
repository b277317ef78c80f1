// engine/models/fitted.hpp -- a fit as the engine keeps it, for what is asked of it afterwards.
//
// Points at the caller's columns; asking for anything that reads the rows needs them still there.
#pragma once

#include <vector>

#include "engine/models/dependence.hpp"

namespace countsel {

struct FittedModel {
  Design design;
  Layout layout;  ///< of the design above
  Basis basis;
  GlmData source;
  RowData data;
  std::vector<double> owned_weight;  ///< where rows are set apart
  const Family* family = nullptr;
  Eigen::VectorXd gamma;    ///< working coefficients
  Information information;  ///< at them
  Factor factor;            ///< of that
  double null_log_rate = 0;
  /// Coefficients bound up with others through aliases or infinities, and those of terms that combined
  /// working columns or shifted multipliers lean on: without them the working columns would change.
  std::vector<char> entangled;

  FittedModel() = default;
  FittedModel(const FittedModel&) = delete;
  FittedModel& operator=(const FittedModel&) = delete;
};

}  // namespace countsel
