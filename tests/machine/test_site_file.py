"""The site file and its policy figures."""

import pytest

from sheets.errors import InputError
from sheets.machine.loading import parse_site
from sheets.machine.site import Policies

SITE = """format: 1
plant: Testing ground
record address: https://records.example/jamnut
planner telephone: extension 1
emergency telephone: extension 2
hospital: Tell them that oil was injected under the skin.
local rules: [Nobody works alone., Doors stay shut.]
policies:
  window ratio: 3 %
  gap: 100 psi
"""


def test_policies_of_the_works_replace_those_of_the_project() -> None:
    site = parse_site(SITE.encode(), "site.yaml")

    assert site.policies.window_ratio == 0.03
    assert site.policies.gap_bar == pytest.approx(6.894757293168361, rel=1e-14)
    assert site.policies.window_minimum_bar == Policies().window_minimum_bar
    assert site.local_rules == ("Nobody works alone.", "Doors stay shut.")


def test_policy_figures_of_the_engineering_basis() -> None:
    policies = Policies()

    assert (policies.window_ratio, policies.window_minimum_bar, policies.standby_window_bar) == (0.02, 3, 1)
    assert (policies.reserve_ratio, policies.gap_bar, policies.accuracy_ratio) == (0.05, 5, 3)
    assert (policies.direct_opening_ratio, policies.direct_closing_ratio) == (0.80, 0.75)
    assert (policies.pilot_opening_ratio, policies.pilot_closing_ratio) == (0.93, 0.90)
    assert (policies.compensator_width_bar, policies.longest_try_s, policies.zero_limit_bar) == (4, 60, 2)
    assert (policies.lowest_setting_temperature_c, policies.highest_setting_temperature_c) == (45, 55)


@pytest.mark.parametrize(
    ("good", "bad", "where", "what"),
    [
        ("https://records.example/jamnut", "ftp://records.example", "line 3, record address", "'ftp:"),
        ("https://records.example/jamnut", "https://records.example/", "line 3, record address", "https:"),
        ("jamnut", "jamnut" + "x" * 30, "line 3, record address", "54"),
        ("gap: 100 psi", "gap: -1 bar", "line 10, policies, gap", "negative"),
        ("gap: 100 psi", "gab: 1 bar", "line 10, policies, gab", "'gab'"),
        ("gap: 100 psi", "pilot closing ratio: 0.95", "line 10, policies, pilot closing ratio", "higher"),
        (
            "gap: 100 psi",
            "lowest setting temperature: 60 °C",
            "line 10, policies, lowest setting temperature",
            "below",
        ),
        ("planner telephone: extension 1\n", "", "line 1, planner telephone", "missing"),
        (
            "local rules: [Nobody works alone., Doors stay shut.]",
            "local rules: none",
            "line 7, local rules",
            "list",
        ),
    ],
)
def test_wrong_site_file(good: str, bad: str, where: str, what: str) -> None:
    with pytest.raises(InputError) as caught:
        parse_site(SITE.replace(good, bad).encode(), "site.yaml")

    (problem,) = caught.value.problems
    assert problem.where == f"site.yaml, {where}"
    assert what in problem.what
    assert problem.fix
