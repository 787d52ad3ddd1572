"""Commands: stable names, examples that run, README in step with what there is, statuses, bugs."""

from __future__ import annotations

import inspect
import itertools
import json
import os
import re
import shlex
import subprocess
import sys
import tomllib
from collections.abc import Callable, Iterator
from dataclasses import replace
from pathlib import Path

import pytest
from click import MissingParameter
from click.testing import CliRunner

from sheets import cli, pipeline
from sheets.circuit.solver import solve_one
from sheets.cli import asking, auditing, issuing, people, recording, registering, serving, tagging
from sheets.errors import (
    GRAVITY,
    ExitStatus,
    InputError,
    JamnutError,
    NotEstablishedError,
    Problem,
    RefusedError,
)
from sheets.pages.document import SheetKind
from sheets.pages.look import PAPERS

COMMANDS = dict(cli.main.commands)
VERBS = sorted(COMMANDS)
ISSUING = {
    command.name
    for module in (issuing, registering, recording, tagging, people, auditing, asking, serving)
    for command in module.COMMANDS
}
"""Their examples stand on a demonstration site: test_issuing_commands.py, test_register_commands.py,
test_asking_commands.py and test_serving.py run them."""
NUMBERS = re.compile(r"\b(?:DEVIATION|JOB|READING)\b")
"""Words that stand for a number."""


def readme(root: Path) -> str:
    return (root / "README.md").read_text(encoding="utf-8")


def section(text: str, title: str) -> str:
    """Part of a README under that heading."""
    return text.split(f"\n## {title}\n")[1].split("\n## ")[0]


# --- data ------------------------------------------------------------------------------------------------

AMOUNT = {"value", "quantity"}
FINDING = {"code", "severity", "subject", "what", "fix", "data"}
CHANGES = ({"adjuster", "setting_bar"}, {"valve", "position"}, {"actuator", "stop"})
FOUND = {
    "adjuster",
    "answer",
    "changes",
    "cost",
    "reading_bar",
    "flow_lpm",
    "gauge",
    "test_point",
    "low_bar",
    "high_bar",
    "never_exceed_bar",
    "accuracy_ratio",
}
NOT_IN_USE = {"adjuster", "answer", "by_law", "guards"}
NOT_FOUND = {"adjuster", "answer", "condition", "nearest"}
READING = {
    "adjuster",
    "gauge",
    "test_point",
    "expected_bar",
    "low_bar",
    "high_bar",
    "stop_above_bar",
    "never_exceed_bar",
}


def assert_names(found: dict[str, object], names: set[str]) -> None:
    assert set(found) == names


@pytest.fixture(params=["clay_mixer", "glaze_press", "kiln_pusher"])
def sample(request: pytest.FixtureRequest, root: Path) -> Path:
    return root / "sample_machines" / f"{request.param}.yaml"


def test_names_in_the_data_of_check(run: Callable[..., object], sample: Path) -> None:
    done = run("check", sample, "--json")
    assert (done.status, done.err) == (0, "")
    data = json.loads(done.out)
    names = {"format", "tag", "name", "document", "dated", "parts", "nets", "gauges", "energy_sources"}
    names |= {"site"}
    assert set(data) == names
    assert data["format"] == 1


def test_names_in_the_data_of_targets(run: Callable[..., object], sample: Path) -> None:
    done = run("targets", sample, "--json")
    assert (done.status, done.err) == (0, "")
    data = json.loads(done.out)
    assert set(data) == {"format", "tag", "settings", "findings"}
    assert data["settings"]
    for setting in data["settings"]:
        assert_names(
            setting,
            {
                "adjuster",
                "target_bar",
                "low_bar",
                "high_bar",
                "origin",
                "given_by",
                "acceptance",
                "window_origin",
                "derivations",
            },
        )
        assert setting["low_bar"] <= setting["target_bar"] <= setting["high_bar"]
        for derivation in setting["derivations"]:
            assert_names(derivation, {"result_name", "formula", "inputs", "result"})
            assert_names(derivation["result"], AMOUNT)
            for given in derivation["inputs"]:
                assert_names(given, AMOUNT | {"name", "source"})
    for finding in data["findings"]:
        assert_names(finding, FINDING)


