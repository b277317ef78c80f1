// protocol/catalogue.hpp -- every question by name, in the order in which help lists them.
#pragma once

#include <string_view>
#include <vector>

#include "protocol/declare/question.hpp"

namespace countsel {

const std::vector<const Question*>& catalogue();
/// Null if there is none of that name.
const Question* find_question(std::string_view name);
std::vector<std::string> question_names();

}  // namespace countsel
