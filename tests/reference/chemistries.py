"""Formation constants of the handcrafted systems.

The figures are of realistic size and serve as test data only; they are not
recommended values.  Stoichiometry is written as "Cu:2 H:-2 Cit:2" (1 when omitted)
over the component list "Cu+2 Cit-3 H+1"; species charges follow from it.
"""

from model import Species

HYDROXIDE = ("OH", "-13.997", "H:-1")


class Chemistry:
    def __init__(self, components, species, solids=()):
        self.charges = dict(split_charge(word) for word in components.split())
        self.species = list(species)
        self.solids = {name: (log_ks, nu) for name, log_ks, nu in solids}

    def indices(self, formula):
        """Stoichiometry text -> {component index: coefficient}."""
        order = list(self.charges)
        nu = {}
        for word in formula.split():
            name, _, count = word.partition(":")
            nu[order.index(name)] = float(count or 1)
        return nu

    def species_list(self):
        return [Species(name, log_beta, self.indices(nu)) for name, log_beta, nu in self.species]


def split_charge(word):
    """'Cu+2' -> ('Cu', 2); the charge is always one signed digit."""
    return word[:-2], int(word[-2:])


def merge(*chemistries):
    """One chemistry over the union of components, species and solids."""
    merged = Chemistry("", [])
    for part in chemistries:
        merged.charges.update(part.charges)
        known = {name for name, _, _ in merged.species}
        merged.species += [entry for entry in part.species if entry[0] not in known]
        merged.solids.update(part.solids)
    return merged


WATER = Chemistry("H+1", [HYDROXIDE])

SALT_WATER = Chemistry("Na+1 Cl-1 H+1", [HYDROXIDE])

NICKEL_EDTA_AMMONIA = Chemistry(
    "Ni+2 EDTA-4 NH3+0 H+1",
    [
        HYDROXIDE,
        ("HEDTA", "10.95", "H EDTA"),
        ("H2EDTA", "17.22", "H:2 EDTA"),
        ("H3EDTA", "20.34", "H:3 EDTA"),
        ("H4EDTA", "22.5", "H:4 EDTA"),
        ("H5EDTA", "24.0", "H:5 EDTA"),
        ("NH4", "9.244", "NH3 H"),
        ("NiEDTA", "20.36", "Ni EDTA"),
        ("NiHEDTA", "23.56", "Ni H EDTA"),
        ("NiOHEDTA", "8.06", "Ni H:-1 EDTA"),
        ("NiNH3", "2.73", "Ni NH3"),
        ("Ni(NH3)2", "4.89", "Ni NH3:2"),
        ("Ni(NH3)3", "6.55", "Ni NH3:3"),
        ("Ni(NH3)4", "7.67", "Ni NH3:4"),
        ("Ni(NH3)5", "8.34", "Ni NH3:5"),
        ("Ni(NH3)6", "8.31", "Ni NH3:6"),
        ("NiOH", "-9.9", "Ni H:-1"),
        ("Ni(OH)2", "-19.0", "Ni H:-2"),
        ("Ni4(OH)4", "-27.7", "Ni:4 H:-4"),
    ],
    [("Ni(OH)2(s)", "10.8", "Ni H:-2")],
)

COPPER_CITRATE = Chemistry(
    "Cu+2 Cit-3 H+1",
    [
        HYDROXIDE,
        ("HCit", "6.4", "H Cit"),
        ("H2Cit", "11.16", "H:2 Cit"),
        ("H3Cit", "14.29", "H:3 Cit"),
        ("CuCit", "7.2", "Cu Cit"),
        ("CuHCit", "10.87", "Cu H Cit"),
        ("CuH2Cit", "13.23", "Cu H:2 Cit"),
        ("Cu2Cit2", "16.2", "Cu:2 Cit:2"),
        ("Cu2H-1Cit2", "10.86", "Cu:2 H:-1 Cit:2"),
        ("Cu2H-2Cit2", "5.87", "Cu:2 H:-2 Cit:2"),
        ("CuOH", "-7.5", "Cu H:-1"),
        ("Cu(OH)2", "-16.22", "Cu H:-2"),
        ("Cu2(OH)2", "-10.43", "Cu:2 H:-2"),
    ],
    [("Cu(OH)2(s)", "8.67", "Cu H:-2"), ("CuO(s)", "7.64", "Cu H:-2")],
)

