"""What is refused before any page looks at it, and what a hostile address can do: nothing."""

from __future__ import annotations

from collections.abc import Iterator
from urllib.parse import quote

import pytest
from desk_bench import Bench, code_of, word
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from starlette.testclient import TestClient

FORM = {"content-type": "application/x-www-form-urlencoded"}


@pytest.mark.parametrize("host", ["elsewhere.example", "", "records.brackwater.example.evil", "[::", "a b"])
def test_another_name_is_not_served(bench: Bench, host: str) -> None:
    answer = bench.client().get("/find", headers={"host": host})
    assert answer.status_code == 421
    assert "records" not in answer.text


@pytest.mark.parametrize("host", ["localhost:8417", "127.0.0.1", "[::1]:9", "RECORDS.brackwater.example:443"])
def test_its_own_names_are_served(bench: Bench, host: str) -> None:
    assert bench.client().get("/find", headers={"host": host}).status_code == 200


@pytest.mark.parametrize("method", ["PUT", "DELETE", "PATCH", "OPTIONS", "TRACE", "CONNECT", "PROPFIND"])
def test_other_methods_are_refused(bench: Bench, method: str) -> None:
    assert bench.client().request(method, "/find").status_code == 405


def test_an_oversize_form_is_refused_by_what_it_says_and_by_what_it_is(bench: Bench) -> None:
    client = bench.client()
    large = b"a=" + b"x" * 70_000
    assert client.post("/find", content=large, headers=FORM).status_code == 413

    def parts() -> Iterator[bytes]:
        for _ in range(80):
            yield b"x" * 1000

    answer = client.post("/find", content=parts(), headers={**FORM, "transfer-encoding": "chunked"})
    assert answer.status_code == 413
    assert client.post("/find", content=b"", headers={**FORM, "content-length": "-1"}).status_code == 413
    assert client.post("/find", content=b"", headers={**FORM, "content-length": "9" * 400}).status_code == 413


@pytest.mark.parametrize("kind", ["multipart/form-data; boundary=x", "application/json", "text/plain", ""])
def test_only_plain_forms_are_read(bench: Bench, kind: str) -> None:
    assert bench.client().post("/find", content=b"{}", headers={"content-type": kind}).status_code == 415


@pytest.mark.parametrize(
    "headers",
    [
        {"origin": "https://elsewhere.example"},
        {"origin": "null"},
        {"origin": "http://["},
        {"sec-fetch-site": "cross-site"},
        {"sec-fetch-site": "same-site"},
    ],
)
def test_a_form_from_another_site_is_refused(bench: Bench, headers: dict[str, str]) -> None:
    answer = bench.client().post("/find", content=b"", headers={**FORM, **headers})
    assert answer.status_code == 403


def test_every_answer_forbids_scripts_frames_and_guessing(bench: Bench) -> None:
    client = bench.client()
    for answer in (client.get("/find"), client.get("/nothing"), client.put("/find")):
        policy = answer.headers["content-security-policy"]
        assert "default-src 'none'" in policy
        assert "unsafe" not in policy
        assert "script-src" not in policy  # falls back to none
        assert "frame-ancestors 'none'" in policy
        assert answer.headers["x-content-type-options"] == "nosniff"
        assert "server" not in answer.headers
    assert "strict-transport-security" not in client.get("/find").headers
    secure = bench.client(secure=True).get("/find")
    assert "max-age" in secure.headers["strict-transport-security"]


def test_pages_hold_no_script_and_no_inline_style(bench: Bench) -> None:
    client = bench.client()
    for path in (code_of(bench.issue()), "/find", "/nothing", "/r/0123456789"):
        text = client.get(path).text
        for part in ("<script", "style=", "<style", "onclick", "javascript:", "http-equiv"):
            assert part not in text


