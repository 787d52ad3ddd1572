"""Orders and light lines of every step, in the language of the machine file."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass

from sheets.amounts import Amount
from sheets.circuit.model import Circuit
from sheets.circuit.plant import MoveValve
from sheets.hazards.assess import Hazard, HazardKind, Signal
from sheets.machine.actuators import StopRun
from sheets.machine.model import Machine
from sheets.machine.parts import Cylinder, DialGauge, DirectionalValve, ElectricMotor, HydraulicMotor
from sheets.machine.screws import screws_of
from sheets.machine.site import Policies
from sheets.procedure.answers import TestState
from sheets.procedure.conditions import Condition, Failure
from sheets.procedure.steps import Reading, Stage, StageKind, Step, StepKind
from sheets.quantities import number
from sheets.wording.figures import Figures
from sheets.wording.sentences import Sentences
from sheets.wording.turning import LARGEST, coarse_until_bar, step_of_turn


def capital(text: str) -> str:
    """The text with a capital first letter; the rest as it stands."""
    return text[:1].upper() + text[1:]


@dataclass(frozen=True, kw_only=True)
class SpokenWarning:
    """A hazard in words."""

    signal: Signal
    hazard: str
    lines: tuple[str, ...]


@dataclass(frozen=True, kw_only=True)
class SpokenStep:
    """One step in words."""

    step: Step
    order: str
    lines: tuple[str, ...]
    warnings: tuple[SpokenWarning, ...]


class Speaker:
    """Says steps, hazards and failures of one machine."""

    def __init__(
        self, machine: Machine, circuit: Circuit, policies: Policies, found: Mapping[str, TestState]
    ) -> None:
        self.machine = machine
        self.circuit = circuit
        self.policies = policies
        self.found = found
        self.figures = Figures(machine.units)
        self.screws = screws_of(machine)
        self._orders = Sentences(machine.language, "steps.j2")
        self._lines = Sentences(machine.language, "lines.j2")
        self._names = Sentences(machine.language, "names.j2")
        self._hazards = Sentences(machine.language, "hazards.j2")

    # What things are called

    def part(self, id_: str) -> str:
        """``bleed valve BV1``: what people call it, and its id."""
        part = self.machine.parts[id_]
        return f"{part.name or part.kind} {id_}"

    def adjuster(self, id_: str) -> str:
        """``RV1``, or ``compensator of PU1``."""
        screw = self.screws[id_]
        return self._names.say("adjuster", name=screw.name, part=screw.part)

    def way(self, id_: str) -> str:
        """``extended``: how a cylinder stands at the stop to which it may be run; empty without leave."""
        leave = self._leave(id_)
        return leave.stop if leave is not None else ""

    def _leave(self, id_: str) -> StopRun | None:
        part = self.machine.parts.get(id_)
        return part.may_run_to_stop if isinstance(part, Cylinder) else None

    def structure(self, id_: str) -> str:
        """``the structure at CY1``: what an actuator works on."""
        return self._names.say("structure", part=id_)

    def set_title(self, id_: str) -> str:
        screw = self.screws[id_]
        return self._names.say("set_title", name=screw.name, kind=self.machine.parts[screw.part].kind)

    def tag_kind(self, id_: str) -> str:
        screw = self.screws[id_]
        return self._names.say("tag_kind", name=screw.name, kind=self.machine.parts[screw.part].kind)

    def turning(self, id_: str, *, raising: bool) -> str:
        """Direction in which to turn."""
        raises = self.screws[id_].adjuster.raises
        if raises == "not known":
            return self._names.say("unknown_direction")
        other = {"clockwise": "counterclockwise", "counterclockwise": "clockwise"}
        return self._names.say(raises if raising else other[raises])

    @property
    def held_valve(self) -> str:
        """The lever valve that somebody has to hold in a test state; empty where none is."""
        for state in self.found.values():
            for change in state.changes:
                part = self.machine.parts.get(change.valve) if isinstance(change, MoveValve) else None
                if isinstance(part, DirectionalValve) and part.operated_by == "lever":
                    return change.valve if isinstance(change, MoveValve) else ""
        return ""

    @property
    def stop(self) -> str:
        """The stop a second person stays at: within reach of a lever that is held, else the first."""
        places = self.machine.controls.emergency_stop or self.machine.controls.stop
        held = self.held_valve
        where = self.machine.parts[held].where if held else ""
        return next((place.name for place in places if place.where == where), places[0].name)

    @property
    def stop_at_lever(self) -> bool:
        """Whether one person can hold the lever and reach the stop."""
        held = self.held_valve
        places = self.machine.controls.emergency_stop or self.machine.controls.stop
        return bool(held) and any(place.where == self.machine.parts[held].where for place in places)

    # Steps

    def stage(self, stage: Stage, hazards: Mapping[int, tuple[Hazard, ...]]) -> tuple[SpokenStep, ...]:
        """All steps of a stage in words, with the hazards by step number."""
        return tuple(
            SpokenStep(
                step=step,
                order=self._order(step),
                lines=self._light(stage, step),
                warnings=tuple(self.warning(hazard) for hazard in hazards.get(place, ())),
            )
            for place, step in enumerate(stage.steps)
        )

    def warning(self, hazard: Hazard) -> SpokenWarning:
        values = {key: self.figures.amount(value) for key, value in hazard.data.items()}
        most = hazard.data.get("pressure")
        if isinstance(most, Amount):
            values["pressure"] = self.figures.pressure(most.value, up=True)
        values |= {"stop": self.stop, "high": self.oil_window()[1]}
        if hazard.kind is HazardKind.HOT_OIL:
            values["limit"] = self.oil_limit()
        return SpokenWarning(
            signal=hazard.signal,
            hazard=capital(self._hazards.say(f"{hazard.kind.value}_hazard", **values)),
            lines=tuple(self._hazards.say(f"{hazard.kind.value}_lines", **values).splitlines()),
        )

    def otherwise(self, failure: Failure, adjuster: str = "") -> str:
        """What happens if a change is left out; ``adjuster`` is the one that is read or set."""
        setting = self.adjuster(adjuster) if adjuster else ""
        return self._lines.say(
            f"else_{failure.condition.value}", **self.failure_values(failure), setting=setting
        )

    def failure_values(self, failure: Failure) -> dict[str, str]:
        """Figures and names of a failed condition as text."""
        values = {key: self.figures.amount(value) for key, value in failure.data.items()}
        if failure.condition in (Condition.STILL, Condition.BARRED) and "part" in failure.data:
            part = self.machine.parts[str(failure.data["part"])]
            values["moves"] = str(getattr(part, "moves", ""))
        if values.get("governs"):
            values["governs"] = self.adjuster(values["governs"])
        return values

    def window(self, reading: Reading) -> str:
        """``172 to 180 bar``."""
        low = self.figures.digits(reading.low_bar, reading.graduation_bar)
        high = self.figures.digits(reading.high_bar, reading.graduation_bar)
        return self._names.say("window", low=low, high=high, unit=self.figures.pressure_unit)

    def _values(self, step: Step) -> dict[str, str]:
        """Everything that a sentence may want to name."""
        machine, data = self.machine, step.data
        values = {key: self.figures.amount(value) for key, value in data.items()}
        hides = data.get("hides")
        if isinstance(hides, Amount):
            values["hides"] = self.figures.pressure(hides.value, up=True)
        gauge = step.reading.gauge if step.reading else ""
        values |= {"subject": step.subject, "stop": self.stop, "gauge": gauge}
        values |= self._run_values(str(data.get("actuator", step.subject)))
        part = machine.parts.get(step.subject)
        if part is not None:
            values |= {"label": self.part(step.subject), "where": part.where}
        if isinstance(part, Cylinder | HydraulicMotor):
            values["moves"] = part.moves
        if isinstance(part, DirectionalValve):
            values["solenoid"] = self._solenoid(step.subject, part)
            values["solenoids"] = ", ".join(dict.fromkeys(part.solenoids.values()))
        if isinstance(part, ElectricMotor):
            controls, stopping = machine.controls, step.kind is StepKind.PRESS_STOP
            name, places = ("stop", controls.stop) if stopping else ("start", controls.start)
            values[name] = f"{places[0].name}, {places[0].where}"
            values["seconds"] = self.figures.amount(Amount(value=part.coasts_for_s, quantity="time_s"))
        supply = machine.energy.get(step.subject)
        if supply is not None:
            values |= {
                "plate": supply.isolator.plate,
                "action": supply.isolator.action,
                "where": supply.isolator.where,
                "lock": supply.isolator.lock,
                "voltage": self.figures.amount(Amount(value=supply.voltage_v, quantity="voltage_v")),
                "feeds": ", ".join(machine.fed_through(supply.isolator)),
            }
        screw = self.screws.get(step.subject)
        if screw is not None:
            values |= {
                "adjuster": self.adjuster(step.subject),
                "key": screw.adjuster.key,
                "tool": screw.adjuster.lock_nut,
            }
        return values

    def _run_values(self, actuator: str) -> dict[str, str]:
        """What the file says of a cylinder that may run to its stop."""
        part, leave = self.machine.parts.get(actuator), self._leave(actuator)
        if not isinstance(part, Cylinder) or leave is None:
            return {}
        return {
            "moves": part.moves,
            "way": leave.stop,
            "guard": leave.guarded_by,
            "stand": leave.stand_at,
            "before": leave.before_service.rstrip("."),
        }

    def _solenoid(self, valve: str, part: DirectionalValve) -> str:
        """Solenoid that the test states hold on; empty for a lever."""
        held = [
            change.position
            for state in self.found.values()
            for change in state.changes
            if isinstance(change, MoveValve) and change.valve == valve
        ]
        return part.solenoids.get(held[0], "") if held else ""

    def _order(self, step: Step) -> str:
        values = self._values(step)
        if step.kind is StepKind.NOT_REACHED:
            values["adjuster"] = self.adjuster(step.subject)
        if step.kind is StepKind.WARM_OIL:
            low, high = self.oil_window()
            values |= {"low": low, "high": high}
        if step.kind is StepKind.RUN_AHEAD:
            values["turns"] = self._turns(step)
        if step.kind is StepKind.LEAVE_ALONE:
            values["window"] = self._accepted(step.subject)
        if step.kind is StepKind.COME_UP and step.reading:
            values["target"] = f"{self.target_digits(step.subject)} {self.figures.pressure_unit}"
            values["steps"], values["near"] = self._turn_steps(step)
        if step.kind is StepKind.TURN_BELOW and step.reading:
            choice = self.found[step.subject].gauge
            values["below"] = self.figures.reading(choice.window.low_bar, choice.graduation_bar)
        return self._orders.say(step.kind.value, **values)

    def target_digits(self, adjuster: str) -> str:
        """Target reading without unit: to half a division of a dial, to the resolution of a digital gauge."""
        choice = self.found[adjuster].gauge
        dial = isinstance(self.machine.gauges[choice.gauge], DialGauge)
        return self.figures.digits(choice.target_bar, choice.graduation_bar, half=dial)

    def oil_window(self) -> tuple[str, str]:
        """Oil temperatures between which settings are made."""
        return self.figures.inside_c(*self._oil_window_c())

    def _oil_window_c(self) -> tuple[float, float]:
        return self.machine.fluid.setting_window_c(
            lowest_c=self.policies.lowest_setting_temperature_c,
            highest_c=self.policies.highest_setting_temperature_c,
        )

    def oil_limit(self) -> str:
        """Oil temperature above which the work stops, never printed higher than it is."""
        return self.figures.limit_c(self.machine.fluid.limit_temperature_c)

    def _turns_of(self, adjuster: str, change: Amount | str | None) -> str:
        """Turns that a change takes, up to the next eighth and one eighth more; empty if nobody knows."""
        per_turn_bar = self.screws[adjuster].adjuster.per_turn_bar
        if per_turn_bar is None or not isinstance(change, Amount):
            return ""
        return number((math.ceil(8.0 * change.value / per_turn_bar) + 1) / 8.0, decimals=2)

    def _turns(self, step: Step) -> str:
        """Turns that bring an adjuster from where it stands to just ahead, in eighths."""
        per_turn_bar, change = self.screws[step.subject].adjuster.per_turn_bar, step.data["change"]
        if per_turn_bar is None or isinstance(change, str):
            raise ValueError(f"{step.subject}: its change per turn isn't known")
        return number(change.value / per_turn_bar, step=0.125)

    def _accepted(self, adjuster: str) -> str:
        choice = self.found[adjuster].gauge
        return self._names.say(
            "window",
            low=self.figures.digits(choice.window.low_bar, choice.graduation_bar),
            high=self.figures.digits(choice.window.high_bar, choice.graduation_bar),
            unit=self.figures.pressure_unit,
        )

    # Light lines

    def _light(self, stage: Stage, step: Step) -> tuple[str, ...]:
        values = self._values(step)
        lines: list[str] = []
        say = self._lines.say
        match step.kind:
            case StepKind.VERIFY_DEAD:
                verify = self.machine.energy[step.subject].verify
                lines.append(f"{capital(verify)}.")
            case StepKind.SET_VALVE | StepKind.CHECK_VALVE:
                lines.append(f"{capital(values['where'])}.")
                if step.data.get("vent"):
                    lines.append(say("close_vent"))
                if values.get("solenoids"):
                    lines.append(
                        say("not_visible", position=values["position"], solenoids=values["solenoids"])
                    )
            case StepKind.FIT_GAUGE | StepKind.REMOVE_GAUGE:
                where = self.machine.parts[str(step.data["test_point"])].where
                lines.append(say(f"{step.kind.value}_line", where=capital(where)))
            case StepKind.NOT_REACHED:
                hidden_by = ", ".join(self.adjuster(id_) for id_ in str(step.data["hidden_by"]).split(", "))
                lines.append(say("not_reached_line", hidden_by=capital(hidden_by)))
            case StepKind.BACK_OUT | StepKind.RUN_IN:
                direction = self.turning(step.subject, raising=step.kind is StepKind.RUN_IN)
                lines.append(say("out_line", direction=direction, key=values["key"]))
                lines.append(say("loosen") if values["tool"] else "")
            case StepKind.RUN_AHEAD:
                direction = self.turning(step.subject, raising=True)
                lines.append(say("out_line", direction=direction, key=values["key"]))
                of = self.adjuster(str(step.data["of"]))
                lines.append(say("ahead_line", setting=values["setting"], of=of))
            case StepKind.TURN_BELOW:
                direction = self.turning(step.subject, raising=False)
                loosen = f" {say('loosen')}" if values["tool"] else ""
                lines.append(f"{direction}, {values['key']}.{loosen}")
                holder = str(step.data["held_by"])
                if holder:
                    held_by = self.adjuster(holder)
                    turns = self._turns_of(step.subject, step.data.get("ahead"))
                    lines.append(say("held_at_first", gauge=values["gauge"], held_by=held_by, turns=turns))
                else:
                    lines.append(say("wrong_screw", gauge=values["gauge"]))
            case StepKind.COME_UP:
                lines.extend(self._come_up(stage, step, values))
            case StepKind.RUN_TO_STOP:
                lines.append(say("runs_until_held", way=values["way"], speed=values["speed"]))
                lines.append(say("stops_short", stop=self.stop))
            case StepKind.HOLD_RUNNING:
                lines.append(say("runs_while_raised", way=values["way"], speed=values["speed"]))
            case StepKind.RAISE_TO_STOP:
                direction = self.turning(step.subject, raising=True)
                key, gauge = values["key"], values["gauge"]
                lines.append(say("raise_to_stop_line", direction=direction, key=key, gauge=gauge))
                lines.append(say("raise_fails"))
                lines.append(say("stops_short", stop=self.stop))
            case StepKind.LOCK_NUT:
                if values["tool"]:
                    lines.append(say("lock_nut_line", tool=values["tool"]))
            case StepKind.WARM_OIL:
                lines.append(say("warm_oil_line", limit=self.oil_limit()))
                limit_c = self.machine.fluid.limit_temperature_c
                low, high, limit = self.figures.oil_second(*self._oil_window_c(), limit_c)
                lines.append(say("warm_oil_second", low=low, high=high, limit=limit) if low else "")
            case StepKind.HOLD_VALVE if values.get("solenoid"):
                lines.append(say("solenoid_line"))
            case _:
                name = f"{step.kind.value}_line"
                if self._lines.has(name):
                    lines.append(say(name, **{**values, "where": capital(values.get("where", ""))}))
        if step.reason is not None:
            governs = step.reading.adjuster if step.reading else ""
            lines.append(self.otherwise(step.reason, stage.adjuster or governs))
        lines.extend(self._expected(stage, step, values))
        return tuple(line for line in lines if line)

    def _come_up(self, stage: Stage, step: Step, values: Mapping[str, str]) -> list[str]:
        direction = self.turning(step.subject, raising=True)
        lines = [self._lines.say("come_up_line", direction=direction, key=values["key"])]
        if step.data.get("from_out"):
            lines.append(self._lines.say("from_out", gauge=values["gauge"]))
        elif not any(other.kind is StepKind.TURN_BELOW for other in stage.steps):
            lines.append(self._lines.say("wrong_screw", gauge=values["gauge"]))
        per_turn_bar = self.screws[step.subject].adjuster.per_turn_bar
        if per_turn_bar is None:
            lines.append(self._lines.say("step_change_unknown", gauge=values["gauge"]))
        elif self._step_of_turn(step.subject) < LARGEST:
            change = self.figures.pressure(LARGEST * per_turn_bar)
            lines.append(self._lines.say("step_change", change=change))
        return lines

    def _step_of_turn(self, adjuster: str) -> float:
        return step_of_turn(
            per_turn_bar=self.screws[adjuster].adjuster.per_turn_bar,
            half_window_bar=self.found[adjuster].gauge.window.half_width_bar,
        )

    def _turn_steps(self, step: Step) -> tuple[str, str]:
        """By what a screw comes up to its target; and from where, if far below it quarter turns will do."""
        share, choice = self._step_of_turn(step.subject), self.found[step.subject].gauge
        steps = self._names.say("turn_steps", step=f"{share:g}")
        per_turn_bar = self.screws[step.subject].adjuster.per_turn_bar
        if not step.data.get("from_out") or per_turn_bar is None or share == LARGEST:
            return steps, ""
        until_bar = coarse_until_bar(
            low_bar=choice.window.low_bar, per_turn_bar=per_turn_bar, graduation_bar=choice.graduation_bar
        )
        if until_bar <= 0.0:
            return steps, ""
        short = self._names.say("turn_steps", step=f"{share:g}", short="yes")
        return short, self.figures.reading(until_bar, choice.graduation_bar)

    def _expected(self, stage: Stage, step: Step, values: Mapping[str, str]) -> list[str]:
        """Reading after the step, and when to stop."""
        reading = step.reading
        if reading is None:
            return []
        say, figures = self._lines.say, self.figures
        low = figures.digits(reading.low_bar, reading.graduation_bar)
        high = figures.reading(reading.high_bar, reading.graduation_bar)
        limit = figures.reading(reading.stop_above_bar, reading.graduation_bar)
        shows = (
            say("expect_below", gauge=reading.gauge, high=high)
            if reading.low_bar <= 0.0
            else say("expect", gauge=reading.gauge, low=low, high=high)
        )
        lines: list[str] = []
        match step.kind:
            case StepKind.READ:
                least = figures.digits(reading.band_low_bar, reading.graduation_bar)
                lines.append(say("find_cause", low=least, high=limit))
            case StepKind.READ_AGAIN if stage.kind is StageKind.SET:
                lines.append(say("as_left_window", low=low, high=high))
            case StepKind.CLOSE_GRADUALLY:
                lines.append(shows)
                lines.append(say("open_if_above", gauge=reading.gauge, limit=limit, label=values["subject"]))
            case StepKind.COME_UP | StepKind.RAISE_TO_STOP:
                lines.append(say("stop_above", gauge=reading.gauge, limit=limit, stop=self.stop))
            case StepKind.RUN_TO_STOP:
                lines.append(f"{say('at_its_stop', shows=shows)} {say('outside', stop=self.stop)}")
            case StepKind.HOLD_RUNNING:
                lines.append(f"{shows} {say('above', stop=self.stop)}")
            case StepKind.START | StepKind.HOLD_VALVE:
                lines.append(f"{shows} {say('outside', stop=self.stop)}")
            case StepKind.LET_GO:
                label, position = values["label"], values["position"]
                lines.append(say("returns_to", label=capital(label), position=position))
                lines.append(f"{shows} {say('above', stop=self.stop)}")
            case StepKind.LOCK_NUT | StepKind.TURN_BELOW:
                pass
            case _:
                lines.append(shows)
        for band in step.bands:
            lines.append(
                say(
                    "expect",
                    gauge=band.gauge,
                    low=figures.digits(band.low_bar, band.graduation_bar),
                    high=figures.reading(band.high_bar, band.graduation_bar),
                )
            )
        return lines
