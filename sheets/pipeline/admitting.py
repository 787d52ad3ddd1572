"""Who may sign in at the record page: a file beside the register, never in it, since passwords change."""

from __future__ import annotations

import json
from collections.abc import Iterator
from dataclasses import asdict, dataclass
from enum import StrEnum
from pathlib import Path
from typing import Any, Final

from sheets.errors import InputError, Problem, quoted
from sheets.machine.files import bytes_of, move_into_place
from sheets.register.form import name_text
from sheets.seal.passwords import password_fits, password_hash

FORMAT: Final = 1
SHORTEST: Final = 10
LONGEST: Final = 200


class Role(StrEnum):
    """What somebody may do at the record page; each may do what those before it may."""

    READER = "reader"
    TECHNICIAN = "technician"
    """Records readings and tags."""
    APPROVER = "approver"
    """Accepts by name what lies outside a window."""

    def reaches(self, needed: Role) -> bool:
        """Whether it is at least that."""
        ranks = list(Role)
        return ranks.index(self) >= ranks.index(needed)


@dataclass(frozen=True, kw_only=True)
class User:
    """One who may sign in."""

    name: str
    """As it stands in events."""
    role: Role
    hash: str


def users_of(file: Path) -> tuple[User, ...]:
    """Everybody in a users file. Raises InputError if it isn't one."""
    try:
        held: Any = json.loads(bytes_of(file))
        if held["format"] == FORMAT:
            return tuple(
                User(name=str(one["name"]), role=Role(one["role"]), hash=str(one["hash"]))
                for one in held["users"]
            )
    except (ValueError, KeyError, TypeError, RecursionError):
        pass
    raise InputError(
        Problem(
            where=str(file),
            what="This is no users file of this version.",
            fix="Make one with jamnut users.",
        )
    )


def user_named(found: tuple[User, ...], name: str, password: str) -> User | None:
    """The user with that ``name`` if the ``password`` is theirs; as slow for a name that nobody has."""
    user = next((one for one in found if one.name == name), None)
    fits = password_fits(user.hash if user else "", password[:LONGEST])
    return user if fits else None


def users(file: Path) -> Iterator[str]:
    """Who may sign in, one line each. Raises InputError."""
    found = users_of(file)
    yield from (f"{one.name}: {one.role}" for one in found)
    if not found:
        yield "nobody"


def set_user(file: Path, *, name: str, role: str, password: str) -> str:
    """Adds a user or changes one; makes the file if it isn't there.

    ``role``: reader, technician or approver. Raises InputError for a ``name`` that can't stand in an event,
    and for a ``password`` that is too short or too long.
    """
    name_text("name", name)
    if not SHORTEST <= len(password) <= LONGEST:
        raise InputError(
            Problem(
                where="password",
                what=f"It has {len(password)} characters.",
                fix=f"Give one of {SHORTEST} to {LONGEST}; a few words in a row serve well.",
            )
        )
    user = User(name=name, role=Role(role), hash=password_hash(password))
    others = [one for one in (users_of(file) if file.exists() else ()) if one.name != name]
    _write(file, [*others, user])
    return f"{name} may sign in as {user.role}"


def remove_user(file: Path, *, name: str) -> str:
    """Takes a user out, and signs them out. Raises InputError for a ``name`` that isn't there."""
    found = users_of(file)
    if name not in {one.name for one in found}:
        raise InputError(
            Problem(
                where=str(file),
                what=f"There is nobody named {quoted(name)} in it.",
                fix="Look who is: jamnut users.",
            )
        )
    _write(file, [one for one in found if one.name != name])
    return f"{name} may no longer sign in"


def _write(file: Path, found: list[User]) -> None:
    listed = [asdict(one) for one in sorted(found, key=lambda one: one.name)]
    data = json.dumps({"format": FORMAT, "users": listed}, indent=2, ensure_ascii=False)
    fix = "Name a file in a folder that exists and that you may write to."
    move_into_place(file, f"{data}\n".encode(), fix=fix, private=True)
