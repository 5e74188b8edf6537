"""Primary method: enumerate solid assemblages, follow a homotopy, polish.

For a chosen set of solids present the activity product of each is known, so each
takes the place of one component as a held one (an exact change of basis in
rational arithmetic).  The remaining unknowns are ln activities and, with Davies,
ln I.  Every balance is written as ln(gains) - ln(losses), where gains and losses
collect the terms of either sign; the total joins the side that makes both
positive.  All equilibrium constants, held activities and the Davies coefficient
are scaled by t, which is raised from 0 to 1 with a tangent predictor and a Newton
corrector.  The one set of solids that ends with no negative amount and no
supersaturated absent solid is the answer.
"""

from fractions import Fraction
from itertools import combinations

from mpmath import mp, mpf
from scipy.optimize import least_squares

from model import Solution, davies_bracket, davies_bracket_slope

POLISH_DIGITS = 100
PATH_DIGITS = 50
PATH_TOLERANCE = mpf(10) ** -20
POLISH_TOLERANCE = mpf(10) ** -88
FIRST_STEP = mpf(1) / 4
SMALLEST_STEP = mpf(1) / 4096


class NoPath(Exception):
    """The homotopy could not be followed to its end."""


class Basis:
    """Change of basis that turns active solids into held components.

    `old_from_new[i][p]` expresses ln activity i in the new unknowns, in which
    entry `pivots[k]` is the ln activity product of solid k.
    """

    def __init__(self, problem, active):
        size = len(problem.components)
        self.old_from_new = [[Fraction(int(i == p)) for p in range(size)] for i in range(size)]
        self.pivots = {}
        self.independent = all(self._exchange(problem, solid) for solid in active)

    def transform(self, nu):
        """Stoichiometry over the old components -> over the new ones."""
        size = len(self.old_from_new)
        return [sum(Fraction(n) * self.old_from_new[i][p] for i, n in nu.items()) for p in range(size)]

    def _exchange(self, problem, solid):
        row = self.transform(problem.solid_nu[solid])
        taken = self.pivots.values()
        pivot = next((p for p in problem.free if p not in taken and row[p] != 0), None)
        if pivot is None:
            return False
        for line in self.old_from_new:
            quotient = line[pivot] / row[pivot]
            for p, entry in enumerate(row):
                line[p] -= entry * quotient
            line[pivot] = quotient
        self.pivots[solid] = pivot
        return True


class Assemblage:
    """The equations for one set of solids present, as a function of t."""

    def __init__(self, problem, basis):
        self.problem = problem
        self.basis = basis
        pivots = basis.pivots
        self.known = dict(problem.held)
        self.known.update({pivots[k]: problem.solid_ln_ks[k] for k in pivots})
        self.free = [p for p in problem.free if p not in self.known]
        self.nu = [[to_mpf(n) for n in basis.transform(nu)] for nu in problem.nu]
        self.totals = [
            mp.fsum(to_mpf(line[p]) * total for line, total in zip(basis.old_from_new, problem.totals) if line[p])
            for p in range(len(problem.components))
        ]
        self.drive = [
            beta + mp.fsum(nu[p] * value for p, value in self.known.items())
            for beta, nu in zip(problem.ln_beta, self.nu)
        ]
        self.with_strength = problem.depends_on_strength()
        self.columns = [[(m, nu[p]) for m, p in enumerate(self.free) if nu[p]] for nu in self.nu]
        self.square = [z * z for z in problem.charge]

    def size(self):
        return len(self.free) + int(self.with_strength)

    def concentrations(self, t, unknowns):
        shift = self._davies(t, unknowns)
        return [
            mp.exp(t * drive + mp.fsum(n * unknowns[m] for m, n in column) + shift * z2)
            for drive, column, z2 in zip(self.drive, self.columns, self.square)
        ]

    def _davies(self, t, unknowns):
        if not self.with_strength:
            return mpf(0)
        return t * self.problem.davies * davies_bracket(mp.exp(unknowns[-1]))

    def _sides(self, p, conc):
        """Gains and losses of one balance, both positive when it can be met."""
        terms = [nu[p] * c for nu, c in zip(self.nu, conc) if nu[p]]
        total = self.totals[p]
        gains = mp.fsum(v for v in terms if v > 0) + max(-total, 0)
        losses = -mp.fsum(v for v in terms if v < 0) + max(total, 0)
        if not (gains > 0 and losses > 0):
            raise NoPath("balance cannot be met")
        return gains, losses

    def residuals(self, t, unknowns):
        conc = self.concentrations(t, unknowns)
        values = []
        for p in self.free:
            gains, losses = self._sides(p, conc)
            values.append(mp.ln(gains) - mp.ln(losses))
        if self.with_strength:
            values.append(mp.ln(self.problem.ionic_strength(conc)) - unknowns[-1])
        return values

    def _weights(self, conc):
        """d residual / d ln c, one row of (species, weight) per equation."""
        rows = []
        for p in self.free:
            gains, losses = self._sides(p, conc)
            terms = [(j, nu[p] * c) for j, (nu, c) in enumerate(zip(self.nu, conc)) if nu[p]]
            rows.append([(j, v / (gains if v > 0 else losses)) for j, v in terms])
        if self.with_strength:
            twice = 2 * self.problem.ionic_strength(conc)
            rows.append([(j, c * z2 / twice) for j, (c, z2) in enumerate(zip(conc, self.square)) if z2])
        return rows

    def jacobian(self, t, unknowns):
        matrix = mp.zeros(self.size())
        slope = mpf(0)
        if self.with_strength:
            strength = mp.exp(unknowns[-1])
            slope = t * self.problem.davies * davies_bracket_slope(strength) * strength
        for row, weights in enumerate(self._weights(self.concentrations(t, unknowns))):
            sums = [mpf(0)] * self.size()
            for j, weight in weights:
                for m, n in self.columns[j]:
                    sums[m] += weight * n
                sums[-1] += weight * slope * self.square[j]
            for m, value in enumerate(sums):
                matrix[row, m] = value
        if self.with_strength:
            matrix[self.size() - 1, self.size() - 1] -= 1
        return matrix

    def tangent(self, t, unknowns):
        """d unknowns / dt along the path."""
        bracket = self.problem.davies * davies_bracket(mp.exp(unknowns[-1])) if self.with_strength else 0
        pull = [drive + bracket * z2 for drive, z2 in zip(self.drive, self.square)]
        weights = self._weights(self.concentrations(t, unknowns))
        slope = mp.matrix([-mp.fsum(w * pull[j] for j, w in row) for row in weights])
        return list(mp.lu_solve(self.jacobian(t, unknowns), slope))

    def start(self):
        """Double-precision solution at t = 0, where every constant is 1."""
        scale = max([abs(self.totals[p]) for p in self.free] + [mpf(10) ** -6])
        guess = [float(mp.ln(abs(self.totals[p]) or scale)) for p in self.free]
        if self.with_strength:
            guess.append(float(mp.ln(scale)))

        def as_floats(unknowns):
            return [float(r) for r in self.residuals(mpf(0), [mpf(u) for u in unknowns])]

        def slopes(unknowns):
            matrix = self.jacobian(mpf(0), [mpf(u) for u in unknowns])
            return [[float(v) for v in row] for row in matrix.tolist()]

        return [mpf(u) for u in least_squares(as_floats, guess, jac=slopes, x_scale="jac").x]

    def solution(self, unknowns):
        conc = self.concentrations(mpf(1), unknowns)
        values = [mpf(0)] * len(self.totals)
        for p, value in self.known.items():
            values[p] = value
        for m, p in enumerate(self.free):
            values[p] = unknowns[m]
        ln_activity = [
            mp.fsum(to_mpf(n) * value for n, value in zip(line, values) if n)
            for line in self.basis.old_from_new
        ]
        amounts = [mpf(0)] * len(self.problem.solids)
        for solid, p in self.basis.pivots.items():
            amounts[solid] = self.totals[p] - mp.fsum(nu[p] * c for nu, c in zip(self.nu, conc))
        solution = Solution(ln_activity, self.problem.ionic_strength(conc), amounts)
        solution.condition = self._condition(unknowns, conc, amounts)
        return solution

    def _condition(self, unknowns, conc, amounts):
        """Largest |d ln activity| per unit relative error in any one balance."""
        if not self.free:
            return mpf(1)
        inverse = self.jacobian(mpf(1), unknowns) ** -1
        worst = mpf(1)
        for i in self.problem.free:
            terms = self.problem.balance_terms(i, conc, amounts)
            magnitude = mp.fsum(abs(v) for v in terms) + abs(self.problem.totals[i])
            for e, p in enumerate(self.free):
                relative = magnitude * abs(to_mpf(self.basis.old_from_new[i][p])) / max(self._sides(p, conc))
                for m in range(self.size()):
                    worst = max(worst, abs(inverse[m, e]) * relative)
        return worst


