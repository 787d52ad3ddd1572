"""What two machine files differ in: every change told once, and nothing that is the same."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest

from sheets.pipeline import diff, diff_text
from sheets.wording.difference import SECTIONS, Change, Differing


@pytest.fixture
def between(root: Path, tmp_path: Path) -> Callable[..., Differing]:
    """A sample against a changed copy of itself; pieces stand in it once."""

    def compare(*replacements: tuple[str, str], sample: str = "kiln_pusher") -> Differing:
        file = root / "sample_machines" / f"{sample}.yaml"
        text = file.read_text(encoding="utf-8")
        for old, new in replacements:
            assert text.count(old) == 1
            text = text.replace(old, new)
        changed = tmp_path / "changed.yaml"
        changed.write_text(text, encoding="utf-8")
        site = root / "sample_machines" / "site.yaml"
        return diff(file, changed, site)

    return compare


def by_place(differing: Differing, section: str) -> dict[tuple[str, ...], Change]:
    return {change.place: change for change in differing.changes if change.section == section}


def test_nothing_differs(between: Callable[..., Differing]) -> None:
    differing = between(("# Kiln-car pusher", "# Another comment"))

    assert differing.changes == ()
    assert list(diff_text(differing)) == [
        "Nothing differs: what is written, computed, done and read is the same."
    ]


def test_a_setting_goes_through_to_the_readings(between: Callable[..., Differing]) -> None:
    """The window of a given setting is policy: 2 % of 180 is 3.6 bar, of 190 is 3.8 bar."""
    differing = between(("setting: 180 bar", "setting: 190 bar"))

    assert by_place(differing, "parts") == {
        ("RV1", "adjuster", "setting"): Change(
            section="parts", place=("RV1", "adjuster", "setting"), old="180 bar", new="190 bar"
        )
    }
    targets = by_place(differing, "targets")
    assert (targets["RV1", "target"].old, targets["RV1", "target"].new) == ("180 bar", "190 bar")
    accepted = targets["RV1", "accepted settings"]
    assert (accepted.old, accepted.new) == ("176.4 bar to 183.6 bar", "186.2 bar to 193.8 bar")
    windows = by_place(differing, "windows")
    assert set(windows) == {("RV1", "target reading"), ("RV1", "accept")}  # its rating bounds it as before
    assert by_place(differing, "readings")
    assert not by_place(differing, "order")
    assert not by_place(differing, "nets")
    ranks = [SECTIONS.index(change.section) for change in differing.changes]
    assert ranks == sorted(ranks)


def test_parts_and_lines_that_come_and_go(between: Callable[..., Differing]) -> None:
    differing = between(
        ("gauges:\n", "  TP9:\n    kind: test point\n    where: roof\n    rating: 100 bar\n\ngauges:\n"),
        ("line B: [DV1.B, TP3.P, CY1.B]", "line B: [DV1.B, TP3.P, CY1.B, TP9.P]"),
        ("  hose: [HV2.B, H1.A]", "  long hose: [HV2.B, H1.A]"),
    )

    assert by_place(differing, "parts") == {
        ("TP9",): Change(section="parts", place=("TP9",), old=None, new="test point, roof")
    }
    nets = by_place(differing, "nets")
    assert set(nets) == {("line B",), ("hose",), ("long hose",)}
    assert (nets["hose",].old, nets["hose",].new) == ("HV2.B, H1.A", None)
    assert (nets["long hose",].old, nets["long hose",].new) == (None, "HV2.B, H1.A")


def test_the_order_of_ports_in_a_line_is_no_change(between: Callable[..., Differing]) -> None:
    assert between(("hose: [HV2.B, H1.A]", "hose: [H1.A, HV2.B]")).changes == ()


def test_units_of_the_new_file_hold_for_both(between: Callable[..., Differing]) -> None:
    """250 bar is 3625.9 psi, to five digits: 250e5 / 6894.757 = 3625.94."""
    differing = between(
        ("pressure: [bar, psi]", "pressure: [psi, bar]"),
        ("    range: 250 bar", "    range: 250 bar\n    name: gauge one"),
        ("rating: 300 bar", "rating: 250 bar"),
    )

    rating = by_place(differing, "gauges")["G1", "rating"]
    assert (rating.old, rating.new) == ("4351.1 psi", "3625.9 psi")
    assert set(by_place(differing, "machine")) == {("units", "pressure")}
    assert not by_place(differing, "parts")


def test_values_that_look_alike_are_told_with_all_digits(between: Callable[..., Differing]) -> None:
    differing = between(
        ("where: under the frame\n    volume: 120 L", "where: under the frame\n    volume: 120.0001 L")
    )

    volume = by_place(differing, "parts")["TK1", "volume"]
    assert (volume.old, volume.new) == ("120 L", "120.0001 L")


def test_a_side_that_is_refused_is_told_with_its_status(between: Callable[..., Differing]) -> None:
    beyond = "    where: after the pump manifold, beyond RV1 and TP1\n"
    differing = between((f"{beyond}    rating: 315 bar", f"{beyond}    rating: 100 bar"))

    assert (differing.old.status, differing.new.status, differing.status) == (0, 1, 1)
    assert any(line.startswith("new file, refused: ") for line in diff_text(differing))
    assert not any(line.startswith("old file") for line in diff_text(differing))
