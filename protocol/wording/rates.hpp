// protocol/wording/rates.hpp -- sentences and notes that questions about rates share.
#pragma once

#include <string>
#include <vector>

#include "engine/rates/dispersion.hpp"
#include "engine/rates/limits.hpp"
#include "protocol/declare/answer.hpp"
#include "protocol/declare/asked.hpp"
#include "protocol/wording/words.hpp"

namespace countsel {

/// The label of every used row: the column's text, or the row's number.
std::vector<std::string> labels_of(const Role& label, const Asked& asked);

struct SaidRate {
  double count, exposure, rate, low, high;
};
/// "12 falls in 3,400 bed-days: 3.5 falls per 1,000 bed-days, between 1.8 and 6.2 (95% limits, exact)."
std::string say_rate(const Wording& wording, const SaidRate& said, const std::string& method, Side side,
                     bool exposure_given);
/// The highest and the lowest of several rates, with their limits.
std::string say_extremes(const Wording& wording, const std::vector<std::string>& labels,
                         const std::vector<double>& rates, const std::vector<double>& lows,
                         const std::vector<double>& highs);
std::string method_words(RateMethod method, bool scaled);

Note no_exposure_note(std::size_t rows);
Note scaled_note(const Dispersion& spread, double phi);
/// Where rows vary plainly more than Poisson counts (chance below 0.01); `remedy` says what allows for it.
void note_dispersion(const Dispersion& spread, bool groups, const Wording& wording, std::vector<Note>& notes,
                     const std::string& remedy = R"("spread":"scaled" allows for it.)");
void note_small_count(double count, const Wording& wording, std::vector<Note>& notes);
void note_large_sum(double count, std::vector<Note>& notes);
/// Where the method has no value: says so and names one that has.
void note_no_limits(const std::vector<std::string>& labels, const std::vector<double>& lows,
                    const std::vector<double>& highs, RateMethod method, bool scaled,
                    std::vector<Note>& notes);

}  // namespace countsel
