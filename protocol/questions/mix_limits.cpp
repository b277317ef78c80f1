// protocol/questions/mix_limits.cpp -- which name belongs to which way of standardising.
#include "protocol/questions/mix_limits.hpp"

#include <utility>

#include "protocol/declare/comparison_options.hpp"

namespace countsel {
namespace {

// Constants that need no constructor: other files' declarations are built from them before main.
constexpr std::pair<MixLimits, DirectMethod> direct_methods[] = {{MixLimits::unset, DirectMethod::gamma},
                                                                 {MixLimits::gamma, DirectMethod::gamma},
                                                                 {MixLimits::mid_p, DirectMethod::mid_p},
                                                                 {MixLimits::dobson, DirectMethod::dobson},
                                                                 {MixLimits::normal, DirectMethod::normal}};
constexpr std::pair<MixLimits, RateMethod> indirect_methods[] = {
    {MixLimits::unset, RateMethod::exact},
    {MixLimits::exact, RateMethod::exact},
    {MixLimits::mid_p, RateMethod::mid_p},
    {MixLimits::score, RateMethod::score},
    {MixLimits::likelihood, RateMethod::likelihood},
    {MixLimits::jeffreys, RateMethod::jeffreys},
    {MixLimits::byar, RateMethod::byar},
    {MixLimits::wald, RateMethod::wald},
    {MixLimits::log_wald, RateMethod::log_wald},
    {MixLimits::square_root, RateMethod::square_root}};

/// The engine's method of that name among those of one way; refuses a name of the other way.
template <class E, std::size_t n>
E method_among(const std::pair<MixLimits, E> (&methods)[n], MixLimits limits, const char* way) {
  std::string fitting;
  for (const auto& [name, method] : methods) {
    if (name == limits) return method;
    if (name != MixLimits::unset)
      fitting += (fitting.empty() ? "" : ", ") + shared::name_of(name, mix_limit_names());
  }
  throw Refusal(Code::bad_value,
                "limits is \"" + shared::name_of(limits, mix_limit_names()) +
                    "\", which is no way to limits of " + way + " standardisation.",
                {}, "Take one of " + fitting + ".");
}

Source direct_source(DirectMethod method) {
  switch (method) {
    case DirectMethod::gamma:
      return {"gamma limits of a directly standardised rate, F limits of the ratio of two",
              "Fay and Feuer, Statistics in Medicine 16 (1997) 791-801; Fay, Communications in Statistics, "
              "Theory "
              "and Methods 28 (1999) 2141-2160"};
    case DirectMethod::mid_p:
      return {"mid-p gamma limits of a directly standardised rate",
              "Fay and Kim, Biometrical Journal 59 (2017) 377-387"};
    case DirectMethod::dobson:
      return {"Dobson's limits, from the exact limits of the sum of the counts",
              "Dobson, Kuulasmaa, Eberle and Scherer, Statistics in Medicine 10 (1991) 457-462"};
    default:
      return {"normal limits of a directly standardised rate",
              "Breslow and Day, Statistical Methods in Cancer Research, vol. II, IARC 1987, section 2.2"};
  }
}
Source log_ratio_source() {
  return {"ratio of two directly standardised rates, normal on the log scale",
          "Breslow and Day, Statistical Methods in Cancer Research, vol. II, IARC 1987, section 2.2"};
}
Source observed_over_expected() {
  return {"indirect standardisation, observed over expected",
          "Breslow and Day, Statistical Methods in Cancer Research, vol. II, IARC 1987, section 2.3"};
}

}  // namespace

const std::vector<std::pair<std::string, MixLimits>>& mix_limit_names() {
  static const std::vector<std::pair<std::string, MixLimits>> names = {
      {"gamma", MixLimits::gamma},
      {"mid-p", MixLimits::mid_p},
      {"dobson", MixLimits::dobson},
      {"normal", MixLimits::normal},
      {"exact", MixLimits::exact},
      {"score", MixLimits::score},
      {"likelihood", MixLimits::likelihood},
      {"jeffreys", MixLimits::jeffreys},
      {"byar", MixLimits::byar},
      {"wald", MixLimits::wald},
      {"log-wald", MixLimits::log_wald},
      {"square-root", MixLimits::square_root}};
  return names;
}

DirectMethod direct_method(MixLimits limits) { return method_among(direct_methods, limits, "direct"); }
RateMethod indirect_method(MixLimits limits) { return method_among(indirect_methods, limits, "indirect"); }

std::vector<Source> direct_sources(DirectMethod method, bool several) {
  if (several && (method == DirectMethod::dobson || method == DirectMethod::normal))
    return {direct_source(method), log_ratio_source()};
  return {direct_source(method)};
}

std::vector<Source> indirect_sources(RateMethod method) {
  return {observed_over_expected(), shared::source_of(method)};
}

std::vector<Source> mix_sources() {
  std::vector<Source> all;
  for (const auto method :
       {DirectMethod::gamma, DirectMethod::mid_p, DirectMethod::dobson, DirectMethod::normal})
    all.push_back(direct_source(method));
  all.push_back(log_ratio_source());
  all.push_back(observed_over_expected());
  for (const auto& [name, method] : indirect_methods) {
    if (name != MixLimits::unset) all.push_back(shared::source_of(method));
  }
  return all;
}

}  // namespace countsel
