"""One person under two spellings: letters of other scripts that look like Latin ones are no disguise."""

from __future__ import annotations

import unicodedata

import pytest

from sheets.names import _READ_AS, same_person, spelled
from sheets.seal.signatures_people import Person, clash


@pytest.mark.parametrize(
    "other",
    [
        "ada quarrow",
        " Ada  Quarrow ",
        "\N{CYRILLIC CAPITAL LETTER A}da Quarrow",
        "Ad\N{CYRILLIC SMALL LETTER A} Quarrow",
        "\N{GREEK CAPITAL LETTER ALPHA}da Quarr\N{GREEK SMALL LETTER OMICRON}w",
        "Ada Q\N{ARMENIAN SMALL LETTER SEH}arrow",
        "\N{FULLWIDTH LATIN CAPITAL LETTER A}da Quarrow",
    ],
)
def test_what_looks_alike_is_one_person(other: str) -> None:
    assert other != "Ada Quarrow"
    assert same_person("Ada Quarrow", other)
    assert spelled(other, ["Bram Tolliver", "Ada Quarrow"]) == "Ada Quarrow"
    ada, again = Person(name="Ada Quarrow", key="1"), Person(name=other, key="2")
    assert "one person by name" in clash("approved", again, [("prepared", ada)])


def test_a_word_wholly_of_lookalikes_is_read_as_latin() -> None:
    cyrillic = "".join(
        unicodedata.lookup(f"CYRILLIC {name}")
        for name in ("CAPITAL LETTER ER", "SMALL LETTER A", "SMALL LETTER ES", "SMALL LETTER IE")
    )
    assert same_person(f"Ora {cyrillic}", "ora PACE")
    assert same_person(f"Ora {cyrillic.upper()}", "Ora Pace")


@pytest.mark.parametrize(
    ("one", "other"),
    [("Ada Quarrow", "Ida Quarrow"), ("José Marin", "Jose Marin"), ("Иван Жуков", "Ivan Zhukov")],
)
def test_others_stay_others(one: str, other: str) -> None:
    assert not same_person(one, other)


@pytest.mark.parametrize("name", ["Иван Жуков", "Вера Дымова", "Νίκος Μαρής", "Ærøe Þór"])
def test_a_name_in_any_script_is_one_person_s_in_capitals_too(name: str) -> None:
    assert same_person(name, name.lower())
    assert same_person(name, name.upper())


def test_the_table_turns_no_plain_letter() -> None:
    for code, latin in _READ_AS.items():
        assert latin.isascii()
        name = unicodedata.name(chr(code))
        assert "LATIN CAPITAL" not in name
        assert not chr(code).isascii()
