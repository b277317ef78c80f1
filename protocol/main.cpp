// protocol/main.cpp -- the executable: a server without arguments, a calculator with them.
#include <csignal>

#include "protocol/cli/command_line.hpp"

int main(int argc, char** argv) {
  // A reader that goes away shows as a failed write, which ends the program quietly.
  std::signal(SIGPIPE, SIG_IGN);
  return countsel::run_command_line(argc, argv);
}
