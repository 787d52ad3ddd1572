"""Plate values that nobody measured: the samples don't hang on them, and what does is named."""

from collections.abc import Callable

import pytest

from sheets.amounts import Amount, Severity
from sheets.machine.parts import VariablePump
from sheets.pages.compose.matter import Matter
from sheets.pipeline import Described, steps
from sheets.procedure.skew import skew_findings, unmeasured

Changed = Callable[..., Described]


@pytest.mark.parametrize(
    "name", [pytest.param("clay_mixer", marks=pytest.mark.slow), "glaze_press", "kiln_pusher"]
)
def test_samples_hang_on_no_unmeasured_value(changed: Changed, name: str) -> None:
    described = changed(name)
    assert skew_findings(described.machine, described.policies) == ()


def test_what_is_skewed(clay_mixer: Matter) -> None:
    # Valves and the filter by their flow, the pump by its leakage and its width; no gauge, hose or cylinder.
    named = {(value.part, value.field) for value in unmeasured(clay_mixer.machine)}
    flows = {"HV1", "HV2", "HV3", "BV1", "DV1", "FR1"}
    assert named == {(part, "rated flow") for part in flows} | {
        ("PU1", "volumetric efficiency"),
        ("PU1", "width of its controls"),
    }


def test_skewed_by_a_tenth_of_the_value(clay_mixer: Matter) -> None:
    parts = clay_mixer.machine.parts
    skewed = {
        (value.part, value.field): value.skewed(parts[value.part], 0.1)
        for value in unmeasured(clay_mixer.machine)
    }
    assert skewed["HV1", "rated flow"].model_dump()["rated_flow_lpm"] == pytest.approx(165.0)
    # 5 % leak at the rating: a tenth more is 5.5 %.
    leaking = skewed["PU1", "volumetric efficiency"].model_dump()
    assert leaking["volumetric_efficiency"] == pytest.approx(0.945)
    wider = skewed["PU1", "width of its controls"]
    assert isinstance(wider, VariablePump)
    assert wider.compensator.width_bar == pytest.approx(4.4)


def test_a_drive_that_just_carries_names_the_pumps_leakage(changed: Changed) -> None:
    # RV1 asks for 180.26 bar · 44.06 L/min / 600 / 0.88 = 15.04 kW; 13.1 kW · 1.15 carries 15.065 kW. With a
    # tenth less leakage 46.4 − 0.9 · 0.012992 · 180.26 = 44.29 L/min come: 15.12 kW, and RV1 can't be set.
    described = changed("kiln_pusher", ("power: 15 kW", "power: 13.1 kW"))
    assert 180.26 * 44.06 / 600 / 0.88 < 13.1 * 1.15 < 180.26 * 44.29 / 600 / 0.88
    assert "RV1" in steps(described).procedure.search.found()

    (finding,) = skew_findings(described.machine, described.policies)
    assert (finding.code, finding.severity) == ("measure_first", Severity.WARNING)
    assert (finding.subject, finding.data["field"]) == ("PU1", "volumetric efficiency")
    share = finding.data["share"]
    assert isinstance(share, Amount)
    assert share.value == -0.1
