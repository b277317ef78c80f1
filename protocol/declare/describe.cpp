// protocol/declare/describe.cpp -- the catalogue that adapters and help are made from.
#include "protocol/declare/describe.hpp"

#include <cmath>

namespace countsel {
namespace {

const char* style_name(Style style) {
  static constexpr const char* names[] = {"text",   "count", "exposure", "rate",      "every",
                                          "ratio",  "log",   "p_value",  "statistic", "share",
                                          "number", "whole", "level"};
  return names[static_cast<std::size_t>(style)];
}

/// A whole number without a point.
Json plain(Json value) {
  if (!value.is_number_float()) return value;
  const double number = value.get<double>();
  if (number != std::trunc(number) || std::abs(number) > 9007199254740992.0) return value;
  return static_cast<std::int64_t>(number);
}

}  // namespace

const char* holds_name(Holds holds) {
  static constexpr const char* names[] = {
      "count",          "exposure", "number above 0", "number from 0",
      "number",         "levels",   "label",          "numbers or levels in order",
      "exposure from 0"};
  return names[static_cast<std::size_t>(holds)];
}

Json describe(const Question& question) {
  Json document = {{"name", question.name}, {"asks", question.asks}, {"service", question.service}};
  document["takes_columns"] = question.takes_columns;
  document["roles"] = Json::array();
  for (const auto& role : question.roles) {
    document["roles"].push_back({{"name", role.name},
                                 {"required", role.required},
                                 {"holds", holds_name(role.holds)},
                                 {"doc", role.doc}});
  }
  if (!question.either.empty()) document["either"] = question.either;
  const auto defaults = question.make();
  document["options"] = Json::array();
  for (const auto& option : question.options) {
    Json entry = {{"name", option.name}, {"type", option.type}, {"default", plain(option.get(*defaults))}};
    if (!option.allowed.is_null()) entry["allowed"] = option.allowed;
    if (option.above) entry["above"] = plain(*option.above);
    if (option.below) entry["below"] = plain(*option.below);
    if (option.at_least) entry["from"] = plain(*option.at_least);
    if (option.at_most) entry["to"] = plain(*option.at_most);
    if (!option.unit.empty()) entry["unit"] = option.unit;
    entry["doc"] = option.doc;
    document["options"].push_back(std::move(entry));
  }
  document["figures"] = Json::array();
  for (const auto& figure : question.figures) {
    document["figures"].push_back(
        {{"name", figure.name}, {"style", style_name(figure.style)}, {"doc", figure.doc}});
  }
  document["tables"] = Json::array();
  for (const auto& table : question.tables) {
    Json columns = Json::array();
    for (const auto& column : table.columns) {
      columns.push_back({{"name", column.name}, {"style", style_name(column.style)}});
    }
    document["tables"].push_back({{"name", table.name}, {"doc", table.doc}, {"columns", std::move(columns)}});
  }
  document["methods"] = Json::array();
  for (const auto& source : question.sources) {
    document["methods"].push_back({{"name", source.name}, {"source", source.publication}});
  }
  document["headline"] = question.headline.empty() ? Json() : Json(question.headline);
  document["examples"] = Json::array();
  for (const auto& example : question.examples) document["examples"].push_back(Json::parse(example));
  return document;
}

}  // namespace countsel
