"""When two written names are one person's."""

from __future__ import annotations

import unicodedata
from collections.abc import Iterable
from typing import Final

_CYRILLIC: Final = ("АВЕЅІЈКМНОРСТУХҮԚԜӀавеѕіјкмнорстухүԛԝӏԁһѵ", "ABESIJKMHOPCTYXYQWlabesijkmhopctyxyqwldhv")
_GREEK: Final = ("ΑΒΕΖΗΙΚΜΝΟΡΤΥΧϹϳακνοριυχϲ", "ABEZHIKMNOPTYXCjakvopiuxc")
_OTHER: Final = ("ıɑɡɩʟՕօհսոՏԼ", "iagilOohunSL")
_READ_AS: Final = {
    ord(sign): latin
    for signs, latins in (_CYRILLIC, _GREEK, _OTHER)
    for sign, latin in zip(signs, latins, strict=True)
} | {ord(sign): plain for sign, plain in zip("’ʼ‘‐‑–", "'''---", strict=True)}
"""Letters of other scripts, and the Latin ones that they look like in print, as seen in common typefaces.

A small letter stands with its capital where both scripts have it. Unicode's report 39 lists many more; these
are of scripts whose letters make whole names.
"""


def folded(name: str) -> str:
    """A name without what can't be told apart on paper: capitals, blanks, composed and lookalike letters.

    A word in which nothing but lookalikes and Latin letters stand is read as a Latin one. A name that is
    written in another script stays as it is.
    """
    return " ".join(_read(word).casefold() for word in unicodedata.normalize("NFKC", name).split())


def _read(word: str) -> str:
    """A word in Latin letters, if it can be read so from end to end."""
    plain = unicodedata.normalize("NFC", unicodedata.normalize("NFD", word).translate(_READ_AS))
    latin = all(unicodedata.name(sign, "").startswith("LATIN ") for sign in plain if sign.isalpha())
    return plain if latin else word


def same_person(one: str, other: str) -> bool:
    """Whether two names are one person's, whatever their blanks, capitals and lookalike letters."""
    return folded(one) == folded(other)


def spelled(name: str, known: Iterable[str]) -> str | None:
    """The spelling of that person among names that are known, or None."""
    return next((one for one in known if same_person(one, name)), None)
