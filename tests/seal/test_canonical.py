"""Canonical bytes and digest: what they depend on, and what they don't."""

from __future__ import annotations

import json
from collections.abc import Iterator
from dataclasses import dataclass, fields, is_dataclass, make_dataclass, replace
from enum import Enum
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from sheets.pages.compose.matter import Matter
from sheets.pages.document import PowerState
from sheets.pipeline import content
from sheets.seal.canonical import CROCKFORD, canonical_bytes, digest

NAMES = ("gauge", "reading", "nature", "checked", "parts")


@dataclass(frozen=True, kw_only=True)
class Face:
    """A value of every type that documents hold."""

    gauge: str
    reading: float
    state: PowerState
    window: tuple[float, float]
    marks: tuple[str, ...]
    checked: bool
    count: int
    beside: Face | None = None


FACE = Face(
    gauge="G1",
    reading=206.5,
    state=PowerState.LOCKED,
    window=(202.0, 210.0),
    marks=("TP1", "Ω…²"),
    checked=True,
    count=3,
)


def printed(value: object) -> str:
    return digest(canonical_bytes(value))


def refuse_number(digits: str) -> None:
    raise AssertionError(f"a float in canonical bytes: {digits}")


VALUES = st.recursive(
    st.none()
    | st.booleans()
    | st.integers(-(2**53) + 1, 2**53 - 1)
    | st.floats(-1e9, 1e9)
    | st.text(st.characters(codec="utf-8"), max_size=8),
    lambda inner: st.lists(inner, max_size=4).map(tuple),
    max_leaves=12,
)


@given(values=st.tuples(*(VALUES for _ in NAMES)), order=st.permutations(range(len(NAMES))))
def test_order_of_fields_changes_nothing(values: tuple[object, ...], order: list[int]) -> None:
    """Neither the order in which fields are declared nor that in which they are given."""
    straight = make_dataclass("Row", NAMES, frozen=True, kw_only=True)
    shuffled = make_dataclass("Row", [NAMES[place] for place in order], frozen=True, kw_only=True)
    given_straight = straight(**dict(zip(NAMES, values, strict=True)))
    given_shuffled = shuffled(**{NAMES[place]: values[place] for place in order})
    assert canonical_bytes(given_straight) == canonical_bytes(given_shuffled)
    backwards = straight(**dict(reversed(list(zip(NAMES, values, strict=True)))))
    assert canonical_bytes(backwards) == canonical_bytes(given_straight)


@given(value=VALUES)
def test_no_float_ever_stands_in_the_bytes(value: object) -> None:
    json.loads(canonical_bytes(value), parse_float=refuse_number, parse_constant=refuse_number)


def test_no_float_stands_in_the_content_of_a_sample(any_sample: Matter) -> None:
    document, _ = content(any_sample)
    json.loads(canonical_bytes(document), parse_float=refuse_number, parse_constant=refuse_number)


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (206.0, "206"),
        (206.5, "206.5"),
        (0.1 + 0.2, "0.3"),
        (-0.0, "0"),
        (1e-7, "0"),
        (-12.5, "−12.5"),
    ],
)
def test_a_number_stands_as_its_digits(value: float, text: str) -> None:
    """Its last bits, which depend on the machine that computes, don't reach the digest."""
    assert json.loads(canonical_bytes(value)) == text


@pytest.mark.parametrize("value", [float("nan"), float("inf"), float("-inf")])
def test_what_is_no_number_is_refused(value: float) -> None:
    with pytest.raises(ValueError, match="can't be shown"):
        canonical_bytes((value,))


@pytest.mark.parametrize("value", [{"a": 1}, {1, 2}, b"bytes", 1j, object(), Face])
def test_types_that_documents_do_not_hold_are_refused(value: object) -> None:
    with pytest.raises(TypeError, match="no canonical form"):
        canonical_bytes((value,))


def test_classes_with_equal_fields_are_told_apart() -> None:
    one, other = (make_dataclass(name, ["text"], frozen=True)("stop") for name in ("Order", "Reason"))
    assert canonical_bytes(one) != canonical_bytes(other)


@given(data=st.binary(max_size=64))
def test_digest_is_sixteen_characters_that_are_not_misread(data: bytes) -> None:
    found = digest(data)
    assert len(found) == 16
    assert set(found) <= set("0123456789ABCDEFGHJKMNPQRSTVWXYZ") == set(CROCKFORD)


@pytest.mark.parametrize(
    "other",
    [
        replace(FACE, gauge="G2"),
        replace(FACE, gauge="g1"),
        replace(FACE, gauge="G1 "),
        replace(FACE, reading=206.500001),
        replace(FACE, reading=-206.5),
        replace(FACE, state=PowerState.POWERED),
        replace(FACE, window=(202.0, 211.0)),
        replace(FACE, window=(210.0, 202.0)),
        replace(FACE, marks=("Ω…²", "TP1")),
        replace(FACE, marks=("TP1",)),
        replace(FACE, marks=("TP1Ω…²",)),
        replace(FACE, checked=False),
        replace(FACE, count=4),
        replace(FACE, count=1, checked=True),
        replace(FACE, beside=FACE),
    ],
)
def test_any_change_changes_the_digest(other: Face) -> None:
    assert printed(FACE) != printed(other)


def changes(value: Any) -> Iterator[Any]:
    """The value with one leaf changed, for every leaf."""
    if isinstance(value, Enum):
        yield from (other for other in type(value) if other is not value)
    elif isinstance(value, bool):
        yield not value
    elif isinstance(value, int | float):
        yield value + 1
    elif isinstance(value, str):
        yield value + "."
    elif isinstance(value, tuple):
        for place, item in enumerate(value):
            yield from ((*value[:place], other, *value[place + 1 :]) for other in changes(item))
            yield (*value[:place], *value[place + 1 :])
    elif is_dataclass(value) and not isinstance(value, type):
        for field in fields(value):
            yield from (
                replace(value, **{field.name: other}) for other in changes(getattr(value, field.name))
            )


def test_every_leaf_of_a_pack_counts(kiln_pusher: Matter) -> None:
    """Each leaf of each section once; the sections alone, so that it stays quick."""
    document, _ = content(kiln_pusher)
    count = 0
    for section in document.sections:
        before = canonical_bytes(section)
        for other in changes(section):
            count += 1
            assert canonical_bytes(other) != before, other
    assert count > 1000
    sections = [replace(document, sections=document.sections[:end]) for end in range(len(document.sections))]
    assert len({printed(part) for part in (*sections, document)}) == len(document.sections) + 1


def test_the_same_content_has_the_same_digest(any_sample: Matter) -> None:
    """Composed anew, from equal values."""
    (one, first), (other, second) = content(any_sample), content(any_sample)
    assert one is not other
    assert (canonical_bytes(one), first) == (canonical_bytes(other), second)
    assert printed(one) == first
