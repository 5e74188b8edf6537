"""Data model of one equilibrium system and its exact-number counterpart.

`System` holds what the file states: names, integers and decimal strings.
`Problem` holds the same system as numbers.  Every decimal string is first
rounded to the nearest f64 and that f64 is taken over exactly, so a program that
parses the strings as f64 solves precisely the same problem.
"""

from dataclasses import dataclass, field

from mpmath import mp, mpf

DAVIES_LIMIT = 0.5


@dataclass(frozen=True)
class Component:
    name: str
    charge: int
    total: str


@dataclass(frozen=True)
class Species:
    name: str
    log10_beta: str
    nu: dict  # component index -> stoichiometric coefficient


@dataclass(frozen=True)
class Solid:
    name: str
    log10_ks: str
    nu: dict  # component index -> exponent in the ion activity product


@dataclass(frozen=True)
class System:
    name: str
    note: str
    davies_a: str | None
    held: dict  # component index -> decimal string of log10 activity
    components: list
    species: list
    solids: list = field(default_factory=list)

    def species_charge(self, species):
        charge = sum(n * self.components[i].charge for i, n in species.nu.items())
        assert charge == int(charge), f"{self.name}: {species.name} has a broken charge"
        return int(charge)


def exact(text):
    """The f64 nearest to a decimal string, as an exact multiprecision number."""
    return mpf(float(text))


def davies_bracket(strength):
    """Davies' bracket, constant above the limiting ionic strength."""
    capped = min(strength, mpf(DAVIES_LIMIT))
    root = mp.sqrt(capped)
    return root / (1 + root) - 3 * capped / 10


def davies_bracket_slope(strength):
    if strength >= DAVIES_LIMIT:
        return mpf(0)
    root = mp.sqrt(strength)
    return 1 / (2 * root * (1 + root) ** 2) - mpf(3) / 10


class Problem:
    """A system in numbers, reduced to what can be present.

    A component whose total is zero and that no species releases cannot be
    present; it is left out together with all its species and solids.
    Indices into the `System` are kept in `components`, `complexes`, `solids`.
    Species rows are the bare components first, then the complexes.
    """

    def __init__(self, system):
        self.system = system
        gone = absent_components(system)
        self.components = [i for i in range(len(system.components)) if i not in gone]
        self.complexes = indices_without(system.species, gone)
        self.solids = indices_without(system.solids, gone)
        position = {i: p for p, i in enumerate(self.components)}

        def renumber(nu):
            return {position[i]: n for i, n in nu.items() if n != 0}

        ln10 = mp.ln(10)
        listed = [system.species[j] for j in self.complexes]
        self.nu = [{p: 1.0} for p in range(len(position))]
        self.nu += [renumber(s.nu) for s in listed]
        self.ln_beta = [mpf(0)] * len(position) + [exact(s.log10_beta) * ln10 for s in listed]
        self.charge = [system.components[i].charge for i in self.components]
        self.charge += [system.species_charge(s) for s in listed]
        self.held = {position[i]: exact(a) * ln10 for i, a in system.held.items()}
        self.free = [p for p in range(len(position)) if p not in self.held]
        self.totals = [exact(system.components[i].total) for i in self.components]
        self.solid_nu = [renumber(system.solids[k].nu) for k in self.solids]
        self.solid_ln_ks = [exact(system.solids[k].log10_ks) * ln10 for k in self.solids]
        # ln gamma = -davies * z^2 * bracket(I)
        self.davies = None if system.davies_a is None else exact(system.davies_a) * ln10

    def depends_on_strength(self):
        return self.davies is not None and any(self.charge)

    def ln_concentrations(self, ln_activity, strength):
        shift = self.davies * davies_bracket(strength) if self.depends_on_strength() else 0
        return [
            beta + shift * z * z + dot(nu, ln_activity)
            for beta, z, nu in zip(self.ln_beta, self.charge, self.nu)
        ]

    def ionic_strength(self, concentrations):
        return mp.fdot((c, z * z) for c, z in zip(concentrations, self.charge)) / 2

    def ln_saturation(self, ln_activity):
        return [dot(nu, ln_activity) - ks for nu, ks in zip(self.solid_nu, self.solid_ln_ks)]

    def balance_terms(self, component, concentrations, amounts):
        """All contributions to the total of one component, zero ones left out."""
        held_in = list(zip(self.nu, concentrations)) + list(zip(self.solid_nu, amounts))
        return [nu[component] * amount for nu, amount in held_in if component in nu]


def absent_components(system):
    gone = set()
    for i, component in enumerate(system.components):
        if i in system.held or float(component.total) != 0:
            continue
        if all(s.nu.get(i, 0) >= 0 for s in system.species):
            gone.add(i)
    for entry in system.species + system.solids:
        assert all(n >= 0 for i, n in entry.nu.items() if i in gone), entry.name
    return gone


def indices_without(entries, gone):
    return [
        j for j, entry in enumerate(entries)
        if not any(i in gone and n != 0 for i, n in entry.nu.items())
    ]


def dot(nu, values):
    return mp.fsum(n * values[i] for i, n in nu.items())


@dataclass
class Solution:
    """Equilibrium of a `Problem`, indexed like it."""

    ln_activity: list
    strength: object
    amounts: list  # mol/L of each solid
    condition: object = None
