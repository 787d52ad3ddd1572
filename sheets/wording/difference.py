"""What changes between two machine files: what is written, what is computed, what is done and read."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from difflib import SequenceMatcher
from typing import Final

from sheets.amounts import Severity
from sheets.errors import ExitStatus, gravest
from sheets.machine.leaves import Leaf, leaves
from sheets.machine.model import Machine, Units
from sheets.procedure.answers import NotFound, NotInUse, TestState
from sheets.procedure.steps import Procedure, Reading
from sheets.quantities import number
from sheets.targets.settings import Setting, Targets
from sheets.wording.findings import say_finding
from sheets.wording.plain import FORMAT, Json
from sheets.wording.plates import plate_value
from sheets.wording.steps import Speaker, SpokenStep
from sheets.wording.why import say_changes

_FILE_SECTIONS: Final = ("parts", "gauges", "nets", "energy")
SECTIONS: Final = (
    "machine",
    *_FILE_SECTIONS,
    "targets",
    "windows",
    "test states",
    "order",
    "steps",
    "readings",
)
"""In this order changes are told."""


@dataclass(frozen=True, kw_only=True)
class Side:
    """Everything about one of the two files. Both speakers print in the units of the new file."""

    machine: Machine
    targets: Targets
    procedure: Procedure
    speaker: Speaker
    spoken: Mapping[int, tuple[SpokenStep, ...]]
    status: int
    """What the file comes to by itself, as an exit status."""


@dataclass(frozen=True, kw_only=True)
class Change:
    """One thing that isn't the same in both."""

    section: str
    place: tuple[str, ...]
    old: str | None
    """None for what is new."""
    new: str | None
    """None for what is gone."""


@dataclass(frozen=True, kw_only=True)
class Differing:
    """Two machine files, and what isn't the same in them."""

    old: Side
    new: Side
    changes: tuple[Change, ...]

    @property
    def status(self) -> ExitStatus:
        """The gravest that either file comes to; a difference alone is good."""
        return gravest((ExitStatus(self.old.status), ExitStatus(self.new.status)))


def differences(old: Side, new: Side) -> Differing:
    """All changes, by section, in the order of the old file with what is new behind it."""
    units = new.machine.units
    found = [
        *file_changes(old.machine, new.machine, units),
        *_compare("targets", _targets(old, units), _targets(new, units)),
        *_compare("windows", _windows(old, units), _windows(new, units)),
        *_compare("test states", _states(old), _states(new)),
        *_compare("order", _order(old), _order(new)),
        *_steps(old, new, units),
    ]
    ranked = sorted(found, key=lambda change: SECTIONS.index(change.section))
    return Differing(old=old, new=new, changes=tuple(ranked))


Texts = dict[tuple[str, ...], str]


def _compare(section: str, old: Texts, new: Texts) -> Iterator[Change]:
    for place in dict.fromkeys((*old, *new)):
        if old.get(place) != new.get(place):
            yield Change(section=section, place=place, old=old.get(place), new=new.get(place))


# What is written


def file_changes(old: Machine, new: Machine, units: Units) -> Iterator[Change]:
    """What is written otherwise, in those units."""
    before, after = ({leaf.path: leaf for leaf in leaves(machine)} for machine in (old, new))
    there = [{path[:2] for path in side if path[0] in _FILE_SECTIONS} for side in (before, after)]
    told: set[tuple[str, ...]] = set()
    for path in dict.fromkeys((*before, *after)):
        section = path[0] if path[0] in _FILE_SECTIONS else "machine"
        place = path[1:] if section != "machine" else path
        whole = path[:2]
        if section != "machine" and (whole in there[0]) != (whole in there[1]):
            if whole not in told:
                told.add(whole)
                lost = whole in there[0]
                words = _called(old if lost else new, whole)
                yield Change(
                    section=section,
                    place=place[:1],
                    old=words if lost else None,
                    new=None if lost else words,
                )
            continue
        one, other = _texts(before.get(path), after.get(path), units, unordered=section == "nets")
        if one != other:
            yield Change(section=section, place=place, old=one, new=other)