IRON_CITRATE = Chemistry(
    "Fe+3 Cit-3 H+1",
    [
        HYDROXIDE,
        ("HCit", "6.4", "H Cit"),
        ("H2Cit", "11.16", "H:2 Cit"),
        ("H3Cit", "14.29", "H:3 Cit"),
        ("FeOH", "-2.19", "Fe H:-1"),
        ("Fe(OH)2", "-5.67", "Fe H:-2"),
        ("Fe(OH)3", "-13.6", "Fe H:-3"),
        ("Fe(OH)4", "-21.6", "Fe H:-4"),
        ("Fe2(OH)2", "-2.95", "Fe:2 H:-2"),
        ("Fe3(OH)4", "-6.3", "Fe:3 H:-4"),
        ("FeCit", "13.1", "Fe Cit"),
        ("FeHCit", "14.4", "Fe H Cit"),
        ("FeOHCit", "10.3", "Fe H:-1 Cit"),
        ("FeCit2", "17.6", "Fe Cit:2"),
        ("Fe2(OH)2Cit2", "22.4", "Fe:2 H:-2 Cit:2"),
    ],
    [("ferrihydrite", "3.2", "Fe H:-3"), ("goethite", "0.49", "Fe H:-3")],
)

IRON_CHLORIDE = Chemistry(
    "Fe+3 Cl-1 H+1",
    [
        HYDROXIDE,
        ("FeOH", "-2.19", "Fe H:-1"),
        ("Fe(OH)2", "-5.67", "Fe H:-2"),
        ("Fe(OH)4", "-21.6", "Fe H:-4"),
        ("FeCl", "1.48", "Fe Cl"),
        ("FeCl2", "2.13", "Fe Cl:2"),
    ],
    [("akaganeite", "3.04", "Fe Cl:0.3 H:-2.7"), ("ferrihydrite", "3.2", "Fe H:-3")],
)

CARBONATE = Chemistry(
    "Ca+2 CO3-2 Na+1 Cl-1 H+1",
    [
        HYDROXIDE,
        ("HCO3", "10.329", "H CO3"),
        ("H2CO3", "16.681", "H:2 CO3"),
        ("CaCO3(aq)", "3.22", "Ca CO3"),
        ("CaHCO3", "11.44", "Ca H CO3"),
        ("CaOH", "-12.78", "Ca H:-1"),
        ("NaCO3", "1.27", "Na CO3"),
        ("NaHCO3", "10.08", "Na H CO3"),
    ],
    [
        ("calcite", "-8.48", "Ca CO3"),
        ("aragonite", "-8.34", "Ca CO3"),
        ("vaterite", "-7.91", "Ca CO3"),
        ("portlandite", "22.8", "Ca H:-2"),
    ],
)

ZINC = Chemistry(
    "Zn+2 Na+1 Cl-1 H+1",
    [
        HYDROXIDE,
        ("ZnOH", "-8.96", "Zn H:-1"),
        ("Zn(OH)2", "-17.82", "Zn H:-2"),
        ("Zn(OH)3", "-28.05", "Zn H:-3"),
        ("Zn(OH)4", "-40.5", "Zn H:-4"),
        ("Zn2OH", "-9.0", "Zn:2 H:-1"),
        ("ZnCl", "0.46", "Zn Cl"),
        ("ZnCl2", "0.62", "Zn Cl:2"),
        ("ZnCl3", "0.5", "Zn Cl:3"),
        ("ZnCl4", "0.2", "Zn Cl:4"),
    ],
    [
        ("Zn(OH)2(s)", "11.38", "Zn H:-2"),
        ("zincite", "11.19", "Zn H:-2"),
        ("simonkolleite", "38.5", "Zn:5 Cl:2 H:-8"),
    ],
)

ZINC_CARBONATE = Chemistry(
    "Zn+2 CO3-2 Na+1 H+1",
    [
        HYDROXIDE,
        ("HCO3", "10.329", "H CO3"),
        ("H2CO3", "16.681", "H:2 CO3"),
        ("ZnOH", "-8.96", "Zn H:-1"),
        ("Zn(OH)2", "-17.82", "Zn H:-2"),
        ("Zn(OH)3", "-28.05", "Zn H:-3"),
        ("Zn(OH)4", "-40.5", "Zn H:-4"),
        ("ZnCO3(aq)", "4.76", "Zn CO3"),
        ("ZnHCO3", "11.83", "Zn H CO3"),
        ("Zn(CO3)2", "7.3", "Zn CO3:2"),
    ],
    [
        ("Zn(OH)2(s)", "11.38", "Zn H:-2"),
        ("smithsonite", "-10.8", "Zn CO3"),
        ("hydrozincite", "9.0", "Zn:5 CO3:2 H:-6"),
    ],
)

