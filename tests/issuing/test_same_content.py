"""The same content whoever computes it: in another process, and with another kernel of linear algebra."""

from __future__ import annotations

import os
import platform
import subprocess
import sys
from pathlib import Path

import pytest

from sheets.pages.compose.matter import Matter
from sheets.pipeline.printing import whole_content

CONTENT = """
import sys
from pathlib import Path
from sheets import pipeline
from sheets.pipeline.printing import whole_content
sys.stdout.buffer.write(whole_content(pipeline.steps(pipeline.check(Path(sys.argv[1])))).data)
"""
KERNELS = ("Prescott", "Haswell")
"""Names that the linear algebra library of numpy knows; the first asks for nothing beyond SSE3."""


def computed_apart(sample: Path, root: Path, kernel: str) -> tuple[bytes, str]:
    """Content as another process makes it, and the kernel that it says it took."""
    done = subprocess.run(
        [sys.executable, "-c", CONTENT, str(sample)],
        env={
            **os.environ,
            "PYTHONPATH": str(root),
            "PYTHONHASHSEED": "random",
            "OPENBLAS_CORETYPE": kernel,
            "OPENBLAS_VERBOSE": "2",
        },
        capture_output=True,
        check=True,
    )
    # The library tells its kernel on one of its streams, before anything of ours.
    said = [line for line in (*done.stdout.splitlines(), *done.stderr.splitlines()) if line[:6] == b"Core: "]
    return done.stdout.removeprefix(said[0] + b"\n" if said else b""), (said[0].decode() if said else "")


@pytest.mark.skipif(
    platform.machine() not in ("x86_64", "AMD64"), reason="the kernels named here are of that processor"
)
def test_content_is_the_same_in_other_processes_with_other_kernels(any_sample: Matter, root: Path) -> None:
    sample = next(
        path
        for path in (root / "sample_machines").glob("*.yaml")
        if path.read_bytes() == any_sample.sources.machine
    )
    here = whole_content(any_sample).data
    made = [computed_apart(sample, root, kernel) for kernel in KERNELS]
    assert len({kernel for _, kernel in made}) == len(KERNELS), "the kernels weren't taken"
    assert [data == here for data, _ in made] == [True, True]
