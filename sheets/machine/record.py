"""The record file: a job as it was written on paper, or is told by a script, with its readings and acts.

Readings name the printed row and carry the unit that is printed there, so none lands in another row unseen.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Annotated, Literal

from pydantic import Field

from sheets.machine.fields import Entry, FormatNumber, IsoDate, Text, YesNo
from sheets.machine.flaws import Flaw
from sheets.machine.words import Name, Wording

Figure = Annotated[
    str,
    Name(
        pattern=r"[+-]?[0-9]{1,6}(?:\.[0-9]{1,4})? (?:bar|psi|MPa)",
        says="digits and the unit that is printed in the row",
        example="206 bar",
    ),
]
Celsius = Annotated[
    str,
    Name(
        pattern=r"-?[0-9]{1,3}(?:\.[0-9])? °C", says="an oil temperature in °C", example="48 °C", longest=12
    ),
]
Clock = Annotated[
    str,
    Name(
        pattern=r"(?:[01][0-9]|2[0-3]):[0-5][0-9]",
        says="a time of day with hours and minutes",
        example="14:05",
        longest=5,
    ),
]
Number = Annotated[
    str,
    Name(pattern=r"[1-9][0-9]{0,8}", says="a whole number from 1", example="30", longest=9),
]
RecordId = Annotated[
    str,
    Name(pattern=r"[0-9A-Za-z]{10}", says="the record id as printed, 10 characters", example="0123456789"),
]
Person = Annotated[str, Wording(longest=60, example="the name as it is signed")]
Serial = Annotated[str, Wording(longest=60, example="the serial number on the gauge")]


class RecordReading(Entry):
    """One row of the record sheet."""

    row: Number
    """Its printed number."""
    as_found: Figure = ""
    """The reading before any screw was touched."""
    reached: YesNo = True
    """No: another limit came first, at the pressure written as found."""
    as_left: Figure = ""
    """The reading at last."""
    gauge: Serial
    """Serial number of the gauge, or the works' own number."""
    oil: Celsius = ""
    """Oil temperature at the reading."""
    seal: Literal["whole", "broken", "none", "new"]
    """How the adjuster's seal stood; new after a setting."""
    seal_number: Text = ""
    """Of a new seal, if it has one."""
    at: Clock = ""
    """Time of day of the reading."""

    def contradictions(self) -> Iterator[Flaw]:
        yield from super().contradictions()
        if not self.as_found and not self.as_left:
            yield Flaw(
                at=("row",),
                what="The row has neither a reading as found nor one as left.",
                fix="Write what was read, or leave the row out.",
            )


class RecordLock(Entry):
    """A lock, from when it went on until it came off."""

    where: Text
    """Isolator or valve, as on the sheet."""
    lock: Text
    """Number or name on the lock."""
    by: Person
    """Whose lock it is."""
    on_at: Clock = ""
    """Time of day when it went on."""
    off: YesNo = True
    """No: it is on still."""
    off_at: Clock = ""
    """Time of day when it came off."""


class RecordZero(Entry):
    """A volume that was seen without pressure."""

    where: Text
    """Volume or test point, as on the sheet."""
    value: Figure
    """What the gauge showed."""
    gauge: Serial
    """Serial number of the gauge, or the works' own number."""
    moved: YesNo
    """Whether it was seen to move there in this job."""
    by: Person
    """Who read it."""
    at: Clock = ""
    """Time of day."""


class RecordWindow(Entry):
    """A powered window."""

    people: tuple[Person, ...] = Field(min_length=1)
    """Who was within reach."""
    where: Text
    """Who stood where."""
    minutes: Number
    """How long it was allowed."""
    opened: Clock = ""
    """Time of day when power came on."""
    closed: Clock = ""
    """Time of day when it was off again and locked."""


class RecordTold(Entry):
    """People whom the machine concerns, told before or after."""

    when: Literal["before", "after"]
    """Before the work, or after it."""
    people: tuple[Person, ...] = Field(min_length=1)
    """Who was told."""
    at: Clock = ""
    """Time of day."""


class RecordDeviation(Entry):
    """Something that was otherwise than the sheet says."""

    what: Text
    """What was different."""
    row: Number = ""
    """Row that it is about, if any."""


class RecordFile(Entry):
    """One job."""

    format: FormatNumber
    """Number of the file format; 1."""
    record: RecordId
    """Record id of the sheets that were worked from."""
    job: Number = ""
    """Number of a job that is open; without it, one is opened."""
    why: Text = ""
    """Why the job is done; needed where one is opened."""
    day: IsoDate
    """Day of the work."""
    people: tuple[Person, ...] = Field(min_length=1)
    """Who worked on it; the first tells the readings."""
    from_paper: YesNo
    """Yes: copied from a sheet that was filled in by hand."""
    told: tuple[RecordTold, ...] = ()
    """People told before and after."""
    locks: tuple[RecordLock, ...] = ()
    """Locks, in the order in which they went on."""
    zeros: tuple[RecordZero, ...] = ()
    """Volumes seen without pressure."""
    windows: tuple[RecordWindow, ...] = ()
    """Powered windows, in their order."""
    readings: tuple[RecordReading, ...] = ()
    """Rows of the record sheet."""
    deviations: tuple[RecordDeviation, ...] = ()
    """What was otherwise than the sheet says, beside the readings."""
    end: Literal["", "done", "out of service"] = ""
    """How the job ended; left out, it stays open."""

    def contradictions(self) -> Iterator[Flaw]:
        yield from super().contradictions()
        if not self.job and not self.why:
            yield Flaw(
                at=("why",),
                what="No job is named, and nothing says why one is opened.",
                fix="Write the number of the open job, or why the work is done.",
            )
        rows = [one.row for one in self.readings]
        for place, row in enumerate(rows):
            if row in rows[:place]:
                yield Flaw(
                    at=("readings", place, "row"),
                    what=f"Row {row} stands twice.",
                    fix="Write each row once, as found and as left together.",
                )
