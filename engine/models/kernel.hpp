// engine/models/kernel.hpp -- the inner loops over a block of rows, chosen for the processor at run time.
//
// The same source (kernel_loops.hpp) is compiled for the portable instruction set and for AVX2 with
// FMA. A block's dense columns lie row by row (row r at z + r * stride, stride a multiple of 4), so
// that both the cross-product and the sums by level work on whole vectors. Row counts are padded to a
// multiple of 4; padding rows have information and score 0. Results of the two builds agree to
// rounding.
// Checked by: tests/engine/models/kernel_test.cpp.
#pragma once

#include <cstddef>
#include <cstdint>

namespace countsel {

/// Rows in a block: a block of some twenty columns stays in the first-level cache.
constexpr std::size_t block_rows = 128;

struct Kernel {
  const char* name;

  /// z(r, j) = (source[j][r] - centre[j]) * scale[j] for `columns` (a multiple of 4) columns, and
  /// eta[r] += sum over j of z(r, j) * gamma[j].
  void (*fill)(std::size_t rows, std::size_t columns, const double* const* source, const double* centre,
               const double* scale, const double* gamma, double* z, double* eta);

  /// out[r] = exp(x[r]), relative error about 1e-16; x is cut to [-708, 709].
  void (*exponential)(std::size_t rows, const double* x, double* out);

  /// Poisson with log link: mean = exposure * exp(eta), information = weight * mean,
  /// score = weight * (count - mean). `weight` may be null: 1 each.
  void (*poisson_log)(std::size_t rows, const double* eta, const double* count, const double* exposure,
                      const double* weight, double* mean, double* score, double* information);

  /// sums[0] += weight * unit deviance, sums[1] += weight * (count - mean)^2 / mean. The unit deviance is
  /// 2 (count log(count / mean) - (count - mean)), without cancellation.
  void (*poisson_fit)(std::size_t rows, const double* count, const double* mean, const double* weight,
                      double* sums);

  /// gradient[j] += sum over r of score[r] * z(r, j).
  void (*gradient)(std::size_t rows, std::size_t stride, const double* z, const double* score,
                   double* gradient);

  /// cross(i, j) += sum over r of information[r] z(r, i) z(r, j) for j >= i; cross is stride x stride, by
  /// rows.
  void (*cross)(std::size_t rows, std::size_t stride, const double* z, const double* information,
                double* cross);

  /// table(code[r], j) += information[r] * z(r, j); table rows of `stride`.
  void (*scatter)(std::size_t rows, std::size_t stride, const std::int32_t* code, const double* z,
                  const double* information, double* table);

  // For several models at once: `width` (a multiple of 4) values a row, one a model.

  /// e(r, m) += sum over j of z(r, j) * gamma(j, m).
  void (*multiply)(std::size_t rows, std::size_t stride, const double* z, std::size_t width,
                   const double* gamma, double* e);
  /// e(r, m) += table(code[r], m) * multiplier[r]; table rows of `width`; `multiplier` may be null for 1
  /// each.
  void (*add_levels)(std::size_t rows, std::size_t width, const std::int32_t* code, const double* multiplier,
                     const double* table, double* e);
  /// excess[m] += sum over r of information[r] (exp(e) - 1 - e), then e(r, m) = information[r] (exp(e) - 1).
  void (*excess)(std::size_t rows, std::size_t width, const double* information, double* e, double* excess);
  /// gradient(j, m) += sum over r of z(r, j) e(r, m).
  void (*multiply_back)(std::size_t rows, std::size_t stride, const double* z, std::size_t width,
                        const double* e, double* gradient);
  /// table(code[r], m) += e(r, m) * multiplier[r]; `multiplier` may be null for 1 each.
  void (*scatter_levels)(std::size_t rows, std::size_t width, const std::int32_t* code,
                         const double* multiplier, const double* e, double* table);
};

const Kernel& generic_kernel();
/// Null where the program was not built for a processor that could have it.
const Kernel* avx2_kernel();
/// The best one that this processor runs.
const Kernel& kernel();

}  // namespace countsel