def test_names_in_the_data_of_steps(run: Callable[..., object], sample: Path) -> None:
    done = run("steps", sample, "--json")
    assert (done.status, done.err) == (0, "")
    data = json.loads(done.out)
    names = {"format", "tag", "verdict", "states_tried", "adjusters", "order", "edges", "ties", "stages"}
    assert set(data) == names | {"findings", "before_issue"}
    answers = {answer["adjuster"]: answer for answer in data["adjusters"]}
    for answer in answers.values():
        assert_names(answer, FOUND if answer["answer"] == "found" else NOT_IN_USE)
        for change in answer.get("changes", []):
            assert set(change) in CHANGES
    assert set(data["order"]) == {name for name, answer in answers.items() if answer["answer"] == "found"}
    for edge in data["edges"]:
        assert_names(edge, {"before", "after", "why"})
    readings = 0
    for stage in data["stages"]:
        assert_names(stage, {"kind", "powered", "adjuster", "steps"})
        for step in stage["steps"]:
            assert_names(step, {"kind", "subject", "order", "lines", "warnings", "reading"})
            for warning in step["warnings"]:
                assert_names(warning, {"signal", "hazard", "lines"})
            if step["reading"] is not None:
                readings += 1
                assert_names(step["reading"], READING)
                assert step["reading"]["high_bar"] < step["reading"]["never_exceed_bar"]
    assert readings >= len(data["order"])


def test_names_in_the_data_of_what_can_not_be_set(
    run: Callable[..., object], variant: Callable[..., Path]
) -> None:
    """The gauge's range ends below the window."""
    file = variant(("    range: 250 bar", "    range: 160 bar"))
    done = run("steps", file, "--json")
    data = json.loads(done.out)
    assert done.status in (1, 3)
    (answer,) = data["adjusters"]
    assert_names(answer, NOT_FOUND)
    assert answer["condition"] == "seen"
    assert data["findings"]
    for finding in data["findings"]:
        assert_names(finding, FINDING)
        for value in finding["data"].values():
            assert isinstance(value, str) or set(value) == AMOUNT


def test_data_survive_any_terminal(shell: Callable[..., object], variant: Callable[..., Path]) -> None:
    file = variant(("name: Kiln-car pusher power unit", "name: Μύλος"))
    done = shell("check", file, "--json", cwd=file.parent, PYTHONIOENCODING="ascii")
    assert json.loads(done.out)["name"] == "Μύλος"
    told = shell("check", file, cwd=file.parent, PYTHONIOENCODING="ascii")
    assert (told.status, told.err) == (0, "")


# --- help and README -------------------------------------------------------------------------------------


def example(verb: str) -> list[str]:
    found = re.findall(r"^ *Example: (jamnut .+)$", COMMANDS[verb].help or "", flags=re.MULTILINE)
    assert len(found) == 1
    return shlex.split(found[0])


def helped(verb: str) -> str:
    done = CliRunner().invoke(cli.main, [verb, "--help"], prog_name="jamnut")
    assert done.exit_code == 0
    return " ".join(done.output.split())


@pytest.mark.parametrize("verb", [verb for verb in VERBS if verb not in ISSUING])
def test_help_shows_an_example_that_runs(
    verb: str, run: Callable[..., object], root: Path, tmp_path: Path
) -> None:
    assert " ".join(example(verb)) in helped(verb)
    name, called, *rest = example(verb)
    assert (name, called) == ("jamnut", verb)
    (tmp_path / "sample_machines").symlink_to(root / "sample_machines")
    done = run(called, *rest)
    assert done.status == 0, done.err
    assert done.out
    if verb == "pack":
        assert (tmp_path / "clay_mixer.pdf").read_bytes().startswith(b"%PDF-")


def test_every_command_is_a_verb_of_the_pipeline() -> None:
    for verb in VERBS:
        function = getattr(pipeline, verb.replace("-", "_"))
        assert inspect.isfunction(function)
        assert (function.__doc__ or "").strip()


def test_choices_are_those_of_the_pages() -> None:
    choices = {option.name: option.type for option in COMMANDS["pack"].params}
    assert set(choices["only"].choices) == {kind.value for kind in SheetKind}  # type: ignore[attr-defined]  # a Choice
    assert set(choices["paper"].choices) == set(PAPERS)  # type: ignore[attr-defined]  # a Choice


