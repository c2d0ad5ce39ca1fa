"""One formula made ready for the engine."""

from __future__ import annotations

import re
from dataclasses import dataclass, field

from openpyxl.formula import Tokenizer
from openpyxl.formula.tokenizer import Token

from xlaxial.hosts.headless.errors import CannotEvaluate
from xlaxial.hosts.headless.prepass.arguments import tagged
from xlaxial.hosts.headless.prepass.intersection import ONE_VALUE, intersect
from xlaxial.hosts.headless.prepass.names import Names
from xlaxial.hosts.headless.prepass.prefixes import bare_name
from xlaxial.hosts.headless.prepass.structured import TableArea, expand

FIT = "AX__FIT"  # internal function that fits an array to its cells
_EXTERNAL = re.compile(r"^'?[^'!]*\[\d+\]|^\[\d+\]")
VOLATILE = frozenset({"NOW", "TODAY", "RAND", "RANDBETWEEN", "RANDARRAY"})
_LONGEST = 8192


@dataclass
class Context:
    """What a formula can refer to."""

    ours: frozenset[str]  # names of our functions, upper case
    tables: dict[str, TableArea] = field(default_factory=dict)  # by lower-case name
    names: Names = field(default_factory=Names)
    extents: dict[str, tuple[int, int]] = field(default_factory=dict)  # rows and columns in use by lower-case sheet


@dataclass
class Rewritten:
    """A formula for the engine, and what it reads."""

    text: str
    calls_ours: bool
    references: list[str]  # operands that are ranges or cells, as put in


@dataclass
class _Frame:
    function: str  # "" at the top, and in brackets the function around them
    ours: bool
    pieces: list[str] = field(default_factory=list)  # of the argument at hand
    arguments: list[str] = field(default_factory=list)  # finished ones, ours only


def rewrite(formula: str, sheet: str, row: int, column: int, context: Context, *, array: bool) -> Rewritten:
    """Rewrite a formula as stored in the cell at (sheet, row, column).

    Raises
    ------
    CannotEvaluate
        It refers to another workbook, to sheets as a stack, or cannot be read.
    """
    if len(formula) > _LONGEST:
        raise CannotEvaluate("the formula is too long")
    try:
        items = Tokenizer(formula).items
    except Exception as wrong:  # noqa: BLE001 - the tokenizer raises many kinds on damaged text
        raise CannotEvaluate(f"the formula cannot be read ({wrong})") from None
    stack, calls_ours, references = [_Frame("", False)], False, []
    for item in items:
        frame = stack[-1]
        if item.type == Token.FUNC and item.subtype == Token.OPEN:
            name = bare_name(item.value[:-1])
            if name in context.ours:
                calls_ours = True
                stack.append(_Frame(name, True))
            else:
                if _EXTERNAL.match(item.value):
                    raise CannotEvaluate("a function of another workbook")
                if name in VOLATILE:
                    raise CannotEvaluate(f"{name} changes at every recalculation")
                frame.pieces.append(item.value.lstrip("@"))
                stack.append(_Frame(name, False))
        elif item.type in (Token.FUNC, Token.PAREN) and item.subtype == Token.CLOSE:
            if len(stack) == 1:
                raise CannotEvaluate("the brackets do not match")
            stack.pop()
            stack[-1].pieces.append(_closed(frame, sheet, context))
        elif item.type == Token.PAREN:
            frame.pieces.append("(")
            stack.append(_Frame(frame.function, False))
        elif item.type == Token.SEP and item.subtype == Token.ARG and frame.ours:
            frame.arguments.append("".join(frame.pieces))
            frame.pieces.clear()
        elif item.type == Token.OPERAND and item.subtype == Token.RANGE:
            text = _operand(item.value, sheet, row, column, context)
            references.append(text)
            if not array and (frame.function == "" or frame.function in ONE_VALUE):
                text = intersect(text, row, column)
            frame.pieces.append(text)
        else:
            frame.pieces.append(item.value)
    if len(stack) != 1:
        raise CannotEvaluate("the brackets do not match")
    return Rewritten("=" + "".join(stack[0].pieces), calls_ours, references)


def _closed(frame: _Frame, sheet: str, context: Context) -> str:
    """Text of a finished call or bracket, which its opening has begun."""
    if not frame.ours:
        return "".join(frame.pieces) + ")"
    arguments = [*frame.arguments, "".join(frame.pieces)]
    if len(arguments) == 1 and not arguments[0].strip():
        return f"{frame.function}()"
    return f"{frame.function}(" + ",".join(tagged(argument, sheet, context.extents) for argument in arguments) + ")"


def _operand(value: str, sheet: str, row: int, column: int, context: Context) -> str:
    """Text to put in for a reference."""
    if _EXTERNAL.match(value):
        raise CannotEvaluate("refers to another workbook")
    if re.match(r"^'?[^'!\[\]]+:[^'!\[\]]+'?!", value):
        raise CannotEvaluate("refers to several sheets as a stack")
    if "[" in value and "!" not in value:
        plain = expand(value, context.tables, sheet, row, column)
        if plain is not None:
            return plain
    named = context.names.resolve(value, sheet)
    if named is not None:
        if "#REF!" in named:
            return "#REF!"
        if re.search(r"\[\d+\]", named):
            raise CannotEvaluate("refers to another workbook")
        if named.startswith("("):  # a formula behind a name: its own names and references are resolved as well
            inner = rewrite("=" + named[1:-1], sheet, row, column, context, array=True)
            return f"({inner.text[1:]})"
        return named
    return value.lstrip("@")
