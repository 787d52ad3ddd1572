"""Numbers with their meaning: amounts, derivations and findings.

A stage hands these on; only wording turns them into printed text, in the units of the machine file.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from enum import Enum
from typing import Literal

Quantity = Literal[
    "pressure_bar",
    "flow_lpm",
    "power_kw",
    "speed_m_s",
    "speed_rpm",
    "ratio",
    "time_s",
    "temperature_c",
    "temperature_rise_k",
    "force_kn",
    "torque_nm",
    "voltage_v",
    "volume_l",
    "count",
]


@dataclass(frozen=True, kw_only=True)
class Amount:
    """A value in the base unit that its quantity names."""

    value: float
    quantity: Quantity


def bar(value: float) -> Amount:
    """Pressure in bar, or a difference of pressures."""
    return Amount(value=value, quantity="pressure_bar")


def lpm(value: float) -> Amount:
    """Flow in L/min."""
    return Amount(value=value, quantity="flow_lpm")


def kw(value: float) -> Amount:
    """Power in kW."""
    return Amount(value=value, quantity="power_kw")


def ratio(value: float) -> Amount:
    """A number without unit."""
    return Amount(value=value, quantity="ratio")


@dataclass(frozen=True, kw_only=True)
class Derivation:
    """How one number came about."""

    result_name: str
    formula: str
    inputs: tuple[tuple[str, Amount, str], ...]
    """Symbol, amount, and where it came from: plate, given, policy, computed."""
    result: Amount


class Severity(Enum):
    """A policy figure warns; a maker's, an owner's or a rating's figure refuses."""

    REFUSED = "refused"
    WARNING = "warning"
    NOT_ESTABLISHED = "not established"
    NOTE = "note"


@dataclass(frozen=True, kw_only=True)
class Finding:
    """Something found about a part or an adjuster; its code names the sentence that says it."""

    code: str
    severity: Severity
    subject: str
    data: Mapping[str, Amount | str] = field(default_factory=dict)
