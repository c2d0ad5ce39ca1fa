"""The headings that each table understands: terms of the trade, their aliases and symbols, and their dimensions."""

from __future__ import annotations

from dataclasses import dataclass, field


@dataclass(frozen=True)
class Term:
    """One input column."""

    name: str  # as documents write it: "End diameter"
    dimension: str  # a key of xlaxial.units.DIMENSIONS, or "text" (labels and names) or "count"
    help: str  # one clause: what stands in it, its sign, what a blank means
    aliases: tuple[str, ...] = ()  # other spellings and symbols; case, spaces and punctuation do not matter
    positive: bool = False  # a value that is zero or negative is an error
    also: str = ""  # another dimension that its unit may have


@dataclass(frozen=True)
class TableKind:
    """One kind of table."""

    name: str  # argument name: "segments"
    help: str
    terms: tuple[Term, ...]
    tells: tuple[str, ...] = ()  # any of these terms marks the heading row for certain
    by_name: dict[str, Term] = field(default_factory=dict, compare=False, repr=False)

    def __post_init__(self) -> None:
        self.by_name.update({term.name: term for term in self.terms})


_MARK = Term(
    "Mark",
    "text",
    "name of the member that the row belongs to",
    ("Member", "Member mark", "Reference", "Ref", "Tag", "ID", "Piece mark"),
)
_DT = Term(
    "dT",
    "temperature difference",
    "change of temperature, heating positive; blank is 0",
    ("ΔT", "Delta T", "Temperature change", "Temperature difference", "Temp change", "Temperature rise"),
)
_MISFIT = Term(
    "Misfit", "length", "length by which the segment was made too long; blank is 0", ("Lack of fit", "Excess length")
)
_STRAIN = Term(
    "Imposed strain",
    "strain",
    "free strain, lengthening positive (shrinkage is negative); blank is 0",
    ("Initial strain", "Free strain", "ε0", "Shrinkage strain"),
)
_PRELOAD = Term(
    "Preload",
    "force",
    "force in the segment at lock-off with no other action, tension positive",
    ("Lock-off load", "Lock-off force", "Pretension", "P0"),
)
_Q = Term(
    "q",
    "line load",
    "distributed load along the segment, towards +x positive; blank is 0",
    ("Distributed load", "Line load", "UDL"),
)
_STAGE = Term("Stage", "text", "construction stage", ("Stage no", "Step"))
_SETTLEMENT = Term(
    "Settlement",
    "length",
    "prescribed movement of the support, towards +x positive; blank is 0",
    ("Support movement", "Support settlement", "δ"),
)
_NODE = Term(
    "Node",
    "text",
    "node of the member: 0, 1, 2 ... along a series of segments, or a label of From and To",
    ("At node", "Joint"),
)
_X = Term("x", "length", "distance from the first node of an unbranched member", ("Position", "Distance", "At x"))
_SIDE_WORKS = Term("Works in", "text", "both, tension or compression; blank is both", ("Acts in",))
_GAP = Term("Gap", "length", "open distance that must close in compression before contact", ("Clearance",))

