// protocol/services/quick.cpp -- from what was said to a request, and to a sentence that says it back.
#include "protocol/services/quick.hpp"

#include <algorithm>
#include <cmath>

#include "protocol/catalogue.hpp"
#include "protocol/services/quick_line.hpp"
#include "protocol/services/service.hpp"
#include "protocol/wire/request_reader.hpp"
#include "protocol/wording/numbers.hpp"
#include "protocol/wording/words.hpp"

namespace countsel {
namespace {

struct Quick : Asked {};

/// The first unit said, refusing a different one: units are never converted.
std::string one_unit(const std::vector<std::string>& said, const char* what) {
  std::string unit;
  for (const auto& word : said) {
    if (word.empty()) continue;
    if (unit.empty() || singular(word) == unit) {
      unit = word;
    } else if (singular(word) != singular(unit)) {
      throw Refusal(Code::bad_value,
                    "The line names two different " + std::string(what) + ": " + unit + " and " + word + ".",
                    {}, "Bring both to one unit first; nothing is converted silently.");
    }
  }
  return unit;
}

/// The smallest power of ten, from 1, by which the smallest rate shows a digit before the point. A
/// count of 0 is judged by its upper limit, about 3 events.
double fitting_base(const SpokenLine& line) {
  double smallest = INFINITY;
  for (const auto* pair : {&line.first, line.second ? &*line.second : &line.first}) {
    if (!pair->exposure || !(*pair->exposure > 0)) continue;
    smallest =
        std::min(smallest, std::max(pair->count, pair->count == 0 ? 3.0 : pair->count) / *pair->exposure);
  }
  double base = 1;
  while (std::isfinite(smallest) && smallest * base < 1 && base < 1e12) base *= 10;
  return base;
}

std::string said_back(const SpokenPair& pair, const std::string& events, const std::string& unit) {
  std::string text = given_text(pair.count);
  if (!events.empty()) text += " " + (pair.count == 1 ? singular(events) : events);
  if (pair.exposure) text += " in " + given_text(*pair.exposure) + (unit.empty() ? "" : " " + unit);
  return text;
}

/// A whole number without a point, so that the request reads as a person would write it.
Json plain(double value) {
  if (value == std::trunc(value) && std::abs(value) < 9007199254740992.0)
    return Json(static_cast<std::int64_t>(value));
  return Json(value);
}

Answer answer(const Quick&, Context&) {
  throw std::logic_error("a quick line is answered by what it was read as");
}

}  // namespace

const Question& read_quick(Request& request) {
  const auto line_at = request.of.rest.find("line");
  if (line_at == request.of.rest.end() || line_at->is_null()) {
    throw Refusal(Code::missing, "quick needs of.line, the line to read.", {},
                  R"(For example "of":{"line":"7 in 1200 per 1000"}.)");
  }
  if (!line_at->is_string()) bind::wrong_type("of.line", "a text", *line_at);
  const SpokenLine line = read_spoken(line_at->get<std::string>());

  const auto& second = line.second;
  std::string events = one_unit({line.first.events, second ? second->events : ""}, "kinds of events");
  std::string unit =
      one_unit({line.first.unit, second ? second->unit : "", line.per_unit}, "units of exposure");
  // "per bed-day" and "1 fall" come in the singular; sentences want the plural.
  const auto plural = [](const std::string& word) {
    return word.empty() || singular(word) != word || word.find(' ') != std::string::npos ? word : word + "s";
  };
  if (!events.empty()) events = plural(events);
  if (!unit.empty() && line.first.unit.empty() && (!second || second->unit.empty())) unit = plural(unit);

  Json read = Json::object();
  Json of = Json::object(), with = Json::object();
  const double per = line.per ? *line.per : fitting_base(line);
  std::string sentence = said_back(line.first, events, unit);
  if (second) {
    read["ask"] = "which_higher";
    of["count"] = {plain(line.first.count), plain(second->count)};
    if (!line.first.exposure) {
      throw Refusal(Code::bad_value, "Two counts cannot be compared without what was observed for each.", {},
                    "Say it like \"14 in 2,300 vs 5 in 2,100\".");
    }
    of["exposure"] = {plain(*line.first.exposure), plain(*second->exposure)};
    of["group"] = {"the first", "the second"};
    with["reference"] = "the second";
    sentence += " vs " + said_back(*second, events, unit);
  } else {
    read["ask"] = line.target_rate ? "on_target" : "how_often";
    of["count"] = plain(line.first.count);
    if (line.first.exposure) of["exposure"] = plain(*line.first.exposure);
    if (line.target_rate) {
      with["target_rate"] = plain(*line.target_rate);
      sentence += " against " + given_text(*line.target_rate);
    }
  }
  const Question* question = find_question(read["ask"].get<std::string>());
  if (!question) {
    throw Refusal(Code::bad_value, "A rate to compare with cannot be used yet.", {},
                  "Say it like \"14 in 2,300 vs 5 in 2,100\".");
  }
  if (line.first.exposure || line.per) {
    with["per"] = plain(per);
    sentence += (line.target_rate ? " per " : ", per ") + given_text(per) + (unit.empty() ? "" : " " + unit);
  }
  const double confidence = line.confidence.value_or(0.95);
  with["confidence"] = confidence;
  sentence += ", at " + percent_text(confidence);
  read["of"] = std::move(of);
  read["with"] = std::move(with);
  Json words = Json::object();
  if (!events.empty()) words["events"] = events;
  if (!unit.empty()) words["exposure"] = unit;
  // What the asker says outright goes before what the line says in passing.
  if (request.words.is_object()) {
    for (const auto& [key, value] : request.words.items()) words[key] = value;
  }
  if (!words.empty()) read["words"] = words;

  Request inner = read_request(read.dump());
  inner.id = request.id;
  inner.id_plain = request.id_plain;
  inner.want = request.want;
  inner.progress = request.progress;
  inner.within_s = request.within_s;
  inner.read_as = {{"read_as", std::move(read)}, {"sentence", std::move(sentence)}};
  if (!line.per && line.first.exposure) inner.read_as["base_chosen"] = plain(per);
  request = std::move(inner);
  return *question;
}

extern const Question quick =
    service<Quick>({.name = "quick",
                    .asks = "Reads a line as spoken in a meeting and answers it.",
                    .answer = answer,
                    .examples = {R"({"ask":"quick","of":{"line":"7 in 1200 per 1000"}})",
                                 R"({"ask":"quick","of":{"line":"14 in 2300 vs 5 in 2100"}})",
                                 R"({"ask":"quick","of":{"line":"0 in 5000 at 90%"}})"}},
                   {"line"});

}  // namespace countsel
