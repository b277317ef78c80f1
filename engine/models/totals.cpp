// engine/models/totals.cpp -- one pass over counts, exposures and weights, with the reasons to refuse.
#include "engine/models/totals.hpp"

#include <algorithm>
#include <array>
#include <cmath>

#include "engine/models/pass.hpp"
#include "engine/refusal.hpp"

namespace countsel {
namespace {

void check_length(const char* what, std::size_t length, std::size_t rows) {
  if (length != 0 && length != rows)
    throw Refusal(Code::length_mismatch, std::string(what) + " has " + std::to_string(length) +
                                             " rows, count has " + std::to_string(rows) + ".");
}

[[noreturn]] void refuse(Code code, const char* column, std::size_t row, const char* rule) {
  throw Refusal(code, "Row " + std::to_string(row + 1) + " of " + column + " is out of range; " + rule,
                {{column, static_cast<std::int64_t>(row + 1)}});
}

struct Part {
  double rows = 0, weight = 0, events = 0, exposure = 0, saturated = 0;
};

}  // namespace

Totals add_up(const GlmData& data, const Family& family, const Work& work) {
  const std::size_t n = data.count.size();
  check_length("exposure", data.exposure.size(), n);
  check_length("log exposure", data.log_exposure.size(), n);
  check_length("weight", data.weight.size(), n);

  double shift = 0;  // exposures on a log scale are summed relative to the largest
  if (!data.log_exposure.empty())
    shift = *std::max_element(data.log_exposure.begin(), data.log_exposure.end());
  std::array<double, 256> saturated;
  for (std::size_t y = 0; y < saturated.size(); ++y) saturated[y] = family.saturated(static_cast<double>(y));

  const std::size_t blocks = (n + block_rows - 1) / block_rows;
  const std::size_t pieces = std::max<std::size_t>(1, piece_count(blocks, 1));
  std::vector<Part> parts(pieces);
  work.workers.run(pieces, [&](std::size_t piece) {
    Part part;
    const std::size_t first = std::min(n, piece * blocks / pieces * block_rows);
    const std::size_t last = std::min(n, (piece + 1) * blocks / pieces * block_rows);
    for (std::size_t i = first; i < last; ++i) {
      if (i % 65536 == 0) work.progress.check();
      const double y = data.count[i];
      if (!(y >= 0 && y <= 0x1p53 && y == std::floor(y)))
        refuse(Code::bad_count, "count", i, "a count is a whole number, 0 or more.");
      const double w = data.weight.empty() ? 1 : data.weight[i];
      if (!(w >= 0 && std::isfinite(w))) refuse(Code::bad_value, "weight", i, "a weight is 0 or more.");
      double e = data.exposure.empty() ? 1 : data.exposure[i];
      if (!(e > 0 && std::isfinite(e))) refuse(Code::bad_exposure, "exposure", i, "an exposure is above 0.");
      if (!data.log_exposure.empty()) {
        if (!std::isfinite(data.log_exposure[i]))
          refuse(Code::bad_exposure, "log exposure", i, "it must be a finite number.");
        e *= std::exp(data.log_exposure[i] - shift);
      }
      if (w == 0) continue;
      part.rows += data.weights_are == WeightsAre::frequency ? w : 1;
      part.weight += w;
      part.events += w * y;
      part.exposure += w * e;
      part.saturated += w * (y < 256 ? saturated[static_cast<std::size_t>(y)] : family.saturated(y));
    }
    parts[piece] = part;
  });
  Totals totals;
  double exposure = 0;
  for (const Part& part : parts) {
    totals.rows += part.rows;
    totals.weight += part.weight;
    totals.events += part.events;
    exposure += part.exposure;
    totals.saturated += part.saturated;
  }
  if (!(totals.weight > 0)) throw Refusal(Code::too_few, "There are no rows to fit a model to.");
  totals.log_rate = std::log(totals.events / exposure) - shift;
  return totals;
}

}  // namespace countsel
