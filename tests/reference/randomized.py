"""Seeded random systems: metals M1.., ligands L1.., protons, optional solids."""

from math import gcd
from random import Random

from model import Component, Solid, Species, System

SEED = 72031
COUNT = 24
LARGEST_CHARGE = 5
LOG_BETA_RANGE = (-25, 45)
LARGEST_SPECIES_COUNT = 60


class Draft:
    """A random system in the making."""

    def __init__(self, rng):
        self.rng = rng
        self.metals = [rng.choice([1, 2, 2, 3]) for _ in range(rng.randint(1, 4))]
        self.ligands = [rng.choice([-1, -2, -3, -4, 0]) for _ in range(rng.randint(1, 4))]
        self.charges = self.metals + self.ligands + [1]
        self.proton = len(self.charges) - 1
        self.names = [f"M{i + 1}" for i in range(len(self.metals))]
        self.names += [f"L{i + 1}" for i in range(len(self.ligands))] + ["H"]
        self.species = []

    def metal_indices(self):
        return range(len(self.metals))

    def ligand_indices(self):
        return range(len(self.metals), self.proton)

    def add(self, log_beta, nu):
        charge = sum(n * self.charges[i] for i, n in nu.items())
        low, high = LOG_BETA_RANGE
        if low <= log_beta <= high and abs(charge) <= LARGEST_CHARGE:
            nu = {i: float(n) for i, n in nu.items()}
            self.species.append(Species(self.formula(nu), f"{log_beta:.2f}", nu))

    def formula(self, nu):
        return " ".join(self.names[i] + (f":{n:g}" if n != 1 else "") for i, n in nu.items())

    def add_protonation(self):
        self.species.append(Species("OH", "-13.997", {self.proton: -1.0}))
        for ligand in self.ligand_indices():
            steps = max(1, -self.charges[ligand])
            constants = sorted((self.rng.uniform(1, 12.5) for _ in range(steps)), reverse=True)
            for count in range(1, steps + 1):
                self.add(sum(constants[:count]), {ligand: 1, self.proton: count})

    def add_hydrolysis(self):
        for metal in self.metal_indices():
            step = self.rng.uniform(4, 11)
            for count in range(1, self.charges[metal] + 2):
                self.add(-step * count - 0.3 * count**2, {metal: 1, self.proton: -count})

    def add_complexes(self):
        rng, proton = self.rng, self.proton
        for metal in self.metal_indices():
            for ligand in self.ligand_indices():
                first = rng.uniform(1.5, 24)
                self.add(first, {metal: 1, ligand: 1})
                self.add(first * rng.uniform(1.3, 1.9), {metal: 1, ligand: 2})
                self.add(first + rng.uniform(1, 9), {metal: 1, ligand: 1, proton: 1})
                self.add(first - rng.uniform(5, 11), {metal: 1, ligand: 1, proton: -1})
                self.add(2 * first + rng.uniform(-6, 5), {metal: 2, ligand: 2, proton: -2})

    def add_mixed_complexes(self):
        ligands = list(self.ligand_indices())
        for metal in self.metal_indices():
            for one, other in zip(ligands, ligands[1:]):
                self.add(self.rng.uniform(4, 34), {metal: 1, one: 1, other: 1})

    def trim(self):
        keep = LARGEST_SPECIES_COUNT - 1
        if len(self.species) > keep:
            chosen = sorted(self.rng.sample(range(1, len(self.species)), keep - 1))
            self.species = [self.species[j] for j in [0] + chosen]

    def totals(self, proton_total):
        low = self.rng.choice([-12, -6, -4, -3])
        amounts = [10 ** self.rng.uniform(low, 0.4) for _ in self.metals + self.ligands]
        if proton_total:
            amounts.append(self.rng.uniform(-1, 1.5) * sum(amounts[len(self.metals):]))
        else:
            amounts.append(0)
        return [f"{amount:.3g}" for amount in amounts]

    def candidate_solids(self):
        """Neutral salts and hydroxides of the metals."""
        for metal in self.metal_indices():
            charge = self.charges[metal]
            yield {metal: 1, self.proton: -charge}, charge * self.rng.uniform(0.5, 5)
            for ligand in self.ligand_indices():
                negative = -self.charges[ligand]
                if negative == 0:
                    continue
                common = gcd(charge, negative)
                nu = {metal: negative // common, ligand: charge // common}
                yield nu, -sum(nu.values()) * self.rng.uniform(8, 17)

    def solids(self, count):
        candidates = list(self.candidate_solids())
        chosen = self.rng.sample(candidates, min(count, len(candidates)))
        floats = [({i: float(n) for i, n in nu.items()}, log_ks) for nu, log_ks in chosen]
        return [Solid(self.formula(nu) + " (s)", f"{log_ks:.2f}", nu) for nu, log_ks in floats]


def random_system(index):
    rng = Random(SEED + index)
    draft = Draft(rng)
    draft.add_protonation()
    draft.add_hydrolysis()
    draft.add_complexes()
    draft.add_mixed_complexes()
    draft.trim()
    proton_total, davies, solid_count = index % 2 == 0, index % 4 < 2, (index % 3 == 0) * rng.randint(1, 4)
    totals = draft.totals(proton_total)
    held = {} if proton_total else {draft.proton: f"{-rng.uniform(-1, 15):.2f}"}
    note = f"{'total H' if proton_total else 'pH held'}, {len(draft.species)} species, {solid_count} solids offered"
    components = [Component(*row) for row in zip(draft.names, draft.charges, totals)]
    return System(f"random {index + 1}", note, "0.5102" if davies else None, held, components,
                  draft.species, draft.solids(solid_count))


def random_systems():
    return [random_system(index) for index in range(COUNT)]
