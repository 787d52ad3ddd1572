"""Signing in: roles, cookies, forged and replayed forms, fixation, brute force, and who is out at once."""

from __future__ import annotations

import re
import shlex
from collections.abc import Iterator

import click
import pytest
from click.testing import CliRunner
from desk_bench import PASSWORD, Bench, code_of, form_in, sign_in, word
from starlette.testclient import TestClient

from sheets import cli, pipeline
from sheets.errors import InputError


@pytest.fixture
def site(bench: Bench) -> Iterator[TestClient]:
    """A closed page with three who may sign in."""
    bench.site.write_text(bench.site.read_text() + "record page open: no\n", encoding="utf-8")
    for name, role in (("Rita Sorn", "reader"), ("Tom Ness", "technician"), ("Ada Quarrow", "approver")):
        pipeline.set_user(bench.users, name=name, role=role, password=PASSWORD)
    with bench.client(users=bench.users) as client:
        yield client


def test_whoever_signed_in_may_read_and_comes_back_to_the_paper(bench: Bench, site: TestClient) -> None:
    issued = bench.issue()
    away = site.get(code_of(issued))
    assert away.status_code == 303
    asked = site.get(away.headers["location"])
    form, to = form_in(asked), re.findall(r'name="to" value="([^"]+)"', asked.text)[0].replace("&amp;", "&")
    back = site.post("/sign-in", data={"form": form, "name": "Rita Sorn", "password": PASSWORD, "to": to})
    assert (back.status_code, back.headers["location"]) == (303, code_of(issued))
    answer = site.get(code_of(issued))
    assert word(answer) == "current"
    assert "Sign out Rita Sorn" in answer.text


def test_the_cookie_is_out_of_reach(site: TestClient, bench: Bench) -> None:
    said = sign_in(site).headers["set-cookie"].lower()
    assert said.startswith("jamnut=")
    for part in ("httponly", "samesite=lax", "path=/"):
        assert part in said
    assert "secure" not in said
    with bench.client(users=bench.users, secure=True) as client:
        form = form_in(client.get("/sign-in", headers={"x": "1"}))
        assert form
    with TestClient(client.app, base_url="https://records.brackwater.example", follow_redirects=False) as tls:
        said = sign_in(tls).headers["set-cookie"].lower()
    assert said.startswith("__host-jamnut=")
    assert "secure" in said
    assert "domain" not in said


@pytest.mark.parametrize(
    ("name", "password"),
    [("Tom Ness", "wrong password"), ("Nobody Here", PASSWORD), ("", ""), ("tom ness", PASSWORD),
     ("Tom Ness", PASSWORD + "\0"), ("Tom Ness", "")],
)  # fmt: skip
def test_what_does_not_fit_says_the_same_for_all(site: TestClient, name: str, password: str) -> None:
    answer = sign_in(site, name, password)
    assert answer.status_code == 403
    assert "Name and password don&#39;t belong together." in answer.text
    assert site.get("/find").status_code == 303


def test_a_session_that_somebody_brought_along_is_not_taken(site: TestClient) -> None:
    site.cookies.set("jamnut", "planted-by-another")
    sign_in(site)
    kept = [cookie.value for cookie in site.cookies.jar if cookie.name == "jamnut"]
    assert kept
    assert "planted-by-another" not in kept[-1:]
    with TestClient(site.app, base_url=str(site.base_url), follow_redirects=False) as other:
        other.cookies.set("jamnut", "planted-by-another")
        assert other.get("/find").status_code == 303


def test_signing_in_again_ends_the_session_before(site: TestClient) -> None:
    sign_in(site, "Rita Sorn")
    before = site.cookies["jamnut"]
    sign_in(site, "Tom Ness")
    assert site.cookies["jamnut"] != before
    site.cookies.clear()
    site.cookies.set("jamnut", before)
    assert site.get("/find").status_code == 303


def test_a_form_to_sign_in_from_elsewhere_is_refused(site: TestClient) -> None:
    form = form_in(site.get("/sign-in"))
    said = {"name": "Tom Ness", "password": PASSWORD}
    for forged in ("", "0" * 64, form[:-1], "é"):
        assert site.post("/sign-in", data={**said, "form": forged}).status_code == 403
    site.cookies.clear()  # the form without its cookie
    assert site.post("/sign-in", data={**said, "form": form}).status_code == 403
    assert site.get("/find").status_code == 303


@pytest.mark.parametrize(
    "to",
    ["//elsewhere.example", "https://elsewhere.example", "/\\elsewhere.example", "javascript:alert(1)",
     "/find\r\nSet-Cookie: a=b", "", "find", "/\t/elsewhere.example"],
)  # fmt: skip
def test_nobody_is_sent_elsewhere(site: TestClient, to: str) -> None:
    answer = sign_in(site, to=to)
    assert (answer.status_code, answer.headers["location"]) == (303, "/")


