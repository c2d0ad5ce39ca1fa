"""Run by a Python that knows UNO: runs procedures of a VBA module in LibreOffice's Basic, tells what they gave."""

from __future__ import annotations

import json
import sys
import time
from typing import Any

import uno  # type: ignore[import-not-found,unused-ignore]  # reason: only the office's own Python has it


def named(name: str, content: Any) -> Any:
    value = uno.createUnoStruct("com.sun.star.beans.PropertyValue")
    value.Name, value.Value = name, content
    return value


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


def contents(desktop: Any, address: str) -> dict[str, Any]:
    """Open a workbook; return the text of its modules by project, and the cells of its first sheet's columns A and B."""
    arguments = (named("Hidden", True), named("MacroExecutionMode", 0))
    document = desktop.loadComponentFromURL(address, "_blank", 0, arguments)
    try:
        libraries = document.BasicLibraries
        projects = {name: libraries.getByName(name) for name in libraries.ElementNames}
        sheet = document.Sheets.getByIndex(0)
        return {
            "modules": {p: {m: lib.getByName(m) for m in lib.ElementNames} for p, lib in projects.items()},
            "sheet": sheet.Name,
            "cells": [[sheet.getCellByPosition(x, y).String for x in range(2)] for y in range(4)],
        }
    finally:
        document.close(True)


def main() -> None:
    job = json.load(sys.stdin)
    context = connect(job["pipe"])
    desktop = context.ServiceManager.createInstanceWithContext("com.sun.star.frame.Desktop", context)
    arguments = (named("Hidden", True), named("MacroExecutionMode", 4))
    document = desktop.loadComponentFromURL("private:factory/scalc", "_blank", 0, arguments)
    try:
        document.BasicLibraries.VBACompatibilityMode = True
        library = document.BasicLibraries.getByName("Standard")
        for name, text in job["modules"].items():
            library.insertByName(name, text)
        sheet = document.Sheets.getByIndex(0)
        for place, formula in job["cells"].items():
            sheet.getCellRangeByName(place).setFormula(formula)
        provider = document.getScriptProvider()
        told = {}
        for name in job["run"]:
            address = f"vnd.sun.star.script:Standard.{name}?language=Basic&location=document"
            try:
                told[name] = str(provider.getScript(address).invoke((), (), ())[0])
            except Exception as wrong:  # noqa: BLE001 - whatever Basic raises is what the test is to see
                told[name] = f"{type(wrong).__name__}: {wrong}"
        print(json.dumps({"run": told, "book": contents(desktop, job["book"])}))
    finally:
        document.close(True)
        desktop.terminate()


main()
