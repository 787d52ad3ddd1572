"""A machine file in one line, or as data: read and good."""

from __future__ import annotations

from collections.abc import Iterator

from sheets.machine.model import Machine
from sheets.machine.site import Site
from sheets.wording.plain import FORMAT, Json, counted


def machine_lines(machine: Machine, site: Site | None = None, site_name: str = "") -> Iterator[str]:
    """That the file is good, with what it holds, and which site file was taken with it."""
    yield (
        f"{machine.tag} {machine.name}: good, {counted(len(machine.parts), 'part')}, "
        f"{counted(len(machine.nets), 'net')}, {counted(len(machine.gauges), 'gauge')}, "
        f"machine data of {machine.dated.isoformat()}"
    )
    if site is not None:
        yield f"with the site file {site_name} of {site.plant}"
    else:
        yield "without a site file: policy figures are the project's own"


def machine_json(machine: Machine, site: Site | None = None, site_name: str = "") -> dict[str, Json]:
    """Identity and counts of a machine file, and the site file that was taken with it."""
    return {
        "format": FORMAT,
        "tag": machine.tag,
        "name": machine.name,
        "document": machine.document,
        "dated": machine.dated.isoformat(),
        "parts": len(machine.parts),
        "nets": len(machine.nets),
        "gauges": len(machine.gauges),
        "energy_sources": len(machine.energy),
        "site": {"file": site_name, "plant": site.plant} if site is not None else None,
    }
