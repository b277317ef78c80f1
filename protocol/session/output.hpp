// protocol/session/output.hpp -- replies in the order of their requests, or as they are finished.
//
// Checked by: tests/protocol/session/output_test.cpp, tests/protocol/output_test.py.
#pragma once

#include <cstdint>
#include <map>
#include <mutex>
#include <optional>
#include <string>

namespace countsel {

class Output {
 public:
  explicit Output(int descriptor) : descriptor_(descriptor) {}

  /// The place in the order for the next reply.
  std::uint64_t reserve();
  /// Sends the reply of a place, when all before it have been sent.
  void reply(std::uint64_t place, std::string line);
  /// Sends a line at once (progress).
  void aside(const std::string& line);
  void as_finished(bool value);

 private:
  void send(std::string& line);

  int descriptor_;
  std::mutex mutex_;
  bool as_finished_ = false;
  std::uint64_t next_place_ = 0, next_sent_ = 0;
  std::map<std::uint64_t, std::optional<std::string>> waiting_;  // nothing: sent already, before its turn
};

}  // namespace countsel
