"""Values that aren't quantities: texts, identifiers, yes and no, dates."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass
from datetime import date
from typing import Any, Final

from pydantic import GetCoreSchemaHandler, GetJsonSchemaHandler
from pydantic.json_schema import JsonSchemaValue
from pydantic_core import CoreSchema, PydanticCustomError, core_schema

from sheets.errors import nearest, quoted

_SAYS_NOTHING: Final = re.compile(
    r"(?:none|no|yes|nothing|nil|null|n\.?\s?/?\s?a\.?|not applicable|not available|not known|unknown|any|"
    r"tb[acd]|to be \w+|to ?do|later|see above|\W*|x+)\W*"
)


def wrong(what: str, fix: str) -> PydanticCustomError:
    """The error that a validator raises; ``reporting`` turns it into a flaw with a place."""
    return PydanticCustomError("said", "{what} {fix}", {"what": what, "fix": fix})


class Reader:
    """How a value is read from the file's text, and what the JSON Schema says of it."""

    example: str
    """How a user may write it."""

    def read(self, given: object) -> object:
        """The value; raises what ``wrong`` gives."""
        raise NotImplementedError

    def schema(self) -> JsonSchemaValue:
        """Its JSON Schema."""
        raise NotImplementedError

    def __get_pydantic_core_schema__(self, _source: Any, _handler: GetCoreSchemaHandler) -> CoreSchema:
        return core_schema.no_info_plain_validator_function(self.read)

    def __get_pydantic_json_schema__(
        self, _core: CoreSchema, _handler: GetJsonSchemaHandler
    ) -> JsonSchemaValue:
        return self.schema()


def text_of(given: object, example: str) -> str:
    """The text that stands in the file, without blanks around it; raises if it is a list or empty."""
    if not isinstance(given, str):
        raise wrong("A single value is expected here, not a list or a group of keys.", f"Write {example}.")
    if not given.strip():
        raise wrong("The value is empty.", f"Write {example}, or leave the key out if it isn't required.")
    return given.strip()


@dataclass(frozen=True, kw_only=True)
class Wording(Reader):
    """A text on one line that goes onto the pages as it stands."""

    longest: int = 300
    example: str = "a text"
    must_say: bool = False
    """Whether a word that says nothing, such as none or n/a, is refused."""

    def read(self, given: object) -> str:
        text = text_of(given, self.example)
        if self.must_say and _SAYS_NOTHING.fullmatch(text.casefold()):
            raise wrong(
                f"{quoted(text)} says nothing, and somebody has to work from it.",
                "Look at the machine and write what is there; what isn't there can't be relied on.",
            )
        if len(text) > self.longest:
            raise wrong(
                f"The text has {len(text)} characters; at most {self.longest} have room.",
                "Say it in fewer words.",
            )
        strange = next((sign for sign in text if not sign.isprintable()), None)
        if strange is not None:
            raise wrong(
                f"The text holds a character that can't be printed: {quoted(strange)}.",
                "Write it on one line, with plain blanks instead of tabs and line breaks.",
            )
        return text

    def schema(self) -> JsonSchemaValue:
        return {"type": "string", "minLength": 1, "maxLength": self.longest}


@dataclass(frozen=True, kw_only=True)
class Name(Reader):
    """A short name whose characters are limited, because it goes into file names, codes and references."""

    pattern: str
    says: str
    """What the pattern allows, in words."""
    example: str
    longest: int = 40

    def read(self, given: object) -> str:
        text = text_of(given, self.example)
        if len(text) > self.longest:
            raise wrong(
                f"{quoted(text)} has {len(text)} characters; at most {self.longest} are allowed.",
                f"Write a shorter one, such as {self.example}.",
            )
        if not re.fullmatch(self.pattern, text):
            raise wrong(f"{quoted(text)} can't be used here.", f"Use {self.says}, such as {self.example}.")
        return text

    def schema(self) -> JsonSchemaValue:
        return {"type": "string", "pattern": f"^(?:{self.pattern})$", "maxLength": self.longest}


@dataclass(frozen=True, kw_only=True)
class YesOrNo(Reader):
    """The words yes and no."""

    example: str = "yes or no"

    def read(self, given: object) -> bool:
        if isinstance(given, bool):
            return given
        text = text_of(given, self.example)
        if text not in ("yes", "no"):
            raise wrong(f"{quoted(text)} is neither yes nor no.", "Write yes or no.")
        return text == "yes"

    def schema(self) -> JsonSchemaValue:
        # An editor that reads by YAML 1.1 sees the bare words as booleans; this program sees words.
        return {"enum": ["yes", "no", True, False]}


@dataclass(frozen=True, kw_only=True)
class FormatOne(Reader):
    """Number of the file format."""

    example: str = "1"

    def read(self, given: object) -> int:
        if given == 1 or text_of(given, self.example) == "1":
            return 1
        raise wrong(f"Format {quoted(str(given))} isn't known to this version.", "Write format: 1.")

    def schema(self) -> JsonSchemaValue:
        return {"enum": [1, "1"]}


@dataclass(frozen=True, kw_only=True)
class Day(Reader):
    """A date, year first."""

    example: str = "2026-03-31"

    def read(self, given: object) -> date:
        if isinstance(given, date):
            return given
        text = text_of(given, self.example)
        try:
            if re.fullmatch(r"[0-9]{4}-[0-9]{2}-[0-9]{2}", text):
                return date.fromisoformat(text)
        except ValueError:
            pass
        raise wrong(f"{quoted(text)} isn't a date.", f"Write year, month and day, such as {self.example}.")

    def schema(self) -> JsonSchemaValue:
        return {"type": "string", "format": "date", "pattern": "^[0-9]{4}-[0-9]{2}-[0-9]{2}$"}


@dataclass(frozen=True, kw_only=True)
class Choice(Reader):
    """One of a few words, some others being refused with their own reason."""

    words: tuple[str, ...]
    refusal: Callable[[str], str | None]
    """Why that word is refused, or None if there is nothing to say about it but that it isn't known."""
    example: str

    def read(self, given: object) -> str:
        text = text_of(given, self.example)
        if text in self.words:
            return text
        choice = f"Write one of: {', '.join(self.words)}."
        reason = self.refusal(text)
        if reason is not None:
            raise wrong(reason, choice)
        right = nearest(text, self.words)
        raise wrong(
            f"{quoted(text)} isn't known here.", f"Did you mean {right}? {choice}" if right else choice
        )

    def schema(self) -> JsonSchemaValue:
        return {"type": "string", "enum": list(self.words)}
