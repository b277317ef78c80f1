// protocol/session/session.hpp -- one conversation: requests in, replies out in order.
//
// The reader's thread reads a line, does at once what later lines must see (hold, release, cancel), and
// hands the rest to the pool. Small questions are answered on the spot while nothing is pending.
// Checked by: tests/protocol/replies_test.py, stopping_slow_test.py and output_test.py.
#pragma once

#include <atomic>
#include <chrono>
#include <condition_variable>
#include <map>
#include <memory>
#include <mutex>
#include <string>

#include "protocol/data/source.hpp"
#include "protocol/session/answering.hpp"
#include "protocol/session/output.hpp"
#include "protocol/session/pool.hpp"
#include "protocol/wire/line_source.hpp"

namespace countsel {

struct ServerOptions {
  std::string files;  ///< folder below which tables may be read
  std::size_t longest_line = std::size_t{256} << 20;
  std::size_t workers = 0;  ///< 0: as many as the machine has
  bool log = false;         ///< a line to standard error for each request
};

class Session {
 public:
  Session(const ServerOptions& options, int output);

  /// Serves until the input ends or `goodbye`; every pending request is answered before it returns.
  void serve(int input);
  /// Answers one request on the caller's thread; for the command line.
  Reply answer_now(Request& request);

  // For service questions.
  const ServerOptions& options() const { return options_; }
  std::size_t workers() const { return pool_.size(); }
  void order_as_finished(bool as_finished) { output_.as_finished(as_finished); }
  void hold(const std::string& name, std::shared_ptr<const Table> table) { held_[name] = std::move(table); }
  bool release(const std::string& name) { return held_.erase(name) > 0; }
  const std::map<std::string, std::shared_ptr<const Table>>& held() const { return held_; }
  /// False if no request of that id (as `id_plain`) is pending.
  bool cancel(const std::string& id);
  void end() { ending_ = true; }

 private:
  struct Job;
  void handle(Request request);
  void run(const std::shared_ptr<Job>& job);
  Reply reply_to(const std::shared_ptr<Job>& job);
  void finish(Job& job, Reply reply);
  Work work_for(const std::shared_ptr<Job>& job);
  Shelf shelf() const;       ///< held tables and files; for the reader's thread
  Shelf file_shelf() const;  ///< files only

  ServerOptions options_;
  Output output_;
  std::map<std::string, std::shared_ptr<const Table>> held_;
  bool ending_ = false;

  std::mutex mutex_;
  std::condition_variable settled_;
  std::multimap<std::string, std::shared_ptr<Job>> pending_;
  std::atomic<std::size_t> unfinished_{0};

  Pool pool_;  // last: its threads end before what they use
};

}  // namespace countsel
