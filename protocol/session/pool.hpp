// protocol/session/pool.hpp -- a few threads, and the lending of idle ones to a big fit.
//
// Checked by: tests/protocol/session/pool_test.cpp.
#pragma once

#include <condition_variable>
#include <deque>
#include <functional>
#include <mutex>
#include <thread>
#include <vector>

#include "engine/work.hpp"

namespace countsel {

class Pool {
 public:
  explicit Pool(std::size_t threads);
  ~Pool();  ///< Finishes what was posted.
  Pool(const Pool&) = delete;
  Pool& operator=(const Pool&) = delete;

  /// False if there is no thread to do it: the machine would give none.
  bool post(std::function<void()> job);
  std::size_t size() const { return size_; }
  /// Hands for one computation: the caller's own and whichever threads are idle at the time.
  Workers workers();

 private:
  bool start();
  void serve();
  void share(std::size_t tasks, const std::function<void(std::size_t)>& piece);

  std::size_t size_;
  std::mutex mutex_;
  std::condition_variable wake_;
  std::deque<std::function<void()>> jobs_;
  std::vector<std::thread> threads_;
  bool closing_ = false;
};

}  // namespace countsel
