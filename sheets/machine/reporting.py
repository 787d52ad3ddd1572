"""What pydantic finds, in words for somebody who knows hydraulics and not Python."""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping
from typing import Annotated, Any, Final, Literal, Union, get_args, get_origin

from pydantic import ValidationError
from pydantic_core import ErrorDetails

from sheets.errors import nearest, quoted
from sheets.machine.fields import Entry, example_of, key_of
from sheets.machine.flaws import Flaw, Path

GROUP: Final = "Write a group of keys here, each on its own line and indented."


def flaws_of(error: ValidationError, *, model: type[Entry], data: Mapping[str, Any]) -> Iterator[Flaw]:
    """Every flaw that the error carries, each with its place in ``data``."""
    details = [(_path(detail["loc"], data), detail) for detail in error.errors(include_url=False)]
    misspelt = {
        (*path[:-1], _meant(str(path[-1]), _shape(model, data, path[:-1])))
        for path, detail in details
        if detail["type"] == "extra_forbidden"
    }
    for path, detail in details:
        context = detail.get("ctx", {})
        if detail["type"] == "contradiction":
            yield from (flaw.under(path) for flaw in context["flaws"])
        elif detail["type"] == "said":
            yield Flaw(at=path, what=context["what"], fix=context["fix"])
        elif detail["type"] == "missing" and path in misspelt:
            continue  # the misspelt key is told already
        else:
            yield _translated(detail, path, model, data)


def example_at(model: type[Entry], data: Mapping[str, Any], path: Path) -> str:
    """How the value at that place may be written; empty for a place that isn't known."""
    shape = _shape(model, data, path)
    return shape.example() if shape else ""


def _translated(detail: ErrorDetails, path: Path, model: type[Entry], data: Mapping[str, Any]) -> Flaw:
    context = detail.get("ctx", {})
    match detail["type"]:
        case "missing":
            return _missing(path, _shape(model, data, path))
        case "union_tag_not_found":
            shape = _shape(model, data, path)
            return Flaw(
                at=(*path, "kind"),
                what="The key 'kind' is missing.",
                fix=_choose("", shape.kinds if shape else []),
            )
        case "extra_forbidden":
            return _unknown_key(path, _shape(model, data, path[:-1]))
        case "union_tag_invalid":
            tag = str(context["tag"])
            return Flaw(
                at=(*path, "kind"),
                what=f"The kind {quoted(tag)} isn't known.",
                fix=_choose(tag, _words(context["expected_tags"])),
            )
        case "literal_error":
            given = detail["input"] if isinstance(detail["input"], str) else "a group or list"
            return Flaw(
                at=path,
                what=f"{quoted(given)} can't stand here.",
                fix=_choose(given, _words(context["expected"])),
            )
        case "tuple_type":
            given = quoted(detail["input"])[1:-1] if isinstance(detail["input"], str) else ""
            return Flaw(
                at=path,
                what="A list is expected here.",
                fix=f"Write it in brackets, such as [{given or '...'}]; write [] if there is none.",
            )
        case "dict_type" | "model_type" | "model_attributes_type":
            return Flaw(at=path, what="A group of keys is expected here.", fix=GROUP)
        case "too_short":
            return Flaw(
                at=path, what="Nothing stands here; at least one is needed.", fix="Write at least one."
            )
        case _:
            return Flaw(
                at=path, what="The value can't be used here.", fix="Compare it with a sample machine file."
            )


def _missing(path: Path, shape: _Shape | None) -> Flaw:
    key = str(path[-1])
    fix = f"Add it, such as {key}: {shape.example()}." if shape else "Add it."
    if shape and shape.entry():
        required = [
            key_of(name) for name, field in shape.annotation.model_fields.items() if field.is_required()
        ]
        fix = f"Add it, with the keys {', '.join(required)} under it."
    return Flaw(at=path, what=f"The key {quoted(key)} is missing.", fix=fix)


