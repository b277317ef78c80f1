// engine/models/kernel_generic.cpp -- the loops for the portable instruction set, and the choice between
// builds.
#define KERNEL_LANES 2
#include "engine/models/kernel_loops.hpp"

namespace countsel {

const Kernel& generic_kernel() {
  static constexpr Kernel kernel = loops("generic");
  return kernel;
}

const Kernel& kernel() {
#if defined(__x86_64__)
  static const bool fast = avx2_kernel() && __builtin_cpu_supports("avx2") && __builtin_cpu_supports("fma");
  return fast ? *avx2_kernel() : generic_kernel();
#else
  return generic_kernel();
#endif
}

}  // namespace countsel
