"""Newton's method on a batch of states: with bounded steps, then damped, then by pseudo-time, then with wide
bends made narrow.

Every state goes its own way; what a state becomes never hangs on which others are solved beside it.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

import numpy as np

from sheets.circuit.equations import Balance, balance, jacobian
from sheets.circuit.model import Circuit
from sheets.circuit.smooth import Bools, Floats, Ints
from sheets.circuit.stamp import StateArrays

RESIDUAL_SHARE: Final = 1e-9
STEP_BAR: Final = 1e-6
EPSILON: Final = float(np.finfo(np.float64).eps)
LONGEST_STEP_BAR: Final = 1e4
HALVINGS: Final = 41
TRIALS_TOGETHER: Final = 64
FEW: Final = 4
"""So few states cost the same with slopes as without, so what a trial gave is kept for the next step."""
ARMIJO: Final = 1e-4
BOUNDED_STEPS: Final = 60
FIRST_BOUND_BAR: Final = 50.0
BOUND_AFTER_TURN: Final = 0.5
BOUND_AFTER_ADVANCE: Final = 1.2
NEWTON_STEPS: Final = 80
TIME_STEPS: Final = 400
FIRST_TIME_STEP: Final = 0.1
"""bar for each L/min of residual"""
LONGEST_TIME_STEP: Final = 1e12
WORSE_BY: Final = 1.5
WIDENINGS: Final = (400.0, 100.0, 20.0, 4.0, 1.0)
"""On a bend of 0.05 bar: 20, 5, 1, 0.2 and 0.05 bar."""


@dataclass(frozen=True, kw_only=True)
class Found:
    """Where the method stopped."""

    pressures_bar: Floats
    accepted: Bools
    last: Balance | None = None
    """At these pressures, with slopes, where all were accepted in one go."""


def tolerance(circuit: Circuit, at: Balance) -> Floats:
    """[B, N − 1] residual that is accepted at each node."""
    return RESIDUAL_SHARE * (max(circuit.reference_flow_lpm, 1.0) + at.throughput_lpm)


def solve_each(matrices: Floats, right: Floats) -> Floats:
    """[B, n, k] solutions of many linear systems; not a number where a matrix is singular."""
    try:
        return np.asarray(np.linalg.solve(matrices, right), dtype=np.float64)
    except np.linalg.LinAlgError:
        found: Floats = np.full_like(right, np.nan)
        for row in range(len(right)):
            try:
                found[row] = np.linalg.solve(matrices[row], right[row])
            except np.linalg.LinAlgError:
                continue  # stays not a number, so this state is not accepted
        return found


def rounding(slopes: Floats, pressures_bar: Floats, throughput_lpm: Floats) -> Floats:
    """[B, N − 1] what a flow may be off because pressures are stored in 53 bits."""
    highest = np.abs(pressures_bar).max(axis=1, initial=0.0)[:, None]
    return np.asarray(4.0 * EPSILON * (np.abs(slopes).sum(axis=2) * highest + throughput_lpm))


def newton_step(slopes: Floats, at: Balance) -> Floats:
    """[B, N − 1] the undamped step."""
    return solve_each(slopes, -at.residual_lpm[:, :, None])[:, :, 0]


def balanced(circuit: Circuit, at: Balance, slopes: Floats, pressures_bar: Floats) -> Bools:
    """[B] whether the residual is small: half of what ``acceptable`` asks for."""
    left = np.abs(at.residual_lpm)
    stored = STEP_BAR * circuit.capacities[1:] + rounding(slopes, pressures_bar, at.throughput_lpm)
    return np.asarray(((left <= tolerance(circuit, at)) & (left <= stored)).all(axis=1))


def acceptable(
    circuit: Circuit, at: Balance, slopes: Floats, pressures_bar: Floats, step_bar: Floats
) -> Bools:
    """[B] residual small and undamped step small.

    The residual alone lets a group that is cut off drift. The step alone stops short where a curve begins
    as a parabola: there it halves what is left, while next to nothing flows. So the residual must also
    be what 1e-6 bar stores, or else what rounding leaves.
    """
    small = balanced(circuit, at, slopes, pressures_bar)
    return np.asarray(small & (np.abs(step_bar) <= STEP_BAR).all(axis=1))


def find(circuit: Circuit, state: StateArrays, start_bar: Floats) -> Found:
    """Pressures of a batch, from a start: [B, N]."""
    first = _by_bounded_steps(circuit, state, start_bar)
    if np.all(first.accepted):
        return first
    pressures_bar, accepted = first.pressures_bar, first.accepted

    def put(rows: Ints, found: Found) -> None:
        pressures_bar[rows] = found.pressures_bar
        accepted[rows] = found.accepted

    for attempt in (_by_damping, _by_pseudo_time, _by_narrowing):
        left = np.flatnonzero(~accepted)
        if left.size:
            put(left, attempt(circuit, state.take(left), start_bar[left]))
    return Found(pressures_bar=pressures_bar, accepted=accepted)


def _by_bounded_steps(circuit: Circuit, state: StateArrays, start_bar: Floats) -> Found:
    """Whole steps up to a bound, whatever the residual; a step that turns back halves the bound.

    Across a sharp bend a residual that must fall lets only the tiniest steps pass, and a whole step swings to
    and fro. Bounded ones close in on the bend from both sides, until Newton's own step is the smaller one.
    """
    pressures_bar = start_bar.copy()
    accepted = np.zeros(len(pressures_bar), dtype=np.bool_)
    bound_bar = np.full(len(pressures_bar), FIRST_BOUND_BAR)
    before_bar = np.zeros((len(pressures_bar), pressures_bar.shape[1] - 1))
    active = np.arange(len(pressures_bar))
    for _ in range(BOUNDED_STEPS):
        here = pressures_bar[active]
        at = balance(circuit, state.take(active), here)
        slopes = jacobian(circuit, at)
        step_bar = newton_step(slopes, at)
        done = acceptable(circuit, at, slopes, here, step_bar)
        accepted[active[done]] = True
        if done.all() and len(active) == len(pressures_bar):
            return Found(pressures_bar=pressures_bar, accepted=accepted, last=at)
        going = np.flatnonzero(~done & np.isfinite(step_bar).all(axis=1))
        if not going.size:
            break
        active, step_bar = active[going], step_bar[going]
        along = (step_bar * before_bar[active]).sum(axis=1)
        bound_bar[active] *= np.where(along < 0.0, BOUND_AFTER_TURN, BOUND_AFTER_ADVANCE)
        longest = np.abs(step_bar).max(axis=1, initial=0.0)
        step_bar *= (bound_bar[active] / np.maximum(longest, bound_bar[active]))[:, None]
        before_bar[active] = step_bar
        pressures_bar[active, 1:] += step_bar
    return Found(pressures_bar=pressures_bar, accepted=accepted)


def _by_damping(circuit: Circuit, state: StateArrays, start_bar: Floats) -> Found:
    return _damped(circuit, state, start_bar, widening=1.0)


def _by_pseudo_time(circuit: Circuit, state: StateArrays, start_bar: Floats) -> Found:
    return _pseudo_time(circuit, state, start_bar, widening=1.0)


def _by_narrowing(circuit: Circuit, state: StateArrays, start_bar: Floats) -> Found:
    """From no pressure, with bends so wide that the circuit is nearly linear, then narrower ones."""
    pressures_bar = np.zeros_like(start_bar)
    found = Found(pressures_bar=pressures_bar, accepted=np.zeros(len(start_bar), dtype=np.bool_))
    for widening in WIDENINGS:
        found = _damped(circuit, state, pressures_bar, widening=widening)
        left = np.flatnonzero(~found.accepted)
        if left.size:
            slow = _pseudo_time(circuit, state.take(left), pressures_bar[left], widening=widening)
            found.pressures_bar[left] = slow.pressures_bar
            found.accepted[left] = slow.accepted
        # A width that wasn't solved still gives the next one a better start than none.
        pressures_bar = found.pressures_bar
    return found


def _norm(at: Balance) -> Floats:
    return np.asarray(np.sqrt((at.residual_lpm * at.residual_lpm).sum(axis=1)))


def _moved(pressures_bar: Floats, step_bar: Floats, share: Floats) -> Floats:
    """Pressures after a share of a step; the tank stays where it is."""
    longest = np.abs(step_bar).max(axis=1, initial=0.0)
    bounded = share * np.minimum(1.0, LONGEST_STEP_BAR / np.maximum(longest, LONGEST_STEP_BAR))
    moved = pressures_bar.copy()
    moved[:, 1:] += bounded[:, None] * step_bar
    return moved


def _damped(circuit: Circuit, state: StateArrays, start_bar: Floats, *, widening: float) -> Found:
    """Newton's method; each step halved until the residual falls enough (Armijo's rule)."""
    pressures_bar = start_bar.copy()
    accepted = np.zeros(len(pressures_bar), dtype=np.bool_)
    active = np.arange(len(pressures_bar))
    known: Balance | None = None
    for _ in range(NEWTON_STEPS):
        part = state.take(active)
        here = pressures_bar[active]
        at = known or balance(circuit, part, here, widening=widening)
        slopes = jacobian(circuit, at)
        step_bar = newton_step(slopes, at)
        done = acceptable(circuit, at, slopes, here, step_bar)
        accepted[active[done]] = True
        if done.all() and len(active) == len(pressures_bar):
            return Found(pressures_bar=pressures_bar, accepted=accepted, last=at)
        going = ~done & np.isfinite(step_bar).all(axis=1)
        if not going.any():
            break
        rows = np.flatnonzero(going)
        # At the floor of rounding no step lowers the residual, yet a cut-off group may still have far to go.
        floor = np.sqrt(np.square(tolerance(circuit, at)).sum(axis=1))
        better, moved, known = _searched(
            circuit, part.take(rows), here[rows], step_bar[rows], _norm(at)[rows], floor[rows], widening
        )
        active = active[rows][better]
        pressures_bar[active] = moved[better]
        if not active.size:
            break
    return Found(pressures_bar=pressures_bar, accepted=accepted)


def _searched(
    circuit: Circuit,
    state: StateArrays,
    here: Floats,
    step_bar: Floats,
    norm: Floats,
    floor: Floats,
    widening: float,
) -> tuple[Bools, Floats, Balance | None]:
    """Whether a share of each step lowers the residual enough, and the pressures after it.

    The balance there comes with them where a few states all took their whole step.

    The longest good share is taken. The whole step is tried alone, as it mostly serves. Then, where few
    states are left, several halvings are tried in one call, which costs less than a call for each.
    """
    moved = here.copy()
    better = np.zeros(len(here), dtype=np.bool_)
    left = np.arange(len(here))
    tried = 0
    while left.size and tried < HALVINGS:
        together = 1 if not tried else max(1, min(8, TRIALS_TOGETHER // len(left), HALVINGS - tried))
        shares = 0.5 ** np.arange(tried, tried + together)
        rows = np.repeat(left, together)
        trial = _moved(here[rows], step_bar[rows], np.tile(shares, len(left)))
        few = not tried and len(here) <= FEW
        at = balance(circuit, state.take(rows), trial, widening=widening, slopes=few)
        new = _norm(at).reshape(-1, together)
        good = (new <= (1.0 - ARMIJO * shares) * norm[left, None]) | (new <= floor[left, None])
        first = np.argmax(good, axis=1)
        found = good[np.arange(len(left)), first]
        moved[left[found]] = trial.reshape(len(left), together, -1)[np.flatnonzero(found), first[found]]
        better[left[found]] = True
        if few and found.all():
            return better, moved, at
        left = left[~found]
        tried += together
    return better, moved, None


def _pseudo_time(circuit: Circuit, state: StateArrays, start_bar: Floats, *, widening: float) -> Found:
    """Implicit steps of a made-up time that may climb a little: a way out of cycles across the root."""
    pressures_bar = start_bar.copy()
    accepted = np.zeros(len(pressures_bar), dtype=np.bool_)
    time_step = np.full(len(pressures_bar), FIRST_TIME_STEP)
    active = np.arange(len(pressures_bar))
    diagonal = np.arange(pressures_bar.shape[1] - 1)
    known: Balance | None = None
    for _ in range(TIME_STEPS):
        part = state.take(active)
        here = pressures_bar[active]
        at = known or balance(circuit, part, here, widening=widening)
        slopes = jacobian(circuit, at)
        done = balanced(circuit, at, slopes, here)
        if done.any():
            done &= np.all(np.abs(newton_step(slopes, at)) <= STEP_BAR, axis=1)
        accepted[active[done]] = True
        slopes[:, diagonal, diagonal] += 1.0 / time_step[active][:, None]
        step_bar = newton_step(slopes, at)
        rows = np.flatnonzero(~done & np.isfinite(step_bar).all(axis=1))
        if not rows.size:
            break
        active, here, step_bar = active[rows], here[rows], step_bar[rows]
        moved = _moved(here, step_bar, np.ones(len(rows)))
        old = _norm(at)[rows]
        few = len(active) <= FEW
        ahead = balance(circuit, state.take(active), moved, widening=widening, slopes=few)
        new = _norm(ahead)
        good = new <= WORSE_BY * old
        known = ahead if few and np.all(good) else None
        growth = np.clip(old / np.maximum(new, 1e-300), 2.0, 1000.0)
        longer = np.minimum(time_step[active] * growth, LONGEST_TIME_STEP)
        time_step[active] = np.where(good, longer, time_step[active] / 4.0)
        pressures_bar[active[good]] = moved[good]
    return Found(pressures_bar=pressures_bar, accepted=accepted)