SEGMENTS = TableKind(
    "segments",
    "one row a segment (a bar of one material); rows of one mark are a member, in series unless From and To are given",
    (
        _MARK,
        Term(
            "Order", "count", "place of the segment along its member; without it the rows' order", ("Sequence", "Seq")
        ),
        Term("From", "text", "node label at the segment's start", ("From node", "Start node", "Node from", "Node i")),
        Term("To", "text", "node label at the segment's end", ("To node", "End node", "Node to", "Node j")),
        Term("Length", "length", "length of the segment", ("L", "Len"), positive=True),
        Term(
            "Area",
            "area",
            "cross-sectional area for stiffness (at the start where it tapers)",
            ("A", "Cross-sectional area", "Section area", "Gross area", "Start area", "A1"),
            positive=True,
        ),
        Term(
            "End area",
            "area",
            "area at the end of a segment whose area varies linearly",
            ("Area end", "A2"),
            positive=True,
        ),
        Term(
            "Diameter",
            "length",
            "diameter of a solid round (at the start where it tapers)",
            ("d", "Dia", "Ø", "Start diameter", "d1", "Bar diameter"),
            positive=True,
        ),
        Term(
            "End diameter",
            "length",
            "diameter at the end of a segment whose diameter varies linearly",
            ("Diameter end", "Dia end", "d2"),
            positive=True,
        ),
        Term("Outside diameter", "length", "outside diameter of a tube", ("OD", "Outer diameter"), positive=True),
        Term("Wall", "length", "wall thickness of a tube", ("Wall thickness", "t", "WT"), positive=True),
        Term(
            "E",
            "stress",
            "modulus of elasticity; wins over the material's",
            ("Modulus", "Young's modulus", "Elastic modulus", "Modulus of elasticity"),
            positive=True,
        ),
        Term("Material", "text", "name of a material that AX_MATERIAL knows", ("Grade", "Steel", "Steel grade")),
        Term(
            "Alpha",
            "expansion",
            "coefficient of thermal expansion; wins over the material's",
            ("α", "CTE", "Thermal expansion", "Coefficient of thermal expansion", "Expansion coefficient", "αT"),
        ),
        _DT,
        _MISFIT,
        _STRAIN,
        _PRELOAD,
        Term(
            "Lock-off slip",
            "length",
            "jack and wedge seating taken off the preload; blank is 0",
            ("Seating loss", "Draw-in", "Wedge draw-in"),
        ),
        _Q,
        _SIDE_WORKS,
        _GAP,
        Term("Slack", "length", "play that is taken up in tension before the segment pulls", ("Play",)),
        Term(
            "Yield",
            "stress",
            "yield stress for utilisation; wins over the material's",
            ("fy", "Yield stress", "Yield strength", "Rp0.2", "Re", "ReH"),
            positive=True,
        ),
        Term(
            "Hardening",
            "ratio",
            "slope after yield as Et/E, or a modulus with its unit",
            ("Et/E", "Tangent modulus"),
            also="stress",
        ),
        Term(
            "Net area",
            "area",
            "area for strength, where it is less than Area (thread, holes)",
            ("Anet", "An", "Net section", "Stress area", "Tensile stress area"),
            positive=True,
        ),
        Term(
            "Buckling resistance",
            "force",
            "design resistance in compression, as a positive force",
            ("Nb,Rd", "Nb", "Compression resistance"),
            positive=True,
        ),
        _STAGE,
    ),
    tells=("Length",),
)

SUPPORTS = TableKind(
    "supports",
    "one row a support; a blank Stiffness is rigid",
    (
        _MARK,
        _NODE,
        _X,
        Term(
            "Stiffness",
            "stiffness",
            "spring stiffness; blank is rigid",
            ("k", "Spring", "Spring stiffness"),
            positive=True,
        ),
        _SETTLEMENT,
        _GAP,
        Term("Side", "text", "pushes right, pushes left or both"),
        _SIDE_WORKS,
        Term("Slip force", "force", "force at which the support slips", ("Friction force",)),
        Term("Capacity", "force", "resistance of the support, for utilisation only", ("Support capacity",)),
    ),
    tells=("Node", "x"),
)

LOADS = TableKind(
    "loads",
    "one row an action, at a Node, at x or on a Segment",
    (
        _MARK,
        Term("Case", "text", "load case; without combinations all cases are summed", ("Load case", "LC")),
        _STAGE,
        _NODE,
        _X,
        Term("Segment", "count", "number of the segment's row within its mark, from 1", ("Segment no", "Seg")),
        Term("Force", "force", "applied force, towards +x positive", ("F", "P", "Load", "Axial load", "Point load")),
        _Q,
        _DT,
        _MISFIT,
        _STRAIN,
        _PRELOAD,
        _SETTLEMENT,
        Term("Remove", "text", "takes the segment out at its stage"),
    ),
    tells=("Node", "x", "Segment"),
)

TABLES: dict[str, TableKind] = {kind.name: kind for kind in (SEGMENTS, SUPPORTS, LOADS)}
