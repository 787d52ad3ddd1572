"""Taking on a computed setting: which ones can be, and under what they hold."""

from __future__ import annotations

from datetime import date

from sheets.amounts import Severity
from sheets.errors import InputError, Problem, nearest, quoted
from sheets.machine.model import Machine
from sheets.machine.screws import screws_of
from sheets.machine.walkdown import Acceptance
from sheets.targets.settings import Origin, Targets

_LOOK = "jamnut targets shows each adjuster with its setting, and where that comes from."


def computed_settings(targets: Targets) -> dict[str, float]:
    """Computed settings by adjuster, in bar."""
    return {id_: one.target_bar for id_, one in targets.settings.items() if one.origin is Origin.COMPUTED}


def accept(
    machine: Machine, targets: Targets, adjuster: str, *, by: str, on: date, computed_from: str
) -> Acceptance:
    """Acceptance of the setting that was computed for an adjuster.

    ``by`` and ``on``: who takes it on, and when. ``computed_from``: digest of all that it comes from. Raises
    InputError where there is no such adjuster, or its setting is refused, or given by somebody already.
    """
    screws = screws_of(machine)
    if adjuster not in screws:
        right = nearest(adjuster, screws)
        hint = f"Did you mean {right}? " if right else ""
        raise InputError(
            Problem(
                where=quoted(adjuster),
                what="No adjuster is called so.",
                fix=f"{hint}Adjusters are {', '.join(screws)}.",
            )
        )
    setting = targets.settings.get(adjuster)
    against = (Severity.REFUSED, Severity.NOT_ESTABLISHED)
    if setting is None or any(one.severity in against for one in setting.findings):
        raise InputError(
            Problem(where=adjuster, what="Its setting is refused: nothing can be accepted.", fix=_LOOK)
        )
    if setting.origin is not Origin.COMPUTED:
        what = f"Its setting is given, by {setting.given_by}: there is nothing to accept."
        raise InputError(Problem(where=adjuster, what=what, fix=_LOOK))
    return Acceptance(value_bar=setting.target_bar, by=by, day=on, computed_from=computed_from)
