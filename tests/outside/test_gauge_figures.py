"""Gauges of the samples against published classes, ranges and working ranges."""

from __future__ import annotations

import math
from collections.abc import Callable

import pytest
from outside_bench import Published

from sheets.machine.parts import DialGauge
from sheets.pages.compose.matter import Matter
from sheets.procedure.gauges import error_bar
from sheets.quantities import to_unit
from sheets.targets.reading import accuracy_ratio

EN_CLASSES = {0.1, 0.25, 0.6, 1.0, 1.6, 2.5, 4.0}
"""EN 837-1:1996, table 11: percent of span. Seen."""
EN_RANGES_BAR = {0.6, 1, 1.6, 2.5, 4, 6, 10, 16, 25, 40, 60, 100, 160, 250, 400, 600, 1000, 1600}
"""EN 837-1:1996, ranges from 0; 100, 250 and 600 were seen in table 14, the others are from memory."""
ASME_3A = 0.25
"""ASME B40.100, grade 3A, percent of span; from memory."""


def dials(matter: Matter) -> list[DialGauge]:
    found = [gauge for gauge in matter.machine.gauges.values() if isinstance(gauge, DialGauge)]
    assert found
    return found


def test_sample_dials_have_published_classes_and_ranges(any_sample: Matter) -> None:
    """By EN 837-1 where a machine is worked in bar, by ASME B40.100 where in psi."""
    for gauge in dials(any_sample):
        if any_sample.machine.units.pressure[0] == "bar":
            assert gauge.accuracy_class in EN_CLASSES
            assert gauge.range_bar in EN_RANGES_BAR
        else:
            assert gauge.accuracy_class == ASME_3A


def test_sample_dials_are_graduated_by_one_two_or_five(any_sample: Matter) -> None:
    """EN 837-1:1996: scale interval 1, 2 or 5 times a power of ten. Reported."""
    for gauge in dials(any_sample):
        interval = to_unit(gauge.graduation_bar, any_sample.machine.units.pressure[0])
        leading = interval / 10.0 ** math.floor(math.log10(interval) + 1e-9)
        assert round(leading, 9) in (1, 2, 5)


def dial(*, end_bar: float, accuracy_class: float, graduation_bar: float = 2.0) -> DialGauge:
    return DialGauge(
        kind="dial gauge",
        range_bar=end_bar,
        rating_bar=end_bar,
        graduation_bar=graduation_bar,
        accuracy_class=accuracy_class,
    )


def test_class_is_a_share_of_the_whole_span() -> None:
    """Class 1.0 on 400 bar: 4 bar anywhere on the scale, so 4 bar on a reading of 20 as well."""
    error = Published(
        printed="4 bar", source="trade page on the choice of gauge classes", evidence="reported", within=1e-12
    )
    assert error.agrees(error_bar(dial(end_bar=400.0, accuracy_class=1.0)), "bar")


@pytest.mark.parametrize(
    ("accuracy_class", "ratio"),
    [(0.25, 5.0), (0.6, 2.1), (1.6, 0.78)],
)
def test_accuracy_ratio_of_a_window_of_five_bar(accuracy_class: float, ratio: float) -> None:
    """EN 837-1 classes on 0 to 400 bar. Worked by hand: 5 bar over 1.0, 2.4 and 6.4 bar."""
    error = error_bar(dial(end_bar=400.0, accuracy_class=accuracy_class))
    assert accuracy_ratio(half_window_bar=5.0, gauge_error_bar=error) == pytest.approx(ratio, abs=0.02)


def test_sample_settings_are_read_in_the_working_range(any_sample: Matter) -> None:
    """25 to 75 % of the scale: general literature and EN 837-2:1997 for the upper end. Reported."""
    for state in any_sample.procedure.search.found().values():
        gauge = any_sample.machine.gauges[state.gauge.gauge]
        if isinstance(gauge, DialGauge):
            assert 0.25 <= state.reading_bar / gauge.range_bar <= 0.75


@pytest.mark.parametrize(("setting", "outside"), [("185 bar", False), ("190 bar", True)])
def test_a_reading_beyond_three_quarters_of_the_scale_is_warned_of(
    refused: Callable[..., Matter], setting: str, outside: bool
) -> None:
    """187.5 bar are three quarters of a scale of 250 bar."""
    matter = refused("kiln_pusher", ("setting: 180 bar", f"setting: {setting}"))
    (state,) = matter.procedure.search.found().values()
    assert ("gauge_working_point" in [finding.code for finding in state.gauge.findings]) is outside
