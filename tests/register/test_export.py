"""Events as text for whoever reads them without this program, and the form they are hashed in."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Callable

import pytest
import rfc8785
from hypothesis import given
from hypothesis import strategies as st

from sheets.crockford import CROCKFORD, as_printed, in_crockford
from sheets.register.export import json_lines
from sheets.register.form import GREATEST_INTEGER, canonical
from sheets.register.revisions import Revision
from sheets.register.store import Register

WHOLE = st.integers(min_value=-GREATEST_INTEGER, max_value=GREATEST_INTEGER)
TEXT = st.text(alphabet=st.characters(exclude_categories=["Cs"]))
VALUES = st.recursive(
    st.none() | st.booleans() | WHOLE | TEXT,
    lambda inner: (
        st.lists(inner) | st.dictionaries(st.text(alphabet=st.characters(max_codepoint=127)), inner)
    ),
)


@given(value=VALUES)
def test_the_form_is_rfc_8785(value: object) -> None:
    assert canonical(value).encode() == rfc8785.dumps(value)


def test_lines_hold_all_that_an_independent_check_needs(
    register: Register, issue: Callable[..., Revision]
) -> None:
    revision = issue()
    lines = list(json_lines(register))
    assert len(lines) == 5
    previous = "0" * 64
    for number, line in enumerate(lines, start=1):
        assert line.endswith("\n")
        assert "\n" not in line[:-1]
        event = json.loads(line)
        assert (event["sequence"], event["previous"]) == (number, previous)
        parts: list[object] = ["jamnut register 1", number]
        parts += [event[name] for name in ("time", "who", "kind", "machine", "document", "record_id")]
        parts += [rfc8785.dumps(event["data"]).decode(), previous]
        previous = event["hash"]
        assert hashlib.sha256(rfc8785.dumps(parts)).hexdigest() == previous
    assert [json.loads(line)["kind"] for line in lines] == [
        "opened",
        "reserved",
        "signed",
        "signed",
        "issued",
    ]
    assert json.loads(lines[0])["data"] == {"format": 2}
    assert json.loads(lines[1])["time"] == "2031-03-04T12:01:00.000000Z"
    assert json.loads(lines[4])["record_id"] == revision.record_id
    assert list(json_lines(register, after=3)) == lines[3:]


@given(data=st.binary(min_size=7, max_size=40))
def test_crockford_keeps_the_first_bits(data: bytes) -> None:
    """By the definition: each sign is five bits, the first sign the first five."""
    bits = "".join(f"{byte:08b}" for byte in data)
    assert in_crockford(data, 10) == "".join(CROCKFORD[int(bits[at : at + 5], 2)] for at in range(0, 50, 5))


def test_too_few_bytes_for_an_id() -> None:
    with pytest.raises(ValueError, match="too few"):
        in_crockford(b"\x00" * 6, 10)


def test_what_is_misread_is_read_as_printed() -> None:
    assert as_printed("o1-il OL zz") == "011101ZZ"
