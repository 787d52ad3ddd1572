"""Several programs at once, and programs that are stopped while they write."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
import time
from pathlib import Path
from random import Random

import pytest
from register_bench import NOON, at

from sheets.register.chain import check_chain
from sheets.register.finding import document_revisions, revision_of
from sheets.register.issuing import LEFT_OVER, void_left_over
from sheets.register.opening import Place, open_register
from sheets.register.revisions import RevisionState
from sheets.register.store import Register

WORKER = """
import os, sys
from datetime import UTC, datetime
from sheets.register.issuing import reserve
from sheets.register.opening import open_register

place, count, document, machine = sys.argv[1:]
with open_register(place, wait_s=120) as register:
    print("ready", flush=True)
    sys.stdin.readline()
    for _ in range(int(count)):
        held = reserve(register, document=document, machine=machine, by="Worker",
                       when=datetime(2031, 3, 4, 13, tzinfo=UTC), random_bytes=os.urandom)
        print(held.number, held.record_id, flush=True)
"""


def start(root: Path, place: Place, count: int) -> subprocess.Popen[str]:
    return subprocess.Popen(
        [sys.executable, "-c", WORKER, str(place), str(count), "WI-204", "KP-2"],
        stdin=subprocess.PIPE,
        stdout=subprocess.PIPE,
        text=True,
        env={**os.environ, "PYTHONPATH": str(root)},
    )


def go(worker: subprocess.Popen[str]) -> None:
    assert worker.stdout.readline() == "ready\n"
    worker.stdin.write("go\n")
    worker.stdin.flush()


WRITERS, EACH = 8, 15


def test_eight_programs_never_hold_the_same_revision(register: Register, place: Place, root: Path) -> None:
    workers = [start(root, place, EACH) for _ in range(WRITERS)]
    for worker in workers:
        go(worker)
    told = [line.split() for worker in workers for line in worker.communicate(timeout=240)[0].splitlines()]
    assert [worker.returncode for worker in workers] == [0] * WRITERS
    numbers = sorted(int(number) for number, _ in told)
    assert numbers == list(range(1, WRITERS * EACH + 1))
    revisions = document_revisions(register, "WI-204")
    assert {str(one.number): one.record_id for one in revisions} == dict(told)
    assert [one.state for one in revisions] == [RevisionState.VOID] * (WRITERS * EACH - 1) + [
        RevisionState.RESERVED
    ]
    assert check_chain(register).holds


def test_a_program_killed_while_it_reserves_loses_nothing_acknowledged(
    register: Register, place: Place, root: Path
) -> None:
    register.close()
    chance = Random()
    told: dict[str, int] = {}
    for _ in range(8):
        worker = start(root, place, 100_000)
        go(worker)
        time.sleep(chance.uniform(0.002, 0.12))
        worker.send_signal(signal.SIGKILL)
        output, _ = worker.communicate(timeout=60)
        lines = output.split("\n")[:-1]  # the last piece isn't a whole line: not acknowledged
        told |= {record_id: int(number) for number, record_id in (line.split() for line in lines)}
        with open_register(place) as opened:
            assert check_chain(opened).holds
            kept = {one.record_id: one.number for one in document_revisions(opened, "WI-204")}
            assert told.items() <= kept.items()
    assert told
    with open_register(place) as opened:
        (left,) = void_left_over(opened, reserved_before=at(90), by="Ines Kurz", when=NOON)
        assert revision_of(opened, left.record_id).reason == LEFT_OVER


STOPPED = """
import os, sys
from datetime import UTC, datetime
from pathlib import Path
from sheets.register.events import Entry, EventKind
from sheets.register.opening import open_register

with open_register(Path(sys.argv[1])) as register, register.writing() as writer:
    writer._connection.exec_driver_sql("PRAGMA cache_size = 5")  # so that pages reach the file before the end
    for _ in range(500):
        writer.append(Entry(when=datetime(2031, 3, 4, tzinfo=UTC), who="Worker", kind=EventKind.VOIDED))
    os._exit(9)
"""


@pytest.mark.parametrize("read_only", [True, False])
def test_half_a_transaction_in_the_file_is_taken_back_by_the_next_who_opens_it(
    register: Register, path: Path, root: Path, read_only: bool
) -> None:
    register.close()
    whole = path.read_bytes()
    done = subprocess.run(
        [sys.executable, "-c", STOPPED, str(path)], env={**os.environ, "PYTHONPATH": str(root)}, check=False
    )
    assert done.returncode == 9
    assert path.read_bytes() != whole
    with open_register(path, read_only=read_only) as opened:
        assert check_chain(opened).last.sequence == 1
    assert path.read_bytes() == whole


@pytest.mark.usefixtures("register")
def test_an_open_reader_goes_on_when_a_writer_was_stopped(path: Path, root: Path) -> None:
    """A page that shows the register stays up."""
    with open_register(path, read_only=True) as reader:
        assert check_chain(reader).holds
        subprocess.run(
            [sys.executable, "-c", STOPPED, str(path)],
            env={**os.environ, "PYTHONPATH": str(root)},
            check=False,
        )
        assert check_chain(reader).last.sequence == 1
