"""The engineer's page: states, reasons, order, derivations, and what was and wasn't tried."""

from __future__ import annotations

from sheets.amounts import Derivation
from sheets.pages.compose.matter import Matter
from sheets.pages.document import Block, Heading, Paragraph, Section, SheetKind, Table
from sheets.procedure.answers import TestState
from sheets.procedure.order import EdgeKind
from sheets.wording.findings import say_not_in_use
from sheets.wording.why import say_changes


def engineer(matter: Matter) -> Section:
    """For the one who checks; nothing here is needed at the machine."""
    procedure = matter.procedure
    found = procedure.search.found()
    blocks: list[Block] = [_states(matter), _reasons(matter)]
    blocks.append(Heading(text=matter.text("order_title"), level=2))
    blocks += [Paragraph(text=text) for text in _order(matter)]
    unused = say_not_in_use(matter.speaker, procedure)
    if unused:
        blocks.append(Heading(text=matter.text("not_in_use_title"), level=2))
        blocks += [Paragraph(text=text) for text in unused]
    blocks += [_derivations(matter, found)]
    acting = sum(bool(step.actions) for stage in procedure.stages for step in stage.steps)
    blocks += [
        Heading(text=matter.text("account_title"), level=2),
        Paragraph(text=matter.text("account_tried", steps=str(acting), starts=str(len(matter.replay.runs)))),
        Paragraph(text=matter.text("account_faults")),
        Paragraph(text=matter.text("account_not")),
        Paragraph(text=matter.text("account_policy")),
    ]
    return Section(
        kind=SheetKind.ENGINEER,
        bookmark=matter.text("engineer_title"),
        title=matter.text("engineer_title"),
        subject=matter.machine.tag,
        lines=(matter.text("engineer_line"),),
        banner=None,
        blocks=tuple(blocks),
    )


def _states(matter: Matter) -> Table:
    found, figures = matter.procedure.search.found(), matter.figures
    rows = []
    for id_ in matter.procedure.order.sequence:
        state = found[id_]
        setting = matter.targets.settings[id_]
        rows.append(
            (
                matter.speaker.adjuster(id_),
                say_changes(matter.speaker, state.changes),
                f"{figures.pressure(setting.target_bar)} ({setting.origin.value}"
                + (f": {setting.given_by})" if setting.given_by else ")"),
                figures.pressure(state.reading_bar),
                figures.flow(state.flow_lpm) if state.flow_lpm > 0.0 else "–",
                f"{state.gauge.accuracy_ratio:.1f}:1",
            )
        )
    return Table(
        title=matter.text("states_title"),
        light=matter.text("states_light", states=str(matter.procedure.search.states)),
        head=("adjuster", "state", "setting", "reads", "flow", "accuracy ratio"),
        rows=tuple(rows),
        shares=(0.18, 0.28, 0.22, 0.10, 0.11, 0.11),
    )


def _reasons(matter: Matter) -> Table:
    found = matter.procedure.search.found()
    rows = [
        (
            matter.speaker.adjuster(id_),
            say_changes(matter.speaker, (change,)),
            matter.speaker.otherwise(failure, id_),
        )
        for id_ in matter.procedure.order.sequence
        for change, failure in found[id_].reasons
    ]
    return Table(
        title=matter.text("reasons_title"),
        head=("adjuster", "change", "without it"),
        rows=tuple(rows),
        shares=(0.22, 0.30, 0.48),
    )


def _order(matter: Matter) -> list[str]:
    speaker, order = matter.speaker, matter.procedure.order
    lines = [
        matter.text(
            "edge_away" if edge.kind is EdgeKind.NEEDS_AWAY else "edge_shifts",
            before=speaker.adjuster(edge.before),
            after=speaker.adjuster(edge.after),
        )
        for edge in order.edges
    ]
    for tie in order.ties:
        members = [speaker.adjuster(id_) for id_ in order.sequence if id_ in tie]
        lines.append(matter.text("tie", members=" and ".join(members)))
    return lines


def _derivations(matter: Matter, found: dict[str, TestState]) -> Table:
    rows = [
        (
            matter.speaker.adjuster(id_),
            derivation.result_name,
            _inputs(matter, derivation),
            matter.figures.amount(derivation.result),
        )
        for id_ in found
        for derivation in matter.targets.settings[id_].derivations
    ]
    return Table(
        title=matter.text("derivations_title"),
        head=("adjuster", "figure", "from", "result"),
        rows=tuple(rows),
        shares=(0.20, 0.20, 0.48, 0.12),
    )


def _inputs(matter: Matter, derivation: Derivation) -> str:
    inputs = "; ".join(
        f"{symbol} {matter.figures.amount(amount)} ({source})" for symbol, amount, source in derivation.inputs
    )
    return f"{derivation.formula}. {inputs}"
