// protocol/cli/arguments.cpp -- texts to JSON, a table from a file or a pipe.
#include "protocol/cli/arguments.hpp"

#include <filesystem>
#include <fstream>
#include <iostream>
#include <iterator>

#include "protocol/catalogue.hpp"
#include "protocol/data/columns.hpp"
#include "protocol/data/csv.hpp"
#include "protocol/data/source.hpp"

namespace countsel {
namespace {

std::pair<std::string, std::string> split(const std::string& text, const std::string& what) {
  const auto equals = text.find('=');
  if (equals == std::string::npos || equals == 0) {
    throw Misuse("\"" + text + "\" should be " + what + ".");
  }
  return {text.substr(0, equals), text.substr(equals + 1)};
}

Json pairs(const std::string& text, const std::string& what) {
  Json object = Json::object();
  for (std::size_t from = 0; from <= text.size();) {
    const auto comma = std::min(text.find(',', from), text.size());
    const auto [name, value] = split(text.substr(from, comma - from), what);
    object[name] = value;
    from = comma + 1;
  }
  return object;
}

std::string read_all(const std::string& path) {
  if (path == "-") return {std::istreambuf_iterator<char>(std::cin), {}};
  std::ifstream file(path, std::ios::binary);
  if (!file || std::filesystem::is_directory(path)) throw Misuse("cannot read the table " + path + ".");
  std::string text{std::istreambuf_iterator<char>(file), {}};
  if (file.bad()) throw Misuse("cannot read the table " + path + ".");
  return text;
}

/// Cells pasted from a sheet come tab-separated; where the comma is the decimal mark, CSV has semicolons.
char delimiter_of(const std::string& text) {
  const auto line = text.substr(0, text.find('\n'));
  for (const char delimiter : {'\t', ',', ';'}) {
    if (line.find(delimiter) != std::string::npos) return delimiter;
  }
  return ',';
}

}  // namespace

Json option_value(const std::string& type, const std::string& text) {
  if (type == "text" || type == "choice") return text;
  const bool list = type.rfind("list", 0) == 0;
  Json value = Json::parse(text, nullptr, false);
  if (!value.is_discarded()) return list && !value.is_array() ? Json::array({value}) : value;
  // "0.8,1.25" is a list without its brackets.
  value = Json::parse("[" + text + "]", nullptr, false);
  if (!value.is_discarded() && (list || value.size() > 1)) return value;
  if (!list) return text;
  Json words = Json::array();
  for (std::size_t from = 0; from <= text.size() && !text.empty();) {
    const auto comma = std::min(text.find(',', from), text.size());
    words.push_back(text.substr(from, comma - from));
    from = comma + 1;
  }
  return words;
}

Request request_of(const AskArguments& asked) {
  Json of = Json::object(), with = Json::object();
  const Question* question = find_question(asked.question);
  std::string table;
  for (const auto& argument : asked.arguments) {
    if (argument == "-" || argument.find('=') == std::string::npos) {
      if (!table.empty()) throw Misuse("two tables are named: " + table + " and " + argument + ".");
      table = argument;
      continue;
    }
    const auto [name, value] = split(argument, "option=value");
    std::string type = "any";
    if (question) {
      for (const auto& option : question->options) {
        if (option.name == name) type = option.type;
      }
    }
    with[name] = type == "object" && value.find('{') == std::string::npos ? pairs(value, "column=level")
                                                                          : option_value(type, value);
  }
  if (!asked.roles.empty()) of["roles"] = pairs(asked.roles, "role=column");
  for (const auto& only : asked.only) {
    const auto [column, value] = split(only, "column=value");
    of["only"][column].push_back(value);
  }
  // The columns go straight into the request, never through a text.
  Request request;
  request.ask = asked.question;
  request.of.given = true;
  request.of.rest = std::move(of);
  request.with = std::move(with);
  if (!asked.words.empty()) request.words = pairs(asked.words, "word=text");
  if (table.empty()) return request;
  const std::string text = read_all(table);
  const Table read = read_delimited(text, delimiter_of(text), !asked.no_header, marks_in(request.with));
  check_lengths(read);
  request.of.columns.emplace();
  for (const auto& column : read.columns) request.of.columns->push_back(*column);
  return request;
}

}  // namespace countsel
