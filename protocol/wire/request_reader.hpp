// protocol/wire/request_reader.hpp -- one line becomes one Request, in one pass.
//
// The numbers of the data go from the parser into columns, only the small parts (options, words) become a
// document tree. The order of a request's keys does not matter.
// Checked by: tests/protocol/wire/request_reader_test.cpp.
#pragma once

#include "protocol/wire/line_source.hpp"
#include "protocol/wire/request.hpp"

namespace countsel {

/// Reads the current line of `source`. Never throws for what the line says: `trouble` holds it.
Request read_request(LineSource& source);
/// The same from a text, for the command line and for tests.
Request read_request(std::string_view line);

}  // namespace countsel
