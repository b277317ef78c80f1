// protocol/masking/mask.cpp -- choose, ask again, compare, withhold, say so.
#include "protocol/masking/mask.hpp"

#include <algorithm>
#include <cmath>
#include <optional>

#include "engine/table/masking.hpp"
#include "protocol/masking/counts_shown.hpp"
#include "protocol/masking/differences.hpp"
#include "protocol/masking/other_counts.hpp"
#include "protocol/wording/numbers.hpp"

namespace countsel {
namespace {

/// A list of counts with what is withheld of it.
struct MaskedCounts {
  CountList list;
  MaskedList masked;
  bool same_sum;
};

std::vector<MaskedCounts> masked_counts(const CountsShown& shown, double threshold, bool total_shown) {
  std::vector<MaskedCounts> all;
  for (const auto& list : shown.lists) {
    std::vector<double> counts = list.counts;
    for (double& count : counts)
      if (std::isnan(count)) count = threshold;  // no such cell: nothing to withhold
    MaskedList masked = mask_list(counts, threshold, total_shown);
    for (std::size_t i = 0; i < counts.size(); ++i)
      if (std::isnan(list.counts[i])) masked.counts[i] = Shown::plain;
    const bool same_sum = total_shown && masked.total == Shown::plain;
    all.push_back({list, std::move(masked), same_sum});
  }
  return all;
}

/// Adds `change` to a count by way of its rows.
void change_rows(const std::vector<std::uint32_t>& rows, double change, std::vector<double>& counts) {
  if (rows.empty()) return;
  if (change >= 0) {
    counts[rows.front()] += change;
    return;
  }
  for (const auto row : rows) {
    const double taken = std::min(counts[row], -change);
    counts[row] -= taken;
    change += taken;
  }
}

/// Asks the question with other counts; the asked ones are put back whatever happens.
class AskedAgain {
 public:
  AskedAgain(const Question& question, Asked& asked, const Context& context)
      : question_(question),
        asked_(asked),
        context_(context),
        role_(*count_role(question, asked)),
        numbers_(role_.numbers),
        own_(std::move(role_.own_numbers)) {
    context_.notes.clear();
    context_.work.progress.told = nullptr;
  }
  ~AskedAgain() {
    role_.own_numbers = std::move(own_);
    role_.numbers = numbers_;
  }
  AskedAgain(const AskedAgain&) = delete;
  AskedAgain& operator=(const AskedAgain&) = delete;

  std::vector<double> counts() const { return {numbers_.begin(), numbers_.end()}; }
  Answer answer(std::vector<double> counts) {
    role_.own_numbers = std::move(counts);
    role_.numbers = role_.own_numbers;
    Context again = context_;
    return question_.answer(asked_, again);
  }

