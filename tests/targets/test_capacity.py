"""Every relief passes what can reach it with the controls stuck at full stroke, and its line stands it."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from sheets.amounts import Amount, Finding, Severity
from sheets.pipeline import Described, targets

Changed = Callable[..., Described]
PSI = 0.45359237 * 9.80665 / 0.0254**2 / 1e5

RELIEF = """  RV2:
    kind: relief valve
    where: beside it
    rating: 340 bar
    acting: direct
    rated flow: {rated}
    {reference}
    adjuster:
      setting: {setting}
      given by: plate
      lowest: 5 bar
      highest: 240 bar
      raises: clockwise
      where: end of RV2
      key: hex 5 mm

  FR1:
"""


def port_relieved(changed: Changed, rated: str, reference: str = "designation: RV2") -> Described:
    """The press with a test point of 2000 psi on the cylinder's line A, and a relief of 1500 psi there."""
    weak = "    where: line A, at the cylinder\n    rating: "
    return changed(
        "glaze_press",
        (f"{weak}6000 psi", f"{weak}2000 psi"),
        ("  FR1:\n", RELIEF.format(rated=rated, reference=reference, setting="1500 psi")),
        ("TP3.P, CY1.A]", "TP3.P, CY1.A, RV2.P]"),
        ("RV1.T, BV1.B", "RV1.T, RV2.T, BV1.B"),
    )


def of(described: Described, code: str) -> list[Finding]:
    return [one for one in targets(described).refusals if one.code == code]


def amount(finding: Finding, name: str) -> float:
    found = finding.data[name]
    assert isinstance(found, Amount)
    return found.value


def test_a_port_relief_takes_the_whole_pump(changed: Changed) -> None:
    # V·n = 79.2 L/min less 3.96 · 1600/4600 that leaks at about 1600 psi: 77.8 L/min, all through the press
    # valve into line A, since RV1 opens at 3135 psi only.
    (finding,) = of(port_relieved(changed, "5 gal/min"), "relief_too_small")
    assert finding.subject == "RV2"
    assert amount(finding, "reaching") == pytest.approx(79.2 - 3.96 * 1600 / 4600, abs=0.3)
    assert of(port_relieved(changed, "40 gal/min"), "relief_too_small") == []


def test_a_relief_that_is_read_at_little_flow_rises_over_a_rating(changed: Changed) -> None:
    # Read at 5 gal/min, 18.9 L/min, opening at 0.80: the top of its window, 1500 psi + 3 bar, rises to
    # 1543.5 · (0.8 + 0.2 · 77/18.93) = 2490 psi, and the test point carries 2000. Read at the full flow it
    # stays under 1560.
    steep = port_relieved(changed, "40 gal/min", "reference flow: 5 gal/min")
    (finding,) = of(steep, "relief_lets_over_rating")
    assert (finding.subject, finding.data["rated_part"]) == ("RV2", "TP3")
    assert amount(finding, "pressure") / PSI == pytest.approx(2490, abs=20)
    assert of(port_relieved(changed, "40 gal/min"), "relief_lets_over_rating") == []


def signal_relieved(changed: Changed, rated: str) -> Described:
    """The mixer with a relief of 100 bar on its load signal."""
    return changed(
        "clay_mixer",
        ("  FR1:\n", RELIEF.format(rated=rated, reference="designation: RV2", setting="100 bar")),
        ("PU1.X, TP3.P]", "PU1.X, TP3.P, RV2.P]"),
        ("RV1.T, BV1.B", "RV1.T, RV2.T, BV1.B"),
    )


def test_a_signal_relief_takes_what_the_signal_way_passes(changed: Changed) -> None:
    # Line A jammed at 210 bar, RV1's window top; RV2 opens at 0.8 · 103 = 82.4 and holds about 84.5 bar. The
    # signal way passes 2 L/min at 5 bar: 2 · √((210 − 84.5)/5) = 10.0 L/min, not the pump's 100.
    (finding,) = of(signal_relieved(changed, "5 L/min"), "relief_too_small")
    assert finding.subject == "RV2"
    assert amount(finding, "reaching") == pytest.approx(10.0, abs=0.2)
    assert of(signal_relieved(changed, "20 L/min"), "relief_too_small") == []


def test_samples_have_reliefs_enough(changed: Changed) -> None:
    for name in ("clay_mixer", "glaze_press", "kiln_pusher"):
        assert targets(changed(name)).refusals == ()


def test_too_many_sets_are_not_established(changed: Changed, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("sheets.circuit.extremes.MOST_STATES", 5)  # 3 positions, jammed and free: 6
    (finding,) = of(changed("clay_mixer"), "relief_capacity_not_known")
    assert (finding.subject, finding.severity) == ("RV1", Severity.NOT_ESTABLISHED)
