"""Results by row of the user's tables, word by word."""

from __future__ import annotations

from typing import Any

import numpy as np

from xlaxial.arrays import Floats, Ints
from xlaxial.functions.bars.solution import Solution
from xlaxial.tables.words import ResultWord

ALL_CASES = "all cases"
_ROUNDING = 1e-12  # a residual below is rounding, which no two machines share: it is shown as 0
_LEVEL = 1e-9  # utilisations this near to each other, relatively, are level: the first of them governs


class SegmentResults:
    """Results per row of the segments table, SI, nan where there is none; each array is made when first asked for."""

    def __init__(self, solution: Solution) -> None:
        self._solution = solution
        self._made: dict[str, Floats] = {}
        pieces = solution.pieces
        self._first = pieces.first
        self._last = np.append(pieces.first[1:], pieces.bars.start.size)[: pieces.first.size] - 1
        self._split = pieces.first.size != pieces.bars.start.size
        self._rows = solution.inputs.nodes.rows[pieces.kept_segments]

    def __call__(self, word: ResultWord) -> Floats | list[Any]:
        """Return the results of a word for every row of the segments table."""
        if word.dimension == "text":
            return self._text(word.name)
        if word.name == "Pass":
            utilisation = self.by_row("Utilisation")
            return np.where(np.isnan(utilisation), np.nan, (utilisation <= 1.0).astype(float))
        return self.by_row(word.name)

    def by_row(self, name: str) -> Floats:
        """Return a numeric result for every row of the segments table."""
        if name not in self._made:
            out = np.full(self._solution.inputs.segments.n_rows, np.nan)
            with np.errstate(invalid="ignore"):  # nan stands for what is not given
                out[self._rows] = self._by_segment(name)
            self._made[name] = out
        return self._made[name]

    def _by_segment(self, name: str) -> Floats:
        """Return a numeric result for every segment that is solved."""
        made: Floats = self._of_kind(name)
        return made

    def _of_kind(self, name: str) -> Any:
        solution = self._solution
        state, bars = solution.state, solution.results
        match name:
            case "Force start":
                return state.force_start[self._first, 0]
            case "Force end":
                return state.force_end[self._last, 0]
            case "Force max":
                return self._most(np.maximum(state.force_start[:, 0], state.force_end[:, 0]))
            case "Force min":
                return -self._most(-np.minimum(state.force_start[:, 0], state.force_end[:, 0]))
            case "Force" | "Stress":
                return _larger(self._segment(f"{name} max"), self._segment(f"{name} min"))
            case "Stress start":
                return bars.stress_start[self._first, 0]
            case "Stress end":
                return bars.stress_end[self._last, 0]
            case "Stress max":
                return self._most(bars.stress_max[:, 0])
            case "Stress min":
                return -self._most(-bars.stress_min[:, 0])
            case "Strain":
                return self._segment("Stress") / solution.inputs.sections.modulus[self._rows]
            case "Elongation" | "Elongation max" | "Elongation min":
                if not self._split:
                    return bars.elongation[:, 0]
                return np.add.reduceat(bars.elongation[:, 0], self._first) if self._first.size else np.zeros(0)
            case "Displacement start":
                return state.displacement[solution.pieces.bars.start[self._first], 0]
            case "Displacement end":
                return state.displacement[solution.pieces.bars.end[self._last], 0]
            case "Displacement max":
                return self._most(bars.displacement_max[:, 0])
            case "Displacement min":
                return -self._most(-bars.displacement_min[:, 0])
            case "Utilisation":
                return self._utilisation()
        raise KeyError(name)

    def _segment(self, name: str) -> Floats:
        return self.by_row(name)[self._rows]

    def _most(self, values: Floats) -> Floats:
        """Largest of each segment's pieces."""
        if not self._split or not self._first.size:
            return values
        return np.maximum.reduceat(values, self._first)

    def _utilisation(self) -> Floats:
        """Larger of stress over factored yield and compression over buckling resistance; nan where neither is given."""
        sections, rows = self._solution.inputs.sections, self._rows
        factor = self._solution.inputs.settings["Strength factor"]
        stress = self._net_stress()
        by_yield = stress / (sections.strength[rows] * factor)
        compression = np.maximum(-self._segment("Force min"), 0.0)
        by_buckling = compression / sections.buckling[rows]
        pulled = self._segment("Force max") > 0.0
        return np.where(np.isnan(by_yield) & pulled, np.nan, np.fmax(by_yield, by_buckling))

    def _net_stress(self) -> Floats:
        """Largest magnitude of stress on the area for strength."""
        sections, rows = self._solution.inputs.sections, self._rows
        net = sections.net_start[rows] != sections.area_start[rows]
        gross = np.abs(self._segment("Stress"))
        if not net.any():
            return gross
        on_net = np.abs(self._segment("Force")) / sections.net_start[rows]
        return np.where(net, np.fmax(on_net, gross), gross)

    def _text(self, name: str) -> list[Any]:
        n_rows = self._solution.inputs.segments.n_rows
        if name == "Mark":
            return list(self._solution.inputs.segments.marks)
        if name == "State":
            return ["elastic"] * n_rows
        if name == "Status":
            return self.status()
        return [ALL_CASES] * n_rows

    def status(self) -> list[Any]:
        """Return ok and what the result rests on, for every row."""
        solution = self._solution
        inputs, rows = solution.inputs, self._rows
        by_member = solution.member_notes()
        factor = inputs.settings["Strength factor"]
        compressed = (self._segment("Force min") < 0.0) & np.isnan(inputs.sections.buckling[rows])
        beyond = self._net_stress() > inputs.sections.strength[rows]
        no_yield = np.isnan(inputs.sections.strength[rows])
        own = [
            [],
            ["buckling not checked"],
            ["stress beyond yield: linear results and sums of cases no longer hold"],
            ["buckling not checked", "stress beyond yield: linear results and sums of cases no longer hold"],
            ["no Yield"],
            ["buckling not checked", "no Yield"],
        ]
        kind = compressed + 2 * beyond + 4 * no_yield
        out: list[Any] = [None] * inputs.segments.n_rows
        members = inputs.members.row_member[rows].tolist()
        said: dict[tuple[int, int], str] = {}
        for row, member, k in zip(rows.tolist(), members, kind.tolist(), strict=True):
            if (member, k) not in said:
                strength = [] if k >= 4 else [f"strength factor {factor:g}"]
                said[member, k] = "; ".join(["ok", *own[k], *by_member[member], *strength])
            out[row] = said[member, k]
        for row, why in inputs.sections.strength_note.items():
            if out[row]:
                out[row] = out[row].replace("no Yield", why)
        return out


