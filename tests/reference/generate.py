"""Generate high-precision reference equilibria for the solver tests.

Writes `equilibria.ron` beside this file: a deterministic list of aqueous systems
(handcrafted and seeded random) with their equilibrium to 25 significant digits.

Model
    ln c_j = ln beta_j - ln gamma_j + sum_i nu_ji ln a_i for every species, the bare
    components included; sum_j nu_ji c_j + sum_k nu_ki n_k = T_i for every component
    that is not held; IAP_k <= Ks_k, n_k >= 0 and one of the two an equality for
    every solid.  gamma is 1, or Davies with its bracket constant above I = 0.5 mol/L.
    A component with total zero that no species releases is absent ("-inf").
    Inputs are the f64 nearest to the decimal strings in the file.

Method
    homotopy.py    assemblage enumeration and a homotopy in the equilibrium constants,
                   ending in a 100-digit Newton polish: the result that is written.
    dual.py        convex barrier minimisation and a scan over I, 90 digits: a second,
                   independent result.  It must agree and must be the only equilibrium.
    certificate.py the defining equations, evaluated on the full-precision result
                   (below 1e-40) and again on the printed strings alone.

Each note ends with the condition: the largest change of a ln activity per unit
relative error of one balance.  A double-precision program can reproduce ln
activities to about 1e-16 times it, and an amount of solid to about 1e-16 times the
totals it is left over from.

Run (needs Python 3.10 or later, mpmath and scipy; takes some minutes)
    python3 tests/reference/generate.py            writes equilibria.ron
    python3 tests/reference/generate.py NAME ...   only checks systems whose name
                                                   contains a NAME, writes nothing
Progress and agreement figures go to standard error.
"""

import sys
from collections import Counter
from pathlib import Path
from time import monotonic

from mpmath import mp, mpf

from certificate import balance_residual, printed_residual
from dual import solve_dual
from handcrafted import handcrafted_systems
from homotopy import POLISH_DIGITS, solve
from model import Problem
from randomized import random_systems
from ron import decimal, document, system_block

OUTPUT = Path(__file__).with_name("equilibria.ron")
RESIDUAL_LIMIT = mpf(10) ** -40
PRINTED_LIMIT = mpf(10) ** -21
AGREEMENT_LIMIT = mpf(10) ** -18


def log(text):
    print(text, file=sys.stderr, flush=True)


def unique_solution(problem):
    found, unresolved = solve(problem)
    name = problem.system.name
    for active, reason in unresolved:
        log(f"  {name}: solids {active} not resolved: {reason}")
    assert len(found) == 1, f"{name}: {len(found)} assemblages satisfy the conditions"
    return found[0]


def disagreement(problem, solution):
    """Largest difference to the second method in ln concentration and in amounts."""
    others = solve_dual(problem)
    assert len(others) == 1, f"{problem.system.name}: {len(others)} equilibria"
    other = others[0]
    pairs = zip(
        problem.ln_concentrations(solution.ln_activity, solution.strength),
        problem.ln_concentrations(other.ln_activity, other.strength),
    )
    worst = max(abs(a - b) for a, b in pairs)
    for amount, second in zip(solution.amounts, other.amounts):
        worst = max(worst, abs(amount - second) / amount if amount else abs(second))
    return worst


def expectation(problem, solution):
    """The `expect` entry: decimal strings over the full system."""
    system, count = problem.system, len(problem.components)
    ln10 = mp.ln(10)
    ln_conc = problem.ln_concentrations(solution.ln_activity, solution.strength)
    conc = [mp.exp(v) for v in ln_conc]
    log10 = [v / ln10 for v in ln_conc]
    index = [s / ln10 for s in problem.ln_saturation(solution.ln_activity)]
    held = [problem.components.index(i) for i in sorted(system.held)]
    held_totals = [mp.fsum(problem.balance_terms(p, conc, solution.amounts)) for p in held]
    gap = mp.fsum(c * z for c, z in zip(conc, problem.charge))
    return {
        "ionic_strength": decimal(solution.strength),
        "charge_gap": decimal(gap),
        "log10_free": spread(log10[:count], problem.components, len(system.components), "-inf"),
        "species_log10": spread(log10[count:], problem.complexes, len(system.species), "-inf"),
        "solids": spread(solution.amounts, problem.solids, len(system.solids), "0.0"),
        "saturation_index": spread(index, problem.solids, len(system.solids), "-inf"),
        "total_of_held": [decimal(total) for total in held_totals],
    }


def spread(values, indices, size, missing):
    """Strings at their indices in the full list, `missing` elsewhere."""
    texts = [missing] * size
    for i, value in zip(indices, values):
        texts[i] = decimal(value)
    return texts


class Tally:
    """Counts and worst figures over all systems."""

    def __init__(self):
        self.kinds = Counter()
        self.worst = {"residual": mpf(0), "printed": mpf(0), "agreement": mpf(0)}

    def add(self, system, expect, figures):
        protons = [i for i, c in enumerate(system.components) if c.name == "H"]
        held = any(i in system.held for i in protons)
        present = sum(amount != "0.0" for amount in expect["solids"])
        self.kinds["systems"] += 1
        self.kinds["Davies" if system.davies_a else "no activity model"] += 1
        self.kinds["pH held" if held else "total H" if protons else "no H"] += 1
        self.kinds["negative total H"] += any(float(system.components[i].total) < 0 for i in protons)
        self.kinds["solids offered"] += bool(system.solids)
        self.kinds[f"{present} solids present"] += 1
        for key, value in figures.items():
            self.worst[key] = max(self.worst[key], value)

    def report(self):
        log(", ".join(f"{kind}: {count}" for kind, count in self.kinds.items()))
        log(", ".join(f"worst {key} {mp.nstr(value, 3)}" for key, value in self.worst.items()))


def process(system, tally):
    """Solve, check and format one system."""
    begin = monotonic()
    problem = Problem(system)
    solution = unique_solution(problem)
    expect = expectation(problem, solution)
    figures = {
        "residual": balance_residual(problem, solution),
        "printed": printed_residual(system, expect),
        "agreement": disagreement(problem, solution),
    }
    condition = mp.nstr(solution.condition, 2)
    shown = "  ".join(f"{key} {mp.nstr(value, 2)}" for key, value in figures.items())
    log(f"{system.name:45} {shown}  condition {condition}  solids {expect['solids']} {monotonic() - begin:.1f} s")
    assert figures["residual"] < RESIDUAL_LIMIT, system.name
    assert figures["printed"] < PRINTED_LIMIT, system.name
    assert figures["agreement"] < AGREEMENT_LIMIT, system.name
    tally.add(system, expect, figures)
    return system_block(system, f"{system.note}; condition {condition}", expect)


def main(patterns):
    mp.dps = POLISH_DIGITS
    systems = handcrafted_systems() + random_systems()
    assert len({system.name for system in systems}) == len(systems), "names must be unique"
    wanted = [s for s in systems if not patterns or any(p in s.name for p in patterns)]
    tally = Tally()
    blocks = [process(system, tally) for system in wanted]
    tally.report()
    if not patterns:
        OUTPUT.write_text(document(blocks), encoding="utf-8")


if __name__ == "__main__":
    main(sys.argv[1:])
