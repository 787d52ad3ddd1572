"""From a described machine to targets and a job in words, with everything against it."""

from __future__ import annotations

from collections.abc import Iterator

from sheets import ENGINE
from sheets.amounts import Finding, Severity
from sheets.circuit.verdict import Verdict
from sheets.energy.shut_in import shut_in_bar
from sheets.errors import ExitStatus, Problem
from sheets.hazards.assess import assess
from sheets.machine.walking import walkdown_state
from sheets.pages.compose.matter import Matter
from sheets.pipeline.describing import Described
from sheets.pipeline.speaking import speaker_of
from sheets.pipeline.walking import walked
from sheets.procedure.case import Case
from sheets.procedure.plan import make_procedure
from sheets.procedure.search import WORK_LIMIT
from sheets.procedure.skew import skew_findings
from sheets.procedure.steps import Procedure
from sheets.procedure.task import Task, named_task
from sheets.procedure.work import Watch, Work, unwatched
from sheets.targets.compute import compute_targets
from sheets.targets.settings import Targets
from sheets.trial.invariants import Invariant
from sheets.trial.replay import Replay, findings_of, replay
from sheets.wording import as_json
from sheets.wording.obstacles import obstacles
from sheets.wording.plain import Json
from sheets.wording.steps import Speaker, SpokenStep
from sheets.wording.terminal import note_lines, skew_lines, step_lines, target_lines
from sheets.wording.walk_list import proposal_words
from sheets.wording.why import why_data, why_lines


def targets(described: Described) -> Targets:
    """Settings of every adjuster, with windows, derivations and findings."""
    return compute_targets(described.machine, described.circuit, described.policies)


def steps(
    described: Described,
    task: Task = Task(),  # noqa: B008 -- a frozen value
    watch: Watch = unwatched,
) -> Matter:
    """The procedure in words, with hazards; refusals are findings of its targets, procedure and replay.

    ``watch`` is told how many states the search has solved, and how many it may.
    """
    found = targets(described)
    case = Case(described.machine, described.circuit, found, described.policies)
    procedure = make_procedure(case, task, watch)
    most_bar = shut_in_bar(described.machine, described.circuit)
    return Matter(
        replay=replay(
            described.machine,
            described.circuit,
            found,
            described.policies,
            procedure,
            trusted_ports=case.trusted_ports,
        ),
        machine=described.machine,
        site=described.site,
        sources=described.sources,
        circuit=described.circuit,
        targets=found,
        procedure=procedure,
        hazards=assess(described.machine, described.circuit, procedure, described.policies, most_bar),
        shut_in_bar=most_bar,
        speaker=Speaker(described.machine, described.circuit, described.policies, procedure.search.found()),
        engine=str(ENGINE),
        walkdown=walked(described, found),
    )


def task_of(described: Described, kind: str, part: str | None) -> Task:
    """The task as a command names it. Raises InputError for a part that isn't there or isn't wanted."""
    return named_task(kind, part, described.machine.parts)


def why_text(matter: Matter, adjuster: str) -> Iterator[str]:
    """Nearest states of one adjuster, and what fails in them. Raises InputError for an unknown one."""
    return why_lines(matter.speaker, matter.procedure, adjuster)


def why_json(matter: Matter, adjuster: str) -> dict[str, Json]:
    """The same as data. Raises InputError likewise."""
    return why_data(matter.speaker, matter.procedure, adjuster)


def skew(described: Described, watch: Watch = unwatched) -> tuple[Finding, ...]:
    """Plate values on which order or states hang; takes seconds, since each skew is a search."""
    return skew_findings(described.machine, described.policies, Work(WORK_LIMIT, watch))


def skew_text(described: Described, found: tuple[Finding, ...]) -> Iterator[str]:
    return skew_lines(speaker_of(described), found)


def skew_json(described: Described, found: tuple[Finding, ...]) -> dict[str, Json]:
    return as_json.skew_json(speaker_of(described), found)


def skew_status(found: tuple[Finding, ...]) -> ExitStatus:
    """Not established where not every value was looked at."""
    open_ones = any(finding.severity is Severity.NOT_ESTABLISHED for finding in found)
    return ExitStatus.NOT_ESTABLISHED if open_ones else ExitStatus.GOOD


def issuable(matter: Matter) -> tuple[Problem, ...]:
    """What stands against issuing a pack; empty where nothing does. A draft is printed all the same."""
    state = matter.walkdown or walkdown_state(None, digests={}, computed_bar={}, computed_from="")
    good = status_of(matter.targets, matter.procedure, matter.replay) is ExitStatus.GOOD
    return obstacles(matter.speaker, state, established=good)


def issuable_text(matter: Matter) -> Iterator[str]:
    return note_lines(issuable(matter))


def status_of(found: Targets, procedure: Procedure | None = None, run: Replay | None = None) -> ExitStatus:
    """Exit status that targets, a procedure from them and its replay come to."""
    if found.refusals:
        return ExitStatus.REFUSED
    for judged in (procedure, run):
        if judged is None or judged.verdict is Verdict.ESTABLISHED:
            continue
        return ExitStatus.REFUSED if judged.verdict is Verdict.REFUTED else ExitStatus.NOT_ESTABLISHED
    return ExitStatus.GOOD


def targets_text(described: Described, found: Targets) -> Iterator[str]:
    return target_lines(speaker_of(described), found, proposal_words(walked(described, found)))


def targets_json(described: Described, found: Targets) -> dict[str, Json]:
    return as_json.targets_json(speaker_of(described), found, proposal_words(walked(described, found)))


def steps_text(matter: Matter) -> Iterator[str]:
    return step_lines(
        matter.speaker, matter.procedure, spoken_of(matter), findings_of_job(matter), issuable(matter)
    )


def steps_json(matter: Matter) -> dict[str, Json]:
    return as_json.steps_json(
        matter.speaker,
        matter.procedure,
        spoken_of(matter),
        matter.procedure.verdict,
        findings_of_job(matter),
        issuable(matter),
    )


def spoken_of(matter: Matter) -> dict[int, tuple[SpokenStep, ...]]:
    return {place: matter.spoken(stage) for place, stage in enumerate(matter.procedure.stages)}


def findings_of_job(matter: Matter) -> tuple[Finding, ...]:
    run = findings_of(matter.replay) if matter.procedure.stages else ()
    if matter.procedure.verdict is Verdict.REFUTED:  # by what the machine lacks, so it reads otherwise, too
        run = tuple(finding for finding in run if finding.code != Invariant.READS_RIGHT.value)
    return (*matter.targets.findings, *matter.procedure.findings, *run)
