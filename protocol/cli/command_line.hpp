// protocol/cli/command_line.hpp -- what can be typed: serve, ask, quick, questions.
//
// Made from the same declarations as the wire; `ask` and `quick` send themselves a request and print it
// for people, or with --json as the wire's reply.
// Checked by: tests/protocol/command_line_test.py.
#pragma once

namespace countsel {

/// Exit status: 0 answered, 1 refused, 2 misuse, 3 replies could not be written.
int run_command_line(int argc, char** argv);

}  // namespace countsel
