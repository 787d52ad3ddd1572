"""How a paper stands, on its page: every state, the comparison with the paper, what is shown and hidden."""

from __future__ import annotations

import sqlite3
from datetime import timedelta

import pytest
from desk_bench import NOON, Bench, code_of, rewrite, word

from sheets.register import issuing
from sheets.register.opening import open_register
from sheets.register.store import Register

STOP = 'class="standing stop"'
GO = 'class="standing go"'


def opened(bench: Bench) -> Register:
    return open_register(bench.register)


def test_a_current_paper_says_so(bench: Bench) -> None:
    issued = bench.issue()
    answer = bench.client().get(code_of(issued))
    assert answer.status_code == 200
    assert word(answer) == "current"
    assert GO in answer.text
    assert "WI-204 revision 1 · KP-2" in answer.text
    for name in ("Ines Kurz", "Olaf Brenner"):
        assert name in answer.text
    assert "not a work instruction" in answer.text


def test_the_whole_digest_stands_there_in_groups(bench: Bench) -> None:
    issued = bench.issue()
    assert issued.issue is not None
    digest = issued.issue.content_digest
    assert "-".join(digest[at : at + 4] for at in (0, 4, 8, 12)) in bench.client().get(code_of(issued)).text


def test_a_superseded_paper_points_to_the_current_one(bench: Bench) -> None:
    old = bench.issue()
    client = bench.client()
    assert word(client.get(code_of(old))) == "current"
    new = bench.issue()
    answer = client.get(code_of(old))  # at once, whatever is kept in memory
    assert word(answer) == "superseded"
    assert STOP in answer.text
    assert f'href="/r/{new.record_id}"' in answer.text
    assert "Ines Kurz" not in answer.text
    assert word(client.get(code_of(new))) == "current"


def test_a_withdrawn_paper_says_by_whom_and_why(bench: Bench) -> None:
    issued = bench.issue()
    with opened(bench) as register:
        issuing.withdraw(
            register, issued.record_id, reason="pump was changed", by="Olaf Brenner", when=bench.clock()
        )
    answer = bench.client().get(code_of(issued))
    assert word(answer) == "withdrawn"
    assert STOP in answer.text
    assert "pump was changed" in answer.text
    assert "No revision of WI-204 is current" in answer.text


def test_what_was_never_issued(bench: Bench) -> None:
    client = bench.client()
    first = bench.reserve()
    assert word(client.get(f"/r/{first}")) == "not issued"
    second = bench.reserve()
    assert word(client.get(f"/r/{first}")) == "void"
    with opened(bench) as register:
        issuing.reject(register, second, reason="wrong plate", by="Olaf Brenner", when=bench.clock())
    answer = client.get(f"/r/{second}")
    assert word(answer) == "rejected"
    assert "wrong plate" in answer.text


def test_an_unknown_record(bench: Bench) -> None:
    answer = bench.client().get("/r/0123456789")
    assert (answer.status_code, word(answer)) == (404, "unknown")
    assert STOP in answer.text


@pytest.mark.parametrize(
    ("digest", "number"),
    [("00000000", "1"), (None, "2"), ("short", "1"), (None, "<b>1</b>")],
)
def test_a_code_that_is_not_the_record_s_is_another_paper(
    bench: Bench, digest: str | None, number: str
) -> None:
    issued = bench.issue()
    assert issued.issue is not None
    said = {"d": digest or issued.issue.content_digest[:8], "v": number}
    answer = bench.client().get(f"/r/{issued.record_id}", params=said)
    assert word(answer) == "another paper"
    assert STOP in answer.text
    assert "differs" in answer.text
    assert "The signed file" not in answer.text
    assert "<b>1</b>" not in answer.text


def test_what_was_typed_off_the_foot_of_a_page(bench: Bench) -> None:
    issued = bench.issue()
    assert issued.issue is not None
    digest = issued.issue.content_digest
    typed = "-".join(digest[at : at + 4] for at in (0, 4, 8, 12)).lower()
    client = bench.client()
    answer = client.get("/find", params={"id": issued.record_id.lower(), "d": typed, "v": "1"})
    assert answer.status_code == 303
    answer = client.get(answer.headers["location"])
    assert word(answer) == "current"
    wrong = typed[:-1] + ("0" if typed[-1] != "0" else "1")
    assert word(client.get(f"/r/{issued.record_id}", params={"d": wrong})) == "another paper"


@pytest.mark.parametrize("path", ["/find?id=%E2%80%AE%00ab", "/r/%E2%80%AE%00ab"])
def test_what_turns_the_words_around_it_is_shown_by_its_number(bench: Bench, path: str) -> None:
    bench.issue()
    answer = bench.client().get(path)
    assert answer.status_code == 404
    assert all(sign.isprintable() or sign == "\n" for sign in answer.text)
    assert "\\u202e" in answer.text.lower()


