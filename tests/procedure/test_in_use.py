"""'Not in use' is said of an adjuster only that governs nowhere, anywhere in the ranges."""

from collections.abc import Callable

from sheets.circuit.verdict import Verdict
from sheets.machine.site import Policies
from sheets.pages.compose.matter import Matter
from sheets.pipeline import Described, steps, targets
from sheets.procedure.answers import NotInUse
from sheets.procedure.case import Case
from sheets.procedure.in_use import ever_governs
from sheets.wording.findings import say_not_in_use

RETURN_RELIEF = """  RV2:
    kind: relief valve
    where: return line
    rating: 25 bar
    acting: direct
    rated flow: 100 L/min
    adjuster:
      setting: 12 bar
      given by: plate
      lowest: {lowest} bar
      highest: 20 bar
      raises: clockwise
      where: end of RV2
      key: hex 5 mm

  FR1:
"""


def with_return_relief(changed: Callable[..., Described], lowest: str) -> Described:
    return changed(
        "kiln_pusher",
        ("  FR1:\n", RETURN_RELIEF.format(lowest=lowest)),
        ("  return: [DV1.T, FR1.A]", "  return: [DV1.T, FR1.A, RV2.P]"),
        ("HV1.A, RV1.T, FR1.B]", "HV1.A, RV1.T, RV2.T, FR1.B]"),
    )


def test_relief_of_a_line_that_never_rises(changed: Callable[..., Described]) -> None:
    # The return line carries at most 0.5·(67.8/100)² = 0.23 bar, also on the way back (the cap end gives
    # 67.8 L/min). Lowest 5 bar, opening at 4 bar: it never opens, wherever its screw stands.
    matter = steps(with_return_relief(changed, "5"))
    answer = matter.procedure.search.answers["RV2"]

    assert isinstance(answer, NotInUse)
    assert not answer.by_law
    assert answer.guard is None
    assert matter.procedure.verdict is Verdict.ESTABLISHED
    assert matter.procedure.order.sequence == ("RV1",)
    (sentence,) = say_not_in_use(matter.speaker, matter.procedure)
    assert "RV2" in sentence
    assert str(answer.states) in sentence


def test_relief_that_only_protects_is_not_called_unused(changed: Callable[..., Described]) -> None:
    # The LS port drains inside, so the pump holds its standby of 300 psi whatever it is asked for, and RV1 at
    # 3300 psi is never reached; its range begins at 800. With the control stuck, the pump's 75 L/min leave by
    # RV1 alone. Loads that 300 psi move: 20.7 bar · 78.5 cm² = 16 kN.
    inside = (
        "      port not connected: {}          # maker's drawing: joined to the outlet inside the control\n"
    )
    loads = "    extending load: {} kN\n    retracting load: {} kN\n"
    matter = steps(
        changed(
            "glaze_press",
            (inside.format("fed"), inside.format("drained")),
            (loads.format(100, 20), loads.format(5, 2)),
        )
    )
    answer = matter.procedure.search.answers["RV1"]
    assert isinstance(answer, NotInUse)
    assert answer.guard is not None
    assert answer.guard.pumps == ("PU1",)
    sentence = next(one for one in say_not_in_use(matter.speaker, matter.procedure) if "RV1" in one)
    assert "isn't in use" not in sentence
    for told in ("protects only", "PU1", "3300 psi", "press maker's sheet"):
        assert told in sentence

    unused = matter.procedure.search.answers["PU1.compensator"]
    assert isinstance(unused, NotInUse)
    assert unused.guard is None


def test_relief_that_governs_only_with_its_screw_out(changed: Callable[..., Described]) -> None:
    # Lowest 0.1 bar: it does open on that line, so it is in use, and can't be set at 12 bar.
    described = with_return_relief(changed, "0.1")
    base = Case(described.machine, described.circuit, targets(described), described.policies).base
    assert ever_governs(described.circuit, base, "RV2")


def test_every_adjuster_that_is_set_governs_somewhere(any_sample: Matter) -> None:
    base = Case(any_sample.machine, any_sample.circuit, any_sample.targets, Policies()).base
    for adjuster in any_sample.procedure.order.sequence:
        assert ever_governs(any_sample.circuit, base, adjuster)
