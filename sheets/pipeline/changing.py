"""What a new revision changes, against what the register kept of the one before: targets, parts, steps.

Both sides are taken as they were printed, so what another engine would make of the old file today is no part
of it.
"""

from __future__ import annotations

import json
from collections.abc import Iterator, Mapping
from difflib import SequenceMatcher
from typing import Any, Final

from sheets import ENGINE
from sheets.errors import JamnutError, Problem, RefusedError, quoted
from sheets.pages.compose.matter import Matter
from sheets.pages.document import SheetKind
from sheets.pipeline.describing import check_sources
from sheets.pipeline.keeping import rows_of, sources_of
from sheets.register.kept import Kept
from sheets.register.revisions import Revision
from sheets.register.rows import Row
from sheets.wording.difference import change_line, file_changes

_ORDERS: Final = {SheetKind.WORK_INSTRUCTION.value, SheetKind.LOCKOUT.value}
"""Documents that hold steps."""


def hold_changed(before: Revision | None, digest: str) -> None:
    """Only changed content makes a revision; ``digest`` is the new content's. Raises RefusedError."""
    if before is None or before.issue is None or before.issue.content_digest != digest:
        return
    raise RefusedError(
        Problem(
            where=f"document {quoted(before.document)}",
            what=f"Nothing has changed since revision {before.number}: the content is {digest} still.",
            fix="Go on working from that revision; print its file again where a copy is needed.",
        )
    )


def hold_reason(before: Revision | None, reason: str) -> None:
    """A revision that takes another's place says why. Raises RefusedError."""
    if before is None or reason:
        return
    raise RefusedError(
        Problem(
            where="--reason",
            what=f"Revision {before.number} is current, and nothing says why another takes its place.",
            fix="Say it with --reason; it is printed with the list of what changed.",
        )
    )


def changes_since(kept: Kept, matter: Matter, content: bytes) -> tuple[str, ...]:
    """What is printed of a revision's changes; ``content`` is the new one's canonical form."""
    old = json.loads(kept.content)
    lines = list(computed_changes(kept, matter, content))
    if old.get("engine") != str(ENGINE) and old.get("engine") != ENGINE:
        lines.append(f"computed by engine {ENGINE}, before by engine {old.get('engine')}")
    return tuple(lines) or ("wording or layout of the sheets only",)


def computed_changes(kept: Kept, matter: Matter, content: bytes) -> Iterator[str]:
    """One line for each change of targets, parts and steps; ``content`` as in `changes_since`."""
    yield from _targets(kept.rows, rows_of(matter))
    yield from _files(kept, matter)
    yield from _steps(_orders(json.loads(kept.content)), _orders(json.loads(content)))


def _targets(old: tuple[Row, ...], new: tuple[Row, ...]) -> Iterator[str]:
    before, after = ({row.adjuster: row for row in rows} for rows in (old, new))
    for adjuster in dict.fromkeys((*before, *after)):
        was, now = before.get(adjuster), after.get(adjuster)
        if was is None or now is None:
            row = now or was
            if row is not None:
                sign = "new target" if was is None else "target gone"
                yield f"{sign} {row.called}: {row.target} {row.unit}"
            continue
        if (was.target, was.unit) != (now.target, now.unit):
            yield f"target {now.called}: {was.target} {was.unit} → {now.target} {now.unit}"
        for called, one, other in (
            ("accept", _window(was), _window(now)),
            ("never exceed", f"{was.never_exceed} {was.unit}", f"{now.never_exceed} {now.unit}"),
            ("gauge", f"{was.gauge} {was.test_point}".strip(), f"{now.gauge} {now.test_point}".strip()),
        ):
            if one != other:
                yield f"{called} {now.called}: {one} → {other}"


def _window(row: Row) -> str:
    return f"{row.low} to {row.high} {row.unit}"


def _files(kept: Kept, matter: Matter) -> Iterator[str]:
    try:
        old = check_sources(sources_of(kept)).machine
    except JamnutError:
        yield "parts: not compared, since this version can't read the machine file of the revision before"
        return
    for change in file_changes(old, matter.machine, matter.machine.units):
        yield f"{change.section} {change_line(change).strip()}"


Orders = dict[str, list[tuple[str, str]]]


def _orders(content: Mapping[str, Any]) -> Orders:
    """Orders of a content with all that stands with them, by the title of their section."""
    found: Orders = {}
    for section in content["sections"]:
        if section["kind"] not in _ORDERS:
            continue
        place = f"{section['title']} {section['subject']}".strip()
        for block in section["blocks"]:
            steps = block.get("steps", ()) if block["is"] == "Steps" else block.get("rows", ())
            if block["is"] in ("Steps", "Act"):
                found.setdefault(place, []).extend((one["order"], _with_order(one)) for one in steps)
    return found


def _with_order(step: Mapping[str, Any]) -> str:
    """Lines, boxes, warnings and hold of a step: everything but its order and its number."""
    return json.dumps({key: value for key, value in step.items() if key not in ("number", "order")})


def _steps(old: Orders, new: Orders) -> Iterator[str]:
    for place in dict.fromkeys((*old, *new)):
        was, now = old.get(place, []), new.get(place, [])
        orders = [[order for order, _ in side] for side in (was, now)]
        for tag, a, b, c, d in SequenceMatcher(None, orders[0], orders[1], autojunk=False).get_opcodes():
            if tag == "equal":
                for (order, one), (_, other) in zip(was[a:b], now[c:d], strict=True):
                    if one != other:
                        yield f"step of '{place}': {order} What stands with it changed."
                continue
            if b - a == d - c:
                for (order, _), (other, _) in zip(was[a:b], now[c:d], strict=True):
                    yield f"step of '{place}': {order} → {other}"
                continue
            for order, _ in was[a:b]:
                yield f"step gone from '{place}': {order}"
            for order, _ in now[c:d]:
                yield f"step new in '{place}': {order}"
