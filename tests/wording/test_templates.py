"""Every step, finding, hazard and condition has its sentences; no template claims what nobody can know."""

import ast
import re
from collections.abc import Iterator
from pathlib import Path

import pytest

import sheets
from sheets.hazards.assess import HazardKind
from sheets.procedure.conditions import Condition
from sheets.procedure.steps import StepKind
from sheets.resources import resource_folder
from sheets.trial.invariants import Invariant
from sheets.wording.sentences import Sentences

PACKAGE = Path(sheets.__file__).parent
TEMPLATES = sorted(
    file for ending in ("*.j2", "desk/*.html") for file in (resource_folder("templates") / "en").glob(ending)
)


def finding_codes() -> set[str]:
    """Codes of findings anywhere in the package, read from its source; a replay's stand in its invariants."""
    codes = {invariant.value for invariant in Invariant}
    for file in PACKAGE.rglob("*.py"):
        for node in ast.walk(ast.parse(file.read_text(encoding="utf-8"))):
            if not isinstance(node, ast.Call):
                continue
            name = getattr(node.func, "id", getattr(node.func, "attr", ""))
            given = [keyword.value for keyword in node.keywords if keyword.arg == "code"]
            if name == "_find":
                given += node.args[:1]
            if name in ("Finding", "_find"):
                codes |= {each.value for each in given if isinstance(each, ast.Constant)}
    return codes


def rendered(file: str, sentence: str) -> str:
    sentences = Sentences("en", file)
    return sentences.say(sentence, **{name: f"⟨{name}⟩" for name in sentences.arguments(sentence)})


def comments_and_code_removed(text: str) -> str:
    """What a template prints of its own."""
    return re.sub(r"\{#.*?#\}|\{%.*?%\}|\{\{.*?\}\}", " ", text, flags=re.DOTALL)


@pytest.mark.parametrize("kind", StepKind, ids=lambda kind: kind.value)
def test_every_step_has_its_order(kind: StepKind) -> None:
    order = rendered("steps.j2", kind.value)
    assert order.endswith(".")
    assert order[0].isupper() or order[0] == "⟨"


def test_no_order_is_left_over() -> None:
    macros = re.findall(r"macro (\w+)\(", (resource_folder("templates") / "en" / "steps.j2").read_text())
    assert set(macros) == {kind.value for kind in StepKind}


def test_finding_codes_are_found() -> None:
    assert {"cannot_be_set", "order_cycle", "step_moves", "zero_not_reached", "value_not_given"} <= (
        finding_codes()
    )


@pytest.mark.parametrize("code", sorted(finding_codes()))
def test_every_finding_says_what_and_what_to_do(code: str) -> None:
    for ending in ("what", "fix"):
        text = rendered("findings.j2", f"{code}_{ending}")
        assert text
        assert text.endswith((".", "⟩"))
    sentences = Sentences("en", "findings.j2")
    for name in sentences.arguments(f"{code}_what"):
        assert f"⟨{name}⟩" in rendered("findings.j2", f"{code}_what")


def test_no_finding_is_left_over() -> None:
    text = (resource_folder("templates") / "en" / "findings.j2").read_text(encoding="utf-8")
    told = {name.removesuffix("_what") for name in re.findall(r"macro (\w+_what)\(", text)}
    assert told == finding_codes()


@pytest.mark.parametrize("condition", Condition, ids=lambda condition: condition.value)
def test_every_condition_has_its_reason_and_advice(condition: Condition) -> None:
    assert rendered("findings.j2", f"why_{condition.value}").endswith(".")
    assert rendered("findings.j2", f"advice_{condition.value}").endswith(".")
    # Whatever fails without a change is the printed reason of its step.
    assert rendered("lines.j2", f"else_{condition.value}").endswith(".")


@pytest.mark.parametrize("kind", HazardKind, ids=lambda kind: kind.value)
def test_every_hazard_has_its_sentences(kind: HazardKind) -> None:
    assert rendered("hazards.j2", f"{kind.value}_hazard").endswith(".")
    assert rendered("hazards.j2", f"{kind.value}_lines").endswith(".")


BANNED = r"safe|safely|proven|compliant|compliance|certified|zero[ -]energy|harmless|guaranteed?"
BORROWED = r"releas\w*|try|tries|tried to|trying"


@pytest.mark.parametrize("file", TEMPLATES, ids=lambda file: file.stem)
def test_no_claim_and_no_borrowed_word(file: Path) -> None:
    own = comments_and_code_removed(file.read_text(encoding="utf-8"))
    for words in (BANNED, BORROWED):
        assert re.findall(rf"\b(?:{words})\b", own, flags=re.IGNORECASE) == []


def test_the_words_are_looked_for_where_they_would_stand() -> None:
    own = comments_and_code_removed("{# safe #}{% macro x(safe) %}It is {{ safe }} proven.{% endmacro %}")
    assert re.findall(rf"\b(?:{BANNED})\b", own) == ["proven"]


def python_texts() -> Iterator[tuple[str, str]]:
    """Texts in the wording and page modules that aren't docstrings or names."""
    for folder in ("wording", "pages", "hazards"):
        for file in (PACKAGE / folder).rglob("*.py"):
            tree = ast.parse(file.read_text(encoding="utf-8"))
            bare = {id(node.value) for node in ast.walk(tree) if isinstance(node, ast.Expr)}
            for node in ast.walk(tree):
                if isinstance(node, ast.Constant) and isinstance(node.value, str) and id(node) not in bare:
                    yield file.name, node.value


def test_no_claim_in_texts_outside_the_templates() -> None:
    found = [
        (name, text) for name, text in python_texts() if re.search(rf"\b(?:{BANNED})\b", text, re.IGNORECASE)
    ]
    assert found == []
