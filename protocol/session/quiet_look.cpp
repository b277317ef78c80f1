// protocol/session/quiet_look.cpp -- which roles are looked at, and which findings are worth a note.
#include "protocol/session/quiet_look.hpp"

#include <algorithm>
#include <cmath>
#include <map>
#include <set>

#include "engine/table/audit.hpp"
#include "protocol/wording/findings.hpp"
#include "protocol/wording/numbers.hpp"

namespace countsel {
namespace {

constexpr std::size_t most_places = 20;

struct Looked {
  const Role* count = nullptr;
  const Role* exposure = nullptr;
  const Role* label = nullptr;    ///< names rows, one by one
  const Role* period = nullptr;   ///< orders rows; several may share one step
  std::vector<const Role*> sets;  ///< rows are added up or compared within these
};

Looked roles_of(const Question& question, Asked& asked) {
  Looked looked;
  for (const auto& spec : question.roles) {
    const Role& role = spec.at(asked);
    if (!role.given) continue;
    if (spec.name == "count") looked.count = &role;
    if (spec.name == "exposure") looked.exposure = &role;
    if (spec.holds == Holds::label) looked.label = &role;
    if (spec.holds == Holds::order) looked.period = &role;
    if (spec.holds == Holds::levels) looked.sets.push_back(&role);
  }
  return looked;
}

std::vector<std::string> texts_of(const Role& role) {
  std::vector<std::string> texts;
  texts.reserve(role.codes.size());
  for (const auto code : role.codes) texts.push_back(role.levels[static_cast<std::size_t>(code)]);
  return texts;
}

/// One code for each combination of the sets' levels.
std::vector<std::int32_t> series_of(const std::vector<const Role*>& sets, std::size_t rows) {
  std::vector<std::int32_t> series(sets.empty() ? 0 : rows, 0);
  for (const Role* set : sets) {
    // Few sets have few levels; where the product would not fit, rows of unlike series only share a check.
    const auto levels = static_cast<std::int64_t>(set->levels.size());
    for (std::size_t i = 0; i < rows; ++i)
      series[i] = static_cast<std::int32_t>((series[i] * levels + set->codes[i]) % 2147483647);
  }
  return series;
}

bool worth_a_note(const Finding& finding, bool each_row_alone) {
  if (finding.kind == FindingKind::totals_row || finding.kind == FindingKind::rate_for_count) return false;
  return finding.sure || (finding.kind == FindingKind::repeated_label && each_row_alone);
}

}  // namespace

void look_quietly(const Question& question, Asked& asked, const Places& places, std::vector<Note>& notes) {
  if (asked.rows < 3 || asked.rows > most_rows_looked_at) return;
  const Looked looked = roles_of(question, asked);
  if (!looked.exposure && !looked.label) return;
  const Role* named = looked.label ? looked.label : looked.period;
  const std::vector<std::string> labels = named ? texts_of(*named) : std::vector<std::string>();
  const auto series = series_of(looked.sets, asked.rows);
  AuditTable table;
  if (looked.count && !looked.count->numbers.empty()) table.counts = looked.count->numbers;
  if (looked.exposure) table.exposures = looked.exposure->numbers;
  table.series = series;
  // Steps may have many rows each; then neighbours in the table are no neighbours in time.
  const bool ordered_once =
      !looked.period ||
      std::set<std::int32_t>(looked.period->codes.begin(), looked.period->codes.end()).size() == asked.rows;
  if (named && (looked.label || ordered_once)) table.labels = labels;

  std::vector<Finding> findings;
  const auto add = [&](std::vector<Finding> some) {
    findings.insert(findings.end(), some.begin(), some.end());
  };
  if (looked.exposure) {
    if (ordered_once) add(exposure_jumps(table));
    add(exposure_logarithms(table));
  }
  if (looked.label) add(repeated_labels(table));

  const LookedAt at{looked.count ? looked.count->column : "", looked.exposure ? looked.exposure->column : "",
                    named ? named->column : "", labels,
                    [&](std::int64_t row) { return asked.row_number(static_cast<std::size_t>(row - 1)); }};
  const auto place = [&](const Place& where) { return places.say(where); };
  std::map<FindingKind, std::vector<Finding>> kinds;
  for (const auto& finding : findings)
    if (worth_a_note(finding, looked.sets.empty())) kinds[finding.kind].push_back(finding);
  for (const auto& [kind, some] : kinds) {
    const SaidFinding first = say_finding(some.front(), at, place);
    Note note{first.kind, first.text, {}};
    if (some.size() > 1) note.text += " There are " + std::to_string(some.size()) + " such rows.";
    note.text += " " + first.to_do;
    for (std::size_t i = 0; i < some.size() && i < most_places; ++i)
      note.where.push_back(say_finding(some[i], at, place).place);
    notes.push_back(std::move(note));
  }
}

void hint_at_rates(const Question& question, const Casting& casting, Refusal& refusal) {
  if (refusal.code != Code::bad_count) return;
  AuditTable table;
  for (std::size_t i = 0; i < question.roles.size(); ++i) {
    const Column* column = casting.roles[i];
    if (!column || column->size() > most_rows_looked_at) continue;
    if (question.roles[i].name == "count") table.counts = column->numbers;
    if (question.roles[i].name == "exposure") table.exposures = column->numbers;
  }
  const auto findings = rates_for_counts(table);
  if (findings.empty() || std::isnan(findings.front().factor)) return;
  refusal.hint = "Times the exposure they come out whole, as rates per " +
                 given_text(findings.front().factor) + " would: give the counts themselves.";
}

}  // namespace countsel
