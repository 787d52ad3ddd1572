"""What the sheets say, neutral to paper: headings, steps, warnings, faces, tables, tags.

Every number stands here as the string that is printed, so the content digest is taken from these values.
Nothing here knows a position on paper. Only a gauge face carries plain numbers, since a face is drawn.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum
from typing import Literal


class SheetKind(Enum):
    """Documents that make up a pack; the value is the word on a command line and in a bookmark."""

    COVER = "cover"
    WORK_INSTRUCTION = "instruction"
    LOCKOUT = "lockout"
    TAGS = "tags"
    RECORD = "record"
    ENGINEER = "engineer"


class PowerState(Enum):
    """Banner of a page with steps."""

    LOCKED = "LOCKED"
    POWERED = "POWERED"


@dataclass(frozen=True, kw_only=True)
class Banner:
    """State of the machine on this page, by word and by shape."""

    state: PowerState
    word: str
    left: str = ""
    right: str = ""


@dataclass(frozen=True, kw_only=True)
class Heading:
    """A heading inside a sheet. Never the last thing on a page."""

    text: str
    level: Literal[1, 2] = 1
    light: str = ""
    """Said beside it, in light type."""


@dataclass(frozen=True, kw_only=True)
class Paragraph:
    text: str
    weight: Literal["plain", "strong", "small"] = "plain"


@dataclass(frozen=True, kw_only=True)
class Warning:
    """Signal word, then hazard, consequence and avoidance. Stands directly before its step, on its page."""

    signal: Literal["DANGER", "WARNING", "CAUTION", "NOTICE"]
    hazard: str
    lines: tuple[str, ...]


@dataclass(frozen=True, kw_only=True)
class Box:
    """A blank box to write in. Always blank on paper."""

    label: str
    unit: str = ""
    size: Literal["tick", "short", "medium", "wide"] = "short"
    strong: bool = False
    signed: bool = False
    """For a person's name or sign: a draft says in its place that it is not signed."""
    never_exceed: str = ""
    """Printed below a box for a reading, for example 'never exceed 250 bar'."""


@dataclass(frozen=True, kw_only=True)
class Step:
    """One instruction: the order short and heavy, the reason or reading light below."""

    number: str
    order: str
    lines: tuple[str, ...] = ()
    """Computed reason, expected reading, stop rule; light, in this order."""
    boxes: tuple[Box, ...] = (Box(label="", size="tick"),)
    warnings: tuple[Warning, ...] = ()
    hold: Hold | None = None


@dataclass(frozen=True, kw_only=True)
class Hold:
    """A hold point: a second person's check, with its reason and lines for name, sign and time."""

    word: str
    order: str
    reason: str
    fields: tuple[str, ...] = ("name", "sign", "time")


@dataclass(frozen=True, kw_only=True)
class GaugeFace:
    """A gauge as the technician sees it, in the unit of its own scale."""

    gauge: str
    caption: str
    unit: str
    digital: bool
    scale_end: float
    graduation: float
    """Smallest division of a dial, resolution of a digital gauge."""
    target: float
    window: tuple[float, float]
    never_exceed: float
    target_text: str
    window_text: str
    never_exceed_text: str
    second_unit_text: str = ""
    """Target and window in the second unit, for example '2988 psi (2930 to 3046)'."""


@dataclass(frozen=True, kw_only=True)
class SettingPanel:
    """Beside the steps of a setting: face, boxes to write in, the three numbers."""

    face: GaugeFace
    boxes: tuple[Box, ...]
    target_label: str = "target"
    window_label: str = "accept"
    never_exceed_label: str = "never exceed"
    notes: tuple[str, ...] = ()


@dataclass(frozen=True, kw_only=True)
class Steps:
    """A run of steps, with a setting panel beside them where a pressure is read or set."""

    steps: tuple[Step, ...]
    panel: SettingPanel | None = None


@dataclass(frozen=True, kw_only=True)
class Act:
    """One act of the lockout sheet (stop, isolate, block, relieve, verify) with its rows."""

    number: str
    name: str
    rows: tuple[Step, ...]
    """Rows carry no number of their own."""


@dataclass(frozen=True, kw_only=True)
class KeyLines:
    """Bold key, plain text: 'If it trips here   HV2 shut, pump off …'."""

    rows: tuple[tuple[str, str], ...]


