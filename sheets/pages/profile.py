"""The colour space that black and white are meant in: sRGB, as an ICC profile made here.

A display profile of version 2 with three colorants and one curve. Sources: IEC 61966-2-1:1999 for the
primaries, the white and the curve; ICC.1:2001-04 for the layout and for D50.
"""

from __future__ import annotations

import struct
from functools import cache
from typing import Final

Vector = tuple[float, float, float]
Matrix = tuple[Vector, Vector, Vector]

PRIMARIES: Final = ((0.64, 0.33), (0.30, 0.60), (0.15, 0.06))
WHITE: Final = (0.3127, 0.3290)
D50: Final = (0.9642, 1.0, 0.8249)
BRADFORD: Final = ((0.8951, 0.2664, -0.1614), (-0.7502, 1.7135, 0.0367), (0.0389, -0.0685, 1.0296))
"""From XYZ to cone responses, for adapting one white to another."""
STEPS: Final = 1024
"""Points of the curve."""
MADE: Final = (1999, 10, 18, 0, 0, 0)
"""Fixed date in the profile, so that it has the same bytes always."""


def times(matrix: Matrix, vector: Vector) -> Vector:
    """A matrix by a vector."""
    a, b, c = (sum(m * v for m, v in zip(row, vector, strict=True)) for row in matrix)
    return (a, b, c)


def inverse(matrix: Matrix) -> Matrix:
    """The inverse, by cofactors."""
    (a, b, c), (d, e, f), (g, h, i) = matrix
    whole = a * (e * i - f * h) - b * (d * i - f * g) + c * (d * h - e * g)
    return (
        ((e * i - f * h) / whole, (c * h - b * i) / whole, (b * f - c * e) / whole),
        ((f * g - d * i) / whole, (a * i - c * g) / whole, (c * d - a * f) / whole),
        ((d * h - e * g) / whole, (b * g - a * h) / whole, (a * e - b * d) / whole),
    )


def tristimulus(x: float, y: float) -> Vector:
    """XYZ of a chromaticity at luminance 1."""
    return (x / y, 1.0, (1 - x - y) / y)


def colorants() -> tuple[Vector, Vector, Vector]:
    """XYZ of full red, green and blue, seen under D50 instead of the white of the display."""
    red, green, blue = (tristimulus(*primary) for primary in PRIMARIES)
    white = tristimulus(*WHITE)
    columns: Matrix = tuple(zip(red, green, blue, strict=True))  # type: ignore[assignment]  # three by three
    shares = times(inverse(columns), white)
    seen, wanted = times(BRADFORD, white), times(BRADFORD, D50)
    back = inverse(BRADFORD)

    def adapted(colour: Vector, share: float) -> Vector:
        x, y, z = (
            share * cone * to / of for cone, of, to in zip(times(BRADFORD, colour), seen, wanted, strict=True)
        )
        return times(back, (x, y, z))

    return (adapted(red, shares[0]), adapted(green, shares[1]), adapted(blue, shares[2]))


def linear(value: float) -> float:
    """Light from a value between 0 and 1. Source: IEC 61966-2-1, 5.2."""
    return value / 12.92 if value <= 0.04045 else ((value + 0.055) / 1.055) ** 2.4


def fixed(value: float) -> bytes:
    """A signed number with 16 bits behind the point."""
    return struct.pack(">i", round(value * 65536))


def xyz_tag(colour: Vector) -> bytes:
    """A tag that holds one colour."""
    return b"XYZ \0\0\0\0" + b"".join(fixed(part) for part in colour)


@cache
def srgb_profile() -> bytes:
    """The profile. The same bytes always."""
    name = b"sRGB, after IEC 61966-2-1\0"
    curve = struct.pack(">4s4xI", b"curv", STEPS)
    curve += b"".join(struct.pack(">H", round(65535 * linear(k / (STEPS - 1)))) for k in range(STEPS))
    description = struct.pack(">4s4xI", b"desc", len(name)) + name + bytes(4 + 4 + 2 + 1 + 67)
    red, green, blue = colorants()
    held = (
        (description, (b"desc",)),
        (b"text\0\0\0\0" + b"Computed from published figures; free for any use.\0", (b"cprt",)),
        (xyz_tag(D50), (b"wtpt",)),
        (xyz_tag(red), (b"rXYZ",)),
        (xyz_tag(green), (b"gXYZ",)),
        (xyz_tag(blue), (b"bXYZ",)),
        (curve, (b"rTRC", b"gTRC", b"bTRC")),
    )
    count = sum(len(names) for _, names in held)
    offset = 128 + 4 + 12 * count
    table, body = struct.pack(">I", count), b""
    for data, names in held:
        padded = data + bytes(-len(data) % 4)
        for tag in names:
            table += struct.pack(">4sII", tag, offset + len(body), len(data))
        body += padded
    header = struct.pack(
        ">I4xI4s4s4s6H4s4x4x4x4x8xI12s4x44x",
        offset + len(body),
        0x02100000,
        b"mntr",
        b"RGB ",
        b"XYZ ",
        *MADE,
        b"acsp",
        0,
        b"".join(fixed(part) for part in D50),
    )
    return header + table + body
