"""The handcrafted systems: chemistries under chosen totals, pH and models."""

import chemistries as chem
from model import Component, Solid, System

A = "0.5102"


def case(name, note, chemistry, totals="", pH=None, held=None, davies=None, solids=()):
    """A system of one chemistry; `totals` as "Ni=0.01 H=-0.02", missing ones are 0."""
    total_of = dict(word.split("=") for word in totals.split())
    order = list(chemistry.charges)
    fixed = {order.index(c): log_a for c, log_a in (held or {}).items()}
    if pH is not None:
        fixed[order.index("H")] = str(-float(pH))
    unknown = set(total_of) - set(order)
    assert not unknown, f"{name}: no component {unknown}"
    components = [Component(c, z, total_of.get(c, "0")) for c, z in chemistry.charges.items()]
    chosen = [Solid(s, chemistry.solids[s][0], chemistry.indices(chemistry.solids[s][1])) for s in solids]
    return System(name, note, davies, fixed, components, chemistry.species_list(), chosen)


def water_and_acids():
    return [
        case("pure water", "total H zero, only the ion product", chem.WATER, "H=0"),
        case("acid at pH -1", "strong acid, pH held below zero", chem.SALT_WATER, "Cl=5 Na=0.1", pH="-1", davies=A),
        case("lye at pH 15", "pH held above 14", chem.SALT_WATER, "Na=5 Cl=0.01", pH="15", davies=A),
        case("sodium hydroxide", "negative total H", chem.SALT_WATER, "Na=0.5 Cl=0.1 H=-0.4", davies=A),
        case("trace acid", "total H 1e-12, far below autoprotolysis", chem.WATER, "H=1e-12"),
        case("acetic acid", "weak acid as weighed in", chem.WEAK_ACID, "A=0.1 H=0.1"),
        case("sodium acetate", "weak base, total H zero", chem.WEAK_ACID, "A=0.1 H=0", davies="0.509"),
    ]


def nickel():
    def build(name, note, totals, **options):
        return case("nickel EDTA ammonia, " + name, note, chem.NICKEL_EDTA_AMMONIA, totals, **options)

    solid = ["Ni(OH)2(s)"]
    return [
        build("pH 9.5", "EDTA in excess", "Ni=0.01 EDTA=0.012 NH3=0.5", pH="9.5"),
        build("pH 9.5 Davies", "EDTA in excess", "Ni=0.01 EDTA=0.012 NH3=0.5", pH="9.5", davies=A),
        build("total H", "disodium salt, ammonia", "Ni=0.05 EDTA=0.05 NH3=0.3 H=0.1", davies=A),
        build("no EDTA", "zero total: EDTA absent", "Ni=0.1 EDTA=0 NH3=2.0", pH="10.2", davies=A, solids=solid),
        build("precipitating", "metal excess over EDTA", "Ni=0.1 EDTA=0.02 NH3=0.05", pH="9.0", solids=solid),
        build("alkaline", "negative total H, solid", "Ni=0.1 EDTA=0.02 NH3=0.01 H=-0.3", solids=solid),
    ]


def copper():
    def build(name, note, totals, **options):
        return case("copper citrate, " + name, note, chem.COPPER_CITRATE, totals, **options)

    both = ["Cu(OH)2(s)", "CuO(s)"]
    return [
        build("pH 7", "dimers dominate", "Cu=0.2 Cit=0.25", pH="7"),
        build("pH 4 Davies", "dimers and acid complexes", "Cu=0.2 Cit=0.25", pH="4", davies=A),
        build("total H negative", "dimer Cu2H-2Cit2 formed by base", "Cu=0.1 Cit=0.1 H=-0.1", davies=A),
        build("citric acid", "total H positive", "Cu=0.02 Cit=0.05 H=0.15"),
        build("parallel oxides", "same stoichiometry, only CuO can exist", "Cu=0.3 Cit=0.1", pH="11.5", solids=both),
        build("parallel oxides, total H", "only CuO can exist", "Cu=0.3 Cit=0.1 H=-0.6", davies=A, solids=both),
    ]


