"""Plain lists: machines, dates, and one machine with its settings over time."""

from __future__ import annotations

import html
import re
from datetime import date, timedelta

from desk_bench import NOON, Bench, kept, list_gauge, rewrite, word

from sheets import pipeline

READINGS = (("207", "205"), ("212", "204"), ("203", "206"))


def worked(bench: Bench) -> str:
    """A machine that was set three times, two months apart."""
    list_gauge(bench.register)
    issued = bench.issue(kept=kept())
    for number, (found, left) in enumerate(READINGS):
        day = NOON + timedelta(days=60 * number)
        reading = {
            "row": "1",
            "as found": f"{found} bar",
            "as left": f"{left} bar",
            "gauge": "17",
            "seal": "none",
        }
        answers = {
            "format": "1", "record": issued.record_id, "why": "check", "day": day.date().isoformat(),
            "people": ["Tom Ness"], "from paper": "no", "readings": [reading], "end": "done",
        }  # fmt: skip
        pipeline.record_answers(answers, register_at=bench.register, by="Tom Ness", when=day)
    bench.clock.move(days=130)
    return issued.record_id


def test_machines_stand_in_a_list_with_their_current_revision(bench: Bench) -> None:
    bench.issue("WI-9", "KP-9")
    bench.issue("WI-9", "KP-9")
    bench.reserve("WI-2", "A/1 & B")
    text = bench.client().get("/").text
    assert text.index("A/1 &amp; B") < text.index("KP-9")
    assert "WI-9 revision 2, <strong>current</strong> 2031-03-04" in text
    assert "WI-2 revision 1, <strong>not issued</strong>" in text
    (first, _) = re.findall(r'href="(/machine[^"]+)"', text)
    assert "<h1>A/1 &amp; B</h1>" in bench.client().get(html.unescape(first)).text


def test_each_setting_is_drawn_over_time_with_its_limits(bench: Bench) -> None:
    worked(bench)
    text = bench.client().get("/machine", params={"tag": "KP-2"}).text
    assert text.count('<svg class="plot"') == 1  # nothing was read at the other one
    plot = text.split('<svg class="plot"')[1].split("</svg>")[0]
    assert plot.count("<circle") == 6
    assert plot.count('fill="black" stroke="black"') == 3  # as left
    for said in ("200 bar", "210 bar", "find cause", "2031-03-04", "2031-07-02"):
        assert f">{said}</text>" in plot
    assert "2031-03-04 as found 207 bar" in plot


def test_points_stand_where_they_were_read(bench: Bench) -> None:
    """By hand: the readings are 60 days apart, so the middle ones lie half-way between the others."""
    worked(bench)
    text = bench.client().get("/machine", params={"tag": "KP-2"}).text
    plot = text.split('<svg class="plot"')[1].split("</svg>")[0]
    circles = [part.split('"') for part in plot.split("<circle ")[1:]]
    x, y = ([float(one[place]) for one in circles] for place in (1, 3))
    assert x[0] == x[1] < x[2] == x[3] < x[4] == x[5]
    assert abs((x[0] + x[4]) / 2 - x[2]) < 0.01
    # Higher readings stand higher, in proportion: 212 is 5 over 207, 204 is 1 under 205.
    assert abs((y[0] - y[2]) / (y[3] - y[1]) - 5) < 0.05


def test_dates_are_in_their_order_and_say_what_is_overdue(bench: Bench) -> None:
    record_id = worked(bench)
    list_gauge(bench.register, serial="12", number="18", due=date(2031, 3, 3))
    text = bench.client().get("/dates").text
    assert "<strong>overdue</strong> 2031-03-03 check of gauge 12 (18)" in text
    # A year's clock from the issue on 4 March 2031: 29 CFR 1910.147(c)(6)(i), at least annually.
    assert "2032-03-0" in text
    assert f'<a href="/r/{record_id}">inspection of WI-204</a>' in text
    assert (
        text.index("2031-03-03") < text.index("2031-12-31 check of gauge 4711") < text.index("inspection of")
    )


def test_an_old_copy_on_a_wall_stands_first(bench: Bench) -> None:
    bench.issue()
    pipeline.hang(
        "WI-204", register_at=bench.register, where="at the lift", by="Tom Ness", on=NOON.date(), when=NOON
    )
    assert "take down" not in bench.client().get("/dates").text
    bench.issue()
    assert "take down copy 1 of WI-204, revision 1: at the lift" in bench.client().get("/dates").text


def test_of_a_register_that_does_not_hold_nothing_is_listed(bench: Bench) -> None:
    bench.issue()
    rewrite(bench)
    client = bench.client()
    for path in ("/", "/dates"):
        answer = client.get(path)
        assert (answer.status_code, word(answer)) == (503, "not established")
        assert "KP-2" not in answer.text
    assert client.get("/machine?tag=KP-2").status_code == 404


def test_an_unknown_machine(bench: Bench) -> None:
    bench.issue()
    for tag in ("", "KP", "../KP-2", "KP-2%00", "'"):
        assert bench.client().get("/machine", params={"tag": tag}).status_code == 404