def test_readme_lists_every_command_and_no_other(root: Path) -> None:
    listed = re.findall(
        r"^ {4}jamnut ([a-z-]+)(?: [A-Z]+){0,2} {2,}\S", section(readme(root), "Commands"), re.MULTILINE
    )
    assert sorted(listed) == VERBS


def test_readme_names_only_options_that_exist(root: Path) -> None:
    there = {word for command in COMMANDS.values() for option in command.params for word in option.opts}
    named = set(re.findall(r"`(-{1,2}[a-z-]+)", section(readme(root), "Commands")))
    assert named <= there | {"--help"}
    assert {word for word in there if word.startswith("-")} - {"--output"} <= named


def test_readme_says_which_commands_give_data_and_keeps_its_lines_short(root: Path) -> None:
    (told,) = re.findall(r"`--json` is for ([^.]+)\.", readme(root))
    giving = {name for name, one in COMMANDS.items() if any("--json" in it.opts for it in one.params)}
    assert set(re.findall(r"`([a-z]+)`", told)) == giving
    lines = readme(root).splitlines()
    assert [one for one in lines if len(one) > 120 and not one.startswith(("    ", "|"))] == []
    assert not [one for one, below in itertools.pairwise(lines) if one.strip() and below.startswith("**")]


def commands_in(root: Path) -> Iterator[str]:
    """Every command line of README that begins with its name."""
    for line in re.findall(r"^ {4}(\S.*)$", readme(root), re.MULTILINE):
        for piece in line.split("&&"):
            words = piece.split()
            if words and words[0].endswith("jamnut"):
                yield piece.strip()
    yield from re.findall(r"`(jamnut [^`]+)`", readme(root))


def test_readme_commands_can_be_read(root: Path) -> None:
    read = 0
    for line in commands_in(root):
        _, verb, *rest = shlex.split(NUMBERS.sub("1", re.split(r" {2,}", line)[0]))
        try:
            context = COMMANDS[verb].make_context(verb, rest or ["1" if verb in ISSUING else "MACHINE"])
        except MissingParameter:  # the text beside the command tells what else it needs
            assert verb in ISSUING
            read += 1
            continue
        machines = context.params.get("machines") or (context.params.get("machine"),)
        for machine in machines if verb not in {"new", "diff", *ISSUING - {"demo"}} else ():
            assert machine.name in ("MACHINE", "PU-03.yaml") or (root / machine).is_file()
        read += 1
    assert read > len(set(VERBS) - ISSUING)


def test_readme_tells_the_statuses(root: Path) -> None:
    rows = re.findall(r"^\| (\d+) \| (.+) \|$", section(readme(root), "Commands"), re.MULTILINE)
    assert {int(number) for number, _ in rows} == {int(status) for status in ExitStatus}
    told = {int(number): meaning for number, meaning in rows}
    for kind in (InputError, RefusedError, NotEstablishedError):
        document = " ".join((kind.__doc__ or "").split())
        assert f"exit status {int(kind.status)}" in document
    assert "bug" in told[70]


def test_readme_test_command_is_what_ci_runs(root: Path) -> None:
    (line,) = (
        line.strip() for line in re.findall(r"^ {4}\S.*$", readme(root), re.MULTILINE) if "pytest" in line
    )
    lines = (root / ".ci" / "run").read_text(encoding="utf-8").splitlines()
    assert lines.count(line) == 1


def test_readme_needs_the_python_that_the_package_asks_for(root: Path) -> None:
    project = tomllib.loads((root / "pyproject.toml").read_text(encoding="utf-8"))["project"]
    least = project["requires-python"].removeprefix(">=")
    assert f"Python {least} or newer" in readme(root)
    assert project["version"] == cli.__version__


# --- statuses, bugs, errors ------------------------------------------------------------------------------


def test_no_command_shows_help(run: Callable[..., object]) -> None:
    done = run()
    assert done.status == 2
    assert "jamnut [OPTIONS] COMMAND" in done.out + done.err


def test_version(run: Callable[..., object]) -> None:
    done = run("--version")
    assert (done.status, done.out.split()[-1]) == (0, cli.__version__)


