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
    # Valves and the filter by their flow, pump and motor by leakage, the pump by its widths; no gauge.
    named = {(value.part, value.field) for value in unmeasured(clay_mixer.machine)}
    flows = {"HV1", "HV2", "HV3", "BV1", "DV1", "FR1"}
    assert named == {(part, "rated flow") for part in flows} | {
        ("PU1", "volumetric efficiency"),
        ("PU1", "width of its controls"),
        ("HM1", "volumetric efficiency"),
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
    # Standby 27 and 24 bar at 60 L/min: the 3 bar between them become 3.3, and so grows the width.
    assert wider.load_sensing is not None
    assert wider.load_sensing.differential_bar == pytest.approx(23.7)
    # HM1 leaks 6 %: a tenth more is 6.6 %.
    assert skewed["HM1", "volumetric efficiency"].model_dump()["volumetric_efficiency"] == pytest.approx(
        0.934
    )


def test_a_width_and_a_leakage_on_the_plate_are_skewed_themselves(
    clay_mixer: Matter, glaze_press: Matter
) -> None:
    # The press gives the width of its load-sensing control: 60 psi, 4.137 bar.
    pump = glaze_press.machine.parts["PU1"]
    (widths,) = [one for one in unmeasured(glaze_press.machine) if one.field == "width of its controls"]
    wider = widths.skewed(pump, 0.1)
    assert isinstance(pump, VariablePump)
    assert isinstance(wider, VariablePump)
    assert pump.load_sensing is not None
    assert wider.load_sensing is not None
    assert wider.load_sensing.width_bar == pytest.approx(60 * 0.0689476 * 1.1, rel=1e-5)
    assert wider.load_sensing.setting_bar == pump.load_sensing.setting_bar

    motor = clay_mixer.machine.parts["HM1"].model_copy(update={"leakage_at_rating_lpm": 5.0})
    machine = clay_mixer.machine.model_copy(update={"parts": {"HM1": motor}})
    (leakage,) = unmeasured(machine)
    assert leakage.field == "leakage at its rating"
    assert leakage.skewed(motor, -0.1).model_dump()["leakage_at_rating_lpm"] == pytest.approx(4.5)


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