def test_signing_in_without_a_target_leads_to_the_list(bench: Bench, site: TestClient) -> None:
    bench.issue()
    answer = sign_in(site)
    assert site.get(answer.headers["location"]).status_code == 200


def test_guessing_ends_by_name_and_a_right_password_waits_with_it(bench: Bench, site: TestClient) -> None:
    for _ in range(8):
        assert sign_in(site, password="a wrong guess").status_code == 403
    answer = sign_in(site)
    assert answer.status_code == 429
    assert int(answer.headers["retry-after"]) > 0
    assert sign_in(site, "Rita Sorn").status_code == 303  # others aren't kept out
    bench.clock.move(minutes=16)
    assert sign_in(site).status_code == 303


def test_guessing_many_names_ends_by_address(site: TestClient) -> None:
    answers = [sign_in(site, f"Person {number}").status_code for number in range(45)]
    assert answers == [403] * 40 + [429] * 5


def test_sessions_end_by_themselves(bench: Bench, site: TestClient) -> None:
    sign_in(site)
    for _ in range(20):
        bench.clock.move(minutes=29)
        assert site.get("/find").status_code == 200
    bench.clock.move(minutes=29)
    assert site.get("/find").status_code == 303  # after ten hours, however busy
    sign_in(site)
    bench.clock.move(minutes=31)
    assert site.get("/find").status_code == 303


def test_signing_out_takes_a_form_once(site: TestClient) -> None:
    sign_in(site)
    assert site.post("/sign-out", data={"form": "made up"}).status_code == 403
    assert site.get("/find").status_code == 200
    token = site.cookies["jamnut"]
    form = form_in(site.get("/sign-out"))
    assert site.post("/sign-out", data={"form": form}).status_code == 303
    site.cookies.set("jamnut", token)
    assert site.get("/find").status_code == 303
    assert site.post("/sign-out", data={"form": form}).status_code == 401


def test_a_form_of_one_person_is_of_no_use_to_another(site: TestClient) -> None:
    sign_in(site, "Rita Sorn")
    form = form_in(site.get("/sign-out"))
    with TestClient(site.app, base_url=str(site.base_url), follow_redirects=False) as other:
        sign_in(other, "Tom Ness")
        assert other.post("/sign-out", data={"form": form}).status_code == 403


def test_whoever_is_taken_out_is_out_at_once(bench: Bench, site: TestClient) -> None:
    sign_in(site)
    assert site.get("/find").status_code == 200
    pipeline.remove_user(bench.users, name="Tom Ness")
    assert site.get("/find").status_code == 303
    assert sign_in(site).status_code == 403


def test_a_new_password_ends_old_sessions(bench: Bench, site: TestClient) -> None:
    sign_in(site)
    pipeline.set_user(bench.users, name="Tom Ness", role="reader", password="another one entirely")
    assert site.get("/find").status_code == 303


@pytest.mark.usefixtures("site")
def test_the_users_file_holds_no_password_and_is_private(bench: Bench) -> None:
    text = bench.users.read_text(encoding="utf-8")
    assert PASSWORD not in text
    assert text.count("$argon2id$") == 3
    assert bench.users.stat().st_mode & 0o077 == 0
    assert list(pipeline.users(bench.users)) == [
        "Ada Quarrow: approver",
        "Rita Sorn: reader",
        "Tom Ness: technician",
    ]


@pytest.mark.parametrize(
    "text", ["", "[]", "{}", '{"format": 2, "users": []}', '{"format": 1, "users": [{}]}', "[" * 9000]
)
def test_another_file_is_no_users_file(bench: Bench, text: str) -> None:
    bench.users.write_text(text, encoding="utf-8")
    with pytest.raises(InputError, match="no users file"):
        pipeline.users_of(bench.users)


@pytest.mark.parametrize(
    ("name", "password"), [("Tom Ness", "short"), ("", PASSWORD), ("Tom\nNess", PASSWORD), ("T", "x" * 201)]
)
def test_who_can_not_be_added(bench: Bench, name: str, password: str) -> None:
    with pytest.raises(InputError):
        pipeline.set_user(bench.users, name=name, role="reader", password=password)
    assert not bench.users.exists()


def test_without_users_nobody_signs_in(bench: Bench) -> None:
    client = bench.client()
    assert client.get("/sign-in").status_code == 404
    assert "Sign in" not in client.get("/find").text


def test_the_example_adds_a_user(bench: Bench, monkeypatch: pytest.MonkeyPatch) -> None:
    text = cli.main.commands["users"].help or ""
    (line,) = re.findall(r"^ *Example: jamnut users (.+)$", text, flags=re.MULTILINE)
    monkeypatch.chdir(bench.folder)
    monkeypatch.setattr(click, "prompt", lambda *_, **__: PASSWORD)
    for words in (shlex.split(line), ["users.json"], ["users.json", "--remove", "Dora Vell"]):
        done = CliRunner().invoke(cli.main, ["users", *words])
        assert done.exit_code == 0, done.output
        assert "Dora Vell" in done.output
    assert pipeline.users_of(bench.users) == ()
