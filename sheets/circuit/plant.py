"""State of the plant, and the actions that change it.

A state is what a person could write down: where valves stand, which drives run, how adjusters are set,
and the pressure that each net had (its memory).
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Literal

Stop = Literal["near stop", "far stop"]
Travel = Literal["between"] | Stop
"""Where an actuator stands. Near stop: retracted; far stop: extended. Motors are always between."""


@dataclass(frozen=True, kw_only=True)
class PlantState:
    """Everything that decides the next pressures."""

    positions: Mapping[str, str]
    """Valve id to position; hand valves are ``open`` or ``closed``."""
    running: frozenset[str]
    """Drives that run."""
    settings_bar: Mapping[str, float]
    """Adjuster id to setting."""
    pressures_bar: tuple[float, ...]
    """Pressure that each node had before: the memory of groups that are cut off."""
    travel: Mapping[str, Travel]
    """Actuator id to where it stands."""
    loaded: bool = True
    """Whether the work loads of the file act. At work they do; an idle machine may have none of them."""

    def moved(self, valve: str, position: str) -> PlantState:
        """The same state with one valve in another position."""
        return replace(self, positions={**self.positions, valve: position})

    def adjusted(self, adjuster: str, setting_bar: float) -> PlantState:
        """The same state with one adjuster at another setting."""
        return replace(self, settings_bar={**self.settings_bar, adjuster: setting_bar})

    def driven(self, drive: str, *, on: bool) -> PlantState:
        """The same state with one drive started or stopped."""
        return replace(self, running=self.running | {drive} if on else self.running - {drive})

    def unloaded(self) -> PlantState:
        """The same state without the work loads: nothing but weights and oil acts on the actuators."""
        return replace(self, loaded=False)

    def standing(self, actuator: str, travel: Travel) -> PlantState:
        """The same state with one actuator elsewhere on its way."""
        return replace(self, travel={**self.travel, actuator: travel})


@dataclass(frozen=True, kw_only=True)
class AtStop:
    """A cylinder that stands at one of its stops, pressed against it."""

    actuator: str
    stop: Stop


@dataclass(frozen=True, kw_only=True)
class MoveValve:
    """A hand valve turned, a lever or solenoid valve shifted."""

    valve: str
    position: str


@dataclass(frozen=True, kw_only=True)
class StartDrive:
    drive: str


@dataclass(frozen=True, kw_only=True)
class StopDrive:
    drive: str


@dataclass(frozen=True, kw_only=True)
class Adjust:
    """An adjuster brought to a setting."""

    adjuster: str
    setting_bar: float


PlantAction = MoveValve | StartDrive | StopDrive | Adjust


def act(state: PlantState, action: PlantAction) -> PlantState:
    """The state right after an action, before the pressures follow."""
    match action:
        case MoveValve(valve=valve, position=position):
            return state.moved(valve, position)
        case StartDrive(drive=drive):
            return state.driven(drive, on=True)
        case StopDrive(drive=drive):
            return state.driven(drive, on=False)
        case Adjust(adjuster=adjuster, setting_bar=setting_bar):
            return state.adjusted(adjuster, setting_bar)
