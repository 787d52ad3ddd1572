"""Hand valves that part a pump from the relief that guards it."""

from collections.abc import Callable

from sheets.amounts import Severity
from sheets.pages.compose.matter import Matter
from sheets.pipeline import Described, targets

CODES = ("relief_shut_off", "control_left_alone")


def guarding(described: Described) -> dict[str, tuple[str, Severity]]:
    return {one.subject: (one.code, one.severity) for one in targets(described).findings if one.code in CODES}


def test_samples_have_their_relief_before_the_valve(any_sample: Matter) -> None:
    assert not [one for one in any_sample.targets.findings if one.code in CODES]


def test_relief_beyond_the_valve_of_a_fixed_pump_is_refused(changed: Callable[..., Described]) -> None:
    line = ("pump line: [PU1.P, RV1.P, TP1.P, HV2.A]", "pump line: [PU1.P, TP1.P, HV2.A]")
    described = changed("kiln_pusher", line, ("hose: [HV2.B, H1.A]", "hose: [HV2.B, RV1.P, H1.A]"))
    assert guarding(described) == {"HV2": ("relief_shut_off", Severity.REFUSED)}


def test_relief_beyond_the_valve_of_a_controlled_pump_is_warned_of(changed: Callable[..., Described]) -> None:
    line = ("[PU1.P, RV1.P, TP1.P, BV1.A, HV1.A]", "[PU1.P, TP1.P, BV1.A, HV1.A]")
    described = changed("glaze_press", line, ("hose: [HV1.B, H1.A]", "hose: [HV1.B, RV1.P, H1.A]"))
    assert guarding(described) == {"HV1": ("control_left_alone", Severity.WARNING)}
