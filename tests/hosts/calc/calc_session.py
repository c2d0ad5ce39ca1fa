"""Run by a Python that knows UNO, over a pipe to a running office: takes a job from stdin, tells what it saw."""

from __future__ import annotations

import json
import sys
import time
from typing import Any

import uno  # type: ignore[import-not-found,unused-ignore]  # reason: only the office's own Python has it


def connect(pipe: str) -> Any:
    local = uno.getComponentContext()
    resolver = local.ServiceManager.createInstanceWithContext("com.sun.star.bridge.UnoUrlResolver", local)
    end = time.monotonic() + 90
    while True:
        try:
            return resolver.resolve(f"uno:pipe,name={pipe};urp;StarOffice.ComponentContext")
        except Exception:
            if time.monotonic() > end:
                raise
            time.sleep(0.2)


def named(name: str, content: Any) -> Any:
    value = uno.createUnoStruct("com.sun.star.beans.PropertyValue")
    value.Name, value.Value = name, content
    return value


def type_into(context: Any, document: Any, cell: str, text: str) -> None:
    """Enter a text as a person types it: the program then chooses the number format."""
    helper = context.ServiceManager.createInstanceWithContext("com.sun.star.frame.DispatchHelper", context)
    frame = document.getCurrentController().getFrame()
    helper.executeDispatch(frame, ".uno:GoToCell", "", 0, (named("ToPoint", cell),))
    helper.executeDispatch(frame, ".uno:EnterString", "", 0, (named("StringName", text),))


def shown(cell: Any) -> Any:
    """A cell's value: a number, a text, or ["error", number]."""
    if cell.getError():
        return ["error", cell.getError()]
    kind = cell.getType().value
    if kind == "FORMULA":
        kind = {1: "VALUE", 2: "TEXT"}.get(cell.FormulaResultType2, kind)
    return {"VALUE": cell.getValue, "EMPTY": lambda: None}.get(kind, cell.getString)()


def step(context: Any, document: Any, order: list[Any]) -> Any:
    what, *rest = order
    if what == "recalculate":
        return document.calculateAll()
    if what == "pause":
        return document.enableAutomaticCalculation(False)
    if what == "seconds":  # a hard recalculation, in seconds
        start = time.perf_counter()
        document.calculateAll()
        return time.perf_counter() - start
    if what == "type":
        return type_into(context, document, *rest)
    sheet = document.getSheets().getByName(rest[0])
    area = sheet.getCellRangeByName(rest[1])
    if what == "set":
        cell = area.getCellByPosition(0, 0)
        return cell.setValue(rest[2]) if isinstance(rest[2], (int, float)) else cell.setString(rest[2])
    if what == "formula":
        return area.getCellByPosition(0, 0).setFormula(rest[2])
    if what == "array":
        return area.setArrayFormula(rest[2])
    if what == "read":
        place = area.getRangeAddress()
        height, width = place.EndRow - place.StartRow + 1, place.EndColumn - place.StartColumn + 1
        return [[shown(area.getCellByPosition(x, y)) for x in range(width)] for y in range(height)]
    raise ValueError(what)


def wizard(context: Any, names: list[str]) -> dict[str, Any]:
    found = context.ServiceManager.createInstanceWithContext("com.sun.star.sheet.FunctionDescriptions", context)
    out: dict[str, Any] = {}
    for n in range(found.getCount()):
        entry = {value.Name: value.Value for value in found.getByIndex(n)}
        if entry["Name"] in names:
            arguments = [[a.Name, a.Description, a.IsOptional] for a in entry["Arguments"] or ()]
            out[entry["Name"]] = {"text": entry["Description"], "category": entry["Category"], "arguments": arguments}
    return out


def main() -> None:
    job = json.load(sys.stdin)
    context = connect(job["pipe"])
    desktop = context.ServiceManager.createInstanceWithContext("com.sun.star.frame.Desktop", context)
    if job["action"] == "stop":
        desktop.terminate()
        return
    if job["action"] == "wizard":
        print(json.dumps(wizard(context, job["names"])))
        return
    document = desktop.loadComponentFromURL(
        job["book"] or "private:factory/scalc", "_blank", 0, (named("Hidden", True),)
    )
    try:
        print(json.dumps([step(context, document, order) for order in job["steps"]]))
    finally:
        document.close(True)


main()
