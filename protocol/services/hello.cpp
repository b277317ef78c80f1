// protocol/services/hello.cpp -- who is there, what it takes, in which order it answers.
#include "protocol/services/service.hpp"

namespace countsel {
namespace {

enum class Order { as_asked, as_finished };

struct Hello : Asked {
  Order order = Order::as_asked;
};

Answer answer(const Hello& asked, Context& context) {
  // Said again without `order`, the order stays as it was asked for before.
  const auto& with = context.request->with;
  if (with.is_object() && with.contains("order")) {
    context.session->order_as_finished(asked.order == Order::as_finished);
  }
  const auto& options = context.session->options();
  Answer answer{.say = "Countsel " COUNTSEL_VERSION " is ready."};
  answer.figures = {{"version", COUNTSEL_VERSION},
                    {"protocol", 1.0},
                    {"workers", static_cast<double>(context.session->workers())},
                    {"longest_line", static_cast<double>(options.longest_line)},
                    {"deepest_nesting", 64.0},
                    {"files", !options.files.empty()}};
  return answer;
}

}  // namespace

extern const Question hello = service<Hello>(
    {.name = "hello",
     .asks = "Says who is there and what its limits are; sets the order of replies.",
     .options = {bind::choice("order", &Hello::order, "in which order replies come",
                              {{"as_asked", Order::as_asked}, {"as_finished", Order::as_finished}})},
     .figures = {{"version", Style::text, "version of the program"},
                 {"protocol", Style::whole, "version of the wire's language"},
                 {"workers", Style::whole, "requests worked on at the same time"},
                 {"longest_line", Style::whole, "bytes a line may have"},
                 {"deepest_nesting", Style::whole, "levels a line may nest"},
                 {"files", Style::text, "whether tables may be read from files"}},
     .answer = answer,
     .examples = {R"({"ask":"hello"})"}});

}  // namespace countsel
