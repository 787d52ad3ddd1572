"""Files that can't be read at all, and what YAML would have done to a text."""

from pathlib import Path

import pytest

from sheets.errors import InputError
from sheets.machine.loading import load_machine, load_site, parse_machine
from sheets.machine.reading import read_text

BOMB = b"a: &a [x, x, x, x, x, x, x, x, x]\n" + b"".join(
    f"{name}: &{name} [{', '.join(['*' + before] * 9)}]\n".encode()
    for before, name in zip("abcdefgh", "bcdefghi", strict=True)
)

CASES = [
    ("empty", b"", 1, "empty"),
    ("comments only", b"# nothing\n# at all\n", 1, "empty"),
    ("too large", b"a: 1\n" + b"# much ado\n" * 100_000, 1, "1100005 bytes"),
    ("alias bomb", BOMB, 1, "anchor"),
    ("alias", b"a: 1\nb: *a\n", 2, "alias"),
    ("tag", b"a: 1\nb: !!python/name:os.system\n", 2, "tag"),
    ("two documents", b"a: 1\n---\nb: 1\n", 2, "second document"),
    ("tab", b"a:\n\tb: 1\n", 2, "tab"),
    ("not UTF-8", b"a: 1\nb: \xff\n", 2, "UTF-8"),
    ("two bytes a sign", "a: 1".encode("utf-16"), 1, "UTF-8"),
    ("a text", b"machine\n", 1, "keys"),
    ("a list", b"- a\n- b\n", 1, "keys"),
    ("list as a key", b"a: 1\n? [b]\n: 1\n", 2, "key"),
    ("very deep", b"a: " + b"[" * 5000, 1, "levels deep"),
    ("open bracket", b"a: [1, 2\nb: 3\n", 2, "bracket"),
    ("open quotation mark", b"a: 1\nb: 'x\nc: 1\nd: 2\n", 2, "quotation mark"),
    ("two colons", b"a: 1\nb: c: d\n", 2, "colon"),
    ("no colon", b"a: 1\nb\nc: 2\n", 2, "colon"),
    ("control character", b"a: 1\nb: \x07\n", 2, "character"),
]


@pytest.mark.parametrize(("source", "line", "what"), [pytest.param(*case[1:], id=case[0]) for case in CASES])
def test_refused_with_its_line(source: bytes, line: int, what: str) -> None:
    with pytest.raises(InputError) as caught:
        parse_machine(source, "small.yaml")

    (problem,) = caught.value.problems
    assert problem.where == f"small.yaml, line {line}"
    assert what in problem.what
    assert problem.fix.strip()


def test_everything_stays_a_text() -> None:
    text = read_text(b"NO: NO\ntime: 1:30\nnone: ~\nnull: null\noctal: 010\nday: 2026-01-31\nyes: on\n", "x")

    assert text.data == {
        "NO": "NO",
        "time": "1:30",
        "none": "~",
        "null": "null",
        "octal": "010",
        "day": "2026-01-31",
        "yes": "on",
    }


def test_traps_reach_the_machine_as_written(small_text: str) -> None:
    text = small_text.replace("tag: T-01", "tag: NO").replace("area: Bench", "area: 1:30")

    machine = parse_machine(text.encode(), "small.yaml")

    assert (machine.tag, machine.area) == ("NO", "1:30")


def test_line_ends_and_byte_order_mark_change_nothing(small_text: str) -> None:
    plain = parse_machine(small_text.encode(), "small.yaml")

    assert parse_machine(small_text.replace("\n", "\r\n").encode("utf-8-sig"), "small.yaml") == plain


def test_lines_of_keys_and_list_places() -> None:
    text = read_text(b"# first\na:\n  b: 1\n  c:\n    - x\n    - {d: 1}\n", "x")

    assert text.lines == {
        (): 1,
        ("a",): 2,
        ("a", "b"): 3,
        ("a", "c"): 4,
        ("a", "c", 0): 5,
        ("a", "c", 1): 6,
        ("a", "c", 1, "d"): 6,
    }


@pytest.mark.parametrize("load", [load_machine, load_site])
def test_file_that_is_not_there(tmp_path: Path, load: object) -> None:
    for path in (tmp_path / "nowhere.yaml", tmp_path):
        with pytest.raises(InputError) as caught:
            load(path)  # type: ignore[operator]  # one of two functions of the same shape

        assert path.name in str(caught.value)
        assert caught.value.problems[0].fix


def test_what_is_loaded_is_kept_as_bytes(tmp_path: Path, small_text: str) -> None:
    path = tmp_path / "small.yaml"
    path.write_bytes(small_text.encode())

    loaded = load_machine(path)

    assert (loaded.name, loaded.source) == ("small.yaml", small_text.encode())
    assert loaded.machine == parse_machine(small_text.encode(), "another name")
