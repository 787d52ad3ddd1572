"""What every part of the search judges by, as one value."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

from sheets.circuit.model import AdjusterSite, Circuit
from sheets.circuit.plant import PlantState
from sheets.machine.model import Machine
from sheets.machine.parts import VariablePump
from sheets.machine.site import Policies
from sheets.targets.settings import Targets


@dataclass(frozen=True)
class Case:
    """One machine with its circuit, its targets and the policy figures of its site."""

    machine: Machine
    circuit: Circuit
    targets: Targets
    policies: Policies

    @cached_property
    def base(self) -> PlantState:
        """Valves at rest, all drives on, every adjuster at its target or, without one, at its stop."""
        settings_bar = {site.id: site.highest_bar for site in self.circuit.adjusters}
        state = self.circuit.rest_state(settings_bar | self.targets.settings_bar())
        for drive in self.circuit.drives:
            state = state.driven(drive, on=True)
        return state

    @cached_property
    def trusted_ports(self) -> frozenset[str]:
        """Sealed LS ports of which the maker's drawing shows no bleed: outlet pressure reaches them."""
        return frozenset(
            f"{id_}.X"
            for id_, part in self.machine.parts.items()
            if isinstance(part, VariablePump)
            and part.load_sensing is not None
            and part.load_sensing.sealed_without_bleed
        )

    def site(self, adjuster: str) -> AdjusterSite:
        """Where an adjuster acts."""
        return next(site for site in self.circuit.adjusters if site.id == adjuster)
