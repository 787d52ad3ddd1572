"""Joins the stages: reads like a table of contents. One function a verb."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from sheets import ENGINE
from sheets.circuit.build import build_circuit
from sheets.circuit.model import Circuit
from sheets.errors import InputError, Problem
from sheets.hazards.assess import assess
from sheets.machine.loading import load_machine, load_site
from sheets.machine.model import Machine
from sheets.machine.site import Policies, Site
from sheets.pages.compose.matter import Matter
from sheets.pages.compose.pack import compose
from sheets.pages.document import Document, IssueContext, Layout
from sheets.pages.press import print_pack
from sheets.procedure.plan import make_procedure
from sheets.seal.canonical import canonical_bytes, digest
from sheets.targets.compute import compute_targets
from sheets.targets.settings import Targets
from sheets.wording.steps import Speaker

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
    circuit = build_circuit(
        machine,
        opening_ratio_direct=policies.direct_opening_ratio,
        opening_ratio_pilot=policies.pilot_opening_ratio,
        control_width_bar=policies.compensator_width_bar,
    )
    return Described(machine=machine, site=site, circuit=circuit)


def _site(machine_file: Path, site_file: Path | None) -> Site | None:
    if site_file is not None:
        return load_site(site_file).site
    beside = machine_file.parent / SITE_FILE
    return load_site(beside).site if beside.is_file() else None


def targets(described: Described) -> Targets:
    """Settings of every adjuster, with windows, derivations and findings."""
    return compute_targets(described.machine, described.circuit, described.policies)


def steps(described: Described) -> Matter:
    """The procedure in words, with hazards; refusals are findings of its targets and procedure."""
    found = targets(described)
    procedure = make_procedure(described.machine, described.circuit, found, described.policies)
    return Matter(
        machine=described.machine,
        site=described.site,
        circuit=described.circuit,
        targets=found,
        procedure=procedure,
        hazards=assess(described.machine, described.circuit, procedure),
        speaker=Speaker(
            described.machine, described.circuit, described.policies, procedure.search.found()
        ),
        engine=str(ENGINE),
    )


def content(matter: Matter) -> tuple[Document, str]:
    """The content of the pack and its printed digest."""
    document = compose(matter)
    return document, digest(canonical_bytes(document))


def pack(matter: Matter, layout: Layout, issue: IssueContext | None = None) -> bytes:
    """The pack as PDF bytes; a draft without an issue context."""
    document, printed = content(matter)
    return print_pack(document, layout=layout, digest=printed, issue=issue)


def write_aside(target: Path, data: bytes) -> None:
    """Writes a file aside and moves it into place, so that nothing half-written is left.

    Raises InputError if the folder isn't there or can't be written to.
    """
    aside = target.with_name(f".{target.name}.part")
    try:
        aside.write_bytes(data)
        aside.replace(target)
    except OSError as error:
        aside.unlink(missing_ok=True)
        raise InputError(
            Problem(
                where=str(target),
                what=f"The file can't be written: {error.strerror}.",
                fix="Name a folder that exists and that you may write to.",
            )
        ) from None
