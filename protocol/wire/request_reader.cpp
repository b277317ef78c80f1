// protocol/wire/request_reader.cpp -- the parser over one line, and what is wrong with the line as a whole.
#include "protocol/wire/request_reader.hpp"

#include <new>
#include <stdexcept>

#include "protocol/wire/request_handler.hpp"

namespace countsel {
namespace {

/// What is kept of a request that could not be read: whom to answer.
Request only_trouble(const Request& read, Refusal trouble) {
  Request request;
  request.id = read.id;
  request.id_plain = read.id_plain;
  request.ask = read.ask;
  request.trouble.emplace(std::move(trouble));
  return request;
}

}  // namespace

Request read_request(LineSource& source) {
  Request request;
  // The parser would pass over a byte-order mark on any line; only the very first may have one.
  if (!source.at_end() && source.current() == '\xEF') {
    return only_trouble(request, {Code::bad_json, "The line does not begin with a JSON object."});
  }
  try {
    RequestHandler handler(request, source);
    Json::sax_parse(LineIterator(source), LineIterator(), &handler);
  } catch (const std::bad_alloc&) {
    return only_trouble(request, {Code::out_of_memory,
                                  "There is not enough memory to read this line.",
                                  {},
                                  "Send fewer rows or columns, or release held tables."});
  } catch (const std::length_error&) {
    return only_trouble(request, {Code::out_of_memory, "There is not enough memory to read this line."});
  }
  if (source.line_too_long()) {
    return only_trouble(
        request, {Code::too_large,
                  "The line is longer than this server reads.",
                  {},
                  "Start it with a larger --max-line, hold the table in parts, or send packed columns."});
  }
  return request;
}

Request read_request(std::string_view line) {
  LineSource source(line);
  return read_request(source);
}

}  // namespace countsel