def test_a_register_that_does_not_hold_says_nothing(bench: Bench) -> None:
    issued = bench.issue()
    client = bench.client()
    assert word(client.get(code_of(issued))) == "current"
    rewrite(bench)
    bench.clock.move(seconds=31)  # an old event behind the last one: seen when it is judged anew
    answer = client.get(code_of(issued))
    assert (answer.status_code, word(answer)) == (503, "not established")
    for said in ("WI-204", "Ines Kurz", "KP-2"):
        assert said not in answer.text
    assert client.get(f"/r/{issued.record_id}/file").status_code == 404


def test_an_end_that_was_cut_off_shows_by_the_anchor(bench: Bench) -> None:
    old = bench.issue()
    new = bench.issue()
    with sqlite3.connect(bench.register) as other:
        last = other.execute("SELECT sequence, hash FROM events ORDER BY sequence DESC LIMIT 1").fetchone()
        anchor = f"{last[0]}:{last[1]}"
    client = bench.client(anchors=(anchor,))
    assert word(client.get(code_of(new))) == "current"
    with sqlite3.connect(bench.register) as other:
        guards = other.execute("SELECT name, sql FROM sqlite_master WHERE type = 'trigger'").fetchall()
        for name, _ in guards:
            other.execute(f"DROP TRIGGER {name}")
        other.execute("DELETE FROM events WHERE record_id = ?", (new.record_id,))
        for _, sql in guards:
            other.execute(sql)
    assert word(bench.client().get(code_of(old))) == "current"  # without an anchor nobody can see it
    assert word(client.get(code_of(old))) == "not established"


def test_a_register_that_went_away_is_no_answer(bench: Bench) -> None:
    issued = bench.issue()
    client = bench.client()
    assert word(client.get(code_of(issued))) == "current"
    bench.register.rename(bench.folder / "elsewhere")
    answer = client.get(code_of(issued))
    assert (answer.status_code, word(answer)) == (503, "not established")
    assert str(bench.folder) not in answer.text


def test_a_register_that_was_put_back_is_read_anew(bench: Bench) -> None:
    old = bench.issue()
    copy = bench.register.read_bytes()
    new = bench.issue()
    client = bench.client()
    assert word(client.get(code_of(old))) == "superseded"
    restored = bench.folder / "restored"
    restored.write_bytes(copy)
    restored.replace(bench.register)
    assert word(client.get(code_of(old))) == "current"
    assert word(client.get(code_of(new))) == "unknown"


def test_nothing_is_kept_on_the_way(bench: Bench) -> None:
    issued = bench.issue()
    client = bench.client()
    for path in (code_of(issued), "/r/0123456789", "/find", "/no such page", f"/r/{issued.record_id}/file"):
        assert client.get(path).headers["cache-control"] == "no-store"


def test_the_signed_file_is_offered_only_to_the_byte(bench: Bench) -> None:
    issued = bench.issue(data=b"%PDF-1.7 the pack")
    client = bench.client()
    link = f"/r/{issued.record_id}/file"
    assert link not in client.get(code_of(issued)).text
    assert client.get(link).status_code == 404
    pack = bench.folder / "packs" / "any name.pdf"
    pack.write_bytes(b"%PDF-1.7 another pack")
    assert client.get(link).status_code == 404
    pack.unlink()
    (bench.folder / "packs" / "KP-2.pdf").write_bytes(b"%PDF-1.7 the pack")
    assert word(client.get(code_of(issued))) == "current"
    answer = client.get(link)
    assert (answer.status_code, answer.content) == (200, b"%PDF-1.7 the pack")
    assert link in client.get(code_of(issued)).text
    assert answer.headers["content-type"] == "application/pdf"
    (bench.folder / "packs" / "KP-2.pdf").write_bytes(b"%PDF-1.7 changed in its place")
    assert client.get(link).status_code == 404


def test_the_file_of_an_old_revision_is_not_handed_out(bench: Bench) -> None:
    old = bench.issue(data=b"%PDF-1.7 old")
    bench.issue(data=b"%PDF-1.7 new")
    (bench.folder / "packs" / "old.pdf").write_bytes(b"%PDF-1.7 old")
    assert bench.client().get(f"/r/{old.record_id}/file").status_code == 404


def test_the_address_may_have_a_path(bench: Bench) -> None:
    issued = bench.issue()
    text = bench.site.read_text(encoding="utf-8").replace(".example", ".example/jamnut/desk")
    bench.site.write_text(text, encoding="utf-8")
    client = bench.client()
    answer = client.get(f"/jamnut/desk{code_of(issued)}")
    assert word(answer) == "current"
    assert 'href="/jamnut/desk/look.css"' in answer.text
    assert client.get("/jamnut/desk/look.css").status_code == 200


def test_days_are_those_of_the_works(bench: Bench) -> None:
    text = bench.site.read_text(encoding="utf-8") + "zone: Pacific/Auckland\n"
    bench.site.write_text(text, encoding="utf-8")
    issued = bench.issue()
    bench.clock.at = NOON + timedelta(hours=1)
    # Noon UTC on 4 March is 1 in the morning of 5 March there: UTC+13, daylight time (IANA tz database).
    assert "issued 2031-03-05" in bench.client().get(code_of(issued)).text
