"""Areas, moduli and strengths of the segments' rows, from the columns that each row fills in."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from xlaxial.arrays import Flags, Floats
from xlaxial.functions.bars.members import Members
from xlaxial.problems import AxialError, Problem
from xlaxial.tables.read import Table

_WAYS = 'fill in Area, or Diameter, or "Outside diameter" and Wall'


@dataclass(frozen=True)
class Sections:
    """What each row of the segments table is made of; nan where unknown."""

    length: Floats  # (n_rows,) m
    area_start: Floats  # (n_rows,) m2
    area_end: Floats  # (n_rows,) m2
    round_taper: Flags  # (n_rows,) the diameter varies linearly
    modulus: Floats  # (n_rows,) Pa
    alpha: Floats  # (n_rows,) 1/K, nan where not given
    strength: Floats  # (n_rows,) Pa, yield stress, nan where not given
    strength_note: dict[int, str]  # why a row's material gives no yield stress
    net_start: Floats  # (n_rows,) m2, area for strength at the start
    net_end: Floats  # (n_rows,) m2
    buckling: Floats  # (n_rows,) N, nan where not given


def read_sections(table: Table, members: Members) -> Sections:
    """Read the sections of the segments' rows; a row whose section cannot be told fails its member."""
    rows = members.row_member >= 0

    def fail(mask: Flags, term: str | None, what: str, remedy: str) -> None:
        if not mask.any():
            return
        for i in np.flatnonzero(mask & rows).tolist():
            members.fail_row_once(table, i, Problem(what, remedy), term, int(members.row_member[i]))

    length = table.values("Length", np.nan)
    fail(np.isnan(length), "Length", "Length is blank", "write the segment's length")
    area = table.values("Area", np.nan)
    start, end, round_taper = area, area, np.zeros(table.n_rows, dtype=bool)
    ways = [table.present("Area"), table.present("Diameter"), table.present("Outside diameter")]
    if ways[1].any():
        diameter = table.values("Diameter", np.nan)
        last = table.values("End diameter", np.nan)
        last = np.where(np.isnan(last), diameter, last)
        start = np.where(ways[1], 0.25 * np.pi * diameter**2, start)
        end = np.where(ways[1], 0.25 * np.pi * last**2, end)
        round_taper = ways[1] & (last != diameter)
    if ways[2].any():
        outside, wall = table.values("Outside diameter", np.nan), table.values("Wall", np.nan)
        fail(
            ways[2] & np.isnan(wall),
            "Wall",
            "a tube has no Wall",
            "write its wall thickness, or use Diameter for a solid round",
        )
        fail(
            ways[2] & (2.0 * wall > outside),
            "Wall",
            "the Wall is more than half of the Outside diameter",
            "mend one of them",
        )
        tube = np.pi * wall * (outside - wall)
        start, end = np.where(ways[2], tube, start), np.where(ways[2], tube, end)
    if table.layout.has("End area"):
        last = table.values("End area", np.nan)
        end = np.where(ways[0] & ~np.isnan(last), last, end)
    if table.layout.has("End area", "End diameter", "Wall", "Diameter", "Outside diameter"):
        several = ways[0].astype(int) + ways[1] + ways[2] > 1
        fail(several, "Area", "the section is given in two ways", "keep one: " + _WAYS)
        fail(
            table.present("End area") & ~ways[0],
            "End area",
            "End area stands without Area",
            "write Area, or clear End area",
        )
        fail(
            table.present("End diameter") & ~ways[1],
            "End diameter",
            "End diameter stands without Diameter",
            "write Diameter, or clear End diameter",
        )
        fail(
            table.present("Wall") & ~ways[2], "Wall", "Wall stands without Outside diameter", "write it, or clear Wall"
        )
    fail(np.isnan(start), None, "the row has no section", _WAYS)
    net = table.values("Net area", np.nan)
    net_start, net_end = np.where(np.isnan(net), start, net), np.where(np.isnan(net), end, net)
    modulus, alpha, strength, notes = _materials(table, members, round_taper)
    fail(np.isnan(modulus), "E", "the row has no modulus", "fill in E, or Material")
    return Sections(
        length,
        start,
        end,
        round_taper,
        modulus,
        alpha,
        strength,
        notes,
        net_start,
        net_end,
        table.values("Buckling resistance", np.nan),
    )


def _materials(table: Table, members: Members, tapered: Flags) -> tuple[Floats, Floats, Floats, dict[int, str]]:
    """Modulus, expansion and yield stress: the row's own columns, else its material's."""
    modulus, alpha = table.values("E", np.nan), table.values("Alpha", np.nan)
    strength = table.values("Yield", np.nan)
    notes: dict[int, str] = {}
    names = table.labels.get("Material")
    if names is None or not any(names):
        return modulus, alpha, strength, notes
    from xlaxial.data.materials import lookup

    modulus, alpha, strength = modulus.copy(), alpha.copy(), strength.copy()
    tube = table.present("Outside diameter")
    across = np.fmax(table.values("Diameter", np.nan), table.values("End diameter", np.nan))
    diameter = np.where(tube, table.values("Outside diameter", np.nan), across)
    wall = np.where(tube, table.values("Wall", np.nan), across)
    by_name: dict[str, list[int]] = {}
    for i, name in enumerate(names):
        if name is not None and members.row_member[i] >= 0:
            by_name.setdefault(name, []).append(i)
    for name, found in by_name.items():
        at = np.array(found)
        try:
            material = lookup(name)
        except AxialError as wrong:
            for i in found:
                members.fail_row(table, i, wrong.problem, "Material", int(members.row_member[i]))
            continue
        modulus[at] = np.where(np.isnan(modulus[at]), material.modulus, modulus[at])
        alpha[at] = np.where(np.isnan(alpha[at]), material.alpha, alpha[at])
        thickness = diameter if material.size == "diameter" else wall
        for thick in np.unique(thickness[at]):  # nan, where no thickness is known, comes once
            same = at[np.isnan(thickness[at]) if np.isnan(thick) else thickness[at] == thick]
            lacking = same[np.isnan(strength[same])]
            try:
                strength[lacking] = material.yield_at(None if np.isnan(thick) else float(thick))
            except AxialError as wrong:
                said = f"{wrong.problem.what}: {wrong.problem.remedy}"
                notes.update(dict.fromkeys(lacking.tolist(), said))
    return modulus, alpha, strength, notes
