// protocol/session/answering.cpp -- the order of checks that the contract fixes, in one place.
#include "protocol/session/answering.hpp"

#define XXH_INLINE_ALL
#include <xxhash.h>

#include <new>

#include "protocol/catalogue.hpp"
#include "protocol/data/intake.hpp"
#include "protocol/declare/decode.hpp"
#include "protocol/declare/nearest.hpp"
#include "protocol/masking/mask.hpp"
#include "protocol/session/memory.hpp"
#include "protocol/session/quiet_look.hpp"
#include "protocol/wire/brief.hpp"
#include "protocol/wire/reply.hpp"
#include "protocol/wording/cautions.hpp"

namespace countsel {
namespace {

/// Digest of question, options (with their defaults) and the cells of the columns used.
std::uint64_t digest_of(const Question& question, const Json& with, const Asked& defaults,
                        const Casting& casting, const Asked& asked, const Json& rest, bool with_counts) {
  XXH3_state_t state;
  XXH3_64bits_reset(&state);
  const auto text = [&state](const std::string& part) {
    XXH3_64bits_update(&state, part.c_str(), part.size() + 1);
  };
  const auto number = [&state](std::uint64_t part) { XXH3_64bits_update(&state, &part, sizeof part); };
  text(question.name);
  for (const auto& option : question.options) {
    Json value = with.is_object() ? with.value(option.name, Json()) : Json();
    if (value.is_null()) value = option.get(defaults);
    text(option.name);
    text(value.is_number() ? number_text(value.get<double>()) : value.dump());
  }
  for (std::size_t i = 0; i < casting.roles.size(); ++i) {
    // A digest of withheld counts would let them be found by trying.
    if (!casting.roles[i] || (!with_counts && question.roles[i].holds == Holds::count)) continue;
    text(question.roles[i].name);
    number(casting.roles[i]->digest);
  }
  for (const auto& extra : asked.extra) {
    text(extra.column);
    number(extra.source ? extra.source->digest : 0);
  }
  if (rest.contains("only")) text(rest["only"].dump());
  return XXH3_64bits_digest(&state);
}

}  // namespace

Reply refuse(const Refusal& refusal) { return {"refused", refusal_text(refusal, Places())}; }

Refusal current_trouble() {
  try {
    throw;
  } catch (const Refusal& refusal) {
    return refusal;
  } catch (const std::bad_alloc&) {
    return Refusal(Code::out_of_memory, "There is not enough memory for this request.", {},
                   "Send fewer rows or columns, or release held tables.");
  } catch (const std::length_error&) {
    return Refusal(Code::out_of_memory, "There is not enough memory for this request.");
  } catch (const std::exception& error) {
    return Refusal(Code::internal, std::string("Something went wrong inside Countsel: ") + error.what(), {},
                   "This is a fault of the program, not of the data. Please report the request.");
  }
}

const Question& question_of(const Request& request) {
  if (request.trouble) throw *request.trouble;
  if (request.ask_trouble) throw *request.ask_trouble;
  if (request.ask.empty()) {
    throw Refusal(Code::unknown_ask, "The request asks nothing.", {},
                  R"(Give "ask" the name of a question; {"ask":"questions"} lists them.)");
  }
  const Question* question = find_question(request.ask);
  if (!question) {
    const std::string near = nearest(request.ask, question_names());
    throw Refusal(Code::unknown_ask, "\"" + brief(request.ask) + "\" is no question that Countsel knows.", {},
                  near.empty() ? R"({"ask":"questions"} lists them.)" : "Did you mean \"" + near + "\"?");
  }
  check_keys(*question, request);
  if (request.type_trouble) throw *request.type_trouble;
  return *question;
}

Reply answer_request(Request& request, const Question& question, std::shared_ptr<const Table> table,
                     Context context) {
  Places places;
  try {
    const Json& rest = request.of.rest;
    context.request = &request;
    context.table = table;
    static const Table empty;
    const Table& data = table ? *table : empty;
    Casting casting;
    if (!question.roles.empty()) casting = cast_roles(question, data, rest);
    const auto defaults = question.make(), asked = question.make();
    asked->words = read_words(request.words);
    const auto wanted = read_want(request.want);
    set_options(question, request.with, *asked);
    if (!question.roles.empty()) {
      places = Places(data, origin_of(rest).value_or(data.origin));
      check_room(data.rows(), data.columns.size());
      context.casting = &casting;
      context.places = &places;
      if (!question.as_sent) {
        try {
          take_in(question, data, casting, places, *asked, context.notes);
        } catch (Refusal& refusal) {
          hint_at_rates(question, casting, refusal);
          throw;
        }
      }
      if (!question.service) look_quietly(question, *asked, places, context.notes);
    }
    context.work.progress.check();
    Answer answer = question.answer(*asked, context);
    const bool masked = mask_counts(question, *asked, context, answer);
    std::vector<Note> notes = std::move(context.notes);
    for (auto& note : answer.notes) notes.push_back(std::move(note));
    answer.notes = std::move(notes);
    if (!question.service) add_cautions(answer);
    if (!request.read_as.is_null()) answer.more = request.read_as;
    const Wording wording(asked->words, asked->frame());
    const auto digest =
        question.service ? 0 : digest_of(question, request.with, *defaults, casting, *asked, rest, !masked);
    return {"answer", answer_text(question, answer, wording, places, wanted, digest)};
  } catch (...) {
    return {"refused", refusal_text(current_trouble(), places)};
  }
}

}  // namespace countsel
