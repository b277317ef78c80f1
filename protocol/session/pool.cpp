// protocol/session/pool.cpp -- a queue, and pieces taken by a counter.
#include "protocol/session/pool.hpp"

#include <atomic>
#include <exception>
#include <memory>
#include <system_error>

namespace countsel {
namespace {

/// One computation's pieces. Helpers that come too late find nothing left and go.
struct Batch {
  std::size_t tasks;
  const std::function<void(std::size_t)>* piece;
  std::atomic<std::size_t> next{0};
  std::mutex mutex;
  std::condition_variable finished;
  std::size_t busy = 0;
  std::exception_ptr failure;

  void help() {
    {
      const std::lock_guard lock(mutex);
      if (next.load() >= tasks) return;
      ++busy;
    }
    try {
      for (std::size_t i = next.fetch_add(1); i < tasks; i = next.fetch_add(1)) (*piece)(i);
    } catch (...) {
      const std::lock_guard lock(mutex);
      if (!failure) failure = std::current_exception();
      next.store(tasks);
    }
    const std::lock_guard lock(mutex);
    if (--busy == 0) finished.notify_all();
  }
};

}  // namespace

Pool::Pool(std::size_t threads) : size_(threads) {}

Pool::~Pool() {
  {
    const std::lock_guard lock(mutex_);
    closing_ = true;
  }
  wake_.notify_all();
  for (auto& thread : threads_) thread.join();
}

bool Pool::start() {
  // Threads are made when first needed: a start that answers one small question makes none.
  try {
    while (threads_.size() < size_) threads_.emplace_back([this] { serve(); });
  } catch (const std::system_error&) {
    // Fewer hands than wished for.
  }
  return !threads_.empty();
}

bool Pool::post(std::function<void()> job) {
  {
    const std::lock_guard lock(mutex_);
    if (!start()) return false;
    jobs_.push_back(std::move(job));
  }
  wake_.notify_one();
  return true;
}

void Pool::serve() {
  for (;;) {
    std::function<void()> job;
    {
      std::unique_lock lock(mutex_);
      wake_.wait(lock, [this] { return closing_ || !jobs_.empty(); });
      if (jobs_.empty()) return;
      job = std::move(jobs_.front());
      jobs_.pop_front();
    }
    job();
  }
}

void Pool::share(std::size_t tasks, const std::function<void(std::size_t)>& piece) {
  if (tasks == 0) return;
  auto batch = std::make_shared<Batch>();
  batch->tasks = tasks;
  batch->piece = &piece;
  const std::size_t helpers = std::min(tasks, size_) - 1;
  for (std::size_t i = 0; i < helpers; ++i) post([batch] { batch->help(); });
  batch->help();
  std::unique_lock lock(batch->mutex);
  batch->finished.wait(lock, [&] { return batch->busy == 0; });
  if (batch->failure) std::rethrow_exception(batch->failure);
}

Workers Pool::workers() {
  Workers workers;
  workers.hands = size_;
  workers.run = [this](std::size_t tasks, const std::function<void(std::size_t)>& piece) {
    share(tasks, piece);
  };
  return workers;
}

}  // namespace countsel