def iron():
    def build(name, note, totals, **options):
        return case("iron(III) citrate, " + name, note, chem.IRON_CITRATE, totals, **options)

    return [
        build("pH 2", "acid", "Fe=0.01 Cit=0.02", pH="2", davies=A, solids=["ferrihydrite"]),
        build("pH 8", "hydroxide against citrate", "Fe=0.05 Cit=0.02", pH="8", solids=["ferrihydrite"]),
        build("total H", "partly neutralised", "Fe=0.05 Cit=0.01 H=-0.06", davies=A, solids=["ferrihydrite"]),
        build("two oxides", "parallel solids", "Fe=0.001 Cit=0.01", pH="6", davies=A,
              solids=["ferrihydrite", "goethite"]),
        build("hydrolysis only", "zero citrate, polynuclear", "Fe=0.5 Cit=0 H=-0.5"),
        case("iron(III) chloride", "solid with fractional stoichiometry", chem.IRON_CHLORIDE,
             "Fe=0.02 Cl=0.1 H=-0.05", davies=A, solids=["akaganeite", "ferrihydrite"]),
    ]


def carbonate():
    def build(name, note, totals, **options):
        return case("calcium carbonate, " + name, note, chem.CARBONATE, totals, **options)

    every = ["calcite", "aragonite", "vaterite", "portlandite"]
    return [
        build("no solid", "supersaturation tolerated", "Ca=0.002 CO3=0.004 Na=0.004 Cl=0.004 H=0.004", davies=A),
        build("calcite", "same with calcite", "Ca=0.002 CO3=0.004 Na=0.004 Cl=0.004 H=0.004", davies=A,
              solids=["calcite"]),
        build("just saturated", "solid amount near zero, total H",
              "Ca=0.0001782197 CO3=0.004 Na=0.004 Cl=0.004 H=0.004", davies=A, solids=["calcite"]),
        build("calcite pH 8.3", "pH held", "Ca=0.01 CO3=0.003 Na=0.5 Cl=0.5", pH="8.3", davies=A,
              solids=["calcite"]),
        build("polymorphs", "three parallel solids", "Ca=0.01 CO3=0.02 H=0.01", solids=every[:3]),
        build("lime and calcite", "two solids sharing calcium", "Ca=0.2 CO3=0.05 H=-0.3", solids=every, davies=A),
        build("in water", "equal totals, H zero", "Ca=0.01 CO3=0.01 H=0", solids=["calcite"]),
        build("held carbonate", "two held components", "Ca=0.05 Na=0.1", pH="8.2", held={"CO3": "-5.15"},
              davies=A, solids=["calcite", "aragonite"]),
        build("held carbonate, total H", "held carbonate, H balanced", "Ca=0.001 Na=0.1 Cl=0.1 H=-0.02",
              held={"CO3": "-5.15"}, solids=["calcite"]),
    ]


def zinc():
    def build(name, note, totals, **options):
        return case("zinc, " + name, note, chem.ZINC, totals, **options)

    hydroxide = ["Zn(OH)2(s)"]
    every = ["Zn(OH)2(s)", "zincite", "simonkolleite"]
    return [
        build("pH 6", "no solid forms", "Zn=0.01 Cl=0.02", pH="6", solids=hydroxide),
        build("pH 9", "amphoteric hydroxide", "Zn=0.01 Cl=0.02", pH="9", solids=hydroxide, davies=A),
        build("pH 14.2", "zincate", "Zn=0.1 Na=1.5", pH="14.2", solids=hydroxide, davies=A),
        build("pH 13.5", "zincate with solid", "Zn=0.3 Na=0.5", pH="13.5", solids=hydroxide),
        build("total H", "hydroxide with total H", "Zn=0.1 Cl=0.2 Na=0.15 H=-0.15", solids=hydroxide, davies=A),
        build("strong base", "zincate, total H", "Zn=0.1 Na=2.5 Cl=0.2 H=-2.3", solids=hydroxide),
        build("chloride", "basic chloride against oxide", "Zn=0.5 Cl=1.0 H=-0.7", solids=every, davies=A),
        build("just saturated", "solid amount near zero", "Zn=0.000262800343 Cl=0.02", pH="7.5", solids=hydroxide),
        build("just unsaturated", "saturation index near zero", "Zn=0.000262800341 Cl=0.02", pH="7.5",
              solids=hydroxide),
        build("zincate just saturated", "solid amount near zero, Davies", "Zn=0.0021587832 Cl=0.02", pH="13",
              solids=hydroxide, davies=A),
    ]


def zinc_carbonate():
    def build(name, note, totals, **options):
        return case("zinc carbonate, " + name, note, chem.ZINC_CARBONATE, totals, **options)

    every = ["Zn(OH)2(s)", "smithsonite", "hydrozincite"]
    return [
        build("two solids", "hydroxide and carbonate both present", "Zn=0.1 CO3=0.02", pH="9.0", solids=every[:2]),
        build("two solids, total H", "sharing zinc", "Zn=0.1 CO3=0.04 Na=0.1 H=-0.1", solids=every[:2], davies=A),
        build("hydrozincite", "mixed salt against both", "Zn=0.05 CO3=0.05 Na=0.1 H=-0.02", solids=every, davies=A),
    ]


