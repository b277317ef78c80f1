// protocol/catalogue.cpp -- the one list of questions. A new question is one file and one line here.
#include "protocol/catalogue.hpp"

namespace countsel {

extern const Question how_often, on_target, which_higher, do_they_differ, who_stands_out, same_mix,
    within_strata_question, rate_or_mix_question, does_it_climb, how_likely, is_it_poisson, what_drives;
extern const Question hello, questions, quick, look_over, hold, held, release, condense, cancel, goodbye;

const std::vector<const Question*>& catalogue() {
  static const std::vector<const Question*> all = {
      &how_often,
      &on_target,
      &which_higher,
      &do_they_differ,
      &who_stands_out,
      &same_mix,
      &within_strata_question,
      &rate_or_mix_question,
      &does_it_climb,
      &how_likely,
      &is_it_poisson,
      &what_drives,  // about rates
      &hello,
      &questions,
      &quick,
      &look_over,
      &hold,
      &held,
      &release,
      &condense,
      &cancel,
      &goodbye,
  };
  return all;
}

const Question* find_question(std::string_view name) {
  for (const auto* question : catalogue()) {
    if (question->name == name) return question;
  }
  return nullptr;
}

std::vector<std::string> question_names() {
  std::vector<std::string> names;
  for (const auto* question : catalogue()) names.push_back(question->name);
  return names;
}

}  // namespace countsel
