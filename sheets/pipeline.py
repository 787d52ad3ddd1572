"""Joins the stages: reads like a table of contents. One function a verb."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Literal

from sheets import ENGINE
from sheets.amounts import Finding, Severity
from sheets.circuit.build import both_ends
from sheets.circuit.model import Circuit
from sheets.circuit.verdict import Verdict
from sheets.errors import ExitStatus, InputError, NotEstablishedError, Problem, RefusedError
from sheets.hazards.assess import assess
from sheets.machine.loading import load_machine, load_site
from sheets.machine.model import Machine
from sheets.machine.site import Policies, Site
from sheets.pages.compose.matter import Matter
from sheets.pages.compose.pack import compose
from sheets.pages.document import Document, IssueContext, Layout, SheetKind
from sheets.pages.layout import place
from sheets.pages.press import pdf_bytes, print_pack
from sheets.procedure.case import Case
from sheets.procedure.plan import make_procedure
from sheets.procedure.steps import Procedure
from sheets.procedure.task import Task
from sheets.seal.canonical import canonical_bytes, digest
from sheets.targets.compute import compute_targets
from sheets.targets.settings import Targets
from sheets.trial.replay import Replay, findings_of, replay
from sheets.wording import as_json
from sheets.wording.as_json import Json, machine_json
from sheets.wording.findings import say_finding
from sheets.wording.steps import Speaker, SpokenStep
from sheets.wording.terminal import machine_lines, step_lines, target_lines

SITE_FILE = "site.yaml"


@dataclass(frozen=True, kw_only=True)
class Described:
    """A machine as read, with its site."""

    machine: Machine
    site: Site | None
    circuit: Circuit

    @property
    def policies(self) -> Policies:
        return self.site.policies if self.site else Policies()


def check(machine_file: Path, site_file: Path | None = None) -> Described:
    """Reads a machine file, its site file where there is one, and builds the circuit. Raises InputError."""
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
    circuit = ends[-1]
    return Described(machine=machine, site=site, circuit=circuit)


def _site(machine_file: Path, site_file: Path | None) -> Site | None:
    if site_file is not None:
        return load_site(site_file).site
    beside = machine_file.parent / SITE_FILE
    return load_site(beside).site if beside.is_file() else None


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
    )


def content(matter: Matter) -> tuple[Document, str]:
    """The content of the pack and its printed digest.

    Raises RefusedError or NotEstablishedError, with what stands against it, where the job doesn't hold.
    """
    _hold(matter)
    document = compose(matter)
    return document, digest(canonical_bytes(document))


def pack(matter: Matter, layout: Layout, issue: IssueContext | None = None) -> bytes:
    """The pack as PDF bytes; a draft without an issue context. Raises as `content` and `place` do."""
    document, printed = content(matter)
    return print_pack(document, layout=layout, digest=printed, issue=issue)


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
    write_aside(target, pdf_bytes(pages, document))
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
    against = [
        one for one in _findings(matter) if one.severity in (Severity.REFUSED, Severity.NOT_ESTABLISHED)
    ]
    problems = [
        Problem(where=matter.machine.tag, what=what, fix=fix)
        for what, fix in (say_finding(matter.speaker, one) for one in against)
    ] or [
        Problem(
            where=matter.machine.tag,
            what="There is no adjuster that is in use and may be set.",
            fix="Look for 'may be set: no' in the machine file, and at what jamnut steps says of each.",
        )
    ]
    raise (RefusedError if status is ExitStatus.REFUSED else NotEstablishedError)(*problems)


def check_text(described: Described) -> Iterator[str]:
    return machine_lines(described.machine)


def check_json(described: Described) -> dict[str, Json]:
    return machine_json(described.machine)


def targets_text(described: Described, found: Targets) -> Iterator[str]:
    return target_lines(_speaker(described), found)


def targets_json(described: Described, found: Targets) -> dict[str, Json]:
    return as_json.targets_json(_speaker(described), found)


def steps_text(matter: Matter) -> Iterator[str]:
    return step_lines(matter.speaker, matter.procedure, _spoken(matter), _findings(matter))


def steps_json(matter: Matter) -> dict[str, Json]:
    return as_json.steps_json(
        matter.speaker, matter.procedure, _spoken(matter), matter.procedure.verdict, _findings(matter)
    )


def _speaker(described: Described) -> Speaker:
    return Speaker(described.machine, described.circuit, described.policies, {})


def _spoken(matter: Matter) -> dict[int, tuple[SpokenStep, ...]]:
    return {place: matter.spoken(stage) for place, stage in enumerate(matter.procedure.stages)}


def _findings(matter: Matter) -> tuple[Finding, ...]:
    run = findings_of(matter.replay) if matter.procedure.stages else ()
    return (*matter.targets.findings, *matter.procedure.findings, *run)


def write_aside(target: Path, data: bytes) -> None:
    """Writes a PDF aside and moves it into place, so that nothing half-written is left.

    Raises InputError if the folder isn't there or can't be written to, and if another kind of file already
    stands under that name.
    """
    aside = target.parent / f".{target.name}.part"
    try:
        if target.exists() and not _is_pdf(target):
            raise InputError(
                Problem(
                    where=str(target),
                    what="Something stands there that isn't a PDF file.",
                    fix="Name another file with -o; nothing was overwritten.",
                )
            )
        aside.write_bytes(data)
        aside.replace(target)
    except OSError as error:
        raise InputError(
            Problem(
                where=str(target),
                what=f"The file can't be written: {error.strerror}.",
                fix="Name a file with -o, in a folder that exists and that you may write to.",
            )
        ) from None
    finally:
        if aside.exists():
            aside.unlink()


def _is_pdf(file: Path) -> bool:
    if not file.is_file():
        return False
    with file.open("rb") as opened:
        return opened.read(5) in (b"%PDF-", b"")
