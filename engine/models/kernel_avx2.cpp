// engine/models/kernel_avx2.cpp -- the loops again, for processors with AVX2 and FMA.
//
// Built with -mavx2 -mfma: nothing but the loops may stand here, or another file could be given this
// file's copy of an inline function and fail on an older processor.
#define KERNEL_LANES 4
#include "engine/models/kernel_loops.hpp"

namespace countsel {

const Kernel* avx2_kernel() {
#if defined(__AVX2__) && defined(__FMA__)
  static constexpr Kernel kernel = loops("avx2");
  return &kernel;
#else
  return nullptr;
#endif
}

}  // namespace countsel