@pytest.mark.parametrize(
    "path",
    [
        "/r/..%2f..%2fetc%2fpasswd",
        "/r/%2e%2e/%2e%2e/plant.register",
        "/r/../site.yaml",
        "/r/%00",
        "/r/0123456789%0d%0aSet-Cookie:%20a=b",
        "/r/' OR 1=1 --",
        "/r/%ff%fe",
        "/r/{{7*7}}",
        "/r/" + "A" * 1500,
        "/r//file",
        "/r/..%2fpacks%2fpack.pdf/file",
        "/look.css/../site.yaml",
        "//elsewhere.example/r/1",
    ],
)
def test_a_path_finds_nothing_but_records(bench: Bench, path: str) -> None:
    bench.issue()
    answer = bench.client().get(path)
    assert answer.status_code == 404
    for said in ("root:", "plant:", "SQLite", "49", "Traceback"):
        assert said not in answer.text
    assert "set-cookie" not in answer.headers


def test_an_endless_address_is_refused(bench: Bench) -> None:
    client = bench.client()
    assert client.get("/r/" + "A" * 3000).status_code == 414
    assert client.get("/find?id=" + "A" * 3000).status_code == 414


def test_a_closed_page_says_nothing_to_strangers(bench: Bench) -> None:
    issued = bench.issue(data=b"%PDF-1.7 the pack")
    (bench.folder / "packs" / "pack.pdf").write_bytes(b"%PDF-1.7 the pack")
    bench.site.write_text(bench.site.read_text() + "record page open: no\n", encoding="utf-8")
    client = bench.client()
    for path in (code_of(issued), f"/r/{issued.record_id}/file", "/find", "/r/0123456789"):
        answer = client.get(path)
        assert (answer.status_code, word(answer)) == (401, "sign in first")
        assert "WI-204" not in answer.text
    assert client.get("/look.css").status_code == 200


SCRIPT = "<script>alert('x')</script>\"'&"


def test_a_script_in_every_field_stays_text(bench: Bench) -> None:
    issued = bench.issue(document=f"WI {SCRIPT}", machine=f"KP {SCRIPT}")
    text = bench.site.read_text(encoding="utf-8").replace("Brackwater Tileworks", f'"{SCRIPT[:-3]}"')
    bench.site.write_text(text, encoding="utf-8")
    client = bench.client()
    for answer in (
        client.get(code_of(issued)),
        client.get(f"/r/{issued.record_id}", params={"d": SCRIPT, "v": SCRIPT}),
        client.get("/r/" + SCRIPT.replace("/", "")),
        client.get("/find", params={"id": SCRIPT, "d": SCRIPT, "v": SCRIPT}),
    ):
        assert "<script" not in answer.text.lower()
        assert "&lt;script" in answer.text.lower()


def test_a_bug_tells_the_log_and_not_the_reader(bench: Bench, monkeypatch: pytest.MonkeyPatch) -> None:
    def broken(*_: object, **__: object) -> None:
        raise ZeroDivisionError("a secret of the works")

    client = bench.client()
    monkeypatch.setattr("sheets.pipeline.looking.currency_in", broken)
    answer = client.get("/r/0123456789")
    assert answer.headers["cache-control"] == "no-store"
    assert answer.status_code == 500
    assert word(answer) == "an error of the page"
    for said in ("Traceback", "ZeroDivision", "secret", str(bench.folder)):
        assert said not in answer.text
    with pytest.raises(ZeroDivisionError, match="a secret of the works"):
        bench.client(loud=True).get("/r/0123456789")  # what the server gets to print


@settings(max_examples=150, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(
    method=st.sampled_from(["GET", "HEAD", "POST"]),
    route=st.sampled_from(["/r/{}", "/r/{}/file", "/find?id={}&d={}&v={}", "/{}", "/r/1?d={}&v={}"]),
    parts=st.lists(st.text(max_size=40), min_size=3, max_size=3),
    body=st.binary(max_size=200),
)
def test_no_request_breaks_it(
    bench_once: tuple[Bench, TestClient], method: str, route: str, parts: list[str], body: bytes
) -> None:
    bench, client = bench_once
    before = bench.register.read_bytes()
    path = route
    for part in parts:
        path = path.replace("{}", quote(part, safe=""), 1)
    sent = {"content": body, "headers": FORM} if method == "POST" else {}
    answer = client.request(method, path, **sent)  # type: ignore[arg-type]  # content and headers
    assert answer.status_code < 500
    assert answer.headers["cache-control"] == "no-store"
    assert bench.register.read_bytes() == before
