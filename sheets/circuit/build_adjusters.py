"""Adjusters of a machine: where each acts, and which of its figures are policy."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace

from sheets.circuit.model import AdjusterSite
from sheets.errors import InputError, Problem
from sheets.machine.model import Machine
from sheets.machine.parts import CompensatorControl, LoadSensingControl, ReliefValve

COMPENSATOR = "compensator"
LOAD_SENSING = "load sensing"


@dataclass(frozen=True, kw_only=True)
class Policies:
    """Figures that stand in where no plate gives one."""

    opening_ratio_direct: float
    opening_ratio_pilot: float
    control_width_bar: float


def adjuster_ids(machine: Machine) -> Iterator[tuple[str, str, str]]:
    """Part, name within it and id of every adjuster, in the order of the file."""
    for part_id, part in machine.parts.items():
        names = list(part.adjusters())
        for name in names:
            yield part_id, name, part_id if names == ["adjuster"] else f"{part_id}.{name}"


class AdjusterBook:
    """Sites of adjusters while a circuit is built."""

    def __init__(self, machine: Machine, *, policies: Policies) -> None:
        self._ids = {(part, name): id_ for part, name, id_ in adjuster_ids(machine)}
        self._order = list(self._ids.values())
        self._sites: dict[str, AdjusterSite] = {}
        self._policies = policies

    def index(self, id_: str) -> int:
        """Place of an adjuster in a row of settings."""
        return self._order.index(id_)

    def sites(self) -> tuple[AdjusterSite, ...]:
        """All sites. Raises InputError for an adjuster of a part that leads nowhere."""
        for id_ in self._order:
            if id_ not in self._sites:
                raise InputError(
                    Problem(
                        where=f"parts, {id_.split('.', 1)[0]}",
                        what="The part has an adjuster, and a port that is in no net.",
                        fix="Add both of its ports to the nets that they are joined to.",
                    )
                )
        return tuple(self._sites[id_] for id_ in self._order)

    def add_relief(
        self, part_id: str, part: ReliefValve, *, controlled: int, reference: int, full_flow_lpm: float
    ) -> AdjusterSite:
        """The site of a relief valve."""
        policy = set()
        ratio = part.opening_ratio
        if ratio is None:
            policy.add("opening ratio")
            direct = part.acting == "direct"
            ratio = self._policies.opening_ratio_direct if direct else self._policies.opening_ratio_pilot
        flow_lpm = part.reference_flow_lpm
        if flow_lpm is None:
            policy.add("reference flow")
            flow_lpm = full_flow_lpm or part.rated_flow_lpm
        return self._add(
            AdjusterSite(
                id=self._ids[part_id, "adjuster"],
                part=part_id,
                controlled_node=controlled,
                reference_node=reference,
                lowest_bar=part.adjuster.lowest_bar,
                highest_bar=part.adjuster.highest_bar,
                flow_slope=ratio,
                reference_flow_lpm=flow_lpm,
                width_bar=(1.0 - ratio) * part.adjuster.highest_bar,
                policy=frozenset(policy),
            )
        )

    def add_compensator(
        self, part_id: str, control: CompensatorControl, *, controlled: int, reference: int
    ) -> AdjusterSite:
        """The site of a compensator."""
        width_bar, policy = self._width(control.width_bar)
        return self._add(
            self._control(part_id, COMPENSATOR, control, controlled, reference, width_bar, policy)
        )

    def add_load_sensing(
        self,
        part_id: str,
        control: LoadSensingControl,
        *,
        controlled: int,
        reference: int,
        signal_node: int | None,
        full_flow_lpm: float,
    ) -> AdjusterSite:
        """The site of a load-sensing control; standby and differential, where given, give its width."""
        given = control.width_bar
        differential_bar, flow_lpm = control.differential_bar, control.differential_flow_lpm
        if given is None and control.setting_bar and differential_bar and flow_lpm:
            given = (control.setting_bar - differential_bar) * full_flow_lpm / flow_lpm
            if given <= 0.0:
                raise InputError(
                    Problem(
                        where=f"parts, {part_id}, load sensing, differential",
                        what="The differential at flow is not below the standby reading.",
                        fix="Look up which of the two the maker's value is: standby always reads higher.",
                    )
                )
        width_bar, policy = self._width(given)
        site = self._control(part_id, LOAD_SENSING, control, controlled, reference, width_bar, policy)
        return self._add(replace(site, signal_node=signal_node, width_flow_lpm=full_flow_lpm))

    def _width(self, given_bar: float | None) -> tuple[float, frozenset[str]]:
        if given_bar is None:
            return self._policies.control_width_bar, frozenset({"width"})
        return given_bar, frozenset()

    def _control(
        self,
        part_id: str,
        name: str,
        control: CompensatorControl | LoadSensingControl,
        controlled: int,
        reference: int,
        width_bar: float,
        policy: frozenset[str],
    ) -> AdjusterSite:
        return AdjusterSite(
            id=self._ids[part_id, name],
            part=part_id,
            controlled_node=controlled,
            reference_node=reference,
            lowest_bar=control.lowest_bar,
            highest_bar=control.highest_bar,
            flow_slope=1.0,
            reference_flow_lpm=0.0,
            width_bar=width_bar,
            policy=policy,
        )

    def _add(self, site: AdjusterSite) -> AdjusterSite:
        self._sites[site.id] = site
        return site
