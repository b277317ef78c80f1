// tests/protocol/session/pool_test.cpp -- jobs done once, pieces done once, failures handed on.
#include "protocol/session/pool.hpp"

#include <doctest/doctest.h>

#include <atomic>
#include <chrono>
#include <stdexcept>

namespace countsel {
namespace {

TEST_CASE("what was posted is finished before the pool ends") {
  std::atomic<int> done{0};
  {
    Pool pool(3);
    for (int i = 0; i < 1000; ++i) CHECK(pool.post([&done] { ++done; }));
  }
  CHECK(done == 1000);
}

TEST_CASE("a pool that was never asked makes no threads and ends") { const Pool pool(1000); }

TEST_CASE("every piece is done exactly once") {
  for (const std::size_t threads : {1UL, 2UL, 5UL}) {
    Pool pool(threads);
    const Workers workers = pool.workers();
    CHECK(workers.hands == threads);
    for (const std::size_t tasks : {0UL, 1UL, 2UL, 7UL, 1000UL}) {
      std::vector<std::atomic<int>> times(tasks);
      workers.run(tasks, [&times](std::size_t i) { ++times[i]; });
      for (const auto& one : times) CHECK(one == 1);
    }
  }
}

TEST_CASE("pieces of pieces do not wait for each other") {
  Pool pool(2);
  std::atomic<int> done{0};
  pool.workers().run(8, [&](std::size_t) { pool.workers().run(8, [&done](std::size_t) { ++done; }); });
  CHECK(done == 64);
}

TEST_CASE("a failing piece ends the rest and is rethrown") {
  Pool pool(3);
  std::atomic<int> done{0};
  const auto run = [&] {
    pool.workers().run(100'000, [&done](std::size_t i) {
      if (i == 5) throw std::runtime_error("piece 5");
      ++done;
    });
  };
  CHECK_THROWS_WITH(run(), "piece 5");
  CHECK(done < 100'000);
  pool.workers().run(10, [&done](std::size_t) { ++done; });  // the pool is none the worse
}

TEST_CASE("work is shared while every thread is busy with jobs") {
  Pool pool(2);
  std::atomic<int> done{0};
  std::atomic<bool> stop{false};
  for (int i = 0; i < 2; ++i) {
    pool.post([&stop] {
      while (!stop) std::this_thread::sleep_for(std::chrono::milliseconds(1));
    });
  }
  pool.workers().run(50, [&done](std::size_t) { ++done; });  // by the caller's own hand
  CHECK(done == 50);
  stop = true;
}

}  // namespace
}  // namespace countsel
