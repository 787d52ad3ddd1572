"""Joins the stages: reads like a table of contents. One function a verb."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field, replace
from datetime import date
from pathlib import Path
from typing import Literal

from sheets import ENGINE
from sheets.amounts import Finding
from sheets.circuit.build import both_ends
from sheets.circuit.model import Circuit
from sheets.circuit.verdict import Verdict
from sheets.errors import (
    ExitStatus,
    InputError,
    JamnutError,
    NotEstablishedError,
    Problem,
    RefusedError,
)
from sheets.hazards.assess import assess
from sheets.machine.answering import Answers as Answers
from sheets.machine.answering import answered
from sheets.machine.files import SITE_FILE, move_into_place, walkdown_file, write_pdf
from sheets.machine.files import machine_files as machine_files
from sheets.machine.loading import load_machine, load_site, load_walkdown
from sheets.machine.model import Machine, Units
from sheets.machine.screws import screws_of
from sheets.machine.site import Policies, Site
from sheets.machine.starters import Starter, starters, write_starter
from sheets.machine.walkdown import Walkdown, walkdown_text
from sheets.machine.walking import (
    EntryState,
    Place,
    computing_contents,
    walk_contents,
    walkdown_state,
    with_answers,
)
from sheets.machine.walking import WalkdownState as WalkdownState
from sheets.pages.compose.matter import Matter
from sheets.pages.compose.pack import compose
from sheets.pages.document import Document, IssueContext, Layout, SheetKind
from sheets.pages.layout import place
from sheets.pages.press import pdf_bytes, print_pack
from sheets.procedure.case import Case
from sheets.procedure.plan import make_procedure
from sheets.procedure.skew import skew_findings
from sheets.procedure.steps import Procedure
from sheets.procedure.task import Task, named_task
from sheets.seal.canonical import canonical_bytes, digest
from sheets.targets.accepting import accept, computed_settings
from sheets.targets.compute import compute_targets
from sheets.targets.settings import Targets
from sheets.trial.replay import Replay, findings_of, replay
from sheets.wording import as_json
from sheets.wording.as_json import Json as Json
from sheets.wording.as_json import machine_json
from sheets.wording.difference import (
    Differing,
    Side,
    difference_json,
    difference_lines,
    differences,
)
from sheets.wording.obstacles import obstacles, refusals
from sheets.wording.steps import Speaker, SpokenStep
from sheets.wording.summary import Outcome as Outcome
from sheets.wording.summary import broken as broken
from sheets.wording.summary import failed, known, worst_finding
from sheets.wording.summary import summary_json as summary_json
from sheets.wording.summary import summary_lines as summary_lines
from sheets.wording.terminal import columns, machine_lines, note_lines, skew_lines, step_lines, target_lines
from sheets.wording.walk_list import entry_lines, proposal_words, standing, walk_json, walk_lines
from sheets.wording.why import why_lines


@dataclass(frozen=True, kw_only=True)
class Described:
    """A machine as read, with its site."""

    machine: Machine
    site: Site | None
    circuit: Circuit
    walkdown: Walkdown | None = None

    @property
    def policies(self) -> Policies:
        return self.site.policies if self.site else Policies()


def check(machine_file: Path, site_file: Path | None = None, today: date | None = None) -> Described:
    """Reads a machine file, its site and walk-down files where there are, and builds the circuit.

    ``today`` only refuses walk-down answers from the future. Raises InputError.
    """
    machine = load_machine(machine_file).machine
    site = _site(machine_file, site_file)
    policies = site.policies if site else Policies()
    ends = both_ends(
        machine,
        opening_ratio_direct=policies.direct_opening_ratio,
        opening_ratio_pilot=policies.pilot_opening_ratio,
        control_width_bar=policies.compensator_width_bar,
    )
    # Where the maker's drawing shows no bleed, outlet pressure reaches a port that is cut off: the last end.
    # Where nobody has looked, the search refuses every state in which the end matters.
    walked = _walkdown(machine_file, machine, today)
    return Described(machine=machine, site=site, circuit=ends[-1], walkdown=walked)


def _site(machine_file: Path, site_file: Path | None) -> Site | None:
    if site_file is not None:
        return load_site(site_file).site
    beside = machine_file.parent / SITE_FILE
    return load_site(beside).site if beside.is_file() else None


def _walkdown(machine_file: Path, machine: Machine, today: date | None) -> Walkdown | None:
    beside = walkdown_file(machine_file)
    return load_walkdown(beside, machine=machine, today=today) if beside.is_file() else None


def targets(described: Described) -> Targets:
    """Settings of every adjuster, with windows, derivations and findings."""
    return compute_targets(described.machine, described.circuit, described.policies)


def steps(described: Described, task: Task = Task()) -> Matter:  # noqa: B008 -- a frozen value
    """The procedure in words, with hazards; refusals are findings of its targets, procedure and replay."""
    found = targets(described)
    case = Case(described.machine, described.circuit, found, described.policies)
    procedure = make_procedure(case, task)
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
        circuit=described.circuit,
        targets=found,
        procedure=procedure,
        hazards=assess(described.machine, described.circuit, procedure, described.policies),
        speaker=Speaker(described.machine, described.circuit, described.policies, procedure.search.found()),
        engine=str(ENGINE),
        walkdown=_walked(described, found),
    )


def task_of(described: Described, kind: str, part: str | None) -> Task:
    """The task as a command names it. Raises InputError for a part that isn't there or isn't wanted."""
    return named_task(kind, part, described.machine.parts)


def why_text(matter: Matter, adjuster: str) -> Iterator[str]:
    """Nearest states of one adjuster, and what fails in them. Raises InputError for an unknown one."""
    return why_lines(matter.speaker, matter.procedure, adjuster)


def skew_text(described: Described) -> Iterator[str]:
    """Plate values on which order or states hang; takes seconds, since each skew is a search."""
    return skew_lines(_speaker(described), skew_findings(described.machine, described.policies))


def walkdown(described: Described) -> WalkdownState:
    """How far the machine file was compared with the machine, and which computed settings were accepted."""
    return _walked(described, targets(described))


def _walked(described: Described, found: Targets) -> WalkdownState:
    return walkdown_state(
        described.walkdown,
        digests=_entry_digests(described),
        computed_bar=computed_settings(found),
        computed_from=_computing_digest(described),
    )


def _entry_digests(described: Described) -> dict[Place, str]:
    return {place: digest(canonical_bytes(said)) for place, said in walk_contents(described.machine).items()}


def _computing_digest(described: Described) -> str:
    return digest(canonical_bytes(computing_contents(described.machine, described.policies)))


def write_walkdown(machine_file: Path, described: Described, answers: Answers) -> WalkdownState:
    """Adds answers to the walk-down beside the machine file, and says how it stands then.

    Raises InputError for unknown entries, wrong dates, and what can't be accepted, and writes nothing.
    """
    by, on = answers.signed(dated=described.machine.dated)
    found = targets(described)
    now = replace(described, walkdown=_walkdown(machine_file, described.machine, answers.today))
    computed_from = _computing_digest(now)
    changed = with_answers(
        now.walkdown,
        now.machine,
        answered(answers, now.walkdown, _entry_digests(now), by=by, on=on),
        {
            id_: accept(now.machine, found, id_, by=by, on=on, computed_from=computed_from)
            for id_ in answers.accept
        },
    )
    move_into_place(
        walkdown_file(machine_file),
        walkdown_text(changed).encode(),
        fix="Look whether you may write into the folder of the machine file.",
    )
    return _walked(replace(now, walkdown=changed), found)


def issuable(matter: Matter) -> tuple[Problem, ...]:
    """What stands against issuing a pack; empty where nothing does. A draft is printed all the same."""
    state = matter.walkdown or walkdown_state(None, digests={}, computed_bar={}, computed_from="")
    good = status_of(matter.targets, matter.procedure, matter.replay) is ExitStatus.GOOD
    return obstacles(matter.speaker, state, established=good)


def issuable_text(matter: Matter) -> Iterator[str]:
    return note_lines(issuable(matter))


def walkdown_text_lines(described: Described, state: WalkdownState) -> Iterator[str]:
    return walk_lines(_speaker(described), state)


def walkdown_json(described: Described, state: WalkdownState) -> dict[str, Json]:
    return walk_json(_speaker(described), state)


def walkdown_questions(described: Described, state: WalkdownState) -> Iterator[tuple[str, tuple[str, ...]]]:
    """Every entry that doesn't agree yet, as ``section/id`` with its lines of the list."""
    speaker = _speaker(described)
    for one in state.entries:
        if one.state is not EntryState.AGREES:
            yield f"{one.section}/{one.id}", tuple(entry_lines(speaker, one))


