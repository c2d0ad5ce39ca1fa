"""Declarations of the worksheet functions on schedules of bars; the code behind them is in `xlaxial.functions.bars`."""

from __future__ import annotations

from dataclasses import replace

from xlaxial.functions.registry import Argument, Function, ResultWord

_CODE = "xlaxial.functions.bars.worksheet:"
_SOURCE = (
    "Equilibrium, Hooke's law and compatibility of axially loaded bars, solved by the displacement method; "
    "checked against closed forms and general-purpose libraries in the tests."
)

SEGMENTS = Argument(
    "segments", "Segments table with its heading row: Length, Area or Diameter, E or Material, and more.", "table"
)
SUPPORTS = Argument(
    "supports", "Supports table with its heading row: Node or x, Stiffness (blank is rigid), Settlement.", "table"
)
LOADS = Argument(
    "loads", "Loads table with its heading row: Node, x or Segment, and Force, q, dT and more.", "table", optional=True
)
WANTED = Argument(
    "wanted",
    'Headings of the answer with their units, one heading as text, a bare unit such as "kN", or "Problems".',
    "cells",
    optional=True,
)
COMBINATIONS = Argument(
    "combinations", "Combinations table: not taken by this version, which sums all load cases.", "cells", optional=True
)
SETTINGS = Argument("settings", "Settings, two columns: name and value.", "cells", optional=True)
HEADINGS = Argument(
    "headings",
    "Headings of the segments, where the first argument is one member's rows without them.",
    "cells",
    optional=True,
)
MARK = Argument("mark", "Mark of the member; may be blank where the table holds one member.", "value")
POINTS = Argument(
    "points", "Stations on each piece between nodes and loads, 2 or more; 11 where left out.", "value", optional=True
)

_TABLES = ("segments", "supports", "loads")
_CALL = (SEGMENTS, SUPPORTS, LOADS, WANTED, COMBINATIONS, SETTINGS, HEADINGS)

STATUS = ResultWord("Status", "text", "ok and what the result rests on, or what is wrong, where, and how to mend it")
COMBINATION = ResultWord("Combination", "text", "the combination that governs Utilisation")

REACTION_WORDS = (
    ResultWord(
        "Reaction", "force", "force of the support on the member, towards +x positive", ("R", "Support reaction")
    ),
    ResultWord("Reaction max", "force", "algebraically largest over the combinations", ("Max reaction",)),
    ResultWord("Reaction min", "force", "algebraically least over the combinations", ("Min reaction",)),
    ResultWord("Combination max", "text", "the combination of Reaction max"),
    ResultWord("Combination min", "text", "the combination of Reaction min"),
    ResultWord("State", "text", "rigid or elastic"),
    STATUS,
)

SEGMENT_WORDS = (
    ResultWord(
        "Force", "force", "axial force of largest magnitude in the segment, tension positive", ("N", "Axial force")
    ),
    ResultWord("Force start", "force", "axial force at the segment's start", ("N start",)),
    ResultWord("Force end", "force", "axial force at the segment's end", ("N end",)),
    ResultWord("Force max", "force", "algebraically largest axial force in the segment", ("N max", "Max force")),
    ResultWord(
        "Force min", "force", "algebraically least axial force (the largest compression)", ("N min", "Min force")
    ),
    ResultWord("Stress", "stress", "axial stress of largest magnitude, on Area", ("σ", "Axial stress")),
    ResultWord("Stress start", "stress", "axial stress at the segment's start", ("σ start",)),
    ResultWord("Stress end", "stress", "axial stress at the segment's end", ("σ end",)),
    ResultWord(
        "Stress max", "stress", "algebraically largest axial stress, inside the segment too", ("σ max", "Max stress")
    ),
    ResultWord(
        "Stress min", "stress", "algebraically least axial stress, inside the segment too", ("σ min", "Min stress")
    ),
    ResultWord("Strain", "strain", "Stress over E (imposed strain and temperature not in it)", ("ε",)),
    ResultWord(
        "Elongation",
        "length",
        "change of the distance between its ends, lengthening positive (take-up by preload in it)",
        ("Extension", "ΔL", "Change of length"),
    ),
    ResultWord("Elongation max", "length", "algebraically largest over the combinations"),
    ResultWord("Elongation min", "length", "algebraically least over the combinations"),
    ResultWord("Displacement start", "length", "movement of the segment's start, towards +x positive", ("u start",)),
    ResultWord("Displacement end", "length", "movement of the segment's end, towards +x positive", ("u end",)),
    ResultWord(
        "Displacement max", "length", "algebraically largest movement in the segment", ("u max", "Max displacement")
    ),
    ResultWord(
        "Displacement min", "length", "algebraically least movement in the segment", ("u min", "Min displacement")
    ),
    ResultWord(
        "Utilisation",
        "ratio",
        "largest of stress on Net area over Yield x Strength factor, and compression over Buckling resistance",
        ("Utilization", "Usage", "UR"),
    ),
    COMBINATION,
    ResultWord("Combination max", "text", "the combination of Force max"),
    ResultWord("Combination min", "text", "the combination of Force min"),
    ResultWord("State", "text", "elastic"),
    ResultWord("Pass", "flag", "1 where Utilisation is at most 1, else 0"),
    STATUS,
)

