# tests/reference/rates/published.py -- copies published limits and comparisons from the gathered check values.
#
#   /usr/bin/python3 published.py FOLDER     with FOLDER the one that holds A_count_intervals.json and its like
#
# A printed number is held to half its last digit (a..., absolute); where the gathering recomputed it, a second row
# holds the recomputed value to 11 digits.
import json
import sys
from pathlib import Path

HERE = Path(__file__).resolve().parent
NAMES = {"lower": "low", "upper": "high", "lower_factor": "every_low", "upper_factor": "every_high"}


def rows_of(case, method, inputs, names, again="r1e-11"):
    source = f"{case['source']}; found: {case['found']}".replace("\t", " ")
    for key, name in names.items():
        recomputed = case["recomputed"].get(key)
        if key in case["expected"] and case["status"] != "DISAGREES" and case["expected"][key] != 0:
            printed, tolerance = case["printed"][key], case["tolerance"][key]
            many_digits = tolerance < 1e-11 * abs(case["expected"][key])
            held = "r2e-12" if many_digits else f"a{tolerance * 1.001:.6g}"
            yield [f"{method} {case['id']}", source, inputs, f"{name}={float(printed)!r}", held]
        if recomputed and method != "byar":  # those were recomputed with 1.96, which the engine never rounds to
            yield [f"{method} {case['id']} recomputed", f"{source}; {case['how']}", inputs, f"{name}={recomputed!r}", again]


def one_rate(case):
    i, kind = case["inputs"], case["id"]
    words = {"garwood": "exact", "gehrels": "exact", "midp": "mid_p", "exact": "exact", "score": "score", "wald": "wald"}
    if kind.startswith("E-mtbf-factor"):
        yield from rows_of(case, "exact", f"count={i['failures']} exposure={i['failures']} confidence={i['confidence']}", NAMES)
    elif kind == "E-mtbf-example":
        names = {"lower": "every_low", "upper": "every_high"}
        yield from rows_of(case, "exact", f"count=2 exposure=800 confidence={i['confidence']}", names)
    elif kind.startswith("A-sir-byar"):
        yield from rows_of(case, "byar", f"count={i['observed']} exposure={i['expected']} confidence={i['confidence']}", NAMES)
    elif "one_sided_confidence" in i:
        text = f"count={i['count']} exposure=1 confidence={i['one_sided_confidence']} one_sided=1"
        yield from rows_of(case, "exact", text, NAMES)
    elif "count" in i and kind != "A-15-400-byar-half":
        method = next((m for w, m in words.items() if w in kind), "exact")
        yield from rows_of(case, method, f"count={i['count']} exposure={i.get('exposure', 1)} confidence={i['confidence']}", NAMES)


def pair(case):
    i = case["inputs"]
    second = f"count0={i['count2']} exposure0={i['exposure2']}"
    return f"count1={i['count1']} exposure1={i['exposure1']} {second}"


def two_rates(case):
    i, kind = case["inputs"], case["id"]
    text = pair(case)
    side = {"two-sided": "either", "larger": "above", "greater": "above", "smaller": "below", "less": "below"}
    if kind == "B-etest-1":
        yield from rows_of(case, "e_test either", text, {"e_test_p": "p"}, "r1e-10")
        yield from rows_of(case, "exact either", text, {"conditional_p_two_sided": "p"})
    elif kind.startswith("B-etest-ref"):  # the authors' own program: each group's own variance
        # recomputed by a sum that leaves out 1e-10 of the chance
        yield from rows_of(case, f"unpooled {side[i['alternative']]}", text, {"p": "p"}, "r3e-9")
    elif kind.startswith("B-gu"):
        for key, method in {"score": "score", "exact_conditional": "exact", "mid_p_conditional": "mid_p", "e_test_score": "e_test"}.items():
            yield from rows_of(case, f"{method} above", text, {key: "p"}, "r1e-10" if method == "e_test" else "r1e-11")
    elif kind == "B-cond-midp-null":
        for key in ("midp_larger", "exact_larger", "midp_smaller", "exact_smaller"):
            method, word = key.split("_")
            yield from rows_of(case, f"{method.replace('midp', 'mid_p')} {side[word]}", f"{text} null_ratio={i['null_ratio']}", {key: "p"})
    elif kind == "B-ng-2":
        for key in ("wald_p", "score_p"):
            yield from rows_of(case, f"difference {key[:-2]} above", f"{text} null_difference={i['null_difference']}", {key: "p"})
    elif kind.startswith("B-ratio-ci"):
        yield from rows_of(case, f"limits {kind[11:]}", f"{text} confidence={i['confidence']}", NAMES)
    elif kind == "B-rothman-fluoro":
        text += f" confidence={i['confidence']}"
        yield from rows_of(case, "limits exact", text, {"ratio": "ratio", "exact_lower": "low", "exact_upper": "high"})
        yield from rows_of(case, "limits log_wald", text, {"logwald_lower": "low", "logwald_upper": "high"})


def write(name, what, files, prefixes, maker):
    folder = Path(sys.argv[1])
    with open(HERE / name, "w", encoding="utf-8") as out:
        out.write(f"# {what}, copied by published.py from the gathered check values; `source` says where each stands.\n")
        out.write("case\tsource\tinputs\texpected\ttolerance\n")
        for file in files:
            for case in json.loads((folder / file).read_text(encoding="utf-8")):
                if case["id"].startswith(prefixes):
                    out.writelines("\t".join(row) + "\n" for row in maker(case))


write(
    "published_limits.tsv",
    "Published limits for one rate",
    ["A_count_intervals.json", "E_reliability_trend.json", "F_planning.json", "H_prediction.json"],
    ("A-garwood", "A-15-400", "A-sir", "A-gehrels", "A-midp", "E-mtbf", "F-rule-of-three", "H-hahn-meeker-ci"),
    one_rate,
)
write(
    "published_two_rates.tsv",
    "Published comparisons of two rates",
    ["B_standardise_compare.json"],
    ("B-etest", "B-gu", "B-cond", "B-ng", "B-ratio", "B-rothman"),
    two_rates,
)
