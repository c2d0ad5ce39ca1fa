"""The command line; each command imports what it needs when it runs."""

from __future__ import annotations

import argparse
import sys
from collections.abc import Sequence
from pathlib import Path


def main(arguments: Sequence[str] | None = None) -> int:
    """Run a command; return its exit code."""
    options = _parser().parse_args(arguments)
    code: int = options.run(options)
    return code


def _parser() -> argparse.ArgumentParser:
    from xlaxial import __version__

    parser = argparse.ArgumentParser(prog="xlaxial", description="Schedules of restrained axial members in workbooks.")
    parser.add_argument("--version", action="version", version=f"xlaxial {__version__}")
    commands = parser.add_subparsers(required=True, metavar="COMMAND")

    recalc = commands.add_parser(
        "recalc",
        help="recalculate a workbook and write it back, touching only what changed",
        epilog="exit 0: all recalculated; 2: could not run; 3: some cells keep their stored values",
    )
    recalc.add_argument("book", type=Path, metavar="BOOK")
    where = recalc.add_mutually_exclusive_group()
    where.add_argument(
        "--output", type=Path, metavar="OUT", help="where to write; BOOK.recalculated.xlsx where left out"
    )
    where.add_argument(
        "--in-place", action="store_true", help="write to the workbook itself; BOOK.backup.xlsx is kept beside it"
    )
    recalc.add_argument("--no-backup", action="store_true", help="with --in-place: keep no backup")
    recalc.set_defaults(run=_recalc)

    verify = commands.add_parser(
        "verify",
        help="recompute and compare with the stored values",
        epilog="exit 0: all hold; 1: some differ; 2: could not run; 3: what was recomputed holds, some could not be",
    )
    verify.add_argument("books", type=Path, nargs="+", metavar="BOOK")
    verify.add_argument("--rtol", type=float, default=1e-9, help="relative difference that is still the same (1e-9)")
    verify.add_argument("--report", type=Path, metavar="FILE", help="write a report: FILE.json, .xml (JUnit) or .html")
    verify.set_defaults(run=_verify)

    functions = commands.add_parser("functions", help="list the worksheet functions, or show one in full")
    functions.add_argument("name", nargs="?")
    functions.set_defaults(run=_functions)

    calc = commands.add_parser("calc", help="the add-in of LibreOffice Calc: install, remove or check it")
    calc.add_argument("action", choices=("install", "remove", "check"))
    calc.add_argument("--profile", type=Path, help="folder of the office's user profile; the usual one where left out")
    calc.set_defaults(run=_calc)

    excel = commands.add_parser("excel", help="the add-in of Excel for Windows: install, remove or check it")
    excel.add_argument("action", choices=("install", "remove", "check"))
    excel.add_argument("--to", type=Path, help="with install: write the add-in's file here instead")
    excel.add_argument("--python", help="with install: the Python that answers Excel; this one where left out")
    excel.set_defaults(run=_excel)

    links = commands.add_parser("links", help="list, mend or remove the add-in's path in a workbook's formulas")
    links.add_argument("book", type=Path)
    how = links.add_mutually_exclusive_group()
    how.add_argument("--plain", action="store_true", help="leave plain function names")
    how.add_argument("--to", metavar="ADDIN", help="point the formulas at this add-in")
    links.set_defaults(run=_links)

    demo = commands.add_parser("demo", help="write the demo schedule of quay tie rods")
    demo.add_argument("output", type=Path)
    demo.set_defaults(run=_demo)
    return parser


def _recalc(options: argparse.Namespace) -> int:
    from xlaxial.hosts.headless.commands import recalc

    return recalc(options.book, options.output, options.in_place, not options.no_backup)


def _verify(options: argparse.Namespace) -> int:
    from xlaxial.hosts.headless.commands import verify

    return verify(options.books, options.rtol, options.report)


def _functions(options: argparse.Namespace) -> int:
    from xlaxial.functions.help import listing, page
    from xlaxial.functions.registry import load

    if options.name is None:
        print(listing())
        return 0
    if options.name.upper() not in load():
        print(f"no function {options.name}; known are {', '.join(load())}", file=sys.stderr)
        return 2
    print(page(options.name))
    return 0


def _calc(options: argparse.Namespace) -> int:
    from xlaxial.hosts.calc import commands

    actions = {"install": commands.install, "remove": commands.remove, "check": commands.check}
    return actions[options.action](options.profile)


def _excel(options: argparse.Namespace) -> int:
    from xlaxial.hosts.excel import commands

    if options.action == "install":
        return commands.install(options.to, options.python)
    return commands.remove() if options.action == "remove" else commands.check()


def _links(options: argparse.Namespace) -> int:
    from xlaxial.hosts.excel import commands

    return commands.links(options.book, options.plain, options.to)


def _demo(options: argparse.Namespace) -> int:
    from xlaxial.demos.quay import write

    write(options.output)
    print(f"written to {options.output.name}")
    return 0