def _texts(
    old: Leaf | None, new: Leaf | None, units: Units, *, unordered: bool
) -> tuple[str | None, str | None]:
    """Both values as text; with all digits where they would look alike and aren't."""
    texts = [_text(leaf, units, unordered=unordered) for leaf in (old, new)]
    if old and new and texts[0] == texts[1] and isinstance(old.value, float) and isinstance(new.value, float):
        exact = [number(old.value), number(new.value)]
        if exact[0] != exact[1]:
            texts = [f"{digits} {old.unit or ''}".rstrip() for digits in exact]
    return texts[0], texts[1]


def _text(leaf: Leaf | None, units: Units, *, unordered: bool) -> str | None:
    if leaf is None:
        return None
    if unordered and isinstance(leaf.value, tuple):
        leaf = Leaf(path=leaf.path, value=tuple(sorted(leaf.value)), unit=None)
    return plate_value(leaf, units)


def _called(machine: Machine, whole: tuple[str, ...]) -> str:
    section, id_ = whole
    if section == "nets":
        return ", ".join(machine.nets[id_])
    sections: dict[str, Mapping[str, object]] = {
        "parts": machine.parts,
        "gauges": machine.gauges,
        "energy": machine.energy,
    }
    thing = sections[section][id_]
    where = getattr(thing, "where", "") or getattr(getattr(thing, "isolator", None), "where", "")
    return f"{getattr(thing, 'kind', '')}, {where}"


# What is computed


def _pressure(value_bar: float, units: Units) -> str:
    return plate_value(Leaf(path=(), value=value_bar, unit="bar"), units)


def _window(low_bar: float, high_bar: float, units: Units) -> str:
    return f"{_pressure(low_bar, units)} to {_pressure(high_bar, units)}"


def _targets(side: Side, units: Units) -> Texts:
    found: Texts = {}
    for id_, setting in side.targets.settings.items():
        found[id_, "target"] = _pressure(setting.target_bar, units)
        found[id_, "accepted settings"] = _window(setting.low_bar, setting.high_bar, units)
        found[id_, "origin"] = _origin(setting)
    return found


def _origin(setting: Setting) -> str:
    return f"{setting.origin.value}, {setting.given_by}" if setting.given_by else setting.origin.value


def _windows(side: Side, units: Units) -> Texts:
    found: Texts = {}
    for id_, state in side.procedure.search.found().items():
        gauge = state.gauge
        found[id_, "gauge"] = f"{gauge.gauge} at {gauge.test_point}"
        found[id_, "target reading"] = _pressure(gauge.target_bar, units)
        found[id_, "accept"] = _window(gauge.window.low_bar, gauge.window.high_bar, units)
        found[id_, "never exceed"] = _pressure(gauge.never_exceed_bar, units)
    return found


def _states(side: Side) -> Texts:
    return {(id_,): _state(side, answer) for id_, answer in side.procedure.search.answers.items()}


def _state(side: Side, answer: TestState | NotInUse | NotFound) -> str:
    match answer:
        case NotInUse():
            return "protects only" if answer.guard else "not in use"
        case NotFound():
            return f"{answer.verdict.value}: {answer.failure.condition.value}"
        case TestState():
            return say_changes(side.speaker, answer.changes)


def _order(side: Side) -> Texts:
    sequence = side.procedure.order.sequence
    return {("settings",): ", ".join(map(side.speaker.adjuster, sequence)) if sequence else "none"}


# What is done and read


def _stages(side: Side) -> dict[str, tuple[SpokenStep, ...]]:
    found: dict[str, tuple[SpokenStep, ...]] = {}
    for place, stage in enumerate(side.procedure.stages):
        name = stage.kind.value.replace("_", " ") + (f" {stage.adjuster}" if stage.adjuster else "")
        again = sum(1 for other in found if other.split(" #")[0] == name)
        found[f"{name} #{again + 1}" if again else name] = side.spoken[place]
    return found


