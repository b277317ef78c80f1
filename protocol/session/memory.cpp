// protocol/session/memory.cpp -- what the system says of itself; where it says nothing, there is room.
#include "protocol/session/memory.hpp"

#include <sys/resource.h>
#include <unistd.h>

#include <algorithm>
#include <fstream>
#include <limits>
#include <string>

#include "engine/refusal.hpp"

namespace countsel {
namespace {

constexpr std::size_t unbounded = std::numeric_limits<std::size_t>::max();

/// The first number of a file, or the one after `key`; `unbounded` if there is none.
std::size_t number_in(const char* path, const std::string& key = {}) {
  std::ifstream file(path);
  std::string word;
  while (!key.empty() && word != key) {
    if (!(file >> word)) return unbounded;
  }
  std::size_t number = 0;
  return file >> number ? number : unbounded;
}

std::size_t less(std::size_t limit, std::size_t used) {
  if (limit == unbounded || used == unbounded) return limit;
  return limit - std::min(limit, used);
}

}  // namespace

std::size_t memory_left() {
  std::size_t left = unbounded;
  const std::size_t kilobytes = number_in("/proc/meminfo", "MemAvailable:");
  if (kilobytes != unbounded) left = 1024 * kilobytes;
  left = std::min(left,
                  less(number_in("/sys/fs/cgroup/memory.max"), number_in("/sys/fs/cgroup/memory.current")));
  rlimit limit{};
  if (::getrlimit(RLIMIT_AS, &limit) == 0 && limit.rlim_cur != RLIM_INFINITY) {
    const std::size_t pages = number_in("/proc/self/statm");
    const auto page = static_cast<std::size_t>(::sysconf(_SC_PAGESIZE));
    left = std::min(left, less(limit.rlim_cur, pages == unbounded ? 0 : pages * page));
  }
  return left;
}

void check_room(std::size_t rows, std::size_t columns) {
  // Small tables are not worth asking the system for.
  constexpr std::size_t few_rows = 1'000'000;
  if (rows < few_rows) return;
  // Measured: a row of how_often takes about 500 bytes with its label, its limits and its text on the wire.
  const std::size_t needed = rows * (500 + 24 * columns);
  if (needed <= memory_left()) return;
  throw Refusal(Code::out_of_memory,
                "There is not enough memory to answer for " + std::to_string(rows) + " rows.", {},
                "Ask about fewer rows, add rows up first, or release held tables.");
}

}  // namespace countsel
