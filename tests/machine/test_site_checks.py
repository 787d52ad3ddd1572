"""What must fit between a machine file and its site file, and one device that cuts two supplies."""

import pytest

from sheets.errors import InputError
from sheets.machine.loading import parse_machine, parse_site

SITE = "format: 1\nplant: {plant}\nplanner telephone: 1\nemergency telephone: 2\npolicies: {policies}\n"


def refused(text: str, plant: str, policies: str = "{}") -> tuple[str, str]:
    site = parse_site(SITE.format(plant=plant, policies=policies).encode(), "site.yaml")
    with pytest.raises(InputError) as caught:
        parse_machine(text.encode(), "small.yaml", site)
    (problem,) = caught.value.problems
    return problem.where, problem.what


def test_site_file_of_another_works(small_text: str) -> None:
    where, what = refused(small_text, "Another place")
    assert where == "small.yaml, line 5, plant"
    assert "'Another place'" in what
    assert "'Testing ground'" in what


def test_the_same_works_in_other_letters(small_text: str) -> None:
    site = parse_site(SITE.format(plant="testing  GROUND", policies="{}").encode(), "site.yaml")
    assert parse_machine(small_text.encode(), "small.yaml", site).plant == "Testing ground"


def test_policy_window_over_the_limit_of_the_oil(small_text: str) -> None:
    # The file's limit is 65 °C; its own window is left out, so the site's holds.
    where, what = refused(small_text, "Testing ground", "{highest setting temperature: 70 °C}")
    assert where.endswith("fluid, limit temperature")
    assert "45 to 70 °C" in what


@pytest.mark.parametrize(
    "figure", ["longest try: 0 s", "longest try: 100 h", "lowest setting temperature: 200 °C"]
)
def test_policy_figure_that_cannot_be_meant(figure: str) -> None:
    with pytest.raises(InputError) as caught:
        parse_site(SITE.format(plant="A", policies=f"{{{figure}}}").encode(), "site.yaml")
    (problem,) = caught.value.problems
    assert figure.split(":")[0] in problem.where
    assert " is too " in problem.what


def test_telephone_that_is_none() -> None:
    with pytest.raises(InputError, match="says nothing"):
        parse_site(
            SITE.format(plant="A", policies="{}").replace("telephone: 2", "telephone: none").encode(), "s"
        )


def test_one_device_that_cuts_two_supplies(small_text: str) -> None:
    head, one, two = small_text.partition("    isolator:\n      plate: Q1 MAIN\n")
    isolator = one + two.split("    verify:")[0].rstrip() + "\n      shared: yes\n"
    energy, controls = small_text[small_text.index("  Q1:\n") :].split("controls:")
    first, second = energy.split("  Q2:\n")

    def told(supply: str) -> str:
        before, after = supply.split("    isolator:")
        return before + isolator + "    verify:" + after.split("    verify:")[1]

    text = head[: head.index("  Q1:\n")] + told(first) + "  Q2:\n" + told(second) + "controls:" + controls
    machine = parse_machine(text.encode(), "small.yaml")

    assert machine.isolated == ("Q1",)
    assert machine.fed_through(machine.energy["Q2"].isolator) == ("M1", "DV1")

    with pytest.raises(InputError, match="has the same plate"):  # one of them alone says it
        parse_machine(text.replace("      shared: yes\n", "", 1).encode(), "small.yaml")
