"""The demo schedule: tie rods of an invented quay between a yielding sheet-pile wall and an anchor wall."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from openpyxl import Workbook
from openpyxl.chart import ScatterChart, Series
from openpyxl.chart.reference import Reference
from openpyxl.utils import get_column_letter
from openpyxl.workbook.defined_name import DefinedName
from openpyxl.worksheet.datavalidation import DataValidation
from openpyxl.worksheet.table import Table, TableFormula, TableStyleInfo

from xlaxial.caution import CAUTION
from xlaxial.demos import style

_BARS = (60, 64, 56, 64, 70, 60, 64)  # mm, bar diameters in turn
_SEGMENT_HEADINGS = (
    "Mark",
    "Part",
    "Length (m)",
    "Diameter (mm)",
    "Outside diameter (mm)",
    "Wall (mm)",
    "Net area (mm2)",
    "Material",
    "Preload (kN)",
)
_SEGMENT_FORMATS = ("@", "@", "0.000", "0.0", "0", "0", "0", "@", "0")
_WANTED = (
    "Force max (kN)",
    "Force max (kip)",
    "Stress max (MPa)",
    "Elongation (mm)",
    "Elongation (in)",
    "Displacement start (mm)",
    "Displacement end (mm)",
    "Utilisation",
    "Pass",
)
_WANTED_FORMATS = ("0.0", "0.0", "0.0", "0.00", "0.000", "0.00", "0.00", "0.000", "0")
_TOP = 8  # row of the headings on the schedule sheets


def _ties() -> list[dict[str, Any]]:
    """Invented data of 25 ties."""
    out = []
    for i in range(25):
        bar = _BARS[i % len(_BARS)]
        out.append(
            {
                "mark": f"Q{i + 1:02d}",
                "bar": bar,
                "thread": bar + 12,
                "length": 15.4 + 0.35 * (i % 9),
                "first": "1.4462" if i % 5 == 0 else "S460N" if i % 3 == 0 else "S355",
                "steel": "S460N" if i % 3 == 0 else "S355",
                "far_upset": i % 2 == 0,
                "wall": 6.5 + 0.5 * (i % 6),
                "anchor": 90 + 15 * (i % 4),
                "dead": 0.185 * bar**2 + 9 * (i % 4),
                "live": 84 + 9 * (i % 5),
                "preload": 60 if i % 4 else 75,
                "collar": 7.5 if i % 3 == 1 else None,
                "cold": -18 - (i % 3),
            }
        )
    return out


def _segments(ties: list[dict[str, Any]]) -> list[list[Any]]:
    rows = []
    for i, tie in enumerate(ties):
        # tensile stress area of the thread, pitch 6 mm: ISO 898-1, 9.1.6.1, pi/4 (d - 0.938194 P)^2, from memory
        stress_area = round(0.7854 * (tie["thread"] - 0.9382 * 6) ** 2)
        upset: list[Any] = [
            "upset end, wall",
            0.6,
            tie["thread"],
            None,
            None,
            stress_area,
            tie["first"],
            tie["preload"],
        ]
        coupler: list[Any] = ["coupler", 0.25, None, tie["bar"] + 46, 22, None, tie["steel"], None]
        if i == 10:  # a coupler from another maker's list, in its own units
            coupler = ["coupler", "10 in", None, "4.25 in", "0.875 in", None, tie["steel"], None]
        parts = [
            upset,
            ["bar", round(tie["length"] * 0.55, 3), tie["bar"], None, None, None, tie["steel"], None],
            coupler,
            ["bar", round(tie["length"] * 0.45 - 0.85, 3), tie["bar"], None, None, None, tie["steel"], None],
        ]
        if tie["far_upset"]:
            parts.append(["upset end, anchor", 0.6, tie["thread"], None, None, stress_area, tie["steel"], None])
        rows += [[tie["mark"], *part] for part in parts]
    return rows


def _name(book: Any, name: str, sheet: str, area: str) -> None:
    start, end = area.split(":")
    fixed = ":".join(
        "$" + "".join(c for c in ref if c.isalpha()) + "$" + "".join(c for c in ref if c.isdigit())
        for ref in (start, end)
    )
    book.defined_names[name] = DefinedName(name, attr_text=f"'{sheet}'!{fixed}")


def _schedule(book: Any, ties: list[dict[str, Any]]) -> int:
    """Write the schedule sheet; return the number of its rows."""
    sheet = book.create_sheet("Ties")
    rows = _segments(ties)
    style.title(
        sheet,
        "Quay ties: schedule of segments",
        "Invented data. Rows of one mark stand in series from the sheet-pile wall to the anchor wall.",
    )
    first, last = _TOP + 1, _TOP + len(rows)
    style.headings(sheet, _TOP, 1, _SEGMENT_HEADINGS)
    style.grid(sheet, first, 1, rows, _SEGMENT_FORMATS)
    style.headings(sheet, _TOP, 11, ["Mass (kg)"])
    mass = '=IF(ISNUMBER(D{r}),PI()/4*D{r}^2*C{r}*0.00785,IF(ISNUMBER(E{r}),PI()*F{r}*(E{r}-F{r})*C{r}*0.00785,"own units"))'
    style.grid(sheet, first, 11, [[mass.format(r=r)] for r in range(first, last + 1)], ["0.0"])
    style.headings(sheet, _TOP, 13, _WANTED, result=True)
    call = "AX_SEGMENTS(Segments,Supports,Loads,{wanted},,Settings)"
    wanted = f"M{_TOP}:U{_TOP}"
    style.block(sheet, first, 13, len(rows), _WANTED_FORMATS, "=" + call.format(wanted=wanted))
    style.headings(sheet, _TOP, 23, ["Reserve"])
    style.grid(sheet, first, 23, [[f"=1-T{r}"] for r in range(first, last + 1)], ["0%"], result=True)
    style.mark_utilisation(sheet, f"T{first}:T{last}")
    problems = call.format(wanted='"Problems"')
    style.line(
        sheet,
        4,
        1,
        "Rows in the block",
        f'=IF(ROWS(M{first}:M{last})=COUNTA(A{first}:A{last}),"as the table","mend the block")',
    )
    style.line(sheet, 5, 1, "Problems", f"=INDEX({problems},1,1)", "0")
    style.line(
        sheet,
        6,
        1,
        "First problem",
        f'=IF(B5=0,"none",INDEX({problems},2,1)&": "&INDEX({problems},2,2)&"; "&INDEX({problems},2,3))',
    )
    style.line(sheet, 4, 13, "Largest utilisation", f"=MAX(T{first}:T{last})", "0.000", away=3)
    style.line(
        sheet, 5, 13, "Segments that do not pass", f"=COUNTA(A{first}:A{last})-COUNTIF(U{first}:U{last},1)", "0", away=3
    )
    style.line(sheet, 6, 13, "Mass of ties (t)", f"=SUM(K{first}:K{last})/1000", "0.00", away=3)
    style.widths(sheet, (16, 18, 9, 10, 10, 8, 10, 11, 10, 2, 9, 2, 10, 10, 10, 10.5, 10.5, 12.5, 12.5, 10.5, 7, 2, 9))
    sheet.freeze_panes = sheet.cell(first, 3)
    style.printing(sheet, f"A1:W{last}", CAUTION, rows=f"{_TOP}:{_TOP}")
    _name(book, "Segments", "Ties", f"A{_TOP}:I{last}")
    return len(rows)


def _supports(book: Any, ties: list[dict[str, Any]]) -> None:
    sheet = book.create_sheet("Supports")
    style.title(
        sheet,
        "Supports and their reactions",
        "The wall spring is the sheet piling's own; the anchor wall's yield is its stiffness. Reactions act on the tie, towards the land positive.",
    )
    rows = []
    for i, tie in enumerate(ties):
        nodes = 5 if tie["far_upset"] else 4
        rows.append([tie["mark"], 0, tie["wall"], None, "sheet-pile wall"])
        rows.append([tie["mark"], nodes, tie["anchor"], -1.5 if i % 6 == 0 else None, "anchor wall"])
    last = _TOP + len(rows)
    style.headings(sheet, _TOP, 1, ("Mark", "Node", "Stiffness (kN/mm)", "Settlement (mm)", "Where"))
    style.grid(sheet, _TOP + 1, 1, rows, ("@", "0", "0.0", "0.0", "@"))
    style.headings(sheet, _TOP, 7, ("Reaction (kN)", "Reaction (kip)"), result=True)
    style.block(
        sheet,
        _TOP + 1,
        7,
        len(rows),
        ("0.0", "0.0"),
        f"=AX_REACTIONS(Segments,Supports,Loads,G{_TOP}:H{_TOP},,Settings)",
    )
    style.line(sheet, 4, 1, "Sum of reactions (kN)", f"=SUM(G{_TOP + 1}:G{last})", "0.0", away=2)
    style.line(sheet, 5, 1, "Sum of loads (kN)", "=SUM(Loads!F9:F200)", "0.0", away=2)
    style.line(sheet, 6, 1, "Out of balance (kN)", "=ROUND(C4+C5,6)", "0.000000", away=2)
    style.widths(sheet, (9, 14, 12, 12, 18, 2, 12, 12))
    sheet.freeze_panes = sheet.cell(_TOP + 1, 1)
    style.printing(sheet, f"A1:H{last}", CAUTION, rows=f"{_TOP}:{_TOP}", portrait=True)
    _name(book, "Supports", "Supports", f"A{_TOP}:E{last}")


def _loads(book: Any, ties: list[dict[str, Any]]) -> None:
    sheet = book.create_sheet("Loads")
    style.title(
        sheet,
        "Loads",
        "D earth and water behind the wall, L surcharge on the apron, T cold splash zone; forces at x are drag of a collar in the fill. Towards the water is negative.",
    )
    rows: list[list[Any]] = []
    for tie in ties:
        rows.append([tie["mark"], "D", 0, None, None, -round(tie["dead"]), None])
        if tie["collar"]:
            rows.append([tie["mark"], "D", None, tie["collar"], None, -45, None])
        rows.append([tie["mark"], "L", 0, None, None, -round(tie["live"]), None])
        rows.append([tie["mark"], "T", None, None, 1, None, tie["cold"]])
        rows.append([tie["mark"], "T", None, None, 2, None, round(tie["cold"] / 3)])
    last = _TOP + len(rows)
    style.headings(sheet, _TOP, 1, ("Mark", "Case", "Node", "x (m)", "Segment", "Force (kN)", "dT (K)"))
    style.grid(sheet, _TOP + 1, 1, rows, ("@", "@", "0", "0.00", "0", "0", "0"))
    style.line(sheet, 4, 1, "Ties loaded", f'=SUMPRODUCT((B{_TOP + 1}:B{last}="L")*1)', "0")
    style.widths(sheet, (12, 9, 9, 10, 10, 12, 10))
    sheet.freeze_panes = sheet.cell(_TOP + 1, 1)
    style.printing(sheet, f"A1:G{last}", CAUTION, rows=f"{_TOP}:{_TOP}", portrait=True)
    _name(book, "Loads", "Loads", f"A{_TOP}:G{last}")


def _summary(book: Any, ties: list[dict[str, Any]]) -> None:
    sheet = book.create_sheet("Summary")
    style.title(
        sheet,
        "Governing values, tie by tie",
        "All load cases summed. Segment counts from 1 within its mark, from the wall.",
    )
    wanted = (
        "Mark",
        "Force max (kN)",
        "Stress max (MPa)",
        "Displacement min (mm)",
        "Displacement max (mm)",
        "Segment",
        "Redundants",
        "Residual",
        "Utilisation",
        "Pass",
        "Status",
    )
    formats = ("@", "0.0", "0.0", "0.00", "0.00", "0", "0", "0.0E+00", "0.000", "0", "@")
    last = _TOP + len(ties)
    style.headings(sheet, _TOP, 1, wanted, result=True)
    style.block(
        sheet, _TOP + 1, 1, len(ties), formats, f"=AX_MEMBERS(Segments,Supports,Loads,A{_TOP}:K{_TOP},,Settings)"
    )
    style.mark_utilisation(sheet, f"I{_TOP + 1}:I{last}")
    style.line(sheet, 4, 1, "Ties", f"=ROWS(A{_TOP + 1}:A{last})", "0")
    style.line(sheet, 5, 1, "Do not pass", f"=B4-COUNTIF(J{_TOP + 1}:J{last},1)", "0")
    style.line(sheet, 6, 1, "Largest", f"=MAX(I{_TOP + 1}:I{last})", "0.000")
    style.widths(sheet, (13, 11, 11, 13, 13, 10, 12, 11, 11, 7, 78))
    sheet.freeze_panes = sheet.cell(_TOP + 1, 2)
    style.printing(sheet, f"A1:K{last}", CAUTION, rows=f"{_TOP}:{_TOP}")


def _profile(book: Any) -> None:
    sheet = book.create_sheet("Along a tie")
    style.title(sheet, "Force and movement along one tie", "Choose a mark in B4; x counts from the sheet-pile wall.")
    style.line(sheet, 4, 1, "Tie", "Q11")
    marks = DataValidation(type="list", formula1=f"Summary!$A${_TOP + 1}:$A${_TOP + 25}", allow_blank=False)
    sheet.add_data_validation(marks)
    marks.add("B4")
    style.headings(sheet, _TOP, 1, ("x (m)", "Segment", "Force (kN)", "Stress (MPa)", "Displacement (mm)"), result=True)
    n_rows = 66
    formats = ("0.000", "0", "0.0", "0.0", "0.00")
    style.block(
        sheet, _TOP + 1, 1, n_rows, formats, f"=AX_PROFILE(Segments,Supports,Loads,B4,A{_TOP}:E{_TOP},,Settings,11)"
    )
    style.line(sheet, 5, 1, "Stations", f"=COUNT(A{_TOP + 1}:A{_TOP + n_rows})", "0")
    style.text(sheet, 6, "Rows beyond the last station show #N/A; charts pass them over.", last="E")
    for k, (column, name, unit) in enumerate(((3, "Axial force", "kN"), (5, "Movement towards the land", "mm"))):
        chart = ScatterChart()
        chart.title, chart.style, chart.legend = f"{name} ({unit})", 13, None
        chart.x_axis.title, chart.y_axis.title = "x from the sheet-pile wall (m)", f"{name} ({unit})"
        chart.x_axis.delete = chart.y_axis.delete = False
        chart.x_axis.number_format, chart.y_axis.number_format = "0", "0.0" if column == 5 else "0"
        chart.x_axis.tickLblPos = "low"
        if column == 3:
            chart.y_axis.scaling.min = 0
        chart.scatterStyle = "lineMarker"
        x = Reference(sheet, min_col=1, min_row=_TOP + 1, max_row=_TOP + n_rows)
        y = Reference(sheet, min_col=column, min_row=_TOP + 1, max_row=_TOP + n_rows)
        series = Series(y, x, title=name)
        series.marker.symbol = "none"
        series.graphicalProperties.line.solidFill = "000000"
        series.graphicalProperties.line.width = 22000
        series.smooth = False
        chart.series.append(series)
        chart.height, chart.width = 9.5, 17
        sheet.add_chart(chart, f"G{4 + 21 * k}")
    style.widths(sheet, (11, 10, 12, 12, 14, 2, 12, 12, 12, 12, 12, 12, 12, 12))
    style.printing(sheet, f"A1:P{_TOP + n_rows}", CAUTION, rows=None)


def _light_ties(book: Any) -> None:
    """Write a spreadsheet table in customary units, each answer a call of its own row."""
    sheet = book.create_sheet("Light ties")
    style.title(
        sheet,
        "Light ties of the boat landing (customary units)",
        "A spreadsheet table: each answer is a call of its own row, and grows with the table. Both ends on the supports below.",
    )
    inputs = ("Mark", "Length (in)", "Diameter (in)", "Material", "dT (°F)", "Preload (kip)")
    results = ("Force max (kip)", "Stress max (ksi)", "Elongation (in)", "Utilisation", "Pass")
    materials = ("A36", "A572-50", "F1554-55", "1.4462")
    rows = [
        [f"L{i + 1}", 96 + 14 * i, (0.875, 1.0, 1.125)[i % 3], materials[i % 4], -20 - 5 * (i % 3), 4 + 1.5 * (i % 4)]
        for i in range(8)
    ]
    top = 14
    support_headings = ("Node", "Stiffness (kip/in)", "Settlement (in)", "Where")
    style.headings(sheet, 5, 1, support_headings)
    style.grid(sheet, 6, 1, [[0, 180, None, "timber waling"], [1, None, 0.03, "deadman"]], ("0", "0", "0.00", "@"))
    style.headings(sheet, top, 1, (*inputs, *results))
    last = top + len(rows)
    style.grid(sheet, top + 1, 1, rows, ("@", "0", "0.000", "@", "0", "0.0"))
    table = Table(displayName="LightTies", ref=f"A{top}:{get_column_letter(len(inputs) + len(results))}{last}")
    table.tableStyleInfo = TableStyleInfo(name="TableStyleLight1", showRowStripes=False)
    table._initialise_columns()
    formats = ("0.00", "0.00", "0.0000", "0.000", "0")
    for j, (column, heading) in enumerate(zip(table.tableColumns, (*inputs, *results), strict=True)):
        column.name = heading
        if j < len(inputs):
            continue
        head = f"LightTies[[#Headers],[{heading}]]"
        names = "LightTies[[#Headers],[Mark]:[Preload (kip)]]"
        call = f"AX_SEGMENTS(LightTies[[#This Row],[Mark]:[Preload (kip)]],LightSupports,,{head},,Settings,{names})"
        column.calculatedColumnFormula = TableFormula(attr_text=call)
        cells = [[f"={call}"] for _ in rows]
        style.grid(sheet, top + 1, j + 1, cells, [formats[j - len(inputs)]], result=True)
    sheet.add_table(table)
    style.mark_utilisation(sheet, f"J{top + 1}:J{last}")
    style.line(sheet, 10, 1, "Rows", f"=ROWS(A{top + 1}:A{last})", "0")
    style.line(sheet, 11, 1, "Do not pass", f"=COUNTA(A{top + 1}:A{last})-COUNTIF(K{top + 1}:K{last},1)", "0")
    whole = 'AX_SEGMENTS(LightTies[[#Headers],[#Data],[Mark]:[Preload (kip)]],LightSupports,,"Problems",,Settings)'
    style.line(sheet, 12, 1, "Problems", f"=INDEX({whole},1,1)", "0")
    style.widths(sheet, (12, 14, 13, 14, 9, 11, 11, 11, 11, 11, 7))
    style.printing(sheet, f"A1:K{last}", CAUTION, portrait=True)
    _name(book, "LightSupports", "Light ties", "A5:D7")


def _notes(book: Any, n_rows: int) -> None:
    sheet = book.active
    sheet.title = "Notes"
    style.title(
        sheet,
        "Quay ties: a demo schedule for xlaxial",
        "Invented data: places, marks and numbers belong to no real work.",
    )
    style.text(sheet, 4, "Caution", bold=True)
    style.text(sheet, 5, CAUTION, height=30)
    style.text(sheet, 7, "What the schedule holds", bold=True)
    notes = (
        f"25 tie rods in {n_rows} segments (sheet Ties), held by the sheet-pile wall's spring and a yielding anchor wall (Supports); eight lighter ties in customary units (Light ties).",
        "Each tie is statically indeterminate: wall and tie share the load by their stiffness, temperature and the settlement of some anchors add to it, and preload is the force at lock-off, before any load.",
        "Tension, and movement and reactions towards the land, are positive. Node 0 is at the wall. Load cases D, L and T are summed.",
        'Threads are checked on their stress area (Net area), bars and couplers on their area. Yield is the material\'s by diameter or wall; the source of each: AX_MATERIAL(name, "Source").',
        'Compression is not expected; a segment that is compressed says "buckling not checked" in Status (sheet Summary).',
        "The coupler of Q11 is typed in inches on purpose: a cell's own unit wins over its heading's.",
        "The result blocks are array formulas of fixed size: rows cannot be inserted through them or sorted past them. Make the block anew after adding rows, or use the table form of the sheet Light ties.",
    )
    for k, note in enumerate(notes):
        style.text(sheet, 8 + k, f"{k + 1}. {note}", height=30 if len(note) > 125 else 16)
    style.text(sheet, 16, "Settings", bold=True)
    style.headings(sheet, 17, 1, ("Setting", "Value"))
    style.grid(sheet, 18, 1, [["Strength factor", 0.9]], ("@", "0.00"))
    style.text(sheet, 20, "Checks", bold=True)
    style.line(sheet, 21, 1, "Segments that do not pass", "=Ties!P5", "0")
    style.line(sheet, 22, 1, "Problems in the tables", "=Ties!B5", "0")
    style.line(sheet, 23, 1, "Forces out of balance (kN)", "=Supports!C6", "0.000000")
    style.line(sheet, 24, 1, "Light ties that do not pass", "='Light ties'!B11", "0")
    style.text(sheet, 26, "Made by", bold=True)
    style.block(sheet, 27, 1, 2, ("@",), "=AX_ABOUT()")
    style.widths(sheet, (28, 12, 14, 14, 14, 14, 14, 14))
    style.printing(sheet, "A1:H28", CAUTION, portrait=True)
    _name(book, "Settings", "Notes", "A17:B18")


def build() -> Any:
    """Return the workbook, without values in its formula cells."""
    book = Workbook()
    ties = _ties()
    _notes(book, len(_segments(ties)))
    _schedule(book, ties)
    _supports(book, ties)
    _loads(book, ties)
    _summary(book, ties)
    _profile(book)
    _light_ties(book)
    for sheet in book.worksheets:
        sheet.sheet_view.showGridLines = False
    book.calculation.fullCalcOnLoad = False
    return book


def write(output: Path) -> None:
    """Write the workbook with every value filled in by our own recalculation.

    Raises
    ------
    WorkbookError
        It cannot be written, or one of its cells cannot be recalculated.
    """
    from xlaxial.hosts.headless.commands import changed_values
    from xlaxial.hosts.headless.errors import WorkbookError
    from xlaxial.hosts.headless.patch import write_values
    from xlaxial.hosts.headless.recalculate import FROZEN, recalculate

    build().save(output)
    done = recalculate(output)
    if done.count(FROZEN):
        raise WorkbookError(f"{output.name}: {done.count(FROZEN)} cells cannot be recalculated")
    write_values(output, changed_values(done), output)