CALCIUM_PHOSPHATE = Chemistry(
    "Ca+2 PO4-3 Na+1 H+1",
    [
        HYDROXIDE,
        ("HPO4", "12.35", "H PO4"),
        ("H2PO4", "19.55", "H:2 PO4"),
        ("H3PO4", "21.7", "H:3 PO4"),
        ("CaPO4", "6.46", "Ca PO4"),
        ("CaHPO4(aq)", "15.09", "Ca H PO4"),
        ("CaH2PO4", "20.96", "Ca H:2 PO4"),
        ("CaOH", "-12.78", "Ca H:-1"),
        ("NaHPO4", "13.3", "Na H PO4"),
    ],
    [
        ("brushite", "-18.95", "Ca H PO4"),
        ("hydroxyapatite", "-44.33", "Ca:5 PO4:3 H:-1"),
        ("octacalcium phosphate", "-47.95", "Ca:4 H PO4:3"),
        ("tricalcium phosphate", "-28.92", "Ca:3 PO4:2"),
    ],
)

ALUMINIUM_GLUCONATE = Chemistry(
    "Al+3 Glu-1 Na+1 H+1",
    [
        HYDROXIDE,
        ("HGlu", "3.7", "H Glu"),
        ("AlOH", "-4.97", "Al H:-1"),
        ("Al(OH)2", "-9.3", "Al H:-2"),
        ("Al(OH)3", "-15.0", "Al H:-3"),
        ("Al(OH)4", "-23.0", "Al H:-4"),
        ("Al2(OH)2", "-7.7", "Al:2 H:-2"),
        ("Al3(OH)4", "-13.9", "Al:3 H:-4"),
        ("AlGlu", "2.4", "Al Glu"),
        ("AlOHGlu", "-0.9", "Al H:-1 Glu"),
        ("Al(OH)2Glu", "-4.9", "Al H:-2 Glu"),
        ("Al(OH)3Glu", "-10.8", "Al H:-3 Glu"),
        ("Al(OH)4Glu", "-20.6", "Al H:-4 Glu"),
        ("Al(OH)4Glu2", "-19.5", "Al H:-4 Glu:2"),
    ],
    [("gibbsite", "8.5", "Al H:-3"), ("Al(OH)3(am)", "10.8", "Al H:-3")],
)

SILVER_HALIDE = Chemistry(
    "Ag+1 Cl-1 Br-1 NH3+0",
    [
        ("AgCl(aq)", "3.3", "Ag Cl"),
        ("AgCl2", "5.25", "Ag Cl:2"),
        ("AgBr(aq)", "4.7", "Ag Br"),
        ("AgBr2", "7.7", "Ag Br:2"),
        ("AgBr3", "8.7", "Ag Br:3"),
        ("AgNH3", "3.31", "Ag NH3"),
        ("Ag(NH3)2", "7.23", "Ag NH3:2"),
    ],
    [("AgCl(s)", "-9.75", "Ag Cl"), ("AgBr(s)", "-12.3", "Ag Br")],
)

CYANIDE = Chemistry(
    "Au+1 Cu+1 Zn+2 Fe+2 CN-1 H+1",
    [
        HYDROXIDE,
        ("HCN", "9.21", "H CN"),
        ("Au(CN)2", "38.3", "Au CN:2"),
        ("Cu(CN)2", "21.7", "Cu CN:2"),
        ("Cu(CN)3", "27.0", "Cu CN:3"),
        ("Cu(CN)4", "28.5", "Cu CN:4"),
        ("Zn(CN)2", "11.07", "Zn CN:2"),
        ("Zn(CN)3", "16.05", "Zn CN:3"),
        ("Zn(CN)4", "19.62", "Zn CN:4"),
        ("Fe(CN)6", "44.9", "Fe CN:6"),
        ("ZnOH", "-8.96", "Zn H:-1"),
        ("Zn(OH)2", "-17.82", "Zn H:-2"),
        ("Zn(OH)3", "-28.05", "Zn H:-3"),
        ("Zn(OH)4", "-40.5", "Zn H:-4"),
        ("FeOH", "-9.5", "Fe H:-1"),
    ],
    [
        ("CuCN(s)", "-19.5", "Cu CN"),
        ("Zn(CN)2(s)", "-15.6", "Zn CN:2"),
        ("Zn2Fe(CN)6(s)", "-15.7", "Zn:2 Fe CN:6"),
    ],
)

