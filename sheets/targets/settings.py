"""The setting of every adjuster: given or computed, with window, derivation and findings."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from enum import Enum

from sheets.amounts import Amount, Derivation, Finding, Severity, bar
from sheets.machine.parts import Adjuster


class Origin(Enum):
    """Where a figure comes from."""

    GIVEN = "given"
    COMPUTED = "computed"
    POLICY = "policy"


@dataclass(frozen=True, kw_only=True)
class Setting:
    """One adjuster's target with all that was found about it. Pressures are settings, not readings."""

    adjuster: str
    part: str
    target_bar: float
    origin: Origin
    given_by: str
    low_bar: float
    high_bar: float
    window_origin: Origin
    floor_bar: float
    """A widened window stays at or above this."""
    ceiling_bar: float
    derivations: tuple[Derivation, ...]
    findings: tuple[Finding, ...]
    screw: Adjuster


@dataclass(frozen=True, kw_only=True)
class Targets:
    """Settings of one machine."""

    settings: Mapping[str, Setting]
    """By adjuster, in the order of the file. An adjuster without a value is missing; a finding says why."""
    findings: tuple[Finding, ...]
    """All of them, those of single settings included."""

    @property
    def refusals(self) -> tuple[Finding, ...]:
        return tuple(f for f in self.findings if f.severity in (Severity.REFUSED, Severity.NOT_ESTABLISHED))

    def settings_bar(self) -> dict[str, float]:
        """Target of every adjuster."""
        return {id_: setting.target_bar for id_, setting in self.settings.items()}


def window_of(
    *, target_bar: float, tolerance_bar: float | None, share: float, least_bar: float
) -> tuple[float, float, Origin, Derivation]:
    """Accepted settings around a target.

    ``target_bar``, ``tolerance_bar`` (given half width or None) and ``least_bar`` in bar; ``share`` of the
    target. Returns low and high in bar, where the width comes from, and its derivation. Policy: the larger
    of a share of the target and a least half width. Source: policy of this project unless given.
    """
    if tolerance_bar is not None:
        half_bar, origin = tolerance_bar, Origin.GIVEN
        inputs: tuple[tuple[str, Amount, str], ...] = (("tolerance", bar(tolerance_bar), "given"),)
        formula = "target ± tolerance"
    else:
        half_bar, origin = max(share * target_bar, least_bar), Origin.POLICY
        inputs = (
            ("target", bar(target_bar), "above"),
            ("share", Amount(value=share, quantity="ratio"), "policy"),
            ("least", bar(least_bar), "policy"),
        )
        formula = "target ± the larger of share × target and least"
    derivation = Derivation(
        result_name="half of the window", formula=formula, inputs=inputs, result=bar(half_bar)
    )
    return target_bar - half_bar, target_bar + half_bar, origin, derivation
