"""What the machine's work needs: pressure at the pump while each actuator moves, worst direction first."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from itertools import combinations, islice, product

from sheets.amounts import Amount, Finding, Severity
from sheets.circuit.model import Circuit
from sheets.circuit.plant import PlantState
from sheets.circuit.solution import Solution
from sheets.circuit.solver import solve
from sheets.energy.held import held_loads
from sheets.machine.model import Machine
from sheets.machine.parts import Cylinder, DirectionalValve, FixedPump, HydraulicMotor, Part, VariablePump

_SAME_DIGITS = 6
"""After the point, in bar: what the solver is good for."""
_MOST_POSITIONS = 1024
"""Sets of spool positions that are tried."""
_BATCH = 256
_REAL_SHARE = 0.5
"""Policy: a load really moves where it has this share of the highest speed that any set of positions gives.
One that creeps, because another section drains its signal, says nothing of what its work needs."""

_Load = tuple[str, bool]
"""Actuator, and whether the positive sense is meant; so it is of a motor that is loaded alike either way."""


@dataclass(frozen=True, kw_only=True)
class Demand:
    """One actuator moved by a set of valve positions, at the flow that the circuit gives it."""

    actuator: str
    shifted: tuple[tuple[str, str], ...]
    """Valves out of their rest with the position of each."""
    pump: str
    pump_pressure_bar: float
    held_back: bool
    """A limit at the end of its range set that pressure: the true need isn't known."""

    @property
    def by(self) -> str:
        """The valves and their positions in words."""
        return " and ".join(f"{valve} at {position}" for valve, position in self.shifted)


@dataclass(frozen=True, kw_only=True)
class Work:
    """What the work asks of the pumps, and the loads of which nobody knows what they ask."""

    demands: tuple[Demand, ...]
    """Highest first."""
    findings: tuple[Finding, ...]


@dataclass(frozen=True, kw_only=True)
class _Move:
    """One load that moves in one set of positions."""

    shifted: tuple[tuple[str, str], ...]
    speed: float
    demands: tuple[Demand, ...]


def work_of(
    machine: Machine, circuit: Circuit, settings_bar: Mapping[str, float], limits: frozenset[str]
) -> Work:
    """Pump pressure for every move of every actuator, from the solver.

    ``settings_bar`` holds every adjuster: ``limits`` at the end of their range, the others at their targets.
    So losses and the margin of a load-sensing control are in the figures.

    Every move that one valve gives counts. A load that one valve doesn't really move, though several at once
    do (sections of a bank that drain one another's load signal), counts in the sets that move it with the
    fewest valves shifted. A load that no set of positions moves is refused: the load, the nets or what is
    said of an LS port is wrong. So is one that isn't known to move, because a state isn't established or
    there are too many sets.
    """
    spools = [id_ for id_, part in machine.parts.items() if isinstance(part, DirectionalValve)]
    running = circuit.rest_state(settings_bar)
    for drive in circuit.drives:
        running = running.driven(drive, on=True)
    loads = dict(_loads(machine))
    moves: dict[_Load, list[_Move]] = {load: [] for load in loads}
    demands: list[Demand] = []
    sets = _sets(circuit, spools)
    tried, known = 0, True
    while batch := list(islice(sets, _BATCH)):
        tried += len(batch)
        if tried > _MOST_POSITIONS:
            known = False
            break
        solved = solve(circuit, [_standing(running, shifted) for shifted in batch])
        for index, shifted in enumerate(batch):
            solution = solved.one(index)
            if not solution.established:
                known = False
                continue
            for actuator in sorted(solution.moving):
                asked = _demands(machine, circuit, settings_bar, limits, actuator, shifted, solution)
                if len(shifted) == 1:
                    demands += asked
                speed = solution.speeds[actuator]
                load = (actuator, _either_way(machine.parts[actuator]) or speed > 0.0)
                if load in moves:
                    moves[load].append(_Move(shifted=shifted, speed=abs(speed), demands=asked))
    for found in moves.values():
        demands += _of_load(found)
    return Work(
        demands=tuple(sorted(demands, key=_heaviest_first)),
        findings=tuple(_unmoved(load, *loads[load], known=known) for load in loads if not moves[load])
        if spools
        else (),
    )


def _heaviest_first(demand: Demand) -> tuple[float, str]:
    """Equal ones, as both ways of a motor are, in the order of the file: the last bits decide nothing."""
    return -round(demand.pump_pressure_bar, _SAME_DIGITS), demand.actuator


def _sets(circuit: Circuit, spools: list[str]) -> Iterator[tuple[tuple[str, str], ...]]:
    """Sets of shifted spools: none, then each alone, then those with most shifted."""
    counts = (0, 1, *range(len(spools), 1, -1))
    for count in counts[: len(spools) + 1]:
        for shifted in combinations(spools, count):
            for positions in product(*(circuit.positions[id_][1:] for id_ in shifted)):
                yield tuple(zip(shifted, positions, strict=True))


