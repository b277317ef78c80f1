// protocol/cli/arguments.cpp -- texts to JSON, a table from a file or a pipe.
#include "protocol/cli/arguments.hpp"

#include <fstream>
#include <iostream>
#include <iterator>

#include "protocol/catalogue.hpp"
#include "protocol/data/csv.hpp"

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
  if (!file) throw Misuse("cannot read the table " + path + ".");
  std::string text{std::istreambuf_iterator<char>(file), {}};
  if (file.bad()) throw Misuse("cannot read the table " + path + ".");
  return text;
}

/// Cells pasted from a sheet come tab-separated.
char delimiter_of(const std::string& text) {
  const auto line = text.substr(0, text.find('\n'));
  return line.find('\t') != std::string::npos ? '\t' : ',';
}

}  // namespace

Json option_value(const std::string& type, const std::string& text) {
  if (type != "text") {
    Json value = Json::parse(text, nullptr, false);
    if (!value.is_discarded())
      return type.rfind("list", 0) == 0 && !value.is_array() ? Json::array({value}) : value;
  }
  if (type.rfind("list", 0) == 0) {
    Json list = Json::array();
    for (std::size_t from = 0; from <= text.size() && !text.empty();) {
      const auto comma = std::min(text.find(',', from), text.size());
      list.push_back(text.substr(from, comma - from));
      from = comma + 1;
    }
    return list;
  }
  return text;
}

Request request_of(const AskArguments& asked) {
  Json request = {{"ask", asked.question}};
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
  request["of"] = of;
  request["with"] = with;
  if (!asked.words.empty()) request["words"] = pairs(asked.words, "word=text");
  Request read;
  {
    // The columns go straight into the request; only the small parts are written and read as JSON.
    read = Request{};
    read.ask = asked.question;
    read.of.given = true;
    read.of.rest = of;
    read.with = with;
    read.words = request.contains("words") ? request["words"] : Json();
  }
  if (table.empty()) return read;
  const std::string text = read_all(table);
  Table columns = read_delimited(text, delimiter_of(text), !asked.no_header);
  if (columns.uneven_row != 0) {
    throw Refusal(Code::length_mismatch,
                  "Row " + std::to_string(columns.uneven_row) + " of the table has " +
                      std::to_string(columns.uneven_cells) +
                      " cells, where the first row has another number.",
                  {}, "Give every row one cell for each column; quote cells that hold commas.");
  }
  read.of.columns.emplace();
  for (const auto& column : columns.columns) read.of.columns->push_back(*column);
  return read;
}

}  // namespace countsel
