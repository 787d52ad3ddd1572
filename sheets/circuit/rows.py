"""Rows of a family while it is filled, and its columns as arrays."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any

import numpy as np

from sheets.circuit.smooth import Bools, Floats, Ints


@dataclass
class Rows:
    """One row an element."""

    columns: dict[str, list[Any]] = field(default_factory=dict)

    def add(self, **values: object) -> None:
        """Add an element; every row names the same columns."""
        for name, value in values.items():
            self.columns.setdefault(name, []).append(value)

    def ids(self, name: str) -> tuple[str, ...]:
        """A column of names."""
        return tuple(self.columns.get(name, ()))

    def index(self, name: str) -> Ints:
        """A column of indices."""
        return np.array(self.columns.get(name, ()), dtype=np.intp)

    def floats(self, name: str) -> Floats:
        """A column of figures."""
        return np.array(self.columns.get(name, ()), dtype=np.float64)

    def truths(self, name: str) -> Bools:
        """A column of truths."""
        return np.array(self.columns.get(name, ()), dtype=np.bool_)
