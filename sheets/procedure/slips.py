"""The highest pressure at every node in or near a test state: what a gauge there must stand."""

from __future__ import annotations

from sheets.circuit.faults import CAN_RAISE, FaultKind, faults_of
from sheets.circuit.plant import PlantState
from sheets.circuit.solution import Solution
from sheets.procedure.case import Case
from sheets.procedure.gauges import Worst
from sheets.procedure.work import Work
from sheets.targets.settings import Setting

_Caused = tuple[Solution, dict[str, str]]
"""A solved state with the slip or fault that made it."""


def worst_of(
    case: Case, state: PlantState, stop: Solution, setting: Setting, work: Work
) -> tuple[Worst, ...]:
    """Highest pressure at every node with the screw at its stop, after one slip, or with one fault.

    Slips: one valve elsewhere, one screw at the end of its range. The valve that is set, stuck shut, isn't
    counted: its pressure is approached slowly, with a stop rule. States that aren't established count as
    beyond every gauge.
    """
    caused = [(stop, {"slip": "screw", "adjuster": setting.adjuster})]
    for standing in (state, state.unloaded()):
        caused += _after_slips(case, standing, stop, work)
        caused += _with_faults(case, standing, stop, setting, work)
    return tuple(
        max(
            (
                Worst(
                    pressure_bar=solution.pressures_bar[node] if solution.established else float("inf"),
                    cause=cause,
                )
                for solution, cause in caused
            ),
            key=lambda worst: worst.pressure_bar,
        )
        for node in range(len(case.circuit.nodes))
    )


def _after_slips(case: Case, state: PlantState, stop: Solution, work: Work) -> list[_Caused]:
    slips = [
        (state.moved(valve, other), {"slip": "valve", "valve": valve, "position": other})
        for valve, positions in case.circuit.positions.items()
        for other in positions
        if other != state.positions[valve]
    ]
    slips += [
        (state.adjusted(site.id, site.highest_bar), {"slip": "screw", "adjuster": site.id})
        for site in case.circuit.adjusters
    ]
    solved = work.solve(
        case.circuit, [slip for slip, _ in slips], start_bar=[stop.pressures_bar] * len(slips)
    )
    return [(solved.one(index), cause) for index, (_, cause) in enumerate(slips)]


def _with_faults(
    case: Case, state: PlantState, stop: Solution, setting: Setting, work: Work
) -> list[_Caused]:
    faults = [
        fault
        for fault in faults_of(case.machine, case.circuit, state, kinds=CAN_RAISE)
        if not (fault.kind is FaultKind.RELIEF_STUCK_SHUT and fault.part == setting.part)
    ]
    solutions = work.under_faults(case.circuit, [(state, fault, stop.pressures_bar) for fault in faults])
    return [
        (solution, {"slip": "fault", "valve": fault.part, "fault": fault.kind.value})
        for fault, solution in zip(faults, solutions, strict=True)
    ]
