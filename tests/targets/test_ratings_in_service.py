"""Ratings that a set pressure comes to in service: they hold though a barrier shuts them off meanwhile."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from sheets.circuit.reach import weakest_loaded
from sheets.pages.compose.matter import Matter
from sheets.pipeline import Described
from sheets.procedure.answers import NotFound
from sheets.procedure.conditions import Condition

Changed = Callable[..., Described]
PSI = 0.45359237 * 9.80665 / 0.0254**2 / 1e5
HOSE = "    where: from HV1 to the valve stand\n    rating: "

PORT_RELIEF = """  RV2:
    kind: relief valve
    where: line A, at the cylinder
    rating: 5000 psi
    acting: direct
    rated flow: 40 gal/min
    adjuster:
      setting: {setting} psi
      given by: plate
      lowest: 100 psi
      highest: 3600 psi
      raises: clockwise
      where: end of RV2
      key: hex 5 mm

  FR1:
"""


def port_relieved(changed: Changed, setting: int) -> Described:
    """The press with a weak test point on the cylinder's line A, and a relief beside it."""
    weak = "    where: line A, at the cylinder\n    rating: "
    return changed(
        "glaze_press",
        (f"{weak}6000 psi", f"{weak}2000 psi"),
        ("  FR1:\n", PORT_RELIEF.format(setting=setting)),
        ("TP3.P, CY1.A]", "TP3.P, CY1.A, RV2.P]"),
        ("RV1.T, BV1.B", "RV1.T, RV2.T, BV1.B"),
    )


def weakest(described: Described, relief_psi: float) -> tuple[str, float]:
    """Part with the lowest rating that 2800 psi at the pump comes to, and that rating."""
    circuit = described.circuit
    node = weakest_loaded(
        described.machine,
        circuit,
        circuit.node_of["PU1.P"],
        set_bar=2800 * PSI,
        reliefs_bar={"RV1": 3300 * PSI, "RV2": relief_psi * PSI},
    )
    return node.rated_by, node.rating_bar / PSI


def test_a_relief_that_is_set_lower_guards_what_lies_behind_it(changed: Changed) -> None:
    part, rating_psi = weakest(port_relieved(changed, 1500), 1500)
    assert part in ("CY1", "H1")
    assert rating_psi == pytest.approx(4000)


def test_a_relief_that_is_set_higher_guards_nothing(changed: Changed) -> None:
    part, rating_psi = weakest(port_relieved(changed, 2900), 2900)
    assert part == "TP3"
    assert rating_psi == pytest.approx(2000)


def test_never_exceed_comes_from_a_hose_behind_the_barrier(refused: Callable[..., Matter]) -> None:
    # HV1 is shut while RV1 is set; H1 lies behind it. 3500 − 12.5 psi, down to a division of 20: 3480 psi.
    matter = refused("glaze_press", (f"{HOSE}4000 psi", f"{HOSE}3500 psi"))
    choice = matter.procedure.search.found()["RV1"].gauge
    assert choice.never_exceed_bar / PSI == pytest.approx(3480)


def test_no_division_under_a_rating_in_service_is_refused(refused: Callable[..., Matter]) -> None:
    # 3380 − 12.5 psi, down to a division: 3360 psi, which is the window's own top.
    matter = refused("glaze_press", (f"{HOSE}4000 psi", f"{HOSE}3380 psi"))
    answer = matter.procedure.search.answers["RV1"]
    assert isinstance(answer, NotFound)
    (miss,) = [one for one in answer.near_misses if one.failure.condition is Condition.SEEN]
    assert "never_exceed" in miss.failure.data
