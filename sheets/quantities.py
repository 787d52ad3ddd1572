"""Quantities with units: read from what a user writes, shown on what is printed.

Inside the project a quantity is a plain float in its base unit; ``KINDS`` lists those. This is the only
module that knows pint. It defines its units itself, for two reasons: each factor stands here by its exact
definition, and a revolution counts as one (in pint's own list it is 2π, which would falsify ``cm3/rev``).

Sources of the factors: the international inch, pound and US gallon are exact by NIST Handbook 44 (2024),
Appendix C; standard gravity 9.80665 m/s² by ISO 80000-3; the bar by ISO 80000-4.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from decimal import ROUND_HALF_UP, Decimal
from functools import lru_cache
from typing import TYPE_CHECKING, Final

from sheets.errors import InputError, Problem, nearest, quoted

if TYPE_CHECKING:
    from pint import UnitRegistry
    from pint.facets.plain import PlainQuantity


@dataclass(frozen=True, kw_only=True)
class Kind:
    """A kind of quantity that the project computes with."""

    name: str
    """With its article, as it stands in a message."""
    examples: tuple[str, ...]
    also: str = ""
    """A second unit that means the same here: a displacement written without ``/rev``."""


KINDS: Final[dict[str, Kind]] = {
    "bar": Kind(name="a pressure", examples=("210 bar", "3000 psi", "21 MPa")),
    "L/min": Kind(name="a flow", examples=("80 L/min", "12 gal/min")),
    "cm3/rev": Kind(name="a displacement", examples=("45 cm3/rev", "2.75 in3/rev"), also="cm3"),
    "kW": Kind(name="a power", examples=("22 kW", "30 hp")),
    "kN": Kind(name="a force", examples=("85 kN", "19000 lbf")),
    "N·m": Kind(name="a torque", examples=("400 N m", "295 lbf ft")),
    "rpm": Kind(name="a speed", examples=("1450 rpm", "1750 1/min"), also="1/min"),
    "mm": Kind(name="a length", examples=("63 mm", "2.5 in")),
    "°C": Kind(name="a temperature", examples=("50 °C", "122 °F")),
    "s": Kind(name="a time", examples=("10 s", "2 min")),
    "L": Kind(name="a volume", examples=("160 L", "42 gal")),
    "V": Kind(name="a voltage", examples=("400 V", "24 V")),
    "": Kind(name="a ratio", examples=("0.93", "93 %")),
    "%": Kind(name="a percentage", examples=("0.25 %", "1 %")),
}
"""Base unit of the project to the kind of quantity; the empty unit is a plain ratio."""

_DEFINITIONS: Final = """
m = [length]
s = [time]
kg = [mass]
A = [current]
rev = [turn]
percent = 0.01
mm = 0.001 m
cm = 0.01 m
inch = 0.0254 m
ft = 12 inch
mL = 1e-6 m ** 3
L = 0.001 m ** 3
gal = 231 inch ** 3
min = 60 s
h = 3600 s
ms = 0.001 s
lb = 0.45359237 kg
N = kg * m / s ** 2
kN = 1000 N
daN = 10 N
lbf = 9.80665 lb * m / s ** 2
Pa = N / m ** 2
kPa = 1e3 Pa
MPa = 1e6 Pa
bar = 1e5 Pa
mbar = 100 Pa
psi = lbf / inch ** 2
J = N * m
kJ = 1000 J
W = J / s
kW = 1000 W
MW = 1e6 W
hp = 550 ft * lbf / s
V = W / A
kV = 1000 V
mV = 0.001 V
rpm = rev / min
"""

_NAMES: Final = tuple(line.split(" = ")[0] for line in _DEFINITIONS.split("\n") if line)

_SPELLINGS: Final[dict[str, str]] = {
    **{name: name for name in _NAMES},
    "%": "percent",
    "in": "inch",
    "l": "L",
    "ml": "mL",
    "liter": "L",
    "litre": "L",
    "gallon": "gal",
    "r": "rev",
    "turn": "rev",
    "revolution": "rev",
    "sec": "s",
    "second": "s",
    "minute": "min",
    "hour": "h",
    "cc": "cm**3",
    "ccm": "cm**3",
    "lpm": "L/min",
    "gpm": "gal/min",
    "barg": "bar",
    "psig": "psi",
    "PSI": "psi",
    "kw": "kW",
    "Nm": "N*m",
    "kNm": "kN*m",
    "newton": "N",
    "volt": "V",
}
"""What may be written for a unit, and its name above. Every name may stand for itself."""

_OFFERED: Final = tuple(name for name in _SPELLINGS if name not in ("inch", "percent"))

_REFUSED: Final[dict[str, str]] = {
    "bara": "Absolute pressure isn't read here: write the gauge pressure, in bar.",
    "psia": "Absolute pressure isn't read here: write the gauge pressure, in psi.",
    "PS": "Write the power in kW: a metric horsepower is 0.7355 kW.",
    "CV": "Write the power in kW: a metric horsepower is 0.7355 kW.",
    "ton": "Several tons are in use: write the force in kN or lbf.",
    "t": "Several tons are in use: write the force in kN or lbf.",
    "kgf": "Write the force in kN or N: 1 kgf is 9.80665 N.",
    "kp": "Write the force in kN or N: 1 kp is 9.80665 N.",
}
"""Units that mean several things, or another thing, and what to write instead."""

_CELSIUS: Final = (0.0, 1.0, 1.0)
_FAHRENHEIT: Final = (-32.0, 5.0, 9.0)
_TEMPERATURES: Final = {
    "°C": _CELSIUS,
    "degC": _CELSIUS,
    "°F": _FAHRENHEIT,
    "degF": _FAHRENHEIT,
    "K": (-273.15, 1.0, 1.0),
}
"""The only units with an offset: what is added, then multiplier and divisor to °C. They stand alone."""
_NUMBER = re.compile(r"[+-]?(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)(?:[eE][+-]?[0-9]+)?")
_FACTOR = re.compile(r"(?P<name>[A-Za-z%_]+|1)(?P<power>(?:\^|\*\*)?-?[1-3])?")
_SAME_SIGNS = str.maketrans({"²": "2", "³": "3", "·": " ", "⋅": " ", "º": "°", "−": "-", "\u00a0": " "})


class _UnitError(Exception):
    """A unit that can't be read or doesn't fit; carries what is wrong and what to do."""

    def __init__(self, what: str, fix: str) -> None:
        super().__init__(what)
        self.what = what
        self.fix = fix


@lru_cache(maxsize=1)
def _registry() -> UnitRegistry[float]:
    # Imported here, because it costs a quarter of a second and not every command needs it.
    from pint import UnitRegistry

    registry: UnitRegistry[float] = UnitRegistry(None, cache_folder=None)
    for line in _DEFINITIONS.strip().split("\n"):
        registry.define(line)
    return registry


def _expected(unit: str) -> str:
    return f"Write {KINDS[unit].name}, such as {' or '.join(KINDS[unit].examples[:2])}."


def _in_pint_words(written: str, unit: str) -> str:
    """The written unit as pint reads it. Only known spellings pass, so nothing else reaches pint."""
    words = re.sub(r"(?<!\*)\*(?!\*)|(?<=[A-Za-z])-(?=[A-Za-z])", " ", written.translate(_SAME_SIGNS))
    factors: list[str] = []
    for place, side in enumerate(words.split("/")):
        for number, factor in enumerate(side.split() or [""]):
            match = _FACTOR.fullmatch(factor)
            if match is None:
                raise _UnitError(f"{quoted(written)} can't be read as a unit.", _expected(unit))
            name, power = match["name"], (match["power"] or "1").lstrip("^*")
            if name in _REFUSED:
                raise _UnitError(f"The unit {quoted(name)} is refused.", _REFUSED[name])
            if name not in _SPELLINGS and name != "1":
                right = nearest(name, _OFFERED)
                hint = f"Did you mean {right}? " if right else ""
                raise _UnitError(f"The unit {quoted(name)} isn't known.", hint + _expected(unit))
            divided = place > 0 and number == 0
            factors.append(f"{'/' if divided else '*'} ({_SPELLINGS.get(name, name)}) ** {power}")
    return "1 " + " ".join(factors)


@lru_cache(maxsize=256)
def _measure(pint_words: str) -> tuple[float, str]:
    """Size in metre, kilogram, second, ampere and revolution, and its dimension as pint writes it."""
    registry = _registry()
    root: PlainQuantity[float] = registry.Quantity(registry.parse_expression(pint_words)).to_root_units()
    return root.magnitude, str(root.dimensionality)


def _has_dimension(base: str, dimension: str) -> bool:
    return base not in _TEMPERATURES and _measure(_in_pint_words(base or "1", ""))[1] == dimension


def _base_with(dimension: str) -> str | None:
    """The first base unit of the project that has that dimension."""
    return next((base for base in KINDS if _has_dimension(base, dimension)), None)


@lru_cache(maxsize=512)
def _conversion(written: str, unit: str) -> tuple[float, float, float]:
    """What is added, then multiplier and divisor, from the written unit to the base unit; raises _UnitError.

    One of multiplier and divisor is 1: dividing by 100 is exact where multiplying by 0.01 isn't.
    """
    if written in _TEMPERATURES and unit == "°C":
        return _TEMPERATURES[written]
    if written in _TEMPERATURES:
        raise _UnitError(f"{quoted(written)} is the unit of a temperature.", _expected(unit))
    if written == unit.translate(_SAME_SIGNS):
        return 0.0, 1.0, 1.0  # without pint: a file in base units doesn't wait for it
    size, dimension = _measure(_in_pint_words(written or "1", unit))
    candidates = (unit, KINDS[unit].also) if KINDS[unit].also else (unit,)
    base = next((one for one in candidates if _has_dimension(one, dimension)), None)
    if base is None:
        other = _base_with(dimension)
        of = f"the unit of {KINDS[other].name}" if other is not None else "another unit"
        raise _UnitError(f"{quoted(written)} is {of}; {KINDS[unit].name} is expected.", _expected(unit))
    factor = size / _measure(_in_pint_words(base or "1", unit))[0]
    inverse = round(1 / factor) if factor < 1 else 0
    if inverse and math.isclose(inverse * factor, 1, rel_tol=1e-12):
        return 0.0, 1.0, float(inverse)
    short = float(f"{factor:.12g}")  # most definitions are short decimals; the last bits of a product aren't
    return 0.0, (short if math.isclose(short, factor, rel_tol=4e-15) else factor), 1.0


@lru_cache(maxsize=4096)
def parse(text: str, *, unit: str) -> float:
    """A quantity as a user writes it, in the project's base unit.

    ``text``: number and unit, such as ``3000 psi``, ``45 cm3/rev``, ``12 gal/min`` (US gallon), ``93 %``.
    ``unit``: the base unit, a key of ``KINDS``; the empty one is a plain ratio and needs no unit in the text,
    and so does ``%``, for classes that are written as a bare percentage.
    Result: in the base unit.
    Errors: InputError with one Problem if it is no number, not finite, has no unit, an unknown one, or one of
    another kind of quantity. Whether a value makes sense (negative, too large) is for the caller.
    """
    plain = text.strip().translate(_SAME_SIGNS)
    number = _NUMBER.match(plain)
    if number is None:
        raise _problem(text, f"{quoted(text)} doesn't begin with a number.", _expected(unit))
    written = plain[number.end() :].strip()
    if written[:1] in (",", ".", "'", "_"):
        raise _problem(
            text,
            f"{quoted(text)} isn't a number as it is read here.",
            "Write a decimal point, and nothing between the thousands: 3000 psi, 0.5 bar.",
        )
    value = float(number.group())
    if not written and unit not in ("", "%"):
        raise _problem(text, f"{quoted(text)} has no unit.", _expected(unit))
    try:
        added, multiplier, divisor = _conversion(written or unit, unit)
    except _UnitError as wrong:
        raise _problem(text, wrong.what, wrong.fix) from None
    found = (value + added) * multiplier / divisor
    if not math.isfinite(found):
        raise _problem(text, f"{quoted(text)} is too large to be true.", _expected(unit))
    return found


def _problem(text: str, what: str, fix: str) -> InputError:
    return InputError(Problem(where=quoted(text), what=what, fix=fix))


def base_of(unit: str) -> str:
    """Base unit of that unit: ``bar`` for ``psi``. Raises ValueError for an unknown unit."""
    if unit in _TEMPERATURES:
        return "°C"
    try:
        dimension = _measure(_in_pint_words(unit or "1", ""))[1]
    except _UnitError as wrong:
        raise ValueError(f"{unit}: {wrong.what}") from None
    base = _base_with(dimension)
    if base is None:
        raise ValueError(f"{unit}: no base unit of the project matches it")
    return base


def from_unit(value: float, unit: str) -> float:
    """A value in ``unit`` (``psi``), in its base unit (``bar``). Raises ValueError for an unknown unit."""
    added, multiplier, divisor = _conversion(unit, base_of(unit))
    return (value + added) * multiplier / divisor


def to_unit(value: float, unit: str) -> float:
    """A value in the base unit (``bar``), in ``unit`` (``psi``). Raises ValueError for an unknown unit."""
    added, multiplier, divisor = _conversion(unit, base_of(unit))
    return value * divisor / multiplier - added


LAST_DIGIT: Final = Decimal("0.000001")
"""Values are rounded through this first: their last bits depend on the machine that computes."""


def number(value: float, *, decimals: int | None = None, step: float | None = None) -> str:
    """Digits as printed: decimal point, no thousands separators, a true minus sign, halves away from zero.

    ``decimals``: digits after the point. ``step``: smallest step, such as a gauge's graduation; the result is
    a multiple of it. With neither, up to six digits after the point and no closing zeros.
    Errors: ValueError for both, for a step that isn't positive and for a value that isn't finite.
    """
    both = decimals is not None and step is not None
    if both or not math.isfinite(value) or (step is not None and step <= 0):
        raise ValueError(f"can't be shown: {value}, decimals {decimals}, step {step}")
    exact = Decimal(repr(float(value))).quantize(LAST_DIGIT, ROUND_HALF_UP)
    if step is not None:
        width = Decimal(repr(float(step)))
        exact = (exact / width).quantize(Decimal(1), ROUND_HALF_UP) * width
    if decimals is not None:
        digits = f"{exact.quantize(Decimal(1).scaleb(-decimals), ROUND_HALF_UP):f}"
    elif step is not None:
        places = -int(Decimal(repr(float(step))).normalize().as_tuple().exponent)
        digits = f"{exact:.{max(places, 0)}f}"
    else:
        digits = f"{exact.normalize():f}"
    return "0" + digits[2:] if float(digits) == 0 and digits.startswith("-") else digits.replace("-", "−")


def shown(value: float, unit: str, *, decimals: int | None = None, step: float | None = None) -> str:
    """A value in the base unit, shown in ``unit`` with that unit behind it: ``3050 psi``.

    ``decimals`` and ``step`` as in ``number``, in the shown unit. Errors: ValueError as there, or for an
    unknown unit.
    """
    digits = number(to_unit(value, unit), decimals=decimals, step=step)
    return f"{digits} {unit}" if unit else digits
