"""Anything sent to every route: no answer is a bug, and nobody unsigned writes."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass
from urllib.parse import quote

import pytest
from desk_bench import PASSWORD, Bench, form_in, kept, list_gauge, sign_in
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from starlette.applications import Starlette
from starlette.testclient import TestClient

from sheets import pipeline

QUIET = settings(max_examples=120, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
FORM = {"content-type": "application/x-www-form-urlencoded"}
FIELDS = [
    *("form", "name", "password", "to", "job", "why", "found", "left", "unreached", "gauge", "oil", "seal"),
    *("seal_number", "at", "people", "on", "accept_name", "accept_password", "accept_why", "accepted"),
    *("done", "adjuster", "where", "id", "d", "v", "tag"),
]
WORDS = st.one_of(
    st.text(max_size=30),
    st.sampled_from(["205", "215", "17", "whole", "2031-03-04", "12:00", "RV1", "Tom Ness", "1", "\0"]),
)
SAID = st.dictionaries(st.sampled_from(FIELDS), WORDS, max_size=12)


@dataclass
class Stage:
    """A works with everything in it, a stranger, and a technician who is signed in."""

    bench: Bench
    stranger: TestClient
    technician: TestClient
    record_id: str


@pytest.fixture(scope="module")
def stage(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Stage]:
    bench = Bench(tmp_path_factory.mktemp("fuzz") / "works")
    list_gauge(bench.register)
    pipeline.set_user(bench.users, name="Tom Ness", role="technician", password=PASSWORD)
    issued = bench.issue(kept=kept())
    with bench.client(users=bench.users) as stranger:
        technician = TestClient(
            stranger.app,
            base_url=str(stranger.base_url),
            raise_server_exceptions=False,
            follow_redirects=False,
        )
        sign_in(technician)
        yield Stage(bench=bench, stranger=stranger, technician=technician, record_id=issued.record_id)


def routes(client: TestClient) -> list[tuple[str, str]]:
    """Method and path of every route of the application."""
    app = client.app.app  # type: ignore[attr-defined]  # the guard's
    assert isinstance(app, Starlette)
    return sorted((method, route.path) for route in app.routes for method in route.methods - {"HEAD"})  # type: ignore[attr-defined]  # plain routes


def path_of(path: str, record_id: str, part: str) -> str:
    """A path with its places filled: a known record, or anything."""
    path = path.replace("{record_id}", record_id if len(part) % 2 else quote(part, safe=""))
    return re.sub(r"\{\w+:int\}", "1", path)


def test_every_route_is_tried(stage: Stage) -> None:
    found = routes(stage.stranger)
    assert len(found) >= 19
    assert {path for method, path in found if method == "POST"} == {
        "/r/{record_id}/deviation/{number:int}",
        "/r/{record_id}/row/{row:int}",
        "/r/{record_id}/tag",
        "/sign-in",
        "/sign-out",
    }


@QUIET
@given(data=st.data())
def test_a_stranger_breaks_nothing_and_writes_nothing(stage: Stage, data: st.DataObject) -> None:
    method, path = data.draw(st.sampled_from(routes(stage.stranger)))
    said = data.draw(SAID)
    before = stage.bench.register.read_bytes()
    where = path_of(path, stage.record_id, data.draw(st.text(max_size=20)))
    if method == "POST":
        answer = stage.stranger.post(where, data=said)
    else:
        answer = stage.stranger.get(where, params=said)
    assert answer.status_code < 500
    assert "Traceback" not in answer.text
    assert stage.bench.register.read_bytes() == before
    stage.bench.clock.move(minutes=16)  # so that no count of tries keeps the next one out


@QUIET
@given(data=st.data())
def test_a_technician_breaks_nothing(stage: Stage, data: st.DataObject) -> None:
    if stage.technician.get("/sign-out").status_code != 200:
        sign_in(stage.technician)
    forms = [path for method, path in routes(stage.technician) if method == "POST" and path != "/sign-in"]
    path = path_of(data.draw(st.sampled_from(forms)), stage.record_id, "x")
    said = data.draw(SAID) | {"form": form_in(stage.technician.get("/sign-out"))}
    answer = stage.technician.post(path, data=said)
    assert answer.status_code < 500
    assert "Traceback" not in answer.text
    stage.bench.clock.move(minutes=2)


@QUIET
@given(body=st.binary(max_size=300))
def test_no_bytes_break_a_form(stage: Stage, body: bytes) -> None:
    for path in ("/sign-in", f"/r/{stage.record_id}/row/1"):
        assert stage.stranger.post(path, content=body, headers=FORM).status_code < 500
    stage.bench.clock.move(minutes=16)
