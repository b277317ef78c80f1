// protocol/wire/reply.hpp -- an answer or a refusal as one line.
//
// Headings and rounded texts are made here from the declaration, so that every host shows the same.
// Checked by: tests/protocol/answer_parts_test.py and the transcripts.
#pragma once

#include <string>
#include <vector>

#include "protocol/data/places.hpp"
#include "protocol/declare/question.hpp"
#include "protocol/wording/words.hpp"

namespace countsel {

/// The line's `answer` part: an object with the parts wanted.
std::string answer_text(const Question& question, const Answer& answer, const Wording& wording,
                        const Places& places, const std::vector<std::string>& wanted, std::uint64_t digest);
/// The line's `refused` part.
std::string refusal_text(const Refusal& refusal, const Places& places);
/// A whole line without its end: {"id":…,"ask":…,"<part>":<text>}.
std::string reply_line(const std::string& id, const std::string& ask, const char* part,
                       const std::string& text);

}  // namespace countsel
