"""Quantities against exact definitions, not against the library that reads them.

Sources: psi, inch and US gallon by NIST Handbook 44 (2024), Appendix C; horsepower of 550 ft·lbf/s; bar by
ISO 80000-4. Factors are written as fractions of whole numbers and multiplied exactly.
"""

import math
import subprocess
import sys
from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from sheets.errors import InputError
from sheets.quantities import KINDS, base_of, from_unit, number, parse, shown, to_unit

INCH_MM = Fraction(254, 10)
FOOT_M = 12 * INCH_MM / 1000
LBF_N = Fraction(45359237, 10**8) * Fraction(980665, 10**5)
PSI_BAR = LBF_N / (INCH_MM / 1000) ** 2 / 10**5
GALLON_L = Fraction(3785411784, 10**9)

# written unit, base unit, exact factor
EXACT = [
    ("bar", "bar", Fraction(1)),
    ("psi", "bar", PSI_BAR),
    ("MPa", "bar", Fraction(10)),
    ("kPa", "bar", Fraction(1, 100)),
    ("N/mm2", "bar", Fraction(10)),
    ("mbar", "bar", Fraction(1, 1000)),
    ("L/min", "L/min", Fraction(1)),
    ("l/min", "L/min", Fraction(1)),
    ("gal/min", "L/min", GALLON_L),
    ("gpm", "L/min", GALLON_L),
    ("cm3/s", "L/min", Fraction(60, 1000)),
    ("m3/h", "L/min", Fraction(1000, 60)),
    ("cm3/rev", "cm3/rev", Fraction(1)),
    ("cm³/rev", "cm3/rev", Fraction(1)),
    ("cm3", "cm3/rev", Fraction(1)),
    ("in3/rev", "cm3/rev", (INCH_MM / 10) ** 3),
    ("kW", "kW", Fraction(1)),
    ("hp", "kW", 550 * FOOT_M * LBF_N / 1000),
    ("kN", "kN", Fraction(1)),
    ("lbf", "kN", LBF_N / 1000),
    ("N m", "N·m", Fraction(1)),
    ("N·m", "N·m", Fraction(1)),
    ("Nm", "N·m", Fraction(1)),
    ("lbf ft", "N·m", LBF_N * FOOT_M),
    ("lbf-in", "N·m", LBF_N * INCH_MM / 1000),
    ("rpm", "rpm", Fraction(1)),
    ("1/min", "rpm", Fraction(1)),
    ("rev/s", "rpm", Fraction(60)),
    ("mm", "mm", Fraction(1)),
    ("in", "mm", INCH_MM),
    ("ft", "mm", FOOT_M * 1000),
    ("s", "s", Fraction(1)),
    ("min", "s", Fraction(60)),
    ("ms", "s", Fraction(1, 1000)),
    ("L", "L", Fraction(1)),
    ("gal", "L", GALLON_L),
    ("m3", "L", Fraction(1000)),
    ("V", "V", Fraction(1)),
    ("kV", "V", Fraction(1000)),
    ("", "", Fraction(1)),
    ("%", "", Fraction(1, 100)),
    ("", "%", Fraction(1)),
    ("%", "%", Fraction(1)),
]

FINITE = st.floats(min_value=-1e9, max_value=1e9, allow_nan=False).filter(lambda x: x == 0 or abs(x) > 1e-9)


@pytest.mark.parametrize(("unit", "base", "factor"), EXACT)
@given(value=FINITE)
def test_units_by_their_exact_definitions(unit: str, base: str, factor: Fraction, value: float) -> None:
    exact = float(Fraction(repr(value)) * factor)

    assert parse(f"{value!r} {unit}", unit=base) == pytest.approx(exact, rel=1e-14)