class MemberResults:
    """Results per member, in order of first appearance of its mark."""

    def __init__(self, solution: Solution, segments: SegmentResults) -> None:
        self._solution = solution
        self._segments = segments

    def __call__(self, word: ResultWord) -> Floats | list[Any]:
        """Return the results of a word for every member."""
        solution = self._solution
        inputs = solution.inputs
        name, n = word.name, inputs.members.count
        if name == "Mark":
            return list(inputs.members.marks)
        if name == "Combination":
            return [ALL_CASES] * n
        if name == "Status":
            return self.status()
        out = np.full(n, np.nan)
        if name == "Redundants":
            out[solution.pieces.kept] = solution.redundants()
        elif name == "Residual":
            residual = np.maximum(solution.state.residual[:, 0], solution.state.imbalance[:, 0])
            out[solution.pieces.kept] = np.where(residual < _ROUNDING, 0.0, residual)
        elif name == "Segment":
            worst = self._worst_rows()
            out = np.where(worst >= 0, _number_in_mark(inputs.members.row_member, worst), np.nan)
        elif name == "Utilisation":
            out = self._utilisation()
        elif name == "Pass":
            utilisation = self._utilisation()
            out = np.where(np.isnan(utilisation), np.nan, (utilisation <= 1.0).astype(float))
        elif name.endswith("max"):
            out = self._over_rows(self._segments.by_row(name))
        else:
            out = -self._over_rows(-self._segments.by_row(name))
        return out

    def _over_rows(self, values: Floats) -> Floats:
        """Largest over each member's rows; nan where any of them has none."""
        members = self._solution.inputs.members
        out = np.full(members.count, -np.inf)
        rows = members.row_member >= 0
        with np.errstate(invalid="ignore"):  # one nan makes its member's value nan
            np.maximum.at(out, members.row_member[rows], values[rows])
        return out

    def _utilisation(self) -> Floats:
        """Largest of the member's segments; nan where one of them has no resistance: then nothing is proven."""
        return self._over_rows(self._segments.by_row("Utilisation"))

    def _worst_rows(self) -> Ints:
        """Row of the largest utilisation of each member, -1 where it is not known."""
        members = self._solution.inputs.members
        utilisation, worst = self._segments.by_row("Utilisation"), self._utilisation()
        out = np.full(members.count, -1, dtype=np.int64)
        for row in np.flatnonzero(members.row_member >= 0)[::-1].tolist():
            member = members.row_member[row]
            if utilisation[row] >= worst[member] * (1.0 - _LEVEL):
                out[member] = row
        return out

    def status(self) -> list[Any]:
        """Return ok and all that the statuses of its segments say, for every member."""
        inputs = self._solution.inputs
        rows = self._segments.status()
        out: list[Any] = [None] * inputs.members.count
        for row in np.flatnonzero(inputs.members.row_member >= 0).tolist():
            member, text = int(inputs.members.row_member[row]), rows[row]
            if text is None:
                continue
            parts = text.split("; ")
            out[member] = list(dict.fromkeys([*(out[member] or []), *parts]))
        return [None if parts is None else "; ".join(parts) for parts in out]


def _larger(most: Floats, least: Floats) -> Floats:
    """Whichever of two has the larger magnitude."""
    return np.where(np.abs(least) > np.abs(most), least, most)


def _number_in_mark(row_member: Ints, rows: Ints) -> Floats:
    """Number of each row within its mark, from 1."""
    out = np.zeros(rows.size)
    for k, row in enumerate(rows.tolist()):
        if row >= 0:
            out[k] = np.count_nonzero(row_member[: row + 1] == row_member[row])
    return out
