"""What all tests share: the project's folder, the three sample machines, and changed copies of them."""

import contextlib
import os
from collections.abc import Callable, Iterator
from functools import lru_cache
from pathlib import Path

import postgres_server
import pytest

from sheets.pages.compose.matter import Matter
from sheets.pipeline import Described, check, steps

ROOT = Path(__file__).resolve().parent.parent
SAMPLE_FOLDER = ROOT / "sample_machines"
SAMPLES = ("clay_mixer", "glaze_press", "kiln_pusher")


@pytest.hookimpl(wrapper=True)
def pytest_runtest_makereport():
    """Where CI is set, a test that would be passed over fails: there, nothing may be missing."""
    report = yield
    if os.environ.get("CI") == "true" and report.skipped and not hasattr(report, "wasxfail"):
        report.outcome = "failed"
    return report


@pytest.fixture(scope="session")
def root() -> Path:
    """Folder of the project."""
    return ROOT


@lru_cache
def computed(name: str) -> Matter:
    return steps(check(SAMPLE_FOLDER / f"{name}.yaml"))


@pytest.fixture(scope="session")
def clay_mixer() -> Matter:
    return computed("clay_mixer")


@pytest.fixture(scope="session")
def glaze_press() -> Matter:
    return computed("glaze_press")


@pytest.fixture(scope="session")
def kiln_pusher() -> Matter:
    return computed("kiln_pusher")


@pytest.fixture(scope="session", params=SAMPLES)
def any_sample(request: pytest.FixtureRequest) -> Matter:
    return computed(request.param)


@pytest.fixture(scope="session")
def changed(tmp_path_factory: pytest.TempPathFactory) -> Callable[..., Described]:
    """A sample with pieces of its text replaced; each piece must stand in it exactly once."""

    @lru_cache
    def describe(name: str, *replacements: tuple[str, str]) -> Described:
        text = (SAMPLE_FOLDER / f"{name}.yaml").read_text(encoding="utf-8")
        for old, new in replacements:
            assert text.count(old) == 1, f"{old!r} stands {text.count(old)} times in {name}"
            text = text.replace(old, new)
        file = tmp_path_factory.mktemp("changed") / f"{name}.yaml"
        file.write_text(text, encoding="utf-8")
        return check(file)

    return describe


@pytest.fixture(scope="session")
def refused(changed: Callable[..., Described]) -> Callable[..., Matter]:
    """Everything computed for a changed sample."""

    @lru_cache
    def compute(name: str, *replacements: tuple[str, str]) -> Matter:
        return steps(changed(name, *replacements))

    return compute


@pytest.fixture(scope="session")
def postgres() -> Iterator[postgres_server.Server]:
    """A PostgreSQL server; where none is installed, its tests are passed over by name."""
    with contextlib.ExitStack() as stack:
        try:
            server = stack.enter_context(postgres_server.running())
        except LookupError as missing:
            pytest.skip(str(missing))
        yield server
