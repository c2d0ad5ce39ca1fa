"""Declarations of the worksheet functions on tabulated data; the code behind them is in `xlaxial.functions.tabulated`."""

from __future__ import annotations

from xlaxial.functions.registry import Argument, Function

_CODE = "xlaxial.functions.tabulated:"

FUNCTIONS: tuple[Function, ...] = (
    Function(
        "AX_MATERIAL",
        "A tabulated property of a material: E, G, Alpha, Density, Poisson's ratio, Yield, Tensile strength, fck, Source.",
        (
            Argument("name", 'Material, such as "S355", "A992", "1.4401", "C30/37".', "value"),
            Argument("what", 'The property; strength that depends on thickness needs it: "Yield, 40 mm".', "value"),
            Argument(
                "unit", 'Unit of the answer, such as "GPa"; due for all that has a dimension.', "value", optional=True
            ),
        ),
        "One value; an error value where the source has none.",
        _CODE + "material",
        '=AX_MATERIAL("S355", "Yield, 40 mm", "MPa")',
        'The standards named by AX_MATERIAL(name, "Source"); values recalled without the document at hand say so.',
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
