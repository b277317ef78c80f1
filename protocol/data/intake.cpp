// protocol/data/intake.cpp -- roles, rows kept, roles filled.
#include "protocol/data/intake.hpp"

#include <algorithm>
#include <cmath>

#include "protocol/data/column_reader.hpp"
#include "protocol/data/columns.hpp"
#include "protocol/data/totals.hpp"
#include "protocol/wire/brief.hpp"

namespace countsel {
namespace {

/// Where a question takes one set of roles or another, one of them must be there.
void check_either(const Question& question, const Casting& casting) {
  if (question.either.empty()) return;
  const auto given = [&](const std::string& name) {
    for (std::size_t i = 0; i < question.roles.size(); ++i)
      if (question.roles[i].name == name) return casting.roles[i] != nullptr;
    return false;
  };
  std::string sets, begun;
  for (const auto& set : question.either) {
    std::string missing, whole;
    bool any = false;
    for (const auto& name : set) {
      any |= given(name);
      whole += (whole.empty() ? "" : " and ") + name;
      if (!given(name)) missing += (missing.empty() ? "" : " and ") + name;
    }
    if (missing.empty()) return;
    if (any && begun.empty()) begun = missing;
    sets += (sets.empty() ? "" : ", or ") + whole;
  }
  throw Refusal(Code::missing,
                question.name + " needs " + sets + "." + (begun.empty() ? "" : " Missing is " + begun + "."),
                {}, "Give them directly, or name the columns in of.roles.");
}

}  // namespace

Casting cast_roles(const Question& question, const Table& table, const Json& rest) {
  Casting casting;
  const auto roles = rest.find("roles");
  const bool given = roles != rest.end() && !roles->is_null();
  if (given && !roles->is_object()) {
    throw Refusal(Code::bad_type, "of.roles is " + brief_json(*roles) + "; it should be an object.", {},
                  R"(Give roles and column names: {"count":"bursts","exposure":"km_years"}.)");
  }
  std::string missing;
  for (const auto& spec : question.roles) {
    const Column* column = nullptr;
    if (!given) {
      column = table.find(spec.name);
    } else if (const auto named = roles->find(spec.name); named != roles->end() && !named->is_null()) {
      if (!named->is_string()) bind::wrong_type("of.roles." + spec.name, "the name of a column", *named);
      column = &find_column(table, named->get_ref<const std::string&>(), " for the role " + spec.name);
    }
    if (spec.required && !column) missing += (missing.empty() ? "" : ", ") + spec.name;
    casting.roles.push_back(column);
  }
  casting.only = read_only(table, rest);
  if (!missing.empty()) {
    const std::string hint =
        given ? "Name a column for it in of.roles." : "Name the columns in of.roles, or give it directly.";
    throw Refusal(Code::missing, question.name + " needs the role " + missing + ".", {}, hint);
  }
  check_either(question, casting);
  return casting;
}

void take_in(const Question& question, const Table& table, const Casting& casting, const Places& places,
             Asked& asked, std::vector<Note>& notes) {
  check_lengths(table);
  const std::size_t rows = table.rows();
  asked.rows_sent = rows;

  RowsLeftOut left_out(rows, rows_to_keep(casting.only, rows, notes));

  std::vector<const Column*> all;
  for (const auto& column : table.columns) all.push_back(column.get());
  std::vector<std::pair<std::string, Holds>> extra;
  if (question.extra_columns) {
    std::vector<const Column*> free;
    for (const auto* column : all) {
      if (std::find(casting.roles.begin(), casting.roles.end(), column) == casting.roles.end())
        free.push_back(column);
    }
    extra = question.extra_columns(asked, free, notes);
  }

  ColumnReader reader(places, asked.cells, left_out, notes);
  std::vector<ReadColumn> role_columns(casting.roles.size());
  for (std::size_t i = 0; i < casting.roles.size(); ++i) {
    if (casting.roles[i]) role_columns[i] = reader.read(*casting.roles[i], question.roles[i].holds);
  }
  std::vector<ReadColumn> extra_columns;
  for (const auto& [name, holds] : extra) {
    extra_columns.push_back(reader.read(find_column(table, name, ""), holds));
  }
  // A count and its exposure are judged together: nothing observed and nothing seen is no row.
  for (std::size_t i = 0; i < casting.roles.size(); ++i) {
    const Holds holds = question.roles[i].holds;
    if ((holds != Holds::exposure && holds != Holds::exposure_or_0) || !casting.roles[i]) continue;
    // Its count is the one declared last before it: a past's exposure goes with the past's count.
    const ReadColumn* count = nullptr;
    for (std::size_t j = 0; j < i; ++j) {
      if (question.roles[j].holds == Holds::count && casting.roles[j]) count = &role_columns[j];
    }
    reader.settle_zero_exposures(role_columns[i], count, holds == Holds::exposure);
  }
  settle_totals(question, role_columns, places, asked.cells.totals, left_out);
  left_out.tell(notes, places);

  if (left_out.kept() == 0 && !question.roles.empty()) {
    throw Refusal(Code::too_few, rows == 0 ? "There are no rows." : "No row is left that can be used.", {},
                  rows == 0 ? "Send at least one row." : "Look at the blanks in the columns that are used.");
  }
  asked.rows = left_out.kept();
  asked.kept = left_out.indices();
  const auto share = [&table](const Column* column) {
    for (const auto& owner : table.columns) {
      if (owner.get() == column) return owner;
    }
    return std::shared_ptr<const Column>();
  };
  for (std::size_t i = 0; i < casting.roles.size(); ++i) {
    Role& role = question.roles[i].at(asked);
    if (casting.roles[i]) {
      fill_role(role_columns[i], asked.kept, share(casting.roles[i]), role);
    } else if (question.roles[i].holds == Holds::exposure) {
      role.column = question.roles[i].name;
      role.own_numbers.assign(asked.rows, 1.0);
      role.numbers = role.own_numbers;
    }
  }
  for (auto& column : extra_columns) {
    asked.extra.emplace_back();
    fill_role(column, asked.kept, share(column.column), asked.extra.back());
  }
}

}  // namespace countsel