def _standing(running: PlantState, shifted: tuple[tuple[str, str], ...]) -> PlantState:
    for valve, position in shifted:
        running = running.moved(valve, position)
    return running


def _of_load(moves: list[_Move]) -> Iterator[Demand]:
    """What a load asks for in the sets with the fewest valves in which it really moves."""
    highest = max((move.speed for move in moves), default=0.0)
    real = [move for move in moves if move.speed >= _REAL_SHARE * highest]
    fewest = min((len(move.shifted) for move in real), default=1)
    if fewest != 1:  # what one valve moves is counted already
        for move in real:
            if len(move.shifted) == fewest:
                yield from move.demands


def _demands(
    machine: Machine,
    circuit: Circuit,
    settings_bar: Mapping[str, float],
    limits: frozenset[str],
    actuator: str,
    shifted: tuple[tuple[str, str], ...],
    solution: Solution,
) -> tuple[Demand, ...]:
    found = []
    for pump, part in machine.parts.items():
        if not isinstance(part, FixedPump | VariablePump):
            continue
        outlet_bar = solution.pressure_at(f"{pump}.P")
        held_back = any(
            site.id in limits
            and site.controlled_node == circuit.node_of[f"{pump}.P"]
            and outlet_bar > settings_bar[site.id] - site.width_bar
            for site in circuit.adjusters
        )
        found.append(
            Demand(
                actuator=actuator,
                shifted=shifted,
                pump=pump,
                pump_pressure_bar=outlet_bar,
                held_back=held_back,
            )
        )
    return tuple(found)


def _unmoved(load: _Load, amount: Amount, sense: str, *, known: bool) -> Finding:
    data: dict[str, Amount | str] = {"load": amount, "sense": sense}
    if known:
        return Finding(code="load_never_moves", severity=Severity.REFUSED, subject=load[0], data=data)
    return Finding(code="load_not_known_to_move", severity=Severity.REFUSED, subject=load[0], data=data)


def loads_not_given(machine: Machine, *, needed: bool) -> Iterator[Finding]:
    """Work loads that the file doesn't say: nought is a load, and has to be written.

    ``needed``: a setting is computed from the work. Then it is refused; else it is warned that no limit was
    held against the work.
    """
    severity = Severity.REFUSED if needed else Severity.WARNING
    for id_, part in machine.parts.items():
        given = part.model_fields_set
        if isinstance(part, Cylinder):
            missing = [
                key
                for key in ("extending load", "retracting load")
                if f"{key.replace(' ', '_')}_kn" not in given
            ]
        elif isinstance(part, HydraulicMotor):
            missing = [] if "load_torque_nm" in given else ["load torque"]
        else:
            continue
        if missing:
            data: dict[str, Amount | str] = {"loads": " and ".join(missing)}
            yield Finding(code="load_not_given", severity=severity, subject=id_, data=data)


def undescribed_loads(machine: Machine) -> tuple[Finding, ...]:
    """Refuses a held-up load that no part describes, and one declared absent although a part has it."""
    described = held_loads(machine)
    absent = [source for source in machine.absent if "suspended" in source.casefold()]
    if machine.load_is_held_up and not described:
        nothing = Finding(code="load_not_described", severity=Severity.REFUSED, subject=machine.tag, data={})
        return (nothing,)
    if absent and described:
        subject = ", ".join(described)
        return (Finding(code="load_declared_absent", severity=Severity.REFUSED, subject=subject, data={}),)
    return ()


def _loads(machine: Machine) -> Iterator[tuple[_Load, tuple[Amount, str]]]:
    """Every load that a file names, with the weight or driving torque that opposes that sense."""
    for id_, part in machine.parts.items():
        if isinstance(part, Cylinder):
            loads_kn = {"extending": part.extending_load_kn, "retracting": part.retracting_load_kn}
            loads_kn["extending" if part.weight_drives == "retracting" else "retracting"] += part.weight_kn
            for sense, load_kn in loads_kn.items():
                if load_kn > 0.0:
                    yield (id_, sense == "extending"), (Amount(value=load_kn, quantity="force_kn"), sense)
        elif isinstance(part, HydraulicMotor):
            torque_nm = part.load_torque_nm + part.driving_torque_nm
            if torque_nm > 0.0:
                forward = _either_way(part) or part.driving_torque_turns == "backward"
                sense = "either way" if _either_way(part) else "forward" if forward else "backward"
                yield (id_, forward), (Amount(value=torque_nm, quantity="torque_nm"), sense)


def _either_way(part: Part) -> bool:
    """Whether a part's load is the same in both senses, so that it has to move in one only."""
    return isinstance(part, HydraulicMotor) and part.driving_torque_nm == 0.0
