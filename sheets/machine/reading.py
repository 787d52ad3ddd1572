"""YAML text into plain dicts, lists and strings, with the line of each key.

Everything stays a string: YAML's own rules would make NO false and 1:30 ninety. What YAML offers beyond
keys, lists and texts is refused (anchors, aliases, tags, several documents), and so is a key that stands
twice, which YAML readers usually swallow.
"""

from __future__ import annotations

import codecs
from collections.abc import Iterator
from dataclasses import dataclass, field
from typing import Any, Final

import yaml

from sheets.errors import InputError, Problem, quoted
from sheets.machine.flaws import Flaw, Path

LARGEST_BYTES: Final = 1_000_000
DEEPEST: Final = 12
"""Levels of nesting; a machine file has six."""

Plain = dict[str, Any] | list[Any] | str


@dataclass(frozen=True, kw_only=True)
class FileText:
    """A file's content, before anything of it is known to be right."""

    data: dict[str, Any]
    lines: dict[Path, int]
    """Path to the line of its key, or of its place in a list. The empty path is the first line."""
    flaws: tuple[tuple[int, Flaw], ...]
    """Keys that stand twice, with the line of the second."""


_YAML_PROBLEMS: Final = (
    (
        "mapping values are not allowed",
        "A colon with a blank stands where none may; a text with one needs quotes.",
    ),
    ("could not find expected ':'", "A key without its colon stands here."),
    ("maximum nesting", f"Keys are nested more than {DEEPEST} levels deep."),
    ("end of stream", "The file ends before a bracket or quotation mark is closed."),
    ("did not find expected", "The indentation is wrong, or a bracket, comma or quotation mark is missing."),
    ("cannot start any token", "A character stands here that needs quotes around the text."),
)
"""What libyaml says, in plain words."""


class _StopError(Exception):
    """A flaw after which reading on makes no sense."""

    def __init__(self, line: int, what: str, fix: str) -> None:
        super().__init__(what)
        self.line = line
        self.what = what
        self.fix = fix


def read_text(source: bytes, name: str) -> FileText:
    """Read the bytes of a file called ``name``.

    Raises InputError where the file as a whole can't be read: too large, empty, not UTF-8, not YAML, more
    than one document, anchors, aliases, tags, or a top level that isn't keys with values.
    """
    try:
        return _Builder().build(_decoded(source))
    except _StopError as stop:
        raise InputError(Problem(where=f"{name}, line {stop.line}", what=stop.what, fix=stop.fix)) from None


def too_large(size: int) -> str:
    """What is wrong with a file of that many bytes."""
    return f"The file has {size} bytes; at most {LARGEST_BYTES} are read."


def _decoded(source: bytes) -> str:
    if len(source) > LARGEST_BYTES:
        raise _StopError(
            1,
            too_large(len(source)),
            "A file of this kind has a few thousand bytes: look which file this is.",
        )
    try:
        text = source.removeprefix(codecs.BOM_UTF8).decode("utf-8")
    except UnicodeDecodeError as error:
        line = source[: error.start].count(b"\n") + 1
        raise _StopError(line, "The file isn't UTF-8 text.", "Save it as UTF-8 in the editor.") from None
    for number, line_text in enumerate(text.split("\n"), start=1):
        indentation = line_text[: len(line_text) - len(line_text.lstrip())]
        if "\t" in indentation and line_text.strip():
            raise _StopError(
                number, "A tab stands at the beginning of the line.", "Indent with blanks, two a level."
            )
    return text


@dataclass
class _Open:
    """A mapping or list that isn't closed yet."""

    value: dict[str, Any] | list[Any]
    path: Path
    key: str | None = None
    """Key that waits for its value; mappings only."""
    swallowed: bool = False
    """Whether that key stood there before, so that its value is dropped."""
    first_lines: dict[str, int] = field(default_factory=dict)


