"""Every error a user can meet: one root, few children, each with its exit status.

A message is a sentence: what is wrong, where, the value found, and the next thing to try.
Anything that is not an `IbsolverError` is a fault of ours (exit status 1).
"""

from __future__ import annotations

from dataclasses import dataclass


class IbsolverError(Exception):
    """Root of all errors that are told to the user as a sentence."""

    exit_status = 1


class UsageError(IbsolverError):
    """The command line asks for something that does not exist or does not fit together."""

    exit_status = 2


@dataclass(frozen=True)
class Fault:
    """One thing wrong with an input file.

    Parameters
    ----------
    file : str
        File as the user named it.
    line : int
        Line number from 1, or 0 where the fault is of the file as a whole.
    key : str
        Dotted key, such as ``plate.incidence`` or ``flap[0].hinge``; empty for the file as a whole.
    value : str
        What was found, shortened for print; empty where something is missing.
    problem : str
        What is wrong, and what is allowed.
    suggestion : str
        The next thing to try; may be empty.
    """

    file: str
    line: int
    key: str
    value: str
    problem: str
    suggestion: str = ""

    def __str__(self) -> str:
        place = f"{self.file}:{self.line}" if self.line else self.file
        found = f"{self.key} = {self.value}" if self.key and self.value else self.key or self.value
        where = f"{place}: {found}" if found else place
        remedy = f" {self.suggestion}" if self.suggestion else ""
        return f"{where}: {self.problem}{remedy}"


class CaseError(IbsolverError):
    """The case (or a file it names) is invalid; carries every fault found, not only the first."""

    exit_status = 3

    def __init__(self, faults: list[Fault] | tuple[Fault, ...]):
        self.faults = tuple(faults)
        super().__init__("\n".join(str(fault) for fault in self.faults))


class DivergedError(IbsolverError):
    """The computation stopped making sense: a non-finite number or a runaway Courant number."""

    exit_status = 4


class StorageError(IbsolverError):
    """A file could not be written or read: full disk, missing rights, damage."""

    exit_status = 5


class ToleranceError(IbsolverError):
    """A check against a reference is outside its band."""

    exit_status = 6


class InterruptedRun(IbsolverError):
    """The run was asked to stop and did so; it can be resumed."""

    exit_status = 7


class CampaignError(IbsolverError):
    """Part of a campaign failed; the rest went on."""

    exit_status = 8