def to_mpf(fraction):
    return mpf(fraction.numerator) / fraction.denominator


def correct(assemblage, t, guess, tolerance, steps):
    """Newton corrector; None when it does not converge."""
    try:
        root = mp.findroot(
            lambda *u: assemblage.residuals(t, u), guess, solver="mdnewton",
            J=lambda *u: assemblage.jacobian(t, u), tol=tolerance, maxsteps=steps,
        )
    except (ValueError, ZeroDivisionError):
        return None
    return list(root)


def follow_path(assemblage):
    with mp.workdps(PATH_DIGITS):
        t, step = mpf(0), FIRST_STEP
        point = correct(assemblage, t, assemblage.start(), PATH_TOLERANCE, 60)
        if point is None:
            raise NoPath("no start")
        while t < 1:
            ahead = min(t + step, mpf(1))
            slope = assemblage.tangent(t, point)
            guess = [u + (ahead - t) * s for u, s in zip(point, slope)]
            reached = correct(assemblage, ahead, guess, PATH_TOLERANCE, 15)
            if reached is not None:
                t, point, step = ahead, reached, 2 * step
                continue
            step /= 2
            if step < SMALLEST_STEP:
                raise NoPath(f"stuck at t = {mp.nstr(t, 5)}")
    return point


def solve_assemblage(problem, active):
    """Equilibrium with exactly these solids present; None when impossible."""
    basis = Basis(problem, active)
    if not basis.independent:
        return None
    assemblage = Assemblage(problem, basis)
    if assemblage.size() == 0:
        return assemblage.solution([])
    point = correct(assemblage, mpf(1), follow_path(assemblage), POLISH_TOLERANCE, 30)
    if point is None:
        raise NoPath("polishing failed")
    return assemblage.solution(point)


def is_equilibrium(problem, active, solution):
    saturation = problem.ln_saturation(solution.ln_activity)
    absent = [s for k, s in enumerate(saturation) if k not in active]
    return all(solution.amounts[k] >= 0 for k in active) and all(s <= 0 for s in absent)


def solve(problem):
    """All equilibria over the subsets of solids, and the subsets not resolved."""
    found, unresolved = [], []
    indices = range(len(problem.solids))
    for count in range(len(problem.solids) + 1):
        for active in combinations(indices, count):
            try:
                solution = solve_assemblage(problem, active)
            except NoPath as reason:
                unresolved.append((active, str(reason)))
                continue
            if solution is not None and is_equilibrium(problem, active, solution):
                found.append(solution)
    return found, unresolved
