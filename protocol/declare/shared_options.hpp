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
/// For what is simulated: which random numbers, and how many draws.
template <class A>
OptionSpec seed(double A::*member) {
  auto spec = bind::number("seed", member, "which stream of random numbers; the same seed, the same answer")
                  .from(0)
                  .to(9007199254740992.0);
  spec.type = "whole";
  return spec;
}
template <class A>
OptionSpec draws(double A::*member) {
  auto spec = bind::number("draws", member, "how many random draws").from(1).to(1e7);
  spec.type = "whole";
  return spec;
}
/// The ten ways to limits of one rate, the exact ones first.
std::vector<std::pair<std::string, RateMethod>> rate_methods();
/// Name and publication of a way to limits of one rate.
Source source_of(RateMethod method);
std::vector<Source> rate_sources();

}  // namespace shared
}  // namespace countsel
