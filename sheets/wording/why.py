"""Why an adjuster has the state that it has, or none: the nearest states and the condition that fails."""

from __future__ import annotations

from collections.abc import Iterator

from sheets.circuit.plant import Adjust, AtStop, MoveValve
from sheets.circuit.verdict import Verdict
from sheets.errors import InputError, Problem, quoted
from sheets.procedure.answers import NearMiss, NotFound, NotInUse, TestState
from sheets.procedure.changes import Change
from sheets.procedure.steps import Procedure
from sheets.wording.findings import say_failure, say_not_in_use
from sheets.wording.plain import FORMAT, Json, rounded
from sheets.wording.sentences import Sentences
from sheets.wording.steps import Speaker


def say_changes(speaker: Speaker, changes: tuple[Change, ...]) -> str:
    """Changes to the running rest state, in a few words."""
    texts = Sentences(speaker.machine.language, "texts.j2")
    return "; ".join(_say_change(speaker, texts, change) for change in changes) or texts.say("at_rest")


def _say_change(speaker: Speaker, texts: Sentences, change: Change) -> str:
    match change:
        case MoveValve(valve=valve, position=position):
            return texts.say("change_valve", valve=valve, position=position)
        case AtStop(actuator=actuator):
            return texts.say("change_at_stop", actuator=actuator, way=speaker.way(actuator))
        case Adjust(adjuster=adjuster, setting_bar=setting_bar):
            ahead = setting_bar < speaker.screws[adjuster].adjuster.highest_bar
            return texts.say(
                "change_ahead" if ahead else "change_adjuster",
                adjuster=speaker.adjuster(adjuster),
                setting=speaker.figures.pressure(setting_bar),
            )


def _answer(procedure: Procedure, adjuster: str) -> TestState | NotInUse | NotFound:
    answers = procedure.search.answers
    if adjuster not in answers:
        raise InputError(
            Problem(
                where="--why",
                what=f"There is no adjuster {quoted(adjuster)} that was searched for.",
                fix=f"Name one of: {', '.join(answers)}.",
            )
        )
    return answers[adjuster]


def why_data(speaker: Speaker, procedure: Procedure, adjuster: str) -> dict[str, Json]:
    """What `why_lines` says, with stable names. Raises InputError likewise."""
    answer = _answer(procedure, adjuster)
    found = answer if isinstance(answer, TestState) else None
    return {
        "format": FORMAT,
        "tag": speaker.machine.tag,
        "adjuster": adjuster,
        "in_use": not isinstance(answer, NotInUse),
        "found": found is not None,
        "verdict": answer.verdict.value if isinstance(answer, NotFound) else "established",
        "reading_bar": rounded(found.reading_bar) if found else None,
        "changes": [
            {
                "change": say_changes(speaker, (change,)),
                "condition": failure.condition.value,
                "without": speaker.otherwise(failure, adjuster),
            }
            for change, failure in (found.reasons if found else ())
        ],
        "near": [
            {
                "changes": [say_changes(speaker, (change,)) for change in miss.changes],
                "condition": miss.failure.condition.value,
                "what": say_failure(speaker, miss.failure)[0],
                "fix": say_failure(speaker, miss.failure)[1],
            }
            for miss in ([] if isinstance(answer, NotInUse) else answer.near_misses)
        ],
    }


def why_lines(speaker: Speaker, procedure: Procedure, adjuster: str) -> Iterator[str]:
    """The answer for one adjuster, its reasons, and the nearest states that don't serve.

    Raises InputError for an adjuster that wasn't searched for.
    """
    answer = _answer(procedure, adjuster)
    sentences = Sentences(speaker.machine.language, "findings.j2")
    match answer:
        case NotInUse():
            yield from say_not_in_use(speaker, procedure, only=adjuster)
            return
        case TestState():
            yield sentences.say(
                "why_found",
                subject=speaker.adjuster(adjuster),
                state=say_changes(speaker, answer.changes),
                reading=speaker.figures.pressure(answer.reading_bar),
            )
            for change, failure in answer.reasons:
                yield f"    {say_changes(speaker, (change,))}: {speaker.otherwise(failure, adjuster)}"
        case NotFound():
            yield sentences.say(
                "why_not_found",
                subject=speaker.adjuster(adjuster),
                verdict=answer.verdict.value,
                states=str(answer.states),
                limit=str(procedure.search.limit) if answer.verdict is Verdict.NOT_FOUND else "",
            )
    if answer.near_misses:
        yield ""
        yield sentences.say("why_near")
        # What a state lacks may be a change that wasn't tried yet: then nothing need be added to the machine.
        refuted = isinstance(answer, NotFound) and answer.verdict is Verdict.REFUTED
        for miss in answer.near_misses:
            yield from _miss(speaker, miss, advice=refuted)


def _miss(speaker: Speaker, miss: NearMiss, *, advice: bool) -> Iterator[str]:
    what, fix = say_failure(speaker, miss.failure)
    yield f"  {say_changes(speaker, miss.changes)}"
    yield f"      {miss.failure.condition.value}: {what}"
    if advice:
        yield f"      {fix}"
