// protocol/wording/chances.cpp -- per cent where that is readable, one in so many where it is not.
#include "protocol/wording/chances.hpp"

#include <cmath>

#include "protocol/wording/numbers.hpp"

namespace countsel {
namespace {

/// "0.100" as "0.1".
std::string without_zeros(std::string text) {
  if (text.find('.') == std::string::npos || text.find('e') != std::string::npos) return text;
  while (text.back() == '0') text.pop_back();
  if (text.back() == '.') text.pop_back();
  return text;
}

}  // namespace

std::string chance_text(double chance) {
  if (std::isnan(chance)) return "?";
  if (chance <= 0) return "practically 0";
  if (chance < 0.001) return "about 1 in " + significant_text(1 / chance, 2);
  if (chance > 0.999) return chance < 1 ? "more than 99.9%" : "100%";
  if (chance > 0.99) return fixed_text(100 * chance, 1) + "%";
  return significant_text(100 * chance, 2) + "%";
}

std::string range_text(const AskedRange& range) {
  if (!range.given) return "";
  if (std::isinf(range.high)) return given_text(range.low) + " or more";
  if (range.low == range.high) return "exactly " + given_text(range.low);
  if (range.low == 0) return "at most " + given_text(range.high);
  return given_text(range.low) + " to " + given_text(range.high);
}

std::string say_chance(const Wording& wording, const SaidChance& said) {
  const bool past = !std::isnan(said.past_count);
  const std::string mean = past ? without_zeros(significant_text(said.mean, 3)) : given_text(said.mean);
  std::string next = past ? wording.observed(said.next_exposure) : "";
  if (next.rfind("1 ", 0) == 0) next.erase(0, 2);  // "in the next year"
  const std::string are = said.mean == 1 ? " " + wording.event() + " is" : " " + wording.events() + " are";
  std::string text;
  if (past) {
    text = "After " + wording.counted(said.past_count) + " in " + wording.observed(said.past_exposure) +
           ", " + mean + are + " to be expected in the next " + next;
  } else {
    text = "With " + mean + (said.mean == 1 ? " " + wording.event() : " " + wording.events()) + " expected";
  }
  text += wording.period();
  if (said.range.given) {
    text += past ? "; the chance of " : ", the chance of ";
    text += range_text(said.range) + " is " + chance_text(said.chance) + ".";
    text += " The count will likely be ";
  } else {
    text += past ? "; the count will likely be " : ", the count will likely be ";
  }
  text += said.low == said.high ? given_text(said.low)
                                : "between " + given_text(said.low) + " and " + given_text(said.high);
  text += " (" + wording.level() + " range, ";
  if (past) {
    text += "with the doubt that the past leaves";
  } else {
    text += said.overdispersion > 0 ? "negative binomial" : "Poisson";
  }
  return text + ").";
}

}  // namespace countsel
