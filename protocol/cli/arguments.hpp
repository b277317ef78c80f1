// protocol/cli/arguments.hpp -- what was typed after `ask`, as a request.
#pragma once

#include <stdexcept>
#include <string>
#include <vector>

#include "protocol/wire/request.hpp"

namespace countsel {

struct AskArguments {
  std::string question;
  std::vector<std::string> arguments;  ///< option=value …, perhaps a table at the end
  std::string roles, words;            ///< name=text,name=text
  std::vector<std::string> only;       ///< column=value
  bool no_header = false, json = false;
};

/// The command line cannot be understood.
struct Misuse : std::runtime_error {
  using std::runtime_error::runtime_error;
};

/// Reads the table (tab-separated, CSV, or CSV with semicolons: by the first of these that its first line
/// holds) and builds the request. Throws Misuse, or Refusal for the table.
Request request_of(const AskArguments& asked);

/// An option's text as the wire would have it: JSON where it is JSON, a list where one is wanted, else text.
Json option_value(const std::string& type, const std::string& text);

}  // namespace countsel
