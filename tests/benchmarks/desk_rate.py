"""The record page against a bare page of its size: requests a second through the same server, as a ratio.

Goal: at least half. Both are served by uvicorn with one worker on loopback, and asked over one connection
that is kept open, so what is compared is the work behind a request.

    PYTHONPATH=. .venv/bin/python tests/benchmarks/desk_rate.py
"""

from __future__ import annotations

import http.client
import socket
import sys
import tempfile
import threading
import time
from pathlib import Path
from statistics import median

import uvicorn
from starlette.applications import Starlette
from starlette.responses import HTMLResponse
from starlette.routing import Route

sys.path.insert(0, str(Path(__file__).resolve().parents[1] / "desk"))
from desk_bench import Bench, code_of, kept, list_gauge

from sheets import pipeline
from sheets.desk.app import create

REQUESTS = 400
ROUNDS = 5
JOBS = 60
"""Past jobs in the register, each with two readings: five years of one a month."""


def served(app: object) -> tuple[uvicorn.Server, int]:
    with socket.socket() as found:
        found.bind(("127.0.0.1", 0))
        port = found.getsockname()[1]
    server = uvicorn.Server(uvicorn.Config(app, port=port, log_level="error", access_log=False))  # type: ignore[arg-type]  # an app
    threading.Thread(target=server.run, daemon=True).start()
    while not server.started:
        time.sleep(0.05)
    return server, port


def rate(port: int, path: str) -> tuple[float, int]:
    """Requests a second, and bytes of a page."""
    connection = http.client.HTTPConnection("127.0.0.1", port)
    size = 0
    begun = time.perf_counter()
    for _ in range(REQUESTS):
        connection.request("GET", path)
        answer = connection.getresponse()
        size = len(answer.read())
        assert answer.status == 200
    took = time.perf_counter() - begun
    connection.close()
    return REQUESTS / took, size


def main() -> None:
    bench = Bench(Path(tempfile.mkdtemp()) / "works")
    list_gauge(bench.register)
    issued = bench.issue(kept=kept())
    for _ in range(JOBS):
        reading = {"row": "1", "as found": "207 bar", "as left": "205 bar", "gauge": "17", "seal": "none"}
        answers = {
            "format": "1", "record": issued.record_id, "why": "check", "day": "2031-03-04",
            "people": ["Tom Ness"], "from paper": "no", "readings": [reading], "end": "done",
        }  # fmt: skip
        pipeline.record_answers(answers, register_at=bench.register, by="Tom Ness", when=bench.clock())
    desk, desk_port = served(create(bench.settings()))
    _, size = rate(desk_port, code_of(issued))
    page = "x" * size

    async def bare(_: object) -> HTMLResponse:
        return HTMLResponse(page)

    plain, plain_port = served(Starlette(routes=[Route("/", bare)]))
    rate(plain_port, "/")
    ratios = []
    for _ in range(ROUNDS):
        ours, theirs = rate(desk_port, code_of(issued))[0], rate(plain_port, "/")[0]
        ratios.append(ours / theirs)
        print(f"page {ours:7.0f}/s   bare {theirs:7.0f}/s   ratio {ours / theirs:.2f}   {size} bytes")
    print(f"median ratio {median(ratios):.2f} (goal: at least 0.50)")
    desk.should_exit = plain.should_exit = True


if __name__ == "__main__":
    main()
