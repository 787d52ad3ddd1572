"""The site file: telephones, local rules, and the policy figures of the works."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Annotated, Literal, get_args

from sheets.machine.fields import (
    Bar,
    Entry,
    FormatNumber,
    PositiveBar,
    Quantity,
    Ratio,
    SaidText,
    SettingCelsius,
    Text,
    YesNo,
)
from sheets.machine.flaws import Flaw
from sheets.machine.words import Name

AccuracyRatio = Annotated[float, Quantity(unit="", example="3", least=1.0, most=20.0)]
TrySecond = Annotated[float, Quantity(unit="s", example="60 s", least=5.0, most=600.0)]
"""Nobody turns and reads in less, and all power of the drive goes into the oil meanwhile."""
RecordAddress = Annotated[
    str,
    Name(
        pattern=r"https?://[A-Za-z0-9][A-Za-z0-9.-]*(?::[0-9]{1,5})?(?:/[A-Za-z0-9_-]+)*",
        says="a web address without a closing slash",
        example="https://records.example",
        longest=54,  # the code on a page has room for 84 characters, and 30 of them are the record's own
    ),
]


TimeServer = Annotated[
    str,
    Name(
        pattern=r"https?://[A-Za-z0-9][A-Za-z0-9.-]*(?::[0-9]{1,5})?(?:/[A-Za-z0-9_./-]*)?",
        says="a web address",
        example="https://time.example",
        longest=200,
    ),
]


class Policies(Entry):
    """Figures of common practice, for where neither maker nor owner gives one. The pages call them policy."""

    window_ratio: Ratio = 0.02
    """Half of the accepted window over the target; the larger of this and the smallest half."""
    window_minimum_bar: PositiveBar = 3.0
    """Smallest half of the accepted window."""
    standby_window_bar: PositiveBar = 1.0
    """Half of the accepted window for a standby or a differential."""
    reserve_ratio: Ratio = 0.05
    """Reserve of a compensator over work pressure, margin and losses, and of a working limit."""
    gap_bar: Bar = 5.0
    """Between the top of a compensator's window and the closing pressure of the relief above it."""
    accuracy_ratio: AccuracyRatio = 3.0
    """Half of a printed window over the gauge's error; below it a warning."""
    compensator_width_bar: PositiveBar = 4.0
    """From full stroke to none, where the plate gives none."""
    direct_opening_ratio: Ratio = 0.80
    """Opening pressure of a direct acting relief over its setting."""
    direct_closing_ratio: Ratio = 0.75
    """Closing pressure of a direct acting relief over its setting."""
    pilot_opening_ratio: Ratio = 0.93
    """Opening pressure of a pilot operated relief over its setting."""
    pilot_closing_ratio: Ratio = 0.90
    """Closing pressure of a pilot operated relief over its setting."""
    longest_try_s: TrySecond = 60.0
    """Longest time of one try over a relief; the oil's own warming may allow less."""
    shortest_try_s: TrySecond = 10.0
    """Shortest in which somebody can turn and read: where the oil allows less, the job is refused."""
    lowest_setting_temperature_c: SettingCelsius = 45.0
    """Lower end of the oil temperature window for settings; mineral oil only."""
    highest_setting_temperature_c: SettingCelsius = 55.0
    """Upper end of that window."""
    lockout_always: YesNo = False
    """Lock out for every task, also where nothing is fitted or opened."""
    zero_limit_bar: PositiveBar = 2.0
    """Smallest pressure that a gauge must still show for a verification of zero."""

    def contradictions(self) -> Iterator[Flaw]:
        yield from super().contradictions()
        for name, opening, closing in (
            ("direct", self.direct_opening_ratio, self.direct_closing_ratio),
            ("pilot", self.pilot_opening_ratio, self.pilot_closing_ratio),
        ):
            if closing > opening:
                yield Flaw(
                    at=(f"{name} closing ratio",),
                    what="A relief would close at a higher pressure than it opens at.",
                    fix=f"Write a {name} closing ratio of at most {name} opening ratio.",
                )
        if self.shortest_try_s > self.longest_try_s:
            yield Flaw(
                at=("shortest try",),
                what="The shortest try is longer than the longest.",
                fix="Write a shortest try of at most longest try, such as 10 s.",
            )
        if self.lowest_setting_temperature_c >= self.highest_setting_temperature_c:
            yield Flaw(
                at=("lowest setting temperature",),
                what="The lowest setting temperature isn't below the highest.",
                fix="Write both ends of the window, such as 45 °C and 55 °C.",
            )


Meaning = Literal["prepared", "checked", "approved"]
"""What a signature says; the order in which they are given."""


class Signatures(Entry):
    """Which signatures an issued pack needs, and whose certificates the site trusts."""

    needed: tuple[Meaning, ...] = ("prepared", "checked", "approved")
    """Meanings that must all be signed. Prepared and approved can't be waived, nor given by one person."""
    trust: tuple[Text, ...] = ()
    """Certificate files (PEM) of the authorities that the site trusts, beside this file."""
    time_server: TimeServer | None = None
    """Address of a time server (RFC 3161); without one a signature carries its signer's own time."""
    time_trust: tuple[Text, ...] = ()
    """Certificate files (PEM) of the authorities behind that time server, beside this file."""
    note: Text = ""
    """Printed as the state of every issue of this site, for example: demonstration."""

    def contradictions(self) -> Iterator[Flaw]:
        yield from super().contradictions()
        for meaning in ("prepared", "approved"):
            if meaning not in self.needed:
                yield Flaw(
                    at=("needed",),
                    what=f"The signature {meaning} can't be waived.",
                    fix="Name at least prepared and approved; checked may be left out.",
                )
        if self.time_server and not self.time_trust:
            yield Flaw(
                at=("time server",),
                what="No authority is trusted for its time, so no signature with it could be called good.",
                fix="Name the certificate of its authority under time trust, or leave the time server out.",
            )
        if len(set(self.needed)) < len(self.needed):
            yield Flaw(at=("needed",), what="A signature stands here twice.", fix="Name each once.")
        elif list(self.needed) != [meaning for meaning in get_args(Meaning) if meaning in self.needed]:
            yield Flaw(
                at=("needed",),
                what="Signatures are given in another order.",
                fix=f"Write them in the order {', '.join(get_args(Meaning))}.",
            )


class Site(Entry):
    """What holds for all machines of one works."""

    format: FormatNumber
    """Number of the file format; 1."""
    plant: Text
    """Name of the works."""
    record_address: RecordAddress | None = None
    """Web address of the record page; the code on each page begins with it."""
    record_page_open: YesNo = True
    """Whether anybody who reaches the record page may read it; with no, only who has signed in."""
    zone: Text = "UTC"
    """Time zone of the works, as on paper: an IANA name such as Europe/Lisbon."""
    planner_telephone: SaidText
    """Whom a technician calls about a sheet."""
    emergency_telephone: SaidText
    """Whom anybody calls after an accident."""
    hospital: Text = ""
    """Where an injection injury is treated, in the words for the card."""
    local_rules: tuple[Text, ...] = ()
    """Rules of the works, each printed as it stands."""
    signatures: Signatures = Signatures()
    """Signatures that an issued pack needs, and who is trusted."""
    policies: Policies = Policies()
    """Policy figures of the works, where they differ from the project's."""
