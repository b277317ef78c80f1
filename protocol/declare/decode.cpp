// protocol/declare/decode.cpp -- unknown keys, option values, words.
#include "protocol/declare/decode.hpp"

#include <algorithm>
#include <cmath>

#include "protocol/declare/nearest.hpp"
#include "protocol/wire/brief.hpp"
#include "protocol/wire/large_counts.hpp"

namespace countsel {
namespace {

[[noreturn]] void unknown_key(const std::string& where, const std::string& key,
                              const std::vector<std::string>& known) {
  const std::string near = nearest(key, known);
  std::string hint = near.empty() ? "" : "Did you mean \"" + near + "\"?";
  if (hint.empty() && !known.empty()) {
    hint = "Known: ";
    for (std::size_t i = 0; i < known.size(); ++i) hint += (i ? ", " : "") + known[i];
    hint += ".";
  }
  throw Refusal(Code::unknown_key, "\"" + brief(key) + "\" is not known " + where + ".", {}, std::move(hint));
}

const std::vector<std::string> word_keys = {"event", "events", "exposure", "period"};
const std::vector<std::string> outer_keys = {"id",    "ask",  "of",       "with",
                                             "words", "want", "within_s", "progress"};
const std::vector<std::string> form_keys = {"columns", "range", "held",   "file",
                                            "roles",   "only",  "origin", "header"};

std::string short_number(double value) { return number_text(value); }

}  // namespace

const std::vector<std::string>& answer_parts() {
  static const std::vector<std::string> parts = {"say",      "figures", "tables", "heads", "shown",
                                                 "headline", "picture", "method", "notes", "stamp"};
  return parts;
}

std::string allowed_text(const OptionSpec& spec) {
  if (!spec.allowed.is_null()) {
    std::string text = "one of ";
    for (std::size_t i = 0; i < spec.allowed.size(); ++i) text += (i ? ", " : "") + spec.allowed[i].dump();
    return text;
  }
  if (spec.type == "number" || spec.type == "whole") {
    std::string text = spec.type == "whole" ? "a whole number" : "a number";
    if (spec.above) text += " above " + short_number(*spec.above);
    if (spec.at_least) text += " from " + short_number(*spec.at_least);
    if ((spec.above || spec.at_least) && (spec.below || spec.at_most)) text += " and";
    if (spec.below) text += " below " + short_number(*spec.below);
    if (spec.at_most) text += " up to " + short_number(*spec.at_most);
    return text;
  }
  if (spec.type == "boolean") return "true or false";
  if (spec.type == "text") return "a text";
  if (spec.type == "level") return "the text of a level";
  return spec.type;
}

void check_keys(const Question& question, const Request& request) {
  if (request.unknown_key) unknown_key("in a request", *request.unknown_key, outer_keys);
  const bool data = !question.roles.empty();
  std::vector<std::string> of_known = question.of_keys;
  std::vector<std::string> role_names;
  for (const auto& role : question.roles) role_names.push_back(role.name);
  if (data) {
    of_known.insert(of_known.end(), role_names.begin(), role_names.end());
    of_known.insert(of_known.end(), form_keys.begin(), form_keys.end());
  }
  const auto known = [](const std::vector<std::string>& names, const std::string& key) {
    return std::find(names.begin(), names.end(), key) != names.end();
  };
  const auto& of = request.of;
  for (const auto& [key, value] : of.rest.items()) {
    if (!known(of_known, key)) unknown_key("in of for " + question.name, key, of_known);
  }
  if (of.columns && !known(of_known, "columns"))
    unknown_key("in of for " + question.name, "columns", of_known);
  if (of.range && !known(of_known, "range")) unknown_key("in of for " + question.name, "range", of_known);
  for (const auto& column : of.direct) {
    if (known(of_known, column.name)) continue;
    // Columns beside the roles are welcome where a question takes them, unless the name is so near to an
    // unfilled role's that it is a slip of the pen.
    if (question.as_sent) continue;
    if (question.takes_columns) {
      const auto slip = std::find_if(role_names.begin(), role_names.end(), [&](const std::string& role) {
        const bool filled = std::any_of(of.direct.begin(), of.direct.end(),
                                        [&](const Column& other) { return other.name == role; });
        return !filled && role.size() >= 4 && edit_distance(role, column.name) <= 2;
      });
      if (slip == role_names.end()) continue;
    }
    unknown_key("in of for " + question.name, column.name, of_known);
  }
  if (of.rest.contains("roles") && of.rest["roles"].is_object()) {
    for (const auto& [key, value] : of.rest["roles"].items()) {
      if (!known(role_names, key)) unknown_key("as a role of " + question.name, key, role_names);
    }
  }
  if (request.with.is_object()) {
    std::vector<std::string> options;
    for (const auto& option : question.options) options.push_back(option.name);
    for (const auto& [key, value] : request.with.items()) {
      if (!known(options, key)) unknown_key("as an option of " + question.name, key, options);
    }
  }
  if (request.words.is_object()) {
    for (const auto& [key, value] : request.words.items()) {
      if (!known(word_keys, key)) unknown_key("in words", key, word_keys);
    }
  }
}

void set_option(const OptionSpec& spec, const Json& value, Asked& asked) {
  const auto wrong = [&] { bind::wrong_type(spec.name, allowed_text(spec), value); };
  const auto refuse = [&] {
    const Json standard = spec.get ? spec.get(asked) : Json();
    throw Refusal(Code::bad_value,
                  spec.name + " is " + brief_json(value) + "; it should be " + allowed_text(spec) + ".", {},
                  standard.is_null() ? "" : "The default is " + standard.dump() + ".");
  };
  if (spec.type == "number" || spec.type == "whole") {
    if (!value.is_number()) wrong();
    const double number =
        value.is_number_unsigned() ? beyond_largest_count(value.get<std::uint64_t>()) : value.get<double>();
    if (spec.type == "whole" && number != std::trunc(number)) refuse();
    if ((spec.above && !(number > *spec.above)) || (spec.below && !(number < *spec.below)) ||
        (spec.at_least && !(number >= *spec.at_least)) || (spec.at_most && !(number <= *spec.at_most))) {
      refuse();
    }
  } else if (spec.type == "choice") {
    if (!value.is_string()) wrong();
    if (std::find(spec.allowed.begin(), spec.allowed.end(), value) == spec.allowed.end()) {
      std::vector<std::string> words;
      for (const auto& word : spec.allowed) words.push_back(word.get<std::string>());
      const std::string near = nearest(value.get<std::string>(), words);
      throw Refusal(
          Code::bad_value,
          spec.name + " is " + brief_json(value) + "; it should be " + allowed_text(spec) + ".", {},
          near.empty() ? "The default is " + spec.get(asked).dump() + "." : "Did you mean \"" + near + "\"?");
    }
  } else if (spec.type == "boolean") {
    if (!value.is_boolean()) wrong();
  } else if (spec.type == "text") {
    if (!value.is_string()) wrong();
  }
  spec.set(asked, value);
}

void set_options(const Question& question, const Json& with, Asked& asked) {
  if (!with.is_object()) return;
  for (const auto& spec : question.options) {
    const auto given = with.find(spec.name);
    if (given != with.end() && !given->is_null()) set_option(spec, *given, asked);
  }
  if (asked.cells.decimal_given && asked.cells.thousands == asked.cells.decimal) {
    throw Refusal(Code::bad_value,
                  "decimal and thousands are both \"" + asked.cells.decimal + "\"; they should differ.");
  }
}

Words read_words(const Json& words) {
  Words read;
  if (!words.is_object()) return read;
  const std::pair<const char*, std::string*> parts[] = {{"event", &read.event},
                                                        {"events", &read.events},
                                                        {"exposure", &read.exposure},
                                                        {"period", &read.period}};
  for (const auto& [key, into] : parts) {
    const auto given = words.find(key);
    if (given == words.end() || given->is_null()) continue;
    if (!given->is_string()) bind::wrong_type(std::string("words.") + key, "a text", *given);
    *into = given->get<std::string>();
  }
  return read;
}

std::vector<std::string> read_want(const Json& want) {
  const auto& parts = answer_parts();
  std::vector<std::string> wanted;
  if (want.is_null()) {
    for (const auto& part : parts) {
      if (part != "shown") wanted.push_back(part);
    }
    return wanted;
  }
  if (!want.is_array()) bind::wrong_type("want", "a list of parts of the answer", want);
  for (const auto& part : want) {
    if (!part.is_string()) bind::wrong_type("want", "a list of parts of the answer", part);
    const auto& name = part.get_ref<const std::string&>();
    if (std::find(parts.begin(), parts.end(), name) == parts.end()) {
      std::string hint = "Known: ";
      for (std::size_t i = 0; i < parts.size(); ++i) hint += (i ? ", " : "") + parts[i];
      const std::string near = nearest(name, parts);
      throw Refusal(Code::bad_value, "want names \"" + name + "\", which is no part of an answer.", {},
                    near.empty() ? hint + "." : "Did you mean \"" + near + "\"?");
    }
    wanted.push_back(name);
  }
  return wanted;
}

}  // namespace countsel