MEMBER_WORDS = (
    ResultWord("Utilisation", "ratio", "largest utilisation of the member's segments", ("Utilization", "Usage", "UR")),
    ResultWord("Mark", "text", "the member's mark", ("Member",)),
    ResultWord("Force max", "force", "algebraically largest axial force", ("N max", "Max force")),
    ResultWord(
        "Force min", "force", "algebraically least axial force (the largest compression)", ("N min", "Min force")
    ),
    ResultWord("Stress max", "stress", "algebraically largest axial stress", ("σ max", "Max stress")),
    ResultWord("Stress min", "stress", "algebraically least axial stress", ("σ min", "Min stress")),
    ResultWord("Displacement max", "length", "algebraically largest movement, towards +x positive", ("u max",)),
    ResultWord("Displacement min", "length", "algebraically least movement", ("u min",)),
    ResultWord("Segment", "count", "number of the segment with the largest utilisation, from 1 within its mark"),
    COMBINATION,
    ResultWord("Redundants", "count", "unknown forces less the conditions of equilibrium"),
    ResultWord(
        "Residual",
        "ratio",
        "largest force out of balance over the member's largest force; 0 where it is rounding (below 1e-12)",
    ),
    ResultWord("Pass", "flag", "1 where every segment passes, else 0"),
    STATUS,
)

PROFILE_WORDS = (
    ResultWord("Force", "force", "axial force, tension positive", ("N", "Axial force")),
    ResultWord("x", "length", "distance from the member's first node"),
    ResultWord("Segment", "count", "number of the segment, from 1 along the member"),
    ResultWord("Stress", "stress", "axial stress on Area", ("σ", "Axial stress")),
    ResultWord("Displacement", "length", "movement towards +x", ("u",)),
)

_ROWS = "One row per row of the segments table below its headings and units row; the headings wanted are its columns."

_SEGMENTS_FUNCTION = Function(
    "AX_SEGMENTS",
    "Forces, stresses, elongations, displacements and utilisation of every segment of every member.",
    _CALL,
    _ROWS + " Without wanted headings a standard set comes with its own heading row.",
    _CODE + "segments",
    "=AX_SEGMENTS(Segments, Supports, Loads, H4:M4)",
    _SOURCE,
    SEGMENT_WORDS,
    _TABLES,
)


def _one_quantity(name: str, what: str, code: str, example: str) -> Function:
    first = {word.name: word for word in SEGMENT_WORDS}
    main = {"forces": "Force", "stresses": "Stress", "elongations": "Elongation", "displacements": "Displacement end"}[
        code
    ]
    words = (first[main], *(word for word in SEGMENT_WORDS if word.name != main))
    return replace(
        _SEGMENTS_FUNCTION,
        name=name,
        summary=what,
        code=_CODE + code,
        example=example,
        words=words,
        returns=_ROWS + f" Main quantity: {main}.",
    )


FUNCTIONS: tuple[Function, ...] = (
    Function(
        "AX_REACTIONS",
        "Reactions of every support of every member of a schedule.",
        _CALL,
        "One row per row of the supports table below its headings and units row. Main quantity: Reaction.",
        _CODE + "reactions",
        '=AX_REACTIONS(Segments, Supports, Loads, "kN")',
        _SOURCE,
        REACTION_WORDS,
        _TABLES,
    ),
    _one_quantity(
        "AX_FORCES",
        "Axial force in every segment of every member, tension positive.",
        "forces",
        '=AX_FORCES(Segments, Supports, Loads, "kN")',
    ),
    _one_quantity(
        "AX_STRESSES",
        "Axial stress in every segment of every member, tension positive.",
        "stresses",
        '=AX_STRESSES(Segments, Supports, Loads, "MPa")',
    ),
    _one_quantity(
        "AX_ELONGATIONS",
        "Change of length of every segment of every member, lengthening positive.",
        "elongations",
        '=AX_ELONGATIONS(Segments, Supports, Loads, "mm")',
    ),
    _one_quantity(
        "AX_DISPLACEMENTS",
        "Movements of the two ends of every segment of every member, towards +x positive.",
        "displacements",
        "=AX_DISPLACEMENTS(Segments, Supports, Loads)",
    ),
    _SEGMENTS_FUNCTION,
    Function(
        "AX_MEMBERS",
        "Governing values of every member: largest forces, stresses, displacements, utilisation, residual, status.",
        _CALL,
        "One row per mark, in the order in which marks first appear. Main quantity: Utilisation.",
        _CODE + "members",
        "=AX_MEMBERS(Segments, Supports, Loads, A2:F2)",
        _SOURCE,
        MEMBER_WORDS,
        _TABLES,
    ),
    Function(
        "AX_PROFILE",
        "Force, stress and displacement along one unbranched member, for charts.",
        (SEGMENTS, SUPPORTS, LOADS, MARK, WANTED, COMBINATIONS, SETTINGS, POINTS),
        "One row per station: both ends of every piece between nodes and point loads, and equal steps between them.",
        _CODE + "profile",
        '=AX_PROFILE(Segments, Supports, Loads, "T1")',
        _SOURCE,
        PROFILE_WORDS,
        _TABLES,
    ),
)
