// protocol/declare/spec.cpp -- reading an option's value, and refusing it so that a person can mend it.
#include "protocol/declare/spec.hpp"

#include "engine/refusal.hpp"
#include "protocol/declare/question.hpp"
#include "protocol/wire/brief.hpp"

namespace countsel {
namespace bind {

void wrong_type(const std::string& option, const std::string& wanted, const Json& got) {
  throw Refusal(Code::bad_type, option + " is " + brief_json(got) + "; it should be " + wanted + ".");
}

std::string level_of(const std::string& option, const Json& got) {
  if (got.is_string()) return got.get<std::string>();
  if (got.is_boolean()) return got.get<bool>() ? "true" : "false";
  if (got.is_number()) return number_text(got.get<double>());
  wrong_type(option, "the text of a level", got);
}

}  // namespace bind

bool has_count_columns(const std::vector<TableSpec>& tables) {
  for (const auto& table : tables)
    for (const auto& column : table.columns)
      if (column.style == Style::count) return true;
  return false;
}

OptionSpec mask_option() {
  auto spec =
      bind::number("mask_below", &Asked::mask_below,
                   "withhold counts under this, and what would give them away; the data's owner decides")
          .from(3)
          .to(1e9);
  spec.type = "whole";
  return spec;
}

std::vector<OptionSpec> cell_options() {
  std::vector<OptionSpec> options;
  const auto choice = [&](std::string name, std::string doc, std::vector<std::string> words, auto set,
                          auto get) {
    OptionSpec spec{.name = std::move(name), .type = "choice", .doc = std::move(doc)};
    spec.allowed = words;
    spec.set = [set](Asked& asked, const Json& got) { set(asked.cells, got.get<std::string>()); };
    spec.get = [get](const Asked& asked) { return Json(get(asked.cells)); };
    options.push_back(std::move(spec));
  };
  choice(
      "decimal", "the decimal mark of numbers that come as text", {".", ","},
      [](CellRules& rules, const std::string& word) {
        rules.decimal = word;
        rules.decimal_given = true;
      },
      [](const CellRules& rules) { return rules.decimal; });
  choice(
      "thousands", "the thousands mark of numbers that come as text", {"", ",", ".", " ", "'"},
      [](CellRules& rules, const std::string& word) { rules.thousands = word; },
      [](const CellRules& rules) { return rules.thousands; });
  choice(
      "error_cells", "what is done with a host's error cells such as #N/A", {"refuse", "skip"},
      [](CellRules& rules, const std::string& word) {
        rules.error_cells = word == "skip" ? ErrorCells::skip : ErrorCells::refuse;
      },
      [](const CellRules& rules) {
        return std::string(rules.error_cells == ErrorCells::skip ? "skip" : "refuse");
      });
  choice(
      "totals", "what is done with a totals row among the data", {"refuse", "skip", "keep"},
      [](CellRules& rules, const std::string& word) {
        rules.totals = word == "skip" ? Totals::skip : word == "keep" ? Totals::keep : Totals::refuse;
      },
      [](const CellRules& rules) {
        return std::string(rules.totals == Totals::skip   ? "skip"
                           : rules.totals == Totals::keep ? "keep"
                                                          : "refuse");
      });
  return options;
}

}  // namespace countsel
