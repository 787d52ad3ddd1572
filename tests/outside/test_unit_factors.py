"""Unit factors as printed, through the reader of quantities."""

import pytest
from outside_bench import Published

from sheets.quantities import from_unit, parse, to_unit

SP_811 = "NIST Special Publication 811 (2008), appendix B.8"
HB_44 = "NIST Handbook 44 (2024), appendix C"


def sp_811(printed: str) -> Published:
    """Its text could not be read; its seven digits equal the exact definitions, rounded."""
    return Published(printed=printed, source=SP_811, evidence="from memory", within=5e-7)


def handbook(printed: str) -> Published:
    """Exact by definition."""
    return Published(printed=printed, source=HB_44, evidence="from memory", within=1e-15)


FACTORS = [
    ("1 psi", "bar", sp_811("6.894757 kPa")),
    ("1 bar", "bar", sp_811("1.0e5 Pa")),
    ("1 gal", "L", sp_811("3.785412 L")),
    ("1 gal/min", "L/min", sp_811("6.309020e-5 m3/s")),
    ("1 hp", "kW", sp_811("745.6999 W")),
    ("1 lbf", "kN", sp_811("4.448222 N")),
    ("1 lbf ft", "N·m", sp_811("1.355818 N m")),
    ("1 lbf in", "N·m", sp_811("1.129848e-1 N m")),
    ("1 in", "mm", handbook("25.4 mm")),
    ("1 gal", "L", handbook("3.785411784 L")),
]


@pytest.mark.parametrize(
    ("unit", "base", "figure"), FACTORS, ids=lambda value: str(getattr(value, "printed", value))
)
def test_factor_as_printed(unit: str, base: str, figure: Published) -> None:
    assert figure.agrees(parse(unit, unit=base), base)
    name = unit.removeprefix("1 ")
    assert to_unit(from_unit(17.0, name), name) == pytest.approx(17.0, rel=1e-14)
