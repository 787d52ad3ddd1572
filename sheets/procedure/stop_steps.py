"""Steps that run a cylinder to its stop and hold it there: the guard first, then the one movement."""

from __future__ import annotations

from sheets.amounts import Amount
from sheets.circuit.plant import Adjust, MoveValve
from sheets.procedure.answers import TestState
from sheets.procedure.at_stop import Approach
from sheets.procedure.conditions import Failure
from sheets.procedure.rig import Rig
from sheets.procedure.steps import StepKind


def run_to_stop(rig: Rig, state: TestState, approach: Approach, below_bar: float) -> None:
    """The guard, then the lever that is held; nothing is read for a setting before the cylinder stands.

    An adjuster that is backed out gives too little pressure: the cylinder may stop anywhere, and runs on
    while the screw comes up. So the lever is held first and the screw turned with everyone warned, up to
    ``below_bar``, which is below the window and enough to bring the cylinder to its stop.
    """
    data: dict[str, Amount | str] = {
        "actuator": approach.at.actuator,
        "speed": Amount(value=approach.speed_m_s, quantity="speed_m_s"),
    }
    lever, backed_out = approach.lever, state.adjuster in rig.backed_out
    rig.say(StepKind.GUARD_RUN, approach.at.actuator, **data)
    rig.do(
        StepKind.HOLD_RUNNING if backed_out else StepKind.RUN_TO_STOP,
        lever.valve,
        lever,
        reason=_reason(state, lever),
        data={**data, "position": lever.position},
        runs=approach.at,
    )
    if backed_out:
        rig.do(
            StepKind.RAISE_TO_STOP,
            state.adjuster,
            Adjust(adjuster=state.adjuster, setting_bar=below_bar),
            data=data,
            runs=approach.at,
        )


def _reason(state: TestState, lever: MoveValve) -> Failure | None:
    return dict(state.reasons).get(lever)
