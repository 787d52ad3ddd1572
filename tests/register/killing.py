"""Kills a program at random moments while it issues and records, and sees what the register has of it.

Run by itself: PYTHONPATH=. python tests/register/killing.py PLACE KILLS. A child is forked for each kill, and
tells what was acknowledged line by line; then every acknowledged event must be there, and the chain whole.
"""

from __future__ import annotations

import os
import signal
import sys
import time
from collections.abc import Callable
from dataclasses import replace
from datetime import UTC, datetime
from random import Random

from recording_bench import HOW, gauge
from register_bench import CONTENT, FILE, KEPT, MACHINE, NOON, at

from sheets.register.chain import check_chain
from sheets.register.finding import revision_of
from sheets.register.issuing import commit, reserve, sign_event
from sheets.register.opening import Place, create_register, open_register
from sheets.register.readings import Phase, Seal
from sheets.register.recording import Taken, open_job, record
from sheets.register.revisions import RevisionState, Signer
from sheets.register.saying import tell
from sheets.register.store import Register

LONGEST_S = 0.25
"""Between the child's start and its end; it acknowledges something every few milliseconds."""


def issue(register: Register, document: str, acknowledge: Callable[[str], None]) -> str:
    """A revision with one signature, issued; gives its record id."""
    held = reserve(
        register, document=document, machine="KP-2", by="Worker", when=NOON, random_bytes=os.urandom
    )
    acknowledge(f"reserved {held.record_id}")
    sign_event(register, held.record_id, who="Ines Kurz", meaning="prepared", file_digest=FILE, when=at(1))
    commit(
        register,
        held.record_id,
        content_digest=CONTENT,
        file_digest=FILE,
        machine_digest=MACHINE,
        engine=3,
        signers=[Signer(meaning="prepared", name="Ines Kurz")],
        by="Ines Kurz",
        when=at(2),
        kept=KEPT,
    )
    acknowledge(f"issued {held.record_id}")
    return held.record_id


def work(place: Place, acknowledge: Callable[[str], None]) -> None:
    """Issues a revision, then records readings of a job, again and again."""
    how = replace(HOW, when=datetime(2031, 3, 4, 18, tzinfo=UTC))
    with open_register(place, wait_s=30) as register:
        for turn in range(10_000):
            record_id = issue(register, f"WI-{turn % 3}", acknowledge)
            with register.writing() as writer:
                job = open_job(writer, record_id, how, why="yearly check")
            acknowledge(f"event {job}")
            for phase, value in ((Phase.FOUND, "206"), (Phase.LEFT, "212"), (Phase.LEFT, "205")):
                taken = Taken(row=1, phase=phase, value=value, unit="bar", instrument="8831", seal=Seal.WHOLE)
                with register.writing() as writer:
                    done = record(writer, job, taken, how)
                acknowledge(f"event {done.reading}")


def killed_once(place: Place, chance: Random) -> list[str]:
    """What a child acknowledged until it was killed; a line that isn't whole wasn't."""
    reader, writer = os.pipe()
    child = os.fork()
    if child == 0:
        os.close(reader)
        try:
            work(place, lambda line: void(os.write(writer, f"{line}\n".encode())))
        finally:
            os._exit(1)
    os.close(writer)
    time.sleep(chance.uniform(0.0, LONGEST_S))
    os.kill(child, signal.SIGKILL)
    os.waitpid(child, 0)
    with os.fdopen(reader, "rb") as told:
        return told.read().decode().split("\n")[:-1]


def void(_: object) -> None:
    """Takes what nobody wants."""


def missing(place: Place, acknowledged: list[str]) -> list[str]:
    """Whatever was acknowledged and isn't there; the chain must be whole."""
    with open_register(place, wait_s=30) as register:
        verdict = check_chain(register)
        if not verdict.holds or verdict.last is None:
            return [f"the chain is broken at {verdict.broken_at}: {verdict.broken}"]
        issued = {RevisionState.ISSUED, RevisionState.SUPERSEDED}
        lost = []
        for line in acknowledged:
            word, what = line.split()
            if word == "event":
                there = int(what) <= verdict.last.sequence
            else:
                state = revision_of(register, what).state
                there = state in issued if word == "issued" else True
            if not there:
                lost.append(line)
        return lost


def main(place: Place, kills: int, seed: int) -> int:
    """Kills so many times; 0 if nothing was lost."""
    with create_register(place, by="Ines Kurz", when=NOON) as register, register.writing() as writer:
        tell(writer, gauge(), who="Ines Kurz", when=at(5))
    chance, told, events = Random(seed), 0, 0
    for number in range(kills):
        acknowledged = killed_once(place, chance)
        told += bool(acknowledged)
        events += len(acknowledged)
        if lost := missing(place, acknowledged):
            print(f"kill {number + 1}, seed {seed}: {lost}")
            return 1
    print(f"{kills} kills, {told} after something was acknowledged, {events} acknowledged, none lost")
    return 0 if told > kills // 10 else 2


if __name__ == "__main__":
    sys.exit(main(sys.argv[1], int(sys.argv[2]), int.from_bytes(os.urandom(4))))
