// protocol/questions/terms.cpp -- reading terms, choosing columns, handing them to the engine.
#include "protocol/questions/terms.hpp"

#include <algorithm>
#include <cmath>

#include "protocol/data/cells.hpp"
#include "protocol/declare/nearest.hpp"
#include "protocol/wording/words.hpp"

namespace countsel {
namespace {

constexpr const char* examples =
    R"(For example "age", {"levels":"zone"}, {"log":"pressure","plus":1}, {"power":"age","to":2}, {"cross":["material","soil"]}.)";

[[noreturn]] void bad_term(const Json& given, const std::string& why) {
  throw Refusal(Code::bad_value, "The term " + given.dump() + " " + why, {}, examples);
}

std::string column_of(const Json& term, const char* key) {
  if (!term[key].is_string()) bad_term(term, std::string("should name a column under \"") + key + "\".");
  return term[key].get<std::string>();
}

void only_keys(const Json& term, std::initializer_list<const char*> known) {
  for (const auto& [key, value] : term.items()) {
    if (std::find(known.begin(), known.end(), key) == known.end()) {
      throw Refusal(Code::unknown_key, "\"" + key + "\" is not known in the term " + term.dump() + ".", {},
                    examples);
    }
  }
}

double number_at(const Json& term, const char* key, double standard) {
  if (!term.contains(key)) return standard;
  if (!term[key].is_number()) bad_term(term, std::string("has no number under \"") + key + "\".");
  return term[key].get<double>();
}

AskedTerm read_term(const Json& given) {
  AskedTerm term;
  if (given.is_string()) {
    term.column = given.get<std::string>();
    return term;
  }
  if (!given.is_object()) {
    throw Refusal(Code::bad_type,
                  "A term is " + given.dump() + "; it should be a column's name or an object.", {}, examples);
  }
  if (given.contains("levels")) {
    only_keys(given, {"levels"});
    term.kind = AskedTerm::Kind::levels;
    term.column = column_of(given, "levels");
  } else if (given.contains("log")) {
    only_keys(given, {"log", "plus"});
    term.kind = AskedTerm::Kind::log;
    term.column = column_of(given, "log");
    term.plus = number_at(given, "plus", 0);
  } else if (given.contains("power")) {
    only_keys(given, {"power", "to"});
    term.kind = AskedTerm::Kind::power;
    term.column = column_of(given, "power");
    if (!given.contains("to")) bad_term(given, "needs a number under \"to\".");
    term.to = number_at(given, "to", 1);
  } else if (given.contains("cross")) {
    only_keys(given, {"cross"});
    term.kind = AskedTerm::Kind::cross;
    if (!given["cross"].is_array() || given["cross"].size() < 2)
      bad_term(given, "should list two or more terms to cross.");
    for (const auto& part : given["cross"]) term.parts.push_back(read_term(part));
  } else {
    std::string near;
    for (const auto& [key, value] : given.items()) near = nearest(key, {"levels", "log", "power", "cross"});
    throw Refusal(Code::bad_value, "The term " + given.dump() + " is of no known kind.", {},
                  near.empty() ? examples : "Did you mean \"" + near + "\"?");
  }
  return term;
}

bool whole_texts_are_numbers(const Column& column) {
  return !column.texts.empty() &&
         std::all_of(column.texts.begin(), column.texts.end(), [](const std::string& text) {
           return read_number(text, CellRules()).reads != Reads::no_number;
         });
}

/// A bare name: numbers are a slope, texts are levels. What is mixed is read as numbers and refused there.
Holds kind_of(const Column& column) {
  if (column.levels_only) return Holds::levels;
  if (!column.numbers.empty()) return Holds::number;
  return whole_texts_are_numbers(column) ? Holds::number : Holds::levels;
}

bool looks_like_identifier(const Column& column) {
  const std::size_t rows = column.size();
  if (rows < 10) return false;
  if (column.numbers.empty()) return column.texts.size() > std::max<std::size_t>(20, rows / 2);
  if (!column.all_numbers()) return false;
  for (std::size_t i = 0; i < rows; ++i) {
    if (column.numbers[i] != std::trunc(column.numbers[i])) return false;
    if (i > 0 && column.numbers[i] != column.numbers[i - 1] + 1) return false;
  }
  return true;
}

void collect(AskedTerm& term, const std::vector<const Column*>& columns,
             std::vector<std::pair<std::string, Holds>>& needed) {
  for (auto& part : term.parts) collect(part, columns, needed);
  if (term.kind == AskedTerm::Kind::cross) return;
  Holds holds = term.kind == AskedTerm::Kind::levels ? Holds::levels : Holds::number;
  if (term.kind == AskedTerm::Kind::by_column) {
    const auto at =
        std::find_if(columns.begin(), columns.end(), [&](const Column* c) { return c->name == term.column; });
    if (at != columns.end()) holds = kind_of(**at);
    if (holds == Holds::levels) term.kind = AskedTerm::Kind::levels;
  }
  const std::pair<std::string, Holds> need{term.column, holds};
  if (std::find(needed.begin(), needed.end(), need) == needed.end()) needed.push_back(need);
}

Term engine_term(const AskedTerm& asked, const std::vector<SourceColumn>& columns) {
  const auto index = [&](bool levels) {
    for (std::size_t i = 0; i < columns.size(); ++i) {
      if (columns[i].name == asked.column && (columns[i].levels != nullptr) == levels) return i;
    }
    throw std::logic_error("a term's column was not taken in");
  };
  switch (asked.kind) {
    case AskedTerm::Kind::levels:
      return levels_of(index(true));
    case AskedTerm::Kind::log:
      return log_of(index(false), asked.plus);
    case AskedTerm::Kind::power:
      return power_of(index(false), asked.to);
    case AskedTerm::Kind::cross: {
      std::vector<Term> parts;
      for (const auto& part : asked.parts) parts.push_back(engine_term(part, columns));
      return cross_of(std::move(parts));
    }
    default:
      return slope_of(index(false));
  }
}

}  // namespace

void read_terms(AskedTerms& terms, const Json& given) {
  if (!given.is_array()) bind::wrong_type("terms", "a list of terms", given);
  terms.given = true;
  for (const auto& term : given) terms.list.push_back(read_term(term));
}

void read_references(AskedTerms& terms, const Json& given) {
  if (!given.is_object()) bind::wrong_type("reference", R"(an object such as {"material":"pvc"})", given);
  for (const auto& [column, level] : given.items()) {
    terms.references.emplace_back(column, bind::level_of("reference." + column, level));
  }
}

std::vector<std::pair<std::string, Holds>> columns_for_terms(AskedTerms& terms,
                                                             const std::vector<const Column*>& columns,
                                                             std::vector<Note>& notes) {
  if (!terms.given) {
    std::vector<std::string> used, left_out;
    for (const auto* column : columns) {
      if (looks_like_identifier(*column)) {
        left_out.push_back(column->name);
        continue;
      }
      AskedTerm term;
      term.column = column->name;
      terms.list.push_back(term);
      used.push_back(column->name);
    }
    notes.push_back(
        {"terms_chosen",
         used.empty()
             ? "No terms were named and no column is left without a role: the baseline alone."
             : "No terms were named, so every column without a role is one: " + listed(used, 30) + "."});
    if (!left_out.empty()) {
      notes.push_back({"identifier_left_out", listed(left_out, 30) +
                                                  (left_out.size() == 1 ? " looks like an identifier and is"
                                                                        : " look like identifiers and are") +
                                                  " left out; name it in terms to use it."});
    }
  }
  std::vector<std::pair<std::string, Holds>> needed;
  for (auto& term : terms.list) collect(term, columns, needed);
  for (const auto& [column, level] : terms.references) {
    const auto used =
        std::find(needed.begin(), needed.end(), std::pair<std::string, Holds>(column, Holds::levels));
    if (used != needed.end()) continue;
    throw Refusal(Code::bad_value, "reference names \"" + column + "\", which is no term with levels.", {},
                  "Name columns that are used as levels.");
  }
  return needed;
}

ModelTerms engine_terms(const AskedTerms& terms, const std::vector<Role>& extra) {
  ModelTerms model;
  for (const auto& role : extra) {
    SourceColumn column;
    column.name = role.column;
    if (!role.codes.empty()) {
      column.codes = role.codes;
      column.levels = &role.levels;
      for (const auto& [name, level] : terms.references) {
        if (name != role.column) continue;
        if (std::find(role.levels.begin(), role.levels.end(), level) == role.levels.end()) {
          const std::string near = nearest(level, role.levels);
          throw Refusal(Code::bad_value, "The reference \"" + level + "\" is no level of " + name + ".",
                        {{name, 0}},
                        near.empty() ? "The levels are " + listed(role.levels, 12) + "."
                                     : "Did you mean \"" + near + "\"?");
        }
        column.reference = level;
      }
    } else {
      column.numbers = role.numbers;
    }
    model.columns.push_back(std::move(column));
  }
  for (const auto& term : terms.list) model.terms.push_back(engine_term(term, model.columns));
  return model;
}

}  // namespace countsel
