"""Amounts in the two units of a machine file."""

from collections.abc import Callable

import pytest
from hypothesis import given
from hypothesis import strategies as st

from sheets.amounts import Amount
from sheets.errors import InputError
from sheets.machine.model import Units
from sheets.pages.compose.matter import Matter
from sheets.pipeline import Described
from sheets.procedure.steps import StepKind
from sheets.wording.figures import Figures

BAR = {"bar": 1.0, "psi": 0.45359237 * 9.80665 / 0.0254**2 / 1e5, "MPa": 10.0}
PAIRS = [(first, second) for first in BAR for second in BAR if first != second]


def second(low_bar: float, high_bar: float, *, unit: str = "psi", first: str = "bar") -> str:
    return Figures(Units(pressure=(first, unit))).second_inside(low_bar, high_bar)


def test_window_in_the_second_unit_by_hand() -> None:
    # 172 bar = 2494.65 psi, 180 bar = 2610.68 psi; 2740 psi = 188.92 bar, 2860 psi = 197.19 bar.
    assert second(172.0, 180.0) == "2495 to 2610 psi"
    assert second(2740 * BAR["psi"], 2860 * BAR["psi"], unit="bar", first="psi") == "189 to 197 bar"


def test_whole_figures_stay_whole() -> None:
    assert second(100.0, 180.0, unit="MPa") == "10.0 to 18.0 MPa"
    assert second(26.0, 28.0, unit="MPa") == "2.6 to 2.8 MPa"
    assert second(1000 * BAR["psi"], 1200 * BAR["psi"], first="MPa") == "1000 to 1200 psi"


def test_narrow_window_gets_digits_more() -> None:
    assert second(26.2, 26.8, unit="MPa") == "2.62 to 2.68 MPa"
    assert second(26.25, 26.75, unit="MPa") == "2.63 to 2.67 MPa"


@pytest.mark.parametrize(("first", "unit"), PAIRS)
@given(low=st.floats(1.0, 600.0), width=st.floats(0.2, 60.0))
def test_second_unit_never_accepts_more(first: str, unit: str, low: float, width: float) -> None:
    text = second(low, low + width, unit=unit, first=first)
    shown_low, shown_high = text.removesuffix(f" {unit}").split(" to ")
    dust = 1e-5  # of a unit: what printing rounds through

    assert float(shown_low) >= low / BAR[unit] - dust
    assert float(shown_high) <= (low + width) / BAR[unit] + dust
    assert float(shown_low) < float(shown_high)


def test_no_second_unit_no_text() -> None:
    assert Figures(Units(pressure=("bar",))).second_inside(1.0, 2.0) == ""


def test_target_stands_to_half_a_division() -> None:
    figures = Figures(Units(pressure=("bar",)))
    assert figures.reading(206.14, 2.0, half=True) == "206 bar"
    assert figures.reading(206.6, 2.0, half=True) == "207 bar"
    assert figures.reading(206.6, 2.0) == "206 bar"
    assert figures.reading(27.04, 0.1) == "27.0 bar"
    psi = Figures(Units(pressure=("psi",)))
    assert psi.reading(3302.4 * BAR["psi"], 20 * BAR["psi"], half=True) == "3300 psi"


@pytest.mark.parametrize(
    ("speed_m_s", "printed"),
    [
        (0.143, "0.14 m/s"),
        (0.1, "0.10 m/s"),
        (0.0421, "42 mm/s"),
        (0.0042, "4.2 mm/s"),
        (0.00042, "0.42 mm/s"),
        (0.000004, "less than 0.01 mm/s"),  # it moves: nought would say that it doesn't
        (0.0, "0.00 mm/s"),
    ],
)
def test_a_slow_speed_isnt_printed_as_nought(speed_m_s: float, printed: str) -> None:
    assert Figures(Units()).amount(Amount(value=speed_m_s, quantity="speed_m_s")) == printed


def test_a_slow_turn_isnt_printed_as_nought() -> None:
    figures = Figures(Units())
    assert figures.amount(Amount(value=142.4, quantity="speed_rpm")) == "142 rev/min"
    assert figures.amount(Amount(value=0.21, quantity="speed_rpm")) == "0.21 rev/min"


def test_oil_in_the_second_unit_by_hand() -> None:
    # 45 °C = 113 °F, 55 °C = 131 °F, 65 °C = 149 °F; 46 °C = 114.8 °F, 54.1 °C = 129.38 °F, 64 °C = 147.2 °F.
    figures = Figures(Units(temperature=("°C", "°F")))
    assert figures.oil_second(45.0, 55.0, 65.0) == ("113 °F", "131 °F", "149 °F")
    assert figures.oil_second(46.0, 54.1, 64.0) == ("115 °F", "129 °F", "147 °F")  # inward, never over
    assert Figures(Units()).oil_second(45.0, 55.0, 65.0) == ("", "", "")


def test_oil_is_read_in_both_units_where_the_file_names_them(refused: Callable[..., Matter]) -> None:
    flow = "  flow: [gal/min, L/min]\n"
    matter = refused("glaze_press", (flow, f"{flow}  temperature: [°C, °F]\n"))
    said = [
        one.lines
        for stage in matter.procedure.stages
        for one in matter.spoken(stage)
        if one.step.kind is StepKind.WARM_OIL
    ]
    assert said
    assert all("That is 113 °F to 131 °F; the limit is 149 °F." in lines for lines in said)


def test_readings_are_recorded_in_degrees_celsius(changed: Callable[..., Described]) -> None:
    flow = "  flow: [gal/min, L/min]\n"
    with pytest.raises(InputError, match="recorded in °C"):
        changed("glaze_press", (flow, f"{flow}  temperature: [°F, °C]\n"))
