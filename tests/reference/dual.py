"""Independent second method: minimise the convex dual with a barrier.

At a fixed ionic strength the ln activities x of the balanced components minimise

    sum_j c_j(x) - sum_i T_i x_i - mu sum_k ln(ln Ks_k - nu_k x)

as mu goes to zero, and mu over the slack of solid k is its amount.  No assemblage
is chosen and no basis is changed.  The ionic strength is then a fixed point of one
real function, searched by a scan over its whole range, which also counts how many
equilibria the Davies model admits.
"""

from mpmath import mp, mpf

from model import DAVIES_LIMIT, Solution

WORKING_DIGITS = 90
BARRIER_START = mpf(10) ** -6
BARRIER_FACTOR = mpf(10) ** -6
BARRIER_STAGES = 6
NEWTON_LIMIT = 2000
LONGEST_STEP = 8
SMALL_STEP = mpf(10) ** -2
STEP_TOLERANCE = mpf(10) ** -28
STRENGTH_TOLERANCE = mpf(10) ** -26
SCAN = [mpf(10) ** e for e in (-24, -14, -10, -7, -5, -4, -3, -2.5, -2, -1.6, -1.3, -1, -0.8, -0.6, -0.45)]


class Dual:
    """The barrier problem at one ionic strength."""

    def __init__(self, problem, strength):
        self.problem = problem
        self.strength = strength
        self.slot = {p: m for m, p in enumerate(problem.free)}

    def activities(self, x):
        values = [mpf(0)] * len(self.problem.components)
        for p, value in self.problem.held.items():
            values[p] = value
        for p, m in self.slot.items():
            values[p] = x[m]
        return values

    def concentrations(self, x):
        return [mp.exp(v) for v in self.problem.ln_concentrations(self.activities(x), self.strength)]

    def slacks(self, x):
        return [-s for s in self.problem.ln_saturation(self.activities(x))]

    def objective(self, x, barrier):
        slacks = self.slacks(x)
        if any(s <= 0 for s in slacks):
            return mp.inf
        linear = mp.fsum(self.problem.totals[p] * x[m] for p, m in self.slot.items())
        return mp.fsum(self.concentrations(x)) - linear - barrier * mp.fsum(mp.ln(s) for s in slacks)

    def derivatives(self, x, barrier):
        size = len(self.slot)
        gradient = [-self.problem.totals[p] for p in self.problem.free]
        hessian = mp.zeros(size)
        slacks = self.slacks(x)
        pushes = list(zip(self.problem.nu, *[self.concentrations(x)] * 2))
        pushes += [(nu, barrier / s, barrier / s**2) for nu, s in zip(self.problem.solid_nu, slacks)]
        for nu, first, second in pushes:
            entries = [(self.slot[p], n) for p, n in nu.items() if p in self.slot]
            for m, n in entries:
                gradient[m] += n * first
                for other, n2 in entries:
                    hessian[m, other] += n * n2 * second
        return mp.matrix(gradient), hessian

    def minimise(self, x, barrier):
        """Newton's method, with a line search until it converges quadratically."""
        for _ in range(NEWTON_LIMIT):
            gradient, hessian = self.derivatives(x, barrier)
            step = list(mp.lu_solve(hessian, -gradient))
            size = self.step_size(x, step)
            scale = mpf(1) if size < SMALL_STEP else self.line_search(x, step, gradient, barrier)
            x = [a + scale * s for a, s in zip(x, step)]
            if size < STEP_TOLERANCE:
                return x
        raise ArithmeticError(f"{self.problem.system.name}: dual did not converge")

    def step_size(self, x, step):
        """Largest change of an ln activity and largest relative change of a slack."""
        changes = [abs(s) for s in step]
        for nu, slack in zip(self.problem.solid_nu, self.slacks(x)):
            change = mp.fsum(n * step[self.slot[p]] for p, n in nu.items() if p in self.slot)
            changes.append(abs(change / slack))
        return max(changes)

    def line_search(self, x, step, gradient, barrier):
        value, descent = self.objective(x, barrier), mp.fdot(gradient, step)
        scale = min(mpf(1), LONGEST_STEP / max(abs(s) for s in step))
        while self.objective([a + scale * s for a, s in zip(x, step)], barrier) > value + scale * descent / 10000:
            scale /= 2
        return scale

    def lower_barrier(self, x):
        """From the minimiser at the first barrier to the one at the last."""
        barrier = BARRIER_START
        for _ in range(BARRIER_STAGES):
            barrier *= BARRIER_FACTOR
            x = self.minimise(x, barrier)
        return x, [barrier / s for s in self.slacks(x)]


def feasible_start(problem):
    """Dilute point at which every solid is undersaturated."""
    smallest = min([abs(problem.totals[p]) for p in problem.free if problem.totals[p]] or [mpf(1)])
    x = [mp.ln(abs(problem.totals[p]) or smallest) - 10 for p in problem.free]
    lowered = [m for m, p in enumerate(problem.free) if all(nu.get(p, 0) >= 0 for nu in problem.solid_nu)]
    dual = Dual(problem, mpf(0))
    while any(s <= 1 for s in dual.slacks(x)):
        for m in lowered:
            x[m] -= 5
    return x


class StrengthMap:
    """I -> ionic strength of the solution equilibrated at activity model I."""

    def __init__(self, problem):
        self.problem = problem
        self.warm = feasible_start(problem)

    def solution(self, strength):
        dual = Dual(self.problem, strength)
        x, amounts = self.warm, []
        if self.problem.free:
            x = self.warm = dual.minimise(x, BARRIER_START if self.problem.solids else mpf(0))
        if self.problem.solids:
            x, amounts = dual.lower_barrier(x)
        return Solution(dual.activities(x), self.problem.ionic_strength(dual.concentrations(x)), amounts)

    def excess(self, strength):
        return mp.ln(self.solution(strength).strength / strength)

    def brackets(self):
        """Intervals of I below the Davies limit that enclose a fixed point."""
        grid = SCAN + [mpf(DAVIES_LIMIT)]
        values = [self.excess(strength) for strength in grid]
        return [
            (low, high) for low, high, f_low, f_high in zip(grid, grid[1:], values, values[1:])
            if (f_low > 0) != (f_high > 0)
        ]

    def fixed_points(self):
        """Every equilibrium found over the whole range of I."""
        limit = self.solution(mpf(DAVIES_LIMIT))
        found = [limit] if limit.strength >= DAVIES_LIMIT else []
        for low, high in self.brackets():
            log_strength = mp.findroot(
                lambda u: self.excess(mp.exp(u)), (mp.ln(low), mp.ln(high)),
                solver="anderson", tol=STRENGTH_TOLERANCE**2,
            )
            found.append(self.solution(mp.exp(log_strength)))
        return found


def solve_dual(problem):
    """All equilibria of the problem, by the dual."""
    with mp.workdps(WORKING_DIGITS):
        strengths = StrengthMap(problem)
        if not problem.depends_on_strength():
            return [strengths.solution(mpf(0))]
        return strengths.fixed_points()
