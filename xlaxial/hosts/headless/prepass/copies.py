"""Formulas that are copies of each other: once one needs no rewriting, the others need none and are not tokenised."""

from __future__ import annotations

import re

from xlaxial.hosts.headless.prepass.rewrite import Context, Rewritten, rewrite

_CELL = r"\$?[A-Z]{1,3}\$?[1-9]\d{0,6}"
_PART = re.compile(
    r'"[^"]*"'  # text, passed over
    r"|(?<![\w.$\]])((?:'(?:[^']|'')+'!|[^\W\d][\w.]*!)?)" + _CELL + r"(:" + _CELL + r")?(?![\w(.!:#\[])"
)


class Copies:
    """Rewrites formulas, remembering which patterns pass as they are."""

    def __init__(self, context: Context) -> None:
        self._context = context
        self._passed: dict[tuple[str, str, bool], Rewritten] = {}

    def rewrite(self, formula: str, sheet: str, row: int, column: int, *, array: bool) -> Rewritten:
        """Rewrite a formula; see `xlaxial.hosts.headless.prepass.rewrite.rewrite`, which says what is raised."""
        if "[" in formula or "@" in formula or "{" in formula:
            return rewrite(formula, sheet, row, column, self._context, array=array)
        pattern = sheet, _PART.sub(_blanked, formula), array
        model = self._passed.get(pattern)
        if model is not None:
            return Rewritten(
                formula, model.calls_ours, None, model.volatile, model.reaching, False, model.may_spill, model.doubtful,
                model.counts_hidden,
            )  # fmt: skip
        made = rewrite(formula, sheet, row, column, self._context, array=array)
        if made.text == formula and not made.by_place:
            self._passed[pattern] = made
        return made


def _blanked(found: re.Match[str]) -> str:
    if found[0].startswith('"'):
        return found[0]
    return f"{found[1]}?{':?' if found[2] else ''}"


def references(made: Rewritten) -> list[str]:
    """Return what a formula reads: operands that are ranges or cells."""
    if made.references is not None:
        return made.references
    return [found[0] for found in _PART.finditer(made.text) if not found[0].startswith('"')]
