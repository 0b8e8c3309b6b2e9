"""The words of the command line and what they mean.

Imports nothing heavy: `balance --help` must be instant.
"""

from __future__ import annotations

import argparse
import difflib
import textwrap
from collections.abc import Sequence
from typing import NoReturn

from balance import __version__
from balance.cli.outcome import UsageError

ABOUT = """\
Balance assist for a legged machine that stands on two point feet: from a
machine file and a design file to plant, gains, margins, recovery trials and a
verdict.

The main job:   balance check designs/NAME.yaml"""

CODES = """\
exit codes:
  0    every requirement is met
  1    a requirement is not met, or no stabiliser can act about a contact line
  2    the input is wrong (a file or the command line); every error is listed
  3    something else failed
  130  interrupted with Ctrl-C"""

COMMANDS = {
    "check": "build, design, try and judge one design file, and write its report",
    "plant": "what each contact line sees: mass, height, inertia, pole, what the stabilisers can do",
    "gains": "the controller's gains with their margins, for each stance",
    "firmware": "write the law as portable C, with the proof that it does what was designed",
    "recover": "run the design file's recovery trials",
    "size": "the smallest wheels or flywheels that do it, before anything is bought",
    "new": "write a commented machine and design file to start from",
    "schema": "print the JSON Schema of machine or design files, for editors",
}


class Parser(argparse.ArgumentParser):
    """An argument parser that raises UsageError instead of printing and leaving."""

    def error(self, message: str) -> NoReturn:
        """Turn argparse's complaint into a UsageError."""
        raise UsageError(message, f"see `{self.prog} --help`")


def build_parser() -> Parser:
    """Return the parser of every command."""
    parser = Parser(
        prog="balance",
        description=ABOUT,
        epilog=CODES,
        formatter_class=argparse.RawDescriptionHelpFormatter,
        allow_abbrev=False,
    )
    parser.add_argument("--version", action="version", version=f"balance-assist {__version__}")
    commands = parser.add_subparsers(dest="command", metavar="COMMAND", required=True)
    shared = _shared()
    for name, says in COMMANDS.items():
        made = commands.add_parser(
            name,
            help=says,
            description=textwrap.fill(f"{says[0].upper()}{says[1:]}.", 78),
            epilog=CODES,
            parents=[shared],
            allow_abbrev=False,
            formatter_class=argparse.RawDescriptionHelpFormatter,
        )
        _own_words(name, made)
    return parser


def _shared() -> Parser:
    shared = Parser(add_help=False)
    shared.add_argument("--json", action="store_true", help="print one JSON object instead of text")
    shared.add_argument("--progress", action="store_true", help="say each step on the error stream, even when it is a file")
    shared.add_argument("--debug", action="store_true", help="show the whole traceback when something fails")
    return shared


def _own_words(name: str, parser: argparse.ArgumentParser) -> None:
    if name == "new":
        parser.add_argument("name", metavar="NAME", help="letters, digits and hyphens; becomes the name of both files")
        parser.add_argument(
            "--in",
            dest="folder",
            metavar="FOLDER",
            default=".",
            help="folder that gets plants/NAME.yaml and designs/NAME.yaml (default: this one)",
        )
    elif name == "schema":
        parser.add_argument("which", metavar="machine|design", choices=("machine", "design"), help="which kind of file")
    else:
        what = "a machine file or a design file" if name == "plant" else "a design file"
        parser.add_argument("file", metavar="FILE", help=what)
        parser.add_argument(
            "--stance",
            metavar="NAME",
            default="",
            help="a stance's name, or every (default: as the file says)",
        )
    if name == "plant":
        drawing = "draw the machine to scale into a .svg or .png file"
        parser.add_argument("--figure", metavar="PATH", default="", help=drawing)
    if name == "firmware":
        parser.add_argument(
            "--out",
            metavar="FOLDER",
            default="",
            help="folder to write into (default: `firmware` in a folder named like the design file)",
        )
    if name == "recover":
        compiled = "run the trials on the written C, compiled here, in place of the simulator's own law"
        parser.add_argument("--with-firmware", action="store_true", help=compiled)
        parser.add_argument("--fixed-point", action="store_true", help="with --with-firmware: its fixed-point variant")
    if name in ("check", "recover"):
        twice = "run every trial once more in steps a quarter as long, and say what that changes"
        parser.add_argument("--audit", action="store_true", help=twice)
    if name == "size":
        for word, metavar, says in (("apply", "PATH", "write the lightest one as a new machine file"),
                                    ("family", "NAME", "with --apply: the lightest of this family"),
                                    ("figure", "PATH", "draw mass against push and power into a .svg or .png file")):
            parser.add_argument(f"--{word}", metavar=metavar, default="", help=says)
        parser.add_argument("--workers", metavar="N", type=int, default=2, help="processes (default: 2), the same answer")
        parser.add_argument("--again", action="store_true", help="forget what an earlier search has confirmed")
    if name in ("check", "size"):
        parser.add_argument(
            "--out",
            metavar="FOLDER",
            default="",
            help="folder of the report (default: a folder named like the design file, beside it)",
        )


def read_words(words: Sequence[str]) -> argparse.Namespace:
    """Read the words after `balance`; UsageError when they make no sense, SystemExit(0) after `--help`."""
    first = next((w for w in words if not w.startswith("-")), "")
    if first and first not in COMMANDS:
        near = difflib.get_close_matches(first, COMMANDS, 1)
        raise UsageError(
            first,
            ", ".join(COMMANDS),
            f"did you mean `balance {near[0]}`?" if near else "see `balance --help`",
        )
    asked = build_parser().parse_args(list(words))
    if getattr(asked, "fixed_point", False) and not asked.with_firmware:
        raise UsageError("--fixed-point alone", "--with-firmware --fixed-point", "it chooses the firmware's variant")
    return asked
