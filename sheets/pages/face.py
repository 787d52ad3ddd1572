"""Gauge faces: the dial as the technician sees it, or a number box for a digital gauge.

The scale runs over 270° clockwise from the lower left. From the rim inwards: the band (window
solid, beyond the never-exceed reading hatched), the scale with its graduations, the numbers, the needle at
the target. Band, graduations and numbers have a ring each, so none of them covers another.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from sheets.errors import InputError, Problem
from sheets.pages.document import GaugeFace
from sheets.pages.fonts import ASCENT, Weight
from sheets.pages.ink import Ink
from sheets.pages.look import HAIRLINE
from sheets.pages.placed import MM, Mark
from sheets.pages.text import Style, fit, style

SWEEP_DEG = 270.0
START_DEG = 225.0
BAND = (0.895, 0.965)
SCALE_RADIUS = 0.87
MINOR_END, MIDDLE_END, MAJOR_END = 0.825, 0.80, 0.765
NEEDLE_TIP = 0.875
HUB = 0.065
UNIT_DROP = 0.70
NICE = (1, 2, 2.5, 5)
LESS_NICE = (4, 8)
"""Taken only where no nicer step divides the scale: 40 on a dial to 160."""
CROWDED = 0.85 * MM
"""Graduations nearer than this at the scale are thinned."""


@dataclass(frozen=True, kw_only=True)
class Scale:
    """What is drawn of a scale: steps between numbers and between graduations, in its own unit."""

    end: float
    major: float
    minor: float
    label: Style
    label_radius: float


def check(face: GaugeFace) -> None:
    """Refuse a face whose numbers don't stand on its own scale."""
    low, high = face.window
    ordered = 0 <= low <= face.target <= high <= face.never_exceed
    if not ordered or face.never_exceed > face.scale_end or face.scale_end <= 0 or face.graduation <= 0:
        raise InputError(
            Problem(
                where=f"gauge {face.gauge}",
                what=(
                    f"window {low:g} to {high:g}, target {face.target:g}, never-exceed {face.never_exceed:g} "
                    f"don't stand in this order on a scale from 0 to {face.scale_end:g} {face.unit}"
                ),
                fix="fit a gauge whose scale reaches beyond the never-exceed reading",
            )
        )


def face_alternative(face: GaugeFace, *, target: str, window: str, never_exceed: str) -> str:
    """What a face says, in words: for who hears the page. The other texts are the words for its numbers."""
    return (
        f"{face.caption}: {target} {face.target_text} {face.unit}, {window} {face.window_text} {face.unit}, "
        f"{never_exceed} {face.never_exceed_text} {face.unit}"
    )


def number_text(value: float) -> str:
    """A number on a dial, without needless digits."""
    return f"{value:.6g}"


def multiples(value: float, step: float) -> bool:
    """Whether a value is a whole number of steps."""
    return abs(value / step - round(value / step)) < 1e-6


def steps_from(least: float, nice: tuple[float, ...]) -> list[float]:
    """Round steps from the least one up, over some decades."""
    decade = 10.0 ** math.floor(math.log10(least))
    found = [digit * decade * 10**power for power in range(5) for digit in nice]
    return [step for step in found if step >= least * (1 - 1e-9)]


def scale_of(face: GaugeFace, radius: float) -> Scale:
    """Numbers as close as they stay apart, graduations of the dial or a whole number of them together."""
    label = style(min(max(radius * 0.155, 7.0), 11.5), Weight.SEMIBOLD)
    widest = max(label.width(number_text(face.scale_end)), label.width(number_text(face.scale_end / 2)))
    label_radius = MAJOR_END * radius - math.hypot(widest / 2, ASCENT * label.size / 2) - 0.02 * radius
    arc = math.radians(SWEEP_DEG) * label_radius
    room = math.hypot(widest, ASCENT * label.size) * 1.05 + 0.06 * radius

    def apart(nice: tuple[float, ...]) -> list[float]:
        return [
            step
            for step in steps_from(face.graduation * 2, nice)
            if multiples(step, face.graduation) and room * face.scale_end / arc <= step <= face.scale_end
        ]

    def dividing(steps: list[float]) -> list[float]:
        """Steps that divide the scale into three parts or more."""
        return [step for step in steps if multiples(face.scale_end, step) and step * 3 <= face.scale_end]

    major = (dividing(apart(NICE)) or dividing(apart(LESS_NICE)) or apart(NICE) or [face.scale_end])[0]
    turn = math.radians(SWEEP_DEG) * SCALE_RADIUS * radius / face.scale_end
    divisions = [
        face.graduation * count
        for count in range(1, round(major / face.graduation) + 1)
        if multiples(major, face.graduation * count)
    ]
    fine = [step for step in divisions if step * turn >= CROWDED]
    return Scale(
        end=face.scale_end,
        major=major,
        minor=(fine or [major])[0],
        label=label,
        label_radius=label_radius,
    )