def _steps(old: Side, new: Side, units: Units) -> Iterator[Change]:
    before, after = _stages(old), _stages(new)
    for name in dict.fromkeys((*before, *after)):
        yield from _stage(name, before.get(name, ()), after.get(name, ()), units)


def _stage(name: str, old: Sequence[SpokenStep], new: Sequence[SpokenStep], units: Units) -> Iterator[Change]:
    keys = [[(one.step.kind, one.step.subject) for one in side] for side in (old, new)]
    matcher = SequenceMatcher(None, keys[0], keys[1], autojunk=False)
    for tag, old_from, old_to, new_from, new_to in matcher.get_opcodes():
        if tag == "equal":
            for one, other in zip(old[old_from:old_to], new[new_from:new_to], strict=True):
                yield from _same_step(name, one, other, units)
            continue
        for one in old[old_from:old_to]:
            yield Change(section="steps", place=(name,), old=one.order, new=None)
        for other in new[new_from:new_to]:
            yield Change(section="steps", place=(name,), old=None, new=other.order)


def _same_step(name: str, old: SpokenStep, new: SpokenStep, units: Units) -> Iterator[Change]:
    if old.order != new.order:
        yield Change(section="steps", place=(name,), old=old.order, new=new.order)
    lines = [_told(one) for one in (old, new)]
    if lines[0] != lines[1]:
        gone = " ".join(line for line in lines[0] if line not in lines[1])
        come = " ".join(line for line in lines[1] if line not in lines[0])
        yield Change(section="steps", place=(name, new.order), old=gone or None, new=come or None)
    readings = [_reading(one.step.reading, units) for one in (old, new)]
    if readings[0] != readings[1]:
        yield Change(section="readings", place=(name, new.order), old=readings[0], new=readings[1])


def _told(spoken: SpokenStep) -> tuple[str, ...]:
    """Warnings and light lines of a step."""
    warned = (
        line
        for warning in spoken.warnings
        for line in (f"{warning.signal}: {warning.hazard}", *warning.lines)
    )
    return (*warned, *spoken.lines)


def _reading(reading: Reading | None, units: Units) -> str | None:
    if reading is None:
        return None
    return (
        f"{reading.gauge} at {reading.test_point} {_pressure(reading.expected_bar, units)}, "
        f"{_window(reading.low_bar, reading.high_bar, units)}, "
        f"never above {_pressure(reading.never_exceed_bar, units)}"
    )


# How it is told


def difference_lines(differing: Differing) -> Iterator[str]:
    """One line a change under its section, or that there is none; then what stands against each file."""
    section = ""
    for change in differing.changes:
        if change.section != section:
            if section:
                yield ""
            section = change.section
            yield section
        yield change_line(change)
    if not section:
        yield "Nothing differs: what is written, computed, done and read is the same."
    for name, side in (("old", differing.old), ("new", differing.new)):
        for one in (*side.targets.findings, *side.procedure.findings):
            if one.severity in (Severity.REFUSED, Severity.NOT_ESTABLISHED):
                what, fix = say_finding(side.speaker, one)
                yield ""
                yield f"{name} file, {one.severity.value}: {what}"
                yield f"    {fix}"


def change_line(change: Change) -> str:
    """One change, without its section."""
    place = ", ".join(change.place)
    if change.old is None:
        return f"  + {place}: {change.new}"
    if change.new is None:
        return f"  - {place}: {change.old}"
    return f"    {place}: {change.old} → {change.new}"


def difference_json(differing: Differing) -> dict[str, Json]:
    """The changes as data."""
    return {
        "format": FORMAT,
        **{
            name: {
                "tag": side.machine.tag,
                "dated": side.machine.dated.isoformat(),
                "status": side.status,
            }
            for name, side in (("old", differing.old), ("new", differing.new))
        },
        "changes": [
            {
                "section": change.section,
                "place": list[Json](change.place),
                "old": change.old,
                "new": change.new,
            }
            for change in differing.changes
        ],
    }
