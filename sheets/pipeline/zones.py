"""The time zone of a works: of its site file, or of the one that the register kept with a pack."""

from __future__ import annotations

from zoneinfo import ZoneInfo

from sheets.errors import InputError, Problem, quoted
from sheets.machine.loading import parse_site
from sheets.machine.site import Site
from sheets.register.revisions import Revision


def zone_of(site: Site) -> ZoneInfo:
    """The time zone of a works. Raises InputError if it isn't known."""
    try:
        return ZoneInfo(site.zone)
    except (KeyError, ValueError, OSError):  # a folder of zones is no zone, either
        raise InputError(
            Problem(
                where="site file, zone",
                what=f"The time zone {quoted(site.zone)} isn't known.",
                fix="Write an IANA name, such as Europe/Lisbon, or UTC.",
            )
        ) from None


def zone_kept(revision: Revision) -> ZoneInfo | None:
    """The time zone of the works when a revision was issued; None where that can't be told any more.

    Days are then held against the widest zones on earth.
    """
    kept = revision.issue.kept if revision.issue is not None else None
    if kept is None or not kept.site:
        return None
    try:
        return zone_of(parse_site(kept.site.encode(), "site file"))
    except InputError:  # a site file of a form that isn't read any more
        return None
