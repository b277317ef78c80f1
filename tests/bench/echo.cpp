// tests/bench/echo.cpp -- gives every line back: the least that a round trip over two pipes can cost.
#include <unistd.h>

#include <array>

int main() {
  std::array<char, 1 << 16> buffer{};
  for (;;) {
    const auto got = ::read(STDIN_FILENO, buffer.data(), buffer.size());
    if (got <= 0) return 0;
    for (ssize_t sent = 0; sent < got;) {
      const auto wrote = ::write(STDOUT_FILENO, buffer.data() + sent, static_cast<std::size_t>(got - sent));
      if (wrote <= 0) return 1;
      sent += wrote;
    }
  }
}
