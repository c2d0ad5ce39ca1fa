"""One formula made ready for the engine."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass, field

from openpyxl.formula import Tokenizer
from openpyxl.formula.tokenizer import Token

from xlaxial.hosts.headless.errors import CannotEvaluate
from xlaxial.hosts.headless.prepass.arguments import tagged
from xlaxial.hosts.headless.prepass.intersection import intersect, is_range, takes_one_value
from xlaxial.hosts.headless.prepass.names import Names, is_name
from xlaxial.hosts.headless.prepass.prefixes import bare_name
from xlaxial.hosts.headless.prepass.structured import TableArea, expand
from xlaxial.hosts.headless.prepass.textformat import is_trusted

FIT = "AX__FIT"  # internal function that fits an array to its cells
SPILL = "AX__SPILL"  # internal function that notes the size of an array that spills by itself
ANCHOR = "AX__ANCHOR"  # internal function that gives the array that spills from a cell
_EXTERNAL = re.compile(r"^(?:'?[^'!\[]*\[[^\]]+\][^!\]]*|\['[^']*'\][^!]*)!")
_LONGEST = 8192
_SEARCH_MODE = 5  # place of that argument of XLOOKUP, from 0
_DEEPEST = 20  # names within names
_REPLACED = {"AGGREGATE": "AX__AGGREGATE"}  # functions that the engine has in part only, by the supplied name
_VOLATILE = frozenset(("NOW", "TODAY", "RAND", "RANDBETWEEN", "RANDARRAY"))
_REACHING = frozenset(("INDIRECT", "OFFSET"))
_GIVES_ARRAY = frozenset(
    """
    CHOOSECOLS CHOOSEROWS COLUMN DROP EXPAND FILTER FREQUENCY GROWTH HSTACK INDEX INDIRECT LET LINEST LOGEST MINVERSE
    MMULT OFFSET RANDARRAY ROW SEQUENCE SORT SORTBY TAKE TEXTSPLIT TOCOL TOROW TRANSPOSE TREND UNIQUE VSTACK WRAPCOLS
    WRAPROWS XLOOKUP
    """.split()  # noqa: SIM905 - a list of quoted names reads worse
)
_HANDLED = frozenset(("ANCHORARRAY", "SINGLE", "TEXT"))
_LOCAL = ("_xlpm.", "_xleta.")  # prefixes of names that LET and LAMBDA define


@dataclass
class Context:
    """What a formula can refer to."""

    ours: frozenset[str]  # names of our functions, upper case
    tables: dict[str, TableArea] = field(default_factory=dict)  # by lower-case name
    names: Names = field(default_factory=Names)
    extents: dict[str, tuple[int, int]] = field(default_factory=dict)  # rows and columns in use by lower-case sheet
    knows: Callable[[str], bool] = lambda _: True  # whether the engine has a function


@dataclass
class Rewritten:
    """A formula for the engine, and what it reads."""

    text: str
    calls_ours: bool = False
    references: list[str] | None = field(default_factory=list)  # ranges and cells as put in; None: as in the text
    volatile: bool = False  # gives another value at every calculation
    reaching: bool = False  # reads cells that its text does not name
    by_place: bool = False  # what was put in depends on where the formula stands
    may_spill: bool = False  # may give more than one value
    doubtful: str = ""  # why an error value of it is not to be trusted
    counts_hidden: bool = False  # depends on which rows are hidden


@dataclass
class _Frame:
    function: str  # "" at the top and for brackets
    handled: bool = False  # ours, or one of the internal ones: its text is made when it closes
    pieces: list[str] = field(default_factory=list)  # of the argument at hand
    arguments: list[str] = field(default_factory=list)  # finished ones, handled functions only
    argument: int = 0  # number of the argument at hand, from 0


class _Rewriting:
    """The state of one rewriting."""

    def __init__(self, sheet: str, row: int, column: int, context: Context, array: bool, depth: int) -> None:
        self.sheet, self.row, self.column = sheet, row, column
        self.context = context
        self.array = array
        self.depth = depth
        self.references: list[str] = []
        self.made = Rewritten("", references=self.references)
        self.stack = [_Frame("")]
        self.space = self.after_value = False  # a space is pending; the last token ended a value

    def take(self, item: Token) -> None:
        """Take one token."""
        frame = self.stack[-1]
        if item.type == Token.WSPACE:
            self.space = True
            return
        if item.value == ":":  # a range between two ends that stand apart
            self.made.reaching = True
            self.space = self.after_value = False
            frame.pieces.append(":")
            return
        opens = item.type == Token.OPERAND or item.subtype == Token.OPEN
        if self.space and self.after_value and opens:
            frame.pieces.append(" ")  # the intersection operator; other spaces mean nothing
        self.space, self.after_value = False, item.type == Token.OPERAND or item.subtype == Token.CLOSE
        if item.type == Token.FUNC and item.subtype == Token.OPEN:
            self._open(item.value, frame)
        elif item.type in (Token.FUNC, Token.PAREN) and item.subtype == Token.CLOSE:
            if len(self.stack) == 1:
                raise CannotEvaluate("the brackets do not match")
            self.stack.pop()
            self.stack[-1].pieces.append(self._closed(frame))
        elif item.type == Token.PAREN:
            frame.pieces.append("(")
            self.stack.append(_Frame("(", argument=0))
        elif item.type == Token.SEP and item.subtype == Token.ARG:
            frame.argument += 1
            if frame.handled:
                frame.arguments.append("".join(frame.pieces))
                frame.pieces.clear()
            else:
                frame.pieces.append(item.value)
        elif item.type == Token.OPERAND and item.subtype == Token.RANGE:
            frame.pieces.append(self._operand(item.value))
        else:
            self.made.may_spill |= item.type == Token.ARRAY
            frame.pieces.append(item.value)

    def _open(self, text: str, frame: _Frame) -> None:
        end, colon, rest = text.rpartition(":")
        if colon and not rest.endswith("'") and "!" not in rest:  # A1:INDEX(...
            self.made.reaching = True
            frame.pieces.append(self._resolved(end) + ":")
            text = rest
        name = bare_name(text[:-1])
        self.made.volatile |= name in _VOLATILE
        self.made.reaching |= name in _REACHING
        self.made.may_spill |= name in _GIVES_ARRAY
        self.made.counts_hidden |= name in ("SUBTOTAL", "AGGREGATE")
        if name == "CONVERT":
            self.made.doubtful = "CONVERT knows fewer units here"
        if name in self.context.ours:
            self.made.calls_ours = True
            self.stack.append(_Frame(name, handled=True))
            return
        if _EXTERNAL.match(text) and not text.startswith("[0]!"):  # [0] is the workbook itself
            raise CannotEvaluate("calls a function of another workbook")
        if name in _HANDLED:
            self.stack.append(_Frame(name, handled=True))
            return
        if not self.context.knows(name):
            raise CannotEvaluate(f"the function {name} is not available here")
        frame.pieces.append(_REPLACED.get(name, name) + "(")
        self.stack.append(_Frame(name))

    def _closed(self, frame: _Frame) -> str:
        """Text of a finished call or bracket; where it is not handled its opening has been put in."""
        inner = "".join(frame.pieces)
        if not frame.handled:
            if frame.function == "XLOOKUP" and frame.argument >= _SEARCH_MODE:
                self.made.doubtful = "XLOOKUP finds less here with a search mode"
            return inner + ")"
        arguments = [*frame.arguments, inner]
        if frame.function == "SINGLE":
            return f"({inner})" if re.fullmatch(r"[^()]+", inner) else f"{FIT}({inner},1,1)"
        if frame.function == "ANCHORARRAY":  # the engine takes an array of one cell for none
            return f"{ANCHOR}({inner},ANCHORARRAY({inner}))"
        if frame.function == "TEXT":
            if len(arguments) != 2 or not is_trusted(arguments[1]):
                raise CannotEvaluate(f"the format of TEXT is not evaluated here: {inner.strip()}"[:100])
            return f"TEXT({','.join(arguments)})"
        if len(arguments) == 1 and not inner.strip():
            return f"{frame.function}()"
        extents = self.context.extents
        return f"{frame.function}(" + ",".join(tagged(text, self.sheet, extents) for text in arguments) + ")"

    def _operand(self, value: str) -> str:
        """Text to put in for a reference."""
        marked = value.startswith("@")
        text = self._resolved(value.lstrip("@"))
        if text.startswith("("):
            return text
        self.references.append(text)
        if not is_range(text):
            return text
        self.made.may_spill |= any(frame.function == "" for frame in self.stack[-1:])
        calls = [(frame.function, frame.argument) for frame in self.stack if frame.function != "("]
        if marked or calls[-1][0] == "SINGLE" or (not self.array and takes_one_value(calls)):
            self.made.by_place = True
            return intersect(text, self.row, self.column)
        return text

    def _resolved(self, value: str) -> str:
        """Plain reference, or a formula in brackets, behind a structured reference or a name."""
        if _EXTERNAL.match(value):
            raise CannotEvaluate("refers to another workbook")
        if re.match(r"^'?[^'!\[\]]+:[^'!\[\]]+'?!", value):
            raise CannotEvaluate("refers to several sheets as a stack")
        if value.startswith(_LOCAL):
            return value
        sheet, mark, _ = value.rpartition("!")
        if mark and sheet.strip("'").replace("''", "'").lower() not in self.context.extents:
            return "#REF!"
        if "[" in value and "!" not in value:
            plain = expand(value, self.context.tables, self.sheet, self.row, self.column)
            if plain is not None:
                return plain
        if value.lower() in self.context.tables:
            return expand(f"{value}[]", self.context.tables, self.sheet, self.row, self.column) or value
        named = self.context.names.resolve(value, self.sheet)
        if named is None:
            return "#NAME?" if is_name(value) else value
        if "#REF!" in named:
            return "#REF!"
        if not named.startswith("("):
            if _EXTERNAL.match(named):
                raise CannotEvaluate("refers to another workbook")
            return named
        if self.depth >= _DEEPEST:
            raise CannotEvaluate("its names go round in a circle")
        inner = _rewritten("=" + named[1:-1], self.sheet, self.row, self.column, self.context, True, self.depth + 1)
        self.references += inner.references or ()
        self.made.volatile |= inner.volatile
        self.made.reaching |= inner.reaching
        self.made.calls_ours |= inner.calls_ours
        self.made.may_spill |= inner.may_spill
        self.made.counts_hidden |= inner.counts_hidden
        self.made.doubtful = self.made.doubtful or inner.doubtful
        return f"({inner.text[1:]})"


def rewrite(formula: str, sheet: str, row: int, column: int, context: Context, *, array: bool) -> Rewritten:
    """Rewrite a formula as stored in the cell at (sheet, row, column).

    Raises
    ------
    CannotEvaluate
        It refers to another workbook, to sheets as a stack, calls what the engine lacks, or cannot be read.
    """
    return _rewritten(formula, sheet, row, column, context, array, 0)


def _rewritten(formula: str, sheet: str, row: int, column: int, context: Context, array: bool, depth: int) -> Rewritten:
    if len(formula) > _LONGEST:
        raise CannotEvaluate("the formula is too long")
    try:
        items = Tokenizer(formula).items
    except Exception as wrong:  # noqa: BLE001 - the tokenizer raises many kinds on damaged text
        raise CannotEvaluate(f"the formula cannot be read ({wrong})") from None
    rewriting = _Rewriting(sheet, row, column, context, array, depth)
    for item in items:
        rewriting.take(item)
    if len(rewriting.stack) != 1:
        raise CannotEvaluate("the brackets do not match")
    made = rewriting.made
    made.text = "=" + "".join(rewriting.stack[0].pieces)
    return made
