"""Declarations of the worksheet functions on tabulated data; the code behind them is in `xlaxial.functions.tabulated`."""

from __future__ import annotations

from xlaxial.functions.registry import Argument, Function, ResultWord

_CODE = "xlaxial.functions.tabulated:"

MATERIAL_WORDS: tuple[ResultWord, ...] = (
    ResultWord(
        "E",
        "stress",
        "modulus of elasticity; of concrete the secant modulus",
        ("Modulus", "Young's modulus", "Modulus of elasticity", "Elastic modulus"),
    ),
    ResultWord("G", "stress", "shear modulus, E / (2 (1 + Poisson's ratio))", ("Shear modulus",)),
    ResultWord("Poisson's ratio", "ratio", "of concrete that of uncracked concrete", ("Poisson", "ν", "nu")),
    ResultWord(
        "Alpha",
        "expansion",
        "coefficient of linear thermal expansion",
        ("α", "Expansion", "Thermal expansion", "Coefficient of thermal expansion", "CTE"),
    ),
    ResultWord("Density", "density", "mass by volume", ("ρ", "rho")),
    ResultWord(
        "Yield",
        "stress",
        "least yield stress or 0.2 % proof stress, by thickness or diameter where the source has it so",
        ("fy", "Fy", "fyk", "fo", "ReH", "Rp0.2", "Yield stress", "Yield strength", "Proof stress", "Proof strength"),
    ),
    ResultWord(
        "Tensile strength",
        "stress",
        "least tensile strength, by thickness or diameter where the source has it so",
        ("fu", "Fu", "Rm", "Tensile", "Ultimate strength"),
    ),
    ResultWord("fck", "stress", "characteristic cylinder strength of concrete at 28 days"),
    ResultWord("fcm", "stress", "mean cylinder strength of concrete at 28 days"),
    ResultWord("fctm", "stress", "mean tensile strength of concrete"),
    ResultWord("Ecm", "stress", "secant modulus of concrete"),
    ResultWord("Source", "text", "where the values come from; Source of E and Source of Yield give one part of it"),
)

FUNCTIONS: tuple[Function, ...] = (
    Function(
        "AX_MATERIAL",
        "A tabulated property of a material: E, G, Alpha, Density, Poisson's ratio, Yield, Tensile strength, fck, Source.",
        (
            Argument("name", 'Material, such as "S355", "A992", "1.4401", "C30/37".', "value"),
            Argument(
                "what",
                'The property. Strength that depends on thickness or diameter needs it: "Yield, 40 mm" or '
                '"Yield at 1.5 in". The unit may stand behind it: "E (GPa)".',
                "value",
            ),
            Argument(
                "unit", 'Unit of the answer, such as "GPa"; due for all that has a dimension.', "value", optional=True
            ),
        ),
        "One value; an error value where the source has none, or where the thickness that it depends on is not said.",
        _CODE + "material",
        '=AX_MATERIAL("S355", "Yield, 40 mm", "MPa")',
        'The standards named by AX_MATERIAL(name, "Source"): values recalled without the document at hand say '
        '"from memory", those compared with a reproduction of the table "seen on a public page".',
        words=MATERIAL_WORDS,
        shape="cell",
    ),
    Function(
        "AX_ABOUT",
        "Version of xlaxial, edition of its data, and the caution that goes with every result.",
        (),
        "Four lines of text, one below the other.",
        _CODE + "about",
        "=AX_ABOUT()",
    ),
)