@dataclass(frozen=True, kw_only=True)
class Dial:
    """Centre and radius of a dial; places on it by value and share of the radius."""

    x: float
    y: float
    radius: float
    end: float

    def turn(self, value: float) -> float:
        """Angle of a value in radians, anticlockwise from the right."""
        return math.radians(START_DEG - SWEEP_DEG * value / self.end)

    def at(self, value: float, share: float) -> tuple[float, float]:
        """Point at a value and a share of the radius."""
        angle = self.turn(value)
        return (
            self.x + share * self.radius * math.cos(angle),
            self.y - share * self.radius * math.sin(angle),
        )

    def arc(self, start: float, stop: float, share: float) -> list[tuple[float, float]]:
        """Points along an arc, close enough to look round."""
        count = max(2, math.ceil(abs(stop - start) / self.end * SWEEP_DEG / 2.5) + 1)
        return [self.at(start + (stop - start) * k / (count - 1), share) for k in range(count)]

    def sector(self, start: float, stop: float, inner: float, outer: float) -> list[tuple[float, float]]:
        """Outline of a part of a ring."""
        return [*self.arc(start, stop, outer), *self.arc(stop, start, inner)]


def hatch(ink: Ink, dial: Dial, start: float) -> None:
    """Slanted strokes in the band from the never-exceed reading to the end of the scale.

    They slant so that nobody reads them as graduations.
    """
    inner, outer = BAND
    ink.polygon(dial.sector(start, dial.end, inner, outer), thickness=0.7)
    slant = dial.end / SWEEP_DEG * 4.0
    pitch = dial.end / SWEEP_DEG * max(2.6, 1.05 * MM / dial.radius * 180 / math.pi)
    value = start
    while value + slant <= dial.end:
        low, high = dial.at(value, inner), dial.at(value + slant, outer)
        ink.line(*low, *high, 0.9)
        value += pitch


def graduations(ink: Ink, dial: Dial, scale: Scale) -> None:
    """Strokes inwards from the scale: long at numbers, middling half-way, short else."""
    ink.polygon(dial.arc(0, dial.end, SCALE_RADIUS), thickness=0.6, closed=False)
    count = math.floor(dial.end / scale.minor + 1e-6)
    for index in range(count + 1):
        value = index * scale.minor
        if multiples(value, scale.major):
            reach, thick = MAJOR_END, 1.5
        elif multiples(value, scale.major / 2):
            reach, thick = MIDDLE_END, 0.9
        else:
            reach, thick = MINOR_END, 0.5
        ink.line(*dial.at(value, SCALE_RADIUS), *dial.at(value, reach), thick * min(1.0, dial.radius / 60))
    if not multiples(dial.end, scale.minor):
        ink.line(*dial.at(dial.end, SCALE_RADIUS), *dial.at(dial.end, MAJOR_END), 1.0)


def needle(ink: Ink, dial: Dial, target: float) -> None:
    """An open pointer with its point at the target, and a solid hub."""
    angle = dial.turn(target)
    across = (-math.sin(angle), -math.cos(angle))
    half = 0.05 * dial.radius

    def beside(share: float, shift: float) -> tuple[float, float]:
        x, y = dial.at(target, share)
        return (x + across[0] * shift, y + across[1] * shift)

    tip = 0.14
    thick = min(1.2, dial.radius / 45)
    body = (beside(-0.2, half), beside(-0.2, -half), beside(NEEDLE_TIP - tip, -half * 0.5),
            beside(NEEDLE_TIP - tip, half * 0.5))  # fmt: skip
    head = (
        beside(NEEDLE_TIP - tip, half * 1.1),
        beside(NEEDLE_TIP, 0),
        beside(NEEDLE_TIP - tip, -half * 1.1),
    )
    ink.polygon(body, thickness=thick, fill="white")
    ink.polygon(head, fill="black")
    ink.circle(dial.x, dial.y, HUB * dial.radius, fill="black")


