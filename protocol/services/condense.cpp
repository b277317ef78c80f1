// protocol/services/condense.cpp -- rows of the same pattern become one; nothing is lost for Poisson work.
//
// A Poisson likelihood with a log link depends on the rows of one pattern through the sums of counts and
// exposures alone (McCullagh and Nelder 1989, section 6.2), so these sums are what is kept.
#include <unordered_map>

#include "protocol/services/held_tables.hpp"
#include "protocol/services/service.hpp"

namespace countsel {
namespace {

struct Condense : RateAsked {
  std::string name;
};

std::vector<std::pair<std::string, Holds>> every_column(Condense&, const std::vector<const Column*>& columns,
                                                        std::vector<Note>&) {
  std::vector<std::pair<std::string, Holds>> all;
  for (const auto* column : columns) all.emplace_back(column->name, Holds::levels);
  return all;
}

Answer answer(const Condense& asked, Context& context) {
  std::vector<double> counts, exposures, rows;
  std::vector<std::size_t> first;
  std::unordered_map<std::string, std::size_t> patterns;
  std::string key;
  for (std::size_t i = 0; i < asked.rows; ++i) {
    key.clear();
    for (const auto& column : asked.extra) {
      key.append(reinterpret_cast<const char*>(&column.codes[i]), sizeof(std::int32_t));
    }
    const auto [at, fresh] = patterns.try_emplace(key, counts.size());
    if (fresh) {
      counts.push_back(0);
      exposures.push_back(0);
      rows.push_back(0);
      first.push_back(i);
    }
    counts[at->second] += asked.count.numbers[i];
    exposures[at->second] += asked.exposure.numbers[i];
    rows[at->second] += 1;
  }
  OutTable table{"condensed", {}};
  auto held = std::make_shared<Table>();
  for (const auto& column : asked.extra) {
    std::vector<std::string> texts;
    ColumnBuilder builder;
    for (const auto i : first) {
      const auto& level = column.levels[static_cast<std::size_t>(column.codes[i])];
      texts.push_back(level);
      builder.text(level);
    }
    table.columns.emplace_back(column.column, std::move(texts));
    held->columns.push_back(std::make_shared<const Column>(builder.take(column.column)));
  }
  const auto add = [&](const std::string& name, const std::vector<double>& values) {
    ColumnBuilder builder;
    for (const double value : values) builder.number(value);
    table.columns.emplace_back(name, values);
    held->columns.push_back(std::make_shared<const Column>(builder.take(name)));
  };
  add(asked.count.column, counts);
  add(asked.exposure.given ? asked.exposure.column : "exposure", exposures);
  add("rows", rows);
  Answer answer{.say = std::to_string(asked.rows) + " rows have " + std::to_string(counts.size()) +
                       " patterns."};
  answer.figures = {{"rows", static_cast<double>(asked.rows)},
                    {"patterns", static_cast<double>(counts.size())}};
  answer.tables = {std::move(table)};
  if (!asked.name.empty()) context.session->hold(asked.name, std::move(held));
  return answer;
}

}  // namespace

extern const Question condense = service<Condense>(
    {.name = "condense",
     .asks = "Adds up rows of the same levels, losslessly for Poisson work.",
     .roles = {bind::role("count", Holds::count, &Condense::count, "events", true),
               bind::role("exposure", Holds::exposure, &Condense::exposure, "how much was observed")},
     .options = {bind::text("name", &Condense::name, "hold the result under this name")},
     .figures = {{"rows", Style::whole, "rows before"}, {"patterns", Style::whole, "rows after"}},
     .tables = {{"condensed", "one row for each pattern", {{"rows", Style::whole, "rows"}}}},
     .answer = answer,
     .extra_columns = every_column,
     .examples = {R"({"ask":"condense","of":{"count":[1,2,0],"exposure":[5,5,9],"zone":["a","a","b"]}})"}});

}  // namespace countsel
