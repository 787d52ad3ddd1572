"""What three signatures cost beside making the pack that they stand in, and what judging them costs.

Run: PYTHONPATH=. python tests/benchmarks/signing.py. It prints times and their ratio; nothing is
asserted, since times hang on the computer.
"""

from __future__ import annotations

import gc
import statistics
import sys
import time
from collections.abc import Callable
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[1] / "seal"))
sys.path.insert(0, str(Path(__file__).parents[1] / "pages"))

from sample_document import ISSUE
from signing_bench import PEOPLE, SIGNED_AT, judged, signed_once, signer

from sheets import pipeline
from sheets.pages.document import Layout
from sheets.pages.layout import place
from sheets.pages.press import pdf_bytes
from sheets.pipeline.attaching import attachments_of
from sheets.pipeline.printing import whole_content
from sheets.seal.keys import KeyKind
from sheets.seal.signatures_report import ROLES

SAMPLE = Path(__file__).parents[2] / "sample_machines" / "clay_mixer.yaml"
RUNS = 15


def main() -> None:
    """Make a sample's pack, then sign it with each kind of key and judge it."""
    matter = pipeline.steps(pipeline.check(SAMPLE))
    said = whole_content(matter)
    files = attachments_of(matter, Layout(), said.data)

    def unsigned_pack() -> bytes:
        pages = place(said.document, Layout(), ISSUE, digest=said.digest)
        return pdf_bytes(pages, said.document, issue=ISSUE, attachments=files)

    made = unsigned_pack()
    unsigned = timed(unsigned_pack)
    print(f"unsigned pack: {unsigned:.0f} ms, {len(made) / 1000:.0f} kB")
    for kind in KeyKind:
        for role in ROLES:
            signer(PEOPLE[role], kind=kind)
        signed = signed_thrice(made, kind)
        took = timed(lambda kind=kind: signed_thrice(made, kind))
        judging = timed(lambda signed=signed: judged(signed))
        print(
            f"{kind.value}: three signatures {took:.0f} ms, {took / unsigned:.2f} of the unsigned pack, "
            f"{(len(signed) - len(made)) / 1000:.0f} kB more; "
            f"judging {judging:.0f} ms ({judged(signed).judgement.value})"
        )


def signed_thrice(pdf: bytes, kind: KeyKind) -> bytes:
    """Stamps included; keys are open already."""
    for role in ROLES:
        pdf = signed_once(pdf, role, signer(PEOPLE[role], kind=kind), when=SIGNED_AT)
    return pdf


def timed(act: Callable[[], object]) -> float:
    """Median of several runs in milliseconds of this process, since others may be at work beside it."""
    times = []
    for _ in range(RUNS):
        gc.collect()
        begun = time.process_time()
        act()
        times.append(1000.0 * (time.process_time() - begun))
    return statistics.median(times)


if __name__ == "__main__":
    main()