HARD_WATER = Chemistry(
    "Ca+2 Mg+2 Na+1 K+1 CO3-2 SO4-2 Cl-1 F-1 H+1",
    CARBONATE.species
    + [
        ("HSO4", "1.99", "H SO4"),
        ("HF", "3.18", "H F"),
        ("HF2", "3.62", "H F:2"),
        ("CaSO4(aq)", "2.3", "Ca SO4"),
        ("CaF", "0.94", "Ca F"),
        ("MgOH", "-11.44", "Mg H:-1"),
        ("MgCO3(aq)", "2.98", "Mg CO3"),
        ("MgHCO3", "11.4", "Mg H CO3"),
        ("MgSO4(aq)", "2.37", "Mg SO4"),
        ("MgF", "1.82", "Mg F"),
        ("NaSO4", "0.7", "Na SO4"),
        ("KSO4", "0.85", "K SO4"),
        ("NaF(aq)", "-0.24", "Na F"),
    ],
    [
        ("calcite", "-8.48", "Ca CO3"),
        ("dolomite", "-17.09", "Ca Mg CO3:2"),
        ("gypsum", "-4.58", "Ca SO4"),
        ("fluorite", "-10.6", "Ca F:2"),
        ("brucite", "16.84", "Mg H:-2"),
    ],
)

MIXED_BATH = merge(
    NICKEL_EDTA_AMMONIA,
    COPPER_CITRATE,
    ZINC,
    Chemistry(
        "Ni+2 Cu+2 Zn+2 EDTA-4 Cit-3 NH3+0 H+1",
        [
            ("CuEDTA", "20.5", "Cu EDTA"),
            ("CuHEDTA", "23.9", "Cu H EDTA"),
            ("CuOHEDTA", "8.5", "Cu H:-1 EDTA"),
            ("ZnEDTA", "18.0", "Zn EDTA"),
            ("ZnHEDTA", "21.4", "Zn H EDTA"),
            ("ZnOHEDTA", "5.8", "Zn H:-1 EDTA"),
            ("CuNH3", "4.04", "Cu NH3"),
            ("Cu(NH3)2", "7.47", "Cu NH3:2"),
            ("Cu(NH3)3", "10.27", "Cu NH3:3"),
            ("Cu(NH3)4", "11.75", "Cu NH3:4"),
            ("ZnNH3", "2.21", "Zn NH3"),
            ("Zn(NH3)2", "4.5", "Zn NH3:2"),
            ("Zn(NH3)3", "6.86", "Zn NH3:3"),
            ("Zn(NH3)4", "8.89", "Zn NH3:4"),
            ("NiCit", "6.59", "Ni Cit"),
            ("NiHCit", "10.5", "Ni H Cit"),
            ("NiCit2", "8.77", "Ni Cit:2"),
            ("ZnCit", "6.21", "Zn Cit"),
            ("ZnHCit", "10.2", "Zn H Cit"),
            ("ZnCit2", "7.4", "Zn Cit:2"),
        ],
    ),
)

ONE_TO_ONE_30 = Chemistry("M+2 L-2", [("ML", "30", "M L")])

ONE_TO_ONE_45 = Chemistry("M+3 L-4", [("ML", "45", "M L")])

PROTIC_LIGAND = Chemistry(
    "M+2 L-4 H+1",
    [HYDROXIDE, ("HL", "12.1", "H L"), ("H2L", "21.3", "H:2 L"), ("H3L", "26.0", "H:3 L"),
     ("ML", "30", "M L"), ("MHL", "34.2", "M H L"), ("MOH", "-8.2", "M H:-1"), ("M(OH)2", "-17.0", "M H:-2")],
    [("M(OH)2(s)", "11.0", "M H:-2")],
)

POLYNUCLEAR = Chemistry(
    "M+2 L-2",
    [("ML", "9", "M L"), ("ML2", "15", "M L:2"), ("M2L", "13", "M:2 L"), ("M2L2", "26", "M:2 L:2"),
     ("M3L4", "45", "M:3 L:4"), ("M4L4", "44.5", "M:4 L:4")],
)

RIVALS = Chemistry(
    "M+2 N+2 L-3",
    [("ML", "25", "M L"), ("NL", "25", "N L"), ("ML2", "33", "M L:2"), ("NL2", "33", "N L:2"),
     ("MNL", "27", "M N L")],
)

WEAK_ACID = Chemistry("A-1 H+1", [HYDROXIDE, ("HA", "4.757", "H A")])

SHARED_METAL = Chemistry(
    "M+2 X-2 Y-1 H+1",
    [HYDROXIDE, ("HX", "9.5", "H X"), ("MX(aq)", "4.0", "M X"), ("MY", "2.0", "M Y"), ("MOH", "-7.9", "M H:-1")],
    [("MX(s)", "-9.2", "M X"), ("MY2(s)", "-8.9", "M Y:2"), ("M(OH)2(s)", "11.9", "M H:-2"),
     ("MX(s) metastable", "-8.6", "M X"), ("M2XY2(s)", "-18.0", "M:2 X Y:2")],
)
