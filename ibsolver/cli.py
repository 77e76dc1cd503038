"""Parser and dispatch: reads the command line, loads the chosen verb's module and no other."""

from __future__ import annotations

import argparse
import difflib
import importlib
import json
import os
import sys
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any, NoReturn

from ibsolver._version import __version__
from ibsolver.errors import IbsolverError, UsageError


@dataclass(frozen=True)
class Verb:
    """A command: its module in `ibsolver.commands` and one line of what it does."""

    name: str
    module: str
    does: str


VERBS = (
    Verb("new", "new", "write a commented starter case"),
    Verb("check", "check", "read a case and tell what a run would be, before any run"),
    Verb("run", "run", "march a case to the end of its travel"),
    Verb("status", "status", "state, progress and time left of a run"),
    Verb("resume", "resume", "go on with a run from its last checkpoint"),
    Verb("forces", "forces", "loads against time: CSV, plot, means, peaks, spectrum"),
    Verb("picture", "picture", "vorticity stills at chosen travels"),
    Verb("doctor", "doctor", "is this machine set up to run overnight?"),
)

_FIRST_STEPS = """\
first steps:
  ibsolver new plate-with-flap --out plate.toml
  ibsolver check plate.toml
  ibsolver run plate.toml
"""


class _Parser(argparse.ArgumentParser):
    """A parser whose faults are `UsageError`s, with the nearest verb suggested."""

    def error(self, message: str) -> NoReturn:
        raise UsageError(f"{message}. See `{self.prog} --help`.")


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command line and return the exit status (see the README)."""
    words = list(sys.argv[1:] if arguments is None else arguments)
    try:
        return _dispatch(words)
    except IbsolverError as error:
        _tell(f"ibsolver: {error}")
        return error.exit_status
    except KeyboardInterrupt:
        _tell("ibsolver: interrupted.")
        return 7
    except BrokenPipeError:
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return 0
    except SystemExit as leaving:  # --help and --version
        return int(leaving.code or 0)
    except Exception as error:
        if os.environ.get("IBSOLVER_TRACEBACK"):
            raise
        _tell(
            f"ibsolver: a fault of ours, not of your case: {type(error).__name__}: {error}. "
            "Set IBSOLVER_TRACEBACK=1 to see where, and please report it."
        )
        return 1


def _tell(text: str) -> None:
    try:
        print(text, file=sys.stderr)
    except OSError:
        pass


def _dispatch(words: list[str]) -> int:
    if not words or words[0].startswith("-"):
        parser = _top_parser()
        parser.parse_args(words)
        parser.print_help()
        return 0 if words else 2
    verb = _verb(words[0])
    module = importlib.import_module(f"ibsolver.commands.{verb.module}")
    parser = _verb_parser(verb, module)
    options = parser.parse_args(words[1:])
    result = module.execute(options)
    if options.json:
        print(json.dumps(result, indent=1))
    sys.stdout.flush()
    return 0


def _verb(word: str) -> Verb:
    for verb in VERBS:
        if verb.name == word:
            return verb
    names = [verb.name for verb in VERBS]
    near = difflib.get_close_matches(word, names, 1)
    hint = f"Did you mean {near[0]!r}?" if near else f"There are: {', '.join(names)}."
    raise UsageError(f"{word!r} is not a command. {hint}")


def _top_parser() -> argparse.ArgumentParser:
    width = max(len(verb.name) for verb in VERBS)
    table = "\n".join(f"  {verb.name:<{width}}  {verb.does}" for verb in VERBS)
    parser = _Parser(
        prog="ibsolver",
        usage="ibsolver VERB ...",
        description="Flow past towed thin plates with flaps, two-dimensional: from a case file to loads and pictures.",
        epilog=f"verbs (`ibsolver VERB --help` tells more):\n{table}\n\n{_FIRST_STEPS}",
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    parser.add_argument("--version", action="version", version=f"ibsolver {__version__}")
    return parser


def _verb_parser(verb: Verb, module: Any) -> argparse.ArgumentParser:
    parser = _Parser(
        prog=f"ibsolver {verb.name}",
        description=module.__doc__,
        epilog="examples:\n" + "\n".join(f"  ibsolver {example}" for example in module.EXAMPLES),
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    module.add_arguments(parser)
    parser.add_argument("--json", action="store_true", help="print the result as one JSON object on standard output")
    parser.add_argument("--quiet", action="store_true", help="print nothing but results and errors")
    return parser
