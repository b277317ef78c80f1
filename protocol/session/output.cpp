// protocol/session/output.cpp -- whole lines to one descriptor.
#include "protocol/session/output.hpp"

#include <poll.h>
#include <unistd.h>

#include <cerrno>
#include <cstdio>
#include <cstdlib>
#include <cstring>

namespace countsel {

std::uint64_t Output::reserve() {
  const std::lock_guard lock(mutex_);
  return next_place_++;
}

void Output::as_finished(bool value) {
  const std::lock_guard lock(mutex_);
  as_finished_ = value;
}

void Output::send(std::string& line) {
  line += '\n';
  for (std::size_t sent = 0; sent < line.size();) {
    const auto wrote = ::write(descriptor_, line.data() + sent, line.size() - sent);
    if (wrote >= 0) {
      sent += static_cast<std::size_t>(wrote);
    } else if (errno == EAGAIN) {
      pollfd full{descriptor_, POLLOUT, 0};
      ::poll(&full, 1, -1);
    } else if (errno != EINTR) {
      // Nobody listens any more: end quietly. Anything else (a full disk) is said and is a failure.
      if (errno == EPIPE) std::_Exit(0);
      std::fprintf(stderr, "countsel: cannot write replies: %s\n", std::strerror(errno));
      std::_Exit(3);
    }
  }
}

void Output::reply(std::uint64_t place, std::string line) {
  const std::lock_guard lock(mutex_);
  if (!as_finished_ && place != next_sent_) {
    waiting_.emplace(place, std::move(line));
    return;
  }
  send(line);
  if (place == next_sent_) {
    ++next_sent_;
  } else {
    waiting_.emplace(place, std::string());  // sent already
  }
  for (auto first = waiting_.begin(); first != waiting_.end() && (first->first == next_sent_ || as_finished_);
       first = waiting_.begin()) {
    const bool in_turn = first->first == next_sent_;
    if (!in_turn && first->second.empty()) break;
    if (!first->second.empty()) send(first->second);
    if (in_turn) ++next_sent_;
    waiting_.erase(first);
  }
}

void Output::aside(const std::string& line) {
  std::string copy = line;
  const std::lock_guard lock(mutex_);
  send(copy);
}

}  // namespace countsel
