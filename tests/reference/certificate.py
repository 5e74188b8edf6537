"""Checks of a finished solution against the defining equations.

Both work on the original balances, not on the forms the solvers use.
"""

from mpmath import mp, mpf

from model import davies_bracket, exact


def balance_residual(problem, solution):
    """Largest relative error of a balance, of I, and of a solid said to be present."""
    conc = [mp.exp(v) for v in problem.ln_concentrations(solution.ln_activity, solution.strength)]
    worst = mpf(0)
    for p in problem.free:
        terms = problem.balance_terms(p, conc, solution.amounts) + [-problem.totals[p]]
        worst = max(worst, relative_sum(terms))
    if solution.strength:
        worst = max(worst, abs(problem.ionic_strength(conc) / solution.strength - 1))
    saturation = problem.ln_saturation(solution.ln_activity)
    present = [abs(s) for s, n in zip(saturation, solution.amounts) if n > 0]
    return max([worst] + present)


def relative_sum(terms):
    return abs(mp.fsum(terms)) / mp.fsum(abs(v) for v in terms)


def printed_residual(system, expect):
    """Largest violation when only the printed strings are used."""
    free = [mpf(text) for text in expect["log10_free"]]
    strength = mpf(expect["ionic_strength"])
    bracket = 0 if system.davies_a is None else exact(system.davies_a) * davies_bracket(strength)
    charges = [c.charge for c in system.components]
    activity = [value - bracket * z * z for value, z in zip(free, charges)]
    printed = [mpf(text) for text in expect["species_log10"]]
    worst = mass_action_error(system, activity, printed, bracket)
    worst = max([worst] + [abs(activity[i] - exact(a)) for i, a in system.held.items()])
    worst = max(worst, saturation_error(system, activity, expect))
    return max(worst, printed_balance_error(system, expect, free, printed))


def mass_action_error(system, activity, printed, bracket):
    worst = mpf(0)
    for species, value in zip(system.species, printed):
        z = system.species_charge(species)
        law = exact(species.log10_beta) + bracket * z * z + weighted(species.nu, activity)
        if mp.isinf(law) or mp.isinf(value):
            assert law == value, f"{system.name}: {species.name}"
        else:
            worst = max(worst, abs(law - value))
    return worst


def saturation_error(system, activity, expect):
    worst = mpf(0)
    for k, solid in enumerate(system.solids):
        index, amount = mpf(expect["saturation_index"][k]), mpf(expect["solids"][k])
        law = weighted(solid.nu, activity) - exact(solid.log10_ks)
        assert amount >= 0 and index <= 0 and (amount == 0 or index == 0), f"{system.name}: {solid.name}"
        if not mp.isinf(index):
            worst = max(worst, abs(law - index))
    return worst


def printed_balance_error(system, expect, free, printed):
    amounts = [mpf(text) for text in expect["solids"]]
    worst = mpf(0)
    for i, component in enumerate(system.components):
        if i in system.held or mp.isinf(free[i]):
            continue
        terms = [10 ** free[i], -exact(component.total)]
        terms += [s.nu.get(i, 0) * 10**value for s, value in zip(system.species, printed) if s.nu.get(i)]
        terms += [s.nu.get(i, 0) * n for s, n in zip(system.solids, amounts)]
        worst = max(worst, relative_sum(terms))
    return worst


def weighted(nu, values):
    return mp.fsum(n * values[i] for i, n in nu.items() if n)
