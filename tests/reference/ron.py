"""Formatting of systems and solutions as RON text."""

from mpmath import mp

DIGITS = 25
NEGLIGIBLE = 1e-60


def decimal(value):
    """A number as a decimal string with `DIGITS` significant digits."""
    if value == -mp.inf:
        return "-inf"
    return mp.nstr(value, DIGITS, strip_zeros=True) if abs(value) > NEGLIGIBLE else "0.0"


def quoted(text):
    return '"' + text.replace("\\", "\\\\").replace('"', '\\"') + '"'


def strings(values):
    return "[" + ", ".join(quoted(v) for v in values) + "]"


def stoichiometry(nu):
    return "[" + ", ".join(f"({i}, {float(n)!r})" for i, n in sorted(nu.items())) + "]"


def block(field, lines):
    """A list field with one entry per line."""
    if not lines:
        return f"      {field}: [],"
    return "\n".join([f"      {field}: ["] + [f"        {line}," for line in lines] + ["      ],"])


def component_line(component):
    return f"(name: {quoted(component.name)}, charge: {component.charge}, total: {quoted(component.total)})"


def species_line(system, species):
    head = f"(name: {quoted(species.name)}, charge: {system.species_charge(species)}"
    return head + f", log10_beta: {quoted(species.log10_beta)}, nu: {stoichiometry(species.nu)})"


def solid_line(solid):
    return f"(name: {quoted(solid.name)}, log10_ks: {quoted(solid.log10_ks)}, nu: {stoichiometry(solid.nu)})"


def held_lines(system):
    return [f"(component: {i}, log10_activity: {quoted(a)})" for i, a in sorted(system.held.items())]


def expect_block(expect):
    lines = [
        f"ionic_strength: {quoted(expect['ionic_strength'])}",
        f"charge_gap: {quoted(expect['charge_gap'])}",
    ]
    lists = ("log10_free", "species_log10", "solids", "saturation_index", "total_of_held")
    lines += [f"{key}: {strings(expect[key])}" for key in lists]
    return "\n".join(["      expect: ("] + [f"        {line}," for line in lines] + ["      ),"])


def system_block(system, note, expect):
    davies = "None" if system.davies_a is None else f"Some({system.davies_a})"
    return "\n".join([
        "    (",
        f"      name: {quoted(system.name)},",
        f"      note: {quoted(note)},",
        f"      davies_a: {davies},",
        block("held", held_lines(system)),
        block("components", [component_line(c) for c in system.components]),
        block("species", [species_line(system, s) for s in system.species]),
        block("solids", [solid_line(s) for s in system.solids]),
        expect_block(expect),
        "    ),",
    ])


def document(blocks):
    return "\n".join(["(", "  systems: ["] + blocks + ["  ],", ")", ""])
