"""Help texts of the worksheet functions, made from the registry."""

from __future__ import annotations

import textwrap

from xlaxial.functions.registry import Function, load
from xlaxial.tables.headings import TABLES

_WIDTH = 100


def signature(function: Function) -> str:
    """Return the call with its arguments, optional ones in brackets."""
    names = (f"[{a.name}]" if a.optional else a.name for a in function.arguments)
    return f"{function.name}({', '.join(names)})"


def listing() -> str:
    """Return one line per function."""
    width = max(map(len, load()))
    return "\n".join(f"{f.name:<{width}}  {f.summary}" for f in load().values())


def page(name: str) -> str:
    """Return everything about one function: arguments, headings taken and given, example, source."""
    function = load()[name.upper()]
    out = [signature(function), "", *_wrapped(function.summary, ""), ""]
    for argument in function.arguments:
        out += _wrapped(f"{argument.name}: {argument.help}", "  ")
    out += ["", *_wrapped(f"Returns: {function.returns}", ""), "", f"Example: {function.example}"]
    if function.words:
        out += ["", "Headings that it answers (unit of kind; other spellings):"]
        for word in function.words:
            also = f"; also {', '.join(word.aliases)}" if word.aliases else ""
            out += _wrapped(f"{word.name} ({word.dimension}{also}): {word.help}", "  ")
    for table in function.tables:
        out += ["", f"Headings of the {table} table (unit of kind; other spellings):"]
        for term in TABLES[table].terms:
            also = f"; also {', '.join(term.aliases)}" if term.aliases else ""
            out += _wrapped(f"{term.name} ({term.dimension}{also}): {term.help}", "  ")
    if function.source:
        out += ["", *_wrapped(f"Source: {function.source}", "")]
    return "\n".join(out)


def _wrapped(text: str, indent: str) -> list[str]:
    return textwrap.wrap(text, _WIDTH, initial_indent=indent, subsequent_indent=indent + "  ")