def phosphate():
    def build(name, note, totals, **options):
        return case("calcium phosphate, " + name, note, chem.CALCIUM_PHOSPHATE, totals, **options)

    every = ["brushite", "hydroxyapatite", "octacalcium phosphate", "tricalcium phosphate"]
    return [
        build("no solid", "ion pairs only", "Ca=0.0025 PO4=0.001 Na=0.15", pH="7.4", davies=A),
        build("brushite pH 5", "only CaHPO4 offered", "Ca=0.1 PO4=0.1", pH="5", solids=every[:1], davies=A),
        build("apatite pH 7.4", "apatite against CaHPO4", "Ca=0.01 PO4=0.006 Na=0.15", pH="7.4",
              solids=every[:2], davies=A),
        build("acid total H", "both solids at their joint point", "Ca=0.3 PO4=0.25 H=0.2", solids=every[:2]),
        build("four solids", "choice among four", "Ca=0.05 PO4=0.04 Na=0.1 H=0.03", solids=every, davies=A),
        build("apatite dissolving", "apatite in pure water", "Ca=0.005 PO4=0.003 H=-0.001", solids=every[1:2]),
    ]


def aluminium():
    def build(name, note, totals, **options):
        return case("aluminium gluconate, " + name, note, chem.ALUMINIUM_GLUCONATE, totals, **options)

    return [
        build("pH 4", "complexes", "Al=0.01 Glu=0.05 Na=0.05", pH="4"),
        build("pH 8", "gibbsite", "Al=0.05 Glu=0.1 Na=0.1", pH="8", solids=["gibbsite"], davies=A),
        build("aluminate", "strong base, total H", "Al=0.5 Glu=0.2 Na=3.0 H=-2.8", solids=["gibbsite"], davies=A),
        build("partly neutralised", "parallel hydroxides", "Al=0.1 Glu=0.02 Na=0.02 H=-0.25",
              solids=["gibbsite", "Al(OH)3(am)"]),
    ]


def silver():
    def build(name, note, totals, **options):
        return case("silver, " + name, note, chem.SILVER_HALIDE, totals, **options)

    both = ["AgCl(s)", "AgBr(s)"]
    return [
        build("both halides", "two solids sharing silver", "Ag=0.03 Cl=0.02 Br=0.02", solids=both),
        build("bromide only", "chloride stays dissolved", "Ag=0.01 Cl=0.02 Br=0.02", solids=both, davies=A),
        build("ammonia", "dissolved by ammonia", "Ag=0.01 Cl=0.012 NH3=1.0", solids=["AgCl(s)"], davies=A),
        build("equimolar", "exact equivalence with solid", "Ag=0.01 Cl=0.01", solids=["AgCl(s)"]),
    ]


def cyanide():
    def build(name, note, totals, **options):
        return case("cyanide, " + name, note, chem.CYANIDE, totals, **options)

    return [
        build("gold bath", "log beta above 38", "Au=0.02 Cu=0.001 CN=0.2", pH="11"),
        build("brass bath", "three metals", "Cu=0.3 Zn=0.1 Fe=0.001 CN=1.5 H=-0.2", davies=A),
        build("short of cyanide", "CuCN precipitates", "Cu=0.3 Zn=0.1 CN=0.35", pH="9.5", solids=["CuCN(s)"]),
        build("ferrocyanide", "three solids offered", "Cu=0.01 Zn=0.1 Fe=0.02 CN=0.2 H=-0.05",
              solids=["CuCN(s)", "Zn(CN)2(s)", "Zn2Fe(CN)6(s)"]),
    ]


def large():
    water = "Ca=0.02 Mg=0.053 Na=0.48 K=0.01 CO3=0.0024 SO4=0.028 Cl=0.56 F=0.001"
    bath = "Ni=0.2 Cu=0.05 Zn=0.1 EDTA=0.25 Cit=0.3 NH3=1.0 Na=1.0 Cl=0.7"
    five = ["calcite", "dolomite", "gypsum", "fluorite", "brucite"]
    return [
        case("salt water pH 8.1", "nine components", chem.HARD_WATER, water, pH="8.1", davies=A),
        case("salt water solids", "five solids offered", chem.HARD_WATER,
             water.replace("SO4=0.028", "SO4=0.2") + " H=0.002", solids=five, davies=A),
        case("hard water five solids", "all five at once", chem.HARD_WATER,
             "Ca=0.4 Mg=0.2 CO3=0.25 SO4=0.2 F=0.04 Na=0.2 Cl=0.1 H=-0.1", solids=five),
        case("mixed bath pH 9", "large species list", chem.MIXED_BATH, bath, pH="9"),
        case("mixed bath total H", "large species list", chem.MIXED_BATH, bath + " H=0.9", davies=A),
        case("mixed bath solids", "four solids offered", chem.MIXED_BATH, bath.replace("EDTA=0.25", "EDTA=0.05"),
             pH="10.5", davies=A, solids=["Ni(OH)2(s)", "Cu(OH)2(s)", "CuO(s)", "Zn(OH)2(s)"]),
    ]