@pytest.mark.parametrize(
    ("text", "base", "value"),
    [
        # NIST SP 811 (2008), Appendix B: 1 psi is 6.894 757 E+03 Pa, 1 US gallon 3.785 412 E-03 m³
        ("1 psi", "bar", 6.894757e-2),
        ("1 gal", "L", 3.785412),
        ("1 hp", "kW", 0.7456999),
    ],
)
def test_units_as_published(text: str, base: str, value: float) -> None:
    assert parse(text, unit=base) == pytest.approx(value, rel=2e-7)


@pytest.mark.parametrize(
    ("text", "celsius"), [("50 °C", 50), ("122 °F", 50), ("-40 °F", -40), ("273.15 K", 0), ("32 degF", 0)]
)
def test_temperatures_have_an_offset(text: str, celsius: float) -> None:
    assert parse(text, unit="°C") == pytest.approx(celsius, abs=1e-12)


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("210bar", 210),
        ("  210  bar ", 210),
        ("+2.1e2 bar", 210),
        ("210. bar", 210),
        (".5 bar", 0.5),
        ("−1 bar", -1),
    ],
)
def test_spellings_of_numbers(text: str, value: float) -> None:
    assert parse(text, unit="bar") == value


def test_short_factors_leave_no_noise() -> None:
    assert [parse(f"{percent} %", unit="") for percent in range(101)] == [
        percent / 100 for percent in range(101)
    ]
    assert parse("2.75 in3/rev", unit="cm3/rev") == 45.064426
    assert parse("2.5 in", unit="mm") == 63.5


@pytest.mark.parametrize(
    ("text", "base", "what", "fix"),
    [
        ("210", "bar", "has no unit", "210 bar or 3000 psi"),
        ("210 baar", "bar", "'baar' isn't known", "Did you mean bar?"),
        ("12 gal/mn", "L/min", "'mn' isn't known", "Did you mean min?"),
        ("12 xyz", "L/min", "'xyz' isn't known", "80 L/min"),
        ("210 L", "bar", "unit of a volume; a pressure is expected", "210 bar"),
        ("45 cm3/rev", "L", "unit of a displacement; a volume is expected", "160 L"),
        ("30 bar", "°C", "unit of a pressure; a temperature is expected", "50 °C"),
        ("30 °C", "bar", "a temperature", "210 bar"),
        ("30 °C/min", "°C", "can't be read as a unit", "50 °C"),
        ("400 N m", "kN", "unit of a torque; a force is expected", "85 kN"),
        ("5 m/s", "mm", "another unit; a length is expected", "63 mm"),
        ("5 %", "bar", "a ratio; a pressure is expected", "210 bar"),
        ("5 bara", "bar", "'bara' is refused", "gauge pressure"),
        ("5 kgf", "kN", "'kgf' is refused", "9.80665"),
        ("", "bar", "begin with a number", "210 bar"),
        ("bar", "bar", "begin with a number", "210 bar"),
        ("nan bar", "bar", "begin with a number", "210 bar"),
        ("inf bar", "bar", "begin with a number", "210 bar"),
        ("-inf bar", "bar", "begin with a number", "210 bar"),
        ("1e999 bar", "bar", "too large", "210 bar"),
        ("1e308 MPa", "bar", "too large", "210 bar"),
        ("3,000 psi", "bar", "isn't a number", "nothing between the thousands"),
        ("3'000 psi", "bar", "isn't a number", "nothing between the thousands"),
        ("1_000 psi", "bar", "isn't a number", "nothing between the thousands"),
        ("1.2.3 bar", "bar", "isn't a number", "decimal point"),
        ("1/2 in", "mm", "can't be read as a unit", "2.5 in"),
        ("5 bar^9", "bar", "can't be read as a unit", "210 bar"),
        ("5 (bar)", "bar", "can't be read as a unit", "210 bar"),
        ("5 x__import__", "bar", "isn't known", "210 bar"),
        ("٣ bar", "bar", "begin with a number", "210 bar"),
        ("5 bar\x1b[31m", "bar", "can't be read as a unit", "210 bar"),
    ],
)
def test_wrong_quantities_say_what_was_expected(text: str, base: str, what: str, fix: str) -> None:
    with pytest.raises(InputError) as caught:
        parse(text, unit=base)

    (problem,) = caught.value.problems
    assert what in problem.what
    assert fix in problem.fix
    assert str(problem).replace("\n", "").isprintable()


