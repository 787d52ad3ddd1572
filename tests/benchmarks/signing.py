"""What three signatures cost beside making the pack that they stand in, and what judging them costs.

Run: PYTHONPATH=.:tests/seal python tests/benchmarks/signing.py. It prints times and their ratio; nothing is
asserted, since times hang on the computer.
"""

from __future__ import annotations

import gc
import io
import statistics
import sys
import time
from collections.abc import Callable
from pathlib import Path

import pikepdf

sys.path.insert(0, str(Path(__file__).parents[1] / "seal"))

from signing_bench import PEOPLE, SIGNED_AT, judged, signed_once, signer

from sheets.pipeline import check, pack, steps
from sheets.seal.keys import KeyKind
from sheets.seal.signatures_report import ROLES

SAMPLE = Path(__file__).parents[2] / "sample_machines" / "clay_mixer.yaml"
RUNS = 15


def main() -> None:
    """Make a sample's pack, then sign it with each kind of key and judge it."""
    matter = steps(check(SAMPLE))
    made = pack(matter).pdf
    unsigned = timed(lambda: pack(matter))
    print(f"unsigned pack: {unsigned:.0f} ms, {len(made) / 1000:.0f} kB")
    with_fields = fielded(made)
    for kind in KeyKind:
        for role in ROLES:
            signer(PEOPLE[role], kind=kind)
        signed = signed_thrice(with_fields, kind)
        took = timed(lambda kind=kind: signed_thrice(with_fields, kind))
        judging = timed(lambda signed=signed: judged(signed))
        print(
            f"{kind.value}: three signatures {took:.0f} ms, {took / unsigned:.2f} of the unsigned pack, "
            f"{(len(signed) - len(with_fields)) / 1000:.0f} kB more; "
            f"judging {judging:.0f} ms ({judged(signed).judgement.value})"
        )


def signed_thrice(pdf: bytes, kind: KeyKind) -> bytes:
    """Stamps included; keys are open already."""
    for role in ROLES:
        pdf = signed_once(pdf, role, signer(PEOPLE[role], kind=kind), when=SIGNED_AT)
    return pdf


def fielded(pdf: bytes) -> bytes:
    """The pack with three empty fields, where it has none."""
    buffer = io.BytesIO()
    with pikepdf.open(io.BytesIO(pdf)) as opened:
        if "/AcroForm" in opened.Root:
            return pdf
        page = opened.pages[0]
        fields = [
            opened.make_indirect(
                pikepdf.Dictionary(
                    Type=pikepdf.Name.Annot, Subtype=pikepdf.Name.Widget, FT=pikepdf.Name.Sig, T=role, F=4,
                    Rect=[72, 100 + 60 * row, 232, 150 + 60 * row], P=page.obj,
                )
            )
            for row, role in enumerate(ROLES)
        ]  # fmt: skip
        page.Annots = pikepdf.Array(fields)
        opened.Root.AcroForm = opened.make_indirect(pikepdf.Dictionary(Fields=fields))
        opened.save(buffer, object_stream_mode=pikepdf.ObjectStreamMode.generate)
    return buffer.getvalue()


def timed(act: Callable[[], object]) -> float:
    """Median of several runs in milliseconds."""
    times = []
    for _ in range(RUNS):
        gc.collect()
        begun = time.perf_counter()
        act()
        times.append(1000.0 * (time.perf_counter() - begun))
    return statistics.median(times)


if __name__ == "__main__":
    main()
