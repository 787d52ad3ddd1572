"""What an event says, as a frozen value: written into its data, and read back as strictly.

Each kind of event has one class, with its kind; the class lists what is said, and nothing else may stand in
the data. A field that has a default may be missing, so that events written before it was thought of still
read; every other must be there.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import MISSING, Field, dataclass, fields, is_dataclass
from datetime import date, datetime
from enum import Enum
from types import UnionType
from typing import Any, ClassVar, Final, Generic, TypeVar, get_args, get_origin, get_type_hints

from sheets.errors import InputError, Problem, quoted
from sheets.register.events import Entry, Event, EventKind, contradiction
from sheets.register.form import LONGEST_REASON, name_text
from sheets.register.store import View, Writer


class Said:
    """What one kind of event says. Texts, whole numbers, truth values, dates, enums, and tuples."""

    KIND: ClassVar[EventKind]


LONG: Final = "long"
"""Marks, in the metadata of a field, a text of any length and any lines: a file that is kept as it was."""

S = TypeVar("S", bound=Said)
V = TypeVar("V")


@dataclass(frozen=True, kw_only=True)
class Told(Generic[S]):
    """An event with what it says, who told the register, when, and the number that it is traced to."""

    sequence: int
    at: datetime
    by: str
    machine: str
    document: str
    record_id: str
    said: S


def tell(
    writer: Writer,
    said: Said,
    *,
    who: str,
    when: datetime,
    machine: str = "",
    document: str = "",
    record_id: str = "",
) -> int:
    """Writes it as an event, and gives its number. Raises InputError for a text that can't stand in one."""
    event = writer.append(
        Entry(
            when=when,
            who=who,
            kind=said.KIND,
            machine=machine,
            document=document,
            record_id=record_id,
            data=data_of(said),
        )
    )
    return event.sequence


def told(
    view: View,
    said_as: type[S],
    *,
    machine: str | None = None,
    document: str | None = None,
    record_id: str | None = None,
    saying: str | None = None,
) -> Iterator[Told[S]]:
    """Events of one kind in their order. Raises InputError for one whose data aren't of that form."""
    for event in view.events(
        kinds={said_as.KIND}, machine=machine, document=document, record_id=record_id, saying=saying
    ):
        yield read(said_as, event)


def read(said_as: type[S], event: Event) -> Told[S]:
    """One event with what it says. Raises InputError if its data aren't of that form."""
    try:
        said = value_of(said_as, event.facts)
    except ValueError as error:
        raise contradiction(event.sequence, f"its data aren't those of '{said_as.KIND}': {error}") from None
    return Told(
        sequence=event.sequence,
        at=event.when,
        by=event.who,
        machine=event.machine,
        document=event.document,
        record_id=event.record_id,
        said=said,
    )


def data_of(value: object) -> dict[str, object]:
    """A frozen value as the data of an event. Raises InputError for a text that can't stand in one."""
    if not is_dataclass(value):
        raise TypeError(f"{type(value).__name__} is no dataclass")
    return {one.name: _plain(getattr(value, one.name), one) for one in fields(value)}


def value_of(kind: type[V], data: Mapping[str, object]) -> V:
    """The frozen value in the data. Raises ValueError if they aren't of its form."""
    known = _fields(kind)
    if unknown := sorted(data.keys() - known.keys()):
        raise ValueError(f"'{unknown[0]}' isn't known")
    given: dict[str, Any] = {}
    for name, (hint, needed) in known.items():
        if name in data:
            given[name] = _typed(hint, data[name], name)
        elif needed:
            raise ValueError(f"'{name}' is missing")
    return kind(**given)


_KNOWN: Final[dict[type[object], dict[str, tuple[Any, bool]]]] = {}


def _fields(kind: type[object]) -> dict[str, tuple[Any, bool]]:
    """Every field of a class: what it holds, and whether it must be there. Looked up once a class."""
    if kind in _KNOWN:
        return _KNOWN[kind]
    if not is_dataclass(kind):
        raise TypeError(f"{kind} is no dataclass")
    hints = get_type_hints(kind)
    _KNOWN[kind] = {one.name: (hints[one.name], one.default is MISSING) for one in fields(kind)}
    return _KNOWN[kind]


def _plain(value: object, one: Field[Any]) -> object:
    if isinstance(value, Enum):
        return value.value
    if isinstance(value, str) and one.metadata.get(LONG):
        return value
    if isinstance(value, str):
        may_be_empty = one.default == "" and not value
        return value if may_be_empty else name_text(_called(one.name), value, longest=LONGEST_REASON)
    if value is None or isinstance(value, bool | int):
        return value
    if isinstance(value, datetime):
        raise TypeError("a time is the event's own; a date and a text of a time can be said")
    if isinstance(value, date):
        return value.isoformat()
    if isinstance(value, tuple):
        return [_plain(item, one) if isinstance(item, str) else _item(item) for item in value]
    return data_of(value)


def _item(value: object) -> object:
    return value if isinstance(value, int) else data_of(value)


def _typed(hint: Any, value: object, name: str) -> object:
    if isinstance(hint, UnionType):  # a value or none
        return None if value is None else _typed(get_args(hint)[0], value, name)
    if get_origin(hint) is tuple:
        if not isinstance(value, list):
            raise ValueError(f"'{name}' is no list")
        return tuple(_typed(get_args(hint)[0], item, name) for item in value)
    if isinstance(hint, type) and is_dataclass(hint):
        if not isinstance(value, dict):
            raise ValueError(f"'{name}' holds no keys")
        return value_of(hint, value)
    if isinstance(hint, type) and issubclass(hint, Enum):
        return hint(value)
    if hint is date:
        return date.fromisoformat(value) if isinstance(value, str) else _not(name, "a date")
    if type(value) is not hint:
        return _not(name, f"a {hint.__name__}")
    return value


def _not(name: str, what: str) -> object:
    raise ValueError(f"'{name}' isn't {what}")


def _called(name: str) -> str:
    return name.replace("_", " ")


def day_of(what: str, text: str) -> date:
    """A date that somebody wrote, year first; ``what`` names it. Raises InputError."""
    try:
        found = date.fromisoformat(text)
    except ValueError:
        found = None
    if found is None or found.isoformat() != text:  # weeks and days of the year are dates there, too
        raise InputError(
            Problem(where=what, what=f"{quoted(text)} is no date.", fix="Write it year first: 2031-03-04.")
        )
    return found
