// protocol/wording/words.cpp -- singular and plural, units, headings.
#include "protocol/wording/words.hpp"

#include <cctype>
#include <cmath>

#include "protocol/wording/numbers.hpp"

namespace countsel {
namespace {

bool ends(const std::string& text, const char* end) {
  const std::string tail(end);
  return text.size() > tail.size() && text.compare(text.size() - tail.size(), tail.size(), tail) == 0;
}

std::string singular_word(const std::string& word) {
  for (const auto* same : {"series", "species"}) {
    if (word == same || ends(word, same)) return word;
  }
  for (const auto* end : {"buses", "iruses", "atuses"}) {
    if (word == end || ends(word, end)) return word.substr(0, word.size() - 2);
  }
  if (ends(word, "ies") && word.size() > 4) return word.substr(0, word.size() - 3) + "y";
  for (const auto* end : {"ches", "shes", "sses", "xes"}) {
    if (ends(word, end)) return word.substr(0, word.size() - 2);
  }
  if (ends(word, "ss") || ends(word, "us") || ends(word, "is") || !ends(word, "s")) return word;
  return word.substr(0, word.size() - 1);
}

}  // namespace

std::string singular(const std::string& plural) {
  // "hours worked" is a plural by its first word, "vehicle hours" by its last.
  const std::string last = singular_word(plural);
  if (last != plural) return last;
  const auto space = plural.find(' ');
  if (space == std::string::npos) return plural;
  return singular_word(plural.substr(0, space)) + plural.substr(space);
}

Wording::Wording(const Words& words, const Frame& frame)
    : event_(words.event),
      events_(words.events),
      exposure_(words.exposure),
      period_(words.period),
      per_(frame.per),
      confidence_(frame.confidence),
      unit_(!words.exposure.empty()),
      exposure_given_(frame.exposure_given) {
  if (event_.empty()) event_ = events_.empty() ? "event" : singular(events_);
  if (events_.empty()) events_ = words.event.empty() ? "events" : event_ + "s";
}

std::string Wording::counted(double count) const {
  if (count == 0) return "no " + events_;
  return given_text(count) + " " + (count == 1 ? event_ : events_);
}

std::string Wording::exposure_name() const {
  return unit_ ? exposure_ : exposure_given_ ? "exposure" : "rows";
}

std::string Wording::observed(double exposure) const {
  if (!exposure_given_) return given_text(exposure) + (exposure == 1 ? " row" : " rows");
  if (!unit_) return given_text(exposure) + (exposure == 1 ? " unit of exposure" : " units of exposure");
  return given_text(exposure) + " " + (exposure == 1 ? singular(exposure_) : exposure_);
}

std::string Wording::per() const {
  const std::string plural = unit_ ? exposure_ : exposure_given_ ? "units of exposure" : "rows";
  if (per_ == 1) return "per " + singular(plural);
  return "per " + given_text(per_) + " " + plural;
}

std::string Wording::rate_unit() const { return events_ + " " + per(); }

std::string Wording::period() const { return period_.empty() ? "" : " in " + period_; }

std::string Wording::level() const { return percent_text(confidence_); }

std::string Wording::heading(const std::string& pattern, Style style) const {
  std::string text = pattern;
  if (text.empty()) {
    switch (style) {
      case Style::count:
        text = "{events}";
        break;
      case Style::exposure:
        text = "{exposure}";
        break;
      case Style::rate:
        text = "{events} {per}";
        break;
      case Style::every:
        text = "{exposure} for each {event}";
        break;
      case Style::ratio:
        text = "rate ratio";
        break;
      case Style::p_value:
        text = "p-value";
        break;
      default:
        break;
    }
  }
  const std::pair<const char*, std::string> places[] = {{"{events}", events_},
                                                        {"{event}", event_},
                                                        {"{per}", per()},
                                                        {"{exposure}", exposure_name()},
                                                        {"{level}", level()}};
  for (const auto& [place, word] : places) {
    for (auto at = text.find(place); at != std::string::npos; at = text.find(place, at + word.size())) {
      text.replace(at, std::char_traits<char>::length(place), word);
    }
  }
  return text;
}

std::string Wording::limits(double value, double low, double high) const {
  const auto text = round_limits(value, low, high);
  const bool no_low = !(low > 0) || std::isnan(low), no_high = !std::isfinite(high);
  if (no_high && no_low) return "anywhere from 0 upwards";
  if (no_high) return "at least " + text.low;
  if (std::isfinite(low) && low == 0) return "at most " + text.high;
  return "between " + text.low + " and " + text.high;
}

std::string capital(std::string text) {
  if (!text.empty()) text[0] = static_cast<char>(std::toupper(static_cast<unsigned char>(text[0])));
  return text;
}

std::string listed(const std::vector<std::string>& items, std::size_t most) {
  std::string text;
  const std::size_t named = std::min(most, items.size());
  for (std::size_t i = 0; i < named; ++i) {
    if (i > 0) text += i + 1 == items.size() ? " and " : ", ";
    text += items[i];
  }
  if (items.size() > named) text += " and " + std::to_string(items.size() - named) + " more";
  return text;
}

}  // namespace countsel
