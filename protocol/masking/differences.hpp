// protocol/masking/differences.hpp -- what two answers do not share, and how it is withheld.
//
// Checked by: tests/protocol/masking_test.py.
#pragma once

#include <string>
#include <vector>

#include "protocol/declare/question.hpp"

namespace countsel {

/// What is withheld of an answer, part by part, in the answer's own order.
struct Withheld {
  std::vector<char> figures, notes, methods, sentences, lines;
  std::vector<std::vector<std::vector<char>>> tables;  ///< table, column, row
  std::vector<std::vector<char>> y, low, high;         ///< series of the picture, point
  bool picture = false;                                ///< all of it

  explicit Withheld(const Answer& answer);
  /// How much is withheld, to choose between two ways.
  std::size_t size() const;
};

/// The sentences of a text; together they are the text again.
std::vector<std::string> sentences_of(const std::string& text);
/// Adds whatever differs between the answer and the same question's answer to other counts.
void add_differences(const Answer& answer, const Answer& other, Withheld& withheld);
/// Whether numbers of this style are worked out from counts rather than given, or sums.
bool derived(Style style);
/// Where one derived figure goes, all of them go: an estimate does not stay without its limits.
void withhold_derived_figures(const Question& question, const Answer& answer, Withheld& withheld);
/// Everything but labels and exposures, for answers whose counts are of an unknown make.
void withhold_all(const Question& question, const Answer& answer, Withheld& withheld);
/// Takes it out: `mark` stands for counts, null for other numbers; the sentence loses its sentences.
void take_out(const Question& question, const Withheld& withheld, const std::string& mark, Answer& answer);

}  // namespace countsel
