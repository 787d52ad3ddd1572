"""The bytes that signatures cover, found without reading the file as a PDF.

These rules are cheap and come first: whatever fails here is bad, and nothing of such a file is parsed.
"""

from __future__ import annotations

import hashlib
import re
from dataclasses import dataclass
from typing import Final

from sheets.seal.signatures_report import Cause, Flaw

_BYTE_RANGE: Final = re.compile(rb"/ByteRange ?\[ ?(\d{1,10}) (\d{1,10}) (\d{1,10}) (\d{1,10}) ?\]")
_HEX: Final = re.compile(rb"[0-9A-F]*")


@dataclass(frozen=True, kw_only=True)
class SignedRange:
    """What one signature covers: the file up to `end` but for its own gap."""

    gap_start: int
    """Place of the sign < before the container."""
    gap_end: int
    """First place behind the sign >."""
    end: int

    def digest(self, pdf: bytes, algorithm: str) -> bytes:
        """Digest of the covered bytes by an algorithm of hashlib."""
        view = memoryview(pdf)
        state = hashlib.new(algorithm, view[: self.gap_start])
        state.update(view[self.gap_end : self.end])
        return state.digest()


def signed_ranges(pdf: bytes) -> tuple[SignedRange, ...]:
    """Ranges that stand around a gap in angle brackets, in the order of their ends.

    Whether the PDF's own fields hold these and no others is asked when the file is read.
    """
    found = []
    for match in _BYTE_RANGE.finditer(pdf):
        first, gap_start, gap_end, rest = (int(figure) for figure in match.groups())
        fits = first == 0 and gap_start < gap_end <= len(pdf)
        if fits and pdf[gap_start : gap_start + 1] == b"<" and pdf[gap_end - 1 : gap_end] == b">":
            found.append(SignedRange(gap_start=gap_start, gap_end=gap_end, end=gap_end + rest))
    return tuple(sorted(found, key=lambda one: one.end))


def check_ranges(pdf: bytes, ranges: tuple[SignedRange, ...]) -> None:
    """Each covers all that stood before it, and the last one the whole file. Raises Flaw."""
    before = 0
    for one in ranges:
        if not before <= one.gap_start < one.gap_end <= one.end <= len(pdf):
            raise Flaw(Cause.COVERAGE, "A signature doesn't cover all that stood before it.")
        before = one.end
    if ranges and ranges[-1].end != len(pdf):
        beyond = len(pdf) - ranges[-1].end
        raise Flaw(Cause.TRAILING, f"{beyond} bytes stand after the end of the last signature.")


def container_bytes(pdf: bytes, signed: SignedRange) -> bytes:
    """The container in a gap: capital hexadecimal digits, then zeros to the end of the gap. Raises Flaw."""
    text = pdf[signed.gap_start + 1 : signed.gap_end - 1]
    if len(text) % 2 or _HEX.fullmatch(text) is None:
        raise Flaw(Cause.CONTAINER, "The gap holds more than the digits of a container.")
    packed = bytes.fromhex(text.decode("ascii"))
    length = _outer_length(packed)
    if length > len(packed) or packed[length:].strip(b"\0"):
        raise Flaw(Cause.CONTAINER, "The gap isn't a container that is followed by zeros alone.")
    return packed[:length]


def _outer_length(packed: bytes) -> int:
    """Length of a DER sequence by its head. Source: ITU-T X.690, 8.1.3 and 10.1."""
    if len(packed) < 4 or packed[0] != 0x30 or packed[1] not in (0x81, 0x82):
        raise Flaw(Cause.CONTAINER, "The gap doesn't begin with a container.")
    octets = packed[1] - 0x80
    length = int.from_bytes(packed[2 : 2 + octets], "big")
    return 2 + octets + length
