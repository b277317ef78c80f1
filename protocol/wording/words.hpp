// protocol/wording/words.hpp -- the asker's own words in sentences and headings.
//
// Checked by: tests/protocol/wording/words_test.cpp.
#pragma once

#include <string>

#include "protocol/declare/asked.hpp"
#include "protocol/declare/spec.hpp"

namespace countsel {

/// "km-years" -> "km-year", "policies" -> "policy"; a word that is no plural stays.
std::string singular(const std::string& plural);

/// The words of one answer, with defaults filled in.
class Wording {
 public:
  Wording(const Words& words, const Frame& frame);

  const std::string& event() const { return event_; }
  const std::string& events() const { return events_; }
  std::string counted(double count) const;      ///< "1 burst", "1,204 bursts", "no bursts"
  std::string observed(double exposure) const;  ///< "3,400 bed-days"
  std::string per() const;                      ///< "per 1,000 bed-days", "per km-year"
  std::string rate_unit() const;                ///< "bursts per 100 km-years"
  std::string exposure_name() const;            ///< "km-years", "exposure"
  std::string period() const;                   ///< " in 2024" (with its space) or ""
  std::string level() const;                    ///< "95%"
  /// A declared heading with its {places} filled, or the style's usual heading.
  std::string heading(const std::string& pattern, Style style) const;
  /// "between 2.3 and 12.0", "at most 3.7", "at least 1.2", rounded to the limits; without the level.
  std::string limits(double value, double low, double high) const;

 private:
  std::string event_, events_, exposure_, period_;
  double per_, confidence_;
  bool unit_;
  bool exposure_given_;
};

/// First letter in upper case.
std::string capital(std::string text);
/// "A", "A and B", "A, B and C"; at most `most`, then "and 3 more".
std::string listed(const std::vector<std::string>& items, std::size_t most = 6);

}  // namespace countsel
