"""Settings of a whole machine: computed ones, windows that are kept apart, and what is never guessed."""

from collections.abc import Callable

import pytest

from sheets.amounts import Severity, bar
from sheets.errors import InputError
from sheets.pages.compose.matter import Matter
from sheets.pipeline import Described, targets
from sheets.targets.settings import Origin

RELIEF = "      setting: 206 bar\n      given by: machine manual, sheet 4\n      tolerance: 4 bar\n"
COMPENSATOR = "      setting: 176 bar\n      given by: machine manual, sheet 4\n      tolerance: 4 bar\n"


def test_given_settings_are_taken_as_given(any_sample: Matter) -> None:
    for setting in any_sample.targets.settings.values():
        assert setting.origin is Origin.GIVEN
        assert setting.target_bar == setting.screw.setting_bar
        assert setting.given_by


def test_relief_over_a_compensator_is_computed(changed: Callable[..., Described]) -> None:
    # Bottom (180 + 5)/0.92 = 201.09 bar; half of its window is the larger of 3 bar and 2 %: 201.09/0.98 =
    # 205.19.
    setting = targets(changed("clay_mixer", (RELIEF, ""))).settings["RV1"]

    assert setting.origin is Origin.COMPUTED
    assert setting.target_bar == pytest.approx(185 / 0.92 / 0.98)
    assert setting.low_bar == pytest.approx(185 / 0.92)
    assert 0.92 * setting.low_bar >= 185 - 1e-9


def test_working_relief_is_computed(changed: Callable[..., Described]) -> None:
    given = "      setting: 180 bar\n      given by: machine manual, sheet 2\n"
    setting = targets(changed("kiln_pusher", (given, ""))).settings["RV1"]

    # 128.8 bar at the pump under the heaviest move; 1.05/0.93 of it is 145.4 bar; and half a window, 3 bar.
    assert setting.origin is Origin.COMPUTED
    assert setting.low_bar == pytest.approx(128.8 * 1.05 / 0.93, abs=0.3)
    assert setting.target_bar == pytest.approx(setting.low_bar + 3.0)


def test_computed_relief_stands_over_the_computed_compensator(changed: Callable[..., Described]) -> None:
    settings = targets(changed("clay_mixer", (COMPENSATOR, ""), (RELIEF, ""))).settings
    compensator, relief = settings["PU1.compensator"], settings["RV1"]

    assert compensator.origin is relief.origin is Origin.COMPUTED
    assert 0.92 * relief.low_bar == pytest.approx(compensator.high_bar + 5.0)


def test_policy_windows_of_neighbours_never_meet(changed: Callable[..., Described]) -> None:
    # 176 ± 3.52 and 181 ± 3.62 would overlap from 177.38 to 179.52: each ends at the middle, 178.5.
    tolerance = "      given by: machine manual, sheet 4\n      tolerance: 4 bar\n"
    text = (
        ("      setting: 176 bar\n" + tolerance, "      setting: 176 bar\n      given by: plate\n"),
        ("      setting: 206 bar\n" + tolerance, "      setting: 181 bar\n      given by: plate\n"),
    )
    settings = targets(changed("clay_mixer", *text)).settings
    low, high = settings["PU1.compensator"], settings["RV1"]

    assert low.window_origin is high.window_origin is Origin.POLICY
    assert low.high_bar <= high.low_bar
    assert low.high_bar == pytest.approx(178.5)
    assert high.low_bar == pytest.approx(178.5)
    assert low.ceiling_bar <= high.low_bar
    assert high.floor_bar >= low.high_bar


def test_window_over_a_rating_is_refused(changed: Callable[..., Described]) -> None:
    # The compensator's window reaches 180 bar; the hose carries 178 bar.
    hose = "    kind: hose\n    where: from pump to pressure manifold\n    rating: "
    found = targets(changed("clay_mixer", (hose + "280 bar", hose + "178 bar")))
    refused = {finding.subject: finding for finding in found.refusals}

    assert set(refused) == {"PU1.compensator", "RV1"}
    assert refused["PU1.compensator"].code == "setting_over_rating"
    assert refused["PU1.compensator"].data["rated_part"] == "H1"


