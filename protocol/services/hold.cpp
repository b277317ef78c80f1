// protocol/services/hold.cpp -- tables kept between requests: hold, held, release.
#include <algorithm>
#include <limits>
#include <unordered_set>

#include "protocol/data/columns.hpp"
#include "protocol/data/places.hpp"
#include "protocol/declare/nearest.hpp"
#include "protocol/services/held_tables.hpp"
#include "protocol/services/service.hpp"

namespace countsel {
namespace {

struct Named : Asked {
  std::string name;
};

std::string kind_of(const Column& column) {
  const bool numbers = !column.numbers.empty();
  const bool texts =
      !column.texts.empty() || std::any_of(column.tags.begin(), column.tags.end(),
                                           [](auto tag) { return tag == tag::yes || tag == tag::no; });
  return numbers && texts ? "numbers and texts" : numbers ? "numbers" : texts ? "levels" : "blank";
}

/// Distinct numbers, or NaN beyond 1,000: then it is no set of levels and the count is worth no time.
double distinct_numbers(const std::vector<double>& numbers) {
  std::unordered_set<double> seen;
  for (const double value : numbers) {
    if (value == value) seen.insert(value);
    if (seen.size() > 1000) return std::numeric_limits<double>::quiet_NaN();
  }
  return static_cast<double>(seen.size());
}

double distinct_booleans(const Column& column) {
  const auto has = [&](auto tag) {
    return std::find(column.tags.begin(), column.tags.end(), tag) != column.tags.end();
  };
  return (has(tag::yes) ? 1 : 0) + (has(tag::no) ? 1 : 0);
}

void require_name(const Named& asked, const char* question) {
  if (asked.name.empty()) {
    throw Refusal(Code::missing, std::string(question) + " needs with.name, the name of the table.", {},
                  R"(For example "with":{"name":"mains"}.)");
  }
}

Answer keep(const Named& asked, Context& context) {
  require_name(asked, "hold");
  if (!context.table) {
    throw Refusal(Code::missing, "hold needs a table.", {}, "Give of.columns, of.range or of.file.");
  }
  auto table = std::make_shared<Table>(*context.table);
  if (const auto origin = origin_of(context.request->of.rest)) table->origin = *origin;
  (void)Places(*table, table->origin);  // refuses what is no address now rather than later
  check_lengths(*table);
  Answer answer{.say = asked.name + " is held: " + std::to_string(table->rows()) +
                       (table->rows() == 1 ? " row" : " rows") + ", " +
                       std::to_string(table->columns.size()) +
                       (table->columns.size() == 1 ? " column." : " columns.")};
  answer.figures = {{"rows", static_cast<double>(table->rows())},
                    {"columns", static_cast<double>(table->columns.size())}};
  answer.tables = {columns_table(*table)};
  context.session->hold(asked.name, std::move(table));
  return answer;
}

Answer list(const Named&, Context& context) {
  std::vector<std::string> names;
  std::vector<double> rows, columns;
  for (const auto& [name, table] : context.session->held()) {
    names.push_back(name);
    rows.push_back(static_cast<double>(table->rows()));
    columns.push_back(static_cast<double>(table->columns.size()));
  }
  Answer answer{.say = names.empty()       ? "No table is held."
                       : names.size() == 1 ? "1 table is held."
                                           : std::to_string(names.size()) + " tables are held."};
  answer.tables = {{"held", {{"name", names}, {"rows", rows}, {"columns", columns}}}};
  return answer;
}

Answer drop(const Named& asked, Context& context) {
  require_name(asked, "release");
  if (!context.session->release(asked.name)) {
    std::vector<std::string> names;
    for (const auto& [name, table] : context.session->held()) names.push_back(name);
    const std::string near = nearest(asked.name, names);
    throw Refusal(Code::not_found, "No table is held under \"" + asked.name + "\".", {},
                  near.empty() ? "" : "Did you mean \"" + near + "\"?");
  }
  return {.say = asked.name + " is released."};
}

const std::vector<TableSpec> columns_spec = {{"columns",
                                              "the table's columns",
                                              {{"name", Style::text, "column"},
                                               {"kind", Style::text, "kind"},
                                               {"rows", Style::whole, "rows"},
                                               {"levels", Style::whole, "distinct values"},
                                               {"blanks", Style::whole, "blank cells"}}}};

}  // namespace

OutTable columns_table(const Table& table) {
  std::vector<std::string> names, kinds;
  std::vector<double> rows, levels, blanks;
  for (const auto& column : table.columns) {
    names.push_back(column->name);
    kinds.push_back(kind_of(*column));
    rows.push_back(static_cast<double>(column->size()));
    levels.push_back(distinct_numbers(column->numbers) + static_cast<double>(column->texts.size()) +
                     distinct_booleans(*column));
    blanks.push_back(static_cast<double>(std::count(column->tags.begin(), column->tags.end(), tag::blank)));
  }
  return {"columns",
          {{"name", names}, {"kind", kinds}, {"rows", rows}, {"levels", levels}, {"blanks", blanks}}};
}

extern const Question hold = service<Named>(
    {.name = "hold",
     .asks = "Keeps a table under a name, so that later requests need not send it again.",
     .options = {bind::text("name", &Named::name, "the name to hold it under")},
     .figures = {{"rows", Style::whole, "rows held"}, {"columns", Style::whole, "columns held"}},
     .tables = columns_spec,
     .answer = keep,
     .examples =
         {R"({"ask":"hold","of":{"columns":{"bursts":[3,0],"km_years":[12,9]}},"with":{"name":"mains"}})"}},
    {"columns", "range", "file", "header", "origin"}, true);

extern const Question held = service<Named>({.name = "held",
                                             .asks = "Lists the tables that are held.",
                                             .tables = {{"held",
                                                         "the tables held",
                                                         {{"name", Style::text, "name"},
                                                          {"rows", Style::whole, "rows"},
                                                          {"columns", Style::whole, "columns"}}}},
                                             .answer = list,
                                             .examples = {R"({"ask":"held"})"}});

extern const Question release =
    service<Named>({.name = "release",
                    .asks = "Drops a table that is held.",
                    .options = {bind::text("name", &Named::name, "the name it is held under")},
                    .answer = drop});

}  // namespace countsel
