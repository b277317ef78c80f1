// protocol/cli/help.hpp -- help from the declarations.
#pragma once

#include <iosfwd>
#include <string>

namespace countsel {

std::string main_footer();
std::string ask_footer();
/// The list of questions, or one explained; false (with a word to `errors`) if there is none of that name.
bool print_questions(std::ostream& out, std::ostream& errors, const std::string& name);

}  // namespace countsel
