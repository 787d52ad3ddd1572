"""A register with an issued revision, a gauge and an open job, for the tests of recording."""

from __future__ import annotations

from collections.abc import Callable
from contextlib import contextmanager

import pytest
from register_bench import NOON, at

from sheets.errors import RefusedError
from sheets.register.chain import check_chain
from sheets.register.deviations import DeviationKind, Standing, deviations
from sheets.register.instruments import InstrumentListed
from sheets.register.readings import KeptReading, Phase, Seal, readings
from sheets.register.recording import Recorded, Taken, Telling, open_job, record
from sheets.register.revisions import Revision
from sheets.register.saying import tell
from sheets.register.store import Register

DAY = NOON.date()
HOW = Telling(by="Ines Kurz", when=at(10), on=DAY, people=("Ada Quarrow", "Bram Tolliver"))


def gauge(serial: str = "8831", **other: object) -> InstrumentListed:
    values: dict[str, object] = {
        "serial": serial,
        "number": "17",
        "what": "dial gauge",
        "range_end": "400",
        "unit": "bar",
        "largest_error": "2.40",
        "accuracy_class": "0.6",
        "certificate": "C-204",
        "due": DAY,
        **other,
    }
    return InstrumentListed(**values)  # type: ignore[arg-type]  # checked by the class


class Bench:
    """A register with an issued revision, a gauge that is due today, and a job."""

    def __init__(self, register: Register, revision: Revision) -> None:
        self.register = register
        self.revision = revision
        with register.writing() as writer:
            tell(writer, gauge(), who="Ines Kurz", when=at(5))
            self.job = open_job(writer, revision.record_id, HOW, why="yearly check")

    def take(self, phase: Phase, value: str, row: int = 1, how: Telling = HOW, **other: object) -> Recorded:
        given: dict[str, object] = {
            "unit": "bar",
            "instrument": "8831",
            "seal": Seal.WHOLE,
            "job": self.job,
            **other,
        }
        job = given.pop("job")
        with self.register.writing() as writer:
            taken = Taken(row=row, phase=phase, value=value, **given)  # type: ignore[arg-type]  # checked there
            return record(writer, job, taken, how)  # type: ignore[arg-type]  # a number

    def left(self, value: str, row: int = 1, **other: object) -> Recorded:
        """As found in its window, then as left."""
        if not any(one.said.row == row for one in self.readings()):
            self.take(Phase.FOUND, {1: "206", 2: "190"}[row], row)
        return self.take(Phase.LEFT, value, row, **other)

    def do(self, act: Callable[..., object], *arguments: object, **named: object) -> object:
        with self.register.writing() as writer:
            return act(writer, *arguments, **named)

    def readings(self) -> list[KeptReading]:
        with self.register.reading() as view:
            return list(readings(view))

    def deviations(self) -> list[tuple[DeviationKind, Standing]]:
        with self.register.reading() as view:
            return [(one.noted.said.kind, one.standing) for one in deviations(view)]


@contextmanager
def refused(bench: Bench, says: str, error: type[Exception] = RefusedError):
    """It is refused with those words, and nothing is told."""
    before = check_chain(bench.register).last
    with pytest.raises(error, match=says):
        yield
    assert check_chain(bench.register).last == before
