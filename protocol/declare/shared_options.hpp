// protocol/declare/shared_options.hpp -- the options and roles that many questions share, declared once.
#pragma once

#include "engine/rates/limits.hpp"
#include "engine/rates/two_rates.hpp"
#include "protocol/declare/spec.hpp"

namespace countsel {

enum class Spread { poisson, scaled, added };

namespace shared {

OptionSpec confidence();
OptionSpec per();
RoleSpec count();
RoleSpec exposure(bool required = false);

template <class A>
OptionSpec side(Side A::*member) {
  return bind::choice("side", member, "which limits: both, or one that takes all of 1 - confidence",
                      {{"both", Side::both}, {"lower", Side::lower}, {"upper", Side::upper}});
}
template <class A>
OptionSpec direction(Direction A::*member) {
  return bind::choice(
      "direction", member, "which way the test looks",
      {{"either", Direction::either}, {"above", Direction::above}, {"below", Direction::below}});
}
template <class A>
OptionSpec spread(Spread A::*member) {
  return bind::choice("spread", member, "how much counts vary: as a Poisson's, or a multiple of it",
                      {{"poisson", Spread::poisson}, {"scaled", Spread::scaled}});
}
/// The ten ways to limits of one rate, the exact ones first.
std::vector<std::pair<std::string, RateMethod>> rate_methods();
/// Name and publication of a way to limits of one rate.
Source source_of(RateMethod method);
std::vector<Source> rate_sources();

}  // namespace shared
}  // namespace countsel
