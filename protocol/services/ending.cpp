// protocol/services/ending.cpp -- ending a request, ending the program.
#include "protocol/services/service.hpp"
#include "protocol/wire/brief.hpp"

namespace countsel {
namespace {

struct Nothing : Asked {};

Answer stop(const Nothing&, Context& context) {
  const std::string& id = context.request->of.id;
  const Json given = context.request->of.rest.value("id", Json());
  if (id.empty() && !given.is_null()) {
    bind::wrong_type("of.id", "the id of a request, text or a whole number", given);
  }
  if (id.empty()) {
    throw Refusal(Code::missing, "cancel needs of.id, the id of the request to end.", {},
                  R"(For example "of":{"id":7}.)");
  }
  // The cancel itself is pending as well; it cannot be meant.
  if (id == context.request->id_plain || !context.session->cancel(id)) {
    throw Refusal(Code::not_found, "No request with the id " + brief(id) + " is pending.", {},
                  "It may have been answered already.");
  }
  return {.say = "The request with the id " + brief(id) + " is cancelled."};
}

Answer leave(const Nothing&, Context& context) {
  context.session->end();
  return {.say = "Goodbye."};
}

}  // namespace

extern const Question cancel = service<Nothing>(
    {.name = "cancel", .asks = "Ends a request that is pending or running.", .answer = stop}, {"id"});

extern const Question goodbye = service<Nothing>(
    {.name = "goodbye", .asks = "Answers what is pending, then ends the program.", .answer = leave});

}  // namespace countsel