@given(text=st.text(max_size=30), base=st.sampled_from(list(KINDS)))
def test_any_text_is_a_number_or_a_problem(text: str, base: str) -> None:
    try:
        value = parse(text, unit=base)
    except InputError as error:
        problems = error.problems
    else:
        assert math.isfinite(value)
        return
    assert problems[0].fix


@pytest.mark.parametrize("base", KINDS)
def test_examples_can_be_read(base: str) -> None:
    for example in KINDS[base].examples:
        assert parse(example, unit=base) > 0


@given(value=FINITE)
@pytest.mark.parametrize("unit", ["bar", "psi", "MPa", "L/min", "gal/min", "°F", "%", "in3/rev"])
def test_there_and_back(unit: str, value: float) -> None:
    assert to_unit(from_unit(value, unit), unit) == pytest.approx(value, rel=1e-12, abs=1e-12)


def test_base_units() -> None:
    assert [base_of(unit) for unit in ("psi", "gal/min", "in3/rev", "°F", "%", "gal")] == [
        "bar",
        "L/min",
        "cm3/rev",
        "°C",
        "",
        "L",
    ]
    for unit in ("furlong", "m/s"):
        with pytest.raises(ValueError, match=unit):
            base_of(unit)


@pytest.mark.parametrize(
    ("value", "arguments", "text"),
    [
        (210.0, {}, "210"),
        (0.1 + 0.2, {}, "0.3"),
        (209.9999999996, {"decimals": 0}, "210"),
        (1234567.0, {"decimals": 1}, "1234567.0"),
        (-3.25, {"decimals": 1}, "−3.3"),
        (2.5, {"decimals": 0}, "3"),
        # half a step less the last bits of a computation is half a step
        (2.4999999999, {"decimals": 0}, "3"),
        (-0.0000001, {"decimals": 3}, "0.000"),
        (-0.04, {"decimals": 1}, "0.0"),
        (3046.0, {"step": 20}, "3040"),
        (0.12, {"step": 0.05}, "0.10"),
        (3.2, {"step": 2.5}, "2.5"),
        (1e-9, {}, "0"),
        (1e15, {}, "1000000000000000"),
    ],
)
def test_numbers_as_printed(value: float, arguments: dict[str, float], text: str) -> None:
    assert number(value, **arguments) == text  # type: ignore[arg-type]  # a row has decimals or step


@pytest.mark.parametrize(
    ("value", "arguments"),
    [(math.nan, {}), (math.inf, {}), (1.0, {"step": 0.0}), (1.0, {"step": 1.0, "decimals": 1})],
)
def test_what_cannot_be_printed(value: float, arguments: dict[str, float]) -> None:
    with pytest.raises(ValueError, match="can't be shown"):
        number(value, **arguments)  # type: ignore[arg-type]  # a row has decimals or step


def test_shown_in_the_unit_of_the_gauge() -> None:
    assert shown(206.84271879505083, "psi", step=20) == "3000 psi"
    assert shown(206.84271879505083, "MPa", decimals=1) == "20.7 MPa"
    assert shown(45.42494140799999, "gal/min", decimals=2) == "12.00 gal/min"
    assert shown(0.93, "%", decimals=0) == "93 %"
    assert shown(0.93, "") == "0.93"


def test_pint_is_not_loaded_before_it_is_needed() -> None:
    code = "import sys, sheets.quantities, sheets.machine.model; sys.exit('pint' in sys.modules)"

    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0


def test_base_units_are_read_without_pint() -> None:
    code = (
        "import sys\nfrom sheets.quantities import KINDS, parse\n"
        "read = [parse(f'7 {unit}', unit=unit) for unit in KINDS]\n"
        "sys.exit('pint' in sys.modules or read != [7.0] * len(KINDS))"
    )

    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0
