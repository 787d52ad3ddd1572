"""Gauge faces: angles, rings, numbers and what is refused."""

from __future__ import annotations

import math
from itertools import combinations

import pytest
from rules import letters, meet
from sample_document import DIGITAL, LOW, PSI, dial

from sheets.errors import InputError
from sheets.pages.document import GaugeFace
from sheets.pages.face import BAND, Dial, dial_face, number_face, scale_of
from sheets.pages.ink import Ink
from sheets.pages.placed import MM, Circle, Line, Polygon, TextRun, extent

SCALES = [
    (10.0, 0.2), (16.0, 0.5), (25.0, 0.5), (40.0, 1.0), (60.0, 1.0), (100.0, 2.0), (160.0, 2.0), (160.0, 5.0),
    (250.0, 5.0), (315.0, 5.0), (400.0, 5.0), (400.0, 10.0), (600.0, 10.0), (1000.0, 20.0), (6000.0, 100.0),
    (10000.0, 200.0),
]  # fmt: skip


def face_of(end: float, graduation: float, target: float) -> GaugeFace:
    return dial(
        scale_end=end, graduation=graduation, target=target * end,
        window=((target - 0.02) * end, (target + 0.02) * end), never_exceed=min((target + 0.08) * end, end),
    )  # fmt: skip


def inked(face: GaugeFace, diameter_mm: float) -> Ink:
    ink = Ink()
    dial_face(ink, face, x=0, y=0, diameter=diameter_mm * MM)
    return ink


def test_the_scale_turns_270_degrees_from_the_lower_left() -> None:
    scale = Dial(x=0, y=0, radius=1, end=400)
    half = math.sqrt(0.5)
    for value, x, y in (
        (0, -half, half),
        (400 / 3, -math.cos(math.pi / 4), -half),
        (200, 0, -1),
        (400, half, half),
    ):
        if value in (0, 200, 400):
            assert scale.at(value, 1) == pytest.approx((x, y), abs=1e-12)
    assert math.degrees(scale.turn(0) - scale.turn(400)) == pytest.approx(270)


@pytest.mark.parametrize("diameter_mm", [22, 26.5, 40, 57, 60])
@pytest.mark.parametrize(("end", "graduation"), SCALES)
def test_no_number_over_another_or_over_the_hatching(
    end: float, graduation: float, diameter_mm: float
) -> None:
    radius = diameter_mm * MM / 2
    for target in (0.06, 0.25, 0.5, 0.52, 0.75, 0.9):
        ink = inked(face_of(end, graduation, target), diameter_mm)
        runs = [item for item in ink.items if isinstance(item, TextRun)]
        assert len(runs) >= 4, "three numbers and the unit at least"
        for one, other in combinations(runs, 2):
            assert not meet(letters(one), letters(other)), (one.text, other.text)
        for run in runs:
            left, top, right, bottom = letters(run)
            farthest = max(math.hypot(x, y) for x in (left, right) for y in (top, bottom))
            assert farthest < 0.83 * radius, f"{run.text} reaches into the graduations"
            assert run.size >= 7


@pytest.mark.parametrize(("end", "graduation"), SCALES)
def test_graduations_stay_those_of_the_dial(end: float, graduation: float) -> None:
    for diameter_mm in (22, 57):
        scale = scale_of(face_of(end, graduation, 0.5), diameter_mm * MM / 2)
        for whole in (scale.minor / graduation, scale.major / scale.minor):
            assert whole == pytest.approx(round(whole), abs=1e-9)
            assert whole >= 1


def test_a_large_dial_shows_every_graduation_and_a_tag_thins_them() -> None:
    assert scale_of(dial(), 57 * MM / 2).minor == 5
    assert scale_of(dial(), 57 * MM / 2).major == 50
    assert scale_of(dial(), 22 * MM / 2).minor > 5
    low = dial(scale_end=160.0, graduation=2.0, target=60.0, window=(58.0, 62.0), never_exceed=70.0)
    assert scale_of(low, 22 * MM / 2).major == 40


def test_window_solid_and_beyond_never_exceed_hatched() -> None:
    """206 bar (202 to 210), never 225, on 400: the angles are worked out by hand, 0.675° a bar from 225°."""
    ink = inked(dial(), 60)
    radius = 30 * MM
    window = next(item for item in ink.items if isinstance(item, Polygon) and item.fill == "black")
    angles = [math.degrees(math.atan2(-y, x)) for x, y in window.points]
    assert max(angles) == pytest.approx(225 - 0.675 * 202)
    assert min(angles) == pytest.approx(225 - 0.675 * 210)
    shares = [math.hypot(x, y) / radius for x, y in window.points]
    assert (min(shares), max(shares)) == pytest.approx(BAND)
    strokes = [
        item for item in ink.items
        if isinstance(item, Line) and math.hypot(item.x1, item.y1) / radius == pytest.approx(BAND[0])
    ]  # fmt: skip
    assert len(strokes) > 20
    turns = [
        (225 - math.degrees(math.atan2(-y, x))) % 360 / 0.675
        for s in strokes
        for x, y in ((s.x1, s.y1), (s.x2, s.y2))
    ]
    assert min(turns) == pytest.approx(225)
    assert max(turns) <= 400 + 1e-6
    assert all(math.hypot(s.x2 - s.x1, s.y2 - s.y1) > (BAND[1] - BAND[0]) * radius * 1.05 for s in strokes), (
        "slanted"
    )


def test_the_needle_points_at_the_target() -> None:
    ink = inked(LOW, 60)
    black = [
        item
        for item in ink.items
        if isinstance(item, Polygon) and item.fill == "black" and len(item.points) == 3
    ]
    (head,) = black
    x, y = max(head.points, key=lambda point: math.hypot(*point))
    assert math.degrees(math.atan2(-y, x)) == pytest.approx(225 - 270 * 24 / 60)


def test_nothing_leaves_the_rim() -> None:
    for face in (dial(), LOW, PSI):
        ink = inked(face, 26.5)
        rim = max(item.radius for item in ink.items if isinstance(item, Circle))
        reach = 26.5 * MM / 2
        assert rim <= reach
        for item in ink.items:
            assert max(abs(edge) for edge in extent(item)) <= reach + 1e-6


def test_a_digital_gauge_is_a_box_with_three_numbers() -> None:
    for width, height, labels in (
        (60, 34, ("target", "accept", "never exceed")),
        (26.5, 23, None),
        (22, 22, None),
    ):
        ink = Ink()
        number_face(ink, DIGITAL, x=0, y=0, width=width * MM, height=height * MM, labels=labels)
        runs = [item for item in ink.items if isinstance(item, TextRun)]
        texts = " ".join(run.text for run in runs)
        for number in ("181.5 bar", "179.0 to 184.0 bar", "195.0 bar"):
            assert number in texts
        for run in runs:
            left, top, right, bottom = extent(run)
            assert left >= 0
            assert right <= width * MM
            assert top >= 0
            assert bottom <= height * MM
        for one, other in combinations(runs, 2):
            assert not meet(letters(one), letters(other))


@pytest.mark.parametrize(
    "changes",
    [
        {"never_exceed": 401.0},
        {"never_exceed": 209.0},
        {"target": 211.0},
        {"window": (-1.0, 210.0)},
        {"graduation": 0.0},
        {"scale_end": 0.0},
    ],
)
def test_a_face_that_cannot_show_its_numbers_is_refused(changes: dict[str, object]) -> None:
    with pytest.raises(InputError, match="gauge G1"):
        inked(dial(**changes), 57)
