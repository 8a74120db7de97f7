"""Writes breslow-day/values.json and checks values both programs can compute.

    /usr/bin/python3 testdata/reference/make-reference.py

Needs numpy, scipy and statsmodels, and the files make-reference.R wrote before.
Files are found relative to this script. Ends with an error if the two programs
disagree by more than a relative 1e-9.
"""

import csv
import json
import math
from pathlib import Path

import numpy as np
import scipy
import statsmodels
import statsmodels.api
from scipy import optimize, special, stats
from statsmodels.stats.contingency_tables import StratifiedTable

REFERENCE = Path(__file__).resolve().parent
DATA = REFERENCE.parent
PROGRAM = f"statsmodels {statsmodels.__version__}, scipy {scipy.__version__}, numpy {np.__version__}"


def read(name, file="values.json"):
    return json.loads((REFERENCE / name / file).read_text())


def agree(what, got, want, tolerance=1e-9):
    """Stops when two values differ by more than a relative tolerance."""
    if not abs(got - want) <= tolerance * max(abs(want), 1e-300):
        raise SystemExit(f"{what}: {got!r} here, {want!r} from the other program")


def published_table(name):
    with open(DATA / "tables" / f"{name}.csv", newline="") as file:
        return [[float(row[key]) for key in "xabcd"] for row in csv.DictReader(file)]


def verbal_tables():
    """The table of each item of the dichotomous questionnaire, matched on the total score."""
    with open(DATA / "verbal-aggression" / "verbal-binary.csv", newline="") as file:
        rows = list(csv.DictReader(file))
    names = list(rows[0])[2:]
    totals = [sum(int(row[name]) for name in names) for row in rows]
    for name in names:
        table = {total: [total, 0, 0, 0, 0] for total in sorted(set(totals))}
        for row, total in zip(rows, totals):
            column = (1 if row["gender"] == "F" else 3) + (row[name] == "0")
            table[total][column] += 1
        yield name, [[float(cell) for cell in stratum] for stratum in table.values()]


def informative(strata):
    """Strata with both groups and both outcomes."""
    return [s for s in strata if s[1] + s[2] > 0 and s[3] + s[4] > 0 and s[1] + s[3] > 0 and s[2] + s[4] > 0]


def stratified(strata):
    return StratifiedTable(np.array([[[s[1], s[2]], [s[3], s[4]]] for s in strata]).transpose(1, 2, 0))


def expected_cell(stratum, alpha):
    """The expected a cell under the odds ratio alpha, by bracketing the defining equation."""
    _, a, b, c, d = stratum
    reference, focal, correct = a + b, c + d, a + c
    low, high = max(0.0, correct - focal), min(reference, correct)

    def excess(u):
        cell = low + (high - low) * special.expit(u)
        odds = math.log(cell) + math.log(focal - correct + cell) - math.log(reference - cell) - math.log(correct - cell)
        return odds - math.log(alpha)

    return low + (high - low) * special.expit(optimize.brentq(excess, -25, 25, xtol=1e-14, rtol=1e-15))


def trend(strata, alpha):
    """The centred trend statistic of the odds ratio over x."""
    x, a, b, c, d = np.array(strata).T
    e = np.array([expected_cell(s, alpha) for s in strata])
    variance = 1 / (1 / e + 1 / (a + b - e) + 1 / (a + c - e) + 1 / (d - a + e))
    centred = x - np.sum(x * variance) / np.sum(variance)
    return np.sum(centred * (a - e)) ** 2 / np.sum(centred**2 * variance)


def breslow_day_values(strata):
    used = informative(strata)
    table = stratified(used)
    df = len(used) - 1
    plain = table.test_equal_odds(adjust=False).statistic
    tarone = table.test_equal_odds(adjust=True).statistic
    t = trend(used, table.oddsratio_pooled)
    # The p-values the library prints are 1 - cdf; the upper tail keeps more digits.
    return {
        "statistic": plain, "df": df, "p_value": stats.chi2.sf(plain, df),
        "tarone": tarone, "tarone_p_value": stats.chi2.sf(tarone, df),
        "trend_statistic": t, "trend_p_value": stats.chi2.sf(t, 1),
    }


