"""Parser and dispatch: reads the command line, loads the chosen verb's module and no other."""

from __future__ import annotations

import argparse
import contextlib
import difflib
import errno
import importlib
import json
import os
import shutil
import sys
import textwrap
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any, NoReturn

from ibsolver._version import __version__
from ibsolver.errors import IbsolverError, StorageError, UsageError


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

WIDEST = 98  # columns of help, however wide the terminal
_FIRST_STEPS = """\
first steps:
  ibsolver new plate-with-flap --out plate.toml
  ibsolver check plate.toml
  ibsolver run plate.toml
"""


class _Layout(argparse.HelpFormatter):
    """Help that fits the terminal: paragraphs are filled, lines that begin with two blanks stay as they are."""

    def __init__(self, prog: str, **options: Any):
        width = min(shutil.get_terminal_size().columns - 2, WIDEST)
        super().__init__(prog, **{"width": width, **options})

    def _fill_text(self, text: str, width: int, indent: str) -> str:
        return "\n\n".join(self._paragraph(part, width, indent) for part in text.strip("\n").split("\n\n"))

    def _paragraph(self, text: str, width: int, indent: str) -> str:
        if any(line.startswith("  ") for line in text.splitlines()):
            return text
        return textwrap.fill(" ".join(text.split()), width, initial_indent=indent, subsequent_indent=indent)

    def _split_lines(self, text: str, width: int) -> list[str]:
        return textwrap.wrap(" ".join(text.split()), width, break_on_hyphens=False)


class _Parser(argparse.ArgumentParser):
    """A parser whose faults are `UsageError`s; options are spelt out, so that scripts survive new ones."""

    def __init__(self, **options: Any):
        super().__init__(formatter_class=_Layout, allow_abbrev=False, **options)

    def error(self, message: str) -> NoReturn:
        raise UsageError(f"{message}. See `{self.prog} --help`.")

    def read(self, words: list[str]) -> argparse.Namespace:
        """Return the options, or tell which word is unknown and what is near it."""
        options, unknown = self.parse_known_args(words)
        if unknown:
            known = [name for action in self._actions for name in action.option_strings if name.startswith("--")]
            near = difflib.get_close_matches(unknown[0].partition("=")[0], known, 1, 0.7)
            hint = f" (did you mean {near[0]}?)" if near else ""
            self.error(f"{unknown[0]!r} is not known here{hint}")
        return options


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command line and return the exit status (see the README)."""
    words = list(sys.argv[1:] if arguments is None else arguments)
    _spell_out_what_cannot_be_printed()
    status = _guarded(lambda: _dispatch(words))
    return status or _guarded(_flush)


def _guarded(work: Callable[[], int]) -> int:
    """Return the exit status of some work; whatever it raises becomes a sentence on standard error."""
    try:
        return work()
    except IbsolverError as error:
        _tell(f"ibsolver: {error}")
        return error.exit_status
    except KeyboardInterrupt:
        _tell("ibsolver: interrupted.")
        return 7
    except SystemExit as leaving:  # --help and --version
        return int(leaving.code or 0)
    except BrokenPipeError:  # whoever read our output has seen enough
        _let_go_of_output()
        return 0
    except Exception as error:
        if isinstance(error, OSError) and error.errno in (errno.ENOSPC, errno.EDQUOT):
            _let_go_of_output()
            _tell("ibsolver: no room for the output: the disk is full. Make space and try again.")
            return StorageError.exit_status
        if os.environ.get("IBSOLVER_TRACEBACK"):
            raise
        _tell(
            f"ibsolver: a fault of ours, not of your case: {type(error).__name__}: {error}. "
            "Set IBSOLVER_TRACEBACK=1 to see where, and please report it."
        )
        return IbsolverError.exit_status


def _spell_out_what_cannot_be_printed() -> None:
    """Let a title or file name with signs that the terminal's encoding lacks be printed all the same."""
    with contextlib.suppress(AttributeError, ValueError, OSError):
        sys.stdout.reconfigure(errors="backslashreplace")


def _flush() -> int:
    """Write out what is left in the buffer while its failure can still be told; there may be no output at all."""
    if sys.stdout is not None:
        sys.stdout.flush()
    return 0


def _let_go_of_output() -> None:
    """Send what is left in the buffer nowhere, so that the interpreter does not stumble over it at the end."""
    with contextlib.suppress(OSError, AttributeError):
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())


def _tell(text: str) -> None:
    with contextlib.suppress(OSError):
        print(text, file=sys.stderr)


def _dispatch(words: list[str]) -> int:
    if not words:
        print(_top_parser().format_help(), end="")
        return UsageError.exit_status
    if words[0].startswith("-"):
        if words[0] not in ("-h", "--help", "--version"):
            raise UsageError(f"{words[0]!r} is not known here; options follow the verb. See `ibsolver --help`.")
        _top_parser().parse_args(words[:1])
    verb = _verb(words[0])
    module = importlib.import_module(f"ibsolver.commands.{verb.module}")
    options = _verb_parser(verb, module).read(words[1:])
    result = module.execute(options)
    if options.json:
        print(json.dumps(result, indent=1))
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
        epilog=f"verbs (`ibsolver VERB --help` tells more, options follow the verb):\n{table}\n\n{_FIRST_STEPS}",
    )
    parser.add_argument("--version", action="version", version=f"ibsolver {__version__}")
    return parser


def _verb_parser(verb: Verb, module: Any) -> argparse.ArgumentParser:
    parser = _Parser(
        prog=f"ibsolver {verb.name}",
        description=module.__doc__,
        epilog="examples:\n" + "\n".join(f"  ibsolver {example}" for example in module.EXAMPLES),
    )
    module.add_arguments(parser)
    parser.add_argument("--json", action="store_true", help="print the result as one JSON object on standard output")
    parser.add_argument("--quiet", action="store_true", help="print nothing but results and errors")
    return parser
