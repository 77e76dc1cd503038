"""What must fit together across the keys of a case.

Every check is a pure function of a `Case` and yields `Problem`s; the table at the end names the places that have to
be free of faults before a check makes sense. `problems` serves cases that were changed in Python as well.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator

from ibsolver.case import checks_body, checks_domain, checks_run
from ibsolver.case.model import Case
from ibsolver.case.problem import Place, Problem
from ibsolver.errors import CaseError, Fault


def problems(case: Case, at_fault: Callable[..., bool] = lambda *places: False) -> Iterator[Problem]:
    """Yield what does not fit together in a case.

    Parameters
    ----------
    case : Case
        Read from a file or made in Python.
    at_fault : callable
        Tells whether any of the places given to it has a fault already; checks that need them are skipped.
    """
    for check, needs in _CHECKS:
        if not at_fault(*needs):
            yield from check(case)


def verify(case: Case) -> Case:
    """Return the case; raise `CaseError` if something in it does not fit together (for cases changed in Python)."""
    from ibsolver.case.draft import dotted

    name = case.file or "case"
    faults = [Fault(name, 0, dotted(found.place), "", found.problem, found.suggestion) for found in problems(case)]
    if faults:
        raise CaseError(faults)
    return case


_BODY = (("plate",), ("cylinder",), ("outline",))
_FLAPS = (("flap",), *_BODY)
_DOMAIN = (("domain",), ("tank",))
_CHECKS: tuple[tuple[Callable[[Case], Iterator[Problem]], tuple[Place, ...]], ...] = (
    (checks_domain.check_box, (*_BODY, ("domain", "width"), ("domain", "height"), ("initial",))),
    (checks_domain.check_periodic, _DOMAIN),
    (checks_domain.check_through_flow, (*_DOMAIN, *_BODY)),
    (checks_domain.check_initial, (("initial",), *_DOMAIN, *_BODY)),
    (checks_domain.check_walls, _DOMAIN),
    (checks_body.check_motions, (*_BODY, ("motion",))),
    (checks_body.check_flap_names, _FLAPS),
    (checks_body.check_flap_parents, _FLAPS),
    (checks_body.check_flap_openings, _FLAPS),
    (checks_body.check_crossings, _FLAPS),
    (checks_body.check_free_flaps, (*_FLAPS, ("fluid",), ("tow",), ("tank",))),
    (checks_domain.check_inside, (*_FLAPS, *_DOMAIN, ("motion",), ("grid", "cells_per_chord"))),
    (checks_run.check_output, (("output",), ("run", "travel"))),
    (checks_run.check_grid, (*_FLAPS, *_DOMAIN, ("motion",), ("grid",))),
    (checks_run.check_steps, (("tow",), ("run",), ("grid", "cells_per_chord"), ("fluid",), *_BODY)),
)
