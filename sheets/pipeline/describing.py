"""From files to a described machine: read, checked, its circuit built."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from datetime import date
from pathlib import Path

from sheets.circuit.build import both_ends
from sheets.circuit.model import Circuit
from sheets.machine.files import SITE_FILE, walkdown_file
from sheets.machine.loading import (
    LoadedSite,
    LoadedWalkdown,
    Sources,
    load_machine,
    load_site,
    load_walkdown,
    parse_machine,
    parse_site,
    parse_walkdown,
)
from sheets.machine.model import Machine
from sheets.machine.site import Policies, Site
from sheets.machine.walkdown import Walkdown
from sheets.wording.identity import machine_json, machine_lines
from sheets.wording.plain import Json


@dataclass(frozen=True, kw_only=True)
class Described:
    """A machine as read, with its site."""

    machine: Machine
    site: Site | None
    circuit: Circuit
    sources: Sources
    walkdown: Walkdown | None = None
    site_name: str = ""
    """Name of the site file, where there was one."""

    @property
    def policies(self) -> Policies:
        return self.site.policies if self.site else Policies()


def check(machine_file: Path, site_file: Path | None = None, today: date | None = None) -> Described:
    """Reads a machine file, its site and walk-down files where there are, and builds the circuit.

    ``today`` only refuses walk-down answers from the future. Raises InputError.
    """
    site = _site(machine_file, site_file)
    loaded = load_machine(machine_file, site.site if site else None)
    walked = walkdown_beside(machine_file, loaded.machine, today)
    return _described(
        loaded.machine,
        site.site if site else None,
        walked.walkdown if walked else None,
        Sources(
            machine=loaded.source,
            site=site.source if site else None,
            walkdown=walked.source if walked else None,
        ),
        site_name=site.name if site else "",
    )


def check_sources(sources: Sources) -> Described:
    """The same from the files as they travel in a pack. Raises InputError."""
    site = parse_site(sources.site, "site file in the pack") if sources.site is not None else None
    machine = parse_machine(sources.machine, "machine file in the pack", site)
    walked = (
        parse_walkdown(sources.walkdown, "walk-down in the pack", machine=machine, today=None)
        if sources.walkdown is not None
        else None
    )
    return _described(machine, site, walked, sources)


def _described(
    machine: Machine, site: Site | None, walked: Walkdown | None, sources: Sources, *, site_name: str = ""
) -> Described:
    policies = site.policies if site else Policies()
    ends = both_ends(
        machine,
        opening_ratio_direct=policies.direct_opening_ratio,
        opening_ratio_pilot=policies.pilot_opening_ratio,
        control_width_bar=policies.compensator_width_bar,
    )
    # Where the maker's drawing shows no bleed, outlet pressure reaches a port that is cut off: the last end.
    # Where nobody has looked, the search refuses every state in which the end matters.
    return Described(
        machine=machine, site=site, circuit=ends[-1], sources=sources, walkdown=walked, site_name=site_name
    )


def _site(machine_file: Path, site_file: Path | None) -> LoadedSite | None:
    if site_file is not None:
        return load_site(site_file)
    beside = machine_file.parent / SITE_FILE
    return load_site(beside) if beside.is_file() else None


def walkdown_beside(machine_file: Path, machine: Machine, today: date | None) -> LoadedWalkdown | None:
    beside = walkdown_file(machine_file)
    return load_walkdown(beside, machine=machine, today=today) if beside.is_file() else None


def check_text(described: Described) -> Iterator[str]:
    return machine_lines(described.machine, described.site, described.site_name)


def check_json(described: Described) -> dict[str, Json]:
    return machine_json(described.machine, described.site, described.site_name)
