#!/usr/bin/env python3
# tests/reference/rates/copy_cases.py -- copies gathered check values that the wire is held to.
#
#   ./copy_cases.py FOLDER     with FOLDER the one that holds A_count_intervals.json and its like
#
# Makes cases_one_rate.json and its like, one file for each topic: published values with their source and tolerance,
# and recomputed ones to about 12 digits with what computed them.
import csv
import json
import re
import sys
from pathlib import Path

HERE = Path(__file__).resolve().parent
FIELDS = ["id", "quantity", "inputs", "expected", "tolerance", "recomputed", "how", "status", "source", "found", "note"]
CHOICES = {
    "cases_one_rate.json": [("A_count_intervals.json", r"A-(garwood|15-400-(exact|score|wald|midp)|gehrels|midp|sir-byar)"),
                            ("H_prediction.json", r"H-hahn-meeker-ci")],
    "cases_two_rates.json": [("B_standardise_compare.json", r"B-(gu|ratio|cond|etest|rothman)")],
    "cases_expected.json": [("A_count_intervals.json", r"A-smr"), ("B_standardise_compare.json", r"B-boice")],
    "cases_strata.json": [("B_standardise_compare.json", r"B-(dsr|mh|indirect)")],
    "cases_trend.json": [("I_trend_change.json", r"I-(coal-trend|doctors)")],
    "cases_spread.json": [("C_dispersion.json", r"C-"), ("G_shrinkage_multiplicity.json", r"G-(funnel|eb-claims)"),
                          ("H_prediction.json", r"H-hahn-meeker-pred")],
}


def main(folder):
    for name, choices in CHOICES.items():
        cases = []
        for file, pattern in choices:
            for case in json.loads((folder / file).read_text()):
                if not re.match(pattern, case["id"]):
                    continue
                kept = {field: case[field] for field in FIELDS if case.get(field) not in (None, "")}
                if "data_file" in kept["inputs"]:
                    with (folder / "data" / kept["inputs"]["data_file"]).open() as lines:
                        kept["inputs"]["counts"] = [int(list(row.values())[1]) for row in csv.DictReader(lines)]
                cases.append(kept)
        (HERE / name).write_text(json.dumps(cases, indent=1, ensure_ascii=False) + "\n")
        print(name, len(cases))


main(Path(sys.argv[1]))
