"""The code on pages and tags: where the record of an issued pack is opened."""

from __future__ import annotations

from functools import lru_cache
from typing import Literal

import qrcode
from qrcode.constants import ERROR_CORRECT_M
from qrcode.util import QRData

from sheets.errors import InputError, Problem
from sheets.pages.document import IssueContext

BYTES_MOST = 84
"""What version 5 holds at level M (ISO/IEC 18004, table 7, byte mode)."""

BYTE_MODE: Literal[4] = 4
"""Mode indicator of bytes (ISO/IEC 18004, table 2)."""

MASK = 2
"""Fixed mask: searching for the best one takes most of the time and readers don't need it."""


def record_url(issue: IssueContext, digest: str) -> str:
    """Address in the code. The digest is the content digest, of which 8 characters are carried."""
    return f"{issue.record_address.rstrip('/')}/r/{issue.record_id}?d={digest[:8]}&v={issue.revision}"


@lru_cache(maxsize=16)
def matrix(url: str) -> tuple[tuple[bool, ...], ...]:
    """Dark modules of a code, level M, without a quiet zone.

    Raises InputError when the address has more bytes than version 5 holds.
    """
    data = url.encode("utf-8")
    if len(data) > BYTES_MOST:
        raise InputError(
            Problem(
                where="record address",
                what=f"the code would hold {len(data)} bytes, at most {BYTES_MOST} stay readable: {url}",
                fix="give a shorter record address in the site file",
            )
        )
    code = qrcode.QRCode(error_correction=ERROR_CORRECT_M, border=0, mask_pattern=MASK)
    code.add_data(QRData(data, mode=BYTE_MODE), optimize=0)
    code.make(fit=True)
    return tuple(tuple(bool(module) for module in row) for row in code.get_matrix())
