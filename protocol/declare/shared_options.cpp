// protocol/declare/shared_options.cpp -- section 4 of the contract, and where each method was published.
#include "protocol/declare/shared_options.hpp"

namespace countsel::shared {

OptionSpec confidence() {
  return bind::number("confidence", &RateAsked::confidence, "level of the limits").over(0).under(1);
}
OptionSpec per() {
  return bind::number("per", &RateAsked::per, "rates are stated per this much exposure", "exposure").over(0);
}
RoleSpec count() { return bind::role("count", Holds::count, &RateAsked::count, "events counted", true); }
RoleSpec exposure(bool required) {
  return bind::role("exposure", Holds::exposure, &RateAsked::exposure, "how much was observed", required);
}

std::vector<std::pair<std::string, RateMethod>> rate_methods() {
  return {{"exact", RateMethod::exact},
          {"mid-p", RateMethod::mid_p},
          {"score", RateMethod::score},
          {"likelihood", RateMethod::likelihood},
          {"jeffreys", RateMethod::jeffreys},
          {"byar", RateMethod::byar},
          {"wald", RateMethod::wald},
          {"log-wald", RateMethod::log_wald},
          {"square-root", RateMethod::square_root},
          {"bayes", RateMethod::bayes}};
}

Source source_of(RateMethod method) {
  switch (method) {
    case RateMethod::exact:
      return {"exact limits", "Garwood, Biometrika 28 (1936) 437-442"};
    case RateMethod::mid_p:
      return {"mid-p limits",
              "Lancaster, J. Amer. Statist. Assoc. 56 (1961) 223-234; Cohen and Yang, Statistics in Medicine "
              "13 (1994) "
              "2189-2203"};
    case RateMethod::score:
      return {"score limits", "Rao, Proc. Cambridge Phil. Soc. 44 (1948) 50-57"};
    case RateMethod::likelihood:
      return {"likelihood-ratio limits", "Wilks, Annals of Mathematical Statistics 9 (1938) 60-62"};
    case RateMethod::jeffreys:
      return {"Jeffreys limits", "Brown, Cai and DasGupta, Statistica Sinica 13 (2003) 19-49"};
    case RateMethod::byar:
      return {"Byar's cube-root limits",
              "Breslow and Day, Statistical Methods in Cancer Research, vol. II, IARC 1987, section 2.3"};
    case RateMethod::wald:
      return {"Wald limits", "Wald, Trans. Amer. Math. Soc. 54 (1943) 426-482"};
    case RateMethod::log_wald:
      return {"log-Wald limits", "Wald, Trans. Amer. Math. Soc. 54 (1943) 426-482, on the log scale"};
    case RateMethod::square_root:
      return {"square-root limits", "Anscombe, Biometrika 35 (1948) 246-254"};
    default:
      return {"Bayesian limits, gamma prior",
              "Gelman et al., Bayesian Data Analysis, 3rd ed. 2013, section 2.6"};
  }
}

std::vector<Source> rate_sources() {
  std::vector<Source> sources;
  for (const auto& [name, method] : rate_methods()) sources.push_back(source_of(method));
  return sources;
}

}  // namespace countsel::shared
