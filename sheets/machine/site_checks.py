"""What must fit between a machine file and the site file, or the policy figures that stand for one."""

from __future__ import annotations

from collections.abc import Iterator

from sheets.errors import quoted
from sheets.machine.flaws import Flaw
from sheets.machine.model import Machine
from sheets.machine.site import Policies, Site
from sheets.quantities import number


def site_check(machine: Machine, site: Site | None) -> Iterator[Flaw]:
    """Everything in the machine file that doesn't fit the site; places are in the machine file."""
    if site is not None and _plain(site.plant) != _plain(machine.plant):
        yield Flaw(
            at=("plant",),
            what=f"The site file is of {quoted(site.plant)}, and this machine stands in "
            f"{quoted(machine.plant)}: its telephones, rules and signers would be another works'.",
            fix="Name the site file of this works with --site; if it is the same works, write it alike.",
        )
    yield from _oil(machine, site.policies if site else Policies())


def _plain(name: str) -> str:
    return " ".join(name.casefold().split())


def _oil(machine: Machine, policies: Policies) -> Iterator[Flaw]:
    """The window in which settings are made lies under the limit, also where policy gives an end of it."""
    fluid = machine.fluid
    lowest, highest = fluid.setting_window_c(
        lowest_c=policies.lowest_setting_temperature_c, highest_c=policies.highest_setting_temperature_c
    )
    if highest > fluid.limit_temperature_c:
        window = f"{number(lowest, decimals=0)} to {number(highest, decimals=0)} °C"
        yield Flaw(
            at=("fluid", "limit temperature"),
            what=f"The work stops at this temperature, and settings are made in oil of {window}.",
            fix="Write the temperature above which the work stops; for another window give "
            "lowest setting temperature and highest setting temperature.",
        )
