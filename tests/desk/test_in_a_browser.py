"""The page in a real browser, as a technician comes to it: from the code on paper to the tag as left."""

from __future__ import annotations

import io
import re
import shutil
import socket
import subprocess
import sys
import time
from collections.abc import Iterator
from dataclasses import dataclass
from datetime import UTC, date, datetime
from decimal import Decimal
from pathlib import Path

import pypdfium2
import pytest
import zxingcpp
from desk_bench import PASSWORD, list_gauge
from playwright.sync_api import Browser, Page, sync_playwright

from sheets import pipeline
from sheets.register.finding import revision_of
from sheets.register.opening import open_register
from sheets.register.rows import Row

PHONE, OLD_PHONE, DESK = (360, 740), (320, 533), (1280, 900)
INK = {"rgb(0, 0, 0)", "rgb(255, 255, 255)"}
LEAST_TARGET = 44
"""CSS pixels, the target size of WCAG 2.2, 2.5.5 (level AAA); for gloves."""


@dataclass(frozen=True, kw_only=True)
class Served:
    """A demonstration site, served."""

    address: str
    code: str
    """Path and query that the code on the first page holds."""
    rows: tuple[Row, ...]
    register: Path


@pytest.fixture(scope="module")
def served(root: Path, tmp_path_factory: pytest.TempPathFactory) -> Iterator[Served]:
    folder = tmp_path_factory.mktemp("browser") / "demonstration"
    now = datetime.now(UTC)
    made = pipeline.demo(
        root / "sample_machines" / "kiln_pusher.yaml",
        folder,
        when=now,
        random_bytes=lambda length: bytes(range(7, 7 + length)),
    )
    for name, role in (("Tom Ness", "technician"), ("Ada Quarrow", "approver")):
        pipeline.set_user(folder / "users.json", name=name, role=role, password=PASSWORD)
    list_gauge(made.register, when=now, due=date(now.year + 1, 12, 31), accuracy_class="0.1")
    with open_register(made.register) as register:
        issue = revision_of(register, made.issued.record_id).issue
    assert issue is not None
    assert issue.kept is not None
    with socket.socket() as found:
        found.bind(("127.0.0.1", 0))
        port = found.getsockname()[1]
    server = subprocess.Popen(
        [sys.executable, "-c", "from sheets.cli import entry; entry()", "serve", str(folder),
         "--register", str(made.register), "--site", str(made.site),
         "--users", str(folder / "users.json"), "--port", str(port)],
        env={"PYTHONPATH": str(root), "PATH": ""},
        stdout=subprocess.DEVNULL,
        stderr=subprocess.DEVNULL,
    )  # fmt: skip
    try:
        for _ in range(300):
            with socket.socket() as trying:
                if trying.connect_ex(("127.0.0.1", port)) == 0:
                    break
            time.sleep(0.1)
        yield Served(
            address=f"http://127.0.0.1:{port}",
            code=scanned(made.issued.file),
            rows=issue.kept.rows,
            register=made.register,
        )
    finally:
        server.terminate()
        server.wait(20)


def scanned(pack: Path) -> str:
    """What a reader finds on the first page, without the address of the site."""
    document = pypdfium2.PdfDocument(pack)
    (found,) = zxingcpp.read_barcodes(document[0].render(scale=3).to_pil())
    document.close()
    assert found.text.startswith("https://records.brackwater.example/r/")
    return found.text.removeprefix("https://records.brackwater.example")


@pytest.fixture(scope="module")
def browser() -> Iterator[Browser]:
    program = shutil.which("chromium")
    if program is None:
        pytest.skip("chromium isn't installed")
    with sync_playwright() as driver:
        started = driver.chromium.launch(executable_path=program, args=["--no-sandbox"])
        yield started
        started.close()


@pytest.fixture
def page(browser: Browser) -> Iterator[Page]:
    """A phone that runs no scripts."""
    with browser.new_context(
        viewport={"width": PHONE[0], "height": PHONE[1]}, java_script_enabled=False
    ) as context:
        yield context.new_page()


