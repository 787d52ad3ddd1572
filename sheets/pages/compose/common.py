"""Blocks that several sheets share."""

from __future__ import annotations

from sheets.pages.compose.matter import Matter
from sheets.pages.document import Emphasis


def first_aid(matter: Matter) -> Emphasis:
    """What to do when oil goes under the skin."""
    fluid = matter.machine.fluid
    site, most_bar = matter.site, matter.shut_in_bar
    return Emphasis(
        lead=matter.text("first_aid_lead"),
        lines=(
            matter.text(
                "first_aid_line",
                pressure="" if most_bar is None else matter.figures.pressure(max(most_bar), up=True),
                fluid=f"{fluid.kind} {fluid.grade}",
                hospital=site.hospital if site else "",
            ),
        ),
        right=matter.text("first_aid_right", telephone=site.emergency_telephone if site else ""),
    )


def emergency(matter: Matter) -> Emphasis:
    """Where the stops are, and whom to call."""
    controls = matter.machine.controls
    stops = "; ".join(f"{place.name}, {place.where}" for place in (*controls.emergency_stop, *controls.stop))
    return Emphasis(
        lead=matter.text("emergency_lead"),
        lines=(matter.text("emergency_line", stops=stops),),
        right=matter.text(
            "first_aid_right", telephone=matter.site.emergency_telephone if matter.site else ""
        ),
    )
