// protocol/services/look_over.cpp -- looks a table over before anything is asked of it.
//
// Single cells first (blanks, texts, errors), then what columns say together (jumps, totals, repeats). The
// table is taken as it was sent: nothing is left out and nothing refused but what is no table.
// Checked by: tests/protocol/look_over_test.py.
#include <algorithm>
#include <array>
#include <cmath>
#include <unordered_set>

#include "engine/table/audit.hpp"
#include "protocol/data/cell_kinds.hpp"
#include "protocol/data/columns.hpp"
#include "protocol/data/intake.hpp"
#include "protocol/services/look_over_cells.hpp"
#include "protocol/services/service.hpp"
#include "protocol/wording/findings.hpp"
#include "protocol/wording/words.hpp"

namespace countsel {
namespace {

struct NamedRole {
  const char* name;
  Holds holds;
  const char* doc;
};
// Every role that any question has, so that the same roles can be given here.
constexpr std::array<NamedRole, 16> known_roles = {
    {{"count", Holds::count, "events counted"},
     {"exposure", Holds::exposure, "how much was observed"},
     {"label", Holds::label, "a name for each row"},
     {"group", Holds::levels, "rows of one group belong together"},
     {"stratum", Holds::levels, "rows of one stratum belong together"},
     {"unit", Holds::levels, "rows of one unit belong together"},
     {"order", Holds::order, "steps in their order"},
     {"time", Holds::order, "when it was"},
     {"period", Holds::order, "the period of each row"},
     {"expected", Holds::not_below_0, "events expected"},
     {"target", Holds::not_below_0, "a rate to keep to"},
     {"weight", Holds::not_below_0, "weights"},
     {"cluster", Holds::levels, "rows that go together"},
     {"value", Holds::count, "of a frequency table: a number of events"},
     {"times", Holds::count, "of a frequency table: how often it was seen"},
     {"gap", Holds::number, "exposure between events"}}};

struct LookOver : Asked {
  std::array<Role, known_roles.size()> roles;
};

std::vector<RoleSpec> role_specs() {
  std::vector<RoleSpec> specs;
  for (std::size_t i = 0; i < known_roles.size(); ++i) {
    specs.push_back({known_roles[i].name, known_roles[i].holds, false, known_roles[i].doc,
                     [i](Asked& asked) -> Role& { return static_cast<LookOver&>(asked).roles[i]; }});
  }
  return specs;
}

/// The columns with a part to play: as the roles say, else as they look.
struct Cast {
  std::optional<std::size_t> count, exposure, label;
  std::vector<std::size_t> sets;
  bool guessed = false;
};

bool has_word(const std::string& name, const std::vector<std::string>& words) {
  std::string lower;
  for (const char c : name) lower += static_cast<char>(std::tolower(static_cast<unsigned char>(c)));
  return std::any_of(words.begin(), words.end(),
                     [&](const std::string& word) { return lower.find(word) != std::string::npos; });
}

const std::vector<std::string> exposure_words = {"exposure", "hour", "day",   "week", "month",
                                                 "year",     "km",   "mile",  "time", "popul",
                                                 "person",   "beds", "length"};
const std::vector<std::string> period_words = {"date", "period", "quarter", "month", "year", "week", "day"};

bool year_like(const CellKinds& cells) {
  return cells.least >= 1800 && cells.greatest <= 2200 && cells.numbers > 1 &&
         std::all_of(cells.values.begin(), cells.values.end(),
                     [](double v) { return !(v == v) || v == std::floor(v); });
}

std::vector<std::string> texts_of(const Column& column, const std::vector<char>& kept) {
  std::vector<std::string> texts;
  for (std::size_t row = 0; row < column.size(); ++row)
    if (kept.empty() || kept[row]) texts.push_back(level_text(column, row));
  return texts;
}

/// Half the rows or more have a text of their own.
bool names_rows(const std::vector<std::string>& texts) {
  const std::unordered_set<std::string> distinct(texts.begin(), texts.end());
  return 2 * distinct.size() >= texts.size();
}

Cast cast(const Table& table, const std::vector<CellKinds>& cells, const Casting& casting,
          const std::vector<char>& kept) {
  Cast parts;
  const auto index_of = [&](const Column* column) -> std::optional<std::size_t> {
    for (std::size_t i = 0; column && i < table.columns.size(); ++i)
      if (table.columns[i].get() == column) return i;
    return std::nullopt;
  };
  std::vector<char> taken(table.columns.size(), 0);
  std::optional<std::size_t> period;
  for (std::size_t r = 0; r < known_roles.size(); ++r) {
    const auto at = index_of(casting.roles[r]);
    if (!at) continue;
    taken[*at] = 1;
    const std::string name = known_roles[r].name;
    if (name == "count") parts.count = at;
    if (name == "exposure") parts.exposure = at;
    if (name == "label") parts.label = at;
    if (known_roles[r].holds == Holds::levels) parts.sets.push_back(*at);
    if (known_roles[r].holds == Holds::order) period = at;
  }
  if (!parts.label) parts.label = period;
  const auto guess = [&](std::optional<std::size_t>& part, auto fits) {
    for (std::size_t i = 0; !part && i < table.columns.size(); ++i) {
      if (taken[i] || !fits(i)) continue;
      part = i;
      taken[i] = 1;
      parts.guessed = true;
    }
  };
  const auto name = [&](std::size_t i) -> const std::string& { return table.columns[i]->name; };
  guess(parts.label, [&](std::size_t i) {
    const bool period_like = year_like(cells[i]) || has_word(name(i), period_words);
    return (!cells[i].numeric() || (period_like && year_like(cells[i]))) &&
           (period_like || names_rows(texts_of(*table.columns[i], kept)));
  });
  guess(parts.exposure, [&](std::size_t i) {
    return cells[i].numeric() && !year_like(cells[i]) && has_word(name(i), exposure_words);
  });
  guess(parts.count, [&](std::size_t i) { return cells[i].numeric() && !year_like(cells[i]); });
  for (std::size_t i = 0; i < table.columns.size(); ++i)
    if (!taken[i] && !cells[i].numeric() && cells[i].levels > 0) parts.sets.push_back(i);
  return parts;
}

/// Rows of one combination of levels are one series.
std::vector<std::int32_t> series_of(const Table& table, const std::vector<std::size_t>& sets,
                                    const std::vector<char>& kept) {
  std::vector<std::string> keys;
  for (const auto set : sets) {
    const auto texts = texts_of(*table.columns[set], kept);
    keys.resize(texts.size());
    for (std::size_t i = 0; i < texts.size(); ++i) keys[i] += texts[i] + '\n';
  }
  std::vector<std::int32_t> codes;
  std::unordered_map<std::string, std::int32_t> seen;
  for (const auto& key : keys)
    codes.push_back(seen.try_emplace(key, static_cast<std::int32_t>(seen.size())).first->second);
  return codes;
}

std::string say(const Table& table, const Cast& parts, const std::vector<CellKinds>& cells,
                const std::vector<SaidFinding>& findings) {
  const std::size_t rows = cells.empty() ? 0 : cells.front().rows, columns = table.columns.size();
  std::string text = std::to_string(rows) + (rows == 1 ? " row" : " rows") + " and " +
                     std::to_string(columns) + (columns == 1 ? " column" : " columns");
  std::vector<std::string> played;
  const auto plays = [&](const char* part, const std::optional<std::size_t>& column) {
    if (column && table.columns[*column]->name != part)
      played.push_back(table.columns[*column]->name + " as " + part);
  };
  plays("count", parts.count);
  plays("exposure", parts.exposure);
  plays("label", parts.label);
  if (!played.empty()) text += ", taking " + listed(played);
  text += ": ";
  if (rows == 0) return text + "there is nothing to look at.";
  if (findings.empty()) return text + "nothing stands out that should be looked at first.";
  text += findings.size() == 1 ? "1 finding. " : std::to_string(findings.size()) + " findings. ";
  return text + (findings.size() == 1 ? "" : "The first: ") + findings.front().text;
}

OutTable columns_table(const Table& table, const Cast& parts, const std::vector<CellKinds>& cells) {
  std::vector<std::string> name, part, kind;
  std::vector<double> rows, numbers, text_numbers, blanks, zeros, errors, least, greatest;
  const auto number = [](std::size_t n) { return static_cast<double>(n); };
  for (std::size_t i = 0; i < cells.size(); ++i) {
    name.push_back(table.columns[i]->name);
    part.push_back(parts.count == i      ? "count"
                   : parts.exposure == i ? "exposure"
                   : parts.label == i    ? "label"
                                         : "");
    kind.push_back(cells[i].kind());
    rows.push_back(number(cells[i].rows));
    numbers.push_back(number(cells[i].numbers));
    text_numbers.push_back(number(cells[i].text_number.cells));
    blanks.push_back(number(cells[i].blank.cells));
    zeros.push_back(number(cells[i].zeros));
    errors.push_back(number(cells[i].error.cells));
    least.push_back(cells[i].least);
    greatest.push_back(cells[i].greatest);
  }
  return {"columns",
          {{"column", name},
           {"taken_as", part},
           {"kind", kind},
           {"rows", rows},
           {"numbers", numbers},
           {"text_numbers", text_numbers},
           {"blanks", blanks},
           {"zeros", zeros},
           {"errors", errors},
           {"least", least},
           {"greatest", greatest}}};
}

OutTable findings_table(const std::vector<SaidFinding>& findings, const Places& places) {
  std::vector<std::string> kind, text, to_do;
  std::vector<OptionalText> column, cell;
  std::vector<double> row;
  for (const auto& finding : findings) {
    kind.push_back(finding.kind);
    column.push_back(finding.place.column.empty() ? OptionalText() : OptionalText(finding.place.column));
    row.push_back(finding.place.row > 0 ? static_cast<double>(finding.place.row) : std::nan(""));
    cell.push_back(places.cell(finding.place));
    text.push_back(finding.text);
    to_do.push_back(finding.to_do);
  }
  return {"findings",
          {{"kind", kind},
           {"column", column},
           {"row", row},
           {"cell", cell},
           {"text", text},
           {"what_to_do", to_do}}};
}

Answer answer(const LookOver& asked, Context& context) {
  if (!context.table) {
    throw Refusal(Code::missing, "look_over needs a table.", {},
                  "Give the columns directly, or of.columns, of.range, of.held or of.file.");
  }
  const Table& table = *context.table;
  const Places& places = *context.places;
  check_lengths(table);
  std::vector<Note> notes;
  const std::vector<char> kept = rows_to_keep(context.casting->only, table.rows(), notes);
  std::vector<CellKinds> cells;
  for (const auto& column : table.columns) {
    context.work.progress.check();
    cells.push_back(kinds_of_cells(*column, asked.cells, kept));
  }
  const Cast parts = cast(table, cells, *context.casting, kept);

  std::vector<SaidFinding> findings = header_findings(table);
  for (std::size_t i = 0; i < cells.size(); ++i) {
    const auto part = parts.count == i      ? ColumnPart::count
                      : parts.exposure == i ? ColumnPart::exposure
                      : parts.label == i    ? ColumnPart::label
                                            : ColumnPart::other;
    for (auto& finding : cell_findings(table.columns[i]->name, cells[i], part, places))
      findings.push_back(std::move(finding));
  }
  std::vector<std::int64_t> table_rows;
  for (std::size_t row = 0; row < table.rows(); ++row)
    if (kept.empty() || kept[row]) table_rows.push_back(static_cast<std::int64_t>(row) + 1);
  const auto labels = parts.label ? texts_of(*table.columns[*parts.label], kept) : std::vector<std::string>();
  const auto series = series_of(table, parts.sets, kept);
  AuditTable audit;
  if (parts.count) audit.counts = cells[*parts.count].values;
  if (parts.exposure) audit.exposures = cells[*parts.exposure].values;
  audit.labels = labels;
  audit.series = series;
  const auto name = [&](const std::optional<std::size_t>& column) {
    return column ? table.columns[*column]->name : std::string();
  };
  const LookedAt at{name(parts.count), name(parts.exposure), name(parts.label), labels,
                    [&](std::int64_t row) { return table_rows[static_cast<std::size_t>(row - 1)]; }};
  add_findings(audit_table(audit), at, places, findings);

  Answer answer{.say = say(table, parts, cells, findings)};
  answer.figures = {{"rows", static_cast<double>(table_rows.size())},
                    {"columns", static_cast<double>(table.columns.size())},
                    {"findings", static_cast<double>(findings.size())}};
  answer.notes = std::move(notes);
  if (parts.guessed) {
    answer.notes.push_back({"guessed",
                            "Columns without a role were taken by how they look; give of.roles to say which "
                            "is count, exposure and label."});
  }
  answer.tables = {findings_table(findings, places), columns_table(table, parts, cells)};
  return answer;
}

Question declared() {
  Question made = service<LookOver>(
      {.name = "look_over",
       .asks = "Looks a table over before anything is asked of it.",
       .roles = role_specs(),
       .figures = {{"rows", Style::whole, "rows looked at"},
                   {"columns", Style::whole, "columns looked at"},
                   {"findings", Style::whole, "things to look at"}},
       .tables = {{"findings",
                   "what was found, where, and what to do",
                   {{"kind", Style::text, "kind"},
                    {"column", Style::text, "column"},
                    {"row", Style::whole, "row"},
                    {"cell", Style::text, "cell"},
                    {"text", Style::text, "finding"},
                    {"what_to_do", Style::text, "what to do"}}},
                  {"columns",
                   "what each column holds, blanks and zeros apart",
                   {{"column", Style::text, "column"},
                    {"taken_as", Style::text, "taken as"},
                    {"kind", Style::text, "kind"},
                    {"rows", Style::whole, "rows"},
                    {"numbers", Style::whole, "numbers"},
                    {"text_numbers", Style::whole, "numbers as text"},
                    {"blanks", Style::whole, "blanks"},
                    {"zeros", Style::whole, "zeros"},
                    {"errors", Style::whole, "error cells"},
                    {"least", Style::number, "least"},
                    {"greatest", Style::number, "greatest"}}}},
       .headline = "findings",
       .answer = answer,
       .examples =
           {R"({"ask":"look_over","of":{"range":[["month","falls","bed_days"],["Jan",3,1210],["Feb",null,1130],["Mar",5,1190],["Apr","4",3405],["May",2,1220],["Jun",6,1180],["Total",20,9335]],"origin":"Falls.B4"}})"}},
      {}, true);
  made.as_sent = true;
  return made;
}

}  // namespace

extern const Question look_over = declared();

}  // namespace countsel