@pytest.mark.parametrize("verb", VERBS)
def test_a_bug_keeps_its_traceback_in_a_file(
    verb: str,
    run: Callable[..., object],
    variant: Callable[..., Path],
    monkeypatch: pytest.MonkeyPatch,
    tmp_path: Path,
) -> None:
    def fail(*_: object, **__: object) -> None:
        raise RuntimeError("a wheel came off")

    monkeypatch.setattr(pipeline, "write_pack" if verb == "pack" else verb.replace("-", "_"), fail)
    monkeypatch.setattr("tempfile.tempdir", str(tmp_path))

    site, register = ("--site", variant()), ("--register", tmp_path / "register.db")
    arguments = {
        "new": ("fixed-pump", tmp_path / "new.yaml"),
        "diff": (variant(), variant()),
        "demo": (variant(), tmp_path / "demonstration"),
        "keys": (tmp_path, "--person", "A. Person"),
        "issue": (variant(), *register, "--prepared", "A. Person"),
        "sign": (variant(), "--as", "checked", "--key", variant(), *site, *register),
        "reject": (variant(), "--by", "A. Person", "--reason", "none", *register),
        "verify": (variant(), *site, *register),
        "people": register,
        "instruments": register,
        "inspect": ("WI-0142", *register, "--inspector", "A. Person"),
        "audit": (tmp_path / "audit.pdf", *register),
        "current": ("0123456789", *register),
        "reprove": register,
        "zeros": ("WI-0147", *register),
        "used": ("WI-0142", "--on", "2026-12-01", *register),
        "deviations": register,
        "serve": (tmp_path, *register),
        "record": (variant(), "--by", "A. Person", *register),
        "tags": ("0123456789", "-o", tmp_path / "tags.pdf", *register),
        "copies": ("WI-1", *register),
        "backup": (tmp_path / "kept", *register),
        "restore": (variant(), *register),
        **dict.fromkeys(("check-register", "export", "history"), register),
    }
    told = ("--by", "A. Person", *register)
    arguments |= {
        "end": ("1", "--as", "done", *told),
        "migrate": told,
        "settle": ("1", "--accept", "none", *told),
        "strike": ("1", "--reason", "none", *told),
        "withdraw": ("0123456789", "--reason", "none", *told),
    }

    done = run(verb, *arguments.get(verb, (variant(),)))

    assert done.status == 70
    assert done.out == ""
    assert "bug in jamnut" in done.err
    assert "Traceback" not in done.err
    (kept,) = tmp_path.glob("jamnut-bug-*.txt")
    assert str(kept) in done.err
    text = kept.read_text(encoding="utf-8")
    assert "Traceback" in text
    assert "RuntimeError: a wheel came off" in text