def walkdown_standing(described: Described, state: WalkdownState) -> str:
    return standing(described.machine, state)


def new(kind: str, target: Path) -> Starter:
    """Writes the starter of a circuit family to a file that isn't there yet. Raises InputError."""
    return write_starter(kind, target)


def starter_kinds() -> Iterator[str]:
    """One line a starter."""
    return columns([(one.kind, one.sentence) for one in starters()])


def diff(old_file: Path, new_file: Path, site_file: Path | None = None) -> Differing:
    """What changes from one machine file to another, from plate values to readings.

    Raises InputError with the problems of both where either can't be read.
    """
    described: list[Described] = []
    problems: list[Problem] = []
    for name, file in (("OLD", old_file), ("NEW", new_file)):
        try:
            described.append(check(file, site_file))
        except InputError as error:
            problems += [replace(one, where=f"{name} {one.where}") for one in error.problems]
    if problems:
        raise InputError(*problems)
    units = described[1].machine.units
    before, after = (_side(one, units) for one in described)
    return differences(before, after)


def _side(described: Described, units: Units) -> Side:
    matter = steps(described)
    shown = described.machine.model_copy(update={"units": units})
    speaker = Speaker(shown, described.circuit, described.policies, matter.procedure.search.found())
    return Side(
        machine=described.machine,
        targets=matter.targets,
        procedure=matter.procedure,
        speaker=speaker,
        spoken=_spoken(replace(matter, speaker=speaker)),
        status=int(status_of(matter.targets, matter.procedure, matter.replay)),
    )


