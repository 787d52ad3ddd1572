"""What issuing with three signatures costs beside printing the unsigned pack.

Run: PYTHONPATH=. python tests/benchmarks/issue_cost.py. It prints times, their difference and their ratio;
nothing is asserted, since times hang on the computer. The register is on the disk of the temporary folder,
and each of its events waits for that disk.
"""

from __future__ import annotations

import gc
import statistics
import sys
import tempfile
import time
from collections.abc import Callable
from dataclasses import dataclass
from datetime import UTC, datetime
from itertools import count
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[1] / "issuing"))

from works import Chance, Works

from sheets import pipeline

SAMPLES = ("kiln_pusher", "clay_mixer", "glaze_press")
SAMPLE_FOLDER = Path(__file__).parents[2] / "sample_machines"
RUNS = 15
WHEN = datetime(2026, 12, 1, 9, 30, tzinfo=UTC)


def main() -> None:
    """Issue each sample's pack again and again, in turn with printing it."""
    for name in SAMPLES:
        with tempfile.TemporaryDirectory() as folder:
            took = timed(acts_at(Path(folder), name))
        plain = took.pop("unsigned")
        print(f"{name}: unsigned pack {plain.wall:.0f} ms")
        for kind, one in took.items():
            print(
                f"  issue, {kind}: {one.wall:.0f} ms, {one.wall - plain.wall:+.0f} ms, "
                f"{one.wall / plain.wall:.2f} of it; processor {one.processor - plain.processor:+.0f} ms"
            )


def acts_at(folder: Path, name: str) -> dict[str, Callable[[], object]]:
    """What is timed, each with all it needs."""
    sample = SAMPLE_FOLDER / f"{name}.yaml"
    pipeline.demo(sample, folder / "works", when=WHEN, random_bytes=Chance(1))
    works = Works(folder / "works")
    matter = pipeline.steps(pipeline.check(works.folder / sample.name))
    target, chance, number = folder / "pack.pdf", Chance(2), count()
    return {
        "unsigned": lambda: pipeline.write_pack(matter, target, paper="A4", only=()),
        # Only what has changed is issued again, so each goes into a register of its own.
        "ink": lambda: works.issue(
            matter, target, ink=True, random_bytes=chance, register_at=folder / f"{next(number)}.db"
        ),
        "three signatures": lambda: works.issue(
            matter, target, random_bytes=chance, register_at=folder / f"{next(number)}.db"
        ),
    }


@dataclass(frozen=True)
class Took:
    """Median of several runs in milliseconds."""

    wall: float
    processor: float
    """Of this process alone: what another program takes meanwhile isn't in it."""


def timed(acts: dict[str, Callable[[], object]]) -> dict[str, Took]:
    """The acts take turns, so that a busy computer slows all of them alike."""
    walls: dict[str, list[float]] = {name: [] for name in acts}
    processors: dict[str, list[float]] = {name: [] for name in acts}
    for act in acts.values():
        act()
    gc.collect()
    for _ in range(RUNS):
        for name, act in acts.items():
            wall, processor = time.perf_counter(), time.process_time()
            act()
            walls[name].append(1000 * (time.perf_counter() - wall))
            processors[name].append(1000 * (time.process_time() - processor))
    return {
        name: Took(wall=statistics.median(walls[name]), processor=statistics.median(processors[name]))
        for name in acts
    }


if __name__ == "__main__":
    main()