def test_breaking_off_is_no_bug(
    run: Callable[..., object], variant: Callable[..., Path], monkeypatch: pytest.MonkeyPatch
) -> None:
    def interrupt(*_: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr(pipeline, "check", interrupt)
    done = run("check", variant())
    assert done.status == 130
    assert "Traceback" not in done.err


@pytest.mark.parametrize(("rating_bar", "status"), [(315, 0), (100, 1)], ids=["good", "refused"])
def test_a_reader_that_leaves_early_changes_no_status(
    variant: Callable[..., Path], root: Path, tmp_path: Path, rating_bar: int, status: int
) -> None:
    """As in ``jamnut steps MACHINE | head -1``."""
    beyond = "    where: after the pump manifold, beyond RV1 and TP1\n"
    file = variant((f"{beyond}    rating: 315 bar", f"{beyond}    rating: {rating_bar} bar"))
    with subprocess.Popen(
        [sys.executable, "-c", "from sheets.cli import entry; entry()", "steps", str(file)],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        cwd=tmp_path,
        env={**os.environ, "PYTHONPATH": str(root), "TMPDIR": str(tmp_path)},
    ) as process:
        assert process.stdout is not None
        assert process.stderr is not None
        process.stdout.close()
        said = process.stderr.read()
    assert said == b""
    assert process.returncode == status
    assert list(tmp_path.iterdir()) == [file]


def subclasses(kind: type[JamnutError]) -> Iterator[type[JamnutError]]:
    for below in kind.__subclasses__():
        yield below
        yield from subclasses(below)


def no_file(_: object) -> None:
    pipeline.check(Path("nowhere.yaml"))


def no_adjuster(variant: Callable[..., Path]) -> None:
    sealed = variant(("    adjuster:\n", "    adjuster:\n      may be set: no\n"))
    pipeline.content(pipeline.steps(pipeline.check(sealed)))


def no_pressure(variant: Callable[..., Path]) -> None:
    """A pressure that no computation reached: asked of a state whose figures are not numbers."""
    circuit = pipeline.check(variant()).circuit
    solution = solve_one(
        circuit, circuit.rest_state({site.id: site.highest_bar for site in circuit.adjusters})
    )
    replace(solution, established=False).pressure_at("PU1.P")


WAYS_TO_FAIL: dict[type[JamnutError], Callable[..., None]] = {
    InputError: no_file,
    RefusedError: no_adjuster,
    NotEstablishedError: no_pressure,
}


def test_every_error_can_be_met_and_says_what_to_do(variant: Callable[..., Path]) -> None:
    assert set(subclasses(JamnutError)) == set(WAYS_TO_FAIL)
    for kind, fail in WAYS_TO_FAIL.items():
        with pytest.raises(kind) as caught:
            fail(variant)
        assert caught.value.problems
        for problem in caught.value.problems:
            assert problem.where.strip()
            assert problem.what.strip()
            assert problem.fix.strip()


@pytest.mark.parametrize("kind", WAYS_TO_FAIL)
def test_every_error_becomes_its_status(
    kind: type[JamnutError],
    run: Callable[..., object],
    variant: Callable[..., Path],
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    def fail(*_: object) -> None:
        raise kind(Problem(where="RV1", what="It is so.", fix="Do this."))

    monkeypatch.setattr(pipeline, "check", fail)
    done = run("check", variant())
    assert done.status == {InputError: 2, RefusedError: 1, NotEstablishedError: 3}[kind]
    assert done.err == "RV1: It is so.\n    Do this.\n"


def test_gravity_ranks_every_status_but_good() -> None:
    assert {*GRAVITY, ExitStatus.GOOD} == set(ExitStatus)


@pytest.mark.parametrize("terminal", [True, False], ids=["terminal", "pipe"])
def test_progress_is_for_a_terminal(
    terminal: bool,
    run: Callable[..., object],
    variant: Callable[..., Path],
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    file = variant()
    monkeypatch.setattr(sys.stderr, "isatty", lambda: terminal, raising=False)
    done = run("pack", file, "-o", "pack.pdf")
    assert done.status == 0
    assert bool(re.search(r"^… \w", done.err)) is terminal
    assert done.out.count("\n") == 1


def test_one_question_at_a_time(run: Callable[..., object], sample: Path) -> None:
    done = run("steps", sample, "--skew", "--why", "RV1")
    assert (done.status, done.out) == (2, "")
    assert "two questions" in done.err


def test_why_as_data(run: Callable[..., object], root: Path) -> None:
    done = run("steps", root / "sample_machines" / "kiln_pusher.yaml", "--why", "RV1", "--json")
    assert (done.status, done.err) == (0, "")
    data = json.loads(done.out)
    assert {"adjuster", "verdict", "changes", "near", "reading_bar", "in_use"} <= set(data)
    assert data["verdict"] == "established"
    assert [one["change"] for one in data["changes"]] == ["HV2 closed"]
    assert all(one["fix"] and one["condition"] for one in data["near"])


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="needs /dev/full")
def test_output_that_takes_no_more(root: Path, sample: Path) -> None:
    with Path("/dev/full").open("w", encoding="utf-8") as full:
        done = subprocess.run(
            [sys.executable, "-c", "from sheets.cli import entry; entry()", "check", str(sample)],
            cwd=root,
            env={**os.environ, "PYTHONPATH": str(root)},
            stdout=full,
            stderr=subprocess.PIPE,
            timeout=120,
            check=False,
        )
    assert done.returncode == 2
    said = "The output can't be written: No space left on device. Write it elsewhere.\n"
    assert done.stderr.decode() == said


def test_who_stops_a_command_hears_what_was_noted(
    run: Callable[..., object], sample: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def stop(*_: object) -> None:
        stopped = KeyboardInterrupt()
        stopped.add_note("revision 2 is void")
        raise stopped

    monkeypatch.setattr(pipeline, "check", stop)
    done = run("check", sample)
    assert (done.status, done.err.split()) == (130, ["stopped", "revision", "2", "is", "void"])
