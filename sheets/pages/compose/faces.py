"""Gauge faces and setting tags from the found test states."""

from __future__ import annotations

from sheets.machine.parts import DialGauge
from sheets.pages.compose.matter import Matter
from sheets.pages.document import GaugeFace, Section, SettingTag, SheetKind, TagSheet
from sheets.procedure.answers import TestState
from sheets.procedure.gauges import GaugeChoice


def face(matter: Matter, state: TestState) -> GaugeFace:
    """The gauge of an adjuster as the technician sees it, in the machine's first unit of pressure."""
    choice, figures = state.gauge, matter.figures
    gauge = matter.machine.gauges[choice.gauge]
    low, high = choice.window.low_bar, choice.window.high_bar
    return GaugeFace(
        gauge=choice.gauge,
        caption=matter.text("face_caption", gauge=choice.gauge, test_point=test_point(matter, choice)),
        unit=figures.pressure_unit,
        digital=not isinstance(gauge, DialGauge),
        scale_end=figures.in_unit(gauge.range_bar),
        graduation=figures.in_unit(choice.graduation_bar),
        target=float(matter.speaker.target_digits(state.adjuster)),
        window=(float(digits(matter, choice, low)), float(digits(matter, choice, high))),
        never_exceed=float(digits(matter, choice, choice.never_exceed_bar)),
        target_text=matter.speaker.target_digits(state.adjuster),
        window_text=window_text(matter, choice),
        never_exceed_text=digits(matter, choice, choice.never_exceed_bar),
        second_unit_text=second_text(matter, choice),
    )


def digits(matter: Matter, choice: GaugeChoice, value_bar: float) -> str:
    """A reading on that gauge, without unit."""
    return matter.figures.digits(value_bar, choice.graduation_bar)


def window_text(matter: Matter, choice: GaugeChoice) -> str:
    """Accepted readings, without unit."""
    low = digits(matter, choice, choice.window.low_bar)
    high = digits(matter, choice, choice.window.high_bar)
    return f"{low} to {high}"


def second_text(matter: Matter, choice: GaugeChoice) -> str:
    """Target and window in the second unit; empty where there is none."""
    target = matter.figures.second(choice.target_bar)
    if not target:
        return ""
    window = matter.figures.second_inside(choice.window.low_bar, choice.window.high_bar)
    return matter.text("second_unit", target=target, window=window)


def test_point(matter: Matter, choice: GaugeChoice) -> str:
    """Where the gauge really is: two gauges never share a test point."""
    return next(
        (
            step.reading.test_point
            for stage in matter.procedure.stages
            for step in stage.steps
            if step.reading is not None and step.reading.gauge == choice.gauge
        ),
        choice.test_point,
    )


def tags(matter: Matter) -> Section:
    """One tag for each adjuster that this machine can be set by."""
    found = matter.procedure.search.found()
    return Section(
        kind=SheetKind.TAGS,
        bookmark=matter.text("tags_title"),
        title=matter.text("tags_title"),
        subject=matter.machine.tag,
        lines=(matter.text("tags_line"),),
        banner=None,
        blocks=(TagSheet(tags=tuple(_tag(matter, found[id_]) for id_ in matter.procedure.order.sequence)),),
    )


def _tag(matter: Matter, state: TestState) -> SettingTag:
    machine, figures, choice = matter.machine, matter.figures, state.gauge
    return SettingTag(
        id=state.adjuster,
        adjuster=matter.speaker.screws[state.adjuster].part,
        kind=matter.speaker.tag_kind(state.adjuster),
        face=face(matter, state),
        value=f"{matter.speaker.target_digits(state.adjuster)} {figures.pressure_unit}",
        window=window_text(matter, choice),
        second_unit=figures.second(choice.target_bar),
        basis=_basis(matter, state),
        as_left=matter.text("tag_unset"),
        next_check=matter.text("tag_next"),
        footer=matter.text("tag_footer", tag=machine.tag, document=machine.document),
    )


def _basis(matter: Matter, state: TestState) -> tuple[str, ...]:
    figures, speaker = matter.figures, matter.speaker
    screw = speaker.screws[state.adjuster].adjuster
    low, high = speaker.oil_window()
    at = (
        matter.text("tag_flow", flow=figures.flow(state.flow_lpm))
        if state.flow_lpm > 0.0
        else matter.text("tag_deadhead")
    )
    lines = [matter.text("tag_basis", at=at, low=low.removesuffix(" °C"), high=high)]
    below = _next_below(matter, state)
    if below is not None:
        difference = figures.pressure(state.gauge.target_bar - below.gauge.target_bar)
        lines.append(matter.text("tag_above", difference=difference, other=speaker.adjuster(below.adjuster)))
    if screw.seal:
        lines.append(matter.text("tag_seal", seal=screw.seal))
    direction = matter.text("tag_direction", raises=screw.raises)
    lines.append(f"{direction} · {matter.text('tag_force')}")
    return tuple(lines)


def _next_below(matter: Matter, state: TestState) -> TestState | None:
    """The adjuster on the same line with the next lower target that this one is set above."""
    place = {site.id: site.controlled_node for site in matter.circuit.adjusters}
    lower = [
        other
        for other in matter.procedure.search.found().values()
        if place[other.adjuster] == place[state.adjuster] and other.adjuster in state.raised
    ]
    return max(lower, key=lambda other: other.gauge.target_bar, default=None)
