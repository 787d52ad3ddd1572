"""Every single value of an entry with its keys, as the file words them: for lists, digests, differences."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from datetime import date
from typing import Annotated, Any, Union, get_args, get_origin

from sheets.machine.fields import Entry, Quantity, key_of

Path = tuple[str, ...]
Value = float | str | bool | tuple[str, ...]


@dataclass(frozen=True, kw_only=True)
class Leaf:
    """One value: where it stands within its entry, and what it is."""

    path: Path
    """Keys as they stand in the file."""
    value: Value
    unit: str | None
    """Base unit of a quantity, empty for a ratio; None for everything else."""


def leaves(entry: Entry) -> Iterator[Leaf]:
    """The values of an entry in the order of its model, defaults included.

    What is left out and has no value of its own (an empty text or list, a missing control) gives nothing.
    """
    for name, field in type(entry).model_fields.items():
        value = getattr(entry, name)
        empty = value is None or value == "" or value in ((), {})
        if empty and not field.is_required():
            continue
        yield from _under((key_of(name),), value, _unit(field.annotation, tuple(field.metadata)))


def _under(path: Path, value: Any, unit: str | None) -> Iterator[Leaf]:
    if isinstance(value, Entry):
        for leaf in leaves(value):
            yield Leaf(path=path + leaf.path, value=leaf.value, unit=leaf.unit)
    elif isinstance(value, dict):
        if not value:
            yield Leaf(path=path, value=(), unit=None)
        for key, item in value.items():
            yield from _under((*path, key), item, None)
    elif isinstance(value, tuple) and any(isinstance(item, Entry) for item in value):
        for place, item in enumerate(value, start=1):
            yield from _under((*path, str(place)), item, None)
    elif isinstance(value, date):
        yield Leaf(path=path, value=value.isoformat(), unit=None)
    else:
        yield Leaf(path=path, value=value, unit=unit)


def _unit(annotation: Any, metadata: tuple[Any, ...]) -> str | None:
    """Base unit that the annotations of a field name; None if it is no quantity."""
    while get_origin(annotation) is Annotated:
        annotation, *more = get_args(annotation)
        metadata = (*metadata, *more)
    for mark in metadata:
        if isinstance(mark, Quantity):
            return mark.unit
    if get_origin(annotation) in (Union, type(int | str)):
        for option in get_args(annotation):
            found = _unit(option, ())
            if found is not None:
                return found
    return None
