// protocol/declare/comparison_options.cpp -- where each comparison was published, and which group is which.
#include "protocol/declare/comparison_options.hpp"

#include "protocol/declare/nearest.hpp"
#include "protocol/wording/words.hpp"

namespace countsel::shared {

std::vector<std::pair<std::string, RatioMethod>> ratio_methods() {
  return {{"exact", RatioMethod::exact},
          {"mid-p", RatioMethod::mid_p},
          {"score", RatioMethod::score},
          {"likelihood", RatioMethod::likelihood},
          {"log-wald", RatioMethod::log_wald}};
}

std::vector<std::pair<std::string, TestMethod>> test_methods() {
  return {{"exact", TestMethod::exact},
          {"mid-p", TestMethod::mid_p},
          {"score", TestMethod::score},
          {"likelihood", TestMethod::likelihood},
          {"e-test", TestMethod::e_test}};
}

RateMethod rate_method(RatioMethod method) {
  switch (method) {
    case RatioMethod::mid_p:
      return RateMethod::mid_p;
    case RatioMethod::score:
      return RateMethod::score;
    case RatioMethod::likelihood:
      return RateMethod::likelihood;
    case RatioMethod::log_wald:
      return RateMethod::log_wald;
    default:
      return RateMethod::exact;
  }
}

Source source_of(RatioMethod method) {
  switch (method) {
    case RatioMethod::exact:
      return {"exact conditional limits of the ratio",
              "Przyborowski and Wilenski, Biometrika 31 (1940) 313-323; Clopper and Pearson, Biometrika 26 "
              "(1934) 404-413"};
    case RatioMethod::mid_p:
      return {"mid-p conditional limits of the ratio",
              "Lancaster, J. Amer. Statist. Assoc. 56 (1961) 223-234"};
    case RatioMethod::score:
      return {"score limits of the ratio",
              "Gu, Ng, Tang and Schucany, Biometrical Journal 50 (2008) 283-298"};
    case RatioMethod::likelihood:
      return {"likelihood-ratio limits of the ratio",
              "Wilks, Annals of Mathematical Statistics 9 (1938) 60-62"};
    default:
      return {"log-Wald limits of the ratio",
              "Wald, Trans. Amer. Math. Soc. 54 (1943) 426-482, on the log scale"};
  }
}

Source source_of(TestMethod method) {
  switch (method) {
    case TestMethod::exact:
      return {
          "exact conditional test; two-sided twice the smaller tail, so that it agrees with the exact limits",
          "Przyborowski and Wilenski, Biometrika 31 (1940) 313-323"};
    case TestMethod::mid_p:
      return {"mid-p conditional test; two-sided twice the smaller tail",
              "Lancaster, J. Amer. Statist. Assoc. 56 (1961) 223-234"};
    case TestMethod::score:
      return {"score test", "Gu, Ng, Tang and Schucany, Biometrical Journal 50 (2008) 283-298"};
    case TestMethod::likelihood:
      return {"likelihood-ratio test", "Wilks, Annals of Mathematical Statistics 9 (1938) 60-62"};
    default:
      return {"E-test", "Krishnamoorthy and Thomson, J. Statistical Planning and Inference 119 (2004) 23-35"};
  }
}

Source source_of(Adjust adjust) {
  if (adjust == Adjust::holm)
    return {"Holm's adjustment of several p-values", "Holm, Scandinavian J. Statistics 6 (1979) 65-70"};
  return {"Benjamini and Hochberg's adjustment of several p-values",
          "Benjamini and Hochberg, J. Royal Statistical Society B 57 (1995) 289-300"};
}

std::size_t reference_among(const Role& group, const std::string& reference) {
  for (std::size_t i = 0; i < group.levels.size(); ++i) {
    if (group.levels[i] == reference) return i;
  }
  const std::string near = nearest(reference, group.levels);
  throw Refusal(
      Code::bad_value, "The reference \"" + reference + "\" is none of the groups.", {{group.column, 0}},
      near.empty() ? "The groups are " + listed(group.levels) + "." : "Did you mean \"" + near + "\"?");
}

std::pair<std::size_t, std::size_t> two_groups(const Role& group, const std::optional<std::string>& reference,
                                               const std::string& one_hint, const std::string& many_hint) {
  const auto& levels = group.levels;
  if (levels.size() < 2) {
    throw Refusal(Code::too_few, "There is only one group, " + levels.front() + "; two are compared.",
                  {{group.column, 0}}, one_hint);
  }
  if (levels.size() > 2) {
    throw Refusal(Code::bad_value,
                  "There are " + std::to_string(levels.size()) + " groups in " + group.column + " (" +
                      listed(levels, 5) + "); two are compared.",
                  {{group.column, 0}}, many_hint);
  }
  const std::size_t second = reference ? reference_among(group, *reference) : 1;
  return {1 - second, second};
}

}  // namespace countsel::shared
