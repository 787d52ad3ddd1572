"""What commands take to begin, against floors that they can't get under.

Run: PYTHONPATH=. python tests/benchmarks/command_floors.py. Each figure is the median of interleaved runs;
nothing is asserted, since times hang on the computer. Goals: help 4 times its floor, check 2.5 times.
"""

from __future__ import annotations

import os
import statistics
import subprocess
import sys
import tempfile
import time
from pathlib import Path

from made_machines import sections_text

ROOT = Path(__file__).parents[2]
RUNS = 15


def took_s(*arguments: str) -> float:
    """Wall time of one interpreter with these arguments."""
    begun = time.perf_counter()
    subprocess.run(
        [sys.executable, *arguments],
        check=True,
        capture_output=True,
        cwd=ROOT,
        env={**os.environ, "PYTHONPATH": str(ROOT)},
    )
    return time.perf_counter() - begun


def main() -> None:
    """Interleave all runs, so that a drift of the computer meets all of them alike."""
    with tempfile.TemporaryDirectory() as folder:
        file = Path(folder) / "made.yaml"
        file.write_text(sections_text(6), encoding="utf-8")
        jamnut = ("-c", "from sheets.cli import entry; entry()")
        commands = {
            "bare interpreter": ("-c", "pass"),
            "interpreter and click": ("-c", "import click"),
            "interpreter, pydantic and yaml": (
                "-c",
                "import pydantic, yaml; pydantic.BaseModel, yaml.CSafeLoader",
            ),
            "--help": (*jamnut, "--help"),
            "check, 60 parts": (*jamnut, "check", str(file)),
        }
        for arguments in commands.values():
            took_s(*arguments)  # writes the bytecode
        times: dict[str, list[float]] = {name: [] for name in commands}
        for _ in range(RUNS):
            for name, arguments in commands.items():
                times[name].append(took_s(*arguments))
    median_s = {name: statistics.median(values) for name, values in times.items()}
    for name, value in median_s.items():
        print(f"{name}: {1000 * value:.0f} ms")
    for command, floor, goal in (
        ("--help", "interpreter and click", 4.0),
        ("check, 60 parts", "interpreter, pydantic and yaml", 2.5),
    ):
        print(f"{command}: {median_s[command] / median_s[floor]:.2f} times {floor} (goal {goal:g})")


if __name__ == "__main__":
    main()