def stiff():
    protic = chem.PROTIC_LIGAND
    return [
        case("equimolar log beta 30", "exactly equimolar", chem.ONE_TO_ONE_30, "M=0.01 L=0.01"),
        case("equimolar log beta 30 Davies", "ionic strength near 1e-16", chem.ONE_TO_ONE_30, "M=0.01 L=0.01",
             davies=A),
        case("excess 1e-9", "metal excess of 1e-9 of 0.01", chem.ONE_TO_ONE_30, "M=0.01000000001 L=0.01"),
        case("ligand excess 1e-9", "ligand excess 1e-9 mol/L", chem.ONE_TO_ONE_30, "M=0.01 L=0.010000001",
             davies=A),
        case("trace ligand", "ligand 1e-12 in 5 mol/L metal", chem.ONE_TO_ONE_30, "M=5 L=1e-12"),
        case("trace metal", "metal 1e-12 in 5 mol/L ligand", chem.ONE_TO_ONE_30, "M=1e-12 L=5", davies=A),
        case("equimolar log beta 45", "exactly equimolar at 5 mol/L", chem.ONE_TO_ONE_45, "M=5 L=5"),
        case("equimolar trace", "both 1e-12", chem.ONE_TO_ONE_45, "M=1e-12 L=1e-12"),
        case("protic equimolar pH 10", "log beta 30 with proton competition", protic, "M=0.01 L=0.01", pH="10"),
        case("protic equimolar total H", "exact equivalence, total H zero", protic, "M=0.01 L=0.01 H=0"),
        case("protic equimolar Davies", "acid salt neutralised", protic, "M=0.01 L=0.01 H=0.02", davies=A),
        case("protic with solid", "1e-9 mol/L of hydroxide", protic, "M=0.010001003 L=0.01", pH="11.5",
             solids=["M(OH)2(s)"]),
        case("polynuclear 3:4", "M3L4 with log beta 45 at its ratio", chem.POLYNUCLEAR, "M=0.75 L=1.0"),
        case("polynuclear dilute", "at 1e-9", chem.POLYNUCLEAR, "M=3e-9 L=4e-9", davies=A),
        case("rival metals", "equal constants, equal totals", chem.RIVALS, "M=0.02 N=0.02 L=0.04"),
        case("rival metals short", "ligand for one of the two", chem.RIVALS, "M=0.02 N=0.02 L=0.02", davies=A),
        case("metal alone", "ligand total zero", protic, "M=0.05 L=0 H=-0.02", davies=A, solids=["M(OH)2(s)"]),
        case("nothing but water", "metal and ligand totals zero", protic, "M=0 L=0 H=0", solids=["M(OH)2(s)"]),
        case("held metal", "metal and pH held", protic, "L=0.01", pH="7", held={"M": "-6.5"}, davies=A),
        case("all held", "no balance left", protic, pH="6", held={"M": "-7", "L": "-25"}, davies=A),
    ]


def shared_metal():
    def build(name, note, totals, **options):
        return case("shared metal, " + name, note, chem.SHARED_METAL, totals, **options)

    every = list(chem.SHARED_METAL.solids)
    return [
        build("pH 6", "two salts present", "M=0.3 X=0.02 Y=0.3", pH="6", solids=every[:3]),
        build("total H", "five solids offered", "M=0.1 X=0.04 Y=0.05 H=-0.05", solids=every, davies=A),
        build("pH 7.5", "five solids offered", "M=0.2 X=0.05 Y=0.2", pH="7.5", solids=every, davies=A),
        build("dilute", "five offered, none forms", "M=1e-7 X=1e-6 Y=1e-5", pH="7", solids=every),
    ]


def handcrafted_systems():
    groups = (water_and_acids, nickel, copper, iron, carbonate, zinc, zinc_carbonate, phosphate, aluminium,
              silver, cyanide, large, stiff, shared_metal)
    return [system for group in groups for system in group()]
