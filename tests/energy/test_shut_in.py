"""Highest pressure in each line when the drive stops: what the limits let come, whatever a line is rated."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from sheets.energy.shut_in import shut_in_bar
from sheets.pipeline import Described

Changed = Callable[..., Described]
PSI = 0.45359237 * 9.80665 / 0.0254**2 / 1e5


def at(described: Described, port: str) -> float:
    found = shut_in_bar(described.machine, described.circuit)
    assert found is not None
    return found[described.circuit.node_of[port]]


def test_the_lowest_end_of_what_limits_a_line(changed: Changed) -> None:
    # The compensator ends at 230 bar, RV1 too; with RV1's range to 210 bar the line sees 210, and 0.2 at most
    # for the way from closed to full flow. LS follows the line through DV1, and so does the shut motor line.
    given = "      tolerance: 4 bar\n      lowest: 50 bar\n      highest: "
    sound, lower = changed("clay_mixer"), changed("clay_mixer", (f"{given}230 bar", f"{given}210 bar"))
    for port in ("PU1.P", "DV1.A", "HM1.B", "PU1.X"):
        assert at(sound, port) == pytest.approx(230.0, abs=0.01)
        assert at(lower, port) == pytest.approx(210.1, abs=0.11)


def test_a_rating_limits_nothing(changed: Changed) -> None:
    hose = "    where: line A, to the mixer\n    rating: "
    weak = changed("clay_mixer", (f"{hose}280 bar", f"{hose}60 bar"))
    assert at(weak, "HM1.A") == pytest.approx(230.0, abs=0.01)


def test_a_blocked_rod_side_exceeds_the_supply(changed: Changed) -> None:
    # Cap end under 3800 psi with the rod end blocked: 100² / (100² − 56²) = 1.457 times as much there.
    blocked = changed("glaze_press", ("press: [P to A, B to T]", "press: [P to A]"))
    assert at(blocked, "CY1.B") == pytest.approx(3800 * PSI * 100**2 / (100**2 - 56**2), rel=1e-3)
    assert at(blocked, "CY1.A") == pytest.approx(3800 * PSI, rel=1e-3)


def test_a_return_line_with_its_filter_clogged(changed: Changed) -> None:
    # FR1: 50 gal/min at 5 psi. Retracting without load takes no more than the pump's 75.2 to 79.2 L/min into
    # the rod end and sends 1.457 times as much out of the cap end; clogged, with a tenth of its conductance:
    # 5 psi · (10 · 1.457 · q / 189.27)².
    low, high = (5 * PSI * (10 * 1.457 * q / 189.27) ** 2 for q in (75.2, 79.2))
    assert low < at(changed("glaze_press"), "DV1.T") < high


def test_too_many_sets_of_positions_are_not_known(changed: Changed, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("sheets.circuit.extremes.MOST_STATES", 11)
    described = changed("clay_mixer")  # 3 positions, jammed and free, sound and clogged: 12
    assert shut_in_bar(described.machine, described.circuit) is None
