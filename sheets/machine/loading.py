"""Files into values, or one error with everything that is wrong in them, line by line."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass
from datetime import date
from functools import lru_cache
from pathlib import Path
from typing import Any, Final, TypeVar

from pydantic import TypeAdapter, ValidationError

from sheets.errors import InputError, Problem, quoted
from sheets.machine import flaws, reading
from sheets.machine.blanks import find_blanks
from sheets.machine.checks import Survey, cross_check
from sheets.machine.fields import Entry, Identifier, PortRef
from sheets.machine.flaws import Flaw
from sheets.machine.model import Machine, Supply
from sheets.machine.parts import AnyGauge, Part
from sheets.machine.reporting import flaws_of
from sheets.machine.site import Site
from sheets.machine.site_checks import site_check
from sheets.machine.walkdown import Walkdown

MOST_PROBLEMS: Final = 50
"""So many are told of one file; the rest shows when these are corrected."""
MOST_BLANKS: Final = 500
"""So many blanks of a starter are asked for at once: they are a list to work through, not faults."""

_SECTIONS: Final = ("parts", "gauges", "energy")
"""Their names are left out where an entry's identifier says enough."""

E = TypeVar("E", bound=Entry)


@dataclass(frozen=True, kw_only=True)
class LoadedMachine:
    """A machine, and the file that it came from."""

    machine: Machine
    source: bytes
    """The file as it stood."""
    name: str
    """Name of the file, without its folder."""


@dataclass(frozen=True, kw_only=True)
class LoadedSite:
    """A site, and the file that it came from."""

    site: Site
    source: bytes
    """The file as it stood."""
    name: str
    """Name of the file, without its folder."""


@dataclass(frozen=True, kw_only=True)
class LoadedWalkdown:
    """A walk-down, and the file that it came from."""

    walkdown: Walkdown
    source: bytes
    """The file as it stood."""
    name: str
    """Name of the file, without its folder."""


@dataclass(frozen=True, kw_only=True)
class Sources:
    """The files that a machine was read from, each as it stood; None where there was none."""

    machine: bytes
    site: bytes | None
    walkdown: bytes | None


def load_machine(path: Path, site: Site | None = None) -> LoadedMachine:
    """Read a machine file. Raises InputError with every problem in it, in the order of its lines.

    ``site``: of the works in which it stands, where there is one; both have to fit together.
    """
    source = _bytes_of(path)
    return LoadedMachine(machine=parse_machine(source, path.name, site), source=source, name=path.name)


def load_site(path: Path) -> LoadedSite:
    """Read a site file. Raises InputError with every problem in it, in the order of its lines."""
    source = _bytes_of(path)
    return LoadedSite(site=parse_site(source, path.name), source=source, name=path.name)


def parse_machine(text: bytes, name: str, site: Site | None = None) -> Machine:
    """The machine in that text; ``name`` stands in the problems, ``site`` as above. Raises InputError."""

    def check(machine: Machine) -> Iterator[Flaw]:
        yield from cross_check(Survey.of(machine))
        yield from site_check(machine, site)

    return _parsed(text, name, Machine, check, _holed_survey)


def parse_site(text: bytes, name: str) -> Site:
    """The site in that text; ``name`` stands in the problems. Raises InputError."""
    return _parsed(text, name, Site, lambda _: (), lambda _: None)


def load_walkdown(path: Path, *, machine: Machine, today: date | None) -> LoadedWalkdown:
    """Read a walk-down file; ``machine`` and ``today`` as below. Raises InputError with every problem."""
    source = _bytes_of(path)
    return LoadedWalkdown(
        walkdown=parse_walkdown(source, path.name, machine=machine, today=today),
        source=source,
        name=path.name,
    )


def parse_walkdown(text: bytes, name: str, *, machine: Machine, today: date | None) -> Walkdown:
    """The walk-down in that text; ``name`` stands in the problems. Raises InputError.

    ``machine`` is the one that it has to be about. ``today`` comes from the clock; where it is given, answers
    from the future are refused.
    """

    def check(walkdown: Walkdown) -> Iterator[Flaw]:
        if walkdown.machine != machine.tag:
            yield Flaw(
                at=("machine",),
                what=f"This is the walk-down of {walkdown.machine}; the machine file is of {machine.tag}.",
                fix="Look which file belongs here; after a copy, begin a new walk-down.",
            )
        if today is not None:
            yield from walkdown.dates_after(today)

    return _parsed(text, name, Walkdown, check, lambda _: None)


