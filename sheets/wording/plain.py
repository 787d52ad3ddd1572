"""What data and lines for people have in common, whatever they say."""

from __future__ import annotations

from collections.abc import Iterable, Iterator

Json = None | bool | int | float | str | list["Json"] | dict[str, "Json"]
FORMAT = 1


def rounded(value: float) -> float:
    """A figure without the last bits, which depend on the computer."""
    return round(value, 6)


def counted(count: int, thing: str) -> str:
    """A number of things: ``1 gauge``, ``2 gauges``."""
    return f"{count} {thing}" if count == 1 else f"{count} {thing}s"


def columns(rows: Iterable[tuple[str, ...]]) -> Iterator[str]:
    """Rows in columns, two spaces apart."""
    kept = list(rows)
    widths = [max(len(row[place]) for row in kept) for place in range(len(kept[0]))]
    for row in kept:
        yield "  ".join(cell.ljust(width) for cell, width in zip(row, widths, strict=True)).rstrip()