 private:
  const Question& question_;
  Asked& asked_;
  Context context_;
  Role& role_;
  std::span<const double> numbers_;
  std::vector<double> own_;
};

/// What is withheld, and whether each withheld count was tried with another number.
struct Tried {
  Withheld withheld;
  bool all_covered = true;
  std::size_t counts = 0;  ///< withheld
};

/// How often a question is asked again: often for tables that people read, seldom for large ones.
std::size_t most_repeats(std::size_t rows) { return rows <= 200 ? 24 : rows <= 2000 ? 8 : 3; }

Tried try_out(const Answer& answer, const std::vector<MaskedCounts>& all, double threshold, std::size_t most,
              AskedAgain& again) {
  Tried tried{Withheld(answer)};
  std::vector<OtherCounts> others;
  std::size_t repeats = 0;
  for (const auto& one : all) {
    others.push_back(other_counts(one.list.counts, one.masked.counts, threshold, one.same_sum, most));
    tried.all_covered &= others.back().all_covered && one.masked.safe;
    repeats = std::max(repeats, others.back().changes.size());
  }
  for (std::size_t r = 0; r < repeats; ++r) {
    std::vector<double> counts = again.counts();
    for (std::size_t l = 0; l < all.size(); ++l) {
      const bool seen_before =
          std::any_of(all.begin(), all.begin() + static_cast<std::ptrdiff_t>(l),
                      [&](const auto& one) { return one.list.rows == all[l].list.rows; });
      if (others[l].changes.empty() || seen_before) continue;
      const auto& change = others[l].changes[std::min(r, others[l].changes.size() - 1)];
      for (std::size_t i = 0; i < change.size(); ++i)
        if (change[i] != 0) change_rows(all[l].list.rows[i], change[i], counts);
    }
    add_differences(answer, again.answer(std::move(counts)), tried.withheld);
  }
  return tried;
}

/// In the rows of a withheld count goes everything but what says which row it is and how much was observed.
void withhold_rows(const Question& question, const Answer& answer, const std::vector<MaskedCounts>& all,
                   Withheld& withheld) {
  for (const auto& one : all) {
    if (one.list.table == CountList::nowhere) continue;
    const OutTable& table = answer.tables[one.list.table];
    for (std::size_t row = 0; row < one.masked.counts.size(); ++row) {
      if (one.masked.counts[row] == Shown::plain) continue;
      bool counted = false;
      for (std::size_t c = 0; c < table.columns.size(); ++c) {
        const Style style = style_of(question, table.name, table.columns[c].first);
        counted |= style == Style::count;
        // Other numbers were given or follow from totals; where they rest on the count they differed. Texts
        // that follow a count are judgements of it.
        const bool rests = counted && (derived(style) || style == Style::text || style == Style::level ||
                                       style == Style::whole);
        if (rests || c == one.list.column) withheld.tables[one.list.table][c][row] = 1;
      }
    }
  }
}

Note masking_note(const std::string& mark, double threshold) {
  const std::string k = given_text(threshold);
  return {
      "masked",
      "Counts under " + k + ", zeros among them, are shown as \"" + mark +
          "\", and so is any count that would give one of them away by subtraction, whatever its size. "
          "Rates, "
          "limits, tests and points that rest on them are left out, and the stamp leaves the counts out. The "
          "rule of whoever owns the data comes first: thresholds differ, some rules let zeros stand, and "
          "what "
          "was published before may still give a count away."};
}

/// For counts of an unknown make: those under the threshold, never one alone.
std::size_t withhold_small(const Question& question, const Answer& answer, double threshold,
                           Withheld& withheld) {
  std::size_t withheld_counts = 0;
  for (std::size_t t = 0; t < answer.tables.size(); ++t) {
    for (std::size_t c = 0; c < answer.tables[t].columns.size(); ++c) {
      const auto& [name, cells] = answer.tables[t].columns[c];
      const auto* numbers = std::get_if<std::vector<double>>(&cells);
      if (!numbers || style_of(question, answer.tables[t].name, name) != Style::count) continue;
      std::size_t small = 0, next = numbers->size();
      for (std::size_t i = 0; i < numbers->size(); ++i) {
        if ((*numbers)[i] < threshold) {
          withheld.tables[t][c][i] = 1;
          ++small;
        } else if (next == numbers->size() || (*numbers)[i] < (*numbers)[next]) {
          next = i;
        }
      }
      if (small == 1 && next < numbers->size()) withheld.tables[t][c][next] = 1;
      withheld_counts += small == 1 ? 2 : small;
    }
  }
  return withheld_counts;
}

bool nothing_small(const std::vector<MaskedCounts>& all) {
  return std::all_of(all.begin(), all.end(), [](const MaskedCounts& one) {
    return std::all_of(one.masked.counts.begin(), one.masked.counts.end(),
                       [](Shown count) { return count == Shown::plain; });
  });
}

std::size_t count_withheld(const std::vector<MaskedCounts>& all) {
  std::size_t withheld = 0;
  for (const auto& one : all)
    withheld += static_cast<std::size_t>(std::count_if(one.masked.counts.begin(), one.masked.counts.end(),
                                                       [](Shown count) { return count != Shown::plain; }));
  return withheld;
}

/// The better of two ways: either totals go, or some larger counts do. Nothing where neither is sure.
std::optional<Tried> withheld_by_trial(const Question& question, Asked& asked, const Context& context,
                                       const Answer& answer, const CountsShown& shown, double threshold,
                                       std::size_t& counts) {
  try {
    AskedAgain again(question, asked, context);
    const auto trial = [&](bool total_shown, std::size_t most) {
      const auto all = masked_counts(shown, threshold, total_shown);
      Tried tried = try_out(answer, all, threshold, most, again);
      withhold_rows(question, answer, all, tried.withheld);
      withhold_derived_figures(question, answer, tried.withheld);
      tried.counts = count_withheld(all);
      return tried;
    };
    Tried without_total = trial(false, 1), with_total = trial(true, most_repeats(asked.rows));
    const bool better =
        with_total.all_covered &&
        (!without_total.all_covered || with_total.withheld.size() <= without_total.withheld.size());
    Tried& chosen = better ? with_total : without_total;
    if (!chosen.all_covered) return std::nullopt;
    counts = chosen.counts;
    return std::move(chosen);
  } catch (const Refusal& refusal) {
    if (refusal.code == Code::cancelled || refusal.code == Code::out_of_time) throw;
    return std::nullopt;  // the question cannot be asked of other counts
  }
}

}  // namespace

bool mask_counts(const Question& question, Asked& asked, const Context& context, Answer& answer) {
  if (!asked.mask_below) return false;
  const double threshold = *asked.mask_below;
  const std::string k = given_text(threshold), mark = "<" + k;
  const CountsShown shown = counts_shown(question, asked, answer);
  const bool known = shown.all_known && count_role(question, asked);
  std::size_t counts = 0;
  std::optional<Tried> tried;
  if (known) {
    if (nothing_small(masked_counts(shown, threshold, false))) {
      answer.notes.push_back({"nothing_masked", "No count is under " + k + "."});
      return false;
    }
    tried = withheld_by_trial(question, asked, context, answer, shown, threshold, counts);
  }
  if (!tried) {
    tried.emplace(Tried{Withheld(answer)});
    withhold_all(question, answer, tried->withheld);
    counts = withhold_small(question, answer, threshold, tried->withheld);
  }
  take_out(question, tried->withheld, mark, answer);
  const bool unseen = !shown.lists.empty() && shown.lists.front().table == CountList::nowhere;
  const std::string are = unseen        ? "what rests on them is"
                          : counts == 1 ? "1 count is"
                                        : given_text(static_cast<double>(counts)) + " counts are";
  const std::string withheld = are + " withheld" + (unseen ? "." : " (\"" + mark + "\").");
  answer.say += answer.say.empty() ? "What was asked rests on counts under " + k + "; " + withheld
                                   : " To protect counts under " + k + ", " + withheld;
  answer.notes.push_back(masking_note(mark, threshold));
  return true;
}

}  // namespace countsel
