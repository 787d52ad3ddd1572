"""Findings, refusals and what isn't in use, in words."""

from __future__ import annotations

from collections.abc import Mapping

from sheets.amounts import Amount, Finding
from sheets.machine.parts import Cylinder, HydraulicMotor
from sheets.procedure.answers import NotInUse
from sheets.procedure.conditions import Failure
from sheets.procedure.steps import Procedure
from sheets.wording.sentences import Sentences
from sheets.wording.steps import Speaker, capital


def say_finding(speaker: Speaker, finding: Finding) -> tuple[str, str]:
    """What is so, and what to do."""
    sentences = Sentences(speaker.machine.language, "findings.j2")
    values = _values(speaker, finding.data)
    subject = speaker.adjuster(finding.subject) if finding.subject in speaker.screws else finding.subject
    if "condition" in values:
        values["why"], values["advice"] = _why(sentences, values)
    values["subject"] = subject
    what = sentences.say(f"{finding.code}_what", **values)
    return capital(what), sentences.say(f"{finding.code}_fix", **values)


def say_failure(speaker: Speaker, failure: Failure) -> tuple[str, str]:
    """What fails in a state, and what to add to the machine."""
    values = _values(speaker, {**failure.data, "condition": failure.condition.value})
    return _why(Sentences(speaker.machine.language, "findings.j2"), values)


def _why(sentences: Sentences, values: dict[str, str]) -> tuple[str, str]:
    condition = values["condition"]
    return sentences.say(f"why_{condition}", **values), sentences.say(f"advice_{condition}", **values)


def _values(speaker: Speaker, data: Mapping[str, Amount | str]) -> dict[str, str]:
    """Figures and names as text; adjusters by what people call them."""
    values = {key: speaker.figures.amount(value) for key, value in data.items()}
    values["range_end"] = "yes" if _at_range_end(speaker, data) else ""
    values["stoppable"] = "yes" if _may_get_leave(speaker, str(data.get("part", ""))) else ""
    values["unknown_turn"] = "yes" if _turn_unknown(speaker, str(data.get("governs", ""))) else ""
    for key in ("part", "rated_part"):
        if _by_structure(speaker, str(data.get(key, "")), data.get("rating")):
            values[key] = speaker.structure(values[key])
    for key in ("other", "governs", "adjuster"):
        if values.get(key) in speaker.screws:
            values[key] = speaker.adjuster(values[key])
    return values


def _may_get_leave(speaker: Speaker, part: str) -> bool:
    """A cylinder that nothing drives by itself could be held at its stop, if the file gave leave."""
    cylinder = speaker.machine.parts.get(part)
    return isinstance(cylinder, Cylinder) and cylinder.weight_kn == 0.0 and cylinder.may_run_to_stop is None


def _turn_unknown(speaker: Speaker, adjuster: str) -> bool:
    return adjuster in speaker.screws and speaker.screws[adjuster].adjuster.raises == "not known"


def _by_structure(speaker: Speaker, part: str, rating: Amount | str | None) -> bool:
    """A rating below the one on an actuator's plate is what the structure around it stands."""
    actuator = speaker.machine.parts.get(part)
    return (
        isinstance(actuator, Cylinder | HydraulicMotor)
        and isinstance(rating, Amount)
        and rating.value < actuator.rating_bar - 1e-6
    )


def _at_range_end(speaker: Speaker, data: Mapping[str, Amount | str]) -> bool:
    """The adjuster that governs stands at the end of its range, to a hundredth of it."""
    governs, reading = str(data.get("governs", "")), data.get("reading")
    if governs not in speaker.screws or not isinstance(reading, Amount):
        return False
    highest_bar = speaker.screws[governs].adjuster.highest_bar
    return abs(reading.value - highest_bar) < 0.01 * highest_bar


def say_not_in_use(speaker: Speaker, procedure: Procedure, only: str = "") -> tuple[str, ...]:
    """Adjusters that no state answers to, each with the reason; ``only`` narrows it to one."""
    sentences = Sentences(speaker.machine.language, "findings.j2")
    return tuple(
        capital(_not_in_use(speaker, sentences, answer))
        for answer in procedure.search.answers.values()
        if isinstance(answer, NotInUse) and only in ("", answer.adjuster)
    )


def _not_in_use(speaker: Speaker, sentences: Sentences, answer: NotInUse) -> str:
    values = {"subject": speaker.adjuster(answer.adjuster), "states": str(answer.states)}
    if answer.guard is None:
        return sentences.say("not_in_use_by_law" if answer.by_law else "not_in_use_by_search", **values)
    return sentences.say(
        "not_in_use_but_guards",
        **values,
        pumps=", ".join(answer.guard.pumps),
        setting=speaker.figures.pressure(answer.guard.setting_bar),
        given_by=answer.guard.given_by,
    )
