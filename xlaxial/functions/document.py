"""Writes the table of functions into the README, from the registry: ``python -m xlaxial.functions.document README.md``."""

from __future__ import annotations

import sys
from pathlib import Path

from xlaxial.functions.help import signature
from xlaxial.functions.registry import load

START, END = "<!-- functions -->", "<!-- end functions -->"


def function_table() -> str:
    """Return the table of functions as Markdown."""
    lines = ["| function | gives |", "| --- | --- |"]
    for function in load().values():
        lines.append(f"| `{signature(function)}` | {function.summary} |")
    return "\n".join(lines)


def with_table(text: str) -> str:
    """Return a document with the table between its two marks."""
    before, _, rest = text.partition(START)
    _, _, after = rest.partition(END)
    return f"{before}{START}\n\n{function_table()}\n\n{END}{after}"


if __name__ == "__main__":
    document = Path(sys.argv[1])
    document.write_text(with_table(document.read_text(encoding="utf-8")), encoding="utf-8")
