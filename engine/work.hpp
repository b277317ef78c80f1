// engine/work.hpp -- what a long computation is given: someone to tell, someone to ask, helpers.
//
// The engine owns no clock and no thread. Whoever calls it says how to report, when to stop and
// how many hands there are; by default nobody listens, nothing stops and one hand does the work.
#pragma once

#include <cstddef>
#include <functional>
#include <string_view>

#include "engine/refusal.hpp"

namespace countsel {

/// Told how far the work is; asked whether to go on.
class Progress {
 public:
  /// Told `share` (0 to 1) and what is being done; may be empty.
  std::function<void(double share, std::string_view doing)> told;
  /// Throws Refusal (cancelled, out_of_time) when the work should stop; may be empty. Called from
  /// any worker, so it must be safe to call from several at once.
  std::function<void()> asked;

  void tell(double share, std::string_view doing) const {
    if (told) told(share, doing);
  }
  /// Call at least every few milliseconds of work.
  void check() const {
    if (asked) asked();
  }
};

/// Runs `tasks` independent pieces, perhaps at the same time, and returns when all are done. The
/// first exception of a piece is rethrown. Pieces are cut by size alone, never by `hands`, so that an
/// answer does not depend on it.
struct Workers {
  std::size_t hands = 1;
  std::function<void(std::size_t tasks, const std::function<void(std::size_t)>& piece)> run =
      [](std::size_t tasks, const std::function<void(std::size_t)>& piece) {
        for (std::size_t i = 0; i < tasks; ++i) piece(i);
      };
};

struct Work {
  Progress progress;
  Workers workers;
};

}  // namespace countsel
