"""Windows, limits and ratios on the divisions of a gauge, by hand."""

import math

import pytest

from sheets.targets.reading import (
    ReadingWindow,
    accuracy_ratio,
    as_set_bar,
    graduations_within,
    never_exceed_bar,
    reading_window,
)
from sheets.targets.settings import Origin, window_of

NO_FLOOR, NO_CEILING = 0.0, math.inf


@pytest.mark.parametrize(
    ("low", "high", "graduation", "expected"),
    [
        (172.0, 180.0, 2.0, (172.0, 180.0, 5)),
        (171.0, 181.0, 2.0, (172.0, 180.0, 5)),  # inward
        (172.3, 179.7, 2.0, (174.0, 178.0, 3)),  # strictly inward, however little is cut
        (172.001, 179.999, 2.0, (174.0, 178.0, 3)),
        (101.5, 103.5, 5.0, (105.0, 100.0, 0)),  # none inside
        (26.0, 28.0, 0.1, (26.0, 28.0, 21)),
    ],
)
def test_graduations_inside(
    low: float, high: float, graduation: float, expected: tuple[float, float, int]
) -> None:
    first, last, count = graduations_within(low_bar=low, high_bar=high, graduation_bar=graduation)
    assert (first, last) == pytest.approx(expected[:2])
    assert count == expected[2]


@pytest.mark.parametrize(
    ("reading", "setting", "graduation", "expected"),
    [
        (180.26, 180.0, 2.0, 180.0),  # 0.13 of a division
        (180.39, 180.0, 2.0, 180.0),
        (180.41, 180.0, 2.0, 180.41),  # a fifth of 2 bar is 0.4 bar
        (179.59, 180.0, 2.0, 179.59),
        (180.26, 180.0, 0.1, 180.26),  # a digital gauge shows it
    ],
)
def test_reading_that_nobody_can_tell_from_its_setting(
    reading: float, setting: float, graduation: float, expected: float
) -> None:
    assert as_set_bar(reading_bar=reading, setting_bar=setting, graduation_bar=graduation) == expected


def window(
    low: float, high: float, *, widen: bool, floor: float = NO_FLOOR, ceiling: float = NO_CEILING
) -> ReadingWindow:
    return reading_window(
        low_bar=low, high_bar=high, graduation_bar=5.0, widen=widen, floor_bar=floor, ceiling_bar=ceiling
    )


def test_window_with_three_divisions_is_never_widened() -> None:
    found = window(189.0, 201.0, widen=True)
    assert (found.low_bar, found.high_bar, found.too_coarse) == (190.0, 200.0, False)
    assert found.half_width_bar == 5.0


def test_policy_window_grows_to_three_divisions_at_most() -> None:
    # 97 … 103 holds 100 only; twice the half width, 94 … 106, holds 95, 100, 105.
    found = window(97.0, 103.0, widen=True)
    assert (found.low_bar, found.high_bar, found.too_coarse) == (95.0, 105.0, False)
    # 176.4 … 183.6 holds 180; 172.8 … 187.2 holds 175, 180, 185.
    found = window(176.4, 183.6, widen=True)
    assert (found.low_bar, found.high_bar, found.too_coarse) == (175.0, 185.0, False)


def test_widening_takes_the_three_divisions_around_the_middle() -> None:
    # 176.1 … 184.1 holds 180 only; middle 180.1, so 172.1 … 188.1 holds 175, 180, 185.
    found = window(176.1, 184.1, widen=True)
    assert (found.low_bar, found.high_bar) == (175.0, 185.0)


def test_given_window_is_only_cut() -> None:
    found = window(97.0, 103.0, widen=False)
    assert found.too_coarse


def test_policy_window_grows_to_twice_its_half_width_only() -> None:
    # 99 … 101 grows to 98 … 102: one division.
    assert window(99.0, 101.0, widen=True).too_coarse


