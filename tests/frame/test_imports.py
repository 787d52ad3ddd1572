"""Holds the frame: who may import whom, read from the source of every module."""

from __future__ import annotations

import ast
import re
import sys
import tomllib
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cache
from graphlib import CycleError, TopologicalSorter
from importlib.metadata import packages_distributions
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
PACKAGE = ROOT / "sheets"

RANKS = (
    "machine",
    "circuit",
    "energy",
    "targets",
    "procedure",
    "trial",
    "hazards",
    "wording",
    "pages",
)
"""Stages in their order: a later one may import an earlier one, never the other way."""
LEAVES = {"sheets", "errors", "amounts", "crockford", "names", "quantities", "resources"}
"""Importable by all; they import each other only. The first is the package's own __init__."""
BRANCHES = {"register", "seal"}
"""Get plain values: they import leaves only, and only the pipeline imports them."""
JOINED_BY = "pipeline"
GATES = {"cli", "desk"}
"""Where a person comes in: at a terminal, and at the record page. Neither knows the other."""
LAZY = "sheets.pipeline"
"""Imports its own modules when they are asked for."""
GATE_IMPORTS = {"pipeline", "errors", "sheets"}

ANYWHERE = None
FENCES = {
    "asn1crypto": "seal",
    "argon2": "seal",
    "click": "cli",
    "cryptography": "seal",
    "filelock": "machine",
    "fontpkg_ibm_plex_sans": "pages",
    "fontpkg_ibm_plex_sans_condensed": "pages",
    "jinja2": "wording",
    "numpy": ANYWHERE,
    "pikepdf": "pages",
    "pint": "quantities",
    "pydantic": "machine",
    "pydantic_core": "machine",
    "pyhanko": "seal",
    "qrcode": "pages",
    "reportlab": "pages",
    "rfc8785": "seal",
    "sqlalchemy": "register",
    "starlette": "desk",
    "uvicorn": "cli",
    "yaml": "machine",
}
"""Each library from outside, and the one part of the package that may import it."""

IMPURE = {
    "getpass",
    "http",
    "importlib",
    "locale",
    "os",
    "platform",
    "random",
    "secrets",
    "socket",
    "subprocess",
    "tempfile",
    "threading",
    "time",
    "urllib",
    "uuid",
}
"""Clock, environment, chance, network, processes: what would make one file give two papers."""
SHARED = {
    "sheets.desk.limits",
    "sheets.desk.sessions",
    "sheets.desk.gatekeeping",
    "sheets.pipeline.kept_files",
    "sheets.pipeline.reading_room",
}
"""Asked by several threads of one server at once."""
CLOCK_CALLS = {"today", "now", "utcnow"}

LONGEST_MODULE = 500
LAW_MODULES = (
    "actuators",
    "cavity",
    "fault_edits",
    "load_sensing",
    "pumps",
    "ratings",
    "reliefs",
    "smooth",
    "ways",
)
PLAIN = re.compile(r"\b(float|int|bool|Floats|Ints|Bools)\b")
"""A parameter of one of these types says nothing of itself; a Machine or a Circuit does."""


@dataclass(frozen=True, kw_only=True)
class Import:
    """One import of one module: where it stands, and what it takes."""

    by: str
    line: int
    name: str

    def __str__(self) -> str:
        return f"{self.by}, line {self.line}: {self.name}"


@cache
def modules() -> dict[str, Path]:
    """Dotted name to file of every module."""
    found = {}
    for path in sorted(PACKAGE.rglob("*.py")):
        parts = path.relative_to(ROOT).with_suffix("").parts
        found[".".join(parts[:-1] if parts[-1] == "__init__" else parts)] = path
    return found


@cache
def tree(module: str) -> ast.Module:
    return ast.parse(modules()[module].read_text(encoding="utf-8"))


def imported_by(module: str) -> Iterator[Import]:
    """Every import of a module, also inside functions and for types only."""
    for node in ast.walk(tree(module)):
        if isinstance(node, ast.Import):
            for alias in node.names:
                yield Import(by=module, line=node.lineno, name=alias.name)
        elif isinstance(node, ast.ImportFrom):
            if node.level:
                yield Import(by=module, line=node.lineno, name="." * node.level + (node.module or ""))
                continue
            for alias in node.names:
                inner = f"{node.module}.{alias.name}"
                yield Import(
                    by=module, line=node.lineno, name=inner if inner in modules() else str(node.module)
                )


@cache
def imports() -> tuple[Import, ...]:
    return tuple(one for module in modules() for one in imported_by(module))


def inner_imports() -> Iterator[Import]:
    return (one for one in imports() if one.name.split(".")[0] == "sheets")


def outer_imports() -> Iterator[Import]:
    return (one for one in imports() if one.name.split(".")[0] != "sheets")


def part(module: str) -> str:
    """The part of the package that a module belongs to: its stage, branch or leaf."""
    pieces = module.split(".")
    return pieces[1] if len(pieces) > 1 else "sheets"


def allowed(by: str, of: str) -> bool:
    """Whether one part may import another."""
    if by == of or (of in LEAVES and by not in GATES):
        return True
    if by in GATES:
        return of in GATE_IMPORTS
    if by == JOINED_BY:
        return of not in GATES
    return by in RANKS and of in RANKS and RANKS.index(of) < RANKS.index(by)


def test_every_part_has_its_place() -> None:
    assert {part(module) for module in modules()} <= {*RANKS, *LEAVES, *BRANCHES, JOINED_BY, *GATES}