def check_mantel_haenszel(case):
    """Compares statsmodels with the values base R gave for the same table."""
    table = stratified([s for s in case["strata"] if s[1] + s[2] > 0 and s[3] + s[4] > 0])
    name = case["name"]
    agree(name + " chi-square", table.test_null_odds(correction=False).statistic, case["chi_square"])
    if case["odds_ratio"] is not None:
        agree(name + " odds ratio", table.oddsratio_pooled, case["odds_ratio"])
        agree(name + " standard error", table.logodds_pooled_se, case["log_odds_ratio_se"])


def check_distributions():
    values = read("distributions")
    for df, x, p in values["chi_square_upper"]:
        agree(f"chi-square upper tail df {df} x {x}", special.gammaincc(df / 2, x / 2), p)
    for z, p in values["normal_upper"]:
        agree(f"normal upper tail {z}", special.erfc(z / math.sqrt(2)) / 2, p)
    for p, z in values["normal_upper_quantile"]:
        if z != 0:
            agree(f"normal quantile {p}", -special.ndtri(p), z)


def check_noncentral():
    """Compares the listed probabilities with scipy's noncentral hypergeometric distribution."""
    for case in read("noncentral")["cases"]:
        for side, odds in (("minimum", case["odds_ratio_low"]), ("maximum", case["odds_ratio_high"])):
            probability = 1.0
            for _, a, b, c, d in case["strata"]:
                if a + b == 0 or c + d == 0:
                    continue
                cell = max(0, a - d) if side == "minimum" else min(a + b, a + c)
                probability *= stats.nchypergeom_fisher.pmf(cell, a + b + c + d, a + c, a + b, odds)
            agree(f"{case['name']} {side}", probability, case[f"probability_{side}"])


def main():
    shipped = statsmodels.api.datasets.china_smoking.load_pandas().data.to_numpy()
    if not np.array_equal(shipped, np.array(published_table("china-smoking"))[:, 1:]):
        raise SystemExit("china-smoking.csv differs from the table statsmodels ships")

    mantel_haenszel = read("mantel-haenszel")
    for case in mantel_haenszel["tables"] + mantel_haenszel["sparse"] + mantel_haenszel["items"]:
        check_mantel_haenszel(case)
    check_distributions()
    check_noncentral()

    tables = [(case["name"], published_table(case["name"])) for case in mantel_haenszel["tables"]]
    checks = {case["name"]: case["check"] for case in mantel_haenszel["tables"]}
    trends = read("breslow-day", "trend.json")
    result = {"program": PROGRAM}
    for key, cases, theirs in (("tables", tables, trends["tables"]), ("items", list(verbal_tables()), trends["items"])):
        result[key] = []
        for (name, strata), other in zip(cases, theirs, strict=True):
            values = {k: v if k == "df" else float(v) for k, v in breslow_day_values(strata).items()}
            agree(name + " trend", values["trend_statistic"], other["trend_statistic"])
            cells = [[int(cell) for cell in s] for s in strata]
            result[key].append({"name": name, "check": checks.get(name, "CV-09"), "strata": cells, **values})
    text = json.dumps(result, indent=2)
    (REFERENCE / "breslow-day" / "values.json").write_text(compact(text))
    print("wrote breslow-day; the values both programs compute agree")


def compact(text):
    """Puts each stratum on one line."""
    lines, row = [], None
    for line in text.splitlines():
        if row is not None:
            row.append(line.strip())
            if line.strip().startswith("]"):
                lines.append("".join(row).replace(",", ", ").rstrip())
                row = None
        elif line.strip() == "[":
            row = [line]
        else:
            lines.append(line)
    return "\n".join(lines) + "\n"


if __name__ == "__main__":
    main()
