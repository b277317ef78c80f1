// protocol/wording/findings.cpp -- doubts are worded as doubts; what to do is one step.
#include "protocol/wording/findings.hpp"

#include <cmath>

#include "protocol/wording/numbers.hpp"

namespace countsel {
namespace {

std::string times(double factor) {
  if (factor >= 1) return significant_text(factor, 2) + " times";
  return "only " + significant_text(factor, 2) + " times";
}

/// A number of the table, without digits that say nothing.
std::string number(double value) {
  std::string text = significant_text(value, 4);
  if (text.find('.') == std::string::npos || text.find('e') != std::string::npos) return text;
  while (text.back() == '0') text.pop_back();
  if (text.back() == '.') text.pop_back();
  return text;
}

std::string label(const LookedAt& at, std::int64_t row) {
  const auto i = static_cast<std::size_t>(row - 1);
  return i < at.labels.size() ? at.labels[i] : "";
}

/// ", May," in the middle of a sentence.
std::string quoted(const LookedAt& at, std::int64_t row) {
  const std::string text = label(at, row);
  return text.empty() ? "" : ", " + text + ",";
}

/// The same at the end of a sentence.
std::string named(const LookedAt& at, std::int64_t row) {
  std::string text = quoted(at, row);
  if (!text.empty()) text.pop_back();
  return text;
}

}  // namespace

std::string finding_name(FindingKind kind) {
  static constexpr const char* names[] = {"exposure_jump",   "exposure_shift", "exposure_logarithm",
                                          "rate_for_count",  "totals_row",     "repeated_label",
                                          "repeated_period", "nearly_repeated"};
  return names[static_cast<std::size_t>(kind)];
}

SaidFinding say_finding(const Finding& finding, const LookedAt& at,
                        const std::function<std::string(const Place&)>& place) {
  const std::string& column = finding.column == AuditColumn::count      ? at.count
                              : finding.column == AuditColumn::exposure ? at.exposure
                                                                        : at.label;
  SaidFinding said{
      finding_name(finding.kind), {column, finding.row > 0 ? at.table_row(finding.row) : 0}, "", ""};
  const std::string here = place(said.place);
  const auto other = [&] {
    return "row " + std::to_string(at.table_row(finding.other_row)) + named(at, finding.other_row);
  };
  switch (finding.kind) {
    case FindingKind::exposure_jump:
      said.text = here + quoted(at, finding.row) + " is " + number(finding.value) + ", " +
                  times(finding.factor) + " the usual " + number(finding.usual) + " of the rows around it.";
      said.to_do = "Check whether it was booked in another unit, or for another stretch of time.";
      break;
    case FindingKind::exposure_shift:
      said.text = "From " + here + quoted(at, finding.row) + " on, exposures are " + times(finding.factor) +
                  " those before (" + number(finding.value) + " against " + number(finding.usual) + ").";
      said.to_do = "Check whether the unit or the way of measuring changed there.";
      break;
    case FindingKind::exposure_logarithm:
      said.text = here + " lies between " + number(finding.value) + " and " + number(finding.usual) +
                  " and " + (finding.sure ? "looks" : "could look") + " like logarithms of exposures.";
      said.to_do = "Give how much was observed, not its logarithm.";
      break;
    case FindingKind::rate_for_count:
      said.text = here + " is not whole, as a count is";
      said.text += finding.value > 1 ? "; there are " + given_text(finding.value) + " such cells." : ".";
      if (!std::isnan(finding.factor)) {
        said.text +=
            " Times the exposure they come out whole, as rates per " + given_text(finding.factor) + " would.";
      }
      said.to_do = "Give the count itself, with its exposure; the rate is worked out from them.";
      break;
    case FindingKind::totals_row:
      said.text = here + quoted(at, finding.row) + " is " + given_text(finding.value) +
                  ", the sum of other rows: a totals row among the data.";
      said.to_do = R"(Leave it out of the selection, or ask with "totals":"skip".)";
      break;
    case FindingKind::repeated_label:
      said.text = here + " has the same label as " + other() + ".";
      said.to_do =
          "If they belong together, add them up (or give the column as group where a question takes one); if "
          "one was entered twice, take it out.";
      break;
    case FindingKind::repeated_period:
      said.text = here + " is the same period as " + other() + ".";
      said.to_do = "If one was entered twice, take it out; if both count, add them up.";
      break;
    case FindingKind::nearly_repeated:
      said.text = here + ", \"" + label(at, finding.row) + "\", differs from \"" +
                  label(at, finding.other_row) + "\" in row " +
                  std::to_string(at.table_row(finding.other_row)) + " in case or spaces only.";
      said.to_do = "Write both alike if they are the same.";
      break;
  }
  return said;
}

}  // namespace countsel
