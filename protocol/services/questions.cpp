// protocol/services/questions.cpp -- the catalogue, for adapters and for help.
#include "protocol/catalogue.hpp"
#include "protocol/declare/describe.hpp"
#include "protocol/declare/nearest.hpp"
#include "protocol/services/service.hpp"

namespace countsel {
namespace {

struct Questions : Asked {
  std::string name;
};

Answer answer(const Questions& asked, Context&) {
  Json list = Json::array();
  for (const auto* question : catalogue()) {
    if (asked.name.empty() || question->name == asked.name) list.push_back(describe(*question));
  }
  if (list.empty()) {
    const std::string near = nearest(asked.name, question_names());
    throw Refusal(Code::not_found, "There is no question \"" + asked.name + "\".", {},
                  near.empty() ? "" : "Did you mean \"" + near + "\"?");
  }
  Answer answer{.say = list.size() == 1 ? list[0]["asks"].get<std::string>()
                                        : "There are " + std::to_string(list.size()) + " questions."};
  answer.more = {{"questions", std::move(list)}};
  return answer;
}

}  // namespace

extern const Question questions =
    service<Questions>({.name = "questions",
                        .asks = "Lists the questions with all that they take and answer, and their sources.",
                        .options = {bind::text("name", &Questions::name, "only this question")},
                        .answer = answer,
                        .examples = {R"({"ask":"questions","with":{"name":"how_often"}})"}});

}  // namespace countsel