def numbers(ink: Ink, dial: Dial, scale: Scale) -> None:
    """Numbers upright on their ring; the ground below them is cleared, so the needle passes behind."""
    count = math.floor(dial.end / scale.major + 1e-6)
    for index in range(count + 1):
        value = index * scale.major
        text = number_text(value)
        x, y = dial.at(value, scale.label_radius / dial.radius)
        width, height = scale.label.width(text), ASCENT * scale.label.size * 0.94
        ink.rect(x - width / 2 - 1, y - height / 2 - 1, width + 2, height + 2, fill="white")
        ink.text(x, y + height / 2, text, scale.label, side="centre")


def dial_face(ink: Ink, face: GaugeFace, *, x: float, y: float, diameter: float) -> None:
    """A dial centred at (x, y)."""
    check(face)
    radius = diameter / 2
    scale = scale_of(face, radius)
    dial = Dial(x=x, y=y, radius=radius, end=face.scale_end)
    rim = min(1.6, radius / 30)
    ink.circle(x, y, radius - rim / 2, thickness=rim)
    ink.polygon(dial.sector(*face.window, *BAND), fill="black", thickness=0.3)
    hatch(ink, dial, face.never_exceed)
    graduations(ink, dial, scale)
    unit = style(max(scale.label.size * 1.05, 7.5), Weight.SEMIBOLD)
    needle(ink, dial, face.target)
    drop = y + UNIT_DROP * radius
    width = unit.width(face.unit)
    ink.rect(
        x - width / 2 - 1, drop - ASCENT * unit.size - 1, width + 2, ASCENT * unit.size + 2, fill="white"
    )
    ink.text(x, drop, face.unit, unit, side="centre")
    numbers(ink, dial, scale)
    ink.line(*dial.at(face.never_exceed, MAJOR_END + 0.02), *dial.at(face.never_exceed, 1.0), 2.2 * rim / 1.6)
    ink.mark(Mark(kind="face", key=face.gauge, x=x - radius, y=y - radius, width=diameter, height=diameter))


def number_face(
    ink: Ink,
    face: GaugeFace,
    *,
    x: float,
    y: float,
    width: float,
    height: float,
    labels: tuple[str, str, str] | None,
) -> None:
    """A digital gauge: target, window and never-exceed in a box, from its upper left corner.

    `labels` are the words for the three numbers; without words a sign tells the limit. The
    never-exceed number stands white on black at the foot.
    """
    check(face)
    pad = 0.05 * width
    room = width - 2 * pad
    target_label, window_label, never_label = labels or ("", "", "")
    never_text = face.never_exceed_text if labels else f"≤ {face.never_exceed_text}"
    rows = ((face.target_text, target_label, 0.44, True), (face.window_text, window_label, 0.28, False),
            (never_text, never_label, 0.28, True))  # fmt: skip
    ink.rect(x + 0.8, y + 0.8, width - 1.6, height - 1.6, thickness=1.6)
    top = y
    small = style(8.5 if height > 30 * MM else 7.5)
    for index, (number, word, share, heavy) in enumerate(rows):
        tall = height * share
        text = f"{number} {face.unit}"
        room_left = room - (small.width(word) + 1.5 * MM if word else 0)
        wish = tall * (0.62 if index == 0 else 0.58)
        sizes = tuple(
            style(wish * k, Weight.BOLD if heavy else Weight.SEMIBOLD)
            for k in (1, 0.92, 0.85, 0.78, 0.7, 0.6, 0.5, 0.4)
        )
        shape, (line, *_) = fit(text, width=room_left, styles=sizes, lines=1)
        middle = top + tall / 2 + shape.size * ASCENT / 2 * 0.94
        black = index == 2
        if black:
            ink.rect(x, top, width, tall, fill="black")
        elif index:
            ink.line(x, top, x + width, top, HAIRLINE)
        ink.text(x + pad, middle, line, shape, white=black)
        ink.text(x + width - pad, middle, word, small, side="right", white=black)
        top += tall
    ink.mark(Mark(kind="face", key=face.gauge, x=x, y=y, width=width, height=height))
