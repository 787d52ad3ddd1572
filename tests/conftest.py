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
from sheets.procedure.task import Task, TaskKind

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


Replacements = tuple[tuple[str, str], ...]


@pytest.fixture(scope="session")
def without_hand_valve() -> Replacements:
    """Makes the pusher's only hand valve after RV1 an open throttle."""
    head = (
        "    name: pressure line valve\n    designation: 1-H1.4\n"
        "    where: after the pump manifold, beyond RV1 and TP1\n    rating: 315 bar\n"
    )
    valve = f"  HV2:\n    kind: hand valve\n{head}    rest: open\n    lockable: yes\n"
    return ((valve, f"  HV2:\n    kind: orifice\n{head}"),)


@pytest.fixture(scope="session")
def leave() -> Callable[..., Replacements]:
    """Gives leave to hold the pusher's carriage at its stop."""

    def text(
        stop: str = "extended", *, weight: str = "    weight: 0 kN\n", guard: str = "the chain is closed"
    ) -> Replacements:
        moves = "    moves: pusher carriage\n"
        given = (
            "    may run to stop:\n"
            f"      stop: {stop}\n"
            "      given by: drawing 3, the end cap takes the full force\n"
            f"      guarded by: {guard}\n"
            "      stand at: pusher platform, behind the rail\n"
            "      before service: its operator brings it back\n"
        )
        return ((moves, moves + weight + given),)

    return text


@pytest.fixture(scope="session")
def pusher_at_its_stop(
    changed: Callable[..., Described], without_hand_valve: Replacements, leave: Callable[..., Replacements]
) -> Callable[[TaskKind], Matter]:
    """The pusher without that hand valve, set with its carriage held at its stop; by task."""
    return lru_cache(
        lambda kind: steps(changed("kiln_pusher", *without_hand_valve, *leave()), Task(kind=kind))
    )
