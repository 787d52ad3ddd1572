"""Which devices isolate energy, and why others don't.

29 CFR 1910.147(b) defines an energy isolating device as a mechanical device that physically prevents the
transmission or release of energy, and says that push buttons, selector switches and other control circuit
devices are none.
"""

from __future__ import annotations

import re
from typing import Annotated, Final

from sheets.errors import quoted
from sheets.machine.words import Choice

ELECTRICAL: Final = ("main switch", "circuit breaker", "plug")
HYDRAULIC: Final = ("hand valve", "blank")

_CONTROL_CIRCUIT: Final = (
    "It is a device of the control circuit: it asks for a stop, and doesn't separate the energy."
)
_SWITCHED: Final = "It opens and closes on a signal, and may close again by a fault or by a control voltage."
_SPRUNG: Final = "It is held by a spring or by flow, leaks, and can't be locked."

_NOT_ISOLATING: Final[tuple[tuple[str, str], ...]] = (
    (r"push ?button|start button|stop button|button", _CONTROL_CIRCUIT),
    (r"selector|key ?switch|limit switch|pressure switch|interlock|light curtain", _CONTROL_CIRCUIT),
    (r"emergency stop|e stop|estop", _CONTROL_CIRCUIT),
    (r"safe torque off|\bsto\b|drive enable", _CONTROL_CIRCUIT),
    (r"controller|\bplc\b|output", _CONTROL_CIRCUIT),
    (r"contactor|relay|starter|solid state", _SWITCHED),
    (r"solenoid|coil", _SWITCHED),
    (r"check valve|counterbalance|non return", _SPRUNG),
    (r"spool|directional valve|lever valve|spring centred|spring centered|relief valve", _SPRUNG),
)


def refusal(kind: str) -> str | None:
    """Why a device of that kind is no isolating device; None if nothing is known about it."""
    plain = re.sub(r"[\s_-]+", " ", kind.casefold())
    for pattern, reason in _NOT_ISOLATING:
        if re.search(pattern, plain):
            return f"{quoted(kind)} isn't an energy isolating device. {reason}"
    return None


IsolatorKind = Annotated[str, Choice(words=ELECTRICAL + HYDRAULIC, refusal=refusal, example="main switch")]
