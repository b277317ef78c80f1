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
  if (!value) return;
  for (auto& [place, line] : waiting_) {
    if (line) send(*line);
    line.reset();
  }
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
  if (as_finished_) {
    send(line);
    waiting_.emplace(place, std::nullopt);
  } else {
    waiting_.emplace(place, std::move(line));
  }
  while (!waiting_.empty() && waiting_.begin()->first == next_sent_) {
    if (auto& turn = waiting_.begin()->second) send(*turn);
    waiting_.erase(waiting_.begin());
    ++next_sent_;
  }
}

void Output::aside(const std::string& line) {
  std::string copy = line;
  const std::lock_guard lock(mutex_);
  send(copy);
}

}  // namespace countsel
