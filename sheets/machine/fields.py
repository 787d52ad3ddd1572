"""Types of the values in a file, and the base of every group of keys."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from datetime import date
from typing import Annotated, Any, Final, Self

from pydantic import BaseModel, ConfigDict, model_validator
from pydantic.json_schema import JsonSchemaValue
from pydantic_core import PydanticCustomError

from sheets import quantities
from sheets.errors import InputError, quoted
from sheets.machine.flaws import Flaw
from sheets.machine.words import Day, FormatOne, Name, Reader, Wording, YesOrNo, text_of, wrong

_UNIT_ENDINGS: Final = frozenset({"bar", "lpm", "cm3", "kw", "kn", "nm", "rpm", "mm", "c", "s", "l", "v"})


def key_of(field_name: str) -> str:
    """Key in the file for a field: ``rated_flow_lpm`` is written ``rated flow``."""
    words = field_name.split("_")
    return " ".join(words[:-1] if len(words) > 1 and words[-1] in _UNIT_ENDINGS else words)


class Entry(BaseModel):
    """A group of keys: frozen, and closed to keys that aren't known."""

    model_config = ConfigDict(
        frozen=True,
        extra="forbid",
        alias_generator=key_of,
        validate_by_name=True,
        validate_by_alias=True,
        use_attribute_docstrings=True,
    )

    def contradictions(self) -> Iterator[Flaw]:
        """Values of this group that can't be true together; places are keys within it."""
        yield from ()

    @model_validator(mode="after")
    def _no_contradictions(self) -> Self:
        flaws = tuple(self.contradictions())
        if flaws:
            text = " ".join(f"{flaw.what} {flaw.fix}" for flaw in flaws)
            raise PydanticCustomError("contradiction", "{text}", {"text": text, "flaws": flaws})
        return self


SMALLEST: Final = 1e-6
"""In any base unit. Below it a positive value would print as nought."""


@dataclass(frozen=True, kw_only=True)
class Quantity(Reader):
    """A number with its unit, read into the base unit and held between limits."""

    unit: str
    example: str
    above: float | None = None
    least: float | None = None
    most: float = 1e6
    """The default only keeps the arithmetic within reason; no power unit has a plate value near it."""

    def read(self, given: object) -> float:
        if isinstance(given, float | int) and not isinstance(given, bool):
            value, shown = float(given), str(given)
        else:
            shown = text_of(given, self.example)
            try:
                value = quantities.parse(shown, unit=self.unit)
            except InputError as error:
                raise wrong(error.problems[0].what, error.problems[0].fix) from None
        kind = quantities.KINDS[self.unit]
        from_plate = f"Write the value as it stands on the plate, such as {self.example}."
        if self.above is not None and not value > self.above:
            too_small = "is negative" if value < 0 else "is zero"
            raise wrong(
                f"{quoted(shown)} {too_small}; {kind.name} above nought is expected here.",
                from_plate,
            )
        if self.least is not None and not value >= self.least:
            too_small = "is negative" if value < 0 == self.least else "is too low"
            raise wrong(
                f"{quoted(shown)} {too_small}; the least here is {quantities.shown(self.least, self.unit)}.",
                from_plate,
            )
        if 0 < value < SMALLEST and (self.above == 0 or self.least == 0):
            raise wrong(
                f"{quoted(shown)} is too small to be a plate value.",
                from_plate,
            )
        if not value <= self.most:
            raise wrong(
                f"{quoted(shown)} is too high; the most here is {quantities.shown(self.most, self.unit)}.",
                f"Write {kind.name}, such as {' or '.join(kind.examples)}.",
            )
        return value

    def schema(self) -> JsonSchemaValue:
        kind = quantities.KINDS[self.unit]
        number = r"[+-]?([0-9]+(\.[0-9]*)?|\.[0-9]+)([eE][+-]?[0-9]+)?"
        bare = self.unit in ("", "%")
        return {
            "type": ["string", "number"] if bare else "string",
            "pattern": rf"^\s*{number}\s*{'%?' if bare else '[^0-9.,].*'}$",
            "examples": list(kind.examples),
            "description": f"{kind.name[0].upper()}{kind.name[1:]}.",
            "unit": self.unit,  # for ``schema``, which writes defaults with it and takes it out
        }


