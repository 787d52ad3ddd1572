"""A year of an invented works as its register was told of it: two machines, people, gauges, work, papers."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from datetime import UTC, date, datetime, timedelta
from random import Random

from sheets.register.acts import WindowOpened, ZeroRead
from sheets.register.copies import CopyHung, CopyTakenDown
from sheets.register.deviations import DeviationAccepted, DeviationCorrected, DeviationKind, DeviationNoted
from sheets.register.inspecting import Telling, inspect
from sheets.register.inspections import Inspected
from sheets.register.instruments import InstrumentListed
from sheets.register.issuing import commit, reserve, withdraw
from sheets.register.jobs import JobOpened
from sheets.register.listing_instruments import found_bad, list_instrument
from sheets.register.listing_people import authorise, end_authorisation, train
from sheets.register.people import AuthorisationEnded, Authorised, Trained
from sheets.register.readings import Phase, Reading, Seal
from sheets.register.revisions import Revision, Signer
from sheets.register.saying import Said, tell
from sheets.register.store import Register

ADA, BRAM, CLEO = "Ada Quarrow", "Bram Tolliver", "Cleo Harnett"
EDDA, GITA = "Edda Fenn", "Gita Stoll"
PRESS, MIXER = "WI-0151", "WI-0142"
START = datetime(2026, 1, 12, 7, tzinfo=UTC)
TODAY = date(2027, 2, 1)
CONTENTS = ("AAAA1111BBBB2222", "CCCC3333DDDD4444", "EEEE5555FFFF6666")


@dataclass
class Year:
    """Tells one thing after the other; keeps the numbers that questions are about."""

    register: Register
    chance: Callable[[int], bytes]
    at: datetime = START

    def on(self, month: int, day: int, year: int = 2026) -> date:
        """Moves on to that day."""
        self.at = datetime(year, month, day, 7, tzinfo=UTC)
        return self.at.date()

    def tell(self, said: Said, revision: Revision, who: str = ADA) -> int:
        self.at += timedelta(minutes=1)
        with self.register.writing() as writer:
            return tell(
                writer,
                said,
                who=who,
                when=self.at,
                machine=revision.machine,
                document=revision.document,
                record_id=revision.record_id,
            )

    def issue(self, document: str, machine: str, content: str) -> Revision:
        held = reserve(
            self.register, document=document, machine=machine, by=ADA, when=self.at, random_bytes=self.chance
        )
        return commit(
            self.register,
            held.record_id,
            content_digest=content,
            file_digest="ab" * 32,
            machine_digest="FEDCBA9876543210",
            engine=1,
            signers=[
                Signer(meaning=meaning, name=name)
                for meaning, name in zip(("prepared", "checked", "approved"), (ADA, BRAM, CLEO), strict=True)
            ],
            by=CLEO,
            when=self.at + timedelta(minutes=5),
            ink=True,
        )


@dataclass(frozen=True, kw_only=True)
class Numbers:
    """Events and papers that questions are about."""

    mixer: tuple[Revision, Revision]
    job: int
    found: int
    left: int
    zero: int
    deviation: int
    accepted: int
    corrected: int
    inspection: int
    open_deviation: int


def tell_year(register: Register) -> Numbers:
    """All of it. What was told of the first revision of the mixer stays with it."""
    year = Year(register=register, chance=Random(11).randbytes)
    for name, what in (
        (ADA, "lockout"),
        (BRAM, "lockout"),
        (ADA, "setting under power"),
        (EDDA, "inspection"),
    ):
        said = Authorised(name=name, what=what, since=START.date(), by=GITA)
        authorise(register, said, when=year.at)
    for name in (ADA, BRAM):
        said = Trained(name=name, what="lockout", on=START.date(), until=date(2029, 1, 11), by=GITA)
        train(register, said, today=START.date(), when=year.at)
    gauges = (
        ("BT-4471", "17", "400", "1.0", "4", "C-2209", date(2027, 5, 31)),
        ("BT-4502", "18", "40", "0.6", "0.24", "C-2210", date(2026, 12, 31)),
        ("DG-11", "", "600", "", "0.6", "C-2214", date(2027, 3, 31)),
    )
    listed = {}
    for serial, number, end, of_class, error, certificate, due in gauges:
        listed[serial] = list_instrument(
            register,
            InstrumentListed(
                serial=serial,
                number=number,
                what="dial gauge" if of_class else "digital gauge",
                range_end=end,
                unit="bar",
                largest_error=error,
                accuracy_class=of_class,
                certificate=certificate,
                due=due,
            ),
            by=GITA,
            when=year.at,
        )
    year.on(2, 2)
    first = year.issue(MIXER, "PU-07", CONTENTS[0])
    press = year.issue(PRESS, "PU-11", CONTENTS[1])
    hung = year.on(2, 3)
    year.tell(CopyHung(copy=1, where="door of the pump room, inside", by=BRAM, on=hung), first)
    year.tell(CopyHung(copy=2, where="control desk", by=BRAM, on=hung), first)
    year.tell(CopyHung(copy=1, where="press, left column", by=BRAM, on=hung), press)
    day = year.on(3, 9)
    job = year.tell(JobOpened(task="set", why="yearly setting", people=(ADA, BRAM), on=day), first)

    def reading(phase: Phase, value: str) -> Reading:
        return Reading(
            job=job,
            row=1,
            adjuster="RV1",
            phase=phase,
            value=value,
            unit="bar",
            instrument="BT-4471",
            listing=listed["BT-4471"],
            oil_c="48",
            seal=Seal.NEW,
            people=(ADA, BRAM),
            on=day,
            clock="09:40",
        )

    window = WindowOpened(job=job, people=(ADA, BRAM), where="Ada at RV1", minutes=20, by=BRAM, on=day)
    zero = year.tell(
        ZeroRead(
            job=job, where="TP1", value="0", unit="bar", instrument="BT-4471", moved=True, by=ADA, on=day
        ),
        first,
    )
    year.tell(window, first)
    found = year.tell(reading(Phase.FOUND, "198"), first)
    left = year.tell(reading(Phase.LEFT, "212"), first)
    deviation = year.tell(
        DeviationNoted(
            job=job,
            kind=DeviationKind.WINDOW,
            what="relief valve RV1 was left at 212 bar; accepted are 202 to 210",
            row=1,
            reading=left,
            by=ADA,
            on=day,
        ),
        first,
    )
    accepted = year.tell(
        DeviationAccepted(
            deviation=deviation, by=CLEO, why="until the new spring is fitted", on=year.on(3, 10)
        ),
        first,
        who=CLEO,
    )
    day = year.on(4, 20)
    corrected = year.tell(
        DeviationCorrected(
            deviation=deviation, by=ADA, how="spring fitted, set again to 206 bar", reading=left, on=day
        ),
        first,
    )
    day = year.on(9, 14)
    made, open_ones = inspect(
        register,
        first.record_id,
        Inspected(
            on=day,
            employees=(ADA, BRAM),
            inspector=EDDA,
            deviations=("tag of Q1 unreadable", "HV2 has no lock point"),
            corrections=("new tag put on",),
        ),
        Telling(by=EDDA, when=year.at, today=day),
    )
    year.on(11, 2)
    second = year.issue(MIXER, "PU-07", CONTENTS[2])
    day = year.on(11, 3)
    year.tell(CopyTakenDown(copy=1, by=BRAM, on=day), first)
    year.tell(CopyHung(copy=3, where="door of the pump room, inside", by=BRAM, on=day), second)
    year.on(12, 1)
    ended = AuthorisationEnded(
        name=BRAM, what="lockout", last=date(2026, 11, 30), why="changed works", by=GITA
    )
    end_authorisation(register, ended, when=year.at)
    found_bad(
        register,
        "18",
        what="sticks at 9 bar",
        good_until=date(2026, 6, 30),
        on=year.at.date(),
        by=GITA,
        when=year.at,
    )
    kiln = year.issue("WI-0139", "PU-03", "GGGG7777HHHH8888")
    withdraw(register, kiln.record_id, reason="pump of another make fitted", by=CLEO, when=year.at)
    return Numbers(
        mixer=(first, second),
        job=job,
        found=found,
        left=left,
        zero=zero,
        deviation=deviation,
        accepted=accepted,
        corrected=corrected,
        inspection=made.number,
        open_deviation=open_ones[0],
    )