def _unknown_key(path: Path, shape: _Shape | None) -> Flaw:
    key = str(path[-1])
    right = _meant(key, shape)
    hint = f"Did you mean {right}? " if right else ""
    known = ", ".join(shape.keys()) if shape else ""
    return Flaw(at=path, what=f"The key {quoted(key)} isn't known here.", fix=f"{hint}Known keys: {known}.")


def _meant(key: str, shape: _Shape | None) -> str | None:
    """Known key that an unknown one most likely stands for."""
    return nearest(key_of(key.replace(" ", "_")), shape.keys() if shape else [])


def _choose(given: str, words: list[str]) -> str:
    right = nearest(given, words)
    return (f"Did you mean {right}? " if right else "") + f"Write one of: {', '.join(words)}."


def _words(listed: str) -> list[str]:
    """Words out of a list such as ``'bar', 'psi' or 'MPa'``."""
    return re.findall(r"'([^']*)'", listed)


def _path(loc: tuple[str | int, ...], data: Any) -> Path:
    """Place in the file: the location without pydantic's own marks (the kind of a part, ``[key]``)."""
    path: list[str | int] = []
    for step in loc:
        if step == "[key]":
            continue
        if isinstance(data, dict) and step not in data and data.get("kind") == step:
            continue
        path.append(step)
        if isinstance(data, dict):
            data = data.get(str(step))
        elif isinstance(data, list) and isinstance(step, int) and step < len(data):
            data = data[step]
        else:
            data = None
    return tuple(path)


class _Shape:
    """What a place of a file is to hold, out of a model's annotations."""

    def __init__(self, annotation: Any, metadata: tuple[Any, ...] = (), kind: object = None) -> None:
        while get_origin(annotation) is Annotated:
            metadata = (*metadata, *get_args(annotation)[1:])
            annotation = get_args(annotation)[0]
        options: list[_Shape] = []
        if get_origin(annotation) in (Union, type(int | str)):
            options = [
                _Shape(option, metadata) for option in get_args(annotation) if option is not type(None)
            ]
            fitting = [option for option in options if kind in option.own_kinds()] or options
            annotation, metadata = fitting[0].annotation, fitting[0].metadata
        self.kinds = [kind for option in options for kind in option.own_kinds()]
        self.annotation: Any = annotation
        self.metadata: tuple[Any, ...] = metadata

    def entry(self) -> bool:
        """Whether it is a group of keys."""
        return isinstance(self.annotation, type) and issubclass(self.annotation, Entry)

    def keys(self) -> list[str]:
        """Keys that it knows, if it is a group of keys."""
        return [key_of(name) for name in self.annotation.model_fields] if self.entry() else []

    def own_kinds(self) -> tuple[Any, ...]:
        """Kinds of which a group of keys may be."""
        field = self.annotation.model_fields.get("kind") if self.entry() else None
        return get_args(field.annotation) if field is not None else ()

    def inside(self, step: str | int, data: Any) -> _Shape | None:
        """Shape of what stands under a key or in a list; ``data`` is what is there."""
        kind = data.get("kind") if isinstance(data, dict) else None
        if self.entry():
            for name, field in self.annotation.model_fields.items():
                if key_of(name) == step:
                    return _Shape(field.annotation, tuple(field.metadata), kind)
            return None
        arguments = get_args(self.annotation)
        if get_origin(self.annotation) is dict:
            return _Shape(arguments[1], (), kind)
        return _Shape(arguments[0], (), kind) if get_origin(self.annotation) is tuple else None

    def example(self) -> str:
        """How it may be written."""
        if get_origin(self.annotation) is Literal:
            return " or ".join(get_args(self.annotation))
        if get_origin(self.annotation) is tuple:
            return "[] if there is none"
        return example_of(list(self.metadata)) or "{} if there is none"


def _shape(model: type[Entry], data: Any, path: Path) -> _Shape | None:
    shape: _Shape | None = _Shape(model)
    for step in path:
        if isinstance(data, dict):
            data = data.get(step)
        elif isinstance(data, list) and isinstance(step, int) and step < len(data):
            data = data[step]
        else:
            data = None
        shape = shape.inside(step, data) if shape else None
    return shape