class _Builder:
    """Builds the plain data from the parser's events, so that nothing is ever expanded."""

    def __init__(self) -> None:
        self.lines: dict[Path, int] = {(): 1}
        self.flaws: list[tuple[int, Flaw]] = []
        self.open: list[_Open] = []
        self.root: Plain | None = None
        self.documents = 0

    def build(self, text: str) -> FileText:
        for event in _events(text):
            self._take(event)
        if self.root is None or self.root == "":
            raise _StopError(1, "The file is empty.", "Write keys into it, beginning with format: 1.")
        if not isinstance(self.root, dict):
            raise _StopError(
                1,
                "The file doesn't hold keys with values.",
                "Begin it with keys, such as format: 1.",
            )
        return FileText(data=self.root, lines=self.lines, flaws=tuple(self.flaws))

    def _take(self, event: yaml.Event) -> None:
        line = event.start_mark.line + 1 if event.start_mark else 1
        if isinstance(event, yaml.DocumentStartEvent):
            self.documents += 1
            if self.documents > 1:
                raise _StopError(
                    line, "A second document begins here (---).", "Write one machine into one file."
                )
        elif isinstance(event, yaml.AliasEvent):
            raise _StopError(
                line,
                f"An alias stands here: *{_plain(event.anchor)}.",
                "Write the values out; aliases aren't read.",
            )
        elif isinstance(event, yaml.NodeEvent):
            _refuse_extras(event, line)
            if isinstance(event, yaml.ScalarEvent):
                self._scalar(str(event.value), line)
            else:
                self._begin({} if isinstance(event, yaml.MappingStartEvent) else [], line)
        elif isinstance(event, yaml.MappingEndEvent | yaml.SequenceEndEvent):
            self.open.pop()

    def _scalar(self, value: str, line: int) -> None:
        around = self.open[-1] if self.open else None
        if around is None or isinstance(around.value, list) or around.key is not None:
            self._store(value, line)
            return
        around.key = value
        around.swallowed = value in around.value
        if around.swallowed:
            first = around.first_lines[value]
            flaw = Flaw(
                at=(*around.path, value),
                what=f"The key {quoted(value)} stands here a second time; it stands in line {first} already.",
                fix="Remove one of the two, or rename it.",
            )
            self.flaws.append((line, flaw))
        else:
            around.first_lines[value] = line
            self.lines.setdefault((*around.path, value), line)

    def _begin(self, value: dict[str, Any] | list[Any], line: int) -> None:
        around = self.open[-1] if self.open else None
        if around is not None and isinstance(around.value, dict) and around.key is None:
            raise _StopError(line, "A key is a list or a group of keys.", "Write a key as a plain text.")
        if len(self.open) >= DEEPEST:
            raise _StopError(
                line, f"Keys are nested more than {DEEPEST} levels deep.", "Look for a wrong indentation."
            )
        path = self._store(value, line)
        self.open.append(_Open(value=value, path=path))

    def _store(self, value: Plain, line: int) -> Path:
        """Put a value where it belongs; gives its path."""
        if not self.open:
            self.root = value
            return ()
        around = self.open[-1]
        if isinstance(around.value, list):
            path: Path = (*around.path, len(around.value))
            self.lines.setdefault(path, line)
            around.value.append(value)
            return path
        key = around.key or ""
        around.key = None
        if not around.swallowed:
            around.value[key] = value
        return (*around.path, key)


def _events(text: str) -> Iterator[yaml.Event]:
    try:
        yield from yaml.parse(text, Loader=yaml.CBaseLoader)
    except yaml.MarkedYAMLError as error:
        problem, unclosed = error.problem or "", "quoted" in (error.context or "")
        begun_before = unclosed or "simple key" in (error.context or "")
        mark = error.context_mark if begun_before else error.problem_mark
        what = next((words for sign, words in _YAML_PROBLEMS if sign in problem), f"YAML says: {problem}.")
        raise _StopError(
            mark.line + 1 if mark else 1,
            "A quotation mark isn't closed." if unclosed else what,
            "Look at this line and the one before: indentation, colons, quotation marks, brackets.",
        ) from None
    except yaml.YAMLError as error:
        place = getattr(error, "position", 0)
        raise _StopError(
            text[:place].count("\n") + 1,
            "The file holds a character that YAML doesn't allow.",
            "Remove control characters; save the file as plain UTF-8 text.",
        ) from None


def _refuse_extras(event: yaml.NodeEvent, line: int) -> None:
    if event.anchor is not None:
        raise _StopError(
            line,
            f"An anchor stands here: &{_plain(event.anchor)}.",
            "Write the values out; anchors aren't read.",
        )
    tag = getattr(event, "tag", None)
    if tag is not None and tag != "!":
        raise _StopError(
            line, f"A tag stands here: {quoted(str(tag))}.", "Remove it: every value is read as a text."
        )


def _plain(anchor: object) -> str:
    return quoted(str(anchor)).strip("'")
