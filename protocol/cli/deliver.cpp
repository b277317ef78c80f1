// protocol/cli/deliver.cpp -- all of a text to one descriptor.
#include "protocol/cli/deliver.hpp"

#include <unistd.h>

#include <cerrno>
#include <cstring>
#include <iostream>

namespace countsel {

int deliver(const std::string& text, int status) {
  constexpr int unwritten = 3;
  for (std::size_t sent = 0; sent < text.size();) {
    const auto wrote = ::write(STDOUT_FILENO, text.data() + sent, text.size() - sent);
    if (wrote >= 0) {
      sent += static_cast<std::size_t>(wrote);
    } else if (errno == EPIPE) {
      return status;
    } else if (errno != EINTR) {
      std::cerr << "countsel: cannot write: " << std::strerror(errno) << "\n";
      return unwritten;
    }
  }
  return status;
}

}  // namespace countsel
