// protocol/questions/steps.cpp -- which step comes first, and how far apart they are.
#include "protocol/questions/steps.hpp"

#include <algorithm>
#include <numeric>
#include <optional>
#include <regex>

#include "engine/table/group.hpp"
#include "protocol/data/cells.hpp"
#include "protocol/wording/words.hpp"

namespace countsel {
namespace {

/// Every level as a number; empty where one is none, or where the column was sent as levels.
std::vector<double> scores_of(const RateAsked& asked, const Role& order) {
  std::vector<double> scores;
  if (!order.numbers.empty()) {
    scores.resize(order.levels.size());
    for (std::size_t i = 0; i < order.codes.size(); ++i)
      scores[static_cast<std::size_t>(order.codes[i])] = order.numbers[i];
    return scores;
  }
  if (order.source && order.source->levels_only) return scores;
  for (const auto& level : order.levels) {
    const CellNumber read = read_number(level, asked.cells);
    if (read.reads != Reads::number) return {};
    scores.push_back(read.value);
  }
  return scores;
}

/// The number that a band such as "35-44", "<20" or "65+" begins with.
std::optional<double> band_start(const std::string& level) {
  static const std::regex band(R"(^[<>]?\s*(\d+(?:\.\d+)?)\s*(?:(?:-|–|to)\s*\d+(?:\.\d+)?|\+)?$)");
  std::smatch match;
  if (!std::regex_match(level, match, band)) return std::nullopt;
  return std::stod(match[1].str());
}

void require_rising_bands(const Role& order) {
  std::vector<double> starts;
  for (const auto& level : order.levels) {
    const auto start = band_start(level);
    if (!start) return;
    starts.push_back(*start);
  }
  const auto fall = std::adjacent_find(starts.begin(), starts.end(), std::greater<>());
  if (fall == starts.end()) return;
  const auto at = static_cast<std::size_t>(fall - starts.begin());
  throw Refusal(Code::bad_value,
                "The steps of " + order.column + " are not in order: " + order.levels[at] + " comes before " +
                    order.levels[at + 1] + ".",
                {{order.column, 0}}, "Sort the rows by step, or give each step a number.");
}

}  // namespace

Steps steps_of(const RateAsked& asked, const Role& order, std::vector<Note>& notes) {
  const std::size_t n = order.levels.size();
  if (n < 2) {
    throw Refusal(Code::too_few,
                  "There is only one step, " + order.levels.front() + "; a climb needs two or more.",
                  {{order.column, 0}}, "Add the rows of other steps, or ask how_often.");
  }
  Steps steps;
  std::vector<double> score = scores_of(asked, order);
  steps.numeric = !score.empty();
  if (!steps.numeric) {
    require_rising_bands(order);
    score.resize(n);
    std::iota(score.begin(), score.end(), 1.0);
  }
  // Steps of one score ("2" and "2.0") are one step; the others stand in the order of their scores.
  std::vector<std::size_t> sorted(n);
  std::iota(sorted.begin(), sorted.end(), std::size_t{0});
  std::stable_sort(sorted.begin(), sorted.end(),
                   [&](std::size_t a, std::size_t b) { return score[a] < score[b]; });
  std::vector<std::int32_t> place(n);
  for (const auto level : sorted) {
    if (steps.score.empty() || score[level] > steps.score.back()) {
      steps.score.push_back(score[level]);
      steps.names.push_back(steps.numeric ? number_text(score[level]) : order.levels[level]);
    }
    place[level] = static_cast<std::int32_t>(steps.score.size()) - 1;
  }
  if (steps.score.size() < 2) {
    throw Refusal(Code::too_few,
                  "There is only one step, " + steps.names.front() + "; a climb needs two or more.",
                  {{order.column, 0}}, "Add the rows of other steps, or ask how_often.");
  }
  for (const auto code : order.codes) steps.codes.push_back(place[static_cast<std::size_t>(code)]);
  auto totals = add_up(asked.count.numbers, asked.exposure.numbers, steps.codes, steps.score.size());
  steps.count = std::move(totals.count);
  steps.exposure = std::move(totals.exposure);
  if (steps.numeric && order.source && !order.source->texts.empty()) {
    notes.push_back({"text_numbers",
                     "The steps of " + order.column + " came as text and were read as numbers.",
                     {{order.column, 0}}});
  }
  if (!steps.numeric) {
    notes.push_back({"equal_steps", "The steps of " + order.column +
                                        " are texts, so they count as 1, 2, 3, ... in "
                                        "the order in which they appear: " +
                                        listed(steps.names, 6) +
                                        ". Give numbers where the distances between them matter."});
  } else if (!std::is_sorted(order.codes.begin(), order.codes.end(), [&](std::int32_t a, std::int32_t b) {
               return score[static_cast<std::size_t>(a)] < score[static_cast<std::size_t>(b)];
             })) {
    notes.push_back(
        {"sorted", "The rows were not in the order of " + order.column + "; the steps stand sorted."});
  }
  return steps;
}

}  // namespace countsel
