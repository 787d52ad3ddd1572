"""Kills a program at random moments while it issues packs, and sees what stands where the pack belongs.

Run by itself: PYTHONPATH=. python tests/issuing/killing_issues.py FOLDER KILLS, where FOLDER isn't there yet.
"""

from __future__ import annotations

import hashlib
import os
import signal
import sys
import time
from pathlib import Path
from random import Random

from works import LATER, WHEN, Chance, Works

from sheets import pipeline
from sheets.machine.files import aside_of
from sheets.pages.compose.matter import Matter
from sheets.register.revisions import RevisionState

SAMPLE = Path(__file__).resolve().parents[2] / "sample_machines" / "kiln_pusher.yaml"
NAME = "name: Kiln-car pusher power unit"
LONGEST_S = 3.0
"""Between the child's start and its end: an issue takes about half of it, mostly for printing."""


def jobs(works: Works) -> list[Matter]:
    """Two that differ in their name: only what has changed can be issued."""
    text = works.machine.read_text(encoding="utf-8")
    found = []
    for name in (NAME, f"{NAME} 2"):
        works.machine.write_text(text.replace(NAME, name), encoding="utf-8")
        found.append(pipeline.steps(pipeline.check(works.machine)))
    return found


def killed_once(works: Works, matters: list[Matter], turn: int, wait_s: float) -> int:
    """How many issues were acknowledged until the child was killed, ``wait_s`` after it began."""
    reader, writer = os.pipe()
    child = os.fork()
    if child == 0:
        os.close(reader)
        try:
            for more in range(1000):
                current = current_digest(works)
                matter = next(one for one in matters if pipeline.content(one)[1] != current)
                works.issue(matter, random_bytes=Chance((7 * turn + more) % 251))
                os.write(writer, b"issued\n")
        finally:
            os._exit(1)
    os.close(writer)
    time.sleep(wait_s)
    os.kill(child, signal.SIGKILL)
    os.waitpid(child, 0)
    works.take_back()
    with os.fdopen(reader, "rb") as told:
        return told.read().count(b"\n")


def current_digest(works: Works) -> str:
    return next(
        (one.issue.content_digest for one in works.revisions() if one.state is RevisionState.ISSUED), ""
    )


def wrong(works: Works) -> str:
    """What is wrong with the files; empty if nothing is. The register has to hold, or this raises."""
    issued = {one.issue.file_digest: one for one in works.revisions() if one.issue is not None}
    pack = hashlib.sha256(works.pack.read_bytes()).hexdigest()
    if pack not in issued:
        return "what stands in the pack's place was never issued"
    if issued[pack].state is RevisionState.ISSUED:
        return ""
    aside = aside_of(works.pack)
    if not aside.exists():
        return "the current revision has no file"
    waiting = issued.get(hashlib.sha256(aside.read_bytes()).hexdigest())
    return "" if waiting and waiting.state is RevisionState.ISSUED else "half a file waits for its place"


def main(folder: Path, kills: int, seed: int) -> int:
    """Kills so many times; 0 if nothing was wrong."""
    pipeline.demo(SAMPLE, folder, when=WHEN, random_bytes=Chance(1))
    works = Works(folder)
    matters, chance, issued = jobs(works), Random(seed), 0
    for turn in range(kills):
        before = len([one for one in works.revisions() if one.issue is not None])
        told = killed_once(works, matters, turn, chance.uniform(0.0, LONGEST_S))
        there = len([one for one in works.revisions() if one.issue is not None]) - before
        issued += told
        if told > there or (trouble := wrong(works)):
            print(f"kill {turn + 1}, seed {seed}: {told} told, {there} there; {trouble}")
            return 1
    works.issue(next(one for one in matters if pipeline.content(one)[1] != current_digest(works)))
    found = works.verify(now=LATER)
    print(f"{kills} kills, {issued} issues acknowledged, none lost; the next one is {found.status.name}")
    return int(found.status)


if __name__ == "__main__":
    sys.exit(main(Path(sys.argv[1]), int(sys.argv[2]), int.from_bytes(os.urandom(4))))
