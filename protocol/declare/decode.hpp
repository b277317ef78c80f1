// protocol/declare/decode.hpp -- from a request's options and words to a question's struct.
//
// Reads the declaration and nothing else: what is unknown, of the wrong type or out of bounds is
// refused here, with the nearest known name or the values allowed.
// Checked by: tests/protocol/request_keys_test.py, tests/protocol/catalogue_test.py.
#pragma once

#include "protocol/declare/question.hpp"
#include "protocol/wire/request.hpp"

namespace countsel {

/// Refuses unknown keys of the request, of `of`, `with`, `words` and `want`.
void check_keys(const Question& question, const Request& request);
/// Sets every option given; refuses bad_type and bad_value.
void set_options(const Question& question, const Json& with, Asked& asked);
/// One option from its JSON value, checked against its declaration.
void set_option(const OptionSpec& spec, const Json& value, Asked& asked);
Words read_words(const Json& words);
/// The parts wanted, checked.
std::vector<std::string> read_want(const Json& want);

/// What an option allows, for a hint: "a number above 0 and below 1".
std::string allowed_text(const OptionSpec& spec);

/// All parts of an answer, in order.
const std::vector<std::string>& answer_parts();

}  // namespace countsel
