"""The one answer that search, run and solver give."""

from enum import Enum


class Verdict(Enum):
    """Four outcomes. Only the first lets anything be issued."""

    ESTABLISHED = "established"
    REFUTED = "refuted"
    NOT_FOUND = "not found within the limit"
    NOT_ESTABLISHED = "not established"