def test_nothing_is_guessed_for_a_standby(changed: Callable[..., Described]) -> None:
    given = (
        "      setting: 27 bar                  # standby: LS at tank, no flow\n"
        "      given by: machine manual, sheet 4\n"
    )
    difference = "      differential: 24 bar\n      differential flow: 60 L/min\n"
    found = targets(changed("clay_mixer", (given, ""), (difference, "")))
    (finding,) = found.refusals

    assert (finding.code, finding.subject) == ("value_not_given", "PU1.load sensing")
    assert finding.severity is Severity.REFUSED
    assert "PU1.load sensing" not in found.settings


def test_relief_of_a_compensator_without_a_value_is_not_guessed(changed: Callable[..., Described]) -> None:
    # The work is more than the range of the compensator carries (157 bar), so nothing is known of its need.
    ends = ("      highest: 230 bar\n      raises: clockwise\n      where: the upper",) * 2
    text = (ends[0], ends[1].replace("230", "150"))
    found = targets(changed("clay_mixer", (COMPENSATOR, ""), (RELIEF, ""), text))
    assert {finding.subject for finding in found.refusals} == {"PU1.compensator", "RV1"}
    assert {finding.code for finding in found.refusals} == {"value_not_given"}


def test_a_differential_at_more_than_the_pump_gives_is_refused(changed: Callable[..., Described]) -> None:
    # The pump gives 71 cm³ · 1475 rpm · 0.95 = 99.5 L/min at the most.
    standby = (
        "      setting: 27 bar                  # standby: LS at tank, no flow\n"
        "      given by: machine manual, sheet 4\n"
    )
    source = "      given by: machine manual, sheet 4\n"
    with pytest.raises(InputError, match=r"99\.5 L/min"):
        targets(
            changed(
                "clay_mixer",
                (standby, source),
                ("differential flow: 60 L/min", "differential flow: 100 L/min"),
            )
        )


LOWEST = "      lowest: 40 bar\n"


@pytest.mark.parametrize(
    ("lowest", "refused"),
    [
        ("175 bar", True),  # 176 ± 4: the screw ends 3 bar above the window's bottom
        ("172 bar", True),  # at it
        ("171.5 bar", True),  # half a bar below it: no gauge would show that
        ("171 bar", False),
    ],
)
def test_a_given_window_that_cant_be_come_up_to_is_refused(
    changed: Callable[..., Described], lowest: str, refused: bool
) -> None:
    found = targets(changed("clay_mixer", (LOWEST, f"      lowest: {lowest}\n")))
    against = [finding for finding in found.findings if finding.code == "no_room_below"]
    assert found.settings["PU1.compensator"].low_bar == 172.0
    assert len(against) == refused
    for finding in against:
        assert finding.severity is Severity.REFUSED
        assert finding.subject == "PU1.compensator"
        assert finding.data["bottom"] == bar(172.0)
        assert finding.data["lowest"] == bar(float(lowest.split()[0]))


@pytest.mark.parametrize(
    ("lowest", "low_bar", "refused"),
    [
        ("40 bar", 172.48, False),  # 2 % of 176 bar are 3.52 bar
        ("173 bar", 174.0, False),  # cut to 1 bar over the end of the screw
        ("175 bar", 172.48, True),  # 176 bar: nothing of it would be left below the target
    ],
)
def test_a_policy_window_is_cut_to_what_the_screw_reaches_from_below(
    changed: Callable[..., Described], lowest: str, low_bar: float, refused: bool
) -> None:
    given = COMPENSATOR.replace("      tolerance: 4 bar\n", "")
    text = ((COMPENSATOR, given), (LOWEST, f"      lowest: {lowest}\n"))
    found = targets(changed("clay_mixer", *text))
    setting = found.settings["PU1.compensator"]
    assert setting.low_bar == pytest.approx(low_bar)
    assert setting.high_bar == pytest.approx(179.52)
    assert any(finding.code == "no_room_below" for finding in found.refusals) == refused
    if not refused:
        assert setting.floor_bar >= float(lowest.split()[0]) + 1.0
