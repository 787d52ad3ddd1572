"""A search ends by count, not by time: what isn't found by then stays open, and the limit is named."""

from pathlib import Path

import pytest
from banks import bank_text
from click.testing import CliRunner

from sheets.amounts import Amount, Severity
from sheets.circuit.verdict import Verdict
from sheets.cli import main
from sheets.errors import ExitStatus
from sheets.pipeline import Described, check, skew_status, targets
from sheets.procedure import search
from sheets.procedure.answers import NotFound
from sheets.procedure.case import Case
from sheets.procedure.conditions import Condition, Failure
from sheets.procedure.in_use import ever_governs
from sheets.procedure.search import FINALISTS, find_test_states
from sheets.procedure.skew import skew_findings
from sheets.procedure.work import Work

FEW, SOME = 400, 3000


@pytest.fixture(scope="module")
def four_sections(tmp_path_factory: pytest.TempPathFactory) -> Path:
    file = tmp_path_factory.mktemp("bank") / "four.yaml"
    file.write_text(bank_text(4), encoding="utf-8")
    return file


@pytest.fixture(scope="module")
def two_sections(tmp_path_factory: pytest.TempPathFactory) -> Described:
    file = tmp_path_factory.mktemp("bank") / "two.yaml"
    file.write_text(bank_text(2), encoding="utf-8")
    return check(file)


def case_of(described: Described) -> Case:
    return Case(described.machine, described.circuit, targets(described), described.policies)


def test_a_bank_of_four_ends_within_its_limit(four_sections: Path) -> None:
    # A batch that was begun is ended: at most so many finalists, each with 8 levels, 12 faults (two stuck
    # places and a leak for each spool) with and without loads, and as many slips, beyond the limit.
    work = Work(SOME)
    found = find_test_states(case_of(check(four_sections)), work)
    assert work.done < SOME + FINALISTS * 100
    lost = [answer for answer in found.answers.values() if isinstance(answer, NotFound)]
    assert lost
    assert all(answer.verdict is Verdict.NOT_FOUND for answer in lost)


def test_the_command_names_the_limit_and_gives_its_status(
    four_sections: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr("sheets.procedure.plan.WORK_LIMIT", FEW)
    ran = CliRunner().invoke(main, ["steps", str(four_sections)])
    assert ran.exit_code == int(ExitStatus.NOT_ESTABLISHED) == 3
    assert f"within the limit of {FEW} solved states" in ran.stdout
    assert "there may be one" in ran.stdout
    assert "can't be set" not in ran.stdout
    assert "Add a lockable hand valve" not in ran.stdout  # it has them; they weren't shut yet
    why = CliRunner().invoke(main, ["steps", "--why", "RV1", str(four_sections)])
    assert why.exit_code == 3
    assert f"not found within the limit of {FEW} solved states" in why.stdout


def test_the_same_limit_gives_the_same_answer(two_sections: Described) -> None:
    case = case_of(two_sections)
    one, other = (find_test_states(case, Work(FEW)) for _ in range(2))
    assert one == other


def test_work_that_ends_while_judging_leaves_the_answer_open(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    # All 2³·3·2³ = 192 sets are solved in one batch; only those that nobody judged keep the answers open.
    def spending(_case: Case, finalists: list[object], _: str, work: Work, **__: object) -> list[Failure]:
        work.done = work.most
        return [Failure(condition=Condition.BARRED) for _ in finalists]

    file = tmp_path / "one.yaml"
    file.write_text(bank_text(1), encoding="utf-8")
    monkeypatch.setattr("sheets.procedure.frontier.FIRST_BATCH", 1000)
    monkeypatch.setattr(search, "first_failure", lambda *_: None)
    monkeypatch.setattr(search, "judge", spending)
    found = find_test_states(case_of(check(file)), Work(10_000))
    assert found.states == 192
    assert {getattr(answer, "verdict", None) for answer in found.answers.values()} == {Verdict.NOT_FOUND}


def test_in_use_is_open_where_not_every_state_was_looked_at(two_sections: Described) -> None:
    case = case_of(two_sections)
    assert ever_governs(case.circuit, case.base, "RV1", case.trusted_ports, Work(0)) is None
    assert ever_governs(case.circuit, case.base, "RV1", case.trusted_ports) is True


def test_skewing_ends_by_count_too(two_sections: Described) -> None:
    work = Work(FEW)
    findings = skew_findings(two_sections.machine, two_sections.policies, work)
    last = findings[-1]
    assert (last.code, last.severity) == ("skew_not_finished", Severity.NOT_ESTABLISHED)
    assert last.data["limit"] == Amount(value=float(FEW), quantity="count")
    assert skew_status(findings) is ExitStatus.NOT_ESTABLISHED
    assert skew_status(()) is ExitStatus.GOOD


def test_who_waits_is_told_how_far_it_is(two_sections: Described) -> None:
    told: list[tuple[int, int]] = []
    find_test_states(case_of(two_sections), Work(FEW, lambda done, most: told.append((done, most))))
    assert told == sorted(told)
    assert len(told) > 3
    assert {most for _, most in told} == {FEW}
