"""Writing DER, so that a container can be built anew from what was read of it and compared."""

from __future__ import annotations


def tlv(tag: int, *parts: bytes) -> bytes:
    """One element with a tag of one byte and the shortest length. Source: ITU-T X.690, 8.1.3 and 10.1."""
    body = b"".join(parts)
    if len(body) < 0x80:
        return bytes((tag, len(body))) + body
    octets = (len(body).bit_length() + 7) // 8
    return bytes((tag, 0x80 | octets)) + len(body).to_bytes(octets, "big") + body


SEQUENCE = 0x30
SET = 0x31
OCTETS = 0x04
TAGGED_0 = 0xA0
TAGGED_1 = 0xA1
INTEGER_1 = tlv(0x02, b"\x01")
INTEGER_3 = tlv(0x02, b"\x03")
NULL = tlv(0x05)


def oid(dotted: str) -> bytes:
    """An object identifier. Source: ITU-T X.690, 8.19."""
    first, second, *rest = (int(part) for part in dotted.split("."))
    body = bytearray((40 * first + second,))
    for number in rest:
        digits = [number & 0x7F]
        while number := number >> 7:
            digits.append(0x80 | (number & 0x7F))
        body.extend(reversed(digits))
    return tlv(0x06, bytes(body))