def diff_text(differing: Differing) -> Iterator[str]:
    return difference_lines(differing)


def diff_json(differing: Differing) -> dict[str, Json]:
    return difference_json(differing)


def outcome_of_check(site_file: Path | None, today: date, file: Path) -> Outcome:
    """What comes of one file among many; a known error is an outcome, so that the others get theirs."""
    try:
        described = check(file, site_file, today)
    except JamnutError as error:
        return failed(str(file), error)
    return known(str(file), described.machine, ExitStatus.GOOD, "", "", check_json(described))


def outcome_of_targets(site_file: Path | None, today: date, file: Path) -> Outcome:
    """The same for its settings."""
    try:
        described = check(file, site_file, today)
        found = targets(described)
    except JamnutError as error:
        return failed(str(file), error)
    words = worst_finding(_speaker(described), found.findings)
    count = f"{len(found.settings)} of {len(screws_of(described.machine))}"
    data = targets_json(described, found)
    return known(str(file), described.machine, status_of(found), count, words, data)


def outcome_of_steps(site_file: Path | None, today: date, kind: str, part: str | None, file: Path) -> Outcome:
    """The same for its procedure; ``kind`` and ``part`` name the task as for `task_of`."""
    found, _ = _stepped(site_file, today, kind, part, file)
    return found


def _stepped(
    site_file: Path | None, today: date, kind: str, part: str | None, file: Path
) -> tuple[Outcome, Matter | None]:
    try:
        described = check(file, site_file, today)
        matter = steps(described, task_of(described, kind, part))
    except JamnutError as error:
        return failed(str(file), error), None
    words = worst_finding(matter.speaker, _findings(matter))
    status = status_of(matter.targets, matter.procedure, matter.replay)
    count = f"{len(matter.procedure.search.found())} of {len(screws_of(described.machine))}"
    return known(str(file), described.machine, status, count, words, steps_json(matter)), matter


@dataclass(frozen=True, kw_only=True)
class Writing:
    """Where packs of many machines go, and how. ``only`` as in `write_pack`."""

    folder: Path
    paper: Literal["A4", "Letter"]
    only: tuple[str, ...]
    taken: set[Path] = field(default_factory=set)
    """Files that were written for machines before this one; it grows."""


def outcome_of_pack(
    site_file: Path | None, today: date, kind: str, part: str | None, writing: Writing, file: Path
) -> Outcome:
    """The same, with its draft written where the job holds."""
    found, matter = _stepped(site_file, today, kind, part, file)
    if matter is None or found.status is not ExitStatus.GOOD:
        return found
    target = writing.folder / draft_name(matter.machine)
    try:
        if target in writing.taken:
            raise InputError(
                Problem(
                    where=str(file),
                    what=f"Another of these machine files has the tag {matter.machine.tag} too.",
                    fix="Give each machine a tag of its own, or write this pack by itself with -o.",
                )
            )
        writing.taken.add(target)
        written = write_pack(matter, target, paper=writing.paper, only=writing.only)
    except JamnutError as error:
        return replace(failed(str(file), error), tag=found.tag, settings=found.settings)
    return replace(found, data={"file": str(target), "pages": written.pages, "digest": written.digest})


