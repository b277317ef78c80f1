// protocol/wording/climb.cpp -- percent for people, the factor in the figures.
#include "protocol/wording/climb.hpp"

#include <cmath>

#include "protocol/wording/numbers.hpp"

namespace countsel {
namespace {

/// "a fall of 3.1%", "a rise of 12%"; limits are signed so that they can stand on both sides of 0.
std::string signed_percent(double ratio) {
  if (!std::isfinite(ratio)) return "no limit";
  const double percent = 100 * (ratio - 1);
  return (percent > 0 ? "+" : "") + significant_text(percent, 2) + "%";
}

}  // namespace

std::string say_climb(const Wording& wording, const SaidClimb& said) {
  const std::string chance = "p " + std::string(said.p_value < 0.0001 || said.p_value > 0.99 ? "" : "= ") +
                             p_text(said.p_value) + ", score test" +
                             (said.direction == Direction::either ? "" : ", one-sided");
  const std::string over =
      " over the " + std::to_string(said.steps) + " steps from " + said.first + " to " + said.last;
  if (!(said.ratio > 0) || !std::isfinite(said.ratio)) {
    return "All " + wording.events() + " fall in the " + (said.ratio > 0 ? "last" : "first") + " step" +
           over + ", so no size of a change can be given (" + chance + ").";
  }
  const std::string limits = " (" + wording.level() +
                             (said.side == Side::both ? " limits " : " one-sided limit ") +
                             signed_percent(said.low) + " to " + signed_percent(said.high) + ")";
  const std::string change = signed_percent(said.ratio) + " for each " + said.step + limits;
  std::string text;
  if (said.p_value < said.level) {
    text = "The rate of " + wording.events() + (said.ratio > 1 ? " climbs" : " falls") + over + ": " +
           change + "; chance alone is an unlikely explanation (" + chance + ").";
  } else {
    text = "Whether the rate of " + wording.events() + " climbs or falls" + over +
           " cannot be told: " + change + ", which chance alone could well explain (" + chance + ").";
  }
  if (said.departure_p < said.level) {
    text += " A straight climb does not describe the steps well (p " +
            std::string(said.departure_p < 0.0001 ? "" : "= ") + p_text(said.departure_p) +
            "): look at each of them.";
  }
  return text;
}

void note_climb(const SaidClimb& said, std::vector<Note>& notes) {
  if (said.count < 10) {
    notes.push_back(
        {"too_few_for_trend", "With fewer than ten events a trend is read into chance all too easily."});
  }
  if (said.steps == 2) {
    notes.push_back(
        {"two_steps", "Two steps are a comparison rather than a trend; which_higher gives exact limits."});
  }
  if (std::isnan(said.low) || std::isnan(said.high)) {
    notes.push_back({"no_limits", "Wald limits have no value here; \"limits\":\"likelihood\" has."});
  }
}

}  // namespace countsel
