"""Copies the Poisson cases with log link out of the shared regression cases, with their sources.

  python3 copy_cases.py CASES_FOLDER     (writes poisson_cases.json and hard_cases.json here)

`recomputed` there was made with mpmath at 60 digits by generate/make_reference.py and is printed to 20.
"""
import json, os, sys
source, here = sys.argv[1], os.path.dirname(os.path.abspath(__file__))
keep = ["names", "n", "coef", "se", "cov", "loglik", "deviance", "pearson", "df_resid", "aic", "bic", "null_deviance",
        "null_loglik", "quasi", "HC0_se", "HC1_se", "HC2_se", "HC3_se", "HC0_cov", "cluster", "fitted", "hat"]
cases = []
for name in ["ships", "doctors", "danish_lung", "insurance", "warpbreaks", "salmonella", "epilepsy", "takeover_bids",
             "crabs", "nmes1988", "airfreight", "biochemists"]:
    for case in json.load(open(f"{source}/{name}.json")):
        if case["model"]["family"] != "poisson" or case["model"]["link"] != "log": continue
        if any(isinstance(t, dict) and "varies" in t for t in case["model"]["terms"]): continue
        case["recomputed"] = {k: v for k, v in case["recomputed"].items() if k in keep}
        cases.append(case)
json.dump(cases, open(os.path.join(here, "poisson_cases.json"), "w"), indent=1)
hard = [c for c in json.load(open(f"{source}/hard_dev.json")) if c["model"]["family"] in
        ("poisson", "negative-binomial", "zero-inflated-poisson") and c["data"]]
json.dump(hard, open(os.path.join(here, "hard_cases.json"), "w"), indent=1)
