"""Screws and knobs that set a pressure."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Literal

from sheets.machine.fields import Bar, Entry, Lpm, PositiveBar, Text, YesNo
from sheets.machine.flaws import Flaw
from sheets.quantities import number

Turning = Literal["clockwise", "counterclockwise", "not known"]


class Adjuster(Entry):
    """A screw or knob that sets a pressure."""

    setting_bar: PositiveBar | None = None
    """Value that the maker or the site requires. Left out, it is computed and is a proposal only."""
    given_by: Text = ""
    """Who requires that setting: the maker's plate, a drawing, the site."""
    tolerance_bar: PositiveBar | None = None
    """Half of the accepted window, where the maker or the site gives one."""
    lowest_bar: Bar
    """Lowest setting that the adjuster reaches."""
    highest_bar: PositiveBar
    """Setting with the adjuster at its stop."""
    raises: Turning
    """Direction that raises the setting, seen from the head of the screw."""
    where: Text
    """Where it is on the part, and which of two it is."""
    key: Text
    """Tool for the screw, for example hex 6 mm."""
    lock_nut: Text = ""
    """Tool and torque for the lock nut."""
    per_turn_bar: PositiveBar | None = None
    """Change for one turn, where the maker gives it."""
    seal: Text = ""
    """Number or kind of the seal, if it has one."""
    may_be_set: YesNo = True
    """No for a sealed or type-approved adjuster: it is never touched."""

    @property
    def has_value(self) -> bool:
        """Whether a maker or an owner gives what its setting follows from."""
        return self.setting_bar is not None

    def contradictions(self) -> Iterator[Flaw]:
        yield from super().contradictions()
        reach = f"from {number(self.lowest_bar, decimals=1)} to {number(self.highest_bar, decimals=1)} bar"
        if self.lowest_bar >= self.highest_bar:
            yield Flaw(
                at=("lowest",),
                what=f"The lowest setting isn't below the highest: {reach}.",
                fix="Write the range that stands on the plate or in the data sheet, lowest first.",
            )
        elif self.setting_bar is not None and not self.lowest_bar <= self.setting_bar <= self.highest_bar:
            setting = number(self.setting_bar, decimals=1)
            yield Flaw(
                at=("setting",),
                what=f"The setting of {setting} bar is outside what the adjuster reaches: {reach}.",
                fix="Correct the setting, or lowest and highest; else another spring is needed.",
            )
        if self.setting_bar is not None and not self.given_by:
            yield Flaw(
                at=("given by",),
                what="The setting has no source.",
                fix="Say who requires it, such as given by: maker's data sheet; or leave the setting out.",
            )
        if not self.has_value and self.given_by:
            yield Flaw(
                at=("given by",),
                what="A source is named, but no setting is given.",
                fix="Write the setting, or leave given by out.",
            )
        if not self.has_value and not self.may_be_set:
            yield Flaw(
                at=("may be set",),
                what="The adjuster may not be set, and its setting isn't given.",
                fix="Write the setting to which it is sealed, and by whom it was given.",
            )


class CompensatorControl(Adjuster):
    """Pressure compensator. Its setting is the deadhead reading."""

    width_bar: PositiveBar | None = None
    """From full stroke to none; policy where the plate gives none."""


class LoadSensingControl(Adjuster):
    """Load-sensing control. Its setting is the standby reading (LS at tank, no flow).

    Where the maker gives the differential at a flow instead, setting is left out, and the standby follows
    from differential, differential flow and width; without the width nobody knows it.
    """

    width_bar: PositiveBar | None = None
    """From full stroke to none; found from standby and differential where both are given."""
    differential_bar: PositiveBar | None = None
    """Outlet less LS at the stated flow, where the maker gives that."""
    differential_flow_lpm: Lpm | None = None
    """Flow at which that differential was read."""
    port_not_connected: Literal["drained", "fed", "sealed"] | None = None
    """Where port X is in no net: drained inside, fed from the outlet, or sealed. No default."""
    sealed_without_bleed: YesNo = False
    """Yes where the maker's drawing shows no bleed into the LS port, so that a port which is sealed or cut
    off keeps its pressure. Left out: nobody has looked."""

    @property
    def has_value(self) -> bool:
        """Whether a maker or an owner gives its standby, or a differential."""
        return super().has_value or self.differential_bar is not None

    def contradictions(self) -> Iterator[Flaw]:
        yield from super().contradictions()
        if self.differential_bar is not None and self.differential_flow_lpm is None:
            yield Flaw(
                at=("differential flow",),
                what="A differential is given without the flow at which it holds.",
                fix="Write that flow from the data sheet, such as differential flow: 60 L/min.",
            )
        if self.differential_flow_lpm is not None and self.differential_bar is None:
            yield Flaw(
                at=("differential",),
                what="A differential flow is given without the differential.",
                fix="Write the differential, such as differential: 20 bar, or leave the flow out.",
            )
        gives_standby = self.differential_bar is not None and self.width_bar is not None
        if self.setting_bar is None and gives_standby and not self.given_by:
            yield Flaw(
                at=("given by",),
                what="The differential has no source, and the standby follows from it.",
                fix="Say who requires it, such as given by: maker's data sheet.",
            )
        if self.sealed_without_bleed and self.port_not_connected in ("drained", "fed"):
            yield Flaw(
                at=("sealed without bleed",),
                what=f"The port is called {self.port_not_connected} inside, hence is not without bleed.",
                fix="Look the port up in the pump maker's drawing, and correct one of the two.",
            )
        both = self.setting_bar is not None and self.differential_bar is not None
        if both and (self.differential_bar or 0.0) >= (self.setting_bar or 0.0):
            yield Flaw(
                at=("differential",),
                what="The differential at flow isn't below the standby reading, which is taken at no flow.",
                fix="Look which of the two the maker gives: setting is the standby, differential is at flow.",
            )
