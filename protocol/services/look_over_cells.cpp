// protocol/services/look_over_cells.cpp -- each doubt with its place and one step to take.
#include "protocol/services/look_over_cells.hpp"

#include <algorithm>
#include <cmath>
#include <map>

#include "protocol/data/cells.hpp"

namespace countsel {
namespace {

constexpr std::size_t most_of_a_kind = 20;
constexpr double largest_count = 9007199254740992.0;  // 2^53

std::string cells_text(std::size_t n) { return std::to_string(n) + (n == 1 ? " cell of " : " cells of "); }

class CellFindings {
 public:
  CellFindings(const std::string& column, const Places& places) : column_(column), places_(places) {}

  void add(const char* kind, const CellsOfKind& cells, const std::string& what, const std::string& to_do) {
    if (cells.cells == 0) return;
    std::vector<Place> where;
    for (const auto row : cells.rows) where.push_back({column_, row});
    found_.push_back(
        {kind, where.front(),
         cells_text(cells.cells) + column_ + ": " + what + " (" + places_.list(where, cells.cells) + ").",
         to_do});
  }
  std::vector<SaidFinding> take() { return std::move(found_); }

 private:
  const std::string& column_;
  const Places& places_;
  std::vector<SaidFinding> found_;
};

/// Values that no count or no exposure can have.
CellsOfKind values_that(const CellKinds& cells, bool (*wrong)(double)) {
  CellsOfKind kind;
  for (std::size_t i = 0; i < cells.values.size(); ++i) {
    if (!wrong(cells.values[i])) continue;
    if (kind.cells++ == 0) kind.first = number_text(cells.values[i]);
    if (kind.rows.size() < most_of_a_kind) kind.rows.push_back(cells.row_of(i));
  }
  return kind;
}

}  // namespace

std::vector<SaidFinding> header_findings(const Table& table) {
  if (!table.header || !table.row_wise || table.columns.empty()) return {};
  const bool numbers = std::any_of(table.columns.begin(), table.columns.end(), [](const auto& column) {
    return read_number(column->name, {}).reads == Reads::number;
  });
  if (!numbers) return {};
  const Place place{table.columns.front()->name, 0};
  return {{"header", place, "The first row was taken for column names, yet it holds numbers.",
           R"(If it is data, say "header":false in of.)"}};
}

std::vector<SaidFinding> cell_findings(const std::string& column, const CellKinds& cells, ColumnPart part,
                                       const Places& places) {
  CellFindings found(column, places);
  if (cells.rows > 0 && cells.blank.cells == cells.rows) {
    return {{"blank_column",
             {column, 0},
             "Column " + column + " is blank throughout.",
             "Leave it out, or look where its cells went."}};
  }
  found.add("error_cell", cells.error, "an error, " + cells.error.first,
            R"(Mend the sheet, or leave such rows out with "error_cells":"skip".)");
  found.add("nested", cells.nested, "a list or an object", "Send one flat list for each column.");
  const bool numeric = part == ColumnPart::count || part == ColumnPart::exposure ||
                       (part == ColumnPart::other && cells.numeric());
  found.add(
      "blank", cells.blank, "blank, which is never taken as zero",
      part == ColumnPart::count
          ? "Where nothing happened write 0; where nobody looked leave it blank, and the row is left out."
          : "A row that is blank where the question needs it is left out.");
  if (!numeric) return found.take();
  found.add("text_number", cells.text_number,
            "a number written as text, such as \"" + cells.text_number.first + "\"",
            "They are read as numbers where a number is needed; better to store them as such.");
  found.add("decimal_comma", cells.decimal_comma,
            "a text with a comma, such as \"" + cells.decimal_comma.first + "\"",
            R"(If the comma is the decimal mark, say "decimal":",".)");
  found.add("ambiguous_number", cells.ambiguous,
            "a text that could be read in two ways, such as \"" + cells.ambiguous.first + "\"",
            R"(Say which mark is which: "thousands":"," or "decimal":",".)");
  found.add("ambiguous_number", cells.bad_grouping,
            "a text with thousands marks at odd places, such as \"" + cells.bad_grouping.first + "\"",
            "Write it without thousands marks.");
  found.add("text_among_numbers", cells.word, "a text among numbers, such as \"" + cells.word.first + "\"",
            "Where it means that nothing is known, leave the cell blank; a column of both is no column of "
            "numbers.");
  found.add("boolean", cells.boolean, "true or false, which is a level and not a number",
            "Send 1 and 0 if numbers are meant.");
  if (part == ColumnPart::count) {
    const auto negative = values_that(cells, [](double v) { return v < 0; });
    found.add("negative_count", negative, "below 0, first " + negative.first,
              "Look for a correction booked as a negative count.");
    const auto large = values_that(cells, [](double v) { return v > largest_count; });
    found.add("large_count", large, "beyond 2^53, first " + large.first, "Count in larger units.");
  }
  if (part == ColumnPart::exposure) {
    const auto none = values_that(cells, [](double v) { return v <= 0; });
    found.add("no_exposure", none, "0 or less, which no exposure is, first " + none.first,
              "Where something was counted, something was observed; a row with neither is left out.");
  }
  return found.take();
}

void add_findings(const std::vector<Finding>& found, const LookedAt& at, const Places& places,
                  std::vector<SaidFinding>& findings) {
  std::map<FindingKind, std::size_t> met, all;
  for (const auto& finding : found) ++all[finding.kind];
  for (const auto& finding : found) {
    const std::size_t before = met[finding.kind]++;
    if (before > most_of_a_kind) continue;
    if (before == most_of_a_kind) {
      const std::size_t more = all[finding.kind] - before;
      findings.push_back(
          {finding_name(finding.kind), {}, "There are " + std::to_string(more) + " more of this kind.", ""});
      continue;
    }
    findings.push_back(say_finding(finding, at, [&](const Place& place) { return places.say(place); }));
  }
}

}  // namespace countsel