def outside_window(row: Row) -> str:
    """A reading over the window that somebody may still accept."""
    top = min(Decimal(row.ladder_high), Decimal(row.never_exceed))
    found = (Decimal(row.high) + top) / 2
    assert Decimal(row.high) < found < top
    return f"{found:.1f}"


def word(page: Page) -> str:
    return str(page.locator("h1.word").inner_text()).upper()


def test_from_the_code_to_a_reading_that_an_approver_accepts(served: Served, page: Page) -> None:
    row = served.rows[0]
    page.goto(served.address + served.code)
    assert word(page) == "CURRENT"
    assert page.get_by_text("differs").count() == 0
    assert page.locator("section.setting").count() == len(served.rows)
    page.get_by_role("link", name="Sign in").click()
    page.get_by_label("Name").fill("Tom Ness")
    page.get_by_label("Password").fill(PASSWORD)
    page.get_by_role("button", name="Sign in").click()
    page.goto(served.address + served.code)
    page.get_by_role("link", name="Record row 1").click()
    page.get_by_label("Why, for a new job").fill("yearly check")
    page.get_by_label("As found, in").fill(row.target)
    page.get_by_label("As left, in").fill(outside_window(row))
    page.get_by_label("Gauge").fill("17")
    page.get_by_label("Seal", exact=True).select_option("whole")
    page.get_by_role("button", name="Record as Tom Ness").click()
    assert "outside its window" in page.get_by_role("alert").inner_text()
    with open_register(served.register, read_only=True) as register, register.reading() as view:
        assert list(view.events(kinds={"read"})) == []
    page.get_by_label("Approver", exact=True).fill("Ada Quarrow")
    page.get_by_label("Approver's password").fill(PASSWORD)
    page.get_by_label("Why it may stay so").fill("till the mould is changed")
    page.get_by_role("button", name="Record as Tom Ness").click()
    assert word(page) == "CURRENT"
    assert f"as left {outside_window(row)} {row.unit}" in page.locator("section.setting").first.inner_text()
    page.get_by_role("link", name="Setting tags").click()
    link = page.get_by_role("link", name="Print the tags as left (PDF)").get_attribute("href")
    printed = page.request.get(f"{served.address}{link}")
    assert printed.status == 200
    document = pypdfium2.PdfDocument(io.BytesIO(printed.body()))
    text = "\n".join(sheet.get_textpage().get_text_range() for sheet in document)
    document.close()
    assert f"{outside_window(row)} {row.unit}" in " ".join(text.split())
    page.get_by_label("Where it hangs").fill("at the screw")
    page.get_by_role("button", name="It hangs there now").click()
    assert word(page) == "CURRENT"
    with open_register(served.register, read_only=True) as register, register.reading() as view:
        (posted,) = view.events(kinds={"tag posted"})
    assert posted.who == "Tom Ness"


def test_with_the_keyboard_alone(served: Served, page: Page) -> None:
    page.goto(f"{served.address}/sign-in?to={served.code.split('?')[0]}/row/1")
    page.keyboard.press("Tab")
    assert page.locator(":focus").inner_text() == "To the content"
    page.keyboard.press("Tab")
    page.keyboard.type("Tom Ness")
    page.keyboard.press("Tab")
    page.keyboard.type(PASSWORD)
    page.keyboard.press("Enter")
    page.get_by_role("button", name="Record as Tom Ness").wait_for()
    reached = []
    for _ in range(20):
        page.keyboard.press("Tab")
        reached.append(page.locator(":focus").get_attribute("name"))
        if page.locator(":focus").inner_text().startswith("Record as"):
            break
    shown = [
        "job",
        "why",
        "found",
        "left",
        "unreached",
        "gauge",
        "oil",
        "seal",
        "seal_number",
        "people",
        "on",
        "at",
    ]
    assert [name for name in reached if name] == shown
    page.keyboard.press("Enter")
    assert page.locator(":focus").count() <= 1


