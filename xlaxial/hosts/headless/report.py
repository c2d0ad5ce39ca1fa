"""What verify found, for people and for pipelines."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any
from xml.etree import ElementTree

from xlaxial.caution import CAUTION
from xlaxial.hosts.headless.errors import WorkbookError
from xlaxial.hosts.headless.recalculate import DIFFERENT, FROZEN, NOT_STORED, SAME, Recalculation, Result

STATES = (SAME, DIFFERENT, NOT_STORED, FROZEN)


def shown(value: Any) -> str:
    """Return a cell's value as a person reads it."""
    if value is None:
        return "blank"
    if isinstance(value, bool):
        return str(value).upper()
    if isinstance(value, float):
        return f"{value:.10g}"
    return repr(value) if isinstance(value, str) else str(value)


def change(result: Result) -> str:
    """Return the relative change of a number, empty for anything else."""
    numbers = all(isinstance(v, (int, float)) and not isinstance(v, bool) for v in (result.stored, result.new))
    if not numbers or not result.stored:
        return ""
    return f"{(result.new - result.stored) / abs(result.stored):+.6%}"


def sheet_counts(done: Recalculation) -> dict[str, dict[str, int]]:
    """Return how many cells of each sheet are in each state."""
    counts = {sheet.name: dict.fromkeys(STATES, 0) for sheet in done.book.sheets}
    for result in done.results:
        counts[result.sheet][result.state] += 1
    return {name: states for name, states in counts.items() if any(states.values())}


def lines(done: Recalculation, most: int = 50) -> list[str]:
    """Return the summary of a workbook as lines of text; at most `most` cells of each kind are listed."""
    out = []
    for name, states in sheet_counts(done).items():
        out.append(f"{name}: " + ", ".join(f"{count} {state}" for state, count in states.items() if count))
    for state in (DIFFERENT, NOT_STORED, FROZEN):
        found = [result for result in done.results if result.state == state]
        for result in found[:most]:
            place = f"  {result.sheet}!{result.cell}: "
            if state == FROZEN:
                out.append(f"{place}not recalculated, {result.reason}: {result.formula[:120]}")
                continue
            relative = change(result)
            text = f"{place}stored {shown(result.stored)}, now {shown(result.new)}"
            out.append(text + (f" ({relative})" if relative else "") + f": {result.formula[:120]}")
        if len(found) > most:
            out.append(f"  and {len(found) - most} more {state}")
    return out or ["no formulas"]


def write_report(path: Path, done: list[Recalculation], failed: dict[str, str]) -> None:
    """Write a report as .json, .xml (JUnit) or .html.

    Raises
    ------
    WorkbookError
        The ending is another one, or the file cannot be written.
    """
    makers = {".json": _json, ".xml": _junit, ".html": _html}
    maker = makers.get(path.suffix.lower())
    if maker is None:
        raise WorkbookError(f"{path.name}: a report ends in .json, .xml or .html")
    try:
        path.write_text(maker(done, failed), encoding="utf-8")
    except OSError as wrong:
        raise WorkbookError(f"{path}: cannot be written ({wrong.strerror})") from None


def _json(done: list[Recalculation], failed: dict[str, str]) -> str:
    books = [
        {
            "workbook": item.path.name,
            "sheets": sheet_counts(item),
            "cells": [
                {
                    "sheet": r.sheet,
                    "cell": r.cell,
                    "state": r.state,
                    "stored": _plain(r.stored),
                    "new": _plain(r.new),
                    "change": change(r) or None,
                    "formula": r.formula,
                    "reason": r.reason or None,
                }
                for r in item.results
                if r.state != SAME
            ],
        }
        for item in done
    ]
    return json.dumps({"caution": CAUTION, "workbooks": books, "could not run": failed}, indent=1, ensure_ascii=False)


def _plain(value: Any) -> Any:
    return value if value is None or isinstance(value, (bool, int, float, str)) else str(value)


def _junit(done: list[Recalculation], failed: dict[str, str]) -> str:
    root = ElementTree.Element("testsuites", name="xlaxial verify")
    for item in done:
        suite = ElementTree.SubElement(root, "testsuite", name=item.path.name)
        for name, states in sheet_counts(item).items():
            case = ElementTree.SubElement(suite, "testcase", classname=item.path.name, name=name)
            wrong = [r for r in item.results if r.sheet == name and r.state in (DIFFERENT, NOT_STORED)]
            if wrong:
                text = "\n".join(f"{r.cell}: stored {shown(r.stored)}, now {shown(r.new)} {change(r)}" for r in wrong)
                ElementTree.SubElement(case, "failure", message=f"{len(wrong)} cells differ").text = text
            elif states[FROZEN]:
                ElementTree.SubElement(case, "skipped", message=f"{states[FROZEN]} cells not recalculated")
    for name, why in failed.items():
        suite = ElementTree.SubElement(root, "testsuite", name=name)
        case = ElementTree.SubElement(suite, "testcase", classname=name, name="open")
        ElementTree.SubElement(case, "error", message=why)
    return ElementTree.tostring(root, encoding="unicode", xml_declaration=True)


_STYLE = (
    "body{font:11pt sans-serif;margin:2em;color:#000}table{border-collapse:collapse}"
    "td,th{border:1px solid #666;padding:.2em .5em;text-align:left}td.n{text-align:right}"
    "footer{border-top:1px solid #000;margin-top:2em;font-size:9pt}"
)


def _html(done: list[Recalculation], failed: dict[str, str]) -> str:
    root = ElementTree.Element("html", lang="en")
    head = ElementTree.SubElement(root, "head")
    ElementTree.SubElement(head, "meta", charset="utf-8")
    ElementTree.SubElement(head, "title").text = "xlaxial verify"
    ElementTree.SubElement(head, "style").text = _STYLE
    body = ElementTree.SubElement(root, "body")
    ElementTree.SubElement(body, "h1").text = "Verification of stored values"
    for item in done:
        ElementTree.SubElement(body, "h2").text = item.path.name
        rows = [[name, *(str(states[s]) for s in STATES)] for name, states in sheet_counts(item).items()]
        _table(body, ["Sheet", *STATES], rows)
        listed = [r for r in item.results if r.state != SAME]
        if listed:
            cells = [
                [f"{r.sheet}!{r.cell}", r.state, shown(r.stored), shown(r.new), change(r), r.reason, r.formula]
                for r in listed
            ]
            _table(body, ["Cell", "State", "Stored", "Now", "Change", "Reason", "Formula"], cells)
    for name, why in failed.items():
        ElementTree.SubElement(body, "p").text = f"{name}: {why}"
    ElementTree.SubElement(ElementTree.SubElement(body, "footer"), "p").text = CAUTION
    return "<!DOCTYPE html>\n" + ElementTree.tostring(root, encoding="unicode", method="html")


def _table(parent: ElementTree.Element, headings: list[str], rows: list[list[str]]) -> None:
    table = ElementTree.SubElement(parent, "table")
    for tag, cells in [("th", headings), *(("td", row) for row in rows)]:
        line = ElementTree.SubElement(table, "tr")
        for cell in cells:
            ElementTree.SubElement(line, tag).text = cell
