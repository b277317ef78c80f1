// engine/models/kernel_loops.hpp -- the loops of kernel.hpp, once for every instruction set.
//
// Included by kernel_generic.cpp and kernel_avx2.cpp alone, which say how many lanes a vector has.
// Vectors are the compiler's own; everything is in an unnamed namespace, so that the two builds never
// share code.
// Source: the exponential is reduced by multiples of log 2 (Cody and Waite 1980), its polynomial
// fitted at Chebyshev points by tests/reference/models/kernel_polynomial.py; the logarithm's is that
// of fdlibm's e_log.c (Sun Microsystems 1993).
#pragma once

#include <cstring>

#include "engine/models/kernel.hpp"

namespace countsel {
namespace {

typedef double Vec __attribute__((vector_size(8 * KERNEL_LANES)));
typedef std::int64_t Bits __attribute__((vector_size(8 * KERNEL_LANES)));
constexpr std::size_t lanes = KERNEL_LANES;

inline Vec load(const double* p) {
  Vec v;
  std::memcpy(&v, p, sizeof v);
  return v;
}
inline void store(double* p, const Vec& v) { std::memcpy(p, &v, sizeof v); }
inline Vec fill_vec(double x) { return Vec{} + x; }
inline Bits bits_of(const Vec& v) {
  Bits b;
  std::memcpy(&b, &v, sizeof b);
  return b;
}
inline Vec vec_of(const Bits& b) {
  Vec v;
  std::memcpy(&v, &b, sizeof v);
  return v;
}
inline Vec choose(const Bits& mask, const Vec& yes, const Vec& no) {
  return vec_of((mask & bits_of(yes)) | (~mask & bits_of(no)));
}
inline double sum(const Vec& v) {
  double s = v[0];
  for (std::size_t i = 1; i < lanes; ++i) s += v[i];
  return s;
}

constexpr double log2_high = 6.93147180369123816490e-01;
constexpr double log2_low = 1.90821492927058770002e-10;
constexpr double round_magic = 6755399441055744.0;  // 1.5 * 2^52: adding it rounds to a whole number

struct Reduced {
  Vec remainder;  // x - k log 2, at most log(2)/2 in size
  Vec scale;      // 2^k
  Bits whole;     // mask: k is 0
};

inline Reduced reduce(const Vec& x_any) {
  const Vec low = fill_vec(-708.0), high = fill_vec(709.0);
  Vec x = choose(x_any < low, low, x_any);
  x = choose(x > high, high, x);
  const Vec shifted = x * 1.4426950408889634074 + round_magic;
  const Vec k = shifted - round_magic;
  return {(x - k * log2_high) - k * log2_low, vec_of((bits_of(shifted) + 1023) << 52), k == fill_vec(0.0)};
}

/// (e^r - 1 - r) / r^2 on |r| <= log(2)/2.
inline Vec exp_tail(const Vec& r) {
  Vec p = fill_vec(0x1.1f730349868cep-29);
  p = p * r + 0x1.af4de97ca4194p-26;
  p = p * r + 0x1.27e4db646b17ep-22;
  p = p * r + 0x1.71de0231960ebp-19;
  p = p * r + 0x1.a01a01a6d889cp-16;
  p = p * r + 0x1.a01a01abe7fe1p-13;
  p = p * r + 0x1.6c16c16c162d4p-10;
  p = p * r + 0x1.11111111100dcp-7;
  p = p * r + 0x1.5555555555556p-5;
  p = p * r + 0x1.5555555555557p-3;
  return p * r + 0.5;
}

inline Vec exp_vec(const Vec& x) {
  const Reduced a = reduce(x);
  const Vec r = a.remainder;
  return (r * r * exp_tail(r) + r) * a.scale + a.scale;
}

/// t - 1 - log t, given t > 0 and d = t - 1 with more digits than t has: no cancellation near t = 1.
inline Vec log_excess(const Vec& t, const Vec& d) {
  // The exponent is split off so that the mantissa lies in [sqrt(1/2), sqrt(2)).
  const Bits shifted = bits_of(t) + (0x3ff0000000000000 - 0x3fe6a09e667f3bcd);
  const Bits exponent = (shifted >> 52) - 1023;
  const Vec mantissa = vec_of((shifted & 0x000fffffffffffff) + 0x3fe6a09e667f3bcd);
  const Bits whole = exponent == Bits{};
  const Bits magic_bits = bits_of(fill_vec(round_magic));
  const Vec k = vec_of(exponent + magic_bits) - round_magic;
  const Vec f = choose(whole, d, mantissa - 1.0);
  const Vec s = f / (f + 2.0);
  const Vec z = s * s;
  Vec p = fill_vec(1.479819860511658591e-01);
  p = p * z + 1.531383769920937332e-01;
  p = p * z + 1.818357216161805012e-01;
  p = p * z + 2.222219843214978396e-01;
  p = p * z + 2.857142874366239149e-01;
  p = p * z + 3.999999999940941908e-01;
  p = p * z + 6.666666666666735130e-01;
  const Vec half_square = f * f * 0.5;
  const Vec beyond = half_square - s * (half_square + p * z);  // f - log(1 + f)
  return choose(whole, beyond, ((d - f) - k * log2_high) + (beyond - k * log2_low));
}

void fill(std::size_t rows, std::size_t columns, const double* const* source, const double* centre,
          const double* scale, const double* gamma, double* z, double* eta) {
  for (std::size_t j = 0; j < columns; j += 4) {
    const double *a = source[j], *b = source[j + 1], *c = source[j + 2], *d = source[j + 3];
    for (std::size_t r = 0; r < rows; r += lanes) {
      const Vec va = (load(a + r) - centre[j]) * scale[j];
      const Vec vb = (load(b + r) - centre[j + 1]) * scale[j + 1];
      const Vec vc = (load(c + r) - centre[j + 2]) * scale[j + 2];
      const Vec vd = (load(d + r) - centre[j + 3]) * scale[j + 3];
      store(eta + r,
            load(eta + r) + ((va * gamma[j] + vb * gamma[j + 1]) + (vc * gamma[j + 2] + vd * gamma[j + 3])));
      double* out = z + r * columns + j;
#if KERNEL_LANES == 4
      const Vec ab_low = __builtin_shufflevector(va, vb, 0, 4, 2, 6),
                ab_high = __builtin_shufflevector(va, vb, 1, 5, 3, 7);
      const Vec cd_low = __builtin_shufflevector(vc, vd, 0, 4, 2, 6),
                cd_high = __builtin_shufflevector(vc, vd, 1, 5, 3, 7);
      store(out, __builtin_shufflevector(ab_low, cd_low, 0, 1, 4, 5));
      store(out + columns, __builtin_shufflevector(ab_high, cd_high, 0, 1, 4, 5));
      store(out + 2 * columns, __builtin_shufflevector(ab_low, cd_low, 2, 3, 6, 7));
      store(out + 3 * columns, __builtin_shufflevector(ab_high, cd_high, 2, 3, 6, 7));
#else
      store(out, __builtin_shufflevector(va, vb, 0, 2));
      store(out + 2, __builtin_shufflevector(vc, vd, 0, 2));
      store(out + columns, __builtin_shufflevector(va, vb, 1, 3));
      store(out + columns + 2, __builtin_shufflevector(vc, vd, 1, 3));
#endif
    }
  }
}

void exponential(std::size_t rows, const double* x, double* out) {
  for (std::size_t r = 0; r < rows; r += lanes) store(out + r, exp_vec(load(x + r)));
}

void poisson_log(std::size_t rows, const double* eta, const double* count, const double* exposure,
                 const double* weight, double* mean, double* score, double* information) {
  for (std::size_t r = 0; r < rows; r += lanes) {
    const Vec mu = load(exposure + r) * exp_vec(load(eta + r));
    Vec s = load(count + r) - mu, h = mu;
    if (weight) {
      // A row of weight 0 may have any mean, even one beyond a double.
      const Vec w = load(weight + r);
      const Bits live = w > fill_vec(0.0);
      s = choose(live, s * w, Vec{});
      h = choose(live, h * w, Vec{});
    }
    store(mean + r, mu);
    store(score + r, s);
    store(information + r, h);
  }
}

void poisson_fit(std::size_t rows, const double* count, const double* mean, const double* weight,
                 double* sums) {
  Vec deviance{}, pearson{};
  for (std::size_t r = 0; r < rows; r += lanes) {
    const Vec y = load(count + r), mu = load(mean + r), gap = mu - y;
    const Bits none = y == fill_vec(0.0);
    const Vec divisor = choose(none, fill_vec(1.0), y);
    const Vec unit =
        choose(none, mu, y * log_excess(choose(none, fill_vec(1.0), mu / divisor), gap / divisor));
    const Vec w = weight ? load(weight + r) : fill_vec(1.0);
    // A row set apart has weight 0 and perhaps mean 0, where the quotient has no value.
    const Bits live = w > fill_vec(0.0);
    deviance += choose(live, w * unit, Vec{});
    pearson += choose(live, w * (gap * gap / mu), Vec{});
  }
  sums[0] += 2.0 * sum(deviance);
  sums[1] += sum(pearson);
}

template <std::size_t Count>
inline void gradient_tile(std::size_t rows, std::size_t stride, const double* z, const double* score,
                          double* out) {
  Vec acc[Count] = {};
  for (std::size_t r = 0; r < rows; ++r)
    for (std::size_t v = 0; v < Count; ++v) acc[v] += load(z + r * stride + v * lanes) * score[r];
  for (std::size_t v = 0; v < Count; ++v) store(out + v * lanes, load(out + v * lanes) + acc[v]);
}

void gradient(std::size_t rows, std::size_t stride, const double* z, const double* score, double* out) {
  std::size_t v = 0;
  const std::size_t vectors = stride / lanes;
  for (; v + 6 <= vectors; v += 6) gradient_tile<6>(rows, stride, z + v * lanes, score, out + v * lanes);
  for (; v < vectors; ++v) gradient_tile<1>(rows, stride, z + v * lanes, score, out + v * lanes);
}

/// Four columns from `left` against Count vectors of columns from `right`.
template <std::size_t Count>
inline void cross_tile(std::size_t rows, std::size_t stride, const double* left, const double* right,
                       const double* information, double* out) {
  Vec acc[4][Count] = {};
  for (std::size_t r = 0; r < rows; ++r) {
    const double* a = left + r * stride;
    const double* b = right + r * stride;
    Vec weighted[Count];
    for (std::size_t v = 0; v < Count; ++v) weighted[v] = load(b + v * lanes) * information[r];
    for (std::size_t i = 0; i < 4; ++i)
      for (std::size_t v = 0; v < Count; ++v) acc[i][v] += weighted[v] * a[i];
  }
  for (std::size_t i = 0; i < 4; ++i)
    for (std::size_t v = 0; v < Count; ++v) {
      double* at = out + i * stride + v * lanes;
      store(at, load(at) + acc[i][v]);
    }
}

void cross(std::size_t rows, std::size_t stride, const double* z, const double* information, double* out) {
  const std::size_t vectors = stride / lanes;
  for (std::size_t i = 0; i < stride; i += 4) {
    std::size_t v = i / lanes;
    double* row = out + i * stride;
    for (; v + 3 <= vectors; v += 3)
      cross_tile<3>(rows, stride, z + i, z + v * lanes, information, row + v * lanes);
    if (v + 2 == vectors)
      cross_tile<2>(rows, stride, z + i, z + v * lanes, information, row + v * lanes);
    else if (v + 1 == vectors)
      cross_tile<1>(rows, stride, z + i, z + v * lanes, information, row + v * lanes);
  }
}

void scatter(std::size_t rows, std::size_t stride, const std::int32_t* code, const double* z,
             const double* information, double* table) {
  for (std::size_t r = 0; r < rows; ++r) {
    double* row = table + static_cast<std::size_t>(code[r]) * stride;
    const double* from = z + r * stride;
    for (std::size_t j = 0; j < stride; j += lanes)
      store(row + j, load(row + j) + load(from + j) * information[r]);
  }
}

void multiply(std::size_t rows, std::size_t stride, const double* z, std::size_t width, const double* gamma,
              double* e) {
  for (std::size_t m = 0; m < width; m += lanes)
    for (std::size_t r = 0; r < rows; r += 4) {
      Vec acc[4];
      for (std::size_t k = 0; k < 4; ++k) acc[k] = load(e + (r + k) * width + m);
      for (std::size_t j = 0; j < stride; ++j) {
        const Vec g = load(gamma + j * width + m);
        for (std::size_t k = 0; k < 4; ++k) acc[k] += g * z[(r + k) * stride + j];
      }
      for (std::size_t k = 0; k < 4; ++k) store(e + (r + k) * width + m, acc[k]);
    }
}

void excess(std::size_t rows, std::size_t width, const double* information, double* e, double* out) {
  for (std::size_t m = 0; m < width; m += lanes) {
    Vec total{};
    for (std::size_t r = 0; r < rows; ++r) {
      double* at = e + r * width + m;
      const Vec x = load(at);
      const Reduced a = reduce(x);
      const Vec rem = a.remainder, tail = rem * rem * exp_tail(rem);
      const Vec minus_one = (rem + tail) * a.scale + (a.scale - 1.0);  // exp(x) - 1
      total += choose(a.whole, tail, minus_one - x) * information[r];
      store(at, minus_one * information[r]);
    }
    store(out + m, load(out + m) + total);
  }
}

void multiply_back(std::size_t rows, std::size_t stride, const double* z, std::size_t width, const double* e,
                   double* out) {
  for (std::size_t j = 0; j < stride; j += 4)
    for (std::size_t m = 0; m < width; m += lanes) {
      Vec acc[4] = {};
      for (std::size_t r = 0; r < rows; ++r) {
        const Vec v = load(e + r * width + m);
        for (std::size_t i = 0; i < 4; ++i) acc[i] += v * z[r * stride + j + i];
      }
      for (std::size_t i = 0; i < 4; ++i) {
        double* at = out + (j + i) * width + m;
        store(at, load(at) + acc[i]);
      }
    }
}

void add_levels(std::size_t rows, std::size_t width, const std::int32_t* code, const double* multiplier,
                const double* table, double* e) {
  for (std::size_t r = 0; r < rows; ++r) {
    const double* from = table + static_cast<std::size_t>(code[r]) * width;
    const double by = multiplier ? multiplier[r] : 1.0;
    for (std::size_t m = 0; m < width; m += lanes)
      store(e + r * width + m, load(e + r * width + m) + load(from + m) * by);
  }
}

void scatter_levels(std::size_t rows, std::size_t width, const std::int32_t* code, const double* multiplier,
                    const double* e, double* table) {
  for (std::size_t r = 0; r < rows; ++r) {
    double* to = table + static_cast<std::size_t>(code[r]) * width;
    const double by = multiplier ? multiplier[r] : 1.0;
    for (std::size_t m = 0; m < width; m += lanes) store(to + m, load(to + m) + load(e + r * width + m) * by);
  }
}

constexpr Kernel loops(const char* name) {
  return {name,    fill,     exponential, poisson_log, poisson_fit,   gradient,      cross,
          scatter, multiply, add_levels,  excess,      multiply_back, scatter_levels};
}

}  // namespace
}  // namespace countsel