@pytest.mark.parametrize("ceiling", [100.5, 104.0, 104.5, 104.9])
def test_widening_never_passes_a_ceiling(ceiling: float) -> None:
    found = window(97.0, 103.0, widen=True, ceiling=ceiling)
    assert found.high_bar <= ceiling
    assert found.too_coarse


@pytest.mark.parametrize("floor", [99.5, 96.0, 95.5, 95.1])
def test_widening_never_passes_a_floor(floor: float) -> None:
    found = window(97.0, 103.0, widen=True, floor=floor)
    assert found.low_bar >= floor
    assert found.too_coarse


def test_widening_up_to_the_ceiling_itself() -> None:
    found = window(97.0, 103.0, widen=True, floor=95.0, ceiling=105.0)
    assert (found.low_bar, found.high_bar, found.too_coarse) == (95.0, 105.0, False)


@pytest.mark.parametrize(
    ("rating", "error", "graduation", "expected"),
    [
        (315.0, 1.0, 2.0, 300.0),  # the scale ends at 300 bar
        (315.0, 1.0, 7.0, 294.0),  # and its last division lies below its end
        (250.0, 1.0, 2.0, 248.0),  # 249 lies between two divisions
        (250.0, 0.2, 0.1, 249.8),
        (250.0, 0.625, 2.0, 248.0),
        (250.0, 2.0, 2.0, 248.0),  # just on a division
        (250.0, 2.01, 2.0, 246.0),
        (210.0, 1.6, 5.0, 205.0),
    ],
)
def test_never_exceed(rating: float, error: float, graduation: float, expected: float) -> None:
    found = never_exceed_bar(
        rating_bar=rating, gauge_error_bar=error, graduation_bar=graduation, range_bar=300.0
    )
    assert found == pytest.approx(expected)
    assert found + error <= rating + 1e-9  # the true pressure may stand above by the error


def test_never_exceed_in_psi() -> None:
    psi = 0.0689475729316836
    found = never_exceed_bar(
        rating_bar=4000 * psi, gauge_error_bar=12.5 * psi, graduation_bar=20 * psi, range_bar=5000 * psi
    )
    assert found / psi == pytest.approx(3980)


def test_accuracy_ratio_is_half_the_window_over_the_error() -> None:
    # 172 … 180 bar on a gauge of class 0.25 and 400 bar: 4 / 1.
    assert accuracy_ratio(half_window_bar=4.0, gauge_error_bar=400 * 0.25 / 100) == 4.0


@pytest.mark.parametrize(
    ("target", "tolerance", "share", "least", "expected", "origin"),
    [
        (176.0, 4.0, 0.02, 3.0, (172.0, 180.0), Origin.GIVEN),
        (180.0, None, 0.02, 3.0, (176.4, 183.6), Origin.POLICY),  # 2 % are more than 3 bar
        (100.0, None, 0.02, 3.0, (97.0, 103.0), Origin.POLICY),  # 3 bar are more than 2 %
        (150.0, None, 0.02, 3.0, (147.0, 153.0), Origin.POLICY),  # just the same
        (27.0, None, 0.0, 1.0, (26.0, 28.0), Origin.POLICY),  # standby
        (176.0, 0.5, 0.02, 3.0, (175.5, 176.5), Origin.GIVEN),  # a given one is never made wider
    ],
)
def test_window_of_a_setting(
    target: float,
    tolerance: float | None,
    share: float,
    least: float,
    expected: tuple[float, float],
    origin: Origin,
) -> None:
    low, high, where_from, derivation = window_of(
        target_bar=target, tolerance_bar=tolerance, share=share, least_bar=least
    )
    assert (low, high) == pytest.approx(expected)
    assert where_from is origin
    assert derivation.result.value == pytest.approx((expected[1] - expected[0]) / 2)
    assert {source for _, _, source in derivation.inputs} & {"given", "policy"} == {
        "given" if origin is Origin.GIVEN else "policy"
    }
