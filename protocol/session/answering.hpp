// protocol/session/answering.hpp -- one request, one question, one reply; no queue, no output.
#pragma once

#include <memory>
#include <string>

#include "protocol/data/source.hpp"
#include "protocol/declare/question.hpp"
#include "protocol/wire/request.hpp"

namespace countsel {

/// What stands behind "answer" or "refused" in the reply.
struct Reply {
  const char* part = "answer";
  std::string body;
  bool refused() const { return part[0] == 'r'; }
};

/// The question that the request asks, with its keys checked; refuses unknown_ask, unknown_key, bad_type.
const Question& question_of(const Request& request);

/// Takes the request's table (sent, held or file), then answers. Never throws: what cannot be answered is
/// refused, what went wrong in here is `internal`.
Reply answer_request(Request& request, const Question& question, std::shared_ptr<const Table> table,
                     Context context);

Reply refuse(const Refusal& refusal);
/// The refusal for whatever is being thrown.
Refusal current_trouble();

}  // namespace countsel
