"""Plain lists for the record page: machines, what is due when, one machine with its settings over time."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from datetime import date, datetime

from sheets.pages.plot import Limit, Point, plot_svg
from sheets.pipeline.looking import OpenDeviation, RevisionLine, open_deviations, revision_line
from sheets.pipeline.reading_room import ReadingRoom
from sheets.register.chain import ChainVerdict
from sheets.register.copies import copies
from sheets.register.deviations import deviations, out_of_service
from sheets.register.finding import documents_in, revisions_in
from sheets.register.inspections import clock_of
from sheets.register.instruments import instruments
from sheets.register.readings import Phase, series
from sheets.register.revisions import Revision, current
from sheets.register.rows import Row
from sheets.register.store import View


@dataclass(frozen=True, kw_only=True)
class MachineLine:
    """A document in the list of machines."""

    newest: RevisionLine
    """The current revision, or the last one where none is."""
    open: int
    """Deviations that nobody has settled."""
    out_of_service: bool


@dataclass(frozen=True, kw_only=True)
class DueLine:
    """Something that is due, or hangs open."""

    on: str
    """Day on which it is due; empty where none is set."""
    what: str
    overdue: bool
    record_id: str = ""


@dataclass(frozen=True, kw_only=True)
class SettingOverTime:
    """One setting with all its readings."""

    called: str
    plot: str
    """SVG; empty where nothing was read."""
    count: int


@dataclass(frozen=True, kw_only=True)
class MachineLook:
    """One machine."""

    tag: str
    revisions: tuple[RevisionLine, ...]
    """Newest first."""
    settings: tuple[SettingOverTime, ...]
    open: tuple[OpenDeviation, ...]
    out_of_service: str


@dataclass(frozen=True, kw_only=True)
class Lists:
    """What holds of all machines."""

    whole: bool
    """Whether the register holds together; if not, nothing else is told."""
    machines: tuple[MachineLine, ...] = ()
    due: tuple[DueLine, ...] = ()


def look_at_lists(room: ReadingRoom, *, now: datetime) -> Lists:
    """Machines by their tag, and what is due by its day. Raises InputError if the register can't be read."""

    def find(view: View, chain: ChainVerdict) -> Lists:
        if not chain.holds:
            return Lists(whole=False)
        documents = [(name, revisions_in(view, name)) for name in documents_in(view)]
        machines = (_machine_line(room, view, revisions) for _, revisions in documents if revisions)
        day = room.day(now)
        return Lists(
            whole=True,
            machines=tuple(sorted(machines, key=lambda one: (one.newest.machine, one.newest.document))),
            due=tuple(sorted(_due(view, [name for name, _ in documents], day), key=_by_day)),
        )

    return room.answer("lists", now, find)


def look_at_machine(room: ReadingRoom, tag: str, *, now: datetime) -> MachineLook | None:
    """One machine by its tag; None for one that the register doesn't know, or that it can't speak of."""

    def find(view: View, chain: ChainVerdict) -> MachineLook | None:
        if not chain.holds:
            return None
        revisions = [
            one for name in documents_in(view) for one in revisions_in(view, name) if one.machine == tag
        ]
        if not revisions:
            return None
        out = out_of_service(view, machine=tag)
        return MachineLook(
            tag=tag,
            revisions=tuple(revision_line(room, one) for one in reversed(revisions)),
            settings=tuple(_over_time(view, tag, row) for row in _rows(revisions)),
            open=open_deviations(deviations(view, machine=tag)),
            out_of_service=f"{out.said.on}: {out.said.why} ({out.said.by})" if out else "",
        )

    return room.answer(("machine", tag), now, find)


def _machine_line(room: ReadingRoom, view: View, revisions: Sequence[Revision]) -> MachineLine:
    newest = current(revisions) or revisions[-1]
    return MachineLine(
        newest=revision_line(room, newest),
        open=len(open_deviations(deviations(view, document=newest.document))),
        out_of_service=out_of_service(view, machine=newest.machine) is not None,
    )


def _rows(revisions: Sequence[Revision]) -> Iterator[Row]:
    """Rows of the newest issue that kept some."""
    kept = [one.issue.kept for one in revisions if one.issue is not None and one.issue.kept is not None]
    if kept:
        yield from kept[-1].rows


def _over_time(view: View, tag: str, row: Row) -> SettingOverTime:
    every = series(view, machine=tag, adjuster=row.adjuster)
    found = [one.said for one in every if one.said.unit == row.unit]
    points = [
        Point(on=one.on, value=float(one.value), left=one.phase is Phase.LEFT) for one in found if one.reached
    ]
    limits = [
        Limit(value=float(row.high), says=f"{row.high} {row.unit}"),
        Limit(value=float(row.low), says=f"{row.low} {row.unit}"),
        Limit(value=float(row.drift_high), says="find cause", dashed=True),
        Limit(value=float(row.drift_low), says="find cause", dashed=True),
    ]
    said = (f"{one.on} {one.phase} {one.value} {one.unit}" for one in found[-20:])
    words = f"{row.called}: {'; '.join(said)}"
    plot = plot_svg(points, limits, alternative=words) if points else ""
    return SettingOverTime(called=row.called, plot=plot, count=len(points))


def _due(view: View, documents: Sequence[str], day: date) -> Iterator[DueLine]:
    for name in documents:
        clock = clock_of(view, name)
        if clock is not None:
            yield DueLine(
                on=clock.due.isoformat(),
                what=f"inspection of {name}",
                overdue=clock.overdue_on(day),
                record_id=_current_id(view, name),
            )
        for one in copies(view, name):
            if one.to_take_down:
                yield DueLine(
                    on="",
                    what=f"take down copy {one.hung.said.copy} of {name}, revision {one.revision.number}: "
                    f"{one.hung.said.where}",
                    overdue=True,
                )
    for gauge in instruments(view).values():
        said = gauge.listed.said
        bad = ", found bad" if gauge.bad else ""
        yield DueLine(
            on=said.due.isoformat(),
            what=f"check of gauge {said.serial}{f' ({said.number})' if said.number else ''}{bad}",
            overdue=not gauge.usable_on(day),
        )
    for deviation in open_deviations(deviations(view)):
        yield DueLine(
            on="",
            what=f"deviation {deviation.number} of {deviation.machine}, open since {deviation.on}: "
            f"{deviation.what}",
            overdue=True,
            record_id=deviation.record_id,
        )


def _current_id(view: View, document: str) -> str:
    found = current(revisions_in(view, document))
    return found.record_id if found else ""


def _by_day(one: DueLine) -> tuple[bool, str, str]:
    return (bool(one.on), one.on, one.what)
