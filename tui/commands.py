"""The batch command: what a line typed in a shell does, and with which exit status it ends.

Only what reads the command line is imported at the top, so that help and version come at once.
"""

from __future__ import annotations

import argparse
import os
import shlex
import sys
from collections.abc import Callable, Sequence
from typing import Any, NoReturn

from cycle.atomic import new_file, trouble
from cycle.errors import CaseError, DuctwalkError, printable
from tui import crash, interrupt, shipped
from tui.output import STANDARD_INPUT, emit, load_case, near, prepare_streams, tell

PROGRAM = "ductwalk"
BAD_INPUT = 2
STANDARD_OUTPUT = "-"
LATER = ("study", "optimise", "report")
"""Commands that are planned and refused in this version."""

_CASE = "case file (TOML), or - for standard input"


class UsageError(DuctwalkError):
    """The command line cannot be understood; its text says why and what comes near."""


class _Parser(argparse.ArgumentParser):
    """A parser whose faults are one line and say which option was probably meant."""

    def __init__(self, **options: Any) -> None:
        super().__init__(allow_abbrev=False, **options)

    def error(self, message: str) -> NoReturn:
        raise UsageError(f"{self.prog}: {message}; see {self.prog} --help")

    def options(self) -> list[str]:
        """Every option of this parser."""
        return [name for action in self._actions for name in action.option_strings]


def _one_of(*names: str) -> Callable[[str], str]:
    def read(text: str) -> str:
        if text in names:
            return text
        raise argparse.ArgumentTypeError(f"{text!r} is none of {', '.join(names)}{near(text, names)}")

    return read


