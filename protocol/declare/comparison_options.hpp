// protocol/declare/comparison_options.hpp -- the options of questions that compare groups, declared once.
#pragma once

#include "engine/rates/adjust.hpp"
#include "engine/rates/two_rates.hpp"
#include "protocol/declare/spec.hpp"

namespace countsel::shared {

/// The ways to limits of a ratio of two rates, and the tests of one; the exact ones first.
std::vector<std::pair<std::string, RatioMethod>> ratio_methods();
std::vector<std::pair<std::string, TestMethod>> test_methods();
/// The way to limits of a single rate that goes with a ratio's.
RateMethod rate_method(RatioMethod method);
/// Name and publication.
Source source_of(RatioMethod method);
Source source_of(TestMethod method);
Source source_of(Adjust adjust);

/// The name under which a choice is offered.
template <class E>
std::string name_of(E value, const std::vector<std::pair<std::string, E>>& names) {
  for (const auto& [name, one] : names) {
    if (one == value) return name;
  }
  return {};
}

/// Of several p-values; the member's initialiser is the default.
template <class A>
OptionSpec adjust(Adjust A::*member) {
  return bind::choice("adjust", member, "how several p-values are adjusted",
                      {{"none", Adjust::none}, {"holm", Adjust::holm}, {"bh", Adjust::bh}});
}

/// The group named as reference; refuses bad_value with the nearest group where there is none of that name.
std::size_t reference_among(const Role& group, const std::string& reference);
/// Codes of the group compared and of the reference (by default the second to appear). Refuses too_few for
/// one group, bad_value for more than two; `one_hint` and `many_hint` say what to ask instead.
std::pair<std::size_t, std::size_t> two_groups(const Role& group, const std::optional<std::string>& reference,
                                               const std::string& one_hint, const std::string& many_hint);

}  // namespace countsel::shared