@dataclass(frozen=True, kw_only=True)
class Table:
    """A plain ruled table. Rows are not cut by a page; the head repeats."""

    title: str
    head: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    shares: tuple[float, ...]
    """Width of each column as a share of the whole; sums to 1."""
    blank_rows: int = 0
    """Rows to write in, below the filled ones."""
    light: str = ""
    """Said beside the title."""
    row_height_mm: float | None = None
    signed: bool = False
    """The blank rows are for names and signs: a draft keeps their room and says that it is not signed."""


@dataclass(frozen=True, kw_only=True)
class Emphasis:
    """A framed text that must be seen: first aid, emergency."""

    lead: str
    lines: tuple[str, ...]
    right: str = ""


@dataclass(frozen=True, kw_only=True)
class SettingTag:
    """One setting tag, ISO/IEC 7810 ID-1 size."""

    id: str
    """Adjuster that it belongs to: two may sit on one part."""
    adjuster: str
    """As it stands large on the tag: the part."""
    kind: str
    face: GaugeFace
    value: str
    window: str
    second_unit: str
    basis: tuple[str, ...]
    """Light lines: deadheaded, at what flow and oil temperature; relation; direction and seal."""
    as_left: str
    next_check: str
    footer: str


@dataclass(frozen=True, kw_only=True)
class TagSheet:
    """Tags to cut out, as many to a page as fit, with cut marks."""

    tags: tuple[SettingTag, ...]


Block = Heading | Paragraph | Warning | Steps | Act | Hold | KeyLines | Table | Emphasis | TagSheet


@dataclass(frozen=True, kw_only=True)
class Section:
    """Blocks that begin on a page of their own; on each of its pages the banner and the head repeat."""

    kind: SheetKind
    bookmark: str
    title: str
    subject: str
    """Large at the right of the title: RV1, PU-07."""
    lines: tuple[str, ...]
    """Light lines under the title."""
    banner: Banner | None
    blocks: tuple[Block, ...]


@dataclass(frozen=True, kw_only=True)
class PageWords:
    """The few words of the page frame, in the language of the document."""

    draft: str = "DRAFT"
    not_issued: str = "not issued"
    not_signed: str = "not signed as a draft"
    revision: str = "rev"
    page: str = "page {number} of {total}"
    machine_data: str = "machine data"
    content: str = "content"
    continued: str = "continued"
    issued: str = "issued"
    state: str = "state"
    changes: str = "changes"
    more_changes: str = "and {count} more, which travel in this file and stand in the register"
    reason: str = "reason"
    reviewed: str = "reviewed by"
    target: str = "target"
    accept: str = "accept"
    never_exceed: str = "never exceed"
    code: str = "code with the record address"
    """Said in its place to who hears the page."""


@dataclass(frozen=True, kw_only=True)
class Document:
    """The content of a pack. Revision, names, dates of issue and the record id are not content."""

    number: str
    title: str
    """For the footer: name, tag, plant."""
    language: str
    data_dated: str
    engine: str
    sections: tuple[Section, ...]
    footer: str
    """Not valid unless checked current…"""
    words: PageWords = PageWords()


@dataclass(frozen=True, kw_only=True)
class IssueContext:
    """What an issued pack adds to its content. A draft has none: no code, no boxes to sign."""

    record_id: str
    record_address: str
    """Base address; the code holds <address>/r/<id>?d=<8 of the digest>&v=<revision>."""
    revision: str
    state: str
    date: str
    zone: str
    mark: str = ""
    """A word that every page and tag carries beside the revision, such as DEMONSTRATION; mostly none."""
    signers: tuple[tuple[str, str], ...] = ()
    """Meaning and name: prepared, checked, approved."""
    changes: tuple[str, ...] = ()
    """What changed since the revision before, one line each; the title block prints as many as fit."""
    reason: str = ""
    """Why it takes the place of the revision before."""
    reviewer: str = ""
    """Who judged what changed."""
    as_left: tuple[tuple[str, str], ...] = ()
    """Adjuster and as-left line for its tag."""


@dataclass(frozen=True, kw_only=True)
class Layout:
    """Options that shape pages and not content."""

    paper: Literal["A4", "Letter"] = "A4"
    kinds: tuple[SheetKind, ...] = tuple(SheetKind)
    """Documents to print; the combined pack is all of them."""