def content(matter: Matter) -> tuple[Document, str]:
    """The content of the pack and its printed digest.

    Raises RefusedError or NotEstablishedError, with what stands against it, where the job doesn't hold.
    """
    _hold(matter)
    document = compose(matter)
    if matter.walkdown is None or not matter.walkdown.touched:
        return document, digest(canonical_bytes(document))
    # Names and dates are no part of the content: the digest is that of the sheets before any walk-down.
    return document, digest(canonical_bytes(compose(replace(matter, walkdown=None))))


def pack(matter: Matter, layout: Layout, issue: IssueContext | None = None) -> bytes:
    """The pack as PDF bytes; a draft without an issue context. Raises as `content` and `place` do."""
    document, printed = content(matter)
    return print_pack(document, layout=layout, digest=printed, issue=issue)


def draft_name(machine: Machine) -> str:
    """Name of a draft's file where none is given."""
    return f"{machine.tag}-draft.pdf"


@dataclass(frozen=True, kw_only=True)
class Written:
    """What a pack command wrote."""

    pages: int
    digest: str


def write_pack(
    matter: Matter, target: Path, *, paper: Literal["A4", "Letter"], only: tuple[str, ...]
) -> Written:
    """Places and draws a draft and moves it into place.

    ``only``: names of the documents to print; the whole pack if there are none. Raises InputError, and
    RefusedError or NotEstablishedError where nothing may be printed.
    """
    document, printed = content(matter)
    kinds = tuple(SheetKind(name) for name in only) or tuple(SheetKind)
    pages = place(document, Layout(paper=paper, kinds=kinds), digest=printed)
    write_pdf(target, pdf_bytes(pages, document))
    return Written(pages=len(pages), digest=printed)


def status_of(found: Targets, procedure: Procedure | None = None, run: Replay | None = None) -> ExitStatus:
    """Exit status that targets, a procedure from them and its replay come to."""
    if found.refusals:
        return ExitStatus.REFUSED
    for judged in (procedure, run):
        if judged is None or judged.verdict is Verdict.ESTABLISHED:
            continue
        return ExitStatus.REFUSED if judged.verdict is Verdict.REFUTED else ExitStatus.NOT_ESTABLISHED
    return ExitStatus.GOOD


def _hold(matter: Matter) -> None:
    """Nothing is printed for a job that doesn't hold."""
    status = status_of(matter.targets, matter.procedure, matter.replay)
    if status is ExitStatus.GOOD:
        return
    problems = refusals(matter.speaker, _findings(matter))
    raise (RefusedError if status is ExitStatus.REFUSED else NotEstablishedError)(*problems)


def check_text(described: Described) -> Iterator[str]:
    return machine_lines(described.machine)


def check_json(described: Described) -> dict[str, Json]:
    return machine_json(described.machine)


def targets_text(described: Described, found: Targets) -> Iterator[str]:
    return target_lines(_speaker(described), found, proposal_words(_walked(described, found)))


def targets_json(described: Described, found: Targets) -> dict[str, Json]:
    return as_json.targets_json(_speaker(described), found, proposal_words(_walked(described, found)))


def steps_text(matter: Matter) -> Iterator[str]:
    return step_lines(matter.speaker, matter.procedure, _spoken(matter), _findings(matter), issuable(matter))


def steps_json(matter: Matter) -> dict[str, Json]:
    return as_json.steps_json(
        matter.speaker,
        matter.procedure,
        _spoken(matter),
        matter.procedure.verdict,
        _findings(matter),
        issuable(matter),
    )


def _speaker(described: Described) -> Speaker:
    return Speaker(described.machine, described.circuit, described.policies, {})


def _spoken(matter: Matter) -> dict[int, tuple[SpokenStep, ...]]:
    return {place: matter.spoken(stage) for place, stage in enumerate(matter.procedure.stages)}


def _findings(matter: Matter) -> tuple[Finding, ...]:
    run = findings_of(matter.replay) if matter.procedure.stages else ()
    return (*matter.targets.findings, *matter.procedure.findings, *run)
