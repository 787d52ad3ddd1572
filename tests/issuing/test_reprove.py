"""Which packs would change under the present engine: windows, verdicts and steps that differ."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import pytest
from works import DOCUMENT, Works

from sheets import ENGINE, pipeline
from sheets.errors import ExitStatus, InputError, NotEstablishedError, Problem, RefusedError
from sheets.pages.compose.matter import Matter
from sheets.pipeline import reproving
from sheets.pipeline.printing import Content, whole_content
from sheets.pipeline.reproving import Reproof, Reproofs, Reproved
from sheets.procedure import gauges, rig
from sheets.seal.canonical import digest


def reproved(works: Works, given: str | None = None) -> Reproofs:
    heard: list[str] = []
    made = pipeline.reprove(works.register, given=given, telling=heard.append)
    assert heard == [one.revision.document for one in made.packs]
    return made


def only(made: Reproofs) -> Reproved:
    (one,) = made.packs
    return one


def text(made: Reproofs) -> str:
    return "\n".join(pipeline.reprove_text(made))


def test_the_same_engine_makes_the_same(issued: Works) -> None:
    """Although the machine file beside it has changed since: what counts is what the register kept."""
    before = issued.files()
    made = reproved(issued, "PU-03")
    assert (only(made).reproof, made.status) == (Reproof.SAME, ExitStatus.GOOD)
    assert only(made).lines == ()
    assert f"{DOCUMENT} revision 1, machine PU-03" in text(made)
    assert issued.files() == before


def test_another_number_alone_is_no_difference(issued: Works, monkeypatch: pytest.MonkeyPatch) -> None:
    def newer(matter: Matter) -> Content:
        said = whole_content(matter)
        written = f'"engine":"{ENGINE}"'.encode()
        assert said.data.count(written) == 1
        data = said.data.replace(written, f'"engine":"{ENGINE + 1}"'.encode())
        return replace(said, data=data, digest=digest(data))

    monkeypatch.setattr(reproving, "whole_content", newer)
    one = only(reproved(issued))
    assert one.reproof is Reproof.SAME
    assert one.revision.issue is not None
    assert one.digest != one.revision.issue.content_digest


def test_windows_states_and_steps_that_differ_are_told(
    issued: Works, monkeypatch: pytest.MonkeyPatch
) -> None:
    """An engine that allows 20 bar less, and looks for a cause sooner: a row, and a step as found, differ."""
    real: Callable[..., float] = gauges.never_exceed_bar
    (row, *_) = [
        row for one in issued.revisions() if one.issue and one.issue.kept for row in one.issue.kept.rows
    ]
    monkeypatch.setattr(gauges, "never_exceed_bar", lambda **given: real(**given) - 20)
    monkeypatch.setattr(rig, "AS_FOUND_SHARE", rig.AS_FOUND_SHARE / 2)
    ratio: Callable[..., float] = gauges.accuracy_ratio
    monkeypatch.setattr(gauges, "accuracy_ratio", lambda **given: 2 * ratio(**given))
    before = issued.files()
    made = reproved(issued, DOCUMENT)
    one = only(made)
    assert (one.reproof, made.status) == (Reproof.DIFFERS, ExitStatus.REFUSED)
    now = int(row.never_exceed) - 20
    assert f"never exceed {row.called}: {row.never_exceed} {row.unit} → {now} {row.unit}" in one.lines
    assert any(line.startswith(("step of '", "step new in '")) for line in one.lines)
    states = [line for line in one.lines if line.startswith("Test states found, ")]
    assert [line.split(": ")[0] for line in states] == ["Test states found, before", "Test states found, now"]
    assert "Record of settings PU-03" in one.sheets
    assert one.revision.issue is not None
    assert one.digest not in ("", one.revision.issue.content_digest)
    assert "Nothing was replaced" in text(made)
    assert issued.files() == before
    (pack,) = pipeline.reprove_json(made)["packs"]  # type: ignore[misc,union-attr]  # a list of one
    assert pack["reproof"] == "differs"  # type: ignore[index,call-overload]  # an object


@pytest.mark.parametrize(
    ("error", "reproof", "status"),
    [
        (RefusedError, Reproof.REFUSED, ExitStatus.REFUSED),
        (NotEstablishedError, Reproof.NOT_ESTABLISHED, ExitStatus.NOT_ESTABLISHED),
    ],
)
def test_a_job_that_doesn_t_hold_any_more_says_why(
    issued: Works,
    monkeypatch: pytest.MonkeyPatch,
    error: type[RefusedError] | type[NotEstablishedError],
    reproof: Reproof,
    status: ExitStatus,
) -> None:
    def fail(_: object) -> None:
        raise error(Problem(where="RV1", what="Its window is too coarse.", fix="Fit another gauge."))

    monkeypatch.setattr(reproving, "whole_content", fail)
    made = reproved(issued)
    assert (only(made).reproof, made.status) == (reproof, status)
    assert "RV1: Its window is too coarse." in text(made)


def test_a_file_that_this_version_refuses_is_not_established(
    issued: Works, monkeypatch: pytest.MonkeyPatch
) -> None:
    def fail(_: object) -> None:
        raise InputError(Problem(where="line 4", what="acting isn't known.", fix="Correct it."))

    monkeypatch.setattr(reproving, "check_sources", fail)
    made = reproved(issued)
    assert (only(made).reproof, made.status) == (Reproof.UNREADABLE, ExitStatus.NOT_ESTABLISHED)


def test_what_isn_t_current_isn_t_made_again(works: Works) -> None:
    (first,) = works.revisions()
    pipeline.withdraw(
        first.record_id,
        register_at=works.register,
        reason="sold",
        by="Cleo Harnett",
        when=first.reserved_at,
    )
    assert reproved(works).packs == ()
    with pytest.raises(InputError, match="No revision of it is current"):
        reproved(works, DOCUMENT)