def test_the_reading_sees_imports_of_each_kind() -> None:
    """A check of the check: without it an empty list of imports would pass everything below."""
    seen = {(part(one.by), part(one.name)) for one in inner_imports()}
    assert ("cli", "pipeline") in seen  # stands inside functions
    assert ("desk", "pipeline") in seen
    assert ("circuit", "machine") in seen
    assert ("machine", "errors") in seen
    assert len({one.by for one in imports()}) > 0.8 * len(modules())


def test_imports_go_one_way() -> None:
    wrong = [str(one) for one in inner_imports() if not allowed(part(one.by), part(one.name))]
    assert wrong == []


def test_no_relative_imports() -> None:
    assert [str(one) for one in imports() if one.name.startswith(".")] == []


def test_no_import_cycle() -> None:
    graph: dict[str, set[str]] = {module: set() for module in modules()}
    for one in inner_imports():
        if one.name != one.by:
            graph[one.by].add(one.name)
    try:
        TopologicalSorter(graph).prepare()
    except CycleError as error:
        pytest.fail(" imports ".join(reversed(error.args[1])))


def test_libraries_stay_behind_their_fences() -> None:
    wrong = []
    for one in outer_imports():
        library = one.name.split(".")[0]
        if library in sys.stdlib_module_names:
            continue
        if library not in FENCES or FENCES[library] not in (ANYWHERE, part(one.by)):
            wrong.append(str(one))
    assert wrong == []


def test_libraries_are_dependencies() -> None:
    project = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["project"]
    extras = project["optional-dependencies"]
    lines = [*project["dependencies"], *extras["site"], *extras["desk"]]
    required = {re.split(r"[<>=!~\[; ]", line)[0].lower() for line in lines}
    homes = packages_distributions()
    # pydantic-core comes with pydantic, which pins it: naming it too could only contradict.
    missing = {
        library
        for library in {one.name.split(".")[0] for one in outer_imports()} & FENCES.keys()
        if library != "pydantic_core"
        and not {home.lower().replace("_", "-") for home in homes[library]} & required
    }
    assert missing == set()


def test_neither_clock_nor_chance_nor_environment() -> None:
    wrong = [
        str(one)
        for one in outer_imports()
        if one.name.split(".")[0] in IMPURE
        and not (part(one.by) in GATES and one.name in ("secrets", "tempfile"))
        and one.name != "urllib.parse"  # reads addresses, opens none
        and not (one.by in SHARED and one.name == "threading")  # a lock changes no bytes
        and not (one.by == "sheets.cli.serving" and one.name == "socket")  # the server's own port
        and not (one.by == LAZY and one.name == "importlib")  # imports by a fixed table of names only
    ]
    for module in modules():
        if part(module) in GATES:
            continue  # the day comes from here, and is handed on
        wrong += [
            f"{module}, line {node.lineno}: {node.func.attr}()"
            for node in ast.walk(tree(module))
            if isinstance(node, ast.Call)
            and isinstance(node.func, ast.Attribute)
            and node.func.attr in CLOCK_CALLS
        ]
    assert wrong == []


def test_no_module_is_too_long() -> None:
    lengths = {name: len(path.read_text(encoding="utf-8").splitlines()) for name, path in modules().items()}
    assert {name: length for name, length in lengths.items() if length > LONGEST_MODULE} == {}


def public_functions(module: str) -> Iterator[ast.FunctionDef]:
    for node in tree(module).body:
        if isinstance(node, ast.FunctionDef) and not node.name.startswith("_"):
            yield node


def unnamed(node: ast.FunctionDef) -> list[str]:
    """Plain parameters that the docstring doesn't name."""
    text = ast.get_docstring(node) or ""
    arguments = (*node.args.posonlyargs, *node.args.args, *node.args.kwonlyargs)
    plain = [one.arg for one in arguments if one.annotation and PLAIN.search(ast.unparse(one.annotation))]
    return [name for name in plain if not re.search(rf"\b{name}\b", text)]


def spoken_of() -> list[str]:
    laws = {f"sheets.circuit.{name}" for name in LAW_MODULES}
    return [module for module in modules() if part(module) == "targets" or module in laws]


def test_formulas_and_laws_say_what_they_take() -> None:
    assert {f"sheets.circuit.{name}" for name in LAW_MODULES} <= modules().keys()
    wrong = {}
    for module in spoken_of():
        for node in public_functions(module):
            if not ast.get_docstring(node):
                wrong[f"{module}.{node.name}"] = ["(no docstring)"]
            elif unnamed(node):
                wrong[f"{module}.{node.name}"] = unnamed(node)
    assert wrong == {}


def law_classes() -> Iterator[tuple[str, ast.ClassDef]]:
    for name in LAW_MODULES:
        module = f"sheets.circuit.{name}"
        for node in tree(module).body:
            if isinstance(node, ast.ClassDef):
                yield module, node


def columns(node: ast.ClassDef) -> Iterator[tuple[str, bool]]:
    """Name of each column of figures, and whether a text of its own stands below it."""
    for item, after in zip(node.body, [*node.body[1:], None], strict=True):
        if (
            isinstance(item, ast.AnnAssign)
            and isinstance(item.target, ast.Name)
            and PLAIN.search(ast.unparse(item.annotation))
        ):
            described = isinstance(after, ast.Expr) and isinstance(after.value, ast.Constant)
            yield item.target.id, described


def test_element_families_say_what_their_columns_hold() -> None:
    wrong = {}
    for module, node in law_classes():
        text = ast.get_docstring(node) or ""
        missing = [
            name for name, described in columns(node) if not described and not re.search(rf"\b{name}\b", text)
        ]
        if missing:
            wrong[f"{module}.{node.name}"] = missing
    assert wrong == {}
