"""Solves the systems of a JSON file with scipy.optimize.root (hybr and lm), unknowns in ln concentration.

Prints one JSON object: for each method and size the share solved and the microseconds per system. The residual of a
balance is the logarithm of its two sides' ratio, the Jacobian is exact, the start that of the yardstick: every
component free, hydrogen at pH 7. A system counts as solved when its balances are met to 1e-10.
"""

import json
import sys
import time

import numpy as np
from scipy.optimize import root


def solve(system, method):
    nu = np.array(system["stoichiometry"], dtype=float)
    ln_beta = np.array(system["ln_beta"])
    totals = np.array(system["totals"])
    plus, minus = np.maximum(nu, 0.0), np.maximum(-nu, 0.0)

    def sides(x):
        c = np.exp(np.minimum(ln_beta + nu @ x, 700.0))
        return c, plus.T @ c + np.maximum(-totals, 0.0), minus.T @ c + np.maximum(totals, 0.0)

    def balances(x):
        c, above, below = sides(x)
        weighted = nu * c[:, None]
        slope = (plus.T @ weighted) / above[:, None] - (minus.T @ weighted) / below[:, None]
        return np.log(above / below), slope

    start = np.log(np.abs(totals))
    start[0] = np.log(1e-7)
    with np.errstate(all="ignore"):
        try:
            found = root(balances, start, jac=True, method=method, options={"xtol": 1e-13})
            _, above, below = sides(found.x)
            return bool(np.max(np.abs(above - below) / (above + below)) <= 1e-10)
        except (FloatingPointError, ValueError, np.linalg.LinAlgError):
            return False


def main():
    sizes = json.load(open(sys.argv[1], encoding="utf-8"))
    result = {}
    for size, systems in sizes.items():
        for method in ("hybr", "lm"):
            solve(systems[0], method)
            begin = time.perf_counter()
            solved = sum(solve(system, method) for system in systems)
            seconds = time.perf_counter() - begin
            result[f"{size} {method}"] = [solved / len(systems), seconds / len(systems) * 1e6]
    json.dump(result, sys.stdout)


main()