def _units(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--units", type=_one_of("si", "us"), default="si", metavar="si|us", help="units of the output")


def _solve_options(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("cases", nargs="+", metavar="CASE", help=_CASE)
    parser.add_argument(
        "--set", action="append", default=[], metavar="SECTION.KEY=VALUE",
        help="change an input, units allowed; takes the place of other ways to say the same; repeatable",
    )  # fmt: skip
    forms = ("text", "json", "csv", "markdown")
    parser.add_argument("--format", type=_one_of(*forms), default="text", metavar="|".join(forms), help="form of the output")
    rows = ("stations", "duct", "sensitivities")
    parser.add_argument(
        "--rows", type=_one_of(*rows), default="stations", metavar="|".join(rows),
        help="what a row of the CSV is: a station, a place along the duct, or an input and what its step gives",
    )  # fmt: skip
    parser.add_argument(
        "--sensitivities", action="store_true", help="also what one step of each input gives of the headline figures, largest first"
    )
    parser.add_argument(
        "--along", metavar="TRAJECTORY",
        help="fly the cases along a CSV file of inputs (header of keys such as flight.mach, flight.altitude [km]) and print a row a point",
    )  # fmt: skip
    _units(parser)
    parser.add_argument("--referee", action="store_true", help="recompute the states independently (slow) and show the deviation")
    parser.add_argument("-o", dest="output", metavar="FILE", help="store the walks with case, version and species-data hash")


def _check_options(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("cases", nargs="+", metavar="CASE", help=_CASE)


def _new_options(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--rig", action="store_true", help="a direct-connect rig instead of a flight engine")
    parser.add_argument("-o", dest="output", metavar="FILE", help="write a new file instead of standard output")


def _cases_options(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("name", nargs="?", metavar="NAME", help="copy this one to NAME.toml in the working folder")
    parser.add_argument("-o", dest="output", metavar="FILE", help="name of the copy, - for standard output; never overwritten")


def _schema_options(parser: argparse.ArgumentParser) -> None:
    """`schema` has no options."""


def _keys_options(parser: argparse.ArgumentParser) -> None:
    """`keys` has no options."""


def _explain_options(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("quantity", metavar="QUANTITY", help="long name, symbol or label of an output or input")
    parser.add_argument("case", nargs="?", metavar="CASE", help="case whose numbers go into the equation")


def _fix_options(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("case", metavar="CASE", help=_CASE)
    parser.add_argument("-o", dest="output", metavar="FILE", help="write a new file instead of standard output")


def _compare_options(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("cases", nargs="+", metavar="CASE", help="case files or stored walks; the first is the reference")
    _units(parser)


def _solve(options: argparse.Namespace) -> int:
    if options.along is not None:
        from tui.along import run
    else:
        from tui.solve import run
    return run(options)


def _check(options: argparse.Namespace) -> int:
    status = 0
    for name in options.cases:
        try:
            load_case(name)
        except CaseError as error:
            tell(str(error))
            status = BAD_INPUT
        else:
            emit(f"{printable(name, None)}: ok\n")
    return status


def _new(options: argparse.Namespace) -> int:
    from cycle.case import template

    _write_new(template("entry" if options.rig else "flight"), options.output)
    return 0


def _write_new(text: str, path: str | None) -> None:
    """A case to a file that is not there yet, or to standard output."""
    if path is None or path == STANDARD_OUTPUT:
        emit(text)
        return
    try:
        new_file(path, text.encode("utf-8"))
    except (OSError, ValueError) as error:
        raise trouble(path, "written", error) from error
    tell(f"written: {path}")


def _cases(options: argparse.Namespace) -> int:
    if options.name is None and options.output is not None:
        raise UsageError(f"{PROGRAM} cases: -o needs the NAME of a case; see {PROGRAM} cases --help")
    if options.name is None:
        emit(shipped.listing())
        return 0
    text = shipped.content(options.name).decode("utf-8")
    own = os.path.basename(shipped.path_of(options.name))
    _write_new(text, own if options.output is None else options.output)
    return 0


def _fix(options: argparse.Namespace) -> int:
    from cycle.fixing import fixed_case
    from tui.solve import exit_status, outcome

    found = outcome(options.case, {})
    if found.walk is None or found.walk.status != "solved":
        return exit_status(found)
    fixed = fixed_case(found.walk)
    if fixed is found.walk.case:
        tell(f"{options.case}: nothing to fix, the case is a fixed flowpath already")
    _write_new(fixed.text, options.output)
    return exit_status(found)


def _schema(options: argparse.Namespace) -> int:
    from cycle.case import json_schema
    from cycle.record import dumps

    emit(dumps(json_schema()))
    return 0


def _keys(options: argparse.Namespace) -> int:
    from tui.keymap import example

    emit(example())
    return 0


def _explain(options: argparse.Namespace) -> int:
    from tui.explaining import run

    return run(options)


def _compare(options: argparse.Namespace) -> int:
    from tui.comparing import run

    return run(options)


Options = Callable[[argparse.ArgumentParser], None]
COMMANDS: dict[str, tuple[str, Options, Callable[[argparse.Namespace], int]]] = {
    "solve": ("solve cases and print their walks", _solve_options, _solve),
    "compare": ("set cases or stored walks side by side", _compare_options, _compare),
    "explain": ("meaning, equation and source of a quantity, with a case's numbers", _explain_options, _explain),
    "fix-geometry": ("print the fixed flowpath that a sized case amounts to, as a new case", _fix_options, _fix),
    "check": ("validate cases without solving them", _check_options, _check),
    "new": ("print a new case with every key explained", _new_options, _new),
    "cases": ("list the shipped cases, or copy one to a file of yours", _cases_options, _cases),
    "schema": ("print the JSON Schema of case files", _schema_options, _schema),
    "keys": ("print the keys of the screen as a keys.toml to start from", _keys_options, _keys),
}
"""Command -> its line of help, its options, what it does."""

_EPILOG = """\
exit status: 0 solved; 1 internal error; 2 bad input; 3 no solution;
4 audit failed; for several cases the highest."""


def parser() -> _Parser:
    """The parser of the whole command line."""
    top = _Parser(
        prog=PROGRAM,
        usage=f"{PROGRAM} [CASE]\n       {PROGRAM} COMMAND ...",
        description="Ramjet and scramjet cycle analysis. With a CASE or nothing the screen opens.",
        epilog=_EPILOG,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    top.add_argument("--version", action="store_true", help="print the version")
    commands = top.add_subparsers(dest="command", metavar="COMMAND", title="commands", prog=PROGRAM, parser_class=_Parser)
    for name, (line, options, _) in COMMANDS.items():
        options(commands.add_parser(name, help=line, description=line[0].upper() + line[1:] + "."))
    return top


def _version() -> int:
    import cycle

    emit(f"{PROGRAM} {cycle.__version__}\n")
    return 0


def _parsed(arguments: Sequence[str]) -> int:
    top = parser()
    options, extra = top.parse_known_args(arguments)
    if extra:
        known = _options_of(top, options.command)
        raise UsageError(f"{PROGRAM}: {extra[0]!r} is not understood{near(extra[0].split('=')[0], known)}; see {PROGRAM} --help")
    if options.version:
        return _version()
    return COMMANDS[options.command][2](options)


def _options_of(top: _Parser, command: str | None) -> list[str]:
    if command is None:
        return top.options()
    own = _Parser(prog=command)
    COMMANDS[command][1](own)
    return own.options()


def _screen(name: str | None) -> int:
    """Open the screen on a case, or print the walk where there is no terminal to draw on."""
    path = name or shipped.path_of(shipped.FIRST)
    if _has_terminal() and path != STANDARD_INPUT:
        from tui.app import run

        interrupt.release()
        return run(path)
    status = _parsed(["solve", path])
    if status != BAD_INPUT and path != STANDARD_INPUT:
        line = PROGRAM if name is None else f"{PROGRAM} {shlex.quote(path)}"
        tell(f"no screen here; to open it run '{line}' in a terminal (TERM other than dumb)")
    return status


def _has_terminal() -> bool:
    both = all(stream is not None and stream.isatty() for stream in (sys.stdin, sys.stdout))
    return both and os.environ.get("TERM", "") not in ("dumb", "unknown")


def _dispatch(arguments: Sequence[str]) -> int:
    first = arguments[0] if arguments else None
    if first in LATER:
        raise UsageError(f"{PROGRAM}: {first} is not in this version")
    if first in COMMANDS or (first is not None and first.startswith("-") and first != STANDARD_INPUT):
        return _parsed(arguments)
    if first is None or (len(arguments) == 1 and _is_path(first)):
        return _screen(first)
    if _is_path(first):
        raise UsageError(f"{PROGRAM}: the screen takes one case and no options; for options use {PROGRAM} solve {first} ...")
    if first in shipped.names():
        raise UsageError(f"{PROGRAM}: {first} is a shipped case; {PROGRAM} cases {first} copies it to {first}.toml")
    raise UsageError(f"{PROGRAM}: no command or file is called {first!r}{near(first, [*COMMANDS, *LATER])}; see {PROGRAM} --help")


def _is_path(name: str) -> bool:
    return name == STANDARD_INPUT or name.endswith(".toml") or os.sep in name or os.path.exists(name)


def main(argv: Sequence[str] | None = None) -> int:
    """Run the command line.

    argv: the arguments, those of the process where None. Returns the exit status: 0 solved, 2 bad input, 3 no solution,
    4 audit failed, 130 interrupted. A defect raises; as a process it leaves a crash file, one line, and status 1.
    """
    if argv is None:
        crash.install()
    prepare_streams()
    try:
        return _dispatch(sys.argv[1:] if argv is None else argv)
    except DuctwalkError as error:
        tell(str(error))
        return BAD_INPUT
    except KeyboardInterrupt:
        tell("interrupted")
        return interrupt.STATUS


if __name__ == "__main__":
    sys.exit(main())