def load_entry(path: Path, model: type[E]) -> E:
    """A file that stands by itself, such as a record file. Raises InputError with all that is wrong in it."""
    return parse_entry(_bytes_of(path), path.name, model)


def parse_entry(text: bytes, name: str, model: type[E]) -> E:
    """The same from its text."""
    return _parsed(text, name, model, lambda _: (), lambda _: None)


def _bytes_of(path: Path) -> bytes:
    try:
        with path.open("rb") as file:
            return file.read(reading.LARGEST_BYTES + 1)
    except OSError as error:
        raise InputError(
            Problem(
                where=path.name or str(path),
                what=f"The file can't be read: {error.strerror or 'no reason is given'}.",
                fix="Look at the name of the file and whether you may read it.",
            )
        ) from None


def _parsed(
    source: bytes,
    name: str,
    model: type[E],
    check: Callable[[E], Iterable[Flaw]],
    survey_with_holes: Callable[[dict[str, Any]], Survey | None],
) -> E:
    text = reading.read_text(source, name)
    try:
        value = model.model_validate(text.data, by_alias=True, by_name=False)
        found = list(check(value))
    except ValidationError as error:
        found = list(flaws_of(error, model=model, data=text.data))
        survey = survey_with_holes(text.data)
        found += cross_check(survey) if survey else ()
        value = None
    blanks = find_blanks(text, source, model)
    blank = {flaw.at for flaw in blanks}
    placed = [(_line(flaw.at, text.lines), flaw) for flaw in found if flaw.at not in blank]
    placed += [*text.flaws, *((_line(flaw.at, text.lines), flaw) for flaw in blanks)]
    if placed or value is None:
        placed.sort(key=lambda each: each[0])
        raise InputError(*_problems(placed, name, MOST_BLANKS if blanks else MOST_PROBLEMS))
    return value


def _problems(placed: list[tuple[int, Flaw]], name: str, most: int) -> Iterator[Problem]:
    for line, flaw in placed[:most]:
        where = ", ".join([f"{name}, line {line}", *_steps(flaw.at)])
        yield Problem(where=where, what=flaw.what, fix=flaw.fix)
    if len(placed) > most:
        yield Problem(
            where=name,
            what=f"There are {len(placed) - most} more problems.",
            fix="Correct these first, then read the file again.",
        )


def _steps(path: flaws.Path) -> Iterator[str]:
    """A place in words: RV1, adjuster, lowest."""
    shortened = path[1:] if len(path) > 1 and path[0] in _SECTIONS else path
    for step in shortened:
        yield f"item {step + 1}" if isinstance(step, int) else quoted(step)[1:-1]


def _line(path: flaws.Path, lines: dict[flaws.Path, int]) -> int:
    """Line of that place, or of the nearest one around it."""
    while path not in lines:
        path = path[:-1]
    return lines[path]


@lru_cache(maxsize=8)
def _adapter(section: str) -> TypeAdapter[Any]:
    kinds: dict[str, Any] = {
        "parts": Part,
        "gauges": AnyGauge,
        "energy": Supply,
        "port": PortRef,
        "id": Identifier,
    }
    return TypeAdapter(kinds[section])


def _holed_survey(data: dict[str, Any]) -> Survey | None:
    """What can be read of a machine file that has flaws; None where a whole section can't."""
    sections = {section: data.get(section) for section in (*_SECTIONS, "nets")}
    if not all(isinstance(entries, dict) for entries in sections.values()):
        return None
    if not all(isinstance(references, list) for references in data["nets"].values()):
        return None
    read = {
        section: {
            id: value
            for id, given in data[section].items()
            for value in _readable(section, given)
            if any(_readable("id", id))
        }
        for section in _SECTIONS
    }
    nets = {
        net: tuple(
            (place, port) for place, given in enumerate(references) for port in _readable("port", given)
        )
        for net, references in data["nets"].items()
    }
    return Survey(
        parts=read["parts"],
        gauges=read["gauges"],
        energy=read["energy"],
        nets=nets,
        torn_nets=frozenset(net for net, ports in nets.items() if len(ports) < len(data["nets"][net])),
        identifiers=tuple((section, id) for section in _SECTIONS for id in data[section]),
    )


def _readable(section: str, given: object) -> Iterator[Any]:
    """The value, if it can be read."""
    try:
        yield _adapter(section).validate_python(given, by_alias=True, by_name=False)
    except ValidationError:
        return