Bar = Annotated[float, Quantity(unit="bar", example="210 bar", least=0.0)]
PositiveBar = Annotated[float, Quantity(unit="bar", example="210 bar", above=0.0)]
Lpm = Annotated[float, Quantity(unit="L/min", example="80 L/min", above=0.0)]
Cm3 = Annotated[float, Quantity(unit="cm3/rev", example="45 cm3/rev", above=0.0)]
Litre = Annotated[float, Quantity(unit="L", example="160 L", above=0.0)]
Kilowatt = Annotated[float, Quantity(unit="kW", example="22 kW", above=0.0)]
Kilonewton = Annotated[float, Quantity(unit="kN", example="85 kN", least=0.0)]
PositiveKilonewton = Annotated[float, Quantity(unit="kN", example="85 kN", above=0.0)]
NewtonMetre = Annotated[float, Quantity(unit="N·m", example="400 N m", least=0.0)]
PositiveNewtonMetre = Annotated[float, Quantity(unit="N·m", example="400 N m", above=0.0)]
Rpm = Annotated[float, Quantity(unit="rpm", example="1450 rpm", above=0.0)]
Millimetre = Annotated[float, Quantity(unit="mm", example="63 mm", above=0.0)]
OilCelsius = Annotated[float, Quantity(unit="°C", example="65 °C", least=-40.0, most=120.0)]
"""Of oil in a reservoir; no unit works with oil hotter than that, whatever its fluid."""
SettingCelsius = Annotated[float, Quantity(unit="°C", example="50 °C", least=-40.0, most=100.0)]
"""Of oil while somebody turns a screw."""
Second = Annotated[float, Quantity(unit="s", example="10 s", least=0.0)]
Volt = Annotated[float, Quantity(unit="V", example="400 V", above=0.0)]
Ratio = Annotated[float, Quantity(unit="", example="0.93", above=0.0, most=1.0)]
"""A part of one, such as an efficiency."""
Factor = Annotated[float, Quantity(unit="", example="0.93", above=0.0, most=10.0)]
"""A ratio that may pass one, such as a service factor."""
Percent = Annotated[float, Quantity(unit="%", example="0.25", above=0.0, most=100.0)]
"""A percentage, with or without its sign: an accuracy class of 0.25."""

Text = Annotated[str, Wording()]
SaidText = Annotated[str, Wording(must_say=True)]
"""A text that somebody acts by: none and its like are refused."""
YesNo = Annotated[bool, YesOrNo()]
FormatNumber = Annotated[int, FormatOne()]
IsoDate = Annotated[date, Day()]

_NAME = r"[A-Za-z0-9][A-Za-z0-9_-]*"
_NAME_SAYS = "letters without accents, digits, - and _, beginning with a letter or a digit"
Identifier = Annotated[str, Name(pattern=_NAME, says=_NAME_SAYS, example="PU1")]
_PORT = r"[A-Z]{1,4}[0-9]?"
PortName = Annotated[str, Name(pattern=_PORT, says="the letters of the port", example="P", longest=5)]
PortRef = Annotated[
    str,
    Name(
        pattern=_NAME + r"\." + _PORT,
        says="the part, a point and the port",
        example="PU1.P",
        longest=46,
    ),
]
PositionName = Annotated[
    str,
    Name(
        pattern=r"[A-Za-z0-9](?:[A-Za-z0-9 _-]*[A-Za-z0-9])?",
        says="letters without accents, digits, blanks, - and _",
        example="neutral",
    ),
]


def example_of(metadata: list[Any]) -> str | None:
    """How a value with these annotations may be written."""
    return next((reader.example for reader in metadata if isinstance(reader, Reader)), None)