def sight(page: Page) -> dict[str, object]:
    """What is measured of a page by script: colours, sizes, labels, overflow."""
    found: dict[str, object] = page.evaluate(
        """() => {
        const clear = (one) => getComputedStyle(one).backgroundColor === 'rgba(0, 0, 0, 0)';
        const seen = (one) => one.getClientRects().length > 0 && one.type !== 'hidden';
        const texts = [...document.querySelectorAll('body, body *:not(svg):not(svg *)')].filter(seen);
        const colours = new Set();
        for (const one of texts) {
            const style = getComputedStyle(one);
            colours.add(style.color);
            if (style.backgroundColor !== 'rgba(0, 0, 0, 0)') colours.add(style.backgroundColor);
        }
        const clash = texts.filter((one) => {
            let ground = one;
            while (ground && clear(ground)) ground = ground.parentElement;
            return ground && getComputedStyle(one).color === getComputedStyle(ground).backgroundColor;
        }).map((one) => one.outerHTML.slice(0, 80));
        const kinds = 'a:not(.skip), button, select, textarea, input:not([type=checkbox])';
        const boxes = [...document.querySelectorAll(kinds)].filter(seen);
        return {
            colours: [...colours],
            clash,
            small: boxes.filter((one) => one.getBoundingClientRect().height < LEAST)
                .map((one) => one.outerHTML),
            unlabelled: [...document.querySelectorAll('input, select, textarea')].filter(seen)
                .filter((one) => one.labels.length === 0).map((one) => one.outerHTML),
            least: Math.min(...texts.map((one) => parseFloat(getComputedStyle(one).fontSize))),
            over: Math.max(document.documentElement.scrollWidth,
                ...texts.map((one) => one.getBoundingClientRect().right)) - window.innerWidth,
            headings: document.querySelectorAll('h1').length,
            language: document.documentElement.lang,
        };
    }""".replace("LEAST", str(LEAST_TARGET))
    )
    return found


@pytest.mark.parametrize("size", [OLD_PHONE, PHONE, DESK], ids=["old phone", "phone", "desk"])
def test_pages_can_be_read_and_hit(served: Served, browser: Browser, size: tuple[int, int]) -> None:
    record = served.code.split("?")[0]
    with browser.new_context(viewport={"width": size[0], "height": size[1]}) as context:
        page = context.new_page()
        said: list[str] = []
        page.on("console", lambda message: said.append(f"{message.text} {message.location}"))
        asked: set[str] = set()
        page.on("request", lambda request: asked.add(re.sub(r"(//[^/]+).*", r"\1", request.url)))
        page.goto(f"{served.address}/sign-in?to={record}")
        forms = ["/sign-in", f"{record}/row/1", f"{record}/tag", "/sign-out"]
        for path in (served.code, f"{record}?d=00000000&v=9", "/find", forms[0]):
            page.goto(served.address + path)
            _hold(sight(page), path)
        page.get_by_label("Name").fill("Tom Ness")
        page.get_by_label("Password").fill(PASSWORD)
        page.get_by_role("button", name="Sign in").click()
        for path in (served.code, *forms[1:]):
            page.goto(served.address + path)
            _hold(sight(page), path)
    assert asked == {served.address}
    assert said == []


@pytest.mark.parametrize(
    "state",
    [
        "superseded",
        "withdrawn",
        "void",
        "rejected",
        "not issued",
        "another paper",
        "unknown",
        "not established",
    ],
)
@pytest.mark.parametrize("width", [320, 360])
def test_every_word_fits_an_old_phone(served: Served, browser: Browser, state: str, width: int) -> None:
    with browser.new_context(viewport={"width": width, "height": 600}) as context:
        page = context.new_page()
        page.goto(f"{served.address}/r/0123456789")
        page.evaluate("(word) => { document.querySelector('h1.word').textContent = word; }", state)
        over = page.evaluate(
            """() => { const range = document.createRange();
            range.selectNodeContents(document.querySelector('h1.word'));
            return range.getBoundingClientRect().right
                - document.querySelector('.standing').getBoundingClientRect().right; }"""
        )
        assert over < 0


def _hold(seen: dict[str, object], path: str) -> None:
    assert set(seen["colours"]) <= INK, path  # type: ignore[call-overload]  # a list of texts
    assert seen["clash"] == [], path
    assert seen["small"] == [], path
    assert seen["unlabelled"] == [], path
    assert float(str(seen["least"])) >= 14, path
    assert float(str(seen["over"])) <= 0, path
    assert (seen["headings"], seen["language"]) == (1, "en"), path
